"""What firmware does, and when: its clock, how it writes, moves and trips with their steps."""

from enum import Enum
from fractions import Fraction

from seqcheck.drive.cells import Cell
from seqcheck.drive.table import Known
from seqcheck.quantities import Interval
from seqcheck.records import dataclass
from seqcheck.source import Place


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
