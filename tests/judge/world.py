"""The rules of a drive, to the letter: what can happen at an instant, and whether 1 ps can pass.

Every rule is a step of its own and as eager as the words that it comes from: an arrival puts a trip in hand, whether or
not it will be taken; a dead time ends at a moment of its own; and so on. Times are whole picoseconds, which is exact
for closed constraints.
"""

from collections.abc import Iterator
from itertools import product
from typing import NamedTuple

from judge.states import FREE, KEEP, OFF, ON, Group, Hand, Lock, Pin, Rest, Run, State, Wave
from seqcheck.drive import (
    RESET,
    After,
    AtOnce,
    Carrier,
    Drive,
    How,
    Interlock,
    Known,
    Move,
    Order,
    Step,
    Update,
    WaitStep,
    When,
    cell_text,
)
from seqcheck.hazards import Literal
from seqcheck.quantities import Interval

Pins = tuple[Pin, ...]
Waves = tuple[Wave, ...]
Step_ = tuple[str, State]
"""What happened, in words for people, and the state after it."""


class Pause(NamedTuple):
    """An item of a run: a wait, its upper bound with lateness (None: removed or never there)."""

    lo: int
    hi: int | None


Item = Pause | Group


class Reached(NamedTuple):
    """Where a run stands after skipping what needs no write: the item and its groups (none: the end), and the waits
    in between, summed (None: there was none)."""

    item: int
    groups: tuple[Group, ...]
    wait: Pause | None


def in_time(age: int, hi: int | None) -> bool:
    """Whether 1 ps may pass before something that must happen at age `hi` at the latest."""
    return hi is None or age < hi


