"""A timing picture made of text: command and conduction of each switch of a hazard, and their overlap.

From one instant to the next takes the same room however long it lasts, so that a short overlap after a long wait can
be seen; the picture says so, and gives the time of every instant.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from seqcheck.drive import Command
from seqcheck.reports.instants import Instant, State
from seqcheck.reports.lanes import Conduct
from seqcheck.reports.pieces import WIDTH, Line, Piece, Tone, line, merged
from seqcheck.reports.rows import CONDUCT_TONES, GAP, scaled
from seqcheck.reports.run import Run

_LEVELS = {Command.ON: "~", Command.OFF: "_", Command.UNKNOWN: "?"}
_CONDUCTS = {Conduct.NO: ".", Conduct.MAY: ":", Conduct.YES: "="}
_OVERLAP = "#"
_LEAD = 3  # columns before the first instant of a band
_LEAST, _MOST = 4, 8  # columns from one instant to the next: at least, and at most where the times need no more

LEGEND = (
    "command: ~ on  _ off  ? either    conducts: = surely  : in doubt  . surely not",
    "From one instant to the next takes equal room, however long it lasts.",
)


@dataclass(frozen=True, slots=True)
class _Frame:
    """How the picture is laid out: the width of the names, of one step, and how many instants a band holds."""

    names: int
    step: int
    band: int
    staggered: bool


def picture(run: Run) -> list[Line]:
    """The part of a run that matters, in bands of at most WIDTH columns where the names allow."""
    drawn = [index for index in range(run.first, run.last + 1) if shows(run, index)]
    frame = _frame(run, drawn)
    found: list[Line] = []
    for start in range(0, len(drawn), frame.band):
        if found:
            found.append(())
        found += _band(run, drawn[start : start + frame.band], frame)
    return [*found, (), *(line(GAP, Piece(text, Tone.FAINT)) for text in LEGEND)]


def shows(run: Run, index: int) -> bool:
    """Whether an instant is to be seen in a lane, or is the one from which times count."""
    now, before = run.instants[index], run.instants[index - 1]
    same = now.overlap == before.overlap and all(
        len(new.commands) == 1 and new.command is old.command and new.conduct is old.conduct
        for new, old in zip(now.states, before.states, strict=True)
    )
    return not same or now.time == run.origin


def _frame(run: Run, drawn: Sequence[int]) -> _Frame:
    """Times stand in one line where a step has room for the longest, else in two lines by turns."""
    names = max([len(run.stretch), *(len(title) + len("  conducts") for title in run.titles)])
    longest = max(len(text) for index in drawn for text in _labels(run, index)) + 1
    room = WIDTH - len(GAP) - names - len(GAP) - _LEAD
    fitting = max(longest, _LEAST)
    staggered = len(drawn) * fitting > room
    step = max(_LEAST, (longest + 1) // 2) if staggered else max(fitting, min(_MOST, room // len(drawn)))
    tail = max(longest - step, 0)  # a label of the last instant may stand out beyond its step
    return _Frame(names, step, max(1, (room - tail) // step), staggered)


def _labels(run: Run, index: int) -> tuple[str, str]:
    """The number of an instant's row and its time."""
    time = run.instants[index].time
    return str(run.instants[index].number), "" if time is None else scaled(time - run.origin, run.size)


def _band(run: Run, drawn: Sequence[int], frame: _Frame) -> list[Line]:
    found: list[Line] = []
    for place, name in enumerate(run.titles):
        width = frame.names - len(name)
        found.append(_lane(run, drawn, frame, name + "command ".rjust(width), _command_of(place)))
        found.append(_lane(run, drawn, frame, " " * len(name) + "conducts".rjust(width), _conduct_of(place)))
    found.append(_lane(run, drawn, frame, run.stretch, _overlap))
    return found + _axis(run, drawn, frame)


Drawer = Callable[[Instant, Instant], tuple[Piece, Piece]]


def _lane(run: Run, drawn: Sequence[int], frame: _Frame, title: str, drawer: Drawer) -> Line:
    """One lane: what stood before the band, then for each instant its own column and the stretch that follows."""
    before = run.instants[drawn[0] - 1]
    cells = [Piece(f"{GAP}{title.ljust(frame.names)}{GAP}", Tone.FAINT), *_times(drawer(before, before)[1], _LEAD)]
    for index in drawn:
        at, after = drawer(run.instants[index - 1], run.instants[index])
        cells += [at, *_times(after, frame.step - 1)]
    return _trimmed(merged(cells))


def _times(piece: Piece, number: int) -> list[Piece]:
    return [piece] * number


def _trimmed(found: Line) -> Line:
    """The line without blanks at its end."""
    while found and not found[-1].text.strip():
        found = found[:-1]
    return (*found[:-1], Piece(found[-1].text.rstrip(), found[-1].tone)) if found else found


def _command_of(place: int) -> Drawer:
    def drawer(before: Instant, now: Instant) -> tuple[Piece, Piece]:
        old, new = before.states[place], now.states[place]
        tone = Tone.FAINT if new.command is Command.OFF else Tone.STRONG
        at = _edge(old, new)
        return Piece(at, tone if at == _LEVELS[new.command] else Tone.STRONG), Piece(_LEVELS[new.command], tone)

    return drawer


def _edge(old: State, new: State) -> str:
    """The column of an instant: the slope of a change, `|` for several changes in one instant."""
    if len(new.commands) > 1:
        return "|"
    if old.command is new.command:
        return _LEVELS[new.command]
    if Command.UNKNOWN in (old.command, new.command):
        return "|"
    return "/" if new.command is Command.ON else "\\"


def _conduct_of(place: int) -> Drawer:
    def drawer(_: Instant, now: Instant) -> tuple[Piece, Piece]:
        conduct = now.states[place].conduct
        cell = Piece(_CONDUCTS[conduct], CONDUCT_TONES[conduct])
        return cell, cell

    return drawer


def _overlap(_: Instant, now: Instant) -> tuple[Piece, Piece]:
    cell = Piece(_OVERLAP, Tone.BAD) if now.overlap else Piece(" ")
    return cell, cell


def _axis(run: Run, drawn: Sequence[int], frame: _Frame) -> list[Line]:
    """Ticks, the numbers of the rows above, and the times; one of two lines each where times take turns."""
    left = len(GAP) + frame.names + len(GAP) + _LEAD
    ticks = " " * left + "".join("'".ljust(frame.step) for _ in drawn)
    found = [line(Piece(ticks.rstrip(), Tone.FAINT))]
    found.append(_labelled("row", [(at, _labels(run, index)[0]) for at, index in enumerate(drawn)], frame, left))
    times = [(at, _labels(run, index)[1]) for at, index in enumerate(drawn)]
    turns = [times[0::2], times[1::2]] if frame.staggered else [times]
    for turn, shown_times in enumerate(turns):
        if shown_times:
            found.append(_labelled("" if turn else f"t / {run.unit}", shown_times, frame, left))
    return found


def _labelled(title: str, labels: Sequence[tuple[int, str]], frame: _Frame, left: int) -> Line:
    text = f"{GAP}{title}".ljust(left)
    for at, label in labels:
        text = text.ljust(left + at * frame.step) + label
    return line(Piece(text.rstrip(), Tone.FAINT))
