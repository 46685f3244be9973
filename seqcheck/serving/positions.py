"""Positions as the protocol counts them: lines from 0, and in a line UTF-16 code units from 0.

Those of a `Place` count both from 1, in code points, and a byte-order mark not at all.
"""

import re
from typing import Any

from seqcheck.source import Place

_ENDS = re.compile(r"\r\n|\r|\n")
_BOM = "\ufeff"


class Lines:
    """The lines of a text, to turn places of it into positions and back."""

    def __init__(self, text: str) -> None:
        self._lines = _ENDS.split(text)
        self._mark = text.startswith(_BOM)

    def line(self, number: int) -> str:
        """A line as the program reads it, counted from 1; empty where there is none."""
        if not 1 <= number <= len(self._lines):
            return ""
        return self._lines[number - 1].removeprefix(_BOM) if number == 1 else self._lines[number - 1]

    def range(self, place: Place) -> dict[str, Any]:
        """The range of a place."""
        end = self.position(place.end_line, place.end_column)
        return {"start": self.position(place.line, place.column), "end": end}

    def whole(self) -> dict[str, Any]:
        """The range of the whole text."""
        last = len(self._lines)
        return {"start": {"line": 0, "character": 0}, "end": self.position(last, len(self._lines[-1]) + 1)}

    def position(self, line: int, column: int) -> dict[str, int]:
        """The position of a line and column; one beyond the text is its nearest."""
        number = min(max(line, 1), len(self._lines))
        text = self._lines[number - 1]
        before = text[: max(column - 1, 0) + self._marked(number)]
        return {"line": number - 1, "character": _units(before)}

    def place(self, position: dict[str, int]) -> tuple[int, int]:
        """The line and column of a position; beyond the end of a line it is the end, in a pair of units its first."""
        number = min(position["line"] + 1, len(self._lines))
        column, left = 0, position["character"]
        for one in self._lines[number - 1]:
            left -= 2 if one > "\uffff" else 1
            if left < 0:
                break
            column += 1
        return number, max(column - self._marked(number), 0) + 1

    def _marked(self, number: int) -> int:
        return int(self._mark and number == 1)


def _units(text: str) -> int:
    return len(text) if text.isascii() else sum(2 if one > "\uffff" else 1 for one in text)
