"""The checked model of one drive: what a file says after every name, unit and rule of the language has been checked.

All times are whole picoseconds. Durations that firmware times are already widened by the clock's tolerance and rounded
outwards; `late by at most` is not yet added to them (it is `Clock.late`). `any`, `set all off` and lists of modes are
already expanded. Every object keeps its place in the source.
"""

from dataclasses import dataclass
from enum import Enum
from fractions import Fraction

from seqcheck.quantities import Interval
from seqcheck.source import Place

RESET = "reset"


# The time base and the write discipline


@dataclass(frozen=True, slots=True)
class Clock:
    """Firmware's time base: frequency in hertz, tolerance as a ratio, lateness in ps (None: the file does not say)."""

    place: Place
    frequency: Fraction
    tolerance: Fraction
    late: int | None


class How(Enum):
    """How several writes that belong together reach the pins."""

    TOGETHER = "together"
    SINGLY = "one at a time"
    BY_PORT = "by port"


class Order(Enum):
    """In which order the writes of one step follow each other."""

    OFFS_FIRST = "turn-offs first"
    ONS_FIRST = "turn-ons first"
    TABLE = "in table order"
    ANY = "in any order"


@dataclass(frozen=True, slots=True)
class Writes:
    """The write discipline; `gap` is the time between two consecutive writes (INSTANT for TOGETHER)."""

    place: Place
    how: How
    gap: Interval
    order: Order


# The stage


@dataclass(frozen=True, slots=True)
class Rails:
    """Stiff nodes of one supply, most positive first."""

    place: Place
    nodes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Sources:
    """Stiff nodes of one supply whose polarity is not known."""

    place: Place
    nodes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Capacitor:
    """A stiff element between two nodes, charged with `positive` above `negative`."""

    place: Place
    positive: str
    negative: str


class Conducts(Enum):
    """What a switch passes: DIODE one way while on and the other way always, and so on."""

    DIODE = "diode"
    ONE_WAY = "one way"
    TWO_WAY = "two way"


@dataclass(frozen=True, slots=True)
class Switch:
    """A controlled switch; each pole is (from, to) in the direction in which it conducts while on."""

    place: Place
    name: str
    poles: tuple[tuple[str, str], ...]
    conducts: Conducts


@dataclass(frozen=True, slots=True)
class Diode:
    """A diode that conducts from `start` to `end`."""

    place: Place
    start: str
    end: str


@dataclass(frozen=True, slots=True)
class Winding:
    """An inductive load: one or two nodes; with `must_flow` its current must always have a way."""

    place: Place
    ends: tuple[str, ...]
    must_flow: bool


@dataclass(frozen=True, slots=True)
class Leg:
    """A leg: output node, high switch from the upper rail to it, low switch from it to the lower rail.

    Its two switches are in `Stage.switches` as well.
    """

    place: Place
    node: str
    high: str
    low: str
    upper: str
    lower: str


@dataclass(frozen=True, slots=True)
class Stage:
    """The circuit, in the order of the file."""

    place: Place
    rails: tuple[Rails, ...]
    sources: tuple[Sources, ...]
    capacitors: tuple[Capacitor, ...]
    switches: tuple[Switch, ...]
    diodes: tuple[Diode, ...]
    windings: tuple[Winding, ...]
    legs: tuple[Leg, ...]


# The signal paths and pins


@dataclass(frozen=True, slots=True)
class Part:
    """One part of a signal path: times of a turn-on and of a turn-off from its input to its output.

    `difference` bounds the excess of any one sample's turn-off over another's turn-on (None: not given).
    """

    place: Place
    name: str
    on: Interval
    off: Interval
    difference: int | None


@dataclass(frozen=True, slots=True)
class Interlock:
    """The driver keeps `first` and `second` apart, with a dead time."""

    place: Place
    first: str
    second: str
    dead: Interval


class Level(Enum):
    """The level that the board gives a pin while the controller does not drive it."""

    LOW = "low"
    HIGH = "high"
    UNKNOWN = "unknown"


