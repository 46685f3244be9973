"""At which level a word of switches holds a node: where current out of it comes from and current into it goes.

Of all supplies that have a way to a node, current comes from the most positive; of all to which the node has one, it
goes to the most negative. A node is held where both are the same; else it is free between the two, as a leg is between
its diodes.
"""

from collections.abc import Iterable, Sequence
from itertools import combinations

from seqcheck.drive import Above, Conducts, Known, Stage
from seqcheck.effects import Level, Levels

Link = tuple[str, str, frozenset[tuple[str, str, bool]]]
"""From, to, and the capacitor that is passed, if one is: (positive, negative, whether its voltage is added)."""


def links(stage: Stage, on: frozenset[str]) -> list[Link]:
    """The edges that conduct with these switches on, capacitors passed either way."""
    found: list[Link] = [(diode.start, diode.end, frozenset()) for diode in stage.diodes]
    for switch in stage.switches:
        for start, end in switch.poles:
            if switch.name in on:
                found.append((start, end, frozenset()))
            if switch.conducts is Conducts.DIODE or (switch.conducts is Conducts.TWO_WAY and switch.name in on):
                found.append((end, start, frozenset()))
    for one in stage.capacitors:
        found.append((one.negative, one.positive, frozenset({(one.positive, one.negative, True)})))
        found.append((one.positive, one.negative, frozenset({(one.positive, one.negative, False)})))
    return found


def supplies(stage: Stage) -> frozenset[str]:
    """The nodes of rails and sources."""
    lines = [line.nodes for line in stage.rails] + [line.nodes for line in stage.sources]
    return frozenset(node for nodes in lines for node in nodes)


class Order:
    """Which level is above which, by the rails and what a row knows of the sources.

    A flying capacitor is taken to hold less than the supply it stands in.
    """

    def __init__(self, stage: Stage, known: Sequence[Known]) -> None:
        self._above = {pair for line in stage.rails for pair in combinations(line.nodes, 2)}
        facts = {(one.upper, one.lower) for one in known if isinstance(one, Above)}
        for _ in range(len(facts)):
            facts |= {(a, d) for a, b in facts for c, d in facts if b == c}
        self._above |= facts

    def above(self, one: Level, other: Level) -> bool:
        """Whether a level surely lies above another."""
        mine, theirs = one.through - other.through, other.through - one.through
        against = [part for part in mine if not part[2]] + [part for part in theirs if part[2]]
        if one.node == other.node:
            return bool(mine or theirs) and not against
        return (one.node, other.node) in self._above and len(against) <= 1

    def highest(self, levels: Iterable[Level]) -> Levels:
        """Those above which none of the others lies."""
        kept = set(levels)
        return frozenset(one for one in kept if not any(self.above(other, one) for other in kept))

    def lowest(self, levels: Iterable[Level]) -> Levels:
        """Those below which none of the others lies."""
        kept = set(levels)
        return frozenset(one for one in kept if not any(self.above(one, other) for other in kept))


def sources_of(edges: list[Link], stiff: frozenset[str], node: str) -> set[Level]:
    """The levels from which current can come out of `node`: a way from each leads to it."""
    return _met([(end, start, passed) for start, end, passed in edges], stiff, node, along=True)


def sinks_of(edges: list[Link], stiff: frozenset[str], node: str) -> set[Level]:
    """The levels to which current into `node` can go."""
    return _met(edges, stiff, node, along=False)


def _met(edges: list[Link], stiff: frozenset[str], node: str, *, along: bool) -> set[Level]:
    """The stiff nodes met first on ways that begin at `node`, with what capacitors make of their levels.

    A capacitor whose voltage is added on the way from a level to the node is added to the level (`along` tells that
    the edges were turned round, so that they say it that way); on the way from the node to a level the other way about.
    """
    found: set[Level] = set()
    nothing: frozenset[tuple[str, str, bool]] = frozenset()
    seen, waiting = {(node, nothing)}, [(node, nothing)]
    while waiting:
        here, passed = waiting.pop()
        if here in stiff:
            found.add(Level(here, passed))
            continue
        names = {part[:2] for part in passed}
        for start, end, over in edges:
            if start != here or any(part[:2] in names for part in over):
                continue
            more = passed | (over if along else frozenset((a, b, not added) for a, b, added in over))
            if (end, more) not in seen:
                seen.add((end, more))
                waiting.append((end, more))
    return found


def joined(edges: list[Link], stiff: frozenset[str], start: str, end: str) -> bool:
    """Whether a way leads from one node to the other past no supply and no capacitor."""
    seen, waiting = {start}, [start]
    while waiting:
        here = waiting.pop()
        if here == end:
            return True
        for one, other, over in edges:
            if one == here and not over and other not in seen and (other not in stiff or other == end):
                seen.add(other)
                waiting.append(other)
    return False
