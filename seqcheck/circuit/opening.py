"""Opening sets: the minimal sets of switches whose not conducting leaves the current of a winding without a way.

A current loses its way when each of its ways has a switch that does not conduct, so that the opening sets are the
minimal transversals of the sets of switches on its ways (Berge 1973, found one way after the other).
"""

from collections import Counter
from collections.abc import Iterable, Iterator

from seqcheck.circuit import graph as graphs
from seqcheck.circuit.graph import NOTHING, Edge, conducting, in_order, nodes_of, passages, stiff
from seqcheck.circuit.ways import Needs, Quest, Steps, TooMuch, least_ways
from seqcheck.drive import Capacitor, CurrentInto, CurrentOut, Stage, Winding
from seqcheck.hazards import Current, Hazard, Literal
from seqcheck.messages import Problem, Problems

_SUPPLY = ""
"""Stands for all rails and sources where the rest of a winding's circuit is not named; no node has that name."""


def opening_sets(stage: Stage) -> tuple[Hazard, ...]:
    """All minimal sets of switches that open a winding that `must flow`, in the order of the stage's switches.

    A direction in which no current can flow whatever the switches do needs no way. Raises Problems if that is so of
    both directions of a winding, if one stands alone at its end, or if there are more ways or sets than MOST_SETS.
    """
    found: dict[frozenset[str], tuple[list[Current], list[Needs]]] = {}
    for winding in stage.windings:
        if not winding.must_flow:
            continue
        for end in winding.ends:
            if end not in attached_nodes(stage) and sum(end in one.ends for one in stage.windings) == 1:
                raise Problems([_loose(winding, end)])
        flows = [(current, ways) for current in currents(stage, winding) if (ways := _ways(stage, winding, current))]
        if not flows:
            raise Problems([_always(winding)])
        for current, ways in flows:
            for switches in _transversals(ways, winding):
                opened, needs = found.setdefault(switches, ([], []))
                opened.append(current)
                needs.append(needed(stage, winding, current))
    hazards = [_hazard(stage, switches, *said) for switches, said in found.items()]
    kept = in_order((one for one in hazards if not any(_implies(other, one) for other in hazards)), stage)
    if len(kept) > graphs.MOST_SETS:
        raise Problems([_too_many(next(one for one in stage.windings if one.must_flow), len(kept))])
    return tuple(kept)


def currents(stage: Stage, winding: Winding) -> Iterator[Current]:
    """The currents that a winding can have, by those of its ends at which more than windings stands."""
    attached = attached_nodes(stage)
    ends = [end for end in winding.ends if end in attached]
    if len(ends) == 2:
        first, second = ends
        yield Current(first, second)
        yield Current(second, first)
    elif ends:
        yield Current(ends[0], None)
        yield Current(None, ends[0])


def attached_nodes(stage: Stage) -> set[str]:
    """The nodes at which a switch, a diode or a stiff element stands."""
    found = {node for edge in conducting(stage) for node in (edge.start, edge.end)}
    return found | {node for element in stiff(stage) for node in nodes_of(element)}


def needed(stage: Stage, winding: Winding, current: Current) -> Needs:
    """What is so while a winding has this current: facts that `with` could say or contradict.

    Of a node at which several windings end a fact tells the sum, and so nothing of one of them.
    """
    count = Counter(end for one in stage.windings for end in one.ends)
    out = current.out_of or next((end for end in winding.ends if end != current.into), None)
    into = current.into or next((end for end in winding.ends if end != current.out_of), None)
    found: set[CurrentOut | CurrentInto] = set()
    if out is not None and count[out] == 1:
        found.add(CurrentOut(out))
    if into is not None and count[into] == 1:
        found.add(CurrentInto(into))
    return frozenset(found)


