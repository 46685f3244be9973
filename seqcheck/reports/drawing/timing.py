"""What a timing diagram shows of a run: its instants in bands, the modes, the carriers, and what is dimensioned.

As in the picture made of text, from one instant to the next takes the same room however long it lasts. Everything here
is taken from the run; nothing is worked out anew but differences of its times.
"""

from collections.abc import Sequence
from itertools import pairwise
from statistics import median

from seqcheck.drive import Command, Drive
from seqcheck.quantities import shown
from seqcheck.records import dataclass
from seqcheck.reports.acts import begun_by
from seqcheck.reports.drawing.elements import folded
from seqcheck.reports.lanes import Lane
from seqcheck.reports.picture import shows
from seqcheck.reports.rows import scaled
from seqcheck.reports.run import Run
from seqcheck.reports.wording import shown_for
from seqcheck.verdict import Act, Trace, Unsafe

LEAD, TAIL = 58.0, 64.0  # px before the first instant of a band, and after its last
_WIDTH = 1020.0  # of a band with its names, where the times allow
_LEAST, _MOST = 76.0, 150.0  # px from one instant to the next: at least, and at most where the times need no more
_EDGES = 4  # so many edges of a carrier in a torn stretch are still drawn one by one
_LONG = 12  # a stretch so many times as long as the median one is shown torn


@dataclass(frozen=True, slots=True)
class Stay:
    """What the mode bar says from a time (None: for ever before) to another (None: open)."""

    start: int | None
    end: int | None
    text: str
    moving: bool


@dataclass(frozen=True, slots=True)
class Dimension:
    """A length of time with its words; `lane` is the number of the lane below which it stands, None for below all.

    `ends` are the lanes whose command is at its start and end. `end` is None where the length has none.
    """

    start: int
    end: int | None
    text: str
    lane: int | None = None
    ends: tuple[int | None, int | None] = (None, None)
    bad: bool = False


@dataclass(frozen=True, slots=True)
class Reference:
    """The reference of a carrier: its levels from (None, first) on; None for a level where it runs on untold."""

    carrier: str
    levels: tuple[tuple[int | None, bool | None], ...]


@dataclass(frozen=True, slots=True)
class Band:
    """One strip of the diagram: the indices of its instants, their times, and which stretches between them are torn."""

    drawn: tuple[int, ...]
    times: tuple[int, ...]
    torn: tuple[bool, ...]
    step: float

    def x(self, time: int) -> float:
        """Where a time stands, from the beginning of the band; in the lead or the tail where it is outside."""
        if time < self.times[0]:
            return 0.0
        for index, (start, end) in enumerate(zip(self.times, self.times[1:], strict=False)):
            if time < end:
                return LEAD + (index + (time - start) / (end - start)) * self.step
        last = LEAD + (len(self.times) - 1) * self.step
        return last if time == self.times[-1] else last + TAIL

    @property
    def width(self) -> float:
        """The width of the band without its names."""
        return LEAD + (len(self.times) - 1) * self.step + TAIL


    @property
    def tears(self) -> list[tuple[int, int]]:
        """The torn stretches."""
        around = zip(self.times, self.times[1:], self.torn, strict=False)
        return [(start, end) for start, end, torn in around if torn]


