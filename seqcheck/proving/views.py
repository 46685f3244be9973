"""What one hazard looks at: which switches, carriers and interlock directions take part, and how it is to be proven."""

from seqcheck.drive import RESET, Drive, Follow, SetStep, Update
from seqcheck.hazards import Delays, Hazard
from seqcheck.quantities import Interval
from seqcheck.records import dataclass


@dataclass(frozen=True, slots=True)
class Lock:
    """One direction of an interlock: `guarded` passes only while `partner` is off; places in View.switches."""

    guarded: int
    partner: int
    dead: Interval


@dataclass(frozen=True, slots=True)
class View:
    """The part of a drive that one hazard looks at.

    `switches` are the hazard's own and the partners of their interlocks; `carriers` those that these may follow (and
    whatever else can tell when their writes act); `held` the switches whose held writes matter.
    """

    drive: Drive
    hazard: Hazard
    delays: tuple[Delays, ...]
    switches: tuple[str, ...]
    carriers: tuple[str, ...]
    held: frozenset[str]
    locks: tuple[Lock, ...]


def view(drive: Drive, hazard: Hazard, delays: tuple[Delays, ...], interlocks: bool) -> View:
    """What a hazard looks at; with `interlocks` False as if the drive had none."""
    names = list(dict.fromkeys(literal.switch for literal in hazard.literals))
    pairs = [one for one in drive.interlocks if interlocks and (one.first in names or one.second in names)]
    directions = [
        (guarded, partner, one.dead)
        for one in pairs
        for guarded, partner in ((one.first, one.second), (one.second, one.first))
        if guarded in names
    ]
    switches = tuple(dict.fromkeys((*names, *(partner for _, partner, _ in directions))))
    locks = tuple(Lock(switches.index(guarded), switches.index(partner), dead) for guarded, partner, dead in directions)
    if cancels(drive):
        waiting = {carrier.name for carrier in drive.carriers.values() if carrier.update is not Update.AT_ONCE}
        carriers = tuple(name for name in drive.carriers if name in waiting or name in _carriers(drive, switches))
        return View(drive, hazard, delays, switches, carriers, frozenset(drive.columns), locks)
    return View(drive, hazard, delays, switches, _carriers(drive, switches), frozenset(switches), locks)


def cancels(drive: Drive) -> bool:
    """Whether a break input can cancel held writes: then every held write can change what is written afterwards."""
    return any(trip.at_once and trip.target != RESET for trip in drive.trips)


def _carriers(drive: Drive, switches: tuple[str, ...]) -> tuple[str, ...]:
    """The carriers that these switches may follow.

    Where one of them updates within a period, a switch that may be held for it counts with all of its carriers, since
    the oldest write held sets the time for all.
    """
    used = _followed(drive)
    found = set().union(*(used[name] for name in switches))
    while any(drive.carriers[name].update is Update.WITHIN_PERIOD for name in found):
        spans = {name for name in found if drive.carriers[name].update is Update.WITHIN_PERIOD}
        wider = found.union(*(one for one in used.values() if one & spans))
        if wider == found:
            break
        found = wider
    return tuple(name for name in drive.carriers if name in found)


def _followed(drive: Drive) -> dict[str, set[str]]:
    """The carriers that each switch may follow."""
    found: dict[str, set[str]] = {name: set() for name in drive.columns}
    every = list(found.values())
    for mode in drive.modes.values():
        for used, cell in zip(every, mode.cells, strict=True):
            if isinstance(cell, Follow):
                used.add(cell.carrier)
    for steps in (*(move.steps for move in drive.moves), *(trip.steps for trip in drive.trips)):
        for step in steps:
            for name, cell in step.writes if isinstance(step, SetStep) else ():
                if isinstance(cell, Follow):
                    found[name].add(cell.carrier)
    return found
