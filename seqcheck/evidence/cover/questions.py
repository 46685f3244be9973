"""What the rules of a file forbid, as the checker reads section 6 of the meaning."""

from collections.abc import Iterable, Iterator
from dataclasses import replace

from seqcheck.drive import ApartRule, ClearsRule, Drive, Lasts, LastsRule, MarginRule, NeverRule, Rule
from seqcheck.hazards import Clearing, Following, Hazard, Lasting, Literal, Nearing, Question

Asked = tuple[frozenset[Literal], Question | None]
"""What is asked by a rule that is not about shorts: of which literals, and about which length."""


def asked(rule: Rule) -> Iterator[Asked]:
    """What a rule forbids; nothing where nothing can be so short, and of rules about margins and single faults."""
    match rule:
        case NeverRule():
            yield frozenset(Literal(switch, on) for switch, on in rule.literals), None
        case LastsRule(lasts=Lasts.ON_AT_MOST):
            yield frozenset({Literal(rule.switch)}), Lasting(longer=True, limit=rule.limit)
        case LastsRule():
            if rule.limit > 0:
                literal = Literal(rule.switch, rule.lasts is Lasts.ON_AT_LEAST)
                yield frozenset({literal}), Lasting(longer=False, limit=rule.limit)
        case ClearsRule():
            for switch in rule.switches:
                yield frozenset({Literal(switch)}), Clearing(rule.trip, rule.within)
        case ApartRule():
            for left, entered in ((rule.first, rule.second), (rule.second, rule.first)) if rule.least > 0 else ():
                yield frozenset(), Following(left, entered, rule.least)


def of_hazard(hazard: Hazard) -> Asked:
    """What a claim is about, if it is one about a rule."""
    return frozenset(hazard.literals), hazard.asks


def is_of_a_rule(drive: Drive, hazard: Hazard) -> bool:
    """Whether a rule of the drive forbids just this, always."""
    if not drive.rules or hazard.joins or hazard.needs or hazard.currents:
        return False
    once = len(set(hazard.literals)) == len(hazard.literals)
    return once and any(of_hazard(hazard) == one for rule in drive.rules for one in asked(rule))


def first_unclaimed(drive: Drive, hazards: Iterable[Hazard]) -> Rule | None:
    """A rule, but for those about margins, of which some question is in no claim; None if there is none."""
    claimed = {of_hazard(hazard) for hazard in hazards if is_of_a_rule(drive, hazard)}
    return next((rule for rule in drive.rules if any(one not in claimed for one in asked(rule))), None)


def margins(drive: Drive, short: Hazard) -> Iterator[tuple[MarginRule, Hazard]]:
    """What rules about margins ask of a short that is safe, after each of its literals; one alone has no margin."""
    for rule in drive.rules:
        if isinstance(rule, MarginRule) and rule.least > 0 and len(short.literals) > 1:
            for after in range(len(short.literals)):
                yield rule, replace(short, asks=Nearing(after, rule.least))
