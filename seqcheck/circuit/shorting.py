"""Shorting sets: the minimal sets of switches that close a way through a stiff element.

A short is a closed way through a stiff element; by breaking the way open at that element it becomes a directed path,
so shorting sets are the minimal sets of switches over all paths.
"""

from collections.abc import Iterator
from functools import partial

from seqcheck.circuit import graph as graphs
from seqcheck.circuit.graph import NOTHING, Needs, Stiff, conducting, graph_of, least, least_ways, stiff, stiff_edges
from seqcheck.drive import Above, Capacitor, Rails, Stage
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problem, Problems


def shorting_sets(stage: Stage) -> tuple[Hazard, ...]:
    """All minimal sets of switches that short the stage, in the order of the stage's switches.

    Raises Problems if a supply is shorted whatever the switches do, or if there are more sets than MOST_SETS.
    """
    passed = (edge for number, element in enumerate(stiff(stage)) for edge in stiff_edges(number, element))
    graph = graph_of([*conducting(stage), *passed])
    found: dict[frozenset[str], tuple[tuple[str, str], set[Needs]]] = {}
    for number, element in enumerate(stiff(stage)):
        for upper, lower, first in _ends(element):
            barred = _barred(stage, number, element)
            ways = least_ways(graph, upper, barred, partial(_too_many, element))
            for switches, needs in ways.get(lower, ()):
                if not switches:
                    raise Problems([_always(element, upper, lower)])
                found.setdefault(switches, ((upper, lower), set()))[1].add(needs | first)
    rank = {switch.name: place for place, switch in enumerate(stage.switches)}
    hazards = [_hazard(switches, joins, alternatives, rank) for switches, (joins, alternatives) in found.items()]
    kept = least(hazards, stage)
    if len(kept) > graphs.MOST_SETS:
        raise Problems([_too_many(stiff(stage)[0], len(kept))])
    return tuple(kept)


def _ends(element: Stiff) -> Iterator[tuple[str, str, Needs]]:
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


def _barred(stage: Stage, number: int, element: Stiff) -> frozenset[int]:
    """Stiff elements that a path may not pass: the one it shorts; for a capacitor also every supply.

    A way through a supply and a capacitor is found at the supply.
    """
    if not isinstance(element, Capacitor):
        return frozenset({number})
    supplies = len(stage.rails) + len(stage.sources)
    return frozenset({number, *range(supplies)})


def _hazard(switches: frozenset[str], joins: tuple[str, str], alternatives: set[Needs], rank: dict[str, int]) -> Hazard:
    literals = tuple(Literal(name) for name in sorted(switches, key=rank.__getitem__))
    fewest = [one for one in alternatives if not any(other < one for other in alternatives)]
    single = {one for needs in fewest if len(needs) == 1 for one in needs if isinstance(one, Above)}
    always = NOTHING in fewest or any(Above(one.lower, one.upper) in single for one in single)
    needs = () if always else tuple(sorted(fewest, key=lambda one: sorted(map(str, one))))
    return Hazard(literals, joins, needs)


def _always(element: Stiff, upper: str, lower: str) -> Problem:
    text = f"'{upper}' and '{lower}' are joined whatever the switches do, so this supply is always shorted"
    return Problem(element.place, "always-shorted", text, "check the diodes and capacitors of the stage")


def _too_many(element: Stiff, count: int) -> Problem:
    text = f"the stage has more than {count - 1} minimal shorting sets; at most {graphs.MOST_SETS} are proven"
    return Problem(element.place, "too-many-sets", text, "describe the stage in several files")
