"""One unsafe run as numbered instants: what happens at each, and how the switches stand from then on."""

from string import ascii_lowercase

from seqcheck.drive import Command, Drive
from seqcheck.quantities import PICOSECONDS, shown
from seqcheck.records import dataclass
from seqcheck.reports.acts import Note, begun_by, told
from seqcheck.reports.folding import folded
from seqcheck.reports.instants import Instant, State
from seqcheck.reports.lanes import Conduct, Lane, lanes
from seqcheck.reports.pieces import Tone
from seqcheck.reports.wording import shown_for, stretch
from seqcheck.source import Place
from seqcheck.verdict import Act, Event, Phase, Trace, Unsafe

_SETTLED = {(Command.ON, Conduct.YES), (Command.OFF, Conduct.NO)}
_LONG, _WIDE = 12, 24  # the longest name, and all names with a blank each, that still make columns
Told = list[tuple[Event, list[Note]]]


@dataclass(frozen=True, slots=True)
class Run:
    """A run ready to be shown.

    `titles` are what stands for each lane in tables and pictures: its switch, or a letter where the names are long.
    `origin` is the time that the report calls 0, and `origin_note` what happens there; `first` is the index of the
    instant from which on a picture is worth drawing, `last` of the one with which it may end. `unit` is the unit of
    the time columns, for which `size` ps are one. `stretch` is what the time is called for which the hazard lasts.
    """

    lanes: tuple[Lane, ...]
    titles: tuple[str, ...]
    instants: tuple[Instant, ...]
    origin: int
    origin_note: Note
    first: int
    last: int
    unit: str
    size: int
    stretch: str


def run_of(verdict: Unsafe, drive: Drive) -> Run:
    """The run of an unsafe verdict; a pure rearrangement of what the replay found."""
    found = lanes(verdict, drive)
    trace, events = verdict.trace, told(drive, verdict.trace)
    origin, origin_note = _origin(verdict, drive, events)
    notes: dict[int, list[Note]] = {}
    for event, own in events:
        notes.setdefault(event.time, []).extend(own)
    instants = [_before(drive, trace, found)]
    for time in _times(verdict, notes, found):
        instants.append(_instant(time, notes.get(time, []), instants[-1], verdict, found))
    instants = folded(instants, trace.events)
    first, last = _window(instants, trace)
    unit = shown(max(1, _time(instants[last]) - _time(instants[first]))).split()[1]
    size, called = int(PICOSECONDS[unit]), stretch(verdict)
    return Run(found, _titles(found), tuple(instants), origin, origin_note, first, last, unit, size, called)


def _titles(found: tuple[Lane, ...]) -> tuple[str, ...]:
    """The switches of the lanes; where they would be too wide, letters in parentheses, which no name can be."""
    names = tuple(lane.literal.switch for lane in found)
    if max(map(len, names), default=0) <= _LONG and sum(len(name) + 1 for name in names) <= _WIDE:
        return names
    return tuple(f"({ascii_lowercase[index % 26]}{index // 26 or ''})" for index in range(len(names)))


def _time(instant: Instant) -> int:
    return instant.time or 0


def _times(verdict: Unsafe, notes: dict[int, list[Note]], found: tuple[Lane, ...]) -> list[int]:
    """All times of the run worth a row: events, changes of the lanes but for whole cycles, the ends of the overlap."""
    span = shown_for(verdict)
    times = set(notes) | {span.start}
    if span.end is not None:
        times.add(span.end)
    always, trace = frozenset(times), verdict.trace
    end = max([trace.end, *times])
    cycling = [(one.time, one.time + one.cycles.length) for one in trace.events if one.cycles is not None]
    for lane in found:
        times.update(time for time in lane.times() if 0 <= time <= end and _differs(lane, time))
    return sorted(time for time in times if time in always or not any(start < time <= stop for start, stop in cycling))


def _differs(lane: Lane, time: int) -> bool:
    """Whether a lane changes at a time, against the moment (1 ps) before it."""
    earlier = time - 1 if time > 0 else None
    changed = any(when == time for when, _ in lane.changes)
    return changed or lane.conduct_at(time) is not lane.conduct_at(earlier)


def _before(drive: Drive, trace: Trace, found: tuple[Lane, ...]) -> Instant:
    notes = [Note(f"settled in {drive.start}", None, Tone.STRONG)]
    notes += [Note(_phase(one)) for one in trace.phases]
    return Instant(1, None, tuple(notes), _states(found, None), False)


