"""One instant of a run: what happens in it, and how the switches stand from then on."""

from seqcheck.drive import Command
from seqcheck.records import dataclass
from seqcheck.reports.acts import Note
from seqcheck.reports.lanes import Conduct


@dataclass(frozen=True, slots=True)
class State:
    """How one switch stands: the commands given in an instant (the last one stands), and what it does from then on."""

    commands: tuple[Command, ...]
    conduct: Conduct

    @property
    def command(self) -> Command:
        """The command that stands."""
        return self.commands[-1]


@dataclass(frozen=True, slots=True)
class Instant:
    """One instant of a run; `time` is None for all that was before time 0. `states` are in the order of the lanes."""

    number: int
    time: int | None
    notes: tuple[Note, ...]
    states: tuple[State, ...]
    overlap: bool
