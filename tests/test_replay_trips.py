"""What the replay permits of trips and reset, and what it refuses."""

from dataclasses import replace

from build import carrier, drive, move, pin, span, steps, trip, when, writes
from test_replay_runs import ROWS, permitted, refused

from seqcheck.drive import Command, Drive, Level, Update
from seqcheck.verdict import Phase

FAULT = trip("fault", "open both", "idle", within=10)
OPENED = "0 begins 0; 0 writes X on; 0 enters open; "


def tripped(*trips: object, late: int | None = 3, **more: object) -> Drive:
    moves = (
        move("idle", "open"),
        move("open", "both", steps=steps((20, 20))),
        move("open", "shut", unbroken=True, steps=steps("X off", (20, 30))),
        move("both", "idle"),
        move("shut", "open"),
    )
    return drive("X Y", ROWS, moves=moves, trips=trips, writes=writes(gap=span(5)), late=late, **more)  # type: ignore[arg-type]


def test_a_trip_is_taken_in_time() -> None:
    built = tripped(FAULT)
    permitted(built, OPENED + "4 arrives fault; 17 begins trip 0; 17 writes X off; 17 enters idle", 99)
    refused(built, OPENED + "4 arrives fault; 18 begins trip 0", 99, "trip fault must be taken by 17 ps")
    permitted(built, OPENED + "4 arrives fault", 17)
    refused(built, OPENED + "4 arrives fault", 18, "trip fault must be taken by 17 ps")
    refused(built, OPENED + "4 begins trip 0", 99, "trip fault is not in hand")
    refused(built, OPENED + "4 arrives fault; 5 arrives fault", 99, "trip fault is in hand already")
    refused(built, "4 arrives fault", 99, "trip fault does not come in mode idle")


def test_a_trip_without_within_is_taken_when_it_arrives() -> None:
    built = tripped(trip("fault", "open", "idle"))
    permitted(built, OPENED + "4 arrives fault; 4 begins trip 0; 4 writes X off; 4 enters idle", 99)
    refused(built, OPENED + "4 arrives fault; 5 begins trip 0", 99, "must be taken by 4 ps")


def test_nothing_comes_between_an_arrival_and_its_taking_without_within() -> None:
    built = tripped(trip("fault", "open", "idle"), trip("halt", "open", "shut", at_once=True))
    refused(built, OPENED + "4 arrives fault; 4 begins 1; 4 writes Y on", 9, "is taken as it arrives")
    refused(built, OPENED + "4 arrives fault; 4 arrives fault", 9, "is taken as it arrives")
    refused(built, OPENED + "4 arrives fault", 4, "only half done")


def test_a_trip_that_waited_for_an_unbroken_move_is_no_part_of_its_end() -> None:
    """Without `within` it has no time left then, but what comes in the same instant may come first."""
    built = tripped(trip("fault", "open shut", "idle"), trip("halt", "shut", "open", at_once=True))
    begun = OPENED + "4 begins 2; 4 writes X off; 20 arrives fault; 34 writes Y on; 34 enters shut"
    permitted(built, begun + "; 34 begins trip 0; 34 writes Y off; 34 enters idle", 99)
    halted = begun + "; 34 begins trip 1; 34 writes X on, Y off; 34 enters open; "
    permitted(built, halted + "34 begins trip 0; 34 writes X off; 34 enters idle", 34)
    permitted(built, begun, 34)
    refused(built, begun, 35, "fault must be taken by 34 ps")


