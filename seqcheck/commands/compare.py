"""`seqcheck compare`: both files proven and held against each other."""

from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import replace

from seqcheck.changes import Comparison, Moved, Reach, Told, Turn, Turned, Unmeasured, Way, differences
from seqcheck.checking import check
from seqcheck.drive import AtOnce, Drive, Move, Trip, When
from seqcheck.evidence.digest import digest
from seqcheck.exits import FOUND, PROVEN, UNDECIDED
from seqcheck.hazards import Length
from seqcheck.language import read
from seqcheck.margins import margin
from seqcheck.messages import Problem, Problems
from seqcheck.modegraph import ModeGraph
from seqcheck.proving.prove import Prover
from seqcheck.reports import comparison, screen
from seqcheck.reports.waived import reason
from seqcheck.verdict import Check, Outcome, Safe, Unsafe, Verdict

Observer = Callable[[int], None]
Fetch = Callable[[str], str]


def run(
    files: tuple[str, str], texts: tuple[Fetch, Fetch], observer: Observer, form: str, painted: bool
) -> tuple[str, int]:
    """The answer as a text and the exit code; `texts` gives that of a file named in the call, and of one in a `use`.

    Raises Problems with those of both files.
    """
    text_of, fetch = texts
    drives: list[Drive] = []
    mistakes: list[Problem] = []
    for file in files:
        try:
            drives.append(read(text_of(file), file, fetch))
        except Problems as problems:
            mistakes += problems.found
    if mistakes:
        raise Problems(mistakes)
    found = compare(drives[0], drives[1], files, observer)
    report = comparison.report(found)
    text = comparison.lines(found) if form == "lines" else (screen.coloured if painted else screen.plain)(report)
    return text, FOUND if found.worse else UNDECIDED if found.undecided else PROVEN


def compare(old: Drive, new: Drive, names: tuple[str, str], observer: Observer) -> Comparison:
    """What the change from one drive to another comes to; `names` are those of their files.

    `observer` may end a proof by raising LimitReached; the hazard is then undecided, the margin not measured. Raises
    Problems for what cannot be proven, Fault if the program is at fault.
    """
    same = digest(old) == digest(new)
    before = check(old, names[0], frozenset(), observer)
    after = check(new, names[1], frozenset(), observer)
    verdicts = tuple(_turned(before, after))
    gained, lost = _reach(old, new)
    margins = [] if same else list(_margins(before, after, verdicts, observer))
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
        tuple(one for one in margins if isinstance(one, Moved) and one.old.slack != one.new.slack),
        tuple(one for one in margins if isinstance(one, Unmeasured)),
    )


# Verdicts


Key = tuple[object, ...]


def _turned(before: Outcome, after: Outcome) -> Iterator[Turned]:
    """Every hazard of the one or the other file, matched by its literals."""
    old, new = _keyed(before), _keyed(after)
    for key in dict.fromkeys((*new, *old)):
        was, now = old.get(key), new.get(key)
        known = now or was
        assert known is not None
        yield Turned(known.hazard, was, now, _waived(before, was), _waived(after, now))


def _keyed(outcome: Outcome) -> dict[Key, Verdict]:
    """The verdicts by what they are about: a hazard, or a margin of one that a rule asks for."""
    found: dict[Key, Verdict] = {}
    for one in outcome.verdicts:
        hazard = one.hazard
        asks = hazard.asks
        asks = replace(asks, limit=0) if isinstance(asks, Length) else asks  # what a rule asks, whatever its limit
        key: Key = (frozenset(hazard.literals), bool(hazard.currents), bool(hazard.joins), asks)
        if isinstance(one, Unsafe) and one.check is Check.THIN_MARGIN:
            key = (*key, one.after)
        while key in found:
            key = (*key, "again")
        found[key] = one
    return found


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


def _margins(
    before: Outcome, after: Outcome, verdicts: tuple[Turned, ...], observer: Observer
) -> Iterator[Moved | Unmeasured]:
    """The margins of every hazard that both files prove, in either direction; those that a limit leaves out by name."""
    old, new = Prover(before.drive), Prover(after.drive)
    for one in verdicts:
        if not isinstance(one.old, Safe) or not isinstance(one.new, Safe):
            continue
        if one.hazard.asks is not None or len(one.hazard.literals) < 2:
            continue
        for literal in one.new.hazard.literals:
            was = margin(old, one.old.hazard, one.old.hazard.literals.index(literal), observer)
            now = margin(new, one.new.hazard, one.new.hazard.literals.index(literal), observer)
            if was.exact and now.exact:
                yield Moved(was, now)
            else:
                yield Unmeasured(one.new.hazard, literal, now.limit or was.limit)
