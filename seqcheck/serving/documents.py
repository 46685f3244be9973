"""The texts that an editor has open, and what could be read of each."""

import os
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from urllib.parse import quote, unquote, urlsplit

from seqcheck.drive import Drive, Library
from seqcheck.language import decode
from seqcheck.language.lines import Book
from seqcheck.language.notes import Notes
from seqcheck.language.reading import Draft, drafted, settled
from seqcheck.messages import Problem, Problems
from seqcheck.serving.positions import Lines
from seqcheck.source import Place
from seqcheck.verdict import Budget


@dataclass(frozen=True, slots=True)
class Study:
    """What could be read of a text: all of it in `found`, or `problems`; `draft` is what the mistakes left.

    `used` are the paths of the files that it uses, themselves or by others, those that could not be read too.
    """

    draft: Draft
    found: Drive | Library | None
    problems: tuple[Problem, ...]
    used: frozenset[str]


class Document:
    """One open text. It is named by the last part of its path, so that messages stay short; `folder` is the rest."""

    def __init__(self, uri: str, version: int | None, text: str) -> None:
        self.uri = uri
        self.path = path_of(uri)
        self.folder, self.file = os.path.split(self.path or uri)
        self.version = version
        self.text = text
        self.lines = Lines(text)
        self.study: Study | None = None
        self.margins: Budget | str | None = None  # of this text; or why there are none; None while none are known


class Desk:
    """All open texts, and the files beside them."""

    def __init__(self) -> None:
        self.open: dict[str, Document] = {}

    def read(self, document: Document) -> Study:
        """Read a text with the files that it uses; what is open counts as it stands in the editor."""
        used: set[str] = set()
        fetch = self.fetching(document, used)
        try:
            text = decode(document.text.encode("utf-8", "surrogatepass"), document.file)
        except Problems as problems:
            return Study(Draft(Book(document.file), Notes(), fetch), None, problems.found, frozenset())
        draft = drafted(text, document.file, fetch)
        try:
            return Study(draft, settled(draft), (), frozenset(used))
        except Problems as problems:
            return Study(draft, None, problems.found, frozenset(used))

    def fetching(self, document: Document, used: set[str]) -> Callable[[str], str]:
        """What gives the texts of the files that one uses, and notes their paths."""

        def fetch(file: str) -> str:
            path = self.path(document, file)
            used.add(path)
            if document.path is None:
                raise FileNotFoundError(2, "this text is no file yet, so that nothing lies beside it")
            return self.text(path, file)

        return fetch

    def text(self, path: str, file: str) -> str:
        """The text at a path, which messages call `file`; raises OSError, or Problems where it is no text."""
        known = next((one for one in self.open.values() if one.path == path), None)
        data = known.text.encode("utf-8", "surrogatepass") if known else Path(path).read_bytes()
        return decode(data, file)

    def path(self, document: Document, file: str) -> str:
        """The path of a file that is named from where a text lies."""
        return os.path.normpath(os.path.join(document.folder, file))

    def users(self, path: str | None) -> list[Document]:
        """The open texts that use a file."""
        return [one for one in self.open.values() if one.study is not None and path in one.study.used]

    def location(self, document: Document, place: Place) -> dict[str, object]:
        """A place, named from where a text lies, as a location of the protocol."""
        if place.file == document.file:
            return {"uri": document.uri, "range": document.lines.range(place)}
        path = self.path(document, place.file)
        known = next((one for one in self.open.values() if one.path == path), None)
        if known is not None:
            return {"uri": known.uri, "range": known.lines.range(place)}
        return {"uri": uri_of(path), "range": self._lines(path, place.file).range(place)}

    def _lines(self, path: str, file: str) -> Lines:
        try:
            return Lines(self.text(path, file))
        except (OSError, Problems):
            return Lines("")


def path_of(uri: str) -> str | None:
    """The path that a `file:` URI names (RFC 8089); None for any other."""
    parts = urlsplit(uri)
    if parts.scheme != "file" or parts.netloc not in ("", "localhost"):
        return None
    path = unquote(parts.path)
    return os.path.normpath(path[1:] if os.name == "nt" else path)


def uri_of(path: str) -> str:
    """The `file:` URI of an absolute path."""
    whole = Path(os.path.abspath(path)).as_posix()
    return f"file://{'' if whole.startswith('/') else '/'}{quote(whole)}"