def test_firmware_runs_on_until_the_trip_is_taken() -> None:
    built = tripped(FAULT)
    begun = OPENED + "4 begins 1; 22 arrives fault; 24 writes Y on; 24 enters both; "
    permitted(built, begun + "35 begins trip 0; 35 writes X off; 40 writes Y off; 40 enters idle", 99)
    refused(built, begun + "36 begins trip 0", 99, "must be taken by 35 ps")
    refused(built, OPENED + "4 begins 1; 6 arrives fault", 20, "must be taken by 19 ps")
    refused(
        tripped(FAULT, trip("other", "open", "idle")),
        OPENED + "4 arrives fault; 4 begins trip 1",
        9,
        "other is not in hand",
    )
    # reaching the target drops it
    dropped = begun + "30 begins 3; 30 writes X off; 35 writes Y off; 35 enters idle"
    permitted(built, dropped, 99)
    refused(built, dropped + "; 35 begins trip 0", 99, "not in hand")


def test_a_trip_interrupts_a_run_and_what_was_written_stays() -> None:
    built = tripped(FAULT)
    begun = "0 begins 0; 0 writes X on; 0 enters open; 4 begins 1; 6 arrives fault; 8 begins trip 0; "
    permitted(built, begun + "8 writes X off; 8 enters idle", 99)
    refused(built, begun + "24 writes Y on", 99, "must go on by 8 ps")


def test_a_trip_does_not_come_in_a_run_that_left_another_mode() -> None:
    built = tripped(trip("fault", "open", "shut", origins="both", within=5))
    refused(built, OPENED + "4 begins 1; 6 arrives fault", 99, "does not come in a run that left open")
    lines = OPENED + "4 begins 1; 24 writes Y on; 24 enters both; 30 begins 3; 30 writes X off; 31 arrives fault; "
    permitted(built, lines + "33 begins trip 0; 33 enters shut", 99)


def test_an_unbroken_move_is_not_interrupted_and_starts_the_time_anew() -> None:
    built = tripped(FAULT)
    begun = OPENED + "2 arrives fault; 4 begins 2; 4 writes X off; "
    refused(built, begun + "6 begins trip 0", 99, "cannot be interrupted by trip fault")
    ended = begun + "34 writes Y on; 34 enters shut; "
    permitted(built, ended + "47 begins trip 0; 47 writes Y off; 47 enters idle", 99)
    refused(built, ended + "48 begins trip 0", 99, "must be taken by 47 ps")
    permitted(built, OPENED + "4 begins 2; 4 writes X off; 20 arrives fault; 34 writes Y on; 34 enters shut", 47)


def test_the_leading_wait_of_a_firmware_trip_comes_after_its_taking() -> None:
    built = tripped(trip("fault", "open", "idle", within=10, steps=steps((6, 7))), late=None)
    taken = OPENED + "4 arrives fault; 14 begins trip 0; "
    permitted(built, taken + "21 writes X off; 21 enters idle", 99)
    refused(built, taken + "19 writes X off", 99, "cannot come before 20 ps")
    refused(built, taken + "22 writes X off", 99, "must go on by 21 ps")
    refused(built, taken + "15 arrives fault", 99, "a trip is running")
    refused(built, taken + "15 begins 0", 99, "another run is in progress")


def test_a_hardware_trip_writes_its_first_item_in_one_instant() -> None:
    halt = trip("halt", "both", "idle", origins="open both", at_once=True)
    built = tripped(halt)
    opened = OPENED + "4 begins 1; 24 writes Y on; 24 enters both; "
    permitted(built, opened + "30 begins trip 0; 30 writes X off, Y off; 30 enters idle", 99)
    refused(built, opened + "30 begins trip 0; 30 writes X off", 99, "may be written now is X off, Y off")
    refused(built, opened + "30 begins trip 0; 31 writes X off, Y off", 99, "must go on by 30 ps")
    refused(built, opened + "30 arrives halt", 99, "no trip halt that firmware takes")
    refused(built, OPENED + "1 begins trip 0", 99, "does not come in mode open")
    # also within an unbroken move, but not between two events that are one
    unbroken = OPENED + "4 begins 2; 4 writes X off; "
    permitted(built, unbroken + "5 begins trip 0; 5 enters idle", 99)
    refused(built, OPENED + "4 begins 2; 4 begins trip 0", 99, "nothing can come before")


