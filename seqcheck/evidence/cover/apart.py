"""Two switches held apart by least times alone: what a list of potentials must be to prove it.

Looked at are only where the firmware stands and what both switches are commanded. Carriers may turn and pins come to
rest at any moment, interlocks are left out, and no upper bound is believed; so there are more runs than the drive has.

A potential goes with a point and one switch: while that is not commanded, at least so long before x began it was last
commanded; UNKNOWN where x may have begun before. Then x itself adds to it. Potentials are kept apart by the cell in
effect when the command went away, since an output's complement comes no sooner than the dead time after it.
"""

from functools import cache
from typing import NamedTuple

from seqcheck.drive import Command
from seqcheck.evidence.cover.check import NotCovered
from seqcheck.evidence.cover.matrix import NO_BOUND
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import Firmware, Stand, placed

UNKNOWN = -1
"""As a potential: nothing is known of x. Whatever is below 0 is taken so."""

Pair = tuple[str, str]
"""The commands, or the cells in effect, of two switches."""
Point = tuple[int, Pair]
"""The number of a stand, and the commands of both switches in it."""
Times = dict[str, int]
"""Potentials by the cell that the command went away from."""
Both = tuple[Times, Times]
"""What is claimed of each of both switches. A cell that is not named: the command went away from none such."""
Said = dict[int, dict[Pair, Both]]
"""What is claimed of each point, by its stand and its commands."""


class Arcs(NamedTuple):
    """What leads to other stands: firmware, once x is at least `least`, after which x is 0; None: held writes act."""

    least: int | None
    targets: tuple[int, ...]


class Next(NamedTuple):
    """What both switches may be commanded after an event; `off` are those not commanded on then, each with whether the
    other's command has just come."""

    pair: Pair
    off: tuple[tuple[int, bool], ...]


class Ground:
    """Where the firmware can stand, by number, with all that leads from there to elsewhere."""

    def __init__(self, firmware: Firmware, stands: list[Stand]) -> None:
        """Work it out; `stands` only gives numbers. NotCovered if the firmware can stand where none of them is."""
        self._firmware = firmware
        self._numbers = {stand: number for number, stand in enumerate(stands)}
        self.start = self._number(self._firmware.start())
        self.rows: dict[int, tuple[str, ...]] = {}
        self.arcs: dict[int, tuple[Arcs, ...]] = {}
        waiting = [self.start]
        while waiting:
            number = waiting.pop()
            if number not in self.arcs:
                self.rows[number] = stands[number].cells.effective
                self.arcs[number] = self._leading(stands[number])
                for arcs in self.arcs[number]:
                    waiting += arcs.targets

    def _leading(self, stand: Stand) -> tuple[Arcs, ...]:
        soonest: dict[int, int] = {}
        for edge in self._firmware.edges(stand):
            target = self._number(edge.target)
            soonest[target] = min(edge.lo, soonest.get(target, edge.lo))
        found: dict[int | None, list[int]] = {}
        for target, least in soonest.items():
            found.setdefault(least, []).append(target)
        writes, cells = self._firmware.writes, stand.cells
        if cells.written != cells.effective:
            acted = [stand._replace(cells=writes.acted(cells, carrier)) for carrier in writes.waiting_for(cells)]
            found[None] = list(dict.fromkeys(map(self._number, acted)))
        return tuple(Arcs(least, tuple(targets)) for least, targets in found.items())

    def _number(self, stand: Stand) -> int:
        number = self._numbers.get(placed(stand))
        if number is None:
            where = "at rest" if stand.line < 0 else f"in run {stand.line}"
            raise NotCovered(f"Where the firmware comes to stand is not listed: {where} in {stand.mode}.")
        return number


def require_apart(scope: Scope, ground: Ground, places: tuple[int, int], said: Said) -> tuple[float, float]:
    """Raise NotCovered unless what is said proves that the two literals are possible together in no run.

    The answer is how much more than that is shown, after the first literal and after the second (ps): the possibility
    of the one, ended so much later, still meets the other's for no time.
    """
    return _Apart(scope, ground, places, said).required()


