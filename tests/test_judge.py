"""The judge against answers derived by hand, and its automaton against the definition of what is possible."""

from dataclasses import replace
from random import Random

import pytest
from judge.build import HERE, carrier, drive, move, sets, singly, span, trip, waits
from judge.delays import delays_of
from judge.draws import draw
from judge.literal import Says, Verdict, judge
from judge.possible import Stretch, aged, can, due, heard, settled, stretches
from judge.shorts import asked as shorts_of
from judge.smaller import smaller

from seqcheck.drive import Above, Drive, How, Interlock, Level, Order, Part, Pin, Update
from seqcheck.hazards import Delays, Literal
from seqcheck.language.reading import read
from seqcheck.quantities import INSTANT, Interval

A, B = Literal("A"), Literal("B")
SLOW = {"A": (2, 3, 4, 7), "B": (2, 3, 4, 7)}
"""Paths that turn on in 2 to 3 ps and off in 4 to 7 ps: they need a gap of 7 - 2 = 5 ps."""

SAFE = (Says.SAFE, None)


def unsafe(overlap: int | None) -> tuple[Says, int | None]:
    """What `of` gives for an unsafe drive."""
    return (Says.UNSAFE, overlap)


def asked(built: Drive, *literals: Literal, interlocks: bool = True, bounded: bool = True) -> Verdict:
    """The judge's verdict on a built drive, for both switches on unless literals are given."""
    chosen = literals or (A, B)
    return judge(built, chosen, delays_of(built, chosen), interlocks=interlocks, bounded=bounded)


def of(verdict: Verdict) -> tuple[Says, int | None]:
    """The verdict and the overlap."""
    return verdict.says, verdict.overlap


# Waits and the paths' delays


@pytest.mark.parametrize(("wait", "expected"), [(5, SAFE), (4, unsafe(1)), (3, unsafe(2)), (0, unsafe(5))])
def test_gap_boundary(wait: int, expected: tuple[Says, int | None]) -> None:
    """A can conduct until 7 after its turn-off, B from wait + 2: they meet for 7 - 2 - wait."""
    steps = (sets(A="off"), waits(wait, wait + 2))
    built = drive({"a": "on off", "b": "off on"}, [move("a", "b", *steps, when=(0, None))], paths=SLOW)
    assert of(asked(built)) == expected
    assert of(asked(built, bounded=False)) == expected


def pulse(on: int, off: int, length: int) -> Drive:
    """A is commanded on for `length`, at most once every 100 ps."""
    rows = {"i": "off off", "p": "on off"}
    moves = [move("i", "p", when=(100, None)), move("p", "i", after=span(length))]
    return drive(rows, moves, paths={"A": (on, on, off, off)})


@pytest.mark.parametrize(
    ("on", "off", "length", "expected"),
    [
        (50, 20, 25, SAFE),  # prolonged to 45, less 50: nothing is left
        (20, 50, 25, unsafe(55)),  # prolonged to 75, less 20
        (50, 20, 30, SAFE),  # exactly 50 long: a single instant
        (50, 20, 31, unsafe(1)),
    ],
)
def test_short_command(on: int, off: int, length: int, expected: tuple[Says, int | None]) -> None:
    """Inertial and transport delay: out - in + length, where positive."""
    assert of(asked(pulse(on, off, length), A)) == expected


def test_two_short_commands_join() -> None:
    """on 30, off 20: [0, 10] and [25, 40] are prolonged to [0, 60], less 30: possible for 30 ps."""
    rows = {"i": "off off", "p": "on off", "q": "off off", "r": "on off", "s": "off off"}
    moves = [
        move("i", "p", when=(0, None)),
        move("p", "q", after=span(10)),
        move("q", "r", after=span(15)),
        move("r", "s", after=span(15)),
    ]
    paths = {"A": (30, 30, 20, 20)}
    assert of(asked(drive(rows, moves, paths=paths), A)) == unsafe(30)
    # With 21 ps between them the stretches do not touch: [0, 30] gives nothing, [31, 66] less 30 gives 5.
    moves[2] = move("q", "r", after=span(21))
    assert of(asked(drive(rows, moves, paths=paths), A)) == unsafe(5)


def test_pulse_of_no_length() -> None:
    """Written on and off in one instant: prolonged by 5, less 2."""
    rows = {"i": "off off", "j": "off off"}
    moves = [move("i", "j", sets(A="on"), when=(0, None))]
    paths = {"A": (2, 3, 1, 5)}
    assert of(asked(drive(rows, moves, paths=paths), A)) == unsafe(3)
    assert of(asked(drive(rows, moves, paths=paths, writes=singly(1)), A)) == unsafe(4)
    assert of(asked(drive(rows, moves, paths={"A": (5, 5, 5, 5)}), A)) == SAFE


