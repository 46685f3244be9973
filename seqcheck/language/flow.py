"""Checks that follow the runs of a drive: is `writes` needed, and can a circle of moves take no time."""

from collections import deque
from collections.abc import Iterable, Mapping

from seqcheck.drive import (
    RESET,
    After,
    AtOnce,
    Cell,
    Drive,
    Fixed,
    Follow,
    How,
    Mode,
    Move,
    SetStep,
    Step,
    Trip,
    Update,
    WaitStep,
)
from seqcheck.language.notes import Notes

MOST_STATES = 2_000
"""States that the search for two changes in one step looks at; beyond it `writes` is asked for."""

State = tuple[Cell, ...]
"""What each switch was told last, in the order of the columns."""


def check_flow(drive: Drive, notes: Notes) -> None:
    """Note a missing `writes` line, and circles of moves that can take no time."""
    if drive.writes is None:
        _check_writes(drive, notes)
    _check_circles(drive, notes)


def _items(drive: Drive, run: Move | Trip) -> list[Mapping[str, Cell] | None]:
    """The cells that a run sets, item by item, the target's row last; None for a wait. `keep` sets nothing."""
    items = [_kept_out(dict(step.writes)) if isinstance(step, SetStep) else None for step in run.steps]
    return [*items, _row(drive, drive.modes[run.target])]


def _row(drive: Drive, mode: Mode) -> Mapping[str, Cell]:
    return _kept_out(dict(zip(drive.columns, mode.cells, strict=True)))


def _kept_out(cells: Mapping[str, Cell]) -> Mapping[str, Cell]:
    return {switch: cell for switch, cell in cells.items() if cell is not Fixed.KEEP}


# Is `writes` needed


class _Search:
    """Goes through everything that switches can have been told, as long as no step changes two of them.

    Then each step acts in one instant, so that a trip can cut into a run only between its steps and in its waits.
    """

    def __init__(self, drive: Drive) -> None:
        self.drive = drive
        self.place = {switch: number for number, switch in enumerate(drive.columns)}
        self.seen: set[tuple[str, State, bool]] = set()
        self.queue: deque[tuple[str, State, bool]] = deque()

    def found(self) -> tuple[Move | Trip, list[str]] | None:
        """A run with a step that changes several switches, and which."""
        self._visit(self.drive.start, self.drive.modes[self.drive.start].cells, True)
        while self.queue and len(self.seen) <= MOST_STATES:
            origin, state, resting = self.queue.popleft()
            for run in self._runs(origin, resting):
                changed = self._run(origin, state, run)
                if changed:
                    return run, changed
        return None

    def _visit(self, origin: str, state: State, resting: bool) -> None:
        if (origin, state, resting) not in self.seen:
            self.seen.add((origin, state, resting))
            self.queue.append((origin, state, resting))

    def _runs(self, origin: str, resting: bool) -> Iterable[Move | Trip]:
        """What may begin at rest in a mode, or cut into a run that comes from it."""
        if not resting:
            return [trip for trip in self.drive.trips if origin in trip.origins]
        moves = [move for move in self.drive.moves if origin in move.sources]
        return [*moves, *(trip for trip in self.drive.trips if origin in trip.resting)]

    def _run(self, origin: str, state: State, run: Move | Trip) -> list[str]:
        """Follow one run from one state; the switches of the first step that changes several."""
        if run.target == RESET:
            self._visit(RESET, (Fixed.FREE,) * len(state), True)
            return []
        written = False
        for item in _items(self.drive, run):
            changed = [one for one, cell in (item or {}).items() if state[self.place[one]] != cell]
            if len(changed) > 1:
                return changed
            if item is None or (changed and written):
                self._visit(origin, state, False)
            if item is not None and changed:
                state, written = self._told(state, changed[0], item[changed[0]]), True
        self._visit(run.target, state, True)
        return []

    def _told(self, state: State, switch: str, cell: Cell) -> State:
        number = self.place[switch]
        return (*state[:number], cell, *state[number + 1 :])


