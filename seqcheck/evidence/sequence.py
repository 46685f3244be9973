"""What the firmware does in a replay: the mode it rests in or the run it makes, and the trip in hand."""

from collections.abc import Iterator
from dataclasses import dataclass

from seqcheck.drive import RESET, After, AtOnce, Cell, Drive, Fixed, Known, Move, Trip, When
from seqcheck.evidence.pins import Pins
from seqcheck.evidence.refusal import Due, NotPermitted, due, require_within
from seqcheck.evidence.runs import Run, firmly
from seqcheck.quantities import INSTANT, Interval
from seqcheck.verdict import Act, Event


@dataclass(frozen=True, slots=True)
class Rest:
    """The firmware rests in `mode` since `since`."""

    mode: str
    since: int


@dataclass(frozen=True, slots=True)
class InHand:
    """A firmware trip in hand; its time to be taken counts from `since`."""

    trip: Trip
    since: int
    arrived_here: bool = False  # whether it arrived where it can be taken


class Sequence:
    """The firmware at one moment, from rest in the start mode on."""

    def __init__(self, drive: Drive, pins: Pins) -> None:
        self._drive = drive
        self._pins = pins
        self.at: Rest | Run = Rest(drive.start, 0)
        self.in_hand: InHand | None = None

    @property
    def known(self) -> tuple[Known, ...]:
        """What is known at this moment."""
        if isinstance(self.at, Run):
            return self.at.known
        return self._drive.modes[self.at.mode].known if self.at.mode in self._drive.modes else ()

    @property
    def within_one_event(self) -> bool:
        """Whether the last event and the next are one: a beginning and its first write, a last write and the entry, or
        the arrival of a trip without `within` and its taking."""
        return self._taken_on_arrival or (isinstance(self.at, Run) and self.at.forced)

    @property
    def _taken_on_arrival(self) -> bool:
        return self.in_hand is not None and self.in_hand.trip.within is None and self.in_hand.arrived_here

    def require_no_break(self, act: Act) -> None:
        """Refuse an event between two that are one."""
        if self._taken_on_arrival and act is not Act.BEGINS:
            raise NotPermitted("a trip without 'within' is taken as it arrives")
        if not isinstance(self.at, Run) or not self.at.forced:
            return
        needed = Act.WRITES if self.at.remaining else Act.ENTERS
        if act is not needed:
            raise NotPermitted(f"nothing can come before that which {needed.value} in the same instant")

    def begins(self, event: Event) -> None:
        """A move or a trip's run begins; NotPermitted where it cannot now."""
        lines: tuple[Move | Trip, ...] = self._drive.trips if event.trip else self._drive.moves
        if not 0 <= event.index < len(lines):
            raise NotPermitted("there is no such move or trip")
        line = lines[event.index]
        self._require_writes(event, line.target)
        if isinstance(line, Move):
            origin = self._leaves(event.time, line)
        elif line.at_once:
            origin = self._breaks_in(line)
            self._pins.cancel_held()
        else:
            origin = self._takes(line)
        self.at = Run(self._drive, self._pins, line, origin, event.time)

    def _leaves(self, time: int, move: Move) -> str:
        if isinstance(self.at, Run):
            raise NotPermitted("another run is in progress")
        if self.at.mode not in move.sources:
            raise NotPermitted(f"the firmware rests in {self.at.mode}, which the move does not leave")
        require_within(time, self.at.since, self._window(move), f"the move to {move.target}")
        return self.at.mode

    def _window(self, move: Move) -> Interval:
        match move.trigger:
            case When(earliest=earliest, latest=latest):
                loop = self._drive.loop.lo if self._drive.loop else 0
                return Interval(max(earliest, loop), latest)
            case After(span=span):
                return firmly(self._drive, span)
            case AtOnce():
                return INSTANT

    def _takes(self, trip: Trip) -> str:
        """In time it is, since no deadline may be overrun before an event."""
        if self.in_hand is None or self.in_hand.trip is not trip:
            raise NotPermitted(f"trip {trip.name} is not in hand")
        if isinstance(self.at, Run) and (self.at.unbroken or self.at.trip):
            raise NotPermitted(f"the run in progress cannot be interrupted by trip {trip.name}")
        self.in_hand = None
        return self.at.origin if isinstance(self.at, Run) else self.at.mode

    def _patience(self, trip: Trip) -> Interval:
        return INSTANT if trip.within is None else firmly(self._drive, Interval(0, trip.within))

    def _breaks_in(self, trip: Trip) -> str:
        if isinstance(self.at, Run) and self.at.line is trip:
            raise NotPermitted(f"trip {trip.name} does not interrupt itself")
        return self._origin(trip)

    def _origin(self, trip: Trip) -> str:
        """The mode that counts as left when `trip` comes now; NotPermitted where it cannot come."""
        if isinstance(self.at, Rest):
            if self.at.mode == RESET or self.at.mode not in trip.resting:
                raise NotPermitted(f"trip {trip.name} does not come in mode {self.at.mode}")
            return self.at.mode
        if self.at.origin not in trip.origins:
            raise NotPermitted(f"trip {trip.name} does not come in a run that left {self.at.origin}")
        return self.at.origin

    def arrives(self, event: Event) -> None:
        """A firmware trip arrives and is in hand; NotPermitted where it cannot come now or one is in hand."""
        trip = next((trip for trip in self._drive.trips if trip.name == event.name), None)
        if trip is None or trip.at_once:
            raise NotPermitted(f"there is no trip {event.name} that firmware takes")
        if self.in_hand is not None:
            raise NotPermitted(f"trip {self.in_hand.trip.name} is in hand already")
        if isinstance(self.at, Run) and self.at.trip:
            raise NotPermitted("a trip is running")
        self._origin(trip)
        waits = isinstance(self.at, Run) and self.at.unbroken
        self.in_hand = InHand(trip, event.time, not waits)

    def writes(self, event: Event) -> None:
        """The run in progress writes; NotPermitted where it cannot write this now, or where there is none."""
        if not isinstance(self.at, Run):
            raise NotPermitted(f"the firmware rests in {self.at.mode}")
        self.at.write(event.time, event.writes)

    def enters(self, event: Event) -> None:
        """The run in progress ends and its target is entered; NotPermitted where that cannot be now."""
        if not isinstance(self.at, Run):
            raise NotPermitted(f"the firmware rests in {self.at.mode}")
        run, target = self.at, self.at.line.target
        if event.name != target:
            raise NotPermitted(f"the run in progress goes to {target}")
        self._require_writes(event, target)
        run.end(event.time)
        if target == RESET:
            self._pins.release_all(event.time)
        self.at = Rest(target, event.time)
        self._keep_in_hand(run, event.time)

    def _keep_in_hand(self, run: Run, time: int) -> None:
        if self.in_hand is None:
            return
        if run.line.target in (RESET, self.in_hand.trip.target):
            self.in_hand = None
        elif run.unbroken or (run.trip and run.lasting):
            self.in_hand = InHand(self.in_hand.trip, time)

    def _require_writes(self, event: Event, target: str) -> None:
        if not event.writes:
            return
        if target != RESET:
            raise NotPermitted("writes are events of their own")
        cells: dict[str, Cell] = dict(event.writes)
        missing = [switch for switch, cell in self._pins.written.items() if cell is not Fixed.FREE]
        if any(cell is not Fixed.FREE for cell in cells.values()) or not cells.keys() >= set(missing):
            raise NotPermitted("reset frees every pin and writes nothing else")

    def dues(self) -> Iterator[Due]:
        """By when the firmware must go on."""
        if isinstance(self.at, Run):
            run = self.at
            yield from due(run.last, run.span, f"the run to {run.line.target} must go on")
        else:
            yield from self._leaving(self.at)
        if self.in_hand is not None and not (isinstance(self.at, Run) and (self.at.unbroken or self.at.trip)):
            trip = self.in_hand.trip
            yield from due(self.in_hand.since, self._patience(trip), f"trip {trip.name} must be taken")

    def _leaving(self, rest: Rest) -> Iterator[Due]:
        """By when the timed moves, and those that begin at once, must have left the mode at rest."""
        for move in self._drive.moves:
            if rest.mode in move.sources and not isinstance(move.trigger, When):
                yield from due(rest.since, self._window(move), f"mode {rest.mode} must be left")
