"""A layered layout of a directed graph, as pure geometry that depends on nothing but the order of what it is given.

Method: circles are broken by a depth-first search, each node gets the length of the longest way to it as its rank,
every link passes the ranks between through slots of its own (Sugiyama, Tagawa and Toda, 1981); slots are ordered by
the mean place of their neighbours, and the order with the fewest crossings is kept. The places along a layer are then
least squares under the distances that must be kept, by pooling adjacent violators (isotonic regression). Labels are
slots themselves, in layers between those of the nodes, so that no label covers another.

`along` is the direction in which the ranks follow each other, `across` the other one; all lengths are in px.
"""

from bisect import bisect_right, insort
from collections.abc import Sequence
from itertools import pairwise

from seqcheck.records import dataclass, field

_PORT = 15.0  # between two links at one side of a node
_APART, _TIGHT = 22.0, 8.0  # between neighbours of a layer of nodes, and of one of labels
_CURVE = 30.0  # between layers, for the curves
_SWEEPS = 24
Place = tuple[float, float]  # along, across


@dataclass(frozen=True, slots=True)
class Extent:
    """How much room something takes: along the ranks, and across them before and after its own line."""

    along: float
    before: float
    after: float
    ports: float = 0.0  # of a node laid out: the room that the links at its busier side take


@dataclass(frozen=True, slots=True)
class Link:
    """A link from one node to another by their numbers, with the room that its label takes beside it."""

    source: int
    target: int
    label: Extent


@dataclass(frozen=True, slots=True)
class Route:
    """The way of a link: pairs of places, from each first to each second straight, in between by a curve.

    `label` is where its label begins: the least `along` of its slot, and the `across` of the line.
    """

    places: tuple[tuple[Place, Place], ...]
    label: Place


@dataclass(frozen=True, slots=True)
class Layout:
    """Centres of the nodes, the room that each takes, routes of the links, and the size of it all."""

    centres: tuple[Place, ...]
    extents: tuple[Extent, ...]
    routes: tuple[Route, ...]
    along: float
    across: float


@dataclass(slots=True)
class _Item:
    """A node or a slot of a link in one layer."""

    extent: Extent
    layer: int
    node: bool
    behind: list[int] = field(default_factory=list)
    ahead: list[int] = field(default_factory=list)
    place: float = 0.0


def layout(nodes: Sequence[Extent], links: Sequence[Link], leads: Sequence[int]) -> Layout:
    """Lay a graph out; node 0 comes first. The nodes in `leads` only lead to others and stand right before them.

    No link may lead from a node to itself.
    """
    ranks = _ranks(len(nodes), links, frozenset(leads))
    items = [_Item(extent, 2 * rank, True) for extent, rank in zip(nodes, ranks, strict=True)]
    chains = [_chain(items, ranks, link) for link in links]
    for item in items:
        if item.node:
            kept, room = item.extent, (max(len(item.behind), len(item.ahead)) + 1) * _PORT
            item.extent = Extent(kept.along, max(kept.before, room / 2), max(kept.after, room / 2), room)
    layers = _ordered(items)
    sides = _ports(items, layers)
    _placed(items, layers, sides)
    starts, along = _starts(items, layers)
    low = min(item.place - item.extent.before for item in items)
    high = max(item.place + item.extent.after for item in items)
    for item in items:
        item.place -= low
    thick = [max((items[one].extent.along for one in layer), default=0.0) for layer in layers]
    centres = tuple((starts[one.layer] + thick[one.layer] / 2, one.place) for one in items[: len(nodes)])
    routes = tuple(
        _route(items, ranks, link, chain, sides, starts, thick) for link, chain in zip(links, chains, strict=True)
    )
    return Layout(centres, tuple(one.extent for one in items[: len(nodes)]), routes, along, high - low)


# Ranks


