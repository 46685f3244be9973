"""The judge of margins: the least gap after a literal, over every behaviour of a small safe drive."""

from heapq import heappop, heappush

from judge.literal import TICK, Forbids, Node, Search, never
from judge.possible import can
from judge.world import World
from seqcheck.drive import Drive
from seqcheck.hazards import Delays, Literal

NEVER = "never"


def least_gap(
    drive: Drive,
    literals: tuple[Literal, ...],
    delays: dict[Literal, Delays],
    after: int,
    *,
    facts_forbid: Forbids = never,
    most_states: int = 100_000,
    bounded: bool = True,
) -> int | str | None:
    """The least time (ps) from the end of a stretch in which the literal at place `after` is possible to a moment from
    which all others are, and the hazard is asked for; NEVER where that does not come, None where it gave up.

    With `bounded` False firmware may be late by any time.
    """
    world = World(drive, literals, interlocks=True, bounded=bounded)
    search = Search(world, [delays[literal] for literal in literals], facts_forbid)
    nodes = reached(search, most_states)
    if nodes is None:
        return None
    queue: list[tuple[int, int, Node]] = []
    best: dict[Node, int] = {}
    for node in nodes:
        later = search.later(node)
        if later is not None and possible(search, node, after):
            best[later] = 0
            heappush(queue, (0, len(queue), later))
    for node in search.starts():
        if possible(search, node, after):  # and has been so for ever, however soon it ends
            best[node] = 0
            heappush(queue, (0, len(queue), node))
    count = len(queue)
    while queue:
        time, _, node = heappop(queue)
        if time > best[node]:
            continue
        ticking = search.later(node) is not None and not possible(search, node, after)
        if ticking and search.future(node[0]).asked and others(search, node, after):
            return time
        for words, there in search.successors(node):
            cost = int(words == TICK)
            if cost and not ticking:
                continue  # the literal is possible again: its end is a start of its own
            if time + cost < best.get(there, time + cost + 1):
                best[there] = time + cost
                count += 1
                heappush(queue, (time + cost, count, there))
    return NEVER


def reached(search: Search, most_states: int) -> list[Node] | None:
    """All nodes of all runs, or None if they are more."""
    seen = dict.fromkeys(search.starts())
    waiting = list(seen)
    while waiting:
        for _, after in search.successors(waiting.pop()):
            if after not in seen:
                seen[after] = None
                waiting.append(after)
        if len(seen) > most_states:
            return None
    return list(seen)


def possible(search: Search, node: Node, place: int) -> bool:
    """Whether the literal is possible in a tick that begins here."""
    return can(search.calm(node[1])[place])


def others(search: Search, node: Node, place: int) -> bool:
    """Whether all other literals are possible in a tick that begins here."""
    return all(can(one) for at, one in enumerate(search.calm(node[1])) if at != place)
