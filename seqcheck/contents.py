"""What a drive says, name by name and in the words of its file: what two files can be held against each other by.

Times that firmware keeps stand in the drive widened by the clock; here they are as they may have been written, so that
another clock is one difference and not a hundred.
"""

from collections import Counter
from collections.abc import Iterator, Sequence
from fractions import Fraction
from math import ceil, floor

from seqcheck.drive import (
    RESET,
    After,
    ApartRule,
    Carrier,
    Cell,
    ClearsRule,
    Conducts,
    Drive,
    Fixed,
    How,
    Known,
    LastsRule,
    MarginRule,
    Mode,
    Move,
    NeverRule,
    Rule,
    SetStep,
    Step,
    Switch,
    ToleratesRule,
    Trip,
    When,
    cell_text,
    fact_words,
)
from seqcheck.quantities import Interval, exactly, in_hertz, in_parts, shown, spanned, widened
from seqcheck.records import dataclass
from seqcheck.source import Place

Fields = dict[str, str]
_SECOND = 10**12


@dataclass(frozen=True, slots=True)
class Entry:
    """One thing that a file says: of what kind, its name, what is said of it, and its steps if it is a run."""

    kind: str
    name: str
    fields: Fields
    place: Place
    steps: tuple[str, ...] = ()


def contents(drive: Drive) -> tuple[Entry, ...]:
    """All that a drive says but its title, a move for each mode that it leaves; no two of a kind have one name."""
    return tuple(_told_apart([*_settings(drive), *_circuit(drive), *_signals(drive), *_table(drive), *_asked(drive)]))


def _told_apart(entries: list[Entry]) -> Iterator[Entry]:
    seen: Counter[tuple[str, str]] = Counter()
    for one in entries:
        seen[one.kind, one.name] += 1
        number = seen[one.kind, one.name]
        yield one if number == 1 else Entry(one.kind, f"{one.name} ({number})", one.fields, one.place, one.steps)


def _said(**fields: str | None) -> Fields:
    return {name.replace("_", " ").strip(): text for name, text in fields.items() if text is not None}


# Settings


def _settings(drive: Drive) -> Iterator[Entry]:
    tolerance = _tolerance(drive)
    if (clock := drive.clock) is not None:
        late = None if clock.late is None else shown(clock.late)
        within = _ratio(clock.tolerance) if clock.tolerance else None
        fields = _said(frequency=_hertz(clock.frequency), within=within, late_by_at_most=late)
        yield Entry("clock", "", fields, clock.place)
    if (writes := drive.writes) is not None:
        apart = None if writes.how is How.TOGETHER else _time(writes.gap, tolerance)
        yield Entry("writes", "", _said(how=writes.how.value, apart=apart, order=writes.order.value), writes.place)
    if drive.loop is not None:
        yield Entry("loop", "", _said(at_least=_time(drive.loop, tolerance)), drive.place)
    yield Entry("start", "", _said(mode=drive.start), drive.modes[drive.start].place)


def _tolerance(drive: Drive) -> Fraction:
    return drive.clock.tolerance if drive.clock else Fraction(0)


# The stage


def _circuit(drive: Drive) -> Iterator[Entry]:
    stage = drive.stage
    legs = {name for leg in stage.legs for name in (leg.high, leg.low)}
    for supply in stage.rails:
        yield Entry("rails", " ".join(supply.nodes), {}, supply.place)
    for sources in stage.sources:
        yield Entry("sources", " ".join(sources.nodes), {}, sources.place)
    for one in stage.capacitors:
        yield Entry("capacitor", f"{one.positive} {one.negative}", {}, one.place)
    for leg in stage.legs:
        fields = _said(high=leg.high, low=leg.low, between=f"{leg.upper} and {leg.lower}")
        yield Entry("leg", leg.node, fields, leg.place)
    yield from (_switch(switch) for switch in stage.switches if switch.name not in legs)
    for diode in stage.diodes:
        yield Entry("diode", f"from {diode.start} to {diode.end}", {}, diode.place)
    for winding in stage.windings:
        fields = _said(must_flow="yes" if winding.must_flow else None)
        yield Entry("winding", " ".join(winding.ends), fields, winding.place)


