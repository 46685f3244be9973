"""Cells one below the other: how wide each column of a table is, and the lines that come of it."""

from collections.abc import Sequence

from seqcheck.records import dataclass

MARGIN = "  "
"""Before the lines of a section; steps have it twice."""

_STRAY = 12
"""By how much a cell may be wider than the next narrower one of its column and still set the column's width."""

_ROWS_FROM = 10
"""Where the cells of the switching table begin at least, counted from 0, so that short tables look alike."""

_WIDEST = 100
"""The most that all columns of the switching table may take and still be equally wide."""


@dataclass(frozen=True, slots=True)
class _Style:
    """How a table is set.

    `gaps` are the blanks after each column, the last of them after all that follow. In a `keyed` table a cell is always
    in the column of its sort, else cells close up. A column of a `rigid` one is as wide as its widest cell in any case.
    """

    gaps: tuple[int, ...] = (2,)
    keyed: bool = True
    rigid: bool = True

    def gap(self, column: int) -> int:
        """The blanks after a column."""
        return self.gaps[min(column, len(self.gaps) - 1)]


_STYLES = {
    "let": _Style((1,)),
    "leg": _Style((2, 1, 2)),
    "switch": _Style(rigid=False),
    "paths": _Style(rigid=False),
    "moves": _Style(keyed=False, rigid=False),
    "trips": _Style(keyed=False, rigid=False),
}
_PLAIN = _Style()


def set_out(table: str, rows: Sequence[tuple[str, ...]]) -> list[str]:
    """The lines of a table without their margin; the switching table, head first, with it."""
    if table == "modes":
        return _switching(rows)
    if table == "moves":
        rows = _with_arrows(rows)
    style = _STYLES.get(table, _PLAIN)
    starts, start = [], 0
    for column in range(max(len(row) for row in rows)):
        starts.append(start)
        widths = [len(row[column]) for row in rows if _counts(row, column, style.keyed)]
        if widths:
            start += (max(widths) if style.rigid else fair(widths, _STRAY)) + style.gap(column)
    return [_line(row, starts, style) for row in rows]


def fair(widths: Sequence[int], stray: int) -> int:
    """The greatest width that half of all have, or that is near enough to the next smaller one; above 0 of them."""
    ordered = sorted(widths)
    middle = (len(ordered) - 1) // 2
    width = ordered[middle]
    for other in ordered[middle + 1 :]:
        if other - width > stray:
            break
        width = other
    return width


def _counts(row: tuple[str, ...], column: int, keyed: bool) -> bool:
    """Whether a cell has a say in the width of its column: not where nothing comes after it in a table without keys."""
    return bool("".join(row[column : column + 1])) and (keyed or any(row[column + 1 :]))


def _line(row: tuple[str, ...], starts: Sequence[int], style: _Style) -> str:
    """A row with each cell where its column begins, or behind the one before where that ends later."""
    text = ""
    for column, cell in enumerate(row):
        if cell:
            least = len(text) + style.gap(column - 1) if text else 0
            text = text.ljust(max(least, starts[column])) + cell
    return text


def _with_arrows(rows: Sequence[tuple[str, ...]]) -> list[tuple[str, ...]]:
    """Moves with their arrows below each other; those that leave several modes have theirs where it comes."""
    width = max((len(row[0]) for row in rows if " " not in row[0]), default=0)
    return [(f"{row[0].ljust(width)} {row[1]}", *row[2:]) for row in rows]


def _switching(rows: Sequence[tuple[str, ...]]) -> list[str]:
    """The switching table: equally wide columns where there is room for them."""
    switches = len(rows[0]) - 1
    named = [rows[0], *((MARGIN + row[0], *row[1:]) for row in rows[1:])]
    first = max(_ROWS_FROM, *(len(row[0]) + 2 for row in named))
    widths = [max(len("".join(row[at : at + 1])) for row in rows) for at in range(1, max(len(row) for row in rows))]
    even = max(widths[:switches]) + 3
    if first + even * switches <= _WIDEST:
        steps = [even] * switches
    else:
        steps = [width + 2 for width in widths[:switches]]
    steps += [width + 2 for width in widths[switches:]]
    starts = [0, first]
    for step in steps:
        starts.append(starts[-1] + step)
    return [_line(row, starts, _PLAIN) for row in named]