def _phase(phase: Phase) -> str:
    age = f"high for {shown(phase.age)}" if phase.high else f"low for {shown(phase.age)}"
    return f"{phase.carrier} is {age}, its dead time {'over' if phase.output else 'not yet over'}"


def _states(found: tuple[Lane, ...], time: int | None) -> tuple[State, ...]:
    return tuple(State(lane.commands_at(time), lane.conduct_at(time)) for lane in found)


def _instant(time: int, notes: list[Note], before: Instant, verdict: Unsafe, found: tuple[Lane, ...]) -> Instant:
    trace, called = verdict.trace, stretch(verdict)
    states = _states(found, time)
    span = shown_for(verdict)
    overlap = span.start <= time and (span.end is None or time < span.end)
    seen = list(notes or _commanded(found, time))
    seen += (_conduct_note(found[index], before.states[index], state) for index, state in enumerate(states))
    if overlap and not before.overlap:
        endless = ", without end" if span.end is None else ""
        seen.append(Note(f"{called} begins{endless}", None, Tone.BAD))
    if before.overlap and not overlap:
        cut_off = verdict.overlap is None and span.end == trace.end
        seen.append(Note(f"{called} {'goes on, the run round again' if cut_off else 'ends'}", None, Tone.BAD))
    return Instant(before.number + 1, time, tuple(note for note in seen if note.text), states, overlap)


def _commanded(found: tuple[Lane, ...], time: int) -> list[Note]:
    """Changes of command in an instant for which the trace has no event."""
    changed = [lane for lane in found if any(when == time for when, _ in lane.changes)]
    return [Note(f"command of {lane.literal.switch}: {lane.commands_at(time)[-1].value}") for lane in changed]


def _conduct_note(lane: Lane, before: State, now: State) -> Note:
    """What becomes of a switch, where the command alone does not show it; without text if there is nothing to say."""
    name, (old, new) = lane.literal.switch, (before.conduct, now.conduct)
    if new is Conduct.YES and old is not new:
        return Note(f"{name} surely conducts", None, Tone.FAINT)
    if new is Conduct.NO and old is not new:
        return Note(f"{name} surely does not conduct", None, Tone.FAINT)
    if new is Conduct.MAY and old is not new and (lane.literal.on == (old is Conduct.NO)):
        return Note(f"{name} can {'conduct' if lane.literal.on else 'be off'}", None, Tone.DOUBT)
    return Note("")


def _origin(verdict: Unsafe, drive: Drive, events: Told) -> tuple[int, Note]:
    """The beginning of the run that leads to the overlap: the last one at the verdict's place, else the last at all."""
    begun = [one for one in events if one[0].act is Act.BEGINS and one[0].time <= verdict.trace.overlap_from]
    if not begun:
        return 0, Note("")
    at_place = [one for one in begun if _place_of(drive, one[0]) == verdict.place]
    event, notes = (at_place or begun)[-1]
    return event.time, notes[0]


def _place_of(drive: Drive, event: Event) -> Place | None:
    run = begun_by(drive, event)
    return run.place if run else None


def _window(instants: list[Instant], trace: Trace) -> tuple[int, int]:
    """The part of a run that a picture shows, as indices of its first and last instant.

    It begins with the last instant up to the overlap before which every switch had done what it was told, and ends
    with the end of the overlap, or of the run where the overlap does not end.
    """
    begin = next(index for index, one in enumerate(instants) if one.overlap)
    first = next(index for index in range(begin, 0, -1) if index == 1 or _settled(instants, index - 1))
    after = range(begin, len(instants))
    last = next((index for index in after if not instants[index].overlap), len(instants) - 1)
    return first, last


def _settled(instants: list[Instant], index: int) -> bool:
    """Whether every switch has done what it was told, with nothing of an earlier pulse still to come."""
    states = instants[index].states
    told = all((state.command, state.conduct) in _SETTLED for state in states)
    return told and not any(_under_way(instants, index, lane) for lane in range(len(states)))


def _under_way(instants: list[Instant], index: int, lane: int) -> bool:
    """Whether the next thing that happens to a switch after an instant comes without a change of its command."""
    now = instants[index].states[lane]
    for later in instants[index + 1 :]:
        state = later.states[lane]
        if len(state.commands) > 1 or state.command is not now.command:
            return False
        if state.conduct is not now.conduct:
            return True
    return False
