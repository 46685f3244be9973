"""Which modes can be entered, which lead back, which moves can begin and which collide: to the letter.

Nothing is compared with a bound that was worked out before: every whole picosecond up to one after the last time of the
drive is tried, and modes are gathered until none is new.
"""

from typing import NamedTuple

from seqcheck.drive import RESET, Above, After, AtOnce, CurrentInto, CurrentOut, Drive, Known, Move, When


class Amiss(NamedTuple):
    """What is wrong: the check's name, the line it is said of, and the mode."""

    check: str
    line: int
    mode: str


class Ways:
    """The modes of one drive and the moments at which its moves may begin in them."""

    def __init__(self, drive: Drive) -> None:
        self.drive = drive
        self.late = (drive.clock.late or 0) if drive.clock else 0
        self.loop = drive.loop.lo if drive.loop else 0
        ends = [0]
        for move in drive.moves:
            if isinstance(move.trigger, After):
                ends += [move.trigger.span.lo, (move.trigger.span.hi or 0) + self.late]
            elif isinstance(move.trigger, When):
                ends += [move.trigger.earliest, move.trigger.latest or 0]
        self.moments = range(max(ends) + self.loop + 2)
        entered = [drive.start] + [run.target for run in drive.moves] + [run.target for run in drive.trips]
        self.modes = [mode for mode in drive.modes if mode != RESET or RESET in entered]
        self.next = {mode: self._next(mode) for mode in self.modes}

    def allows(self, move: Move, time: int) -> bool:
        """Whether the move's own line lets it begin at this time after entry."""
        trigger = move.trigger
        if isinstance(trigger, When):
            heard = time >= trigger.earliest and time >= self.loop
            return heard and (trigger.latest is None or time <= trigger.latest)
        if isinstance(trigger, After):
            return time >= trigger.span.lo and not self.overdue(move, time)
        return time == 0

    def overdue(self, move: Move, time: int) -> bool:
        """Whether the move must have begun before this time after entry."""
        if isinstance(move.trigger, AtOnce):
            return time > 0
        if isinstance(move.trigger, After) and move.trigger.span.hi is not None:
            return time > move.trigger.span.hi + self.late
        return False

    def begins(self, move: Move, mode: str, time: int) -> bool:
        """Whether the move can begin in a mode at this time after entry."""
        here = [one for one in self.drive.moves if mode in one.sources]
        return mode in move.sources and self.allows(move, time) and not any(self.overdue(one, time) for one in here)

    def can_begin(self, move: Move, mode: str) -> bool:
        """Whether the move can begin in a mode at any time."""
        return any(self.begins(move, mode, time) for time in self.moments)

    def _next(self, mode: str) -> set[str]:
        """The modes that can follow one."""
        follow = {move.target for move in self.drive.moves if self.can_begin(move, mode)}
        return follow | {trip.target for trip in self.drive.trips if mode in trip.resting}

    def after(self, mode: str) -> set[str]:
        """A mode and all that can come after it."""
        found: set[str] = set()
        new = {mode}
        while new:
            found |= new
            new = {there for here in new for there in self.next[here]} - found
        return found

    def amiss(self) -> set[Amiss]:
        """All that is wrong with the graph of the modes."""
        drive = self.drive
        rows = {mode: drive.modes[mode].place.line for mode in self.modes}
        reached = self.after(drive.start)
        found = {Amiss("unreachable", rows[mode], mode) for mode in self.modes if mode not in reached}
        stuck = {mode for mode in self.modes if drive.start not in self.after(mode)}
        if drive.start == RESET and stuck == set(self.modes) - {RESET}:
            stuck = {RESET} if stuck else set()
        found |= {Amiss("no-way-back", rows[mode], mode) for mode in stuck}
        for mode in self.modes:
            here = [move for move in drive.moves if mode in move.sources]
            found |= {Amiss("stalled", one.place.line, mode) for one in here if not self.can_begin(one, mode)}
            for number, one in enumerate(here):
                if any(self.collide(one, other, mode) for other in here[:number]):
                    found.add(Amiss("ambiguous", one.place.line, mode))
        return found

    def collide(self, one: Move, other: Move, mode: str) -> bool:
        """Whether one event at one moment can begin both."""
        if not isinstance(one.trigger, When) or not isinstance(other.trigger, When):
            return False
        if one.trigger.event != other.trigger.event or not _together((*one.known, *other.known)):
            return False
        return any(self.begins(one, mode, time) and self.begins(other, mode, time) for time in self.moments)


def _together(known: tuple[Known, ...]) -> bool:
    """Whether all of this can hold at once: no current both ways, and the sources have an order."""
    for one in known:
        if isinstance(one, CurrentOut) and CurrentInto(one.node) in known:
            return False
    return _ordered({one.upper for one in known if isinstance(one, Above)}, known)


def _ordered(nodes: set[str], known: tuple[Known, ...]) -> bool:
    """Take away, again and again, a source that nothing left is above; what remains stands in a circle."""
    pairs = [(one.upper, one.lower) for one in known if isinstance(one, Above)]
    while free := nodes - {lower for upper, lower in pairs if upper in nodes}:
        nodes = nodes - free
    return not nodes
