"""The switching table: what is known in a row, what the row is for, the row itself."""

from enum import Enum

from seqcheck.drive.cells import Cell
from seqcheck.records import dataclass
from seqcheck.source import Place


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