def _check_writes(drive: Drive, notes: Notes) -> None:
    if len(drive.columns) < 2:
        return
    search = _Search(drive)
    found = search.found()
    way_out = "add a line 'writes', such as 'writes together'"
    cancels = next((trip for trip in drive.trips if trip.at_once and trip.target != RESET), None)
    if not found and cancels and _holds(drive):
        text = (
            f"'{cancels.name}' cancels held writes, so that more may change in one step, but no line 'writes' says how"
        )
        notes.add(cancels.place, "missing-writes", text, way_out)
    elif found:
        run, changed = found
        text = f"'{changed[0]}' and '{changed[1]}' change in one step here, but no line 'writes' says how"
        notes.add(run.place, "missing-writes", text, way_out)
    elif search.queue:
        text = "whether a step changes two switches is not settled, since the rows keep too many"
        notes.add(drive.place, "missing-writes", text, way_out)


def _holds(drive: Drive) -> bool:
    """Whether a write may be held: what it was told is then not what a break input finds."""
    runs: list[Move | Trip] = [*drive.moves, *drive.trips]
    cells = (cell for run in runs for item in _items(drive, run) if item for cell in item.values())
    named = {cell.carrier for cell in cells if isinstance(cell, Follow)}
    return any(drive.carriers[name].update is not Update.AT_ONCE for name in named)


# Can a circle of moves take no time


def _check_circles(drive: Drive, notes: Notes) -> None:
    quick: dict[str, list[tuple[str, Move]]] = {}
    for move in drive.moves:
        for source in move.sources:
            if _can_take_no_time(drive, move, source):
                quick.setdefault(source, []).append((move.target, move))
    seen: set[str] = set()
    for mode in drive.modes:
        circle = _circle(mode, quick, seen)
        if circle:
            modes = " -> ".join([mode, *(move.target for move in circle)])
            place = min(move.place for move in circle)
            text = f"the moves {modes} can take no time and hear no event, so they could go round for ever"
            notes.add(place, "timeless-circle", text, "give one of them a wait, 'after' some time or 'when' an event")
            seen.update(move.target for move in circle)


def _circle(start: str, quick: dict[str, list[tuple[str, Move]]], seen: set[str]) -> list[Move]:
    """A shortest way round from a mode to itself; empty if there is none, or if it was told of before."""
    ways: dict[str, list[Move]] = {start: []}
    queue = [start]
    for mode in queue:
        for target, move in quick.get(mode, ()):
            if target == start and start not in seen:
                return [*ways[mode], move]
            if target not in ways:
                ways[target] = [*ways[mode], move]
                queue.append(target)
    return []


def _can_take_no_time(drive: Drive, move: Move, source: str) -> bool:
    begins = isinstance(move.trigger, AtOnce) or (isinstance(move.trigger, After) and move.trigger.span.lo == 0)
    return begins and (move.target == RESET or (not _waits(move.steps) and not _gaps(drive, move, source)))


def _waits(steps: tuple[Step, ...]) -> bool:
    return any(isinstance(step, WaitStep) and step.time.lo > 0 for step in steps)


def _gaps(drive: Drive, move: Move, source: str) -> bool:
    """Whether at least two groups of writes are certain, with time between them.

    What a row keeps is not known here, so that a write to it is never certain. A wait may be nothing (else it were
    counted itself) and takes the place of a gap, so that with one about no gap is certain.
    """
    if drive.writes is None or drive.writes.gap.lo == 0 or any(isinstance(one, WaitStep) for one in move.steps):
        return False
    told = dict(_row(drive, drive.modes[source]))
    groups = 0
    for item in _items(drive, move):
        certain = [switch for switch, cell in (item or {}).items() if told.get(switch, cell) != cell]
        groups += len({_group(drive, switch) for switch in certain})
        told.update(item or {})
    return groups > 1


def _group(drive: Drive, switch: str) -> str:
    """What is written together with a switch."""
    pin = drive.pins.get(switch)
    by_port = drive.writes is not None and drive.writes.how is How.BY_PORT
    return f"port {pin.port}" if by_port and pin is not None and pin.port else switch
