"""The firmware's automaton: which writes follow each other in which times, and where trips cut in."""

from collections import deque
from itertools import permutations

import pytest
from build import AT_ONCE, after, carrier, drive, move, pin, span, steps, trip, when, writes

from seqcheck.drive import RESET, Drive, How, Level, Order, Trigger, Trip, Update
from seqcheck.firmware import Edge, Firmware, State
from seqcheck.verdict import Act
from seqcheck.writing import FREE


def unfolded(built: Drive, *, punctual: bool = True, tracked: str = "") -> Firmware:
    """The firmware of a drive, with the carriers in `tracked` holding writes of all switches."""
    return Firmware(built, frozenset(tracked.split()), frozenset(built.columns), punctual)


def states(firmware: Firmware) -> list[State]:
    """Every state that can be reached."""
    found = {firmware.start(): None}
    waiting = deque(found)
    while waiting:
        for edge in firmware.edges(waiting.popleft()):
            if edge.step.target not in found:
                found[edge.step.target] = None
                waiting.append(edge.step.target)
    return list(found)


def words(firmware: Firmware, edge: Edge) -> str:
    """An edge in words: its time, then what it does."""
    said = []
    for deed in edge.step.deeds:
        cells = "+".join(
            f"{firmware.drive.columns[switch]} {_cell(firmware, code)}" for switch, code in sorted(deed.writes)
        )
        said.append(cells if deed.act is Act.WRITES else deed.act.value)
    return f"{edge.lo}..{'' if edge.hi is None else edge.hi} {', '.join(said)}"


def _cell(firmware: Firmware, code: int) -> str:
    cell = firmware.writing.cell(code)
    return cell.value if hasattr(cell, "value") else str(cell)


def runs(firmware: Firmware, state: State | None = None, *, first: int | None = None) -> set[str]:
    """All runs that begin at rest, to their end, without trips that cut in; of one move or trip if `first` says so."""
    found = set()
    start = firmware.start() if state is None else state
    waiting: list[tuple[State, tuple[str, ...]]] = [(start, ())]
    for here, told in waiting:
        for edge in firmware.edges(here):
            if told and edge.starts_run:
                continue
            if not told and first is not None and all(deed.number != first for deed in edge.step.deeds):
                continue
            if edge.step.target.hand >= 0:
                continue
            so_far = (*told, words(firmware, edge))
            if edge.step.target.run < 0:
                found.add(" | ".join(so_far))
            else:
                waiting.append((edge.step.target, so_far))
    return found


SWAP = {"a": "on off", "b": "off on"}
GO = (move("a", "b"),)


def swap(
    *values: str | tuple[int, int | None], how: How = How.SINGLY, late: int = 0, punctual: bool = True
) -> set[str]:
    """The runs from a to b with these steps, writes 3 to 4 ps apart, turn-offs first."""
    built = drive(
        "A B",
        SWAP,
        moves=(move("a", "b", steps=steps(*values)),),
        writes=writes(how, span(3, 4), Order.OFFS_FIRST),
        late=late,
    )
    return runs(unfolded(built, punctual=punctual))


# Times between writes


@pytest.mark.parametrize(
    ("values", "right"),
    [
        # the gap holds across steps too; the last write is the entry
        (("A off",), "0.. begins, A off | 3..4 B on, enters"),
        (("A off", (9, 10)), "0.. begins, A off | 9..10 B on, enters"),
        # a wait takes the place of the gap, and several waits add up, also across steps that change nothing
        (("A off", (1, 2), (5, 6)), "0.. begins, A off | 6..8 B on, enters"),
        (("A off", (1, 2), "B off", (5, 6)), "0.. begins, A off | 6..8 B on, enters"),
        (("A off", (1, None), (5, 6)), "0.. begins, A off | 6.. B on, enters"),
        # a wait before the first write delays it, and takes no gap with it
        (((9, 10),), "0.. begins | 9..10 A off | 3..4 B on, enters"),
        # a wait after the last write belongs to the move
        (("A off", "B on", (9, 10)), "0.. begins, A off | 3..4 B on | 9..10 enters"),
        # steps that write what is there vanish
        (("A on", "B off", "A off", "A off"), "0.. begins, A off | 3..4 B on, enters"),
        # what a step wrote is what the next one differs from
        (("A off", "A on"), "0.. begins, A off | 3..4 A on | 3..4 A off | 3..4 B on, enters"),
    ],
)
def test_gaps_and_waits(values: tuple[str | tuple[int, int | None], ...], right: str) -> None:
    """One run, whose times follow from the steps."""
    assert swap(*values) == {right}


