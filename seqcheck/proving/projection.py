"""One hazard's view of the drive: only its switches, their carriers, interlocks and released pins, and the literals.

Other switches are left with the time that their writes take. Locations are worked out when the search reaches them.
"""

from collections.abc import Collection, Iterator
from itertools import product
from typing import NamedTuple

from seqcheck.drive import Update
from seqcheck.firmware import Edge, Firmware, State
from seqcheck.hazards import Clearing, Following
from seqcheck.proving.clocks import Clocks, Layout, Manner
from seqcheck.proving.conduction import HIT, POSSIBLE, timeouts
from seqcheck.proving.keys import (
    CAPPED,
    CARRIER,
    CLEAR,
    CODES,
    FALL,
    GAP,
    HOLD,
    LATELY,
    LOCK,
    LONG_AGO,
    NEVER_HELD,
    NOT_ENDED,
    OVER,
    PIN,
    RISE,
    SILENT,
    SINCE,
    SPAN,
    WAITING,
    Happening,
    Key,
    X,
    Y,
)
from seqcheck.proving.lengths import followed, watched
from seqcheck.proving.location import Among, Bound, Hop, Location
from seqcheck.proving.references import FORGOTTEN, Reference
from seqcheck.proving.views import View
from seqcheck.proving.wiring import Wiring
from seqcheck.verdict import Act
from seqcheck.zones import FRESH

_Renaming = tuple[
    Layout | None,
    Layout,
    frozenset[int],
    tuple[tuple[int, int], ...],
    tuple[tuple[int, int], ...],
    tuple[int, ...],
    tuple[tuple[int, int], ...],
]
"""What a hop's clocks depend on: those before it (None: it is a start) and after it, those that it starts anew, its
bounds, the carriers after it, and where the clocks of held groups come from."""

_ANEW = {
    (x, y): frozenset([X] * x + [Y] * y)
    for x in (False, True)
    for y in (False, True)
}
"""The firmware's clocks that an edge starts anew."""


