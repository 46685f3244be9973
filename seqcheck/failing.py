"""What each single fault brings about: one thing stuck, the firmware as it is, every hazard asked anew.

A switch that is stuck does by itself what its literals ask for, or never; so of a hazard the other literals are left,
and they are looked for in the drive as it is, whose firmware, pins and interlocks notice nothing. A pin that is stuck
does the same to its switch where no interlock looks at it. Where one does, the drive is looked at in which the pin is
so: always released, and resting at that level.
"""

from collections.abc import Callable, Iterator, Sequence

from seqcheck.drive import Drive, Fixed, Level, Mode, Move, Pin, SetStep, Step, Trip
from seqcheck.faults import Brought, Faulted, affected, concerned
from seqcheck.hazards import Fault, Hazard
from seqcheck.proving.prove import Prover
from seqcheck.proving.search import LimitReached
from seqcheck.quantities import INSTANT
from seqcheck.records import replace
from seqcheck.verdict import Check, Outcome, Unsafe

Observer = Callable[[int], None]

MOST_ZONES = 6_000
"""Zones for one hazard under one fault; where more are needed, what is found until then is called `at least`."""


def with_faults(outcome: Outcome, observer: Observer) -> Outcome:
    """The outcome of a file with what single faults bring about; verdicts and findings stay as they are."""
    return replace(outcome, faults=single_faults(outcome.drive, *asked_anew(outcome), observer))


def asked_anew(outcome: Outcome) -> tuple[tuple[Hazard, ...], frozenset[Hazard]]:
    """The hazards that are asked anew under each fault, and those that happen without one."""
    hazards = tuple(dict.fromkeys(one.hazard for one in outcome.verdicts if one.hazard.asks is None))
    unsafe = [one for one in outcome.verdicts if isinstance(one, Unsafe) and one.check is not Check.THIN_MARGIN]
    return hazards, frozenset(one.hazard for one in unsafe)


def single_faults(
    drive: Drive, hazards: Sequence[Hazard], anyway: frozenset[Hazard], observer: Observer
) -> tuple[Faulted, ...]:
    """What every switch stuck and every pin stuck brings about, each alone, in the order of the stage.

    `anyway` are the hazards that happen without a fault. The observer may end the search for one hazard by raising
    LimitReached, which is then said of that hazard alone.
    """
    prover = Prover(drive)
    found: list[Faulted] = []
    for switch in drive.stage.switches:
        found += faults_of(prover, switch.name, hazards, anyway, observer)
    return tuple(found)


def faults_of(
    prover: Prover, switch: str, hazards: Sequence[Hazard], anyway: frozenset[Hazard], observer: Observer
) -> list[Faulted]:
    """What one switch brings about that is stuck, and its pin, as single_faults tells it."""
    drive, found = prover.drive, []
    for on in (True, False):
        own, wired = Fault(switch, on, pin=False), Fault(switch, on, pin=True)
        alike = (own,) if concerned(drive, switch) else (own, wired)
        brings = _brought(prover, left_of(own, affected(drive, own, hazards)), anyway, observer)
        found.append(Faulted(alike, tuple(brings)))
        if wired not in alike:
            asked = [(one, one) for one in affected(drive, wired, hazards)]
            brings = _brought(Prover(with_pin_stuck(drive, switch, on)), asked, anyway, observer)
            found.append(Faulted((wired,), tuple(brings)))
    return found


def left_of(fault: Fault, hazards: Sequence[Hazard]) -> list[tuple[Hazard, Hazard]]:
    """Hazards with what is left of them when a switch is stuck; those that it makes impossible left out."""
    found = []
    for hazard in hazards:
        other = tuple(one for one in hazard.literals if one.switch != fault.switch)
        if all(one.on == fault.on for one in hazard.literals if one.switch == fault.switch):
            found.append((hazard, replace(hazard, literals=other)))
    return found


def _brought(
    prover: Prover, asked: Sequence[tuple[Hazard, Hazard]], anyway: frozenset[Hazard], observer: Observer
) -> Iterator[Brought]:
    def within(count: int) -> None:
        observer(count)
        if count > MOST_ZONES:
            raise LimitReached(f"{MOST_ZONES} zones")

    for hazard, left in asked:
        spread = prover.spread(left, within)
        if spread.places or spread.limit is not None:
            yield Brought(hazard, left, spread, hazard in anyway)


# A pin that is stuck


def with_pin_stuck(drive: Drive, switch: str, on: bool) -> Drive:
    """The drive in which the command at the pin of a switch is always on or always off.

    What the firmware writes there goes to a column of its own, at the place of the old one, so that it takes the time
    that it took; nothing looks at it. The switch itself is `free` in every row and rests at the level.
    """
    ghost = as_written(switch)
    stuck = Pin(drive.place, switch, "", True, Level.HIGH if on else Level.LOW, INSTANT, None)
    pins = {**drive.pins, switch: stuck}
    if switch in drive.pins:
        pins[ghost] = replace(drive.pins[switch], switch=ghost)
    modes = {name: _freed(mode) for name, mode in drive.modes.items()}
    return replace(
        drive,
        columns=(*(ghost if name == switch else name for name in drive.columns), switch),
        paths={**drive.paths, ghost: ()},
        pins=pins,
        modes=modes,
        moves=tuple(_redirected_move(move, switch, ghost) for move in drive.moves),
        trips=tuple(_redirected_trip(trip, switch, ghost) for trip in drive.trips),
    )


def as_written(switch: str) -> str:
    """The column of such a drive that takes up what the firmware writes to a switch; no file can have the name."""
    return f"{switch} as written"


def _freed(mode: Mode) -> Mode:
    return replace(mode, cells=(*mode.cells, Fixed.FREE))


def _redirected_move(move: Move, switch: str, ghost: str) -> Move:
    return replace(move, steps=_redirected(move.steps, switch, ghost))


def _redirected_trip(trip: Trip, switch: str, ghost: str) -> Trip:
    return replace(trip, steps=_redirected(trip.steps, switch, ghost))


def _redirected(steps: tuple[Step, ...], switch: str, ghost: str) -> tuple[Step, ...]:
    return tuple(
        replace(one, writes=tuple((ghost if name == switch else name, cell) for name, cell in one.writes))
        if isinstance(one, SetStep)
        else one
        for one in steps
    )
