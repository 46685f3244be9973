"""One run of a move or a trip: what is still to be written, and when."""

from dataclasses import dataclass, field

from seqcheck.drive import RESET, Cell, Drive, How, Known, Move, Trip, WaitStep, cell_text
from seqcheck.evidence.groups import Group, differences, grouped, may_come_next
from seqcheck.evidence.pins import Pins
from seqcheck.evidence.refusal import NotPermitted, require_within
from seqcheck.quantities import INSTANT, Interval

Item = tuple[tuple[str, Cell], ...] | Interval  # the cells of a step or row, or a wait


def firmly(drive: Drive, span: Interval) -> Interval:
    """A span that firmware keeps, with the lateness that the clock allows."""
    late = drive.clock.late or 0 if drive.clock else 0
    return Interval(span.lo, None if span.hi is None else span.hi + late)


@dataclass(slots=True)
class Run:
    """A move or trip under way.

    `origin` is the mode that counts as left, `last` the time of the last write or, before it, of the beginning; `wait`
    sums the waits since then (None: none stands there). `remaining` are the groups of the step in progress, `items`
    what follows it. `lasting`: something else may have happened in the run.
    """

    drive: Drive
    pins: Pins
    line: Move | Trip
    origin: str
    last: int
    items: list[Item] = field(default_factory=list)
    remaining: list[Group] = field(default_factory=list)
    wait: Interval | None = None
    wrote: bool = False
    lasting: bool = False

    def __post_init__(self) -> None:
        if self.line.target != RESET:
            self.items = _items(self.drive, self.line)
        self._advance()

    @property
    def trip(self) -> bool:
        """Whether a trip runs, not a move."""
        return isinstance(self.line, Trip)

    @property
    def unbroken(self) -> bool:
        """Whether it is an unbroken move."""
        return isinstance(self.line, Move) and self.line.unbroken

    @property
    def known(self) -> tuple[Known, ...]:
        """What is known while it lasts."""
        return self.line.known

    @property
    def forced(self) -> bool:
        """Whether its next event is one with the last: nothing can come between."""
        return self.wait is None and (not self.wrote or not self.remaining)

    @property
    def span(self) -> Interval:
        """When its next event comes, from `last` on."""
        if self.wait is not None:
            return self.wait
        if self.forced or self.drive.writes is None or self.drive.writes.how is How.TOGETHER:
            return INSTANT
        return firmly(self.drive, self.drive.writes.gap)

    def write(self, time: int, writes: tuple[tuple[str, Cell], ...]) -> None:
        """`writes` reach the pins; NotPermitted where they are not what may be written now."""
        self._require_now(time, "a write")
        cells = dict(writes)
        if not self.remaining:
            raise NotPermitted(f"all that {self.line.target} needs is written already")
        if cells not in self.remaining or len(cells) != len(writes):
            raise NotPermitted(f"what may be written now is {_any_of(may_come_next(self.drive, self.remaining))}")
        if cells not in may_come_next(self.drive, self.remaining):
            raise NotPermitted(f"the order of the writes asks for {_any_of(may_come_next(self.drive, self.remaining))}")
        unheld = self._breaks_in
        for switch, cell in cells.items():
            self.pins.write(time, switch, cell, unheld=unheld)
        self.remaining.remove(cells)
        self.last, self.wait, self.wrote = time, None, True
        self._advance()

    def end(self, time: int) -> None:
        """The target is entered; NotPermitted where something is still to be written or to be waited for."""
        self._require_now(time, f"the entry of {self.line.target}")
        if self.remaining:
            raise NotPermitted(f"{_any_of(self.remaining)} is still to be written")

    def _require_now(self, time: int, what: str) -> None:
        self.lasting = self.lasting or not self.forced
        require_within(time, self.last, self.span, what)

    @property
    def _breaks_in(self) -> bool:
        trip = isinstance(self.line, Trip) and self.line.at_once
        return trip and not self.wrote and self.wait is None

    def _advance(self) -> None:
        while self.items and not self.remaining:
            item = self.items.pop(0)
            if isinstance(item, Interval):
                self.wait = (self.wait or INSTANT) + firmly(self.drive, item)
                continue
            cells = differences(self.drive, item, self.pins.written)
            self.remaining = [cells] if cells and self._breaks_in else grouped(self.drive, cells)


def _items(drive: Drive, line: Move | Trip) -> list[Item]:
    steps: list[Item] = [step.time if isinstance(step, WaitStep) else step.writes for step in line.steps]
    return [*steps, tuple(zip(drive.columns, drive.modes[line.target].cells, strict=True))]


def _any_of(groups: list[Group]) -> str:
    """The writes that may come, for people."""
    return " or ".join(", ".join(f"{switch} {cell_text(cell)}" for switch, cell in group.items()) for group in groups)
