"""Questions about lengths of time, as automata beside those of 5.1: section 6 of the meaning, "Rules about lengths".

All times are whole, and so is what a run can do at all: less than D is D - 1 at most.

- `S on at most D`: the literal of 5.1 with an `in` of D and an `out` of 0, which time 0 finds just commanded. It is
  possible exactly where its command has lasted longer than D, breaks of no length left out.
- `S on at least D` and `off at least D`: IDLE; YOUNG while its command has lasted for D - 1 at most, then LONG. What is
  YOUNG and ends is too short, STRUCK; so is a command that may be anything, at once.
- `M and N at least D apart`: IDLE; YOUNG while M was left D - 1 ago at most, then LONG. To enter N then is STRUCK.
- `TRIP clears S within D`: IDLE; ARRIVED while it arrived D ago at most, then LATE (at once for D = 0), until its
  target or `reset` is left. The hazard is that S is possible meanwhile, when it is LATE. Of several arrivals the first
  counts, since its time is over before that of the others.
- `margin at least D` after X: NEVER, or ENDED while the last stretch of X's possibility ended D ago at most. A stretch
  of no length does not count, neither as one that ends nor as one that begins anew. The hazard is that all
  others are possible while ENDED and X is not.
"""

from seqcheck.drive import RESET
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import REST, Edge, Stand
from seqcheck.hazards import Clearing, Following, Lasting, Nearing

OUT, ENTERING, IN, LEAVING, BLIP = "out", "entering", "in", "leaving", "blip"
IDLE, YOUNG, LONG, STRUCK, ARRIVED, LATE, NEVER, ENDED = (
    *("idle", "young", "long", "struck", "arrived", "late", "never", "ended"),
)
POSSIBLE = (IN, LEAVING, LATE)
SINCE, GAP = "since", "gap"
"""The clocks of a margin: since the watched literal is possible, and since it was last."""


class Watch:
    """What a hazard asks of lengths."""

    def __init__(self, scope: Scope) -> None:
        asks = self._asks = scope.hazard.asks
        self._trips = {trip.name: trip for trip in scope.drive.trips}
        self._delays = scope.delays
        self._own = len(scope.hazard.literals)
        self.pulses = isinstance(asks, Lasting) and not asks.longer
        self.after = asks.after if isinstance(asks, Nearing) else None
        self.idle: tuple[str, ...] = ()
        """The state of what is watched beside the literals, at time 0."""
        if isinstance(asks, Following | Clearing):
            self.idle = (IDLE,)
        elif isinstance(asks, Nearing):
            self.idle = (NEVER,)

    def at_start(self, place: int, wanted: bool, both: bool, started: set[str]) -> str:
        """A literal at time 0: settled long before, but that a length counts from there."""
        if self.pulses:
            return STRUCK if both else LONG if wanted else IDLE
        if wanted and isinstance(self._asks, Lasting) and self._delays[place].rise:
            started.add(f"in {place}")
            return ENTERING
        return IN if wanted else OUT

    def pulsed(self, place: int, state: str, wanted: bool, both: bool, started: set[str]) -> str:
        """A literal of which short commands are asked for, once its command may have changed."""
        if both:
            return STRUCK
        if not wanted:
            return STRUCK if state == YOUNG else IDLE
        if state != IDLE:
            return state
        started.add(f"in {place}")
        return YOUNG

    def told(self, stand: Stand, edge: Edge, states: tuple[str, ...]) -> tuple[tuple[str, ...], frozenset[str]]:
        """The states of literals and of what is watched after an event of the firmware, and the clocks it starts."""
        asks, anew = self._asks, frozenset({f"in {self._own}"})
        leaves = stand.mode if stand.line == REST and not edge.keeps_x else None
        if isinstance(asks, Following):
            young = leaves == asks.left
            state = YOUNG if young else states[-1]
            if state == YOUNG and edge.target.line == REST and edge.target.mode == asks.entered:
                state = STRUCK
            return (*states[:-1], state), anew if young else frozenset()
        if isinstance(asks, Clearing):
            state = IDLE if leaves in (RESET, self._trips[asks.trip].target) else states[-1]
            if edge.arrives and state == IDLE:
                return (*states[:-1], ARRIVED if self._delays[-1].rise else LATE), anew
            return (*states[:-1], state), frozenset()
        return states, frozenset()
