"""What the replay permits of moves, trips and writes, and what it refuses."""

from dataclasses import replace

import pytest
from build import AT_ONCE, after, carrier, drive, move, pin, span, steps, trace, trip, when, writes

from seqcheck.drive import Drive, How, Level, Order
from seqcheck.evidence.replay import NotPermitted, replay
from seqcheck.evidence.walk import Walk
from seqcheck.verdict import Phase, Trace


def permitted(built: Drive, lines: str, end: int, **more: object) -> Walk:
    """The walk through a trace, all of which must be permitted."""
    one: Trace = trace(lines, end, **more)  # type: ignore[arg-type]
    walk = Walk(built, one)
    for number, event in enumerate(one.events, start=1):
        walk.step(number, event)
    walk.finish(one.end)
    return walk


def refused(built: Drive, lines: str, end: int, why: str, **more: object) -> None:
    """The trace must be refused, with `why` in the sentence."""
    with pytest.raises(NotPermitted) as caught:
        replay(built, trace(lines, end, **more))  # type: ignore[arg-type]
    assert why in str(caught.value)
    assert str(caught.value).endswith(".")


ROWS = {"idle": "off off", "open": "on off", "shut": "off on", "both": "on on"}


# Moves: when they begin, in which time they write, when they enter


def test_a_move_that_writes_once() -> None:
    built = drive("X Y", ROWS, moves=(move("idle", "open"),))
    walk = permitted(built, "7 begins 0; 7 writes X on; 7 enters open", 9)
    assert walk.commands["X"][1][0] == 7
    refused(built, "7 begins 0; 8 writes X on", 9, "the run to open must go on by 7 ps")
    refused(built, "7 begins 0; 7 writes X on; 8 enters open", 9, "must go on by 7 ps")
    refused(built, "7 begins 0; 7 writes X off", 9, "what may be written now is X on")
    refused(built, "7 begins 0; 7 writes X on, Y off", 9, "what may be written now is X on")
    refused(built, "7 begins 0; 7 writes X on, X on", 9, "what may be written now is X on")
    refused(built, "7 begins 0; 7 enters open", 9, "nothing can come before that which writes")
    refused(built, "7 begins 0; 7 writes X on; 7 writes Y on", 9, "nothing can come before that which enters")
    refused(built, "7 begins 0; 7 writes X on; 7 enters shut", 9, "the run in progress goes to open")
    refused(built, "7 begins 0; 7 writes X on", 7, "only half done")
    refused(built, "7 begins 0: X on; 7 enters open", 9, "writes are events of their own")


def test_without_a_clock_line_firmware_keeps_its_waits() -> None:
    built = replace(drive("X Y", ROWS, moves=(move("idle", "open", steps=steps((5, 8))),)), clock=None)
    permitted(built, "0 begins 0; 8 writes X on; 8 enters open", 9)
    refused(built, "0 begins 0; 9 writes X on", 9, "must go on by 8 ps")


def test_of_what_is_overdue_the_earliest_is_told() -> None:
    slow, quick = carrier("k", span(20), span(50)), carrier("m", span(20), span(30))
    built = drive("X Y", {"idle": "off off"}, carriers=(slow, quick))
    phases = (Phase("k", False, 0, True), Phase("m", False, 0, True))
    refused(built, "", 99, "the reference of m must rise by 30 ps", phases=phases)
    refused(built, "", 99, "the reference of m must rise by 30 ps", phases=phases[::-1])


def test_what_is_no_event_of_a_drive() -> None:
    built = drive("X Y", ROWS, moves=(move("idle", "open"), move("open", "idle")))
    refused(built, "7 begins 2", 9, "no such move")
    refused(built, "7 begins -1", 9, "no such move")
    refused(built, "7 begins trip 0", 9, "no such move or trip")
    refused(built, "7 begins 1", 9, "rests in idle, which the move does not leave")
    refused(built, "7 writes X on", 9, "the firmware rests in idle")
    refused(built, "7 enters idle", 9, "the firmware rests in idle")
    refused(built, "7 rises k", 9, "no phase of carrier k")
    refused(built, "7 rests X", 9, "not on its way to its resting level")
    refused(built, "7 clears X", 9, "no dead time of an interlock runs for X")
    refused(built, "7 arrives fault", 9, "no trip fault")
    refused(built, "-1 begins 0", 9, "it is 0 s already")
    refused(built, "7 begins 0; 7 writes X on; 7 enters open; 6 begins 1", 9, "Event 4 (begins move 1) at 6 ps")
    refused(built, "7 begins 0; 7 writes X on; 7 enters open", 6, "The end of the run at 6 ps")
    refused(built, "", 9, "The hazard is none of the drive: Q", literals="X, Q")


