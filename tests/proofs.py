"""Shared by the tests of the prover: whole files at picosecond scale, proven, and held against the judge."""

from collections.abc import Iterator
from typing import NamedTuple

from judge.delays import delays_of
from judge.literal import Says, judge
from judge.shorts import asked
from reading import FILE, drive_of

from seqcheck.checking import check
from seqcheck.circuit import shorting_sets
from seqcheck.drive import Drive
from seqcheck.evidence.replay import NotPermitted, from_its_beginning, replay
from seqcheck.hazards import Hazard
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.search import LimitReached
from seqcheck.verdict import Outcome, Safe, Unsafe

SAFE = "safe"
ENDLESS = "without end"
UNDECIDED = "undecided"

Answer = str | int
"""SAFE, ENDLESS or UNDECIDED, or the greatest overlap in ps."""


def leg(
    rows: str,
    moves: str,
    *,
    head: str = "writes together",
    parts: str = "p on 2 ps to 3 ps off 4 ps to 7 ps",
    paths: str = "A B through p",
    more: str = "",
    trips: str = "",
    columns: str = "A B",
) -> str:
    """A drive of one leg, switch A above B, in the lines given.

    With its default path a switch can conduct for 7 ps after its turn-off, and the other one from 2 ps after its
    turn-on: 5 ps must lie between.
    """
    sections = [
        f'drive "leg"\n{head}\nstage\n  rails P N\n  leg U A B\nparts\n{_indented(parts)}\npaths\n{_indented(paths)}',
        more,
        f"modes {columns}\n{_indented(rows)}\nmoves\n{moves}",
        f"trips\n{trips}" if trips else "",
    ]
    return "\n".join(section for section in sections if section) + "\n"


def _indented(lines: str) -> str:
    return "\n".join(f"  {line.strip()}" for line in lines.splitlines())


def outcome_of(text: str) -> Outcome:
    """Everything about a text that uses no other file."""
    return check(drive_of(text), FILE, frozenset(), lambda _: None)


def answer(text: str) -> Answer:
    """What is proven of a drive with one shorting set."""
    (verdict,) = outcome_of(text).verdicts
    if isinstance(verdict, Safe):
        return SAFE
    assert isinstance(verdict, Unsafe)
    return ENDLESS if verdict.overlap is None else verdict.overlap


def judged(text: str, *, interlocks: bool = True) -> Answer:
    """What the judge says of a drive with one shorting set."""
    drive = drive_of(text)
    ((literals, forbids),) = asked(drive)
    verdict = judge(drive, literals, delays_of(drive, literals), interlocks=interlocks, facts_forbid=forbids)
    assert verdict.says is not Says.GAVE_UP
    if verdict.says is Says.SAFE:
        return SAFE
    return ENDLESS if verdict.overlap is None else verdict.overlap


def silent(_: int) -> None:
    """An observer that never stops a proof."""


def at_most(zones: int) -> "_Limit":
    """An observer that stops a proof after so many zones."""
    return _Limit(zones)


class _Limit:
    def __init__(self, zones: int) -> None:
        self.zones = zones

    def __call__(self, count: int) -> None:
        if count > self.zones:
            raise LimitReached(f"{self.zones} zones")


class Held(NamedTuple):
    """A hazard of a drive, proven and judged: what differs, in words (empty: nothing), and whether both decided."""

    hazard: Hazard
    interlocks: bool
    differs: str
    decided: bool


def against_judge(drive: Drive, zones: int = 15_000, states: int = 60_000) -> Iterator[Held]:
    """Every shorting set of a drive without capacitors, proven and judged."""
    prover = Prover(drive)
    forbids = {frozenset(one.switch for one in literals): (literals, forbid) for literals, forbid in asked(drive)}
    found = {frozenset(one.switch for one in hazard.literals): hazard for hazard in shorting_sets(drive.stage)}
    for missed in [names for names in forbids if not any(some <= names for some in found)]:
        yield Held(Hazard((), ()), True, f"the set {sorted(missed)} is not found", True)
    for names, hazard in found.items():
        for interlocks in (True, False) if drive.interlocks else (True,):
            if names not in forbids:
                yield Held(hazard, interlocks, f"the set {sorted(names)} does not short", True)
                continue
            try:
                proof = prover.prove(hazard, interlocks, at_most(zones))
            except LimitReached:
                yield Held(hazard, interlocks, "", False)
                continue
            ask = Asking(drive, hazard, interlocks, states)
            yield ask.compared(proof)


class Asking(NamedTuple):
    """One hazard to put to the judge."""

    drive: Drive
    hazard: Hazard
    interlocks: bool
    states: int

    def judged(self, *, bounded: bool) -> Answer:
        """The judge's answer; with `bounded` False with every upper bound that firmware keeps removed."""
        names = {one.switch for one in self.hazard.literals}
        literals, forbids = next(one for one in asked(self.drive) if {lit.switch for lit in one[0]} == names)
        verdict = judge(
            self.drive,
            literals,
            delays_of(self.drive, literals),
            interlocks=self.interlocks,
            facts_forbid=forbids,
            bounded=bounded,
            most_states=self.states,
        )
        if verdict.says is Says.GAVE_UP:
            return UNDECIDED
        if verdict.says is Says.SAFE:
            return SAFE
        return ENDLESS if verdict.overlap is None else verdict.overlap

    def compared(self, proof: Proven | Refuted) -> Held:
        """The proof held against the judge, against the replay, and its word on lateness against the judge again."""
        right = self.judged(bounded=True)
        if right == UNDECIDED:
            return self._held("", False)
        if isinstance(proof, Refuted):
            return self._held(self._refuted(proof, right), True)
        if right != SAFE:
            return self._held(f"proven by {proof.method}, but the judge says {right}", True)
        late = self.judged(bounded=False)
        if late != UNDECIDED and proof.however_late != (late == SAFE):
            return self._held(f"however late: {proof.however_late}, but the judge says {late}", True)
        return self._held("", True)

    def _refuted(self, proof: Refuted, right: Answer) -> str:
        said = ENDLESS if proof.overlap is None else proof.overlap
        if said != right and proof.greatest:
            return f"an overlap of {said} ps, but the judge says {right}"
        try:
            found_as_longest = proof.held is None and proof.greatest and proof.overlap is not None
            replay(self.drive, proof.trace if found_as_longest else from_its_beginning(self.drive, proof.trace))
        except NotPermitted as refusal:
            return f"does not replay: {refusal}"
        return ""

    def _held(self, differs: str, decided: bool) -> Held:
        return Held(self.hazard, self.interlocks, differs, decided)
