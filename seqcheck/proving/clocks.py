"""The clocks of a location: which times it looks at, how far, and how long it may last.

Most locations share their clocks with others, so that what can be said of them is worked out once: for a state of the
firmware, and for all the rest of a key.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import NamedTuple

from seqcheck.circuit import contradicted
from seqcheck.firmware import Edge, State
from seqcheck.proving.conduction import POSSIBLE, ages
from seqcheck.proving.cutting import Cutting
from seqcheck.proving.keys import (
    CARRIER,
    FALL,
    GAP,
    HOLD,
    LATELY,
    LOCK,
    NOT_ENDED,
    PAUSE,
    PIN,
    RISE,
    SINCE,
    WAITING,
    Clock,
    Key,
    X,
    Y,
    Z,
)
from seqcheck.proving.location import Bound
from seqcheck.proving.references import FORGOTTEN, Reference
from seqcheck.proving.wiring import Wiring
from seqcheck.quantities import Interval
from seqcheck.zones import INFINITE


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


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """The clocks of a location in order, as the search wants them: the place of each by its name, invariants, greatest
    constants, and the place of the clock that measures an overlap. One for all locations that have the same clocks."""

    places: dict[int, int]
    bounds: tuple[Bound, ...]
    lower: tuple[int, ...]
    upper: tuple[int, ...]
    measure: int


Timing = tuple[tuple[Edge, ...], int | None]


_Rest = tuple[
    tuple[int, ...],
    tuple[tuple[int, int], ...],
    tuple[int, ...],
    tuple[int, ...],
    tuple[int, ...],
    bool,
    bool,
    int,
]
"""All of a key but the firmware's state that its clocks depend on, and whether its location is hot."""


class _Numbered(NamedTuple):
    """Some clocks, with one number for all that are equal."""

    number: int
    clocks: tuple[Clock, ...]