def _switch(switch: Switch) -> Entry:
    poles = ", ".join(f"{start} to {end}" for start, end in switch.poles)
    conducts = None if switch.conducts is Conducts.DIODE else switch.conducts.value
    return Entry("switch", switch.name, _said(from_=poles, conducts=conducts), switch.place)


# Parts, paths, pins, carriers


def _signals(drive: Drive) -> Iterator[Entry]:
    for part in drive.parts.values():
        most = None if part.difference is None else shown(part.difference)
        fields = _said(on=spanned(part.on), off=spanned(part.off), difference_at_most=most)
        yield Entry("part", part.name, fields, part.place)
    places = {switch.name: switch.place for switch in drive.stage.switches}
    for name, parts in drive.paths.items():
        if parts:
            yield Entry("path", name, _said(through=", ".join(part.name for part in parts)), places[name])
    for lock in drive.interlocks:
        names = " ".join(sorted((lock.first, lock.second)))
        yield Entry("interlock", names, _said(dead_time=spanned(lock.dead)), lock.place)
    for pin in drive.pins.values():
        after = spanned(pin.after) if pin.after.hi else None
        active = "high" if pin.active_high else "low"
        fields = _said(pin=pin.name, active=active, rests=pin.rests.value, after=after, port=pin.port)
        yield Entry("pin", pin.switch, fields, pin.place)
    yield from (_carrier(drive, carrier) for carrier in drive.carriers.values())


def _carrier(drive: Drive, carrier: Carrier) -> Entry:
    exact = Fraction(_SECOND) / carrier.frequency
    clock = _tolerance(drive)
    own = clock if widened(exact, exact, clock) == carrier.period else _own_tolerance(exact, carrier.period)
    within = None if own == clock else spanned(carrier.period) if own is None else _ratio(own)
    low, high = carrier.duty
    fields = _said(
        frequency=_hertz(carrier.frequency),
        within=within,
        duty=_ratio(low) if low == high else f"{_ratio(low)} to {_ratio(high)}",
        dead_time=_time(carrier.dead, own or Fraction(0)) if carrier.dead.hi else None,
        updates=carrier.update.value,
    )
    return Entry("carrier", carrier.name, fields, carrier.place)


def _own_tolerance(exact: Fraction, period: Interval) -> Fraction | None:
    """The roundest tolerance with which a period is as it is; None if there is none."""
    low, high = exact / (period.lo + 1) - 1, exact / period.lo - 1
    for digits in range(1, 13):
        found = Fraction(ceil(max(low, Fraction(0)) * 10**digits), 10**digits)
        if found <= high and widened(exact, exact, found) == period:
            return found
    return None


# The table, moves and trips


def _table(drive: Drive) -> Iterator[Entry]:
    yield from (_row(drive, mode) for mode in drive.modes.values() if mode.name != RESET)
    for move in drive.moves:
        yield from (_move(drive, move, source) for source in move.sources)
    yield from (_trip(drive, trip) for trip in drive.trips)


def _row(drive: Drive, mode: Mode) -> Entry:
    cells = {name: cell_text(cell) for name, cell in zip(drive.columns, mode.cells, strict=True)}
    means = " ".join((mode.means.purpose.value, " to ".join(mode.means.nodes))).strip() if mode.means else None
    return Entry("row", mode.name, {**cells, **_said(with_=_known(mode.known), means=means)}, mode.place)


def _known(facts: Sequence[Known]) -> str | None:
    return ", ".join(sorted(" ".join(fact_words(one)) for one in facts)) or None


def _move(drive: Drive, move: Move, source: str) -> Entry:
    tolerance, trigger = _tolerance(drive), move.trigger
    begins = f" when {trigger.event}" if isinstance(trigger, When) else ""
    when = " after a time" if isinstance(trigger, After) else begins
    earliest = latest = None
    if isinstance(trigger, When):
        earliest = _time(Interval(trigger.earliest, None), tolerance) if trigger.earliest else None
        latest = None if trigger.latest is None else shown(_roundest(*_before_upper(trigger.latest, tolerance)))
    fields = _said(
        after=_time(trigger.span, tolerance) if isinstance(trigger, After) else None,
        earliest=earliest,
        latest=latest,
        unbroken="yes" if move.unbroken else None,
        with_=_known(move.known),
    )
    return Entry("move", f"{source} -> {move.target}{when}", fields, move.place, _steps(drive, move.steps))


