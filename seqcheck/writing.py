"""Cells as numbers, and what a write does to what is written, what is in effect and what is held."""

from collections.abc import Iterable

from seqcheck.drive import Cell, Command, Drive, Fixed, Follow, Update

OFF, ON, FREE, KEEP = 0, 1, 2, -1
_FIRST = 3  # cells from here on follow a carrier: the first of each two its output, the second the complement
_FIXED = {Fixed.OFF: OFF, Fixed.ON: ON, Fixed.FREE: FREE, Fixed.KEEP: KEEP}
_BACK = {number: cell for cell, number in _FIXED.items()}

Vector = tuple[int, ...]
Holds = tuple[tuple[int, int], ...]  # (carrier, switches as bits): one instant's writes still held, oldest first
Put = tuple[Vector, Vector, Holds]  # written, in effect, held until a carrier updates within a period
Write = tuple[int, int]  # (switch, cell)


def carrier_of(cell: int) -> int:
    """The number of the carrier that a cell follows, -1 for none."""
    return (cell - _FIRST) >> 1 if cell >= _FIRST else -1


def inverted(cell: int) -> bool:
    """Whether a cell that follows a carrier follows its complement."""
    return bool((cell - _FIRST) & 1)


class Writing:
    """The cells of one drive as numbers, and the effect of writes.

    Only the carriers in `tracked` hold writes back, and unless one of them updates within a period (where the oldest
    write held sets the time for all) only writes of the switches in `looked_at`. Other writes act at once, since no
    switch that is looked at can tell the difference.
    """

    def __init__(self, drive: Drive, tracked: frozenset[str], looked_at: frozenset[str]) -> None:
        self.carriers = tuple(drive.carriers)
        self.columns = drive.columns
        self._number = {name: number for number, name in enumerate(self.carriers)}
        held = [drive.carriers[name].update if name in tracked else Update.AT_ONCE for name in self.carriers]
        self._waits = tuple(update is not Update.AT_ONCE for update in held)
        self._spans = tuple(update is Update.WITHIN_PERIOD for update in held)
        self._held = tuple(any(self._spans) or name in looked_at for name in drive.columns)
        self._resting_off = tuple(
            name in drive.pins and drive.pins[name].resting is Command.OFF for name in drive.columns
        )

    def code(self, cell: Cell) -> int:
        """A cell as a number."""
        if isinstance(cell, Follow):
            return _FIRST + 2 * self._number[cell.carrier] + int(cell.inverted)
        return _FIXED[cell]

    def cell(self, code: int) -> Cell:
        """A number as a cell."""
        if code < _FIRST:
            return _BACK[code]
        return Follow(self.carriers[carrier_of(code)], inverted(code))

    def turns_off(self, write: Write) -> bool:
        """Whether a write counts as a turn-off for the order of writes."""
        switch, cell = write
        return cell == OFF or (cell == FREE and self._resting_off[switch])

    def holder(self, effective: int, cell: int) -> int:
        """The carrier that holds back the change from the cell in effect to `cell`, -1 if it acts at once."""
        leaving, joining = carrier_of(effective), carrier_of(cell)
        if leaving >= 0 and self._waits[leaving]:
            return leaving
        if joining >= 0 and self._waits[joining]:
            return joining
        return -1

    def write(self, put: Put, writes: Iterable[Write]) -> Put:
        """What one instant's writes leave behind."""
        written, effective, holds = list(put[0]), list(put[1]), put[2]
        fresh: dict[int, int] = {}
        for switch, cell in writes:
            bit = 1 << switch
            if holds:
                holds = _without(holds, bit)
            written[switch] = cell
            if cell == effective[switch]:
                continue
            holder = self.holder(effective[switch], cell) if self._held[switch] else -1
            if holder < 0:
                effective[switch] = cell
            elif self._spans[holder]:
                fresh[holder] = fresh.get(holder, 0) | bit
        return tuple(written), tuple(effective), holds + tuple(sorted(fresh.items()))

    def force(self, put: Put, writes: Iterable[Write]) -> Put:
        """What a break input's writes leave behind: held writes cancelled, these in effect at once."""
        effective = list(put[1])
        for switch, cell in writes:
            effective[switch] = cell
        return tuple(effective), tuple(effective), ()

    def update(self, put: Put, carrier: int) -> Put:
        """All writes held for one carrier act."""
        written, effective, holds = put
        if written == effective:
            return put
        after = tuple(
            new if new != old and self.holder(old, new) == carrier else old
            for new, old in zip(written, effective, strict=True)
        )
        return written, after, tuple(one for one in holds if one[0] != carrier)


def _without(holds: Holds, bit: int) -> Holds:
    return tuple((carrier, bits & ~bit) for carrier, bits in holds if bits & ~bit)
