"""What each switch of a hazard is commanded and may conduct over one run, read off the replay."""

from collections.abc import Iterator
from dataclasses import dataclass
from enum import Enum

from seqcheck.drive import Command, Drive
from seqcheck.hazards import Literal, reach
from seqcheck.quantities import Interval
from seqcheck.verdict import Replayed, Span, Unsafe


class Conduct(Enum):
    """What a switch does: surely not, in doubt, surely."""

    NO = "no"
    MAY = "may"
    YES = "yes"


Change = tuple[int | None, Command]
Stretch = tuple[int | None, int | None]  # start and end; None: no bound


@dataclass(frozen=True, slots=True)
class Lane:
    """One switch over one run.

    `changes` are the changes of its passed command, from (None, first) on, several of one instant in their order;
    `possible` where its literal can be so; `sure` where it must be so.
    """

    literal: Literal
    changes: tuple[Change, ...]
    possible: tuple[Span, ...]
    sure: tuple[Stretch, ...]

    def commands_at(self, time: int | None) -> tuple[Command, ...]:
        """The commands given in an instant in their order, if none changes the one that stands; None: before time 0."""
        fresh = tuple(command for when, command in self.changes if when == time)
        if fresh or time is None:
            return fresh
        return tuple(command for when, command in self.changes if when is None or when < time)[-1:]

    def conduct_at(self, time: int | None) -> Conduct:
        """What the switch does from an instant on; None: before time 0, where all is settled."""
        so, not_so = (Conduct.YES, Conduct.NO) if self.literal.on else (Conduct.NO, Conduct.YES)
        if time is None:
            first = self.changes[0][1]
            return Conduct.MAY if first is Command.UNKNOWN else so if _wanted(first, self.literal) else not_so
        if not any(span.start <= time and (span.end is None or time < span.end) for span in self.possible):
            return not_so
        return so if any(_within(time, stretch) for stretch in self.sure) else Conduct.MAY

    def times(self) -> Iterator[int]:
        """Every time at which the command or the conduction may change, in no order, with repetitions."""
        yield from (when for when, _ in self.changes if when is not None)
        for span in self.possible:
            yield span.start
            if span.end is not None:
                yield span.end
        yield from (start for start, _ in self.sure if start is not None)


def _wanted(command: Command, literal: Literal) -> bool:
    return (command is Command.ON) == literal.on and command is not Command.UNKNOWN


def _within(time: int, stretch: Stretch) -> bool:
    start, end = stretch
    return (start is None or start <= time) and (end is None or time < end)


def _surely(changes: tuple[Change, ...], there: Interval, back: Interval, literal: Literal) -> Iterator[Stretch]:
    """The stretches in which a switch is as wanted whichever delays its edges had.

    That is once the slowest edge towards it (`there`) is through, and the slowest of those before that went `back`.
    """
    for index, (when, command) in enumerate(changes):
        if not _wanted(command, literal):
            continue
        end = changes[index + 1][0] if index + 1 < len(changes) else None
        if when is None:
            yield None, end
            continue
        if there.hi is None or back.hi is None:
            continue
        turned, before = changes[index - 1]
        if before is Command.UNKNOWN:
            turned = when  # a floating pin may have changed sides at any moment until now
        start = max(when + there.hi, when if turned is None else turned + back.hi)
        if end is None or start < end:
            yield start, end


def lanes(verdict: Unsafe, drive: Drive) -> tuple[Lane, ...]:
    """A lane for each literal of the hazard, in its order."""
    return lanes_of(verdict.hazard.literals, verdict.replayed, drive)


def lanes_of(literals: tuple[Literal, ...], replayed: Replayed, drive: Drive) -> tuple[Lane, ...]:
    """A lane for each literal that a replay looked at."""
    found = []
    for literal in literals:
        changes = replayed.commands[literal.switch]
        on, off = reach(drive.paths[literal.switch])
        there, back = (on, off) if literal.on else (off, on)
        sure = tuple(_surely(changes, there, back, literal))
        found.append(Lane(literal, changes, replayed.possible.get(literal, ()), sure))
    return tuple(found)