def test_lateness() -> None:
    """Each wait and each gap may be late, so that two waits in a row may be late twice; lower bounds stay."""
    assert swap("A off", (5, 6), (1, 1), late=10) == {"0.. begins, A off | 6..27 B on, enters"}
    assert swap("A off", late=10) == {"0.. begins, A off | 3..14 B on, enters"}
    assert swap("A off", (5, 6), late=10, punctual=False) == {"0.. begins, A off | 5.. B on, enters"}


def test_together_takes_no_time() -> None:
    """Consecutive steps come at one instant however late firmware is, but one after the other."""
    assert swap("A off", how=How.TOGETHER, late=10) == {"0.. begins, A off | 0..0 B on, enters"}
    assert swap("A off", how=How.TOGETHER, punctual=False) == {"0.. begins, A off | 0..0 B on, enters"}
    assert swap(how=How.TOGETHER) == {"0.. begins, A off+B on, enters"}


def test_nothing_to_do() -> None:
    """A move that changes nothing and waits for nothing is one event."""
    built = drive("A B", {"a": "on off", "c": "keep keep"}, moves=(move("a", "c"),))
    assert runs(unfolded(built)) == {"0.. begins, enters"}


# Orders

TABLE = {"a": "on off on free", "b": "off on off on"}
PINS = (pin("A"), pin("B"), pin("C"), pin("D", Level.HIGH))


def orders(order: Order, how: How = How.SINGLY, ports: str = "    ") -> set[tuple[str, ...]]:
    """In which orders a and c go off, b and d on."""
    pins = tuple(pin(name, port=port.strip() or None) for name, port in zip("ABCD", ports, strict=True))
    built = drive("A B C D", TABLE, moves=GO, pins=pins, writes=writes(how, span(1), order))
    found = set()
    for told in runs(unfolded(built)):
        acts = [act for edge in told.split(" | ") for act in edge.split(" ", 1)[1].split(", ")]
        found.add(tuple(act for act in acts if act not in ("begins", "enters")))
    return found


OFFS, ONS = ("A off", "C off"), ("B on", "D on")


def test_every_order() -> None:
    """Each order that the word allows, and no other."""
    first, second = set(permutations(OFFS)), set(permutations(ONS))
    assert orders(Order.OFFS_FIRST) == {(*one, *other) for one in first for other in second}
    assert orders(Order.ONS_FIRST) == {(*other, *one) for one in first for other in second}
    assert orders(Order.TABLE) == {("A off", "B on", "C off", "D on")}
    assert orders(Order.ANY) == set(permutations((*OFFS, *ONS)))


def test_ports() -> None:
    """The pins of a port change in one instant; a port that turns anything on counts as a turn-on."""
    assert orders(Order.OFFS_FIRST, How.BY_PORT, "XYXY") == {("A off+C off", "B on+D on")}
    assert orders(Order.OFFS_FIRST, How.BY_PORT, "XXY ") == {
        ("C off", "A off+B on", "D on"),
        ("C off", "D on", "A off+B on"),
    }
    assert orders(Order.TABLE, How.BY_PORT, " X X") == {("A off", "B on+D on", "C off")}
    assert orders(Order.TABLE, How.SINGLY, "XXXX") == {("A off", "B on", "C off", "D on")}


@pytest.mark.parametrize(("rests", "first"), [(Level.LOW, True), (Level.HIGH, False), (Level.UNKNOWN, False)])
def test_released_pins_in_the_order(rests: Level, first: bool) -> None:
    """`free` is a turn-off where the pin rests off, else a turn-on."""
    rows = {"a": "on on", "b": "free off"}
    built = drive(
        "A B", rows, moves=GO, pins=(pin("A", rests), pin("B")), writes=writes(How.SINGLY, span(1), Order.OFFS_FIRST)
    )
    late = "0.. begins, B off | 1..1 A free, enters"
    both = {late, "0.. begins, A free | 1..1 B off, enters"}
    assert runs(unfolded(built)) == (both if first else {late})


