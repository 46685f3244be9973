"""Whole cycles of a carrier in a replay: many equal ones, of which only the first and the last are gone through.

A switch that follows the carrier is told the same in every cycle. What is possible at a moment depends on the last
`memory` of its commands alone, once they have been the same for that long; so from there on each cycle is like the one
before, and those between the first few and the last few need no look.
"""

from dataclasses import dataclass

from seqcheck.drive import Command
from seqcheck.evidence.possible import Stretch, prolonged
from seqcheck.verdict import Cycles


@dataclass(frozen=True, slots=True)
class Gap:
    """The time from `start` to `end`, in which cycles of that `length` repeat the one before `start`."""

    start: int
    end: int
    length: int


Told = list[tuple[int, Command]]
"""The commands of a switch in one cycle, and when they come after its beginning."""


def looked_at(start: int, cycles: Cycles, memory: int) -> tuple[list[int], Gap | None]:
    """When the first and the last of some cycles begin; the gap between, if there is one.

    On either side of the gap the cycles last for longer than `memory` and one cycle.
    """
    length = cycles.first + cycles.second
    shown = memory // length + 2
    last = cycles.count - shown
    kept = [*range(min(shown, cycles.count)), *range(max(shown, last), cycles.count)]
    gap = Gap(start + shown * length, start + last * length, length) if last > shown else None
    return [start + number * length for number in kept], gap


def merged(told: dict[str, Told]) -> list[tuple[int, dict[str, Command]]]:
    """What several switches are told in one cycle, in time order; an instant can hold two of a switch."""
    found: list[tuple[int, dict[str, Command]]] = []
    for after in sorted({after for one in told.values() for after, _ in one}):
        at = {switch: [command for when, command in one if when == after] for switch, one in told.items()}
        for turn in range(max(map(len, at.values()))):
            found.append((after, {switch: own[turn] for switch, own in at.items() if turn < len(own)}))
    return found


def bridged(pieces: list[Stretch], gap: Gap, fall: int) -> list[Stretch]:
    """The stretches in which a literal is as wanted, with what the cycles in a gap bring to it.

    Where its possibility does not break off within the cycle before the gap, it does not in those that repeat it: then
    it counts as wanted all through the gap, else nowhere in it.
    """
    before = [one for one in (_part(piece, None, gap.start) for piece in pieces) if one is not None]
    after = [one for one in (_part(piece, gap.end, None) for piece in pieces) if one is not None]
    lasting = any(_covers(one, gap.start - gap.length, gap.start) for one in prolonged(before, fall))
    return [*before, *([Stretch(gap.start, gap.end)] if lasting else []), *after]


def _part(piece: Stretch, start: int | None, end: int | None) -> Stretch | None:
    """What of a stretch lies from `start` to `end`."""
    if start is not None and (piece.start is None or piece.start < start):
        return Stretch(start, piece.end) if piece.end is None or piece.end >= start else None
    if end is not None and (piece.end is None or piece.end > end):
        return Stretch(piece.start, end) if piece.start is None or piece.start <= end else None
    return piece


def _covers(piece: Stretch, start: int, end: int) -> bool:
    return (piece.start is None or piece.start <= start) and (piece.end is None or piece.end >= end)
