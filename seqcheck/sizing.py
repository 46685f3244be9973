"""What would cure an overlap, with the number, each proposal proven before it is made."""

from collections.abc import Callable, Iterator
from fractions import Fraction
from itertools import permutations
from math import ceil
from typing import TypeVar

from seqcheck.drive import RESET, Carrier, Drive, Fixed, Move, SetStep, Step, Trip, WaitStep, When
from seqcheck.hazards import Clearing, Hazard, Lasting, delays
from seqcheck.proving.memory import Memory
from seqcheck.proving.prove import Prover, Refuted
from seqcheck.proving.search import LimitReached
from seqcheck.quantities import Interval, shown, widened
from seqcheck.records import dataclass, replace
from seqcheck.source import Place
from seqcheck.verdict import Act, Cure, Trace

Observer = Callable[[int], None]
Run = TypeVar("Run", Move, Trip)

_SHARE = 10
"""A dead time above this part of the period would eat up the duty: no cure anyone would take."""


_MOST_ZONES = 10_000
"""Zones for all proposals to one hazard together: a cure must not cost more than what it cures."""


@dataclass(slots=True)
class _Budget:
    """An observer that ends the search for a cure after so many zones over all proposals."""

    observer: Observer
    left: int
    last: int = 0

    def __call__(self, count: int) -> None:
        self.last = count
        self.observer(count)
        if count > self.left:
            raise LimitReached("zones for a cure")

    def next_proposal(self) -> None:
        self.left -= self.last
        self.last = 0


@dataclass(frozen=True, slots=True)
class _Proposal:
    """A drive with one time made longer, and how to say so."""

    drive: Drive
    place: Place
    words: str


def cure(
    drive: Drive, hazard: Hazard, proof: Refuted, observer: Observer, memory: Memory | None = None
) -> Cure | None:
    """The first time of the file that, made longer by what is missing, brings a proof; None if none does.

    Missing is the overlap, or where it has no end the longest that one switch of the hazard can lag behind another. No
    longer time cures a command that lasts too long, or a trip that is late.
    """
    if isinstance(hazard.asks, Clearing) or (isinstance(hazard.asks, Lasting) and hazard.asks.longer):
        return None
    missing = _lag(drive, hazard) if proof.overlap is None else proof.overlap
    found = _first(drive, proof.trace, missing, observer, memory, lambda prover, count: prover.holds(hazard, count))
    return None if found is None else Cure(found.place, proof.overlap, found.words)


def cure_of_margin(
    drive: Drive, trace: Trace, after: int, least: int, short: int, observer: Observer, memory: Memory | None = None
) -> Cure | None:
    """The first time of the file that, made longer by what is missing, keeps the margin shown too thin by a trace."""

    def kept(prover: Prover, count: Observer) -> bool:
        gap = prover.gap(trace.hazard, after, count, least)
        return prover.holds(trace.hazard, count) and (gap.time is None or gap.time >= least) and not gap.limit

    found = _first(drive, trace, short, observer, memory, kept)
    return None if found is None else Cure(found.place, short, found.words)


def _first(
    drive: Drive,
    trace: Trace,
    missing: int,
    observer: Observer,
    memory: Memory | None,
    holds: Callable[[Prover, Observer], bool],
) -> _Proposal | None:
    """The first proposal that holds.

    Waits of the runs on the way are tried, the last first, then the carriers' dead times, the beginning of the last
    move, the spacing of writes, and a pause in a run that has none.
    """
    spending = _Budget(observer, _MOST_ZONES)
    for proposal in _proposals(drive, trace, missing):
        try:
            good = holds(Prover(proposal.drive, memory=memory), spending)
        except LimitReached:
            return None
        spending.next_proposal()
        if good:
            return proposal
    return None


def _lag(drive: Drive, hazard: Hazard) -> int:
    """The longest that one literal can be possible after another that came when it went (ps, at least 1)."""
    times = delays(hazard, drive.paths)
    return max([1, *(one.fall - other.rise for one, other in permutations(times, 2))])


def _proposals(drive: Drive, trace: Trace, missing: int) -> Iterator[_Proposal]:
    for is_trip, index in _runs(trace):
        run = drive.trips[index] if is_trip else drive.moves[index]
        for number in reversed(range(len(run.steps))):
            step = run.steps[number]
            if isinstance(step, WaitStep):
                yield _longer_wait(drive, is_trip, index, number, step, missing)
                yield _longer_waits(drive, step, missing)
    for phase in trace.phases:
        carrier = drive.carriers[phase.carrier]
        if (carrier.dead.lo + missing) * _SHARE <= carrier.period.lo:
            yield _longer_dead_time(drive, carrier, missing)
    for is_trip, index in _runs(trace)[:1]:
        if not is_trip:
            yield from _later_begin(drive, index, missing)
    if drive.writes is not None and drive.writes.gap.lo:
        longer = replace(drive.writes, gap=_longer(drive.writes.gap, missing))
        least = _nominal(drive, longer.gap.lo)
        words = f"put writes at least {shown(least)} apart"
        yield _Proposal(replace(drive, writes=longer), drive.writes.place, words)
    for is_trip, index in _runs(trace):
        run = drive.trips[index] if is_trip else drive.moves[index]
        if run.target != RESET and not any(isinstance(step, WaitStep) for step in run.steps):
            yield _with_pause(drive, is_trip, index, missing)