class Command(Enum):
    """What a pin says to its switch; UNKNOWN where it floats."""

    ON = "on"
    OFF = "off"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Pin:
    """A controller pin: what turns its switch on, where it rests, and how long it takes to get there."""

    place: Place
    switch: str
    name: str
    active_high: bool
    rests: Level
    after: Interval
    port: str | None

    @property
    def resting(self) -> Command:
        """The command that the resting level gives."""
        if self.rests is Level.UNKNOWN:
            return Command.UNKNOWN
        return Command.ON if (self.rests is Level.HIGH) == self.active_high else Command.OFF


# Carriers and cells


class Update(Enum):
    """When a write that puts a switch on a carrier, or takes it off, acts."""

    AT_ONCE = "at once"
    AT_RISE = "at rise"
    WITHIN_PERIOD = "within a period"


@dataclass(frozen=True, slots=True)
class Carrier:
    """A modulation carrier. `high` and `low` are the times that its reference may spend at a level (hi None: for ever).

    They are at least one tick of the clock, 1 ps without one. A duty of exactly 0 % or 100 % fixes the reference:
    then `low` or `high` is Interval(tick, None) and the other one None. `frequency` is as written, in hertz.
    """

    place: Place
    name: str
    frequency: Fraction
    period: Interval
    duty: tuple[Fraction, Fraction]
    high: Interval | None
    low: Interval | None
    dead: Interval
    update: Update


class Fixed(Enum):
    """A cell that names no carrier."""

    ON = "on"
    OFF = "off"
    KEEP = "keep"
    FREE = "free"


@dataclass(frozen=True, slots=True)
class Follow:
    """A cell that puts the switch on a carrier's output, or with `inverted` on its complement (`~carrier`)."""

    carrier: str
    inverted: bool

    def __str__(self) -> str:
        return f"~{self.carrier}" if self.inverted else self.carrier


Cell = Fixed | Follow


def cell_text(cell: Cell) -> str:
    """The cell as the file writes it."""
    return cell.value if isinstance(cell, Fixed) else str(cell)


# What is known, and what a row is for


@dataclass(frozen=True, slots=True)
class CurrentOut:
    """`with current out of X`: the load takes current out of node X."""

    node: str


@dataclass(frozen=True, slots=True)
class CurrentInto:
    """`with current into X`: the load pushes current into node X."""

    node: str


@dataclass(frozen=True, slots=True)
class Above:
    """`with a above b`: source node a is positive against source node b."""

    upper: str
    lower: str


Known = CurrentOut | CurrentInto | Above


def fact_words(fact: Known) -> tuple[str, str, str]:
    """A fact in the words of the file: `a above b` or `current out of X`."""
    if isinstance(fact, Above):
        return fact.upper, "above", fact.lower
    return "current", "out of" if isinstance(fact, CurrentOut) else "into", fact.node


class Purpose(Enum):
    """What a row must do to the winding (`means`)."""

    COAST = "coast"
    BRAKE = "brake"
    DRIVE = "drive"
    LEVEL = "level"


@dataclass(frozen=True, slots=True)
class Means:
    """`means …` of a row; `nodes` are (U, V) for DRIVE, (P,) for LEVEL, else empty."""

    place: Place
    purpose: Purpose
    nodes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Mode:
    """One row of the switching table; `cells` in the order of `Drive.columns`."""

    place: Place
    name: str
    cells: tuple[Cell, ...]
    known: tuple[Known, ...]
    means: Means | None


# Moves and trips


@dataclass(frozen=True, slots=True)
class SetStep:
    """`set …`: the writes of one step, in the order of the file (`set all off` in column order)."""

    place: Place
    writes: tuple[tuple[str, Cell], ...]


@dataclass(frozen=True, slots=True)
class WaitStep:
    """`wait …`."""

    place: Place
    time: Interval


Step = SetStep | WaitStep


@dataclass(frozen=True, slots=True)
class When:
    """Begins on an event, from `earliest` to `latest` after entry (None: never closed); `loop` is not yet in it."""

    event: str
    earliest: int
    latest: int | None


