"""From a path of hops to a run with concrete times."""

from dataclasses import replace

from seqcheck.drive import Drive, Move, Trip
from seqcheck.firmware import Deed
from seqcheck.proving.cutting import longest_memory
from seqcheck.proving.dwelling import Run, with_full_dwells
from seqcheck.proving.gaps import ended_at
from seqcheck.proving.keys import CARRIER, Happening, Key
from seqcheck.proving.location import Hop
from seqcheck.proving.projection import Projection
from seqcheck.proving.references import FORGOTTEN, HIGH_DEAD, HIGH_OUT, LOW_OUT
from seqcheck.proving.schedule import Difference, Path, constraints_of, scheduled
from seqcheck.proving.search import Node, endless_circle, hops_out
from seqcheck.proving.shortest import begun_at
from seqcheck.source import Place
from seqcheck.verdict import Act, Event, Phase, Trace


class Infeasible(Exception):  # noqa: N818 - it names what a path is
    """A path of the search has no concrete times: the program is at fault."""


def trace_of(projection: Projection, node: Node, endless: bool, interlocked: bool) -> Trace:
    """The run to a node, with times that make its last overlap longest. Raises Infeasible."""
    nodes = node.path()
    first = len(nodes) - 1
    while first > 0 and nodes[first - 1].location.overlapping:
        first -= 1
    circling = endless and bool(node.location.bounds)
    ending = [] if endless else hops_out(node)
    hops = [*(one.hop for one in nodes), *ending]
    to_last = bool(ending) or circling
    path, times = _timed(projection, hops, first, to_last)
    circle = endless_circle(node) if circling else []
    for _ in range(2 * node.location.size * bool(circle)):
        if times[len(hops) - 1] > times[first]:
            break
        hops += circle  # a round may take no time before one that does
        path, times = _timed(projection, hops, first, to_last)
    end = times[len(hops) - 1 if to_last else path.end]
    short = Run(tuple(times[: len(hops)]), _all_events(projection, hops, times), first, times[first], end)
    run = with_full_dwells(projection, hops, short)
    until = None if endless and not circling else run.end
    happened = tuple(event for _, event in run.events)
    phases = _phases(projection, hops[0], path, times)
    return Trace(projection.view.hazard, phases, happened, run.end, run.hot, until, interlocked)


def gap_trace(projection: Projection, node: Node, watched: int, least: int) -> Trace:
    """The run to a node that ends the least gap, in which the literal would meet the others if prolonged by 1 ps more.

    Raises Infeasible.
    """
    nodes = node.path()
    ended, met = ended_at(projection, nodes, watched), len(nodes) - 1
    hops = [one.hop for one in nodes]
    path, times = _timed(projection, hops, ended, True, met)
    events = _all_events(projection, hops, times)
    short = Run(tuple(times[: len(hops)]), events, ended, times[ended], times[met] + 1)
    run = with_full_dwells(projection, hops, short)
    happened = tuple(event for _, event in run.events)
    phases = _phases(projection, hops[0], path, times)
    hazard = projection.view.hazard
    literal = hazard.literals[watched]
    return Trace(hazard, phases, happened, run.end, run.end - 1, run.end, True, (literal, least + 1))


def short_trace(projection: Projection, node: Node) -> Trace:
    """The run to a node in which something ends too soon, as soon as it can. Raises Infeasible."""
    nodes = node.path()
    begun, met = begun_at(projection, nodes), len(nodes) - 1
    hops = [one.hop for one in nodes]
    path, times = _timed(projection, hops, begun, True, met)
    events = _all_events(projection, hops, times)
    short = Run(tuple(times[: len(hops)]), events, begun, times[begun], times[met])
    run = with_full_dwells(projection, hops, short)
    happened = tuple(event for _, event in run.events)
    phases = _phases(projection, hops[0], path, times)
    return Trace(projection.view.hazard, phases, happened, run.end, run.hot, run.end)


def rest_trace(projection: Projection, node: Node, endless: bool) -> Trace:
    """The run to a node, which then stays there as long as it can; the overlap is claimed from its coming on.

    Raises Infeasible.
    """
    nodes = node.path()
    come = len(nodes) - 1
    hops = [one.hop for one in nodes]
    path, times = _timed(projection, hops, come, False)
    events = _all_events(projection, hops, times)
    short = Run(tuple(times[: len(hops)]), events, come, times[come], times[path.end])
    run = with_full_dwells(projection, hops, short)
    happened = tuple(event for _, event in run.events)
    phases = _phases(projection, hops[0], path, times)
    until = None if endless else run.end
    return Trace(projection.view.hazard, phases, happened, run.end, run.hot, until)


def _all_events(projection: Projection, hops: list[Hop], times: list[int]) -> tuple[tuple[int, Event], ...]:
    timed = list(enumerate(zip(hops, times, strict=False)))[1:]
    return tuple((place, event) for place, (hop, time) in timed for event in _events(projection, hop, time))


