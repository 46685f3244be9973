"""Sentences about a hazard and its verdict that every form says alike."""

from seqcheck.drive import RESET, Above, Command, CurrentOut, Drive, Fixed, Known, Mode
from seqcheck.hazards import Clearing, Current, Fault, Following, Hazard, Lasting, Length, Stuck, reach
from seqcheck.quantities import shown
from seqcheck.reports.pieces import listed
from seqcheck.verdict import Check, Span, Unsafe

CAUTION = "A proof is about the file, not about the board."
NOTHING = "nothing to prove"
SERVES = "this file only serves 'use'"


def switches(hazard: Hazard) -> str:
    """The switches of a hazard in a sentence, as the file would write the literals: `UH and VL off`."""
    return listed([str(one) for one in hazard.literals])


def subject(hazard: Hazard) -> str:
    """What the hazard is, as a noun: `P to N through UH and UL`, `current out of X with Af and Bf off`, or the switches
    alone where nothing is joined; for a rule about lengths what must not be: `UH on for more than 225 us`; for one
    about single faults also the fault and the mode."""
    if isinstance(hazard.asks, Stuck):
        asks = hazard.asks
        return f"{_ends(hazard.joins)} through {_through(hazard)} at rest in {asks.mode} with {stuck(asks)}"
    if isinstance(hazard.asks, Length):
        return _forbidden(hazard, hazard.asks)
    if hazard.currents:
        return f"{flowing(hazard.currents)} with {_named(hazard)} off"
    if not hazard.joins:
        return switches(hazard)
    return f"{_ends(hazard.joins)} through {switches(hazard)}"


def _ends(joins: tuple[str, ...]) -> str:
    return " to ".join(joins)


def stuck(asks: Stuck) -> str:
    """What is stuck: `UH, or its pin, stuck on`, `UH stuck on` or `the pin of UH stuck off`."""
    first: Fault = asks.faults[0]
    name = f"the pin of {first.switch}" if first.pin else first.switch
    return f"{name}{', or its pin,' if len(asks.faults) > 1 else ''} stuck {'on' if first.on else 'off'}"


def _through(hazard: Hazard) -> str:
    """All switches of a short, also the one that is stuck."""
    own = [one.switch for one in hazard.asks.faults[:1] if not one.pin] if isinstance(hazard.asks, Stuck) else []
    return listed([*own, *map(str, hazard.literals)])


def _forbidden(hazard: Hazard, asks: Length) -> str:
    if isinstance(asks, Following):
        return f"{asks.entered} entered less than {shown(asks.limit)} after {asks.left} is left"
    if isinstance(asks, Clearing):
        return f"{hazard.literals[0]} able to conduct more than {shown(asks.limit)} after {asks.trip} arrives"
    assert isinstance(asks, Lasting)
    return f"{_commanded(hazard)} for {'more' if asks.longer else 'less'} than {shown(asks.limit)}"


def _commanded(hazard: Hazard) -> str:
    return f"{hazard.literals[0].switch} {'on' if hazard.literals[0].on else 'off'}"


def flowing(currents: tuple[Current, ...]) -> str:
    """Currents in a sentence: `current out of X or into X`, `current from U to V`, `current between U and V`."""
    return f"current {listed(list(dict.fromkeys(_way(one, currents) for one in currents)), 'or')}"


def _way(current: Current, among: tuple[Current, ...]) -> str:
    start, end = current.out_of, current.into
    if start is None or end is None:
        return f"into {end}" if start is None else f"out of {start}"
    if Current(end, start) in among:
        return f"between {min(start, end)} and {max(start, end)}"
    return f"from {start} to {end}"


def _named(hazard: Hazard) -> str:
    return listed([one.switch for one in hazard.literals])


def _off(hazard: Hazard) -> str:
    """The switches that are off, with their verb: `Af and Bf are both off`."""
    count = len(hazard.literals)
    return f"{_named(hazard)} {'is off' if count == 1 else 'are both off' if count == 2 else 'are all off'}"


def stretch(verdict: Unsafe) -> str:
    """What the time is called that a run is shown for."""
    if verdict.check is Check.THIN_MARGIN:
        return "gap"
    if isinstance(verdict.hazard.asks, Lasting):
        return "excess" if verdict.hazard.asks.longer else "pulse"
    if isinstance(verdict.hazard.asks, Following):
        return "interval"
    if isinstance(verdict.hazard.asks, Clearing):
        return "lateness"
    return "opening" if verdict.hazard.currents else "overlap"


def shown_for(verdict: Unsafe) -> Span:
    """The time for which a run is shown: the overlap, or the gap that is too short (1 ps where there is none)."""
    trace = verdict.trace
    if trace.overlap_to is not None and trace.hazard.asks is not None:
        return Span(trace.overlap_from, max(trace.overlap_to, trace.overlap_from + 1))
    if trace.prolonged is None:
        return Span(trace.overlap_from, trace.overlap_to)
    gap = trace.prolonged[1] - 1
    return Span(trace.overlap_from - gap, trace.overlap_from + (gap == 0))