def test_a_move_without_writes_enters_at_once() -> None:
    built = drive("X Y", {"idle": "off off", "kept": "keep keep"}, moves=(move("idle", "kept"),))
    permitted(built, "3 begins 0; 3 enters kept", 9)
    refused(built, "3 begins 0; 3 writes X off", 9, "nothing can come before that which enters")
    refused(built, "3 begins 0; 4 enters kept", 9, "must go on by 3 ps")


@pytest.mark.parametrize(("time", "fits"), [(9, False), (10, True), (20, True), (21, False)])
def test_the_window_of_a_move_on_an_event(time: int, fits: bool) -> None:
    lines = f"{time} begins 0; {time} writes X on; {time} enters open"
    for built in (
        drive("X Y", ROWS, moves=(move("idle", "open", when(10, 20)),)),
        drive("X Y", ROWS, moves=(move("idle", "open", when(3, 20)),), loop=10, late=5),
        drive("X Y", ROWS, moves=(move("idle", "open", when(10, 20)),), loop=3),
    ):
        if fits:
            permitted(built, lines, 30)
        else:
            refused(built, lines, 30, "cannot come before 10 ps" if time < 10 else "cannot come after 20 ps")
    permitted(built, "", 10**9)  # it may never begin


def test_timed_moves() -> None:
    built = drive(
        "X Y", ROWS, moves=(move("idle", "open", after(10, 20)), move("idle", "shut", after(5, 15))), late=2, loop=11
    )
    permitted(built, "10 begins 0; 10 writes X on; 10 enters open", 99)
    permitted(built, "17 begins 0; 17 writes X on; 17 enters open", 99)
    permitted(built, "", 17)
    refused(built, "9 begins 0", 99, "cannot come before 10 ps")
    refused(built, "18 begins 0", 99, "mode idle must be left by 17 ps")
    refused(built, "", 18, "mode idle must be left by 17 ps")


def test_a_move_that_begins_at_once() -> None:
    built = drive("X Y", ROWS, moves=(move("idle", "open", AT_ONCE), move("open", "idle")), late=9)
    permitted(built, "0 begins 0; 0 writes X on; 0 enters open", 9)
    refused(built, "", 1, "mode idle must be left by 0 s")
    again = "0 begins 0; 0 writes X on; 0 enters open; 4 begins 1; 4 writes X off; 4 enters idle"
    permitted(built, again, 4)
    refused(built, again, 5, "mode idle must be left by 4 ps")


def test_entering_a_mode_anew_starts_its_time() -> None:
    built = drive("X Y", ROWS, moves=(move("idle", "idle"), move("idle", "open", after(10, 20))))
    permitted(built, "15 begins 0; 15 enters idle", 35)
    refused(built, "15 begins 0; 15 enters idle", 36, "must be left by 35 ps")
    refused(built, "15 begins 0; 15 enters idle; 24 begins 1", 36, "cannot come before 25 ps")


# Gaps and waits


def gapped(how: How = How.SINGLY, order: Order = Order.ANY, **more: object) -> Drive:
    moves = (move("idle", "both"),)
    return drive("X Y", ROWS, moves=moves, writes=writes(how, span(5, 8), order), **more)  # type: ignore[arg-type]


