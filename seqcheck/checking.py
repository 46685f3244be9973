"""The pipeline from a drive to everything that is to be said about it, as one pure function."""

from collections.abc import Callable, Iterator, Sequence

from seqcheck.circuit import opening_sets, shorting_sets
from seqcheck.confirming import Fault, confirmed, named, place_of
from seqcheck.drive import Drive, Interlock, MarginRule, ToleratesRule
from seqcheck.hazards import Hazard, Nearing
from seqcheck.margins import thin
from seqcheck.modegraph import graph_findings
from seqcheck.proving.certify import Data
from seqcheck.proving.memory import Memory
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.reductions import Reduction
from seqcheck.proving.search import LimitReached
from seqcheck.proving.tracing import Infeasible
from seqcheck.records import dataclass, replace
from seqcheck.reports.waived import lets_pass
from seqcheck.rules import asked_by, check_of_rule, never_so
from seqcheck.sizing import cure
from seqcheck.source import Place
from seqcheck.verdict import Check, Finding, Outcome, Safe, Trace, Undecided, Unsafe, Verdict

Observer = Callable[[int], None]
Kept = tuple[Hazard, Data | Trace | None]
"""A hazard with the proof that it is safe as data, the run that shows it, or None where neither is at hand."""
Asked = tuple[Hazard | None, Place | None]
"""What must never be possible, and the rule that asks for it (None: it is built in). Without a hazard: all that single
faults may not bring."""


@dataclass(frozen=True, slots=True)
class Settled:
    """All that is said about one hazard: its verdict first, then those about its margins, and warnings.

    `kept` is for evidence, where the prover keeps proofs.
    """

    verdicts: tuple[Verdict, ...]
    findings: tuple[Finding, ...]
    kept: tuple[Kept, ...] = ()


def check(
    drive: Drive,
    file: str,
    only: frozenset[Check],
    observer: Observer,
    kept: list[Kept] | None = None,
    without: frozenset[Reduction] = frozenset(),
    memory: Memory | None = None,
) -> Outcome:
    """Everything about one drive.

    `only` limits the findings and warnings to these checks, empty means all; a hazard is always said, since a gate
    that asks for one kind must not pass the other. `observer` is told the number of zones stored for a
    proof and may raise LimitReached. `kept` takes up the proof or run of every hazard and rule, for evidence. `without`
    leaves out some of what makes proofs short, a `memory` may know answers. Raises Problems for a stage that cannot be
    proven, Fault if a trace does not replay.
    """
    prover = Prover(drive, kept is not None, without, memory)
    settled = [settle(prover, one, observer) for one in asked(drive)]
    if kept is not None:
        kept += evidence_of(settled)
    return gathered(drive, file, only, settled)


def asked(drive: Drive) -> tuple[Asked, ...]:
    """Everything that must never be possible at once; raises Problems for a stage that cannot be proven."""
    built_in = [(hazard, None) for hazard in (*shorting_sets(drive.stage), *opening_sets(drive.stage))]
    ruled = [(hazard, rule.place) for rule in drive.rules for hazard in asked_by(rule)]
    faulty = any(isinstance(rule, ToleratesRule) for rule in drive.rules)
    return (*built_in, *ruled, *([(None, None)] if faulty else []))


def settle(prover: Prover, one: Asked, observer: Observer) -> Settled:
    """One hazard, which needs no other; raises Fault."""
    hazard, rule = one
    if hazard is None:
        return Settled(tuple(_tolerated(prover, observer)), ())
    verdict, proof = _with_proof(prover, hazard, observer, rule)
    verdicts: list[Verdict] = [verdict]
    kept: list[Kept] = [(hazard, verdict.trace if isinstance(verdict, Unsafe) else proof)]
    findings: tuple[Finding, ...] = ()
    if isinstance(verdict, Safe) and hazard.joins:
        findings = tuple(_held_by_interlock(prover, hazard, observer))
        for least in margin_rules(prover.drive):
            verdicts += (broken := list(thin(prover, least, hazard, observer)))
            kept += _kept_margins(prover, hazard, least, broken)
    return Settled(tuple(verdicts), findings, tuple(kept) if prover.keep else ())


def gathered(drive: Drive, file: str, only: frozenset[Check], settled: Sequence[Settled]) -> Outcome:
    """Everything about one drive of which each hazard is settled, in the order in which they are asked."""
    findings: list[Finding] = [*graph_findings(drive), *row_meanings(drive), *_without_path(drive)]
    findings += (finding for one in settled for finding in one.findings)
    verdicts = [verdict for one in settled for verdict in one.verdicts]
    findings += _punctual(drive, verdicts)
    findings += _idle_waivers(drive, verdicts, findings)
    return _limited(Outcome(file, drive, tuple(verdicts), tuple(findings)), only)