@dataclass(frozen=True, slots=True)
class After:
    """Begins within this span after entry."""

    span: Interval


@dataclass(frozen=True, slots=True)
class AtOnce:
    """Begins at once."""


Trigger = When | After | AtOnce


@dataclass(frozen=True, slots=True)
class Move:
    """One line of `moves`, for each of its sources; a target of `reset` is taken by hardware."""

    place: Place
    sources: tuple[str, ...]
    target: str
    trigger: Trigger
    unbroken: bool
    known: tuple[Known, ...]
    steps: tuple[Step, ...]


@dataclass(frozen=True, slots=True)
class Trip:
    """One line of `trips`.

    `resting` are the modes in which it may arrive, never its target; `origins` the modes such that it may arrive during
    a move that left one of them (for `any` that includes the target, and never `reset`).
    `within` is None where the line has none; then its first write comes with the arrival. A trip to `reset` is always
    `at_once`.
    """

    place: Place
    name: str
    resting: frozenset[str]
    origins: frozenset[str]
    target: str
    within: int | None
    at_once: bool
    known: tuple[Known, ...]
    steps: tuple[Step, ...]


# Rules


@dataclass(frozen=True, slots=True)
class MarginRule:
    """`margin at least D`."""

    place: Place
    least: int


@dataclass(frozen=True, slots=True)
class NeverRule:
    """`never S and S off …`; a literal is (switch, wanted on)."""

    place: Place
    literals: tuple[tuple[str, bool], ...]


@dataclass(frozen=True, slots=True)
class ClearsRule:
    """`TRIP clears S… within D`."""

    place: Place
    trip: str
    switches: tuple[str, ...]
    within: int


class Lasts(Enum):
    """Which length of a command a rule bounds."""

    ON_AT_MOST = "on at most"
    ON_AT_LEAST = "on at least"
    OFF_AT_LEAST = "off at least"


@dataclass(frozen=True, slots=True)
class LastsRule:
    """`S on at most D`, `S on at least D`, `S off at least D`."""

    place: Place
    switch: str
    lasts: Lasts
    limit: int


@dataclass(frozen=True, slots=True)
class ApartRule:
    """`M and M at least D apart`."""

    place: Place
    first: str
    second: str
    least: int


@dataclass(frozen=True, slots=True)
class ToleratesRule:
    """`tolerates single faults in M…`; the modes in the order of the line, or of the table where it says `any`."""

    place: Place
    modes: tuple[str, ...]


Rule = MarginRule | NeverRule | ClearsRule | LastsRule | ApartRule | ToleratesRule


@dataclass(frozen=True, slots=True)
class Waiver:
    """`waive CHECK for NAME because "reason"`."""

    place: Place
    check: str
    name: str
    reason: str


@dataclass(frozen=True, slots=True)
class Drive:
    """All that one file says.

    `columns` are the switches in table order; `modes` are the rows in file order, then `reset` if it counts as a mode.
    `paths` has an entry for every switch (empty: no path). `pins` has one for each switch that has its line.
    """

    place: Place
    title: str
    clock: Clock | None
    writes: Writes | None
    loop: Interval | None
    stage: Stage
    parts: dict[str, Part]
    paths: dict[str, tuple[Part, ...]]
    interlocks: tuple[Interlock, ...]
    pins: dict[str, Pin]
    carriers: dict[str, Carrier]
    columns: tuple[str, ...]
    modes: dict[str, Mode]
    start: str
    moves: tuple[Move, ...]
    trips: tuple[Trip, ...]
    rules: tuple[Rule, ...]
    waivers: tuple[Waiver, ...]


@dataclass(frozen=True, slots=True)
class Library:
    """All that a file says which only serves `use`: names for other files, and nothing that could be proven.

    The names are those of its quantities, parts and carriers, with those of the files that it uses itself.
    """

    place: Place
    title: str
    quantities: tuple[str, ...]
    parts: tuple[str, ...]
    carriers: tuple[str, ...]
