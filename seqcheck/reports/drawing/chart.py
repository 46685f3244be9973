"""The mode graph as a report sees it: modes, what each does, the ways between them, and the path of an unsafe run."""

from collections.abc import Sequence

from seqcheck.drive import RESET, After, AtOnce, CurrentInto, CurrentOut, Drive, Known, Move, Trip, When, fact_words
from seqcheck.effects import Row
from seqcheck.quantities import PICOSECONDS
from seqcheck.records import dataclass
from seqcheck.reports.acts import begun_by
from seqcheck.reports.pieces import listed
from seqcheck.verdict import Act, Unsafe

MOST = 60
"""With more modes than this a picture shows those of the unsafe path and their neighbours."""
_MANY = 3  # from so many modes a way is drawn once, as from any


@dataclass(frozen=True, slots=True)
class Way:
    """One way from a mode to another: the move or trip, and whether the times of the file ever let it begin there."""

    run: Move | Trip
    source: str
    possible: bool


@dataclass(frozen=True, slots=True)
class Graph:
    """The modes of a drive, the ways between them, what is reached from the start and what each row does."""

    drive: Drive
    modes: tuple[str, ...]
    ways: tuple[Way, ...]
    reached: frozenset[str]
    rows: dict[str, Row]


@dataclass(frozen=True, slots=True)
class Arrow:
    """What is drawn as one arrow: ways of one kind (moves or trips) with the same ends.

    `source` is a mode, or for several of them what they are together, in parentheses, and the target. `counts` are the
    numbers of the steps of the unsafe path that go this way.
    """

    source: str
    target: str
    trip: bool
    runs: tuple[Move | Trip, ...]
    possible: bool
    counts: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class Chart:
    """What is drawn: modes, the groups of modes that stand for themselves, arrows, and how many modes are left out."""

    modes: tuple[str, ...]
    groups: tuple[str, ...]
    arrows: tuple[Arrow, ...]
    left_out: int
    hit: str | None  # the mode in which the unsafe path ends


@dataclass(frozen=True, slots=True)
class Taken:
    """A step of the unsafe path: the move or trip, and the mode that it left."""

    run: Move | Trip
    source: str


def path(verdict: Unsafe, drive: Drive) -> tuple[list[Taken], str | None]:
    """The moves and trips of a run up to its overlap, and the mode in which it comes at rest, None where in passing."""
    found, mode, rest = [], drive.start, True
    for event in verdict.trace.events:
        if event.time > verdict.trace.overlap_from:
            break
        if event.act is Act.BEGINS and (run := begun_by(drive, event)) is not None:
            found.append(Taken(run, mode))
            rest = False
        elif event.act is Act.ENTERS:
            mode, rest = event.name, True
    return found, mode if rest else None


def chart(graph: Graph, verdict: Unsafe | None) -> Chart:
    """What is to be drawn of a mode graph; with too many modes a part of it."""
    steps, hit = path(verdict, graph.drive) if verdict else ([], None)
    modes = _drawn(graph, steps)
    arrows = _arrows(graph, modes)
    arrows = [_counted(arrow, arrows, steps) for arrow in arrows]
    groups = tuple(dict.fromkeys(one.source for one in arrows if one.source.startswith("(")))
    return Chart(modes, groups, tuple(arrows), len(graph.modes) - len(modes), hit)


def _drawn(graph: Graph, steps: Sequence[Taken]) -> tuple[str, ...]:
    """All modes, the start first; with too many those of the path (else the start) and their neighbours, up to MOST."""
    start = graph.drive.start
    ordered = (start, *(mode for mode in graph.modes if mode != start))
    if len(ordered) <= MOST:
        return ordered
    near = dict.fromkeys((start, *(name for step in steps for name in (step.source, step.run.target))))
    kept = dict(near)
    for way in graph.ways:
        if way.source in near or way.run.target in near:
            kept |= dict.fromkeys((way.source, way.run.target))
    shown = set(list(kept)[:MOST])
    return tuple(mode for mode in ordered if mode in shown)


