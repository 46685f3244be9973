"""The dead-time budget of a drive: the margin of every safe hazard after each of its literals.

The margin is the greatest time by which each end of the literal's possibility could come later without its meeting the
others. It is the least gap that any run leaves, so each is shown by the run that leaves it.
"""

from collections.abc import Callable, Iterator, Sequence

from seqcheck.circuit import shorting_sets
from seqcheck.confirming import Fault, confirmed, named, place_of
from seqcheck.drive import Drive, MarginRule
from seqcheck.hazards import Hazard, delays
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.search import LimitReached
from seqcheck.proving.tracing import Infeasible
from seqcheck.sizing import cure_of_margin
from seqcheck.verdict import Budget, Check, Margin, Safe, Undecided, Unsafe, Verdict

Observer = Callable[[int], None]

MOST_ZONES = 6_000
"""Zones for one margin; then it is said to be at least what was known."""


def budget(drive: Drive, file: str, observer: Observer, known: Sequence[Verdict] = ()) -> Budget:
    """The margins of all safe shorts of a drive, least first, and what has none because it is not safe.

    `observer` is told the number of zones of each search and may raise LimitReached. `known` are verdicts on the same
    drive that were reached already; their shorts are not proven once more. Raises Fault if a run does not replay,
    Problems for a stage that is refused.
    """
    prover = Prover(drive)
    judged = {one.hazard: one for one in reversed(known)}  # the first of a hazard is about it, more are of its margins
    margins: list[Margin] = []
    unsafe: list[tuple[Hazard, int | None, bool]] = []
    undecided: list[Undecided] = []
    held: list[Hazard] = []
    punctual: list[Hazard] = []
    alone: list[Hazard] = []
    for hazard in shorting_sets(drive.stage):
        proof = judged[hazard] if hazard in judged else _proven(prover, hazard, observer)
        if isinstance(proof, Undecided):
            undecided.append(proof)
            continue
        if not isinstance(proof, Safe | Proven):
            unsafe.append((hazard, proof.overlap, proof.greatest))
            continue
        margins += (margin(prover, hazard, at, observer) for at in _places(hazard))
        alone += [] if _places(hazard) else [hazard]
        punctual += [] if proof.however_late else [hazard]
        held += [hazard] if _held(prover, hazard, observer) else []
    margins.sort(key=lambda one: (one.slack is None, one.slack or 0))
    left = (tuple(undecided), tuple(held), tuple(punctual), tuple(alone))
    return Budget(file, drive, tuple(margins), tuple(unsafe), *left)


def _places(hazard: Hazard) -> range:
    """The literals that have a margin, by their places; none where one switch shorts by itself."""
    return range(len(hazard.literals) if len(hazard.literals) > 1 else 0)


def _proven(prover: Prover, hazard: Hazard, observer: Observer) -> Proven | Refuted | Undecided:
    try:
        return prover.prove(hazard, True, observer)
    except LimitReached as limit:
        return Undecided(hazard, str(limit), 0)


def _held(prover: Prover, hazard: Hazard, observer: Observer) -> bool:
    """Whether a safe short would happen without the interlocks; where a limit leaves that open, it is not said."""
    names = {literal.switch for literal in hazard.literals}
    if not any({one.first, one.second} & names for one in prover.drive.interlocks):
        return False
    try:
        return not prover.holds(hazard, observer, ())
    except LimitReached:
        return False


def margin(prover: Prover, hazard: Hazard, at: int, observer: Observer, below: int | None = None) -> Margin:
    """One margin; with `below` only one that is less (ps) is told exactly. Raises Fault."""

    def bounded(zones: int) -> None:
        observer(zones)
        if zones > MOST_ZONES:
            raise LimitReached(f"{MOST_ZONES} zones for a margin")

    drive, literal = prover.drive, hazard.literals[at]
    try:
        gap = prover.gap(hazard, at, bounded, below)
    except Infeasible as fault:
        raise Fault(f"a path to the least gap of {named(hazard)} has no times") from fault
    times = delays(hazard, drive.paths)
    needed = max(times[at].fall - one.rise for place, one in enumerate(times) if place != at)
    if gap.trace is None:
        return Margin(hazard, literal, gap.time, needed, exact=gap.time is None, limit=gap.limit)
    trace, replayed = confirmed(drive, gap.trace)
    place = place_of(drive, trace, replayed)
    return Margin(hazard, literal, gap.time, needed, True, place, trace, replayed)


def thin(prover: Prover, rule: MarginRule, hazard: Hazard, observer: Observer) -> Iterator[Unsafe | Undecided]:
    """Where a safe short comes nearer than a rule lets it. Raises Fault."""
    for at in _places(hazard):
        found = margin(prover, hazard, at, observer, rule.least)
        if found.limit and (found.slack or 0) < rule.least:
            yield Undecided(hazard, found.limit, 0)
        elif found.trace is not None and found.replayed is not None and found.place is not None:
            short = rule.least - (found.slack or 0)
            remedy = cure_of_margin(prover.drive, found.trace, at, rule.least, short, observer, prover.memory)
            yield Unsafe(
                hazard,
                Check.THIN_MARGIN,
                found.place,
                found.trace,
                found.replayed,
                short,
                remedy,
                rule=rule.place,
                after=at,
            )