def evidence_of(settled: Sequence[Settled]) -> list[Kept]:
    """What evidence says of each hazard and rule."""
    return [kept for one in settled for kept in one.kept]


def _tolerated(prover: Prover, observer: Observer) -> Iterator[Verdict]:
    """What single faults bring in the modes that must tolerate them."""
    from seqcheck.tolerating import tolerated

    rules = [rule for rule in prover.drive.rules if isinstance(rule, ToleratesRule)]
    yield from tolerated(prover, shorting_sets(prover.drive.stage), rules, observer)


def margin_rules(drive: Drive) -> list[MarginRule]:
    """The rules of a drive about margins."""
    return [rule for rule in drive.rules if isinstance(rule, MarginRule)]


def _limited(outcome: Outcome, only: frozenset[Check]) -> Outcome:
    if not only:
        return outcome
    findings = tuple(one for one in outcome.findings if one.check in only)
    return replace(outcome, findings=findings)


def _kept_margins(
    prover: Prover, hazard: Hazard, rule: MarginRule, broken: list[Unsafe | Undecided]
) -> Iterator[Kept]:
    """What a rule about margins asks of a short, with its proofs and runs."""
    runs = {one.after: one.trace for one in broken if isinstance(one, Unsafe)}
    for after in range(len(hazard.literals)) if rule.least and len(hazard.literals) > 1 else ():
        asked = replace(hazard, asks=Nearing(after, rule.least))
        yield asked, runs.get(after) or prover.margins.get(asked)


def _with_proof(
    prover: Prover, hazard: Hazard, observer: Observer, rule: Place | None
) -> tuple[Verdict, Data | None]:
    """The verdict on a hazard, and its proof as data where it is safe and the prover keeps it."""
    seen = 0

    def counting(count: int) -> None:
        nonlocal seen
        seen = count
        observer(count)

    try:
        proof = prover.prove(hazard, True, counting)
    except LimitReached as limit:
        return Undecided(hazard, str(limit), seen), None
    except Infeasible as fault:
        raise Fault(f"a path to {named(hazard)} has no times") from fault
    if isinstance(proof, Proven):
        return Safe(hazard, proof.method, proof.zones, proof.however_late), proof.data
    return _unsafe(prover, hazard, proof, observer, rule), None


def _unsafe(prover: Prover, hazard: Hazard, proof: Refuted, observer: Observer, rule: Place | None) -> Unsafe:
    drive = prover.drive
    whole = proof.held is not None or not proof.greatest or proof.overlap is None
    trace, replayed = confirmed(drive, proof.trace, whole=whole)
    remedy = None if proof.held else cure(drive, hazard, proof, observer, prover.memory)
    place = place_of(drive, proof.trace, replayed) if proof.held is None else drive.modes[proof.held].place
    check = _check_of(hazard, proof.held) if rule is None else check_of_rule(hazard)
    return Unsafe(hazard, check, place, trace, replayed, proof.overlap, remedy, proof.greatest, proof.held, rule)


def _check_of(hazard: Hazard, held: str | None) -> Check:
    if hazard.currents:
        return Check.OPEN_WINDING
    return Check.SHORT if held else Check.OVERLAP


def _without_path(drive: Drive) -> Iterator[Finding]:
    for switch in drive.stage.switches:
        if not drive.paths[switch.name]:
            text = f"'{switch.name}' has no path, so its delays are taken as zero"
            yield Finding(Check.NO_PATH, switch.place, text, "give it a line in 'paths'", (switch.name,))


def row_meanings(drive: Drive) -> Iterator[Finding]:
    """Rows that do not do what their `means` says, with what they do instead."""
    saying = [mode for mode in drive.modes.values() if mode.means]
    if not saying:
        return
    from seqcheck.circuit.reading import RowReader
    from seqcheck.reports.does import does, meant

    reader = RowReader(drive)
    for mode in saying:
        row = reader.row(mode)
        if row.amiss and mode.means:
            text = f"row '{mode.name}' means {meant(mode.means)}, but {row.amiss}; what it does: {does(row)}"
            way_out = "correct its cells, or what it means"
            yield Finding(Check.ROW_MEANING, mode.means.place, text, way_out, (mode.name,))


