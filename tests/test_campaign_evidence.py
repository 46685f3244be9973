"""Evidence for every hazard of drawn drives, damaged in one place: refused, unless it is still a proof.

    SEQCHECK_SEEDS=0-20000 pytest -m campaign tests/test_campaign_evidence.py -n auto

Each drive has a rule of every kind, whose evidence is damaged too. Of what is accepted though damaged the judges must
say the same: safe, and however late the firmware is where that is claimed; or not safe where a run is shown. What is
not safe by the prover's word is also claimed safe with forged proofs, damaged too: none may ever be accepted. Each
chunk prints its numbers (`-rP` shows them). `SEQCHECK_ZONES` and `SEQCHECK_STATES` say where prover and judge give up,
`SEQCHECK_DAMAGES` how many places of each claim are damaged, one at a time. A fixed slice runs without the marker.
"""

import json
import os
from collections import Counter
from collections.abc import Iterator
from contextlib import suppress
from dataclasses import replace
from functools import lru_cache
from itertools import combinations
from random import Random
from time import perf_counter
from typing import Any

import pytest
from damage import Data, damaged, forged_cover, forged_potentials, whole
from judge.delays import delays_of
from judge.draws import draw
from judge.least import NEVER, least_gap
from judge.ruled import ruled
from judge.shorts import asked
from proofs import SAFE, UNDECIDED, Asking, at_most
from reading import drive_of
from test_campaign_judged import chunks, named
from test_judged_rules import rule_broken

from seqcheck.checking import Kept, check
from seqcheck.drive import Drive
from seqcheck.evidence.audit import NotProven, audit
from seqcheck.evidence.certificate import NoEvidence, read
from seqcheck.hazards import Hazard, Nearing
from seqcheck.proving.search import LimitReached
from seqcheck.verdict import Trace

ZONES = int(os.environ.get("SEQCHECK_ZONES", "1500"))
STATES = int(os.environ.get("SEQCHECK_STATES", "10000"))
DAMAGES = int(os.environ.get("SEQCHECK_DAMAGES", "4"))
SLICE = (1, 4, 13, 23, 45, 60, 74, 79, 102, 158)

Attempt = tuple[Drive, Hazard, Data, Data, str]
"""A drive, a hazard of it, the claim about that, the whole evidence, and what was done to it."""
REFUSED, STILL, UNJUDGED = "refused", "still a proof", "accepted, the judge gave up"


@pytest.mark.parametrize("seed", SLICE)
def test_damaged_evidence(seed: int) -> None:
    """The fixed slice."""
    ends = Counter[str]()
    assert list(disputes(seed, ends)) == []
    assert ends


def test_the_slice_has_every_damage() -> None:
    """Dropping a seed must not drop a way of damaging evidence."""
    done = {what for seed in SLICE for *_, what in attempts_of(seed)}
    assert done == {
        "a bound tightened", "a bound raised", "a zone dropped", "an entry dropped", "a state changed",
        "a potential raised", "a potential dropped", "a point dropped", "a command changed", "a stand changed",
        "an event moved", "an overlap moved", "a literal longer", "a question changed", "a forged cover",
        "forged potentials",
    }  # fmt: skip


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_damaged_evidence_of_drawn_drives(seeds: range) -> None:
    """Any range of seeds."""
    began, ends = perf_counter(), Counter[str]()
    wrong = [f"draw({seed}): {one}" for seed in seeds for one in disputes(seed, ends)]
    print(f"\n{len(seeds)} drives in {perf_counter() - began:.0f} s; disputes: {len(wrong)}")
    for what, number in sorted(ends.items()):
        print(f"{number:7d}  {what}")
    assert not wrong, "\n".join(wrong)


def disputes(seed: int, ends: Counter[str]) -> Iterator[str]:
    """What is accepted of a drawn drive's damaged evidence and is no proof; every end is counted."""
    for drive, hazard, claim, data, what in attempts_of(seed):
        end = ended(drive, hazard, claim, data)
        ends[f"{what}: {end}"] += 1
        if end not in (REFUSED, STILL, UNJUDGED):
            yield f"{' '.join(one.switch for one in hazard.literals)}, {what}: {end}"


