"""Which waiver of the file, if any, lets a finding pass."""

from seqcheck.drive import Drive, When
from seqcheck.verdict import Finding, Unsafe


def reason(drive: Drive, found: Unsafe | Finding) -> str | None:
    """The reason of the first `waive` line for this check and one of the names that the finding is about, or None."""
    names = set(found.names) if isinstance(found, Finding) else names_of(drive, found)
    fitting = (one for one in drive.waivers if one.check == found.check.value and one.name in names)
    return next((one.reason for one in fitting), None)


def names_of(drive: Drive, verdict: Unsafe) -> frozenset[str]:
    """The names that an unsafe hazard is about: its switches, the legs they make up, and the mode, event or trip at
    its place."""
    concerned = {one.switch for one in verdict.hazard.literals}
    legs = {leg.node for leg in drive.stage.legs if {leg.high, leg.low} <= concerned}
    modes = {mode.name for mode in drive.modes.values() if mode.place == verdict.place}
    trips = {trip.name for trip in drive.trips if trip.place == verdict.place}
    moves = (move for move in drive.moves if move.place == verdict.place)
    events = {move.trigger.event for move in moves if isinstance(move.trigger, When)}
    return frozenset(concerned | legs | modes | trips | events)
