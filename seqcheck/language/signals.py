"""Checking what lies between firmware and switch: parts, paths, interlocks, pins and carriers."""

from fractions import Fraction
from math import ceil

from seqcheck.drive import Carrier, Interlock, Part, Pin
from seqcheck.language.scope import Scope
from seqcheck.language.syntax import CarrierLine, InterlockLine, Line, Operand, PartLine, PathLine, PinLine, Range, Word
from seqcheck.language.values import Unit
from seqcheck.quantities import INSTANT, Interval, outwards, shown, widened
from seqcheck.source import Place

_SECOND = 10**12


def read_part(scope: Scope, line: Line, said: PartLine) -> Part | None:
    """One line of `parts`."""
    on = scope.hardware(said.on, "the turn-on time of a part")
    off = scope.hardware(said.off, "the turn-off time of a part")
    difference = None if said.difference is None else scope.need(said.difference, Unit.DURATION)
    if on is None or off is None:
        return None
    return Part(line.place, said.name.text, on, off, None if difference is None else ceil(difference))


# Carriers


def read_carrier(scope: Scope, line: Line, said: CarrierLine) -> Carrier | None:
    """One line of `carriers`; its own `within` takes the place of the clock's tolerance."""
    root = scope
    while root.outer is not None:
        root = root.outer
    frequency = scope.positive(said.frequency, Unit.FREQUENCY)
    tolerance = root.tolerance if said.within is None else scope.tolerance_of(said.within)
    duty = _duty(scope, said)
    dead = _dead(scope, said.dead)
    if frequency is None or tolerance is None or duty is None or dead is None:
        return None
    exact = _SECOND / frequency
    fast, slow = exact / (1 + tolerance), exact / (1 - tolerance)
    low_duty, high_duty = duty
    high = _pulse(low_duty * fast, None if high_duty == 1 else high_duty * slow, root.tick)
    low = _pulse((1 - high_duty) * fast, None if low_duty == 0 else (1 - low_duty) * slow, root.tick)
    if high_duty == 0 or low_duty == 1:
        constant = Interval(root.tick, None)
        high, low = (None, constant) if high_duty == 0 else (constant, None)
    elif not _wide_enough(scope, said, high, low, root.tick):
        return None
    return Carrier(
        line.place,
        said.name.text,
        frequency,
        widened(exact, exact, tolerance),
        duty,
        high,
        low,
        widened(*dead, tolerance),
        said.update,
    )


def _duty(scope: Scope, said: CarrierLine) -> tuple[Fraction, Fraction] | None:
    first = _share(scope, said.duty)
    last = first if said.upper is None else _share(scope, said.upper)
    if first is None or last is None:
        return None
    if last < first:
        place = said.duty.place.through(said.upper.place if said.upper else said.duty.place)
        scope.notes.add(place, "backwards-range", "the duty runs backwards", "put the smaller one first")
        return None
    return first, last


def _share(scope: Scope, operand: Operand) -> Fraction | None:
    value = scope.at_least_zero(operand, Unit.RATIO)
    if value is not None and value > 1:
        scope.notes.add(operand.place, "out-of-range", "a duty above 100 % has no meaning", "make it smaller")
        return None
    return value


def _dead(scope: Scope, said: Range | None) -> tuple[Fraction, Fraction] | None:
    return (Fraction(0), Fraction(0)) if said is None else scope.bounded(said, "a dead time")


def _pulse(lo: Fraction, hi: Fraction | None, tick: int) -> Interval | None:
    """The time that the reference may spend at one level, at least a tick."""
    rounded = outwards(lo, hi)
    return Interval(max(tick, rounded.lo), rounded.hi)


def _wide_enough(scope: Scope, said: CarrierLine, high: Interval | None, low: Interval | None, tick: int) -> bool:
    """Whether both levels can last a tick at all."""
    for level, word in ((high, "high"), (low, "low")):
        if level is not None and level.hi is not None and level.hi < tick:
            text = f"the {word} pulse lasts at most {shown(level.hi)}, less than a tick of {shown(tick)}"
            scope.notes.add(said.duty.place, "out-of-range", text, "widen the duty or lower the frequency")
            return False
    return True


