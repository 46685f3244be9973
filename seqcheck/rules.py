"""What the rules of a file forbid, as hazards."""

from collections.abc import Iterator

from seqcheck.drive import ApartRule, ClearsRule, Lasts, LastsRule, NeverRule, Rule
from seqcheck.hazards import Clearing, Following, Hazard, Lasting, Literal, Stuck
from seqcheck.verdict import Check


def asked_by(rule: Rule) -> Iterator[Hazard]:
    """The hazards that a rule asks for; none where nothing can be shorter than its limit.

    One about margins or single faults asks for no hazard of its own, but about shorts.
    """
    if isinstance(rule, NeverRule):
        yield Hazard(tuple(Literal(switch, on) for switch, on in rule.literals), ())
    elif isinstance(rule, LastsRule):
        longer = rule.lasts is Lasts.ON_AT_MOST
        if longer or rule.limit:
            literal = Literal(rule.switch, rule.lasts is not Lasts.OFF_AT_LEAST)
            yield Hazard((literal,), (), asks=Lasting(longer, rule.limit))
    elif isinstance(rule, ClearsRule):
        for switch in rule.switches:
            yield Hazard((Literal(switch),), (), asks=Clearing(rule.trip, rule.within))
    elif isinstance(rule, ApartRule) and rule.least:
        for left, entered in ((rule.first, rule.second), (rule.second, rule.first)):
            yield Hazard((), (), asks=Following(left, entered, rule.least))


def check_of_rule(hazard: Hazard) -> Check:
    """The check that finds what a rule forbids."""
    if isinstance(hazard.asks, Following):
        return Check.TOO_SOON
    if isinstance(hazard.asks, Clearing):
        return Check.LATE_TRIP
    if isinstance(hazard.asks, Lasting):
        return Check.LONG_ON if hazard.asks.longer else Check.SHORT_PULSE
    if isinstance(hazard.asks, Stuck):
        return Check.SINGLE_FAULT
    return Check.TOGETHER


def never_so(hazard: Hazard) -> str:
    """What is proven of a hazard, to stand after `that`."""
    if isinstance(hazard.asks, Following):
        return f"{hazard.asks.entered} never follows {hazard.asks.left} too soon"
    if isinstance(hazard.asks, Stuck):
        fault = hazard.asks.faults[0]
        stuck = f"{'the pin of ' if fault.pin else ''}{fault.switch} stuck"
        return f"{' to '.join(hazard.joins)} are not joined in {hazard.asks.mode} with {stuck}"
    literal = hazard.literals[0]
    if isinstance(hazard.asks, Clearing):
        return f"{hazard.asks.trip} never clears {literal} too late"
    state = "on" if literal.on else "off"
    if isinstance(hazard.asks, Lasting):
        return f"{literal.switch} is never {state} for {'too long' if hazard.asks.longer else 'too short a time'}"
    return f"{' with '.join(map(str, hazard.literals))} never meet"
