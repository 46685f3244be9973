"""The shorting and opening sets of a small stage, by trying every set of switches."""

from collections.abc import Callable, Iterator
from itertools import combinations

from judge.literal import Forbids
from seqcheck.drive import Above, Conducts, CurrentInto, CurrentOut, Drive, Known, Winding
from seqcheck.hazards import Literal

Ends = tuple[str, str]
Asked = list[tuple[tuple[Literal, ...], Forbids]]


def asked(drive: Drive) -> Asked:
    """Each smallest set of switches that shorts or opens, with the facts under which it is not asked for."""
    return [*_shorts(drive), *_openings(drive)]


def _shorts(drive: Drive) -> Asked:
    found: list[tuple[frozenset[str], set[Ends], bool]] = []
    for on in _subsets(drive):
        if any(less <= on for less, _, _ in found):
            continue
        rails, sources = _joined(drive, on)
        if rails or sources:
            found.append((on, sources, bool(rails)))
    return [
        (tuple(Literal(name) for name in drive.columns if name in on), _forbids(sources, always))
        for on, sources, always in found
    ]


def _subsets(drive: Drive) -> Iterator[frozenset[str]]:
    """All sets of switches, small ones first."""
    for size in range(len(drive.columns) + 1):
        yield from map(frozenset, combinations(drive.columns, size))


# Open windings


def _openings(drive: Drive) -> Asked:
    """For each smallest set of switches that are off the currents that it stops; forbidden where all are known not to
    flow."""
    found: dict[frozenset[str], list[Ends]] = {}
    for winding in (one for one in drive.stage.windings if one.must_flow):
        for start, end in _directions(winding):
            stopped = [off for off in _subsets(drive) if not _flows(drive, off, start, end)]
            if frozenset() in stopped:
                continue  # it never flows
            for off in stopped:
                if not any(less < off for less in stopped):
                    found.setdefault(off, []).append((start, end))
    return [
        (tuple(Literal(name, on=False) for name in drive.columns if name in off), _stopped(ends))
        for off, ends in found.items()
    ]


def _directions(winding: Winding) -> list[Ends]:
    """The node at which current enters the winding from the stage, and that at which it comes back; "" is elsewhere."""
    one, other = winding.ends if len(winding.ends) == 2 else (winding.ends[0], "")
    return [(one, other), (other, one)]


def _flows(drive: Drive, off: frozenset[str], out_of: str, into: str) -> bool:
    """Whether current out of a node into a winding, and back at the other, comes round while these switches are off."""
    lines = [one.nodes for one in (*drive.stage.rails, *drive.stage.sources)]
    supplies = {node for nodes in lines for node in nodes}
    plates = [(one.positive, one.negative) for one in drive.stage.capacitors]
    through = [(a, b) for nodes in (*lines, *plates) for a in nodes for b in nodes if a != b]
    reach = _reach(drive, frozenset(drive.columns) - off, through)
    starts = {into} if into else supplies
    goals = {out_of} if out_of else supplies
    return any(goals & reach(start) for start in starts)


def _stopped(ends: list[Ends]) -> Forbids:
    def forbids(known: tuple[Known, ...]) -> bool:
        """The draws have one winding at a node, so that a fact about the node is one about the winding."""
        out = {fact.node for fact in known if isinstance(fact, CurrentOut)}
        into = {fact.node for fact in known if isinstance(fact, CurrentInto)}
        return all(start in into or end in out for start, end in ends)

    return forbids


# Shorts


def _joined(drive: Drive, on: frozenset[str]) -> tuple[set[Ends], set[Ends]]:
    """The pairs of rails, and of sources, that a set of switches joins, positive one first.

    A capacitor may be passed on the way, and one that is itself joined counts as rails; the draws have at most one.
    """
    plates = [(one.positive, one.negative) for one in drive.stage.capacitors]
    assert len(plates) < 2
    reach = _reach(drive, on, plates + [(b, a) for a, b in plates])
    bare = _reach(drive, on, [])
    rails = {
        (upper, lower)
        for line in drive.stage.rails
        for upper, lower in combinations(line.nodes, 2)
        if lower in reach(upper)
    }
    rails |= {(a, b) for a, b in plates if b in bare(a)}
    sources = {
        (one, other)
        for line in drive.stage.sources
        for one in line.nodes
        for other in line.nodes
        if one != other and other in reach(one)
    }
    return rails, sources


def _reach(drive: Drive, on: frozenset[str], more: list[Ends]) -> Callable[[str], set[str]]:
    edges = {(diode.start, diode.end) for diode in drive.stage.diodes} | set(more)
    for switch in drive.stage.switches:
        for start, end in switch.poles:
            if switch.name in on:
                edges.add((start, end))
            if switch.conducts is Conducts.DIODE or (switch.conducts is Conducts.TWO_WAY and switch.name in on):
                edges.add((end, start))

    def reach(start: str) -> set[str]:
        found, waiting = {start}, [start]
        while waiting:
            here = waiting.pop()
            new = {end for begin, end in edges if begin == here} - found
            found |= new
            waiting += new
        return found

    return reach


def _forbids(sources: set[Ends], always: bool) -> Forbids:
    """Not asked for where every polarity that the short needs contradicts what is known."""

    def forbids(known: tuple[Known, ...]) -> bool:
        above = {(fact.upper, fact.lower) for fact in known if isinstance(fact, Above)}
        for _ in range(len(above)):
            above |= {(a, d) for a, b in above for c, d in above if b == c}
        return not always and all((lower, upper) in above for upper, lower in sources)

    return forbids
