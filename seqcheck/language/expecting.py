"""What may stand next in a line that is being written: words of the language, and names of which kind.

The parser's own tables are asked, so that nothing is said twice: a name stands for a thing of the kind that it would
have in the shortest line that can be made of what is there. Where several kinds are possible, as at the beginning of a
rule, the word that follows tells; so a line is finished once for each word that may come after the name.
"""

from collections import deque
from contextlib import suppress
from typing import NamedTuple

from seqcheck.language.driver import END, Driver, Misread
from seqcheck.language.grammar import STATEMENT, parsed, ready
from seqcheck.language.names import Kind, names_in
from seqcheck.language.words import CHECKS, STARTS
from seqcheck.messages import Problem
from seqcheck.quantities import HERTZ, PICOSECONDS, RATIOS

_SAMPLES = {"NAME": "x", "NUMBER": "1", "UNIT": "us", "STRING": '""', "CHECK": CHECKS[0]}
_UNITS = (*PICOSECONDS, "ticks", *HERTZ, *RATIOS)
_HERE = "name_that_is_being_written"
_LONGEST = 12  # words that may be missing from a line; none of the grammar lacks as many

Stack = tuple[int, ...]
"""The parser's states, the last one on top."""


class Expected(NamedTuple):
    """The words that may stand next, and the kinds of things whose names may; not those that a line names first."""

    words: tuple[str, ...]
    kinds: frozenset[Kind]


NOTHING = Expected((), frozenset())


def expected(before: str, section: str) -> Expected:
    """What may stand after the beginning of a line, which ends where a word could begin.

    `section` is the one that the line is in, empty where it is in none.
    """
    if _in_text_or_comment(before):
        return NOTHING
    own = f"{section}_line" if section else ""
    first = before.split(maxsplit=1)
    if not first:
        found = [_after(before, own)] if own else []
        words = [*(word for one in found for word in one.words), *sorted(STARTS)]
        return Expected(tuple(dict.fromkeys(words)), found[0].kinds if found else frozenset())
    start = STATEMENT if first[0] in STARTS else own
    return _after(before, start) if start else NOTHING


def _in_text_or_comment(before: str) -> bool:
    quoted = False
    for one in before:
        if one == "#" and not quoted:
            return True
        quoted = quoted != (one == '"')
    return quoted


def _after(before: str, start: str) -> Expected:
    automaton = _Automaton(ready(), before, start)
    accepted = automaton.accepted(automaton.stack)
    words = [automaton.literals[one] for one in accepted if one in automaton.literals]
    words += _UNITS if "UNIT" in accepted else ()
    words += CHECKS if "CHECK" in accepted else ()
    kinds = _kinds(automaton, before, start) if "NAME" in accepted else frozenset()
    return Expected(tuple(one for one in words if one[0].isalpha() or one in ("->", "%")), kinds)


def _kinds(automaton: "_Automaton", before: str, start: str) -> frozenset[Kind]:
    """The kinds that a name at the end of a text can have."""
    found = set()
    named = automaton.fed(automaton.stack, "NAME")
    assert named is not None
    for following in (END, *automaton.accepted(named)):
        rest = [] if following == END else automaton.rest(named, following)
        if rest is None:
            continue
        line = " ".join([f"{before}{_HERE}", *(automaton.sample(one) for one in rest)])
        node = parsed(line, start, "", 1)
        if not isinstance(node, Problem):
            found |= {one.kind for one in names_in(node) if one.word.text == _HERE and not one.defines}
    return frozenset(found)


class _Automaton:
    """The parser's tables without what is built by them: which words may come, and how a line is finished."""

    def __init__(self, parser: Driver, before: str, start: str) -> None:
        self._parser = parser
        self.literals = parser.literals
        self.stack: Stack = ()  # nothing may come after what cannot be read
        with suppress(Misread):
            self.stack = tuple(parser.stack(before, start))

    def sample(self, terminal: str) -> str:
        """A text for a terminal."""
        return _SAMPLES.get(terminal) or self.literals[terminal]

    def accepted(self, stack: Stack) -> list[str]:
        """The terminals that may come, the end of the line not among them."""
        if not stack:
            return []
        known = self._parser.tables.actions[stack[-1]]
        return [one for one in known if (one in _SAMPLES or one in self.literals) and self.fed(stack, one) is not None]

    def fed(self, stack: Stack, terminal: str) -> Stack | None:
        """The states after a terminal; None where it may not come."""
        states = self._parser.fed(stack, terminal)
        return None if states is None else tuple(states)

    def rest(self, stack: Stack, following: str) -> list[str] | None:
        """The fewest terminals that finish a line and begin with `following`."""
        begun = self.fed(stack, following)
        queue: deque[tuple[Stack, list[str]]] = deque([(begun, [following])] if begun is not None else [])
        seen = set()
        while queue:
            here, words = queue.popleft()
            if self.fed(here, END) is not None:
                return words
            for one in self.accepted(here) if len(words) < _LONGEST else ():
                after = self.fed(here, one)
                if after is not None and after not in seen:
                    seen.add(after)
                    queue.append((after, [*words, one]))
        return None
