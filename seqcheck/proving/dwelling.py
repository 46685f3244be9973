"""Dwells that the search has cut short, made as long again as the file asks.

Once a mode has settled, a longer dwell differs from a shorter one by whole cycles of the carriers. Each carrier repeats
its cycle after its first edge in the settled dwell; what comes after the dwell comes later by the same time.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

from seqcheck.drive import Carrier
from seqcheck.proving.cutting import longest_memory
from seqcheck.proving.keys import Happening
from seqcheck.proving.location import Hop
from seqcheck.proving.projection import Projection
from seqcheck.proving.references import Reference
from seqcheck.verdict import Act, Event

_EDGES = (Act.RISES, Act.FALLS)


class Run(NamedTuple):
    """A run with times: of every hop, of its events (with the number of their hop), of the overlap and the end.

    `hot_place` is the number of the hop with which the overlap begins.
    """

    times: tuple[int, ...]
    events: tuple[tuple[int, Event], ...]
    hot_place: int
    hot: int
    end: int


@dataclass(frozen=True, slots=True)
class Dwell:
    """The hop with which a stay began, and the first one that a longer stay puts off: the one that ends it, or the one
    with which an overlap begins in it."""

    entered: int
    left: int


def with_full_dwells(projection: Projection, hops: Sequence[Hop], run: Run) -> Run:
    """The run with every dwell at least as long as the firmware's moves ask."""
    entered = 0
    for place in range(1, len(hops)):
        happening = hops[place].event
        assert isinstance(happening, Happening)
        if happening.edge is None:
            continue
        stayed = run.times[place] - run.times[entered]
        missing = projection.full_dwell(happening.edge, hops[place - 1].target) - stayed
        if missing > 0:
            overlap_within = entered < run.hot_place < place
            dwell = Dwell(entered, run.hot_place if overlap_within else place)
            if overlap_within and not _can_cycle(projection, dwell, run):
                dwell = Dwell(entered, place)  # the overlap itself goes through whole cycles
            run = _lengthened(projection, dwell, run, missing)
        entered = place
    return run


def _lengthened(projection: Projection, dwell: Dwell, run: Run, missing: int) -> Run:
    settled = run.times[dwell.entered] + longest_memory(projection.view)
    carriers = [projection.view.drive.carriers[name] for name in projection.view.carriers]
    splices = {carrier.name: _first_edge(run, dwell, carrier, settled) for carrier in carriers}
    cycling = [carrier for carrier in carriers if splices[carrier.name] is not None]
    longer = _whole_cycles(cycling, missing)
    inserted: list[tuple[int, Event]] = []
    for carrier in cycling:
        place = splices[carrier.name]
        assert place is not None
        edge = next(event for at, event in run.events if at == place)
        inserted += [(place, event) for event in _cycles(carrier, edge, longer)]
    moved = [
        (place, replace(event, time=event.time + longer) if _comes_later(place, event, dwell, splices) else event)
        for place, event in run.events
    ]
    events = tuple(sorted((*moved, *inserted), key=lambda one: one[1].time))
    times = tuple(time + longer if place >= dwell.left else time for place, time in enumerate(run.times))
    hot = run.hot + longer if run.hot >= run.times[dwell.left] else run.hot
    return Run(times, events, run.hot_place, hot, run.end + longer)


def _can_cycle(projection: Projection, dwell: Dwell, run: Run) -> bool:
    """Whether every carrier that moves has an edge in the settled part of a stay."""
    settled = run.times[dwell.entered] + longest_memory(projection.view)
    carriers = [projection.view.drive.carriers[name] for name in projection.view.carriers]
    moving = [carrier for carrier in carriers if Reference(carrier).moving]
    return all(_first_edge(run, dwell, carrier, settled) is not None for carrier in moving)


def _first_edge(run: Run, dwell: Dwell, carrier: Carrier, settled: int) -> int | None:
    return next(
        (
            place
            for place, event in run.events
            if dwell.entered < place < dwell.left
            and event.act in _EDGES
            and event.name == carrier.name
            and event.time >= settled
        ),
        None,
    )


def _comes_later(place: int, event: Event, dwell: Dwell, splices: dict[str, int | None]) -> bool:
    if place >= dwell.left:
        return True
    splice = splices.get(event.name) if event.act in (*_EDGES, Act.OUTPUT) else None
    return splice is not None and place > splice


def _whole_cycles(carriers: Sequence[Carrier], least: int) -> int:
    """The least time from `least` on that is a whole number of cycles of every carrier."""
    time = least
    while True:
        later = time
        for carrier in carriers:
            longest = Reference(carrier).longest_cycle
            count = 1 if longest is None else -(-later // longest)
            later = max(later, count * Reference(carrier).shortest_cycle)
        if later == time:
            return time
        time = later


def _cycles(carrier: Carrier, edge: Event, longer: int) -> list[Event]:
    """Whole cycles that take exactly `longer`, after an edge; the last event is an edge of the same kind."""
    longest = Reference(carrier).longest_cycle
    count = 1 if longest is None else -(-longer // longest)
    high_first = edge.act is Act.RISES
    levels = [carrier.high, carrier.low] if high_first else [carrier.low, carrier.high]
    acts = (Act.FALLS, Act.RISES) if high_first else (Act.RISES, Act.FALLS)
    slack = longer - count * Reference(carrier).shortest_cycle
    time, events = edge.time, []
    for _ in range(count):
        for level, act in zip(levels, acts, strict=True):
            assert level is not None
            extra = slack if level.hi is None else min(slack, level.hi - level.lo)
            slack -= extra
            length = level.lo + extra
            if carrier.dead.hi != 0 and length >= carrier.dead.lo:
                events.append(Event(time + carrier.dead.lo, Act.OUTPUT, carrier.name))
            time += length
            events.append(Event(time, act, carrier.name))
    return events
