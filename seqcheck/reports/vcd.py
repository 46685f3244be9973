"""The form for waveform viewers: a value change dump (IEEE 1364-2005, clause 18) of one counterexample.

Time 0 is the beginning of the run's trace and one unit is 1 ps. Variables of the type `string` are no part of the
standard, but common viewers read them; their values hold no blank, so each blank of a text is written as `_`.
"""

from collections.abc import Iterable, Iterator

from seqcheck import __version__
from seqcheck.drive import Command, Drive
from seqcheck.records import dataclass
from seqcheck.reports.acts import entered, told
from seqcheck.reports.lanes import Conduct, Lane, lanes
from seqcheck.reports.pieces import counted
from seqcheck.reports.standing import Sorted, Standing, are, sorted_out, worst
from seqcheck.reports.wording import CAUTION, shown_for, stated, stretch, subject
from seqcheck.source import printable
from seqcheck.verdict import Act, Outcome, Span, Trace, Unsafe

_COMMANDS = {Command.ON: "1", Command.OFF: "0", Command.UNKNOWN: "x"}
_CONDUCTS = {Conduct.YES: "1", Conduct.NO: "0", Conduct.MAY: "x"}
_EDGES = {Act.RISES: "1", Act.FALLS: "0"}
_FIRST, _CODES = 33, 94  # identifier codes are made of the printable characters from `!` to `~` (18.2.1)
_LEGEND = (
    "command: 1 on, 0 off, x either (the pin floats)",
    "conducts: 1 surely, 0 surely not, x in doubt",
    "reference: of each carrier that the run follows, before dead time",
    "overlap: 1 while all of these switches can be so together",
)
Changes = list[tuple[int | None, str]]


@dataclass(frozen=True, slots=True)
class Variable:
    """One variable: `kind` is "wire" or "string"; `changes` from (None, initial value) on, in their order."""

    name: str
    kind: str
    changes: Changes


def report(outcome: Outcome, number: int | None = None) -> str:
    """The dump of a counterexample of one file: that of this number, counted as on the screen, else the worst.

    A short is worse than an overlap, then the longer is the worse one, and the first of equals is taken. Where there
    is none the dump says so and has no time. ValueError if there is no such number.
    """
    parts = sorted_out(outcome)
    if number is not None and number > len(parts.unsafe):
        raise ValueError(f"there {are(len(parts.unsafe))}")
    if not parts.unsafe:
        return "".join(f"{row}\n" for row in [*_head(outcome, _no_run(parts)), "$enddefinitions $end"])
    verdict = worst(parts.unsafe) if number is None else parts.unsafe[number - 1]
    said = f"run {parts.unsafe.index(verdict) + 1} of {len(parts.unsafe)}: {verdict.check.value}"
    rows = _head(outcome, [said, stated(verdict), *_LEGEND])
    return "".join(f"{row}\n" for row in [*rows, *_dump(verdict, outcome.drive)])


def _no_run(parts: Sorted) -> list[str]:
    """What an empty dump says: that there is no run, and that this alone does not mean proven."""
    said = ["no counterexample, so nothing is dumped", f"the file is {parts.standing.value}"]
    said += [f"undecided, not proven: {subject(one.hazard)}" for one in parts.undecided]
    if parts.standing is Standing.AMISS:
        said.append(f"{counted(len(parts.findings), 'finding')} without a run")
    return said + [f"waived: {one.check.value}, because: {why}" for one, why in parts.waived]


def _head(outcome: Outcome, said: Iterable[str]) -> list[str]:
    rows = [f"$version seqcheck {__version__} $end"]
    rows += _comment(f"{printable(outcome.file)}: {outcome.drive.title}")
    rows += [row for text in said for row in _comment(text)]
    return [*rows, *_comment(CAUTION), "$timescale 1 ps $end"]


def _comment(text: str) -> list[str]:
    """A comment of one line; no text of the file can end it, or be read as a keyword."""
    return [f"$comment {_ascii(text).replace('$', '_')} $end"]


def _ascii(text: str) -> str:
    return "".join(one if 32 <= ord(one) < 127 else one.encode("unicode_escape").decode() for one in printable(text))


def _word(text: str) -> str:
    """A text as one word of printable ASCII characters, which a name or a value of a string must be."""
    return _ascii(text).replace(" ", "_") or "_"


# The run


