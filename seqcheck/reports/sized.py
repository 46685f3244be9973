"""The range of a quantity, for people, error lists and programs: the range first, then what breaks beyond it."""

import json
from collections.abc import Iterator
from fractions import Fraction
from math import ceil, floor

from seqcheck import __version__
from seqcheck.messages import Problem
from seqcheck.quantities import in_hertz, in_parts, nearly, shown
from seqcheck.ranges import Beyond, End, Ends, Measure, Patch, Sized
from seqcheck.reports import document as outcome_document
from seqcheck.reports.counterexample import counterexample, sentence
from seqcheck.reports.pieces import Line, Piece, Tone, counted, line, listed, paragraph, visible
from seqcheck.reports.remarks import Severity, remarks
from seqcheck.reports.standing import sorted_out, worst
from seqcheck.reports.wording import CAUTION, stated, subject
from seqcheck.verdict import Check, Outcome, Unread

FORMAT = "seqcheck size 1"
"""Under this name fields may be added, but none is changed or taken away."""
_DIGITS = 13


def report(found: Sized) -> list[Line]:
    """The whole answer as styled lines; the first three say what was asked."""
    head = line(Piece(found.file, Tone.STRONG), f"  let {found.name} = {value(found, found.today)}, {_place(found)}")
    lines = [head, *paragraph(f"{_range(found)}.", 0, _tone(found)), *paragraph(f"{_slack(found)}.", 0)]
    for text in _rests(found):
        lines += [(), *paragraph(f"{text}.", 0)]
    if not found.holds and found.low is None:
        lines += _broken(found, Beyond(found.today, found.now), "Today's value")
    for end, where in ((found.low, "One step below"), (found.high, "One step above")):
        if end is not None and end.beyond is not None:
            lines += _broken(found, end.beyond, where)
    return [*lines, (), line(Piece(CAUTION, Tone.FAINT))]


def lines(found: Sized) -> str:
    """The range in one line, then a line for each thing that breaks next to it."""
    text = f"let {found.name} = {value(found, found.today)}: {_range(found)}; {_slack(found)}"
    severity = Severity.NOTE if found.holds else Severity.ERROR
    told = [f"{found.place}: {severity.value}: {text} [size]"]
    for beyond in _beyond(found):
        said = f"with let {found.name} = {value(found, beyond.value)}"
        for one in remarks(_answer(found, beyond)):
            told.append(f"{one.place}: note: {said}: {one.text} [{one.check}]")
    return "".join(f"{visible(one)}\n" for one in told)


def document(found: Sized) -> str:
    """One JSON document; exact values as fractions of whole ps or Hz, or as a bare number."""
    data = {
        "format": FORMAT,
        "program": f"seqcheck {__version__}",
        "caution": CAUTION,
        "file": visible(found.file),
        "quantity": found.name,
        "line": found.place.line,
        "unit": found.measure.value,
        "today": _exactly(found, found.today),
        "step": str(found.step),
        "holds": found.holds,
        "depends": not found.idle,
        "low": _end(found, found.low),
        "high": _end(found, found.high),
        "parts": [_part(one) for one in found.parts],
        "tried": None if found.tried is None else {"nearer": found.tried.nearer, "tried": found.tried.tried},
    }
    return json.dumps(data, separators=(",", ":")) + "\n"


# The range


def _range(found: Sized) -> str:
    """The range in a sentence without full stop, or what stands in its place."""
    name, low, high = found.name, found.low, found.high
    if found.idle:
        rest = "the file is proven with any value" if found.holds else "no value of it changes what is found"
        return f"Nothing that is proven depends on {name}; {rest}"
    if low is None or high is None:
        if found.tried is None:
            return f"UNDECIDED, not proven: with today's value a limit was reached: {_limit_now(found)}"
        return "Today's value does NOT hold, and no value that does was found"
    how = "" if all(part.whole for part in found.parts) else f", in steps of {value(found, found.step)}"
    if found.holds:
        return f"Proven with {name} {_span(found, low, high)}{how}"
    near = low if low.value is not None and low.value > found.today else high
    assert near.value is not None
    surely = found.tried is not None and found.tried.nearer == found.tried.tried
    nearest = "nearest" if surely else "nearest found"
    return f"Today's value does NOT hold; {nearest} that does: {value(found, near.value, up=near is low)}"


