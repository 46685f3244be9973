"""`seqcheck compare`: both files proven and held against each other."""

from collections import Counter
from collections.abc import Callable, Iterator

from seqcheck.changes import Comparison, Margin, Reach, Told, Turn, Turned, Unmeasured, Way, differences
from seqcheck.checking import check
from seqcheck.drive import AtOnce, Drive, Move, Trip, When
from seqcheck.evidence.digest import digest
from seqcheck.hazards import Hazard, Literal
from seqcheck.modegraph import ModeGraph
from seqcheck.proving.prove import Prover
from seqcheck.proving.search import LimitReached
from seqcheck.reports.waived import reason
from seqcheck.verdict import Check, Outcome, Safe, Unsafe, Verdict

Observer = Callable[[int], None]

MOST_ZONES = 6_000
"""Zones for one gap: a margin must not cost more than the proof that there is one."""


def compare(old: Drive, new: Drive, names: tuple[str, str], observer: Observer) -> Comparison:
    """What the change from one drive to another comes to; `names` are those of their files.

    `observer` may end a proof by raising LimitReached; the hazard is then undecided. Raises Problems for what cannot be
    proven, Fault if the program is at fault.
    """
    same = digest(old) == digest(new)
    before = check(old, names[0], frozenset(), observer)
    after = check(new, names[1], frozenset(), observer)
    verdicts = tuple(_turned(before, after))
    gained, lost = _reach(old, new)
    gaps = [] if same else list(_gaps(before, after, verdicts, observer))
    return Comparison(
        before,
        after,
        same,
        differences(old, new),
        gained,
        lost,
        tuple(sorted(verdicts, key=lambda one: list(Turn).index(one.turn))),
        tuple(_only(after, before)),
        tuple(_only(before, after)),
        tuple(one for one in gaps if isinstance(one, Margin) and one.old != one.new),
        tuple(one for one in gaps if isinstance(one, Unmeasured)),
    )


# Verdicts


Key = tuple[frozenset[Literal], bool]


def _key(hazard: Hazard) -> Key:
    return frozenset(hazard.literals), bool(hazard.currents)


def _turned(before: Outcome, after: Outcome) -> Iterator[Turned]:
    """Every hazard of the one or the other file, matched by its literals."""
    old = {_key(one.hazard): one for one in before.verdicts}
    new = {_key(one.hazard): one for one in after.verdicts}
    for key in dict.fromkeys((*new, *old)):
        was, now = old.get(key), new.get(key)
        known = now or was
        assert known is not None
        yield Turned(known.hazard, was, now, _waived(before, was), _waived(after, now))


def _waived(outcome: Outcome, verdict: Verdict | None) -> str | None:
    return reason(outcome.drive, verdict) if isinstance(verdict, Unsafe) else None


# Findings


def _only(one: Outcome, other: Outcome) -> Iterator[Told]:
    """Findings of one file that the other has not, or of which only one of the two has a waiver."""
    theirs = Counter(map(_named, _told(other)))
    seen: Counter[tuple[Check, object, bool]] = Counter()
    for told in _told(one):
        name = _named(told)
        seen[name] += 1
        if seen[name] > theirs[name]:
            yield told


def _told(outcome: Outcome) -> Iterator[Told]:
    yield from ((one, reason(outcome.drive, one)) for one in outcome.findings)


def _named(told: Told) -> tuple[Check, object, bool]:
    """What a finding is known by from one file to the next: its check and what it names, and whether it counts."""
    finding, waived = told
    return finding.check, finding.names or finding.text, waived is None


# What can be entered


def _reach(old: Drive, new: Drive) -> tuple[Reach, Reach]:
    """What the new file gains, and what it loses: modes that some run enters, and ways between them."""
    before, after = ModeGraph(old), ModeGraph(new)
    ways, later = _ways(before), _ways(after)
    gained = Reach(
        tuple(mode for mode in after.modes if mode in after.reached - before.reached),
        tuple(Way(*pair, by) for pair, by in later.items() if pair not in ways),
    )
    lost = Reach(
        tuple(mode for mode in before.modes if mode in before.reached - after.reached),
        tuple(Way(*pair, by) for pair, by in ways.items() if pair not in later),
    )
    return gained, lost


def _ways(graph: ModeGraph) -> dict[tuple[str, str], tuple[str, ...]]:
    """The ways that some run can take, and by what."""
    found: dict[tuple[str, str], tuple[str, ...]] = {}
    for way in graph.ways:
        if way.possible and way.source in graph.reached:
            pair = way.source, way.run.target
            found[pair] = (*found.get(pair, ()), _by(way.run))
    return found


def _by(run: Move | Trip) -> str:
    if isinstance(run, Trip):
        return f"trip {run.name}"
    if isinstance(run.trigger, When):
        return f"on {run.trigger.event}"
    return "at once" if isinstance(run.trigger, AtOnce) else "after a time"


# Margins


def _gaps(
    before: Outcome, after: Outcome, verdicts: tuple[Turned, ...], observer: Observer
) -> Iterator[Margin | Unmeasured]:
    """The gaps of every hazard that both files prove, in either direction; those that a limit leaves out by name."""
    old, new = Prover(before.drive), Prover(after.drive)
    for one in verdicts:
        if not isinstance(one.old, Safe) or not isinstance(one.new, Safe) or len(one.hazard.literals) < 2:
            continue
        for literal in one.new.hazard.literals:
            try:
                was = _gap(old, one.old.hazard, literal, observer)
                now = _gap(new, one.new.hazard, literal, observer)
            except LimitReached as limit:
                yield Unmeasured(one.new.hazard, literal, str(limit))
                continue
            yield Margin(one.new.hazard, literal, was, now)


def _gap(prover: Prover, hazard: Hazard, after: Literal, observer: Observer) -> int | None:
    """How soon after one literal the others can follow (ps); None: never. Raises LimitReached."""

    def within(count: int) -> None:
        observer(count)
        if count > MOST_ZONES:
            raise LimitReached(f"{MOST_ZONES} zones")

    return prover.gap(hazard, hazard.literals.index(after), within).time
