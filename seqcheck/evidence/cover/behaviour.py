"""All that can happen at a point, with the clocks that time it: the transition system that a cover is held against."""

from collections.abc import Iterator
from typing import NamedTuple

from seqcheck.drive import Drive, Update
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import Firmware, placed
from seqcheck.evidence.cover.wires import (
    ANYWHERE,
    GOING,
    HIGH,
    HIGH_DEAD,
    LOW,
    LOW_DEAD,
    POSSIBLE,
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
from seqcheck.quantities import Interval


class Change(NamedTuple):
    """An event: possible while each clock of `needs` is in its span. Clocks in `started` are 0 after it, those in
    `renamed` go by another name before it."""

    needs: tuple[tuple[str, Interval], ...]
    target: Point
    started: frozenset[str]
    renamed: tuple[tuple[str, str], ...]


class Behaviour:
    """The transition system of one scope, with a firmware of it."""

    def __init__(self, scope: Scope, firmware: Firmware) -> None:
        self.scope = scope
        self._drive: Drive = scope.drive
        self._writes = firmware.writes
        self._firmware = firmware
        self.wires = Wires(scope, firmware.writes)
        self._asked = asked_for(scope.hazard)
        self._carriers = [scope.drive.carriers[name] for name in scope.carriers]

    def start(self) -> Point:
        """The point of time 0; carriers are anywhere."""
        return self.wires.start(self._firmware.start())

    def hazardous(self, point: Point) -> bool:
        """Whether all literals are possible and the hazard is asked for."""
        return all(state in POSSIBLE for state in point.literals) and self._asked(self._firmware.known(point.stand))

    def phases(self, place: int) -> list[Phase]:
        """Where a carrier that is anywhere may be."""
        return phases(self._carriers[place])

    def limits(self, point: Point) -> dict[str, int]:
        """Time does not pass beyond these ages."""
        found: dict[str, int] = {}
        for name, most in self._limits(point):
            if most is not None:
                found[name] = min(most, found.get(name, most))
        return found

    def _limits(self, point: Point) -> Iterator[tuple[str, int | None]]:
        yield "x", self._firmware.x_limit(point.stand)
        yield "y", self._firmware.y_limit(point.stand)
        for place, (carrier, state) in enumerate(zip(self._carriers, point.carriers, strict=True)):
            if state == ANYWHERE or not moving(carrier):
                continue
            level = carrier.high if state in (HIGH, HIGH_DEAD) else carrier.low
            assert level is not None
            yield f"carrier {place}", level.hi
            if state in (HIGH_DEAD, LOW_DEAD):
                yield f"carrier {place}", carrier.dead.hi
        seen: set[str] = set()
        for place, held in enumerate(point.stand.cells.held):
            if held.carrier not in seen:
                yield f"held {place}", self._drive.carriers[held.carrier].period.hi
            seen.add(held.carrier)
        for place, state in enumerate(point.pins):
            if state.endswith(GOING):
                yield f"pin {place}", self._drive.pins[self.scope.switches[place]].after.hi
        for place, state in enumerate(point.guards):
            if state == WAITING:
                yield f"guard {place}", self.scope.guards[place].dead.hi
        for place, state in enumerate(point.literals):
            for edge, age, _ in ripened(state, self.scope.delays[place]):
                yield f"{edge} {place}", age

    def changes(self, point: Point) -> Iterator[Change]:
        """Every event that can come next at a point."""
        yield from self._firmware_changes(point)
        for place in range(len(self._carriers)):
            yield from self._carrier_changes(point, place)
        for carrier in dict.fromkeys(held.carrier for held in point.stand.cells.held):
            yield from self._acting(point, point, carrier, (), frozenset())
        yield from self._hardware_changes(point)
        for place, state in enumerate(point.literals):
            for edge, age, after in ripened(state, self.scope.delays[place]):
                target = point._replace(literals=_with(point.literals, place, after))
                yield Change(((f"{edge} {place}", Interval(age, None)),), target, frozenset(), ())

    def _firmware_changes(self, point: Point) -> Iterator[Change]:
        for edge in self._firmware.edges(point.stand):
            needs = (("x", Interval(edge.lo, edge.hi)), ("y", Interval(0, edge.y_hi)))
            started = frozenset({"x", "y"} if edge.y_anew else {"x"})
            yield from self._settled(point, point._replace(stand=edge.target), needs, started)

    def _carrier_changes(self, point: Point, place: int) -> Iterator[Change]:
        carrier, state = self._carriers[place], point.carriers[place]
        name, clock = self.scope.carriers[place], f"carrier {place}"
        rises = carrier.update is Update.AT_RISE
        if not moving(carrier):
            return
        if state == ANYWHERE:
            if rises and name in self._writes.waiting_for(point.stand.cells):
                yield from self._acting(point, point, name, (), frozenset())
            return
        high = state in (HIGH, HIGH_DEAD)
        level = carrier.high if high else carrier.low
        assert level is not None
        if state in (HIGH_DEAD, LOW_DEAD):
            over = point._replace(carriers=_with(point.carriers, place, HIGH if high else LOW))
            yield from self._settled(point, over, ((clock, Interval(carrier.dead.lo, None)),), frozenset())
        instant = carrier.dead.hi == 0
        after = (LOW if instant else LOW_DEAD) if high else (HIGH if instant else HIGH_DEAD)
        turned = point._replace(carriers=_with(point.carriers, place, after))
        needs = ((clock, Interval(level.lo, None)),)
        if rises and not high:
            yield from self._acting(point, turned, name, needs, frozenset({clock}))
        else:
            yield from self._settled(point, turned, needs, frozenset({clock}))

    def _acting(
        self,
        point: Point,
        target: Point,
        carrier: str,
        needs: tuple[tuple[str, Interval], ...],
        started: frozenset[str],
    ) -> Iterator[Change]:
        """The writes held for a carrier act, together with whatever made `target`."""
        cells = self._writes.acted(point.stand.cells, carrier)
        yield from self._settled(point, target._replace(stand=point.stand._replace(cells=cells)), needs, started)

    def _hardware_changes(self, point: Point) -> Iterator[Change]:
        for place, state in enumerate(point.pins):
            if state.endswith(GOING):
                pin = self._drive.pins[self.scope.switches[place]]
                rested = point._replace(pins=_with(point.pins, place, pin.resting.value))
                yield from self._settled(point, rested, ((f"pin {place}", pin.after),), frozenset())
        for place, state in enumerate(point.guards):
            if state == WAITING:
                clear = point._replace(guards=_with(point.guards, place, "clear"))
                needs = ((f"guard {place}", self.scope.guards[place].dead),)
                yield from self._settled(point, clear, needs, frozenset())

    def _settled(
        self, old: Point, new: Point, needs: tuple[tuple[str, Interval], ...], started: frozenset[str]
    ) -> Iterator[Change]:
        """The event with all that follows from it; a carrier that comes to be followed is somewhere from now on."""
        held = new.stand.cells.held
        renamed = [(f"held {place}", f"held {one.place}") for place, one in enumerate(held) if one.place != NEW]
        fresh = {f"held {place}" for place, one in enumerate(held) if one.place == NEW}
        if held:
            new = new._replace(stand=placed(new.stand))
        unknown: list[int] = []
        if ANYWHERE in new.carriers:
            unknown = [place for place in self.wires.followed(new.stand) if new.carriers[place] == ANYWHERE]
        for one in self.somewhere(new, unknown):
            target, set_off = self.wires.after(old, one)
            yield Change(needs, target, started.union(fresh, set_off), tuple(renamed))

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
