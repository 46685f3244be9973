"""The proof of one hazard: the screen, then zones with phases forgotten, then exact zones.

Everything is tried first with the firmware's upper bounds removed: what holds then holds however late the firmware is.
A run that is found where it proves nothing is followed at once where it would.
"""

from collections.abc import Callable
from itertools import product
from typing import TypeVar, cast

from seqcheck.drive import Drive, Interlock, Update
from seqcheck.faults import Spread
from seqcheck.firmware import Firmware
from seqcheck.hazards import Clearing, Following, Hazard, Lasting, Length, Nearing, Stuck, delays
from seqcheck.proving.certify import Data, cover
from seqcheck.proving.clocks import Manner
from seqcheck.proving.gaps import Asked, least_gap
from seqcheck.proving.keys import Key
from seqcheck.proving.looks import Looks, along, longest, may_hold, may_hold_in
from seqcheck.proving.memory import Count, Known, Memory, Question
from seqcheck.proving.potentials import potentials, stands
from seqcheck.proving.projection import Projection
from seqcheck.proving.reductions import Reduction
from seqcheck.proving.resting import rests
from seqcheck.proving.screen import Map, Places, least_after, screened
from seqcheck.proving.search import LimitReached, Node, first_hazard, first_held
from seqcheck.proving.shortest import shortest
from seqcheck.proving.spread import spread
from seqcheck.proving.tracing import gap_trace, rest_trace, short_trace, trace_of
from seqcheck.proving.views import View, view
from seqcheck.records import dataclass, replace
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


