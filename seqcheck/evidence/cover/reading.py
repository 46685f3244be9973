"""Covers and potentials out of a certificate's data; what is not as it should be is refused."""

from seqcheck.evidence.certificate import Fields
from seqcheck.evidence.cover.apart import Said
from seqcheck.evidence.cover.check import Bounds, Entry
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import Group, Stand
from seqcheck.evidence.cover.watch import GAP, SINCE
from seqcheck.evidence.cover.wires import Point
from seqcheck.evidence.cover.writes import Cells, Held
from seqcheck.hazards import Nearing


def entries(cover: Fields, scope: Scope) -> list[Entry]:
    """The entries of a cover for `scope`; NoEvidence where they are malformed or look at something else."""
    if cover.texts("switches") != scope.switches or cover.texts("carriers") != scope.carriers:
        raise cover.wrong("switches")
    names = _names(scope)
    return [_entry(one, scope, names) for one in cover.objects("entries")]


def _entry(entry: Fields, scope: Scope, names: set[str]) -> Entry:
    clocks = entry.texts("clocks")
    if len(set(clocks)) != len(clocks) or not names.issuperset(clocks):
        raise entry.wrong("clocks")
    zones = tuple(_zone(entry, one, len(clocks)) for one in entry.rows("zones"))
    return Entry(_point(entry.field("state"), scope), clocks, zones)


def _names(scope: Scope) -> set[str]:
    counted = {
        "carrier": len(scope.carriers),
        "pin": len(scope.switches),
        "guard": len(scope.guards),
        "in": len(scope.delays),
        "out": len(scope.delays),
        "held": len(scope.drive.columns),
    }
    return {"x", "y", SINCE, GAP, *(f"{word} {place}" for word, count in counted.items() for place in range(count))}


def _zone(entry: Fields, value: object, clocks: int) -> Bounds:
    return tuple(_bound(entry, one, clocks) for one in entry.listed(value, "zones"))


def _bound(entry: Fields, value: object, clocks: int) -> tuple[int, int, int]:
    upper, lower, most = entry.listed(value, "zones", 3)
    if type(upper) is not int or type(lower) is not int or not (0 <= upper <= clocks and 0 <= lower <= clocks):
        raise entry.wrong("zones")
    return upper, lower, entry.whole(most, "zones")


def _point(state: Fields, scope: Scope) -> Point:
    point = Point(
        stand(state),
        state.texts("carriers"),
        state.texts("pins"),
        state.texts("guards"),
        state.texts("literals"),
    )
    watched = len(scope.delays) + isinstance(scope.hazard.asks, Nearing)
    wanted = (len(scope.carriers), len(scope.switches), len(scope.guards), watched)
    if tuple(map(len, point[1:])) != wanted:
        raise state.wrong("carriers, pins, guards or literals")
    return point


def stand(state: Fields) -> Stand:
    """Where the firmware stands; NoEvidence where it is malformed."""
    soonest, latest = state.listed(state.of("next"), "next", 2)
    held = []
    for place, one in enumerate(state.rows("held")):
        carrier, switches = state.listed(one, "held", 2)
        if not isinstance(carrier, str):
            raise state.wrong("held")
        held.append(Held(carrier, state.strings(switches, "held"), place))
    return Stand(
        state.text("mode"),
        state.number("run"),
        state.number("item"),
        tuple(_group(state, one) for one in state.rows("left")),
        state.whole(soonest, "next"),
        None if latest is None else state.whole(latest, "next"),
        state.number("hand"),
        Cells(state.texts("written"), state.texts("effective"), tuple(held)),
    )


def _group(state: Fields, value: object) -> Group:
    pairs = [state.strings(one, "left") for one in state.listed(value, "left")]
    if not all(len(pair) == 2 for pair in pairs):
        raise state.wrong("left")
    return tuple((switch, cell) for switch, cell in pairs)


def points(potentials: Fields, literals: int) -> tuple[tuple[int, int], Said]:
    """The places of the two literals that potentials are about, and what is said of each point."""
    first, second = potentials.listed(potentials.of("pair"), "pair", 2)
    if type(first) is not int or type(second) is not int or not 0 <= first < second < literals:
        raise potentials.wrong("pair")
    said: Said = {}
    for point in potentials.rows("points"):
        number, one, other, since, since_other = potentials.listed(point, "points", 5)
        if not isinstance(one, str) or not isinstance(other, str):
            raise potentials.wrong("points")
        both = _times(potentials, since), _times(potentials, since_other)
        said.setdefault(potentials.whole(number, "points"), {})[one, other] = both
    return (first, second), said


def _times(potentials: Fields, value: object) -> dict[str, int]:
    if not isinstance(value, dict):
        raise potentials.wrong("points")
    return {cell: potentials.whole(time, "points") for cell, time in value.items()}