def test_order_holds_within_an_item() -> None:
    """A step's turn-ons come before the row's turn-offs."""
    built = drive(
        "A B",
        SWAP,
        moves=(move("a", "b", steps=steps("B on")),),
        writes=writes(How.SINGLY, span(1), Order.OFFS_FIRST),
    )
    assert runs(unfolded(built)) == {"0.. begins, B on | 1..1 A off, enters"}


# Triggers


def test_triggers() -> None:
    """An event waits for the loop or what is said of it, a timed move for neither; both count from entry."""
    rows = {"a": "on off", "b": "off off"}
    kinds: list[tuple[Trigger, str]] = [
        (when(), "7.."),
        (when(9, 20), "9..20"),
        (when(3), "7.."),
        (after(2, 4), "2..9"),
        (AT_ONCE, "0..0"),
    ]
    for trigger, times in kinds:
        built = drive("A B", rows, moves=(move("a", "b", trigger),), loop=7, late=5)
        assert runs(unfolded(built)) == {f"{times} begins, A off, enters"}


def test_stay() -> None:
    """A mode lasts no longer than the least of its timed moves; events do not end it."""
    rows = {"a": "on off", "b": "off off"}
    timed = (move("a", "b", after(2, 9)), move("a", "b", after(3, 6)), move("a", "b", when(0, 4)))
    firmware = unfolded(drive("A B", rows, moves=timed, late=1))
    assert firmware.deadline(firmware.start()) == 7
    assert unfolded(drive("A B", rows, moves=timed, late=1), punctual=False).deadline(firmware.start()) is None
    assert unfolded(drive("A B", rows, moves=timed[2:])).deadline(firmware.start()) is None
    at_once = unfolded(drive("A B", rows, moves=(*timed, move("a", "b", AT_ONCE)), late=1))
    assert at_once.deadline(firmware.start()) == 0


# Trips

PAUSED = steps("A off", (5, 6))


def tripped(*trips: Trip, unbroken: bool = False) -> Firmware:
    """a goes to b with a pause, b to c; with trips."""
    rows = {"a": "on off", "b": "off on", "c": "off off", "t": "off off"}
    moves = (move("a", "b", steps=PAUSED, unbroken=unbroken), move("b", "c", when(4)))
    return unfolded(drive("A B", rows, moves=moves, trips=trips))


def hands(firmware: Firmware) -> set[tuple[str, int, int]]:
    """(mode, run, hand) of every state with a trip in hand."""
    return {(one.mode, one.run, one.hand) for one in states(firmware) if one.hand >= 0}


def test_trip_arrives_as_late_as_possible() -> None:
    """Where it may arrive it is taken on the spot; in hand it is only where it cannot arrive any more."""
    firmware = tripped(trip("x", "a", "t", within=9))
    start = firmware.start()
    assert "0.. arrives, begins, A off, enters" in runs(firmware, start)
    pausing = next(one for one in states(firmware) if one.run == 0 and one.hand < 0)
    assert [words(firmware, edge) for edge in firmware.edges(pausing) if edge.starts_run] == [
        "0.. arrives, begins, enters"
    ]
    # After a's move has entered b it is in hand: there, and in c.
    assert hands(firmware) == {("b", -1, 0), ("c", -1, 0)}
    (arriving,) = [one for one in firmware.edges(pausing) if one.step.target.hand == 0]
    assert words(firmware, arriving) == "5..6 arrives, B on, enters"
    assert arriving.resets_y
    assert firmware.hand_deadline(arriving.step.target) == 9
    assert {one.y_hi for one in firmware.edges(arriving.step.target) if one.starts_run} == {None, 9}


def test_trip_without_a_time_is_never_in_hand() -> None:
    """Its arrival is its first write."""
    assert hands(tripped(trip("x", "a", "t"))) == set()


