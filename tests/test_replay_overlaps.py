"""The overlap that a trace claims, interlocks, and overlaps without end."""

from dataclasses import replace

import pytest
from build import after, carrier, drive, hazard, interlock, move, part, pin, span, steps, trace, trip, writes
from test_replay_runs import permitted, refused

from seqcheck.drive import Above, Carrier, Command, Drive, Interlock, Level, Move, Update
from seqcheck.evidence.replay import NotPermitted, from_its_beginning, replay
from seqcheck.hazards import Hazard, Literal
from seqcheck.quantities import Interval
from seqcheck.verdict import Act, Phase, Replayed, Span

ON, OFF, UNKNOWN = Command.ON, Command.OFF, Command.UNKNOWN
X, Y = Literal("X"), Literal("Y")
SWAP = "10 begins 0; 10 writes X on; 10 enters high; 50 begins 1; 50 writes X off; 55 writes Y on; 55 enters low"


def half_bridge(**more: object) -> Drive:
    """A leg whose low switch comes 5 ps after the command of the high one goes off."""
    return drive(
        "X Y",
        {"idle": "off off", "high": "on off", "low": "off on"},
        moves=(move("idle", "high"), move("high", "low", steps=steps("X off"))),
        writes=writes(gap=span(5)),
        **{"paths": dict.fromkeys("XY", (part((2, 6), (3, 12)),)), **more},  # type: ignore[arg-type]
    )


def test_an_overlap_is_confirmed() -> None:
    """X is possible until 50 + 12, Y from 55 + 2 on."""
    assert replay(half_bridge(), trace(SWAP, 70, (57, 62))) == Replayed(
        commands={"X": ((None, OFF), (10, ON), (50, OFF)), "Y": ((None, OFF), (55, ON))},
        possible={X: (Span(12, 62),), Y: (Span(57, None),)},
        overlap=Span(57, 62),
    )
    assert replay(half_bridge(), trace(SWAP, 62, (57, 62))).overlap == Span(57, 62)


@pytest.mark.parametrize("claimed", [(57, 63), (57, 61), (56, 62), (58, 62), (57, None), (57, 57), (12, 62), (0, 0)])
def test_another_overlap_is_refused(claimed: tuple[int, int | None]) -> None:
    with pytest.raises(NotPermitted, match=r"all literals are possible together from 57 ps to 62 ps\."):
        replay(half_bridge(), trace(SWAP, 70, claimed))


def test_an_overlap_beyond_the_end_of_the_trace_is_refused() -> None:
    refused(half_bridge(), SWAP, 61, "from 57 ps without end", overlap=(57, 62))
    refused(half_bridge(), SWAP, 61, "X is not as wanted at the end", overlap=(57, None))
    refused(half_bridge(), SWAP, 57, "at no time", overlap=(57, 62))


def test_no_overlap_where_they_only_touch() -> None:
    built = half_bridge(paths=dict.fromkeys("XY", (part((2, 6), (3, 7)),)))
    refused(built, SWAP, 70, "at no time", overlap=(57, 57))


def test_a_pulse_of_no_length_is_prolonged() -> None:
    rows = {"idle": "off off", "low": "off on"}
    moves = (move("idle", "low", steps=steps("X on", "X off")),)
    paths = {"X": (part((2, 2), (5, 5)),)}
    built = drive("X Y", rows, moves=moves, paths=paths)
    lines = "10 begins 0; 10 writes X on; 10 writes X off; 10 writes Y on; 10 enters low"
    found = replay(built, trace(lines, 20, (12, 15)))
    assert found.commands["X"] == ((None, OFF), (10, ON), (10, OFF))
    assert found.possible[X] == (Span(12, 15),)


def test_literals_that_want_off() -> None:
    built = drive(
        "X Y",
        {"idle": "on off", "both": "off off"},
        moves=(move("idle", "both"),),
        paths={"X": (part((2, 6), (3, 12)),)},
    )
    off = "X off, Y off"
    found = replay(built, trace("10 begins 0; 10 writes X off; 10 enters both", 20, (13, None), literals=off))
    assert found.possible == {Literal("X", False): (Span(13, None),), Literal("Y", False): (Span(0, None),)}


