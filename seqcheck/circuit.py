"""The stage as a directed graph, and the shorting sets that follow from it.

Every edge carries the switch that must be on for it to conduct (none: it always conducts) and the polarity that it
needs. A short is a closed way through a stiff element; by breaking the way open at that element it becomes a directed
path, so shorting sets are the minimal sets of switches over all paths, found by a label-correcting search whose labels
are antichains of sets (the multi-criteria form of Bellman-Ford's algorithm).
"""

from collections import deque
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import networkx as nx

from seqcheck.drive import Above, Capacitor, Conducts, Rails, Sources, Stage, Switch
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problem, Problems

MOST_SETS = 1000
"""More minimal sets than this at one node, or in all, are refused."""

Needs = frozenset[Above]
Label = tuple[frozenset[str], Needs]
Graph = nx.MultiDiGraph  # nodes are names of the stage; edges carry `switch`, `needs` and `element`

NOTHING: Needs = frozenset()


@dataclass(frozen=True, slots=True)
class _Edge:
    start: str
    end: str
    switch: str | None
    needs: Needs
    element: int | None  # which stiff element, in the order of the file; None for switches and diodes


def conduction_graph(stage: Stage) -> "Graph[str]":
    """The stage as a graph: an edge for each way in which current can pass, stiff elements included."""
    graph: Graph[str] = nx.MultiDiGraph()
    for edge in _edges(stage):
        graph.add_edge(edge.start, edge.end, switch=edge.switch, needs=edge.needs, element=edge.element)
    return graph


def _edges(stage: Stage) -> Iterator[_Edge]:
    for switch in stage.switches:
        yield from _switch_edges(switch)
    for diode in stage.diodes:
        yield _Edge(diode.start, diode.end, None, NOTHING, None)
    for number, element in enumerate(_stiff(stage)):
        yield from _stiff_edges(number, element)


def _switch_edges(switch: Switch) -> Iterator[_Edge]:
    for start, end in switch.poles:
        yield _Edge(start, end, switch.name, NOTHING, None)
        if switch.conducts is Conducts.DIODE:
            yield _Edge(end, start, None, NOTHING, None)
        elif switch.conducts is Conducts.TWO_WAY:
            yield _Edge(end, start, switch.name, NOTHING, None)


def _stiff(stage: Stage) -> tuple[Rails | Sources | Capacitor, ...]:
    return (*stage.rails, *stage.sources, *stage.capacitors)


def _stiff_edges(number: int, element: Rails | Sources | Capacitor) -> Iterator[_Edge]:
    """Passing a supply from its lower to its upper end; sources and capacitors pass either way."""
    if isinstance(element, Capacitor):
        yield _Edge(element.positive, element.negative, None, NOTHING, number)
        yield _Edge(element.negative, element.positive, None, NOTHING, number)
        return
    for place, upper in enumerate(element.nodes):
        for lower in element.nodes[place + 1 :]:
            if isinstance(element, Rails):
                yield _Edge(lower, upper, None, NOTHING, number)
            else:
                yield _Edge(lower, upper, None, frozenset({Above(upper, lower)}), number)
                yield _Edge(upper, lower, None, frozenset({Above(lower, upper)}), number)


def shorting_sets(stage: Stage) -> tuple[Hazard, ...]:
    """All minimal sets of switches that short the stage, in the order of the stage's switches.

    Raises Problems if a supply is shorted whatever the switches do, or if there are more sets than MOST_SETS.
    """
    graph = conduction_graph(stage)
    found: dict[frozenset[str], tuple[tuple[str, str], set[Needs]]] = {}
    for number, element in enumerate(_stiff(stage)):
        for upper, lower, first in _ends(element):
            barred = _barred(stage, number, element)
            for switches, needs in _paths(graph, upper, barred, element).get(lower, ()):
                if not switches:
                    raise Problems([_always(element, upper, lower)])
                found.setdefault(switches, ((upper, lower), set()))[1].add(needs | first)
    rank = {switch.name: place for place, switch in enumerate(stage.switches)}
    hazards = [_hazard(switches, joins, alternatives, rank) for switches, (joins, alternatives) in found.items()]
    kept = [one for one in hazards if not any(_implies(other, one) for other in hazards)]
    if len(kept) > MOST_SETS:
        raise Problems([_too_many(_stiff(stage)[0], len(kept))])
    return tuple(sorted(kept, key=lambda one: (len(one.literals), [rank[lit.switch] for lit in one.literals])))


