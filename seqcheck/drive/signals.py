"""The way of a command to its switch: parts in series, interlocks, pins at rest."""

from enum import Enum

from seqcheck.quantities import Interval
from seqcheck.records import dataclass
from seqcheck.source import Place


@dataclass(frozen=True, slots=True)
class Part:
    """One part of a signal path: times of a turn-on and of a turn-off from its input to its output.

    `difference` bounds the excess of any one sample's turn-off over another's turn-on (None: not given).
    """

    place: Place
    name: str
    on: Interval
    off: Interval
    difference: int | None


@dataclass(frozen=True, slots=True)
class Interlock:
    """The driver keeps `first` and `second` apart, with a dead time."""

    place: Place
    first: str
    second: str
    dead: Interval


class Level(Enum):
    """The level that the board gives a pin while the controller does not drive it."""

    LOW = "low"
    HIGH = "high"
    UNKNOWN = "unknown"


class Command(Enum):
    """What a pin says to its switch; UNKNOWN where it floats."""

    ON = "on"
    OFF = "off"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Pin:
    """A controller pin: what turns its switch on, where it rests, and how long it takes to get there."""

    place: Place
    switch: str
    name: str
    active_high: bool
    rests: Level
    after: Interval
    port: str | None

    @property
    def resting(self) -> Command:
        """The command that the resting level gives."""
        if self.rests is Level.UNKNOWN:
            return Command.UNKNOWN
        return Command.ON if (self.rests is Level.HIGH) == self.active_high else Command.OFF
