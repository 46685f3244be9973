"""What the prover hands out of the screen: for every point the least times since either command last went away.

A potential is a lower bound of that time, counted to the last beginning of the firmware's clock x; x itself then adds
to it. Where x began before the command went away, only UNKNOWN is said. Where a carrier's dead time may bound the time
to the other's coming, potentials are kept apart by the cell of which the command went away.
"""

from heapq import heappop, heappush

from seqcheck.proving.certify import COMMANDS, Data, stand, word
from seqcheck.proving.screen import Arc, Map, Pairing, Places, Point
from seqcheck.proving.views import View
from seqcheck.writing import carrier_of
from seqcheck.zones import INFINITE

UNKNOWN = -1

Since = dict[Point, dict[str, int]]
"""By point, and by the cell that the command went away from: the potential."""
Steps = dict[Point, tuple[tuple[Arc | None, Point, bool], ...]]
"""By point: what can come next, as the screen has it."""


def stands(here: Map) -> list[Data]:
    """The states of a map, in their order."""
    return [stand(here.firmware, state) for state in here.states]


def potentials(view: View, here: Map, places: Places) -> Data:
    """The proof that two literals never meet, for `evidence.certificate`; states are named by their number."""
    pairing = Pairing(view, here, *places)
    points = pairing.points()
    assert points is not None, "the screen settled it"
    steps = {point: tuple(pairing.steps(point)) for point in points}
    one, other = _since(pairing, steps, 0), _since(pairing, steps, 1)
    return {
        "pair": list(places),
        "points": [
            [state, *(COMMANDS[command] for command in pair), one[state, pair], other[state, pair]]
            for state, pair in sorted(points)
        ],
    }


def _since(pairing: Pairing, steps: Steps, leaving: int) -> Since:
    """The potentials since one of the literals went away; Dijkstra's algorithm, from all that its going leads to."""
    found: Since = {point: {} for point in steps}
    queue: list[tuple[int, Point, str]] = []

    def reached(point: Point, cell: str, time: int) -> None:
        if not pairing.wanted(point[1], leaving) and time < found[point].get(cell, INFINITE):
            found[point][cell] = time
            heappush(queue, (time, point, cell))

    for point, following in steps.items():
        if pairing.wanted(point[1], leaving):
            cell = _cell(pairing, pairing.cells(point[0])[leaving])
            for _, target, restarts in following:
                reached(target, cell, 0 if restarts else UNKNOWN)
    while queue:
        time, point, cell = heappop(queue)
        if time > found[point][cell]:
            continue
        for arc, target, restarts in steps[point]:
            later = time if arc is None or not restarts else time + arc.least if time != UNKNOWN else 0
            reached(target, cell, later)
    return found


def _cell(pairing: Pairing, cell: int) -> str:
    """A cell on a carrier with a dead time, in words; all others are one."""
    number = carrier_of(cell)
    return word(pairing.here.firmware.writing, cell) if number >= 0 and pairing.dead[number] else ""
