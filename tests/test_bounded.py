"""The prover against a solver that looks at all runs of few moves at once: nothing shared but the checked model."""

from random import Random

import pytest
from judge.bounded import greatest_overlap
from proofs import ENDLESS, SAFE, Answer, answer, leg
from reading import drive_of
from test_campaign_judged import chunks, named

ROWS = "ma off on\nmb on off"
OFF_WAIT_ON = "start ma\nma -> mb when go\n  set all off\n  wait {} ps\nmb -> ma when back\n  set all off\n  wait 9 ps"


def bounded(text: str, moves: int) -> Answer:
    """The solver's answer in the words of the prover's."""
    found = greatest_overlap(drive_of(text), moves)
    return SAFE if found == 0 else found


def rank(found: Answer) -> float:
    return {SAFE: 0.0, ENDLESS: float("inf")}[found] if isinstance(found, str) else float(found)


BACK = "ma -> mb when go earliest 20 ps\nmb -> ma when back earliest 20 ps"
ROUND = f"start ma\n{BACK}"


@pytest.mark.parametrize(
    ("rows", "moves", "head", "enough", "expected"),
    [
        (ROWS, OFF_WAIT_ON.format(5), "writes together", 3, SAFE),
        (ROWS, OFF_WAIT_ON.format(4), "writes together", 1, 1),
        (ROWS, OFF_WAIT_ON.format(0), "writes together", 1, 5),
        (ROWS, OFF_WAIT_ON.format("3 ps to 9"), "writes together", 1, 2),
        (ROWS, OFF_WAIT_ON.format(5), "clock 1 GHz, late by at most 3 ps\nwrites together", 3, SAFE),
        # On at 0, the other off at 2: possible from 2 to 9.
        (ROWS, ROUND, "writes one at a time, 2 ps apart, turn-ons first", 1, 7),
        (ROWS, ROUND, "writes one at a time, 5 ps apart, turn-offs first", 2, SAFE),
        (ROWS, ROUND, "writes one at a time, 5 ps apart", 1, 10),
        (ROWS, ROUND, "writes one at a time, 5 ps apart, in table order", 1, 10),
        # A late second write adds to it.
        (ROWS, ROUND, "clock 1 GHz, late by at most 3 ps\nwrites one at a time, 5 ps apart", 1, 13),
        # A row that holds both.
        ("ma off on\nmb on on", ROUND, "writes together", 1, ENDLESS),
        # The same for 4 ps to 6 ps: 6, 2 less for the turn-on, 7 more for the turn-off.
        (
            "ma off on\nmb on on",
            "start ma\nma -> mb when go earliest 20 ps\nmb -> ma after 4 ps to 6 ps",
            "writes together", 2, 11,
        ),
        # It takes two moves: the first turns one switch off, the second the other one on, 3 ps later.
        (
            "ma off on\nmb off off\nmc on off",
            "start ma\nma -> mb when go\nmb -> mc when more earliest 3 ps\n"
            "mc -> ma when back\n  set all off\n  wait 8 ps",
            "writes together", 2, 2,
        ),
    ],
)  # fmt: skip
def test_by_hand(rows: str, moves: str, head: str, enough: int, expected: Answer) -> None:
    """Prover and solver find what was worked out by hand, the solver in no fewer moves than are needed."""
    text = leg(rows, moves, head=head)
    assert answer(text) == expected
    assert bounded(text, enough) == expected
    if expected != SAFE:
        assert rank(bounded(text, enough - 1)) < rank(expected)


def drawn(seed: int) -> str:
    """A small drive of one leg without carriers, pins and trips."""
    rng = Random(seed)
    modes = ["ma", "mb", "mc"][: rng.choice((2, 2, 3))]
    pairs = ("off on", "on off", "off off", "off on", "on off", "on on", "keep off", "off keep")
    rows = [f"ma {rng.choice(pairs[:3])}"] + [f"{mode} {rng.choice(pairs)}" for mode in modes[1:]]
    moves = ["start ma"]
    for k, mode in enumerate(modes):
        target = modes[(k + 1) % len(modes)]
        after = f" after {rng.randint(1, 5)} ps to {rng.randint(5, 7)} ps"
        when = f" when e{k}" + rng.choice(("", f" earliest {rng.randint(1, 6)} ps", f" latest {rng.randint(3, 6)} ps"))
        moves.append(f"{mode} -> {target}{rng.choice((when, when, after))}")
        moves += _steps(rng)
    order = rng.choice(("", ", turn-offs first", ", turn-ons first", ", in table order"))
    gap = rng.choice(("1 ps", "0 ps to 2 ps", "3 ps", "at least 1 ps"))
    late = rng.choice(("", "", "clock 1 GHz, late by at most 2 ps\n"))
    loop = rng.choice(("", "", "\nloop at least 2 ps"))
    head = late + rng.choice(("writes together", f"writes one at a time, {gap} apart{order}")) + loop
    on, off = rng.randint(0, 4), rng.randint(0, 4)
    part = f"p on {on} ps to {on + 1} ps off {off} ps to {off + rng.randint(0, 2)} ps"
    return leg("\n".join(rows), "\n".join(moves), head=head, parts=part)


def _steps(rng: Random) -> list[str]:
    pause = f"  wait {rng.randint(0, 4)} ps" + rng.choice(("", " to 5 ps"))
    pulse = [f"  set {rng.choice('AB')} on", f"  wait up to {rng.randint(0, 3)} ps", "  set all off", pause]
    return rng.choice(([], ["  set all off", pause], ["  set all off", pause], [pause], pulse))


def wrong(seed: int) -> str:
    """What is wrong with prover and solver on one draw; empty if nothing.

    In few moves no more is found than is proven, in more no less than in fewer, and at last the same. An overlap that
    is without end by going round and round grows with every round.
    """
    text = drawn(seed)
    proven = rank(answer(text))
    found = [rank(bounded(text, moves)) for moves in (1, 3, 5)]
    agree = found[2] == proven or (proven == float("inf") and found[1] < found[2])
    return "" if agree and found == sorted(found) else f"drawn({seed}): proven {proven}, found {found}\n{text}"


@pytest.mark.parametrize("seed", range(60))
def test_drawn(seed: int) -> None:
    """Prover and solver agree on a draw."""
    assert wrong(seed) == ""


def test_draws_are_safe_and_unsafe() -> None:
    """All three answers come up often enough to say something."""
    answers = [answer(drawn(seed)) for seed in range(60)]
    assert answers.count(SAFE) >= 10
    assert answers.count(ENDLESS) >= 5
    assert len({one for one in answers if isinstance(one, int)}) >= 4


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_many_drawn(seeds: range) -> None:
    """Prover and solver agree on every draw."""
    assert [one for one in map(wrong, seeds) if one] == []
