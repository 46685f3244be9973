"""What passes a gate driver's interlocks, at concrete times."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from seqcheck.drive import Command, Drive
from seqcheck.evidence.refusal import Due, NotPermitted, due, require_within
from seqcheck.quantities import Interval
from seqcheck.verdict import Event


@dataclass(slots=True)
class Guard:
    """One direction of an interlock: `switch` passes only while `clear`, when its partner has been off for long enough.

    `off_since` is the time at which the partner was last turned off, while its dead time runs. A partner whose command
    is not known may be off.
    """

    switch: str
    partner: str
    dead: Interval
    index: int
    clear: bool
    off_since: int | None = None

    def see(self, time: int, partner: Command) -> None:
        """The partner's command is so at `time`."""
        if partner is Command.ON:
            self.clear, self.off_since = False, None
        elif not self.clear and self.off_since is None:
            self.clear = self.dead.hi == 0
            self.off_since = None if self.clear else time


class Interlocks:
    """The interlocks that the judged switches are in; none at all where the run is judged without them."""

    def __init__(
        self, drive: Drive, judged: frozenset[str], interlocked: bool, commands: Mapping[str, Command]
    ) -> None:
        self._judged = judged
        self.guards = [
            Guard(switch, partner, lock.dead, index, commands[partner] is not Command.ON)
            for index, lock in enumerate(drive.interlocks)
            if interlocked and judged & {lock.first, lock.second}
            for switch, partner in ((lock.first, lock.second), (lock.second, lock.first))
        ]

    def see(self, time: int, commands: Mapping[str, Command]) -> None:
        """The commands at the pins are so at `time`."""
        for guard in self.guards:
            guard.see(time, commands[guard.partner])

    def clears(self, event: Event) -> None:
        """The dead time of an interlock is over for `event.name`.

        Where the switch is in several, `event.index` may say which of `Drive.interlocks`; else it is the one that must
        end first. Raises NotPermitted where none runs, or where it cannot be over yet.
        """
        running = [
            (due(guard.off_since, guard.dead, ""), guard.off_since, guard)
            for guard in self.guards
            if guard.switch == event.name and guard.off_since is not None and event.index in (-1, guard.index)
        ]
        if not running:
            raise NotPermitted(f"no dead time of an interlock runs for {event.name}")
        _, since, guard = min(running, key=lambda one: (not one[0], [due.time for due in one[0]]))
        require_within(event.time, since, guard.dead, f"the end of the interlock's dead time for {event.name}")
        guard.clear, guard.off_since = True, None

    def clear_before(self, time: int) -> int | None:
        """Let the dead time that can be over first be over then, and say when; None if none can be before `time`."""
        running = [(guard.off_since + guard.dead.lo, guard) for guard in self.guards if guard.off_since is not None]
        first = min(running, key=lambda one: one[0], default=None)
        if first is None or first[0] >= time:
            return None
        first[1].clear, first[1].off_since = True, None
        return first[0]

    def repeat(self, later: int) -> None:
        """What goes on now goes on in the same way so much later."""
        for guard in self.guards:
            if guard.off_since is not None:
                guard.off_since += later

    def passed(self, switch: str, commands: Mapping[str, Command]) -> Command:
        """The command that reaches the path of `switch`; UNKNOWN where it may be either."""
        command = commands[switch]
        guards = [guard for guard in self.guards if guard.switch == switch]
        if command is Command.OFF or not all(guard.clear for guard in guards):
            return Command.OFF
        doubtful = any(commands[guard.partner] is Command.UNKNOWN for guard in guards)
        return Command.UNKNOWN if doubtful else command

    def running(self) -> Iterator[Guard]:
        """The guards of judged switches whose dead time runs."""
        return (guard for guard in self.guards if guard.off_since is not None and guard.switch in self._judged)

    def dues(self) -> Iterator[Due]:
        """By when dead times must end."""
        for guard in self.running():
            since = guard.off_since
            assert since is not None
            yield from due(since, guard.dead, f"the interlock must clear {guard.switch}")