def _arrows(graph: Graph, modes: tuple[str, ...]) -> list[Arrow]:
    """Moves first, so that they give the picture its direction; each kind in the order of the file."""
    shown = frozenset(modes)
    own: dict[tuple[str, str, bool], dict[Move | Trip, bool]] = {}
    runs_of_all: list[Move | Trip] = [*graph.drive.moves, *graph.drive.trips]
    for run in runs_of_all:
        ways = [way for way in graph.ways if way.run is run and way.source in shown and run.target in shown]
        sources = [way.source for way in ways]
        group = _group(sources, run.target, graph, modes)
        for way in ways:
            key = (group or way.source, run.target, isinstance(run, Trip))
            runs = own.setdefault(key, {})
            runs[run] = runs.get(run, False) or way.possible
    ordered = sorted(own, key=lambda key: key[2])
    return [Arrow(*key, tuple(own[key]), any(own[key].values())) for key in ordered]


def _group(sources: Sequence[str], target: str, graph: Graph, modes: tuple[str, ...]) -> str:
    """What many modes are together, with the target: any, or any but one or two; else empty. Reset need not be one."""
    if len(sources) < _MANY:
        return ""
    missing = [mode for mode in modes if mode not in sources and mode not in (target, RESET)]
    if len(missing) > 2 or len(missing) * 2 > len(sources):
        return ""
    return f"({f'any but {listed(missing)}' if missing else 'any'}) {target}"


def called(source: str) -> str:
    """What is written where arrows begin: a mode, or what a group of modes is together."""
    return source[1:].partition(")")[0] if source.startswith("(") else source


def _counted(arrow: Arrow, arrows: Sequence[Arrow], steps: Sequence[Taken]) -> Arrow:
    counts = tuple(number for number, step in enumerate(steps, 1) if _arrow_of(step, arrows) is arrow)
    return Arrow(arrow.source, arrow.target, arrow.trip, arrow.runs, arrow.possible, counts)


def _arrow_of(step: Taken, arrows: Sequence[Arrow]) -> Arrow | None:
    """The arrow of a step; a trip that comes during a move may have none from the mode that was left."""
    own = [arrow for arrow in arrows if step.run in arrow.runs]
    return next((one for one in own if one.source == step.source), own[0] if own else None)


# Words at arrows


def labels(run: Move | Trip) -> tuple[str, str]:
    """What begins a move or trip, and its times; times with the clock's tolerance, rounded outwards to be short."""
    if isinstance(run, Trip):
        times = "at once" if run.at_once else "" if run.within is None else f"within {_most(run.within)}"
        return run.name, _joined(times, _known(run.known))
    rest = [_known(run.known), "unbroken" if run.unbroken else ""]
    if isinstance(run.trigger, AtOnce):
        return "at once", _joined(*rest)
    if isinstance(run.trigger, After):
        low, high = run.trigger.span.lo, run.trigger.span.hi
        until = f" to {_most(high)}" if high is not None and high != low else ""
        return f"after {_least(low)}{until}", _joined(*rest)
    return run.trigger.event, _joined(_window(run.trigger), *rest)


def _window(trigger: When) -> str:
    low = f"from {_least(trigger.earliest)}" if trigger.earliest else ""
    return f"{low} to {_most(trigger.latest)}".strip() if trigger.latest is not None else low


def _joined(*texts: str) -> str:
    return ", ".join(text for text in texts if text)


def _known(known: Sequence[Known]) -> str:
    return " and ".join(_fact(one) for one in known)


def _fact(fact: Known) -> str:
    if isinstance(fact, CurrentOut | CurrentInto):
        return f"I {'out of' if isinstance(fact, CurrentOut) else 'into'} {fact.node}"
    return " ".join(fact_words(fact))


def _least(time: int) -> str:
    return _short(time, False)


def _most(time: int) -> str:
    return _short(time, True)


def _short(time: int, up: bool) -> str:
    """A time in four digits, rounded down or up."""
    step = 10 ** max(0, len(str(time)) - 4)
    rounded = (-(-time // step) if up else time // step) * step
    unit = next((one for one in ("s", "ms", "us", "ns") if rounded >= PICOSECONDS[one]), "ps")
    whole, rest = divmod(rounded, int(PICOSECONDS[unit]))
    digits = str(int(PICOSECONDS[unit]) + rest)[1:].rstrip("0") if rest else ""
    return f"{whole}{'.' if digits else ''}{digits} {unit}"