def _trip(drive: Drive, trip: Trip) -> Entry:
    moves = None if trip.origins - {trip.target} == trip.resting - {RESET} else _listed(drive, trip.origins)
    fields = _said(
        from_=_listed(drive, trip.resting),
        to=trip.target,
        within=None if trip.within is None else shown(trip.within),
        at_once="yes" if trip.at_once else None,
        with_=_known(trip.known),
        during_moves_from=moves,
        during_moves_that_left_its_target="yes" if trip.target in trip.origins else None,
    )
    return Entry("trip", trip.name, fields, trip.place, _steps(drive, trip.steps))


def _listed(drive: Drive, names: frozenset[str]) -> str:
    return ", ".join(name for name in drive.modes if name in names)


def _steps(drive: Drive, steps: Sequence[Step]) -> tuple[str, ...]:
    tolerance = _tolerance(drive)
    return tuple(
        f"set {_writes(drive, one.writes)}" if isinstance(one, SetStep) else f"wait {_time(one.time, tolerance)}"
        for one in steps
    )


def _writes(drive: Drive, writes: tuple[tuple[str, Cell], ...]) -> str:
    if dict(writes) == dict.fromkeys(drive.columns, Fixed.OFF):
        return "all off"
    return ", ".join(f"{name} {cell_text(cell)}" for name, cell in writes)


# Rules and waivers


def _asked(drive: Drive) -> Iterator[Entry]:
    for rule in drive.rules:
        name, fields = _rule(rule)
        yield Entry("rule", name, fields, rule.place)
    for waiver in drive.waivers:
        yield Entry("waiver", f"{waiver.check} for {waiver.name}", _said(because=waiver.reason), waiver.place)


def _rule(rule: Rule) -> tuple[str, Fields]:
    if isinstance(rule, MarginRule):
        return "margin", _said(at_least=shown(rule.least))
    if isinstance(rule, NeverRule):
        return "never " + " and ".join(name if on else f"{name} off" for name, on in rule.literals), {}
    if isinstance(rule, ClearsRule):
        return f"{rule.trip} clears {' '.join(rule.switches)}", _said(within=shown(rule.within))
    if isinstance(rule, LastsRule):
        return f"{rule.switch} {rule.lasts.value}", _said(time=shown(rule.limit))
    if isinstance(rule, ApartRule):
        return f"{rule.first} and {rule.second} apart", _said(at_least=shown(rule.least))
    assert isinstance(rule, ToleratesRule)
    return "tolerates single faults", _said(modes=", ".join(rule.modes))


# Quantities as they may have been written


def _hertz(frequency: Fraction) -> str:
    number, unit = in_hertz(frequency)
    return f"{exactly(number)} {unit}"


def _ratio(ratio: Fraction) -> str:
    number, unit = in_parts(ratio)
    return f"{exactly(number)} {unit}"


def _time(span: Interval, tolerance: Fraction) -> str:
    """A span before a clock widened it, in the roundest whole picoseconds that give it."""
    lowest = _before_lower(span.lo, tolerance)
    if span.hi is None:
        return shown(_roundest(*lowest))
    highest = _before_upper(span.hi, tolerance)
    first, last = max(lowest[0], highest[0]), min(lowest[1], highest[1])
    if first <= last:
        return shown(_roundest(first, last))
    return f"{shown(_roundest(*lowest))} to {shown(_roundest(*highest))}"


def _before_lower(bound: int, tolerance: Fraction) -> tuple[int, int]:
    """The least and the greatest time whose lower bound, widened, is this."""
    return ceil(bound * (1 + tolerance)), ceil((bound + 1) * (1 + tolerance)) - 1


def _before_upper(bound: int, tolerance: Fraction) -> tuple[int, int]:
    """The least and the greatest time whose upper bound, widened, is this; backwards where no whole one gives it."""
    return floor((bound - 1) * (1 - tolerance)) + 1, floor(bound * (1 - tolerance))


def _roundest(least: int, most: int) -> int:
    """The number with the most zeros at its end among these."""
    rounded = (ceil(Fraction(least, 10**zeros)) * 10**zeros for zeros in range(18, 0, -1))
    return next((one for one in rounded if one <= most), most)