def stated(verdict: Unsafe) -> str:
    """One sentence without full stop: what can happen, for how long, and against which rule."""
    rule = f", against line {verdict.rule.line}" if verdict.rule is not None else ""
    if isinstance(verdict.hazard.asks, Stuck):
        return f"with {stuck(verdict.hazard.asks)}, {happens(verdict.hazard, verdict.overlap, verdict.greatest)}{rule}"
    if verdict.hazard.asks is not None:
        return f"{_length(verdict)}{rule}"
    if verdict.check is not Check.THIN_MARGIN or verdict.trace.prolonged is None:
        return f"{happens(verdict.hazard, verdict.overlap, verdict.greatest)}{rule}"
    (literal, later), short = verdict.trace.prolonged, verdict.overlap or 0
    others = listed([str(one) for one in verdict.hazard.literals if one != literal])
    return (
        f"{others} can follow {literal} after {shown(later - 1)}, {shown(short)} sooner than the margin of "
        f"{shown(later - 1 + short)} lets it{rule}"
    )


def _length(verdict: Unsafe) -> str:
    """What lasts too long or too short a time, and how long."""
    asks, trace = verdict.hazard.asks, verdict.trace
    assert isinstance(asks, Length), "it is about a length"
    if isinstance(asks, Lasting) and asks.longer:
        longest = "without end" if verdict.overlap is None else shown(asks.limit + verdict.overlap)
        bound = "" if verdict.overlap is None else "for up to " if verdict.greatest else "for at least "
        return f"{_commanded(verdict.hazard)} can be commanded without a break {bound}{longest}"
    if isinstance(asks, Clearing):
        how_long = lasting(verdict.overlap, verdict.greatest)
        after = f"later than {shown(asks.limit)} after {asks.trip} arrives"
        return f"{verdict.hazard.literals[0]} can conduct {after}, {how_long}"
    time = shown(asks.limit - (verdict.overlap or 0))
    least = "" if verdict.greatest else " or less"
    if isinstance(asks, Following):
        return f"{asks.entered} can be entered {time}{least} after {asks.left} is left"
    unknown = Command.UNKNOWN in {command for when, command in _told(verdict) if (when or 0) == trace.overlap_from}
    why = ", for its pin floats" if unknown else ""
    return f"{_commanded(verdict.hazard)} can be commanded for no more than {time}{least}{why}"


def _told(verdict: Unsafe) -> tuple[tuple[int | None, Command], ...]:
    return verdict.replayed.commands[verdict.hazard.literals[0].switch]


def lasting(overlap: int | None, greatest: bool) -> str:
    """How long, to stand after a verb."""
    if overlap is None:
        return "without end"
    return f"for {'up to' if greatest else 'at least'} {shown(overlap)}"


def happens(hazard: Hazard, overlap: int | None, greatest: bool = True) -> str:
    """One sentence without full stop: what can happen and for how long."""
    if hazard.currents:
        return f"{flowing(hazard.currents)} has no way while {_off(hazard)}, {lasting(overlap, greatest)}"
    if hazard.joins:
        rest = f" at rest in {hazard.asks.mode}" if isinstance(hazard.asks, Stuck) else ""
        return f"{_joined(hazard.joins)} through {_through(hazard)}{rest}, {lasting(overlap, greatest)}"
    each = [f"{one.switch} can {'conduct' if one.on else 'be off'}" for one in hazard.literals]
    return f"{listed(each)}, all at once, {lasting(overlap, greatest)}"


def _joined(nodes: tuple[str, ...]) -> str:
    """The stiff nodes that can be joined, or the one whose own element is shorted."""
    return f"{nodes[0]} can be joined to {listed(nodes[1:])}" if len(nodes) > 1 else f"{nodes[0]} can be shorted"


def row_at_fault(verdict: Unsafe, drive: Drive) -> Mode | None:
    """The row of the switching table that itself holds the hazard, None where it comes in passing."""
    if verdict.check is not Check.SHORT and verdict.row is None:
        return None
    rows = drive.modes.values()
    return next((row for row in rows if (row.place.file, row.place.line) == _line_of(verdict)), None)


def _line_of(verdict: Unsafe) -> tuple[str, int]:
    return verdict.place.file, verdict.place.line


def where(verdict: Unsafe, drive: Drive) -> str:
    """Which row of the table holds the hazard, as a sentence without full stop; empty where it comes in passing."""
    row = row_at_fault(verdict, drive)
    if row is None:
        return ""
    if verdict.hazard.currents:
        together = " together" if len(verdict.hazard.literals) > 1 else ""
        return f"row '{row.name}' of the table (line {row.place.line}) can leave {_named(verdict.hazard)} off{together}"
    if isinstance(verdict.hazard.asks, Stuck):
        names = switches(verdict.hazard)
        return f"row '{row.name}' of the table (line {row.place.line}) commands {names}" if names else ""
    if verdict.hazard.asks is not None:
        return f"row '{row.name}' of the table (line {row.place.line}) leaves {_commanded(verdict.hazard)}"
    return f"row '{row.name}' of the table (line {row.place.line}) commands {switches(verdict.hazard)} together"


