"""Sentences about a hazard and its verdict that every form says alike."""

from seqcheck.drive import Drive, Mode
from seqcheck.hazards import Hazard
from seqcheck.quantities import shown
from seqcheck.reports.pieces import listed
from seqcheck.verdict import Check, Unsafe

CAUTION = "A proof is about the file, not about the board."
NOTHING = "nothing to prove"
SERVES = "this file only serves 'use'"


def switches(hazard: Hazard) -> str:
    """The switches of a hazard in a sentence, as the file would write the literals: `UH and VL off`."""
    return listed([str(one) for one in hazard.literals])


def subject(hazard: Hazard) -> str:
    """What the hazard is, as a noun: `P to N through UH and UL`, or the switches alone where nothing is joined."""
    if not hazard.joins:
        return switches(hazard)
    return f"{' to '.join(hazard.joins)} through {switches(hazard)}"


def lasting(overlap: int | None, greatest: bool) -> str:
    """How long, to stand after a verb."""
    if overlap is None:
        return "without end"
    return f"for {'up to' if greatest else 'at least'} {shown(overlap)}"


def happens(hazard: Hazard, overlap: int | None, greatest: bool = True) -> str:
    """One sentence without full stop: what can happen and for how long."""
    if hazard.joins:
        return f"{_joined(hazard.joins)} through {switches(hazard)}, {lasting(overlap, greatest)}"
    each = [f"{one.switch} can {'conduct' if one.on else 'be off'}" for one in hazard.literals]
    return f"{listed(each)}, all at once, {lasting(overlap, greatest)}"


def _joined(nodes: tuple[str, ...]) -> str:
    """The stiff nodes that can be joined, or the one whose own element is shorted."""
    return f"{nodes[0]} can be joined to {listed(nodes[1:])}" if len(nodes) > 1 else f"{nodes[0]} can be shorted"


def shorted_row(verdict: Unsafe, drive: Drive) -> Mode | None:
    """The row of the switching table that a SHORT points at, None for other checks."""
    if verdict.check is not Check.SHORT:
        return None
    rows = drive.modes.values()
    return next((row for row in rows if (row.place.file, row.place.line) == _line_of(verdict)), None)


def _line_of(verdict: Unsafe) -> tuple[str, int]:
    return verdict.place.file, verdict.place.line


def where(verdict: Unsafe, drive: Drive) -> str:
    """Which row of the table holds a SHORT, as a sentence without full stop; empty for other checks."""
    row = shorted_row(verdict, drive)
    if row is None:
        return ""
    return f"row '{row.name}' of the table (line {row.place.line}) commands {switches(verdict.hazard)} together"


def condition(hazard: Hazard) -> str:
    """When the short carries current, as a sentence without full stop; empty where it always does."""
    if not hazard.needs or frozenset() in hazard.needs:
        return ""
    ways = sorted(listed(sorted(f"{one.upper} is above {one.lower}" for one in way)) for way in hazard.needs)
    return f"it carries current while {listed(ways, 'or')}"


def cure(verdict: Unsafe, drive: Drive) -> str:
    """What would cure it, with the number, as a sentence without full stop."""
    if verdict.cure is not None:
        missing = f"{shown(verdict.cure.shortage)} missing at {verdict.cure.place}"
        return f"{verdict.cure.words} ({missing})"
    if (row := shorted_row(verdict, drive)) is not None:
        return f"no wait cures this; row '{row.name}' must leave one of {switches(verdict.hazard)} off"
    if verdict.overlap is None:
        return f"no wait cures this; nothing ends it once {switches(verdict.hazard)} are so together"
    bound = "up to" if verdict.greatest else "at least"
    return f"{switches(verdict.hazard)} must be kept apart {bound} {shown(verdict.overlap)} longer"
