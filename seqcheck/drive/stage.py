"""The circuit: rails, sources, switches, diodes, windings, legs."""

from enum import Enum

from seqcheck.records import dataclass
from seqcheck.source import Place


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
