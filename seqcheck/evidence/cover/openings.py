"""Whether hazards cover all open windings of a stage: section 3.4 of the meaning, by cutting way after way.

What leaves a current without a way has a switch of each of its ways. So where a set of switches that do not conduct
leaves it some way, one of the switches on that way must join them, and all that opens is found by trying each.
"""

from collections.abc import Iterator
from typing import NamedTuple

from seqcheck.drive import Conducts, CurrentInto, CurrentOut, Known, Stage, Winding
from seqcheck.evidence.cover.shorts import MOST_STEPS, NOTHING, TooLarge
from seqcheck.hazards import Current, Hazard


class Opening(NamedTuple):
    """Switches that leave a current without a way while none of them conducts, and what is so while it flows."""

    switches: frozenset[str]
    current: Current
    needs: frozenset[Known]


class _Flow(NamedTuple):
    """A current: the nodes from which it must find a way, those that it must reach, and what is so while it flows."""

    current: Current
    starts: frozenset[str]
    goals: frozenset[str]
    needs: frozenset[Known]


_Edges = list[tuple[str, str, str | None]]


def first_unclaimed(stage: Stage, hazards: tuple[Hazard, ...]) -> Opening | None:
    """An open winding that may happen while none of the hazards does; None if there is none. Raises TooLarge.

    A winding through which no current can ever flow is one that no switch needs to open.
    """
    edges = list(_edges(stage))
    for winding in (one for one in stage.windings if one.must_flow):
        if all(_way(edges, flow, frozenset()) is None for flow in _flows_of(stage, winding)):
            return Opening(frozenset(), Current(None, None), frozenset())
    for flow in _flows(stage):
        if _way(edges, flow, frozenset()) is None:
            continue  # a current that no switch lets flow never begins
        claimed = [
            frozenset(literal.switch for literal in hazard.literals)
            for hazard in hazards
            if not any(literal.on for literal in hazard.literals)
            and (not hazard.needs or any(needs <= flow.needs for needs in hazard.needs))
        ]
        switches = _unclaimed(edges, flow, claimed)
        if switches is not None:
            return Opening(switches, flow.current, flow.needs)
    return None


def _unclaimed(edges: _Edges, flow: _Flow, claimed: list[frozenset[str]]) -> frozenset[str] | None:
    """Switches that cut every way of a current without all those of a claim; None if there are none."""
    waiting, seen = [frozenset[str]()], {frozenset[str]()}
    while waiting:
        off = waiting.pop()
        way = _way(edges, flow, off)
        if way is None:
            return off
        for switch in way:
            more = off | {switch}
            if more not in seen and not any(claim <= more for claim in claimed):
                seen.add(more)
                waiting.append(more)
        if len(seen) > MOST_STEPS // 10:
            raise TooLarge
    return None


def opens(stage: Stage, hazard: Hazard) -> bool:
    """Whether the hazard's switches, none of them on, open what it names, and it is asked for only while that flows."""
    edges = list(_edges(stage))
    off = frozenset(literal.switch for literal in hazard.literals)
    opened = [flow for flow in _flows(stage) if _way(edges, flow, off) is None]
    opened = [flow for flow in opened if _way(edges, flow, frozenset()) is not None]
    if not hazard.currents or not all(any(flow.current == one for flow in opened) for one in hazard.currents):
        return False
    if hazard.needs:
        return all(any(flow.needs <= needs for flow in opened) for needs in hazard.needs)
    found = {flow.needs for flow in opened}
    return NOTHING in found or any(
        {frozenset({CurrentOut(end)}), frozenset({CurrentInto(end)})} <= found
        for winding in stage.windings
        for end in winding.ends
    )


def _flows(stage: Stage) -> Iterator[_Flow]:
    """Every current that must flow, in either direction."""
    for winding in stage.windings:
        if winding.must_flow:
            yield from _flows_of(stage, winding)


def _flows_of(stage: Stage, winding: Winding) -> Iterator[_Flow]:
    own = [end for end in winding.ends if _attached(stage, end)]
    stars = [end for end in winding.ends if end not in own and sum(end in one.ends for one in stage.windings) > 1]
    if len(own) == 2:
        one, other = own
        yield _flow(stage, winding, Current(one, other), frozenset({other}), frozenset({one}))
        yield _flow(stage, winding, Current(other, one), frozenset({one}), frozenset({other}))
    elif own and len(own) + len(stars) == len(winding.ends):
        supplies = frozenset(node for nodes in _supplies(stage) for node in nodes)
        end = frozenset(own)
        yield _flow(stage, winding, Current(own[0], None), supplies, end)
        yield _flow(stage, winding, Current(None, own[0]), end, supplies)


def _flow(stage: Stage, winding: Winding, current: Current, starts: frozenset[str], goals: frozenset[str]) -> _Flow:
    """A current with what is so meanwhile at the ends of its winding, where no other winding ends."""
    needs: set[Known] = set()
    for end in winding.ends:
        if sum(one.ends.count(end) for one in stage.windings) == 1:
            leaves = end == current.out_of or (end != current.into and current.out_of is None)
            needs.add(CurrentOut(end) if leaves else CurrentInto(end))
    return _Flow(current, starts, goals, frozenset(needs))


def _attached(stage: Stage, node: str) -> bool:
    """Whether more than windings stands at a node."""
    pairs = [(one.positive, one.negative) for one in stage.capacitors]
    pairs += [(one.start, one.end) for one in stage.diodes]
    pairs += [pole for switch in stage.switches for pole in switch.poles]
    return any(node in nodes for nodes in (*_supplies(stage), *pairs))


def _supplies(stage: Stage) -> list[tuple[str, ...]]:
    """The nodes of each line of rails and of sources."""
    return [one.nodes for one in stage.rails] + [one.nodes for one in stage.sources]


def _edges(stage: Stage) -> Iterator[tuple[str, str, str | None]]:
    """(from, to, the switch that must conduct): switches and diodes, and stiff lines passed either way."""
    for switch in stage.switches:
        for start, end in switch.poles:
            yield start, end, switch.name
            if switch.conducts is not Conducts.ONE_WAY:
                yield end, start, None if switch.conducts is Conducts.DIODE else switch.name
    for diode in stage.diodes:
        yield diode.start, diode.end, None
    for nodes in (*_supplies(stage), *((one.positive, one.negative) for one in stage.capacitors)):
        yield from ((one, other, None) for one in nodes for other in nodes if one != other)


def _way(edges: _Edges, flow: _Flow, off: frozenset[str]) -> frozenset[str] | None:
    """The switches of some way of a current past those that do not conduct; None if it has none."""
    reached: dict[str, frozenset[str]] = {node: frozenset() for node in flow.starts}
    waiting = sorted(flow.starts)
    while waiting:
        node = waiting.pop(0)
        if node in flow.goals:
            return reached[node]
        for start, end, switch in edges:
            if start == node and end not in reached and switch not in off:
                reached[end] = reached[node] | ({switch} if switch else set())
                waiting.append(end)
    return None
