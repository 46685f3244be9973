"""What the replay permits of carriers and of the writes that they hold, and what it refuses."""

import pytest
from build import carrier, drive, move, pin, span, steps, trip, writes
from test_replay_runs import permitted, refused

from seqcheck.drive import Command, Drive, How, Level, Update
from seqcheck.quantities import INSTANT, Interval
from seqcheck.verdict import Phase

ON, OFF = Command.ON, Command.OFF
LOW = (Phase("k", False, 0, True),)
QUIET = (Phase("k", False, 10, True),)
JOINED = "0 begins 0; 0 writes X k, Y ~k; 0 enters run; "


def modulated(
    update: Update = Update.AT_ONCE, dead: Interval = INSTANT, *, trips: tuple[object, ...] = (), **more: object
) -> Drive:
    k = carrier("k", span(20, 30), span(40, 50), dead=dead, update=update, period=70)
    other = carrier("m", span(20, 30), span(40, 50), dead=dead, update=update, period=70)
    rows = {"idle": "off off off", "run": "k ~k off", "swap": "~k k off", "held": "on off off", "leave": "m off off"}
    rows |= {"third": "k ~k k", "loose": "free off off"}
    moves = tuple(move(" ".join(rows), name) for name in ("run", *(name for name in rows if name != "run")))
    pins = (pin("X", Level.LOW, after=span(100, 200)), pin("Y"), pin("Z"))
    return drive(
        "X Y Z",
        rows,
        moves=moves,
        carriers=(k, other),
        writes=writes(How.TOGETHER),
        pins=pins,
        trips=trips,
        **more,  # type: ignore[arg-type]
    )


def test_edges_come_in_their_spans() -> None:
    built = modulated()
    walk = permitted(built, JOINED + "40 rises k; 70 falls k; 120 rises k; 140 falls k", 190, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (70, OFF), (120, ON), (140, OFF)]
    assert walk.commands["Y"] == [(None, OFF), (0, ON), (40, OFF), (70, ON), (120, OFF), (140, ON)]
    refused(built, "39 rises k", 99, "cannot come before 40 ps", phases=LOW)
    refused(built, "51 rises k", 99, "the reference of k must rise by 50 ps", phases=LOW)
    refused(built, "40 rises k; 59 falls k", 99, "cannot come before 60 ps", phases=LOW)
    refused(built, "40 rises k; 71 falls k", 99, "the reference of k must fall by 70 ps", phases=LOW)
    refused(built, "40 falls k", 99, "is low already", phases=LOW)
    refused(built, "", 51, "must rise by 50 ps", phases=LOW)
    refused(built, "40 output k", 50, "is over already", phases=LOW)
    refused(built, "40 rises k: X on", 50, "writes nothing", phases=LOW)


def test_the_age_at_time_0_counts() -> None:
    built, aged = modulated(), (Phase("k", True, 12, True),)
    permitted(built, "8 falls k; 48 rises k", 50, phases=aged)
    refused(built, "7 falls k", 50, "cannot come before 8 ps", phases=aged)
    refused(built, "19 falls k", 50, "must fall by 18 ps", phases=aged)


@pytest.mark.parametrize(
    ("phase", "why"),
    [
        (Phase("k", True, 31, True), "cannot come after -1 ps"),
        (Phase("k", True, -1, True), "cannot come before 1 ps"),
        (Phase("k", True, 4, True), "cannot come before 1 ps"),  # the dead time takes at least 5
        (Phase("k", True, 11, False), "cannot come after -1 ps"),
        (Phase("q", True, 0, True), "is of no carrier of the drive"),
    ],
)
def test_phases_that_no_carrier_has(phase: Phase, why: str) -> None:
    refused(modulated(dead=span(5, 10)), "", 9, why, phases=(phase,))
    for age in (0, 10):
        permitted(modulated(dead=span(5, 10)), "", 0, phases=(Phase("k", True, age, False),))


def test_phases_of_carriers_without_dead_time_or_level() -> None:
    refused(modulated(), "", 9, "has no dead time", phases=(Phase("k", True, 0, False),))
    refused(modulated(), "", 9, "comes twice", phases=LOW * 2)
    still = drive("X Y", {"idle": "off off"}, carriers=(carrier("k", None, Interval(1, None)),))
    permitted(still, "", 10**6, phases=(Phase("k", False, 10**9, True),))
    refused(still, "5 rises k", 9, "is never high", phases=LOW)
    refused(still, "", 9, "never has the level", phases=(Phase("k", True, 0, True),))


