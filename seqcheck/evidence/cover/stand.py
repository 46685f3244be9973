"""Where the firmware stands, and what it can do next: sections 4.4 to 4.8 of the meaning, as the checker reads them.

Clock x counts from the entry of the mode, or from the last write or the beginning of the run; clock y from where the
time to take the trip in hand began. A firmware trip arrives at the last moment at which it still may before it is
taken: see `Firmware.edges`.
"""

from collections.abc import Iterator
from typing import NamedTuple

from seqcheck.drive import (
    RESET,
    After,
    AtOnce,
    Cell,
    Drive,
    Fixed,
    Follow,
    How,
    Known,
    Move,
    Trip,
    WaitStep,
    When,
    cell_text,
)
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.writes import Cells, Write, Writes
from seqcheck.evidence.groups import grouped, may_come_next
from seqcheck.quantities import INSTANT, Interval

REST = -1
NOBODY = -1
Group = tuple[Write, ...]


class Stand(NamedTuple):
    """At rest (`line` REST) in `mode`, or in the run of `line` (moves first, then trips), which left `mode`.

    In a run `item` is the step, row or end that comes next, `left` its groups that are still to be written, and the
    next event comes when x is in [soonest, latest]. `hand` is the number of the trip in hand, or NOBODY.
    """

    mode: str
    line: int
    item: int
    left: tuple[Group, ...]
    soonest: int
    latest: int | None
    hand: int
    cells: Cells


class Edge(NamedTuple):
    """An event of the firmware: possible while x is in [lo, hi] (and y at most `y_hi`); `y_anew` starts y, and x is
    started but where it is kept. With `arrives` the trip that is watched arrives in it."""

    lo: int
    hi: int | None
    y_hi: int | None
    y_anew: bool
    target: Stand
    keeps_x: bool = False
    arrives: bool = False


def placed(stand: Stand) -> Stand:
    """A stand after an event, its held groups counted anew."""
    if not stand.cells.held:
        return stand
    held = tuple(one._replace(place=place) for place, one in enumerate(stand.cells.held))
    return stand._replace(cells=stand.cells._replace(held=held))


