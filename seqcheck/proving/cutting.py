"""Long stays of the firmware cut short, where that changes nothing.

A stay is a dwell in a mode or a wait in a run. After a while it has settled: what came before it can be told no more,
but for the carriers, and these come through every phase again and again. A longer stay then brings nothing new, if the
time at which it may end leaves the carriers the freedom to be anywhere: then any phase at its end that a shorter stay
brings, a stay as long as the file asks brings too, with whole cycles more. That freedom is there where a stay has no
upper bound, where its ends are a cycle apart, or where the cycles' own tolerance adds up to a cycle.
"""

from collections.abc import Sequence

from seqcheck.firmware import Edge
from seqcheck.proving.references import Reference
from seqcheck.proving.views import View


class Cutting:
    """How stays are cut for one hazard."""

    def __init__(self, view: View, references: Sequence[Reference]) -> None:
        self._references = tuple(one for one in references if one.moving)
        cycles = max((one.usual_cycle for one in self._references), default=0)
        dead = max((one.carrier.dead.hi or 0 for one in self._references), default=0)
        self.length = 2 * longest_memory(view) + 1 + 2 * cycles + dead
        self._round = max(cycles, 1)

    def cut(self, edges: tuple[Edge, ...], deadline: int | None) -> tuple[tuple[Edge, ...], int | None]:
        """Edges and deadline with lower bounds no longer than needed, and without upper bounds that do not matter."""
        possible = tuple(edge for edge in edges if deadline is None or edge.lo <= deadline)
        windows = [(edge.lo, _least(edge.hi, deadline)) for edge in possible]
        if all(hi is None or hi < self.length for _, hi in windows) and deadline is None:
            return tuple(self._shortened(edge) if edge.hi is None else edge for edge in possible), None
        if not all(self._free(lo, hi) for lo, hi in windows):
            return edges, deadline
        return tuple(self._shortened(edge)._replace(hi=None) for edge in possible), None

    def _shortened(self, edge: Edge) -> Edge:
        return edge._replace(lo=min(edge.lo, self.length))

    def _free(self, lo: int, hi: int | None) -> bool:
        """Whether a stay that may end within this window leaves every carrier anywhere, all at the same time."""
        if hi is None:
            return True
        start = max(lo, self.length)
        stiff = [one for one in self._references if not self._covers(one, start, hi, 0)]
        return hi >= start and (not stiff or (len(stiff) == 1 and self._covers(stiff[0], start, hi, hi - start)))

    def _covers(self, reference: Reference, start: int, hi: int, width: int) -> bool:
        """Whether whole cycles reach into every window of this width that begins so late."""
        longest, shortest = reference.longest_cycle, reference.shortest_cycle
        if longest is None:
            return hi - start >= shortest + self._round or start >= self.length + shortest + self._round
        if width >= shortest + self._round:
            return True
        count = (start - self.length - self._round) // max(longest, 1)
        return count >= 0 and width + count * (longest - shortest) >= shortest


def longest_memory(view: View) -> int:
    """A time after which a stay has settled: what came before it can be told no more, but for the carriers."""
    drive = view.drive
    delays = max((time for delays in view.delays for time in (delays.rise, delays.fall)), default=0)
    pins = max((pin.after.hi or 0 for pin in drive.pins.values()), default=0)
    locks = max((lock.dead.hi or 0 for lock in view.locks), default=0)
    return delays + pins + locks + max((drive.carriers[name].period.hi or 0 for name in view.carriers), default=0)


def _least(one: int | None, other: int | None) -> int | None:
    return min((bound for bound in (one, other) if bound is not None), default=None)
