"""The prover against the judge on drawn drives: verdicts, greatest overlaps, lateness, and that evidence replays.

Here a fixed slice; `test_campaign_judged.py` takes any range of seeds.
"""

from collections import Counter
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from time import monotonic
from typing import NamedTuple

import pytest
from judge.delays import delays_of
from judge.draws import draw, flowing
from judge.features import DRAWN, UNDRAWN, features
from judge.literal import Forbids, Says, judge
from judge.shorts import asked
from judge.smaller import smaller
from judge.stretched import stretched
from proofs import ENDLESS, SAFE, Answer, at_most
from reading import drive_of

from seqcheck.circuit import opening_sets, shorting_sets
from seqcheck.drive import Drive
from seqcheck.evidence.replay import NotPermitted, from_its_beginning, replay
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problems
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.search import LimitReached

SEEDS = (
    11, 17, 19, 23, 30, 35, 39, 42, 43, 45, 52, 60, 68, 76, 79, 81, 92, 93, 94, 102, 105, 106, 115, 119, 120,
    124, 129, 137, 144, 147, 149, 151, 153, 158, 163, 164, 166, 168, 171, 173, 174, 181, 183, 184, 188, 195,
    196, 198, 202, 204, 205, 220, 227, 229, 233, 243, 245, 249, 251, 256, 31, 51, 299,
)  # fmt: skip
"""Drawn drives with every feature of the language among them, each quick for the judge."""

FLOWING = (
    0, 3, 4, 6, 7, 9, 10, 13, 14, 15, 16, 17, 20, 21, 22, 23, 24, 26, 29, 32, 34, 35, 37, 40, 41, 42, 44, 46, 47, 50,
)  # fmt: skip
"""Drawn drives whose winding must flow, each quick for the judge."""

STRETCHED = (26, 36, 52, 56, 60, 86, 108, 118, 124, 137, 196, 198)
"""Drives with long stays, each quick for the judge."""

REST = """
drive "what draws leave out"
writes together
stage
  rails P N
  leg U UH UL
  switch C from P to X, X to N two way
  winding U
modes UH UL C
  ma off on off
  mb off off off
moves
  start ma
  ma -> mb when go
  mb -> ma when back
rules
  UH on at most 5 ps
  waive open-winding for U because "known"
"""


class Limits(NamedTuple):
    """Where a comparison gives up: zones of a proof, states of the judge."""

    zones: int
    states: int


@dataclass(frozen=True, slots=True)
class Compared:
    """One hazard, proven and judged.

    `said` is what both say, None where one gave up: then `gave_up` tells which. `differs` are words for a disagreement.
    """

    switches: str
    interlocks: bool
    said: Answer | None = None
    gave_up: str = ""
    differs: str = ""

    def __str__(self) -> str:
        return f"{self.switches}{'' if self.interlocks else ' without interlock'}: {self.differs}"


def compared(text: str, limits: Limits) -> Iterator[Compared]:
    """Every hazard of a drive, proven and judged; shorts again without interlocks if it has any."""
    drive = drive_of(text)
    judged = {frozenset(literals): (literals, forbids) for literals, forbids in asked(drive)}
    hazards = (*shorting_sets(drive.stage), *opening_sets(drive.stage))
    proven = {frozenset(hazard.literals): hazard for hazard in hazards}
    for names in judged.keys() ^ proven.keys():
        if not any(some < names for some in proven):
            whose = "judge" if names in judged else "prover"
            yield Compared(" ".join(sorted(map(str, names))), True, differs=f"a hazard only of the {whose}")
    prover = Prover(drive)
    for names in proven.keys() & judged.keys():
        for interlocks in (True, False) if drive.interlocks and not proven[names].currents else (True,):
            yield _Comparison(drive, prover, proven[names], *judged[names], interlocks, limits).made()


