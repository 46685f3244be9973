"""From the firmware's cells to the commands that reach the paths, and on to the literals' automata."""

from typing import NamedTuple

from seqcheck.firmware import Firmware, State
from seqcheck.hazards import Clearing, Following, Lasting
from seqcheck.proving.conduction import ENTERING, IDLE, IN, OUT, Turn, turned
from seqcheck.proving.keys import (
    BLOCKED,
    C_BOTH,
    C_OFF,
    C_ON,
    CLEAR,
    CODES,
    DRIVEN,
    FALL,
    LOCK,
    PIN,
    RISE,
    WAITING,
    Key,
)
from seqcheck.proving.lengths import pulsed, settled
from seqcheck.proving.references import HIGH_OUT, LOW_OUT
from seqcheck.proving.views import Lock, View
from seqcheck.writing import FREE, ON, carrier_of, inverted


class _Event(NamedTuple):
    """All that pins, interlocks and literals can tell of an event: the cells in effect before and after it, carriers,
    pins, interlocks and literals before it, and carriers, pins and interlocks as it makes them."""

    before: tuple[int, ...]
    after: tuple[int, ...]
    old: tuple[tuple[int, ...], ...]
    new: tuple[tuple[int, ...], ...]


class _Settled(NamedTuple):
    """Pins, interlocks and literals after an event, and the clocks that it starts anew."""

    wires: tuple[tuple[int, ...], tuple[int, ...], tuple[int, ...]]
    resets: frozenset[int]


class Wiring:
    """What one hazard's switches are commanded, and what that makes of its literals."""

    def __init__(self, view: View, firmware: Firmware) -> None:
        drive = view.drive
        self.view = view
        self.firmware = firmware
        self.numbers = tuple(list(drive.carriers).index(name) for name in view.carriers)
        self.place = {number: place for place, number in enumerate(self.numbers)}
        self.pins = tuple(drive.pins.get(name) for name in view.switches)
        self._columns = tuple(drive.columns.index(name) for name in view.switches)
        self._settled_before: dict[_Event, _Settled] = {}
        self._literals = tuple((view.switches.index(one.switch), one.on) for one in view.hazard.literals)

    def initial(self, state: State, carriers: tuple[int, ...]) -> Key:
        """The key at time 0: every literal was always as wanted, or never was, but lengths count from there."""
        pins = tuple(self._settled_pin(state, place) for place in range(len(self._columns)))
        raw = self._raw(state, carriers, pins)
        locks = tuple(BLOCKED if raw[lock.partner] == C_ON else CLEAR for lock in self.view.locks)
        literals = tuple(
            self._settled(place, wanted, raw, locks) for place, wanted in enumerate(self._wanted(raw, locks))
        )
        if isinstance(self.view.hazard.asks, Following | Clearing):
            literals = (*literals, IDLE)
        return Key(state, carriers, pins, locks, literals)

    def _settled(self, place: int, wanted: bool, raw: tuple[int, ...], locks: tuple[int, ...]) -> int:
        asks = self.view.hazard.asks
        if isinstance(asks, Lasting) and not asks.longer:
            return settled(wanted, wanted and self._other(place, raw, locks))
        if wanted:
            return ENTERING if isinstance(asks, Lasting) and self.view.delays[place].rise else IN
        return OUT

    def _settled_pin(self, state: State, place: int) -> int:
        if state.put[1][self._columns[place]] != FREE:
            return DRIVEN
        pin = self.pins[place]
        assert pin is not None, "the language asks for the pins of a drive that frees them"
        return CODES[pin.resting] * 2

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
                reference = carriers[self.place[carrier_of(cell)]]
                commands.append(int(reference == (LOW_OUT if inverted(cell) else HIGH_OUT)))
        return tuple(commands)

    def _wanted(self, raw: tuple[int, ...], locks: tuple[int, ...]) -> tuple[bool, ...]:
        """Whether the passed command of each literal's switch is, or may be, as wanted."""
        return tuple(self._passes(place, on, raw, locks) for place, on in self._literals)

    def _passes(self, place: int, on: bool, raw: tuple[int, ...], locks: tuple[int, ...]) -> bool:
        mine = [(lock, state) for lock, state in zip(self.view.locks, locks, strict=True) if lock.guarded == place]
        if on:
            return raw[place] != C_OFF and all(state == CLEAR for _, state in mine)
        return raw[place] != C_ON or any(state != CLEAR or raw[lock.partner] == C_BOTH for lock, state in mine)

    def _other(self, place: int, raw: tuple[int, ...], locks: tuple[int, ...]) -> bool:
        """Whether the passed command of a literal's switch is, or may be, the opposite of what the literal wants."""
        switch, on = self._literals[place]
        return self._passes(switch, not on, raw, locks)

    def _turned(self, place: int, state: int, wanted: bool, raw: tuple[int, ...], locks: tuple[int, ...]) -> Turn:
        asks = self.view.hazard.asks
        if isinstance(asks, Lasting) and not asks.longer:
            return pulsed(state, wanted, wanted and self._other(place, raw, locks))
        return turned(state, wanted, self.view.delays[place])

    def settle(
        self, old: Key, state: State, carriers: tuple[int, ...], pins: tuple[int, ...], locks: tuple[int, ...]
    ) -> tuple[Key, frozenset[int]]:
        """The key after an event, and the clocks that it starts anew."""
        before, after = old.state.put[1], state.put[1]
        event = _Event(
            tuple([before[column] for column in self._columns]),
            tuple([after[column] for column in self._columns]),
            (old.carriers, old.pins, old.locks, old.literals),
            (carriers, pins, locks),
        )
        known = self._settled_before.get(event)
        if known is None:
            known = self._settled_before[event] = self._settling(old, state, carriers, pins, locks)
        return Key(state, carriers, *known.wires), known.resets

    def _settling(
        self, old: Key, state: State, carriers: tuple[int, ...], pins: tuple[int, ...], locks: tuple[int, ...]
    ) -> "_Settled":
        resets: list[int] = []
        before = self._raw(old.state, old.carriers, old.pins)
        pins = tuple(self._released(place, state, pins[place], before[place], resets) for place in range(len(pins)))
        raw = self._raw(state, carriers, pins)
        locks = tuple(
            self._locked(place, lock, locks[place], raw, resets) for place, lock in enumerate(self.view.locks)
        )
        literals = list(old.literals)
        for place, wanted in enumerate(self._wanted(raw, locks)):
            turn = self._turned(place, old.literals[place], wanted, raw, locks)
            literals[place] = turn.state
            resets += [RISE + place] * turn.resets_rise + [FALL + place] * turn.resets_fall
        return _Settled((pins, locks, tuple(literals)), frozenset(resets))

    def _released(self, place: int, state: State, pin: int, before: int, resets: list[int]) -> int:
        if state.put[1][self._columns[place]] != FREE:
            return DRIVEN
        if pin != DRIVEN:
            return pin
        line = self.pins[place]
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

    def needs(self, state: State) -> set[int]:
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
        return {self.place[number] for number in found if number in self.place}

    def held(self, key: Key) -> bool:
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