def test_the_start_row_is_settled_for_ever() -> None:
    built = drive(
        "X Y", {"both": "on on", "high": "on off"}, moves=(move("both", "high"),), paths={"Y": (part((9, 9), (4, 5)),)}
    )
    assert replay(built, trace("", 3, (0, None))).possible == {X: (Span(0, None),), Y: (Span(0, None),)}
    assert replay(built, trace("2 begins 0; 2 writes Y off; 2 enters high", 9, (0, 7))).overlap == Span(0, 7)


def test_a_pin_that_rests_nowhere_is_possible_either_way() -> None:
    pins = (pin("X", Level.UNKNOWN, after=span(3, 9)), pin("Y"))
    built = drive("X Y", {"idle": "off on", "loose": "free on"}, moves=(move("idle", "loose"),), pins=pins)
    lines = "1 begins 0; 1 writes X free; 1 enters loose; 5 rests X"
    assert replay(built, trace(lines, 9, (5, None))).commands["X"] == ((None, OFF), (5, UNKNOWN))
    assert replay(built, trace(lines, 9, (0, None), literals="X off, Y")).overlap == Span(0, None)
    refused(
        built,
        lines.replace("; 5 rests X", ""),
        9,
        "the pin of X is still to change",
        literals="X off",
        overlap=(0, None),
    )


# Facts


def sourced(needs: tuple[frozenset[Above], ...]) -> tuple[Drive, Hazard]:
    up, down = (Above("a", "b"),), (Above("b", "a"),)
    moves = (
        move("idle", "plus", steps=steps((4, 4), "X on", (6, 6)), known=up),
        move("plus", "minus", known=down, steps=steps((5, 5))),
        move("plus", "plus"),
    )
    rows = {"idle": "off on", "plus": "on on", "minus": "on on"}
    return drive("X Y", rows, moves=moves, known={"plus": up, "minus": down}), hazard("X, Y", needs)


def test_an_overlap_lies_where_the_hazard_is_asked_for() -> None:
    lines = "0 begins 0; 4 writes X on; 10 enters plus; 17 begins 2; 17 enters plus; 20 begins 1; 25 enters minus"
    up, down = frozenset({Above("a", "b")}), frozenset({Above("b", "a")})
    built, asked = sourced((up,))
    assert replay(built, trace(lines, 30, (4, 20), literals=asked)).overlap == Span(4, 20)
    refused(built, lines, 30, "from 4 ps to 20 ps", literals=asked, overlap=(4, None))
    built, asked = sourced((down,))
    assert replay(built, trace(lines, 30, (20, None), literals=asked)).overlap == Span(20, None)
    built, asked = sourced((down, up))
    assert replay(built, trace(lines, 30, (4, None), literals=asked)).overlap == Span(4, None)


# Interlocks


def interlocked(*locks: Interlock, **more: object) -> Drive:
    return half_bridge(interlocks=locks, paths={"X": (part((2, 6), (3, 12)),), "Y": (part((2, 6), (3, 12)),)}, **more)


def test_an_interlock_holds_a_command_back_until_it_clears() -> None:
    built = interlocked(interlock("X", "Y", span(6, 9)))
    found = replay(built, trace(SWAP + "; 58 clears Y", 70, (60, 62)))
    assert found.commands["Y"] == ((None, OFF), (58, ON))
    for lines, why in (
        (SWAP + "; 55 clears Y", "cannot come before 56 ps"),
        (SWAP + "; 60 clears Y", "the interlock must clear Y by 59 ps"),
        (SWAP, "the interlock must clear Y by 59 ps"),
        (SWAP + "; 58 clears Y; 58 clears Y", "no dead time of an interlock runs for Y"),
        (SWAP + "; 58 clears X", "no dead time of an interlock runs for X"),
    ):
        refused(built, lines, 70, why)
    assert replay(built, trace(SWAP, 70, (57, 62), interlocked=False)).commands["Y"][1] == (55, ON)
    refused(built, SWAP + "; 58 clears Y", 70, "no dead time of an interlock runs", interlocked=False)