def test_pause_of_no_length() -> None:
    """Off and on in one instant, every 2 ps: with no turn-off time the stretches still touch, so they join for ever."""
    rows = {"i": "off off", "p": "on off"}
    moves = [move("i", "p", when=(0, None)), move("p", "p", sets(A="off"), after=span(2))]
    assert of(asked(drive(rows, moves, paths={"A": (3, 3, 0, 0)}), A)) == unsafe(None)
    # Off for 1 ps they do not touch, and neither is long enough.
    moves[1] = move("p", "p", sets(A="off"), waits(1), after=span(2))
    assert of(asked(drive(rows, moves, paths={"A": (3, 3, 0, 0)}), A)) == SAFE


def test_wanted_off() -> None:
    """A off from the beginning: possible without end; A off for 1 ps with off 3 and on up to 4: 1 + 4 - 3."""
    rows = {"i": "on off", "j": "on off"}
    gap = move("i", "j", sets(A="off"), waits(1), when=(0, None))
    built = drive(rows, [gap], paths={"A": (0, 4, 3, 9)})
    assert of(asked(built, Literal("A", on=False))) == unsafe(2)
    assert of(asked(drive({"i": "off off"}), Literal("A", on=False))) == unsafe(None)


# Disciplines of writing


@pytest.mark.parametrize(
    ("order", "there", "back"),
    [
        (Order.OFFS_FIRST, SAFE, SAFE),
        (Order.ONS_FIRST, unsafe(10), unsafe(10)),  # B possible from 2 on, A until 5 + 7
        (Order.ANY, unsafe(10), unsafe(10)),
        (Order.TABLE, SAFE, unsafe(10)),  # A is written first: turned off on the way there, on on the way back
    ],
)
def test_orders(order: Order, there: tuple[Says, int | None], back: tuple[Says, int | None]) -> None:
    """One at a time, 5 ps apart."""
    for rows, expected in (({"a": "on off", "b": "off on"}, there), ({"a": "off on", "b": "on off"}, back)):
        built = drive(rows, [move("a", "b", when=(0, None))], paths=SLOW, writes=singly(5, 5, order))
        assert of(asked(built)) == expected


def test_a_release_to_off_is_a_turn_off() -> None:
    """A's pin rests off, so that it is freed before B is turned on, 5 ps apart."""
    rows, writes = {"a": "on off", "b": "free on"}, singly(5, 5, Order.OFFS_FIRST)
    moves = [move("a", "b", when=(0, None))]
    pins = [pin("A"), pin("B")]
    assert of(asked(drive(rows, moves, paths=SLOW, writes=writes, pins=pins))) == SAFE
    # A pin that rests on is a turn-on: in any order with B, and on for ever.
    pins = [pin("A", Level.HIGH), pin("B")]
    assert of(asked(drive(rows, moves, paths=SLOW, writes=writes, pins=pins))) == unsafe(None)


def test_gap_stands_between_steps_too() -> None:
    """`set A off` and the row are written 5 ps apart; a wait between them takes the place of that gap."""
    rows, writes = {"a": "on off", "b": "off on"}, singly(5)
    plain = drive(rows, [move("a", "b", sets(A="off"), when=(0, None))], paths=SLOW, writes=writes)
    assert of(asked(plain)) == SAFE
    waited = drive(rows, [move("a", "b", sets(A="off"), waits(1), when=(0, None))], paths=SLOW, writes=writes)
    assert of(asked(waited)) == unsafe(4)
    # A step that changes nothing vanishes, and the waits around it are summed: 1 + 3.
    steps = (sets(A="off"), waits(1), sets(B="off"), waits(3))
    summed = drive(rows, [move("a", "b", *steps, when=(0, None))], paths=SLOW, writes=writes)
    assert of(asked(summed)) == unsafe(1)


def test_port_is_one_write() -> None:
    """Both pins on one port change in one instant: 7 - 2 together; on two ports 5 ps apart, turn-offs first, never."""
    rows, moves = {"a": "on off", "b": "off on"}, [move("a", "b", when=(0, None))]
    writes = replace(singly(5, 5, Order.OFFS_FIRST), how=How.BY_PORT)
    same = drive(rows, moves, paths=SLOW, writes=writes, pins=[pin("A", port="X"), pin("B", port="X")])
    assert of(asked(same)) == unsafe(5)
    apart = drive(rows, moves, paths=SLOW, writes=writes, pins=[pin("A", port="X"), pin("B", port="Y")])
    assert of(asked(apart)) == SAFE


def pin(
    switch: str, rests: Level = Level.LOW, after: Interval = INSTANT, port: str | None = None, *, high: bool = True
) -> Pin:
    """A pin that turns its switch on with a high level."""
    return Pin(HERE, switch, f"G{switch}", high, rests, after, port)


