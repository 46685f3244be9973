"""The switching table read back from the circuit: what every row does, never from names."""

from cmath import exp, phase, pi
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations, product
from math import prod

from seqcheck.circuit.facts import contradicted, opposite
from seqcheck.circuit.graph import Edge
from seqcheck.circuit.levels import Link, Order, joined, links, sinks_of, sources_of, supplies
from seqcheck.circuit.meaning import amiss
from seqcheck.circuit.opening import attached_nodes, currents, flow_edges, needed
from seqcheck.circuit.shorting import shorting_sets
from seqcheck.drive import Carrier, Cell, Command, Drive, Fixed, Follow, Known, Mode, SetStep, Winding
from seqcheck.effects import Kind, Level, Node, Row, Swap, Table, Vector, Word, Wound
from seqcheck.hazards import Current, Hazard
from seqcheck.messages import Problem, Problems

MOST_WORDS = 4096
"""More words than this in one row are refused."""


def read_back(drive: Drive, file: str) -> Table:
    """Everything that the rows of a drive do. Raises Problems as shorting_sets does, or for a row of too many words."""
    reader = RowReader(drive)
    rows = tuple(reader.row(mode) for mode in drive.modes.values())
    ends = tuple(winding.ends for winding in drive.stage.windings)
    return Table(file, drive.title, drive.columns, ends, rows, tuple(_swaps(drive, rows, reader.sets)))


_SIDES: tuple[tuple[Cell, Command], ...] = ((Fixed.ON, Command.ON), (Fixed.OFF, Command.OFF))


