"""Drives with one thing stuck, judged to the letter: where all literals can be possible for a positive time."""

from collections import deque

from judge.delays import delays_of
from judge.literal import Forbids, Search
from judge.states import OFF, ON, Rest, State
from judge.world import Pins, Waves, World
from seqcheck.drive import Drive
from seqcheck.faults import Where
from seqcheck.hazards import Delays, Fault, Literal

AT_ONCE = Delays(0, 0)


class StuckPin(World):
    """A world in which one pin says the same for ever, whatever it is told."""

    fault: Fault

    def at_pin(self, place: int, pins: Pins, waves: Waves) -> str:
        """What the pin of a column says."""
        if self.drive.columns[place] == self.fault.switch:
            return ON if self.fault.on else OFF
        return super().at_pin(place, pins, waves)


class StuckSwitch(World):
    """A world in which one switch conducts for ever, or never."""

    fault: Fault

    def wanted(self, state: State) -> tuple[bool, ...]:
        """For each literal, whether it is so or commanded so."""
        told = super().wanted(state)
        return tuple(
            literal.on == self.fault.on if literal.switch == self.fault.switch else wanted
            for literal, wanted in zip(self.literals, told, strict=True)
        )


def places(
    drive: Drive,
    literals: tuple[Literal, ...],
    forbids: Forbids,
    fault: Fault,
    most_states: int,
    *,
    bounded: bool = True,
) -> frozenset[Where] | None:
    """Where a hazard happens under a fault, by a search over whole picoseconds; None where it gave up.

    `bounded` False removes every upper bound that firmware keeps. A literal of the stuck switch is possible for ever or
    never; the raise of `difference` is for two that can change.
    """

    class Faulty(StuckPin if fault.pin else StuckSwitch):  # type: ignore[misc]
        pass

    Faulty.fault = fault
    changing = literals if fault.pin else tuple(one for one in literals if one.switch != fault.switch)
    delays = delays_of(drive, changing)
    world = Faulty(drive, literals, interlocks=True, bounded=bounded)
    search = Search(world, [delays.get(one, AT_ONCE) for one in literals], forbids)
    found: set[Where] = set()
    seen = set(search.starts())
    waiting = deque(seen)
    while waiting:
        node = waiting.popleft()
        if search.hazard(node):
            found.add(_where(drive, search.states[node[0]]))
        for _, after in search.successors(node):
            if after not in seen:
                seen.add(after)
                waiting.append(after)
        if len(seen) > most_states:
            return None
    return frozenset(found)


def _where(drive: Drive, state: State) -> Where:
    place = state.place
    if isinstance(place, Rest):
        return Where(place.mode, None)
    return Where(place.origin, place.line + len(drive.moves) if place.trip else place.line)