def test_lateness_adds_to_each_wait() -> None:
    """A is on for two waits of 1 ps: with on 4 and off 1 it takes 4 ps to be possible for 1 ps."""
    rows = {"i": "off off", "j": "off off"}
    moves = [move("i", "j", sets(A="on"), waits(1), waits(1), when=(0, None))]
    paths = {"A": (4, 4, 1, 1)}
    assert of(asked(drive(rows, moves, paths=paths), A)) == SAFE
    assert of(asked(drive(rows, moves, paths=paths, late=1), A)) == unsafe(1)
    assert of(asked(drive(rows, moves, paths=paths), A, bounded=False)) == unsafe(None)


# Modes and moves


@pytest.mark.parametrize(
    ("options", "loop", "expected"),
    [
        ({"when": (4, None)}, None, unsafe(1)),
        ({"when": (4, None)}, 5, SAFE),
        ({"when": (5, 6)}, None, SAFE),
        ({"when": (3, 3)}, 4, SAFE),  # the window is closed before the loop comes round
        ({"after": span(3, 9)}, None, unsafe(2)),
        ({"after": span(5, 9)}, None, SAFE),
        ({}, None, unsafe(5)),  # at once
        ({}, 5, unsafe(5)),  # the loop binds only moves with `when`
    ],
)
def test_dwell(options: dict[str, object], loop: int | None, expected: tuple[Says, int | None]) -> None:
    """Between A off and B on stands one mode; they meet for 5 less its shortest stay."""
    rows = {"a": "on off", "m": "off off", "b": "off on"}
    moves = [move("a", "m", when=(9, None)), move("m", "b", **options)]  # type: ignore[arg-type]
    assert of(asked(drive(rows, moves, paths=SLOW, loop=loop))) == expected


def test_timed_move_ends_the_mode() -> None:
    """A is on for 2 ps at most (3 less 2 is left: on 3, off 2), one more where firmware is 1 ps late."""
    rows = {"i": "off off", "p": "on off", "e": "off off"}
    moves = [move("i", "p", when=(0, None)), move("p", "e", after=span(0, 1)), move("p", "e", after=span(1, 8))]
    paths = {"A": (3, 3, 2, 2)}
    assert of(asked(drive(rows, moves, paths=paths), A)) == SAFE
    assert of(asked(drive(rows, moves, paths=paths, late=1), A)) == unsafe(1)
    assert of(asked(drive(rows, moves, paths=paths), A, bounded=False)) == unsafe(None)


def test_keep_and_entry_after_trailing_wait() -> None:
    """`keep` writes nothing. The trailing wait of 5 belongs to the move, so that B comes 5 later."""
    rows = {"a": "on off", "m": "off keep", "b": "keep on"}
    moves = [move("a", "m", sets(A="off"), waits(5), when=(0, None)), move("m", "b")]
    assert of(asked(drive(rows, moves, paths=SLOW))) == SAFE
    moves = [move("a", "m", waits(5), when=(0, None)), move("m", "b")]
    assert of(asked(drive(rows, moves, paths=SLOW))) == unsafe(5)


def test_leading_wait() -> None:
    """A wait before the first write delays it from the beginning of the move."""
    rows = {"a": "on off", "m": "off off", "b": "off on"}
    for wait, expected in ((5, SAFE), (3, unsafe(2))):
        moves = [move("a", "m", when=(0, None)), move("m", "b", waits(wait))]
        assert of(asked(drive(rows, moves, paths=SLOW))) == expected


def test_no_time_is_no_hazard() -> None:
    """Both are on in a mode that lasts no time, and without delays."""
    rows = {"a": "on off", "m": "on on", "b": "off on"}
    moves = [move("a", "m", when=(0, None)), move("m", "b")]
    assert of(asked(drive(rows, moves))) == SAFE
    assert of(asked(drive(rows, moves, paths={"A": (0, 0, 1, 1)}))) == unsafe(1)


def test_facts() -> None:
    """The overlap lies in the move (2 of its 3 ps) and the row after it (3 more)."""
    rows = {"a": "on off", "b": "off on"}
    fact = Above("s", "t")
    steps = (sets(A="off", B="on"), waits(4))
    built = drive(rows, [move("a", "b", *steps, when=(0, None), known=(fact,))], paths=SLOW)
    delays = delays_of(built, (A, B))
    assert judge(built, (A, B), delays).overlap == 5
    forbidden = judge(built, (A, B), delays, facts_forbid=lambda known: fact in known)
    assert of(forbidden) == unsafe(3)


# Carriers


def complementary(dead: Interval) -> Drive:
    """A on the output of a carrier, B on its complement."""
    one = carrier("m", span(5, 9), span(1, 5), dead=dead)
    rows = {"i": "off off", "a": "m ~m"}
    return drive(rows, [move("i", "a", when=(0, None))], paths=SLOW, carriers=[one])


@pytest.mark.parametrize(("dead", "expected"), [(5, SAFE), (4, unsafe(1)), (0, unsafe(None))])
def test_dead_time_of_a_carrier(dead: int, expected: tuple[Says, int | None]) -> None:
    """The dead time is the gap. With none, highs and lows of 5 ps follow each other faster than a turn-off takes."""
    assert of(asked(complementary(span(dead, dead + 3)))) == expected