def condition(hazard: Hazard) -> str:
    """When the short carries current, as a sentence without full stop; empty where it always does."""
    if not hazard.needs or frozenset() in hazard.needs or hazard.currents:
        return ""
    ways = sorted(listed(sorted(map(_so, way))) for way in hazard.needs)
    return f"it carries current while {listed(ways, 'or')}"


def _so(fact: Known) -> str:
    if isinstance(fact, Above):
        return f"{fact.upper} is above {fact.lower}"
    return f"current flows {'out of' if isinstance(fact, CurrentOut) else 'into'} {fact.node}"


def cure(verdict: Unsafe, drive: Drive) -> str:
    """What would cure it, with the number, as a sentence without full stop."""
    if verdict.cure is not None:
        shortage = verdict.cure.shortage
        missing = "" if shortage is None else f"{shown(shortage)} missing "
        return f"{verdict.cure.words} ({missing}at {verdict.cure.place})"
    if isinstance(verdict.hazard.asks, Stuck):
        return _cure_of_fault(verdict, drive, verdict.hazard.asks)
    if verdict.hazard.asks is not None:
        return _cure_of_length(verdict, drive)
    if verdict.hazard.currents:
        return _cure_of_opening(verdict, drive)
    if (row := row_at_fault(verdict, drive)) is not None:
        if verdict.check is Check.TOGETHER:
            return f"no wait cures this; row '{row.name}' must not command {switches(verdict.hazard)} together"
        return f"no wait cures this; row '{row.name}' must leave one of {switches(verdict.hazard)} off"
    if verdict.overlap is None:
        return (
            f"no single longer wait was found to do it: once {switches(verdict.hazard)} are so together this run never "
            "parts them; one must be taken back before the other is commanded"
        )
    if verdict.check is Check.THIN_MARGIN:
        return f"{switches(verdict.hazard)} must be kept apart {shown(verdict.overlap)} longer"
    bound = "up to" if verdict.greatest else "at least"
    return f"{switches(verdict.hazard)} must be kept apart {bound} {shown(verdict.overlap)} longer"


def _cure_of_length(verdict: Unsafe, drive: Drive) -> str:
    asks = verdict.hazard.asks
    if isinstance(asks, Following):
        return f"{shown(verdict.overlap or 0)} more must pass between leaving {asks.left} and entering {asks.entered}"
    name = verdict.hazard.literals[0].switch
    if isinstance(asks, Clearing):
        if verdict.overlap is None:
            return f"no wait cures this; nothing that follows {asks.trip} turns {name} off"
        return f"shorten what comes between {asks.trip} and the turn-off of {name}, or allow it more time"
    if isinstance(asks, Lasting) and asks.longer:
        if (row := row_at_fault(verdict, drive)) is not None:
            return f"bound the stay in '{row.name}', or put {name} on a carrier there"
        return f"{name} must be turned off sooner, or for some time in between"
    return f"{_commanded(verdict.hazard)} must be commanded for {shown(verdict.overlap or 0)} longer"


def _cure_of_fault(verdict: Unsafe, drive: Drive, asks: Stuck) -> str:
    """What would keep the other switches from conducting in the mode; for their last turn-off the time it takes."""
    others = verdict.hazard.literals
    series = "put another switch in series"
    if not others:
        return f"no mode tolerates this; {series}"
    if asks.mode == RESET:
        return f"no wait cures this, for a reset waits for nothing; {series}"
    row = dict(zip(drive.columns, drive.modes[asks.mode].cells, strict=True))
    lingering = [one for one in others if row[one.switch] is Fixed.OFF]
    if not lingering:
        one_of = str(others[0]) if len(others) == 1 else f"one of {switches(verdict.hazard)}"
        return f"no wait cures this; row '{asks.mode}' must leave {one_of} off, or {series}"
    longest = min(reach(drive.paths[one.switch])[1].hi or 0 for one in lingering)
    names = listed([str(one) for one in lingering], "or")
    wait = f", and a wait of at least {shown(longest)} after it" if longest else ""
    return f"what leads to {asks.mode} must end with the turn-off of {names}{wait}, which belongs to the move"


def _cure_of_opening(verdict: Unsafe, drive: Drive) -> str:
    names, single = _named(verdict.hazard), len(verdict.hazard.literals) == 1
    one_of = names if single else f"one of {names}"
    if (row := row_at_fault(verdict, drive)) is not None:
        return f"no wait cures this; row '{row.name}' must keep {one_of} on"
    if verdict.overlap is None:
        return f"no wait cures this; nothing ends it once {_off(verdict.hazard)}"
    bound = f"{'up to' if verdict.greatest else 'at least'} {shown(verdict.overlap)}"
    if single:
        return f"{names} must stay on while this current flows"
    return f"{one_of} must turn on {bound} sooner, or the others off {bound} later"
