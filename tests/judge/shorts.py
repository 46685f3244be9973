"""The shorting sets of a small stage without capacitors, by trying every set of switches."""

from collections.abc import Callable
from itertools import combinations

from judge.literal import Forbids
from seqcheck.drive import Above, Conducts, Drive, Known
from seqcheck.hazards import Literal

Ends = tuple[str, str]


def asked(drive: Drive) -> list[tuple[tuple[Literal, ...], Forbids]]:
    """Each smallest set of switches that shorts, with the facts under which it is not asked for."""
    found: list[tuple[frozenset[str], set[Ends], bool]] = []
    for size in range(len(drive.columns) + 1):
        for chosen in combinations(drive.columns, size):
            on = frozenset(chosen)
            if any(less <= on for less, _, _ in found):
                continue
            rails, sources = _joined(drive, on)
            if rails or sources:
                found.append((on, sources, bool(rails)))
    return [
        (tuple(Literal(name) for name in drive.columns if name in on), _forbids(sources, always))
        for on, sources, always in found
    ]


def _joined(drive: Drive, on: frozenset[str]) -> tuple[set[Ends], set[Ends]]:
    """The pairs of rails, and of sources, that a set of switches joins, positive one first."""
    reach = _reach(drive, on)
    rails = {
        (upper, lower)
        for line in drive.stage.rails
        for upper, lower in combinations(line.nodes, 2)
        if lower in reach(upper)
    }
    sources = {
        (one, other)
        for line in drive.stage.sources
        for one in line.nodes
        for other in line.nodes
        if one != other and other in reach(one)
    }
    return rails, sources


def _reach(drive: Drive, on: frozenset[str]) -> Callable[[str], set[str]]:
    edges = {(diode.start, diode.end) for diode in drive.stage.diodes}
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