def leaving(update: Update, *, low: int = 5, off: int = 0, hardware: bool | None = None) -> Drive:
    """A on a carrier, 5 ps high and `low` ps low; then A off and B on, by a move or a trip."""
    one = carrier("m", span(5), span(low), update=update, period=span(5 + low))
    rows = {"i": "off off", "a": "m off", "b": "off on"}
    moves = [move("i", "a", when=(0, None))]
    moves += [move("a", "b", when=(0, None))] if hardware is None else []
    trips = [] if hardware is None else [trip("t", "a", "b", at_once=hardware)]
    return drive(rows, moves, carriers=[one], trips=trips, paths={"A": (0, 0, off, off)})


def test_updates() -> None:
    """B acts at once, A when its carrier lets it.

    At rise: at worst written right after a rise, on for 5, and gone with the next rise, without a glitch. Within a
    period with a low of 1 and a turn-off of 2, which bridges the low: written s after the rise, gone s + 6 after it, so
    that A is possible from s to s + 8.
    """
    assert of(asked(leaving(Update.AT_ONCE))) == SAFE
    assert of(asked(leaving(Update.AT_RISE))) == unsafe(5)
    assert of(asked(leaving(Update.WITHIN_PERIOD))) == unsafe(5)
    assert of(asked(leaving(Update.AT_RISE, low=1, off=2))) == unsafe(7)
    assert of(asked(leaving(Update.WITHIN_PERIOD, low=1, off=2))) == unsafe(8)


def test_break_input_cancels_held_writes() -> None:
    """Firmware's write waits for the rise, that of hardware does not."""
    assert of(asked(leaving(Update.AT_RISE, hardware=False))) == unsafe(5)
    assert of(asked(leaving(Update.AT_RISE, hardware=True))) == SAFE


def test_cancelled_write_leaves_what_is_effective() -> None:
    """A is about to leave the carrier when hardware cancels that; the row keeps it there, with B on.

    Its turn-off bridges the lows, so that they meet for ever. Firmware's trip leaves the write held: on for 3, and 4.
    """
    one = carrier("m", span(3), span(3), update=Update.AT_RISE)
    rows = {"i": "off off", "a": "m off", "c": "off off", "b": "keep on"}
    moves = [move("i", "a", when=(0, None)), move("a", "c", when=(0, None))]
    for hardware, expected in ((True, unsafe(None)), (False, unsafe(7))):
        trips = [trip("t", "c", "b", origins="", at_once=hardware)]
        assert of(asked(drive(rows, moves, carriers=[one], trips=trips, paths={"A": (0, 0, 4, 4)}))) == expected


def test_held_write_is_dropped() -> None:
    """A's joining is held; writing off again drops it. On the carrier A is possible for ever: turn-offs bridge lows.

    The mode lasts no time; at worst a rise comes just then and A follows the carrier until the next one: on for 3, and
    4 for its turn-off.
    """
    one = carrier("m", span(3), span(3), update=Update.AT_RISE)
    rows = {"i": "off off", "a": "m off", "e": "off off"}
    there, back = move("i", "a", when=(7, None)), move("a", "e")
    paths = {"A": (0, 0, 4, 4)}
    assert of(asked(drive(rows, [there], carriers=[one], paths=paths), A)) == unsafe(None)
    assert of(asked(drive(rows, [there, back], carriers=[one], paths=paths), A)) == unsafe(7)


def test_a_write_waits_for_the_carrier_that_is_left() -> None:
    """From `m` to `n`, which never rises: held for `m`, so that A gets onto `n`, which is high for ever."""
    left = carrier("m", span(3), span(3), update=Update.AT_RISE)
    joined = carrier("n", Interval(1, None), None, update=Update.AT_RISE)
    rows = {"i": "off off", "a": "m off", "b": "n off"}
    moves = [move("i", "a", when=(0, None)), move("a", "b", when=(0, None))]
    assert of(asked(drive(rows, moves, carriers=[left, joined]), A)) == unsafe(None)
    # From a constant it waits for `n`, for ever.
    assert of(asked(drive(rows, [move("i", "b", when=(0, None))], carriers=[left, joined]), A)) == SAFE


def test_pulse_of_a_carrier() -> None:
    """High for 5 with a dead time of 3: on for 2, from the first moment on; a dead time of 6 leaves no pulse."""
    rows, moves = {"i": "off off", "a": "m off"}, [move("i", "a", when=(0, None))]
    for dead, expected in ((3, unsafe(2)), (6, SAFE)):
        one = carrier("m", span(5), span(5), dead=span(dead))
        assert of(asked(drive(rows, moves, carriers=[one]), A)) == expected


