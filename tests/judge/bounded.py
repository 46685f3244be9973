"""A second judge, for runs of few moves: all their times at once, as integer constraints for an SMT solver.

It knows two switches with constant cells, moves with their waits and gaps, and lateness; no carriers, pins, trips,
interlocks or facts. Of the literal judge it shares the delays only, of the prover nothing. The definition of Possible
is taken as it stands: of stretches that join, from `in` after the beginning of the first to `out` after the end of the
last.
"""

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import permutations
from typing import Any

import z3  # type: ignore[import-untyped]

from judge.delays import delays_of
from seqcheck.drive import After, AtOnce, Drive, Fixed, How, Move, Order, SetStep, WaitStep, When
from seqcheck.hazards import Delays, Literal

ENDLESS = "without end"


@dataclass
class Times:
    """The instants of one run as unknowns, and what is asked of them."""

    asked: list[Any] = field(default_factory=list)
    count: int = 0

    def after(self, instant: Any, lo: int, hi: int | None) -> Any:
        """A new instant, from `lo` to `hi` after another one."""
        later = z3.Int(f"t{self.count}")
        self.count += 1
        self.asked.append(later - instant >= lo)
        if hi is not None:
            self.asked.append(later - instant <= hi)
        return later

    def fork(self) -> "Times":
        """A copy that can go on in another way."""
        return Times(list(self.asked), self.count)


@dataclass(frozen=True)
class Path:
    """A run of some moves: where it rests, since when, what is written, and when each command changed."""

    mode: str
    entered: Any
    times: Times
    written: dict[str, Fixed]
    changes: dict[str, tuple[tuple[Any, bool], ...]]


def greatest_overlap(drive: Drive, moves: int) -> int | str:
    """The greatest time that both switches are possible together in any run of at most so many moves.

    0 if they never are; ENDLESS where they can stay so in a mode, or within a wait or a gap that has no upper bound.
    """
    one, other = (Literal(name) for name in drive.columns)
    delays = delays_of(drive, (one, other))
    best = 0
    for path in _paths(drive, _start(drive), moves):
        longer = _longer(drive, path, delays, best)
        if longer is None:
            return ENDLESS
        best = longer
    return best


# Runs


def _start(drive: Drive) -> Path:
    cells = dict(zip(drive.columns, drive.modes[drive.start].cells, strict=True))
    written = {name: cell for name, cell in cells.items() if isinstance(cell, Fixed)}
    # What the start row has is so for ever before; 1000 ps is longer than any delay here.
    before = z3.IntVal(-1_000)
    changes: dict[str, tuple[tuple[Any, bool], ...]]
    changes = {name: ((before, True),) if cell is Fixed.ON else () for name, cell in written.items()}
    return Path(drive.start, z3.IntVal(0), Times(), written, changes)


def _paths(drive: Drive, path: Path, moves: int) -> Iterator[Path]:
    """The run, and all that go on from it."""
    yield path
    if moves:
        for move in drive.moves:
            if path.mode in move.sources:
                for longer in _moved(drive, path, move):
                    yield from _paths(drive, longer, moves - 1)


def _moved(drive: Drive, path: Path, move: Move) -> Iterator[Path]:
    """The run with one move more, for every order of its writes."""
    times = path.times.fork()
    lo, hi = _span(drive, move)
    begun = times.after(path.entered, lo, _least(hi, _lasts(drive, path.mode)))
    for writes, waits in _orders(drive, move, path.written):
        yield _written(drive, path, move, times.fork(), begun, writes, waits)


def _written(
    drive: Drive,
    path: Path,
    move: Move,
    times: Times,
    now: Any,
    writes: tuple[tuple[str, Fixed], ...],
    waits: tuple[tuple[WaitStep, ...], ...],
) -> Path:
    """The run after a move that writes so, with these waits before each write and after the last."""
    written, changes = dict(path.written), dict(path.changes)
    for number, ((switch, cell), before) in enumerate(zip(writes, waits, strict=False)):
        if before:
            now = _waited(drive, times, now, before)
        elif number and drive.writes and drive.writes.how is How.SINGLY:
            gap = drive.writes.gap
            now = times.after(now, gap.lo, _sum(gap.hi, _late(drive)))
        written[switch] = cell
        changes[switch] = (*changes[switch], (now, cell is Fixed.ON))
    now = _waited(drive, times, now, waits[-1])
    return Path(move.target, now, times, written, changes)


def _waited(drive: Drive, times: Times, now: Any, waits: tuple[WaitStep, ...]) -> Any:
    for wait in waits:
        now = times.after(now, wait.time.lo, _sum(wait.time.hi, _late(drive)))
    return now


Orders = Iterator[tuple[tuple[tuple[str, Fixed], ...], tuple[tuple[WaitStep, ...], ...]]]


