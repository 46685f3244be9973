"""The stage as a directed graph, and the minimal sets of switches over all ways through it.

Every edge carries the switch that must be on for it to conduct (none: it always conducts) and the polarity that it
needs.
"""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import networkx as nx

from seqcheck.circuit.ways import Needs, Passage
from seqcheck.drive import Above, Capacitor, Conducts, Rails, Sources, Stage, Switch
from seqcheck.hazards import Hazard

MOST_SETS = 1000
"""More minimal sets than this are refused, with their number."""
MOST_STEPS = 3_000_000
"""Comparisons of sets, two seconds or three, after which counting is given up, and the stage is refused."""

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


def passages(graph: "Graph[str]") -> dict[str, list[Passage]]:
    """The graph as the search for least ways reads it."""
    return {
        node: [
            Passage(end, frozenset(filter(None, (data["switch"],))), data["needs"], data["element"])
            for _, end, data in graph.out_edges(node, data=True)
        ]
        for node in graph
    }


def in_order(hazards: Iterable[Hazard], stage: Stage) -> list[Hazard]:
    """Hazards in the order of the stage's switches, those of few literals first."""
    rank = {switch.name: place for place, switch in enumerate(stage.switches)}
    return sorted(hazards, key=lambda one: (len(one.literals), [rank[literal.switch] for literal in one.literals]))
