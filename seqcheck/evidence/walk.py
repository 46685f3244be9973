"""A walk through the events of a trace: each must be permitted, and no deadline may be overrun."""

from collections.abc import Iterator

from seqcheck.drive import Command, Drive, Follow, Known
from seqcheck.evidence.cycles import Gap, looked_at, merged
from seqcheck.evidence.interlocks import Interlocks
from seqcheck.evidence.pins import Pins
from seqcheck.evidence.possible import delays
from seqcheck.evidence.references import references
from seqcheck.evidence.refusal import Due, NotPermitted, described
from seqcheck.evidence.sequence import Sequence
from seqcheck.hazards import Length
from seqcheck.quantities import shown
from seqcheck.verdict import Act, Event, Trace


class Walk:
    """The concrete state of a drive at one moment of a trace, and what was seen until then.

    `commands` and `known` are timelines: the passed command of each switch of the hazard, and what was known; `gaps`
    are the times that the commands leave out, since cycles in them repeat those before.
    Raises NotPermitted from the start on where the trace is none of the drive.
    """

    def __init__(self, drive: Drive, trace: Trace) -> None:
        self.judged = frozenset(literal.switch for literal in trace.hazard.literals)
        self.concerned = self.judged | (_partners(drive, self.judged) if trace.interlocked else frozenset())
        self.now = 0
        self.references = references(drive, trace.phases)
        self.pins = Pins(drive, self.references, self.concerned)
        self.sequence = Sequence(drive, self.pins)
        self.interlocks = Interlocks(drive, self.judged, trace.interlocked, self.pins.commands)
        self.commands: dict[str, list[tuple[int | None, Command]]] = {
            switch: [(None, self.passed(switch))] for switch in sorted(self.judged)
        }
        self._memory = sum(time for one in delays(drive, trace.hazard).values() for time in (one.rise, one.fall))
        self._memory += trace.hazard.asks.limit if isinstance(trace.hazard.asks, Length) else 0
        self._memory += sum(guard.dead.lo for guard in self.interlocks.guards)
        self.gaps: dict[str, list[Gap]] = {switch: [] for switch in self.judged}
        self.known: list[tuple[int | None, tuple[Known, ...]]] = [(None, self.sequence.known)]

    def passed(self, switch: str) -> Command:
        """The command that reaches the path of `switch` now."""
        return self.interlocks.passed(switch, self.pins.commands)

    def step(self, number: int, event: Event) -> None:
        """The next event happens; NotPermitted, with its number and time, where it cannot."""
        try:
            self._pass_to(event.time)
            self.sequence.require_no_break(event.act)
            self._require_rest(event)
            self._apply(event)
        except NotPermitted as why:
            at = f"Event {number} ({described(event)}) at {shown(event.time)}"
            raise NotPermitted(f"{at} is not permitted: {why}.") from None
        self._note(self.now)

    def finish(self, end: int) -> None:
        """The trace ends; NotPermitted where something should have happened before."""
        try:
            self._pass_to(end)
            if self.sequence.within_one_event:
                raise NotPermitted("an event is only half done")
        except NotPermitted as why:
            raise NotPermitted(f"The end of the run at {shown(end)} is not permitted: {why}.") from None

    def _pass_to(self, time: int) -> None:
        if time < self.now:
            raise NotPermitted(f"it is {shown(self.now)} already")
        over = min((due for due in self._dues() if due.time < time), key=lambda due: due.time, default=None)
        if over is not None:
            raise NotPermitted(f"{over.what} by {shown(over.time)}")
        self.now = time

    def _dues(self) -> Iterator[Due]:
        for reference in self.references.values():
            yield from reference.dues()
        yield from self.pins.dues()
        yield from self.sequence.dues()
        yield from self.interlocks.dues()

    def _apply(self, event: Event) -> None:
        if event.writes and event.act not in (Act.BEGINS, Act.WRITES, Act.ENTERS):
            raise NotPermitted("such an event writes nothing")
        match event.act:
            case Act.BEGINS:
                self.sequence.begins(event)
            case Act.WRITES:
                self.sequence.writes(event)
            case Act.ENTERS:
                self.sequence.enters(event)
            case Act.ARRIVES:
                self.sequence.arrives(event)
            case Act.RESTS:
                self.pins.rest(event.time, event.name)
            case Act.CLEARS:
                self.interlocks.clears(event)
            case _:
                self._apply_to_carrier(event)

    def _apply_to_carrier(self, event: Event) -> None:
        if event.name not in self.references:
            raise NotPermitted(f"the trace gives no phase of carrier {event.name}")
        if event.act is Act.CYCLES:
            self._cycle(event)
            return
        acts = {
            Act.RISES: self.pins.rises,
            Act.FALLS: self.pins.falls,
            Act.OUTPUT: self.pins.output,
            Act.UPDATES: self.pins.update,
        }
        acts[event.act](event.time, event.name)

    def _cycle(self, event: Event) -> None:
        """A carrier begins whole cycles: what they make of the commands is worked out at once, up to their end."""
        cycles, reference = event.cycles, self.references[event.name]
        if cycles is None:
            raise NotPermitted("it does not say which cycles")
        if any(held.carrier == event.name for held in self.pins.held.values()):
            raise NotPermitted(f"writes are held for carrier {event.name}")
        cells = {switch: self.pins.effective[switch] for switch in sorted(self.concerned)}
        followed = {switch: cell for switch, cell in cells.items() if isinstance(cell, Follow)}
        if self.interlocks.guards and any(cell.carrier != event.name for cell in followed.values()):
            raise NotPermitted("interlocked switches follow other carriers, so that no cycle is like the one before")
        reference.cycle(event.time, cycles)
        mine = {switch: cell.inverted for switch, cell in followed.items() if cell.carrier == event.name}
        told = merged({switch: reference.outputs(inverted, cycles) for switch, inverted in mine.items()})
        kept, gap = looked_at(event.time, cycles, self._memory)
        for start in kept:
            if gap is not None and start == gap.end:
                self._over(gap.start)
                self.interlocks.repeat(gap.end - gap.start)
            for after, commands in told:
                self._told(start + after, commands)
        self._told(reference.edge, {switch: reference.output(inverted) for switch, inverted in mine.items()})
        if gap is not None:
            for gaps in self.gaps.values():
                gaps.append(gap)

    def _told(self, time: int, commands: dict[str, Command]) -> None:
        """Within whole cycles some switches are told this; interlocks clear at the soonest."""
        self._over(time)
        self.pins.commands.update(commands)
        self._note(time)

    def _over(self, time: int) -> None:
        """Dead times of interlocks that are over before `time` within whole cycles."""
        while (due := self.interlocks.clear_before(time)) is not None:
            self._note(due)

    def _require_rest(self, event: Event) -> None:
        """While a carrier runs whole cycles only carriers may move, and no held write may act."""
        cycling = [name for name, one in self.references.items() if one.edge > event.time]
        edges = (Act.RISES, Act.FALLS, Act.OUTPUT, Act.CYCLES)
        acts = event.act is Act.RISES and any(held.carrier == event.name for held in self.pins.held.values())
        if cycling and (event.act not in edges or acts):
            raise NotPermitted(f"{cycling[0]} is in the middle of whole cycles")

    def _note(self, time: int) -> None:
        self.interlocks.see(time, self.pins.commands)
        for switch, timeline in self.commands.items():
            if timeline[-1][1] is not self.passed(switch):
                timeline.append((time, self.passed(switch)))
        if self.known[-1][1] != self.sequence.known:
            self.known.append((time, self.sequence.known))


def _partners(drive: Drive, judged: frozenset[str]) -> frozenset[str]:
    """The switches that an interlock ties to a judged one."""
    pairs = [{lock.first, lock.second} for lock in drive.interlocks]
    return frozenset(switch for pair in pairs if pair & judged for switch in pair)