class Prover:
    """Proofs about one drive. Firmware automata and their maps are shared between the hazards that can share them.

    With `keep` the proofs that hazards are safe (interlocks included) are kept as data, for a certificate. Some of what
    makes proofs short can be left out (`without`); no answer changes by that. A `memory` may know answers that take
    long; it is not asked then, since an answer has no proof with it and was found with everything.
    """

    def __init__(
        self,
        drive: Drive,
        keep: bool = False,
        without: frozenset[Reduction] = frozenset(),
        memory: Memory | None = None,
    ) -> None:
        self.drive = drive
        self.keep = keep
        self.without = without
        self.memory = None if keep or without else memory
        self._firmwares: dict[tuple[frozenset[str], frozenset[str], bool, str | None], Firmware] = {}
        self._maps: dict[Firmware, Map] = {}
        self._stands: dict[Map, list[Data]] = {}
        self._screenings: dict[Hazard, Data] = {}
        self.margins: dict[Hazard, Data] = {}
        """The kept proofs of margins, by the hazard that asks for one (see Nearing)."""

    def prove(self, hazard: Hazard, interlocks: bool, observer: Observer) -> Proven | Refuted:
        """Prove or refute one hazard, with the drive's interlocks or as if it had none.

        What the observer raises passes through.
        """
        looking = view(self.drive, hazard, delays(hazard, self.drive.paths), interlocks)
        keep = self.keep and interlocks and not isinstance(hazard.asks, Stuck)
        if hazard.asks is None and Reduction.SCREEN not in self.without:
            here = self._map(self._firmware(looking, punctual=False), observer)
            if (apart := screened(looking, here)) is not None:
                return Proven("screen", 0, True, self._screened(looking, here, apart) if keep else None)
        looks, count = self._looks(looking), Count(observer, self.memory, Question("prove", looking, (interlocks,)))
        try:
            return _remembered(count, lambda: self._searched(looks, keep, interlocks, count))
        finally:
            looks.release()

    def _searched(self, looks: Looks, keep: bool, interlocks: bool, count: Count) -> Proven | Refuted:
        """What zones say.

        A run that was found with phases forgotten, or with firmware that may be late, is looked for at once where it
        would count: if it is found there, nothing else needs to be searched.
        """
        looking = looks.view
        for punctual in (False, True):
            for manner in looks.manners():
                projection = looks.projection(punctual, manner)
                count.next_search()
                node = first_hazard(projection.initial(), count)
                if node is None:
                    kept = cover(projection, not punctual) if keep else None
                    return Proven("zones", count.total, not punctual, kept)
                if _must_last(looking.hazard):
                    continue
                found = node if punctual and manner == looks.manners()[-1] else along(looks, projection, node, count)
                if found is not None:
                    return self._refute(looks, interlocks, found, count)
        return self._too_short(looks, count)

    def _too_short(self, looks: Looks, count: Count) -> Refuted:
        """The run in which what is too short is shortest."""
        assert isinstance(looks.view.hazard.asks, Length), "it asks for a length"
        limit = looks.view.hazard.asks.limit
        count.next_search()
        projection = looks.projection(True, looks.manners()[-1])
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
        if hazard.asks is None and Reduction.SCREEN not in self.without:
            here = self._map(self._firmware(looking, punctual=False), observer)
            if screened(looking, here) is not None:
                return True
        looks, count = self._looks(looking), Count(observer, self.memory, Question("holds", looking))
        searches = (looks.projection(True, manner) for manner in looks.manners())
        try:
            return _remembered(count, lambda: any(first_hazard(one.initial(), count) is None for one in searches))
        finally:
            looks.release()

    def _looks(self, looking: View) -> Looks:
        late, in_time = (self._firmware(looking, punctual) for punctual in (False, True))
        return Looks(looking, late, in_time, self.without)

    def gap(self, hazard: Hazard, watched: int, observer: Observer, below: int | None = None) -> Gap:
        """The least gap of a safe hazard after the literal at place `watched`: its margin in that direction.

        With interlocks, and with firmware as late as the drive allows. With `below` only a gap that is shorter (ps) is
        looked for. Where the observer raises LimitReached the answer is a lower bound. Raises Infeasible.
        """
        looking = view(self.drive, hazard, delays(hazard, self.drive.paths), interlocks=True)
        count = Count(observer, self.memory, Question("gap", looking, (watched, below)))
        return _remembered(count, lambda: self._gap(looking, watched, count, below))

    def _gap(self, looking: View, watched: int, count: Count, below: int | None) -> Gap:
        try:
            floor = self._floor(looking, watched, count)
        except LimitReached as limit:
            return Gap(0, None, str(limit))
        asked = replace(looking.hazard, asks=Nearing(watched, below)) if self.keep and below else None
        if floor is None or (below is not None and floor >= below):
            if asked is not None:
                here = self._map(self._firmware(looking, punctual=False), count)
                self.margins[asked] = self._screened(looking, here, (0, 1))
            return Gap(floor, None)
        looks = self._looks(looking)

        def look(manner: Manner) -> Projection:
            count.next_search()
            return looks.projection(True, manner)

        try:
            least = least_gap(look, watched, looks.manners(), Asked(floor, below), count)
            if least.node is not None:
                return Gap(least.time, gap_trace(least.projection, least.node, watched, least.time))
            if asked is not None and not least.limit:
                self.margins[asked] = cover(least.projection, however_late=False)
            return Gap(least.time if least.within or least.limit else None, None, least.limit)
        finally:
            looks.release()

    def _floor(self, looking: View, watched: int, count: Count) -> int | None:
        """A lower bound of a gap from least times alone; None where nothing ever follows."""
        if Reduction.SCREEN in self.without:
            return 0
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
        count = Count(observer)
        try:
            screens = Reduction.SCREEN not in self.without
            if screens and screened(looking, self._map(self._firmware(looking, punctual=False), count)) is not None:
                return Spread(frozenset(), frozenset())
        except LimitReached as limit:
            return Spread(frozenset(), frozenset(), str(limit))
        looks = self._looks(looking)
        *rough, exact = looks.manners()
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

    def at_rest(
        self, hazard: Hazard, modes: frozenset[str], observer: Observer
    ) -> dict[str, "Proven | Refuted | str"]:
        """For each mode whether the hazard comes at rest in it, with interlocks; a text names the limit that left it
        open.

        A hazard without literals comes wherever it is asked for. The overlap of a run is one at rest, not the greatest.
        Raises Infeasible.
        """
        looking = view(self.drive, hazard, delays(hazard, self.drive.paths), interlocks=True)
        count = Count(observer)
        try:
            screens = Reduction.SCREEN not in self.without
            if screens and screened(looking, self._map(self._firmware(looking, punctual=False), count)) is not None:
                return {mode: Proven("screen", 0, True) for mode in modes}
        except LimitReached as limit:
            return dict.fromkeys(modes, str(limit))
        looks = self._looks(looking)
        try:
            return self._rests(looks, modes, count)
        finally:
            looks.release()

    def _rests(self, looks: Looks, modes: frozenset[str], count: Count) -> dict[str, "Proven | Refuted | str"]:
        answers: dict[str, Proven | Refuted | str] = {}
        before = 0
        for punctual, manner in product((False, True), looks.manners()):
            count.next_search()
            projection = looks.projection(punctual, manner)
            holding = frozenset(mode for mode in modes if may_hold_in(looks.view, mode))
            found = rests(projection.initial(), modes, holding, count)
            sure = punctual and not manner.forget
            if found.limit is not None:
                answers |= {mode: found.limit for mode in modes if not sure or mode not in found.nodes}
                modes = modes & found.nodes.keys() if sure else frozenset()
            for mode in sorted(modes - found.nodes.keys()):
                answers[mode] = Proven("zones", count.total - before, not punctual)
                before = count.total  # zones that serve several modes are counted once
            modes = modes & found.nodes.keys()
            if sure:
                answers |= {mode: _at_rest(projection, found.nodes[mode]) for mode in modes}
            if not modes:
                break
        return answers

    def _screened(self, looking: View, here: Map, apart: Places) -> Data:
        """The proof of the screen as data; hazards that share a map share the list of its states.

        Margins of a hazard share its proof: there the screen has settled it with the same two literals.
        """
        if here not in self._stands:
            self._stands[here] = stands(here)
        known = self._screenings.get(looking.hazard)
        if known is None or known["pair"] != list(apart):
            known = {**potentials(looking, here, apart), "stands": self._stands[here]}
            self._screenings[looking.hazard] = known
        return known

    def _refute(self, looks: Looks, interlocks: bool, first: Node, count: Count) -> Refuted:
        """The longest overlap of a hazard that happens; `first` is a run that brings it."""
        try:
            return self._measured(looks, interlocks, count)
        except LimitReached:
            return self._first(looks, interlocks, first)

    def _measured(self, looks: Looks, interlocks: bool, count: Count) -> Refuted:
        """The run with the longest overlap, or to a mode that holds the hazard."""
        exact = looks.projection(True, looks.manners(measure=True)[-1])
        found = longest(looks, count)
        whole = trace_of(exact, found.node, found.time is None, interlocks)
        if found.held is not None:
            return Refuted(whole, _mode(found.held), found.time, count.total, found.greatest)
        if not may_hold(looks.view):
            return Refuted(whole, None, found.time, count.total, found.greatest)
        trace, mode = self._held(looks, interlocks, count)
        return Refuted(trace or whole, mode, found.time, count.total, found.greatest)

    def _first(self, looks: Looks, interlocks: bool, node: Node) -> Refuted:
        """The first run found: a limit was reached before a longer one was."""
        projection = looks.projection(True, looks.manners()[-1])
        endless = not node.location.bounds
        trace = trace_of(projection, node, endless, interlocks)
        overlap = None if endless else trace.end - trace.overlap_from
        return Refuted(trace, _mode(node) if node.location.held else None, overlap, 0, endless)

    def _held(self, looks: Looks, interlocks: bool, count: Count) -> tuple[Trace | None, str | None]:
        """The shortest run to a mode that itself holds the hazard, and the mode, if there is one."""
        *rough, exact = looks.manners()
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


Answer = TypeVar("Answer")


def _remembered(count: Count, found: Callable[[], Answer]) -> Answer:
    """What the memory of a count knows, or what is found; the memory keeps the kind of answer that it was given."""
    try:
        answer = found()
    except Known as known:
        return cast(Answer, known.answer)
    count.keep(answer)
    return answer


def _at_rest(projection: Projection, node: Node) -> Refuted:
    endless = not node.location.bounds
    trace = rest_trace(projection, node, endless)
    overlap = None if endless else trace.end - trace.overlap_from
    return Refuted(trace, _mode(node) if node.location.held else None, overlap, 0, endless)


def _must_last(hazard: Hazard) -> bool:
    """Whether the question is about a length that is too short."""
    asks = hazard.asks
    return isinstance(asks, Following) or (isinstance(asks, Lasting) and not asks.longer)


def _mode(node: Node) -> str:
    key = node.location.key
    assert isinstance(key, Key)
    return key.state.mode
