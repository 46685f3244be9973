"""What a proof rests on, as tables: clock, writes, parts, paths, pins, carriers, stage and rules of the file."""

from collections.abc import Iterator, Sequence
from fractions import Fraction
from xml.etree.ElementTree import Element

from seqcheck.drive import (
    ApartRule,
    Carrier,
    ClearsRule,
    Clock,
    Drive,
    LastsRule,
    MarginRule,
    NeverRule,
    Part,
    Pin,
    Rule,
    ToleratesRule,
    Writes,
)
from seqcheck.hazards import reach
from seqcheck.quantities import exactly, in_hertz, in_parts, shown, spanned
from seqcheck.reports.page.markup import listing, node, table


def assumptions(drive: Drive) -> list[Element]:
    """The section, without its heading."""
    said = "If one of these is not so on the board, the proof says nothing about the board."
    found = [node("p", said), listing(_time(drive))]
    if drive.parts:
        heads = ("part", "turn-on", "turn-off", "difference")
        found.append(table("Parts of the signal paths", heads, map(_part, drive.parts.values())))
    found.append(table("From pin to conduction", ("switch", "through", "on after", "off after"), _paths(drive)))
    if drive.interlocks:
        rows = [(f"{one.first} and {one.second}", spanned(one.dead)) for one in drive.interlocks]
        found.append(table("Interlocks of the driver", ("switches", "dead time"), rows))
    if drive.pins:
        of_pins = ("switch", "pin", "on when", "rests", "reached after", "port")
        found.append(table("Pins", of_pins, map(_pin, drive.pins.values())))
    if drive.carriers:
        of_carriers = ("carrier", "frequency", "duty", "dead time", "changes act")
        found.append(table("Carriers", of_carriers, map(_carrier, drive.carriers.values())))
    found.append(table("Power stage", ("what", "between"), _stage(drive)))
    if drive.rules:
        rules = [(str(one.place.line), rule(one)) for one in drive.rules]
        found.append(table("Rules that the file asks for", ("line", "rule"), rules))
    return found


def hertz(frequency: Fraction) -> str:
    """A frequency in the largest unit that keeps it at or above one."""
    number, unit = in_hertz(frequency)
    return f"{exactly(number)} {unit}"


def ratio(value: Fraction) -> str:
    """A tolerance or duty in per cent, a small one in parts per million."""
    number, unit = in_parts(value)
    return f"{exactly(number)} {unit}"


def _time(drive: Drive) -> Iterator[str]:
    yield _clock(drive.clock)
    yield _writes(drive.writes)
    if drive.loop is not None:
        yield f"Events are heard {spanned(drive.loop)} after a mode is entered at the soonest (main loop)."


def _clock(clock: Clock | None) -> str:
    if clock is None:
        return "No clock is given: every time holds as it is written."
    late = "the file does not say how late firmware can be"
    if clock.late is not None:
        late = f"firmware is late by at most {shown(clock.late)}"
    within = f"right within {ratio(clock.tolerance)}; {late}; times that it keeps stand here with that tolerance"
    return f"The clock runs at {hertz(clock.frequency)}, {within}."


def _writes(writes: Writes | None) -> str:
    if writes is None:
        return "No write discipline is given."
    apart = f", {spanned(writes.gap)} apart" if writes.gap.hi else ""
    return f"Writes reach the pins {writes.how.value}{apart}, {writes.order.value}."


def _part(part: Part) -> tuple[str, ...]:
    difference = "" if part.difference is None else f"at most {shown(part.difference)}"
    return part.name, spanned(part.on), spanned(part.off), difference


def _paths(drive: Drive) -> Iterator[tuple[str, ...]]:
    for switch in drive.stage.switches:
        parts = drive.paths[switch.name]
        on, off = reach(parts)
        through = ", ".join(part.name for part in parts) or "no path: taken as instant"
        yield switch.name, through, spanned(on), spanned(off)


def _pin(pin: Pin) -> tuple[str, ...]:
    active = "high" if pin.active_high else "low"
    return pin.switch, pin.name, active, pin.rests.value, spanned(pin.after), pin.port or ""


def _carrier(one: Carrier) -> tuple[str, ...]:
    duty = ratio(one.duty[0]) if one.duty[0] == one.duty[1] else f"{ratio(one.duty[0])} to {ratio(one.duty[1])}"
    return one.name, hertz(one.frequency), duty, spanned(one.dead), one.update.value


def _stage(drive: Drive) -> Iterator[tuple[str, str]]:
    stage = drive.stage
    for rails in stage.rails:
        yield "rails, most positive first", " ".join(rails.nodes)
    for sources in stage.sources:
        yield "sources of unknown polarity", " ".join(sources.nodes)
    for capacitor in stage.capacitors:
        yield "capacitor", f"{capacitor.positive} above {capacitor.negative}"
    for switch in stage.switches:
        poles = ", ".join(f"{start} to {end}" for start, end in switch.poles)
        yield f"switch {switch.name}", f"{poles} ({switch.conducts.value})"
    for diode in stage.diodes:
        yield "diode", f"from {diode.start} to {diode.end}"
    for winding in stage.windings:
        yield "winding" + (", its current must flow" if winding.must_flow else ""), " ".join(winding.ends)


def rule(one: Rule) -> str:
    """A rule in the words of the file."""
    match one:
        case MarginRule():
            return f"margin at least {shown(one.least)}"
        case NeverRule():
            return "never " + _and([switch if on else f"{switch} off" for switch, on in one.literals])
        case ClearsRule():
            return f"{one.trip} clears {' '.join(one.switches)} within {shown(one.within)}"
        case LastsRule():
            return f"{one.switch} {one.lasts.value} {shown(one.limit)}"
        case ApartRule():
            return f"{one.first} and {one.second} at least {shown(one.least)} apart"
        case ToleratesRule():
            return f"tolerates single faults in {', '.join(one.modes)}"


def _and(names: Sequence[str]) -> str:
    return " and ".join(names)
