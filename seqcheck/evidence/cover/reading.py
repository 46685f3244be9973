"""A cover out of a certificate's data; what is not as it should be is refused."""

from seqcheck.evidence.certificate import Fields
from seqcheck.evidence.cover.check import Bounds, Entry
from seqcheck.evidence.cover.scope import Scope
from seqcheck.evidence.cover.stand import Group, Stand
from seqcheck.evidence.cover.wires import Point
from seqcheck.evidence.cover.writes import Cells, Held


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
    return {"x", "y", *(f"{word} {place}" for word, count in counted.items() for place in range(count))}


def _zone(entry: Fields, value: object, clocks: int) -> Bounds:
    found = []
    for one in entry.listed(value, "zones"):
        upper, lower, most = [entry.whole(part, "zones") for part in entry.listed(one, "zones", 3)]
        if not (0 <= upper <= clocks and 0 <= lower <= clocks):
            raise entry.wrong("zones")
        found.append((upper, lower, most))
    return tuple(found)


def _point(state: Fields, scope: Scope) -> Point:
    point = Point(
        _stand(state),
        state.texts("carriers"),
        state.texts("pins"),
        state.texts("guards"),
        state.texts("literals"),
    )
    wanted = (len(scope.carriers), len(scope.switches), len(scope.guards), len(scope.delays))
    if tuple(map(len, point[1:])) != wanted:
        raise state.wrong("carriers, pins, guards or literals")
    return point


def _stand(state: Fields) -> Stand:
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