def test_an_interlock_without_dead_time_clears_without_an_event() -> None:
    rows = {"idle": "off off", "both": "on on", "low": "off on"}
    built = drive("X Y", rows, moves=(move("idle", "both"), move("both", "low")), interlocks=(interlock("X", "Y"),))
    lines = "1 begins 0; 1 writes X on, Y on; 1 enters both; 4 begins 1; 4 writes X off; 4 enters low"
    walk = permitted(built, lines, 9)
    assert walk.commands == {"X": [(None, OFF)], "Y": [(None, OFF), (4, ON)]}
    assert replay(built, trace(lines, 9, (1, 4), interlocked=False)).overlap == Span(1, 4)


def test_a_switch_in_two_interlocks_needs_both_to_clear() -> None:
    rows = {"idle": "on off on", "low": "off on off"}
    locks = (interlock("X", "Y", span(3, 3)), interlock("Y", "Z", span(8, 8)))
    built = drive("X Y Z", rows, moves=(move("idle", "low"),), interlocks=locks)
    lines = "1 begins 0; 1 writes X off, Y on, Z off; 1 enters low; 4 clears Y; "
    assert permitted(built, lines + "9 clears Y", 12, literals="Y").commands["Y"] == [(None, OFF), (9, ON)]
    refused(built, lines + "5 clears Y", 12, "cannot come before 9 ps", literals="Y")
    refused(built, lines.replace("4 clears Y", "4 clears Z"), 12, "runs for Z", literals="X")
    named = trace(lines + "9 clears Y", 12, literals="Y")
    for indices, fits in (((0, 1), True), ((1, 0), False), ((0, 0), False)):
        cleared = iter(indices)
        events = [replace(one, index=next(cleared)) if one.act is Act.CLEARS else one for one in named.events]
        one = replace(named, events=tuple(events), overlap_from=9, overlap_to=None)
        if fits:
            assert replay(built, one).commands["Y"] == ((None, OFF), (9, ON))
        else:
            with pytest.raises(NotPermitted):
                replay(built, one)
    refused(built, lines, 12, "must clear Y by 9 ps", literals="Y")
    # Z is not judged: by when its partner has been off for long enough is not asked
    back = drive("X Y Z", {"idle": "off on off", "low": "off off on"}, moves=(move("idle", "low"),), interlocks=locks)
    permitted(back, "1 begins 0; 1 writes Y off, Z on; 1 enters low", 99, literals="Y")


def test_unknown_commands_and_interlocks() -> None:
    pins = (pin("X", Level.UNKNOWN), pin("Y", Level.UNKNOWN))
    rows = {"idle": "off off", "loose": "free on", "adrift": "free free"}
    moves = (move("idle", "loose"), move("loose", "adrift"))
    built = drive("X Y", rows, moves=moves, pins=pins, interlocks=(interlock("X", "Y", span(4, 4)),))
    lines = (
        "1 begins 0; 1 writes X free, Y on; 1 enters loose; 5 begins 1; 5 writes Y free; 5 enters adrift; 9 clears X"
    )
    walk = permitted(built, lines, 20)
    assert walk.commands == {"X": [(None, OFF), (9, UNKNOWN)], "Y": [(None, OFF), (1, UNKNOWN)]}
    half = drive("X Y", {"idle": "off free"}, pins=pins, interlocks=built.interlocks)
    assert permitted(half, "", 9).commands == {"X": [(None, OFF)], "Y": [(None, UNKNOWN)]}


def test_of_two_dead_times_the_one_that_must_end_first_is_cleared() -> None:
    """Before one that need never end, too."""
    rows = {"idle": "on off on", "half": "off off on", "low": "off on off"}
    locks = (interlock("X", "Y", Interval(5, None)), interlock("Y", "Z", span(5, 20)))
    moves = (move("idle", "half"), move("half", "low"))
    built = drive("X Y Z", rows, moves=moves, interlocks=locks)
    lines = "2 begins 0; 2 writes X off; 2 enters half; 3 begins 1; 3 writes Y on, Z off; 3 enters low; 10 clears Y"
    permitted(built, lines, 99, literals="Y")
    refused(built, lines.replace("; 10 clears Y", ""), 99, "must clear Y by 23 ps", literals="Y")


