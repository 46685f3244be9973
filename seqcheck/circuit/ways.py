"""The least ways through a graph: which switches and conditions they need, no way listed that needs more than another.

A label-setting search (Martins' multi-criteria form of Dijkstra's algorithm) over labels of two sets, smallest first:
what is dominated at a node is so by a smaller label, which came before it. So what was found when the search has to
stop is final, and its number a lower bound.
"""

from collections.abc import Iterator, Mapping, Sequence
from heapq import heappop, heappush
from typing import NamedTuple

from seqcheck.drive import Known
from seqcheck.records import dataclass

Switches = frozenset[str]
Needs = frozenset[Known]


class Passage(NamedTuple):
    """An edge that leads to `end`; `element` is what it passes, None for nothing that a search may bar."""

    end: str
    switches: Switches
    needs: Needs
    element: int | None


class Quest(NamedTuple):
    """From where to where ways are searched, the elements and nodes that they pass by, and what they need at least."""

    start: str
    end: str
    barred: frozenset[int]
    avoided: frozenset[str]
    first: Needs

    def open(self, passage: Passage) -> bool:
        """Whether a way may go there."""
        return passage.element not in self.barred and passage.end not in self.avoided


class Label(NamedTuple):
    """What a way needs."""

    switches: Switches
    needs: Needs


class TooMuch(Exception):  # noqa: N818 - it says what a graph is, not that the program failed
    """The steps are used up."""


@dataclass(slots=True)
class Steps:
    """How much may still be done; a step is a comparison of two sets."""

    left: int

    def spend(self, count: int) -> None:
        """Raises TooMuch if there are not so many left."""
        self.left -= count
        if self.left < 0:
            raise TooMuch


_GROWING = 20  # steps that it counts for to store a label


class _Settled:
    """The least labels of one node so far, by their size."""

    def __init__(self) -> None:
        self._sizes: dict[int, list[Label]] = {}
        self._all: set[Label] = set()

    def take(self, label: Label, steps: Steps) -> bool:
        """Settle a label, unless one is there that needs no more; labels come smallest first."""
        switches, needs = label
        size = len(switches) + len(needs)
        steps.spend(1)
        if label in self._all:
            return False
        for less, labels in self._sizes.items():
            if less < size:
                steps.spend(len(labels))
                if any(some <= switches and few <= needs for some, few in labels):
                    return False
        self._all.add(label)
        self._sizes.setdefault(size, []).append(label)
        return True


def least_ways(
    graph: Mapping[str, Sequence[Passage]], quests: Sequence[Quest], steps: Steps
) -> Iterator[tuple[int, Label]]:
    """What the least ways of each quest need, with the quest's number: those of fewest switches first.

    Raises TooMuch after all that the steps were enough for.
    """
    settled: dict[tuple[int, str], _Settled] = {}
    towards = [_towards(graph, quest) for quest in quests]
    waiting: list[tuple[int, int, int, int, str, Label]] = []
    for number, quest in enumerate(quests):
        label = Label(frozenset(), quest.first)
        waiting.append((0, len(quest.first), number, number, quest.start, label))
    count = len(waiting)
    while waiting:
        _, _, _, number, node, label = heappop(waiting)
        if not settled.setdefault((number, node), _Settled()).take(label, steps):
            continue
        quest = quests[number]
        if node == quest.end:
            yield number, label
            continue
        for passage in graph.get(node, ()):
            if passage.end not in towards[number] or not quest.open(passage):
                continue
            longer = Label(label.switches | passage.switches, label.needs | passage.needs)
            steps.spend(_GROWING)
            count += 1
            heappush(waiting, (len(longer.switches), len(longer.needs), count, number, passage.end, longer))


def _towards(graph: Mapping[str, Sequence[Passage]], quest: Quest) -> set[str]:
    """The nodes from which the end can be reached."""
    before: dict[str, list[str]] = {}
    for node, passages in graph.items():
        for passage in passages:
            if quest.open(passage):
                before.setdefault(passage.end, []).append(node)
    found, waiting = {quest.end}, [quest.end]
    while waiting:
        new = [node for node in before.get(waiting.pop(), ()) if node not in found]
        found.update(new)
        waiting += new
    return found
