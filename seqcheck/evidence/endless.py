"""Whether an overlap that reaches the end of a trace can go on for ever from there."""

from seqcheck.drive import Carrier, Command, Drive, Follow, Update
from seqcheck.evidence.possible import wanted
from seqcheck.evidence.refusal import NotPermitted
from seqcheck.evidence.walk import Walk
from seqcheck.hazards import Delays, Literal
from seqcheck.quantities import Interval


def require_endless(drive: Drive, walk: Walk, found: dict[Literal, Delays]) -> None:
    """Refuse a state at the end of a trace that forces the firmware or a concerned pin to go on, or a literal to end.

    What carriers force is looked at only one literal at a time: its shortest time away from what is wanted must be one
    that its delays bridge. Raises NotPermitted.
    """
    _require_rest(walk)
    for literal in found:
        _require_lasting(drive, walk, literal, found[literal].fall)


def _require_rest(walk: Walk) -> None:
    sequence, pins = walk.sequence, walk.pins
    if sequence.in_hand is not None:
        raise NotPermitted(f"trip {sequence.in_hand.trip.name} is in hand")
    forced = next(sequence.dues(), None)
    if forced is not None:
        raise NotPermitted(forced.what)
    held = {switch for switch, one in pins.held.items() if not _may_stay_held(walk, one.carrier)}
    for switch in sorted(walk.concerned & (pins.released.keys() | held)):
        raise NotPermitted(f"the pin of {switch} is still to change")
    for guard in walk.interlocks.running():
        if pins.commands[guard.switch] is not Command.OFF:
            raise NotPermitted(f"the interlock is still to clear {guard.switch}")


def _may_stay_held(walk: Walk, carrier: str) -> bool:
    """Whether a write that waits for a rise of this carrier may wait for ever: its reference may stay as it is."""
    reference = walk.references[carrier]
    return reference.carrier.update is Update.AT_RISE and reference.span().hi is None


def _require_lasting(drive: Drive, walk: Walk, literal: Literal, fall: int) -> None:
    switch, now = literal.switch, wanted(literal, walk.passed(literal.switch))
    partners = [guard.partner for guard in walk.interlocks.guards if guard.switch == switch]
    if any(isinstance(walk.pins.effective[partner], Follow) for partner in partners):
        return
    cell = walk.pins.effective[switch]
    if isinstance(cell, Follow) and not partners:
        carrier = drive.carriers[cell.carrier]
        if now and not _must_leave(carrier, cell, literal):
            return
        away = _shortest_away(carrier, cell, literal)
        if away is None or away > fall:
            raise NotPermitted(f"{literal} cannot stay possible while its switch follows {cell}")
    elif not isinstance(cell, Follow) and not now:
        raise NotPermitted(f"{literal} is not as wanted at the end")


def _must_leave(carrier: Carrier, cell: Follow, literal: Literal) -> bool:
    """Whether the reference must leave the level at which the literal is as wanted."""
    span = _level(carrier, cell.inverted != literal.on)
    return span is None or span.hi is not None


def _shortest_away(carrier: Carrier, cell: Follow, literal: Literal) -> int | None:
    """The shortest time between two commands as wanted; None where the second never comes.

    A command comes one dead time after its edge, and not at all where the reference leaves its level sooner.
    """
    on_level, off_level = _level(carrier, not cell.inverted), _level(carrier, cell.inverted)
    if literal.on:
        never = on_level is None or (on_level.hi is not None and on_level.hi < carrier.dead.lo)
        return None if never or off_level is None else off_level.lo + carrier.dead.lo
    assert on_level is not None, "a switch that never comes on has not to leave where it is off"
    latest = on_level.lo if carrier.dead.hi is None else min(on_level.lo, carrier.dead.hi)
    return None if off_level is None and on_level.hi is None else on_level.lo - latest


def _level(carrier: Carrier, high: bool) -> Interval | None:
    return carrier.high if high else carrier.low
