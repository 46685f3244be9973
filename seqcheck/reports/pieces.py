"""Styled text without a terminal: what a form of a report hands on, and the small words that all forms share."""

import re
import textwrap
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import Enum
from unicodedata import category

from seqcheck.quantities import PICOSECONDS

WIDTH = 80  # columns that a report keeps to where it can


class Tone(Enum):
    """What a piece of text stands for; a screen may give each a colour, none may be told by colour alone."""

    PLAIN = "plain"
    STRONG = "strong"
    FAINT = "faint"
    GOOD = "good"
    BAD = "bad"
    DOUBT = "doubt"


@dataclass(frozen=True, slots=True)
class Piece:
    """A piece of one line of text in one tone; it holds no control character."""

    text: str
    tone: Tone = Tone.PLAIN


Line = tuple[Piece, ...]


def visible(text: str) -> str:
    """The text on one line, with control characters (line ends, escapes) written as backslash escapes."""
    return "".join(ascii(one)[1:-1] if category(one) in ("Cc", "Zl", "Zp", "Cf") else one for one in text)


def line(*parts: str | Piece) -> Line:
    """A line of the given parts, each fit to be printed; a bare text is plain."""
    pieces = (Piece(part) if isinstance(part, str) else part for part in parts)
    return tuple(Piece(visible(one.text), one.tone) for one in pieces if one.text)


def paragraph(text: str, indent: int, tone: Tone = Tone.PLAIN) -> list[Line]:
    """The text in lines of at most WIDTH columns where its words allow; no word is ever cut."""
    return [line(" " * indent, Piece(row, tone)) for row in wrapped(visible(text), WIDTH - indent)]


_AMOUNT = re.compile(rf"(?<=\d) (?=(?:{'|'.join(PICOSECONDS)}|[kMG]?Hz|ticks?|zones?|ppm)\b|%)")


def wrapped(text: str, width: int) -> list[str]:
    """The words of a text in rows of at most `width`, longer only where one word is; a number keeps its unit."""
    joined = _AMOUNT.sub("\0", text)  # which no text that is shown holds, and no row is broken at
    rows = textwrap.wrap(joined, max(1, width), break_long_words=False, break_on_hyphens=False)
    return [row.replace("\0", " ") for row in rows]


def merged(cells: Iterable[Piece]) -> Line:
    """A line in which neighbours of one tone are one piece."""
    found: list[Piece] = []
    for cell in cells:
        if found and found[-1].tone is cell.tone:
            found[-1] = Piece(found[-1].text + cell.text, cell.tone)
        elif cell.text:
            found.append(cell)
    return tuple(found)


def listed(names: Sequence[str], last: str = "and") -> str:
    """Names in a sentence: `a`, `a and b`, `a, b and c`."""
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} {last} {names[-1]}"


def counted(number: int, name: str) -> str:
    """A count with its noun: `1 finding`, `3 findings`, `2 quantities`."""
    if number == 1:
        return f"{number} {name}"
    return f"{number} {name[:-1]}ies" if name.endswith("y") else f"{number} {name}s"