def test_gaps_between_writes() -> None:
    late = gapped(late=2)
    permitted(late, "1 begins 0; 1 writes Y on; 6 writes X on; 6 enters both", 9)
    permitted(late, "1 begins 0; 1 writes X on; 11 writes Y on; 11 enters both", 19)
    refused(late, "1 begins 0; 1 writes X on; 5 writes Y on", 19, "cannot come before 6 ps")
    refused(late, "1 begins 0; 1 writes X on; 12 writes Y on", 19, "must go on by 11 ps")
    refused(late, "1 begins 0; 1 writes X on; 8 enters both", 19, "Y on is still to be written")
    refused(late, "1 begins 0; 1 writes X on, Y on", 19, "what may be written now is X on or Y on")
    permitted(late, "1 begins 0; 1 writes X on", 11)
    refused(late, "1 begins 0; 1 writes X on", 12, "must go on by 11 ps")


def test_writes_together() -> None:
    for built in (gapped(How.TOGETHER, late=7), drive("X Y", ROWS, moves=(move("idle", "both"),))):
        permitted(built, "1 begins 0; 1 writes Y on, X on; 1 enters both", 9)
        refused(built, "1 begins 0; 1 writes X on", 9, "what may be written now is X on, Y on")


def test_steps_together_are_consecutive_at_one_instant() -> None:
    moves = (move("idle", "shut", steps=steps("X on, Y on")),)
    built = drive("X Y", ROWS, moves=moves, trips=(trip("halt", "idle", "idle", at_once=True),))
    walk = permitted(built, "1 begins 0; 1 writes X on, Y on; 1 writes X off; 1 enters shut", 9)
    assert [time for time, _ in walk.commands["X"]] == [None, 1, 1]
    for one in (built, replace(built, writes=writes(How.TOGETHER, span(5)), clock=None)):
        refused(one, "1 begins 0; 1 writes X on, Y on; 2 writes X off", 9, "must go on by 1 ps")
    permitted(built, "1 begins 0; 1 writes X on, Y on; 1 begins trip 0; 1 writes X off, Y off; 1 enters idle", 9)


def test_gaps_hold_across_steps_and_steps_without_differences_vanish() -> None:
    moves = (move("idle", "both", steps=steps("X off", "X on", "Y keep", "Y on")),)
    built = drive("X Y", ROWS, moves=moves, writes=writes(gap=span(5, 8)))
    permitted(built, "1 begins 0; 1 writes X on; 6 writes Y on; 6 enters both", 9)
    refused(built, "1 begins 0; 1 writes Y on", 9, "what may be written now is X on")


def test_waits() -> None:
    moves = (move("idle", "both", steps=steps((3, 4), "X on", (10, 20), (1, 1), "Y on", (2, 6))),)
    built = drive("X Y", ROWS, moves=moves, writes=writes(gap=span(5, 8)), late=1)
    permitted(built, "1 begins 0; 4 writes X on; 15 writes Y on; 17 enters both", 99)
    permitted(built, "1 begins 0; 6 writes X on; 29 writes Y on; 36 enters both", 99)
    begun = "1 begins 0; 4 writes X on; "
    refused(built, "1 begins 0; 3 writes X on", 99, "cannot come before 4 ps")
    refused(built, "1 begins 0; 7 writes X on", 99, "must go on by 6 ps")
    refused(built, begun + "14 writes Y on", 99, "cannot come before 15 ps")
    refused(built, begun + "28 writes Y on", 99, "must go on by 27 ps")
    refused(built, begun + "15 writes Y on; 16 enters both", 99, "cannot come before 17 ps")
    refused(built, begun + "15 writes Y on; 23 enters both", 99, "must go on by 22 ps")
    refused(built, begun + "15 writes Y on; 17 writes X on", 99, "all that both needs is written already")
    permitted(built, begun + "15 writes Y on", 22)
    refused(built, begun + "15 writes Y on", 23, "must go on by 22 ps")
    open_end = drive("X Y", ROWS, moves=(move("idle", "open", steps=steps((3, None))),))
    permitted(open_end, "1 begins 0; 999 writes X on; 999 enters open", 999)


def test_a_wait_of_a_move_without_writes() -> None:
    rows = {"idle": "off off", "kept": "keep keep"}
    built = drive("X Y", rows, moves=(move("idle", "kept", steps=steps((3, 4))),))
    permitted(built, "1 begins 0; 5 enters kept", 9)
    refused(built, "1 begins 0; 1 enters kept", 9, "cannot come before 4 ps")


