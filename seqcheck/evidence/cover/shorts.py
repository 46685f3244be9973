"""Whether hazards cover all shorts of a stage: section 3 of the meaning, by walking every closed way."""

from collections.abc import Callable, Iterator
from itertools import combinations
from typing import NamedTuple

from seqcheck.drive import Above, Conducts, Known, Stage
from seqcheck.hazards import Hazard

Needs = frozenset[Above]
NOTHING: Needs = frozenset()
MOST_STEPS = 300_000


class TooLarge(Exception):  # noqa: N818 - it says what a stage is, not that the program failed
    """The stage has more ways than are walked."""


class Way(NamedTuple):
    """The switches of a way and the conditions under which current takes it."""

    switches: frozenset[str]
    needs: Needs


class _Edge(NamedTuple):
    start: str
    end: str
    switch: str | None
    needs: Needs
    line: int | None  # which stiff line
    opens: bool  # whether a way that passes it is a short


def first_uncovered(stage: Stage, hazards: tuple[Hazard, ...]) -> Way | None:
    """A short that may happen while none of the hazards does; None if there is none. Raises TooLarge."""
    asked = [
        (frozenset(one.switch for one in hazard.literals), [_orders(needs) for needs in hazard.needs or (NOTHING,)])
        for hazard in hazards
        if all(one.on for one in hazard.literals)
        and all(isinstance(fact, Above) for needs in hazard.needs for fact in needs)
    ]

    def covered(way: Way) -> bool:
        known = [needs for switches, alternatives in asked if switches <= way.switches for needs in alternatives]
        return any(needs <= way.needs for needs in known) or not _escapes(way.needs, known)

    return next((way for way in _ways(stage, covered) if not covered(way)), None)


def shorts(stage: Stage, hazard: Hazard) -> bool:
    """Whether the hazard's switches short the stage whenever it is asked for. Raises TooLarge."""
    names = {one.switch for one in hazard.literals}
    found = {way.needs for way in _ways(stage, lambda way: not way.switches <= names) if way.switches <= names}
    return not any(_escapes(_orders(needs), list(found)) for needs in hazard.needs or (NOTHING,))


def _orders(needs: frozenset[Known]) -> Needs:
    return frozenset(one for one in needs if isinstance(one, Above))


def _escapes(known: Needs, needs: list[Needs]) -> bool:
    """Whether the sources may stand in an order in which all that is known holds, and none of `needs` as a whole.

    What is known of an order may be completed to one as long as nothing is above itself.
    """
    above = _closed({(one.upper, one.lower) for one in known})
    if any(upper == lower for upper, lower in above):
        return False
    still = [one for one in needs if not any((pair.lower, pair.upper) in above for pair in one)]
    return not still or any(_escapes(known | {Above(pair.lower, pair.upper)}, still[1:]) for pair in still[0])


def _closed(above: set[tuple[str, str]]) -> set[tuple[str, str]]:
    while more := {(one, end) for one, middle in above for start, end in above if middle == start} - above:
        above = above | more
    return above


def _ways(stage: Stage, enough: Callable[[Way], bool]) -> Iterator[Way]:
    """All closed ways that short, given up where `enough` holds of their beginning."""
    edges = list(_edges(stage))
    out: dict[str, list[_Edge]] = {}
    for edge in edges:
        out.setdefault(edge.start, []).append(edge)
    steps = 0
    for first in (edge for edge in edges if edge.opens):
        paths = [(first.end, frozenset({first.end}), frozenset({first.line}), Way(frozenset(), first.needs))]
        while paths:
            steps += 1
            if steps > MOST_STEPS:
                raise TooLarge
            node, nodes, lines, way = paths.pop()
            if node == first.start:
                yield way
                continue
            for edge in out.get(node, ()):
                if edge.end in nodes or (edge.line is not None and edge.line in lines):
                    continue
                longer = Way(way.switches | ({edge.switch} if edge.switch else set()), way.needs | edge.needs)
                if edge.end == first.start or not enough(longer):
                    paths.append((edge.end, nodes | {edge.end}, lines | {edge.line}, longer))


def _edges(stage: Stage) -> Iterator[_Edge]:
    for switch in stage.switches:
        for start, end in switch.poles:
            yield _Edge(start, end, switch.name, NOTHING, None, False)
            if switch.conducts is not Conducts.ONE_WAY:
                back = None if switch.conducts is Conducts.DIODE else switch.name
                yield _Edge(end, start, back, NOTHING, None, False)
    for diode in stage.diodes:
        yield _Edge(diode.start, diode.end, None, NOTHING, None, False)
    line = 0
    for rails in stage.rails:
        for upper, lower in combinations(rails.nodes, 2):
            yield _Edge(lower, upper, None, NOTHING, line, True)
        line += 1
    for sources in stage.sources:
        for one, other in combinations(sources.nodes, 2):
            yield _Edge(one, other, None, frozenset({Above(other, one)}), line, True)
            yield _Edge(other, one, None, frozenset({Above(one, other)}), line, True)
        line += 1
    for capacitor in stage.capacitors:
        yield _Edge(capacitor.negative, capacitor.positive, None, NOTHING, line, True)
        yield _Edge(capacitor.positive, capacitor.negative, None, NOTHING, line, False)
        line += 1
