"""All that can happen at a point, with the clocks that time it: the transition system that a cover is held against."""

from collections.abc import Iterator
from typing import NamedTuple

from seqcheck.drive import Drive, Update
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import NOBODY, Firmware, placed
from seqcheck.evidence.cover.watch import ENDED, GAP, NEVER, POSSIBLE, SINCE, Watch
from seqcheck.evidence.cover.wires import (
    ANYWHERE,
    GOING,
    HIGH,
    HIGH_DEAD,
    LOW,
    LOW_DEAD,
    WAITING,
    Phase,
    Point,
    Wires,
    moving,
    phases,
    ripened,
)
from seqcheck.evidence.cover.writes import NEW
from seqcheck.evidence.facts import asked_for
from seqcheck.hazards import Nearing
from seqcheck.quantities import Interval


class Change(NamedTuple):
    """An event: possible while each clock of `needs` is in its span. Clocks in `started` are 0 after it, those in
    `renamed` go by another name before it, those in `older` may have any age from 1 on."""

    needs: "Needs"
    target: Point
    started: frozenset[str]
    renamed: tuple[tuple[str, str], ...]
    older: frozenset[str] = frozenset()


NOTHING: frozenset[str] = frozenset()
Needs = tuple[tuple[str, Interval], ...]


class Behaviour:
    """The transition system of one scope, with a firmware of it."""

    def __init__(self, scope: Scope, firmware: Firmware) -> None:
        self.scope = scope
        self._drive: Drive = scope.drive
        self._writes = firmware.writes
        self._firmware = firmware
        self.wires = Wires(scope, firmware.writes)
        self._watch = Watch(scope)
        self._asked = asked_for(scope.hazard)
        self._carriers = [scope.drive.carriers[name] for name in scope.carriers]
        self._phases = [phases(carrier) for carrier in self._carriers]

    def start(self) -> Change:
        """What time 0 begins with; carriers are anywhere, and what is possible has been so for some time."""
        point, started = self.wires.start(self._firmware.start())
        return Change((), point, frozenset({"x"} | started), (), frozenset({SINCE}))

    def hazardous(self, point: Point) -> bool:
        """Whether all literals are possible and the hazard is asked for; for a margin, all others while one was."""
        states = point.literals
        if self._watch.after is not None:
            *own, ended = states
            states = tuple(own[: self._watch.after] + own[self._watch.after + 1 :])
            if ended != ENDED or own[self._watch.after] in POSSIBLE:
                return False
        return all(state in POSSIBLE for state in states) and self._asked(self._firmware.known(point.stand))

    def phases(self, place: int) -> list[Phase]:
        """Where a carrier that is anywhere may be."""
        return self._phases[place]

    def limits(self, point: Point) -> dict[str, int]:
        """Time does not pass beyond these ages."""
        found: dict[str, int] = {}
        for name, most in self._limits(point):
            if most is not None:
                found[name] = min(most, found.get(name, most))
        return found

    def _limits(self, point: Point) -> Iterator[tuple[str, int | None]]:
        stand = point.stand
        yield "x", self._firmware.x_limit(stand)
        if stand.hand != NOBODY:
            yield "y", self._firmware.y_limit(stand)
        for place, state in enumerate(point.carriers):
            carrier = self._carriers[place]
            if state == ANYWHERE or not moving(carrier):
                continue
            level = carrier.high if state in (HIGH, HIGH_DEAD) else carrier.low
            assert level is not None
            yield f"carrier {place}", level.hi
            if state in (HIGH_DEAD, LOW_DEAD):
                yield f"carrier {place}", carrier.dead.hi
        seen: set[str] = set()
        for place, held in enumerate(stand.cells.held):
            if held.carrier not in seen:
                yield f"held {place}", self._drive.carriers[held.carrier].period.hi
            seen.add(held.carrier)
        for place, state in enumerate(point.pins):
            if state.endswith(GOING):
                yield f"pin {place}", self._drive.pins[self.scope.switches[place]].after.hi
        for place, state in enumerate(point.guards):
            if state == WAITING:
                yield f"guard {place}", self.scope.guards[place].dead.hi
        for place, delays in enumerate(self.scope.delays):
            for edge, age, _ in ripened(point.literals[place], delays):
                yield f"{edge} {place}", age
        if self._watch.after is not None and point.literals[-1] == ENDED:
            assert isinstance(self.scope.hazard.asks, Nearing)
            yield GAP, self.scope.hazard.asks.limit
            if point.literals[self._watch.after] in POSSIBLE:
                yield SINCE, 1

    def changes(self, point: Point) -> Iterator[Change]:
        """Every event that can come next at a point."""
        yield from self._firmware_changes(point)
        for place in range(len(self._carriers)):
            yield from self._carrier_changes(point, place)
        if point.stand.cells.held:
            for carrier in dict.fromkeys(held.carrier for held in point.stand.cells.held):
                yield from self._acting(point, point, carrier, (), NOTHING)
        yield from self._hardware_changes(point)
        for place, delays in enumerate(self.scope.delays):
            for edge, age, after in ripened(point.literals[place], delays):
                yield from self._ripening(point, place, ((f"{edge} {place}", Interval(age, None)),), after)
        if self._watch.after is not None and point.literals[-1] == ENDED:
            assert isinstance(self.scope.hazard.asks, Nearing)
            over = point._replace(literals=(*point.literals[:-1], NEVER))
            yield Change(((GAP, Interval(self.scope.hazard.asks.limit, None)),), over, NOTHING, ())
            if point.literals[self._watch.after] in POSSIBLE:
                yield Change(((SINCE, Interval(1, None)),), over, NOTHING, ())

    def _ripening(self, point: Point, place: int, needs: Needs, after: str) -> Iterator[Change]:
        """A literal's time is over; of the one after which a margin counts, what that begins or ends."""
        target = point._replace(literals=_with(point.literals, place, after))
        was, will = point.literals[place] in POSSIBLE, after in POSSIBLE
        if place != self._watch.after or was == will:
            yield Change(needs, target, NOTHING, ())
        elif will:
            yield Change(needs, target, frozenset({SINCE}), ())
        else:
            ended = target._replace(literals=(*target.literals[:-1], ENDED))
            yield Change((*needs, (SINCE, Interval(1, None))), ended, frozenset({GAP}), ())
            yield Change((*needs, (SINCE, Interval(0, 0))), target, NOTHING, ())

    def _firmware_changes(self, point: Point) -> Iterator[Change]:
        stand, carriers, pins, guards, literals = point
        for edge in self._firmware.edges(stand):
            needs: Needs = (("x", Interval(edge.lo, edge.hi)),)
            if edge.y_hi is not None:
                needs = (*needs, ("y", Interval(0, edge.y_hi)))
            states, started = self._watch.told(stand, edge, literals)
            if not edge.keeps_x:
                started |= {"x"}
            if edge.y_anew:
                started |= {"y"}
            yield from self._settled(point, Point(edge.target, carriers, pins, guards, states), needs, started)

    def _carrier_changes(self, point: Point, place: int) -> Iterator[Change]:
        carrier, state = self._carriers[place], point.carriers[place]
        name, clock = self.scope.carriers[place], f"carrier {place}"
        rises = carrier.update is Update.AT_RISE
        if not moving(carrier):
            return
        if state == ANYWHERE:
            if rises and name in self._writes.waiting_for(point.stand.cells):
                yield from self._acting(point, point, name, (), NOTHING)
            return
        high = state in (HIGH, HIGH_DEAD)
        level = carrier.high if high else carrier.low
        assert level is not None
        if state in (HIGH_DEAD, LOW_DEAD):
            over = point._replace(carriers=_with(point.carriers, place, HIGH if high else LOW))
            yield from self._settled(point, over, ((clock, Interval(carrier.dead.lo, None)),), NOTHING)
        instant = carrier.dead.hi == 0
        after = (LOW if instant else LOW_DEAD) if high else (HIGH if instant else HIGH_DEAD)
        turned = point._replace(carriers=_with(point.carriers, place, after))
        needs = ((clock, Interval(level.lo, None)),)
        if rises and not high:
            yield from self._acting(point, turned, name, needs, frozenset({clock}))
        else:
            yield from self._settled(point, turned, needs, frozenset({clock}))

    def _acting(
        self, point: Point, target: Point, carrier: str, needs: Needs, started: frozenset[str]
    ) -> Iterator[Change]:
        """The writes held for a carrier act, together with whatever made `target`."""
        cells = self._writes.acted(point.stand.cells, carrier)
        yield from self._settled(point, target._replace(stand=point.stand._replace(cells=cells)), needs, started)

    def _hardware_changes(self, point: Point) -> Iterator[Change]:
        for place, state in enumerate(point.pins):
            if state.endswith(GOING):
                pin = self._drive.pins[self.scope.switches[place]]
                rested = point._replace(pins=_with(point.pins, place, pin.resting.value))
                yield from self._settled(point, rested, ((f"pin {place}", pin.after),), NOTHING)
        for place, state in enumerate(point.guards):
            if state == WAITING:
                clear = point._replace(guards=_with(point.guards, place, "clear"))
                needs = ((f"guard {place}", self.scope.guards[place].dead),)
                yield from self._settled(point, clear, needs, NOTHING)

    def _settled(self, old: Point, new: Point, needs: Needs, started: frozenset[str]) -> Iterator[Change]:
        """The event with all that follows from it; a carrier that comes to be followed is somewhere from now on."""
        held = new.stand.cells.held
        renamed: tuple[tuple[str, str], ...] = ()
        if held:
            before = [one.place for one in held]
            renamed = tuple((f"held {place}", f"held {old}") for place, old in enumerate(before) if old != NEW)
            started |= {f"held {place}" for place, old in enumerate(before) if old == NEW}
            new = new._replace(stand=placed(new.stand))
        ends = [new]
        if ANYWHERE in new.carriers:
            ends = self.somewhere(
                new, [place for place in self.wires.followed(new.stand) if new.carriers[place] == ANYWHERE]
            )
        for one in ends:
            target, set_off = self.wires.after(old, one)
            yield Change(needs, target, started | set_off, renamed)

    def somewhere(self, point: Point, places: list[int]) -> list[Point]:
        """The point with each of the given carriers in every state in which it may be."""
        found = [point]
        for place in places:
            found = [
                one._replace(carriers=_with(one.carriers, place, phase.state))
                for one in found
                for phase in self.phases(place)
            ]
        return found


def _with(states: tuple[str, ...], place: int, state: str) -> tuple[str, ...]:
    return (*states[:place], state, *states[place + 1 :])
