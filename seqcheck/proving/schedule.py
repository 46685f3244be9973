"""Concrete times for one path: a system of difference constraints, solved by shortest paths.

Every event of the path is a variable; clocks turn into differences between an event and the one that started the clock.
The system is feasible if it has no negative circle, and shortest-path potentials from one variable put every other as
late after it as the system allows (Bellman-Ford; Dechter, Meiri and Pearl 1991).
"""

from collections.abc import Sequence

from seqcheck.proving.location import Hop
from seqcheck.records import dataclass
from seqcheck.zones import FRESH, INFINITE


@dataclass(frozen=True, slots=True)
class Difference:
    """later − earlier ≤ most, between two variables."""

    later: int
    earlier: int
    most: int


def potentials(count: int, constraints: Sequence[Difference], origin: int) -> list[int] | None:
    """The greatest value of every variable relative to `origin`, INFINITE where unbounded; None if infeasible."""
    values = [INFINITE] * count
    values[origin] = 0
    for _ in range(count):
        changed = False
        for one in constraints:
            start = values[one.earlier]
            if start < INFINITE and start + one.most < values[one.later]:
                values[one.later] = start + one.most
                changed = True
        if not changed:
            return values
    return None


@dataclass(frozen=True, slots=True)
class Path:
    """A path's variables and constraints.

    Variable 0 is the start of the run, i the i-th hop after it (`hops[0]` being the start itself), `end` the last
    moment in the last location. `births[i]` are the variables in which carriers' levels began before the start, by
    clock of the first location.
    """

    constraints: tuple[Difference, ...]
    end: int
    count: int
    births: dict[int, int]


def constraints_of(hops: Sequence[Hop]) -> Path:
    """The constraints of a path; the first hop is the way to start.

    On every step `started` tells for each clock of the location just left the variable that started it.
    """
    found: list[Difference] = []
    end = len(hops)
    fresh = end + 1
    births: dict[int, int] = {}
    started: list[int] = []
    for event, hop in enumerate(hops):
        if event:
            found.append(Difference(event - 1, event, 0))
            found += [Difference(started[clock - 1], event, -value) for clock, value in hop.least]
            found += [Difference(event, started[clock - 1], value) for clock, value in hop.most]
        renewed: list[int] = []
        for place, source in enumerate(hop.sources, 1):
            if source == FRESH:
                found.append(Difference(fresh, event, 0))
                if event == 0:
                    births[place] = fresh
                renewed.append(fresh)
                fresh += 1
            else:
                renewed.append(event if source == 0 else started[source - 1])
        started = renewed
        found += [Difference(started[clock - 1], event, -value) for clock, value in hop.after]
        found += [Difference(event + 1, started[clock - 1], bound) for clock, bound in hop.target.bounds]
    found.append(Difference(end - 1, end, 0))
    return Path(tuple(found), end, fresh, births)


def scheduled(path: Path, origin: int, patience: int) -> list[int] | None:
    """Times of all variables that put the end as late after `origin` as the path allows, the start at 0.

    Where it can be put off without end it comes `patience` after the latest other bound. None if infeasible.
    """
    values = potentials(path.count, path.constraints, origin)
    if values is None:
        return None
    if any(value >= INFINITE for value in values):
        known = max(value for value in values if value < INFINITE)
        bounds = [Difference(later, origin, known + patience) for later in range(path.count)]
        values = potentials(path.count, (*path.constraints, *bounds), origin)
        if values is None:
            return None
    return [value - values[0] for value in values]


