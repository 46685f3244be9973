"""The delays of a hazard's literals, from the paths of the drive."""

from seqcheck.drive import Drive, Part
from seqcheck.hazards import Delays, Literal


def delays_of(drive: Drive, literals: tuple[Literal, ...]) -> dict[Literal, Delays]:
    """The `in` and `out` of every literal, in ps, with the raise of `difference` if two switches must both be on."""
    found = {literal: _plain(drive, literal) for literal in literals}
    if len(literals) == 2 and all(literal.on for literal in literals):
        one, other = literals
        return {
            one: Delays(_raised(drive, other.switch, one.switch), found[one].fall),
            other: Delays(_raised(drive, one.switch, other.switch), found[other].fall),
        }
    return found


def _plain(drive: Drive, literal: Literal) -> Delays:
    parts = drive.paths[literal.switch]
    if literal.on:
        return Delays(sum(part.on.lo for part in parts), _slowest_off(parts))
    return Delays(sum(part.off.lo for part in parts), sum(part.on.hi or 0 for part in parts))


def _slowest_off(parts: tuple[Part, ...]) -> int:
    return sum(part.off.hi or 0 for part in parts)


def _raised(drive: Drive, leaving: str, coming: str) -> int:
    """The `in` of `coming` against `leaving`: max(on1(Y), min(off2(X) - excess, off2(Y))).

    The excess is the sum of off2 over the parts of X less the sum of on1 over those of Y, but a part on both paths
    counts as the least of that difference and what its data sheet bounds it to. A part that stands twice on both counts
    twice.
    """
    ahead, behind = list(drive.paths[leaving]), list(drive.paths[coming])
    excess = 0
    for part in drive.paths[leaving]:
        if part in behind:
            ahead.remove(part)
            behind.remove(part)
            spread = (part.off.hi or 0) - part.on.lo
            excess += spread if part.difference is None else min(spread, part.difference)
    excess += _slowest_off(tuple(ahead)) - sum(part.on.lo for part in behind)
    fastest = sum(part.on.lo for part in drive.paths[coming])
    slowest = _slowest_off(drive.paths[coming])
    return max(fastest, min(_slowest_off(drive.paths[leaving]) - excess, slowest))
