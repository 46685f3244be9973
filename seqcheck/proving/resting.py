"""Whether a hazard comes at rest in given modes: for each of them a place of the search, the fewest moves away."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from seqcheck.proving.keys import Key
from seqcheck.proving.location import Hop
from seqcheck.proving.search import LimitReached, Node, nodes, ticks

Observer = Callable[[int], None]


@dataclass(frozen=True, slots=True)
class Rests:
    """For each mode in which the hazard comes at rest the node that shows it, one in which the row itself holds it if
    there is any; `limit` names what ended the search before all was known."""

    nodes: dict[str, Node]
    limit: str | None = None


def rests(initial: Iterable[Hop], modes: frozenset[str], observer: Observer) -> Rests:
    """Look through one projection; what the observer's limit leaves out is named, what was found stays."""
    found: dict[str, Node] = {}
    held: set[str] = set()
    try:
        for node in nodes(initial, observer):
            mode = _mode(node)
            if mode not in modes or mode in held or not node.location.hot or not ticks(node.location, node.zone):
                continue
            if node.location.held:
                held.add(mode)
                found[mode] = node
            found.setdefault(mode, node)
            if held == modes:
                break
    except LimitReached as limit:
        return Rests(found, str(limit))
    return Rests(found)


def _mode(node: Node) -> str | None:
    """The mode in which the firmware rests, None in a run."""
    key = node.location.key
    assert isinstance(key, Key)
    return key.state.mode if key.state.run < 0 else None