class Clocks:
    """The clocks of the locations of one hazard."""

    def __init__(self, wiring: Wiring, manner: Manner, references: tuple[Reference, ...]) -> None:
        view = wiring.view
        self._view = view
        self._firmware = wiring.firmware
        self._manner = manner
        self._wiring = wiring
        self._references = references
        # where interlocked switches follow different carriers, no cycle is like the one before
        repeats = not view.locks or len(view.carriers) <= 1
        self._cutting = Cutting(view, references) if manner.cut and repeats else None
        self._timings: dict[tuple[State, bool], Timing] = {}
        self._numbers: dict[tuple[Clock, ...], _Numbered] = {}
        self._of_firmware: dict[tuple[State, bool, bool], _Numbered] = {}
        self._of_rest: dict[_Rest, _Numbered] = {}
        self._layouts: dict[tuple[int, int], Layout] = {}
        self._asked: dict[State, bool] = {}

    @property
    def settled(self) -> int:
        """A stay that may be cut and has lasted for so long may have lasted for any time."""
        return self._cutting.length + 1 if self._cutting is not None else 0

    def hot(self, key: Key) -> bool:
        """Whether all literals are possible and asked for; for a gap, all others after the one that is watched."""
        gap = self._manner.gap
        if gap is None:
            for literal in key.literals:
                if not POSSIBLE[literal]:
                    return False
        else:
            possible = [POSSIBLE[literal] for literal in key.literals]
            possible[gap] = key.ended != NOT_ENDED and not possible[gap]
            if not all(possible):
                return False
        asked = self._asked.get(key.state)
        if asked is None:
            asked = not contradicted(self._view.hazard, self._firmware.facts(key.state))
            self._asked[key.state] = asked
        return asked

    def layout(self, key: Key, hot: bool) -> Layout:
        """The clocks of a location."""
        state, carriers, pins, locks, literals, paused, ended = key
        moment = (state, hot, ended == LATELY)
        firmware = self._of_firmware.get(moment)
        if firmware is None:
            firmware = self._of_firmware[moment] = self._numbered(tuple(self._firmware_clocks(key, hot)))
        like: _Rest = (carriers, state.put[2], pins, locks, literals, hot, paused, ended)
        rest = self._of_rest.get(like)
        if rest is None:
            rest = self._of_rest[like] = self._numbered(tuple(self._other_clocks(key, hot)))
        known = self._layouts.get((firmware.number, rest.number))
        if known is None:
            known = self._layouts[firmware.number, rest.number] = _layout(firmware.clocks + rest.clocks)
        return known

    def _numbered(self, clocks: tuple[Clock, ...]) -> _Numbered:
        return self._numbers.setdefault(clocks, _Numbered(len(self._numbers), clocks))

    def timing(self, key: Key, hot: bool) -> Timing:
        """The firmware's edges and deadline, long stays cut short where that changes nothing.

        Where all literals are possible a stay keeps its times: an overlap that comes from before the stay has settled
        must last as long as the stay, and one that ends with it does not outlast it. So it is where a gap is measured,
        and where a trip may arrive early, after which the stay goes on.
        """
        measured = hot or key.ended == LATELY
        known = self._timings.get((key.state, measured))
        if known is None:
            known = self._timings[key.state, measured] = self._timing(key.state, measured)
        return known

    def _timing(self, state: State, measured: bool) -> Timing:
        edges, deadline = self._firmware.edges(state), self._firmware.deadline(state)
        stays = any(not edge.resets_x for edge in edges) or self._firmware.hand_is_timed(state)
        if self._cutting is None or measured or stays:
            return edges, deadline
        return self._cutting.cut(edges, deadline)

    def _firmware_clocks(self, key: Key, hot: bool) -> Iterator[Clock]:
        edges, deadline = self.timing(key, hot)
        lower = max((edge.lo for edge in edges), default=0)
        highs = [edge.hi for edge in edges if edge.hi is not None]
        if self._cutting is not None and deadline is None and not highs and self._bounded(key.state):
            highs.append(self._cutting.length)  # where an overlap begins in this stay, the bounds come back
        if deadline is not None or highs or lower:
            upper = max([*highs, deadline or 0])
            yield Clock(X, lower, upper, INFINITE if deadline is None else deadline)
        hand = self._firmware.hand_deadline(key.state)
        if hand is not None:
            yield Clock(Y, 0, hand, hand)

    def _bounded(self, state: State) -> bool:
        """Whether the file gives the stay, or an edge out of it, an upper bound."""
        some = any(edge.hi is not None for edge in self._firmware.edges(state))
        return some or self._firmware.deadline(state) is not None

    def _other_clocks(self, key: Key, hot: bool) -> Iterator[Clock]:
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
                yield _timer(LOCK + place, self._view.locks[place].dead)
        for place, state in enumerate(key.literals):
            rise, fall = ages(state)
            times = self._view.delays[place]
            if rise:
                yield Clock(RISE + place, times.rise, times.rise, times.rise)
            if fall:
                yield Clock(FALL + place, times.fall, times.fall, times.fall)
        yield from self._measuring_clocks(key, hot)

    def _measuring_clocks(self, key: Key, hot: bool) -> Iterator[Clock]:
        if self._manner.measure and (hot or key.paused):
            yield Clock(Z, INFINITE, INFINITE, INFINITE)
        if key.paused:
            yield Clock(PAUSE, 0, 0, 0)
        if key.ended == LATELY:
            yield Clock(GAP, self._manner.cap, self._manner.cap, self._manner.cap)
        if self._manner.gap is not None and POSSIBLE[key.literals[self._manner.gap]]:
            forgets = key.ended == LATELY  # once it has been possible for some time, what ended before is over
            yield Clock(SINCE, 1, int(forgets), 1 if forgets else INFINITE)

    def _period(self, number: int) -> int:
        period = self._references[self._wiring.place[number]].carrier.period.hi
        assert period is not None, "a frequency is finite"
        return period


def _layout(clocks: tuple[Clock, ...]) -> Layout:
    names = [clock.name for clock in clocks]
    return Layout(
        {name: place for place, name in enumerate(names, 1)},
        tuple(Bound(place, clock.bound) for place, clock in enumerate(clocks, 1) if clock.bound < INFINITE),
        (0, *(clock.lower for clock in clocks)),
        (0, *(clock.upper for clock in clocks)),
        names.index(Z) + 1 if Z in names else 0,
    )


def _timer(name: int, span: Interval) -> Clock:
    assert span.hi is not None, "the language asks for an upper bound of hardware times"
    return Clock(name, span.lo, span.hi, span.hi)
