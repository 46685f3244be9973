"""Shared by the tests of the search: small timed automata, drawn or told, and what they can do by whole picoseconds."""

from collections import deque
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from random import Random

from seqcheck.proving.location import Bound, Hop, Location
from seqcheck.zones import FRESH, INFINITE

CLOCKS = (1, 2)
MEASURE = 3
MOST = 3
"""The greatest constant of a drawn automaton."""
CAP = MOST + 1
"""Ages above it are one: nothing tells them apart."""

State = tuple[int, int, int, int]
"""A location's number, the ages of both clocks, and how long the overlap has lasted."""


@dataclass(frozen=True, slots=True)
class Way:
    """A hop to the location of a number: guards, sources of the two clocks, and guards after it."""

    to: int
    least: tuple[Bound, ...] = ()
    most: tuple[Bound, ...] = ()
    sources: tuple[int, int] = CLOCKS
    after: tuple[Bound, ...] = ()
    cost: int = 1


@dataclass(frozen=True, slots=True)
class Place:
    """What a location is: an overlap (`hot`), one held by a mode, the bounds of its clocks, its ways out, or a pause in
    an overlap (no drawn one is)."""

    hot: bool
    held: bool
    bounds: tuple[Bound, ...]
    ways: tuple[Way, ...]
    paused: bool = False


@dataclass(frozen=True, slots=True)
class Automaton:
    """Its places, and the ways to start, which may know no clocks (sources 0 or FRESH)."""

    places: tuple[Place, ...]
    starts: tuple[Way, ...]

    def initial(self, *, measured: bool = True) -> list[Hop]:
        """The ways to start, over locations that have not been searched yet; with a clock for overlaps if wanted."""
        locations: list[Location] = []

        def hop(way: Way, going_on: bool) -> Hop:
            target = locations[way.to]
            measure = ((MEASURE if going_on else 0),) if target.measure else ()
            sources = (*way.sources, *measure)
            return Hop(way.least, way.most, sources, way.after, target, way.cost, way)

        for number, place in enumerate(self.places):
            size = 4 if (place.hot or place.paused) and measured else 3
            constants = [0, MOST, MOST, *([INFINITE] if size == 4 else [])]
            locations.append(
                Location(
                    number,
                    size,
                    place.bounds,
                    constants,
                    constants,
                    place.hot,
                    place.held,
                    MEASURE if size == 4 else 0,
                    lambda here: tuple(hop(way, here.measure > 0) for way in self.places[number_of(here)].ways),
                )
            )
        return [hop(way, False) for way in self.starts]

    def entered(self, state: State, way: Way) -> Iterator[State]:
        """The states into which a way leads at once."""
        place, *ages, lasted = state
        if not all(ages[clock - 1] >= value for clock, value in way.least):
            return
        if not all(ages[clock - 1] <= value for clock, value in way.most):
            return
        target = self.places[way.to]
        measured = lasted if target.hot and self.places[place].hot else 0
        for first in _values(way.sources[0], ages):
            for second in _values(way.sources[1], ages):
                new = (way.to, first, second, measured)
                if all(new[clock] >= value for clock, value in way.after) and self.may_be(new):
                    yield new

    def may_be(self, state: State) -> bool:
        """Whether a state keeps the bounds of its place."""
        return all(state[clock] <= value for clock, value in self.places[state[0]].bounds)

    def later(self, state: State) -> State | None:
        """The state 1 ps later, if it may stay so long."""
        place, first, second, lasted = state
        here = self.places[place]
        if not all(state[clock] < value for clock, value in here.bounds):
            return None
        return place, min(first + 1, CAP), min(second + 1, CAP), lasted + here.hot

    def begun(self) -> Iterator[tuple[State, int]]:
        """The states in which it may start, with the moves that this takes."""
        for way in self.starts:
            for first in _values(way.sources[0], (0, 0)):
                for second in _values(way.sources[1], (0, 0)):
                    new = (way.to, first, second, 0)
                    if all(new[clock] >= value for clock, value in way.after) and self.may_be(new):
                        yield new, way.cost

    def reached(self, longest: int) -> dict[State, int]:
        """All states with their fewest moves; overlaps are followed up to `longest`."""
        moves: dict[State, int] = {}
        waiting = deque(sorted(self.begun(), key=lambda one: one[1]))
        while waiting:
            state, count = waiting.popleft()
            if moves.get(state, count + 1) <= count:
                continue
            moves[state] = count
            later = self.later(state)
            if later is not None and later[3] <= longest:
                waiting.appendleft((later, count))
            for way in self.places[state[0]].ways:
                for new in self.entered(state, way):
                    (waiting.append if way.cost else waiting.appendleft)((new, count + way.cost))
        return moves


def number_of(location: Location) -> int:
    """The number of the place that a location stands for."""
    assert isinstance(location.key, int)
    return location.key


def _values(source: int, ages: Sequence[int]) -> Sequence[int]:
    if source == FRESH:
        return range(CAP + 1)
    return (ages[source - 1] if source else 0,)


def drawn(seed: int) -> Automaton:
    """A random automaton of two to four places; some have no overlap, some one without end."""
    rng = Random(seed)
    count = rng.randint(2, 4)
    hot = {number for number in range(1, count) if rng.random() < 0.6}
    places = []
    for number in range(count):
        bounds = tuple(Bound(clock, rng.randint(0, MOST)) for clock in CLOCKS if rng.random() < 0.5)
        ways = tuple(_way(rng, count) for _ in range(rng.randint(1, 3)))
        places.append(Place(number in hot, number in hot and rng.random() < 0.4, bounds, ways))
    starts = tuple(Way(0, sources=_sources(rng, (0, 0, FRESH)), cost=0) for _ in range(rng.randint(1, 2)))
    return Automaton(tuple(places), starts)


def _way(rng: Random, count: int) -> Way:
    def bounds(chance: float) -> tuple[Bound, ...]:
        return tuple(Bound(clock, rng.randint(0, MOST)) for clock in CLOCKS if rng.random() < chance)

    sources = _sources(rng, (0, 0, 1, 1, 1, 2, 2, FRESH) if rng.random() < 0.3 else (0, 1, 2))
    return Way(rng.randrange(count), bounds(0.4), bounds(0.3), sources, bounds(0.1), rng.choice((0, 1, 1)))


def _sources(rng: Random, choices: tuple[int, ...]) -> tuple[int, int]:
    return rng.choice(choices), rng.choice(choices)
