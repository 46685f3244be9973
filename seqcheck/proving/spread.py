"""Where a hazard happens: every place of every run in which all its literals are possible for a positive time."""

from collections.abc import Callable, Iterable

from seqcheck.faults import Spread, Where
from seqcheck.proving.keys import Key
from seqcheck.proving.location import Hop
from seqcheck.proving.search import LimitReached, nodes, ticks

Observer = Callable[[int], None]


def spread(initial: Iterable[Hop], observer: Observer, ceiling: Spread | None) -> Spread:
    """All places of one projection.

    `ceiling` holds all that can be found, where that is known: the search ends when it has been. An observer's limit
    ends it too, and is named.
    """
    places: set[Where] = set()
    held: set[str] = set()
    limit = None
    try:
        for node in nodes(initial, observer):
            location = node.location
            if not location.hot or not ticks(location, node.zone):
                continue
            key = location.key
            assert isinstance(key, Key)
            state = key.state
            places.add(Where(state.mode, state.run if state.run >= 0 else None))
            if location.held:
                held.add(state.mode)
            if ceiling is not None and places == ceiling.places and held == ceiling.held:
                break
    except LimitReached as reached:
        limit = str(reached)
    return Spread(frozenset(places), frozenset(held), limit)
