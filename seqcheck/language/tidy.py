"""The formatter: spacing, columns and blank lines of a file put in order; its words and comments stay as they are."""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, fields, is_dataclass
from itertools import groupby

from seqcheck.drive import Drive, Library
from seqcheck.language.cells import Cells, cells_of
from seqcheck.language.columns import MARGIN, fair, set_out
from seqcheck.language.lines import ENDS, LONGEST, first_word, parted
from seqcheck.language.reading import read_any
from seqcheck.language.words import SECTIONS, STARTS
from seqcheck.messages import Problem, Problems
from seqcheck.source import Place

_WIDTH = 120
"""Beyond this column comments are not moved to stand below each other."""

_STRAY = 48
"""By how much a line may be longer than the next shorter one and still have its comment in line with others."""


class Altered(Exception):  # noqa: N818 - it says what happened
    """Tidying would have altered what the file says: a fault of the program."""


@dataclass(slots=True)
class _Line:
    """A line in the making.

    `margin` is how far in the file it stands, `depth` how far it will: 0 outside sections and at their heads, 1 within
    them, 2 for steps. `said` is empty for a line that is blank or a comment.
    """

    margin: int
    said: str
    comment: str
    section: str = ""
    depth: int = 0
    head: bool = False

    @property
    def blank(self) -> bool:
        """Whether nothing stands on the line."""
        return not self.said and not self.comment


def tidy(text: str, file: str, fetch: Callable[[str], str]) -> str:
    """The text with its columns lined up; what it says, its comments and its line ends stay.

    `fetch` is that of `read_any`. Raises Problems where the text has mistakes or a line would grow too long, and
    Altered, which is never to happen, where the result would not say the same.
    """
    said = read_any(text, file, fetch)
    lines = _lines(text)
    _set_depths(lines)
    lines = _spaced(lines)
    _line_up(lines)
    end = _end_of_lines(text)
    done = "".join(one + end for one in _written(lines))
    _check_length(done, file)
    if comments(done) != comments(text) or not _alike(said, _reread(done, file, fetch)):
        raise Altered
    return done


def _reread(done: str, file: str, fetch: Callable[[str], str]) -> Drive | Library:
    try:
        return read_any(done, file, fetch)
    except Problems:
        raise Altered from None


def comments(text: str) -> list[str]:
    """All comments of a text, in order."""
    found = (parted(line)[1] for line in ENDS.split(text.removeprefix("\ufeff")))
    return [one for one in found if one]


def _end_of_lines(text: str) -> str:
    """What ends most lines of a text."""
    found = ENDS.findall(text)
    return max(("\n", "\r\n", "\r"), key=found.count)


# Cutting up


def _lines(text: str) -> list[_Line]:
    """The lines with their sections, and how deep those stand that say something."""
    lines, section = [], ""
    for whole in ENDS.split(text.removeprefix("\ufeff")):
        said, comment = parted(whole)
        margin = whole[: len(whole) - len(whole.lstrip(" \t"))]
        line = _Line(len(margin.expandtabs()), said, comment)
        lines.append(line)
        word = first_word(said)
        if word in SECTIONS:
            section, line.head = word, True
        elif said and word not in STARTS:
            line.section = section
            line.depth = 2 if section in ("moves", "trips") and word in ("set", "wait") else 1
    return lines


def _set_depths(lines: list[_Line]) -> None:
    """Put each comment that has a line of its own as deep as the line that it belongs to.

    That is the next line, unless the comment stands exactly as the one before it does and not as the next.
    """
    before = after = _Line(0, "", "")
    nexts = []
    for line in reversed(lines):
        after = line if line.said else after
        nexts.append(after)
    for line, following in zip(lines, reversed(nexts), strict=True):
        if line.said:
            before = line
        elif line.comment:
            within = max(before.depth, 1) if before.head else before.depth
            past_end = line.margin > 0 and following.depth == 0
            ours = line.margin == before.margin or past_end
            line.depth = within if ours and line.margin != following.margin else following.depth


