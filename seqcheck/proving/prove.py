"""The proof of one hazard: the screen, then zones with phases forgotten, then exact zones.

Everything is tried first with the firmware's upper bounds removed: what holds then holds however late the firmware is.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

from seqcheck.drive import Cell, Command, Drive, Fixed, Follow, Interlock, Update
from seqcheck.faults import Spread
from seqcheck.firmware import Firmware
from seqcheck.hazards import Clearing, Following, Hazard, Lasting, Literal, delays
from seqcheck.proving.certify import Data, cover
from seqcheck.proving.clocks import Manner
from seqcheck.proving.gaps import Asked, least_gap
from seqcheck.proving.keys import Key
from seqcheck.proving.potentials import potentials, stands
from seqcheck.proving.projection import Projection
from seqcheck.proving.screen import Map, Places, least_after, screened
from seqcheck.proving.search import LimitReached, Longest, Node, first_hazard, first_held, longest_overlap
from seqcheck.proving.shortest import shortest
from seqcheck.proving.spread import spread
from seqcheck.proving.tracing import gap_trace, short_trace, trace_of
from seqcheck.proving.views import View, view
from seqcheck.proving.wiring import Wiring
from seqcheck.verdict import Trace
from seqcheck.zones import INFINITE

Observer = Callable[[int], None]


@dataclass(frozen=True, slots=True)
class Proven:
    """No run brings the hazard; `method` is "screen" or "zones".

    `data` is the proof as data (see certify and potentials), where the prover keeps proofs.
    """

    method: str
    zones: int
    however_late: bool
    data: Data | None = None


@dataclass(frozen=True, slots=True)
class Refuted:
    """A run that brings the hazard; `held` is the mode that itself holds it, None where it comes in passing.

    `overlap` None is without end; `greatest` tells whether no run brings more. It is what is missing where a length is
    too short.
    """

    trace: Trace
    held: str | None
    overlap: int | None
    zones: int
    greatest: bool


@dataclass(frozen=True, slots=True)
class Gap:
    """How soon after one literal of a safe hazard all others can be possible, at the soonest (ps); None: never.

    In `trace` the literal, prolonged by 1 ps more than that, meets the others. Without a trace `time` is a lower bound:
    all that was asked for, or what was known when the `limit` was reached.
    """

    time: int | None
    trace: Trace | None
    limit: str = ""


@dataclass(slots=True)
class _Count:
    """Zones over all searches of one proof."""

    observer: Observer
    before: int = 0
    last: int = 0

    def __call__(self, count: int) -> None:
        self.last = count
        self.observer(self.before + count)

    def next_search(self) -> None:
        self.before, self.last = self.before + self.last, 0

    @property
    def total(self) -> int:
        return self.before + self.last


class Prover:
    """Proofs about one drive. Firmware automata and their maps are shared between the hazards that can share them.

    With `keep` the proofs that hazards are safe (interlocks included) are kept as data, for a certificate.
    """

    def __init__(self, drive: Drive, keep: bool = False) -> None:
        self.drive = drive
        self.keep = keep
        self._firmwares: dict[tuple[frozenset[str], frozenset[str], bool, str | None], Firmware] = {}
        self._maps: dict[Firmware, Map] = {}
        self._stands: dict[Map, list[Data]] = {}

    def prove(self, hazard: Hazard, interlocks: bool, observer: Observer) -> Proven | Refuted:
        """Prove or refute one hazard, with the drive's interlocks or as if it had none.

        What the observer raises passes through.
        """
        looking = view(self.drive, hazard, delays(hazard, self.drive.paths), interlocks)
        count, keep = _Count(observer), self.keep and interlocks and hazard.asks is None
        if hazard.asks is None:
            here = self._map(self._firmware(looking, punctual=False), count)
            if (apart := screened(looking, here)) is not None:
                return Proven("screen", 0, True, self._screened(looking, here, apart) if keep else None)
        looks = self._looks(looking)
        try:
            return self._searched(looks, keep, interlocks, count)
        finally:
            looks.release()

    def _searched(self, looks: "_Looks", keep: bool, interlocks: bool, count: _Count) -> Proven | Refuted:
        """What zones say.

        A run that was found with phases forgotten, or with firmware that may be late, is looked for at once where it
        would count: if it is found there, nothing else needs to be searched.
        """
        looking = looks.view
        for punctual in (False, True):
            for manner in _manners(looking):
                projection = looks.projection(punctual, manner)
                count.next_search()
                node = first_hazard(projection.initial(), count)
                if node is None:
                    kept = cover(projection, not punctual) if keep else None
                    return Proven("zones", count.total, not punctual, kept)
                if _must_last(looking.hazard):
                    continue
                found = node if punctual and manner == _manners(looking)[-1] else _along(looks, projection, node, count)
                if found is not None:
                    return self._refute(looks, interlocks, found, count)
        return self._too_short(looks, count)

    def _too_short(self, looks: "_Looks", count: _Count) -> Refuted:
        """The run in which what is too short is shortest."""
        assert looks.view.hazard.asks is not None, "it asks for a length"
        limit = looks.view.hazard.asks.limit
        count.next_search()
        projection = looks.projection(True, _manners(looks.view)[-1])
        try:
            found = shortest(projection, count)
        except LimitReached:  # the search for any such run ended before
            found = shortest(projection.anew(), lambda _: None, any_will_do=True)
        assert found is not None, "it was found before"
        return Refuted(short_trace(projection, found.node), None, limit - found.time, count.total, found.least)

    def holds(self, hazard: Hazard, observer: Observer, locks: tuple[Interlock, ...] | None = None) -> bool:
        """Whether the hazard happens in no run, with firmware in time; without a trace.

        `locks` stand in place of the drive's interlocks. What the observer raises passes through.
        """
        drive = self.drive if locks is None else replace(self.drive, interlocks=locks)
        looking = view(drive, hazard, delays(hazard, drive.paths), interlocks=True)
        count = _Count(observer)
        if hazard.asks is None:
            here = self._map(self._firmware(looking, punctual=False), count)
            if screened(looking, here) is not None:
                return True
        looks = self._looks(looking)
        try:
            return any(
                first_hazard(looks.projection(True, manner).initial(), count) is None for manner in _manners(looking)
            )
        finally:
            looks.release()

    def _looks(self, looking: View) -> "_Looks":
        return _Looks(looking, self._firmware(looking, punctual=False), self._firmware(looking, punctual=True))

    def gap(self, hazard: Hazard, watched: int, observer: Observer, below: int | None = None) -> Gap:
        """The least gap of a safe hazard after the literal at place `watched`: its margin in that direction.

        With interlocks, and with firmware as late as the drive allows. With `below` only a gap that is shorter (ps) is
        looked for. Where the observer raises LimitReached the answer is a lower bound. Raises Infeasible.
        """
        looking = view(self.drive, hazard, delays(hazard, self.drive.paths), interlocks=True)
        count = _Count(observer)
        try:
            floor = self._floor(looking, watched, count)
        except LimitReached as limit:
            return Gap(0, None, str(limit))
        if floor is None:
            return Gap(None, None)
        if below is not None and floor >= below:
            return Gap(floor, None)
        looks = self._looks(looking)

        def look(manner: Manner) -> Projection:
            count.next_search()
            return looks.projection(True, manner)

        try:
            least = least_gap(look, watched, bool(looking.carriers), Asked(floor, below), count)
            if least.node is not None:
                return Gap(least.time, gap_trace(least.projection, least.node, watched, least.time))
            return Gap(least.time if least.within or least.limit else None, None, least.limit)
        finally:
            looks.release()

    def _floor(self, looking: View, watched: int, count: _Count) -> int | None:
        """A lower bound of a gap from least times alone; None where nothing ever follows."""
        if len(looking.hazard.literals) != 2 or looking.locks or not all(one.on for one in looking.hazard.literals):
            return 0
        bound = least_after(looking, self._map(self._firmware(looking, punctual=False), count), watched)
        if bound is None:
            return 0
        return None if bound >= INFINITE else bound

    def spread(self, hazard: Hazard, observer: Observer) -> Spread:
        """All places in which a hazard happens, with interlocks and with firmware as late as the drive allows.

        A hazard without literals happens wherever it is asked for. A limit of the observer leaves some places out, and
        is named.
        """
        looking = view(self.drive, hazard, delays(hazard, self.drive.paths), interlocks=True)
        count = _Count(observer)
        try:
            if screened(looking, self._map(self._firmware(looking, punctual=False), count)) is not None:
                return Spread(frozenset(), frozenset())
        except LimitReached as limit:
            return Spread(frozenset(), frozenset(), str(limit))
        *rough, exact = _manners(looking)
        looks = self._looks(looking)
        ceiling = None
        try:
            for manner in rough:
                ceiling = spread(looks.projection(True, manner).initial(), count, None)
                if ceiling.limit is not None or not ceiling.places:
                    return Spread(frozenset(), frozenset(), ceiling.limit)
                count.next_search()
            return spread(looks.projection(True, exact).initial(), count, ceiling)
        finally:
            looks.release()

    def _screened(self, looking: View, here: Map, apart: Places) -> Data:
        """The proof of the screen as data; hazards that share a map share the list of its states."""
        if here not in self._stands:
            self._stands[here] = stands(here)
        return {**potentials(looking, here, apart), "stands": self._stands[here]}

    def _refute(self, looks: "_Looks", interlocks: bool, first: Node, count: _Count) -> Refuted:
        """The longest overlap of a hazard that happens; `first` is a run that brings it."""
        try:
            return self._measured(looks, interlocks, count)
        except LimitReached:
            return self._first(looks, interlocks, first)

    def _measured(self, looks: "_Looks", interlocks: bool, count: _Count) -> Refuted:
        """The run with the longest overlap, or to a mode that holds the hazard."""
        exact = looks.projection(True, _manners(looks.view, measure=True)[-1])
        found = _longest(looks, count)
        longest = trace_of(exact, found.node, found.time is None, interlocks)
        if found.held is not None:
            return Refuted(longest, _mode(found.held), found.time, count.total, found.greatest)
        if not _may_hold(looks.view):
            return Refuted(longest, None, found.time, count.total, found.greatest)
        trace, mode = self._held(looks, interlocks, count)
        return Refuted(trace or longest, mode, found.time, count.total, found.greatest)

    def _first(self, looks: "_Looks", interlocks: bool, node: Node) -> Refuted:
        """The first run found: a limit was reached before a longer one was."""
        projection = looks.projection(True, _manners(looks.view)[-1])
        endless = not node.location.bounds
        trace = trace_of(projection, node, endless, interlocks)
        overlap = None if endless else trace.end - trace.overlap_from
        return Refuted(trace, _mode(node) if node.location.held else None, overlap, 0, endless)

    def _held(self, looks: "_Looks", interlocks: bool, count: _Count) -> tuple[Trace | None, str | None]:
        """The shortest run to a mode that itself holds the hazard, and the mode, if there is one."""
        *rough, exact = _manners(looks.view)
        for manner in rough:
            count.next_search()
            if first_held(looks.projection(True, manner).initial(), count) is None:
                return None, None
        count.next_search()
        projection = looks.projection(True, exact)
        node = first_held(projection.initial(), count)
        if node is None:
            return None, None
        return trace_of(projection, node, not node.location.bounds, interlocks), _mode(node)

    def _firmware(self, looking: View, punctual: bool) -> Firmware:
        waiting = frozenset(
            name for name in looking.carriers if self.drive.carriers[name].update is not Update.AT_ONCE
        )
        asks = looking.hazard.asks
        early = asks.trip if isinstance(asks, Clearing) else None
        key = (waiting, looking.held if waiting else frozenset(), punctual, early)
        if key not in self._firmwares:
            self._firmwares[key] = Firmware(self.drive, *key)
        return self._firmwares[key]

    def _map(self, firmware: Firmware, observer: Observer) -> Map:
        if firmware not in self._maps:
            self._maps[firmware] = Map(firmware, observer)
        return self._maps[firmware]


class _Looks:
    """The projections of one hazard, each made once: what the drive can do is worked out for all its searches."""

    def __init__(self, looking: View, late: Firmware, in_time: Firmware) -> None:
        self.view = looking
        self._wirings = tuple(Wiring(looking, firmware) for firmware in (late, in_time))
        self._made: dict[tuple[bool, Manner], Projection] = {}

    def projection(self, punctual: bool, manner: Manner) -> Projection:
        """The drive as it is looked at, with nothing stored; a search of it before this one is over."""
        made = self._made.get((punctual, manner))
        if made is not None:
            return made.anew()
        wiring = self._wirings[punctual]
        made = self._made[punctual, manner] = Projection(self.view, wiring.firmware, manner, wiring)
        return made

    def release(self) -> None:
        """Let go of all locations, which hold each other; nothing that was found may be asked for hops any more."""
        for made in self._made.values():
            made.release()


def _along(looks: _Looks, projection: Projection, node: Node, count: _Count) -> Node | None:
    """A run like the one to a node, with exact phases and with firmware in time; None if none is found."""
    images = {projection.image(key) for key in _keys(node)}
    exact = looks.projection(True, _manners(looks.view)[-1])
    count.next_search()
    return first_hazard(exact.initial(), count, exact.along(images))


def _longest(looks: _Looks, count: _Count) -> Longest:
    """The longest overlap. With phases forgotten none is shorter, and none takes fewer moves; so one like it is looked for
    along that run first, and else the search for any other ends with one that is as long."""
    ceiling: int | None = None
    *rough, exact = _manners(looks.view, measure=True)
    for manner in rough:
        projection = looks.projection(True, manner)
        count.next_search()
        bound = longest_overlap(projection.initial(), count, None)
        if bound is None or not bound.greatest:
            continue
        ceiling = bound.time
        images = {projection.image(key) for key in _keys(bound.node)}
        projection = looks.projection(True, exact)
        count.next_search()
        found = longest_overlap(projection.initial(), count, ceiling, projection.along(images))
        if found is not None and found.time == ceiling and found.node.moves == bound.node.moves:
            return found
    count.next_search()
    found = longest_overlap(looks.projection(True, exact).initial(), count, ceiling)
    assert found is not None, "a first hazard was found before"
    return found


def _keys(node: Node) -> list[Key]:
    keys = [one.location.key for one in node.path()]
    assert all(isinstance(key, Key) for key in keys)
    return keys  # type: ignore[return-value]


def _manners(looking: View, measure: bool = False) -> tuple[Manner, ...]:
    exact = Manner(forget=False, cut=True, measure=measure)
    return (Manner(forget=True, cut=True, measure=measure), exact) if looking.carriers else (exact,)


def _must_last(hazard: Hazard) -> bool:
    """Whether the question is about a length that is too short."""
    asks = hazard.asks
    return isinstance(asks, Following) or (isinstance(asks, Lasting) and not asks.longer)


def _may_hold(looking: View) -> bool:
    """Whether some row could command all literals at once."""
    if isinstance(looking.hazard.asks, Clearing):
        return False
    drive = looking.drive
    columns = [(drive.columns.index(one.switch), one) for one in looking.hazard.literals]
    for mode in drive.modes.values():
        cells = [(mode.cells[column], one) for column, one in columns]
        on = {cell for cell, one in cells if one.on}
        opposites = any(isinstance(cell, Follow) and replace(cell, inverted=not cell.inverted) in on for cell in on)
        if not opposites and all(_may_be(drive, cell, one) for cell, one in cells):
            return True
    return False


def _may_be(drive: Drive, cell: Cell, literal: Literal) -> bool:
    """Whether a cell at rest can command what a literal wants."""
    if cell is Fixed.FREE and literal.switch in drive.pins:
        return drive.pins[literal.switch].resting is not (Command.OFF if literal.on else Command.ON)
    return cell is not (Fixed.OFF if literal.on else Fixed.ON)


def _mode(node: Node) -> str:
    key = node.location.key
    assert isinstance(key, Key)
    return key.state.mode