def _ends(element: Rails | Sources | Capacitor) -> Iterator[tuple[str, str, Needs]]:
    """The ordered pairs of nodes between which a path shorts the element, the positive one first."""
    if isinstance(element, Capacitor):
        yield element.positive, element.negative, NOTHING
        return
    for place, upper in enumerate(element.nodes):
        for lower in element.nodes[place + 1 :]:
            if isinstance(element, Rails):
                yield upper, lower, NOTHING
            else:
                yield upper, lower, frozenset({Above(upper, lower)})
                yield lower, upper, frozenset({Above(lower, upper)})


def _barred(stage: Stage, number: int, element: Rails | Sources | Capacitor) -> frozenset[int]:
    """Stiff elements that a path may not pass: the one it shorts; for a capacitor also every supply.

    A way through a supply and a capacitor is found at the supply.
    """
    if not isinstance(element, Capacitor):
        return frozenset({number})
    supplies = len(stage.rails) + len(stage.sources)
    return frozenset({number, *range(supplies)})


def _paths(
    graph: "Graph[str]", start: str, barred: frozenset[int], element: Rails | Sources | Capacitor
) -> dict[str, list[Label]]:
    """For every node the minimal (switches, needs) of the paths from `start` to it."""
    labels: dict[str, list[Label]] = {start: [(frozenset(), NOTHING)]}
    waiting = deque([start])
    while waiting:
        node = waiting.popleft()
        for _, end, data in graph.out_edges(node, data=True):
            if data["element"] in barred:
                continue
            switch = frozenset() if data["switch"] is None else frozenset({data["switch"]})
            grown = [(switches | switch, needs | data["needs"]) for switches, needs in labels[node]]
            if _merge(labels.setdefault(end, []), grown) and end not in waiting:
                waiting.append(end)
            if len(labels[end]) > MOST_SETS:
                raise Problems([_too_many(element, len(labels[end]))])
    return labels


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


def _hazard(
    switches: frozenset[str], joins: tuple[str, str], alternatives: set[Needs], rank: dict[str, int]
) -> Hazard:
    literals = tuple(Literal(name) for name in sorted(switches, key=rank.__getitem__))
    least = [one for one in alternatives if not any(other < one for other in alternatives)]
    single = {one for needs in least if len(needs) == 1 for one in needs}
    always = NOTHING in least or any(Above(one.lower, one.upper) in single for one in single)
    needs = () if always else tuple(sorted(least, key=lambda one: sorted(map(str, one))))
    return Hazard(literals, joins, needs)


def _implies(smaller: Hazard, larger: Hazard) -> bool:
    """Whether `smaller` happens whenever `larger` does: fewer switches, and no more needs."""
    few = {one.switch for one in smaller.literals}
    many = {one.switch for one in larger.literals}
    if not few < many:
        return False
    return not smaller.needs or (bool(larger.needs) and all(any(n <= m for n in smaller.needs) for m in larger.needs))


def contradicted(hazard: Hazard, facts: Iterable[Above]) -> bool:
    """Whether the hazard cannot carry current under these facts: every orientation that it needs is ruled out.

    `with a above b` and `with b above c` give a above c as well.
    """
    known = {(one.upper, one.lower) for one in facts}
    if not hazard.needs or not known:
        return False
    return all(_circle(known | {(one.upper, one.lower) for one in needs}) for needs in hazard.needs)


def _circle(above: set[tuple[str, str]]) -> bool:
    return not nx.is_directed_acyclic_graph(nx.DiGraph(above))


def _always(element: Rails | Sources | Capacitor, upper: str, lower: str) -> Problem:
    text = f"'{upper}' and '{lower}' are joined whatever the switches do, so this supply is always shorted"
    return Problem(element.place, "always-shorted", text, "check the diodes and capacitors of the stage")


def _too_many(element: Rails | Sources | Capacitor, count: int) -> Problem:
    text = f"the stage has more than {count - 1} minimal shorting sets; at most {MOST_SETS} are proven"
    return Problem(element.place, "too-many-sets", text, "describe the stage in several files")