def test_target_drops_a_trip() -> None:
    """Nothing is left to do for a trip to c once c is entered."""
    assert hands(tripped(trip("x", "a", "c", within=9))) == {("b", -1, 0)}


def test_unbroken_move_is_not_cut() -> None:
    """The trip waits, its time counts from the end of the move, and it has no deadline before."""
    firmware = tripped(trip("x", "a", "t", within=9), unbroken=True)
    pausing = next(one for one in states(firmware) if one.run == 0 and one.hand < 0)
    assert not any(edge.starts_run for edge in firmware.edges(pausing))
    (arriving,) = [one for one in firmware.edges(pausing) if one.step.target.hand == 0]
    assert (words(firmware, arriving), arriving.resets_y) == ("5..6 arrives, B on, enters", True)
    # A hand that comes from elsewhere starts anew at the end as well.
    held = pausing._replace(hand=0)
    assert firmware.hand_deadline(held) is None
    (going_on,) = firmware.edges(held)
    assert (words(firmware, going_on), going_on.resets_y) == ("5..6 B on, enters", True)


def test_hand_keeps_its_time_elsewhere() -> None:
    """A move that may be interrupted does not start the time of a trip in hand anew."""
    firmware = tripped(trip("x", "a", "t", within=9))
    (waiting,) = [one for one in states(firmware) if one.mode == "b" and one.hand == 0]
    assert {edge.resets_y for edge in firmware.edges(waiting) if edge.step.target.hand == 0} == {False}


def test_interrupted_move_is_forgotten() -> None:
    """What it has written stays: nothing is left to write for the trip."""
    firmware = tripped(trip("x", "a", "t"))
    pausing = next(one for one in states(firmware) if one.run == 0)
    assert "0.. arrives, begins, enters" in runs(firmware, pausing)
    (edge,) = [edge for edge in firmware.edges(pausing) if edge.starts_run]
    assert edge.step.target == State("t", -1, 0, (), 0, None, -1, edge.step.target.put)
    assert edge.step.target.put[0] == (0, 0)


def test_trips_do_not_interrupt_trips() -> None:
    """Unless hardware takes them, in trips taken where they are armed; and one trip is in hand at a time."""
    slow = trip("x", "a", "t", within=9, steps=PAUSED)
    soft = trip("y", "a b c", "t", within=9)
    hard = trip("z", "a", "c", at_once=True)
    for other, cut in ((soft, set()), (hard, {"a"})):
        firmware = tripped(slow, other)
        running = [one for one in states(firmware) if one.run == 2 and one.hand < 0]
        assert {one.mode for one in running} == {"a", "b", "c"}
        assert {one.mode for one in running if any(edge.starts_run for edge in firmware.edges(one))} == cut
    firmware = tripped(slow, soft)
    held = [edge for one in states(firmware) if one.hand == 0 for edge in firmware.edges(one)]
    assert {deed.number for edge in held if edge.starts_run for deed in edge.step.deeds} == {1, 2}, "a move, and x"


def test_break_input_leaves_a_trip_in_hand() -> None:
    """It is not taken while the break input's run lasts; its time starts anew at the end, and it is taken then."""
    firmware = tripped(trip("x", "a", "t", within=9), trip("z", "b", "c", at_once=True, steps=steps("B off", (5, 6))))
    running = [one for one in states(firmware) if one.run == 3 and one.hand == 0]
    assert [words(firmware, edge) for one in running for edge in firmware.edges(one)] == ["5..6 enters"]
    (ending,) = [edge for one in running for edge in firmware.edges(one)]
    assert (ending.resets_y, ending.step.target.mode, ending.step.target.hand) == (True, "c", 0)
    assert [words(firmware, edge) for edge in firmware.edges(ending.step.target)] == ["0.. begins, enters"]


def test_break_input_comes_in_unbroken_moves_too() -> None:
    """But not in its own run, nor where it is not armed."""
    hard = trip("z", "a", "t", at_once=True, steps=PAUSED)
    firmware = tripped(hard, unbroken=True)
    cut = {(one.mode, one.run) for one in states(firmware) if any(e.starts_run for e in firmware.edges(one))}
    assert cut == {("a", -1), ("a", 0), ("b", -1)}
    assert runs(firmware, first=2) == {"0.. begins, A off | 5..6 enters"}


