"""From bytes to text, from text to lines that are read each for itself."""

import re
from difflib import get_close_matches
from functools import lru_cache

from seqcheck.language.grammar import STATEMENT, parsed
from seqcheck.language.mistakes import reserved, stray
from seqcheck.language.notes import Notes
from seqcheck.language.syntax import Line, MoveLine, Node, StartLine, TripLine
from seqcheck.language.words import FIRST_WORDS, LINE_FORMS, SECTIONS, STARTS
from seqcheck.messages import Problem, Problems
from seqcheck.source import Place

LONGEST = 65_536
"""Characters in a line; what is longer is no drive sequence and would only cost time."""

ENDS = re.compile(r"\r\n|\r|\n")
"""What ends a line, by whichever system the file was written."""

_SAID = re.compile(r'(?:[^"#]|"[^"]*(?:"|$))*')
_FIRST = re.compile(r"[A-Za-z_][A-Za-z0-9_]*")
_SINGLE_ONCE = frozenset({"drive", "clock", "writes", "loop"})
_STEPS = ("set", "wait")


def decode(data: bytes, file: str) -> str:
    """The text of a file: UTF-8, with or without a byte-order mark.

    Raises Problems at the first byte that is no UTF-8, or at the first NUL.
    """
    body = data.removeprefix(b"\xef\xbb\xbf")
    try:
        text = body.decode("utf-8")
    except UnicodeDecodeError as error:
        place = _end_of(body[: error.start].decode("utf-8"), file)
        byte = body[error.start]
        raise Problems(
            [Problem(place, "encoding", f"the byte 0x{byte:02X} is no UTF-8", "save the file as UTF-8")]
        ) from None
    if "\0" in text:
        place = _end_of(text[: text.index("\0")], file)
        raise Problems([Problem(place, "encoding", "a NUL byte: this is no text", "save the file as UTF-8")])
    return text


def _end_of(text: str, file: str) -> Place:
    """The place of the character after a text."""
    lines = ENDS.split(text)
    return Place(file, len(lines), len(lines[-1]) + 1, len(lines), len(lines[-1]) + 2)


def parted(text: str) -> tuple[str, str]:
    """A line's words without margin, and its comment from `#` on; either may be empty."""
    said = _SAID.match(text)
    words = said.group() if said else ""
    return words.strip(" \t"), text[len(words) :].rstrip(" \t")


def first_word(said: str) -> str:
    """The word that a line begins with; empty if it begins with none."""
    first = _FIRST.match(said)
    return first.group() if first else ""


class Book:
    """The lines of one file by what they belong to.

    `sections` holds the lines of each section in file order, those of a second head after the first; `heads` the first
    head of each section and the first of the lines that a file says once; `singles` the `let` and `use` lines.
    """

    def __init__(self, file: str) -> None:
        self.file = file
        self.heads: dict[str, Line] = {}
        self.singles: list[Line] = []
        self.sections: dict[str, list[Line]] = {section: [] for section in SECTIONS}
        self.first: Line | None = None

    @property
    def top(self) -> Place:
        """The place for a mistake of the whole file."""
        head = self.heads.get("drive")
        return head.place if head else Place(self.file, 1, 1, 1, 1)


