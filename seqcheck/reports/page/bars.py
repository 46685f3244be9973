"""The dead-time budget as bars: what is left of each pair at worst."""

from collections.abc import Iterator
from xml.etree.ElementTree import Element

from seqcheck.quantities import shown
from seqcheck.reports.drawing.elements import Paper, folded
from seqcheck.reports.page.markup import node, table
from seqcheck.reports.wording import lasting, subject
from seqcheck.verdict import Budget, Margin

_BAR, _STEP, _WIDE = 14.0, 30.0, 420.0
_LONG = 8  # a bar so many times as long as the shortest is drawn torn


def margins(budget: Budget) -> list[Element]:
    """The section, without its heading."""
    found = []
    bounded = [one for one in budget.margins if one.slack is not None]
    if bounded:
        found.append(_bars(bounded))
        said = "A bar with a slanted cut is longer than it is drawn; a hatched one is at least so long."
        found.append(node("p", said))
    rows = [*map(_cells, budget.margins), *_unsafe(budget)]
    if not rows and not budget.undecided:
        return [node("p", "No switches of this stage can short it, so there is nothing to keep apart.")]
    heads = ("off", "then on", "the parts need", "margin left", "set by")
    unsafe = frozenset(range(len(budget.margins), len(rows)))
    if rows:
        caption = "After one switch goes off, how much later than needed the other comes on"
        found.append(table(caption, heads, rows, unsafe))
    for undecided in budget.undecided:
        said = f"Undecided, not proven: {subject(undecided.hazard)} ({undecided.limit})."
        found.append(node("p", said, kind="alarm"))
    held = dict.fromkeys(subject(one) for one in budget.held)
    found += [node("p", f"Only an interlock keeps this apart: {one}.") for one in held]
    return found


def _cells(one: Margin) -> tuple[str, ...]:
    place = f"line {one.place.line}" if one.place is not None else one.limit
    return str(one.literal), _others(one), shown(one.needed), left(one), place


def _others(one: Margin) -> str:
    return " ".join(str(other) for other in one.hazard.literals if other != one.literal)


def _unsafe(budget: Budget) -> Iterator[tuple[str, ...]]:
    for hazard, overlap, greatest in budget.unsafe:
        first, *others = map(str, hazard.literals)
        yield first, " ".join(others), "", "none", f"they meet {lasting(overlap, greatest)}"


def left(one: Margin) -> str:
    """A margin in words."""
    return "never follows" if one.slack is None else f"{'' if one.exact else 'at least '}{shown(one.slack)}"


def _bars(found: list[Margin]) -> Element:
    slacks = [one.slack or 0 for one in found]
    least = min((slack for slack in slacks if slack), default=1)
    whole = min(max(*slacks, 1), _LONG * least)
    names = [f"{one.literal}, then {_others(one)}" for one in found]
    start = folded(names) + 36
    said = "; ".join(f"{name}: {left(one)}" for name, one in zip(names, found, strict=True))
    paper = Paper("margins", "Margins, least first", said)
    width, height = start + _WIDE + folded([left(one) for one in found]) + 30, 16 + _STEP * len(found)
    paper.box("paper", 0, 0, width, height)
    fill = paper.hatch("doubt", 7, 45)
    for index, (name, one, slack) in enumerate(zip(names, found, slacks, strict=True)):
        y = 12 + _STEP * index
        long = slack > whole
        reach = _WIDE if long else _WIDE * slack / whole
        paper.text(start - 12, y + 12, name, "end")
        paper.line("base", [(start, y - 4), (start, y + _BAR + 4)])
        if one.exact:
            paper.box("sure", start, y, max(reach, 1), _BAR)
        else:
            paper.put("rect", "doubt", x=start, y=y, width=max(reach, 1), height=_BAR, fill=fill)
        if long:
            x = start + reach - 26
            paper.area("gap", [(x, y - 2), (x + 6, y - 2), (x + 2, y + _BAR + 2), (x - 4, y + _BAR + 2)])
        paper.text(start + reach + 8, y + 12, left(one), "strong")
    return paper.sized(width, height)
