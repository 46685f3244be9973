"""The dead-time budget for people: a row a margin, least first, with the place that sets it."""

from collections.abc import Iterator, Sequence
from math import floor

from seqcheck.drive import Drive
from seqcheck.hazards import Hazard
from seqcheck.quantities import PICOSECONDS, shown
from seqcheck.reports.pieces import WIDTH, Line, Piece, Tone, counted, line, listed, paragraph, visible, wrapped
from seqcheck.reports.wording import CAUTION, happens, lasting, subject, switches
from seqcheck.verdict import Budget, Margin

_GAP = "  "
_EASY = 24  # columns in which the place reads easily
NEVER = "never follows"


def report(budget: Budget) -> list[Line]:
    """The whole answer as styled lines; the first three say what was asked."""
    head = [line(Piece(budget.file, Tone.STRONG), f'  "{budget.drive.title}"'), *_standing(budget), *_least(budget)]
    found = [*head, (), *_rows(budget)]
    for text in _notes(budget):
        found += [(), *paragraph(text, 0, Tone.FAINT)]
    return [*found, (), line(Piece(CAUTION, Tone.FAINT))]


def _standing(budget: Budget) -> list[Line]:
    if budget.unsafe:
        count = counted(len(budget.unsafe), "hazard")
        return paragraph(f"{count} can happen: no dead time is left there.", 0, Tone.BAD)
    if budget.undecided:
        count = counted(len(budget.undecided), "hazard")
        return paragraph(f"{count} undecided, not proven: {budget.undecided[0].limit}.", 0, Tone.DOUBT)
    hazards = {*(one.hazard for one in budget.margins), *budget.alone}
    if not hazards:
        return paragraph("No switches of this stage can short it.", 0, Tone.GOOD)
    return paragraph(f"{counted(len(hazards), 'hazard')}, each proven in no run.", 0, Tone.GOOD)


def _least(budget: Budget) -> list[Line]:
    bounded = [one for one in budget.margins if one.slack is not None]
    if not bounded:
        return paragraph("What can follow another never does.", 0) if budget.margins else []
    least = bounded[0]
    where = f", at {least.place}" if least.place is not None else ""
    return paragraph(f"The least margin is {left(least)}{where}.", 0, Tone.STRONG)


def left(margin: Margin) -> str:
    """A margin as a time; a lower bound says so."""
    if margin.slack is None:
        return NEVER
    return f"{'' if margin.exact else 'at least '}{shown(margin.slack)}"


# One line each


def lines(budget: Budget) -> str:
    """The form for other programs' error lists (see reports/lines): a note each margin, at the place that sets it, an
    error each short that can happen, or is undecided."""
    first = budget.drive.place
    said = [f"{one.place or first}: note: {after(one)} [margin]" for one in budget.margins]
    said += [f"{first}: error: {happens(*one)}: no dead time is left [no-margin]" for one in budget.unsafe]
    said += [
        f"{first}: error: undecided, not proven: {subject(one.hazard)}; the limit was reached: {one.limit} [undecided]"
        for one in budget.undecided
    ]
    return "".join(f"{visible(one)}\n" for one in said)


def after(margin: Margin) -> str:
    """A margin as one sentence without full stop."""
    others = listed([str(one) for one in margin.hazard.literals if one != margin.literal])
    if margin.slack is None:
        pair = len(margin.hazard.literals) == 2
        return f"{others} never {'follows' if pair else 'follow'} {margin.literal}{'' if pair else ' together'}"
    rests = f"the margin after {margin.literal} until {others} is {left(margin)}"
    rest = f"; {margin.limit}" if margin.limit else ""
    return f"{rests}; the parts need {shown(margin.needed)} between the commands{rest}"


# The table


