"""From cells to commands, through interlocks, to what can conduct: sections 4.3, 4.8, 4.10 and 5.1 of the meaning.

A `Point` is everything about a moment but its times. Words stand for states:

- carrier: the level of the reference, `dead` while the dead time since its last edge runs; ANYWHERE: any of them;
- pin: `driven`, else released: its command, `going` until it has come to rest;
- guard (one direction of an interlock): `blocked` while the partner is on, `waiting` for the dead time, `clear`;
- literal: the five states of 5.1, or one of `watch`, where lengths are asked for.
"""

from typing import NamedTuple

from seqcheck.drive import Carrier, Command
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import Stand
from seqcheck.evidence.cover.watch import (
    ARRIVED,
    BLIP,
    ENTERING,
    IN,
    LATE,
    LEAVING,
    LONG,
    OUT,
    SINCE,
    YOUNG,
    Watch,
)
from seqcheck.evidence.cover.writes import Writes
from seqcheck.hazards import Delays

HIGH_DEAD, HIGH, LOW_DEAD, LOW, ANYWHERE = "high dead", "high", "low dead", "low", "anywhere"
DRIVEN, GOING = "driven", " going"
BLOCKED, WAITING, CLEAR = "blocked", "waiting", "clear"


class Point(NamedTuple):
    """Where the firmware stands, and the carriers, pins, guards and literals, in the order of the scope; what watches
    the firmware or a margin is the last of the literals."""

    stand: Stand
    carriers: tuple[str, ...]
    pins: tuple[str, ...]
    guards: tuple[str, ...]
    literals: tuple[str, ...]


class Phase(NamedTuple):
    """A state of a carrier in which it may be at any moment, and the least age of its level in it."""

    state: str
    least: int


def moving(carrier: Carrier) -> bool:
    """Whether the reference ever changes its level."""
    return carrier.high is not None and carrier.low is not None


def phases(carrier: Carrier) -> list[Phase]:
    """Where a carrier may be that has run for ever."""
    if carrier.low is None:
        return [Phase(HIGH, 0)]
    if carrier.high is None:
        return [Phase(LOW, 0)]
    out = [Phase(HIGH, carrier.dead.lo), Phase(LOW, carrier.dead.lo)]
    return out if carrier.dead.hi == 0 else [Phase(HIGH_DEAD, 0), Phase(LOW_DEAD, 0), *out]


class _Own(NamedTuple):
    """A literal: its switch, whether it is wanted on, and the guards of the switch, each with its partner (places)."""

    switch: int
    on: bool
    guards: tuple[tuple[int, int], ...]