def _spaced(lines: list[_Line]) -> list[_Line]:
    """The lines with one blank one where some were, none below a head, and one above each."""
    kept: list[_Line] = []
    for line in lines:
        if line.blank and (not kept or kept[-1].blank or kept[-1].head):
            continue
        if line.said and line.depth == 0 and _needs_room(line, kept):
            kept.insert(_above(kept), _Line(0, "", ""))
        kept.append(line)
    while kept[-1].blank:
        kept.pop()
    return kept


def _above(kept: list[_Line]) -> int:
    """Where the comments begin that stand right above what comes next, outside sections as it does."""
    at = len(kept)
    while at and kept[at - 1].comment and not kept[at - 1].said and kept[at - 1].depth == 0:
        at -= 1
    return at


def _needs_room(line: _Line, kept: list[_Line]) -> bool:
    """Whether a line outside sections, with the comments above it, needs a blank line before it."""
    at = _above(kept)
    return at > 0 and not kept[at - 1].blank and (line.head or kept[at - 1].depth > 0)


# Putting together


def _line_up(lines: list[_Line]) -> None:
    """Give each line that says something its final text, with its margin."""
    whole: dict[str, list[tuple[_Line, Cells]]] = {}
    for number, (_, block) in enumerate(groupby(lines, lambda line: line.blank)):
        for line in block:
            if line.said:
                cells = cells_of(line.section, line.said)
                name = f"let {number}" if cells.table == "let" else cells.table
                whole.setdefault(name, []).append((line, cells))
    for name, rows in whole.items():
        table = name.split()[0] if name else ""
        bare = [cells.cells for _, cells in rows]
        texts = set_out(table, bare) if table else [cells[0] for cells in bare]
        for (line, _), text in zip(rows, texts, strict=True):
            line.said = text if table == "modes" else MARGIN * line.depth + text


def _written(lines: list[_Line]) -> list[str]:
    """The lines as texts; comments behind the lines of a block below each other."""
    texts: list[str] = []
    for _, block in groupby(lines, lambda line: "" if line.blank or line.head else "block"):
        texts += _block(list(block))
    return texts


def _block(lines: Sequence[_Line]) -> list[str]:
    widths = [len(line.said) for line in lines if line.said and line.comment]
    column = fair(widths, _STRAY) if widths else 0
    return [_text(line, column) for line in lines]


def _text(line: _Line, column: int) -> str:
    if not line.said:
        return MARGIN * line.depth + line.comment if line.comment else ""
    if not line.comment:
        return line.said
    lined_up = f"{line.said.ljust(column)}  {line.comment}"
    return lined_up if len(lined_up) <= _WIDTH else f"{line.said}  {line.comment}"


# Making sure


def _check_length(text: str, file: str) -> None:
    """No line may become longer than one may be."""
    found = []
    for number, line in enumerate(ENDS.split(text), 1):
        if len(line) > LONGEST:
            place = Place(file, number, 1, number, len(line) + 1)
            what = f"tidied, the line would have {len(line)} characters, more than {LONGEST}"
            found.append(Problem(place, "line-too-long", what, "break it up"))
    if found:
        raise Problems(found)


def _alike(one: object, other: object) -> bool:
    """Whether two things that a text says are the same but for their places."""
    if type(one) is not type(other):
        return False
    if isinstance(one, Place):
        return True
    if is_dataclass(one):
        return all(_alike(getattr(one, part.name), getattr(other, part.name)) for part in fields(one))
    if isinstance(one, tuple) and isinstance(other, tuple):
        return len(one) == len(other) and all(map(_alike, one, other))
    if isinstance(one, Mapping) and isinstance(other, Mapping):
        return list(one) == list(other) and all(map(_alike, one.values(), other.values()))
    return one == other