def test_an_interlock_of_other_switches_is_not_followed() -> None:
    """Neither its dead times nor the carriers that its switches follow; without interlocks no partner's is."""
    k = carrier("k", span(20, 30), span(40, 50))
    rows = {"idle": "on off on", "run": "on k off"}
    locks = (interlock("Y", "Z", span(3, 3)),)
    built = drive("X Y Z", rows, moves=(move("idle", "run"),), carriers=(k,), interlocks=locks)
    lines = "1 begins 0; 1 writes Y k, Z off; 1 enters run"
    permitted(built, lines, 99, literals="X")
    refused(built, lines + "; 4 clears Y", 99, "no dead time of an interlock runs for Y", literals="X")
    refused(built, lines, 99, "Y follows k, whose phase the trace does not give", literals="Z")
    permitted(built, lines, 99, literals="Z", interlocked=False)


# Without end


def resting(*more_moves: Move, **more: object) -> Drive:
    moves = (move("idle", "both"), *more_moves)
    return drive("X Y", {"idle": "off off", "both": "on on"}, moves=moves, **more)  # type: ignore[arg-type]


def test_what_must_go_on_is_not_without_end() -> None:
    lines = "1 begins 0; 1 writes X on, Y on; 1 enters both"
    assert replay(resting(), trace(lines, 5, (1, None))).overlap == Span(1, None)
    assert replay(resting(move("both", "idle")), trace(lines, 5, (1, None))).overlap == Span(1, None)
    timed = resting(move("both", "idle", after(3, 90)))
    refused(
        timed,
        lines,
        5,
        "The overlap has an end after 5 ps, against the claim: mode both must be left",
        overlap=(1, None),
    )
    tripped = resting(trips=(trip("fault", "both", "idle", within=50),))
    refused(tripped, lines + "; 4 arrives fault", 5, "trip fault is in hand", overlap=(1, None))
    waiting = drive(
        "X Y", {"idle": "off off", "both": "on on"}, moves=(move("idle", "both", steps=steps("X on, Y on", (9, 9))),)
    )
    refused(waiting, "1 begins 0; 1 writes X on, Y on", 5, "the run to both must go on", overlap=(1, None))


def carried(k: Carrier, fall: int, row: str = "k on") -> Drive:
    paths = {"X": (part((0, 0), (0, fall)),)}
    return drive("X Y", {"idle": "off on", "run": row}, moves=(move("idle", "run"),), carriers=(k,), paths=paths)


def test_an_overlap_that_carriers_keep_up() -> None:
    k = carrier("k", span(20, 30), span(40, 50))
    begun = "0 begins 0; 0 writes X k; 0 enters run; 10 falls k; 50 rises k"
    phases = (Phase("k", True, 10, True),)
    assert replay(carried(k, 40), trace(begun, 60, (0, None), phases=phases)).overlap == Span(0, None)
    refused(carried(k, 39), begun, 60, "from 0 s to 49 ps, from 50 ps without end", phases=phases, overlap=(0, None))
    # it reaches the end of the trace, but no low is short enough for it to last
    refused(
        carried(k, 39),
        begun,
        60,
        "X cannot stay possible while its switch follows k",
        phases=phases,
        overlap=(50, None),
    )
    high = carrier("k", Interval(20, None), span(40, 50))
    assert replay(carried(high, 39), trace(begun, 60, (50, None), phases=phases)).overlap == Span(50, None)


def test_the_dead_time_counts_for_what_carriers_keep_up() -> None:
    k = carrier("k", span(20, 30), span(40, 50), dead=span(3, 6))
    begun = "0 begins 0; 0 writes X k; 0 enters run; 10 falls k; 13 output k; 50 rises k; 53 output k"
    phases = (Phase("k", True, 10, True),)
    assert replay(carried(k, 43), trace(begun, 60, (0, None), phases=phases)).overlap == Span(0, None)
    refused(carried(k, 42), begun, 60, "cannot stay possible", phases=phases, overlap=(53, None))
    off = {"literals": "X off, Y", "phases": phases, "overlap": (10, None)}
    quiet = "0 begins 0; 0 writes X k; 0 enters run; 10 falls k; 13 output k"
    refused(carried(k, 0), quiet, 50, "X off cannot stay possible", **off)
    shy = carrier("k", span(5, 30), span(40, 50), dead=span(3, 6))
    assert replay(carried(shy, 0), trace(quiet, 50, **off)).overlap == Span(10, None)  # type: ignore[arg-type]


EVER, NEVER = Interval(1, None), None


