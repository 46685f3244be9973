"""Words for a line that cannot be read."""

import re
import unicodedata
from collections.abc import Collection, Mapping
from difflib import get_close_matches

from lark import UnexpectedCharacters, UnexpectedInput, UnexpectedToken

from seqcheck.language.words import RESERVED
from seqcheck.messages import Problem, nearest
from seqcheck.quantities import HERTZ, PICOSECONDS, RATIOS
from seqcheck.source import Place

UNITS = (*PICOSECONDS, *HERTZ, *RATIOS, "ticks")
_NAMES = {"NAME": "a name", "NUMBER": "a number", "STRING": "a text in quotes", "UNIT": "a unit", "CHECK": "a check"}
_NUMBER_BEFORE = re.compile(r"[0-9][ \t]*$")
_WORD = re.compile(r"[^\W\d]\w*|\w+|.")
_MOST = 10
_INSTEAD = (
    (".", "write a number with digits on both sides of the point, such as 0.5"),
    ("\u2192\u21d2\u27f6\u279c", "write '->'"),
    ("'\u2018\u2019\u201c\u201d\u201e\u00ab\u00bb", "put a text in straight double quotes"),
)
"""Characters that people write for others, and what to write."""


def explained(error: UnexpectedInput, text: str, file: str, line: int, terminals: Mapping[str, str]) -> Problem:
    """The mistake of a line, from the parser's exception; `terminals` gives the text of each terminal."""
    if isinstance(error, UnexpectedToken) and error.token.type == "$END":
        column = len(text.rstrip()) + 1
        place = Place(file, line, column, line, column)
        return Problem(place, "syntax", "the line ends too soon", _wanted(error, terminals))
    column = error.column if isinstance(error.column, int) and error.column > 0 else 1
    found = _WORD.match(text, column - 1)
    word = found.group() if found else ""
    place = Place(file, line, column, line, column + len(word))
    if isinstance(error, UnexpectedCharacters) and word != '"':
        return stray(text, Place(file, line, column, line, column + 1))
    return _misfit(error, text, word, place, terminals)


def stray(text: str, place: Place) -> Problem:
    """The mistake of a character that no word of the language has; `text` is its line."""
    character = text[place.column - 1 : place.column]
    way_out = next((way for characters, way in _INSTEAD if character and character in characters), "take it out")
    return Problem(place, "syntax", f"{_shown(character)} has no meaning here", way_out)


def reserved(place: Place, word: str) -> Problem:
    """The mistake of a reserved word in a name's place."""
    way_out = f"choose another name, such as '{word}_'"
    return Problem(place, "reserved-word", f"'{word}' is a reserved word and cannot be a name", way_out)


def _misfit(error: UnexpectedInput, text: str, word: str, place: Place, terminals: Mapping[str, str]) -> Problem:
    accepted = _accepted(error)
    if word == '"' and '"' in text[place.column :]:
        return Problem(place, "syntax", "a text does not fit here", _wanted(error, terminals))
    if word == '"':
        return Problem(place, "syntax", "this text has no closing quote", "close it with '\"' on the same line")
    if "NAME" in accepted and word in RESERVED:
        return reserved(place, word)
    if "UNIT" in accepted and word[:1].isalpha() and word not in RESERVED and _follows_number(text, place.column):
        way_out = nearest(word, UNITS) or "units are ps ns us ms s ticks, Hz kHz MHz GHz, % ppm"
        return Problem(place, "unknown-unit", f"'{word}' is no unit", way_out)
    close = get_close_matches(word[:30], (terminals[one] for one in accepted if one in terminals), n=1, cutoff=0.75)
    way_out = f"did you mean '{close[0]}'?" if close else _wanted(error, terminals)
    return Problem(place, "syntax", f"'{word[:40]}' does not fit here", way_out)


def _follows_number(text: str, column: int) -> bool:
    return bool(_NUMBER_BEFORE.search(text[max(0, column - 20) : column - 1]))


def _accepted(error: UnexpectedInput) -> Collection[str]:
    """The terminals that could stand where the mistake is."""
    if isinstance(error, UnexpectedToken):
        return error.accepts or error.expected
    return error.allowed or () if isinstance(error, UnexpectedCharacters) else ()


def _wanted(error: UnexpectedInput, terminals: Mapping[str, str]) -> str:
    """What could have stood there, in words."""
    accepted = {one for one in _accepted(error) if one in _NAMES or one in terminals or one == "$END"}
    words = [_NAMES[one] for one in sorted(accepted & _NAMES.keys())]
    words += sorted(f"'{terminals[one]}'" for one in accepted - _NAMES.keys() - {"$END"} if _plain(terminals[one]))
    words += ["the end of the line"] if "$END" in accepted else []
    if not words or len(words) > _MOST:
        return ""
    return "expected " + (", ".join(words[:-1]) + " or " if len(words) > 1 else "") + words[-1]


def _plain(pattern: str) -> bool:
    """Whether a terminal is a word or sign of the language, not a pattern such as that of comments."""
    return not pattern.startswith(("#", "["))


def _shown(character: str) -> str:
    """A character, with its code where people may not see it or not tell it from others."""
    if character.isascii() and character.isprintable():
        return f"the character '{character}'"
    name = unicodedata.name(character, "") if character else ""
    return f"the character U+{ord(character or chr(0)):04X}{f' ({name})' if name else ''}"