@lru_cache(maxsize=len(SLICE))
def attempts_of(seed: int) -> list[Attempt]:
    """All attempts on one drive."""
    return list(attempts(seed))


def attempts(seed: int) -> Iterator[Attempt]:
    """The evidence of a drawn drive with one claim damaged or forged, one at a time, and how."""
    rng = Random(seed)
    drive = drive_of(f"{ruled(draw(seed), seed)}  margin at least {rng.choice((1, 2, 3, 6, 15))} ps\n")
    kept: list[Kept] = []
    check(drive, "t.dseq", frozenset(), at_most(ZONES), kept)
    data = whole(drive, kept)
    for number, (hazard, proof) in enumerate(kept):
        for _ in range(DAMAGES):
            copy, what = damaged(rng, data, number)
            if what:
                yield drive, hazard, copy["claims"][number], copy, what
        if isinstance(proof, Trace):
            yield from forgeries(rng, drive, kept, number)


def forgeries(rng: Random, drive: Drive, kept: list[Kept], number: int) -> Iterator[Attempt]:
    """Claims that an unsafe hazard is safe, as good as can be made, and damaged."""
    hazard = kept[number][0]
    for proof, what in forged(rng, drive, hazard):
        claims: list[tuple[Hazard, Any]] = [*kept[:number], (hazard, proof), *kept[number + 1 :]]
        data = whole(drive, claims)
        yield drive, hazard, data["claims"][number], data, what
        for _ in range(DAMAGES):
            copy, _ = damaged(rng, data, number)
            yield drive, hazard, copy["claims"][number], copy, what


def forged(rng: Random, drive: Drive, hazard: Hazard) -> Iterator[tuple[Data, str]]:
    """A cover without what shows the hazard, and potentials that are raised by some."""
    with suppress(LimitReached):
        yield forged_cover(drive, hazard, ZONES // 4), "a forged cover"
    if not isinstance(hazard.asks, Nearing | None):
        return
    for places in combinations(range(len(hazard.literals)), 2):
        potentials = forged_potentials(drive, replace(hazard, asks=None), places, rng.choice((0, 1, 5, 50)))
        if potentials is not None:
            yield potentials, "forged potentials"


def ended(drive: Drive, hazard: Hazard, claim: Data, data: Data) -> str:
    """What the audit makes of evidence, and where it accepts it, whether the judge bears it out."""
    try:
        audit(drive, read(json.dumps(data)))
    except (NotProven, NoEvidence):
        return REFUSED
    late = "potentials" in claim or claim.get("cover", {}).get("however late", False)
    safe = judged_safe(drive, hazard, late)
    if safe is None:
        return UNJUDGED
    if safe is (claim["verdict"] == "safe"):
        return STILL
    return f"accepted as {claim['verdict']}, but the judge says {'safe' if safe else 'unsafe'}"


def judged_safe(drive: Drive, hazard: Hazard, late: bool) -> bool | None:
    """Whether a hazard happens in no run, by the judge of what it asks; None if that gave up."""
    asks = hazard.asks
    if asks is None:
        right = Asking(drive, hazard, True, STATES).judged(bounded=not late)
        return None if right == UNDECIDED else right == SAFE
    if isinstance(asks, Nearing):
        (literals, forbids) = next(one for one in asked(drive) if set(one[0]) == set(hazard.literals))
        after = literals.index(hazard.literals[asks.after])
        delays = delays_of(drive, literals)
        gap = least_gap(drive, literals, delays, after, facts_forbid=forbids, most_states=STATES, bounded=not late)
        return gap if gap is None else gap == NEVER or (isinstance(gap, int) and gap >= asks.limit)
    broken = rule_broken(drive, hazard, 0, STATES, bounded=not late)
    return None if broken is None else not broken