class Wires:
    """Pins, interlocks and literals of one scope."""

    def __init__(self, scope: Scope, writes: Writes) -> None:
        self._scope = scope
        self._writes = writes
        self._columns = [scope.drive.columns.index(switch) for switch in scope.switches]
        self._at = at = {switch: place for place, switch in enumerate(scope.switches)}
        self._carrier = {name: place for place, name in enumerate(scope.carriers)}
        self._follows = {name: (place, HIGH) for name, place in self._carrier.items()}
        self._follows |= {f"~{name}": (place, LOW) for name, place in self._carrier.items()}
        partners = [(one.guarded, place, at[one.partner]) for place, one in enumerate(scope.guards)]
        self._own = [
            _Own(at[one.switch], one.on, tuple(guard[1:] for guard in partners if guard[0] == one.switch))
            for one in scope.hazard.literals
        ]
        self._watch = Watch(scope)

    def start(self, stand: Stand) -> tuple[Point, set[str]]:
        """Time 0, with the clocks that start then: everything has been as it is for ever, carriers are anywhere."""
        scope, row = self._scope, stand.cells.effective
        cells = [row[column] for column in self._columns]
        pins = tuple(
            self._rest(switch) if cell == "free" else DRIVEN for switch, cell in zip(scope.switches, cells, strict=True)
        )
        carriers = (ANYWHERE,) * len(scope.carriers)
        commands = self.commands(stand, carriers, pins)
        guards = tuple(BLOCKED if commands[self._at[one.partner]] == "on" else CLEAR for one in scope.guards)
        started: set[str] = set()
        literals = [
            self._watch.at_start(place, self._passes(one, commands, guards), self._both(one, commands, guards), started)
            for place, one in enumerate(self._own)
        ]
        return Point(stand, carriers, pins, guards, (*literals, *self._watch.idle)), started

    def followed(self, stand: Stand) -> set[int]:
        """The places of the carriers that some looked-at switch follows."""
        effective, follows = stand.cells.effective, self._follows
        return {follows[effective[column]][0] for column in self._columns if effective[column] in follows}

    def _rest(self, switch: str) -> str:
        return self._scope.drive.pins[switch].resting.value

    def commands(self, stand: Stand, carriers: tuple[str, ...], pins: tuple[str, ...]) -> list[str]:
        """What each pin says: off, on or unknown. A carrier that is followed must not be ANYWHERE."""
        found = []
        effective, follows = stand.cells.effective, self._follows
        for place, column in enumerate(self._columns):
            cell = effective[column]
            if cell in follows:
                carrier, level = follows[cell]
                found.append("on" if carriers[carrier] == level else "off")
            elif cell == "free":
                found.append(pins[place].removesuffix(GOING))
            else:
                found.append(cell)
        return found

    def _passes(self, own: _Own, commands: list[str], guards: tuple[str, ...]) -> bool:
        """Whether the passed command of a literal's switch is, or may be, as wanted."""
        command = commands[own.switch]
        if own.on:
            return command != "off" and all(guards[place] == CLEAR for place, _ in own.guards)
        return command != "on" or any(
            guards[place] != CLEAR or commands[partner] == "unknown" for place, partner in own.guards
        )

    def _both(self, own: _Own, commands: list[str], guards: tuple[str, ...]) -> bool:
        """Whether the passed command is unknown: it may be as wanted, or not."""
        return self._passes(own, commands, guards) and self._passes(own._replace(on=not own.on), commands, guards)

    def after(self, old: Point, new: Point) -> tuple[Point, set[str]]:
        """An event has made `new` of `old`, as to stand, carriers, ended releases and ended dead times, and what
        watches the firmware; what follows from it for pins, guards and literals, and the clocks that it starts."""
        started: set[str] = set()
        stand, carriers, pins, guards, literals = new
        if self._scope.drive.pins:  # no other switch is ever released
            effective = stand.cells.effective
            pins = tuple([
                DRIVEN if effective[column] != "free" else self._pin(place, old, pins[place], started)
                for place, column in enumerate(self._columns)
            ])
        commands = self.commands(stand, carriers, pins)
        if guards:
            guards = tuple([self._guard(place, state, commands, started) for place, state in enumerate(guards)])
        turned = []
        for place, own in enumerate(self._own):
            wanted = self._passes(own, commands, guards)
            if self._watch.pulses:
                both = self._both(own, commands, guards)
                turned.append(self._watch.pulsed(place, old.literals[place], wanted, both, started))
            else:
                turned.append(self._literal(place, old.literals[place], wanted, started))
        return Point(stand, carriers, pins, guards, (*turned, *literals[len(turned) :])), started

    def _pin(self, place: int, old: Point, state: str, started: set[str]) -> str:
        """What becomes of the pin of a switch whose cell is `free`."""
        if state != DRIVEN:
            return state
        pin = self._scope.drive.pins[self._scope.switches[place]]
        before = self.commands(old.stand, old.carriers, old.pins)[place]
        if pin.after.hi == 0 or Command(before) is pin.resting:
            return pin.resting.value
        started.add(f"pin {place}")
        return before + GOING

    def _guard(self, place: int, state: str, commands: list[str], started: set[str]) -> str:
        guard = self._scope.guards[place]
        if commands[self._at[guard.partner]] == "on":
            return BLOCKED
        if state != BLOCKED:
            return state
        if guard.dead.hi == 0:
            return CLEAR
        started.add(f"guard {place}")
        return WAITING

    def _literal(self, place: int, state: str, wanted: bool, started: set[str]) -> str:
        """5.1; Entering is skipped where `in` is 0: what leaves it in that instant comes to Leaving either way."""
        if wanted:
            if state in (OUT, BLIP):
                if self._scope.delays[place].rise == 0:
                    if self._watch.after == place:
                        started.add(SINCE)
                    return IN
                if state == OUT:
                    started.add(f"in {place}")
                return ENTERING
            return IN if state == LEAVING else state
        if state in (ENTERING, IN):
            started.add(f"out {place}")
            return BLIP if state == ENTERING else LEAVING
        return state


def ripened(state: str, delays: Delays) -> list[tuple[str, int, str]]:
    """What time alone makes of a literal: (`in` or `out`, the age that it needs, the state after it)."""
    if state in (OUT, IN):
        return []
    if state == ENTERING:
        return [("in", delays.rise, IN)]
    if state == LEAVING:
        return [("out", delays.fall, OUT)]
    if state == BLIP:
        return [("in", delays.rise, LEAVING), ("out", delays.fall, OUT)]
    if state == YOUNG:
        return [("in", delays.rise, LONG)]
    if state == ARRIVED:
        return [("in", delays.rise, LATE)]
    return []
