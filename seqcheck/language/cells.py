"""A line of a drive-sequence file as the cells of a table: which words belong together, and what lines up with what.

Only lines that have been read without a mistake are cut up here, so that the grammar need not be asked again: which
word stands where follows from its place, never from its look, since most words of the language may be names as well.
"""

import re
from collections.abc import Iterable, Sequence
from itertools import pairwise

from seqcheck.records import dataclass

_UNIT = r"(?:%|(?:ps|ns|us|µs|μs|ms|s|ticks|Hz|kHz|MHz|GHz|ppm)(?!\w))"
_AMOUNT = rf"[0-9]+(?:\.[0-9]+)?(?:[ \t]*{_UNIT})?"
_LAST = r'"[^"]*"|->|~[ \t]*[^\W\d]\w*|[^ \t]'
_TOKEN = re.compile(rf"{_AMOUNT}|[^\W\d]\w*(?:-\w+)*|{_LAST}")
_OF_FORMULA = re.compile(rf"{_AMOUNT}|[^\W\d]\w*|{_LAST}")
_NUMBER = re.compile(r"([0-9.]+)[ \t]*(.*)")

_CLAUSES = frozenset({"when", "after", "earliest", "latest", "unbroken", "with", "within", "means"})
"""The words that begin a clause of a row, move or trip, besides `at once`. None of them can be a name."""

_SIGNS = frozenset({"=", "+", "-", "*", "/", "("})


@dataclass(frozen=True, slots=True)
class Cells:
    """The cells of a line; an empty one is left open. Lines of the same `table` line up, those of none stand alone."""

    table: str
    cells: tuple[str, ...]


def tokens(said: str, formula: bool = False) -> list[str]:
    """The words of a line, each amount with its unit as one: `20us` is `20 us`. In a formula `-` joins no words."""
    return [_spelt(one) for one in (_OF_FORMULA if formula else _TOKEN).findall(said)]


def _spelt(token: str) -> str:
    number = _NUMBER.fullmatch(token)
    if number and number[2]:
        return f"{number[1]} {number[2]}"
    return f"~{token[1:].lstrip()}" if token.startswith("~") else token


def joined(words: Iterable[str]) -> str:
    """Words with one blank between them, but for commas, parentheses and signs of numbers."""
    text, before, sign = "", "", False
    for word in words:
        tight = not text or word in (",", ")") or before == "(" or sign
        text += word if tight else f" {word}"
        sign = word == "-" and before in _SIGNS
        before = word
    return text


def cells_of(section: str, said: str) -> Cells:
    """The cells of a line of a section; the section is empty for a line that begins with a word of its own."""
    words = tokens(said)
    match section or words[0]:
        case "let":
            words = tokens(said, formula=True)
            return _table("let", words[:2], words[2:])
        case "modes":
            return _row(words)
        case "stage" if section:
            return _stage(words)
        case "parts" if section:
            return _part(words)
        case "paths" if section:
            return _path(words)
        case "pins" if section:
            return _table("pins", words[:1], words[1:2], words[2:4], words[4:6], *_pin_ends(words))
        case "carriers" if section:
            return _carrier(words)
        case "moves" | "trips" if section:
            return _motion(section, words)
    return _alone(words)


def _alone(words: Sequence[str]) -> Cells:
    return Cells("", (joined(words),))


def _table(name: str, *cells: Sequence[str]) -> Cells:
    return Cells(name, tuple(joined(one) for one in cells))


def _range_end(words: Sequence[str], start: int) -> int:
    """Where the duration ends that begins at `start`."""
    if words[start] in ("at", "up"):
        return start + 3
    return start + 3 if words[start + 1 : start + 2] == ["to"] else start + 1


def _starts(words: Sequence[str]) -> list[int]:
    """Where the clauses of a row, move or trip begin."""
    return [at for at, word in enumerate(words) if word in _CLAUSES or list(words[at : at + 2]) == ["at", "once"]]


def _clauses(words: Sequence[str]) -> tuple[Sequence[str], list[Sequence[str]]]:
    """Words cut before each clause: those before the first, and the clauses."""
    cuts = [*_starts(words), len(words)]
    return words[: cuts[0]], [words[one:other] for one, other in pairwise(cuts)]


def _row(words: Sequence[str]) -> Cells:
    """A row of the switching table, or its head."""
    row, clauses = _clauses(words)
    return _table("modes", *([one] for one in row), *clauses)


def _stage(words: Sequence[str]) -> Cells:
    match words[0]:
        case "leg":
            return _table("leg", words[:2], words[2:3], words[3:4], words[4:])
        case "switch":
            end = 6
            while words[end : end + 1] == [","]:
                end += 4
            return _table("switch", words[:2], words[2:end], words[end:])
        case "winding" if words[-2:] == ["must", "flow"]:
            return _table("winding", words[:-2], words[-2:])
    return _alone(words)


def _part(words: Sequence[str]) -> Cells:
    off = _range_end(words, 2)
    end = _range_end(words, off + 1)
    return _table("parts", words[:1], words[1:off], words[off:end], words[end:])


def _path(words: Sequence[str]) -> Cells:
    if words[0] == "interlock":
        return _table("interlock", words[:3], words[3:])
    through = words.index("through")
    return _table("paths", words[:through], words[through:])


def _pin_ends(words: Sequence[str]) -> tuple[Sequence[str], Sequence[str]]:
    end = _range_end(words, 7) if words[6:7] == ["after"] else 6
    return words[6:end], words[end:]


def _carrier(words: Sequence[str]) -> Cells:
    duty = 4 if words[2] == "within" else 2
    dead = _range_end(words, duty + 1)
    end = _range_end(words, dead + 2) if words[dead : dead + 1] == ["dead"] else dead
    return _table("carriers", words[:1], words[1:duty], words[duty:dead], words[dead:end], words[end:])


def _motion(section: str, words: Sequence[str]) -> Cells:
    """A move or trip, or what stands with them: `start` and steps."""
    if words[0] in ("start", "set", "wait"):
        return _alone(words)
    way, clauses = _clauses(words)
    if section == "trips":
        return _table("trips", way[:1], way[1:], *clauses)
    arrow = way.index("->")
    return _table("moves", way[:arrow], way[arrow:], *clauses)