def test_fixed_reference() -> None:
    """Always high: `m` is on for ever and `~m` never. It never rises, so what is held for a rise is held for ever."""
    high = carrier("m", Interval(1, None), None, dead=span(2))
    rows = {"i": "off off", "a": "m ~m"}
    moves = [move("i", "a", when=(0, None))]
    assert of(asked(drive(rows, moves, carriers=[high]), A)) == unsafe(None)
    assert of(asked(drive(rows, moves, carriers=[high]), B)) == SAFE
    held = replace(high, update=Update.AT_RISE)
    assert of(asked(drive(rows, moves, carriers=[held]), A)) == SAFE


def test_two_switches_share_the_reference() -> None:
    """On the same output they are on together for the high of 2; on opposite ones never."""
    one = carrier("m", span(2), span(4))
    moves = [move("i", "a", when=(0, None))]
    assert of(asked(drive({"i": "off off", "a": "m m"}, moves, carriers=[one]))) == unsafe(2)
    assert of(asked(drive({"i": "off off", "a": "m ~m"}, moves, carriers=[one]))) == SAFE
    other = carrier("n", span(2), span(4))
    assert of(asked(drive({"i": "off off", "a": "m ~n"}, moves, carriers=[one, other]))) == unsafe(2)


# Trips


def run_on(within: int | None, late: int | None = None) -> Drive:
    """A trip heard in `a` only, taken perhaps in `c`, where A is on; a command of 2 makes A possible for 1."""
    rows = {"a": "off off", "c": "on off", "b": "off on"}
    moves = [move("a", "c", when=(0, None))]
    trips = [trip("t", "a", "b", within=within)]
    return drive(rows, moves, trips=trips, paths={"A": (3, 3, 2, 2)}, late=late)


@pytest.mark.parametrize(
    ("within", "late", "expected"),
    [
        (None, None, SAFE),
        (1, None, SAFE),  # on for 1, prolonged by 2, less 3
        (2, None, unsafe(1)),
        (1, 1, unsafe(1)),
        (None, 5, SAFE),  # lateness is not for an arrival that is the first write itself
        (9, None, unsafe(2)),  # all of A's turn-off, once it is possible
    ],
)
def test_firmware_runs_on(within: int | None, late: int | None, expected: tuple[Says, int | None]) -> None:
    """From arrival to the first write the firmware goes on, here into a mode that turns A on."""
    assert of(asked(run_on(within, late))) == expected


def test_firmware_runs_on_however_late() -> None:
    """A removed `within` does not force; no `within` is no bound that firmware keeps."""
    assert of(asked(run_on(1), bounded=False)) == unsafe(2)
    assert of(asked(run_on(None), bounded=False)) == SAFE


def cut(*, unbroken: bool, wait: int = 5, within: int | None = None) -> Drive:
    """A is turned off in a move that takes `wait`; a trip that is heard in that move only turns B on."""
    rows = {"a": "on off", "c": "off off", "b": "off on"}
    moves = [move("a", "c", sets(A="off"), waits(wait), when=(0, None), unbroken=unbroken)]
    trips = [trip("t", "", "b", origins="a", within=within)]
    return drive(rows, moves, trips=trips, paths={"A": (0, 0, 4, 4)})


def test_unbroken() -> None:
    """A trip cuts in right after A's turn-off, B meets it for 4; an unbroken move keeps it waiting for its 5, or 3."""
    assert of(asked(cut(unbroken=False))) == unsafe(4)
    assert of(asked(cut(unbroken=True))) == SAFE
    assert of(asked(cut(unbroken=True, wait=3))) == unsafe(1)


def test_within_starts_anew_after_an_unbroken_move() -> None:
    """The trip comes in the move; A is on again 1 ps after its end, which a `within` of 1 just reaches."""
    for within, expected in ((0, SAFE), (1, unsafe(4))):
        built = cut(unbroken=True, within=within)
        modes = built.modes | {"d": replace(built.modes["a"], name="d")}
        built = replace(built, modes=modes, moves=(*built.moves, move("c", "d", after=span(1))))
        assert of(asked(built)) == expected


def test_unbroken_move_stops_the_time_in_hand() -> None:
    """Heard in `a` only, 1 ps before an unbroken move of 5 begins; A is on again 1 ps after its end.

    A `within` of 1 has passed when the move begins, and starts anew at its end.
    """
    rows = {"a": "off off", "w": "off off", "c": "off off", "d": "on off", "b": "off on"}
    moves = [move("a", "w", when=(0, None)), move("w", "c", waits(5), after=span(1), unbroken=True)]
    moves += [move("c", "d", after=span(1))]
    for within, expected in ((0, SAFE), (1, unsafe(4))):
        trips = [trip("t", "a", "b", origins="", within=within)]
        assert of(asked(drive(rows, moves, trips=trips, paths={"A": (0, 0, 4, 4)}))) == expected
    # Not so where the move may be broken: it is too late in `w` already.
    moves[1] = replace(moves[1], unbroken=False)
    trips = [trip("t", "a", "b", origins="", within=1)]
    assert of(asked(drive(rows, moves, trips=trips, paths={"A": (0, 0, 4, 4)}))) == SAFE


