"""The pins in a replay: what is written, what is in effect, what is held, and the command of each."""

from collections.abc import Iterator
from dataclasses import dataclass

from seqcheck.drive import Cell, Command, Drive, Fixed, Follow, Pin, Update
from seqcheck.evidence.references import Reference, waits
from seqcheck.evidence.refusal import Due, NotPermitted, due, require_within
from seqcheck.quantities import Interval

_CONSTANT = {Fixed.ON: Command.ON, Fixed.OFF: Command.OFF}


@dataclass(frozen=True, slots=True)
class Held:
    """A write that waits for a carrier since `time`."""

    cell: Cell
    carrier: str
    time: int


def pin_of(drive: Drive, switch: str) -> Pin:
    """The pin of `switch`; NotPermitted where the drive has no line for it, so that it cannot be released."""
    if switch not in drive.pins:
        raise NotPermitted(f"{switch} has no line in pins, so that it cannot be released")
    return drive.pins[switch]


class Pins:
    """All pins at one moment, from the settled start row on.

    `written` and `effective` are cells, `commands` what the pins say, `released` the times at which pins that have yet
    to reach their resting level were released, `held` the writes that wait. The commands of `concerned` switches
    are exact; others may follow a carrier that the trace does not, and then their command is not known.
    """

    def __init__(self, drive: Drive, carriers: dict[str, Reference], concerned: frozenset[str]) -> None:
        self._drive = drive
        self._carriers = carriers
        self._concerned = concerned
        self.written: dict[str, Cell] = dict(zip(drive.columns, drive.modes[drive.start].cells, strict=True))
        self.effective = dict(self.written)
        self.commands = {switch: self._settled(switch, cell) for switch, cell in self.written.items()}
        self.released: dict[str, int] = {}
        self.held: dict[str, Held] = {}

    def _settled(self, switch: str, cell: Cell) -> Command:
        if cell is Fixed.FREE:
            return pin_of(self._drive, switch).resting
        if cell is Fixed.KEEP or isinstance(cell, Follow):
            raise NotPermitted(f"the start row has no constant cell for {switch}")
        return _CONSTANT[cell]

    def write(self, time: int, switch: str, cell: Cell, *, unheld: bool) -> None:
        """`cell` is written to `switch`: it acts at once, or is held for a carrier unless `unheld`."""
        self.written[switch] = cell
        self.held.pop(switch, None)
        now = self.effective[switch]
        if cell == now:
            return
        carrier = None if unheld else self._waited_for(now, cell)
        if carrier is None:
            self._act(time, switch, cell)
        else:
            self.held[switch] = Held(cell, carrier, time)

    def _waited_for(self, now: Cell, new: Cell) -> str | None:
        for cell in (now, new):
            if isinstance(cell, Follow) and waits(self._drive.carriers[cell.carrier]):
                return cell.carrier if cell.carrier in self._carriers else None
        return None

    def _act(self, time: int, switch: str, cell: Cell) -> None:
        self.effective[switch] = cell
        self.released.pop(switch, None)
        if isinstance(cell, Follow):
            self.commands[switch] = self._followed(switch, cell)
        elif cell is Fixed.FREE:
            self._release(time, switch)
        else:
            self.commands[switch] = _CONSTANT[cell]

    def _followed(self, switch: str, cell: Follow) -> Command:
        if cell.carrier in self._carriers:
            return self._carriers[cell.carrier].output(cell.inverted)
        if switch in self._concerned:
            raise NotPermitted(f"{switch} follows {cell.carrier}, whose phase the trace does not give")
        return Command.UNKNOWN

    def _release(self, time: int, switch: str) -> None:
        pin = pin_of(self._drive, switch)
        if pin.after == Interval(0, 0):
            self.commands[switch] = pin.resting
        elif self.commands[switch] is not pin.resting or switch not in self._concerned:
            self.released[switch] = time

    def rest(self, time: int, switch: str) -> None:
        """The released pin of `switch` reaches its resting level; NotPermitted where it is none or cannot yet."""
        if switch not in self.released:
            raise NotPermitted(f"the pin of {switch} is not on its way to its resting level")
        pin = self._drive.pins[switch]
        require_within(time, self.released.pop(switch), pin.after, f"the resting level of {switch}")
        self.commands[switch] = pin.resting

    def rises(self, time: int, carrier: str) -> None:
        """The reference of a followed carrier rises; writes held for its rise act together with the edge."""
        self._carriers[carrier].turn(time, True)
        if self._drive.carriers[carrier].update is Update.AT_RISE:
            self._act_held(time, carrier)
        self._follow(carrier)

    def falls(self, time: int, carrier: str) -> None:
        """The reference of a followed carrier falls."""
        self._carriers[carrier].turn(time, False)
        self._follow(carrier)

    def output(self, time: int, carrier: str) -> None:
        """The dead time of a followed carrier since its last edge is over."""
        self._carriers[carrier].end_dead_time(time)
        self._follow(carrier)

    def update(self, time: int, carrier: str) -> None:
        """All writes held for a carrier that updates within a period act; NotPermitted where there are none."""
        if self._drive.carriers[carrier].update is not Update.WITHIN_PERIOD:
            raise NotPermitted(f"carrier {carrier} does not update within a period")
        if not any(held.carrier == carrier for held in self.held.values()):
            raise NotPermitted(f"no write is held for carrier {carrier}")
        self._act_held(time, carrier)

    def _act_held(self, time: int, carrier: str) -> None:
        for switch, held in tuple(self.held.items()):
            if held.carrier == carrier:
                del self.held[switch]
                self._act(time, switch, held.cell)

    def _follow(self, carrier: str) -> None:
        for switch, cell in self.effective.items():
            if isinstance(cell, Follow) and cell.carrier == carrier:
                self.commands[switch] = self._carriers[carrier].output(cell.inverted)

    def cancel_held(self) -> None:
        """A hardware trip: what was held is forgotten, and what is in effect counts as written."""
        self.held.clear()
        self.written = dict(self.effective)

    def release_all(self, time: int) -> None:
        """Reset: every pin is released in this instant and nothing is held any more."""
        for switch in self.written:
            self.write(time, switch, Fixed.FREE, unheld=True)

    def dues(self) -> Iterator[Due]:
        """By when held writes must act and concerned pins must rest."""
        for carrier in {held.carrier for held in self.held.values()}:
            one = self._drive.carriers[carrier]
            if one.update is Update.WITHIN_PERIOD:
                oldest = min(held.time for held in self.held.values() if held.carrier == carrier)
                yield from due(oldest, Interval(0, one.period.hi), f"the writes held for {carrier} must act")
        for switch in self._concerned & self.released.keys():
            after = self._drive.pins[switch].after
            yield from due(self.released[switch], after, f"the pin of {switch} must reach its resting level")
