"""Whether a hazard comes at rest in given modes: for each of them a place of the search, the fewest moves away."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from seqcheck.proving.keys import Key
from seqcheck.proving.location import Hop
from seqcheck.proving.search import LimitReached, Node, nodes, ticks

Observer = Callable[[int], None]


MOST_MORE = 2_000
"""Zones that are looked through for a row that itself holds the hazard after it was found to come in passing."""


@dataclass(frozen=True, slots=True)
class Rests:
    """For each mode in which the hazard comes at rest the node that shows it, one in which the row itself holds it if
    such a one is near; `limit` names what ended the search before all was known."""

    nodes: dict[str, Node]
    limit: str | None = None


def rests(initial: Iterable[Hop], modes: frozenset[str], holding: frozenset[str], observer: Observer) -> Rests:
    """Look through one projection; what the observer's limit leaves out is named, what was found stays.

    `holding` are those of the modes whose rows may themselves hold the hazard.
    """
    found: dict[str, Node] = {}
    settled: set[str] = set()
    last = 0
    try:
        for count, node in enumerate(nodes(initial, observer)):
            if found.keys() == modes and (settled == modes or count > last + MOST_MORE):
                break
            mode = _mode(node)
            if mode not in modes or mode in settled or not node.location.hot or not ticks(node.location, node.zone):
                continue
            if mode not in found or node.location.held:
                found[mode], last = node, count
            if node.location.held or mode not in holding:
                settled.add(mode)
    except LimitReached as limit:
        return Rests(found, str(limit))
    return Rests(found)


def _mode(node: Node) -> str | None:
    """The mode in which the firmware rests, None in a run."""
    key = node.location.key
    assert isinstance(key, Key)
    return key.state.mode if key.state.run < 0 else None
