"""What a state of the search holds. Plain named tuples: they hash fast and print readably.

Cells are the words of the file (`on`, `off`, `free`, `main`, `~main`); commands are `on`, `off` and `unknown`.
"""

from typing import NamedTuple

ON, OFF, FREE, KEEP, UNKNOWN = "on", "off", "free", "keep", "unknown"

Group = tuple[tuple[int, str], ...]
"""Writes that reach the pins in one instant: (column, cell)."""


class Pin(NamedTuple):
    """One switch. A write is held exactly when `written` differs from `effective`; `held` is then its age.

    `level` is the command of a released pin (else empty), `released` the time since its release, -1 once it rests.
    """

    written: str
    effective: str
    level: str
    released: int
    held: int


class Wave(NamedTuple):
    """One carrier: level of its reference, time since its last edge, whether the dead time since then is over."""

    high: bool
    age: int
    over: bool


class Lock(NamedTuple):
    """One direction of an interlock: the partner's command, the time since it was last on, whether that is enough."""

    partner: str
    age: int
    clear: bool


class Rest(NamedTuple):
    """In a mode, `x` after its entry."""

    mode: str
    x: int


class Run(NamedTuple):
    """In the run of a move or trip, `y` after its beginning or last write.

    The next event is due at y in [lo, hi] (hi None: no bound): one of `groups`, which are left of the item number
    `item`, or the entry of the target if there are none. `origin` is the mode that the move left, or that the trip was
    taken from.
    """

    trip: bool
    line: int
    origin: str
    item: int
    groups: tuple[Group, ...]
    lo: int
    hi: int | None
    y: int


class Hand(NamedTuple):
    """A firmware trip that has arrived, and the time since then (0 while and as long as it cannot be taken)."""

    trip: int
    age: int


class State(NamedTuple):
    """All that the future depends on but the automata that watch it."""

    place: Rest | Run
    hand: Hand | None
    pins: tuple[Pin, ...]
    waves: tuple[Wave, ...]
    locks: tuple[Lock, ...]