def test_dead_times() -> None:
    built = modulated(dead=span(5, 10))
    lines = JOINED + "40 rises k; 45 output k; 70 falls k; 80 output k"
    walk = permitted(built, lines, 110, phases=QUIET)
    assert walk.commands["X"] == [(None, OFF), (45, ON), (70, OFF)]
    assert walk.commands["Y"] == [(None, OFF), (0, ON), (40, OFF), (80, ON)]
    refused(built, "40 rises k; 44 output k", 99, "cannot come before 45 ps", phases=QUIET)
    refused(built, "40 rises k; 51 output k", 99, "the dead time of k must end by 50 ps", phases=QUIET)
    refused(built, "40 rises k; 45 output k; 46 output k", 99, "is over already", phases=QUIET)


def test_a_level_shorter_than_the_dead_time_gives_no_pulse() -> None:
    k = carrier("k", span(2, 30), span(40, 50), dead=span(5))
    built = drive("X Y", {"idle": "off off", "run": "k ~k"}, moves=(move("idle", "run"),), carriers=(k,))
    walk = permitted(built, JOINED + "40 rises k; 43 falls k; 48 output k", 60, phases=QUIET)
    assert walk.commands["X"] == [(None, OFF)]
    assert walk.commands["Y"] == [(None, OFF), (0, ON), (40, OFF), (48, ON)]


def test_joining_takes_the_level_of_the_moment() -> None:
    walk = permitted(modulated(), "40 rises k; 55 begins 0; 55 writes X k, Y ~k; 55 enters run", 60, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (55, ON)]
    assert walk.commands["Y"] == [(None, OFF)]


def test_switches_that_follow_nothing_known() -> None:
    refused(modulated(), JOINED, 9, "X follows k, whose phase the trace does not give")
    refused(modulated(), "0 begins 0; 0 writes X k, Y ~k", 9, "X follows k", literals="X, Z", phases=())
    walk = permitted(modulated(), JOINED, 9, literals="Z")
    assert walk.pins.commands == {"X": Command.UNKNOWN, "Y": Command.UNKNOWN, "Z": OFF}
    refused(modulated(), "0 rises m", 9, "no phase of carrier m", phases=LOW)


# Held until the next rise


def test_held_until_the_next_rise() -> None:
    built = modulated(Update.AT_RISE)
    walk = permitted(built, "41 begins 0; 41 writes X k, Y ~k; 41 enters run; 45 rises k; 70 falls k", 99, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (45, ON), (70, OFF)]
    assert walk.commands["Y"] == [(None, OFF), (70, ON)]
    refused(built, JOINED + "5 updates k", 40, "does not update within a period", phases=LOW)


def test_leaving_and_changing_sides_is_held_and_acts_with_the_edge() -> None:
    built = modulated(Update.AT_RISE)
    lines = JOINED + "40 rises k; 65 falls k; 70 begins 2; 70 writes X ~k, Y k; 70 enters swap; 105 rises k"
    walk = permitted(built, lines, 110, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (65, OFF)]
    assert walk.commands["Y"] == [(None, OFF), (65, ON)]  # without a glitch at 105
    left = JOINED + "40 rises k; 45 begins 3; 45 writes X on, Y off; 45 enters held; 65 falls k; 105 rises k"
    walk = permitted(built, left, 110, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (65, OFF), (105, ON)]


def test_a_write_replaces_or_drops_the_held_one() -> None:
    built = modulated(Update.AT_RISE)
    walk = permitted(built, JOINED + "5 begins 3; 5 writes X on, Y off; 5 enters held; 40 rises k", 50, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (5, ON)]  # constant to constant cancels a held join
    assert walk.commands["Y"] == [(None, OFF)]  # and so does writing what is in effect
    rejoined = JOINED + "40 rises k; 45 begins 3; 45 writes X on, Y off; 45 enters held; "
    rejoined += "50 begins 0; 50 writes X k, Y ~k; 50 enters run; 65 falls k; 105 rises k"
    walk = permitted(built, rejoined, 110, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (65, OFF), (105, ON)]
    assert not walk.pins.held


def test_a_write_waits_for_the_carrier_that_is_left() -> None:
    built = modulated(Update.AT_RISE)
    both = (*LOW, Phase("m", True, 0, True))
    left = (
        JOINED + "20 falls m; 40 rises k; 41 begins 4; 41 writes X m, Y off; 41 enters leave; 60 rises m; 65 falls k; "
    )
    walk = permitted(built, left + "80 falls m; 105 rises k", 110, phases=both)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (65, OFF)]
    # what waits for a carrier that the trace does not follow acts at once
    walk = permitted(built, "41 begins 4; 41 writes X m; 41 enters leave", 42, phases=LOW, literals="Y")
    assert not walk.pins.held