def _span(found: Sized, low: End, high: End) -> str:
    if low.value is not None and low.value == high.value:
        return f"at {value(found, low.value)} alone"
    below = "any value" if low.value is None else f"from {value(found, low.value, up=True)}"
    if high.value is None:
        return f"{below} on, without end"
    return f"{below} to {value(found, high.value, up=False)}"


def _slack(found: Sized) -> str:
    """How far today's value is from either end."""
    if found.idle:
        lines = listed([str(one) for one in found.lines])
        used = f"It is used in line {lines}" if found.lines else "No line of the file uses it"
        return f"{used}; a range would say nothing"
    if found.low is None or found.high is None:
        if found.tried is None:
            return f"Nothing else was looked at; let {found.name} stays {value(found, found.today)}"
        return "Values at distances that double were tried, below and above, up to a million times as far"
    if not found.holds:
        return f"Proven with {found.name} {_span(found, found.low, found.high)}"
    sides = [_room(found, found.low, "below"), _room(found, found.high, "above")]
    return f"Slack: {', '.join(sides)}"


def _room(found: Sized, end: End, side: str) -> str:
    if end.value is None:
        return f"without end {side}"
    away = abs(end.value - found.today)
    least = "at least " if end.how is not Ends.FAILS else ""
    return f"{least}{value(found, away, up=False)} {side}" if away else f"none {side}"


def _rests(found: Sized) -> Iterator[str]:
    """What the range rests on, and where it was not decided."""
    if found.low is None or found.high is None:
        return
    wholes = [one for one in found.parts if one.whole and one.first != one.last]
    if len(found.parts) == 1 and wholes:
        yield f"Shown by one proof in which {found.name} takes any value of the range, another one at each use"
    elif found.parts and len(wholes) == len(found.parts):
        yield (
            f"Shown by {len(wholes)} proofs, in each of which {found.name} takes any value of a part of the range; "
            "together they cover it: " + "; ".join(_piece(found, one) for one in found.parts)
        )
    else:
        yield (
            f"No one proof covers the whole range. Proven are: {'; '.join(_piece(found, one) for one in found.parts)}. "
            "Nothing is said of values between these"
        )
    if found.tried is not None and found.tried.nearer:
        rest = found.tried.nearer - found.tried.tried
        yield (
            "Not all values nearer to today's were tried: closer ones may hold"
            if rest
            else f"All {found.tried.nearer} values nearer to today's, a step apart, were tried: they fail"
        )
    ends = [end for end in (found.low, found.high) if end.how is Ends.FAILS]
    if ends:
        both = "Both ends are" if len(ends) == 2 else f"The {'lower' if found.low in ends else 'upper'} end is"
        yield f"{both} exact to a step of {value(found, found.step)}: one step further out fails, as shown below"
    for end, where in ((found.low, "below"), (found.high, "above")):
        if end.how is Ends.UNDECIDED:
            yield f"What comes {where} is UNDECIDED: the limit was reached: {end.limit}"
        if end.how is Ends.FAR:
            yield f"What comes {where} was not looked at; the range may go on there"
    if any(one.check is Check.IDLE_WAIVER for one in found.now.findings):
        yield "A waiver of the file matches nothing today, for which 'lint' gives exit code 1; that does not count here"
    elif found.now.drive.waivers:
        yield "Whether each waiver still matches something does not count here"


def _piece(found: Sized, part: Patch) -> str:
    if part.last is None:
        return f"any value from {value(found, part.first)} on"
    if part.first == part.last:
        return value(found, part.first)
    how = "any value" if part.whole else f"each step of {value(found, found.step)}"
    return f"{how} from {value(found, part.first)} to {value(found, part.last)}"


def _limit_now(found: Sized) -> str:
    open_yet = sorted_out(found.now).undecided
    return open_yet[0].limit if open_yet else ""


def _tone(found: Sized) -> Tone:
    if not found.holds:
        return Tone.BAD if found.low is not None or found.tried is not None or found.idle else Tone.DOUBT
    open_yet = any(end is not None and end.how is Ends.UNDECIDED for end in (found.low, found.high))
    return Tone.DOUBT if open_yet else Tone.GOOD