class RowReader:
    """Reads rows of one drive back; `sets` are its shorting sets."""

    def __init__(self, drive: Drive) -> None:
        self.drive = drive
        self.sets = shorting_sets(drive.stage)
        self._stiff = supplies(drive.stage)
        attached = attached_nodes(drive.stage)
        named = dict.fromkeys(end for winding in drive.stage.windings for end in winding.ends)
        self._ends = tuple(end for end in named if end in attached)
        free = tuple(end for end in self._ends if end not in self._stiff)
        self._phases = free if len(free) == 3 and len(drive.stage.rails) == 1 else ()
        plates = [end for one in drive.stage.capacitors for end in (one.positive, one.negative)]
        self._plates = tuple(dict.fromkeys(plates))
        self._flowing: dict[tuple[Known, ...], dict[Winding, tuple[Current, ...]]] = {}
        self._flow = {joint: list(flow_edges(drive.stage, joint)) for joint in (False, True)}

    def row(self, mode: Mode) -> Row:
        """What one row does."""
        alternatives = tuple(self._turns(mode, cells) for cells in _alternatives(self.drive, mode))
        kept = tuple(turns for turns in alternatives if not any(word.shorts for word in turns))
        if Fixed.KEEP in mode.cells and kept:
            alternatives = kept  # what a row keeps was held by another, which is judged itself
        alternatives = tuple(dict.fromkeys(alternatives))
        read = Row(mode, alternatives, max(_dead_times(turns, self.sets) for turns in alternatives))
        return replace(read, amiss=amiss(self.drive.stage, read)) if mode.means else read

    def _turns(self, mode: Mode, cells: tuple[Cell, ...]) -> tuple[Word, ...]:
        followed = dict.fromkeys(cell.carrier for cell in cells if isinstance(cell, Follow))
        levels = [_levels(self.drive.carriers[name]) for name in followed]
        found = []
        for chosen in product(*levels):
            high = dict(zip(followed, chosen, strict=True))
            commanded = {
                switch: cell is Fixed.ON if isinstance(cell, Fixed) else high[cell.carrier] != cell.inverted
                for switch, cell in zip(self.drive.columns, cells, strict=True)
            }
            found.append(self.word(frozenset(_passed(self.drive, commanded)), mode.known))
        return tuple(dict.fromkeys(found))

    def word(self, on: frozenset[str], known: tuple[Known, ...]) -> Word:
        """What a word of switches does while this is known."""
        stage = self.drive.stage
        edges, order = links(stage, on), Order(stage, known)
        if known not in self._flowing:
            self._flowing[known] = {winding: _possible(self.drive, winding, known) for winding in stage.windings}
        flowing = self._flowing[known]
        nodes = tuple(self._node(edges, order, end, flowing) for end in self._ends)
        plates = tuple(self._node(edges, order, name, flowing) for name in self._plates)
        by_name = {node.name: node for node in nodes}
        wound = [
            self._wound(winding, by_name, edges, order, flowing[winding])
            for winding in stage.windings
            if len(winding.ends) == 2 and all(end in by_name for end in winding.ends)
        ]
        windings = tuple(self._in_star(one, wound, edges) for one in wound)
        shorts = tuple(
            one for one in self.sets if {lit.switch for lit in one.literals} <= on and not contradicted(one, known)
        )
        stuck = [one for winding, own in flowing.items() for one in own if self._stuck(winding, one, on)]
        vector = self._vector([by_name[name] for name in self._phases]) if self._phases and not shorts else None
        return Word(on, shorts, nodes, plates, windings, tuple(dict.fromkeys(stuck)), vector)

    def _node(self, edges: list[Link], order: Order, name: str, flowing: dict[Winding, tuple[Current, ...]]) -> Node:
        own = [one for winding, possible in flowing.items() if name in winding.ends for one in possible]
        out, into = sources_of(edges, self._stiff, name), sinks_of(edges, self._stiff, name)
        knows_out = any(one.out_of == name for one in own)
        knows_into = any(one.into == name for one in own)
        highest, lowest = order.highest(out), order.lowest(into)
        ends = [(frozenset({Level(one.nodes[-1])}), frozenset({Level(one.nodes[0])})) for one in self.drive.stage.rails]
        return Node(name, highest, lowest, knows_out, knows_into, (highest, lowest) in ends)

    def _wound(
        self,
        winding: Winding,
        nodes: dict[str, Node],
        edges: list[Link],
        order: Order,
        possible: tuple[Current, ...],
    ) -> Wound:
        ends = winding.ends
        first, second = (nodes[end] for end in ends)
        if first.held and second.held:
            return _between(ends, first, second, order)
        if possible and all(joined(edges, self._stiff, one.into or "", one.out_of or "") for one in possible):
            return Wound(ends, Kind.BRAKED, (), (first.level,) if first.level and first.level == second.level else ())
        if len(possible) == 1:
            start, end = (nodes[name] for name in (possible[0].out_of or "", possible[0].into or ""))
            if start.level and end.level and (start.level == end.level or order.above(start.level, end.level)):
                return _between(ends, start, end, order)
        for node in (first, second):
            if node.held and node.name not in self._stiff:
                return Wound(ends, Kind.HELD, (node.name,), (node.held,))
        return Wound(ends, Kind.FREE)

    def _in_star(self, one: Wound, wound: list[Wound], edges: list[Link]) -> Wound:
        """A winding held at one end, as driven by way of others whose free ends are joined to its own, if it is."""
        if one.kind is not Kind.HELD:
            return one
        group = [
            other
            for other in wound
            if other.kind is Kind.HELD and (other is one or self._together(edges, _loose_end(one), _loose_end(other)))
        ]
        if len({other.levels for other in group}) == 1:
            return one
        return replace(one, kind=Kind.STAR, group=tuple(other.ends for other in group))

    def _together(self, edges: list[Link], first: str, second: str) -> bool:
        """Whether two nodes are joined both ways by switches and diodes alone."""
        return joined(edges, self._stiff, first, second) and joined(edges, self._stiff, second, first)

    def _stuck(self, winding: Winding, current: Current, on: frozenset[str]) -> bool:
        """Whether a current that some word lets flow has no way in this one, not through other windings either."""
        edges = list(self._flow[None in (current.out_of, current.into)])
        for other in self.drive.stage.windings:
            if len(other.ends) == 2 and other is not winding:
                ends = (other.ends, other.ends[::-1])
                edges += [Edge(start, end, None, frozenset(), None) for start, end in ends]
        return not _has_way(edges, current, on) and _has_way(edges, current, frozenset(self.drive.columns))

    def _vector(self, nodes: list[Node]) -> Vector | None:
        """The voltage of three held phases, or of two with the third free, by the share of the supply at each."""
        levels = [node.held for node in nodes]
        rails = self.drive.stage.rails[0].nodes
        held = [place for place, level in enumerate(levels) if level is not None]
        if len(held) < 2 or any(level is not None and (level.through or level.node not in rails) for level in levels):
            return None
        shares = [1 - rails.index(level.node) / (len(rails) - 1) if level else 0.0 for level in levels]
        if len(held) == 2:
            shares = [shares[place] if place in held else sum(shares[one] for one in held) / 2 for place in range(3)]
        whole = 2 / 3 * sum(share * exp(2j * pi * place / 3) for place, share in enumerate(shares))
        length = round(abs(whole), 9)
        return Vector(round(phase(whole) * 180 / pi) % 360 if length else None, length)


def _has_way(edges: list[Edge], current: Current, on: frozenset[str]) -> bool:
    goal, start = current.out_of or "", current.into or ""
    seen, waiting = {start}, [start]
    while waiting:
        here = waiting.pop()
        if here == goal:
            return True
        for edge in edges:
            if edge.start == here and edge.end not in seen and (edge.switch is None or edge.switch in on):
                seen.add(edge.end)
                waiting.append(edge.end)
    return False


