"""Dwells that the search has cut short, made as long again as the file asks.

Once a mode has settled, a longer dwell differs from a shorter one by whole cycles of the carriers. Each carrier repeats
its cycle after its first edge in the settled dwell; what comes after the dwell comes later by the same time.
"""

from collections.abc import Sequence
from math import lcm
from typing import NamedTuple

from seqcheck.drive import Carrier, Update
from seqcheck.proving.cutting import longest_memory
from seqcheck.proving.keys import Happening
from seqcheck.proving.location import Hop
from seqcheck.proving.projection import Projection
from seqcheck.proving.references import Reference
from seqcheck.quantities import Interval
from seqcheck.records import dataclass, replace
from seqcheck.verdict import Act, Cycles, Event

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
        if happening.edge is None or not happening.edge.resets_x:
            continue
        stayed = run.times[place] - run.times[entered]
        missing = projection.full_dwell(happening.edge, hops[place - 1].target) - stayed
        if missing > 0:
            overlap_within = entered < run.hot_place < place
            dwell = Dwell(entered, run.hot_place if overlap_within else place)
            run = _lengthened(projection, dwell, run, missing)
        entered = place
    return run


@dataclass(frozen=True, slots=True)
class Splice:
    """Where a stay is made longer for a carrier: the number of the hop of an edge, and whether whole cycles follow
    it; else the level before it, which may last for ever, lasts longer."""

    place: int
    cycling: bool

    def puts_off(self, place: int) -> bool:
        """Whether an event of the carrier comes later."""
        return place > self.place if self.cycling else place >= self.place


def _lengthened(projection: Projection, dwell: Dwell, run: Run, missing: int) -> Run:
    settled = run.times[dwell.entered] + longest_memory(projection.view)
    carriers = [projection.view.drive.carriers[name] for name in projection.view.carriers]
    found = {carrier.name: _splice(run, dwell, carrier, settled) for carrier in carriers}
    splices = {name: splice for name, splice in found.items() if splice is not None}
    cycling = [carrier for carrier in carriers if carrier.name in splices and splices[carrier.name].cycling]
    longer = _whole_cycles(cycling, missing)
    inserted: list[tuple[int, Event]] = []
    for carrier in cycling:
        place = splices[carrier.name].place
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


def _splice(run: Run, dwell: Dwell, carrier: Carrier, settled: int) -> Splice | None:
    """After the first edge in the settled part of a stay, or before it; None where the carrier need not move in it.

    Writes held for a rise may wait for the first one even there.
    """
    for place, event in run.events:
        if not dwell.entered < place < dwell.left or event.name != carrier.name or event.time < settled:
            continue
        if event.act in _EDGES:
            ended = carrier.low if event.act is Act.RISES else carrier.high
            if ended is not None and ended.hi is None:
                return Splice(place, cycling=False)
            if event.act is Act.RISES or carrier.update is not Update.AT_RISE:
                return Splice(place, cycling=True)
    return None


def _comes_later(place: int, event: Event, dwell: Dwell, splices: dict[str, Splice]) -> bool:
    if place >= dwell.left:
        return True
    if event.act is Act.CLEARS:  # of a switch whose partner follows the one carrier, or long before
        splice = next(iter(splices.values()), None)
    else:
        splice = splices.get(event.name) if event.act in (*_EDGES, Act.OUTPUT, Act.CYCLES) else None
    return splice is not None and splice.puts_off(place)


def _whole_cycles(carriers: Sequence[Carrier], least: int) -> int:
    """The least time from `least` on that is a whole number of cycles of every carrier."""
    references = [Reference(carrier) for carrier in carriers]
    common = lcm(*(one.shortest_cycle for one in references if one.shortest_cycle == one.longest_cycle))
    time = -(-least // common) * common
    while True:
        soonest = max((_count(one, time) * one.shortest_cycle for one in references), default=time)
        if soonest <= time:
            return time
        time = -(-soonest // common) * common


def _count(reference: Reference, time: int) -> int:
    """The least number of cycles that can last so long."""
    return 1 if reference.longest_cycle is None else -(-time // reference.longest_cycle)


def _cycles(carrier: Carrier, edge: Event, longer: int) -> list[Event]:
    """Whole cycles that take exactly `longer`, after an edge; the last of them ends with an edge of the same kind."""
    length, rest = divmod(longer, _count(Reference(carrier), longer))
    levels = (carrier.high, carrier.low) if edge.act is Act.RISES else (carrier.low, carrier.high)
    counts = ((rest, length + 1), (_count(Reference(carrier), longer) - rest, length))
    time, events = edge.time, []
    for count, each in counts:
        if count:
            cycles = _equal(levels, count, each)
            events.append(Event(time, Act.CYCLES, carrier.name, cycles=cycles))
            time += cycles.length
    return events


def _equal(levels: tuple[Interval | None, Interval | None], count: int, length: int) -> Cycles:
    """Cycles of one length; what is above the shortest goes to the first level as far as it may."""
    first, second = levels
    assert first is not None
    assert second is not None
    extra = length - first.lo - second.lo
    own = first.lo + (extra if first.hi is None else min(extra, first.hi - first.lo))
    return Cycles(count, own, length - own)
