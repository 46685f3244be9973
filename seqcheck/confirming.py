"""Before a run is shown: it is replayed, and the place of the file is found at which it goes wrong."""

from seqcheck.drive import Drive
from seqcheck.evidence.replay import NotPermitted, from_its_beginning, replay
from seqcheck.hazards import Clearing, Following, Hazard, Lasting, Length
from seqcheck.source import Place
from seqcheck.verdict import Act, Event, Replayed, Trace


class Fault(Exception):  # noqa: N818 - the program is at fault, not the input
    """A counterexample that its own replay does not confirm: nothing that was found may be shown."""


def confirmed(drive: Drive, trace: Trace, *, whole: bool = False) -> tuple[Trace, Replayed]:
    """The trace and its replay; with `whole` its overlap from its true beginning on. Raises Fault."""
    try:
        shown = from_its_beginning(drive, trace) if whole else trace
        return shown, replay(drive, shown)
    except NotPermitted as fault:
        raise Fault(f"the run that would show {named(trace.hazard)} does not replay: {fault}") from fault


def named(hazard: Hazard) -> str:
    """The literals of a hazard in a few words."""
    if isinstance(hazard.asks, Following):
        return f"{hazard.asks.entered} after {hazard.asks.left}"
    return " with ".join(map(str, hazard.literals)) or "a short by one switch"


def place_of(drive: Drive, trace: Trace, replayed: Replayed) -> Place:
    """The move or trip whose run brings what is found, or the row at rest in which it comes."""
    changes = [time for line in replayed.commands.values() for time, _ in line if time is not None]
    asks = trace.hazard.asks
    if isinstance(asks, Following):
        return next(_line(drive, one) for one in reversed(trace.events) if one.act is Act.BEGINS)
    if isinstance(asks, Clearing):
        return next(trip.place for trip in drive.trips if trip.name == asks.trip)
    longer = isinstance(asks, Lasting) and asks.longer
    shown = trace.overlap_from if longer or not isinstance(asks, Length) else trace.end
    last = max((time for time in changes if time <= shown), default=0)
    concerned = {literal.switch for literal in trace.hazard.literals}
    mode, run, at_rest, written = drive.start, drive.modes[drive.start].place, True, False
    for event in trace.events:
        if event.time > last:
            break
        if event.act is Act.BEGINS:
            run, at_rest = _line(drive, event), False
        elif event.act is Act.ENTERS:
            mode, at_rest = event.name, True
        if event.time == last and concerned & {switch for switch, _ in event.writes}:
            written = True
    if at_rest and not written:
        return drive.modes[mode].place
    return run


def _line(drive: Drive, event: Event) -> Place:
    return (drive.trips[event.index] if event.trip else drive.moves[event.index]).place
