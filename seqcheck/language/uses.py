"""What a file names before its circuit: `let`, `parts` and `carriers`, its own and those that `use` brings in."""

import os.path
from collections.abc import Callable, Mapping

from seqcheck.drive import Carrier, Part
from seqcheck.language.lines import Book, book_of
from seqcheck.language.notes import Notes
from seqcheck.language.scope import Let, Scope
from seqcheck.language.signals import read_carrier, read_part
from seqcheck.language.syntax import CarrierLine, LetLine, Line, PartLine, UseLine, Word
from seqcheck.messages import Problem, Problems
from seqcheck.source import Place

DEEPEST = 50
"""Files that may use each other in a row; more is taken for a circle that goes by changing names."""

_BROUGHT = frozenset({"let", "parts", "carriers"})


class Names:
    """The parts and carriers that a file knows, with those of the files that it uses; `lets` are in its scope."""

    def __init__(self, scope: Scope) -> None:
        self.scope = scope
        self.parts: dict[str, Part] = {}
        self.carriers: dict[str, Carrier] = {}
        self.seen: dict[str, dict[str, Place]] = {"part": {}, "carrier": {}}  # mistaken ones too


class Uses:
    """Reads used files, each once; what one says in ticks of another's clock, once for each such clock."""

    def __init__(self, fetch: Callable[[str], str], found: list[Problem]) -> None:
        self.fetch = fetch
        self.found = found
        self.chain: list[str] = []
        self.books: dict[str, tuple[Book, Notes] | None] = {}
        self.done: dict[tuple[str, Scope | None], Names] = {}

    def names(self, scope: Scope) -> Names:
        """All names of a file whose lines are read."""
        self.chain.append(os.path.normpath(scope.book.file))
        names = Names(scope)
        for line in scope.book.singles:
            if isinstance(line.node, LetLine):
                scope.define(line, line.node)
            elif isinstance(line.node, UseLine):
                self._bring(names, line, line.node.path)
        for line in scope.book.sections["parts"]:
            _own_part(names, line)
        for line in scope.book.sections["carriers"]:
            _own_carrier(names, line)
        self.chain.pop()
        return names

    def _bring(self, names: Names, line: Line, said: Word) -> None:
        other = self._other(names.scope, said)
        if other is None:
            names.scope.notes.broken |= _BROUGHT
            return
        names.scope.notes.broken |= other.scope.notes.broken & _BROUGHT
        _merge(names, other, line, said)

    def _other(self, scope: Scope, said: Word) -> Names | None:
        """The names of another file; None where it cannot be read."""
        path = os.path.normpath(os.path.join(os.path.dirname(scope.book.file), said.text))
        if path in self.chain:
            circle = " -> ".join([*self.chain[self.chain.index(path) :], path])
            scope.notes.add(said.place, "circle-of-use", f"a circle of 'use': {circle}", "take one of them out")
            return None
        if len(self.chain) > DEEPEST or "\0" in path:
            text = f"more than {DEEPEST} files use each other in a row"
            scope.notes.add(said.place, "circle-of-use", text, "look for a circle that goes by changing names")
            return None
        if path not in self.books:
            self.books[path] = self._opened(scope, path, said)
        opened = self.books[path]
        if opened is None:
            return None
        book, notes = opened
        key = path, None if "clock" in book.heads else scope.ticking()
        if key not in self.done:
            self.done[key] = self.names(Scope(book, notes, scope))
        return self.done[key]

    def _opened(self, scope: Scope, path: str, said: Word) -> tuple[Book, Notes] | None:
        fetched = self._fetched(scope, path, said)
        if fetched is None:
            return None
        notes = Notes(self.found)
        return book_of(fetched, path, notes), notes

    def _fetched(self, scope: Scope, path: str, said: Word) -> str | None:
        try:
            return self.fetch(path)
        except (OSError, ValueError) as error:  # ValueError: a name that the system cannot spell
            why = getattr(error, "strerror", None) or "it cannot be opened"
            scope.notes.add(said.place, "unreadable-file", f"cannot read '{path}': {why}", "correct the path")
        except Problems as problems:
            self.found.extend(problems.found)
        return None


def _own_part(names: Names, line: Line) -> None:
    said = line.node
    assert isinstance(said, PartLine)
    notes = names.scope.notes
    if notes.not_reset(said.name, "parts") and notes.fresh(said.name, names.seen["part"], "part"):
        names.seen["part"][said.name.text] = said.name.place
        part = read_part(names.scope, line, said)
        if part is not None:
            names.parts[part.name] = part


def _own_carrier(names: Names, line: Line) -> None:
    said = line.node
    assert isinstance(said, CarrierLine)
    notes = names.scope.notes
    if notes.not_reset(said.name, "carriers") and notes.fresh(said.name, names.seen["carrier"], "carrier"):
        names.seen["carrier"][said.name.text] = said.name.place
        carrier = read_carrier(names.scope, line, said)
        if carrier is not None:
            names.carriers[carrier.name] = carrier


def _merge(names: Names, other: Names, line: Line, said: Word) -> None:
    """Take over what another file names; the same thing may come by several ways."""
    scope = names.scope
    lets = {name: let.place for name, let in scope.lets.items()}
    for name, let in other.scope.lets.items():
        if _new(scope.notes, name, let.place, lets, "quantity", said):
            scope.lets[name] = Let(let.place, line.place.line, let.amount)
        elif lets[name] == let.place:
            _same(scope.notes, scope.lets[name].amount, let.amount, f"quantity '{name}'", said)
    for what, seen in other.seen.items():
        own, theirs = (names.parts, other.parts) if what == "part" else (names.carriers, other.carriers)
        for name, place in seen.items():
            if _new(scope.notes, name, place, names.seen[what], what, said):
                names.seen[what][name] = place
            elif names.seen[what][name] == place:
                _same(scope.notes, own.get(name), theirs.get(name), f"{what} '{name}'", said)
    names.parts = {**other.parts, **names.parts}
    names.carriers = {**other.carriers, **names.carriers}


def _new(notes: Notes, name: str, place: Place, taken: Mapping[str, Place], what: str, said: Word) -> bool:
    if name in taken and taken[name] != place:
        notes.twice(said, taken[name], f"{what} '{name}'")
    return name not in taken


def _same(notes: Notes, one: object, other: object, thing: str, said: Word) -> None:
    """Note a thing that is another by each of two ways; one that could not be read (None) was noted before."""
    if one is not None and other is not None and one != other:
        text = f"{thing} comes by two files whose clocks differ, and is given in ticks"
        notes.add(said.place, "two-clocks", text, "give the file that defines it a line 'clock' of its own")
