"""One hazard's view of the drive: only its switches, their carriers, interlocks and released pins, and the literals.

Other switches are left with the time that their writes take. Locations are worked out when the search reaches them.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product
from typing import NamedTuple

from seqcheck.circuit import contradicted
from seqcheck.drive import Above, Command, Update
from seqcheck.firmware import Edge, Firmware, State
from seqcheck.proving.conduction import IN, OUT, POSSIBLE, ages, timeouts, turned
from seqcheck.proving.cutting import Cutting
from seqcheck.proving.location import Bound, Hop, Location
from seqcheck.proving.references import FORGOTTEN, Reference
from seqcheck.proving.views import Lock, View
from seqcheck.quantities import Interval
from seqcheck.verdict import Act
from seqcheck.writing import FREE, ON, carrier_of, inverted
from seqcheck.zones import FRESH, INFINITE

X, Y, Z = 0, 1, 2
CARRIER, HOLD, PIN, LOCK, RISE, FALL = 100, 200, 300, 400, 500, 600

C_OFF, C_ON, C_BOTH = 0, 1, 2
"""Commands as numbers; C_BOTH for a pin that floats."""
CODES = {Command.OFF: C_OFF, Command.ON: C_ON, Command.UNKNOWN: C_BOTH}
DRIVEN = -1
"""The state of a pin that is not released; else command and whether it is still on its way to rest."""
BLOCKED, WAITING, CLEAR = 0, 1, 2
"""An interlock direction: partner on; partner off, dead time running; dead time over."""


class Key(NamedTuple):
    """A location's state. Entries follow the view's switches, carriers, locks and literals."""

    state: State
    carriers: tuple[int, ...]
    pins: tuple[int, ...]
    locks: tuple[int, ...]
    literals: tuple[int, ...]


class Happening(NamedTuple):
    """What a hop does, for the trace: an act and what it is about; `edge` for acts of the firmware."""

    act: Act | None
    name: str = ""
    edge: Edge | None = None


class Clock(NamedTuple):
    """A clock in one location: its identity, greatest constants and invariant (INFINITE: none)."""

    name: int
    lower: int
    upper: int
    bound: int


SILENT = Happening(None)


@dataclass(frozen=True, slots=True)
class Manner:
    """How to look: `forget` the phase of carriers nobody follows; `cut` long dwells; `measure` the overlap."""

    forget: bool
    cut: bool
    measure: bool


class Projection:
    """The locations and hops of one hazard."""

    def __init__(self, view: View, firmware: Firmware, manner: Manner) -> None:
        drive = view.drive
        self.view = view
        self.firmware = firmware
        self.manner = manner
        self._columns = tuple(drive.columns.index(name) for name in view.switches)
        self._numbers = tuple(list(drive.carriers).index(name) for name in view.carriers)
        self._place = {number: place for place, number in enumerate(self._numbers)}
        self._references = tuple(Reference(drive.carriers[name]) for name in view.carriers)
        self._spans = tuple(drive.carriers[name].update is Update.WITHIN_PERIOD for name in view.carriers)
        self._rises = tuple(drive.carriers[name].update is Update.AT_RISE for name in view.carriers)
        self._pins = tuple(drive.pins.get(name) for name in view.switches)
        self._literals = tuple((view.switches.index(one.switch), one.on) for one in view.hazard.literals)
        self._cutting = Cutting(view, self._references) if manner.cut and not view.locks else None
        self._locations: dict[Key, Location] = {}
        self._clocks: dict[Key, tuple[Clock, ...]] = {}

    # Where it starts

    def initial(self) -> tuple[Hop, ...]:
        """The ways to start, as hops from nowhere."""
        state = self.firmware.start()
        hops = []
        for carriers in self._phases(state, (FORGOTTEN,) * len(self._numbers), everything=not self.manner.forget):
            pins = tuple(self._settled_pin(state, place) for place in range(len(self._columns)))
            raw = self._raw(state, carriers, pins)
            locks = tuple(BLOCKED if raw[lock.partner] == C_ON else CLEAR for lock in self.view.locks)
            literals = tuple(IN if wanted else OUT for wanted in self._wanted(raw, locks))
            key = Key(state, carriers, pins, locks, literals)
            hops.append(self._hop(None, key, frozenset(), (), (), 0, SILENT))
        return tuple(hops)

    def _settled_pin(self, state: State, place: int) -> int:
        if state.put[1][self._columns[place]] != FREE:
            return DRIVEN
        pin = self._pins[place]
        assert pin is not None, "the language asks for the pins of a drive that frees them"
        return CODES[pin.resting] * 2

    # Commands

    def _raw(self, state: State, carriers: tuple[int, ...], pins: tuple[int, ...]) -> tuple[int, ...]:
        """The command at each pin."""
        effective = state.put[1]
        commands = []
        for place, column in enumerate(self._columns):
            cell = effective[column]
            if cell <= ON:
                commands.append(cell)
            elif cell == FREE:
                commands.append(pins[place] >> 1)
            else:
                reference = carriers[self._place[carrier_of(cell)]]
                commands.append(int(reference == (3 if inverted(cell) else 1)))
        return tuple(commands)

    def _wanted(self, raw: tuple[int, ...], locks: tuple[int, ...]) -> tuple[bool, ...]:
        """Whether the passed command of each literal's switch is, or may be, as wanted."""
        return tuple(self._passes(place, on, raw, locks) for place, on in self._literals)

    def _passes(self, place: int, on: bool, raw: tuple[int, ...], locks: tuple[int, ...]) -> bool:
        mine = [(lock, state) for lock, state in zip(self.view.locks, locks, strict=True) if lock.guarded == place]
        if on:
            return raw[place] != C_OFF and all(state == CLEAR for _, state in mine)
        return raw[place] != C_ON or any(state != CLEAR or raw[lock.partner] == C_BOTH for lock, state in mine)

    # From one location to the next

    def _settle(
        self, old: Key, state: State, carriers: tuple[int, ...], pins: tuple[int, ...], locks: tuple[int, ...]
    ) -> tuple[Key, frozenset[int]]:
        """The key after an event, and the clocks that it starts anew."""
        resets: list[int] = []
        before = self._raw(old.state, old.carriers, old.pins)
        pins = tuple(self._released(place, state, pins[place], before[place], resets) for place in range(len(pins)))
        raw = self._raw(state, carriers, pins)
        locks = tuple(
            self._locked(place, lock, locks[place], raw, resets) for place, lock in enumerate(self.view.locks)
        )
        literals = []
        for place, wanted in enumerate(self._wanted(raw, locks)):
            turn = turned(old.literals[place], wanted, self.view.delays[place])
            literals.append(turn.state)
            resets += [RISE + place] * turn.resets_rise + [FALL + place] * turn.resets_fall
        return Key(state, carriers, pins, locks, tuple(literals)), frozenset(resets)

    def _released(self, place: int, state: State, pin: int, before: int, resets: list[int]) -> int:
        if state.put[1][self._columns[place]] != FREE:
            return DRIVEN
        if pin != DRIVEN:
            return pin
        line = self._pins[place]
        assert line is not None, "the language asks for the pins of a drive that frees them"
        rest = CODES[line.resting]
        if before == rest or line.after.hi == 0:
            return rest * 2
        resets.append(PIN + place)
        return before * 2 + 1

    def _locked(self, place: int, lock: Lock, state: int, raw: tuple[int, ...], resets: list[int]) -> int:
        if raw[lock.partner] == C_ON:
            return BLOCKED
        if state != BLOCKED:
            return state
        if lock.dead.hi == 0:
            return CLEAR
        resets.append(LOCK + place)
        return WAITING

    def _needs(self, state: State) -> set[int]:
        """The places of the carriers whose phase matters in a state."""
        written, effective, _ = state.put
        found = {carrier_of(effective[column]) for column in self._columns}
        found |= {carrier_of(written[column]) for column in self._columns}
        if written != effective:
            found |= {
                self.firmware.writing.holder(old, new)
                for new, old in zip(written, effective, strict=True)
                if new != old
            }
        return {self._place[number] for number in found if number in self._place}

    def _phases(
        self, state: State, carriers: tuple[int, ...], everything: bool = False
    ) -> Iterator[tuple[int, ...]]:
        """The carriers' states with what nobody looks at forgotten, and what is looked at again anywhere."""
        if not everything and not self.manner.forget:
            yield carriers
            return
        needed = set(range(len(carriers))) if everything else self._needs(state)
        choices: list[list[int]] = []
        for place, reference in enumerate(carriers):
            if place not in needed:
                choices.append([FORGOTTEN])
            elif reference == FORGOTTEN:
                choices.append([start for start, _ in self._references[place].starts()])
            else:
                choices.append([reference])
        yield from product(*choices)

    def _hop(
        self,
        old: Key | None,
        key: Key,
        resets: frozenset[int],
        least: tuple[tuple[int, int], ...],
        most: tuple[tuple[int, int], ...],
        cost: int,
        event: Happening,
        written: int = 0,
    ) -> Hop:
        target = self._location(key)
        names = {} if old is None else {clock.name: place for place, clock in enumerate(self._clocks[old], 1)}
        renaming = _holds(old, key, written)
        sources, after = [], []
        for place, clock in enumerate(self._clocks[key], 1):
            name = renaming.get(clock.name, clock.name)
            if CARRIER <= name < HOLD and name not in names:
                sources.append(FRESH)
                reference = self._references[name - CARRIER]
                floor = dict(reference.starts())[key.carriers[name - CARRIER]]
                if floor:
                    after.append(Bound(place, floor))
            else:
                sources.append(0 if name in resets else names.get(name, 0))
        return Hop(
            tuple(Bound(names[name], value) for name, value in least if value > 0),
            tuple(Bound(names[name], value) for name, value in most),
            tuple(sources),
            tuple(after),
            target,
            cost,
            event,
        )

    # Locations

    def _location(self, key: Key) -> Location:
        known = self._locations.get(key)
        if known is not None:
            return known
        clocks = tuple(self._clocks_of(key))
        hot = self._hot(key)
        self._clocks[key] = clocks
        bounds = tuple(Bound(place, clock.bound) for place, clock in enumerate(clocks, 1) if clock.bound < INFINITE)
        measure = next((place for place, clock in enumerate(clocks, 1) if clock.name == Z), 0)
        lower, upper = (0, *(clock.lower for clock in clocks)), (0, *(clock.upper for clock in clocks))
        location = Location(
            key, len(clocks) + 1, bounds, lower, upper, hot, hot and self._held(key), measure, self._expand
        )
        self._locations[key] = location
        return location

    def _hot(self, key: Key) -> bool:
        if not all(POSSIBLE[literal] for literal in key.literals):
            return False
        facts = [fact for fact in self.firmware.facts(key.state) if isinstance(fact, Above)]
        return not contradicted(self.view.hazard, facts)

    def _held(self, key: Key) -> bool:
        """Whether the mode itself commands all literals: nothing held, nothing on its way to rest."""
        if key.state.run >= 0 or any(literal != IN for literal in key.literals):
            return False
        written, effective, _ = key.state.put
        own = {place for place, _ in self._literals}
        return all(
            written[self._columns[place]] == effective[self._columns[place]]
            and (key.pins[place] == DRIVEN or key.pins[place] & 1 == 0)
            for place in own
        )

    def _clocks_of(self, key: Key) -> Iterator[Clock]:
        hot = self._hot(key)
        yield from self._firmware_clocks(key, hot)
        for place, reference in enumerate(key.carriers):
            if reference != FORGOTTEN and self._references[place].moving:
                lower, upper = self._references[place].constants(reference)
                yield Clock(CARRIER + place, lower, upper, self._references[place].bound(reference))
        for place, (number, _) in enumerate(key.state.put[2]):
            longest = self._period(number)
            first = all(other != number for other, _ in key.state.put[2][:place])
            yield Clock(HOLD + place, 0, longest, longest if first else INFINITE)
        for place, state in enumerate(key.pins):
            pin = self._pins[place]
            if state > 0 and state & 1 and pin is not None:
                yield _timer(PIN + place, pin.after)
        for place, state in enumerate(key.locks):
            if state == WAITING:
                yield _timer(LOCK + place, self.view.locks[place].dead)
        for place, state in enumerate(key.literals):
            rise, fall = ages(state)
            times = self.view.delays[place]
            if rise:
                yield Clock(RISE + place, times.rise, times.rise, times.rise)
            if fall:
                yield Clock(FALL + place, times.fall, times.fall, times.fall)
        if self.manner.measure and hot:
            yield Clock(Z, INFINITE, INFINITE, INFINITE)

    def _firmware_clocks(self, key: Key, hot: bool) -> Iterator[Clock]:
        edges, deadline = self._timing(key, hot)
        lower = max((edge.lo for edge in edges), default=0)
        highs = [edge.hi for edge in edges if edge.hi is not None]
        if deadline is not None or highs or lower:
            upper = max([*highs, deadline or 0])
            yield Clock(X, lower, upper, INFINITE if deadline is None else deadline)
        hand = self.firmware.hand_deadline(key.state)
        if hand is not None:
            yield Clock(Y, 0, hand, hand)

    def _period(self, number: int) -> int:
        period = self._references[self._place[number]].carrier.period.hi
        assert period is not None, "a frequency is finite"
        return period

    def _timing(self, key: Key, hot: bool) -> tuple[tuple[Edge, ...], int | None]:
        """The firmware's edges and deadline, long stays cut short where that changes nothing.

        Where all literals are possible a stay keeps its bounds, since its length is the overlap.
        """
        edges, deadline = self.firmware.edges(key.state), self.firmware.deadline(key.state)
        if self._cutting is None or key.state.hand >= 0:
            return edges, deadline
        return self._cutting.cut(edges, deadline, hot)

    # For traces

    def clock_name(self, key: Key, place: int) -> int:
        """The identity of a location's clock."""
        return self._clocks[key][place - 1].name

    def full_dwell(self, edge: Edge, location: Location) -> int:
        """How long a stay the file asks for before an edge that the search may have let come sooner."""
        key = location.key
        assert isinstance(key, Key)
        return min(one.lo for one in self.firmware.edges(key.state) if one.step == edge.step)

    # Hops

    def _expand(self, location: Location) -> tuple[Hop, ...]:
        key = location.key
        assert isinstance(key, Key)
        return (
            *self._conducting(key),
            *self._firmware_hops(key),
            *self._carrier_hops(key),
            *self._update_hops(key),
            *self._pin_hops(key),
            *self._lock_hops(key),
        )

    def _conducting(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.literals):
            times = self.view.delays[place]
            for by_rise, after in timeouts(state):
                name, least = (RISE + place, times.rise) if by_rise else (FALL + place, times.fall)
                literals = (*key.literals[:place], after, *key.literals[place + 1 :])
                yield self._hop(key, key._replace(literals=literals), frozenset(), ((name, least),), (), 0, SILENT)

    def _firmware_hops(self, key: Key) -> Iterator[Hop]:
        for edge in self._timing(key, self._hot(key))[0]:
            target = edge.step.target
            written = sum({1 << switch for deed in edge.step.deeds for switch, _ in deed.writes})
            most = ((X, edge.hi),) if edge.hi is not None else ()
            if edge.y_hi is not None:
                most = (*most, (Y, edge.y_hi))
            starts_anew = {X, Y} if edge.resets_y else {X}
            for carriers in self._phases(target, key.carriers):
                new, resets = self._settle(key, target, carriers, key.pins, key.locks)
                yield self._hop(
                    key,
                    new,
                    resets | starts_anew,
                    ((X, edge.lo),) if edge.lo else (),
                    most,
                    int(edge.starts_run),
                    Happening(Act.BEGINS, "", edge),
                    written,
                )

    def _carrier_hops(self, key: Key) -> Iterator[Hop]:
        for place, reference in enumerate(key.carriers):
            if reference == FORGOTTEN:
                continue
            name = self.view.carriers[place]
            for change in self._references[place].changes(reference):
                state = key.state
                if change.act is Act.RISES and self._rises[place]:
                    state = self.firmware.updated(state, self._numbers[place])
                moved = (*key.carriers[:place], change.state, *key.carriers[place + 1 :])
                for carriers in self._phases(state, moved):
                    new, resets = self._settle(key, state, carriers, key.pins, key.locks)
                    starts_anew = resets | {CARRIER + place} if change.resets else resets
                    least = ((CARRIER + place, change.least),)
                    yield self._hop(key, new, starts_anew, least, (), 0, Happening(change.act, name))

    def _update_hops(self, key: Key) -> Iterator[Hop]:
        for number in sorted({carrier for carrier, _ in key.state.put[2]}):
            state = self.firmware.updated(key.state, number)
            happening = Happening(Act.UPDATES, self.firmware.writing.carriers[number])
            for carriers in self._phases(state, key.carriers):
                new, resets = self._settle(key, state, carriers, key.pins, key.locks)
                yield self._hop(key, new, resets, (), (), 0, happening)

    def _pin_hops(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.pins):
            pin = self._pins[place]
            if state <= 0 or state & 1 == 0 or pin is None:
                continue
            pins = (*key.pins[:place], CODES[pin.resting] * 2, *key.pins[place + 1 :])
            new, resets = self._settle(key, key.state, key.carriers, pins, key.locks)
            happening = Happening(Act.RESTS, self.view.switches[place])
            yield self._hop(key, new, resets, ((PIN + place, pin.after.lo),), (), 0, happening)

    def _lock_hops(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.locks):
            if state != WAITING:
                continue
            lock = self.view.locks[place]
            locks = (*key.locks[:place], CLEAR, *key.locks[place + 1 :])
            new, resets = self._settle(key, key.state, key.carriers, key.pins, locks)
            happening = Happening(Act.CLEARS, self.view.switches[lock.guarded])
            yield self._hop(key, new, resets, ((LOCK + place, lock.dead.lo),), (), 0, happening)


def _timer(name: int, span: Interval) -> Clock:
    assert span.hi is not None, "the language asks for an upper bound of hardware times"
    return Clock(name, span.lo, span.hi, span.hi)


def _holds(old: Key | None, key: Key, written: int) -> dict[int, int]:
    """Where the clock of each held group comes from; groups written just now have a name that none had before."""
    renaming = {}
    for place, (number, bits) in enumerate(key.state.put[2]):
        renaming[HOLD + place] = HOLD + 99
        if old is None or bits & written:
            continue
        for before, (other, were) in enumerate(old.state.put[2]):
            if other == number and bits & were == bits:
                renaming[HOLD + place] = HOLD + before
    return renaming