def _ranks(count: int, links: Sequence[Link], leads: frozenset[int]) -> list[int]:
    """The rank of each node: the length of the longest way to it without the links that close a circle."""
    out: list[list[int]] = [[] for _ in range(count)]
    for link in links:
        if link.source not in leads:
            out[link.source].append(link.target)
    done: list[int] = []
    state = [0] * count
    kept: list[tuple[int, int]] = []
    for root in range(count):
        stack = [(root, iter(out[root]))] if not state[root] else []
        state[root] = state[root] or 1
        while stack:
            here, ahead = stack[-1]
            child = next(ahead, None)
            if child is None:
                state[here] = 2
                done.append(here)
                stack.pop()
                continue
            if state[child] != 1:
                kept.append((here, child))
            if state[child] == 0:
                state[child] = 1
                stack.append((child, iter(out[child])))
    ranks = [0] * count
    onwards: list[list[int]] = [[] for _ in range(count)]
    for source, target in kept:
        onwards[source].append(target)
    for node in reversed(done):
        for target in onwards[node]:
            ranks[target] = max(ranks[target], ranks[node] + 1)
    for link in links:
        if link.source in leads:
            ranks[link.source] = ranks[link.target] - 1 if ranks[link.target] else 1
    return ranks


def _chain(items: list[_Item], ranks: list[int], link: Link) -> list[int]:
    """Make the slots of a link, from the lower of its ranks to the higher."""
    first, last = _ends(ranks, link)
    layers = range(2 * ranks[first] + 1, 2 * ranks[last])
    labelled = layers[0] if first == link.source else layers[-1]
    slots = []
    for layer in layers:
        slots.append(len(items))
        items.append(_Item(link.label if layer == labelled else Extent(0.0, 5.0, 5.0), layer, False))
    around = [first, *slots, last]
    for one, other in pairwise(around):
        items[one].ahead.append(other)
        items[other].behind.append(one)
    return slots


def _ends(ranks: list[int], link: Link) -> tuple[int, int]:
    """The ends of a link, that of the lower rank first; no link joins two of one rank."""
    return (link.source, link.target) if ranks[link.source] <= ranks[link.target] else (link.target, link.source)


# The order within the layers


def _ordered(items: list[_Item]) -> list[list[int]]:
    layers: list[list[int]] = [[] for _ in range(max(item.layer for item in items) + 1)]
    for number, item in enumerate(items):
        layers[item.layer].append(number)
    best, least = [list(layer) for layer in layers], _crossings(items, layers)
    for sweep in range(_SWEEPS):
        forward = sweep % 2 == 0
        for layer in layers if forward else reversed(layers):
            _sorted_by_neighbours(items, layers, layer, forward)
        count = _crossings(items, layers)
        if count < least:
            best, least = [list(layer) for layer in layers], count
    return best


def _sorted_by_neighbours(items: list[_Item], layers: list[list[int]], layer: list[int], forward: bool) -> None:
    """Sort one layer by the mean place of what each is linked to in the layer before it (or after it)."""
    number = items[layer[0]].layer + (-1 if forward else 1) if layer else -1
    if not 0 <= number < len(layers):
        return
    place = {one: index for index, one in enumerate(layers[number])}
    means = {}
    for index, one in enumerate(layer):
        linked = [place[other] for other in (items[one].behind if forward else items[one].ahead)]
        share = (index + 0.5) * len(place) / len(layer)  # what is linked to nothing keeps about its place
        means[one] = sum(linked) / len(linked) if linked else share
    layer.sort(key=means.__getitem__)


def _crossings(items: list[_Item], layers: list[list[int]]) -> int:
    count = 0
    for layer, following in pairwise(layers):
        place = {one: index for index, one in enumerate(following)}
        seen: list[int] = []
        for one in layer:
            own = sorted(place[other] for other in items[one].ahead)
            count += sum(len(seen) - bisect_right(seen, target) for target in own)
            for target in own:
                insort(seen, target)
    return count


Ports = dict[tuple[int, int], float]  # (node, slot): where the link leaves the node's side, from its middle


def _ports(items: list[_Item], layers: list[list[int]]) -> Ports:
    place = {one: index for layer in layers for index, one in enumerate(layer)}
    found: Ports = {}
    for number, item in enumerate(items):
        for side in (item.behind, item.ahead):
            linked = sorted(side, key=place.__getitem__)
            for index, other in enumerate(linked):
                found[number, other] = (index - (len(linked) - 1) / 2) * _PORT if item.node else 0.0
    return found


