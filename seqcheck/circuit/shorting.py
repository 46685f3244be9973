"""Shorting sets: the minimal sets of switches that close a way through a stiff element.

A short is a closed way through a stiff element; by breaking the way open at that element it becomes a directed path,
so shorting sets are the minimal sets of switches over all paths.
"""

from collections.abc import Iterator

from seqcheck.circuit import graph as graphs
from seqcheck.circuit.facts import excluded, opposite
from seqcheck.circuit.graph import (
    NOTHING,
    Stiff,
    conducting,
    in_order,
    nodes_of,
    passages,
    stiff,
    stiff_edges,
)
from seqcheck.circuit.ways import Needs, Quest, Steps, TooMuch, least_ways
from seqcheck.drive import Above, Capacitor, Rails, Stage
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problem, Problems


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
    if not whole or len(kept) > graphs.MOST_SETS:
        raise Problems([_too_many(stage, len(kept), whole)])
    return tuple(in_order(kept, stage))


def _found(stage: Stage) -> tuple[dict[frozenset[str], tuple[tuple[str, str], set[Needs]]], bool]:
    """By switches what they join and the conditions under which they do, fewest switches first; whether that is all.

    Of several supplies that the same switches short the first of the file is named.
    """
    passed = (edge for number, element in enumerate(stiff(stage)) for edge in stiff_edges(number, element))
    graph = passages([*conducting(stage), *passed])
    quests, elements = [], []
    for number, element in enumerate(stiff(stage)):
        for upper, lower, first in _ends(element):
            avoided = _nodes(element) - {upper, lower}
            quests.append(Quest(upper, lower, _barred(stage, number, element), avoided, first))
            elements.append(element)
    numbers: dict[frozenset[str], int] = {}
    needed: dict[frozenset[str], set[Needs]] = {}
    whole = True
    try:
        for number, (switches, needs) in least_ways(graph, quests, Steps(graphs.MOST_STEPS)):
            if not switches:
                raise Problems([_always(elements[number], quests[number].start, quests[number].end)])
            numbers[switches] = min(number, numbers.get(switches, number))
            needed.setdefault(switches, set()).add(needs)
    except TooMuch:
        whole = False
    joined = {switches: (quests[number].start, quests[number].end) for switches, number in numbers.items()}
    return {switches: (joined[switches], needs) for switches, needs in needed.items()}, whole


def _least(hazards: list[Hazard]) -> Iterator[Hazard]:
    """Those that some polarity brings without any smaller one; `hazards` come fewest switches first.

    Raises TooMuch after all that the steps were enough for.
    """
    steps = Steps(graphs.MOST_STEPS)
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
    if excluded(known, NOTHING):
        return False
    still = [one for one in needs if not excluded(known, one)]
    if not still:
        return True
    return any(_avoids(known | {opposite(one)}, still, steps) for one in still[0])


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


def _nodes(element: Stiff) -> frozenset[str]:
    """The nodes of an element; a path that passes one between its ends consists of two that short the element too.

    Under every polarity under which the whole shorts, one of the two does.
    """
    return frozenset(nodes_of(element))


def _too_many(stage: Stage, count: int, whole: bool) -> Problem:
    text = f"the stage has {count} minimal shorting sets; at most {graphs.MOST_SETS} are proven"
    if not whole:
        text = (
            f"the stage has too many ways to count its minimal shorting sets; {count} were found when it was given up"
            f" after {graphs.MOST_STEPS} steps, and at most {graphs.MOST_SETS} in all are proven"
        )
    return Problem(stiff(stage)[0].place, "too-many-sets", text, "describe the stage in several files")
