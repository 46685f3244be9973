"""A whole file proven for all values of one quantity at once, or for one of them.

All values are proven by one drive that allows all that any of them allows. Its times are the widest: the least of all
lower bounds, the greatest of all upper ones. What can be possible comes with times that are wider (a longer time to go
off, a shorter one to come on, a wait that may be shorter or longer, a rule that is stricter), and never goes with them.
So a hazard that happens in no run of that drive happens in none of any of the values. The converse does not hold: in
the wide drive one run may take the shortest wait in one place and the longest in another.

Two things do not only come with wider times and are looked at for themselves: what the mode graph leaves out, which has
to be the same for all values (modegraph), and `difference`, which is dropped on paths whose own times depend on the
quantity. Where any of this has no one answer for all values, nothing is said of them together.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import partial

from seqcheck.checking import row_meanings
from seqcheck.circuit import opening_sets, shorting_sets
from seqcheck.drive import ApartRule, ClearsRule, Drive, LastsRule, MarginRule, NeverRule, Part, ToleratesRule
from seqcheck.hazards import Hazard
from seqcheck.language.varied import Varied
from seqcheck.messages import Problems
from seqcheck.modegraph import alike_throughout, graph_findings
from seqcheck.proving.prove import Prover, Refuted
from seqcheck.proving.search import LimitReached
from seqcheck.ranging import Mixed, Stretch
from seqcheck.reports.waived import own_names, reason
from seqcheck.rules import asked_by, check_of_rule
from seqcheck.source import Place
from seqcheck.tolerating import tolerated
from seqcheck.verdict import WARNINGS, Check, Safe, Unsafe

Observer = Callable[[int], None]
Interval = tuple[Fraction, Fraction | None]
Key = tuple[object, ...]

MOST_ZONES = 20_000
"""Zones for one hazard over a whole interval; where that is not enough a smaller one is tried."""

_TOGETHER: Key = ("together",)
"""The question whether values can be taken together at all, and what needs no run is in order."""

_WITHOUT_RUN = frozenset(
    one.value
    for one in (Check.UNREACHABLE, Check.NO_WAY_BACK, Check.AMBIGUOUS, Check.STALLED, Check.ROW_MEANING, *WARNINGS)
)
"""Checks whose findings need no run: what waives them is known without a proof."""

_KEPT = 8
"""Wide drives that are kept, with what their provers know."""

_RULES = (MarginRule, NeverRule, ClearsRule, LastsRule, ApartRule, ToleratesRule)
"""Rules whose hazards only come with wider times. Of a drive with any other, only single values are proven."""


@dataclass(frozen=True, slots=True)
class _Wide:
    """The drive of all values of an interval, with a prover for it."""

    drive: Drive
    prover: Prover


class Over:
    """Proofs of one file over intervals of one `let`; what was found for one interval serves those within.

    `waives_runs`: whether a waiver may let a run pass, which only `lint` itself decides for a single value.
    """

    def __init__(self, varied: Varied, name: str, observer: Observer) -> None:
        self._varied = varied
        self._name = name
        self._observer = observer
        self._wides: dict[Interval, _Wide | None] = {}
        self._proven: dict[Key, list[Interval]] = {}
        self._refuted: dict[Key, list[Interval]] = {}
        self._suspects: dict[Key, None] = {}
        self.waives_runs = any(one.check not in _WITHOUT_RUN for one in varied.drive.waivers)
        self._sets = (*shorting_sets(varied.drive.stage), *opening_sets(varied.drive.stage))

    def holds(self, first: Fraction, last: Fraction | None) -> bool:
        """Whether the whole file is proven for all values from `first` to `last` (None: without end) at once.

        False says nothing of any one value, but where both are the same value.
        """
        return self.amiss(first, last) is None

    def amiss(self, first: Fraction, last: Fraction | None) -> Key | None:
        """As `holds`, with the name of one question that is answered by no; None where all are answered by yes."""
        here = (first, last)
        wide = self._wide(here)
        if wide is None or not self._in_order(first):
            return _TOGETHER
        questions = dict(self._questions(wide))
        suspects = [key for key in self._suspects if key in questions]
        order = dict.fromkeys((*reversed(suspects), *questions))
        return next((key for key in order if not self._answer(key, questions[key], here)), None)

    def questions(self, first: Fraction, last: Fraction | None) -> tuple[Key, ...]:
        """The names of all questions about an interval; empty where its values cannot be taken together."""
        wide = self._wide((first, last))
        return () if wide is None else tuple(key for key, _ in self._questions(wide))

    def fine(self, key: Key, first: Fraction, last: Fraction | None) -> bool:
        """Whether one question is answered by yes for all values of an interval at once."""
        here = (first, last)
        wide = self._wide(here)
        if wide is None or key == _TOGETHER:
            return wide is not None and self._in_order(first)
        question = dict(self._questions(wide)).get(key)
        return question is None or self._answer(key, question, here)

    def drive_at(self, value: Fraction) -> Drive:
        """The drive with a single value. Raises Problems."""
        return self._varied.with_values({self._name: value})

    def idle(self, today: Fraction) -> bool:
        """Whether nothing of the drive is made of the quantity."""
        stretch = Stretch(today, None, True)
        try:
            self._varied.with_values({self._name: stretch.quantity()})
        except (Mixed, Problems):
            return False
        return not stretch.asked

    # The wide drive

    def _wide(self, here: Interval) -> _Wide | None:
        """None where the values cannot be taken together."""
        if here not in self._wides:
            if len(self._wides) == _KEPT:
                self._wides.clear()
            self._wides[here] = self._widened(here)
        return self._wides[here]

    def _widened(self, here: Interval) -> _Wide | None:
        try:
            outer, inner = self._read(here, True), self._read(here, False)
        except (Mixed, Problems):
            return None
        single = here[0] == here[1]
        if not single and not all(isinstance(rule, _RULES) for rule in outer.rules):
            return None
        if not alike_throughout(outer, inner):
            return None
        drive = _without_differences(outer, inner)
        return _Wide(drive, Prover(drive))

    def _read(self, here: Interval, outer: bool) -> Drive:
        return self._varied.with_values({self._name: Stretch(*here, outer).quantity()})

    def _in_order(self, value: Fraction) -> bool:
        """Whether nothing is amiss that needs no run, or a waiver lets it pass; that is alike for a whole interval."""
        try:
            drive = self.drive_at(value)
        except Problems:
            return False
        return all(reason(drive, one) is not None for one in (*graph_findings(drive), *row_meanings(drive)))

    # What is asked

    def _questions(self, wide: _Wide) -> Iterator[tuple[Key, Callable[[], bool]]]:
        """All that `lint` asks of runs, each by a name that it has for all values."""
        margins = [rule for rule in wide.drive.rules if isinstance(rule, MarginRule)]
        for at, hazard in enumerate(self._sets):
            yield ("set", at), partial(self._safe, wide, hazard, None)
            for least in margins if hazard.joins else ():
                yield ("margin", at, least.place.line), partial(self._far_enough, wide, hazard, least)
        for rule in wide.drive.rules:
            for at, hazard in enumerate(asked_by(rule)):
                yield ("rule", rule.place.line, at), partial(self._safe, wide, hazard, rule.place)
            if isinstance(rule, ToleratesRule):
                yield ("faults", rule.place.line), partial(self._tolerates, wide, rule)

    def _answer(self, key: Key, question: Callable[[], bool], here: Interval) -> bool:
        if any(_within(here, one) for one in self._proven.get(key, ())):
            return True
        if any(_within(one, here) for one in self._refuted.get(key, ())):
            return False
        try:
            holds = question()
        except LimitReached:
            holds = False
        (self._proven if holds else self._refuted).setdefault(key, []).append(here)
        if not holds:
            self._suspects.pop(key, None)
            self._suspects[key] = None
        return holds

    def _safe(self, wide: _Wide, hazard: Hazard, rule: Place | None) -> bool:
        return wide.prover.holds(hazard, self._limited) or self._waived(wide, hazard, rule)

    def _waived(self, wide: _Wide, hazard: Hazard, rule: Place | None) -> bool:
        """Whether a waiver lets a hazard pass wherever it happens."""
        names = own_names(wide.drive, hazard)
        checks = {one.check for one in wide.drive.waivers if one.name in names}
        if not checks:
            return False
        if rule is not None:
            return check_of_rule(hazard).value in checks
        if hazard.currents:
            return Check.OPEN_WINDING.value in checks
        if Check.OVERLAP.value not in checks:
            return False
        if Check.SHORT.value in checks:
            return True
        ended: list[int] = []

        def watched(zones: int) -> None:
            try:
                self._limited(zones)
            except LimitReached:
                ended.append(zones)
                raise

        proof = wide.prover.prove(hazard, True, watched)
        return isinstance(proof, Refuted) and proof.held is None and not ended

    def _far_enough(self, wide: _Wide, hazard: Hazard, rule: MarginRule) -> bool:
        names = own_names(wide.drive, hazard)
        if any(one.check == Check.THIN_MARGIN.value and one.name in names for one in wide.drive.waivers):
            return True
        if not wide.prover.holds(hazard, self._limited):
            return False
        for at in range(len(hazard.literals)):
            gap = wide.prover.gap(hazard, at, self._limited, rule.least)
            if gap.limit or gap.trace is not None:
                return False
        return True

    def _tolerates(self, wide: _Wide, rule: ToleratesRule) -> bool:
        shorts = [hazard for hazard in self._sets if hazard.joins]
        waived = {one.name for one in wide.drive.waivers if one.check == Check.SINGLE_FAULT.value}
        return all(
            isinstance(one, Safe) or (isinstance(one, Unsafe) and bool(waived & own_names(wide.drive, one.hazard)))
            for one in tolerated(wide.prover, shorts, [rule], self._limited)
        )

    def _limited(self, zones: int) -> None:
        self._observer(zones)
        if zones > MOST_ZONES:
            raise LimitReached(f"{MOST_ZONES} zones over an interval")


def _within(one: Interval, other: Interval) -> bool:
    """Whether an interval lies inside another."""
    if one[0] < other[0]:
        return False
    return other[1] is None or (one[1] is not None and one[1] <= other[1])


def _without_differences(outer: Drive, inner: Drive) -> Drive:
    """The wide drive without `difference` on paths with times of their own that are not the same for all values.

    A difference lets one switch come the later, the later the other may go. With the latest of all values for the one
    that would be later than some of the values let it be.
    """
    changing = {
        name
        for name, part in outer.parts.items()
        if (part.on.lo, part.off.hi) != (inner.parts[name].on.lo, inner.parts[name].off.hi)
    }

    def plain(path: tuple[Part, ...]) -> tuple[Part, ...]:
        if not any(part.name in changing for part in path):
            return path
        return tuple(replace(part, difference=None) for part in path)

    return replace(outer, paths={switch: plain(path) for switch, path in outer.paths.items()})
