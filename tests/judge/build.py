"""Small drives by hand, for tests of the judge that must not lean on the reader."""

from collections.abc import Sequence
from fractions import Fraction

from seqcheck.drive import (
    After,
    AtOnce,
    Carrier,
    Cell,
    Clock,
    Drive,
    Fixed,
    Follow,
    How,
    Interlock,
    Known,
    Mode,
    Move,
    Order,
    Part,
    Pin,
    SetStep,
    Stage,
    Step,
    Trip,
    Update,
    WaitStep,
    When,
    Writes,
)
from seqcheck.quantities import INSTANT, Interval
from seqcheck.source import Place

HERE = Place("built", 1, 1, 1, 1)


def cell(word: str) -> Cell:
    """A cell from its word."""
    if word in ("on", "off", "keep", "free"):
        return Fixed(word)
    return Follow(word.removeprefix("~"), word.startswith("~"))


def span(lo: int, hi: int | None = None) -> Interval:
    """Exactly `lo`, or from `lo` to `hi`."""
    return Interval(lo, lo if hi is None else hi)


def sets(**writes: str) -> SetStep:
    """`set A off, B on` as sets(A="off", B="on")."""
    return SetStep(HERE, tuple((name, cell(word)) for name, word in writes.items()))


def waits(lo: int, hi: int | None = None) -> WaitStep:
    """`wait lo to hi`."""
    return WaitStep(HERE, span(lo, hi))


def move(
    source: str,
    target: str,
    *steps: Step,
    when: tuple[int, int | None] | None = None,
    after: Interval | None = None,
    unbroken: bool = False,
    known: tuple[Known, ...] = (),
) -> Move:
    """A move; with neither `when` (earliest, latest) nor `after` it begins at once."""
    trigger: When | After | AtOnce = AtOnce()
    if when is not None:
        trigger = When(f"{source}_{target}", *when)
    if after is not None:
        trigger = After(after)
    return Move(HERE, (source,), target, trigger, unbroken, known, steps)


def trip(
    name: str,
    resting: str,
    target: str,
    *steps: Step,
    origins: str | None = None,
    within: int | None = None,
    at_once: bool = False,
) -> Trip:
    """A trip; modes are named with blanks between, `origins` are as `resting` where not given."""
    left = resting if origins is None else origins
    return Trip(HERE, name, frozenset(resting.split()), frozenset(left.split()), target, within, at_once, (), steps)


def carrier(
    name: str,
    high: Interval | None,
    low: Interval | None,
    *,
    dead: Interval = INSTANT,
    update: Update = Update.AT_ONCE,
    period: Interval = INSTANT,
) -> Carrier:
    """A carrier from the lengths of its levels."""
    return Carrier(HERE, name, Fraction(1), period, (Fraction(1, 2), Fraction(1, 2)), high, low, dead, update)


def drive(
    rows: dict[str, str],
    moves: Sequence[Move] = (),
    *,
    paths: dict[str, tuple[int, int, int, int]] | None = None,
    columns: str = "A B",
    start: str | None = None,
    trips: Sequence[Trip] = (),
    carriers: Sequence[Carrier] = (),
    pins: Sequence[Pin] = (),
    interlocks: Sequence[Interlock] = (),
    writes: Writes | None = None,
    late: int | None = None,
    loop: int | None = None,
) -> Drive:
    """A drive; a path is (least on, most on, least off, most off)."""
    names = tuple(columns.split())
    parts = {name: _part(name, *(paths or {}).get(name, (0, 0, 0, 0))) for name in names}
    modes = {name: Mode(HERE, name, tuple(cell(word) for word in row.split()), (), None) for name, row in rows.items()}
    return Drive(
        place=HERE,
        title="built",
        clock=None if late is None else Clock(HERE, Fraction(10**12), Fraction(0), late),
        writes=writes,
        loop=None if loop is None else Interval(loop, None),
        stage=Stage(HERE, (), (), (), (), (), (), ()),
        parts=parts,
        paths={name: (part,) for name, part in parts.items()},
        interlocks=tuple(interlocks),
        pins={pin.switch: pin for pin in pins},
        carriers={one.name: one for one in carriers},
        columns=names,
        modes=modes,
        start=start or next(iter(rows)),
        moves=tuple(moves),
        trips=tuple(trips),
        rules=(),
        waivers=(),
    )


def _part(name: str, on_lo: int, on_hi: int, off_lo: int, off_hi: int) -> Part:
    return Part(HERE, name, Interval(on_lo, on_hi), Interval(off_lo, off_hi), None)


def singly(lo: int, hi: int | None = None, order: Order = Order.ANY) -> Writes:
    """`one at a time, lo to hi apart, ORDER`."""
    return Writes(HERE, How.SINGLY, span(lo, hi), order)
