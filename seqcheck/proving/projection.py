"""One hazard's view of the drive: only its switches, their carriers, interlocks and released pins, and the literals.

Other switches are left with the time that their writes take. Locations are worked out when the search reaches them.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product

from seqcheck.circuit import contradicted
from seqcheck.drive import Update
from seqcheck.firmware import Edge, Firmware, State
from seqcheck.hazards import Clearing, Following
from seqcheck.proving.conduction import HIT, POSSIBLE, ages, timeouts
from seqcheck.proving.cutting import Cutting
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
    PAUSE,
    PIN,
    RISE,
    SILENT,
    SINCE,
    SPAN,
    WAITING,
    Clock,
    Happening,
    Key,
    X,
    Y,
    Z,
)
from seqcheck.proving.lengths import followed, watched
from seqcheck.proving.location import Bound, Hop, Location
from seqcheck.proving.references import FORGOTTEN, Reference
from seqcheck.proving.views import View
from seqcheck.proving.wiring import Wiring
from seqcheck.quantities import Interval
from seqcheck.verdict import Act
from seqcheck.zones import FRESH, INFINITE


@dataclass(frozen=True, slots=True)
class Manner:
    """How to look: `forget` the phase of carriers nobody follows; `cut` long dwells; `measure` the overlap.

    Or, with `gap`, measure how long after the possibility of the literal at that place all others are possible and
    the hazard is asked for; gaps of `cap` ps and more are one.
    """

    forget: bool
    cut: bool
    measure: bool
    gap: int | None = None
    cap: int = 0


class Projection:
    """The locations and hops of one hazard."""

    def __init__(self, view: View, firmware: Firmware, manner: Manner) -> None:
        drive = view.drive
        assert max(len(drive.columns), len(drive.carriers), len(view.locks)) < SPAN - 1, "each clock has its name"
        self.view = view
        self.firmware = firmware
        self.manner = manner
        self._wiring = Wiring(view, firmware)
        self._references = tuple(Reference(drive.carriers[name]) for name in view.carriers)
        self._spans = tuple(drive.carriers[name].update is Update.WITHIN_PERIOD for name in view.carriers)
        self._rises = tuple(drive.carriers[name].update is Update.AT_RISE for name in view.carriers)
        # where interlocked switches follow different carriers, no cycle is like the one before
        repeats = not view.locks or len(view.carriers) <= 1
        self._cutting = Cutting(view, self._references) if manner.cut and repeats else None
        self._locations: dict[Key, Location] = {}
        self._clocks: dict[Key, tuple[Clock, ...]] = {}

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
        needed = set(range(len(carriers))) if everything else self._wiring.needs(state)
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
        ended: int | None = None,
    ) -> Hop:
        if self.manner.measure and old is not None and event is not OVER:
            key = key._replace(paused=self._pauses(old, key))
        watched = self.manner.gap
        if watched is not None and old is not None and ended is None:
            key = key._replace(ended=old.ended)
            if POSSIBLE[key.literals[watched]] and not POSSIBLE[old.literals[watched]]:
                resets |= {SINCE}
        elif ended is not None:
            key = key._replace(ended=ended)
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
            elif name == SINCE and old is None:  # it has been possible for ever
                sources.append(FRESH)
                after.append(Bound(place, 1))
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
            key, len(clocks) + 1, bounds, lower, upper, hot, hot and self._wiring.held(key), measure, self._expand
        )
        location.struck = HIT in key.literals
        self._locations[key] = location
        return location

    def _pauses(self, old: Key, key: Key) -> bool:
        """Whether an overlap may go on after this: it does if no time passes until the hazard is asked for again."""
        possible = all(POSSIBLE[literal] for literal in key.literals)
        return possible and not self._hot(key) and (old.paused or self._hot(old))

    def _hot(self, key: Key) -> bool:
        """Whether all literals are possible and asked for; for a gap, all others after the one that is watched."""
        possible = [POSSIBLE[literal] for literal in key.literals]
        if self.manner.gap is not None:
            possible[self.manner.gap] = key.ended != NOT_ENDED and not possible[self.manner.gap]
        if not all(possible):
            return False
        return not contradicted(self.view.hazard, self.firmware.facts(key.state))

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
            pin = self._wiring.pins[place]
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
        if self.manner.measure and (hot or key.paused):
            yield Clock(Z, INFINITE, INFINITE, INFINITE)
        if key.paused:
            yield Clock(PAUSE, 0, 0, 0)
        if key.ended == LATELY:
            yield Clock(GAP, self.manner.cap, self.manner.cap, self.manner.cap)
        if self.manner.gap is not None and POSSIBLE[key.literals[self.manner.gap]]:
            forgets = key.ended == LATELY  # once it has been possible for some time, what ended before is over
            yield Clock(SINCE, 1, int(forgets), 1 if forgets else INFINITE)

    def _firmware_clocks(self, key: Key, hot: bool) -> Iterator[Clock]:
        edges, deadline = self._timing(key, hot)
        lower = max((edge.lo for edge in edges), default=0)
        highs = [edge.hi for edge in edges if edge.hi is not None]
        if self._cutting is not None and deadline is None and not highs and self._bounded(key.state):
            highs.append(self._cutting.length)  # where an overlap begins in this stay, the bounds come back
        if deadline is not None or highs or lower:
            upper = max([*highs, deadline or 0])
            yield Clock(X, lower, upper, INFINITE if deadline is None else deadline)
        hand = self.firmware.hand_deadline(key.state)
        if hand is not None:
            yield Clock(Y, 0, hand, hand)

    def _bounded(self, state: State) -> bool:
        """Whether the file gives the stay, or an edge out of it, an upper bound."""
        some = any(edge.hi is not None for edge in self.firmware.edges(state))
        return some or self.firmware.deadline(state) is not None

    def _period(self, number: int) -> int:
        period = self._references[self._wiring.place[number]].carrier.period.hi
        assert period is not None, "a frequency is finite"
        return period

    def _timing(self, key: Key, hot: bool) -> tuple[tuple[Edge, ...], int | None]:
        """The firmware's edges and deadline, long stays cut short where that changes nothing.

        Where all literals are possible a stay keeps its times: an overlap that comes from before the stay has settled
        must last as long as the stay, and one that ends with it does not outlast it. So it is where a gap is measured,
        and where a trip may arrive early, after which the stay goes on.
        """
        edges, deadline = self.firmware.edges(key.state), self.firmware.deadline(key.state)
        measured = hot or key.ended == LATELY or any(not edge.resets_x for edge in edges)
        if self._cutting is None or measured or self.firmware.hand_is_timed(key.state):
            return edges, deadline
        return self._cutting.cut(edges, deadline)

    # For traces and certificates

    def locations(self) -> tuple[Location, ...]:
        """All locations worked out so far."""
        return tuple(self._locations.values())

    def clock_name(self, key: Key, place: int) -> int:
        """The identity of a location's clock."""
        return self._clocks[key][place - 1].name

    def eased(self, hop: Hop, location: Location) -> Hop:
        """A hop of the firmware out of a location that asks for no longer a stay than a cut one."""
        happening, key = hop.event, location.key
        assert isinstance(happening, Happening)
        assert isinstance(key, Key)
        if happening.edge is None:
            return hop
        step = happening.edge.step
        cut = min((one.lo for one in self._timing(key, False)[0] if one.step == step), default=happening.edge.lo)
        least = tuple(
            Bound(clock, min(value, cut) if self.clock_name(key, clock) == X else value) for clock, value in hop.least
        )
        return hop._replace(least=least)

    @property
    def settled(self) -> int:
        """A stay that may be cut and has lasted for so long may have lasted for any time."""
        return self._cutting.length + 1 if self._cutting is not None else 0

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
        return (
            *self._pause_over(key),
            *self._gap_capped(key),
            *self._conducting(key),
            *self._firmware_hops(key),
            *self._carrier_hops(key),
            *self._update_hops(key),
            *self._pin_hops(key),
            *self._lock_hops(key),
        )

    def _pause_over(self, key: Key) -> Iterator[Hop]:
        if key.paused:
            yield self._hop(key, key._replace(paused=False), frozenset(), (), (), 0, OVER)

    def _gap_capped(self, key: Key) -> Iterator[Hop]:
        if key.ended == LATELY:
            yield self._hop(key, key, frozenset(), ((GAP, self.manner.cap),), (), 0, CAPPED, ended=LONG_AGO)
        if key.ended == LATELY and self.manner.gap is not None and POSSIBLE[key.literals[self.manner.gap]]:
            yield self._hop(key, key, frozenset(), ((SINCE, 1),), (), 0, CAPPED, ended=NOT_ENDED)

    def _conducting(self, key: Key) -> Iterator[Hop]:
        for place, state in enumerate(key.literals):
            times = self.view.delays[place]
            for by_rise, after in timeouts(state):
                name, least = (RISE + place, times.rise) if by_rise else (FALL + place, times.fall)
                new = key._replace(literals=(*key.literals[:place], after, *key.literals[place + 1 :]))
                if place == self.manner.gap and POSSIBLE[state] and not POSSIBLE[after]:
                    yield from self._end_of_watched(key, new, (name, least))
                else:
                    yield self._hop(key, new, frozenset(), ((name, least),), (), 0, SILENT)

    def _end_of_watched(self, key: Key, new: Key, least: tuple[int, int]) -> Iterator[Hop]:
        """Where the watched literal was possible for some time a gap begins; else what there was before goes on."""
        yield self._hop(key, new, frozenset({GAP}), (least, (SINCE, 1)), (), 0, SILENT, ended=LATELY)
        yield self._hop(key, new, frozenset(), (least,), ((SINCE, 0),), 0, SILENT)

    def _firmware_hops(self, key: Key) -> Iterator[Hop]:
        for edge in self._timing(key, self._hot(key))[0]:
            target = edge.step.target
            written = sum({1 << switch for deed in edge.step.deeds for switch, _ in deed.writes})
            most = ((X, edge.hi),) if edge.hi is not None else ()
            if edge.y_hi is not None:
                most = (*most, (Y, edge.y_hi))
            starts_anew = {name for name, anew in ((X, edge.resets_x), (Y, edge.resets_y)) if anew}
            for carriers in self._phases(target, key.carriers):
                new, resets = self._wiring.settle(key, target, carriers, key.pins, key.locks)
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


def _timer(name: int, span: Interval) -> Clock:
    assert span.hi is not None, "the language asks for an upper bound of hardware times"
    return Clock(name, span.lo, span.hi, span.hi)


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
