"""One file read again and again with other values for a `let`: its lines are parsed once."""

from collections.abc import Callable, Mapping
from fractions import Fraction

from seqcheck.drive import Drive
from seqcheck.language.lines import book_of
from seqcheck.language.names import Kind, names_of
from seqcheck.language.notes import Notes
from seqcheck.language.reading import Draft, needed, settled
from seqcheck.language.scope import Let


class Varied:
    """A drive-sequence file whose `let` lines may be given other values.

    Raises Problems if the file as it stands is not a drive without a mistake.
    """

    def __init__(self, text: str, file: str, fetch: Callable[[str], str]) -> None:
        self._notes = Notes()
        self._book = book_of(text, file, self._notes)
        self._fetch = fetch
        self._texts: dict[str, str] = {}
        draft = Draft(self._book, self._notes, self._fetched)
        self.drive: Drive = needed(settled(draft))
        self.lets: dict[str, Let] = draft.scope.lets

    def with_values(self, given: Mapping[str, Fraction]) -> Drive:
        """The drive with other values, in ps, Hz or as a number; its mistakes are raised as Problems.

        A value may be one that ranges (see ranging); what has no one answer for all of them is raised as Mixed.
        """
        return needed(settled(Draft(self._book, Notes(), self._fetched, given)))

    def used_in(self, name: str) -> tuple[int, ...]:
        """The lines of the file itself that use a quantity."""
        named = (one for one in names_of(self._book) if one.kind is Kind.QUANTITY and not one.defines)
        return tuple(dict.fromkeys(one.word.place.line for one in named if one.word.text == name))

    def _fetched(self, file: str) -> str:
        if file not in self._texts:
            self._texts[file] = self._fetch(file)
        return self._texts[file]