class World:
    """The transition system of one drive, seen from the switches of one hazard.

    `bounded` False removes all upper bounds that firmware keeps: those to which lateness is added.
    """

    def __init__(
        self,
        drive: Drive,
        literals: tuple[Literal, ...],
        *,
        interlocks: bool,
        bounded: bool,
    ) -> None:
        self.drive, self.literals, self.bounded = drive, literals, bounded
        self.column = {name: place for place, name in enumerate(drive.columns)}
        self.watched = [self.column[literal.switch] for literal in literals]
        self.lateness = (drive.clock.late or 0) if drive.clock else 0
        self.carriers = self._carriers()
        self.wave_of = {carrier.name: place for place, carrier in enumerate(self.carriers)}
        self.wave_cap = [_wave_cap(carrier) for carrier in self.carriers]
        self.guards = self._guards(drive.interlocks if interlocks else ())
        self.resting = [drive.pins[name].resting.value if name in drive.pins else "" for name in drive.columns]
        self.settling = [drive.pins[name].after if name in drive.pins else Interval(0, 0) for name in drive.columns]
        self.gap = self._gap()
        self.items = {
            **{(False, k): self._items(move.steps, move.target) for k, move in enumerate(drive.moves)},
            **{(True, k): self._items(trip.steps, trip.target) for k, trip in enumerate(drive.trips)},
        }
        self.begins = {name: self._beginnings(name) for name in drive.modes}
        self.lasts = {name: self._longest(name) for name in drive.modes}
        self.x_cap = {name: self._x_cap(name) for name in drive.modes}

    # Tables made once

    def _carriers(self) -> list[Carrier]:
        """The carriers that some cell names; what the others do is seen nowhere."""
        drive = self.drive
        cells = [cell for mode in drive.modes.values() for cell in mode.cells]
        steps = [step for move in drive.moves for step in move.steps]
        steps += [step for trip in drive.trips for step in trip.steps]
        cells += [cell for step in steps if not isinstance(step, WaitStep) for _, cell in step.writes]
        named = {cell_text(cell).removeprefix("~") for cell in cells}
        return [carrier for carrier in drive.carriers.values() if carrier.name in named]

    def _guards(self, interlocks: tuple[Interlock, ...]) -> list[tuple[int, int, Interval]]:
        """(guarded, partner, dead time) for both directions, where the guarded switch is in the hazard."""
        both = [(lock.first, lock.second, lock.dead) for lock in interlocks]
        both += [(lock.second, lock.first, lock.dead) for lock in interlocks]
        return [(self.column[a], self.column[b], dead) for a, b, dead in both if self.column[a] in self.watched]

    def _late(self, hi: int | None) -> int | None:
        return None if hi is None or not self.bounded else hi + self.lateness

    def _gap(self) -> Pause:
        """The time between two writes with no wait between them; none, and no lateness, if they go together."""
        writes = self.drive.writes
        if writes is None or writes.how is How.TOGETHER:
            return Pause(0, 0)
        return Pause(writes.gap.lo, self._late(writes.gap.hi))

    def _items(self, steps: tuple[Step, ...], target: str) -> tuple[Item, ...]:
        items: list[Item] = []
        for step in steps:
            if isinstance(step, WaitStep):
                items.append(Pause(step.time.lo, self._late(step.time.hi)))
            else:
                items.append(tuple((self.column[name], cell_text(cell)) for name, cell in step.writes))
        row = self.drive.modes[target].cells
        items.append(tuple((place, cell_text(cell)) for place, cell in enumerate(row)))
        return tuple(items)

    def _beginnings(self, mode: str) -> list[tuple[int, int, int | None]]:
        """(move, least, greatest x) for the moves out of a mode."""
        found: list[tuple[int, int, int | None]] = []
        for k, move in enumerate(self.drive.moves):
            if mode in move.sources:
                found.append((k, *self._opening(move)))
        return found

    def _opening(self, move: Move) -> tuple[int, int | None]:
        trigger = move.trigger
        if isinstance(trigger, When):
            loop = self.drive.loop.lo if self.drive.loop else 0
            return max(trigger.earliest, loop), trigger.latest
        if isinstance(trigger, After):
            return trigger.span.lo, self._late(trigger.span.hi)
        return 0, 0

    def _longest(self, mode: str) -> int | None:
        """How long a mode lasts at most: until the last moment of its timed moves, not at all if one begins at once."""
        moves = [move for move in self.drive.moves if mode in move.sources]
        if any(isinstance(move.trigger, AtOnce) for move in moves):
            return 0
        ends = [self._late(move.trigger.span.hi) for move in moves if isinstance(move.trigger, After)]
        return min((end for end in ends if end is not None), default=None)

    def _x_cap(self, mode: str) -> int:
        """Beyond every bound that x is compared with, all x are alike: one past the last `latest` is enough."""
        ends = [hi + 1 for _, _, hi in self.begins[mode] if hi is not None]
        return max([lo for _, lo, _ in self.begins[mode]] + ends + [self.lasts[mode] or 0], default=0)

    # The start

    def starts(self) -> Iterator[State]:
        """All states at time 0: the start row settled for ever, every phase of every carrier."""
        drive = self.drive
        pins = tuple(self._settled(place, cell_text(cell)) for place, cell in enumerate(drive.modes[drive.start].cells))
        for waves in product(*(self._phases(carrier) for carrier in self.carriers)):
            commands = [self.at_pin(place, pins, waves) for place in range(len(pins))]
            locks = tuple(Lock(commands[partner], 0, commands[partner] != ON) for _, partner, _ in self.guards)
            yield State(Rest(drive.start, 0), None, pins, waves, locks)

    def _settled(self, place: int, cell: str) -> Pin:
        return Pin(cell, cell, self.resting[place] if cell == FREE else "", -1, 0)

    def _phases(self, carrier: Carrier) -> Iterator[Wave]:
        for high, length in ((True, carrier.high), (False, carrier.low)):
            if length is None:
                continue
            if carrier.high is None or carrier.low is None:
                # The reference never had an edge, so no dead time is running.
                yield Wave(high, 0, True)
                continue
            last = _wave_cap(carrier) if length.hi is None else length.hi
            for age in range(last + 1):
                if carrier.dead.hi == 0 or age >= carrier.dead.lo:
                    yield Wave(high, age, True)
                if carrier.dead.hi != 0 and (carrier.dead.hi is None or age <= carrier.dead.hi):
                    yield Wave(high, age, False)

    # Commands

    def at_pin(self, place: int, pins: Pins, waves: Waves) -> str:
        """What the pin of a column says, before any interlock."""
        return self.command(pins[place], waves)

    def command(self, pin: Pin, waves: Waves) -> str:
        """What is told to a pin."""
        cell = pin.effective
        if cell == FREE:
            return pin.level
        if cell in (ON, OFF):
            return cell
        wave = waves[self.wave_of[cell.removeprefix("~")]]
        return ON if wave.over and wave.high is not cell.startswith("~") else OFF

    def wanted(self, state: State) -> tuple[bool, ...]:
        """For each literal, whether the passed command can be as it wants; an unknown one can be either."""
        found = []
        for literal, place in zip(self.literals, self.watched, strict=True):
            own = self.at_pin(place, state.pins, state.waves)
            mine = [lock for lock, guard in zip(state.locks, self.guards, strict=True) if guard[0] == place]
            may_be_on = own != OFF and all(lock.partner != ON and lock.clear for lock in mine)
            must_be_on = own == ON and all(lock.partner == OFF and lock.clear for lock in mine)
            found.append(may_be_on if literal.on else not must_be_on)
        return tuple(found)

    def settle(self, state: State) -> State:
        """The interlocks after a change of pins or carriers."""
        locks = tuple(
            _heard_by(lock, self.at_pin(partner, state.pins, state.waves), dead)
            for lock, (_, partner, dead) in zip(state.locks, self.guards, strict=True)
        )
        return state._replace(locks=locks)

    # Writes

    def waits_for(self, effective: str, cell: str) -> Carrier | None:
        """The carrier that a write of `cell` is held for: the one that the switch leaves, else the one it joins."""
        if cell == effective:
            return None
        for one in (effective, cell):
            place = self.wave_of.get(one.removeprefix("~"))
            if place is not None and self.carriers[place].update is not Update.AT_ONCE:
                return self.carriers[place]
        return None

    def put(self, place: int, pin: Pin, cell: str, waves: Waves) -> Pin:
        """The pin after `cell` takes effect; released, it stays as it was until it rests. A second release is none."""
        if cell == pin.effective:
            return Pin(cell, cell, pin.level, pin.released, 0)
        if cell != FREE:
            return Pin(cell, cell, "", -1, 0)
        level = self.command(pin, waves)
        if level == self.resting[place] or self.settling[place].hi == 0:
            return Pin(cell, cell, self.resting[place], -1, 0)
        return Pin(cell, cell, level, 0, 0)

    def write(self, pins: Pins, waves: Waves, group: Group, *, unheld: bool = False) -> Pins:
        """The pins after the writes of one instant."""
        after = list(pins)
        for place, cell in group:
            pin = pins[place]
            if unheld or self.waits_for(pin.effective, cell) is None:
                after[place] = self.put(place, pin, cell, waves)
            else:
                after[place] = Pin(cell, pin.effective, pin.level, pin.released, 0)
        return tuple(after)

    def held_for(self, pins: Pins, carrier: Carrier) -> list[int]:
        """The columns with a write held for a carrier."""
        return [place for place, pin in enumerate(pins) if self.waits_for(pin.effective, pin.written) is carrier]

    def act(self, pins: Pins, waves: Waves, places: list[int]) -> Pins:
        """The pins after held writes act together."""
        return tuple(self.put(k, pin, pin.written, waves) if k in places else pin for k, pin in enumerate(pins))

    # Runs

    def reach(self, pins: Pins, key: tuple[bool, int], item: int) -> Reached:
        """The next item from number `item` on that needs a write, measured against what was last written."""
        items, waited = self.items[key], None
        while item < len(items):
            one = items[item]
            if isinstance(one, Pause):
                waited = one if waited is None else _summed(waited, one)
            else:
                changes = tuple((k, cell) for k, cell in one if cell not in (KEEP, pins[k].written))
                if changes:
                    return Reached(item, self.groups(changes), waited)
            item += 1
        return Reached(item, (), waited)

    def groups(self, changes: Group) -> tuple[Group, ...]:
        """The changes of one item, parted into those that are written in one instant."""
        writes = self.drive.writes
        if writes is None or writes.how is How.TOGETHER:
            return (changes,)
        ports: dict[str, list[tuple[int, str]]] = {}
        for k, cell in sorted(changes):
            pin = self.drive.pins.get(self.drive.columns[k])
            port = pin.port if pin and writes.how is How.BY_PORT else None
            ports.setdefault(f"port {port}" if port else f"column {k}", []).append((k, cell))
        return tuple(tuple(group) for group in ports.values())

    def next_groups(self, groups: tuple[Group, ...]) -> tuple[Group, ...]:
        """Those of the groups left of an item that may be written next."""
        order = self.drive.writes.order if self.drive.writes else Order.ANY
        if order is Order.TABLE:
            return (min(groups),)
        if order is Order.ANY:
            return groups
        first = [group for group in groups if self.turns_off(group) is (order is Order.OFFS_FIRST)]
        return tuple(first) or groups

    def turns_off(self, group: Group) -> bool:
        """Whether all writes of a group are turn-offs."""
        return all(cell == OFF or (cell == FREE and self.resting[k] == OFF) for k, cell in group)

    def begin(self, state: State, *, trip: bool, index: int, origin: str) -> Iterator[Step_]:
        """The run of a move or of a firmware trip begins; with no wait before it, the first write is the same event."""
        target = (self.drive.trips if trip else self.drive.moves)[index].target
        if target == RESET:
            yield self.reset(state)
            return
        hand = state.hand
        if hand and not trip and self.drive.moves[index].unbroken:
            hand = Hand(hand.trip, 0)
        yield from self.onward(state._replace(hand=hand), Run(trip, index, origin, 0, (), 0, 0, 0), now=True)

    def begin_hard(self, state: State, index: int, origin: str) -> Iterator[Step_]:
        """A break input: held writes are cancelled; the first item with changes goes out in one instant, unheld.

        A wait that comes first, after steps without changes, is kept; what follows it is written as usual.
        """
        if self.drive.trips[index].target == RESET:
            yield self.reset(state)
            return
        pins = tuple(pin._replace(written=pin.effective, held=0) for pin in state.pins)
        cancelled = state._replace(pins=pins)
        reached = self.reach(pins, (True, index), 0)
        run = Run(True, index, origin, reached.item + 1, (), 0, 0, 0)
        if reached.wait is not None:
            yield from self.onward(cancelled, run._replace(item=0), now=True)
            return
        if not reached.groups:
            yield self.enter(cancelled, run)
            return
        together = tuple(change for group in reached.groups for change in group)
        written = cancelled._replace(pins=self.write(pins, state.waves, together, unheld=True))
        yield from self.onward(written, run)

    def onward(self, state: State, run: Run, *, now: bool = False) -> Iterator[Step_]:
        """A run after its beginning (`now`) or the last write of an item: on to the next item, or to the target."""
        reached = self.reach(state.pins, (run.trip, run.line), run.item)
        if reached.wait is None and not reached.groups:
            yield self.enter(state, run)
            return
        wait = reached.wait or self.gap
        there = Run(run.trip, run.line, run.origin, reached.item, reached.groups, wait.lo, wait.hi, 0)
        if reached.wait is None and now:
            yield from self.next_writes(state, there)
            return
        hand = state.hand
        if hand and run.trip:
            # Only a break input's run finds a trip in hand. This one lasts, so the trip's time starts anew at its end.
            hand = Hand(hand.trip, 0)
        yield "goes on", state._replace(place=there, hand=hand)

    def next_writes(self, state: State, run: Run) -> Iterator[Step_]:
        """The next event of a run is due: the target is entered or, for each choice, a group is written."""
        if not run.groups:
            yield self.enter(state, run)
            return
        for group in self.next_groups(run.groups):
            written = state._replace(pins=self.write(state.pins, state.waves, group))
            left = tuple(one for one in run.groups if one is not group)
            if left:
                there = run._replace(groups=left, lo=self.gap.lo, hi=self.gap.hi, y=0)
                yield f"writes {group}", written._replace(place=there)
            else:
                for _, after in self.onward(written, run._replace(item=run.item + 1)):
                    yield f"writes {group}", after

    def enter(self, state: State, run: Run) -> Step_:
        """The target of a run is entered; a trip in hand with the same target is dropped."""
        target = (self.drive.trips if run.trip else self.drive.moves)[run.line].target
        hand = state.hand
        if hand and self.drive.trips[hand.trip].target == target:
            hand = None
        return f"enters {target}", state._replace(place=Rest(target, 0), hand=hand)

    def reset(self, state: State) -> Step_:
        """All pins are released in one instant; all that is held or in hand is dropped."""
        pins = tuple(self.put(k, pin, FREE, state.waves) for k, pin in enumerate(state.pins))
        return "enters reset", state._replace(place=Rest(RESET, 0), hand=None, pins=pins)

    # What can happen at an instant

    def events(self, state: State) -> Iterator[Step_]:
        """All events that can come next without time passing, each with the state after it."""
        for words, after in self._raw_events(state):
            yield words, self.settle(after) if after.locks is state.locks else after

    def _raw_events(self, state: State) -> Iterator[Step_]:
        yield from self._carrier_events(state)
        yield from self._pin_events(state)
        yield from self._lock_events(state)
        yield from self._firmware_events(state)
        yield from self._trip_events(state)

    def _carrier_events(self, state: State) -> Iterator[Step_]:
        for k, carrier in enumerate(self.carriers):
            wave = state.waves[k]
            if not wave.over and wave.age >= carrier.dead.lo:
                yield f"{carrier.name} output", state._replace(waves=_with(state.waves, k, wave._replace(over=True)))
            length, other = (carrier.high, carrier.low) if wave.high else (carrier.low, carrier.high)
            if length and other and wave.age >= length.lo:
                yield self._edge(state, k)
            held = self.held_for(state.pins, carrier) if carrier.update is Update.WITHIN_PERIOD else []
            if held:
                yield f"{carrier.name} updates", state._replace(pins=self.act(state.pins, state.waves, held))

    def _edge(self, state: State, k: int) -> Step_:
        """An edge of a reference. Held writes act with the rise: what is released keeps the level from before it."""
        carrier, wave, pins = self.carriers[k], state.waves[k], state.pins
        if not wave.high and carrier.update is Update.AT_RISE:
            pins = self.act(pins, state.waves, self.held_for(pins, carrier))
        waves = _with(state.waves, k, Wave(not wave.high, 0, carrier.dead.hi == 0))
        return f"{carrier.name} {'falls' if wave.high else 'rises'}", state._replace(pins=pins, waves=waves)

    def _pin_events(self, state: State) -> Iterator[Step_]:
        for k, pin in enumerate(state.pins):
            if pin.released >= 0 and pin.released >= self.settling[k].lo:
                rested = pin._replace(level=self.resting[k], released=-1)
                pins = tuple(rested if place == k else one for place, one in enumerate(state.pins))
                yield f"{self.drive.columns[k]} rests", state._replace(pins=pins)

    def _lock_events(self, state: State) -> Iterator[Step_]:
        for k, (guarded, _, dead) in enumerate(self.guards):
            lock = state.locks[k]
            if lock.partner != ON and not lock.clear and lock.age >= dead.lo:
                clear = tuple(Lock(one.partner, 0, True) if j == k else one for j, one in enumerate(state.locks))
                yield f"{self.drive.columns[guarded]} clears", state._replace(locks=clear)

    def _firmware_events(self, state: State) -> Iterator[Step_]:
        place = state.place
        if isinstance(place, Run):
            if place.y >= place.lo and (place.hi is None or place.y <= place.hi):
                yield from self.next_writes(state, place)
            return
        for k, lo, hi in self.begins[place.mode]:
            if place.x >= lo and (hi is None or place.x <= hi):
                for words, after in self.begin(state, trip=False, index=k, origin=place.mode):
                    yield f"move {k}, {words}", after

    def _trip_events(self, state: State) -> Iterator[Step_]:
        place, hand = state.place, state.hand
        for k, trip in enumerate(self.drive.trips):
            if not self._hears(place, k):
                continue
            if trip.at_once:
                for words, after in self.begin_hard(state, k, _origin(place)):
                    yield f"trip {trip.name}, {words}", after
            elif hand is None and not (isinstance(place, Run) and place.trip):
                if trip.within is None and self.can_take(place):  # its arrival is its first write: one event
                    for words, after in self.begin(state, trip=True, index=k, origin=_origin(place)):
                        yield f"{trip.name} arrives and is taken, {words}", after
                else:
                    yield f"{trip.name} arrives", state._replace(hand=Hand(k, 0))
        if hand and self.can_take(place):
            taken = state._replace(hand=None)
            for words, after in self.begin(taken, trip=True, index=hand.trip, origin=_origin(place)):
                yield f"{self.drive.trips[hand.trip].name} is taken, {words}", after

    def _hears(self, place: Rest | Run, k: int) -> bool:
        """Whether trip number k can come now, as far as modes go; a trip does not break into its own run."""
        trip = self.drive.trips[k]
        if isinstance(place, Rest):
            return place.mode in trip.resting and (trip.at_once or place.mode != RESET)
        return place.origin in trip.origins and not (place.trip and place.line == k)

    def can_take(self, place: Rest | Run) -> bool:
        """Whether a firmware trip in hand can be taken: at rest but in reset, and in moves that may be broken."""
        if isinstance(place, Rest):
            return place.mode != RESET
        return not place.trip and not self.drive.moves[place.line].unbroken

    # Time

    def tick(self, state: State) -> State | None:
        """The state 1 ps later, or None if something must happen before."""
        place, hand = state.place, state.hand
        if isinstance(place, Rest):
            if not in_time(place.x, self.lasts[place.mode]):
                return None
            later: Rest | Run = Rest(place.mode, min(place.x + 1, self.x_cap[place.mode]))
        else:
            if not in_time(place.y, place.hi):
                return None
            # With no upper bound only "at least lo" is asked of y.
            later = place._replace(y=place.y + 1 if place.hi is not None else min(place.y + 1, place.lo))
        if hand and self.can_take(place):
            last = self._last(hand.trip)
            if not in_time(hand.age, last):
                return None
            # With no upper bound nothing asks for the age.
            hand = Hand(hand.trip, 0 if last is None else hand.age + 1)
        pins = self._tick_pins(state.pins)
        waves = self._tick_waves(state.waves)
        locks = self._tick_locks(state.locks)
        if pins is None or waves is None or locks is None:
            return None
        return State(later, hand, pins, waves, locks)

    def _last(self, k: int) -> int | None:
        """How long trip number k can be in hand at most; arrival with no `within` is the first write, however late."""
        within = self.drive.trips[k].within
        return 0 if within is None else self._late(within)

    def _tick_pins(self, pins: Pins) -> Pins | None:
        if all(pin.released < 0 and pin.written == pin.effective for pin in pins):
            return pins
        after = []
        for k, pin in enumerate(pins):
            carrier = self.waits_for(pin.effective, pin.written)
            within = carrier is not None and carrier.update is Update.WITHIN_PERIOD
            if within and carrier is not None and not in_time(pin.held, carrier.period.hi):
                return None
            if pin.released >= 0 and not in_time(pin.released, self.settling[k].hi):
                return None
            released = pin.released + 1 if pin.released >= 0 else -1
            after.append(pin._replace(released=released, held=pin.held + 1 if within else 0))
        return tuple(after)

    def _tick_waves(self, waves: Waves) -> Waves | None:
        after = []
        for wave, carrier, cap in zip(waves, self.carriers, self.wave_cap, strict=True):
            if carrier.high is None or carrier.low is None:
                after.append(wave)
                continue
            length = carrier.high if wave.high else carrier.low
            if not in_time(wave.age, length.hi) or not (wave.over or in_time(wave.age, carrier.dead.hi)):
                return None
            after.append(Wave(wave.high, min(wave.age + 1, cap), wave.over))
        return tuple(after)

    def _tick_locks(self, locks: tuple[Lock, ...]) -> tuple[Lock, ...] | None:
        after = []
        for lock, (_, _, dead) in zip(locks, self.guards, strict=True):
            running = lock.partner != ON and not lock.clear
            if running and not in_time(lock.age, dead.hi):
                return None
            cap = dead.lo if dead.hi is None else dead.hi
            after.append(lock._replace(age=min(lock.age + 1, cap)) if running else lock)
        return tuple(after)

    # What is known

    def facts(self, state: State) -> tuple[Known, ...]:
        """What holds meanwhile: the row's facts at rest, the line's during its run."""
        place = state.place
        if isinstance(place, Rest):
            return self.drive.modes[place.mode].known
        return (self.drive.trips if place.trip else self.drive.moves)[place.line].known


def _origin(place: Rest | Run) -> str:
    return place.mode if isinstance(place, Rest) else place.origin


def _summed(one: Pause, other: Pause) -> Pause:
    hi = None if one.hi is None or other.hi is None else one.hi + other.hi
    return Pause(one.lo + other.lo, hi)


def _with(waves: Waves, k: int, wave: Wave) -> Waves:
    return (*waves[:k], wave, *waves[k + 1 :])


def _wave_cap(carrier: Carrier) -> int:
    """The greatest age of a reference that anything tells from a greater one."""
    spans = [span for span in (carrier.high, carrier.low, carrier.dead) if span is not None]
    return max(bound for span in spans for bound in (span.lo, span.hi) if bound is not None)


def _heard_by(lock: Lock, command: str, dead: Interval) -> Lock:
    """One direction of an interlock after its partner's command has become `command`.

    An unknown command may be off: the dead time begins when the partner ceases to be known to be on, and does not
    begin again when it is then known to be off.
    """
    if command == lock.partner:
        return lock
    if command == ON:
        return Lock(ON, 0, False)
    if lock.partner == ON:
        return Lock(command, 0, dead.hi == 0)
    return Lock(command, lock.age, lock.clear)