def _dump(verdict: Unsafe, drive: Drive) -> Iterator[str]:
    """Declarations, the values before time 0, then every change in its order, and the last moment."""
    scopes = _scopes(verdict, drive)
    variables = [one for _, found in scopes for one in found]
    codes = {id(one): _code(number) for number, one in enumerate(variables)}
    yield "$scope module drive $end"
    for scope, found in scopes:
        yield from [f"$scope module {scope} $end"] if scope else []
        for one in found:
            yield f"$var {one.kind} 1 {codes[id(one)]} {_word(one.name)} $end"
        yield from ["$upscope $end"] if scope else []
    yield from ("$upscope $end", "$enddefinitions $end", "#0", "$dumpvars")
    yield from (_value(one.kind, one.changes[0][1], codes[id(one)]) for one in variables)
    yield "$end"
    end = _end(verdict)
    changes = [(time, _value(one.kind, value, codes[id(one)])) for one in variables for time, value in _later(one)]
    yield from _timed(sorted((one for one in changes if one[0] <= end), key=lambda one: one[0]), end)


def _timed(changes: Iterable[tuple[int, str]], end: int) -> Iterator[str]:
    now = 0
    for time, row in changes:
        if time > now:
            yield f"#{time}"
        now = time
        yield row
    if end > now:
        yield f"#{end}"


def _later(variable: Variable) -> Iterator[tuple[int, str]]:
    """The changes from time 0 on."""
    return ((time, value) for time, value in variable.changes if time is not None)


def _end(verdict: Unsafe) -> int:
    """The last moment of the dump: of the trace, its events and its overlap."""
    trace = verdict.trace
    return max([trace.end, trace.overlap_from, trace.overlap_to or 0, *(one.time for one in trace.events)])


def _value(kind: str, value: str, code: str) -> str:
    return f"s{_word(value)} {code}" if kind == "string" else f"{value}{code}"


def _code(number: int) -> str:
    """The identifier code of a variable: a number in base 94."""
    high, low = divmod(number, _CODES)
    return (_code(high - 1) if high else "") + chr(_FIRST + low)


def _scopes(verdict: Unsafe, drive: Drive) -> list[tuple[str, list[Variable]]]:
    """The variables in the scopes in which they are declared; "" is the outer one."""
    found, trace = lanes(verdict, drive), verdict.trace
    whole = [
        Variable("mode", "string", list(entered(drive, trace))),
        Variable("happens", "string", _happens(drive, trace)),
        Variable(stretch(verdict), "wire", _marked(shown_for(verdict))),
    ]
    commands = [Variable(one.literal.switch, "wire", _commands(one)) for one in found]
    conducts = [Variable(one.literal.switch, "wire", _conducts(one)) for one in found]
    references = [Variable(one.carrier, "wire", _reference(trace, one.carrier, one.high)) for one in trace.phases]
    scopes = [("", whole), ("command", commands), ("conducts", conducts), ("reference", references)]
    return [(name, some) for name, some in scopes if some]


def _happens(drive: Drive, trace: Trace) -> Changes:
    """What happens in an instant, in words; it stands until something else does."""
    found: dict[int, list[str]] = {}
    for event, notes in told(drive, trace):
        found.setdefault(event.time, []).extend(note.text for note in notes)
    return [(None, f"settled in {drive.start}"), *((time, "; ".join(said)) for time, said in found.items())]


def _marked(span: Span) -> Changes:
    ends: Changes = [] if span.end is None else [(span.end, "0")]
    return [(None, "0"), (span.start, "1"), *ends]


def _commands(lane: Lane) -> Changes:
    return [(time, _COMMANDS[command]) for time, command in lane.changes]


def _conducts(lane: Lane) -> Changes:
    times = sorted({time for time in lane.times() if time >= 0})
    found: Changes = [(None, _CONDUCTS[lane.conduct_at(None)])]
    for time in times:
        value = _CONDUCTS[lane.conduct_at(time)]
        if value != found[-1][1]:
            found.append((time, value))
    return found


def _reference(trace: Trace, carrier: str, high: bool) -> Changes:
    """The levels of a reference; not known where whole cycles are told as one event."""
    found: Changes = [(None, "1" if high else "0")]
    for event in trace.events:
        if event.name == carrier and event.act in _EDGES:
            found.append((event.time, _EDGES[event.act]))
        elif event.name == carrier and event.cycles is not None:
            level = found[-1][1]
            found += [(event.time + event.cycles.first, "x"), (event.time + event.cycles.length, level)]
    return found
