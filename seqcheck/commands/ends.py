"""Where the range of a quantity ends: the outermost values that are proven, and what the next ones bring."""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from fractions import Fraction
from math import ceil, floor

from seqcheck.checking import check
from seqcheck.commands.over import Key, Observer, Over
from seqcheck.messages import Problems
from seqcheck.ranges import Beyond, End, Ends, Patch, Tried
from seqcheck.reports.waived import reason
from seqcheck.verdict import WARNINGS, Check, Finding, Outcome, Undecided, Unsafe

FARTHEST = 1 << 10
"""No range is looked for beyond so many times the value that it begins with, or so many steps if that is more."""

FARTHEST_OFF = 1 << 20
"""No value that holds is looked for farther from one that does not than so many times that one, or so many steps."""

MOST_PARTS = 32
"""Pieces that one side of a range may be put together from before it is given up."""

MOST_TRIED = 200
"""Values nearer than one that holds that are all tried, so that it is surely the nearest."""


@dataclass(frozen=True, slots=True)
class Steps:
    """The values that count, seen from one of them: that one, then the multiples of the step beyond it."""

    start: Fraction
    step: Fraction
    up: bool

    def __call__(self, at: int) -> Fraction:
        """The value so many steps away; the first step from between two multiples is a shorter one."""
        whole = self.start / self.step
        number = floor(whole) + at if self.up else ceil(whole) - at
        return number * self.step if at else self.start


@dataclass(frozen=True, slots=True)
class Found:
    """A range, its ends and the pieces that it was put together from, lowest first."""

    low: End
    high: End
    parts: tuple[Patch, ...]


class Search:
    """The search for the ends of one quantity of one file."""

    def __init__(self, over: Over, file: str, step: Fraction, observer: Observer) -> None:
        self._over = over
        self._file = file
        self._step = step
        self._observer = observer

    def around(self, value: Fraction) -> Found:
        """The range around a value that holds."""
        low, below = self._end(Steps(value, self._step, False))
        high, above = self._end(Steps(value, self._step, True))
        parts = (*(_turned(one) for one in reversed(below)), *above)
        return Found(low, high, tuple(self._joined(parts)))

    def beside(self, value: Fraction) -> tuple[Found | None, Tried]:
        """The range nearest to a value that does not hold, of those that were found, and what was tried."""
        near = self._some_near(value)
        if near is None:
            return None, Tried(0, 0)
        while True:
            found = self.around(near)
            edge = found.low.value if near > value else found.high.value
            assert edge is not None, "the value itself does not hold"
            nearer = _nearer(value, edge, self._step)
            if len(nearer) > MOST_TRIED:
                return found, Tried(len(nearer), 0)
            near = next((one for one in nearer if self._point(one)), edge)
            if near == edge:
                return found, Tried(len(nearer), len(nearer))

    def _some_near(self, value: Fraction) -> Fraction | None:
        """A value that holds, looked for at distances that double."""
        width = 1
        most = max(abs(value), self._step) * FARTHEST_OFF
        sides = [Steps(value, self._step, up) for up in (True, False)]
        while True:
            for away in sorted(sides, key=lambda side: abs(side(width) - value)):
                if self._point(away(width)):
                    return away(width)
            if abs(sides[0](width)) > most:
                return None
            width *= 2

    def judged(self, value: Fraction) -> Beyond | None:
        """What `lint` would find amiss with a value, or leave undecided; None where it holds. Raises Fault."""
        try:
            outcome = check(self._over.drive_at(value), self._file, frozenset(), self._observer)
        except Problems as problems:
            return Beyond(value, problems.found)
        return None if holds(outcome) else Beyond(value, outcome)

    def _point(self, value: Fraction) -> bool:
        """Whether a single value holds; the quick way first."""
        return self._over.holds(value, value) or (self._over.waives_runs and self.judged(value) is None)

    # One end

    def _end(self, value: Callable[[int], Fraction]) -> tuple[End, list[Patch]]:
        """The end on one side of a value that holds, and the pieces from there to it."""
        parts: list[Patch] = []
        start, up = 0, value(1) > value(0)
        while True:
            if up and self._over.holds(value(start), None):
                return End(None, Ends.OPEN), [*parts, Patch(value(start), None, True)]
            last = self._farthest(value, start)
            parts.append(Patch(value(start), value(last), True))
            if abs(value(last)) > self._most(value(0)):
                return End(value(last), Ends.FAR), parts
            beyond = self.judged(value(last + 1))
            if beyond is not None:
                limit = _limit(beyond)
                return End(value(last), Ends.UNDECIDED if limit else Ends.FAILS, beyond, limit), parts
            if len(parts) > MOST_PARTS:
                return End(value(last), Ends.UNDECIDED, None, f"{MOST_PARTS} proofs for pieces of the range"), parts
            start = last if self._all(value(last), value(last + 1)) else last + 1

    def _farthest(self, value: Callable[[int], Fraction], start: int) -> int:
        """How far all values from a place on are proven at once.

        More values are never easier to prove, so this is found by going out and halving; one question at a time, since
        the first that fails mostly sets the end for all.
        """
        good, bound = start, start + max(1, floor(abs(value(start)) / self._step))
        while (key := self._over.amiss(*_ordered(value(start), value(bound)))) is None:
            if abs(value(bound)) > self._most(value(0)):
                return bound
            good, bound = bound, start + 4 * (bound - start)
        while key is not None:
            bound = self._halved(value, start, good, bound, key)
            key = self._over.amiss(*_ordered(value(start), value(bound))) if bound > good else None
        return bound

    def _halved(self, value: Callable[[int], Fraction], start: int, good: int, bad: int, key: Key) -> int:
        """How far one question is answered by yes for all values from a place on: from `good` on, before `bad`."""
        while bad - good > 1:
            middle = (good + bad) // 2
            if self._over.fine(key, *_ordered(value(start), value(middle))):
                good = middle
            else:
                bad = middle
        return good

    def _all(self, one: Fraction, other: Fraction) -> bool:
        return self._over.holds(*_ordered(one, other))

    def _most(self, value: Fraction) -> Fraction:
        return max(abs(value), self._step) * FARTHEST

    def _joined(self, parts: tuple[Patch, ...]) -> Iterator[Patch]:
        """Neighbours in one where one proof is enough for both, single values one step apart as such."""
        before: Patch | None = None
        for one in parts:
            both = None if before is None else self._both(before, one)
            if both is None and before is not None:
                yield before
            before = one if both is None else both
        if before is not None:
            yield before

    def _both(self, one: Patch, other: Patch) -> Patch | None:
        if one.whole and other.whole and one.last == other.first and self._over.holds(one.first, other.last):
            return Patch(one.first, other.last, True)
        if one.last == other.first and (one.first == one.last or other.first == other.last):
            return one if other.first == other.last else other
        if one.last is None or other.last is None or other.first - one.last > self._step:
            return None
        alone = (not one.whole or one.first == one.last) and (not other.whole or other.first == other.last)
        return Patch(one.first, other.last, False) if alone else None