def _place(found: Sized) -> str:
    other = "" if found.place.file == found.file else f" of {found.place.file}"
    return f"line {found.place.line}{other}"


# What breaks


def _broken(found: Sized, beyond: Beyond, where: str) -> list[Line]:
    """What a value that does not hold brings: the worst in full, the rest in a sentence each."""
    title = f"{where}, let {found.name} = {value(found, beyond.value)}"
    if isinstance(beyond.why, tuple):
        return [(), line(Piece(f"{title}: the file is refused", Tone.BAD)), *_refused(beyond.why)]
    parts = sorted_out(beyond.why)
    counts = [
        (len(parts.unsafe), "counterexample", ""),
        (len(parts.findings), "finding", ""),
        (len(parts.undecided), "hazard", " undecided"),
    ]
    said = listed([f"{counted(number, name)}{rest}" for number, name, rest in counts if number])
    told = [(), line(Piece(f"{title}: {said}", Tone.BAD))]
    shown_one = worst(parts.unsafe) if parts.unsafe else None
    if shown_one is not None:
        told += [(), *counterexample(shown_one, beyond.why.drive)]
    for one in parts.unsafe:
        if one is not shown_one:
            told += [(), line(Piece(one.check.value, Tone.BAD), f"  {one.place}"), *sentence(stated(one))]
    for finding in parts.findings:
        told += [(), line(Piece(finding.check.value, Tone.BAD), f"  {finding.place}"), *sentence(finding.text)]
    for open_yet in parts.undecided:
        told += [(), line(Piece("UNDECIDED", Tone.DOUBT), f"  {subject(open_yet.hazard)}")]
    return told


def _refused(problems: tuple[Problem, ...]) -> list[Line]:
    return [one for problem in problems for one in sentence(f"Line {problem.place.line}: {problem.text}")]


def _beyond(found: Sized) -> Iterator[Beyond]:
    if not found.holds and found.low is None:
        yield Beyond(found.today, found.now)
    yield from (end.beyond for end in (found.low, found.high) if end is not None and end.beyond is not None)


def _answer(found: Sized, beyond: Beyond) -> Outcome | Unread:
    return Unread(found.file, beyond.why) if isinstance(beyond.why, tuple) else beyond.why


# Values


def value(found: Sized, exact: Fraction, up: bool | None = None) -> str:
    """A value as a file could say it; one that has no short decimal is rounded as told, or to the nearest, and in whole
    ticks where it is that."""
    if found.measure is Measure.PICOSECONDS:
        return _time(exact, found.tick, up)
    if found.measure is Measure.NUMBER:
        return nearly(exact, _DIGITS, up)
    number, unit = in_hertz(exact) if found.measure is Measure.HERTZ else in_parts(exact)
    return f"{nearly(number, _DIGITS, up)} {unit}"


def _time(exact: Fraction, tick: Fraction | None, up: bool | None) -> str:
    whole = ceil(exact) if up else floor(exact) if up is False else round(exact)
    ticks = exact / tick if tick else None
    if ticks is None or ticks.denominator != 1 or not ticks:
        return shown(whole) if whole == exact else f"about {shown(whole)}"
    count = f"{ticks} tick{'' if abs(ticks) == 1 else 's'}"
    return f"{shown(whole)} ({count})" if whole == exact else f"{count} (about {shown(whole)})"


# The document


def _exactly(found: Sized, exact: Fraction) -> dict[str, str]:
    return {"exact": str(exact), "text": value(found, exact)}


def _end(found: Sized, end: End | None) -> dict[str, object] | None:
    if end is None:
        return None
    return {
        "value": None if end.value is None else _exactly(found, end.value),
        "ends": end.how.value,
        "limit": end.limit or None,
        "beyond": None if end.beyond is None else _document_of(found, end.beyond),
    }


def _document_of(found: Sized, beyond: Beyond) -> dict[str, object]:
    """A value that does not hold, with all that the document of `lint` says of it."""
    whole = json.loads(outcome_document.report((_answer(found, beyond),)))
    return {"value": _exactly(found, beyond.value), "lint": whole["files"][0]}


def _part(part: Patch) -> dict[str, object]:
    return {"first": str(part.first), "last": None if part.last is None else str(part.last), "whole": part.whole}
