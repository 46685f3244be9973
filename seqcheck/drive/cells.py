"""Carriers, and the cells that a switch can be written to."""

from enum import Enum
from fractions import Fraction

from seqcheck.quantities import Interval
from seqcheck.records import dataclass
from seqcheck.source import Place


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
