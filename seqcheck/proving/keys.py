"""What a location of one hazard is made of: its key, its clocks, and what a hop between two of them does."""

from typing import NamedTuple

from seqcheck.drive import Command
from seqcheck.firmware import Edge, State
from seqcheck.verdict import Act

X, Y, Z, PAUSE, GAP, SINCE = range(6)
SPAN = 1 << 20
"""Names of one kind of clock: a place in the view is added to the kind, so no view may be as wide as this."""
CARRIER, HOLD, PIN, LOCK, RISE, FALL = (SPAN * kind for kind in range(1, 7))
NEVER_HELD = HOLD + SPAN - 1
"""The clock of a held group that was written just now: no location has it."""

C_OFF, C_ON, C_BOTH = 0, 1, 2
"""Commands as numbers; C_BOTH for a pin that floats."""
CODES = {Command.OFF: C_OFF, Command.ON: C_ON, Command.UNKNOWN: C_BOTH}
DRIVEN = -1
"""The state of a pin that is not released; else command and whether it is still on its way to rest."""
BLOCKED, WAITING, CLEAR = 0, 1, 2
"""An interlock direction: partner on; partner off, dead time running; dead time over."""


NOT_ENDED, LATELY, LONG_AGO = 0, 1, 2
"""When the possibility of a watched literal has last ended: never yet, less than a cap ago, or longer."""


class Key(NamedTuple):
    """A location's state. Entries follow the view's switches, carriers, locks and literals.

    `paused`: an overlap has come to where the hazard is not asked for, and no time has passed there yet. `ended`: when
    the possibility of the literal whose gaps are measured has ended.
    """

    state: State
    carriers: tuple[int, ...]
    pins: tuple[int, ...]
    locks: tuple[int, ...]
    literals: tuple[int, ...]
    paused: bool = False
    ended: int = NOT_ENDED


class Happening(NamedTuple):
    """What a hop does, for the trace: an act and what it is about; `edge` for acts of the firmware."""

    act: Act | None
    name: str = ""
    edge: Edge | None = None


class Clock(NamedTuple):
    """A clock in one location: its identity, greatest constants and invariant (INFINITE: none)."""

    name: int
    lower: int
    upper: int
    bound: int


SILENT = Happening(None)
OVER = Happening(None, "a pause lasts")
CAPPED = Happening(None, "a gap is as long as anyone asks")