def _held_by_interlock(prover: Prover, hazard: Hazard, observer: Observer) -> Iterator[Finding]:
    """A short that only interlocks prevent is worth knowing, and which of them."""
    names = {literal.switch for literal in hazard.literals}
    inner = [one for one in prover.drive.interlocks if {one.first, one.second} <= names]
    outer = [one for one in prover.drive.interlocks if one not in inner and {one.first, one.second} & names]
    locks = inner + outer

    def comes(without: Sequence[Interlock]) -> bool | None:
        """Whether the hazard happens without these interlocks; None where a limit leaves that open."""
        try:
            return not prover.holds(hazard, observer, tuple(one for one in locks if one not in without))
        except LimitReached:
            return None

    if not locks or (alone := comes(locks)) is False:
        return
    together = f"would bring {' and '.join(map(str, hazard.literals))} together"
    if alone is None:
        text = f"whether the firmware alone {together} is undecided"
    else:
        locks, how = _needed(inner, outer, comes)
        text = f"the firmware {together} without {how}"
    yield Finding(Check.HELD_BY_INTERLOCK, locks[0].place, text, "", tuple(sorted(names)))


def _needed(
    inner: list[Interlock], outer: list[Interlock], comes: Callable[[Sequence[Interlock]], bool | None]
) -> tuple[list[Interlock], str]:
    """The interlocks that matter, and in words how.

    They are each one without which the hazard comes though all others are kept; where there is no such, some that
    cannot all be left out. `inner` are between the hazard's own switches. More interlocks never let more pass.
    """
    every = inner + outer
    tried = inner if inner and outer and comes(outer) is False else every
    answers = [True] if len(every) == 1 else [comes([one]) for one in tried]
    needed = [one for one, answer in zip(tried, answers, strict=True) if answer]
    unsure = [one for one, answer in zip(tried, answers, strict=True) if answer is None]
    if needed:
        return needed, _or(needed) + (f"; without {_or(unsure)} that is undecided" if unsure else "")
    left = every
    for one in () if unsure else (*outer, *inner):
        fewer = [other for other in left if other is not one]
        if (answer := comes(fewer)) is None:
            unsure.append(one)
        elif answer:
            left = fewer
    if unsure:
        return left, f"{_and(left)}; which of them is needed is undecided"
    return left, f"{_and(left)}; any one of them is enough to prevent it"


def _or(locks: Sequence[Interlock]) -> str:
    return " or without ".join(f"the interlock {_of(one)}" for one in locks)


def _and(locks: Sequence[Interlock]) -> str:
    return "the interlocks " + " and ".join(map(_of, locks))


def _of(lock: Interlock) -> str:
    return f"of {lock.first} and {lock.second} (line {lock.place.line})"


def _punctual(drive: Drive, verdicts: list[Verdict]) -> Iterator[Finding]:
    if drive.clock is not None and drive.clock.late is not None:
        return
    resting = [one.hazard for one in verdicts if isinstance(one, Safe) and not one.however_late]
    for hazard in resting:
        text = f"that {never_so(hazard)} rests on firmware that is never late"
        place = drive.clock.place if drive.clock else drive.place
        names = tuple(literal.switch for literal in hazard.literals)
        yield Finding(Check.PUNCTUAL, place, text, "say how late it can be: 'clock ..., late by at most ...'", names)


_OF_A_VERDICT = frozenset(
    one.value
    for one in (
        *(Check.SHORT, Check.OVERLAP, Check.OPEN_WINDING, Check.TOGETHER, Check.THIN_MARGIN),
        *(Check.LONG_ON, Check.SHORT_PULSE, Check.TOO_SOON, Check.LATE_TRIP, Check.SINGLE_FAULT),
        *(Check.HELD_BY_INTERLOCK, Check.PUNCTUAL),
    )
)
"""Checks whose findings are not all known while a hazard is undecided."""


def _idle_waivers(drive: Drive, verdicts: list[Verdict], findings: list[Finding]) -> list[Finding]:
    """A waiver that lets nothing pass is out of date or says the wrong name. No waiver lets such a finding pass."""
    found: list[Unsafe | Finding] = [*findings, *(one for one in verdicts if isinstance(one, Unsafe))]
    open_yet = _OF_A_VERDICT if any(isinstance(one, Undecided) for one in verdicts) else frozenset()
    idle = [
        one
        for one in drive.waivers
        if one.check not in open_yet and not any(lets_pass(one, drive, other) for other in found)
    ]
    text = "this waiver matches nothing: there is no '{0.check}' that names '{0.name}'"
    way_out = "take it out, or name what the finding names"
    return [Finding(Check.IDLE_WAIVER, one.place, text.format(one), way_out) for one in idle]
