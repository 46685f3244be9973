"""The graph of modes: what cannot be reached, what has no way back, what is ambiguous, what can never begin.

Its edges are the moves and trips of the file, each from every mode that it leaves, without the moves that the times of
the file keep from ever beginning. The modes that it reaches are exactly those that some run enters: time in a mode
counts from its entry, so that whether a move can begin depends on the mode alone, and no trip has to come.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import networkx as nx

from seqcheck.drive import RESET, Above, AtOnce, CurrentInto, CurrentOut, Drive, Known, Move, Trip, When
from seqcheck.firmware import Firmware
from seqcheck.quantities import shown
from seqcheck.verdict import Check, Finding


@dataclass(frozen=True, slots=True)
class _Opening:
    """When a move can begin in one of its modes, in ps after entry.

    `latest` is its own bound, `stay` that of the mode (None: no bound), which `ender`, a move of that mode, puts on it.
    """

    move: Move
    mode: str
    soonest: int
    latest: int | None
    stay: int | None
    ender: Move | None

    @property
    def last(self) -> int | None:
        """The last moment at which the move may begin; None without a bound."""
        return min((one for one in (self.latest, self.stay) if one is not None), default=None)

    @property
    def possible(self) -> bool:
        """Whether the move can begin at all."""
        return self.last is None or self.soonest <= self.last


@dataclass(frozen=True, slots=True)
class _Way:
    """One way from a mode to another: a move or a trip, and whether it can ever begin there."""

    run: Move | Trip
    source: str
    possible: bool


class ModeGraph:
    """The modes of a drive and the ways between them. `reset` is a mode only where it is the start or a target."""

    def __init__(self, drive: Drive) -> None:
        self.drive = drive
        entered = {drive.start, *(move.target for move in drive.moves), *(trip.target for trip in drive.trips)}
        self.modes = tuple(mode for mode in drive.modes if mode != RESET or mode in entered)
        self.openings = tuple(_openings(drive, self.modes))
        self.ways = tuple(self._ways())
        graph: nx.DiGraph[str] = nx.DiGraph()
        graph.add_nodes_from(self.modes)
        graph.add_edges_from((way.source, way.run.target) for way in self.ways if way.possible)
        self.graph = graph
        self.reached = frozenset(nx.descendants(graph, drive.start)) | {drive.start}
        self.leads_back = frozenset(nx.ancestors(graph, drive.start)) | {drive.start}

    def _ways(self) -> Iterator[_Way]:
        for one in self.openings:
            yield _Way(one.move, one.mode, one.possible)
        for trip in self.drive.trips:
            yield from (_Way(trip, mode, True) for mode in self.modes if mode in trip.resting)


def _openings(drive: Drive, modes: tuple[str, ...]) -> Iterator[_Opening]:
    firmware = Firmware(drive, frozenset(), frozenset(), True)
    for mode in modes:
        moves = [(move, *firmware.window(move)) for move in drive.moves if mode in move.sources]
        bounds = [(bound, move) for move, _, _, bound in moves if bound is not None]
        stay, ender = min(bounds, key=lambda pair: pair[0], default=(None, None))
        yield from (_Opening(move, mode, soonest, latest, stay, ender) for move, soonest, latest, _ in moves)


def graph_findings(drive: Drive) -> tuple[Finding, ...]:
    """All findings about the graph of modes, one for each mode (and event, or move) that is concerned."""
    graph = ModeGraph(drive)
    return (*_unreachable(graph), *_without_way_back(graph), *_ambiguous(graph), *_stalled(graph))


def alike_throughout(outer: Drive, inner: Drive) -> bool:
    """Whether drives that differ in times alone surely all have the same findings about their graphs.

    `outer` has of all of them the widest bounds of every time, `inner` the narrowest, which may run backwards. That the
    span of a timed move does not run backwards is left to the reader, who knows both its ends.
    """
    wide, narrow = ModeGraph(outer).openings, ModeGraph(inner).openings
    firmware = Firmware(inner, frozenset(), frozenset(), True)
    bounds = [(one, bound) for one in narrow if (bound := firmware.window(one.move)[2]) is not None]
    for one, tight in zip(wide, narrow, strict=True):
        others = [bound for other, bound in bounds if other.mode == tight.mode and other is not tight]
        if isinstance(tight.move.trigger, When) and tight.latest is not None:
            others.append(tight.latest)
        if one.possible and any(tight.soonest > bound for bound in others):
            return False
    pairs = [(at, other) for at, one in enumerate(wide) for other in range(at) if wide[other].mode == one.mode]
    return all(_alike(narrow[other], narrow[at]) for at, other in pairs if _alike(wide[other], wide[at]))


# Modes that no run enters


def _unreachable(graph: ModeGraph) -> Iterator[Finding]:
    start = graph.drive.start
    for mode in graph.modes:
        if mode in graph.reached:
            continue
        ways = [way for way in graph.ways if way.run.target == mode and way.source != mode]
        text, way_out = f"no move and no trip leads to mode '{mode}'", "add one that does, or take its row out"
        if ways:
            runs = list(dict.fromkeys(way.run for way in ways))
            text = f"mode '{mode}' cannot be reached from the start '{start}': " + "; ".join(
                _no_help(run, [way for way in ways if way.run is run]) for run in runs
            )
            way_out = "add a move or a trip that leads there from a mode that can be reached"
        yield Finding(Check.UNREACHABLE, graph.drive.modes[mode].place, text, way_out, (mode,))


def _no_help(run: Move | Trip, ways: list[_Way]) -> str:
    """Why none of the ways of one move or trip helps."""
    dead = [way.source for way in ways if not way.possible]
    far = [way.source for way in ways if way.possible]
    said = [f"can never begin in {_quoted(dead)}"] if dead else []
    said += [f"leaves {_quoted(far)}, which cannot be reached either"] if far else []
    return f"{_called(run)} {' and '.join(said)}"


def _called(run: Move | Trip) -> str:
    what = f"trip '{run.name}'" if isinstance(run, Trip) else "the move"
    return f"{what} in line {run.place.line}"


def _quoted(names: list[str]) -> str:
    quoted = [f"'{name}'" for name in names]
    return quoted[0] if len(quoted) == 1 else f"{', '.join(quoted[:-1])} and {quoted[-1]}"


# Modes that the start cannot follow


def _without_way_back(graph: ModeGraph) -> Iterator[Finding]:
    drive, start = graph.drive, graph.drive.start
    if start == RESET and graph.leads_back == {RESET} and len(graph.modes) > 1:
        dead = _dead(graph, set(graph.modes) - {RESET})
        text = f"no move and no trip leads back to the start 'reset'{dead}"
        way_out = "add a trip for what resets the controller, such as 'watchdog from any -> reset'"
        yield Finding(Check.NO_WAY_BACK, drive.modes[RESET].place, text, way_out, (RESET,))
        return
    for mode in graph.modes:
        if mode in graph.leads_back:
            continue
        after = nx.descendants(graph.graph, mode) - {mode}
        only = f"only {_quoted([one for one in graph.modes if one in after])} can follow it" if after else ""
        said = only or f"{'nothing else' if graph.graph.has_edge(mode, mode) else 'nothing'} can follow it"
        text = f"mode '{mode}' has no way back to the start '{start}': {said}{_dead(graph, {mode, *after})}"
        way_out = f"add a move or a trip that leads back; if it is meant so, 'waive no-way-back for {mode}' says why"
        yield Finding(Check.NO_WAY_BACK, drive.modes[mode].place, text, way_out, (mode,))


def _dead(graph: ModeGraph, inside: set[str]) -> str:
    """The moves that would lead out of a set of modes if they could ever begin."""
    ways = [way for way in graph.ways if way.source in inside and way.run.target not in inside]
    return "".join(f"; {_no_help(way.run, [way])}" for way in ways)


# Events that do not say which move is meant


def _ambiguous(graph: ModeGraph) -> Iterator[Finding]:
    """A move is told of with all earlier ones of its mode that the same event may begin at the same moment."""
    for number, one in enumerate(graph.openings):
        earlier = [other for other in graph.openings[:number] if other.mode == one.mode and _alike(other, one)]
        if not earlier:
            continue
        assert isinstance(one.move.trigger, When)
        event = one.move.trigger.event
        others = [f"to '{other.move.target}' in line {other.move.place.line}" for other in earlier]
        text = f"in mode '{one.mode}' the event '{event}' may begin this move to '{one.move.target}' as well as "
        text += " and ".join(["the one " + others[0], *others[1:]]) + ", and nothing says which"
        way_out = "give each an event of its own, times that never meet, or 'with' what tells them apart"
        yield Finding(Check.AMBIGUOUS, one.move.place, text, way_out, (one.mode, event))


def _alike(one: _Opening, other: _Opening) -> bool:
    """Whether one event can begin either of two moves of one mode at one moment."""
    first, second = one.move.trigger, other.move.trigger
    if not isinstance(first, When) or not isinstance(second, When) or first.event != second.event:
        return False
    ends = [end for end in (one.last, other.last) if end is not None]
    meets = not ends or max(one.soonest, other.soonest) <= min(ends)
    return meets and not _contradicts((*one.move.known, *other.move.known))


def _contradicts(known: tuple[Known, ...]) -> bool:
    """Whether not all of this can hold together: a current both ways, or a source above itself."""
    out = {one.node for one in known if isinstance(one, CurrentOut)}
    into = {one.node for one in known if isinstance(one, CurrentInto)}
    above: nx.DiGraph[str] = nx.DiGraph([(one.upper, one.lower) for one in known if isinstance(one, Above)])
    return bool(out & into) or not nx.is_directed_acyclic_graph(above)


# Moves that can never begin


def _stalled(graph: ModeGraph) -> Iterator[Finding]:
    for one in graph.openings:
        if one.possible:
            continue
        event = (one.move.trigger.event,) if isinstance(one.move.trigger, When) else ()
        on = f" on '{event[0]}'" if event else ""
        text = f"this move to '{one.move.target}'{on} can never begin in mode '{one.mode}': {_too_late(one)}"
        listed = len(one.move.sources) > 1
        way_out = f"change one of the two times, or {f'leave {one.mode!r} out here' if listed else 'take the move out'}"
        yield Finding(Check.STALLED, one.move.place, text, way_out, (one.mode, *event))


def _too_late(one: _Opening) -> str:
    if one.ender is None or (one.latest is not None and one.latest < one.soonest):
        assert one.latest is not None
        return f"the soonest is {shown(one.soonest)} after entry (loop), the latest {shown(one.latest)}"
    trigger = one.move.trigger
    looped = isinstance(trigger, When) and trigger.earliest < one.soonest
    soonest = f"the soonest is {shown(one.soonest)} after entry{' (loop)' if looped else ''}"
    assert one.stay is not None
    line = f"the move to '{one.ender.target}' in line {one.ender.place.line}"
    if isinstance(one.ender.trigger, AtOnce):
        return f"{soonest}, but {line} begins at once"
    return f"{soonest}, but {line} has begun {shown(one.stay)} after entry at the latest"