class Projection:
    """The locations and hops of one hazard."""

    def __init__(self, view: View, firmware: Firmware, manner: Manner, wiring: Wiring | None = None) -> None:
        """`wiring` is that of another projection of the same view and firmware, to share what it has worked out."""
        drive = view.drive
        wiring = wiring or Wiring(view, firmware)
        assert max(len(drive.columns), len(drive.carriers), len(view.locks)) < SPAN - 1, "each clock has its name"
        self.view = view
        self.firmware = firmware
        self.manner = manner
        self._wiring = wiring
        self._references = tuple(Reference(drive.carriers[name]) for name in view.carriers)
        self._spans = tuple(drive.carriers[name].update is Update.WITHIN_PERIOD for name in view.carriers)
        self._rises = tuple(drive.carriers[name].update is Update.AT_RISE for name in view.carriers)
        self._clocks = Clocks(wiring, manner, self._references)
        self._locations: dict[Key, Location] = {}
        self._layouts: dict[Key, Layout] = {}
        self._renamings: dict[_Renaming, _Renamed] = {}
        self._needs: dict[State, set[int]] = {}

    # Where it starts

    def initial(self) -> tuple[Hop, ...]:
        """The ways to start, as hops from nowhere."""
        state = self.firmware.start()
        hops = []
        nowhere = (FORGOTTEN,) * len(self._wiring.numbers)
        for carriers in self._phases(state, nowhere, everything=not self.manner.forget):
            key = self._wiring.initial(state, carriers)
            hops.append(self._hop(None, key, frozenset(), (), (), 0, SILENT))
        return tuple(hops)

    def _phases(
        self, state: State, carriers: tuple[int, ...], everything: bool = False
    ) -> Iterator[tuple[int, ...]]:
        """The carriers' states with what nobody looks at forgotten, and what is looked at again anywhere."""
        if not everything and not self.manner.forget:
            yield carriers
            return
        if not carriers:
            yield carriers
            return
        needed = set(range(len(carriers))) if everything else self._needed(state)
        choices: list[list[int]] = []
        for place, reference in enumerate(carriers):
            if place not in needed:
                choices.append([FORGOTTEN])
            elif reference == FORGOTTEN:
                choices.append([start for start, _ in self._references[place].starts()])
            else:
                choices.append([reference])
        yield from product(*choices)

    def _needed(self, state: State) -> set[int]:
        known = self._needs.get(state)
        if known is None:
            known = self._needs[state] = self._wiring.needs(state)
        return known

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
        ended: int | None = None,
    ) -> Hop:
        if self.manner.measure and old is not None and event is not OVER and self._pauses(old, key) != key.paused:
            key = key._replace(paused=not key.paused)
        watched = self.manner.gap
        if watched is not None and old is not None and ended is None:
            key = key._replace(ended=old.ended)
            if POSSIBLE[key.literals[watched]] and not POSSIBLE[old.literals[watched]]:
                resets |= {SINCE}
        elif ended is not None:
            key = key._replace(ended=ended)
        target = self._location(key)
        before = None if old is None else self._layouts[old]
        holds = tuple(_holds(old, key, written).items()) if key.state.put[2] else ()
        asked: _Renaming = (before, self._layouts[key], resets, least, most, key.carriers, holds)
        known = self._renamings.get(asked)
        if known is None:
            known = self._renamings[asked] = self._renamed(*asked)
        return Hop(known.least, known.most, known.sources, known.after, target, cost, event)

    def _renamed(
        self,
        old: Layout | None,
        new: Layout,
        resets: frozenset[int],
        least: tuple[tuple[int, int], ...],
        most: tuple[tuple[int, int], ...],
        carriers: tuple[int, ...],
        holds: tuple[tuple[int, int], ...],
    ) -> "_Renamed":
        names, held = {} if old is None else old.places, dict(holds)
        sources, after = [], []
        for clock, place in new.places.items():
            name = held.get(clock, clock)
            if CARRIER <= name < HOLD and name not in names:
                sources.append(FRESH)
                reference = self._references[name - CARRIER]
                floor = dict(reference.starts())[carriers[name - CARRIER]]
                if floor:
                    after.append(Bound(place, floor))
            elif name == SINCE and old is None:  # it has been possible for ever
                sources.append(FRESH)
                after.append(Bound(place, 1))
            else:
                sources.append(0 if name in resets else names.get(name, 0))
        return _Renamed(
            tuple(Bound(names[name], value) for name, value in least if value > 0),
            tuple(Bound(names[name], value) for name, value in most),
            tuple(sources),
            tuple(after),
        )

    # Locations

    def _location(self, key: Key) -> Location:
        known = self._locations.get(key)
        if known is not None:
            return known
        hot = self._clocks.hot(key)
        layout = self._layouts[key] = self._clocks.layout(key, hot)
        held = hot and self._wiring.held(key)
        bounds, lower, upper, measure = layout.bounds, layout.lower, layout.upper, layout.measure
        location = Location(key, len(lower), bounds, lower, upper, hot, held, measure, self._expand)
        location.struck = HIT in key.literals
        self._locations[key] = location
        return location

    def _pauses(self, old: Key, key: Key) -> bool:
        """Whether an overlap may go on after this: it does if no time passes until the hazard is asked for again."""
        for literal in key.literals:
            if not POSSIBLE[literal]:
                return False
        return not self._clocks.hot(key) and (old.paused or self._clocks.hot(old))

    # For searches of a part

    def image(self, key: Key) -> Key:
        """A key as it looks without the phases of carriers that nobody follows, and without firmware's upper bounds."""
        needed = self._needed(key.state)
        carriers = tuple(one if place in needed else FORGOTTEN for place, one in enumerate(key.carriers))
        return key._replace(state=key.state._replace(latest=None), carriers=carriers)

    def along(self, images: Collection[Key]) -> Among:
        """What enters only locations that look like these."""
        known: dict[Location, bool] = {}

        def among(location: Location) -> bool:
            if location not in known:
                key = location.key
                assert isinstance(key, Key)
                known[location] = self.image(key) in images
            return known[location]

        return among

    def anew(self) -> "Projection":
        """Itself, ready for another search: what was stored is forgotten, but not what the drive can do."""
        for location in self._locations.values():
            location.passed = []
        return self

    def release(self) -> None:
        """Let go of all locations, which hold each other."""
        for location in self._locations.values():
            location.passed, location.hops = [], None
        self._locations.clear()
        self._layouts.clear()

    # For traces and certificates

    def locations(self) -> tuple[Location, ...]:
        """All locations worked out so far."""
        return tuple(self._locations.values())

    def clock_name(self, key: Key, place: int) -> int:
        """The identity of a location's clock."""
        return tuple(self._layouts[key].places)[place - 1]

    def eased(self, hop: Hop, location: Location) -> Hop:
        """A hop of the firmware out of a location that asks for no longer a stay than a cut one."""
        happening, key = hop.event, location.key
        assert isinstance(happening, Happening)
        assert isinstance(key, Key)
        if happening.edge is None:
            return hop
        step = happening.edge.step
        cut = min((one.lo for one in self._clocks.timing(key, False)[0] if one.step == step), default=happening.edge.lo)
        least = tuple(
            Bound(clock, min(value, cut) if self.clock_name(key, clock) == X else value) for clock, value in hop.least
        )
        return hop._replace(least=least)

    @property
    def settled(self) -> int:
        """A stay that may be cut and has lasted for so long may have lasted for any time."""
        return self._clocks.settled

    def full_dwell(self, edge: Edge, location: Location) -> int:
        """How long a stay the file asks for before an edge that the search may have let come sooner."""
        key = location.key
        assert isinstance(key, Key)
        return min(one.lo for one in self.firmware.edges(key.state) if one.step == edge.step)

    # Hops

    def _expand(self, location: Location) -> tuple[Hop, ...]:
        key = location.key
        assert isinstance(key, Key)
        if location.struck:
            return ()
        return tuple(self._hops(key))

    def _hops(self, key: Key) -> Iterator[Hop]:
        if key.paused:
            yield from self._pause_over(key)
        if key.ended == LATELY:
            yield from self._gap_capped(key)
        yield from self._conducting(key)
        yield from self._firmware_hops(key)
        if key.carriers:
            yield from self._carrier_hops(key)
        if key.state.put[2]:
            yield from self._update_hops(key)
        yield from self._pin_hops(key)
        yield from self._lock_hops(key)

    def _pause_over(self, key: Key) -> Iterator[Hop]:
        yield self._hop(key, key._replace(paused=False), frozenset(), (), (), 0, OVER)

    def _gap_capped(self, key: Key) -> Iterator[Hop]:
        yield self._hop(key, key, frozenset(), ((GAP, self.manner.cap),), (), 0, CAPPED, ended=LONG_AGO)
        if self.manner.gap is not None and POSSIBLE[key.literals[self.manner.gap]]:
            yield self._hop(key, key, frozenset(), ((SINCE, 1),), (), 0, CAPPED, ended=NOT_ENDED)

    def _conducting(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.literals):
            times = self.view.delays[place]
            for by_rise, after in timeouts(state):
                name, least = (RISE + place, times.rise) if by_rise else (FALL + place, times.fall)
                literals = (*key.literals[:place], after, *key.literals[place + 1 :])
                new = Key(key.state, key.carriers, key.pins, key.locks, literals, key.paused, key.ended)
                if place == self.manner.gap and POSSIBLE[state] and not POSSIBLE[after]:
                    yield from self._end_of_watched(key, new, (name, least))
                else:
                    yield self._hop(key, new, frozenset(), ((name, least),), (), 0, SILENT)

    def _end_of_watched(self, key: Key, new: Key, least: tuple[int, int]) -> Iterator[Hop]:
        """Where the watched literal was possible for some time a gap begins; else what there was before goes on."""
        yield self._hop(key, new, frozenset({GAP}), (least, (SINCE, 1)), (), 0, SILENT, ended=LATELY)
        yield self._hop(key, new, frozenset(), (least,), ((SINCE, 0),), 0, SILENT)

    def _firmware_hops(self, key: Key) -> Iterator[Hop]:
        asking = self.view.hazard.asks is not None
        for edge in self._clocks.timing(key, self._clocks.hot(key))[0]:
            target = edge.step.target
            written = 0
            if target.put[2]:  # else it is never asked for
                written = sum({1 << switch for deed in edge.step.deeds for switch, _ in deed.writes})
            most = ((X, edge.hi),) if edge.hi is not None else ()
            if edge.y_hi is not None:
                most = (*most, (Y, edge.y_hi))
            starts_anew = _ANEW[edge.resets_x, edge.resets_y]
            for carriers in self._phases(target, key.carriers):
                new, resets = self._wiring.settle(key, target, carriers, key.pins, key.locks)
                if asking:
                    new, resets = self._told(key, new, edge, resets)
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

    def _told(self, old: Key, key: Key, edge: Edge, resets: frozenset[int]) -> tuple[Key, frozenset[int]]:
        """The automaton of a question about modes or a trip, which is the last, told of what the firmware does."""
        drive, asks = self.view.drive, self.view.hazard.asks
        if isinstance(asks, Following):
            turn = followed(drive, asks, old.literals[-1], old.state, edge.step.deeds)
        elif isinstance(asks, Clearing):
            turn = watched(drive, asks, old.literals[-1], old.state, edge.step.deeds)
        else:
            return key, resets
        anew = frozenset({RISE + len(key.literals) - 1} if turn.resets_rise else ())
        return key._replace(literals=(*key.literals[:-1], turn.state)), resets | anew

    def _carrier_hops(self, key: Key) -> Iterator[Hop]:
        for place, reference in enumerate(key.carriers):
            if reference == FORGOTTEN:
                continue
            name = self.view.carriers[place]
            for change in self._references[place].changes(reference):
                state = key.state
                if change.act is Act.RISES and self._rises[place]:
                    state = self.firmware.updated(state, self._wiring.numbers[place])
                moved = (*key.carriers[:place], change.state, *key.carriers[place + 1 :])
                for carriers in self._phases(state, moved):
                    new, resets = self._wiring.settle(key, state, carriers, key.pins, key.locks)
                    starts_anew = resets | {CARRIER + place} if change.resets else resets
                    least = ((CARRIER + place, change.least),)
                    yield self._hop(key, new, starts_anew, least, (), 0, Happening(change.act, name))

    def _update_hops(self, key: Key) -> Iterator[Hop]:
        for number in sorted({carrier for carrier, _ in key.state.put[2]}):
            state = self.firmware.updated(key.state, number)
            happening = Happening(Act.UPDATES, self.firmware.writing.carriers[number])
            for carriers in self._phases(state, key.carriers):
                new, resets = self._wiring.settle(key, state, carriers, key.pins, key.locks)
                yield self._hop(key, new, resets, (), (), 0, happening)

    def _pin_hops(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.pins):
            pin = self._wiring.pins[place]
            if state <= 0 or state & 1 == 0 or pin is None:
                continue
            pins = (*key.pins[:place], CODES[pin.resting] * 2, *key.pins[place + 1 :])
            new, resets = self._wiring.settle(key, key.state, key.carriers, pins, key.locks)
            happening = Happening(Act.RESTS, self.view.switches[place])
            yield self._hop(key, new, resets, ((PIN + place, pin.after.lo),), (), 0, happening)

    def _lock_hops(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.locks):
            if state != WAITING:
                continue
            lock = self.view.locks[place]
            locks = (*key.locks[:place], CLEAR, *key.locks[place + 1 :])
            new, resets = self._wiring.settle(key, key.state, key.carriers, key.pins, locks)
            happening = Happening(Act.CLEARS, self.view.switches[lock.guarded])
            yield self._hop(key, new, resets, ((LOCK + place, lock.dead.lo),), (), 0, happening)


class _Renamed(NamedTuple):
    """The clocks of a hop (see Hop)."""

    least: tuple[Bound, ...]
    most: tuple[Bound, ...]
    sources: tuple[int, ...]
    after: tuple[Bound, ...]


def _holds(old: Key | None, key: Key, written: int) -> dict[int, int]:
    """Where the clock of each held group comes from; groups written just now have a name that none had before."""
    renaming = {}
    for place, (number, bits) in enumerate(key.state.put[2]):
        renaming[HOLD + place] = NEVER_HELD
        if old is None or bits & written:
            continue
        for before, (other, were) in enumerate(old.state.put[2]):
            if other == number and bits & were == bits:
                renaming[HOLD + place] = HOLD + before
    return renaming
