"""The prover against the judge over any range of drawn drives, in chunks that can run beside each other.

    SEQCHECK_SEEDS=0-20000 pytest -m campaign tests/test_campaign_judged.py -n auto

Each chunk prints its numbers and its table of constructs (`-rP` shows them); all of them are added up at the end.
`SEQCHECK_ZONES` and `SEQCHECK_STATES` say where a comparison gives up; then it counts as undecided. A disagreement
fails with a drive that was made small.
"""

import json
import os
from collections import Counter
from collections.abc import Callable
from time import perf_counter

import pytest
from judge.draws import draw, flowing
from judge.features import features, table, tallied
from judge.stretched import stretched
from proofs import SAFE
from reading import drive_of
from test_judged import Compared, Limits, outcomes, shrunk

CHUNK = 50
LIMITS = Limits(int(os.environ.get("SEQCHECK_ZONES", "4000")), int(os.environ.get("SEQCHECK_STATES", "10000")))
Record = Callable[[str, object], None]


def chunks() -> list[range]:
    """The seeds of SEQCHECK_SEEDS, `A-B` without B, cut into chunks."""
    first, _, last = os.environ.get("SEQCHECK_SEEDS", "0-200").partition("-")
    return [range(at, min(at + CHUNK, int(last))) for at in range(int(first), int(last), CHUNK)]


def named(seeds: range) -> str:
    """A chunk's name in reports."""
    return f"{seeds.start}-{seeds.stop}"


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_drawn_drives(seeds: range, record_property: Record) -> None:
    """Short times: every construct."""
    run([(f"draw({seed})", draw(seed)) for seed in seeds], record_property)


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_drives_whose_winding_must_flow(seeds: range, record_property: Record) -> None:
    """Open windings and directions of current."""
    run([(f"flowing({seed})", flowing(seed)) for seed in seeds], record_property)


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_drives_with_long_stays(seeds: range, record_property: Record) -> None:
    """Long times with carriers: the prover cuts stays."""
    texts = [(f"stretched({seed})", stretched(seed)) for seed in seeds]
    run([(name, text) for name, text in texts if text is not None], record_property)


def run(texts: list[tuple[str, str]], record_property: Record) -> None:
    """Compare all, print the numbers, and fail with each disagreement made small."""
    began = perf_counter()
    drives, answers, ends, wrong = Counter[str](), dict[str, Counter[str]](), Counter[str](), []
    for name, text in texts:
        found = outcomes(text, LIMITS)
        differs = [str(one) for one in found if one.differs]
        if differs:
            wrong.append(f"{name}: {'; '.join(differs)}\nshrunk:\n{shrunk(text, LIMITS)}")
        said = [end_of(one) for one in found if not one.differs]
        ends.update(said)
        tallied(features(drive_of(text)), [one.partition(" ")[0] for one in said], drives, answers)
    record_property("drives", json.dumps(drives))
    record_property("answers", json.dumps(answers))
    seconds = perf_counter() - began
    print(f"\n{len(texts)} drives in {seconds:.0f} s; hazards: {dict(ends)}; disagreements: {len(wrong)}")
    print(table(drives, answers))
    assert not wrong, "\n\n".join(wrong)


def end_of(one: Compared) -> str:
    """What a comparison counts as."""
    if one.said is None:
        return f"undecided by {one.gave_up}"
    return "safe" if one.said == SAFE else "unsafe"