def _between(ends: tuple[str, ...], first: Node, second: Node, order: Order) -> Wound:
    """A winding between two levels: braked where they are one, else driven from the higher to the lower."""
    one, other = first.level, second.level
    assert one is not None
    assert other is not None
    if one == other:
        return Wound(ends, Kind.BRAKED, (), (one,))
    if order.above(other, one):
        first, second, one, other = second, first, other, one
    return Wound(ends, Kind.DRIVEN, (first.name, second.name), (one, other), order.above(one, other))


def _loose_end(one: Wound) -> str:
    """The end of a winding held at one end that is not held."""
    return next(end for end in one.ends if end != one.nodes[0])


def _possible(drive: Drive, winding: Winding, known: tuple[Known, ...]) -> tuple[Current, ...]:
    """The currents of a winding that what is known does not rule out."""
    facts = set(known)
    return tuple(
        one
        for one in currents(drive.stage, winding)
        if not any(opposite(fact) in facts for fact in needed(drive.stage, winding, one))
    )


def _levels(carrier: Carrier) -> list[bool]:
    """The levels at which the reference of a carrier can be, high first."""
    return ([True] if carrier.high else []) + ([False] if carrier.low else [])


def _passed(drive: Drive, commanded: dict[str, bool]) -> Iterator[str]:
    """The switches whose command passes the interlocks."""
    barred = {
        name
        for lock in drive.interlocks
        if commanded[lock.first] and commanded[lock.second]
        for name in (lock.first, lock.second)
    }
    return (name for name, on in commanded.items() if on and name not in barred)


# Cells that may be one thing or another


def _alternatives(drive: Drive, mode: Mode) -> Iterator[tuple[Cell, ...]]:
    """The cells of a row with everything that a kept or released one may be."""
    choices = [_choices(drive, switch, cell) for switch, cell in zip(drive.columns, mode.cells, strict=True)]
    carriers = len({cell.carrier for some in choices for cell in some if isinstance(cell, Follow)})
    if prod(map(len, choices)) << carriers > MOST_WORDS:
        text = f"row '{mode.name}' stands for more than {MOST_WORDS} words of switches"
        raise Problems([Problem(mode.place, "too-many-words", text, "write out cells that are 'keep'")])
    return product(*choices)


def _choices(drive: Drive, switch: str, cell: Cell) -> list[Cell]:
    if cell is Fixed.FREE:
        resting = drive.pins[switch].resting
        return [side for side, command in _SIDES if resting in (command, Command.UNKNOWN)]
    if cell is not Fixed.KEEP:
        return [cell]
    place = drive.columns.index(switch)
    written: list[Cell] = [mode.cells[place] for mode in drive.modes.values()]
    runs = [move.steps for move in drive.moves] + [trip.steps for trip in drive.trips]
    for steps in runs:
        for step in steps:
            written += [new for name, new in step.writes if name == switch] if isinstance(step, SetStep) else []
    found = [one for old in written if old is not Fixed.KEEP for one in _choices(drive, switch, old)]
    return list(dict.fromkeys(found)) or [Fixed.ON, Fixed.OFF]


# Swaps


def _swaps(drive: Drive, rows: tuple[Row, ...], sets: tuple[Hazard, ...]) -> Iterator[Swap]:
    joins = _joins(drive)
    owns = [frozenset(literal.switch for literal in one.literals) for one in sets]
    held = [[{word.on & own for word in row.words} for own in owns] for row in rows]
    for first, second in combinations(range(len(rows)), 2):
        names = rows[first].mode.name, rows[second].mode.name
        direct = names in joins or names[::-1] in joins
        for place, own in enumerate(owns):
            found = _swapped(drive, held[first][place], held[second][place], own)
            if found is not None:
                yield Swap(*names, *found, direct)


Sides = tuple[tuple[str, ...], tuple[str, ...], tuple[str, ...]]


def _swapped(
    drive: Drive, before: set[frozenset[str]], after: set[frozenset[str]], own: frozenset[str]
) -> Sides | None:
    """How the switches of a shorting set change sides between two rows, given which of them are on in their words."""
    for one, other in product(before, after):
        if one | other == own and one != own and other != own:
            sides = one - other, other - one, one & other
            off, on, stays = (tuple(name for name in drive.columns if name in side) for side in sides)
            return off, on, stays
    return None


def _joins(drive: Drive) -> set[tuple[str, str]]:
    """The pairs of rows between which a move or trip leads straight."""
    moves = {(source, move.target) for move in drive.moves for source in move.sources}
    return moves | {(source, trip.target) for trip in drive.trips for source in trip.resting}


def _dead_times(turns: tuple[Word, ...], sets: tuple[Hazard, ...]) -> int:
    """How often in a period of a carrier a shorting set changes sides, for a row of one carrier."""
    if len(turns) != 2:
        return 0
    one, other = (word.on for word in turns)
    names = [frozenset(literal.switch for literal in hazard.literals) for hazard in sets]
    return 2 * sum(own <= one | other and not own <= one and not own <= other for own in names)
