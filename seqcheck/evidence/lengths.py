"""Rules about lengths in a replay, by their words: how long commands last, how soon modes follow, how late trips."""

from collections.abc import Iterator

from seqcheck.drive import RESET, Command, Drive
from seqcheck.evidence.possible import Stretch, Timeline, stretches, wanted
from seqcheck.evidence.refusal import NotPermitted
from seqcheck.hazards import Clearing, Delays, Following, Hazard, Lasting, Literal
from seqcheck.quantities import shown
from seqcheck.verdict import Act, Trace


def long_enough(hazard: Hazard) -> Delays | None:
    """From the beginning of a command to where it has lasted too long; None for another question.

    Stretches that touch are one: a break of no length breaks nothing.
    """
    asks = hazard.asks
    return Delays(asks.limit, 0) if isinstance(asks, Lasting) and asks.longer else None


def from_zero(pieces: list[Stretch]) -> list[Stretch]:
    """The stretches without what lies before time 0, which counts for no length."""
    return [Stretch(0, piece.end) if piece.start is None else piece for piece in pieces]


def require_too_short(drive: Drive, trace: Trace, commands: dict[str, Timeline[Command]]) -> None:
    """Refuse a claim that is not of something that lasts too short a time and ends with the trace."""
    asks = trace.hazard.asks
    claims = isinstance(asks, Lasting | Following) and trace.end - trace.overlap_from < asks.limit
    if not isinstance(asks, Lasting | Following) or not claims or trace.overlap_to != trace.end:
        raise NotPermitted("The claim is not of what is too short and ends with the run.")
    if isinstance(asks, Lasting):
        (literal,) = trace.hazard.literals
        found = set(_pulses(commands[literal.switch], literal))
    else:
        found = set(_followings(drive, trace, asks))
    if (trace.overlap_from, trace.end) not in found:
        span = f"from {shown(trace.overlap_from)} to {shown(trace.end)}"
        raise NotPermitted(f"What should be too short does not last {span}.")


def _pulses(timeline: Timeline[Command], literal: Literal) -> Iterator[tuple[int, int]]:
    """The commands that are as wanted for a time, from time 0 on; one that is unknown may be a pulse of no length."""
    for piece in stretches(timeline, lambda command: command is not Command.UNKNOWN and wanted(literal, command)):
        if piece.start is not None and piece.end is not None:
            yield piece.start, piece.end
    for piece in stretches(timeline, lambda command: command is Command.UNKNOWN):
        yield piece.start or 0, piece.start or 0


def _followings(drive: Drive, trace: Trace, asks: Following) -> Iterator[tuple[int, int]]:
    """From the last time that the one mode was left to each entry of the other."""
    at: str | None = drive.start
    left: int | None = None
    for event in trace.events:
        if event.act is Act.BEGINS:
            left = event.time if at == asks.left else left
            at = None
        elif event.act is Act.ENTERS:
            at = event.name
            if left is not None and at == asks.entered:
                yield left, event.time


def late(drive: Drive, trace: Trace, asks: Clearing) -> Iterator[Stretch]:
    """When the time of a trip is over: from `limit` after its arrival until a run leaves its target or `reset`.

    Of arrivals that are watched together the first says it.
    """
    trip = next((trip for trip in drive.trips if trip.name == asks.trip), None)
    if trip is None:
        raise NotPermitted(f"There is no trip {asks.trip}.")
    at: str | None = drive.start
    since: int | None = None
    for event in trace.events:
        if event.act is Act.BEGINS:
            if at in (trip.target, RESET) and since is not None:
                yield from _over(since + asks.limit, event.time)
                since = None
            at = None
        elif event.act is Act.ENTERS:
            at = event.name
        breaks_in = trip.at_once and event.act is Act.BEGINS and event.trip and drive.trips[event.index] is trip
        if since is None and (breaks_in or (event.act is Act.ARRIVES and event.name == trip.name)):
            since = event.time
    if since is not None:
        yield Stretch(since + asks.limit, None)


def at_rest(drive: Drive, trace: Trace, mode: str) -> Iterator[Stretch]:
    """When the firmware is at rest in a mode, each stay by itself."""
    since: int | None = None
    here = drive.start == mode
    for event in trace.events:
        if event.act is Act.BEGINS and here:
            yield Stretch(since, event.time)
            here = False
        elif event.act is Act.ENTERS:
            since, here = event.time, event.name == mode
    if here:
        yield Stretch(since, None)


def _over(start: int, end: int) -> Iterator[Stretch]:
    if start < end:
        yield Stretch(start, end)
