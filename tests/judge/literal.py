"""The judge: a breadth-first search over every behaviour of a small drive, one picosecond at a time."""

from collections import deque
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from enum import Enum
from typing import NamedTuple

from judge.possible import Monitor, aged, can, due, heard, settled
from judge.states import State
from judge.world import World
from seqcheck.drive import Drive, Known
from seqcheck.hazards import Delays, Literal


class Says(Enum):
    """How a search ended."""

    SAFE = "safe"
    UNSAFE = "unsafe"
    GAVE_UP = "gave up"


@dataclass(frozen=True, slots=True)
class Verdict:
    """What the judge says after `states` states.

    Unsafe: `overlap` is the greatest in ps, None without end, and `run` tells a shortest run: (time in ps, what
    happens).
    Gave up: `run` is there if the hazard was seen, but nothing is known of the greatest overlap.
    """

    says: Says
    overlap: int | None = None
    states: int = 0
    run: tuple[tuple[int, str], ...] = ()


Forbids = Callable[[tuple[Known, ...]], bool]
Watched = tuple[Monitor, ...]
Node = tuple[int, Watched]
"""The number of a state, and the automata of the literals: a node of the search."""

Parents = dict[Node, tuple[Node, str] | None]

TICK = "tick"


def never(_: tuple[Known, ...]) -> bool:
    """No fact forbids the hazard."""
    return False


def judge(
    drive: Drive,
    literals: tuple[Literal, ...],
    delays: dict[Literal, Delays],
    *,
    interlocks: bool = True,
    facts_forbid: Forbids = never,
    bounded: bool = True,
    most_states: int = 300_000,
) -> Verdict:
    """Whether all literals can be possible together for a positive time in any run of the drive.

    `facts_forbid` says for what is known at a time that the hazard is not asked for then. `bounded` False removes every
    upper bound that firmware keeps.
    """
    world = World(drive, literals, interlocks=interlocks, bounded=bounded)
    search = Search(world, [delays[literal] for literal in literals], facts_forbid)
    parents: Parents = dict.fromkeys(search.starts())
    waiting = deque(parents)
    first: Node | None = None
    while waiting:
        node = waiting.popleft()
        if first is None and search.hazard(node):
            first = node
        for words, after in search.successors(node):
            if after not in parents:
                parents[after] = (node, words)
                waiting.append(after)
        if len(parents) > most_states:
            return Verdict(Says.GAVE_UP, None, len(parents), _told(parents, first))
    if first is None:
        return Verdict(Says.SAFE, None, len(parents))
    return Verdict(Says.UNSAFE, greatest(search, parents), len(parents), _told(parents, first))


class Future(NamedTuple):
    """What can follow a state: events with the state after each and what is wanted there, the state 1 ps later (None:
    no time can pass), and whether the hazard is asked for."""

    events: list[tuple[str, int, tuple[bool, ...]]]
    later: int | None
    asked: bool


