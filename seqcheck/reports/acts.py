"""The events of a trace in words, with the line of the file that is behind each."""

from collections.abc import Sequence

from seqcheck.drive import RESET, After, Cell, Drive, Move, SetStep, Step, Trip, WaitStep, When, cell_text
from seqcheck.quantities import shown
from seqcheck.records import dataclass
from seqcheck.reports.pieces import Tone, counted, listed
from seqcheck.source import Place
from seqcheck.verdict import Act, Event, Trace


@dataclass(frozen=True, slots=True)
class Note:
    """Something that happens in an instant of a run, in words; `place` is behind it in the file, None for nothing."""

    text: str
    place: Place | None = None
    tone: Tone = Tone.PLAIN

    @property
    def line(self) -> int | None:
        """The line of the file, None where there is none."""
        return self.place.line if self.place else None


def written(writes: Sequence[tuple[str, Cell]]) -> str:
    """Writes as a `set` step of the file says them."""
    if not writes:
        return "other switches"
    return ", ".join(f"{switch} {cell_text(cell)}" for switch, cell in writes)


class Teller:
    """Tells the events of one trace in order; it keeps the mode and how far the present run has come."""

    def __init__(self, drive: Drive) -> None:
        self._drive = drive
        self._mode = drive.start
        self._steps: tuple[Step, ...] = ()
        self._done = 0  # how many of `_steps` are behind
        self._since = 0  # the time of the last event of the present run

    def tell(self, event: Event) -> list[Note]:
        """The notes for one event; to be called for every event of the trace, in order."""
        if event.act is Act.BEGINS:
            return [self._begins(event)]
        if event.act is Act.WRITES:
            return [*self._waited(event), self._note(event, f"set {written(event.writes)}")]
        if event.act is Act.ENTERS:
            return [*self._waited(event), self._enters(event)]
        held = [Note(f"held writes act: {written(event.writes)}")] if event.writes else []
        return [self._note(event, self._outside(event)), *held]

    def _note(self, event: Event, text: str, tone: Tone = Tone.PLAIN, place: Place | None = None) -> Note:
        return Note(text, event.place or place, tone)

    def _begins(self, event: Event) -> Note:
        run = begun_by(self._drive, event)
        self._steps = run.steps if run else ()
        self._done, self._since = 0, event.time
        if run is None:
            return self._note(event, "a run begins", Tone.STRONG)
        text = self._trip_text(run) if isinstance(run, Trip) else self._move_text(run)
        return self._note(event, text, Tone.STRONG, run.place)

    def _move_text(self, move: Move) -> str:
        source = self._mode if self._mode in move.sources else listed(move.sources, "or")
        if isinstance(move.trigger, When):
            return f"on {move.trigger.event}: {source} -> {move.target}"
        due = "when due" if isinstance(move.trigger, After) else "at once"
        return f"{due}: {source} -> {move.target}"

    def _trip_text(self, trip: Trip) -> str:
        return f"trip {trip.name} {'acts by hardware' if trip.at_once else 'is taken'}: -> {trip.target}"

    def _waited(self, event: Event) -> list[Note]:
        """A note for the waits between the last event of the run and this one, if the file has any there."""
        reached = self._step_of(event)
        waits = [step for step in self._steps[self._done : reached] if isinstance(step, WaitStep)]
        took = event.time - self._since
        self._done, self._since = max(self._done, reached), event.time
        if not waits:
            return []
        return [Note(f"wait over, it took {shown(took)}", waits[0].place)]

    def _step_of(self, event: Event) -> int:
        """The index of the step that an event writes: by its place, else the first from here on that has these writes.

        All steps are behind when the target's row is written.
        """
        sets = [(index, step) for index, step in enumerate(self._steps) if isinstance(step, SetStep)]
        here = (index for index, step in sets if event.place is not None and _covers(step.place, event.place))
        alike = (index for index, step in sets if index >= self._done and set(event.writes) <= set(step.writes))
        if event.act is Act.ENTERS:
            return len(self._steps)
        return next(here, next(alike, len(self._steps)))

    def _enters(self, event: Event) -> Note:
        self._mode = event.name
        self._steps = ()
        mode = self._drive.modes.get(event.name)
        text = f"{RESET}: every pin is released" if event.name == RESET else f"{event.name} is entered"
        return self._note(event, text, Tone.STRONG, mode.place if mode else None)

    def _outside(self, event: Event) -> str:
        """What is not done by the firmware's own run."""
        match event.act:
            case Act.ARRIVES:
                return f"trip {event.name} arrives"
            case Act.RISES:
                return f"{event.name} rises"
            case Act.FALLS:
                return f"{event.name} falls"
            case Act.OUTPUT:
                return f"{event.name}: its dead time is over"
            case Act.CYCLES:
                return _cycling(event)
            case Act.UPDATES:
                return f"{event.name} updates what is held"
            case Act.RESTS:
                pin = self._drive.pins.get(event.name)
                return f"pin {pin.name} of {event.name} is at rest" if pin else f"pin of {event.name} is at rest"
            case Act.CLEARS:
                return f"interlock lets {event.name} through"
            case _:
                return f"{event.name} {event.act.value}".strip()


def _cycling(event: Event) -> str:
    cycles = event.cycles
    if cycles is None:
        return f"{event.name} runs on"
    each = f"{shown(cycles.first)} and {shown(cycles.second)}"
    return f"{event.name} runs {counted(cycles.count, 'whole cycle')} of {each}, {shown(cycles.length)} in all"


def begun_by(drive: Drive, event: Event) -> Move | Trip | None:
    """The move or trip that a BEGINS is about; None if its index is out of range."""
    runs: Sequence[Move | Trip] = drive.trips if event.trip else drive.moves
    return runs[event.index] if 0 <= event.index < len(runs) else None


def _covers(step: Place, written_at: Place) -> bool:
    return step.file == written_at.file and step.line <= written_at.line <= step.end_line


def told(drive: Drive, trace: Trace) -> list[tuple[Event, list[Note]]]:
    """Every event of a trace, in order, with its notes."""
    teller = Teller(drive)
    return [(event, teller.tell(event)) for event in trace.events]


def entered(drive: Drive, trace: Trace) -> list[tuple[int | None, str]]:
    """The mode that the drive is in and since when: from (None, start) on, where None is "for ever before"."""
    return [(None, drive.start), *((one.time, one.name) for one in trace.events if one.act is Act.ENTERS)]
