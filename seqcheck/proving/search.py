"""Zone exploration: all runs at once, breadth first by the number of moves.

The search does not know what a location means. It is handed the ways to start and asks locations for their hops; an
observer is told of every stored zone and may stop the search by raising. A zone that a stored one includes is dropped;
that keeps what can be reached (Alur and Dill 1994), and with it the fewest moves, since fewer moves come first.
"""

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

from seqcheck.proving.circles import goes_on, idle
from seqcheck.proving.location import Among, Bound, Hop, Location
from seqcheck.zones import INFINITE, Zone, delayed, extrapolated, includes, limited, renamed

Observer = Callable[[int], None]

MOST_MEASURED = 6_000
"""Zones after which a search for the longest overlap rests content with what it has found."""


class LimitReached(Exception):  # noqa: N818 - it is an answer, not an error
    """The observer's way to stop a search; its text names the limit."""


@dataclass(slots=True, eq=False)
class Node:
    """A stored zone and how it was reached; `parent` is None where the run starts."""

    location: Location
    zone: Zone
    parent: "Node | None"
    hop: Hop
    moves: int
    alive: bool = True

    def path(self) -> list["Node"]:
        """The nodes from the start of the run to this one."""
        nodes: list[Node] = []
        node: Node | None = self
        while node is not None:
            nodes.append(node)
            node = node.parent
        return nodes[::-1]


def successor(zone: Zone, size: int, hop: Hop) -> Zone | None:
    """The zone after a hop and any delay in its target, widened as the target allows; None if no run takes the hop."""
    left = _limited(zone, size, hop.least, hop.most)
    if left is None:
        return None
    target = hop.target
    entered = _limited(renamed(left, size, hop.sources), target.size, hop.after, ())
    if entered is None:
        return None
    stayed = delayed(entered, target.size, target.bounds)
    if stayed is None:
        return None
    return extrapolated(stayed, target.size, target.lower, target.upper)


def _limited(zone: Zone, size: int, least: tuple[Bound, ...], most: tuple[Bound, ...]) -> Zone | None:
    current: Zone | None = zone
    for clock, value in least:
        if current is not None:
            current = limited(current, size, 0, clock, -value)
    for clock, value in most:
        if current is not None:
            current = limited(current, size, clock, 0, value)
    return current


def ticks(location: Location, zone: Zone) -> bool:
    """Whether time can pass in the location, or need not."""
    return location.struck or all(-zone[clock] < bound for clock, bound in location.bounds)


def nodes(initial: Iterable[Hop], observer: Observer, among: Among | None = None) -> Iterator[Node]:
    """All stored zones, fewest moves first; on every step each zone before is stored or included in a stored one."""
    count = 0
    waiting: list[tuple[Node | None, Hop]] = [(None, hop) for hop in initial if among is None or among(hop.target)]
    while waiting:
        level: list[Node] = []
        following: list[tuple[Node | None, Hop]] = []
        for parent, hop in waiting:
            new = _stored(parent, hop)
            if new is not None:
                count += 1
                observer(count)
                level.append(new)
                yield new
        for node in level:  # grows while it is walked through
            for hop in node.location.out() if node.alive else ():
                if among is not None and not among(hop.target):
                    continue
                if hop.cost:
                    following.append((node, hop))
                    continue
                new = _stored(node, hop)
                if new is not None:
                    count += 1
                    observer(count)
                    level.append(new)
                    yield new
        waiting = following


def _stored(parent: Node | None, hop: Hop) -> Node | None:
    if parent is None:
        new = successor([0], 1, hop)
    else:
        new = successor(parent.zone, parent.location.size, hop) if parent.alive else None
    if new is None:
        return None
    passed = hop.target.passed
    clock = hop.target.measure or hop.target.size - 1  # its two bounds tell most zones apart, before all are looked at
    upper, lower = clock * hop.target.size, clock
    most, least = new[upper], new[lower]
    for old, _ in passed:
        if old[upper] >= most and old[lower] >= least and includes(old, new):
            return None
    node = Node(hop.target, new, parent, hop, (parent.moves if parent else 0) + hop.cost)
    kept: list[tuple[Zone, object]] = []
    for old, owner in passed:
        if most >= old[upper] and least >= old[lower] and includes(new, old):
            assert isinstance(owner, Node)
            owner.alive = False
        else:
            kept.append((old, owner))
    kept.append((new, node))
    hop.target.passed = kept
    return node


