"""What a name of a file means, in a few lines of plain text: what an editor shows where the name stands."""

from collections.abc import Iterable, Mapping, Sequence
from fractions import Fraction
from math import ceil, floor

from seqcheck.drive import (
    RESET,
    AtOnce,
    Carrier,
    Cell,
    Conducts,
    Leg,
    Mode,
    Move,
    Part,
    Pin,
    SetStep,
    Stage,
    Step,
    Trip,
    Update,
    WaitStep,
    When,
    cell_text,
    fact_words,
)
from seqcheck.effects import Row
from seqcheck.hazards import reach
from seqcheck.quantities import Interval, in_hertz, in_parts, nearly, shown, spanned, widened
from seqcheck.records import dataclass
from seqcheck.reports.does import does, meant
from seqcheck.reports.pieces import listed

_PASSES = {
    Conducts.DIODE: "with its diode",
    Conducts.ONE_WAY: "one way",
    Conducts.TWO_WAY: "two way",
}
_UPDATES = {
    Update.AT_ONCE: "what is written acts at once",
    Update.AT_RISE: "what is written acts at its next rise",
    Update.WITHIN_PERIOD: "what is written acts within a period",
}


@dataclass(frozen=True, slots=True)
class Keeping:
    """How firmware keeps time: the clock's tolerance as a ratio, how late it can be and the polling loop, in ps."""

    tolerance: Fraction
    late: int
    loop: int

    def wait(self, time: Interval) -> str:
        """How long what firmware waits takes, from a span that is already widened by the tolerance."""
        return spanned(time + Interval(0, self.late))


# Quantities


def duration(name: str, value: Fraction, keeping: Keeping | None) -> str:
    """A named time in ps; with a clock, how long a wait of it takes."""
    said = [f"{name} = {_exact(value)}"]
    if keeping is not None and value >= 0:
        said.append(f"a wait of it takes {keeping.wait(widened(value, value, keeping.tolerance))}")
    return "\n".join(said)


def frequency(name: str, value: Fraction) -> str:
    """A named frequency, in hertz."""
    return f"{name} = {_hertz(value)}"


def ratio(name: str, value: Fraction) -> str:
    """A named ratio."""
    return f"{name} = {_ratio(value)}"


def number(name: str, value: Fraction) -> str:
    """A named plain number."""
    return f"{name} = {nearly(value, _DIGITS)}"


def _exact(value: Fraction) -> str:
    """A time in ps; what is no whole number of them as the two whole ones around it."""
    if value.denominator == 1:
        return shown(int(value))
    return f"{shown(floor(value))} to {shown(ceil(value))}, which is {nearly(value, _DIGITS)} ps"


def _ratio(value: Fraction) -> str:
    number, unit = in_parts(value)
    return f"{nearly(number, _DIGITS)} {unit}"


def _hertz(value: Fraction) -> str:
    number, unit = in_hertz(value)
    return f"{nearly(number, _DIGITS)} {unit}"


_DIGITS = 6


# What lies between firmware and switch


def part(one: Part) -> str:
    """The times of a part, as they are: hardware is not widened."""
    said = [f"part {one.name}", f"turns on after {spanned(one.on)}", f"turns off after {spanned(one.off)}"]
    if one.difference is not None:
        said.append(f"a turn-off takes at most {shown(one.difference)} longer than a turn-on")
    return "\n".join(said)


def carrier(one: Carrier) -> str:
    """A carrier with its times, the tolerance in them."""
    low, high = one.duty
    duty = _ratio(low) if low == high else f"{_ratio(low)} to {_ratio(high)}"
    times = (("high", one.high), ("low", one.low))
    levels = [f"{level} for {spanned(time)}" for level, time in times if time is not None]
    said = [f"carrier {one.name}, {_hertz(one.frequency)}", f"period {spanned(one.period)}"]
    said += [f"duty {duty}: {listed(levels)}"]
    said.append(f"dead time {spanned(one.dead)}" if one.dead != Interval(0, 0) else "no dead time")
    return "\n".join([*said, _UPDATES[one.update]])


def switch(name: str, stage: Stage, paths: Mapping[str, Sequence[Part]], pins: Mapping[str, Pin]) -> str:
    """Where a switch stands, how long its path takes, and its pin; of a stage that may lack what is mistaken."""
    said = [f"switch {name}", *_standing(name, stage)]
    parts = tuple(paths.get(name, ()))
    if parts:
        on, off = reach(parts)
        through = " and ".join(one.name for one in parts)
        said += [f"through {through}:", f"  turns on {spanned(on)} after its command"]
        said += [f"  turns off {spanned(off)} after its command"]
    else:
        said.append("no path: its delays are taken as zero")
    return "\n".join([*said, *([pin(pins[name])] if name in pins else ["no pin is given"])])