# Places


def _placed(items: list[_Item], layers: list[list[int]], ports: Ports) -> None:
    for layer in layers:
        _spread(items, layer, [0.0] * len(layer))
    for sweep in range(_SWEEPS):
        for layer in layers if sweep % 2 == 0 else reversed(layers):
            wanted = [_wanted(items, one, ports, sweep) for one in layer]
            _spread(items, layer, wanted)


def _wanted(items: list[_Item], one: int, ports: Ports, sweep: int) -> float:
    """Where an item would like to be: where its links are straight."""
    item = items[one]
    side = item.behind if sweep % 2 == 0 else item.ahead
    linked = [*item.behind, *item.ahead] if sweep >= _SWEEPS - 4 or not side else side
    if not linked:
        return item.place
    return sum(items[other].place + ports[other, one] - ports[one, other] for other in linked) / len(linked)


def _spread(items: list[_Item], layer: list[int], wanted: list[float]) -> None:
    """Set the places of a layer as near to the wanted ones as the distances to be kept allow."""
    offset, offsets = 0.0, []
    for index, one in enumerate(layer):
        if index:
            before = items[layer[index - 1]]
            gap = _APART if before.node or items[one].node else _TIGHT
            offset += before.extent.after + gap + items[one].extent.before
        offsets.append(offset)
    blocks: list[tuple[float, float, int]] = []  # mean, weight, how many
    for one, want, away in zip(layer, wanted, offsets, strict=True):
        mean, weight, many = want - away, _weight(items, one), 1
        while blocks and blocks[-1][0] > mean:
            other, heft, count = blocks.pop()
            mean = (mean * weight + other * heft) / (weight + heft)
            weight, many = weight + heft, many + count
        blocks.append((mean, weight, many))
    flat = [mean for mean, _, many in blocks for _ in range(many)]
    for one, mean, away in zip(layer, flat, offsets, strict=True):
        items[one].place = mean + away


def _weight(items: list[_Item], one: int) -> float:
    """How much it matters that an item stands where it would like to: most for the middle of a long link."""
    item = items[one]
    if item.node:
        return 1.0
    ends = [*item.behind, *item.ahead]
    return 8.0 if not any(items[other].node for other in ends) else 3.0


def _starts(items: list[_Item], layers: list[list[int]]) -> tuple[list[float], float]:
    """Where each layer begins along the ranks, and the length of all."""
    starts, at = [], 0.0
    for number, layer in enumerate(layers):
        starts.append(at)
        at += max((items[one].extent.along for one in layer), default=0.0)
        at += _CURVE if number + 1 < len(layers) else 0.0
    return starts, at


def _route(
    items: list[_Item],
    ranks: list[int],
    link: Link,
    chain: list[int],
    ports: Ports,
    starts: list[float],
    thick: list[float],
) -> Route:
    first, last = _ends(ranks, link)
    slots = []
    for one in chain:
        layer, place = items[one].layer, items[one].place
        slots.append(((starts[layer], place), (starts[layer] + thick[layer], place)))
    begin = _at_node(items, first, chain[0], ports, starts, thick, True)
    end = _at_node(items, last, chain[-1], ports, starts, thick, False)
    places = [(begin, begin), *slots, (end, end)]
    if first != link.source:
        places = [(after, before) for before, after in reversed(places)]
    labelled = chain[0] if first == link.source else chain[-1]
    middle = starts[items[labelled].layer] + (thick[items[labelled].layer] - link.label.along) / 2
    return Route(tuple(places), (middle, items[labelled].place))


def _at_node(
    items: list[_Item], node: int, slot: int, ports: Ports, starts: list[float], thick: list[float], ahead: bool
) -> Place:
    item = items[node]
    middle = starts[item.layer] + thick[item.layer] / 2
    side = item.extent.along / 2
    return middle + (side if ahead else -side), item.place + ports[node, slot]
