"""The screen: settle a pair of switches by least times alone, without zones.

Let d(X→Y) be the least time from a command of X going away to one of Y coming, pulses of no length included. The pair
never meets if no state commands both, d(X→Y) ≥ out(X) − in(Y), d(Y→X) ≥ out(Y) − in(X), and the sum of both is strictly
more than either `out`: else a stretch of possibility could outlast the other switch's whole pulse and its own next
beginning. Upper bounds of firmware play no part, so what the screen settles holds however late the firmware is.
Interlocks are left out: they only shorten pulses.
"""

from collections import deque
from collections.abc import Callable, Iterator
from heapq import heappop, heappush
from itertools import combinations, product
from typing import NamedTuple

from seqcheck.firmware import Firmware, State
from seqcheck.hazards import Delays, Literal
from seqcheck.proving.keys import C_BOTH, C_OFF, C_ON, CODES
from seqcheck.proving.views import View
from seqcheck.writing import FREE, ON, carrier_of
from seqcheck.zones import INFINITE

Pair = tuple[int, int]
"""The commands of two switches."""
Point = tuple[int, Pair]
"""The number of a state, and the commands of both switches in it."""
Places = tuple[int, int]
"""Where two literals stand in a hazard."""


_COMMANDS = (C_OFF, C_ON, C_BOTH)


class Arc(NamedTuple):
    """A change of the firmware's state; `restarts` where it starts the clock of the next."""

    least: int
    target: int
    restarts: bool


class Map:
    """All states of a firmware with the least times between them.

    The observer is called for every state, with no zone, so that it may stop the work by raising.
    """

    def __init__(self, firmware: Firmware, observer: Callable[[int], None]) -> None:
        self.firmware = firmware
        self.states: list[State] = [firmware.start()]
        self.arcs: list[tuple[Arc, ...]] = []
        numbers = {self.states[0]: 0}
        while len(self.arcs) < len(self.states):
            observer(0)
            state = self.states[len(self.arcs)]
            arcs = []
            for least, target, restarts in _next(firmware, state):
                if target not in numbers:
                    numbers[target] = len(self.states)
                    self.states.append(target)
                arcs.append(Arc(least, numbers[target], restarts))
            self.arcs.append(tuple(dict.fromkeys(arcs)))


def _next(firmware: Firmware, state: State) -> Iterator[tuple[int, State, bool]]:
    for edge in firmware.edges(state):
        yield edge.lo, edge.step.target, True
    written, effective, _ = state.put
    if written != effective:
        holders = {firmware.writing.holder(old, new) for new, old in zip(written, effective, strict=True) if new != old}
        for number in sorted(holders):
            yield 0, firmware.updated(state, number), False


def screened(view: View, here: Map) -> Places | None:
    """The places of two of the hazard's literals that never meet, if least times alone show it.

    Only switches that are wanted on are looked at: what a carrier's dead time keeps apart is their conduction.
    """
    pairs = combinations((place for place, literal in enumerate(view.hazard.literals) if literal.on), 2)
    return next((pair for pair in pairs if Pairing(view, here, *pair).apart()), None)


def least_after(view: View, here: Map, leaving: int) -> int | None:
    """A lower bound of the gap after one of two literals that the screen keeps apart, INFINITE where the other never
    comes after it; None where it does not keep them apart.

    Between their commands lies the least time found; the possibility of the one outlasts its command by `fall` at most,
    that of the other lags behind by `rise`. The third condition of the screen leaves no earlier command to reckon with.
    """
    pairing = Pairing(view, here, 0, 1)
    points = pairing.points()
    if points is None or not pairing.apart():
        return None
    least = pairing.least(points, leaving)
    if least >= INFINITE:
        return least
    return least + pairing.delays[1 - leaving].rise - pairing.delays[leaving].fall


