"""Which waiver of the file, if any, lets a finding pass."""

from seqcheck.drive import Drive, Waiver, When
from seqcheck.hazards import Clearing, Following, Hazard, Stuck
from seqcheck.verdict import WARNINGS, Finding, Unsafe


def reason(drive: Drive, found: Unsafe | Finding) -> str | None:
    """The reason of the first `waive` line for this check and one of the names that the finding is about, or None."""
    return next((one.reason for one in drive.waivers if lets_pass(one, drive, found)), None)


def lets_pass(waiver: Waiver, drive: Drive, found: Unsafe | Finding) -> bool:
    """Whether a waiver is for this check and one of the names that the finding is about."""
    if waiver.check != found.check.value:
        return False
    if isinstance(found, Unsafe):
        return waiver.name in names_of(drive, found)
    legs = _legs(drive, frozenset(found.names)) if found.check in WARNINGS else frozenset()  # these name switches
    return waiver.name in legs.union(found.names)


def names_of(drive: Drive, verdict: Unsafe) -> frozenset[str]:
    """The names that an unsafe hazard is about: its own, and the mode, event or trip at its place."""
    modes = {mode.name for mode in drive.modes.values() if mode.place == verdict.place}
    trips = {trip.name for trip in drive.trips if trip.place == verdict.place}
    moves = (move for move in drive.moves if move.place == verdict.place)
    events = {move.trigger.event for move in moves if isinstance(move.trigger, When)}
    return own_names(drive, verdict.hazard).union(modes, trips, events)


def own_names(drive: Drive, hazard: Hazard) -> frozenset[str]:
    """The names of a hazard, wherever it happens: its switches, the legs they make up, what its rule names."""
    concerned = frozenset(one.switch for one in hazard.literals)
    asks = hazard.asks
    followed = {asks.left, asks.entered} if isinstance(asks, Following) else set()
    concerned |= {one.switch for one in asks.faults} if isinstance(asks, Stuck) else set()
    modes = {asks.mode} if isinstance(asks, Stuck) else set()
    trips = {asks.trip} if isinstance(asks, Clearing) else set()
    return _legs(drive, concerned).union(concerned, followed, modes, trips)


def _legs(drive: Drive, switches: frozenset[str]) -> frozenset[str]:
    """The legs both of whose switches are among these."""
    return frozenset(leg.node for leg in drive.stage.legs if {leg.high, leg.low} <= switches)
