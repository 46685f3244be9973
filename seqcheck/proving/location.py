"""What the search sees: locations with clocks, and hops between them. It knows of no drive, no pins and no file."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from seqcheck.zones import Zone


class Bound(NamedTuple):
    """A clock (by its place in the location, from 1) that is compared with a number of picoseconds."""

    clock: int
    value: int


class Hop(NamedTuple):
    """A transition to `target`.

    It needs each clock of `least` at or above its value and each of `most` at or below; `sources` renames the clocks
    (see zones.renamed); then each clock of `after` must be at or above its value. `cost` counts the moves it begins,
    `event` is handed back to whoever made the hop.
    """

    least: tuple[Bound, ...]
    most: tuple[Bound, ...]
    sources: tuple[int, ...]
    after: tuple[Bound, ...]
    target: "Location"
    cost: int
    event: object


@dataclass(slots=True, eq=False)
class Location:
    """A state without its times. `hot`: all literals are possible here and the hazard is asked for.

    `bounds` are the invariants, `lower` and `upper` the greatest constants of each clock for extrapolation (place 0
    unused), `measure` the place of the clock that measures an overlap, 0 for none. `held`: the mode itself commands
    all literals. `struck`: what is asked is so at the very instant of coming here, and the run ends with it. `hops` are
    worked out by `expand` on first use; `passed` belongs to the search.
    """

    key: object
    size: int
    bounds: tuple[Bound, ...]
    lower: Sequence[int]
    upper: Sequence[int]
    hot: bool
    held: bool
    measure: int
    expand: Callable[["Location"], tuple[Hop, ...]]
    struck: bool = False
    hops: tuple[Hop, ...] | None = None
    passed: list[tuple[Zone, object]] = field(default_factory=list)

    @property
    def overlapping(self) -> bool:
        """Whether an overlap is under way here, or has just paused."""
        return self.hot or self.measure > 0

    def out(self) -> tuple[Hop, ...]:
        """The hops out of this location."""
        if self.hops is None:
            self.hops = self.expand(self)
        return self.hops


Among = Callable[[Location], bool]
"""Whether a search enters a location; where it leaves some out it shows what is, never that nothing is."""
