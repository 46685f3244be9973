"""What of a drive the checker looks at for one hazard.

Other switches matter only by the time that their writes take. When their writes act is told by nothing that is looked
at, unless a break input cancels what is held (then what is written afterwards depends on it), or a carrier acts within
a period after the oldest write held for it, whosever that is.
"""

from dataclasses import dataclass

from seqcheck.drive import RESET, Drive, Follow, Move, SetStep, Trip, Update
from seqcheck.evidence.possible import delays
from seqcheck.hazards import Clearing, Delays, Following, Hazard, Lasting
from seqcheck.quantities import Interval


@dataclass(frozen=True, slots=True)
class Guard:
    """One direction of an interlock: `guarded` passes only while `partner` is off and has been for `dead`."""

    guarded: str
    partner: str
    dead: Interval


@dataclass(frozen=True, slots=True)
class Scope:
    """A hazard of a drive and what it looks at.

    `switches` are the hazard's and their partners in interlocks, `carriers` those whose phase is followed, `waiting`
    those of them that hold writes, `held` the switches whose writes they hold. `in_time`: firmware keeps its upper
    bounds; else it is free of them.
    """

    drive: Drive
    hazard: Hazard
    in_time: bool
    delays: tuple[Delays, ...]
    switches: tuple[str, ...]
    guards: tuple[Guard, ...]
    carriers: tuple[str, ...]
    waiting: frozenset[str]
    held: frozenset[str]

    def firmware(self) -> tuple[object, ...]:
        """What the firmware of the scope depends on, beside the drive: scopes that agree in it can share one."""
        held = (self.carriers, self.waiting, self.held) if self.waiting else ()
        return self.in_time, self.watched, held

    @property
    def watched(self) -> str | None:
        """The trip of which it is asked how long ago it arrived."""
        return self.hazard.asks.trip if isinstance(self.hazard.asks, Clearing) else None


Followed = dict[str, set[str]]
"""By switch: the carriers that some row or step puts it on."""


def followed(drive: Drive) -> Followed:
    """What the switches of a drive follow."""
    found: Followed = {switch: set() for switch in drive.columns}
    for mode in drive.modes.values():
        for switch, cell in zip(drive.columns, mode.cells, strict=True):
            if isinstance(cell, Follow):
                found[switch].add(cell.carrier)
    lines: tuple[Move | Trip, ...] = (*drive.moves, *drive.trips)
    for step in (step for line in lines for step in line.steps):
        for switch, one in step.writes if isinstance(step, SetStep) else ():
            if isinstance(one, Follow):
                found[switch].add(one.carrier)
    return found


def scope(drive: Drive, hazard: Hazard, in_time: bool, used: Followed) -> Scope:
    """What is looked at for `hazard`; `used` is what the switches of the drive follow."""
    own = [literal.switch for literal in hazard.literals]
    guards = tuple(
        Guard(guarded, partner, lock.dead)
        for lock in drive.interlocks
        for guarded, partner in ((lock.first, lock.second), (lock.second, lock.first))
        if guarded in own
    )
    switches = tuple(dict.fromkeys([*own, *(guard.partner for guard in guards)]))
    carriers = _looked_at(drive, switches, used)
    cancelling = any(trip.at_once and trip.target != RESET for trip in drive.trips)
    if cancelling:
        carriers |= {name for name, carrier in drive.carriers.items() if carrier.update is not Update.AT_ONCE}
    waiting = frozenset(name for name in carriers if drive.carriers[name].update is not Update.AT_ONCE)
    everyone = cancelling or any(drive.carriers[name].update is Update.WITHIN_PERIOD for name in waiting)
    return Scope(
        drive,
        hazard,
        in_time,
        _delays(drive, hazard),
        switches,
        guards,
        tuple(name for name in drive.carriers if name in carriers),
        waiting,
        frozenset(drive.columns) if everyone else frozenset(switches),
    )


def _delays(drive: Drive, hazard: Hazard) -> tuple[Delays, ...]:
    """Of each literal; and of what is watched the age at which it is told no more, as `in`: see `watch`."""
    asks = hazard.asks
    if isinstance(asks, Lasting):
        return (Delays(asks.limit if asks.longer else asks.limit - 1, 0),)
    if isinstance(asks, Following):
        return (Delays(asks.limit - 1, 0),)
    found = delays(drive, hazard)
    own = tuple(found[literal] for literal in hazard.literals)
    return (*own, Delays(asks.limit, 0)) if isinstance(asks, Clearing) else own


def _looked_at(drive: Drive, switches: tuple[str, ...], used: Followed) -> set[str]:
    """The carriers that the switches may follow; for one that acts within a period, also all that the switches on it
    may follow, since the oldest write held for it sets the time for all."""
    found: set[str] = set().union(*(used[switch] for switch in switches))
    grown = True
    while grown:
        timed = {name for name in found if drive.carriers[name].update is Update.WITHIN_PERIOD}
        wider = found.union(*(names for names in used.values() if names & timed))
        grown, found = wider != found, wider
    return found