class Firmware:
    """What firmware and break inputs can do in a drive.

    Of a scope it looks at what holds writes, whether firmware is in time and which trip is watched; scopes that differ
    in nothing else can share it: see `Scope.firmware`.
    """

    def __init__(self, scope: Scope) -> None:
        self._drive: Drive = scope.drive
        self._in_time = scope.in_time
        self.writes = Writes(scope)
        self._lines: tuple[Move | Trip, ...] = (*scope.drive.moves, *scope.drive.trips)
        self._first_trip = len(scope.drive.moves)
        watched = [number for number, trip in enumerate(scope.drive.trips) if trip.name == scope.watched]
        self._watched = watched[0] if watched else NOBODY
        self._rows = {name: self.writes.row(mode.cells) for name, mode in scope.drive.modes.items()}
        self._late = (scope.drive.clock.late or 0) if scope.drive.clock else 0
        self._windows = [self._window(move) for move in scope.drive.moves]
        self._gap = self._gap_of()
        self._from: dict[str, list[int]] = {mode: [] for mode in scope.drive.modes}
        for number, move in enumerate(scope.drive.moves):
            for mode in move.sources:
                self._from.setdefault(mode, []).append(number)
        self._items = tuple(map(self._items_of, self._lines))
        self._known: dict[Stand, tuple[Edge, ...]] = {}
        self._own: dict[Stand, list[Edge]] = {}
        self._grouped: dict[tuple[Group, tuple[str, ...]], tuple[Group, ...]] = {}
        self._cells: dict[str, Cell] = {}
        self._begins: dict[tuple[str, int, Cells], tuple[Stand, ...]] = {}
        self._broken_in: dict[tuple[str, int, tuple[str, ...]], Stand] = {}

    def start(self) -> Stand:
        """Time 0: the start mode, its row in effect."""
        return self._resting(self._drive.start, NOBODY, self._settled(self._drive.start))

    def _settled(self, mode: str) -> Cells:
        return Cells(self._rows[mode], self._rows[mode], ())

    def _resting(self, mode: str, hand: int, cells: Cells) -> Stand:
        return Stand(mode, REST, 0, (), 0, None, hand, cells)

    # Bounds

    def _kept(self, span: Interval) -> Interval:
        """A span that firmware keeps: late by what the file allows, or without an upper bound if it may be late."""
        if not self._in_time or span.hi is None:
            return Interval(span.lo, None)
        return Interval(span.lo, span.hi + self._late)

    def _window(self, move: Move) -> Interval:
        match move.trigger:
            case When(earliest=earliest, latest=latest):
                return Interval(max(earliest, self._drive.loop.lo if self._drive.loop else 0), latest)
            case After(span=span):
                return self._kept(span)
            case AtOnce():
                return INSTANT

    def _gap_of(self) -> Interval:
        writes = self._drive.writes
        return INSTANT if writes is None or writes.how is How.TOGETHER else self._kept(writes.gap)

    def x_limit(self, stand: Stand) -> int | None:
        """The latest x of a stand."""
        if stand.line != REST:
            return stand.latest
        moves = self._drive.moves
        timed = [
            self._windows[number].hi
            for number in self._from.get(stand.mode, ())
            if not isinstance(moves[number].trigger, When)
        ]
        return min((hi for hi in timed if hi is not None), default=None)

    def y_limit(self, stand: Stand) -> int | None:
        """The latest y of a stand: a trip in hand must be taken in time wherever it can be."""
        return self._patience(stand.hand) if stand.hand != NOBODY and self._takes(stand) else None

    def _patience(self, number: int) -> int | None:
        within = self._drive.trips[number].within
        return 0 if within is None else self._kept(Interval(0, within)).hi

    # What comes next

    def edges(self, stand: Stand) -> tuple[Edge, ...]:
        """All that firmware and break inputs can do next.

        Only runs are gone through in which a firmware trip arrives as late as it can before it is taken: where it is
        taken, if it may arrive there; else just before the last event that leaves a place in which it may. Any other
        run is brought to that by moving arrivals later and leaving out those of trips that are never taken: nothing
        else is forbidden or made due by that, and the time to take the trip begins later.

        The trip that is watched arrives whenever it may, and stays in hand until it is taken or dropped.
        """
        known = self._known.get(stand)
        if known is None:
            known = self._known[stand] = tuple(self._edges(stand))
        return known

    def _edges(self, stand: Stand) -> Iterator[Edge]:
        own = self._own_of(stand if stand.hand == NOBODY else stand._replace(hand=NOBODY))
        takes = self._takes(stand)
        if stand.hand == NOBODY:
            yield from own
            for number in self._firmware_trips():
                if not self._hears(number, stand):
                    continue
                if takes:
                    yield from self._taken(stand, number, None)
                if takes and self._drive.trips[number].within is None:
                    continue
                if number == self._watched:
                    yield Edge(0, None, None, True, stand._replace(hand=number), keeps_x=True, arrives=True)
                else:
                    yield from self._carried(stand, number, own, y_anew=True)
            return
        if takes:
            yield from self._taken(stand, stand.hand, self._patience(stand.hand))
        yield from self._carried(stand, stand.hand, own, y_anew=not takes)

    def _own_of(self, stand: Stand) -> list[Edge]:
        """What can come next without a firmware trip; stands with one in hand differ in nothing else."""
        known = self._own.get(stand)
        if known is None:
            known = self._own[stand] = [*self._onward(stand), *self._broken(stand)]
        return known

    def _carried(self, stand: Stand, number: int, own: list[Edge], *, y_anew: bool) -> Iterator[Edge]:
        """Events that leave a trip in hand; where it may still arrive afterwards, it does so only then."""
        goal = self._drive.trips[number].target
        for edge in own:
            there = edge.target
            if there.line == REST and there.mode in (RESET, goal):
                if number == self._watched:
                    yield edge
            elif number == self._watched or not self._hears(number, there):
                yield Edge(edge.lo, edge.hi, edge.y_hi, y_anew, Stand(*there[:6], number, there.cells))

    def _firmware_trips(self) -> Iterator[int]:
        return (number for number, trip in enumerate(self._drive.trips) if not trip.at_once)

    def _takes(self, stand: Stand) -> bool:
        """Whether firmware takes a trip here: at rest and in moves that are not unbroken."""
        if stand.line == REST:
            return stand.mode != RESET
        line = self._lines[stand.line]
        return isinstance(line, Move) and not line.unbroken

    def _hears(self, number: int, stand: Stand) -> bool:
        """Whether a trip may come here."""
        trip = self._drive.trips[number]
        if stand.line == REST:
            return stand.mode != RESET and stand.mode in trip.resting
        if stand.line >= self._first_trip and (not trip.at_once or stand.line == self._first_trip + number):
            return False
        return stand.mode in trip.origins

    def _onward(self, stand: Stand) -> Iterator[Edge]:
        if stand.line == REST:
            for number in self._from.get(stand.mode, ()):
                window = self._windows[number]
                for target in self._begun(stand.mode, number, stand.cells):
                    yield Edge(window.lo, window.hi, None, False, target)
            return
        targets = self._written(stand) if stand.left else (self._entered(stand),)
        for target in targets:
            yield Edge(stand.soonest, stand.latest, None, False, target)

    def _taken(self, stand: Stand, number: int, y_hi: int | None) -> Iterator[Edge]:
        arrives = number == self._watched and stand.hand == NOBODY
        for target in self._begun(stand.mode, self._first_trip + number, stand.cells):
            yield Edge(0, None, y_hi, False, target, arrives=arrives)

    def _broken(self, stand: Stand) -> Iterator[Edge]:
        for number, trip in enumerate(self._drive.trips):
            if trip.at_once and self._hears(number, stand):
                key = (stand.mode, number, stand.cells.effective)
                if key not in self._broken_in:
                    self._broken_in[key] = self._break_in(*key)
                yield Edge(0, None, None, False, self._broken_in[key], arrives=number == self._watched)

    def _break_in(self, mode: str, number: int, effective: tuple[str, ...]) -> Stand:
        if self._drive.trips[number].target == RESET:
            return self._resting(RESET, NOBODY, self._settled(RESET))
        cells = self.writes.cancelled(effective)
        run, groups, wait = self._advanced(mode, self._first_trip + number, 0, cells)
        if groups and wait is None:
            forced = self.writes.forced(cells, [write for group in groups for write in group])
            return self._after(run._replace(cells=forced, left=()))
        return self._waiting(run, groups, wait)

    # Runs

    def _begun(self, mode: str, number: int, cells: Cells) -> tuple[Stand, ...]:
        """A run begins; with its first write, if no wait stands before it."""
        key = (mode, number, cells)
        if key not in self._begins:
            self._begins[key] = self._beginning(*key)
        return self._begins[key]

    def _beginning(self, mode: str, number: int, cells: Cells) -> tuple[Stand, ...]:
        if self._lines[number].target == RESET:
            return (self._resting(RESET, NOBODY, self._settled(RESET)),)
        run, groups, wait = self._advanced(mode, number, 0, cells)
        if groups and wait is None:
            return tuple(self._written(run._replace(left=groups)))
        return (self._waiting(run, groups, wait),)

    def _waiting(self, run: Stand, groups: tuple[Group, ...], wait: Interval | None) -> Stand:
        """A run before a wait; the mode that it enters if there is neither wait nor write."""
        if wait is None:
            return self._entered(run)
        return run._replace(left=groups, soonest=wait.lo, latest=wait.hi)

    def _written(self, run: Stand) -> Iterator[Stand]:
        """What the run is after each group that may be written next."""
        for group in self._next(run.left):
            left = tuple(one for one in run.left if one != group)
            yield self._after(run._replace(left=left, cells=self.writes.write(run.cells, group)))

    def _after(self, run: Stand) -> Stand:
        """What the run is just after a write."""
        gap = self._gap
        if run.left:
            return run._replace(soonest=gap.lo, latest=gap.hi)
        ahead, groups, wait = self._advanced(run.mode, run.line, run.item + 1, run.cells)
        if groups and wait is None:
            wait = gap
        return self._waiting(ahead, groups, wait)

    def _entered(self, run: Stand) -> Stand:
        return self._resting(self._lines[run.line].target, NOBODY, run.cells)

    def _advanced(
        self, mode: str, number: int, item: int, cells: Cells
    ) -> tuple[Stand, tuple[Group, ...], Interval | None]:
        """The run at the next item from `item` on that writes something, its groups, and the waits before it."""
        wait: Interval | None = None
        groups: tuple[Group, ...] = ()
        items = self._items[number]
        while item < len(items):
            one = items[item]
            if isinstance(one, Interval):
                wait = (wait or INSTANT) + one
            else:
                groups = self._groups(one, cells.written)
                if groups:
                    break
            item += 1
        return Stand(mode, number, item, (), 0, None, NOBODY, cells), groups, wait

    def _items_of(self, line: Move | Trip) -> tuple[Group | Interval, ...]:
        """The steps of a run, and its target's row: what each wants written, in column order, or the time it waits."""
        found: list[Group | Interval] = []
        for step in line.steps:
            if isinstance(step, WaitStep):
                found.append(self._kept(step.time))
            else:
                cells = dict(step.writes)
                found.append(tuple((name, cell_text(cells[name])) for name in self._drive.columns if name in cells))
        return (*found, tuple(zip(self._drive.columns, self._rows[line.target], strict=True)))

    def _groups(self, item: Group, written: tuple[str, ...]) -> tuple[Group, ...]:
        known = self._grouped.get((item, written))
        if known is None:
            last = dict(zip(self._drive.columns, written, strict=True))
            changes = {switch: self._cell(word) for switch, word in item if word not in ("keep", last[switch])}
            words = dict(item)
            groups = grouped(self._drive, changes)
            known = tuple(tuple((switch, words[switch]) for switch in group) for group in groups)
            self._grouped[item, written] = known
        return known

    def _next(self, left: tuple[Group, ...]) -> list[Group]:
        as_cells = [{switch: self._cell(word) for switch, word in group} for group in left]
        chosen = may_come_next(self._drive, as_cells)
        return [group for group, cells in zip(left, as_cells, strict=True) if cells in chosen]

    def _cell(self, word: str) -> Cell:
        if word not in self._cells:
            carrier = self.writes.carrier_of(word)
            self._cells[word] = Fixed(word) if carrier is None else Follow(carrier, word != carrier)
        return self._cells[word]

    def known(self, stand: Stand) -> tuple[Known, ...]:
        """What is known of the sources in a stand."""
        if stand.line != REST:
            return self._lines[stand.line].known
        return self._drive.modes[stand.mode].known