@pytest.mark.parametrize(("target", "expected"), [("t", SAFE), ("z", unsafe(3))])
def test_target_drops_the_trip(target: str, expected: tuple[Says, int | None]) -> None:
    """Heard in `a`, in hand for up to 9; its run is a pulse of B that lasts 3. A is on in the mode after `t`, 5 later.

    If `t` is its target, it is dropped there. Else it is taken in `on` as well.
    """
    rows = {"a": "off off", "t": "off off", "on": "on off", "z": "off off"}
    moves = [move("a", "t", when=(0, None)), move("t", "on", after=span(5))]
    trips = [trip("x", "a", target, sets(B="on"), within=9, origins="")]
    paths = {"A": (0, 0, 4, 4), "B": (0, 0, 3, 3)}
    assert of(asked(drive(rows, moves, trips=trips, paths=paths))) == expected


def test_trips_do_not_interrupt_trips_but_hardware_does() -> None:
    """The first trip turns A off and waits 5 before B; the second is heard only in runs that come from `a`."""
    rows = {"a": "on off", "b": "off on", "c": "off on"}
    first = trip("s", "a", "b", sets(A="off"), waits(5), at_once=True)
    for hardware, expected in ((True, unsafe(5)), (False, SAFE)):
        second = trip("t", "", "c", origins="a", at_once=hardware)
        assert of(asked(drive(rows, trips=[first, second], paths=SLOW))) == expected


def test_no_firmware_trip_arrives_during_a_trip() -> None:
    """The second would turn A on as soon as the first has turned B on; it is heard only in runs that come from `a`."""
    rows = {"a": "on off", "b": "off on", "c": "on off"}
    first = trip("s", "a", "b", sets(A="off"), waits(5), at_once=True)
    second = trip("t", "", "c", origins="a", within=9)
    assert of(asked(drive(rows, trips=[first, second], paths=SLOW))) == SAFE
    # Heard at rest in `a`, it stays in hand while the first runs and is taken in `b`: B ends after 7, A begins at 2.
    second = trip("t", "a", "c", origins="", within=0)
    assert of(asked(drive(rows, trips=[first, second], paths=SLOW))) == unsafe(5)


def test_break_input_does_not_break_into_itself() -> None:
    """It could otherwise begin anew between A's turn-off and B's turn-on, and write B at once."""
    rows = {"a": "on off", "b": "off on"}
    hard = trip("s", "a", "b", sets(A="off"), waits(5), at_once=True)
    assert of(asked(drive(rows, trips=[hard], paths=SLOW))) == SAFE


def test_break_input_keeps_a_wait_before_its_first_change() -> None:
    """A is off already, so that the first step changes nothing; its wait stands, and firmware writes the rest."""
    rows = {"a": "on off", "c": "off off", "b": "off on"}
    moves = [move("a", "c", when=(0, None))]
    for wait, expected in ((5, SAFE), (3, unsafe(2))):
        hard = trip("t", "c", "b", sets(A="off"), waits(wait), at_once=True, origins="")
        assert of(asked(drive(rows, moves, trips=[hard], paths=SLOW))) == expected
    # A step with changes after such a wait, and then the row in the same instant.
    hard = trip("t", "a", "b", sets(B="off"), waits(9), sets(A="off"), at_once=True, origins="")
    assert of(asked(drive(rows, moves, trips=[hard], paths=SLOW))) == unsafe(5)
    # From `a` the first step has changes, and the wait stands behind its write.
    hard = trip("t", "a", "b", sets(A="off"), waits(9), at_once=True, origins="")
    assert of(asked(drive(rows, moves, trips=[hard], paths=SLOW))) == SAFE


def test_writes_after_that_wait_are_held() -> None:
    """The break input alone takes A off its carrier at once; after a wait the write waits for a rise."""
    for steps, expected in (((), SAFE), ((sets(B="off"), waits(0)), unsafe(5))):
        built = leaving(Update.AT_RISE, hardware=True)
        hard = replace(built.trips[0], steps=steps)
        assert of(asked(replace(built, trips=(hard,)))) == expected


# Released pins


def released(rests_a: Level, rests_b: Level, after_b: Interval = INSTANT, *, start: str = "a") -> Drive:
    """A is on; then a trip to reset. A's pin reaches its resting level 2 to 4 ps later."""
    pins = [pin("A", rests_a, span(2, 4)), pin("B", rests_b, after_b)]
    rows = {"a": "on off", "reset": "free free"}
    return drive(rows, pins=pins, trips=[trip("t", "a", "reset", at_once=True)], start=start)


