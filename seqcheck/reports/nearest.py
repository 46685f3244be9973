"""What an editor shows of margins, where a switch, a row, a move or a trip stands."""

from collections.abc import Iterator

from seqcheck.reports.budget import left, set_by
from seqcheck.reports.pieces import listed
from seqcheck.reports.wording import lasting
from seqcheck.verdict import Budget, Margin

PENDING = "margins: not measured yet"


def of_switch(name: str, found: Budget) -> list[str]:
    """The margins of all shorts in which a switch is, those after it first; or why there is none."""
    own = [one for one in found.margins if any(name == literal.switch for literal in one.hazard.literals)]
    own.sort(key=lambda one: one.literal.switch != name)
    said = [f"margin {_pair(one)}: {left(one)}{_by(one, found)}" for one in own]
    return [*said, *_without(name, found)]


def of_line(line: int, found: Budget) -> list[str]:
    """The margins that a line of the file sets."""
    own = [one for one in found.margins if one.place is not None and one.place.line == line]
    return [f"sets the margin {_pair(one)}: {left(one)}" for one in own if one.place and one.place.file == found.file]


def _pair(margin: Margin) -> str:
    others = [one.switch for one in margin.hazard.literals if one != margin.literal]
    return f"{margin.literal.switch} off, then {listed(others)} on"


def _by(margin: Margin, found: Budget) -> str:
    if margin.slack is None:
        return ""
    return f", set by {set_by(margin, found.drive)}" if margin.place is not None else f" ({margin.limit})"


def _without(name: str, found: Budget) -> Iterator[str]:
    """What is said of shorts that have no margin."""
    for hazard, overlap, greatest in found.unsafe:
        others = [one.switch for one in hazard.literals if one.switch != name]
        if len(others) < len(hazard.literals):
            yield f"no margin with {listed(others)}: they overlap {lasting(overlap, greatest)}"
    for one in found.undecided:
        others = [literal.switch for literal in one.hazard.literals if literal.switch != name]
        if len(others) < len(one.hazard.literals):
            yield f"margin with {listed(others)}: undecided, not proven; {one.limit}"