def _with_pause(drive: Drive, is_trip: bool, index: int, missing: int) -> _Proposal:
    """A run that turns everything off before all else, and waits."""
    nominal = _nominal(drive, missing)
    tolerance = drive.clock.tolerance if drive.clock else Fraction(0)
    words = f"let this line begin with the steps 'set all off' and 'wait {shown(nominal)}'"
    place = (drive.trips if is_trip else drive.moves)[index].place
    pause = (
        SetStep(place, tuple((switch, Fixed.OFF) for switch in drive.columns)),
        WaitStep(place, widened(Fraction(nominal), Fraction(nominal), tolerance)),
    )
    if is_trip:
        trips = tuple(_begun_with(run, pause) if at == index else run for at, run in enumerate(drive.trips))
        return _Proposal(replace(drive, trips=trips), place, words)
    moves = tuple(_begun_with(run, pause) if at == index else run for at, run in enumerate(drive.moves))
    return _Proposal(replace(drive, moves=moves), place, words)


def _begun_with(run: Run, steps: tuple[Step, ...]) -> Run:
    return replace(run, steps=(*steps, *run.steps))


def _later_begin(drive: Drive, index: int, missing: int) -> Iterator[_Proposal]:
    """A move on an event that may begin later only: by its own `earliest`, or with all others by `loop`."""
    move = drive.moves[index]
    if not isinstance(move.trigger, When) or move.trigger.latest is not None:
        return
    loop = drive.loop.lo if drive.loop else 0
    least = max(loop, move.trigger.earliest) + missing
    later = replace(move, trigger=replace(move.trigger, earliest=least))
    moves = (*drive.moves[:index], later, *drive.moves[index + 1 :])
    words = f"let this move begin with 'earliest {shown(_nominal(drive, least))}'"
    yield _Proposal(replace(drive, moves=moves), move.place, words)
    if drive.loop:
        words = f"make 'loop' at least {shown(_nominal(drive, loop + missing))}"
        yield _Proposal(replace(drive, loop=Interval(loop + missing, None)), move.place, words)


def _runs(trace: Trace) -> list[tuple[bool, int]]:
    begun = [
        (event.trip, event.index)
        for event in trace.events
        if event.act is Act.BEGINS and event.time <= trace.overlap_from
    ]
    return list(dict.fromkeys(reversed(begun)))[:3]


def _longer_wait(drive: Drive, is_trip: bool, index: int, number: int, step: WaitStep, missing: int) -> _Proposal:
    longer = replace(step, time=_longer(step.time, missing))
    words = f"make this wait at least {shown(_nominal(drive, longer.time.lo))}"
    if is_trip:
        trips = [_with_step(run, number, longer) if at == index else run for at, run in enumerate(drive.trips)]
        return _Proposal(replace(drive, trips=tuple(trips)), step.place, words)
    moves = [_with_step(run, number, longer) if at == index else run for at, run in enumerate(drive.moves)]
    return _Proposal(replace(drive, moves=tuple(moves)), step.place, words)


def _with_step(run: Run, number: int, step: WaitStep) -> Run:
    return replace(run, steps=(*run.steps[:number], step, *run.steps[number + 1 :]))


def _longer_waits(drive: Drive, step: WaitStep, missing: int) -> _Proposal:
    """All waits of one length made longer, as where they are written with one `let`."""
    time = _longer(step.time, missing)
    moves = tuple(_with_waits(run, step.time, time) for run in drive.moves)
    trips = tuple(_with_waits(run, step.time, time) for run in drive.trips)
    steps = [one for move in drive.moves for one in move.steps] + [one for trip in drive.trips for one in trip.steps]
    count = sum(isinstance(one, WaitStep) and one.time == step.time for one in steps)
    which = "both waits" if count == 2 else f"all {count} waits"
    words = f"make {which} of this length at least {shown(_nominal(drive, time.lo))}"
    return _Proposal(replace(drive, moves=moves, trips=trips), step.place, words)


def _with_waits(run: Run, old: Interval, new: Interval) -> Run:
    steps = tuple(
        replace(one, time=new) if isinstance(one, WaitStep) and one.time == old else one for one in run.steps
    )
    return replace(run, steps=steps)


def _longer_dead_time(drive: Drive, carrier: Carrier, missing: int) -> _Proposal:
    longer = replace(carrier, dead=_longer(carrier.dead, missing))
    words = f"make the dead time of '{carrier.name}' at least {shown(_nominal(drive, longer.dead.lo))}"
    return _Proposal(replace(drive, carriers={**drive.carriers, carrier.name: longer}), carrier.place, words)


def _longer(time: Interval, missing: int) -> Interval:
    return Interval(time.lo + missing, None if time.hi is None else time.hi + missing)


def _nominal(drive: Drive, least: int) -> int:
    """What to write for a time that is to last at least this long by the drive's clock."""
    tolerance = drive.clock.tolerance if drive.clock else Fraction(0)
    return ceil(least * (1 + tolerance))
