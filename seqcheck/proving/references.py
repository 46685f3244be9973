"""A carrier's reference as a small automaton: level, and whether the dead time since its last edge is over."""

from collections.abc import Iterator
from typing import NamedTuple

from seqcheck.drive import Carrier
from seqcheck.quantities import Interval
from seqcheck.records import dataclass
from seqcheck.verdict import Act
from seqcheck.zones import INFINITE

HIGH_DEAD, HIGH_OUT, LOW_DEAD, LOW_OUT, FORGOTTEN = range(5)


class Change(NamedTuple):
    """One event of a carrier: its clock between `least` and no bound, then the state after it."""

    act: Act
    least: int
    resets: bool
    state: int


@dataclass(frozen=True, slots=True)
class Reference:
    """The automaton of one carrier."""

    carrier: Carrier

    @property
    def moving(self) -> bool:
        """Whether the reference ever changes its level."""
        return self.carrier.high is not None and self.carrier.low is not None

    def level(self, state: int) -> Interval:
        """How long the level of a state lasts."""
        level = self.carrier.high if state in (HIGH_DEAD, HIGH_OUT) else self.carrier.low
        assert level is not None
        return level

    def starts(self) -> Iterator[tuple[int, int]]:
        """Where the carrier may stand at any moment: (state, least age of its level)."""
        dead = self.carrier.dead
        if not self.moving:
            yield (HIGH_OUT if self.carrier.low is None else LOW_OUT), 0
            return
        for waiting, out in ((HIGH_DEAD, HIGH_OUT), (LOW_DEAD, LOW_OUT)):
            if dead.hi != 0:
                yield waiting, 0
            yield out, dead.lo

    def changes(self, state: int) -> Iterator[Change]:
        """What can happen next."""
        if not self.moving:
            return
        dead, least = self.carrier.dead, self.level(state).lo
        if state in (HIGH_DEAD, LOW_DEAD):
            yield Change(Act.OUTPUT, dead.lo, False, state + 1)
        if state in (HIGH_DEAD, HIGH_OUT):
            yield Change(Act.FALLS, least, True, LOW_DEAD if dead.hi != 0 else LOW_OUT)
        else:
            yield Change(Act.RISES, least, True, HIGH_DEAD if dead.hi != 0 else HIGH_OUT)

    def bound(self, state: int) -> int:
        """The invariant on the age of the level."""
        bounds = [self.level(state).hi]
        if state in (HIGH_DEAD, LOW_DEAD):
            bounds.append(self.carrier.dead.hi)
        return min((one for one in bounds if one is not None), default=INFINITE)

    def constants(self, state: int) -> tuple[int, int]:
        """The greatest constants that the age of this level is compared with, from below and from above."""
        dead, level = self.carrier.dead, self.level(state)
        return max(dead.lo, level.lo), max(dead.hi or 0, level.hi or 0)

    @property
    def shortest_cycle(self) -> int:
        """The least time for an interval of each level."""
        return sum(level.lo for level in (self.carrier.high, self.carrier.low) if level is not None)

    @property
    def longest_cycle(self) -> int | None:
        """The greatest time for an interval of each level; None where one may last for ever."""
        total = 0
        for level in (self.carrier.high, self.carrier.low):
            if level is not None and level.hi is None:
                return None
            total += level.hi or 0 if level is not None else 0
        return total

    @property
    def usual_cycle(self) -> int:
        """A time in which an interval of each level can pass; one that may last for ever counts with its least."""
        dead = self.carrier.dead.hi or 0
        levels = (self.carrier.high, self.carrier.low)
        return sum(max(one.lo, dead) if one.hi is None else one.hi for one in levels if one is not None)