def test_rests() -> None:
    """A stays on for up to 4 ps after its release; B rests on at once, or 1 ps later, or never."""
    assert of(asked(released(Level.LOW, Level.LOW))) == SAFE
    assert of(asked(released(Level.LOW, Level.HIGH))) == unsafe(4)
    assert of(asked(released(Level.LOW, Level.HIGH, span(1)))) == unsafe(3)
    assert of(asked(released(Level.LOW, Level.UNKNOWN, span(1)))) == unsafe(3)
    assert of(asked(released(Level.HIGH, Level.HIGH))) == unsafe(None)
    assert of(asked(released(Level.LOW, Level.LOW), bounded=False)) == SAFE


def test_start_in_reset() -> None:
    """All pins rest from the start; a level that nobody knows is both."""
    assert of(asked(released(Level.LOW, Level.HIGH, span(9), start="reset"))) == SAFE
    unknown = released(Level.UNKNOWN, Level.UNKNOWN, start="reset")
    assert of(asked(unknown)) == unsafe(None)
    assert of(asked(unknown, A, Literal("B", on=False))) == unsafe(None)


def test_write_ends_a_release() -> None:
    """Leaving reset at once turns A off before its pin has come to rest, and B on with it."""
    built = released(Level.LOW, Level.LOW)
    leaving_reset = move("reset", "b", when=(0, None))
    modes = built.modes | {"b": drive({"b": "off on"}).modes["b"]}
    assert of(asked(replace(built, modes=modes, moves=(leaving_reset,)))) == SAFE
    # A row that frees A instead does not start its release again: on for up to 4 ps from the trip on.
    modes = built.modes | {"b": drive({"b": "free on"}).modes["b"]}
    assert of(asked(replace(built, modes=modes, moves=(leaving_reset,)))) == unsafe(4)


# Interlocks


def locked(dead: Interval, rows: dict[str, str]) -> Drive:
    """Two rows one after the other, in one instant, with an interlock."""
    lock = Interlock(HERE, "A", "B", dead)
    return drive(rows, [move("a", "b", when=(0, None))], paths=SLOW, interlocks=[lock])


def test_interlock() -> None:
    """The dead time stands in for the gap of 5; without the interlock nothing does. Both on: neither passes."""
    swap = {"a": "on off", "b": "off on"}
    assert of(asked(locked(span(5, 8), swap))) == SAFE
    assert of(asked(locked(span(4, 8), swap))) == unsafe(1)
    assert of(asked(locked(INSTANT, swap))) == unsafe(5)
    assert of(asked(locked(span(5, 8), swap), interlocks=False)) == unsafe(5)
    both = {"a": "off off", "b": "on on"}
    assert of(asked(locked(INSTANT, both))) == SAFE
    assert of(asked(locked(INSTANT, both), interlocks=False)) == unsafe(None)


def test_interlock_passes_in_time() -> None:
    """B is held off for the 2 ps in which A is on, then for the dead time of 3 at most: off for 5, plus 3, less 4."""
    rows = {"s": "off on", "a": "on on", "b": "off on"}
    lock = Interlock(HERE, "A", "B", span(1, 3))
    moves = [move("s", "a", when=(9, None)), move("a", "b", after=span(2))]
    built = drive(rows, moves, paths=SLOW, interlocks=[lock])
    assert of(asked(built, Literal("B", on=False))) == unsafe(4)
    assert of(asked(built, Literal("B", on=False), interlocks=False)) == SAFE


def test_interlock_with_unknown_commands() -> None:
    """Two levels that nobody knows: each may be on while the other is off, and both are taken so at once."""
    built = replace(
        released(Level.UNKNOWN, Level.UNKNOWN, start="reset"), interlocks=(Interlock(HERE, "A", "B", span(3)),)
    )
    assert of(asked(built)) == unsafe(None)


# Delays, the automaton, the limit


def test_difference() -> None:
    """Both through one part: on 200 to 1000, off 300 to 1500, difference 700: in = max(200, min(1500 - 700, 1500))."""
    part = Part(HERE, "coupler", Interval(200, 1000), Interval(300, 1500), 700)
    own = Part(HERE, "own", Interval(10, 10), Interval(20, 50), None)
    built = replace(drive({"a": "off off"}), paths={"A": (part,), "B": (part,)})
    assert delays_of(built, (A, B)) == {A: Delays(800, 1500), B: Delays(800, 1500)}
    assert delays_of(built, (A,)) == {A: Delays(200, 1500)}
    # A also through a part of its own. Against A: 1550 - (700 + 50) = 800. Against B: 1500 - (700 - 10) = 810.
    mixed = replace(built, paths={"A": (part, own), "B": (part,)})
    assert delays_of(mixed, (A, B)) == {A: Delays(810, 1550), B: Delays(800, 1500)}
    # A part on one path only bounds nothing.
    alone = replace(built, paths={"A": (part,), "B": (own,)})
    assert delays_of(alone, (A, B)) == {A: Delays(200, 1500), B: Delays(10, 50)}


