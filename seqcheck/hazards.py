"""What must never happen, as data."""

from dataclasses import dataclass

from seqcheck.drive import Above
from seqcheck.quantities import Interval


@dataclass(frozen=True, slots=True, order=True)
class Literal:
    """A switch that can conduct (`on`), or can be open (not `on`)."""

    switch: str
    on: bool = True

    def __str__(self) -> str:
        return self.switch if self.on else f"{self.switch} off"


@dataclass(frozen=True, slots=True)
class Delays:
    """The times of one literal: from command to possibility (`rise`, the `in` of the meaning) and back (`fall`, its
    `out`), in ps."""

    rise: int
    fall: int


@dataclass(frozen=True, slots=True)
class Hazard:
    """Literals that must not be possible together for a positive time.

    `joins` names the stiff nodes that a short would join, first the positive one, for people. `needs` are orientations
    of sources: each entry is one set of conditions under which the short carries current; where all of them contradict
    what is known, the hazard is not asked for. An empty `needs` means always.
    """

    literals: tuple[Literal, ...]
    joins: tuple[str, ...]
    needs: tuple[frozenset[Above], ...] = ()


@dataclass(frozen=True, slots=True)
class Reach:
    """The bounds of one switch's path, parts in series added."""

    on: Interval
    off: Interval