def test_break_input_writes_in_one_instant() -> None:
    """Its first step or row; what follows is written as the file says."""
    rows = {"a": "on on off", "t": "off off on"}
    gaps = writes(How.SINGLY, span(3), Order.TABLE)
    for values, right in [
        ((), "0.. begins, A off+B off+C on, enters"),
        (("A off, B off",), "0.. begins, A off+B off | 3..3 C on, enters"),
        (("A off",), "0.. begins, A off | 3..3 B off | 3..3 C on, enters"),
        # Already so, and followed by a wait: the wait is kept, and what comes after it is written singly.
        (("A on", (9, 9)), "0.. begins | 9..9 A off | 3..3 B off | 3..3 C on, enters"),
    ]:
        built = drive("A B C", rows, trips=(trip("z", "a", "t", at_once=True, steps=steps(*values)),), writes=gaps)
        assert runs(unfolded(built)) == {right}


def test_break_input_cancels_what_is_held() -> None:
    """What is written is then what is in effect, so `keep` keeps that."""
    rows = {"a": "off off", "b": "r off", "t": "keep off"}
    built = drive(
        "A B",
        rows,
        moves=(move("a", "b"),),
        trips=(trip("z", "b", "t", at_once=True),),
        carriers=(carrier("r", span(5), span(5), update=Update.AT_RISE),),
    )
    firmware = unfolded(built, tracked="r")
    ends = {one.put for one in states(firmware) if one.mode == "t"}
    assert ends == {((0, 0), (0, 0), ())}
    risen = firmware.updated(next(one for one in states(firmware) if one.mode == "b"), 0)
    (edge,) = firmware.edges(risen)
    assert edge.step.target.put[0] == edge.step.target.put[1] == (risen.put[1][0], 0)


def test_reset_drops_everything() -> None:
    """Every pin is released in one instant, nothing is held or in hand any more, and no firmware trip is taken."""
    rows = {"a": "off off", "b": "p off", "reset": "free free"}
    built = drive(
        "A B",
        rows,
        moves=(move("a", "b"), move("b", RESET)),
        trips=(trip("dog", "a b", RESET, origins="a b reset"), trip("x", "a", "a", within=9, origins="a b reset")),
        carriers=(carrier("p", span(5), span(5), update=Update.WITHIN_PERIOD),),
        pins=(pin("A"), pin("B")),
    )
    firmware = unfolded(built, tracked="p")
    every = states(firmware)
    assert any(one.put[2] for one in every), "something is held before"
    assert any(one.hand == 1 for one in every), "something is in hand before"
    resets = [one for one in every if one.mode == RESET]
    free = (FREE, FREE)
    assert resets == [State(RESET, -1, 0, (), 0, None, -1, (free, free, ()))]
    assert firmware.edges(resets[0]) == ()
    into = [edge for one in every for edge in firmware.edges(one) if edge.step.target == resets[0]]
    assert all(edge.step.deeds[-1].act is Act.ENTERS and len(edge.step.deeds) == 2 for edge in into)


def test_reset_at_the_start_is_left_by_moves_only() -> None:
    """A break input armed in every mode but reset."""
    rows = {"reset": "free free", "a": "off off"}
    built = drive(
        "A B",
        rows,
        moves=(move(RESET, "a", when(9)),),
        trips=(trip("x", "a", "a", within=9, origins="a"), trip("dog", "a", RESET)),
        pins=(pin("A"), pin("B")),
    )
    assert runs(unfolded(built)) == {"9.. begins, A off+B off, enters"}


def test_edges_are_worked_out_once() -> None:
    """The same state gives the same edges, and only states at rest have no run."""
    firmware = tripped(trip("x", "a", "t", within=9))
    for one in states(firmware):
        assert firmware.edges(one) is firmware.edges(one)
        assert (one.run < 0) == (one.latest is None and one.soonest == 0 and not one.left)