def _phases(projection: Projection, start: Hop, path: Path, times: list[int]) -> tuple[Phase, ...]:
    key = start.target.key
    assert isinstance(key, Key)
    births = {projection.clock_name(key, place): times[variable] for place, variable in path.births.items()}
    return tuple(
        _phase(projection, place, state, births) for place, state in enumerate(key.carriers) if state != FORGOTTEN
    )


def _timed(
    projection: Projection, hops: list[Hop], origin: int, to_last: bool, met: int | None = None
) -> tuple[Path, list[int]]:
    """The path with times that make its overlap longest, its stays no longer than cut ones.

    The overlap begins with hop `origin` and ends with the last one, or (not `to_last`) some time after it. With `met`
    it is a time from `origin` to that hop, and shortest; after a gap the run goes on.

    A stay in which the overlap begins must be as long as the file asks, or else have settled before.
    """
    entered = max((place for place in range(origin + 1) if _by_firmware(hops[place])), default=0)
    left = next((place for place in range(origin + 1, len(hops)) if _by_firmware(hops[place])), len(hops))
    before = [hops[0], *(projection.eased(hops[at], hops[at - 1].target) for at in range(1, entered + 1))]
    timed = [_scheduled(projection, [*before, *hops[entered + 1 :]], origin, (), met)]
    if entered < origin and left < len(hops):
        eased = projection.eased(hops[left], hops[left - 1].target)
        if eased != hops[left]:
            settled = Difference(entered, origin, -projection.settled)
            all_eased = [*before, *hops[entered + 1 : left], eased, *hops[left + 1 :]]
            timed.append(_scheduled(projection, all_eased, origin, (settled,), met))
    found = [one for one in timed if one is not None]
    if not found:
        raise Infeasible
    longest = max(found, key=lambda one: one[1][len(hops) - 1 if to_last else one[0].end] - one[1][origin])
    return longest if met is None else min(found, key=lambda one: one[1][met] - one[1][origin])


def _by_firmware(hop: Hop) -> bool:
    """Whether a hop ends a stay and begins another."""
    happening = hop.event
    assert isinstance(happening, Happening)
    return happening.edge is not None and happening.edge.resets_x


def _scheduled(
    projection: Projection, hops: list[Hop], origin: int, more: tuple[Difference, ...], met: int | None
) -> tuple[Path, list[int]] | None:
    path = constraints_of(hops)
    lasting = () if met is None or hops[-1].target.struck else (Difference(met, path.end, -1),)
    path = replace(path, constraints=(*path.constraints, *more, *lasting))
    asked_for = sum(value for hop in hops for _, value in (*hop.least, *hop.after)) + projection.settled
    times = scheduled(path, origin if met is None else met, 1 + longest_memory(projection.view) + asked_for)
    return None if times is None else (path, times)


def _phase(projection: Projection, place: int, state: int, births: dict[int, int]) -> Phase:
    carrier = projection.view.carriers[place]
    settled = projection.view.drive.carriers[carrier].dead.lo  # a reference that never moves is long past its dead time
    age = -births.get(CARRIER + place, -settled)
    return Phase(carrier, state in (HIGH_DEAD, HIGH_OUT), age, state in (HIGH_OUT, LOW_OUT))


def _events(projection: Projection, hop: Hop, time: int) -> list[Event]:
    """The events of one hop; timeouts of the literals' own automata are none."""
    happening = hop.event
    assert isinstance(happening, Happening)
    if happening.act is None:
        return []
    if happening.edge is None:
        return [Event(time, happening.act, happening.name)]
    drive, writing = projection.view.drive, projection.firmware.writing
    events = []
    for deed in happening.edge.step.deeds:
        cells = tuple((drive.columns[switch], writing.cell(cell)) for switch, cell in deed.writes)
        if deed.act is Act.ARRIVES:
            trip = drive.trips[deed.number]
            events.append(Event(time, deed.act, trip.name, deed.number, True, place=trip.place))
            continue
        is_trip = deed.number >= len(drive.moves)
        index = deed.number - len(drive.moves) if is_trip else deed.number
        run = drive.trips[index] if is_trip else drive.moves[index]
        name = run.target if deed.act is Act.ENTERS else ""
        events.append(Event(time, deed.act, name, index, is_trip, cells, _place(drive, run, deed)))
    return events


def _place(drive: Drive, run: Move | Trip, deed: Deed) -> Place:
    """Where the file says it: the step, the row, or the run itself."""
    if deed.act is Act.ENTERS:
        return drive.modes[run.target].place
    if deed.item < 0:
        return run.place
    return run.steps[deed.item].place if deed.item < len(run.steps) else drive.modes[run.target].place