def ordered(order: Order, *, how: How = How.SINGLY, ports: str = "----") -> Drive:
    pins = tuple(
        pin(switch, level, port=None if port == "-" else port)
        for switch, level, port in zip("ABCD", (Level.LOW, Level.LOW, Level.HIGH, Level.LOW), ports, strict=True)
    )
    rows = {"idle": "off on on on", "next": "on off free free"}
    return drive("A B C D", rows, moves=(move("idle", "next"),), pins=pins, writes=writes(how, span(1), order))


@pytest.mark.parametrize(
    ("order", "good"),
    [
        (Order.OFFS_FIRST, ["BDAC", "DBCA", "BDCA", "DBAC"]),
        (Order.ONS_FIRST, ["ACBD", "CADB", "ACDB", "CABD"]),
        (Order.TABLE, ["ABCD"]),
        (Order.ANY, ["ABCD", "DCBA", "BADC", "CADB"]),
    ],
)
def test_order_of_single_writes(order: Order, good: list[str]) -> None:
    """C and D are released: C rests on, D off."""
    built, to = ordered(order), {"A": "on", "B": "off", "C": "free", "D": "free"}
    for names in ("ABCD", "BDAC", "DBCA", "BDCA", "DBAC", "ACBD", "CADB", "ACDB", "CABD", "DCBA", "BADC"):
        writings = [f"{time} writes {name} {to[name]}" for time, name in enumerate(names)]
        lines = ";".join(["0 begins 0", *writings, "3 enters next"])
        if names in good or order is Order.ANY:
            permitted(built, lines, 9, literals="A, B")
        else:
            refused(built, lines, 9, "the order of the writes asks for", literals="A, B")


def test_ports_only_count_by_port() -> None:
    single = ordered(Order.TABLE, ports="pppp")
    refused(single, "0 begins 0; 0 writes A on, B off, C free, D free", 9, "now is A on", literals="A, B")
    permitted(gapped(How.BY_PORT), "1 begins 0; 1 writes Y on; 6 writes X on; 6 enters both", 9)  # no line in pins


def test_a_port_with_a_turn_on_is_no_turn_off_and_comes_where_its_first_column_is() -> None:
    mixed = ordered(Order.OFFS_FIRST, how=How.BY_PORT, ports="pp--")
    late = "0 begins 0; 0 writes D free; 1 writes A on, B off; 2 writes C free; 2 enters next"
    permitted(mixed, late, 9, literals="A, B")
    refused(mixed, "0 begins 0; 0 writes A on, B off", 9, "the order of the writes asks for", literals="A, B")
    table = ordered(Order.TABLE, how=How.BY_PORT, ports="p-p-")
    first = "0 begins 0; 0 writes A on, C free; 1 writes B off; 2 writes D free; 2 enters next"
    permitted(table, first, 9, literals="A, B")
    refused(table, "0 begins 0; 0 writes B off", 9, "the order of the writes asks for", literals="A, B")


def test_ports() -> None:
    built = ordered(Order.OFFS_FIRST, how=How.BY_PORT, ports="p-pq")  # A and C share a port: a turn-on
    permitted(
        built, "0 begins 0; 0 writes D free; 1 writes B off; 2 writes C free, A on; 2 enters next", 9, literals="A, B"
    )
    refused(built, "0 begins 0; 0 writes A on, C free", 9, "asks for B off or D free", literals="A, B")
    refused(built, "0 begins 0; 0 writes A on", 9, "what may be written now is B off or D free", literals="A, B")
    mixed = ordered(Order.TABLE, how=How.BY_PORT, ports="-ppp")  # a turn-on, though B and D turn off
    permitted(mixed, "0 begins 0; 0 writes A on; 1 writes B off, C free, D free; 1 enters next", 9, literals="A, B")
    mixed = ordered(Order.OFFS_FIRST, how=How.BY_PORT, ports="-ppp")
    permitted(mixed, "0 begins 0; 0 writes B off, C free, D free; 1 writes A on; 1 enters next", 9, literals="A, B")
