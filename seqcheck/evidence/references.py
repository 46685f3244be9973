"""The references of the carriers that a trace follows: levels, edges and dead times at concrete times."""

from collections.abc import Iterator
from dataclasses import dataclass

from seqcheck.drive import Carrier, Command, Drive, Update
from seqcheck.evidence.refusal import Due, NotPermitted, due, require_within
from seqcheck.quantities import Interval
from seqcheck.verdict import Cycles, Phase


@dataclass(slots=True)
class Reference:
    """One carrier: level of its reference, time of the last edge (ps, negative before the trace), dead time over."""

    carrier: Carrier
    high: bool
    edge: int
    over: bool

    def span(self) -> Interval:
        """How long the present level lasts. The carrier has that level, as the checks here see to."""
        span = self.carrier.high if self.high else self.carrier.low
        assert span is not None
        return span

    def output(self, inverted: bool) -> Command:
        """What a switch on this carrier, or with `inverted` on its complement, is told now."""
        return Command.ON if self.over and self.high != inverted else Command.OFF

    def turn(self, time: int, high: bool) -> None:
        """The edge to `high` comes at `time`.

        Raises NotPermitted where the reference has that level already, never has it, or has not had or has had the
        other one long enough.
        """
        name, level = self.carrier.name, "high" if high else "low"
        if self.high == high:
            raise NotPermitted(f"the reference of {name} is {level} already")
        if (self.carrier.high if high else self.carrier.low) is None:
            raise NotPermitted(f"the reference of {name} is never {level}")
        require_within(time, self.edge, self.span(), f"the edge of {name} to {level}")
        self.high, self.edge = high, time
        self.over = self.carrier.dead.hi == 0

    def end_dead_time(self, time: int) -> None:
        """The dead time since the last edge is over at `time`; NotPermitted where it was over or cannot be yet."""
        if self.over:
            raise NotPermitted(f"the dead time of {self.carrier.name} since its last edge is over already")
        require_within(time, self.edge, self.carrier.dead, f"the end of the dead time of {self.carrier.name}")
        self.over = True

    def cycle(self, time: int, cycles: Cycles) -> None:
        """Whole cycles begin at `time` with the level that has just begun; their last edge is the last edge then.

        Raises NotPermitted where no edge is at `time`, or a level is not as long as the carrier has it.
        """
        name, dead = self.carrier.name, self.carrier.dead
        if time != self.edge or self.over != (dead.hi == 0):
            raise NotPermitted(f"whole cycles of {name} begin with an edge")
        other = self.carrier.low if self.high else self.carrier.high
        if other is None or cycles.count < 1:
            raise NotPermitted(f"{name} has no such cycles")
        require_within(cycles.first, 0, self.span(), f"the edge of {name} after the first level of a cycle")
        require_within(cycles.second, 0, other, f"the edge of {name} after the second level of a cycle")
        self.edge = time + cycles.length

    def outputs(self, inverted: bool, cycles: Cycles) -> list[tuple[int, Command]]:
        """What a switch on this carrier is told in one such cycle: commands and when they come after its beginning."""
        dead = self.carrier.dead
        halves = ((0, cycles.first, self.high), (cycles.first, cycles.second, not self.high))
        told: list[tuple[int, Command]] = []
        for start, length, high in halves:
            if dead.hi != 0 or high == inverted:
                told.append((start, Command.OFF))
            if high != inverted and length >= dead.lo:
                told.append((start + dead.lo, Command.ON))
        return told

    def dues(self) -> Iterator[Due]:
        """By when the next edge and the end of the dead time must come."""
        name = self.carrier.name
        yield from due(self.edge, self.span(), f"the reference of {name} must {'fall' if self.high else 'rise'}")
        if not self.over:
            yield from due(self.edge, self.carrier.dead, f"the dead time of {name} must end")


def waits(carrier: Carrier) -> bool:
    """Whether writes that join or leave this carrier are held."""
    return carrier.update is not Update.AT_ONCE


def references(drive: Drive, phases: tuple[Phase, ...]) -> dict[str, Reference]:
    """The followed carriers at time 0.

    Raises NotPermitted where a phase names no carrier of the drive, comes twice, or is none that a carrier which has
    run for ever can have.
    """
    found: dict[str, Reference] = {}
    for phase in phases:
        if phase.carrier not in drive.carriers or phase.carrier in found:
            raise NotPermitted(f"the phase of {phase.carrier} at time 0 is of no carrier of the drive, or comes twice")
        found[phase.carrier] = _reference(drive.carriers[phase.carrier], phase)
    return found


def _reference(carrier: Carrier, phase: Phase) -> Reference:
    span = carrier.high if phase.high else carrier.low
    if span is None:
        raise NotPermitted(f"the reference of {carrier.name} never has the level that it has at time 0")
    require_within(0, -phase.age, Interval(0, span.hi), f"the edge of {carrier.name} after time 0")
    if phase.output:
        require_within(0, -phase.age, Interval(carrier.dead.lo, None), f"the output of {carrier.name}")
    elif carrier.dead.hi == 0:
        raise NotPermitted(f"carrier {carrier.name} has no dead time, so that it cannot be in one at time 0")
    else:
        require_within(0, -phase.age, Interval(0, carrier.dead.hi), f"the end of the dead time of {carrier.name}")
    return Reference(carrier, phase.high, -phase.age, phase.output)
