"""The stage as a directed graph, and the minimal sets of switches over all ways through it.

Every edge carries the switch that must be on for it to conduct (none: it always conducts) and the polarity that it
needs. The minimal sets are found by a label-correcting search whose labels are antichains of sets (the multi-criteria
form of Bellman-Ford's algorithm).
"""

from collections import deque
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

import networkx as nx

from seqcheck.drive import Above, Capacitor, Conducts, Known, Rails, Sources, Stage, Switch
from seqcheck.hazards import Hazard
from seqcheck.messages import Problem, Problems

MOST_SETS = 1000
"""More minimal sets than this at one node, or in all, are refused."""

Needs = frozenset[Known]
Label = tuple[frozenset[str], Needs]
Graph = nx.MultiDiGraph  # nodes are names of the stage; edges carry `switch`, `needs` and `element`
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


def graph_of(edges: Iterable[Edge]) -> "Graph[str]":
    """The edges as a graph."""
    graph: Graph[str] = nx.MultiDiGraph()
    for edge in edges:
        graph.add_edge(edge.start, edge.end, switch=edge.switch, needs=edge.needs, element=edge.element)
    return graph


def least_ways(
    graph: "Graph[str]", start: str, barred: frozenset[int], too_many: Callable[[int], Problem]
) -> dict[str, list[Label]]:
    """For every node the minimal (switches, needs) of the ways from `start` to it that pass no barred element.

    Raises Problems with what `too_many` makes of their number where a node has more than MOST_SETS.
    """
    labels: dict[str, list[Label]] = {start: [(frozenset(), NOTHING)]}
    waiting = deque([start])
    while waiting:
        node = waiting.popleft()
        for _, end, data in sorted(graph.out_edges(node, data=True), key=_edge_key):
            if data["element"] in barred:
                continue
            switch = frozenset() if data["switch"] is None else frozenset({data["switch"]})
            grown = [(switches | switch, needs | data["needs"]) for switches, needs in labels[node]]
            if _merge(labels.setdefault(end, []), grown) and end not in waiting:
                waiting.append(end)
            if len(labels[end]) > MOST_SETS:
                raise Problems([too_many(len(labels[end]))])
    return labels


def _edge_key(edge: tuple[str, str, dict[str, object]]) -> tuple[str, str]:
    return edge[1], str(edge[2]["switch"])


def _merge(kept: list[Label], grown: Iterable[Label]) -> bool:
    """Add what no kept label dominates, drop what the new ones dominate; whether anything was added."""
    added = False
    for label in grown:
        if any(_dominates(one, label) for one in kept):
            continue
        kept[:] = [one for one in kept if not _dominates(label, one)]
        kept.append(label)
        added = True
    return added


def _dominates(one: Label, other: Label) -> bool:
    return one[0] <= other[0] and one[1] <= other[1]


def least(hazards: list[Hazard], stage: Stage) -> list[Hazard]:
    """Without those that happen only where a smaller one does; in the order of the stage's switches."""
    rank = {switch.name: place for place, switch in enumerate(stage.switches)}
    kept = [one for one in hazards if not any(_implies(other, one) for other in hazards if other is not one)]
    return sorted(kept, key=lambda one: (len(one.literals), [rank[literal.switch] for literal in one.literals]))


def _implies(smaller: Hazard, larger: Hazard) -> bool:
    """Whether `smaller` happens whenever `larger` does: fewer literals, and no more needs."""
    if not set(smaller.literals) < set(larger.literals):
        return False
    return not smaller.needs or (bool(larger.needs) and all(any(n <= m for n in smaller.needs) for m in larger.needs))
