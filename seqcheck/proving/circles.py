"""Whether an overlap can go round in a circle without end.

A run comes to a location again with all values that it had there before, but for clocks that nothing on the way looks
at: what it did between it can then do again from everywhere, any number of times. That the overlap has become longer on
the way does not show that it will each time: a
clock that is not started anew on the circle may bound it, or the first rounds may only make up for where the run came
from. So no such clock may have an upper bound on the circle; then every constraint ties a round to the next one only,
the longest overlap after k rounds is a shortest path through k layers of as many nodes as there are clocks, and it goes
on growing if it still does after so many rounds that every such path has come through some node twice.
"""

from collections.abc import Callable, Sequence

from seqcheck.proving.location import Hop, Location
from seqcheck.zones import Zone

Successor = Callable[[Zone, int, Hop], Zone | None]


def goes_on(location: Location, zone: Zone, circle: Sequence[Hop], successor: Successor) -> bool:
    """Whether the overlap grows with every round of a circle of hops from `location` back to it."""
    if _bounded(location, circle):
        return False
    rounds = location.size + 1
    early = _after(location, zone, circle, successor, rounds)
    late = early and _after(location, early, circle, successor, rounds)
    if not early or not late:
        return False
    place = location.measure * location.size
    return late[place] > early[place]


def _after(location: Location, zone: Zone, circle: Sequence[Hop], successor: Successor, rounds: int) -> Zone | None:
    current: Zone | None = zone
    for _ in range(rounds):
        here = location
        for hop in circle:
            if current is None:
                return None
            current = successor(current, here.size, hop)
            here = hop.target
    return current


def _bounded(location: Location, circle: Sequence[Hop]) -> bool:
    """Whether a clock that runs through the whole circle has an upper bound on it."""
    since, _, capped = _course(location, circle)
    return any(was in capped for was in since if was)


def idle(location: Location, circle: Sequence[Hop]) -> frozenset[int]:
    """The clocks that run through the whole circle and are compared with nothing on it."""
    since, compared, _ = _course(location, circle)
    return frozenset(clock for clock, was in enumerate(since) if clock and was == clock and clock not in compared)


def _course(location: Location, circle: Sequence[Hop]) -> tuple[list[int], set[int], set[int]]:
    """What becomes of the clocks on a circle: which one each clock at its end was at the start (0: started since), and
    which of those at the start are compared with something, and which with an upper bound.

    On every step `since[c]` is the clock at the start of the circle that clock c still is, 0 if it was started since.
    """
    since = list(range(location.size))
    compared: set[int] = set()
    capped: set[int] = set()
    for hop in circle:
        compared.update(since[clock] for clock, _ in hop.least)
        capped.update(since[clock] for clock, _ in hop.most)
        since = [0, *(since[source] if source > 0 else 0 for source in hop.sources)]
        compared.update(since[clock] for clock, _ in hop.after)
        capped.update(since[clock] for clock, _ in hop.target.bounds)
    return since, compared | capped, capped
