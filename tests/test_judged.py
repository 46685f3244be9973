"""The prover against the judge on drawn drives: verdicts, greatest overlaps, lateness, and that evidence replays.

A longer run is marked `campaign`: `SEQCHECK_SEEDS=0-2000 pytest -m campaign tests/test_judged.py`.
"""

import os
from collections.abc import Iterator

import pytest
from judge.draws import draw
from proofs import against_judge
from reading import drive_of

SEEDS = (
    11, 17, 19, 23, 30, 35, 39, 42, 43, 45, 52, 60, 68, 76, 79, 81, 92, 93, 94, 102, 105, 106, 115, 119, 120,
    124, 129, 137, 144, 147, 149, 151, 153, 158, 163, 164, 166, 168, 171, 173, 174, 181, 183, 184, 188, 195,
    196, 198, 202, 204, 205, 220, 227, 229, 233, 243, 245, 249, 251, 256,
)  # fmt: skip
"""Drawn drives with every feature of the language among them, each quick for the judge."""


def differences(seed: int, zones: int, states: int) -> Iterator[str]:
    """What prover and judge disagree on in one drawn drive."""
    for held in against_judge(drive_of(draw(seed)), zones, states):
        if held.differs:
            names = " ".join(literal.switch for literal in held.hazard.literals)
            yield f"draw {seed}, {names}{'' if held.interlocks else ' without interlock'}: {held.differs}"


@pytest.mark.parametrize("seed", SEEDS)
def test_drawn_drive(seed: int) -> None:
    """Prover and judge agree on a drive, and both decide."""
    held = list(against_judge(drive_of(draw(seed)), 2_000, 8_000))
    assert [one.differs for one in held if one.differs] == []
    assert all(one.decided for one in held)


def test_seeds_cover_the_language() -> None:
    """Dropping a seed must not drop a feature."""
    text = "".join(map(draw, SEEDS))
    features = (
        "together", "one at a time", "by port", "turn-offs first", "turn-ons first", "in table order", "loop ",
        "late by", "difference", "interlock", "dead time", "at rise", "within a period", "at once", " after ",
        "latest", "earliest", "unbroken", "keep", "free", "reset", "~k", " with ", "trips", "within ", "from any",
        "set all off", "one way", "sources", "rests unknown", "port A",
    )  # fmt: skip
    assert [one for one in features if one not in text] == []


def _range() -> range:
    first, _, last = os.environ.get("SEQCHECK_SEEDS", "0-200").partition("-")
    return range(int(first), int(last))


@pytest.mark.campaign
def test_campaign() -> None:
    """A range of seeds; every difference is listed."""
    assert [one for seed in _range() for one in differences(seed, 15_000, 40_000)] == []
