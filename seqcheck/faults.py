"""Single faults, as data: what is stuck, what it then brings about, and where."""

from collections.abc import Sequence
from dataclasses import dataclass

from seqcheck.drive import Drive, Move, Trip
from seqcheck.hazards import Fault, Hazard


@dataclass(frozen=True, slots=True, order=True)
class Where:
    """A place in a run: at rest in `mode` where `run` is None, else in the run of the move or trip at that place of
    Drive.moves followed by Drive.trips; `mode` is then where it was left or taken from."""

    mode: str
    run: int | None

    def run_of(self, drive: Drive) -> Move | Trip | None:
        """The move or trip, None at rest."""
        runs: tuple[Move | Trip, ...] = (*drive.moves, *drive.trips)
        return None if self.run is None else runs[self.run]


@dataclass(frozen=True, slots=True)
class Spread:
    """All places in which a hazard happens for a positive time, and the modes that themselves hold it.

    `limit` names a limit that was reached before all were known; those that are there are certain all the same.
    """

    places: frozenset[Where]
    held: frozenset[str]
    limit: str | None = None


@dataclass(frozen=True, slots=True)
class Brought:
    """What a fault makes of one hazard of the drive: where it happens then.

    `left` has the literals that must still come together beside what the fault does by itself. `anyway`: it happens
    without a fault too.
    """

    hazard: Hazard
    left: Hazard
    spread: Spread
    anyway: bool


@dataclass(frozen=True, slots=True)
class Faulted:
    """What faults that come to the same bring about, each alone: one entry for each hazard that is possible then, or
    undecided; none if nothing comes of it."""

    faults: tuple[Fault, ...]
    brings: tuple[Brought, ...]


def concerned(drive: Drive, switch: str) -> bool:
    """Whether some interlock looks at the pin of a switch."""
    return any(switch in (one.first, one.second) for one in drive.interlocks)


def affected(drive: Drive, fault: Fault, hazards: Sequence[Hazard]) -> list[Hazard]:
    """The hazards that a fault can bring about or make possible in more places."""
    names = {fault.switch}
    if fault.pin:
        names.update(*({one.first, one.second} for one in drive.interlocks if fault.switch in (one.first, one.second)))
    return [one for one in hazards if names & {literal.switch for literal in one.literals}]
