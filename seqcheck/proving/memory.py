"""Answers that were found before, for whoever keeps them: what an answer is about, and when it is worth asking.

An answer is asked for only once a search has taken some work, so that what is quickly proven pays nothing for it. It
counts as if it had been found anew: a limit that would have ended its search ends it.
"""

from collections.abc import Callable
from typing import Protocol

from seqcheck.drive import Drive
from seqcheck.proving.views import View
from seqcheck.records import dataclass

Observer = Callable[[int], None]

WORTH = 50
"""Zones after which to ask: about what the asking costs."""
_SAID_IN_ONE = 4
"""Modes and moves that a question says in the time of one zone."""


@dataclass(frozen=True, slots=True)
class Question:
    """What is to be found out: `kind` names the search, `more` is what it is told besides the view."""

    kind: str
    view: View
    more: tuple[object, ...] = ()


@dataclass(frozen=True, slots=True)
class Remembered:
    """An answer, and the zones that its search stored."""

    answer: object
    zones: int


class Memory(Protocol):
    """Whoever keeps answers. It gives back what was kept for a question that agrees in everything that can matter."""

    def recalled(self, question: Question) -> Remembered | None:
        """What is known of a question."""

    def kept(self, question: Question, found: Remembered) -> None:
        """Keep an answer."""


class Known(Exception):  # noqa: N818 - it is an answer, not an error
    """Ends a search of which the answer is known."""

    def __init__(self, answer: object) -> None:
        super().__init__()
        self.answer = answer


@dataclass(slots=True)
class Count:
    """Zones over all searches of one answer; asks the memory for it, if there is one, when that is worth while."""

    observer: Observer
    memory: Memory | None = None
    question: Question | None = None
    before: int = 0
    last: int = 0
    asked: bool = False
    limited: bool = False

    def __call__(self, count: int) -> None:
        self.last = count
        try:
            self.observer(self.total)
        except Exception:
            self.limited = True
            raise
        if self.memory is not None and not self.asked and self.total >= worth(self.question):
            self._ask()

    def next_search(self) -> None:
        """A further search begins, which counts from 1 again."""
        self.before, self.last = self.before + self.last, 0

    @property
    def total(self) -> int:
        """The zones of all searches until now."""
        return self.before + self.last

    def keep(self, answer: object) -> None:
        """Keep an answer that took some work and that no limit has touched."""
        if self.memory is not None and self.question is not None and self.asked and not self.limited:
            self.memory.kept(self.question, Remembered(answer, self.total))

    def _ask(self) -> None:
        assert self.memory is not None
        assert self.question is not None
        self.asked = True
        found = self.memory.recalled(self.question)
        if found is None:
            return
        try:
            self.observer(found.zones)
        except Exception:  # what limits the search says so again, and at its place, if it goes on
            return
        raise Known(found.answer)


def worth(question: Question | None) -> int:
    """After how many zones to ask: saying what a question is about costs the more, the larger the drive is."""
    return WORTH if question is None else max(WORTH, _size(question.view.drive) // _SAID_IN_ONE)


def _size(drive: Drive) -> int:
    return len(drive.modes) + len(drive.moves) + len(drive.trips)
