"""A small builder of drives for tests that must not depend on the reader of files. All times are in ps."""

from fractions import Fraction

from seqcheck.drive import (
    RESET,
    Above,
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
    Level,
    Mode,
    Move,
    Order,
    Part,
    Pin,
    SetStep,
    Stage,
    Step,
    Trigger,
    Trip,
    Update,
    WaitStep,
    When,
    Writes,
)
from seqcheck.hazards import Hazard, Literal
from seqcheck.quantities import INSTANT, Interval
from seqcheck.source import Place
from seqcheck.verdict import Act, Event, Phase, Trace

HERE = Place("built.dseq", 1, 1, 1, 1)

_FIXED = {"on": Fixed.ON, "off": Fixed.OFF, "keep": Fixed.KEEP, "free": Fixed.FREE}


def cell(word: str) -> Cell:
    """The cell that a file would write so."""
    return _FIXED[word] if word in _FIXED else Follow(word.lstrip("~"), word.startswith("~"))


def cells(text: str) -> tuple[tuple[str, Cell], ...]:
    """Writes from `"X on, Y ~k"`."""
    pairs = (pair.split() for pair in text.split(",") if pair.strip())
    return tuple((switch, cell(word)) for switch, word in pairs)


def span(lo: int, hi: int | None = None) -> Interval:
    """[lo, hi], or exactly `lo`."""
    return Interval(lo, lo if hi is None else hi)


def step(value: str | tuple[int, int | None]) -> Step:
    """`set …` from text, `wait …` from a pair."""
    return SetStep(HERE, cells(value)) if isinstance(value, str) else WaitStep(HERE, Interval(*value))


def steps(*values: str | tuple[int, int | None]) -> tuple[Step, ...]:
    """Steps in order, each as in `step`."""
    return tuple(step(value) for value in values)


def when(earliest: int = 0, latest: int | None = None) -> When:
    """A trigger by an event."""
    return When("event", earliest, latest)


def after(lo: int, hi: int) -> After:
    """A timed trigger."""
    return After(Interval(lo, hi))


AT_ONCE = AtOnce()


def move(
    source: str,
    target: str,
    trigger: Trigger | None = None,
    *,
    steps: tuple[Step, ...] = (),
    unbroken: bool = False,
    known: tuple[Known, ...] = (),
) -> Move:
    """A move that leaves each of the modes named in `source`."""
    return Move(HERE, tuple(source.split()), target, trigger or when(), unbroken, known, steps)


def trip(
    name: str,
    source: str,
    target: str,
    *,
    within: int | None = None,
    at_once: bool = False,
    origins: str | None = None,
    steps: tuple[Step, ...] = (),
    known: tuple[Known, ...] = (),
) -> Trip:
    """A trip that comes in the modes named in `source` and in moves that left one of `origins` (else of `source`)."""
    resting = frozenset(source.split())
    left = resting if origins is None else frozenset(origins.split())
    return Trip(HERE, name, resting, left, target, within, at_once or target == RESET, known, steps)


def writes(how: How = How.SINGLY, gap: Interval = INSTANT, order: Order = Order.ANY) -> Writes:
    """A write discipline."""
    return Writes(HERE, how, gap, order)


def part(on: tuple[int, int], off: tuple[int, int], *, name: str = "part", difference: int | None = None) -> Part:
    """A part of a path."""
    return Part(HERE, name, Interval(*on), Interval(*off), difference)


def pin(
    switch: str,
    rests: Level = Level.LOW,
    *,
    after: Interval = INSTANT,
    port: str | None = None,
    active_high: bool = True,
) -> Pin:
    """A pin named like its switch."""
    return Pin(HERE, switch, f"P{switch}", active_high, rests, after, port)


def carrier(
    name: str,
    high: Interval | None = None,
    low: Interval | None = None,
    *,
    dead: Interval = INSTANT,
    update: Update = Update.AT_ONCE,
    period: int = 100,
) -> Carrier:
    """A carrier whose frequency and duty nobody looks at."""
    duty = (Fraction(0), Fraction(1))
    return Carrier(HERE, name, Fraction(1), span(period), duty, high, low, dead, update)


def interlock(first: str, second: str, dead: Interval = INSTANT) -> Interlock:
    """An interlock of two switches."""
    return Interlock(HERE, first, second, dead)


def drive(
    columns: str,
    rows: dict[str, str],
    *,
    start: str | None = None,
    moves: tuple[Move, ...] = (),
    trips: tuple[Trip, ...] = (),
    writes: Writes | None = None,
    loop: int | None = None,
    late: int | None = None,
    paths: dict[str, tuple[Part, ...]] | None = None,
    interlocks: tuple[Interlock, ...] = (),
    pins: tuple[Pin, ...] = (),
    carriers: tuple[Carrier, ...] = (),
    known: dict[str, tuple[Known, ...]] | None = None,
) -> Drive:
    """A drive with the switching table `rows` (mode name to cells, as a file writes them), from its first row on."""
    switches = tuple(columns.split())
    table = {name: tuple(cell(word) for word in row.split()) for name, row in rows.items()}
    facts = known or {}
    given = {switch: (paths or {}).get(switch, ()) for switch in switches}
    return Drive(
        place=HERE,
        title="built",
        clock=Clock(HERE, Fraction(1), Fraction(0), late),
        writes=writes,
        loop=None if loop is None else Interval(loop, None),
        stage=Stage(HERE, (), (), (), (), (), (), ()),
        parts={part.name: part for path in given.values() for part in path},
        paths=given,
        interlocks=interlocks,
        pins={pin.switch: pin for pin in pins},
        carriers={carrier.name: carrier for carrier in carriers},
        columns=switches,
        modes={name: Mode(HERE, name, row, facts.get(name, ()), None) for name, row in table.items()},
        start=start or next(iter(rows)),
        moves=moves,
        trips=trips,
        rules=(),
        waivers=(),
    )


def event(line: str) -> Event:
    """An event from `"12 writes X on, Y off"`, `"12 begins trip 0"`, `"12 enters reset: X free"`, `"12 rises k"`."""
    time, act, rest = (*line.split(None, 2), "")[:3]
    if act == "writes":
        return Event(int(time), Act.WRITES, writes=cells(rest))
    words, _, written = rest.partition(":")
    if act == "begins":
        *kind, index = words.split()
        return Event(int(time), Act.BEGINS, index=int(index), trip=kind == ["trip"], writes=cells(written))
    return Event(int(time), Act(act), words.strip(), writes=cells(written))


def hazard(text: str, needs: tuple[frozenset[Above], ...] = ()) -> Hazard:
    """A hazard from `"X, Y off"`."""
    pairs = (one.split() for one in text.split(","))
    return Hazard(tuple(Literal(pair[0], pair[1:] != ["off"]) for pair in pairs), (), needs)


def trace(
    lines: str,
    end: int,
    overlap: tuple[int, int | None] = (0, 0),
    *,
    literals: str | Hazard = "X, Y",
    phases: tuple[Phase, ...] = (),
    interlocked: bool = True,
) -> Trace:
    """A trace with one event a line (or between `;`), as in `event`."""
    events = tuple(event(line) for line in lines.replace(";", "\n").splitlines() if line.strip())
    asked = hazard(literals) if isinstance(literals, str) else literals
    return Trace(asked, phases, events, end, *overlap, interlocked)