def _rows(budget: Budget) -> Iterator[Line]:
    """The table, its last column folded: what is turned off, what on, what the parts ask for, what is left over."""
    cells = [_cells(one, budget.drive) for one in budget.margins]
    cells += [_unsafe_cells(*one) for one in budget.unsafe]
    if not cells:
        return
    titles = ("off", "then on", "parts need", "margin", *(("ticks",) if budget.drive.clock else ()), "set by")
    if not budget.drive.clock:
        cells = [(*one[:4], one[5]) for one in cells]
    widths = [max(len(title), *(len(one[at]) for one in cells)) for at, title in enumerate(titles[:-1])]
    fixed = sum(widths) + len(_GAP) * len(titles)
    room = max(_EASY, WIDTH - fixed)
    yield line(Piece(_GAP + _GAP.join(_padded(titles[:-1], widths)) + _GAP + titles[-1], Tone.FAINT))
    bad = len(budget.margins)
    for number, one in enumerate(cells):
        first, *more = wrapped(visible(one[-1]), room) or [""]
        tone = Tone.BAD if number >= bad else Tone.PLAIN
        yield line(_GAP + _GAP.join(_padded(one[:-1], widths)) + _GAP, Piece(first, tone))
        for rest in more:
            yield line(" " * fixed, Piece(rest, tone))


def _padded(cells: Sequence[str], widths: Sequence[int]) -> list[str]:
    """Names to the left, figures to the right."""
    return [
        cell.ljust(width) if at < 2 else cell.rjust(width)
        for at, (cell, width) in enumerate(zip(cells, widths, strict=True))
    ]


def _cells(margin: Margin, drive: Drive) -> tuple[str, ...]:
    others = [str(one) for one in margin.hazard.literals if one != margin.literal]
    place = f"{set_by(margin, drive)}" if margin.place is not None else margin.limit
    whole = None if margin.slack is None else ticks(margin.slack, drive)
    told = "" if whole is None else str(whole)
    return str(margin.literal), " ".join(others), shown(margin.needed), left(margin), told, place


def _unsafe_cells(hazard: Hazard, overlap: int | None, greatest: bool) -> tuple[str, ...]:
    first, *others = (str(one) for one in hazard.literals)
    return first, " ".join(others), "", "none", "", f"they overlap {lasting(overlap, greatest)}"


def set_by(margin: Margin, drive: Drive) -> str:
    """The line of the move, trip or row, and what it is."""
    assert margin.place is not None
    moves = {one.place: f"{', '.join(one.sources)} -> {one.target}" for one in drive.moves}
    trips = {one.place: f"trip {one.name}" for one in drive.trips}
    rows = {one.place: f"row {one.name}" for one in drive.modes.values()}
    what = {**rows, **trips, **moves}.get(margin.place, "")
    return f"line {margin.place.line}: {what}" if what else f"line {margin.place.line}"


def ticks(slack: int, drive: Drive) -> int | None:
    """Whole ticks of the clock at its fastest that fit, so that a wait may be shorter by as many; None without one."""
    if drive.clock is None:
        return None
    return floor(slack * drive.clock.frequency / int(PICOSECONDS["s"]) / (1 + drive.clock.tolerance))


def _notes(budget: Budget) -> Iterator[str]:
    """What the table does not say by itself."""
    if any(one.needed < 0 for one in budget.margins):
        yield "Where the parts need a negative time, the slowest turn-off is through before the quickest turn-on."
    if any(one.slack is None for one in budget.margins):
        yield f"'{NEVER}': in no run can the second conduct after the first."
    for one in budget.undecided:
        yield f"Undecided, not proven: {subject(one.hazard)}; the limit was reached: {one.limit}."
    for hazard in budget.alone:
        yield f"{subject(hazard)}: one switch alone, so that there is no margin to tell."
    held = [switches(one.hazard) for one in budget.margins if one.hazard in budget.held]
    for names in dict.fromkeys(held):
        yield f"{names} are kept apart by an interlock alone; the firmware would bring them together without it."
    late = [switches(one) for one in budget.punctual]
    for names in dict.fromkeys(late):
        yield f"That {names} never meet rests on the upper bounds that the firmware keeps."
