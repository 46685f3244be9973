"""The stage as a directed graph, and the shorting sets that follow from it.

Every edge carries the switch that must be on for it to conduct (none: it always conducts) and the polarity that it
needs. A short is a closed way through a stiff element; by breaking the way open at that element it becomes a directed
path, so shorting sets are the minimal sets of switches over all paths.
"""

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

import networkx as nx

from seqcheck.drive import Above, Capacitor, Conducts, Rails, Sources, Stage, Switch
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problem, Problems
from seqcheck.ways import Passage, Quest, Steps, TooMuch, least_ways

MOST_SETS = 1000
"""More minimal sets than this are refused, with their number."""
MOST_STEPS = 3_000_000
"""Comparisons of sets, two seconds or three, after which counting is given up, and the stage is refused."""

Needs = frozenset[Above]
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

    Raises Problems if a supply is shorted whatever the switches do, or if there are more sets than MOST_SETS: with
    their number, or with the number counted where MOST_STEPS are not enough to count them all.
    """
    rank = {switch.name: place for place, switch in enumerate(stage.switches)}
    found, whole = _found(stage)
    kept: list[Hazard] = []
    try:
        for hazard in _least([_hazard(switches, *one, rank) for switches, one in found.items()]):
            kept.append(hazard)
    except TooMuch:
        whole = False
    if not whole or len(kept) > MOST_SETS:
        raise Problems([_too_many(stage, len(kept), whole)])
    return tuple(sorted(kept, key=lambda one: (len(one.literals), [rank[lit.switch] for lit in one.literals])))


def _found(stage: Stage) -> tuple[dict[frozenset[str], tuple[tuple[str, str], set[Needs]]], bool]:
    """By switches what they join and the conditions under which they do, fewest switches first; whether that is all.

    Of several supplies that the same switches short the first of the file is named.
    """
    quests, elements = [], []
    for number, element in enumerate(_stiff(stage)):
        for upper, lower, first in _ends(element):
            avoided = _nodes(element) - {upper, lower}
            quests.append(Quest(upper, lower, _barred(stage, number, element), avoided, first))
            elements.append(element)
    numbers: dict[frozenset[str], int] = {}
    needed: dict[frozenset[str], set[Needs]] = {}
    whole = True
    try:
        for number, (switches, needs) in least_ways(_passages(stage), quests, Steps(MOST_STEPS)):
            if not switches:
                raise Problems([_always(elements[number], quests[number].start, quests[number].end)])
            numbers[switches] = min(number, numbers.get(switches, number))
            needed.setdefault(switches, set()).add(needs)
    except TooMuch:
        whole = False
    joined = {switches: (quests[number].start, quests[number].end) for switches, number in numbers.items()}
    return {switches: (joined[switches], needs) for switches, needs in needed.items()}, whole


def _passages(stage: Stage) -> dict[str, list[Passage]]:
    """The graph as the search reads it."""
    graph = conduction_graph(stage)
    return {
        node: [
            Passage(end, frozenset(filter(None, (data["switch"],))), data["needs"], data["element"])
            for _, end, data in sorted(graph.out_edges(node, data=True), key=_edge_key)
        ]
        for node in graph
    }


def _least(hazards: list[Hazard]) -> Iterator[Hazard]:
    """Those that some polarity brings without any smaller one; `hazards` come fewest switches first.

    Raises TooMuch after all that the steps were enough for.
    """
    steps = Steps(MOST_STEPS)
    sizes: dict[int, list[tuple[frozenset[str], Hazard]]] = {}
    for hazard in hazards:
        switches = frozenset(one.switch for one in hazard.literals)
        smaller: list[Hazard] = []
        for size, others in sizes.items():
            if size < len(switches):
                steps.spend(len(others))
                smaller += [other for some, other in others if some < switches]
        sizes.setdefault(len(switches), []).append((switches, hazard))
        if not _happens_only_with(hazard, smaller, steps):
            yield hazard


def _happens_only_with(hazard: Hazard, smaller: list[Hazard], steps: Steps) -> bool:
    """Whether one of the smaller sets shorts under every polarity under which the hazard's does.

    A polarity is an order of the sources; an order that a relation leaves open can be completed, so it is enough to
    look for a relation without circle that holds what the hazard needs and excludes all that the smaller ones need.
    """
    if not smaller or any(not one.needs for one in smaller):
        return bool(smaller)
    avoided = [needs for one in smaller for needs in one.needs]
    return not any(_avoids(needs, avoided, steps) for needs in hazard.needs or (NOTHING,))


def _avoids(known: Needs, needs: list[Needs], steps: Steps) -> bool:
    """Whether an order of the sources has all that is known and none of the needs as a whole."""
    steps.spend(len(needs) + 1)
    if not _possible(known):
        return False
    still = [one for one in needs if _possible(known | one)]
    if not still:
        return True
    return any(_avoids(known | {Above(one.lower, one.upper)}, still, steps) for one in still[0])


def _possible(above: Needs) -> bool:
    return not _circle({(one.upper, one.lower) for one in above})


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


def _nodes(element: Rails | Sources | Capacitor) -> frozenset[str]:
    """The nodes of an element; a path that passes one between its ends consists of two that short the element too.

    Under every polarity under which the whole shorts, one of the two does.
    """
    return frozenset((element.positive, element.negative) if isinstance(element, Capacitor) else element.nodes)


def _barred(stage: Stage, number: int, element: Rails | Sources | Capacitor) -> frozenset[int]:
    """Stiff elements that a path may not pass: the one it shorts; for a capacitor also every supply.

    A way through a supply and a capacitor is found at the supply.
    """
    if not isinstance(element, Capacitor):
        return frozenset({number})
    supplies = len(stage.rails) + len(stage.sources)
    return frozenset({number, *range(supplies)})


def _edge_key(edge: tuple[str, str, dict[str, object]]) -> tuple[str, str]:
    return edge[1], str(edge[2]["switch"])


def _hazard(
    switches: frozenset[str], joins: tuple[str, str], alternatives: set[Needs], rank: dict[str, int]
) -> Hazard:
    literals = tuple(Literal(name) for name in sorted(switches, key=rank.__getitem__))
    least = [one for one in alternatives if not any(other < one for other in alternatives)]
    single = {one for needs in least if len(needs) == 1 for one in needs}
    always = NOTHING in least or any(Above(one.lower, one.upper) in single for one in single)
    needs = () if always else tuple(sorted(least, key=lambda one: sorted(map(str, one))))
    return Hazard(literals, joins, needs)


def contradicted(hazard: Hazard, facts: Iterable[Above]) -> bool:
    """Whether the hazard cannot carry current under these facts: every orientation that it needs is ruled out.

    `with a above b` and `with b above c` give a above c as well.
    """
    known = {(one.upper, one.lower) for one in facts}
    if not hazard.needs or not known:
        return False
    return all(_circle(known | {(one.upper, one.lower) for one in needs}) for needs in hazard.needs)


def _circle(above: set[tuple[str, str]]) -> bool:
    """Whether something would be above itself: what has nothing above it is taken away while there is such."""
    while above:
        lowers = {lower for _, lower in above}
        rest = {pair for pair in above if pair[0] in lowers}
        if len(rest) == len(above):
            return True
        above = rest
    return False


def _always(element: Rails | Sources | Capacitor, upper: str, lower: str) -> Problem:
    text = f"'{upper}' and '{lower}' are joined whatever the switches do, so this supply is always shorted"
    return Problem(element.place, "always-shorted", text, "check the diodes and capacitors of the stage")


def _too_many(stage: Stage, count: int, whole: bool) -> Problem:
    text = f"the stage has {count} minimal shorting sets; at most {MOST_SETS} are proven"
    if not whole:
        text = (
            f"the stage has too many ways to count its minimal shorting sets; {count} were found when it was given up"
            f" after {MOST_STEPS} steps, and at most {MOST_SETS} in all are proven"
        )
    return Problem(_stiff(stage)[0].place, "too-many-sets", text, "describe the stage in several files")
