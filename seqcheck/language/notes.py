"""Collecting the mistakes of a file, and keeping quiet about those that only follow from others."""

from collections.abc import Collection, Iterable, Mapping

from seqcheck.language.syntax import Word
from seqcheck.messages import Problem, nearest
from seqcheck.source import Place


class Notes:
    """The mistakes found so far in one reading.

    `broken` holds the sections with something that could not be read; names that they may define are not called
    unknown.
    """

    def __init__(self, found: list[Problem] | None = None) -> None:
        self.found: list[Problem] = [] if found is None else found
        self.broken: set[str] = set()

    def add(self, place: Place, kind: str, text: str, way_out: str = "") -> None:
        """Note one mistake."""
        self.found.append(Problem(place, kind, text, way_out))

    def known(self, word: Word, names: Iterable[str], what: str, section: str) -> bool:
        """Whether a name is among the known ones of its kind; if not, that is a mistake."""
        names = names if isinstance(names, Collection) else tuple(names)
        if word.text in names:
            return True
        if section not in self.broken:
            self.add(word.place, "unknown-name", f"unknown {what} '{word.text}'", nearest(word.text, names))
        return False

    def fresh(self, word: Word, taken: Mapping[str, Place], what: str) -> bool:
        """Whether a name is defined here for the first time; if not, that is a mistake."""
        if word.text not in taken:
            return True
        self.twice(word, taken[word.text], f"{what} '{word.text}'")
        return False

    def twice(self, word: Word, first: Place, thing: str) -> None:
        """Note that a thing was named before."""
        where = f"line {first.line}" if first.file == word.place.file else f"'{first.file}', line {first.line}"
        self.add(
            word.place, "duplicate-name", f"{thing} is named twice, first in {where}", "leave out or rename one of them"
        )

    def not_reset(self, word: Word, section: str) -> bool:
        """Whether a name that is defined in a section leaves the built-in mode's name alone."""
        if word.text != "reset":
            return True
        self.broken.add(section)
        text = "'reset' is a reserved word and cannot be a name"
        self.add(word.place, "reserved-word", text, "choose another name, such as 'reset_'")
        return False