def _standing(name: str, stage: Stage) -> list[str]:
    for one in stage.switches:
        if one.name == name:
            poles = listed([f"{start} to {end}" for start, end in one.poles])
            side = next((_side(leg, name) for leg in stage.legs if name in (leg.high, leg.low)), "")
            return [f"{side}from {poles}, {_PASSES[one.conducts]}"]
    return []


def _side(leg: Leg, name: str) -> str:
    return f"{'high' if name == leg.high else 'low'} side of leg {leg.node}: "


def pin(one: Pin) -> str:
    """A pin: what turns its switch on and where it rests."""
    rest = f"rests {one.rests.value}, which is {one.resting.value}"
    after = "" if one.after == Interval(0, 0) else f", after {spanned(one.after)}"
    port = f", port {one.port}" if one.port else ""
    return f"pin {one.name} of {one.switch}: active {'high' if one.active_high else 'low'}, {rest}{after}{port}"


def node(name: str, stage: Stage) -> str:
    """What a node of the stage is."""
    said = [f"node {name}"]
    for rails in stage.rails:
        if name in rails.nodes:
            said.append(f"rail of the supply {' '.join(rails.nodes)}, the most positive first")
    for sources in stage.sources:
        if name in sources.nodes:
            said.append(f"source, polarity not known against {listed([one for one in sources.nodes if one != name])}")
    for leg in stage.legs:
        if name == leg.node:
            said.append(f"output of the leg of {leg.high} and {leg.low}, between {leg.upper} and {leg.lower}")
    ends = [" ".join(winding.ends) for winding in stage.windings if name in winding.ends]
    said += [f"end of winding {one}" for one in ends]
    return "\n".join(said)


# Modes, moves and trips


def mode(one: Mode, columns: Sequence[str], row: Row | None) -> str:
    """A mode with its cells, and what its row does where that could be read back from the stage."""
    said = [f"mode {one.name}", ", ".join(_cells(columns, one.cells))]
    if one.known:
        said.append("known: " + ", ".join(" ".join(fact_words(fact)) for fact in one.known))
    if one.means:
        said.append(f"means {meant(one.means)}")
    if row is not None:
        said.append(f"does: {does(row)}")
        said += [f"but {row.amiss}"] if row.amiss else []
    return "\n".join(said)


def reset() -> str:
    """The built-in mode."""
    return f"mode {RESET}\nevery pin is released and goes to its resting level"


def _cells(columns: Sequence[str], cells: Sequence[Cell]) -> list[str]:
    return [f"{name} {cell_text(cell)}" for name, cell in zip(columns, cells, strict=True)]


def move(one: Move, keeping: Keeping) -> str:
    """A move: from where to where, when it begins, and its steps, with the clock's tolerance and lateness."""
    unbroken = ["no trip is taken while it runs"] if one.unbroken else []
    said = [f"move {listed(one.sources, 'or')} -> {one.target}", _begins(one, keeping), *unbroken]
    return "\n".join([*said, *_steps(one.steps, keeping)])


def _begins(one: Move, keeping: Keeping) -> str:
    if isinstance(one.trigger, AtOnce):
        return "begins at once after entry"
    if not isinstance(one.trigger, When):
        return f"begins {keeping.wait(one.trigger.span)} after entry"
    earliest, latest = max(one.trigger.earliest, keeping.loop), one.trigger.latest
    if latest is not None and latest < earliest:
        return f"begins never: on {one.trigger.event} up to {shown(latest)}, but the loop takes {shown(keeping.loop)}"
    when = "" if (earliest, latest) == (0, None) else f", {spanned(Interval(earliest, latest))} after entry"
    return f"begins on {one.trigger.event}{when}"


def trip(one: Trip, keeping: Keeping) -> str:
    """A trip: where it may arrive, where it leads and how soon, and its steps."""
    where = listed(sorted(one.resting), "or") or "no mode at rest"
    taken = "acts by hardware, at once" if one.at_once else "is taken where it arrives"
    if one.within is not None:
        taken = f"is taken at most {shown(one.within + keeping.late)} after it arrives"
    return "\n".join([f"trip {one.name}: from {where} -> {one.target}", taken, *_steps(one.steps, keeping)])


def _steps(steps: Iterable[Step], keeping: Keeping) -> list[str]:
    return [f"  {step(one, keeping)}" for one in steps]


def step(one: Step, keeping: Keeping) -> str:
    """A step; with the clock's tolerance and lateness in its time."""
    if isinstance(one, WaitStep):
        return f"wait: {keeping.wait(one.time)}"
    assert isinstance(one, SetStep)
    return "set " + ", ".join(f"{name} {cell_text(cell)}" for name, cell in one.writes)


def event(name: str, moves: Sequence[Move], keeping: Keeping) -> str:
    """An event, with the moves that it begins."""
    begun = [one for one in moves if isinstance(one.trigger, When) and one.trigger.event == name]
    return "\n".join([f"event {name}", *(move(one, keeping) for one in begun)])
