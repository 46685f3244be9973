"""`seqcheck size`: the range of a `let` in which the whole file is proven, and what breaks just outside it."""

import re
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from seqcheck.checking import check
from seqcheck.commands.ends import Search, holds, open_limit
from seqcheck.commands.over import Observer, Over
from seqcheck.exits import FOUND, PROVEN, UNDECIDED
from seqcheck.language.values import MOST_DIGITS, Unit, in_unit
from seqcheck.language.varied import Varied
from seqcheck.messages import nearest
from seqcheck.quantities import PICOSECONDS
from seqcheck.ranges import End, Ends, Measure, Patch, Sized
from seqcheck.reports import screen
from seqcheck.reports import sized as wording
from seqcheck.source import printable

_MEASURES = {
    Unit.DURATION: Measure.PICOSECONDS,
    Unit.FREQUENCY: Measure.HERTZ,
    Unit.RATIO: Measure.RATIO,
    Unit.NUMBER: Measure.NUMBER,
}
_EXAMPLES = {
    Unit.DURATION: "'100 ns' or '1 ticks'",
    Unit.FREQUENCY: "'10 kHz'",
    Unit.RATIO: "'0.1 %'",
    Unit.NUMBER: "'1'",
}
_FINEST = {Unit.DURATION: Fraction(1), Unit.FREQUENCY: Fraction(1), Unit.RATIO: Fraction(1, 10**6)}
_STEP = re.compile(r"([0-9]+(?:\.[0-9]+)?) *([A-Za-zµμ%]*)")


Fetch = Callable[[str], str]


class WrongCall(Exception):  # noqa: N818
    """A name or a step that means nothing for this file, in words."""


FORMS = ("screen", "lines", "json")


@dataclass(frozen=True, slots=True)
class Asked:
    """What is asked of a file: which quantity, with which step (None: the finest that has a meaning), in which form."""

    file: str
    name: str
    step: str | None
    form: str
    painted: bool


def run(asked: Asked, texts: tuple[Fetch, Fetch], observer: Observer) -> tuple[str, int]:
    """The answer as a text and the exit code; `texts` gives that of a file named in the call, and of one in a `use`.

    Raises Problems for a file that is no drive without a mistake, WrongCall, and Fault if the program is at fault.
    """
    text_of, fetch = texts
    found = size(text_of(asked.file), asked, fetch, observer)
    if asked.form == "json":
        text = wording.document(found)
    elif asked.form == "lines":
        text = wording.lines(found)
    else:
        report = wording.report(found)
        text = screen.coloured(report) if asked.painted else screen.plain(report)
    return text, exit_of(found)


def size(text: str, asked: Asked, fetch: Callable[[str], str], observer: Observer) -> Sized:
    """The range of one quantity; raises as `run`."""
    varied = Varied(text, asked.file, fetch)
    let = varied.lets.get(asked.name)
    if let is None or let.amount is None:
        raise WrongCall(_unknown(varied, asked))
    drive, today, unit = varied.drive, let.amount.value, let.amount.unit
    tick = Fraction(PICOSECONDS["s"]) / drive.clock.frequency if drive.clock else None
    step = _finest(today, unit, tick) if asked.step is None else _step(asked.step, unit, tick)
    over = Over(varied, asked.name, observer)
    now = check(drive, asked.file, frozenset(), observer)
    search = Search(over, asked.file, step, observer)
    low: End | None = None
    high: End | None = None
    parts: tuple[Patch, ...] = ()
    tried, idle = None, over.idle(today)
    if not idle and holds(now):
        found = search.around(today)
        low, high, parts = found.low, found.high, found.parts
    elif not idle and not open_limit(now):
        beside, tried = search.beside(today)
        if beside is not None:
            low, high, parts = beside.low, beside.high, beside.parts
    return Sized(
        *(asked.file, drive, asked.name, let.place, _MEASURES[unit], today, step),
        tick if unit is Unit.DURATION else None,
        varied.used_in(asked.name),
        *(now, holds(now), low, high, parts, tried, idle),
    )


def exit_of(found: Sized) -> int:
    """1 where the value of today does not hold, 3 where it, or an end of its range, is undecided.

    An end that was looked for as far as it is said is none that a limit of the call left open.
    """
    if not found.holds:
        return UNDECIDED if open_limit(found.now) else FOUND
    sides = [one for one in (found.low, found.high) if one is not None]
    return UNDECIDED if any(one.how is Ends.UNDECIDED for one in sides) else PROVEN


def _unknown(varied: Varied, asked: Asked) -> str:
    where, name = printable(asked.file), printable(asked.name)
    if not varied.lets:
        return f"there is no quantity in {where}; name one with 'let', such as 'let settle = 16 us'"
    return f"there is no quantity '{name}' in {where}; {nearest(asked.name, varied.lets)}"


def _finest(today: Fraction, unit: Unit, tick: Fraction | None) -> Fraction:
    """The step where none is asked for: what firmware can count, or the finest that has a meaning."""
    if unit is Unit.DURATION and tick is not None:
        return tick
    if unit is Unit.NUMBER:
        return Fraction(1) if today.denominator == 1 else Fraction(1, 1000)
    return _FINEST[unit]


def _step(said: str, unit: Unit, tick: Fraction | None) -> Fraction:
    match = _STEP.fullmatch(said.strip())
    if match is not None and len(match[1]) <= MOST_DIGITS:
        if match[2] == "ticks" and tick is None:
            raise WrongCall("--step in ticks needs a clock, and the file has none")
        ticks = match[2] == "ticks" and tick is not None and unit is Unit.DURATION
        amount = None if match[2] == "ticks" else in_unit(match[1], match[2])
        value = Fraction(match[1]) * tick if ticks and tick is not None else None
        if amount is not None and amount.unit is unit:
            value = amount.value
        if value:
            return value
    raise WrongCall(f"--step must be {unit.value} above 0, such as {_EXAMPLES[unit]}, not '{printable(said)}'")
