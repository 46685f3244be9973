"""Single faults against the judge: where each hazard happens when one thing is stuck."""

from collections.abc import Iterator

import pytest
from judge.draws import draw, flowing
from judge.shorts import asked
from judge.stuck import places
from reading import drive_of
from test_judged import FLOWING, SEEDS

from seqcheck.circuit import opening_sets, shorting_sets
from seqcheck.drive import Drive
from seqcheck.failing import single_faults
from seqcheck.faults import Fault, Where

MOST_STATES = 20_000


def said(text: str) -> Iterator[tuple[str, frozenset[Where], frozenset[Where] | None]]:
    """Each fault with each hazard in words: where the program and where the judge find it."""
    drive = drive_of(text)
    hazards = (*shorting_sets(drive.stage), *opening_sets(drive.stage))
    judged = {frozenset(literals): (literals, forbids) for literals, forbids in asked(drive)}
    for faulted in single_faults(drive, hazards, frozenset(), lambda _: None):
        brought = {frozenset(one.hazard.literals): one.spread for one in faulted.brings}
        for fault in faulted.faults:
            for names, (literals, forbids) in judged.items():
                if names not in brought and not _near(drive, fault) & {one.switch for one in literals}:
                    continue
                spread = brought.get(names)
                assert spread is None or spread.limit is None
                found = frozenset() if spread is None else spread.places
                where = places(drive, literals, forbids, fault, MOST_STATES)
                yield f"{fault} {' '.join(map(str, literals))}", found, where


def _near(drive: Drive, fault: Fault) -> set[str]:
    """The switch that is stuck, and those whose interlock sees that its pin is."""
    locks = [{one.first, one.second} for one in drive.interlocks] if fault.pin else []
    return {fault.switch}.union(*(one for one in locks if fault.switch in one))


@pytest.mark.parametrize("text", [*map(draw, SEEDS[:25]), *map(flowing, FLOWING[:10])])
def test_a_fault_brings_hazards_where_the_judge_finds_them(text: str) -> None:
    compared = list(said(text))
    assert [one for one in compared if one[2] is not None and one[1] != one[2]] == []
