"""How one hazard is looked at: its projections, the run that one of them has found looked for in another, and the
longest overlap."""

from dataclasses import replace
from typing import Protocol

from seqcheck.drive import Cell, Command, Drive, Fixed, Follow
from seqcheck.firmware import Firmware
from seqcheck.hazards import Clearing, Literal
from seqcheck.proving.clocks import Manner
from seqcheck.proving.keys import Key
from seqcheck.proving.projection import Projection
from seqcheck.proving.reductions import Reduction
from seqcheck.proving.search import Longest, Node, first_hazard, longest_overlap
from seqcheck.proving.views import View
from seqcheck.proving.wiring import Wiring


class Count(Protocol):
    """An observer that adds up the zones of several searches."""

    def __call__(self, count: int) -> None:
        """So many zones are stored by this search."""

    def next_search(self) -> None:
        """Another search begins."""


class Looks:
    """The projections of one hazard, each made once: what the drive can do is worked out for all its searches."""

    def __init__(self, looking: View, late: Firmware, in_time: Firmware, without: frozenset[Reduction]) -> None:
        self.view = looking
        self.without = without
        self._wirings = tuple(Wiring(looking, firmware) for firmware in (late, in_time))
        self._made: dict[tuple[bool, Manner], Projection] = {}

    def manners(self, measure: bool = False) -> tuple[Manner, ...]:
        """How to look, the exact way last."""
        exact = Manner(forget=False, cut=Reduction.CUT not in self.without, measure=measure)
        forgets = self.view.carriers and Reduction.FORGET not in self.without
        return (replace(exact, forget=True), exact) if forgets else (exact,)

    def projection(self, punctual: bool, manner: Manner) -> Projection:
        """The drive as it is looked at, with nothing stored; a search of it before this one is over."""
        made = self._made.get((punctual, manner))
        if made is not None:
            return made.anew()
        wiring = self._wirings[punctual]
        made = self._made[punctual, manner] = Projection(self.view, wiring.firmware, manner, wiring)
        return made

    def release(self) -> None:
        """Let go of all locations, which hold each other; nothing that was found may be asked for hops any more."""
        for made in self._made.values():
            made.release()


def along(looks: Looks, projection: Projection, node: Node, count: Count) -> Node | None:
    """A run like the one to a node, with exact phases and with firmware in time; None if none is found."""
    if Reduction.FOLLOW in looks.without:
        return None
    images = {projection.image(key) for key in _keys(node)}
    exact = looks.projection(True, looks.manners()[-1])
    count.next_search()
    return first_hazard(exact.initial(), count, exact.along(images))


def longest(looks: Looks, count: Count) -> Longest:
    """The longest overlap.

    With phases forgotten there is one that is as long or longer, and it takes as many moves or fewer. So one like that
    is looked for along its run first; else the search for any other ends with one that is as long.
    """
    ceiling: int | None = None
    *rough, exact = looks.manners(measure=True)
    for manner in rough:
        projection = looks.projection(True, manner)
        count.next_search()
        bound = longest_overlap(projection.initial(), count, None)
        if bound is None or not bound.greatest:
            continue
        ceiling = bound.time
        if Reduction.FOLLOW in looks.without:
            continue
        images = {projection.image(key) for key in _keys(bound.node)}
        projection = looks.projection(True, exact)
        count.next_search()
        found = longest_overlap(projection.initial(), count, ceiling, projection.along(images))
        if found is not None and found.time == ceiling and found.node.moves == bound.node.moves:
            return found
    count.next_search()
    found = longest_overlap(looks.projection(True, exact).initial(), count, ceiling)
    assert found is not None, "a first hazard was found before"
    return found


def _keys(node: Node) -> list[Key]:
    keys = [one.location.key for one in node.path()]
    assert all(isinstance(key, Key) for key in keys)
    return keys  # type: ignore[return-value]


def may_hold(looking: View) -> bool:
    """Whether some row could command all literals at once."""
    if isinstance(looking.hazard.asks, Clearing):
        return False
    drive = looking.drive
    columns = [(drive.columns.index(one.switch), one) for one in looking.hazard.literals]
    for mode in drive.modes.values():
        cells = [(mode.cells[column], one) for column, one in columns]
        on = {cell for cell, one in cells if one.on}
        opposites = any(isinstance(cell, Follow) and replace(cell, inverted=not cell.inverted) in on for cell in on)
        if not opposites and all(_may_be(drive, cell, one) for cell, one in cells):
            return True
    return False


def may_hold_in(looking: View, mode: str) -> bool:
    """Whether the row of a mode could command all literals at rest."""
    drive = looking.drive
    cells = drive.modes[mode].cells
    return all(_may_be(drive, cells[drive.columns.index(one.switch)], one) for one in looking.hazard.literals)


def _may_be(drive: Drive, cell: Cell, literal: Literal) -> bool:
    """Whether a cell at rest can command what a literal wants."""
    if cell is Fixed.FREE and literal.switch in drive.pins:
        return drive.pins[literal.switch].resting is not (Command.OFF if literal.on else Command.ON)
    return cell is not (Fixed.OFF if literal.on else Fixed.ON)
