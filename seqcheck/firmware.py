"""The drive unfolded into a timed automaton of its firmware, on demand.

A `State` says where the firmware stands (at rest in a mode, or between two writes of a run), which trip is in hand, and
what is written, in effect and held. One clock `x` counts from the last write or entry, one clock `y` the time that a
trip has been in hand. Transitions are worked out when they are asked for and then kept, so that a proof pays only for
what it reaches.

A trip's arrival is put off as long as possible: a trip is taken on the spot wherever it may arrive, and is put in hand
only where the firmware leaves the states in which it may arrive. What happens with an earlier arrival happens with the
later one too, since both may be taken until `within` after it and an earlier one only closes that window sooner. Where
it matters how long ago a trip arrived, that one may arrive early too.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

from seqcheck.drive import (
    RESET,
    After,
    AtOnce,
    Drive,
    How,
    Known,
    Move,
    Order,
    SetStep,
    Trip,
    WaitStep,
    When,
)
from seqcheck.quantities import Interval
from seqcheck.verdict import Act
from seqcheck.writing import FREE, KEEP, Put, Write, Writing

Group = tuple[Write, ...]


class Deed(NamedTuple):
    """One act of the firmware: of which run or trip, with which writes, at which of the run's items (-1: none)."""

    act: Act
    number: int
    writes: Group = ()
    item: int = -1


Deeds = tuple[Deed, ...]


class State(NamedTuple):
    """Where the firmware stands. At rest `run` is -1 and `mode` the mode; in a run `mode` is the mode that was left.

    `run` numbers moves first, then trips. `item` is the step (or row, or end) that comes next, `left` its writes that
    are still to be made, `soonest` and `latest` the time of the next event after the last (latest None: no bound).
    `hand` is the trip in hand, -1 for none.
    """

    mode: str
    run: int
    item: int
    left: tuple[Group, ...]
    soonest: int
    latest: int | None
    hand: int
    put: Put


class Step(NamedTuple):
    """What a transition does: its deeds in order, and the state after them."""

    deeds: Deeds
    target: State


class Edge(NamedTuple):
    """A transition: `x` in [lo, hi] (hi None: no bound), `y` at most `y_hi` if that is not None. `x` starts anew but
    where a trip arrives early."""

    lo: int
    hi: int | None
    y_hi: int | None
    resets_y: bool
    starts_run: bool
    step: Step
    resets_x: bool = True


@dataclass(frozen=True, slots=True)
class Bounds:
    """How strictly firmware keeps its upper bounds: `late` is added to them; with `kept` False they are removed."""

    late: int
    kept: bool

    def of(self, interval: Interval) -> tuple[int, int | None]:
        """The interval as firmware keeps it."""
        hi = None if interval.hi is None or not self.kept else interval.hi + self.late
        return interval.lo, hi


Item = tuple[tuple[int, int], ...] | Interval