class Pairing:
    """Two literals over the map of a firmware."""

    def __init__(self, view: View, here: Map, first: int, second: int) -> None:
        drive = view.drive
        self.here = here
        self.literals: tuple[Literal, Literal] = (view.hazard.literals[first], view.hazard.literals[second])
        self.delays: tuple[Delays, Delays] = (view.delays[first], view.delays[second])
        self.columns = tuple(drive.columns.index(one.switch) for one in self.literals)
        pins = [drive.pins.get(one.switch) for one in self.literals]
        self.rests = tuple(C_OFF if pin is None else CODES[pin.resting] for pin in pins)
        carriers = tuple(drive.carriers.values())
        self.dead = tuple(carrier.dead.lo for carrier in carriers)
        first, second = self.columns
        self._wanted = [
            frozenset(pair for pair in product(_COMMANDS, repeat=2) if self._wants(pair[which], which))
            for which in (0, 1)
        ]
        self._cells: list[Pair] = [(state.put[1][first], state.put[1][second]) for state in here.states]
        self._steps: dict[Point, list[tuple[Arc | None, Point, bool]]] = {}
        self._begun: dict[tuple[Pair, Pair, Pair], list[Pair]] = {}  # few, however many states there are
        self._drifted: dict[tuple[Pair, Pair], list[Pair]] = {}

    def apart(self) -> bool:
        points = self.points()
        if points is None:
            return False
        one_way, other_way = self.least(points, 0), self.least(points, 1)
        first, second = self.delays
        if one_way < first.fall - second.rise or other_way < second.fall - first.rise:
            return False
        return one_way + other_way > max(first.fall, second.fall)

    def wanted(self, pair: Pair, which: int) -> bool:
        """Whether one of the literals is commanded, or may be."""
        return pair in self._wanted[which]

    def _wants(self, command: int, which: int) -> bool:
        return command == C_BOTH or (command == C_ON) == self.literals[which].on

    def cells(self, state: int) -> Pair:
        """The cells of both switches that are in effect."""
        return self._cells[state]

    def points(self) -> set[Point] | None:
        """All points that can be reached; None if one of them commands both."""
        starts = [(0, pair) for pair in self._joined(self._cells[0], None)]
        seen = set(starts)
        waiting = deque(starts)
        both = self._wanted[0] & self._wanted[1]
        while waiting:
            point = waiting.popleft()
            if point[1] in both:
                return None
            for _, target, _ in self.steps(point):
                if target not in seen:
                    seen.add(target)
                    waiting.append(target)
        return seen

    def steps(self, point: Point) -> list[tuple[Arc | None, Point, bool]]:
        """What can come next: (the firmware's arc or None, the point after it, whether the arc restarts the clock)."""
        known = self._steps.get(point)
        if known is None:
            known = self._steps[point] = self._next(point)
        return known

    def _next(self, point: Point) -> list[tuple[Arc | None, Point, bool]]:
        state, pair = point
        before = self._cells[state]
        drifted = self._drifted.get((before, pair))
        if drifted is None:
            drifted = self._drifted[before, pair] = self._drifting(before, pair)
        found: list[tuple[Arc | None, Point, bool]] = [(None, (state, other), False) for other in drifted]
        for arc in self.here.arcs[state]:
            key = before, pair, self._cells[arc.target]
            begun = self._begun.get(key)
            if begun is None:
                begun = self._begun[key] = self._joined(key[2], _kept(*key))
            found += [(arc, (arc.target, other), arc.restarts) for other in begun]
        return found

    def _joined(self, cells: Pair, kept: tuple[int | None, int | None] | None) -> list[Pair]:
        """The commands with which a state of these cells can begin."""
        choices = []
        for which in (0, 1):
            cell, old = cells[which], kept[which] if kept else None
            if cell <= ON:
                choices.append([cell])
            elif old is not None:
                choices.append([old, self.rests[which]] if cell == FREE else [old])
            else:
                choices.append([self.rests[which]] if cell == FREE else [C_OFF, C_ON])
        return [(a, b) for a in choices[0] for b in choices[1] if self._fits(cells, (a, b))]

    def _drifting(self, cells: Pair, pair: Pair) -> list[Pair]:
        """The commands that carriers and resting pins can make of these without the firmware."""
        choices = []
        for which in (0, 1):
            if cells[which] <= ON:
                choices.append([pair[which]])
            elif cells[which] == FREE:
                choices.append([pair[which], self.rests[which]])
            else:
                choices.append([C_OFF, C_ON])
        return [(a, b) for a in choices[0] for b in choices[1] if (a, b) != pair and self._fits(cells, (a, b))]

    def _fits(self, cells: Pair, pair: Pair) -> bool:
        """Whether two switches on one carrier can have these commands."""
        one, other = carrier_of(cells[0]), carrier_of(cells[1])
        if one < 0 or one != other:
            return True
        return pair[0] == pair[1] if cells[0] == cells[1] else pair != (C_ON, C_ON)

    def least(self, points: set[Point], leaving: int) -> int:
        """The least time from the command of one literal going away to the other's coming."""
        sources: dict[int, set[tuple[int, Pair, bool]]] = {}
        coming = 1 - leaving
        goes, comes = self._wanted[leaving], self._wanted[coming]
        best = INFINITE
        for point in points:
            if point[1] not in goes:
                continue
            cell = self._cells[point[0]][leaving]
            for arc, target, restarts in self.steps(point):
                if target[1] in goes:
                    continue
                if point[1] not in comes and target[1] in comes:
                    best = min(best, self._floor(cell, target, coming))
                sources.setdefault(cell, set()).add((*target, arc is not None and restarts))
        for cell, starts in sources.items():
            best = min(best, self._shortest(cell, starts, coming, best))
        return best

    def _floor(self, cell: int, target: Point, coming: int) -> int:
        """A dead time that lies between: one switch was on with an output, the other comes with its complement."""
        number = carrier_of(cell)
        after = self.cells(target[0])[coming]
        opposite = number >= 0 and carrier_of(after) == number and after != cell
        return self.dead[number] if opposite else 0

    def _shortest(self, cell: int, starts: set[tuple[int, Pair, bool]], coming: int, ceiling: int) -> int:
        """Dijkstra's algorithm; an arc costs its least time where the clock is known to have started on the way."""
        best = dict.fromkeys(starts, 0)
        queue = [(0, start) for start in sorted(starts)]
        comes = self._wanted[coming]
        while queue:
            time, here = heappop(queue)
            if time >= ceiling:
                return ceiling
            if time > best[here]:
                continue
            state, pair, known = here
            for arc, target, restarts in self.steps((state, pair)):
                later = time + (arc.least if arc is not None and known and restarts else 0)
                if pair not in comes and target[1] in comes:
                    ceiling = min(ceiling, max(later, self._floor(cell, target, coming)))
                there = (*target, restarts or known)
                if later < best.get(there, INFINITE):
                    best[there] = later
                    heappush(queue, (later, there))
        return ceiling


def _kept(before: Pair, pair: Pair, after: Pair) -> tuple[int | None, int | None]:
    """The commands that an arc leaves as they were; None where the switch joins a carrier."""
    first = pair[0] if after[0] == before[0] or after[0] == FREE else None
    second = pair[1] if after[1] == before[1] or after[1] == FREE else None
    return first, second