def test_differences_look_at_what_was_last_written() -> None:
    built = modulated(Update.AT_RISE)
    permitted(built, JOINED + "5 begins 5; 5 writes Z k; 5 enters third", 40, phases=LOW)
    refused(built, JOINED + "5 begins 5; 5 writes X k, Y ~k, Z k", 40, "may be written now is Z k", phases=LOW)


def test_a_hardware_trip_cancels_what_is_held_and_acts_at_once() -> None:
    halt = trip("halt", "run held", "idle", at_once=True)
    built = modulated(Update.AT_RISE, trips=(halt,))
    walk = permitted(built, JOINED + "5 begins trip 0; 5 enters idle; 40 rises k", 50, phases=LOW)
    assert walk.commands == {"X": [(None, OFF)], "Y": [(None, OFF)]}
    joined = JOINED + "40 rises k; 45 begins 3; 45 writes X on, Y off; 45 enters held; "
    walk = permitted(built, joined + "50 begins trip 0; 50 writes X off, Y off; 50 enters idle", 60, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (50, OFF)]
    later = trip("halt", "run held", "idle", at_once=True, steps=steps("X off", "Y off"))
    built = modulated(Update.AT_RISE, trips=(later,))
    run = JOINED + "40 rises k; 65 falls k; 70 begins trip 0; 70 writes X off; 70 writes Y off; 70 enters idle"
    walk = permitted(built, run + "; 105 rises k", 110, phases=LOW)
    assert walk.commands["Y"] == [(None, OFF), (65, ON), (105, OFF)]  # only the first item is not held


# Held for up to a period


def test_held_within_a_period() -> None:
    built = modulated(Update.WITHIN_PERIOD)
    begun = "0 begins 5; 0 writes X k, Y ~k, Z k; 0 enters third; 45 rises k; "
    walk = permitted(built, begun + "50 updates k; 70 falls k", 110, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (50, ON), (70, OFF)]
    permitted(built, begun + "70 falls k; 70 updates k", 110, phases=LOW)
    refused(built, begun + "70 falls k; 71 updates k", 110, "the writes held for k must act by 70 ps", phases=LOW)
    refused(built, begun + "50 updates k; 51 updates k", 70, "no write is held for carrier k", phases=LOW)
    permitted(built, begun + "70 falls k", 70, phases=LOW)
    refused(built, begun + "70 falls k", 71, "must act by 70 ps", phases=LOW)


def test_the_oldest_write_still_held_counts() -> None:
    built = modulated(Update.WITHIN_PERIOD)
    begun = "0 begins 0; 0 writes X k, Y ~k; 0 enters run; 30 begins 5; 30 writes Z k; 30 enters third; "
    refused(built, begun + "40 rises k; 60 falls k; 71 updates k", 99, "must act by 70 ps", phases=LOW)
    # X and Y are written back before they acted: only Z waits, since 30
    back = "0 begins 0; 0 writes X k, Y ~k; 0 enters run; 30 begins 5; 30 writes Z k; 30 enters third; "
    built = drive(
        "X Y Z",
        {"idle": "off off off", "run": "k ~k off", "third": "k ~k k", "zonly": "off off k"},
        moves=(move("idle", "run"), move("run", "third"), move("third", "zonly")),
        carriers=tuple(built.carriers.values()),
    )
    back = (
        back.replace("begins 5", "begins 1")
        + "35 begins 2; 35 writes X off, Y off; 35 enters zonly; 40 rises k; 60 falls k; "
    )
    permitted(built, back + "100 rises k; 100 updates k", 110, phases=LOW)
    refused(built, back + "100 rises k; 101 updates k", 110, "must act by 100 ps", phases=LOW)


def test_each_carrier_has_its_own_oldest_write() -> None:
    k = carrier("k", span(20, 30), span(40, 50), update=Update.WITHIN_PERIOD, period=100)
    m = carrier("m", span(20, 30), span(40, 50), update=Update.WITHIN_PERIOD, period=70)
    rows = {"idle": "off off", "one": "k off", "two": "k m"}
    built = drive("X Y", rows, moves=(move("idle", "one"), move("one", "two")), carriers=(k, m))
    begun = "0 begins 0; 0 writes X k; 0 enters one; 35 begins 1; 35 writes Y m; 35 enters two; "
    begun += "40 rises k; 40 rises m; 60 falls k; 60 falls m; "
    both = (*LOW, Phase("m", False, 0, True))
    permitted(built, begun + "100 updates k; 105 updates m", 105, phases=both)
    refused(built, begun + "106 rises m", 106, "the writes held for k must act by 100 ps", phases=both)
    refused(built, begun + "100 updates k; 106 rises m", 106, "the writes held for m must act by 105 ps", phases=both)