def bands(run: Run, trace: Trace, left: float) -> list[Band]:
    """The part of a run that matters, in strips; `left` is the room that names take."""
    changes = {event.time for event in trace.events if event.act in (Act.BEGINS, Act.ENTERS)}
    window = range(run.first, run.last + 1)
    drawn = [index for index in window if shows(run, index) or run.instants[index].time in changes]
    times = [run.instants[index].time or 0 for index in drawn]
    spans = [after - before for before, after in pairwise(times)]
    typical = median(spans) if spans else 0
    torn = [span > _LONG * typical for span in spans]
    labels = [*(scaled(time - run.origin, run.size) for time in times), *(shown(span) for span in spans)]
    step = max(_LEAST, folded(labels, 11) + 12)
    count = max(2, int((_WIDTH - left - LEAD - TAIL) // step) + 1)
    count = -(-len(drawn) // -(-len(drawn) // count))  # bands of about one length
    step = max(step, min(_MOST, (_WIDTH - left - LEAD - TAIL) / max(1, count - 1)))
    return [
        Band(
            tuple(drawn[at : at + count]), tuple(times[at : at + count]), tuple(torn[at : at + count - 1]), step
        )
        for at in range(0, len(drawn), count)
    ]  # fmt: skip


def stays(drive: Drive, trace: Trace) -> list[Stay]:
    """The modes of a run and what leads from one to the next; what takes no time is left out."""
    marks: list[tuple[int | None, str, bool]] = [(None, drive.start, False)]
    for event in trace.events:
        if event.act is Act.BEGINS:
            run = begun_by(drive, event)
            marks.append((event.time, f"to {run.target}" if run else "under way", True))
        elif event.act is Act.ENTERS:
            marks.append((event.time, event.name, False))
    ends = [*(time for time, _, _ in marks[1:]), None]
    found = [Stay(start, end, text, moving) for (start, text, moving), end in zip(marks, ends, strict=True)]
    return [one for one in found if one.end is None or one.start is None or one.start < one.end]


def references(trace: Trace, run: Run, strips: Sequence[Band]) -> list[Reference]:
    """The carriers with an edge in the part that is drawn; many edges in a torn stretch are not told."""
    tears = [tear for band in strips for tear in band.tears]
    first, last = run.instants[run.first].time or 0, run.instants[run.last].time or 0
    found = []
    for phase in trace.phases:
        levels: list[tuple[int | None, bool | None]] = [(None, phase.high)]
        for event in trace.events:
            if event.name != phase.carrier:
                continue
            if event.act in (Act.RISES, Act.FALLS):
                levels.append((event.time, event.act is Act.RISES))
            elif event.cycles is not None:
                level = levels[-1][1]
                levels += [(event.time, None), (event.time + event.cycles.length, level)]
        for start, end in tears:
            levels = _untold(levels, start, end)
        ends = [*(time for time, _ in levels[1:]), None]
        untold = (one for one in zip(levels, ends, strict=True) if one[0][1] is None)
        runs_on = any((start or 0) <= last and (end is None or first <= end) for (start, _), end in untold)
        if runs_on or any(time is not None and first <= time <= last for time, _ in levels):
            found.append(Reference(phase.carrier, tuple(levels)))
    return found


def _untold(levels: list[tuple[int | None, bool | None]], start: int, end: int) -> list[tuple[int | None, bool | None]]:
    """The levels of a carrier without those that it takes inside a stretch, if they are many."""
    inside = [(time, level) for time, level in levels if time is not None and start < time < end]
    if len(inside) <= _EDGES:
        return levels
    before = [one for one in levels if one[0] is None or one[0] <= start]
    return [*before, (start, None), (end, inside[-1][1]), *levels[len(before) + len(inside) :]]


# Dimensions


def hazard_end(verdict: Unsafe) -> int | None:
    """When what is shown ends in the run; None where it never does, also if the run must go round again for that."""
    span = shown_for(verdict)
    return None if verdict.overlap is None and span.end == verdict.trace.end else span.end


def dimensions(run: Run, verdict: Unsafe) -> list[Dimension]:
    """What is measured: how long after its command each switch begins and ends to be possible, the time between the
    commands, how long the hazard lasts. A gap that is too short lies between the end of one and the begin of another;
    where a rule is about one length it alone is measured.
    """
    shown_span, gap = shown_for(verdict), verdict.trace.prolonged is not None
    ends, begins = (shown_span.start, shown_span.end) if gap else (shown_span.end, shown_span.start)
    if verdict.hazard.asks is not None:
        return [_lasting(run, verdict)]
    found: list[Dimension] = []
    joins, leaves = [], []
    for number, lane in enumerate(run.lanes):
        can = "can conduct" if lane.literal.on else "can be off"
        if any(one.start == begins for one in lane.possible) and begins is not None:
            there = _last(lane, begins, True)
            joins += [(there, number)] if there is not None else []
            if there is not None and there < begins:
                text = f"{can} after {shown(begins - there)}"
                found.append(Dimension(there, begins, text, number, (number, None)))
        if any(one.end == ends for one in lane.possible) and ends is not None:
            back = _last(lane, ends, False)
            leaves += [(back, number)] if back is not None else []
            if back is not None and back < ends:
                text = f"{can} for {shown(ends - back)} more"
                found.append(Dimension(back, ends, text, number, (number, None)))
    return [*found, *_between(run, joins, leaves), _lasting(run, verdict)]


def _last(lane: Lane, time: int, wanted: bool) -> int | None:
    """The last time, up to one, at which a command begins to allow what its literal wants, or to rule it out.

    A floating pin allows it. None where that was before time 0.
    """
    ruled_out = Command.OFF if lane.literal.on else Command.ON
    found, allowed = None, None
    for when, command in lane.changes:
        now = command is not ruled_out
        if when is not None and when <= time and now is not allowed and now is wanted:
            found = when
        allowed = now
    return found


def _between(run: Run, joins: Sequence[tuple[int, int]], leaves: Sequence[tuple[int, int]]) -> list[Dimension]:
    """The time between the command that ends the hazard and the one that brings it, of two different switches."""
    pairs = [(back, there) for back in leaves for there in joins if back[1] != there[1]]
    if not pairs:
        return []
    (back, leaving), (there, joining) = pairs[0]
    names = f"{run.titles[leaving]} and {run.titles[joining]}"
    if back == there:
        return []
    if back < there:
        text = f"commands of {names} lie {shown(there - back)} apart"
        return [Dimension(back, there, text, None, (leaving, joining))]
    text = f"{names} commanded so together for {shown(back - there)}"
    return [Dimension(there, back, text, None, (joining, leaving))]


def _lasting(run: Run, verdict: Unsafe) -> Dimension:
    start, end = shown_for(verdict).start, hazard_end(verdict)
    text = f"{run.stretch} without end" if end is None else f"{run.stretch} {shown(end - start)}"
    none_left = verdict.trace.prolonged is not None and verdict.trace.prolonged[1] == 1
    if none_left or (verdict.hazard.asks is not None and verdict.trace.overlap_to == verdict.trace.overlap_from):
        text = f"no {run.stretch}"  # it is marked by 1 ps
    return Dimension(start, end, text, bad=True)