def holds(outcome: Outcome) -> bool:
    """Whether all that a drive does is proven, but for what a waiver lets pass."""
    if any(isinstance(one, Undecided) for one in outcome.verdicts):
        return False
    found: list[Unsafe | Finding] = [one for one in outcome.verdicts if isinstance(one, Unsafe)]
    found += (one for one in outcome.findings if one.check not in WARNINGS and one.check is not Check.IDLE_WAIVER)
    return all(reason(outcome.drive, one) is not None for one in found)


def open_limit(outcome: Outcome) -> str:
    """The limit that alone keeps an outcome from being proven; empty where something fails, or all is proven."""
    open_yet = [one for one in outcome.verdicts if isinstance(one, Undecided)]
    settled = tuple(one for one in outcome.verdicts if not isinstance(one, Undecided))
    return open_yet[0].limit if open_yet and holds(replace(outcome, verdicts=settled)) else ""


def _limit(beyond: Beyond) -> str:
    """The limit that left a value undecided; empty where it fails."""
    if isinstance(beyond.why, tuple):
        return ""
    return open_limit(beyond.why)


def _nearer(value: Fraction, edge: Fraction, step: Fraction) -> list[Fraction]:
    """The multiples of the step nearer to a value than an edge is, nearest first; the list may end early."""
    found: list[Fraction] = []
    for at in range(1, MOST_TRIED + 2):
        sides = [Steps(value, step, up)(at) for up in (False, True)]
        near = [one for one in sides if abs(one - value) < abs(edge - value)]
        if not near:
            break
        found += near
    return sorted(found, key=lambda one: abs(one - value))


def _ordered(one: Fraction, other: Fraction) -> tuple[Fraction, Fraction]:
    return min(one, other), max(one, other)


def _turned(part: Patch) -> Patch:
    """A piece that was found downwards."""
    assert part.last is not None
    return Patch(part.last, part.first, part.whole)