# Paths, interlocks and pins


def read_paths(
    scope: Scope, switches: tuple[str, ...], parts: dict[str, Part], seen: dict[str, Place]
) -> dict[str, tuple[Part, ...]]:
    """The lines of `paths`; a switch without one has an empty path. `seen` names mistaken parts too."""
    notes = scope.notes
    paths: dict[str, tuple[Part, ...]] = {}
    given: dict[str, Place] = {}
    for line in scope.book.sections["paths"]:
        if not isinstance(line.node, PathLine):
            continue
        known = [one.text for one in line.node.parts if notes.known(one, seen, "part", "parts")]
        for switch in line.node.switches:
            if notes.known(switch, switches, "switch", "stage") and _once(scope, switch, given, "the path of switch"):
                paths[switch.text] = tuple(parts[one] for one in known if one in parts)
    return {switch: paths.get(switch, ()) for switch in switches}


def _once(scope: Scope, word: Word, given: dict[str, Place], thing: str) -> bool:
    """Whether a thing is said for the first time."""
    if word.text in given:
        line = given[word.text].line
        text = f"{thing} '{word.text}' is given twice, first in line {line}"
        scope.notes.add(word.place, "duplicate-name", text, "leave out one of them")
        return False
    given[word.text] = word.place
    return True


def read_interlocks(scope: Scope, switches: tuple[str, ...]) -> tuple[Interlock, ...]:
    """The `interlock` lines of `paths`."""
    locks: list[Interlock] = []
    pairs: dict[frozenset[str], Place] = {}
    for line in scope.book.sections["paths"]:
        said = line.node
        if not isinstance(said, InterlockLine):
            continue
        dead = INSTANT if said.dead is None else scope.hardware(said.dead, "the dead time of an interlock")
        known = [scope.notes.known(one, switches, "switch", "stage") for one in (said.first, said.second)]
        if all(known) and _apart(scope, said, pairs) and dead is not None:
            locks.append(Interlock(line.place, said.first.text, said.second.text, dead))
    return tuple(locks)


def _apart(scope: Scope, said: InterlockLine, pairs: dict[frozenset[str], Place]) -> bool:
    """Whether an interlock is between two switches that have none yet."""
    first, second = said.first.text, said.second.text
    if first == second:
        text = f"an interlock of '{first}' with itself"
        scope.notes.add(said.second.place, "same-name", text, "name the two switches that the driver keeps apart")
        return False
    pair = frozenset((first, second))
    if pair in pairs:
        text = f"the interlock of '{first}' and '{second}' is given twice, first in line {pairs[pair].line}"
        scope.notes.add(said.first.place.through(said.second.place), "duplicate-name", text, "leave out one of them")
        return False
    pairs[pair] = said.first.place
    return True


def read_pins(scope: Scope, switches: tuple[str, ...]) -> dict[str, Pin]:
    """The lines of `pins`, by switch."""
    pins: dict[str, Pin] = {}
    given: dict[str, Place] = {}
    named: dict[str, Place] = {}
    for line in scope.book.sections["pins"]:
        said = line.node
        assert isinstance(said, PinLine)
        after = INSTANT if said.after is None else scope.hardware(said.after, "the time to rest")
        known = scope.notes.known(said.switch, switches, "switch", "stage")
        fresh = scope.notes.fresh(said.pin, named, "pin")
        named.setdefault(said.pin.text, said.pin.place)
        if known and _once(scope, said.switch, given, "the pin of switch") and fresh and after is not None:
            port = said.port.text if said.port else None
            pins[said.switch.text] = Pin(
                line.place, said.switch.text, said.pin.text, said.active_high, said.rests, after, port
            )
    return pins
