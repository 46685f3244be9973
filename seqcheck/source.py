"""Places in a text: the one convention for lines and columns.

Lines and columns count from 1. A column counts Unicode code points, never bytes; a tab is one column; a byte-order
mark at the start of a file is no column at all. The end of a place is exclusive: `end_column` is the column after
its last character, so that an empty place has equal ends.
"""

from seqcheck.records import dataclass


def printable(name: str) -> str:
    """A file's name on one line: control characters and bytes that are no text as escapes."""
    return "".join(one if one.isprintable() else one.encode("unicode_escape").decode() for one in name)


@dataclass(frozen=True, slots=True, order=True)
class Place:
    """A span of a source file, from (line, column) up to but not including (end_line, end_column)."""

    file: str
    line: int
    column: int
    end_line: int
    end_column: int

    def __str__(self) -> str:
        return f"{printable(self.file)}:{self.line}:{self.column}"

    def through(self, last: "Place") -> "Place":
        """The span from the start of this place to the end of `last`, which lies in the same file."""
        return Place(self.file, self.line, self.column, last.end_line, last.end_column)
