"""The replay of a trace: by the meaning of the drive alone, so that it can contradict whatever made the trace."""

from collections.abc import Iterable
from dataclasses import replace

from seqcheck.drive import Drive
from seqcheck.evidence.cycles import bridged
from seqcheck.evidence.endless import require_endless
from seqcheck.evidence.facts import asked_for
from seqcheck.evidence.lengths import at_rest, from_zero, late, long_enough, require_too_short
from seqcheck.evidence.possible import Stretch, delays, possible, stretches, together, wanted, within_trace
from seqcheck.evidence.refusal import NotPermitted
from seqcheck.evidence.walk import Walk
from seqcheck.hazards import Clearing, Delays, Following, Hazard, Lasting, Literal, Stuck
from seqcheck.quantities import shown
from seqcheck.verdict import Replayed, Span, Trace

__all__ = ["NotPermitted", "from_its_beginning", "replay"]


def replay(drive: Drive, trace: Trace) -> Replayed:
    """Walk through `trace` with concrete times, and confirm the overlap that it claims.

    `commands` of the answer also holds pulses of no length, as two changes at one time; `possible` starts at time 0
    where a literal was possible before. Raises NotPermitted, with a sentence, where an event is not permitted at its
    time, a deadline is overrun, or the overlap is not exactly one in which all literals are possible and the hazard
    is asked for; where the hazard asks about a length, that which is claimed to be too long or too short.
    """
    walk = _walked(drive, trace)
    if _too_short(trace.hazard):
        require_too_short(drive, trace, dict(walk.commands))
        return _replayed(drive, trace, walk)
    found = _asked_delays(drive, trace.hazard)
    spans = {literal: _possible(walk, literal, found[literal], trace) for literal in found}
    overlaps = _overlaps(drive, walk, trace, spans)
    claimed = Span(trace.overlap_from, trace.overlap_to)
    if claimed not in overlaps and not _cut_off(claimed, overlaps, trace.end):
        raise NotPermitted(
            f"The overlap {_between(claimed)} is not one of the run: all literals are possible together "
            + (", ".join(map(_between, overlaps)) or "at no time")
            + "."
        )
    if claimed.end is None:
        _require_endless(drive, walk, found)
    return _replayed(drive, trace, walk)


def _too_short(hazard: Hazard) -> bool:
    """Whether it is asked for something that lasts too short a time."""
    return isinstance(hazard.asks, Lasting | Following) and long_enough(hazard) is None


def _replayed(drive: Drive, trace: Trace, walk: Walk) -> Replayed:
    """What the run is, apart from what is asked of it."""
    commands = {switch: tuple(timeline) for switch, timeline in walk.commands.items()}
    plain = replace(trace, prolonged=None, hazard=replace(trace.hazard, asks=None))
    found = delays(drive, trace.hazard)
    claimed = Span(trace.overlap_from, trace.overlap_to)
    return Replayed(commands, {one: _possible(walk, one, found[one], plain) for one in found}, claimed)


def _asked_delays(drive: Drive, hazard: Hazard) -> dict[Literal, Delays]:
    long = long_enough(hazard)
    return delays(drive, hazard) if long is None else dict.fromkeys(hazard.literals, long)


def from_its_beginning(drive: Drive, trace: Trace) -> Trace:
    """The trace with its overlap claimed from its true beginning.

    For a run to a mode that holds the hazard, or round in a circle: it was looked for by where it leads, so that its
    claim may begin too late. What is too short is claimed from its beginning as it is.
    Raises NotPermitted as replay does.
    """
    if _too_short(trace.hazard):
        return trace
    walk = _walked(drive, trace)
    times = _asked_delays(drive, trace.hazard)
    spans = {literal: _possible(walk, literal, times[literal], trace) for literal in times}
    around = [
        one
        for one in _overlaps(drive, walk, trace, spans)
        if one.start <= trace.overlap_from and (one.end is None or trace.overlap_from < one.end)
    ]
    return replace(trace, overlap_from=around[0].start) if around else trace


def _overlaps(drive: Drive, walk: Walk, trace: Trace, spans: dict[Literal, tuple[Span, ...]]) -> tuple[Span, ...]:
    asked = possible(stretches(walk.known, asked_for(trace.hazard)), Delays(0, 0))
    over = list(_looked_at(drive, trace))
    return together([*spans.values(), within_trace(asked, trace.end), within_trace(over, trace.end)])


def _looked_at(drive: Drive, trace: Trace) -> Iterable[Stretch]:
    """The times at which the question of the hazard looks at its literals: always, where it asks no other."""
    asks = trace.hazard.asks
    if isinstance(asks, Clearing):
        return late(drive, trace, asks)
    return at_rest(drive, trace, asks.mode) if isinstance(asks, Stuck) else [Stretch(None, None)]


def _walked(drive: Drive, trace: Trace) -> Walk:
    unknown = [one.switch for one in trace.hazard.literals if one.switch not in drive.columns]
    if unknown or not (trace.hazard.literals or trace.hazard.asks):
        raise NotPermitted(f"The hazard is none of the drive: {', '.join(unknown) or 'it has no literal'}.")
    try:
        walk = Walk(drive, trace)
    except NotPermitted as why:
        raise NotPermitted(f"The start of the run is not permitted: {why}.") from None
    for number, event in enumerate(trace.events, start=1):
        walk.step(number, event)
    walk.finish(trace.end)
    return walk


def _possible(walk: Walk, literal: Literal, times: Delays, trace: Trace) -> tuple[Span, ...]:
    pieces: list[Stretch] = stretches(walk.commands[literal.switch], lambda command: wanted(literal, command))
    if long_enough(trace.hazard) is not None:
        pieces = from_zero(pieces)
    for gap in walk.gaps[literal.switch]:
        pieces = bridged(pieces, gap, times.fall)
    later = trace.prolonged[1] if trace.prolonged is not None and trace.prolonged[0] == literal else 0
    return within_trace(possible(pieces, times, later), trace.end)


def _cut_off(claimed: Span, overlaps: tuple[Span, ...], end: int) -> bool:
    """Whether the claim stops with the trace, in the middle of an overlap that goes on."""
    return claimed.end == end and Span(claimed.start, None) in overlaps


def _require_endless(drive: Drive, walk: Walk, found: dict[Literal, Delays]) -> None:
    try:
        require_endless(drive, walk, found)
    except NotPermitted as why:
        raise NotPermitted(f"The overlap has an end after {shown(walk.now)}, against the claim: {why}.") from None


def _between(span: Span) -> str:
    return f"from {shown(span.start)} {'without end' if span.end is None else f'to {shown(span.end)}'}"