def first_hazard(initial: Iterable[Hop], observer: Observer, among: Among | None = None) -> Node | None:
    """The first stored zone in which all literals are possible for a positive time; None if there is none."""
    for node in nodes(initial, observer, among):
        if node.location.hot and ticks(node.location, node.zone):
            return node
    return None


def first_held(initial: Iterable[Hop], observer: Observer) -> Node | None:
    """The first stored zone in which a mode itself holds the hazard; None if there is none."""
    for node in nodes(initial, observer):
        if node.location.held and ticks(node.location, node.zone):
            return node
    return None


@dataclass(frozen=True, slots=True)
class Longest:
    """The longest overlap found and the run that shows it; `time` None: without end. `greatest`: no run brings more."""

    time: int | None
    node: Node
    greatest: bool

    @property
    def held(self) -> Node | None:
        """Where in this overlap a mode itself holds the hazard; None if nowhere."""
        node: Node | None = self.node
        while node is not None and node.location.overlapping:
            if node.location.held and ticks(node.location, node.zone):
                return node
            node = node.parent
        return None


def longest_overlap(
    initial: Iterable[Hop], observer: Observer, ceiling: int | None, among: Among | None = None
) -> Longest | None:
    """The longest overlap of all runs; None if there is none.

    `ceiling` is a bound known beforehand (None: none): the search ends where it is reached. It would come to an end
    without one too: the zones apart from the measuring clock are finitely many, and a circle among them that goes on
    growing is without end. A limit of the observer, or MOST_MEASURED, ends it earlier if something was found.
    """
    best: Node | None = None
    most, complete = 0, True
    try:
        for count, node in enumerate(nodes(initial, observer, among)):
            time = _measured(node)
            if time > most:
                best, most = node, time
            if most >= (INFINITE if ceiling is None else ceiling):
                break
            if best is not None and count > MOST_MEASURED:
                complete = False
                break
    except LimitReached:
        if best is None:
            raise
        complete = False
    if best is None:
        return None
    return Longest(None if most >= INFINITE else most, best, complete)


def _measured(node: Node) -> int:
    """How long an overlap can have lasted in a node; 0 where there is none."""
    location = node.location
    if not location.hot or not ticks(location, node.zone):
        return 0
    time = node.zone[location.measure * location.size]
    return INFINITE if time < INFINITE and endless_circle(node) else time


def endless_circle(node: Node) -> list[Hop]:
    """The circle through which the overlap of a run has come and can go without end; empty if there is none."""
    location, size, measure = node.location, node.location.size, node.location.measure
    if not measure:
        return []
    time = node.zone[measure * size]
    circle = [node.hop]
    ancestor = node.parent
    while ancestor is not None and ancestor.location.overlapping:
        if ancestor.location is location and ancestor.zone[measure * size] < time:
            passed_over = idle(location, circle[::-1]) | {measure}
            asked = [clock for clock in range(size) if clock not in passed_over]
            places = [one * size + other for one in asked for other in asked]
            again = all(node.zone[place] >= ancestor.zone[place] for place in places)
            if again and goes_on(location, node.zone, circle[::-1], successor):
                return circle[::-1]
        circle.append(ancestor.hop)
        ancestor = ancestor.parent
    return []


def hops_out(node: Node) -> list[Hop]:
    """The hops by which the longest overlap of a node ends; none if it cannot be told within a few steps."""
    location = node.location
    if not location.measure:
        return []
    longest = node.zone[location.measure * location.size]
    waiting: list[tuple[Location, Zone, list[Hop]]] = [(location, node.zone, [])]
    for here, zone, hops in waiting:  # grows while it is walked through
        at_end = limited(zone, here.size, 0, here.measure, -longest)
        if at_end is None or len(waiting) > _MOST_ENDINGS:
            continue
        for hop in here.out():
            after = successor(at_end, here.size, hop)
            if after is None:
                continue
            if not hop.target.measure:
                return [*hops, hop]
            waiting.append((hop.target, after, [*hops, hop]))
    return []


_MOST_ENDINGS = 2000
