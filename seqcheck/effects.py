"""What the rows of a switching table do to the stage, as data: levels, windings, shorts, swaps."""

from dataclasses import dataclass
from enum import Enum

from seqcheck.drive import Mode
from seqcheck.hazards import Current, Hazard


@dataclass(frozen=True, slots=True, order=True)
class Level:
    """A potential: a rail or source, and the capacitors between it and the node, each (positive, negative, added)."""

    node: str
    through: frozenset[tuple[str, str, bool]] = frozenset()

    def __str__(self) -> str:
        parts = sorted((added, f"{upper}-{lower}") for upper, lower, added in self.through)
        return self.node + "".join(f" {'plus' if added else 'less'} {name}" for added, name in parts)


Levels = frozenset[Level]


@dataclass(frozen=True, slots=True)
class Node:
    """An end of a winding in one word of the table.

    `out` are the levels from which current out of the node comes (the highest that have a way; several where their
    order is not known), `into` those to which current into it goes (the lowest); empty where it has no way. `knows_out`
    and `knows_into` tell which current is possible by what the row knows. `loose`: free over the whole of a supply.
    """

    name: str
    out: Levels
    into: Levels
    knows_out: bool = True
    knows_into: bool = True
    loose: bool = False

    @property
    def held(self) -> Level | None:
        """The one level at which the node is whichever way the current flows."""
        return next(iter(self.out)) if len(self.out) == 1 and self.out == self.into else None

    @property
    def level(self) -> Level | None:
        """The level at which the node is, also where that rests on a direction of current that the row knows."""
        if self.held is None and self.knows_out != self.knows_into:
            known = self.out if self.knows_out else self.into
            return next(iter(known)) if len(known) == 1 else None
        return self.held


class Kind(Enum):
    """What a word does to a winding."""

    DRIVEN = "driven"
    STAR = "driven in star"
    BRAKED = "braked"
    HELD = "held at one end"
    FREE = "free"


@dataclass(frozen=True, slots=True)
class Wound:
    """A winding of two ends in one word.

    DRIVEN: from `nodes[0]`, at `levels[0]`, to `nodes[1]`, or the other way where it is not `ordered` by what is known.
    STAR: `nodes[0]` at `levels[0]`, the other end joined to those of the other windings of `group` (the ends of all,
    its own too), whose held ends are not all at one level. BRAKED: both ends at `levels[0]`, or without a level where
    they are joined by switches alone. HELD: `nodes[0]` at `levels[0]`.
    """

    ends: tuple[str, ...]
    kind: Kind
    nodes: tuple[str, ...] = ()
    levels: tuple[Level, ...] = ()
    ordered: bool = True
    group: tuple[tuple[str, ...], ...] = ()


@dataclass(frozen=True, slots=True)
class Vector:
    """The voltage of three phases as a space vector: degrees from the first phase, and length in parts of the supply
    (2/3 of the sum, so that the six words of a two-level bridge have 2/3); None and 0 for a zero vector."""

    degrees: int | None
    length: float


@dataclass(frozen=True, slots=True)
class Word:
    """What one word of switches does: `shorts` that it holds, the ends and the windings, currents without a way.

    `plates` are the nodes of capacitors.
    """

    on: frozenset[str]
    shorts: tuple[Hazard, ...]
    nodes: tuple[Node, ...]
    plates: tuple[Node, ...]
    windings: tuple[Wound, ...]
    stuck: tuple[Current, ...]
    vector: Vector | None


@dataclass(frozen=True, slots=True)
class Row:
    """What one row does: alternatives (where a cell is kept, or a pin floats), each the words that carriers bring by
    turns. `dead_times` is how often in a period of its carriers a shorting set is left one side and closed the other.
    """

    mode: Mode
    alternatives: tuple[tuple[Word, ...], ...]
    dead_times: int = 0
    amiss: str = ""  # why the row does not do what it `means`; empty where it does, or says nothing

    @property
    def words(self) -> tuple[Word, ...]:
        """All its words."""
        return tuple(word for turns in self.alternatives for word in turns)


@dataclass(frozen=True, slots=True)
class Swap:
    """Two rows between which the switches of a shorting set change places: `off` go off, `on` come on, `stays` is on
    in both. `direct`: a move or trip leads straight from one to the other."""

    first: str
    second: str
    off: tuple[str, ...]
    on: tuple[str, ...]
    stays: tuple[str, ...]
    direct: bool


@dataclass(frozen=True, slots=True)
class Table:
    """The switching table of one file, read back."""

    file: str
    title: str
    columns: tuple[str, ...]
    ends: tuple[tuple[str, ...], ...]  # of each winding
    rows: tuple[Row, ...]
    swaps: tuple[Swap, ...]
