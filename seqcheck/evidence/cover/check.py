"""A cover held against the behaviour of a drive: does it hold the start, and does every event lead back into it?

A cover is a finite set of points, each with zones of clock values. If every run is in it at time 0, and every event
from everything in it (and any time that passes after) leads to something in it, then every moment of every run is in
it; and if time passes nowhere in it while the hazard is possible, the hazard happens in no run.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product
from typing import NamedTuple

from seqcheck.evidence.cover.behaviour import Behaviour, Change
from seqcheck.evidence.cover.matrix import UNKNOWN, Rows, cut, later, moved, table, tight, within
from seqcheck.evidence.cover.watch import STRUCK
from seqcheck.evidence.cover.wires import ANYWHERE, Point


class NotCovered(Exception):  # noqa: N818 - it says what a certificate is, not that the program failed
    """The cover proves nothing; the text is a sentence that says why."""


Bounds = tuple[tuple[int, int, int], ...]


@dataclass(frozen=True, slots=True)
class Entry:
    """A point of a cover, the names of the clocks that it bounds, and its zones.

    A zone is a list of (upper clock, lower clock, most), clocks counted from 1, 0 for none. A clock that is not named
    has any age.
    """

    point: Point
    clocks: tuple[str, ...]
    zones: tuple[Bounds, ...]


NOWHERE = -1


class _Goal(NamedTuple):
    """An entry in which an event may end: where its clocks come from, their least ages, and their limits there.

    `place` is its number; NOWHERE where no entry has the point, or none may, so that the event must be impossible.
    """

    place: int
    origins: tuple[int, ...]
    floors: tuple[tuple[int, int], ...]
    limits: tuple[tuple[int, int], ...]
    tables: list[Rows]


@dataclass(slots=True)
class _Hop:
    """An event out of an entry (None: out of nothing), whose clocks have these numbers: the bounds that it needs, and
    for each way in which it may end the entries of which one must hold it, worked out once it is found to be possible.
    """

    needs: list[tuple[int, int, int]]
    source: Entry | None
    numbers: dict[str, int]
    change: Change
    ways: tuple[tuple[_Goal, ...], ...] | None = None


def check(behaviour: Behaviour, entries: list[Entry]) -> None:
    """Raise NotCovered unless the entries prove that the hazard of `behaviour` happens in no run."""
    _Cover(behaviour, entries).check()


class _Cover:
    def __init__(self, behaviour: Behaviour, entries: list[Entry]) -> None:
        self._behaviour = behaviour
        self._entries = entries
        self._tables = [[table(len(one.clocks) + 1, zone) for zone in one.zones] for one in entries]
        self._places: dict[Point, list[int]] = {}
        self._limits: list[tuple[tuple[int, int], ...] | None] = [None] * len(entries)
        self._needed = {NOWHERE}
        self._waiting: list[int] = []
        for place, entry in enumerate(entries):
            self._places.setdefault(entry.point, []).append(place)

    def check(self) -> None:
        """Go through what the start and then the entries themselves need; other entries prove nothing and harm nothing.

        So every point that is looked at is one that the checker has come to by itself.
        """
        self._require_led(_Hop([], None, {}, self._behaviour.start()), [[0]], "The start is not covered")
        while self._waiting:
            place = self._waiting.pop()
            self._check_entry(self._entries[place], self._tables[place], self._limits_of(place))

    def _check_entry(self, entry: Entry, tables: list[Rows], limits: tuple[tuple[int, int], ...]) -> None:
        hazardous = self._behaviour.hazardous(entry.point)
        numbers = {clock: place for place, clock in enumerate(entry.clocks, 1)}
        hops: list[_Hop] | None = None
        for rows in tables:
            zone = _limited(tight(rows), limits)
            if zone is None:
                continue
            if hazardous and all(-zone[0][clock] < most for clock, most in limits):
                raise NotCovered(f"The hazard happens: {_named(entry.point)}.")
            if hops is None:
                changes = self._behaviour.changes(entry.point)
                hops = [_Hop(_needs(one, numbers), entry, numbers, one) for one in changes]
            for hop in hops:
                self._require_led(hop, zone, "An event leads out of the cover")

    def _limits_of(self, place: int) -> tuple[tuple[int, int], ...]:
        """The limits of an entry, on those clocks that it names."""
        known = self._limits[place]
        if known is None:
            entry = self._entries[place]
            limits = self._behaviour.limits(entry.point)
            known = tuple((number, limits[clock]) for number, clock in enumerate(entry.clocks, 1) if clock in limits)
            self._limits[place] = known
        return known

    def _require_led(self, hop: _Hop, zone: Rows, what: str) -> None:
        left = zone
        for upper, lower, most in hop.needs:
            if left[upper][lower] > most:
                less = cut(left, upper, lower, most)
                if less is None:
                    return
                left = less
        if hop.ways is None:
            hop.ways = self._ways(hop)
        for goals in hop.ways:
            for goal in goals:
                if _led(left, goal):
                    break
            else:
                come = f"from {_named(hop.source.point)} " if hop.source else ""
                raise NotCovered(f"{what}: {come}to {_named(hop.change.target)}.")
            if goal.place not in self._needed:
                self._needed.add(goal.place)
                self._waiting.append(goal.place)

    def _ways(self, hop: _Hop) -> tuple[tuple[_Goal, ...], ...]:
        return tuple(self._goals(hop, target) for target in self._ends(hop.change.target))

    def _ends(self, point: Point) -> Iterator[Point]:
        """The point, if some entry holds it; else the points that it is once its carriers are somewhere."""
        if ANYWHERE not in point.carriers or any(one in self._places for one in self._coarser(point)):
            yield point
            return
        for one in self._behaviour.somewhere(point, [point.carriers.index(ANYWHERE)]):
            yield from self._ends(one)

    def _coarser(self, point: Point) -> Iterator[Point]:
        """The point itself, and with carriers that no looked-at switch follows left anywhere."""
        if not point.carriers:
            return iter((point,))
        followed = self._behaviour.wires.followed(point.stand)
        choices = [
            (state,) if state == ANYWHERE or place in followed else (state, ANYWHERE)
            for place, state in enumerate(point.carriers)
        ]
        return (point._replace(carriers=carriers) for carriers in product(*choices))

    def _goals(self, hop: _Hop, target: Point) -> tuple[_Goal, ...]:
        places: list[int] = []
        if STRUCK not in target.literals:
            places = [place for one in self._coarser(target) for place in self._places.get(one, ())]
        if places:
            return tuple(self._goal(hop, self._entries[one], one, self._limits_of(one)) for one in places)
        limits = self._behaviour.limits(target)
        nothing = Entry(target, tuple(limits), ())
        return (self._goal(hop, nothing, NOWHERE, tuple(enumerate(limits.values(), 1))),)

    def _goal(self, hop: _Hop, entry: Entry, place: int, limits: tuple[tuple[int, int], ...]) -> _Goal:
        change, source = hop.change, hop.source
        renamed = dict(change.renamed)
        origins, floors = [], []
        for number, clock in enumerate(entry.clocks, 1):
            joined = self._joined(source, entry.point, clock) if clock.startswith("carrier ") else None
            if clock in change.started:
                origins.append(0)
            elif joined is not None or clock in change.older:
                origins.append(UNKNOWN)
                floors.append((number, 1 if joined is None else joined))
            else:
                origins.append(hop.numbers.get(renamed.get(clock, clock), UNKNOWN))
        tables = [] if place == NOWHERE else self._tables[place]
        return _Goal(place, tuple(origins), tuple(floors), limits, tables)

    def _joined(self, source: Entry | None, target: Point, clock: str) -> int | None:
        """The least age of a carrier that was anywhere and is somewhere now; None for any other carrier."""
        number = int(clock.removeprefix("carrier "))
        if target.carriers[number] == ANYWHERE:
            raise NotCovered(f"A carrier that is left anywhere has an age: {_named(target)}.")
        if source is not None and source.point.carriers[number] != ANYWHERE:
            return None
        return dict(self._behaviour.phases(number))[target.carriers[number]]


def _needs(change: Change, numbers: dict[str, int]) -> list[tuple[int, int, int]]:
    """The bounds (upper, lower, most) on named clocks within which an event comes."""
    bounds = []
    for clock, span in change.needs:
        if clock in numbers:
            bounds += [(0, numbers[clock], -span.lo)] if span.lo > 0 else []
            bounds += [(numbers[clock], 0, span.hi)] if span.hi is not None else []
    return bounds


def _led(zone: Rows, goal: _Goal) -> bool:
    """Whether what becomes of a zone lies in one of a goal's; also where nothing becomes of it."""
    come: Rows | None = moved(zone, goal.origins)
    for clock, least in goal.floors:
        if come is not None and least > 0:
            come = cut(come, 0, clock, -least)
    ended = None if come is None else later(come, goal.limits)
    if ended is None:
        return True
    return any(within(ended, one) for one in goal.tables)


def _limited(zone: Rows | None, limits: tuple[tuple[int, int], ...]) -> Rows | None:
    for clock, most in limits:
        if zone is not None:
            zone = cut(zone, clock, 0, most)
    return zone


def _named(point: Point) -> str:
    """A point in a few words."""
    stand = point.stand
    where = f"at rest in {stand.mode}" if stand.line < 0 else f"in run {stand.line} out of {stand.mode}"
    return f"{where}, literals {', '.join(point.literals)}"
