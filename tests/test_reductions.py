"""What makes proofs short changes no answer: each reduction left out, verdict, overlap, lateness and margins agree."""

from collections import Counter
from collections.abc import Iterator

import pytest
from judge.draws import draw, flowing
from judge.stretched import stretched
from proofs import at_most, leg, silent
from reading import drive_of, vent

from seqcheck.circuit import opening_sets, shorting_sets
from seqcheck.cli import main
from seqcheck.drive import Drive
from seqcheck.proving.prove import Gap, Proven, Prover
from seqcheck.proving.reductions import Reduction
from seqcheck.proving.search import LimitReached

SEEDS = (11, 23, 39, 45, 60, 81, 94, 105, 119, 144, 158, 166, 184, 196, 205, 256)
FLOWING = (3, 7, 10, 16, 20, 24, 32, 40)
STRETCHED = (26, 52, 86, 118)
ZONES = 3_000

Answer = tuple[object, ...]


def answers(drive: Drive, without: frozenset[Reduction]) -> Iterator[Answer | None]:
    """What is said of every hazard: None where a limit was reached, or no longest overlap is known."""
    prover = Prover(drive, without=without)
    for hazard in (*shorting_sets(drive.stage), *opening_sets(drive.stage)):
        try:
            proof = prover.prove(hazard, True, at_most(ZONES))
        except LimitReached:
            yield None
            continue
        if isinstance(proof, Proven):
            gaps = [prover.gap(hazard, place, at_most(ZONES)) for place in range(len(hazard.literals))]
            yield "safe", proof.however_late, [_margin(gap) for gap in gaps]
        elif proof.greatest:
            begun = sum(event.act.value == "begins" for event in proof.trace.events)
            yield "unsafe", proof.overlap, proof.held is not None, begun if proof.held is None else None
        else:
            yield None


def _margin(gap: Gap) -> object:
    return "limit" if gap.limit else gap.time


def _agree(text: str, reduction: Reduction) -> int:
    """How many answers could be held against each other."""
    drive = drive_of(text)
    pairs = list(zip(answers(drive, frozenset()), answers(drive, frozenset({reduction})), strict=True))
    known = [pair for pair in pairs if None not in pair and "limit" not in str(pair)]
    assert [one for one, _ in known] == [other for _, other in known]
    return len(known)


@pytest.mark.parametrize("reduction", Reduction)
def test_drawn_drives_get_the_same_answers(reduction: Reduction) -> None:
    """Nearly all are decided both ways."""
    texts = [*map(draw, SEEDS), *map(flowing, FLOWING)]
    assert sum(_agree(text, reduction) for text in texts) >= 30


@pytest.mark.parametrize("reduction", Reduction)
@pytest.mark.parametrize("seed", STRETCHED)
def test_drives_with_long_stays_get_the_same_answers(reduction: Reduction, seed: int) -> None:
    """Here stays are cut."""
    text = stretched(seed)
    assert text is not None
    _agree(text, reduction)


LONG = leg(
    "i off off\n u c off\n w off on",
    "  start i\n  i -> u when go\n  u -> i when stop\n    set A off\n    wait 5 ps\n"
    "  u -> w when down\n    set A off\n    wait 5 ps\n  w -> i after at least 4 us\n    set B off\n    wait 40 ps",
    more="carriers\n  c 50 GHz duty 20 % to 80 %",
    trips="  hot from u -> i within 30 ps\n    set all off\n    wait 10 ps",
)
"""A leg with a carrier and a long stay, into which a trip can be carried in hand."""


@pytest.mark.parametrize("reduction", Reduction)
def test_each_one_is_worth_something(reduction: Reduction) -> None:
    """Left out, some proof stores more zones; with it none is longer by more than what it tries in vain."""
    texts = [LONG.replace("4 us", "4 ns"), vent(), vent(("wait settle", "wait 5 us")), draw(45), draw(196)]
    zones: Counter[bool] = Counter()
    for drive in map(drive_of, texts):
        for left_out in (False, True):
            prover = Prover(drive, without=frozenset({reduction} if left_out else ()))
            for hazard in shorting_sets(drive.stage):
                zones[left_out] += prover.prove(hazard, True, at_most(60_000)).zones
    assert zones[True] > zones[False]


def test_a_stay_is_cut_with_a_trip_in_hand_too() -> None:
    """200 000 cycles of the carrier fit into it; they are not gone through one by one."""
    drive = drive_of(LONG)
    (hazard,) = shorting_sets(drive.stage)
    prover = Prover(drive, without=frozenset({Reduction.SCREEN, Reduction.FORGET}))
    assert prover.prove(hazard, True, silent).zones < 2_000


def test_the_command_line_leaves_them_out(capsys: pytest.CaptureFixture[str]) -> None:
    """By their names, which are no part of the help."""
    assert main(["lint", "--without", "scren", "x.dseq"]) == 2
    assert "--without scren: there is no such reduction; did you mean 'screen'?" in capsys.readouterr().err
    assert main(["lint", "--help"]) == 0
    assert "--without" not in capsys.readouterr().out
    assert main(["lint", "samples/vent.dseq"]) == 0
    assert "least times" in capsys.readouterr().out
    names = [word for one in Reduction for word in ("--without", one.value) if one is not Reduction.CUT]
    assert main(["lint", *names, "samples/vent.dseq"]) == 0
    assert "least times" not in capsys.readouterr().out