def flow_edges(stage: Stage, joined: bool) -> Iterator[Edge]:
    """The edges on which a current can come round: a stiff element passes it either way.

    With `joined` all supplies are one, at the node _SUPPLY: the rest of the circuit of a winding may be at any of them.
    """
    yield from conducting(stage)
    for number, element in enumerate(stiff(stage)):
        capacitor = isinstance(element, Capacitor)
        for start in nodes_of(element):
            yield from (Edge(start, end, None, NOTHING, number) for end in nodes_of(element) if end != start)
            if joined and not capacitor:
                yield Edge(_SUPPLY, start, None, NOTHING, number)
                yield Edge(start, _SUPPLY, None, NOTHING, number)


def _ways(stage: Stage, winding: Winding, current: Current) -> list[frozenset[str]]:
    """The minimal sets of switches on the ways of a current: from where it leaves the winding to where it enters it."""
    start, end = current.into or _SUPPLY, current.out_of or _SUPPLY
    graph = passages(flow_edges(stage, None in (current.out_of, current.into)))
    found: list[frozenset[str]] = []
    try:
        for _, (switches, _) in least_ways(
            graph, [Quest(start, end, frozenset(), frozenset(), NOTHING)], Steps(graphs.MOST_STEPS)
        ):
            found.append(switches)
    except TooMuch as refusal:
        raise Problems([_too_many_ways(winding, len(found))]) from refusal
    if len(found) > graphs.MOST_SETS:
        raise Problems([_too_many_ways(winding, len(found))])
    return found


def _transversals(ways: Iterable[frozenset[str]], winding: Winding) -> list[frozenset[str]]:
    """The minimal sets that have a switch of every way; none where a way has no switch."""
    found: list[frozenset[str]] = [frozenset()]
    for way in sorted(ways, key=lambda one: (len(one), sorted(one))):
        grown = {one | {switch} for one in found if not one & way for switch in way}
        kept = [one for one in found if one & way]
        kept += [one for one in grown if not any(less <= one for less in kept)]
        found = [one for one in kept if not any(less < one for less in kept)]
        if len(found) > graphs.MOST_SETS:
            raise Problems([_too_many(winding, len(found))])
    return found


def _hazard(stage: Stage, switches: frozenset[str], opened: list[Current], needs: list[Needs]) -> Hazard:
    literals = tuple(Literal(one.name, on=False) for one in stage.switches if one.name in switches)
    fewest = {one for one in needs if not any(other < one for other in needs)}
    single = {one for need in fewest if len(need) == 1 for one in need}
    both = any(CurrentInto(one.node) in single for one in single if isinstance(one, CurrentOut))
    kept = () if NOTHING in fewest or both else tuple(sorted(fewest, key=lambda one: sorted(map(str, one))))
    return Hazard(literals, (), kept, tuple(opened))


def _implies(smaller: Hazard, larger: Hazard) -> bool:
    """Whether `smaller` happens whenever `larger` does: fewer literals, and no more needs."""
    if not set(smaller.literals) < set(larger.literals):
        return False
    return not smaller.needs or (bool(larger.needs) and all(any(n <= m for n in smaller.needs) for m in larger.needs))


def _always(winding: Winding) -> Problem:
    text = "no current can flow through this winding, whatever the switches do"
    return Problem(winding.place, "always-open", text, "check the nodes of the stage, or take 'must flow' out")


def _loose(winding: Winding, end: str) -> Problem:
    text = f"nothing but this winding stands at '{end}', so that no current can flow through it"
    return Problem(winding.place, "always-open", text, "check its name, or name the other end alone")


def _too_many_ways(winding: Winding, count: int) -> Problem:
    text = f"the current of this winding has {count} least ways or more; at most {graphs.MOST_SETS} are looked at"
    return Problem(winding.place, "too-many-sets", text, "describe the stage in several files")


def _too_many(winding: Winding, count: int) -> Problem:
    text = f"the windings have more than {count - 1} minimal opening sets; at most {graphs.MOST_SETS} are proven"
    return Problem(winding.place, "too-many-sets", text, "describe the stage in several files")
