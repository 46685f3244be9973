"""The shortest of what lasts too short a time: a pulse, or the time from leaving one mode to entering another."""

from seqcheck.proving.keys import RISE, Key
from seqcheck.proving.projection import Projection
from seqcheck.proving.search import MOST_MEASURED, LimitReached, Node, Observer, nodes
from seqcheck.records import dataclass


@dataclass(frozen=True, slots=True)
class Shortest:
    """How long (ps) what is too short lasts, and the node in which it ends; `least`: no run brings a shorter one."""

    time: int
    node: Node
    least: bool


def shortest(projection: Projection, observer: Observer, *, any_will_do: bool = False) -> Shortest | None:
    """The shortest over all runs; None where nothing is too short.

    A limit of the observer, or MOST_MEASURED zones, ends the search if something was found; at once if `any_will_do`.
    """
    best: Shortest | None = None
    try:
        for count, node in enumerate(nodes(projection.initial(), observer)):
            if node.location.struck:
                time = _lasted(projection, node)
                if best is None or time < best.time:
                    best = Shortest(time, node, least=True)
            if best is not None and best.time == 0:
                break
            if best is not None and (any_will_do or count > MOST_MEASURED):
                return Shortest(best.time, best.node, least=False)
    except LimitReached:
        if best is None:
            raise
        return Shortest(best.time, best.node, least=False)
    return best


def _lasted(projection: Projection, node: Node) -> int:
    """The least time with which a node that is struck can be come to."""
    return -node.zone[_timer(projection, node)]


def begun_at(projection: Projection, path: list[Node]) -> int:
    """The place in a path at which what its last node ends has begun."""
    for place in range(len(path) - 1, 0, -1):
        if path[place].hop.sources[_timer(projection, path[place]) - 1] == 0:
            return place
    return 0


def _timer(projection: Projection, node: Node) -> int:
    key = node.location.key
    assert isinstance(key, Key)
    return next(place for place in range(1, node.location.size) if projection.clock_name(key, place) == RISE)