class _Comparison(NamedTuple):
    drive: Drive
    prover: Prover
    hazard: Hazard
    literals: tuple[Literal, ...]
    forbids: Forbids
    interlocks: bool
    limits: Limits

    def made(self) -> Compared:
        try:
            proof = self.prover.prove(self.hazard, self.interlocks, at_most(self.limits.zones))
        except LimitReached:
            return self._named(gave_up="prover")
        right = self._judged(bounded=True)
        if right is None:
            return self._named(gave_up="judge")
        if isinstance(proof, Refuted) and not proof.greatest:
            return self._at_least(proof, right)
        said = self._said(proof)
        if said != right:
            return self._named(differs=f"the prover says {said}, the judge {right}")
        why = self._lateness(proof) if isinstance(proof, Proven) else self._refusal(proof)
        return self._named(said=said, differs=why)

    def _at_least(self, proof: Refuted, right: Answer) -> Compared:
        """A run that is no longer than the judge's longest, where the prover gave up looking for a longer one."""
        said = self._said(proof)
        if rank(said) > rank(right):
            return self._named(differs=f"the prover says at least {said}, the judge {right}")
        return self._named(gave_up="prover", differs=self._refusal(proof))

    def _said(self, proof: Proven | Refuted) -> Answer:
        if isinstance(proof, Proven):
            return SAFE
        return ENDLESS if proof.overlap is None else proof.overlap

    def _judged(self, *, bounded: bool) -> Answer | None:
        verdict = judge(
            self.drive,
            self.literals,
            delays_of(self.drive, self.literals),
            interlocks=self.interlocks,
            facts_forbid=self.forbids,
            bounded=bounded,
            most_states=self.limits.states,
        )
        if verdict.says is Says.GAVE_UP:
            return None
        if verdict.says is Says.SAFE:
            return SAFE
        return ENDLESS if verdict.overlap is None else verdict.overlap

    def _lateness(self, proof: Proven) -> str:
        late = self._judged(bounded=False)
        if late is None or proof.however_late == (late == SAFE):
            return ""
        return f"however late: the prover says {proof.however_late}, the judge {late}"

    def _refusal(self, proof: Refuted) -> str:
        try:
            whole = proof.held is not None or proof.overlap is None
            trace = from_its_beginning(self.drive, proof.trace) if whole else proof.trace
            replay(self.drive, trace)
        except NotPermitted as refusal:
            return f"does not replay: {refusal}"
        return ""

    def _named(self, *, said: Answer | None = None, gave_up: str = "", differs: str = "") -> Compared:
        names = " ".join(map(str, self.hazard.literals))
        return Compared(names, self.interlocks, said, gave_up, differs)


def outcomes(text: str, limits: Limits) -> list[Compared]:
    """As `compared`; a traceback of either counts as a disagreement, so that a campaign goes on and names the drive."""
    try:
        return list(compared(text, limits))
    except Problems:
        raise
    except Exception as error:
        return [Compared("all", True, differs=f"ends with {type(error).__name__}: {error}")]


def rank(answer: Answer) -> float:
    """Answers in order: safe, then by overlap."""
    return {SAFE: -1.0, ENDLESS: float("inf")}[answer] if isinstance(answer, str) else float(answer)


def differences(text: str, limits: Limits) -> list[str]:
    """What prover and judge disagree on."""
    return [str(one) for one in outcomes(text, limits) if one.differs]


def shrunk(text: str, limits: Limits, seconds: float = 120) -> str:
    """A smaller text on which prover and judge still disagree, as far as the time goes."""
    end = monotonic() + seconds

    def fails(shorter: str) -> bool:
        try:
            return monotonic() < end and differences(shorter, limits) != []
        except Problems:
            return False

    return smaller(text, fails)


@pytest.mark.parametrize("seed", SEEDS)
def test_drawn_drive(seed: int) -> None:
    """Prover and judge agree on a drive, and both decide."""
    held = list(compared(draw(seed), Limits(2_000, 8_000)))
    assert [str(one) for one in held if one.differs] == []
    assert [one for one in held if one.gave_up] == []


@pytest.mark.parametrize("seed", FLOWING)
def test_drawn_drive_whose_winding_must_flow(seed: int) -> None:
    """The same with open windings and what is known of the current."""
    held = list(compared(flowing(seed), Limits(2_000, 8_000)))
    assert [str(one) for one in held if one.differs] == []
    assert [one for one in held if one.gave_up] == []


def test_windings_that_must_flow_end_both_ways() -> None:
    """Some of these drives are proven, some are not, and most have an opening set at all."""
    found = [one for seed in FLOWING for one in compared(flowing(seed), Limits(2_000, 8_000))]
    said = [one.said for one in found if "off" in one.switches]
    assert len(said) >= 30
    assert 5 <= said.count(SAFE) <= len(said) - 15


@pytest.mark.parametrize("seed", STRETCHED)
def test_drive_with_long_stays(seed: int) -> None:
    """The same where stays are long, so that the prover cuts them."""
    text = stretched(seed)
    assert text is not None
    held = list(compared(text, Limits(4_000, 15_000)))
    assert [str(one) for one in held if one.differs] == []
    assert [one for one in held if one.gave_up] == []


def test_seeds_cover_the_language() -> None:
    """Dropping a seed must not drop a feature."""
    used = features_of(map(draw, SEEDS)) + features_of(map(flowing, FLOWING))
    assert [name for name in DRAWN if not used[name]] == []


def test_draws_cover_the_language() -> None:
    """Every construct that draws are said to contain comes up in few of them, and no other name is counted."""
    used = features_of(map(draw, range(300))) + features_of(map(flowing, range(60)))
    assert [name for name in DRAWN if not used[name]] == []
    assert [name for name in UNDRAWN if used[name]] == []
    assert set(used) <= {*DRAWN, *UNDRAWN}


def test_the_other_constructs_are_counted_too() -> None:
    """What draws leave out is known to the table: a file that has it all."""
    used = features(drive_of(REST))
    assert [name for name in UNDRAWN if not used[name]] == []


def features_of(texts: Iterable[str]) -> Counter[str]:
    """In how many drives each construct stands."""
    return Counter(name for text in texts for name in features(drive_of(text)))
