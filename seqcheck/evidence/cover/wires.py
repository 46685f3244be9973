"""From cells to commands, through interlocks, to what can conduct: sections 4.3, 4.8, 4.10 and 5.1 of the meaning.

A `Point` is everything about a moment but its times. Words stand for states:

- carrier: the level of the reference, `dead` while the dead time since its last edge runs; ANYWHERE: any of them;
- pin: `driven`, else released: its command, `going` until it has come to rest;
- guard (one direction of an interlock): `blocked` while the partner is on, `waiting` for the dead time, `clear`;
- literal: the five states of 5.1.
"""

from typing import NamedTuple

from seqcheck.drive import Carrier, Command
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import Stand
from seqcheck.evidence.cover.writes import Writes
from seqcheck.hazards import Delays

HIGH_DEAD, HIGH, LOW_DEAD, LOW, ANYWHERE = "high dead", "high", "low dead", "low", "anywhere"
DRIVEN, GOING = "driven", " going"
BLOCKED, WAITING, CLEAR = "blocked", "waiting", "clear"
OUT, ENTERING, IN, LEAVING, BLIP = "out", "entering", "in", "leaving", "blip"
POSSIBLE = (IN, LEAVING)


class Point(NamedTuple):
    """Where the firmware stands, and the carriers, pins, guards and literals, in the order of the scope."""

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


class Wires:
    """Pins, interlocks and literals of one scope."""

    def __init__(self, scope: Scope, writes: Writes) -> None:
        self._scope = scope
        self._writes = writes
        self._columns = [scope.drive.columns.index(switch) for switch in scope.switches]
        self._at = {switch: place for place, switch in enumerate(scope.switches)}
        self._carrier = {name: place for place, name in enumerate(scope.carriers)}

    def start(self, stand: Stand) -> Point:
        """Time 0: everything has been as it is for ever, carriers are anywhere."""
        scope, row = self._scope, stand.cells.effective
        cells = [row[column] for column in self._columns]
        pins = tuple(
            self._rest(switch) if cell == "free" else DRIVEN for switch, cell in zip(scope.switches, cells, strict=True)
        )
        bare = Point(stand, (ANYWHERE,) * len(scope.carriers), pins, (), ())
        commands = self.commands(bare)
        guards = tuple(BLOCKED if commands[self._at[one.partner]] == "on" else CLEAR for one in scope.guards)
        wanted = self._wanted(commands, guards)
        return bare._replace(guards=guards, literals=tuple(IN if one else OUT for one in wanted))

    def followed(self, stand: Stand) -> set[int]:
        """The places of the carriers that some looked-at switch follows."""
        carriers = [self._writes.carrier_of(stand.cells.effective[column]) for column in self._columns]
        return {self._carrier[name] for name in carriers if name is not None}

    def _rest(self, switch: str) -> str:
        return self._scope.drive.pins[switch].resting.value

    def commands(self, point: Point) -> list[str]:
        """What each pin says: off, on or unknown. A carrier that is followed must not be ANYWHERE."""
        found = []
        for place, column in enumerate(self._columns):
            cell = point.stand.cells.effective[column]
            carrier = self._writes.carrier_of(cell)
            if carrier is not None:
                level = point.carriers[self._carrier[carrier]]
                found.append("on" if level == (HIGH if cell == carrier else LOW) else "off")
            elif cell == "free":
                found.append(point.pins[place].removesuffix(GOING))
            else:
                found.append(cell)
        return found

    def _wanted(self, commands: list[str], guards: tuple[str, ...]) -> list[bool]:
        """Whether the passed command of each literal's switch is, or may be, as wanted."""
        return [self._passes(literal.switch, literal.on, commands, guards) for literal in self._scope.hazard.literals]

    def _passes(self, switch: str, on: bool, commands: list[str], guards: tuple[str, ...]) -> bool:
        command = commands[self._at[switch]]
        mine = [
            (state, commands[self._at[guard.partner]])
            for guard, state in zip(self._scope.guards, guards, strict=True)
            if guard.guarded == switch
        ]
        if on:
            return command != "off" and all(state == CLEAR for state, _ in mine)
        return command != "on" or any(state != CLEAR or partner == "unknown" for state, partner in mine)

    def after(self, old: Point, new: Point) -> tuple[Point, set[str]]:
        """An event has made `new` of `old`, as to stand, carriers, ended releases and ended dead times; what follows
        from it for pins, guards and literals, and the clocks that it starts."""
        started: set[str] = set()
        stand, carriers, pins, guards, _ = new
        if self._scope.drive.pins:  # no other switch is ever released
            pins = tuple([self._pin(place, old, new, started) for place in range(len(self._columns))])
        commands = self.commands(Point(stand, carriers, pins, guards, ()))
        guards = tuple([self._guard(place, state, commands, started) for place, state in enumerate(guards)])
        states = zip(old.literals, self._wanted(commands, guards), strict=True)
        literals = tuple([self._literal(place, state, one, started) for place, (state, one) in enumerate(states)])
        return Point(stand, carriers, pins, guards, literals), started

    def _pin(self, place: int, old: Point, new: Point, started: set[str]) -> str:
        if new.stand.cells.effective[self._columns[place]] != "free":
            return DRIVEN
        if new.pins[place] != DRIVEN:
            return new.pins[place]
        pin = self._scope.drive.pins[self._scope.switches[place]]
        before = self.commands(old)[place]
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
        rise, fall = f"in {place}", f"out {place}"
        if wanted and state in (OUT, BLIP):
            if self._scope.delays[place].rise == 0:
                return IN
            started |= {rise} if state == OUT else set()
            return ENTERING
        if wanted and state == LEAVING:
            return IN
        if not wanted and state in (ENTERING, IN):
            started.add(fall)
            return BLIP if state == ENTERING else LEAVING
        return state


def ripened(state: str, delays: Delays) -> list[tuple[str, int, str]]:
    """What time alone makes of a literal: (`in` or `out`, the age that it needs, the state after it)."""
    if state == ENTERING:
        return [("in", delays.rise, IN)]
    if state == LEAVING:
        return [("out", delays.fall, OUT)]
    if state == BLIP:
        return [("in", delays.rise, LEAVING), ("out", delays.fall, OUT)]
    return []