class _Apart:
    def __init__(self, scope: Scope, ground: Ground, places: tuple[int, int], said: Said) -> None:
        drive = scope.drive
        self._ground = ground
        self._said = said
        self._delays = tuple(scope.delays[place] for place in places)
        self._on = [scope.hazard.literals[place].on for place in places]
        self._names = tuple(scope.hazard.literals[place].switch for place in places)
        self._columns = tuple(drive.columns.index(name) for name in self._names)
        pins = [drive.pins.get(name) for name in self._names]
        one, other = ((Command.OFF if pin is None else pin.resting).value for pin in pins)
        self._rests: Pair = (one, other)
        self._complement: dict[str, str] = {}
        self._dead: dict[str, int] = {}
        for name, carrier in drive.carriers.items():
            self._complement |= {name: f"~{name}", f"~{name}": name}
            self._dead |= {name: carrier.dead.lo, f"~{name}": carrier.dead.lo}
        self._nexts: dict[Pair, dict[Pair, list[Next]]] = {}
        first, second = self._columns
        self._cells: dict[int, Pair] = {number: (row[first], row[second]) for number, row in ground.rows.items()}
        self._least: list[float] = [NO_BOUND, NO_BOUND]
        self._waiting: list[Point] = []
        self._reached: Said = {number: {} for number in ground.rows}

    def required(self) -> tuple[float, float]:
        """Go through all points that can be reached, then hold the least times against what must pass."""
        if not all(self._on):
            raise NotCovered("Only switches that are wanted on are held apart by least times.")
        for pair, _ in self._after(self._rests, self._cells[self._ground.start]):
            self._reach(self._ground.start, pair)
        while self._waiting:
            self._leave(self._waiting.pop())
        one, other = self._delays
        needs = (one.fall - other.rise, other.fall - one.rise)
        for place in (0, 1):
            if self._least[place] < needs[place]:
                raise NotCovered(
                    f"From {self._names[place]} off to {self._names[1 - place]} on {needs[place]} ps must pass, "
                    f"and {self._least[place]} ps are shown."
                )
        if sum(self._least) <= max(one.fall, other.fall):
            raise NotCovered("One switch may outlast a whole pulse of the other.")
        return self._least[0] - needs[0], self._least[1] - needs[1]

    def _reach(self, number: int, pair: Pair) -> Both:
        """What is said of a point that can be reached."""
        claimed = self._reached[number].get(pair)
        if claimed is None:
            if _commanded(pair[0]) and _commanded(pair[1]):
                raise NotCovered(f"{' and '.join(self._names)} may be commanded on at once.")
            claimed = self._said.get(number, {}).get(pair)
            if claimed is None:
                raise NotCovered("A point that can be reached is not spoken of.")
            self._reached[number][pair] = claimed
            self._waiting.append((number, pair))
        return claimed

    def _leave(self, point: Point) -> None:
        """Everything that can come next at a point."""
        number, pair = point
        alone = () if pair == self._cells[number] else (Arcs(None, (number,)),)  # constant cells change by writes alone
        for least, targets in (*alone, *self._ground.arcs[number]):
            since = self._since(point, least, 0), self._since(point, least, 1)
            for target in targets:
                cells = self._cells[target]
                for after, off in self._after(pair, cells):
                    claimed = self._reach(target, after)
                    for leaving, comes in off:
                        if since[leaving]:
                            self._hold(leaving, since[leaving], claimed[leaving], cells[1 - leaving] if comes else None)

    def _hold(self, leaving: int, since: Times, claimed: Times, coming: str | None) -> None:
        """What is said of one switch must not be more than what is so; `coming` is the other's cell if that comes."""
        for cell, time in since.items():
            if time < claimed.get(cell, NO_BOUND):
                raise NotCovered(f"{self._names[leaving]} may have been on sooner before than is said.")
            if coming is not None:
                self._comes(leaving, max(time, self._floor(cell, coming)))

    def _since(self, point: Point, least: int | None, leaving: int) -> Times:
        """The potentials of one switch after an event, if it is not commanded then."""
        if _commanded(point[1][leaving]):
            cell = self._cells[point[0]][leaving]
            return {cell if self._dead.get(cell) else "": UNKNOWN if least is None else 0}
        times = self._reached[point[0]][point[1]][leaving]
        if least is None:
            return times
        return {cell: 0 if time < 0 else time + least for cell, time in times.items()}

    def _comes(self, leaving: int, time: int) -> None:
        """The other switch's command comes so long after one's went away, or later."""
        self._least[leaving] = min(self._least[leaving], time)

    def _floor(self, left: str, joined: str) -> int:
        """An output that was on is followed by its complement no sooner than a dead time after."""
        return self._dead[left] if self._complement.get(left) == joined else 0

    def _after(self, before: Pair, cells: Pair) -> list[Next]:
        """What both may be commanded under `cells`, once they were `before`."""
        mine = self._nexts.setdefault(before, {})
        known = mine.get(cells)
        if known is None:
            one, other = (self._may_be(place, before[place], cells[place]) for place in (0, 1))
            pairs = [(a, b) for a in one for b in other if self._agree(cells, (a, b))]
            known = mine[cells] = [Next(after, _off(before, after)) for after in pairs]
        return known

    def _may_be(self, place: int, before: str, cell: str) -> set[str]:
        if cell in self._complement:
            return {"off", "on"}
        return {before, self._rests[place]} if cell == "free" else {cell}

    def _agree(self, cells: Pair, pair: Pair) -> bool:
        """Whether two switches can be commanded so that may be on one carrier."""
        if cells[0] in self._complement and cells[0] == cells[1]:
            return pair[0] == pair[1]
        return self._complement.get(cells[0]) != cells[1] or pair != ("on", "on")


def _commanded(command: str) -> bool:
    """Whether a switch is, or may be, commanded on."""
    return command != "off"


@cache
def _off(before: Pair, after: Pair) -> tuple[tuple[int, bool], ...]:
    return tuple(
        (place, _commanded(after[1 - place]) and not _commanded(before[1 - place]))
        for place in (0, 1)
        if not _commanded(after[place])
    )
