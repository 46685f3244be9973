"""The least gap from the end of one literal's possibility to the moment at which all others of a hazard are possible.

It is the margin of a safe hazard in that direction: prolonged by as much the literal just does not meet the others, and
by anything more it does. A gap is looked for below a cap; where there is none below it, but one above, the cap is
raised. What is found with carriers' phases forgotten is a lower bound only, but that nothing ever follows holds.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from seqcheck.proving.clocks import Manner
from seqcheck.proving.conduction import POSSIBLE
from seqcheck.proving.keys import GAP, LATELY, Key
from seqcheck.proving.projection import Projection
from seqcheck.proving.search import LimitReached, Node, nodes, ticks

Observer = Callable[[int], None]
Look = Callable[[Manner], Projection]

_WIDER = 16


@dataclass(frozen=True, slots=True)
class Least:
    """The least gap (ps) and the node in which it ends.

    Without a node no gap was found: with a `limit`, which ended the search, `time` is a lower bound; else with `within`
    there is none below what was asked for, `time`; else nothing ever follows.
    """

    time: int
    node: Node | None
    projection: Projection
    within: bool = False
    limit: str = ""


@dataclass(frozen=True, slots=True)
class Asked:
    """What is known and asked of a gap: a lower bound, and above what length it need not be told (None: nowhere)."""

    floor: int
    below: int | None


def least_gap(look: Look, watched: int, manners: Sequence[Manner], asked: Asked, observer: Observer) -> Least:
    """The least gap after the literal at place `watched`.

    `look` makes a projection, `manners` are those in which to look, the exact one last. Where the observer raises
    LimitReached the answer is a lower bound.
    """
    known = max(asked.floor, 0)
    cap = known + 1 if asked.below is None else asked.below
    while True:
        for manner in manners:
            projection = look(replace(manner, gap=watched, cap=cap))
            try:
                best, later = _below_cap(projection, known, observer)
            except LimitReached as limit:
                return Least(known, None, projection, limit=str(limit))
            if best is None and not later:
                return Least(0, None, projection)
            if best is None and asked.below is not None:
                return Least(asked.below, None, projection, within=True)
            if best is None:
                known = cap
                break
            known = gap_in(projection, best)
            if not manner.forget:
                return Least(known, best, projection)
        cap *= _WIDER


def _below_cap(projection: Projection, known: int, observer: Observer) -> tuple[Node | None, bool]:
    """The node with the least gap below the cap, and whether something follows at the cap or later.

    No gap is shorter than `known`: the search ends with one that is as short.
    """
    best: Node | None = None
    later = False
    for node in nodes(projection.initial(), observer):
        if not node.location.hot or not ticks(node.location, node.zone):
            continue
        if _key(node).ended != LATELY:
            later = True
        elif best is None or gap_in(projection, node) < gap_in(projection, best):
            best = node
            if gap_in(projection, best) <= known:
                break
    return best, later


def gap_in(projection: Projection, node: Node) -> int:
    """The least gap with which a node can be come to."""
    size, key = node.location.size, _key(node)
    place = next(place for place in range(1, size) if projection.clock_name(key, place) == GAP)
    return -node.zone[place]


def ended_at(projection: Projection, path: list[Node], watched: int) -> int:
    """The place in a path at which the gap that its last node ends has begun."""
    last = len(path) - 1
    while not _begins_gap(projection, path[last], watched):
        last -= 1
    return last


def _begins_gap(projection: Projection, node: Node, watched: int) -> bool:
    key = _key(node)
    names = [projection.clock_name(key, place) for place in range(1, node.location.size)]
    started = GAP in names and node.hop.sources[names.index(GAP)] == 0
    return started and not POSSIBLE[key.literals[watched]]


def _key(node: Node) -> Key:
    key = node.location.key
    assert isinstance(key, Key)
    return key