def heard_through(wanted: list[Stretch], delays: Delays, end: int) -> list[int]:
    """The ticks in which the automaton is possible, fed with a command whose stretches lie between 0 and `end`."""
    monitor, found = settled(False), []
    for now in range(end):
        for start, stop in wanted:
            if start == now:
                monitor = heard(monitor, True)
            if stop == now:
                monitor = heard(monitor, False)
        monitor = due(monitor, delays)
        if can(monitor):
            found.append(now)
        monitor = aged(monitor)
    return found


def test_automaton_is_the_definition() -> None:
    """Random commands, pulses of no length and touching stretches among them."""
    rng = Random(7)
    seen = set()
    for _ in range(4000):
        edges = sorted(rng.randint(1, 25) for _ in range(2 * rng.randint(1, 4)))
        wanted: list[Stretch] = list(zip(edges[::2], edges[1::2], strict=True))
        delays = Delays(rng.randint(0, 9), rng.randint(0, 9))
        expected = [t for start, stop in stretches(wanted, delays) for t in range(start, stop or 0)]
        assert heard_through(wanted, delays, 60) == expected, (wanted, delays)
        seen.add(len(stretches(wanted, delays)))
    assert seen >= {0, 1, 2, 3}


def test_gives_up() -> None:
    """The limit is no verdict."""
    verdict = judge(complementary(span(5)), (A, B), {A: Delays(2, 7), B: Delays(2, 7)}, most_states=10)
    assert verdict.says is Says.GAVE_UP
    assert verdict.states > 10


def test_run_is_told() -> None:
    """The shortest run to the hazard, with times: B's write 4 ps after A's, and the hazard 2 ps later."""
    steps = (sets(A="off"), waits(4))
    built = drive({"a": "on off", "b": "off on"}, [move("a", "b", *steps, when=(0, None))], paths=SLOW)
    assert [time for time, _ in asked(built).run] == [0, 4, 6]


def test_smaller() -> None:
    """Lines go as long as the predicate holds, and numbers shrink to where it just holds."""
    text = "one\nkeep 8 ps\ntwo\nthree updates at rise\n"

    def fails(shorter: str) -> bool:
        return any(line.startswith("keep ") and int(line.split()[1]) >= 3 for line in shorter.splitlines())

    assert smaller("first\n" + text, fails) == "first\nkeep 3 ps\n"


# The draws

FEATURES = (
    "together,one at a time,by port,turn-offs first,turn-ons first,in table order,clock,within,late by,loop,leg,switch,"
    "sources,difference,interlock,dead time,active low,rests high,rests unknown,port,updates at once,updates at rise,"
    "updates within a period,duty 0 %,to 100 %,keep,free,~k,start reset,-> reset,when,after,earliest,latest,unbroken,"
    "any but,at once,wait 0,at least,up to,set all off,above"
)


def drawn(seed: int) -> Drive:
    """A drive that was drawn; reading it raises if the draw breaks a rule of the language."""
    return read(draw(seed), f"draw {seed}", lambda _: "")


def test_draws_can_be_read_and_show_every_feature() -> None:
    """500 of them; each feature stands in ten at least. The same seed gives the same text."""
    texts = [draw(seed) for seed in range(500)]
    for seed in range(500):
        drawn(seed)
    for feature in FEATURES.split(","):
        assert sum(feature in text for text in texts) >= 10, feature
    assert draw(3) == texts[3] != draw(4)


def test_draws_are_safe_and_unsafe() -> None:
    """Neither verdict is rare, and few draws are too large."""
    safe = unsure = 0
    seeds = range(500, 540)
    for seed in seeds:
        built = drawn(seed)
        says = [
            judge(built, literals, delays_of(built, literals), facts_forbid=forbids, most_states=5_000).says
            for literals, forbids in shorts_of(built)
        ]
        safe += all(one is Says.SAFE for one in says)
        unsure += Says.GAVE_UP in says and Says.UNSAFE not in says
    assert len(seeds) * 0.35 < safe < len(seeds) * 0.65
    assert unsure < len(seeds) * 0.2


def test_shorts() -> None:
    """A leg's two switches; two that bridge it; and with sources only the polarity that drives a current."""
    stage = "stage\n  rails P N\n  leg U H L\n  switch C from P to U\n"
    head = 'drive "x"\n'
    tail = "modes H L C\n  a off off off\nmoves\n  start a\n"
    built = read(head + stage + tail, "x", lambda _: "")
    assert [literals for literals, _ in shorts_of(built)] == [
        (Literal("H"), Literal("L")),
        (Literal("L"), Literal("C")),
    ]
    stage = "stage\n  sources s t\n  switch H from s to X one way\n  switch L from X to t one way\n"
    built = read(head + stage + "modes H L\n  a off off\nmoves\n  start a\n", "x", lambda _: "")
    [(literals, forbids)] = shorts_of(built)
    assert literals == (Literal("H"), Literal("L"))
    assert forbids((Above("t", "s"),))
    assert forbids((Above("t", "m"), Above("m", "s")))
    assert not forbids((Above("s", "t"),))
    assert not forbids(())
