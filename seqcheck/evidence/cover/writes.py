"""What is written to every switch, what is in effect, and which writes are held, as the checker keeps it.

A held group is the writes of one instant that wait for a carrier which acts within a period; each has a clock. While an
event is worked out, a group carries the place that it had before it, NEW if it was written in it.
"""

from collections.abc import Iterable, Sequence
from typing import NamedTuple

from seqcheck.drive import Cell, Update, cell_text
from seqcheck.evidence.cover.scope import Scope

NEW = -1
Write = tuple[str, str]  # switch, cell


class Held(NamedTuple):
    """The switches of one instant whose writes wait for `carrier`, in column order; `place` before the event."""

    carrier: str
    switches: tuple[str, ...]
    place: int


class Cells(NamedTuple):
    """Written and effective cells, in column order, and the held groups, oldest first."""

    written: tuple[str, ...]
    effective: tuple[str, ...]
    held: tuple[Held, ...]


class Writes:
    """The effect of writes, by section 4.3 of the meaning."""

    def __init__(self, scope: Scope) -> None:
        self._scope = scope
        self._columns = scope.drive.columns
        self._places = {switch: place for place, switch in enumerate(scope.drive.columns)}
        self._carrier: dict[str, str] = {}
        for name in scope.drive.carriers:
            self._carrier |= {name: name, f"~{name}": name}

    def row(self, cells: Iterable[Cell]) -> tuple[str, ...]:
        """Cells as the file writes them."""
        return tuple(map(cell_text, cells))

    def carrier_of(self, cell: str) -> str | None:
        """The carrier that a cell follows."""
        return self._carrier.get(cell)

    def waits_for(self, switch: str, old: str, new: str) -> str | None:
        """The carrier that holds back a change from the effective cell `old` to `new`; None if it acts at once."""
        if switch not in self._scope.held:
            return None
        for cell in (old, new):
            carrier = self._carrier.get(cell)
            if carrier in self._scope.waiting:
                return carrier
        return None

    def write(self, cells: Cells, writes: Sequence[Write]) -> Cells:
        """The cells after the writes of one instant, given in column order."""
        written, effective = list(cells.written), list(cells.effective)
        new: dict[str, list[str]] = {}
        for switch, cell in writes:
            place = self._places[switch]
            written[place] = cell
            if cell == effective[place]:
                continue
            carrier = self.waits_for(switch, effective[place], cell)
            if carrier is None:
                effective[place] = cell
            elif self._scope.drive.carriers[carrier].update is Update.WITHIN_PERIOD:
                new.setdefault(carrier, []).append(switch)
        if not cells.held and not new:
            return Cells(tuple(written), tuple(effective), ())
        mine = {switch for switch, _ in writes}
        held = [one._replace(switches=tuple(name for name in one.switches if name not in mine)) for one in cells.held]
        fresh = [Held(carrier, tuple(new[carrier]), NEW) for carrier in self._scope.carriers if carrier in new]
        return Cells(tuple(written), tuple(effective), tuple(one for one in [*held, *fresh] if one.switches))

    def cancelled(self, effective: tuple[str, ...]) -> Cells:
        """The cells after a break input: what is in effect counts as written."""
        return Cells(effective, effective, ())

    def forced(self, cells: Cells, writes: Iterable[Write]) -> Cells:
        """The cells after a break input's first writes, which nothing holds; none was held before."""
        mine = dict(writes)
        row = tuple(mine.get(switch, cell) for switch, cell in zip(self._columns, cells.effective, strict=True))
        return Cells(row, row, ())

    def waiting_for(self, cells: Cells) -> dict[str, list[int]]:
        """The places of the switches with held writes, by the carrier that holds them."""
        found: dict[str, list[int]] = {}
        for place, (new, old) in enumerate(zip(cells.written, cells.effective, strict=True)):
            if new != old:
                carrier = self.waits_for(self._columns[place], old, new)
                assert carrier is not None, "a write that nothing holds is in effect"
                found.setdefault(carrier, []).append(place)
        return found

    def acted(self, cells: Cells, carrier: str) -> Cells:
        """The cells after all writes held for `carrier` have acted."""
        effective = list(cells.effective)
        for place in self.waiting_for(cells).get(carrier, ()):
            effective[place] = cells.written[place]
        return Cells(cells.written, tuple(effective), tuple(one for one in cells.held if one.carrier != carrier))