class Firmware:
    """The firmware of one drive, as transitions between states."""

    def __init__(
        self, drive: Drive, tracked: frozenset[str], looked_at: frozenset[str], punctual: bool, early: str | None = None
    ) -> None:
        """Unfold with (`punctual`) or without the upper bounds that firmware keeps; see Writing for the rest.

        `early` names a trip that may arrive at any moment, and not only at the last.
        """
        self.drive = drive
        self.punctual = punctual
        self.writing = Writing(drive, tracked, looked_at)
        self._bounds = Bounds(drive.clock.late or 0 if drive.clock else 0, punctual)
        self._index = {name: number for number, name in enumerate(drive.columns)}
        self._how = drive.writes.how if drive.writes else How.TOGETHER
        self._order = drive.writes.order if drive.writes else Order.ANY
        self._gap = self._bounds.of(drive.writes.gap) if self._how is not How.TOGETHER and drive.writes else (0, 0)
        self._rows = {name: tuple(map(self.writing.code, mode.cells)) for name, mode in drive.modes.items()}
        self._runs: tuple[Move | Trip, ...] = (*drive.moves, *drive.trips)
        self._items = tuple(self._items_of(run) for run in self._runs)
        self._ports = [drive.pins[name].port if name in drive.pins else None for name in drive.columns]
        self._early = next((number for number, trip in enumerate(drive.trips) if trip.name == early), -1)
        self._known: dict[State, tuple[Edge, ...]] = {}
        self._moves: dict[str, list[tuple[int, Move]]] = {}
        for number, move in enumerate(drive.moves):
            for mode in dict.fromkeys(move.sources):
                self._moves.setdefault(mode, []).append((number, move))

    # What a state is

    def start(self) -> State:
        """At time 0: the start mode has just been entered, its row is in effect."""
        row = self._rows[self.drive.start]
        return State(self.drive.start, -1, 0, (), 0, None, -1, (row, row, ()))

    def deadline(self, state: State) -> int | None:
        """The bound on `x` in a state."""
        if state.run >= 0:
            return state.latest
        spans = [self.window(move)[2] for _, move in self.leaving(state.mode)]
        return min((hi for hi in spans if hi is not None), default=None)

    def hand_deadline(self, state: State) -> int | None:
        """The bound on `y` in a state: None with no trip in hand, or where it cannot be taken."""
        return self._within(state.hand) if state.hand >= 0 and self._interruptible(state) else None

    def hand_is_timed(self, state: State) -> bool:
        """Whether it matters how long the trip in hand has been there while the stay lasts."""
        return state.hand >= 0 and (self._early >= 0 or self.hand_deadline(state) is not None)

    def facts(self, state: State) -> tuple[Known, ...]:
        """What is known in a state."""
        return self._runs[state.run].known if state.run >= 0 else self.drive.modes[state.mode].known

    def updated(self, state: State, carrier: int) -> State:
        """The state after the writes held for one carrier have acted."""
        return state._replace(put=self.writing.update(state.put, carrier))

    def leaving(self, mode: str) -> Sequence[tuple[int, Move]]:
        """The moves out of a mode, each with its place in the file."""
        return self._moves.get(mode, ())

    def window(self, move: Move) -> tuple[int, int | None, int | None]:
        """When a move may begin, in ps after entry: (soonest, latest, the bound that it puts on the stay)."""
        if isinstance(move.trigger, AtOnce):
            return 0, 0, 0
        if isinstance(move.trigger, After):
            lo, hi = self._bounds.of(move.trigger.span)
            return lo, hi, hi
        loop = self.drive.loop.lo if self.drive.loop else 0
        assert isinstance(move.trigger, When)
        return max(move.trigger.earliest, loop), move.trigger.latest, None

    # What can happen

    def edges(self, state: State) -> tuple[Edge, ...]:
        """The firmware's transitions out of a state."""
        known = self._known.get(state)
        if known is None:
            known = self._known[state] = tuple(self._edges(state))
        return known

    def _edges(self, state: State) -> list[Edge]:
        plain = self._running(state) if state.run >= 0 else self._moving(state)
        plain += [edge for number in range(len(self.drive.trips)) for edge in self._broken(state, number)]
        if state.hand < 0:
            taken = [edge for number in range(len(self.drive.trips)) for edge in self._taken(state, number, None)]
            arriving = [edge for one in plain for edge in self._arriving(state, one)]
            return plain + arriving + taken + self._arriving_early(state)
        kept = [edge for one in plain for edge in self._in_hand(state, one)]
        if self._interruptible(state):
            kept += self._taken(state, state.hand, self._within(state.hand))
        return kept

    def _moving(self, state: State) -> list[Edge]:
        found = []
        for number, move in self.leaving(state.mode):
            lo, hi, _ = self.window(move)
            found += [Edge(lo, hi, None, False, True, step) for step in self._begin(state, number)]
        return found

    def _running(self, state: State) -> list[Edge]:
        if not state.left:
            return [self._edge(state, self._entered(state.run, state.put, ()))]
        found = []
        for group in self._next_groups(state.left):
            rest = tuple(one for one in state.left if one is not group)
            put = self.writing.write(state.put, group)
            deeds = (Deed(Act.WRITES, state.run, group, state.item),)
            found.append(self._edge(state, self._after_write(state, put, rest, deeds)))
        return found

    def _edge(self, state: State, step: Step) -> Edge:
        return Edge(state.soonest, state.latest, None, False, False, step)

    # Runs

    def _items_of(self, run: Move | Trip) -> tuple[Item, ...]:
        items: list[Item] = []
        for step in run.steps:
            if isinstance(step, WaitStep):
                items.append(step.time)
            else:
                assert isinstance(step, SetStep)
                items.append(tuple((self._index[name], self.writing.code(cell)) for name, cell in step.writes))
        return (*items, tuple(enumerate(self._rows[run.target])))

    def _begin(self, state: State, run: int) -> list[Step]:
        """A run begins: its first write belongs to this event, unless a wait comes first."""
        begun = (Deed(Act.BEGINS, run),)
        if self._runs[run].target == RESET:
            return [self._reset(run)]
        item, groups, wait = self._look(run, 0, state.put)
        if wait is not None:
            lo, hi = self._bounds.of(wait)
            return [Step(begun, State(state.mode, run, item, groups, lo, hi, -1, state.put))]
        if not groups:
            return [self._entered(run, state.put, begun)]
        there = State(state.mode, run, item, groups, 0, 0, -1, state.put)
        steps = []
        for group in self._next_groups(groups):
            rest = tuple(one for one in groups if one is not group)
            put = self.writing.write(state.put, group)
            steps.append(self._after_write(there, put, rest, (*begun, Deed(Act.WRITES, run, group, item))))
        return steps

    def _look(self, run: int, item: int, put: Put) -> tuple[int, tuple[Group, ...], Interval | None]:
        """The next item with something to write from `item` on, its writes, and the waits before it."""
        wait: Interval | None = None
        items = self._items[run]
        for place in range(item, len(items)):
            one = items[place]
            if isinstance(one, Interval):
                wait = one if wait is None else wait + self._late_between(one)
                continue
            groups = self._groups(one, put)
            if groups:
                return place, groups, wait
        return len(items), (), wait

    def _late_between(self, wait: Interval) -> Interval:
        """A further wait in a row: each is late on its own, and one lateness is added to their sum by the caller."""
        return wait if wait.hi is None else Interval(wait.lo, wait.hi + self._bounds.late)

    def _groups(self, item: tuple[Write, ...], put: Put) -> tuple[Group, ...]:
        changes = [(switch, cell) for switch, cell in item if cell not in (KEEP, put[0][switch])]
        if not changes:
            return ()
        changes.sort()
        if self._how is How.TOGETHER:
            return (tuple(changes),)
        groups: dict[object, list[Write]] = {}
        for switch, cell in changes:
            port = self._ports[switch] if self._how is How.BY_PORT else None
            groups.setdefault(switch if port is None else port, []).append((switch, cell))
        return tuple(map(tuple, groups.values()))

    def _next_groups(self, groups: tuple[Group, ...]) -> tuple[Group, ...]:
        """Those of the groups that the order of writes lets come first."""
        if len(groups) == 1 or self._order is Order.ANY:
            return groups
        if self._order is Order.TABLE:
            return groups[:1]
        offs = tuple(group for group in groups if all(map(self.writing.turns_off, group)))
        ons = tuple(group for group in groups if group not in offs)
        first, second = (offs, ons) if self._order is Order.OFFS_FIRST else (ons, offs)
        return first or second

    def _after_write(
        self, state: State, put: Put, rest: tuple[Group, ...], deeds: Deeds
    ) -> Step:
        """Where a run stands after a write; the last write and the entry are one event."""
        lo, hi = self._gap
        if rest:
            return Step(deeds, state._replace(left=rest, soonest=lo, latest=hi, put=put))
        item, groups, wait = self._look(state.run, state.item + 1, put)
        if wait is not None:
            lo, hi = self._bounds.of(wait)
        elif not groups:
            return self._entered(state.run, put, deeds)
        return Step(deeds, state._replace(item=item, left=groups, soonest=lo, latest=hi, put=put))

    def _entered(self, run: int, put: Put, deeds: Deeds) -> Step:
        target = State(self._runs[run].target, -1, 0, (), 0, None, -1, put)
        return Step((*deeds, Deed(Act.ENTERS, run)), target)

    def _reset(self, run: int) -> Step:
        row = (FREE,) * len(self.drive.columns)
        every = tuple(enumerate(row))
        return Step(
            (Deed(Act.BEGINS, run, every), Deed(Act.ENTERS, run)), State(RESET, -1, 0, (), 0, None, -1, (row, row, ()))
        )

    # Trips

    def _trip(self, number: int) -> Trip:
        return self.drive.trips[number]

    def _within(self, number: int) -> int | None:
        """How long a trip may stay in hand."""
        within = self._trip(number).within
        if within is None:
            return 0
        return within + self._bounds.late if self.punctual else None

    def _interruptible(self, state: State) -> bool:
        """Whether firmware would take a trip here."""
        if state.run < 0:
            return state.mode != RESET
        run = self._runs[state.run]
        return isinstance(run, Move) and not run.unbroken

    def _covers(self, number: int, state: State) -> bool:
        """Whether a trip may arrive here."""
        trip = self._trip(number)
        if state.run < 0:
            return state.mode in trip.resting and (trip.at_once or state.mode != RESET)
        running = self._runs[state.run]
        if isinstance(running, Trip) and (running is trip or not trip.at_once):
            return False
        return state.mode in trip.origins

    def _broken(self, state: State, number: int) -> list[Edge]:
        """A trip that hardware takes at once."""
        trip = self._trip(number)
        if not trip.at_once or not self._covers(number, state):
            return []
        run = len(self.drive.moves) + number
        if trip.target == RESET:
            return [Edge(0, None, None, False, True, self._reset(run))]
        return [Edge(0, None, None, False, True, self._break_in(state, run))]

    def _break_in(self, state: State, run: int) -> Step:
        """A break input cancels what is held and makes its first writes in one instant, in effect at once."""
        put = self.writing.force(state.put, ())
        begun = (Deed(Act.BEGINS, run),)
        item, groups, wait = self._look(run, 0, put)
        if not groups and wait is None:
            return self._entered(run, put, begun)
        if wait is not None:  # what stands before the wait is so already
            lo, hi = self._bounds.of(wait)
            return Step(begun, State(state.mode, run, item, groups, lo, hi, -1, put))
        writes = tuple(sorted(write for group in groups for write in group))
        there = State(state.mode, run, item, (), 0, 0, -1, put)
        deeds = (*begun, Deed(Act.WRITES, run, writes, item))
        return self._after_write(there, self.writing.force(put, writes), (), deeds)

    def _taken(self, state: State, number: int, y_hi: int | None) -> list[Edge]:
        """A firmware trip is taken: on the spot where it may arrive, else from hand."""
        trip = self._trip(number)
        if trip.at_once or not self._interruptible(state):
            return []
        if state.hand < 0 and not self._covers(number, state):
            return []
        arrives = (Deed(Act.ARRIVES, number),) if state.hand < 0 else ()
        steps = self._begin(state._replace(hand=-1), len(self.drive.moves) + number)
        return [Edge(0, None, y_hi, False, True, Step((*arrives, *deeds), target)) for deeds, target in steps]

    def _arriving(self, state: State, edge: Edge) -> list[Edge]:
        """A trip arrives at the last moment: just before the firmware leaves the states in which it may."""
        found = []
        for number, trip in enumerate(self.drive.trips):
            if trip.at_once or not self._covers(number, state) or self._drops(number, edge.step.target):
                continue
            if trip.within is None and self._interruptible(state):
                continue  # without `within` it is taken as it arrives
            found.append(_with_hand(edge, number, True, (Deed(Act.ARRIVES, number),)))
        return found

    def _arriving_early(self, state: State) -> list[Edge]:
        """The trip that need not wait for the last moment arrives."""
        number = self._early
        if number < 0 or self._trip(number).at_once or not self._covers(number, state):
            return []
        if self._trip(number).within is None and self._interruptible(state):
            return []
        step = Step((Deed(Act.ARRIVES, number),), state._replace(hand=number))
        return [Edge(0, None, None, True, False, step, resets_x=False)]

    def _in_hand(self, state: State, edge: Edge) -> list[Edge]:
        """The firmware goes on with a trip in hand; where it could arrive again, not arriving before does as well.

        But for one that arrives early: that it is in hand for long is what is looked for.
        """
        if state.hand == self._early:
            target = edge.step.target
            if target.run < 0 and target.mode in (RESET, self._trip(state.hand).target):
                return [edge]
        elif self._drops(state.hand, edge.step.target):
            return []
        anew = not self._interruptible(state)
        return [_with_hand(edge, state.hand, anew, ())]

    def _drops(self, number: int, target: State) -> bool:
        """Whether nothing is gained by having a trip in hand in a state."""
        if target.run < 0 and target.mode in (RESET, self._trip(number).target):
            return True
        return self._covers(number, target)


def _with_hand(edge: Edge, number: int, resets_y: bool, deeds: Deeds) -> Edge:
    step = Step((*deeds, *edge.step.deeds), edge.step.target._replace(hand=number))
    return edge._replace(resets_y=resets_y, step=step)
