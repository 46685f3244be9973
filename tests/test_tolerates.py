"""`tolerates single faults in M`: against the judge on drawn drives, and as a user meets it."""

import contextlib
import os
from collections import Counter
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple

import pytest
from judge.draws import draw
from judge.shorts import asked
from judge.stretched import stretched
from judge.stuck import places
from proofs import at_most
from reading import drive_of
from test_faults import INTERLOCKED, leg
from test_judged import SEEDS

from seqcheck.circuit import shorting_sets
from seqcheck.cli import main
from seqcheck.drive import Drive, ToleratesRule
from seqcheck.failing import single_faults
from seqcheck.faults import Where
from seqcheck.hazards import Fault, Stuck
from seqcheck.messages import Problems
from seqcheck.proving.prove import Prover
from seqcheck.tolerating import tolerated
from seqcheck.verdict import Safe, Undecided, Unsafe, Verdict

ZONES, STATES = 1_500, 6_000


class Compared(NamedTuple):
    """One question and how it ended for both (None: one gave up), with words for a disagreement."""

    safe: bool | None
    pin: bool = False
    late: bool | None = None
    differs: str = ""


def compared(text: str, zones: int, states: int) -> Iterator[Compared]:
    """Every short under every fault in every mode, as the rule has it and as the judge finds it.

    That each run replays is seen to while it is found: another one raises.
    """
    drive = drive_of(text)
    rule = ToleratesRule(drive.place, tuple(drive.modes))
    said = list(tolerated(Prover(drive), shorting_sets(drive.stage), [rule], at_most(zones)))
    for literals, forbids in asked(drive):
        if not all(one.on for one in literals):
            continue
        names = frozenset(one.switch for one in literals)
        for fault in (Fault(name, on, pin) for name in drive.columns for on in (True, False) for pin in (True, False)):
            verdicts = {one.hazard.asks.mode: one for one in said if _about(one, names, fault)}  # type: ignore[union-attr]
            if fault.switch not in names and not verdicts:
                continue
            found = places(drive, literals, forbids, fault, states)
            late = places(drive, literals, forbids, fault, states, bounded=False)
            for mode in drive.modes:
                yield _compared(drive, mode, fault, verdicts.get(mode), found, late)


def _about(verdict: Verdict, names: frozenset[str], fault: Fault) -> bool:
    """Whether a verdict is about one short and one fault."""
    asks = verdict.hazard.asks
    assert isinstance(asks, Stuck)
    own = frozenset() if asks.faults[0].pin else {asks.faults[0].switch}
    return fault in asks.faults and own | {one.switch for one in verdict.hazard.literals} == names


def _compared(
    drive: Drive,
    mode: str,
    fault: Fault,
    verdict: Verdict | None,
    found: frozenset[Where] | None,
    late: frozenset[Where] | None,
) -> Compared:
    if isinstance(verdict, Undecided) or found is None:
        return Compared(None, fault.pin)
    safe, right = not isinstance(verdict, Unsafe), Where(mode, None) not in found
    if safe is not right:
        return Compared(None, fault.pin, differs=f"{mode}, {fault}: said {safe}, right {right}")
    if not isinstance(verdict, Safe) or late is None:
        return Compared(safe, fault.pin)
    ever = Where(mode, None) not in late
    if ever is not verdict.however_late:
        return Compared(safe, fault.pin, differs=f"{mode}, {fault}: however late {verdict.however_late}, right {ever}")
    return Compared(safe, fault.pin, ever)


SLICE = (*INTERLOCKED, *SEEDS[20:40])


@pytest.mark.parametrize("seed", SLICE)
def test_a_rule_finds_what_the_judge_finds(seed: int) -> None:
    assert [one.differs for one in compared(draw(seed), ZONES, STATES) if one.differs] == []


def test_the_slice_ends_both_ways() -> None:
    """For switches and for pins, and with safety that rests on firmware in time; else the slice would show little."""
    found = [one for seed in SLICE for one in compared(draw(seed), ZONES, STATES)]
    ends = Counter((one.safe, one.pin) for one in found)
    assert min(ends[safe, pin] for safe in (True, False) for pin in (True, False)) >= 10
    assert any(one.late is False for one in found)


@pytest.mark.campaign
@pytest.mark.parametrize("chunk", range(64))
def test_campaign_of_tolerance(chunk: int) -> None:
    """SEQCHECK_SEEDS=0-5000 in 64 parts; drives with long stays as well."""
    first, _, last = os.environ.get("SEQCHECK_SEEDS", "0-640").partition("-")
    for seed in range(int(first) + chunk, int(last), 64):
        for text in (draw(seed), stretched(seed)):
            if text is None:
                continue
            try:
                held = list(compared(text, 4_000, 15_000))
            except Problems:
                continue
            assert [one.differs for one in held if one.differs] == [], f"{seed}\n{text}"
