"""Checking the switching table: columns, rows, cells, what is known and what a row is for."""

from collections import Counter
from collections.abc import Iterable

from seqcheck.drive import (
    RESET,
    Above,
    Cell,
    CurrentInto,
    CurrentOut,
    Fixed,
    Follow,
    Known,
    Means,
    Mode,
    Purpose,
    Winding,
)
from seqcheck.language.lines import Book
from seqcheck.language.notes import Notes
from seqcheck.language.stages import StageReader
from seqcheck.language.syntax import CellWord, ColumnsLine, FactWord, MeansWord, RowLine, Word
from seqcheck.messages import nearest
from seqcheck.source import Place


class Table:
    """The checked table, with what is needed to check cells and facts elsewhere.

    `modes` are the rows; `named` has the mistaken ones too, so that their names are not called unknown.
    """

    def __init__(self, book: Book, notes: Notes, stage: StageReader, carriers: dict[str, Place]) -> None:
        self.notes = notes
        self.stage = stage
        self.carriers = carriers
        self.columns: tuple[str, ...] = ()
        self.modes: dict[str, Mode] = {}
        self.named: dict[str, Place] = {}
        self.frees: Place | None = None  # the first cell `free`
        head = book.heads.get("modes")
        if head is None or not isinstance(head.node, ColumnsLine):
            return
        self._read_columns(head.place, head.node)
        for line in book.sections["modes"]:
            assert isinstance(line.node, RowLine)
            self._row(line.place, line.node, len(head.node.switches))
        if not book.sections["modes"] and "modes" not in notes.broken:
            notes.add(head.place, "missing-row", "the table has no row", "add a row 'MODE CELL CELL ...'")

    def _read_columns(self, place: Place, said: ColumnsLine) -> None:
        switches = tuple(self.stage.names)
        seen: dict[str, Place] = {}
        for word in said.switches:
            self.notes.known(word, switches, "switch", "stage")
            self.notes.fresh(word, seen, "column")
            seen.setdefault(word.text, word.place)
        missing = [one for one in switches if one not in seen]
        if missing and "stage" not in self.notes.broken:
            listed = ", ".join(f"'{one}'" for one in missing)
            text = f"the table has no column for {listed}"
            self.notes.add(place, "missing-column", text, "every switch is a column of the table once")
        self.columns = tuple(seen)

    def _row(self, place: Place, said: RowLine, width: int) -> None:
        cells = tuple(self.cell(one) for one in said.cells)
        self._check_width(place, said, width)
        known = self.known(said.facts)
        means = self._means(said.means)
        fresh = self.notes.not_reset(said.name, "modes") and self.notes.fresh(said.name, self.named, "mode")
        if fresh:
            self.named[said.name.text] = said.name.place
        whole = tuple(cell for cell in cells if cell is not None)
        if fresh and len(whole) == width == len(self.columns):
            self.modes[said.name.text] = Mode(place, said.name.text, whole, known, means)

    def _check_width(self, place: Place, said: RowLine, width: int) -> None:
        count = len(said.cells)
        if count < width:
            lacking = ", ".join(f"'{one}'" for one in self.columns[count:])
            text = f"row '{said.name.text}' has {_cells(count)} for {_columns(width)}"
            self.notes.add(place, "missing-cell", text, f"add cells for {lacking}" if lacking else "")
        elif count > width:
            text = f"row '{said.name.text}' has {_cells(count)} for {_columns(width)}"
            extra = said.cells[width].place.through(said.cells[-1].place)
            self.notes.add(extra, "extra-cell", text, "take out what is too many")

    # Cells

    def cell(self, said: CellWord) -> Cell | None:
        """A cell of a row or a `set`; None where a mistake was noted."""
        if said.fixed is Fixed.FREE and self.frees is None:
            self.frees = said.place
        if said.fixed is not None:
            return said.fixed
        assert said.carrier is not None
        name = said.carrier.text
        if name in self.carriers:
            return Follow(name, said.inverted)
        if "carriers" not in self.notes.broken:
            options = [*self.carriers, *(() if said.inverted else ("on", "off", "keep", "free"))]
            way_out = nearest(name, options)
            instead = "no carrier" if said.inverted else "neither on, off, keep, free nor a carrier"
            text = f"'{name}' is {instead}"
            self.notes.add(said.carrier.place, "wrong-cell", text, way_out)
        return None

    # Facts and meanings

    def known(self, facts: tuple[FactWord, ...]) -> tuple[Known, ...]:
        """What `with` says."""
        known: list[Known] = []
        for said in facts:
            fact = self._above(said) if said.form == "above" else self._current(said)
            if fact is None:
                continue
            if _circle(fact, known) or not _rivals(fact, self.stage.windings).isdisjoint(known):
                self.notes.add(said.place, "contradiction", "this contradicts what is said before it", "take one out")
            elif fact not in known:
                known.append(fact)
        return tuple(known)

    def _current(self, said: FactWord) -> Known | None:
        (node,) = said.nodes
        if not self.notes.known(node, self.stage.nodes(), "node", "stage"):
            return None
        return CurrentOut(node.text) if said.form == "out" else CurrentInto(node.text)

    def _above(self, said: FactWord) -> Known | None:
        upper, lower = said.nodes
        supplies = [one.nodes for one in self.stage.sources]
        sources = [node for nodes in supplies for node in nodes]
        known = [self.notes.known(one, sources, "source", "stage") for one in said.nodes]
        if not all(known):
            return None
        one_line = any(upper.text in nodes and lower.text in nodes for nodes in supplies)
        if upper.text == lower.text or not one_line:
            text = f"'{upper.text}' and '{lower.text}' are not two nodes of one 'sources' line"
            self.notes.add(said.place, "same-name", text, "compare two sources of one supply")
            return None
        return Above(upper.text, lower.text)

    def _means(self, said: tuple[MeansWord, ...]) -> Means | None:
        for extra in said[1:]:
            self.notes.add(extra.place, "duplicate-name", "a second 'means' in one row", "leave out one of them")
        if not said:
            return None
        first = said[0]
        meant = [self._meant(node, first.purpose) for node in first.nodes]
        if not all(meant):
            return None
        if first.purpose is Purpose.DRIVE and first.nodes[0].text == first.nodes[1].text:
            text = f"a drive from '{first.nodes[0].text}' to itself"
            self.notes.add(first.place, "same-name", text, "name two nodes")
            return None
        return Means(first.place, first.purpose, tuple(node.text for node in first.nodes))

    def _meant(self, node: Word, purpose: Purpose) -> bool:
        if purpose is Purpose.LEVEL:
            return self.notes.known(node, self.stage.stiff(), "stiff node", "stage")
        return self.notes.known(node, self.stage.nodes(), "node", "stage")

    def known_mode(self, word: Word) -> bool:
        """Whether a word names a row or `reset`; if not, that is a mistake."""
        return word.text == RESET or self.notes.known(word, self.named, "mode", "modes")


def _circle(fact: Known, known: list[Known]) -> bool:
    """Whether a source would stand above itself by this fact and others."""
    if not isinstance(fact, Above):
        return False
    below = [fact.lower]
    for node in below:
        below += (one.lower for one in known if isinstance(one, Above) and one.upper == node and one.lower not in below)
    return fact.upper in below


def _rivals(fact: Known, windings: Iterable[Winding]) -> set[Known]:
    """What cannot hold together with a fact about a current.

    That is the other direction, and, where a winding alone ends at both its nodes, the like fact of its other node.
    """
    if isinstance(fact, Above):
        return set()
    like, other = (CurrentOut, CurrentInto) if isinstance(fact, CurrentOut) else (CurrentInto, CurrentOut)
    found: set[Known] = {other(fact.node)}
    count = Counter(end for one in windings for end in one.ends)
    for winding in windings:
        if fact.node in winding.ends and all(count[end] == 1 for end in winding.ends):
            found |= {like(end) for end in winding.ends if end != fact.node}
    return found


def _cells(count: int) -> str:
    return "1 cell" if count == 1 else f"{count} cells"


def _columns(count: int) -> str:
    return "1 column" if count == 1 else f"{count} columns"