def test_what_follows_the_first_item_of_a_hardware_trip_keeps_the_gaps() -> None:
    built = tripped(trip("halt", "open", "shut", at_once=True, steps=steps("X off"), origins=""), late=None)
    begun = OPENED + "4 begins trip 0; 4 writes X off; "
    permitted(built, begun + "9 writes Y on; 9 enters shut", 99)
    refused(built, begun + "4 writes Y on", 99, "cannot come before 9 ps")
    refused(built, begun + "6 begins trip 0", 99, "does not interrupt itself")


def test_a_hardware_trip_keeps_a_wait_that_vanished_steps_leave_first() -> None:
    """After the wait its writes are like any others."""
    built = tripped(trip("halt", "open", "shut", at_once=True, steps=steps("X on", (7, 9))), late=None)
    begun = OPENED + "4 begins trip 0; "
    permitted(built, begun + "11 writes X off; 16 writes Y on; 16 enters shut", 99)
    refused(built, begun + "4 writes X off, Y on", 99, "cannot come before 11 ps")
    refused(built, begun + "11 writes X off, Y on", 99, "what may be written now is X off or Y on")


def test_a_hardware_trip_interrupts_other_trips_of_its_origins() -> None:
    halt = trip("halt", "", "idle", origins="open", at_once=True)
    slow = trip("fault", "open both", "shut", within=10, steps=steps("X off", (50, 50)))
    built = tripped(slow, halt)
    taken = OPENED + "4 arrives fault; 6 begins trip 0; 6 writes X off; "
    permitted(built, taken + "20 begins trip 1; 20 enters idle", 99)
    refused(
        tripped(slow, trip("halt", "", "idle", origins="both", at_once=True)),
        taken + "20 begins trip 1",
        99,
        "left open",
    )


def test_a_trip_in_hand_stays_in_hand_through_a_hardware_trip() -> None:
    halt = trip("halt", "open", "shut", at_once=True, steps=steps("X off", (50, 60)))
    built = tripped(FAULT, halt, late=None)
    broken = OPENED + "4 arrives fault; 6 begins trip 1; 6 writes X off; "
    refused(built, broken + "8 begins trip 0", 99, "cannot be interrupted")
    ended = broken + "66 writes Y on; 66 enters shut; "
    permitted(built, ended + "76 begins trip 0; 76 writes Y off; 76 enters idle", 99)
    refused(built, ended + "77 begins trip 0", 99, "must be taken by 76 ps")
    # a hardware trip that takes no time does not start the time of the other anew
    brief = tripped(FAULT, trip("halt", "open", "shut", at_once=True), late=None)
    written = OPENED + "4 arrives fault; 6 begins trip 1; 6 writes X off, Y on; 6 enters shut; "
    permitted(brief, written, 14)
    refused(brief, written, 15, "must be taken by 14 ps")


def test_a_hardware_trip_that_interrupts_another_counts_as_leaving_what_was_left_first() -> None:
    first = trip("halt", "open", "shut", origins="idle open", at_once=True, steps=steps("X off", (50, 50)))
    again = trip("stop", "", "idle", origins="open", at_once=True, steps=steps("Y off", (50, 50)))
    last = trip("end", "", "idle", origins="open", at_once=True)
    built = tripped(first, again, last, late=None)
    begun = OPENED + "4 begins trip 0; 4 writes X off; 6 begins trip 1; "
    permitted(built, begun + "7 begins trip 2; 7 enters idle", 99)
    refused(built, "0 begins 0; 0 writes X on; 0 enters open; 4 begins trip 1", 99, "does not come in mode open")
    moved = tripped(first, again, last, late=None)
    refused(moved, "0 begins 0; 0 begins trip 1", 99, "nothing can come before")


# Reset

PINS = (pin("X", after=span(2, 5)), pin("Y", Level.HIGH, after=span(2, 5)))


