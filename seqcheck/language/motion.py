"""Checking moves and trips: start, origins, triggers, steps."""

from fractions import Fraction
from math import ceil

from seqcheck.drive import (
    RESET,
    After,
    AtOnce,
    Cell,
    Fixed,
    Follow,
    Mode,
    Move,
    SetStep,
    Step,
    Trigger,
    Trip,
    WaitStep,
    When,
)
from seqcheck.language.scope import Scope
from seqcheck.language.syntax import (
    Line,
    MoveLine,
    Origin,
    Range,
    SetAllOffLine,
    SetLine,
    StartLine,
    TripLine,
    WaitLine,
    WhenWord,
    Word,
)
from seqcheck.language.tables import Table
from seqcheck.language.values import Unit
from seqcheck.quantities import shown, widened
from seqcheck.source import Place

Group = tuple[Line, list[Line]]


class Motion:
    """The checked moves and trips of a file.

    `resets` is the first place that uses the mode `reset`, `events` and `trip_names` all names that rules may use.
    """

    def __init__(self, scope: Scope, table: Table) -> None:
        self.scope = scope
        self.notes = scope.notes
        self.table = table
        self.start = ""
        self.moves: list[Move] = []
        self.trips: list[Trip] = []
        self.events: dict[str, Place] = {}
        self.trip_names: dict[str, Place] = {}
        self.resets: Place | None = None
        self._read_start()
        for line, steps in _grouped(scope.book.sections["moves"]):
            self._move(line, steps)
        for line, steps in _grouped(scope.book.sections["trips"]):
            self._trip(line, steps)

    # The start

    def _read_start(self) -> None:
        starts = [line for line in self.scope.book.sections["moves"] if isinstance(line.node, StartLine)]
        for extra in starts[1:]:
            text = f"a second 'start'; the first is in line {starts[0].place.line}"
            self.notes.add(extra.place, "duplicate-name", text, "leave out one of them")
        head = self.scope.book.heads.get("moves")
        if not starts:
            if head is not None and "moves" not in self.notes.broken:
                self.notes.add(head.place, "missing-start", "no mode to start in", "add a line 'start MODE'")
            return
        said = starts[0].node
        assert isinstance(said, StartLine)
        if not self.table.known_mode(said.mode):
            return
        self.start = said.mode.text
        if self.start == RESET:
            self._uses_reset(said.mode.place)
        elif self.start in self.table.modes:
            self._check_start(said.mode, self.table.modes[self.start])

    def _check_start(self, word: Word, mode: Mode) -> None:
        """The start row has neither a carrier nor `keep`."""
        for column, cell in zip(self.table.columns, mode.cells, strict=True):
            if cell is Fixed.KEEP or isinstance(cell, Follow):
                what = "'keep', but nothing was before it" if cell is Fixed.KEEP else f"the carrier '{cell.carrier}'"
                text = f"the start row '{mode.name}' has for '{column}' {what}"
                self.notes.add(word.place, "wrong-start", text, "start in a row of 'on', 'off' and 'free' only")

    def _uses_reset(self, place: Place) -> None:
        self.resets = self.resets or place

    # Origins

    def _sources(self, said: Origin, target: Word) -> tuple[str, ...] | None:
        """The modes that a move leaves."""
        if not said.any:
            return self._listed(said)
        left = self._all_but(said)
        if left is None:
            return None
        left = tuple(mode for mode in left if mode != target.text)
        return left if self._some(left, said) else None

    def _listed(self, said: Origin) -> tuple[str, ...] | None:
        seen: dict[str, Place] = {}
        known = True
        for word in said.modes:
            known = self.table.known_mode(word) and known
            self.notes.fresh(word, seen, "mode")
            seen.setdefault(word.text, word.place)
            if word.text == RESET:
                self._uses_reset(word.place)
        return tuple(seen) if known else None

    def _all_but(self, said: Origin) -> tuple[str, ...] | None:
        seen: dict[str, Place] = {}
        known = True
        for word in said.modes:
            known = self.table.known_mode(word) and known
            self.notes.fresh(word, seen, "mode")
            seen.setdefault(word.text, word.place)
        return tuple(mode for mode in self.table.named if mode not in seen) if known else None

    def _some(self, modes: tuple[str, ...], said: Origin) -> bool:
        if not modes and "modes" not in self.notes.broken and self.table.named:
            self.notes.add(said.place, "empty-origin", "no mode is left to come from", "name the modes")
        return bool(modes)

    # Moves

    def _move(self, line: Line, steps: list[Line]) -> None:
        said = line.node
        assert isinstance(said, MoveLine)
        sources = self._sources(said.origin, said.target)
        target = self._target(said.target, steps, "move")
        trigger = self._trigger(said.trigger)
        known = self.table.known(said.facts)
        done = self._steps(steps)
        if sources and target and trigger and done is not None:
            self.moves.append(Move(line.place, sources, target, trigger, said.unbroken, known, done))

    def _target(self, word: Word, steps: list[Line], what: str) -> str:
        """The target's name; empty where a mistake was noted."""
        if word.text != RESET:
            return word.text if self.table.known_mode(word) else ""
        self._uses_reset(word.place)
        if steps:
            text = f"a step under a {what} to 'reset', which hardware does at once"
            self.notes.add(steps[0].place, "stray-step", text, "take the steps out")
        return RESET

    def _trigger(self, said: WhenWord | Range | None) -> Trigger | None:
        if said is None:
            return AtOnce()
        if isinstance(said, Range):
            span = self.scope.firmware(said)
            return None if span is None else After(span)
        return self._when(said)

    def _when(self, said: WhenWord) -> When | None:
        if not self.notes.not_reset(said.event, "moves"):
            return None
        self.events.setdefault(said.event.text, said.event.place)
        earliest = Fraction(0) if said.earliest is None else self.scope.at_least_zero(said.earliest, Unit.DURATION)
        latest = None if said.latest is None else self.scope.at_least_zero(said.latest, Unit.DURATION)
        if earliest is None or (latest is None and said.latest is not None):
            return None
        if latest is not None and said.latest and latest < earliest:
            text = f"'latest' {shown(ceil(latest))} lies before 'earliest' {shown(ceil(earliest))}"
            self.notes.add(said.latest.place, "backwards-range", text, "make 'latest' the greater one")
            return None
        bounds = widened(earliest, self.scope.bound(latest), self.scope.tolerance)
        return When(said.event.text, bounds.lo, bounds.hi)

    # Steps

    def _steps(self, lines: list[Line]) -> tuple[Step, ...] | None:
        """The steps of a move or trip; None where a mistake was noted."""
        steps = [self._step(line) for line in lines]
        whole = tuple(step for step in steps if step is not None)
        return whole if len(whole) == len(steps) else None

    def _step(self, line: Line) -> Step | None:
        said = line.node
        if isinstance(said, WaitLine):
            time = self.scope.firmware(said.time)
            return None if time is None else WaitStep(line.place, time)
        if isinstance(said, SetAllOffLine):
            return SetStep(line.place, tuple((one, Fixed.OFF) for one in self.table.columns))
        assert isinstance(said, SetLine)
        return self._set(line, said)

    def _set(self, line: Line, said: SetLine) -> SetStep | None:
        writes: list[tuple[str, Cell]] = []
        seen: dict[str, Place] = {}
        for switch, word in said.settings:
            known = self.notes.known(switch, self.table.stage.names, "switch", "stage")
            cell = self.table.cell(word)
            if self.notes.fresh(switch, seen, "switch") and known and cell is not None:
                writes.append((switch.text, cell))
            seen.setdefault(switch.text, switch.place)
        return SetStep(line.place, tuple(writes)) if len(writes) == len(said.settings) else None

    # Trips

    def _trip(self, line: Line, steps: list[Line]) -> None:
        said = line.node
        assert isinstance(said, TripLine)
        fresh = self.notes.not_reset(said.name, "trips") and self.notes.fresh(said.name, self.trip_names, "trip")
        self.trip_names.setdefault(said.name.text, said.name.place)
        where = self._arrivals(said)
        target = self._target(said.target, steps, "trip")
        within = self._within(said)
        at_once = said.at_once or target == RESET
        if at_once and target != RESET and steps and isinstance(steps[0].node, WaitLine):
            text = "a trip that is 'at once' cannot begin with a wait"
            self.notes.add(steps[0].place, "leading-wait", text, "set something first, or take 'at once' out")
        known = self.table.known(said.facts)
        done = self._steps(steps)
        if fresh and where and target and within != -1 and done is not None:
            resting, origins = where
            self.trips.append(Trip(line.place, said.name.text, resting, origins, target, within, at_once, known, done))

    def _arrivals(self, said: TripLine) -> tuple[frozenset[str], frozenset[str]] | None:
        """The modes in which a trip may arrive, and those whose leaving moves it may interrupt."""
        if said.origin.any:
            origins = self._all_but(said.origin)
            if origins is None or not self._some(origins, said.origin):
                return None
            return frozenset(origins) - {said.target.text}, frozenset(origins)
        listed = self._listed(said.origin)
        if listed is None:
            return None
        if RESET in listed and not said.at_once and said.target.text != RESET:
            text = "no firmware trip is taken in 'reset'"
            self.notes.add(said.origin.place, "wrong-origin", text, "leave 'reset' out")
            return None
        return frozenset(listed) - {said.target.text}, frozenset(listed)

    def _within(self, said: TripLine) -> int | None:
        """The trip's `within` in ps, rounded up; None without one, -1 where a mistake was noted."""
        if said.within is None:
            return None
        within = self.scope.at_least_zero(said.within, Unit.DURATION)
        if said.at_once:
            text = "'within' and 'at once' exclude each other"
            self.notes.add(said.within.place, "contradiction", text, "take one of them out")
            return -1
        if said.target.text == RESET:
            text = "a trip to 'reset' is taken by hardware, at once"
            self.notes.add(said.within.place, "contradiction", text, "take 'within' out")
            return -1
        return -1 if within is None else ceil(within)


def _grouped(lines: list[Line]) -> list[Group]:
    """Moves or trips, each with its steps."""
    groups: list[Group] = []
    for line in lines:
        if isinstance(line.node, MoveLine | TripLine):
            groups.append((line, []))
        elif groups and not isinstance(line.node, StartLine):
            groups[-1][1].append(line)
    return groups