def test_writing_back_what_is_in_effect_holds_nothing() -> None:
    built = modulated(Update.WITHIN_PERIOD)
    back = "0 begins 0; 0 writes X k, Y ~k; 0 enters run; 20 updates k; 30 begins 3; 30 writes X on, Y off; "
    back += "30 enters held; 35 begins 0; 35 writes X k, Y ~k; 35 enters run; 45 rises k; 70 falls k; "
    permitted(built, back + "115 rises k; 140 falls k", 150, phases=LOW)
    refused(built, back + "75 updates k", 80, "no write is held for carrier k", phases=LOW)


# Released pins


def test_a_pin_that_nobody_looks_at_may_have_been_anywhere() -> None:
    released = JOINED + "60 begins 6; 60 writes X free, Y off; 60 enters loose; "
    for lines in (released + "161 rests X", released):
        permitted(modulated(), lines, 400, literals="Z")


def test_released_pins() -> None:
    built = modulated()
    released = (
        JOINED
        + "40 rises k; 60 begins 6; 60 writes X free, Y off; 60 enters loose; 65 falls k; 105 rises k; 125 falls k; "
    )
    more = "170 rises k; 190 falls k; 240 rises k; "
    walk = permitted(built, released + "160 rests X", 160, phases=LOW)
    assert walk.commands["X"] == [(None, OFF), (40, ON), (160, OFF)]  # it stays as the output was
    permitted(built, released + more + "260 rests X", 260, phases=LOW)
    refused(built, released + "159 rests X", 160, "cannot come before 160 ps", phases=LOW)
    late = more + "261 rests X"
    refused(built, released + late, 262, "the pin of X must reach its resting level by 260 ps", phases=LOW)
    refused(built, released + more, 261, "the pin of X must reach its resting level by 260 ps", phases=LOW)
    permitted(built, released + more, 261, phases=LOW, literals="Y")  # nobody looks at X
    rewritten = released + "130 begins 1; 130 writes X off; 130 enters idle; "
    walk = permitted(built, rewritten + more, 270, phases=LOW)
    assert walk.commands["X"][-1] == (130, OFF)
    refused(built, rewritten + "165 rests X", 170, "not on its way", phases=LOW)


def test_a_pin_released_at_its_resting_level_or_without_delay() -> None:
    rows = {"idle": "off on", "loose": "free free", "still": "free free"}
    moves = (move("idle", "loose"), move("loose", "still"))
    built = drive("X Y", rows, moves=moves, pins=(pin("X", after=span(2, 5)), pin("Y")))
    released = "1 begins 0; 1 writes X free, Y free; 1 enters loose; "
    walk = permitted(built, released + "3 begins 1; 3 enters still", 99)
    assert walk.commands == {"X": [(None, OFF)], "Y": [(None, ON), (1, OFF)]}
    refused(built, released + "4 rests X", 99, "not on its way")
    refused(built, released + "1 rests Y", 99, "not on its way")


def test_a_pin_that_rests_nowhere_counts_as_both() -> None:
    rows = {"idle": "off on", "loose": "free free"}
    pins = (pin("X", Level.UNKNOWN, after=span(2, 5)), pin("Y", Level.UNKNOWN))
    built = drive("X Y", rows, moves=(move("idle", "loose"),), pins=pins)
    walk = permitted(built, "1 begins 0; 1 writes X free, Y free; 1 enters loose; 5 rests X", 99)
    assert walk.commands == {"X": [(None, OFF), (5, Command.UNKNOWN)], "Y": [(None, ON), (1, Command.UNKNOWN)]}


def test_a_switch_without_a_pin_line_is_not_released() -> None:
    built = drive("X Y", {"idle": "off off", "loose": "free off"}, moves=(move("idle", "loose"),))
    refused(built, "1 begins 0; 1 writes X free", 9, "X has no line in pins")
    refused(drive("X Y", {"idle": "off keep"}), "", 9, "no constant cell for Y")
    refused(drive("X Y", {"idle": "k off"}, carriers=(carrier("k"),)), "", 9, "no constant cell for X")