@pytest.mark.parametrize(
    ("cell", "on", "high", "low", "dead", "now_high", "fall", "fits"),
    [
        ("k", True, EVER, NEVER, 0, True, 0, True),  # it is high for ever
        ("~k", True, NEVER, EVER, 0, False, 0, True),
        ("k", False, NEVER, EVER, 0, False, 0, True),
        ("~k", False, EVER, NEVER, 0, True, 0, True),
        ("k", True, span(20, 30), EVER, 0, True, 1, True),  # a low of 1 ps is bridged
        ("k", True, span(20, 30), EVER, 0, True, 0, False),
        ("k", True, span(20, 30), EVER, 5, True, 6, True),
        ("k", True, span(20, 30), EVER, 5, True, 5, False),
        ("~k", True, span(7, 9), span(20, 30), 0, False, 7, True),
        ("~k", True, span(7, 9), span(20, 30), 0, False, 6, False),
        ("k", False, span(7, 9), span(20, 30), 0, False, 7, True),
        ("k", False, span(7, 9), span(20, 30), 0, False, 6, False),
        ("k", False, span(7, 9), span(20, 30), 2, False, 5, True),
        ("k", False, span(7, 9), span(20, 30), 2, False, 4, False),
        ("k", False, span(7, 9), EVER, 0, False, 0, True),  # it may stay low
        ("~k", False, EVER, span(7, 9), 0, True, 0, True),
        ("k", False, Interval(7, None), span(20, 30), 0, False, 7, True),  # it may stay high, but need not
        ("k", False, EVER, NEVER, 0, True, 9, False),  # it never comes to be low
    ],
)
def test_what_a_carrier_keeps_up(
    cell: str, on: bool, high: Interval | None, low: Interval | None, dead: int, now_high: bool, fall: int, fits: bool
) -> None:
    """X follows the carrier and is as wanted to the end; `fall` bridges its shortest time away, or does not."""
    k = carrier("k", high, low, dead=span(dead))
    paths = {"X": (part((0, 0 if on else fall), (0, fall if on else 0)),)}
    rows = {"idle": "off on", "run": f"{cell} on"}
    built = drive("X Y", rows, moves=(move("idle", "run"),), carriers=(k,), paths=paths)
    begun = f"0 begins 0; 0 writes X {cell}; 0 enters run"
    more = {
        "literals": "X, Y" if on else "X off, Y",
        "phases": (Phase("k", now_high, dead, True),),
        "overlap": (0, None),
    }
    if fits:
        assert replay(built, trace(begun, 1, **more)).overlap == Span(0, None)  # type: ignore[arg-type]
    else:
        refused(built, begun, 1, "cannot stay possible", **more)


def test_a_pulse_that_its_dead_time_always_swallows_does_not_come_again() -> None:
    paths = {"X": (part((0, 0), (0, 99)),)}
    rows = {"idle": "on on", "run": "k on"}
    begun, low = "0 begins 0; 0 writes X k; 0 enters run", (Phase("k", False, 5, True),)
    k = carrier("k", span(2, 4), span(20, 30), dead=span(5))
    built = drive("X Y", rows, moves=(move("idle", "run"),), carriers=(k,), paths=paths)
    refused(built, begun, 9, "X cannot stay possible", phases=low, overlap=(0, None))
    k = carrier("k", span(2, 5), span(20, 30), dead=span(5))  # one that ends as its dead time does may come
    built = drive("X Y", rows, moves=(move("idle", "run"),), carriers=(k,), paths=paths)
    assert replay(built, trace(begun, 9, (0, None), phases=low)).overlap == Span(0, None)


def test_an_interlock_with_a_carrier_lets_a_command_come_and_go() -> None:
    k = carrier("k", span(20, 30), span(40, 50))
    paths = {"X": (part((0, 0), (0, 99)),)}
    rows = {"idle": "on off on", "run": "on k on"}
    locks = (interlock("X", "Y"),)
    built = drive("X Y Z", rows, moves=(move("idle", "run"),), carriers=(k,), paths=paths, interlocks=locks)
    begun, high = "0 begins 0; 0 writes Y k; 0 enters run", (Phase("k", True, 5, True),)
    found = replay(built, trace(begun, 9, (0, None), literals="X, Z", phases=high))
    assert found.commands["X"] == ((None, ON), (0, OFF))