class _Reader:
    """Reads the lines of one file into a book."""

    def __init__(self, file: str, notes: Notes) -> None:
        self.book = Book(file)
        self.notes = notes
        self.section = ""
        self.lost = False  # a line outside any section was complained about
        self.dropping = False  # the rows of a second table are not for the columns of the first
        self.empty = True
        self.steps_for: str | None = None  # "move" where a step may follow, "broken" after one that could not be read

    def line(self, number: int, text: str) -> None:
        """Read one line of the file."""
        if len(text) > LONGEST:
            self._too_long(number, text)
            return
        if text.lstrip(" \t")[:1] in ("", "#"):
            return
        self.empty = False
        said, _ = parted(text)
        column = len(text) - len(text.lstrip(" \t")) + 1
        place = Place(self.book.file, number, column, number, column + len(said))
        word = first_word(said)
        if word in STARTS:
            self._statement(word, place, text)
        elif self.section:
            self._section_line(word, place, text)
        else:
            self._outside(word, place, text)

    def _too_long(self, number: int, text: str) -> None:
        self.empty = False
        first = first_word(text.lstrip(" \t"))
        self.notes.broken.add(first if first in STARTS else self.section)
        self.steps_for = "broken"
        place = Place(self.book.file, number, 1, number, len(text) + 1)
        what = f"the line has {len(text)} characters, more than {LONGEST}"
        self.notes.add(place, "line-too-long", what, "break it up")

    def _parse(self, text: str, start: str, number: int) -> Node | Problem:
        return parsed(text, start, self.book.file, number)

    def _statement(self, word: str, place: Place, text: str) -> None:
        node = self._parse(text, STATEMENT, place.line)
        if not isinstance(node, Problem):
            self._take(word, Line(place, node))
            return
        if self.section and self._fits(word, text, place.line):
            end = place.column + len(word)
            self._broken(reserved(Place(place.file, place.line, place.column, place.line, end), word))
            return
        if word in SECTIONS:
            self.section, self.steps_for = word, "broken"
        self.notes.broken.add(word)
        self.notes.found.append(_with_form(node, word))

    def _fits(self, word: str, text: str, number: int) -> bool:
        """Whether the line would be right in its section if its first word were a name."""
        other = text.replace(word, "x" * len(word), 1)
        return not isinstance(self._parse(other, f"{self.section}_line", number), Problem)

    def _take(self, word: str, line: Line) -> None:
        """Keep a line that begins with a word of its own."""
        self.book.first = self.book.first or line
        if word in SECTIONS:
            self.section, self.steps_for, self.lost, self.dropping = word, None, False, False
        if word in ("let", "use"):
            self.book.singles.append(line)
            return
        if word not in self.book.heads:
            self.book.heads[word] = line
            return
        first = self.book.heads[word].place.line
        what = "line" if word in _SINGLE_ONCE else "section"
        self.notes.add(
            line.place, "duplicate-section", f"a second {what} '{word}'; the first is in line {first}", "join them"
        )
        if word == "modes":
            self.dropping = True
            self.notes.broken.add(word)

    def _section_line(self, word: str, place: Place, text: str) -> None:
        node = self._parse(text, f"{self.section}_line", place.line)
        if not isinstance(node, Problem):
            self._keep(word, Line(place, node))
            return
        if not self._misspelt(word, place, text):
            self._broken(self._misspelt_here(word, place, text) or node)

    def _misspelt_here(self, word: str, place: Place, text: str) -> Problem | None:
        """The mistake of a line that would be right with a word of its section in place of its first."""
        close = get_close_matches(word[:20], FIRST_WORDS.get(self.section, ()), n=1, cutoff=0.7)
        if not close:
            return None
        node = self._parse(text.replace(word, close[0], 1), f"{self.section}_line", place.line)
        if isinstance(node, Problem):
            return None
        here = Place(place.file, place.line, place.column, place.line, place.column + len(word))
        return Problem(here, "syntax", f"'{word}' does not fit here", f"did you mean '{close[0]}'?")

    def _keep(self, word: str, line: Line) -> None:
        """Keep a line of a section; a step needs a move or trip above it."""
        self.book.first = self.book.first or line
        if isinstance(line.node, MoveLine | TripLine):
            self.steps_for = "move"
        elif isinstance(line.node, StartLine):
            self.steps_for = None
        elif word in _STEPS and self.section in ("moves", "trips"):
            if self.steps_for is None:
                what = "move" if self.section == "moves" else "trip"
                way_out = f"put it under the line of its {what}"
                self.notes.add(line.place, "stray-step", f"this step belongs to no {what}", way_out)
            if self.steps_for != "move":
                return
        if not self.dropping:
            self.book.sections[self.section].append(line)

    def _broken(self, problem: Problem) -> None:
        self.steps_for = "broken"
        self.notes.broken.add(self.section)
        self.notes.found.append(problem)

    def _misspelt(self, word: str, place: Place, text: str) -> bool:
        """Whether the line would be right with a section's word in place of its first; then that is the mistake."""
        close = _close(word)
        if not close:
            return False
        node = self._parse(text.replace(word, close, 1), STATEMENT, place.line)
        if isinstance(node, Problem):
            return False
        here = Place(place.file, place.line, place.column, place.line, place.column + len(word))
        self.notes.add(here, "unknown-section", f"no line begins with '{word}'", f"did you mean '{close}'?")
        self._take(close, Line(place, node))
        return True

    def _outside(self, word: str, place: Place, text: str) -> None:
        """A line before any section that begins with no word of its own, perhaps for a character that nobody sees."""
        self.notes.broken.update(SECTIONS)
        if self._misspelt(word, place, text) or self.lost:
            return
        self.lost = True
        first = text[place.column - 1]
        if not (first.isascii() and first.isprintable()):
            here = Place(place.file, place.line, place.column, place.line, place.column + 1)
            self.notes.found.append(stray(text, here))
            return
        way_out = "put it under the section that it belongs to: " + ", ".join(f"'{one}'" for one in SECTIONS)
        self.notes.add(place, "no-section", "this line belongs to no section", way_out)


@lru_cache(maxsize=1024)
def _close(word: str) -> str:
    """The word that begins a line and that another is most like; empty if none is."""
    close = get_close_matches(word, sorted(STARTS), n=1, cutoff=0.7) if len(word) < 20 else []
    return close[0] if close else ""


def _with_form(problem: Problem, word: str) -> Problem:
    """The mistake of a line that begins with a word of its own, with the form of such a line as the way out."""
    if problem.kind != "syntax" or problem.way_out or word not in LINE_FORMS:
        return problem
    return Problem(problem.place, problem.kind, problem.text, f"such a line reads: {LINE_FORMS[word]}")


def book_of(text: str, file: str, notes: Notes) -> Book:
    """The lines of a file; mistakes go to the notes."""
    reader = _Reader(file, notes)
    for number, line in enumerate(ENDS.split(text.removeprefix("\ufeff")), 1):
        reader.line(number, line)
    book = reader.book
    if reader.empty:
        notes.broken.update(STARTS)
        notes.add(book.top, "missing-section", "the file says nothing", "begin with a line 'drive \"TITLE\"'")
        return book
    _check_first(book, notes)
    return book


def _check_first(book: Book, notes: Notes) -> None:
    """Every file begins with its `drive` line."""
    head = book.heads.get("drive")
    if head is None and "drive" not in notes.broken:
        notes.add(book.top, "missing-section", "the line 'drive' is missing", "begin the file with 'drive \"TITLE\"'")
    elif head is not None and book.first is not None and book.first.place.line != head.place.line:
        notes.add(head.place, "misplaced-line", "the line 'drive' is not the first of the file", "move it to the top")
