"""The stage as a directed graph.

Every edge carries the switch that must be on for it to conduct (none: it always conducts) and the polarity that it
needs.
"""

from collections.abc import Iterable, Iterator

from seqcheck.circuit.ways import Needs, Passage
from seqcheck.drive import Above, Capacitor, Conducts, Rails, Sources, Stage, Switch
from seqcheck.hazards import Hazard
from seqcheck.records import dataclass

MOST_SETS = 1000
"""More minimal sets than this are refused, with their number."""
MOST_STEPS = 3_000_000
"""Comparisons of sets, two seconds or three, after which counting is given up, and the stage is refused."""

Stiff = Rails | Sources | Capacitor

NOTHING: Needs = frozenset()


@dataclass(frozen=True, slots=True)
class Edge:
    """A way in which current can pass."""

    start: str
    end: str
    switch: str | None
    needs: Needs
    element: int | None  # which stiff element, in the order of the file; None for switches and diodes


def conducting(stage: Stage) -> Iterator[Edge]:
    """The edges of switches and diodes."""
    for switch in stage.switches:
        yield from _switch_edges(switch)
    for diode in stage.diodes:
        yield Edge(diode.start, diode.end, None, NOTHING, None)


def _switch_edges(switch: Switch) -> Iterator[Edge]:
    for start, end in switch.poles:
        yield Edge(start, end, switch.name, NOTHING, None)
        if switch.conducts is Conducts.DIODE:
            yield Edge(end, start, None, NOTHING, None)
        elif switch.conducts is Conducts.TWO_WAY:
            yield Edge(end, start, switch.name, NOTHING, None)


def stiff(stage: Stage) -> tuple[Stiff, ...]:
    """The stiff elements, in the order by which edges number them."""
    return (*stage.rails, *stage.sources, *stage.capacitors)


def nodes_of(element: Stiff) -> tuple[str, ...]:
    """The nodes of a stiff element."""
    return (element.positive, element.negative) if isinstance(element, Capacitor) else element.nodes


def stiff_edges(number: int, element: Stiff) -> Iterator[Edge]:
    """Passing a supply from its lower to its upper end; sources and capacitors pass either way."""
    if isinstance(element, Capacitor):
        yield Edge(element.positive, element.negative, None, NOTHING, number)
        yield Edge(element.negative, element.positive, None, NOTHING, number)
        return
    for place, upper in enumerate(element.nodes):
        for lower in element.nodes[place + 1 :]:
            if isinstance(element, Rails):
                yield Edge(lower, upper, None, NOTHING, number)
            else:
                yield Edge(lower, upper, None, frozenset({Above(upper, lower)}), number)
                yield Edge(upper, lower, None, frozenset({Above(lower, upper)}), number)


def passages(edges: Iterable[Edge]) -> dict[str, list[Passage]]:
    """The edges as the search for least ways reads them: by the node where they start, those to one end together."""
    found: dict[str, dict[str, list[Passage]]] = {}
    for edge in edges:
        passage = Passage(edge.end, frozenset(filter(None, (edge.switch,))), edge.needs, edge.element)
        found.setdefault(edge.start, {}).setdefault(edge.end, []).append(passage)
        found.setdefault(edge.end, {})
    return {node: [one for some in ends.values() for one in some] for node, ends in found.items()}


def in_order(hazards: Iterable[Hazard], stage: Stage) -> list[Hazard]:
    """Hazards in the order of the stage's switches, those of few literals first."""
    rank = {switch.name: place for place, switch in enumerate(stage.switches)}
    return sorted(hazards, key=lambda one: (len(one.literals), [rank[literal.switch] for literal in one.literals]))