class Search:
    """The product of the drive with the automata.

    What the drive does does not depend on the automata, so that it is worked out once for each state, and states have
    numbers.
    """

    def __init__(self, world: World, delays: list[Delays], facts_forbid: Forbids) -> None:
        self.world, self.delays, self.facts_forbid = world, delays, facts_forbid
        self.numbers: dict[State, int] = {}
        self.states: list[State] = []
        self.futures: dict[int, Future] = {}

    def number(self, state: State) -> int:
        """The number of a state, a new one for a new state."""
        if state not in self.numbers:
            self.numbers[state] = len(self.states)
            self.states.append(state)
        return self.numbers[state]

    def future(self, number: int) -> Future:
        """What can follow a state."""
        if number not in self.futures:
            state = self.states[number]
            events = [
                (words, self.number(after), self.world.wanted(after)) for words, after in self.world.events(state)
            ]
            later = self.world.tick(state)
            asked = not self.facts_forbid(self.world.facts(state))
            self.futures[number] = Future(events, None if later is None else self.number(later), asked)
        return self.futures[number]

    def starts(self) -> Iterator[Node]:
        """Where runs begin: every literal has been as it is for ever."""
        for state in self.world.starts():
            yield self.number(state), tuple(settled(wanted) for wanted in self.world.wanted(state))

    def events(self, node: Node) -> list[tuple[str, Node]]:
        """The nodes after each event that can happen with no time passing."""
        number, monitors = node
        return [
            (words, (after, tuple(map(heard, monitors, wanted)))) for words, after, wanted in self.future(number).events
        ]

    def later(self, node: Node) -> Node | None:
        """The node 1 ps later, or None if something must happen before."""
        number, monitors = node
        after = self.future(number).later
        return None if after is None else (after, tuple(map(aged, self.calm(monitors))))

    def successors(self, node: Node) -> list[tuple[str, Node]]:
        """The nodes after each event, and after 1 ps."""
        later = self.later(node)
        return self.events(node) if later is None else [*self.events(node), (TICK, later)]

    def calm(self, monitors: Watched) -> Watched:
        """The automata at the beginning of a tick, when nothing more happens at the instant."""
        return tuple(map(due, monitors, self.delays))

    def together(self, node: Node) -> bool:
        """Whether all literals are possible in a tick that begins here."""
        return all(map(can, self.calm(node[1])))

    def hazard(self, node: Node) -> bool:
        """Whether a tick can begin here in which the hazard happens."""
        future = self.future(node[0])
        return future.asked and future.later is not None and self.together(node)


def _told(parents: Parents, last: Node | None) -> tuple[tuple[int, str], ...]:
    """The run that leads to a node."""
    events: list[str] = []
    node = last
    while node is not None and (step := parents[node]) is not None:
        node, words = step
        events.append(words)
    told, time = [], 0
    for words in reversed(events):
        time += words == TICK
        if words != TICK:
            told.append((time, words))
    return (*told, (time, "hazard")) if last is not None else ()


def greatest(search: Search, nodes: Iterable[Node]) -> int | None:
    """The longest run of consecutive hazard ticks, or None if one can go on for ever.

    An edge is an event, of length 0, or a hazard tick, of length 1. Looked at are the nodes at which no literal ceases
    to be possible: one that is about to, but becomes wanted again in the same instant, joins two stretches. Within a
    strongly connected component a tick can be repeated for ever; between them there is a longest path.
    """
    edges: Edges = {}
    inside = {node for node in nodes if search.together(node) or all(map(can, node[1]))}
    for node in inside:
        edges[node] = [(0, after) for _, after in search.events(node) if after in inside]
        later = search.later(node)
        if later is not None and search.hazard(node):
            # The last tick of an overlap may lead out; then its end is a node without edges.
            edges[node].append((1, later))
            edges.setdefault(later, [])
    best: dict[Node, int] = {}
    for component in components(edges):
        members = set(component)
        length = 0
        for node in component:
            for step, after in edges[node]:
                if after not in members:
                    length = max(length, step + best[after])
                elif step:
                    return None
        best.update(dict.fromkeys(component, length))
    return max(best.values())


Edges = dict[Node, list[tuple[int, Node]]]


def components(edges: Edges) -> list[list[Node]]:
    """Strongly connected components, each after all that it leads to (Tarjan 1972, without recursion)."""
    number: dict[Node, int] = {}
    low: dict[Node, int] = {}
    path: list[Node] = []
    done: set[Node] = set()
    found: list[list[Node]] = []
    for root in edges:
        if root in number:
            continue
        number[root] = low[root] = len(number)
        path.append(root)
        work = [(root, iter(edges[root]))]
        while work:
            node, rest = work[-1]
            step = next(rest, None)
            if step is None:
                work.pop()
                if work:
                    low[work[-1][0]] = min(low[work[-1][0]], low[node])
                if low[node] == number[node]:
                    cut = _last_index(path, node)
                    found.append(path[cut:])
                    done.update(path[cut:])
                    del path[cut:]
                continue
            after = step[1]
            if after not in number:
                number[after] = low[after] = len(number)
                path.append(after)
                work.append((after, iter(edges[after])))
            elif after not in done:
                low[node] = min(low[node], number[after])
    return found


def _last_index(path: list[Node], node: Node) -> int:
    place = len(path) - 1
    while path[place] != node:
        place -= 1
    return place