def _orders(drive: Drive, move: Move, written: dict[str, Fixed]) -> Orders:
    """The writes of a move in every permitted order, and the waits before each and after the last."""
    row = SetStep(move.place, tuple(zip(drive.columns, drive.modes[move.target].cells, strict=True)))
    runs: list[tuple[list[tuple[str, Fixed]], list[tuple[WaitStep, ...]], dict[str, Fixed]]] = [([], [()], written)]
    for step in (*move.steps, row):
        if isinstance(step, WaitStep):
            runs = [(writes, [*waits[:-1], (*waits[-1], step)], now) for writes, waits, now in runs]
            continue
        longer = []
        for writes, waits, now in runs:
            different = _different(step, now)
            # Those after the first of a step follow it with nothing between.
            pauses: list[tuple[WaitStep, ...]] = [()] * len(different)
            for order in _permitted(drive, different):
                longer.append(([*writes, *order], [*waits, *pauses], {**now, **dict(order)}))
        runs = longer
    for writes, waits, _ in runs:
        yield tuple(writes), tuple(waits)


def _different(step: SetStep, written: dict[str, Fixed]) -> tuple[tuple[str, Fixed], ...]:
    return tuple(
        (name, cell)
        for name, cell in step.writes
        if isinstance(cell, Fixed) and cell is not Fixed.KEEP and cell is not written[name]
    )


def _permitted(drive: Drive, writes: tuple[tuple[str, Fixed], ...]) -> list[tuple[tuple[str, Fixed], ...]]:
    """Every order that the drive allows. At one instant every order is the same."""
    order = drive.writes.order if drive.writes else Order.ANY
    table = tuple(sorted(writes, key=lambda one: drive.columns.index(one[0])))
    if order is Order.TABLE or drive.writes is None or drive.writes.how is How.TOGETHER:
        return [table]
    first = {Order.OFFS_FIRST: Fixed.OFF, Order.ONS_FIRST: Fixed.ON}.get(order)
    kinds = [tuple(cell is first for _, cell in some) for some in permutations(table)]
    best = sorted((cell is first for _, cell in table), reverse=True)
    return [some for some, kind in zip(permutations(table), kinds, strict=True) if first is None or list(kind) == best]


# Times of the firmware


def _late(drive: Drive) -> int:
    return (drive.clock.late or 0) if drive.clock else 0


def _sum(hi: int | None, more: int) -> int | None:
    return None if hi is None else hi + more


def _least(one: int | None, other: int | None) -> int | None:
    return min((hi for hi in (one, other) if hi is not None), default=None)


def _span(drive: Drive, move: Move) -> tuple[int, int | None]:
    """When a move can begin, after entry."""
    match move.trigger:
        case When(earliest=earliest, latest=latest):
            return max(earliest, drive.loop.lo if drive.loop else 0), latest
        case After(span=span):
            return span.lo, _sum(span.hi, _late(drive))
        case AtOnce():
            return 0, 0


def _lasts(drive: Drive, mode: str) -> int | None:
    """How long a mode lasts at most."""
    least: int | None = None
    for move in drive.moves:
        if mode in move.sources and not isinstance(move.trigger, When):
            least = _least(least, _span(drive, move)[1])
    return least


# Overlaps


def _possible(asked: list[Any]) -> bool:
    solver = z3.Solver()
    solver.add(asked)
    return bool(solver.check() == z3.sat)


def _longer(drive: Drive, path: Path, delays: dict[Literal, Delays], best: int) -> int | None:
    """The greatest overlap of a run, None without end, or the best so far if that is greater."""
    times = path.times.fork()
    end = times.after(path.entered, 0, _lasts(drive, path.mode))
    begins, ends = z3.Int("begins"), z3.Int("ends")
    asked = [*times.asked, ends <= end, begins >= -900, ends - begins > best]
    for literal, delay in delays.items():
        ways = list(_inside(path.changes[literal.switch], delay, begins, ends, end))
        if not ways:
            return best
        asked.append(z3.Or(ways))
    if not _possible(asked):
        return best
    optimum = z3.Optimize()
    optimum.add(asked)
    goal = optimum.maximize(ends - begins)
    assert optimum.check() == z3.sat
    most = optimum.upper(goal)
    return int(most.as_long()) if z3.is_int_value(most) else None


def _inside(changes: tuple[tuple[Any, bool], ...], delay: Delays, begins: Any, ends: Any, end: Any) -> Iterator[Any]:
    """The ways for [begins, ends] to lie within what is possible of one switch."""
    stretches = []
    for number, (since, on) in enumerate(changes):
        if on:
            until = changes[number + 1][0] if number + 1 < len(changes) else end
            stretches.append((since, until))
    for first, (since, _) in enumerate(stretches):
        joined = [since + delay.rise <= begins]
        for last in range(first, len(stretches)):
            if last > first:
                joined.append(stretches[last - 1][1] + delay.fall >= stretches[last][0])
            yield z3.And(*joined, ends <= stretches[last][1] + delay.fall)
