"""Reads one line by the tables that lark made of the grammar (see making), without loading lark.

It does what lark's contextual lexer and LALR parser do, step by step: a state tries the terminals that it can use, and
names always; a text that only another state could use is a misfit word, any other a stray character.
tests/test_driver.py holds it against lark, for lines that can be read and for lines that cannot.
"""

import re
from collections.abc import Callable, Mapping, Sequence
from typing import Any, NamedTuple

END = "$END"

Rule = tuple[str, int, str, tuple[tuple[int, bool], ...] | None, bool]
"""What it makes, how many it takes, the method that builds it (empty: a helper), which children it hands on, and
whether these are spliced in (None: all as they are), and whether it is one that
stands for itself."""

Scanner = tuple[tuple[tuple[str, str | None], ...], tuple[tuple[str, tuple[tuple[str, str], ...]], ...]]
"""Terminals in the order in which they are tried, with the text of those that are one; for a pattern the words that
its text may turn out to be."""


class Tables(NamedTuple):
    """A parser as plain data. An action is the state that a terminal leads to, or the inverse of a rule's number."""

    actions: list[dict[str, int]]
    gotos: list[dict[str, int]]
    starts: dict[str, int]
    ends: dict[str, int]
    rules: list[Rule]
    scanners: list[Scanner]
    scanning: list[int]
    root: Scanner
    patterns: dict[str, str]
    terminals: dict[str, str]
    ignored: str


class Token(NamedTuple):
    """A word of a line, with its columns from 1; the second is the column after it."""

    text: str
    column: int
    end_column: int


class Misfit(NamedTuple):
    """Where a line cannot be read on, from column 1: `at_end` before anything more came, `stray` at a character that no
    terminal begins with; and the terminals that could have stood there."""

    column: int
    at_end: bool
    stray: bool
    accepted: frozenset[str]


class Misread(Exception):  # noqa: N818 - the line is at fault, not the program
    """A line cannot be read."""

    def __init__(self, misfit: Misfit) -> None:
        self.misfit = misfit
        super().__init__(misfit)


Tried = Sequence[tuple[str, str | None, Callable[[str, int], "re.Match[str] | None"] | None, Mapping[str, str]]]


class Driver:
    """The parser of single lines. `builder` has a method for every rule; None builds nothing."""

    def __init__(self, tables: Tables, builder: object | None) -> None:
        self.tables = tables
        self.literals = {name: text for name, text in tables.terminals.items() if name not in tables.patterns}
        self._patterns = {name: re.compile(pattern).match for name, pattern in tables.patterns.items()}
        self._skip = re.compile(f"(?:{tables.ignored})*").match
        self._scanners = [self._tried(scanner) for scanner in tables.scanners]
        self._root = self._tried(tables.root)
        self._ends = frozenset(tables.ends.values())
        self._build: list[Callable[..., Any] | None] = [
            getattr(builder, method) if method and builder is not None and not alone else None
            for _, _, method, _, alone in tables.rules
        ]

    def _tried(self, scanner: Scanner) -> Tried:
        order, words = scanner
        known = {name: dict(some) for name, some in words}
        return [(name, text, self._patterns.get(name), known.get(name, {})) for name, text in order]

    def parse(self, text: str, start: str) -> Any:
        """What the builder makes of a line; raises Misread."""
        stack, values, column = self._run(text, start)
        self._feed(stack, values, END, None, column, self.tables.ends[start])
        return values[-1]

    def stack(self, text: str, start: str) -> list[int]:
        """The states after the beginning of a line, the last one on top; raises Misread."""
        return self._run(text, start)[0]

    def _run(self, text: str, start: str) -> tuple[list[int], list[Any], int]:
        stack, values = [self.tables.starts[start]], []  # type: tuple[list[int], list[Any]]
        actions, scanning, scanners, skip = self.tables.actions, self.tables.scanning, self._scanners, self._skip
        place, length = 0, len(text)
        while True:
            place = skip(text, place).end()  # type: ignore[union-attr] # it matches nothing too
            if place >= length:
                return stack, values, place + 1
            for name, literal, match, words in scanners[scanning[stack[-1]]]:
                if literal is not None:
                    if not text.startswith(literal, place):
                        continue
                    said, end = literal, place + len(literal)
                else:
                    found = match(text, place)  # type: ignore[misc]
                    if found is None:
                        continue
                    said, end = found.group(), found.end()
                    name = words.get(said, name)
                break
            else:
                raise Misread(self._misfit(text, place, stack))
            token = Token(said, place + 1, end + 1)
            action = actions[stack[-1]].get(name, -1)
            if action >= 0:
                stack.append(action)
                values.append(token)
            else:
                self._feed(stack, values, name, token, place + 1, -1)
            place = end

    def _feed(
        self, stack: list[int], values: list[Any], terminal: str, token: Token | None, column: int, last: int
    ) -> None:
        """Reduce until a terminal can be shifted; with `last` until that state is reached, at the end of a line."""
        tables = self.tables
        while True:
            action = tables.actions[stack[-1]].get(terminal)
            if action is None:
                raise Misread(Misfit(column, terminal == END, False, self.accepted(stack)))
            if action >= 0:
                stack.append(action)
                values.append(token)
                return
            origin, size, _, kept, alone = tables.rules[~action]
            children: list[Any] = []
            if size:
                children = values[-size:]
                del stack[-size:], values[-size:]
            if kept is not None:
                children = _handed_on(children, kept)
            build = self._build[~action]
            values.append(children[0] if alone else build(*children) if build else children)
            stack.append(tables.gotos[stack[-1]][origin])
            if stack[-1] == last:
                return

    def fed(self, stack: Sequence[int], terminal: str) -> list[int] | None:
        """The states after a terminal, or when the line has ended; None where it may not come."""
        states = list(stack)
        while True:
            action = self.tables.actions[states[-1]].get(terminal)
            if action is None:
                return None
            if action >= 0:
                return [*states, action]
            origin, size, _, _, _ = self.tables.rules[~action]
            del states[len(states) - size :]
            states.append(self.tables.gotos[states[-1]][origin])
            if terminal == END and states[-1] in self._ends:
                return states

    def accepted(self, stack: Sequence[int]) -> frozenset[str]:
        """The terminals that may come, the end of the line among them; those of the state where none may."""
        known = self.tables.actions[stack[-1]]
        return frozenset(one for one in known if self.fed(stack, one) is not None) or frozenset(known)

    def _misfit(self, text: str, place: int, stack: list[int]) -> Misfit:
        """What a state cannot use: a word that another could, or a character that none can."""
        for _, literal, match, _ in self._root:
            if text.startswith(literal, place) if literal is not None else match and match(text, place):
                known = self.tables.actions[stack[-1]]
                accepted = frozenset(one for one in known if self.fed(stack, one) is not None)
                return Misfit(place + 1, False, False, accepted or self._tries(stack))
        return Misfit(place + 1, False, True, self._tries(stack))

    def _tries(self, stack: list[int]) -> frozenset[str]:
        return frozenset(name for name, _, _, _ in self._scanners[self.tables.scanning[stack[-1]]])


def _handed_on(children: list[Any], kept: tuple[tuple[int, bool], ...]) -> list[Any]:
    found: list[Any] = []
    for place, spliced in kept:
        if spliced:
            found += children[place]
        else:
            found.append(children[place])
    return found
