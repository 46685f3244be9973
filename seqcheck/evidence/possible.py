"""When a literal is possible: interval arithmetic over the passed command, by the definition in words.

The times at which the command is as wanted, each stretch prolonged by `fall` at its end, stretches that now touch
joined, and then the first `rise` of each joined stretch removed.
"""

from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from typing import TypeVar

from seqcheck.drive import Command, Drive, Part
from seqcheck.evidence.refusal import NotPermitted
from seqcheck.hazards import Delays, Hazard, Literal
from seqcheck.quantities import Interval
from seqcheck.verdict import Span

T = TypeVar("T")
Timeline = Sequence[tuple[int | None, T]]  # values from a time on; None: for ever before


@dataclass(frozen=True, slots=True)
class Stretch:
    """A stretch of time; `start` None: for ever before, `end` None: still so at the end of the trace."""

    start: int | None
    end: int | None


def wanted(literal: Literal, command: Command) -> bool:
    """Whether `command` is, or may be, what the literal wants."""
    return command is Command.UNKNOWN or (command is Command.ON) == literal.on


def stretches(timeline: Timeline[T], holds: Callable[[T], bool]) -> list[Stretch]:
    """The stretches in which the value holds, those of no length included."""
    ends = [*(time for time, _ in timeline[1:]), None]
    return [Stretch(start, end) for (start, value), end in zip(timeline, ends, strict=True) if holds(value)]


def possible(pieces: Iterable[Stretch], delays: Delays, later: int = 0) -> list[Stretch]:
    """The stretches of positive length at which that is possible which is wanted in `pieces`, given in order.

    With `later` each of their ends comes so much later.
    """
    longer = prolonged(pieces, delays.fall)
    late = (Stretch(one.start if one.start is None else one.start + delays.rise, one.end) for one in longer)
    there = [one for one in late if one.start is None or one.end is None or one.start < one.end]
    return prolonged(there, later) if later else there


def prolonged(pieces: Iterable[Stretch], fall: int) -> list[Stretch]:
    """`pieces`, given in order, each longer by `fall`, those that now touch made one."""
    joined: list[Stretch] = []
    for piece in pieces:
        longer = Stretch(piece.start, None if piece.end is None else piece.end + fall)
        if joined and _touch(joined[-1], longer):
            joined[-1] = Stretch(joined[-1].start, _later(joined[-1].end, longer.end))
        else:
            joined.append(longer)
    return joined


def _touch(earlier: Stretch, later: Stretch) -> bool:
    return earlier.end is None or later.start is None or later.start <= earlier.end


def _later(one: int | None, other: int | None) -> int | None:
    return None if one is None or other is None else max(one, other)


def within_trace(pieces: Iterable[Stretch], end: int) -> tuple[Span, ...]:
    """The part of `pieces` from time 0 to the end of the trace; what goes on beyond it has no end."""
    spans = (
        Span(max(0, one.start or 0), None if one.end is None or one.end > end else one.end)
        for one in pieces
        if (one.start is None or one.start < end) and (one.end is None or one.end > 0)
    )
    return tuple(spans)


def together(all_spans: Iterable[Sequence[Span]]) -> tuple[Span, ...]:
    """The maximal spans of positive length that lie in one span of each sequence."""
    common: tuple[Span, ...] = (Span(0, None),)
    for spans in all_spans:
        common = tuple(both for one in common for other in spans if (both := _both(one, other)) is not None)
    return common


def _both(one: Span, other: Span) -> Span | None:
    start = max(one.start, other.start)
    ends = [end for end in (one.end, other.end) if end is not None]
    if ends and min(ends) <= start:
        return None
    return Span(start, min(ends) if ends else None)


def delays(drive: Drive, hazard: Hazard) -> dict[Literal, Delays]:
    """The delays of each literal of `hazard`: parts in series added, and `in` raised for a pair that is wanted on."""
    found = {literal: _alone(drive.paths.get(literal.switch, ()), literal.on) for literal in hazard.literals}
    if len(found) != 2 or not all(literal.on for literal in found):
        return found
    if all(part.difference is None for literal in found for part in drive.paths.get(literal.switch, ())):
        return found  # nothing is raised then
    one, other = found
    return {one: _raised(drive, found, one, other), other: _raised(drive, found, other, one)}


def _alone(path: tuple[Part, ...], on: bool) -> Delays:
    toward, back = ("on", "off") if on else ("off", "on")
    spans: list[tuple[Interval, Interval]] = [(getattr(part, toward), getattr(part, back)) for part in path]
    return Delays(sum(span.lo for span, _ in spans), sum(_bounded(span) for _, span in spans))


def _raised(drive: Drive, found: dict[Literal, Delays], raised: Literal, other: Literal) -> Delays:
    """`raised` follows `other`: what their shared parts may differ by bounds how much sooner it can come."""
    own, others = (Counter(drive.paths.get(one.switch, ())) for one in (raised, other))
    shared = own & others
    excess = sum(_bounded(part.off) for part in (others - shared).elements())
    excess -= sum(part.on.lo for part in (own - shared).elements())
    excess += sum(_excess(part) for part in shared.elements())
    one = found[raised]
    return Delays(max(one.rise, min(found[other].fall - excess, one.fall)), one.fall)


def _excess(part: Part) -> int:
    whole = _bounded(part.off) - part.on.lo
    return whole if part.difference is None else min(whole, part.difference)


def _bounded(span: Interval) -> int:
    if span.hi is None:
        raise NotPermitted("The hazard cannot be judged: a part of a path has no upper bound.")
    return span.hi
