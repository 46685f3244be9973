"""Which writes one step still needs, how they go together, and which of them may come next."""

from collections.abc import Iterable, Mapping

from seqcheck.drive import Cell, Command, Drive, Fixed, How, Order
from seqcheck.evidence.pins import pin_of

Group = dict[str, Cell]  # the writes of one instant


def differences(drive: Drive, cells: Iterable[tuple[str, Cell]], written: Mapping[str, Cell]) -> Group:
    """Those of `cells` that differ from what was last written, in column order; `keep` never does."""
    wanted = {switch: cell for switch, cell in cells if cell is not Fixed.KEEP and cell != written[switch]}
    return {switch: wanted[switch] for switch in drive.columns if switch in wanted}


def grouped(drive: Drive, writes: Group) -> list[Group]:
    """`writes` in the groups in which the write discipline lets them reach the pins, each at one instant."""
    how = drive.writes.how if drive.writes else How.TOGETHER
    if how is How.TOGETHER:
        return [writes] if writes else []
    groups: dict[tuple[str, str], Group] = {}
    for switch, cell in writes.items():
        port = drive.pins[switch].port if how is How.BY_PORT and switch in drive.pins else None
        groups.setdefault(("port", port) if port is not None else ("switch", switch), {})[switch] = cell
    return list(groups.values())


def may_come_next(drive: Drive, remaining: list[Group]) -> list[Group]:
    """Those of the `remaining` groups of one step that ORDER lets come next."""
    order = drive.writes.order if drive.writes else Order.ANY
    if order is Order.ANY:
        return remaining
    if order is Order.TABLE:
        return [min(remaining, key=lambda group: min(drive.columns.index(switch) for switch in group))]
    first = order is Order.OFFS_FIRST
    return [group for group in remaining if _turns_off(drive, group) is first] or remaining


def _turns_off(drive: Drive, group: Group) -> bool:
    return all(
        cell is Fixed.OFF or (cell is Fixed.FREE and pin_of(drive, switch).resting is Command.OFF)
        for switch, cell in group.items()
    )
