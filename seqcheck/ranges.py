"""The range of a quantity in which a file is proven, as data: its ends, what breaks beyond them, what it rests on."""

from dataclasses import dataclass
from enum import Enum
from fractions import Fraction

from seqcheck.drive import Drive
from seqcheck.messages import Problem
from seqcheck.source import Place
from seqcheck.verdict import Outcome


class Measure(Enum):
    """What a quantity is, by the unit of its exact values."""

    PICOSECONDS = "ps"
    HERTZ = "Hz"
    RATIO = "ratio"
    NUMBER = "number"


class Ends(Enum):
    """How a range ends on one side."""

    FAILS = "fails"  # the next value does not hold, and that is shown
    OPEN = "open"  # it does not: all values from here on are proven
    UNDECIDED = "undecided"  # a limit was reached before the next value was decided
    FAR = "far"  # it was not looked for any further


@dataclass(frozen=True, slots=True)
class Beyond:
    """A value that does not hold: what `lint` would say of it, or the mistakes of which the file then has."""

    value: Fraction
    why: Outcome | tuple[Problem, ...]


@dataclass(frozen=True, slots=True)
class End:
    """One end of a range: the outermost value that is proven (None: there is none), and the next one beyond it."""

    value: Fraction | None
    how: Ends
    beyond: Beyond | None = None
    limit: str = ""


@dataclass(frozen=True, slots=True)
class Patch:
    """A piece of a range, both ends included (`last` None: without end).

    With `whole` it is shown by one proof in which the quantity takes any value of it; else its values one step apart
    were proven one by one, and nothing is said of those between.
    """

    first: Fraction
    last: Fraction | None
    whole: bool


@dataclass(frozen=True, slots=True)
class Tried:
    """What was looked for around a value that does not hold: nearer values than the range, and how many were tried."""

    nearer: int
    tried: int


@dataclass(frozen=True, slots=True)
class Sized:
    """The answer about one `let`, defined at `place` and used in the `lines` of the file itself.

    `now` is what `lint` says of the file as it stands, `holds` whether that counts as proven here: an idle waiver is
    said, but it is nothing that a drive does. `low` and `high` are None where no value was found that holds. With
    `idle` nothing that is proven depends on the quantity. `tick` is that of the clock as it stands (ps), for a time.
    """

    file: str
    drive: Drive
    name: str
    place: Place
    measure: Measure
    today: Fraction
    step: Fraction
    tick: Fraction | None
    lines: tuple[int, ...]
    now: Outcome
    holds: bool
    low: End | None
    high: End | None
    parts: tuple[Patch, ...]
    tried: Tried | None = None
    idle: bool = False