def with_reset(**more: object) -> Drive:
    rows = {**ROWS, "reset": "free free"}
    moves = (move("idle", "open"), move("reset", "shut", when(100)), move("open", "reset"))
    trips = (trip("watchdog", "open idle", "reset"), FAULT)
    return drive("X Y", rows, moves=moves, trips=trips, pins=PINS, writes=writes(gap=span(5)), **more)  # type: ignore[arg-type]


def test_reset_releases_every_pin_at_once() -> None:
    built = with_reset()
    for entered in ("", ": X free, Y free"):
        for begun in (f"4 begins trip 0; 4 enters reset{entered}", f"4 begins 2{entered}; 4 enters reset"):
            walk = permitted(built, f"{OPENED}{begun}; 6 rests X; 9 rests Y", 50)
            assert [time for time, _ in walk.commands["X"]] == [None, 0, 6]
            assert [time for time, _ in walk.commands["Y"]] == [None, 9]
    begun = OPENED + "4 begins trip 0; "
    refused(built, begun + "5 enters reset", 50, "must go on by 4 ps")
    refused(built, begun + "4 enters reset: X free", 50, "reset frees every pin")
    refused(built, begun + "4 enters reset: X free, Y off", 50, "reset frees every pin")
    refused(built, begun + "4 begins 0", 50, "nothing can come before")
    refused(built, begun, 4, "half done")


def test_reset_writes_what_is_not_free_yet() -> None:
    rows = {"idle": "off off", "half": "free off", "reset": "free free"}
    built = drive("X Y", rows, moves=(move("idle", "half"), move("half", "reset")), pins=PINS)
    begun = "0 begins 0; 0 writes X free; 0 enters half; 4 begins 1; "
    for entered in ("", ": Y free", ": X free, Y free"):
        permitted(built, begun + f"4 enters reset{entered}", 5)
    refused(built, begun + "4 enters reset: X free", 5, "reset frees every pin")


def test_reset_holds_nothing_for_a_carrier() -> None:
    """What is released is off its carrier in that instant, and stays so at the carrier's next rise."""
    rows = {"idle": "off off", "run": "k ~k", "reset": "free free"}
    built = drive(
        "X Y",
        rows,
        moves=(move("idle", "run"), move("run", "reset")),
        carriers=(carrier("k", span(20), span(40), update=Update.AT_RISE),),
        pins=(pin("X"), pin("Y")),
    )
    lines = "0 begins 0; 0 writes X k, Y ~k; 0 enters run; 40 rises k; 60 falls k; 70 begins 1; 70 enters reset; "
    walk = permitted(built, lines + "100 rises k", 110, phases=(Phase("k", False, 0, True),))
    assert walk.commands["Y"] == [(None, Command.OFF), (60, Command.ON), (70, Command.OFF)]
    assert not walk.pins.held


def test_reset_drops_what_is_in_hand_and_is_left_like_any_mode() -> None:
    built = with_reset()
    gone = OPENED + "2 arrives fault; 4 begins trip 0; 4 enters reset; 6 rests X; 6 rests Y; "
    permitted(built, gone + "104 begins 1; 104 writes X off; 109 writes Y on; 109 enters shut", 200)
    refused(built, gone + "103 begins 1", 200, "cannot come before 104 ps")
    refused(built, gone + "9 begins trip 1", 200, "not in hand")
    refused(built, gone + "9 arrives fault", 200, "does not come in mode reset")
    odd = replace(built, trips=(trip("watchdog", "open reset", "reset"),))
    refused(odd, gone.replace("2 arrives fault; ", "") + "9 begins trip 0", 200, "does not come in mode reset")
    refused(built, gone + "9 begins trip 0", 200, "does not come in mode reset")


def test_a_start_in_reset_rests_already() -> None:
    walk = permitted(with_reset(start="reset"), "", 50)
    assert [line[0][1].value for line in walk.commands.values()] == ["off", "on"]
    refused(with_reset(start="reset"), "3 rests X", 50, "not on its way")