def test_a_claim_may_stop_with_the_trace() -> None:
    lines = "1 begins 0; 1 writes X on, Y on; 1 enters both"
    assert replay(resting(), trace(lines, 5, (1, 5))).overlap == Span(1, 5)
    refused(resting(), lines, 5, "from 1 ps without end", overlap=(1, 4))
    refused(resting(), lines, 5, "from 1 ps without end", overlap=(2, 5))


def test_what_another_interlock_lets_come_and_go_excuses_no_literal() -> None:
    """X is in no interlock: that a switch of another one follows a carrier says nothing about X."""
    k = carrier("k", span(20, 30), span(40, 50))
    rows = {"idle": "on on off", "run": "k on ~k"}
    paths = {"X": (part((0, 0), (0, 39)),)}
    locks = (interlock("Y", "Z"),)
    built = drive("X Y Z", rows, moves=(move("idle", "run"),), carriers=(k,), paths=paths, interlocks=locks)
    begun, high = "0 begins 0; 0 writes X k, Z ~k; 0 enters run", (Phase("k", True, 5, True),)
    refused(built, begun, 9, "X cannot stay possible while its switch follows k", phases=high, overlap=(0, None))


def test_a_write_held_for_a_rise_that_need_not_come_ends_nothing() -> None:
    rows, low = {"idle": "on on", "run": "k on"}, (Phase("k", False, 0, True),)
    begun = "0 begins 0; 0 writes X k; 0 enters run"
    for update, span_low, fits in (
        (Update.AT_RISE, EVER, True),
        (Update.AT_RISE, span(40, 50), False),
        (Update.WITHIN_PERIOD, EVER, False),
    ):
        k = carrier("k", span(20, 30), span_low, update=update)
        built = drive("X Y", rows, moves=(move("idle", "run"),), carriers=(k,))
        if fits:
            assert replay(built, trace(begun, 9, (0, None), phases=low)).overlap == Span(0, None)
        else:
            refused(built, begun, 9, "the pin of X is still to change", phases=low, overlap=(0, None))


def test_a_claim_that_begins_too_late_is_taken_back_to_its_overlap() -> None:
    rows = {"idle": "off off", "both": "on on"}
    built = drive("X Y", rows, moves=(move("idle", "both"), move("both", "idle")))
    lines = "1 begins 0; 1 writes X on, Y on; 1 enters both; 10 begins 1; 10 writes X off, Y off; 10 enters idle; "
    lines += "20 begins 0; 20 writes X on, Y on; 20 enters both"
    for claimed, right in ((1, 1), (9, 1), (20, 20), (25, 20), (10, 10), (15, 15), (0, 0)):
        assert from_its_beginning(built, trace(lines, 30, (claimed, None))).overlap_from == right


def test_what_was_known_is_forgotten_again() -> None:
    """Known only in one mode: before and after it the hazard is asked for."""
    down = (Above("b", "a"),)
    rows = {"idle": "on on", "minus": "on on"}
    built = drive("X Y", rows, moves=(move("idle", "minus"), move("minus", "idle")), known={"minus": down})
    asked = hazard("X, Y", (frozenset({Above("a", "b")}),))
    lines = "5 begins 0; 5 enters minus; 20 begins 1; 20 enters idle"
    assert replay(built, trace(lines, 30, (20, None), literals=asked)).overlap == Span(20, None)
    assert replay(built, trace(lines, 30, (0, 5), literals=asked)).overlap == Span(0, 5)


def test_a_hazard_without_literals_is_refused() -> None:
    refused(resting(), "", 5, "it has no literal", literals=Hazard((), ()))


def test_a_pending_update_or_interlock_is_not_without_end() -> None:
    k = carrier("k", span(20, 30), span(40, 50), update=Update.WITHIN_PERIOD)
    rows = {"idle": "on on", "run": "k on"}
    built = drive("X Y", rows, moves=(move("idle", "run"),), carriers=(k,))
    low = (Phase("k", False, 0, True),)
    refused(
        built,
        "0 begins 0; 0 writes X k; 0 enters run",
        20,
        "the pin of X is still to change",
        phases=low,
        overlap=(0, None),
    )
    locked = interlocked(interlock("X", "Y", span(6, 90)))
    refused(locked, SWAP, 60, "the interlock is still to clear Y", literals="Y off, X off", overlap=(53, None))
