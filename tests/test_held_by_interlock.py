"""The warning `held-by-interlock` names the interlocks that matter, and no other."""

from collections.abc import Callable
from dataclasses import replace

import pytest
from judge.delays import delays_of
from judge.literal import Says, judge
from judge.shorts import asked
from proofs import at_most, leg, silent
from reading import drive_of

from seqcheck import checking
from seqcheck.drive import Drive, Interlock
from seqcheck.hazards import Hazard
from seqcheck.proving.prove import Prover
from seqcheck.proving.search import LimitReached
from seqcheck.verdict import Check, Finding, Safe

SWAP = "a on off off\nb off on off\nc off off on"
"""The leg of A and B, and a third switch C that is no part of a short."""


def leg_and_more(*locks: str, wait: int = 0, rows: str = SWAP) -> str:
    """A leg that swaps A for B too soon, with a switch C from its output to nowhere."""
    lines = "\n".join(f"interlock {one}" for one in locks)
    moves = f"  start a\n  a -> b when go\n    set A off\n    wait {wait} ps\n  a -> c when left\n  c -> a when back"
    text = leg(rows, moves, paths=f"A B C through p\n{lines}", columns="A B C")
    return text.replace("  leg U A B\n", "  leg U A B\n  switch C from U to Z\n")


def row_of_three(rows: str, moves: str, *locks: str) -> str:
    """Three switches in series between the rails."""
    lines = "".join(f"  interlock {one}\n" for one in locks)
    return (
        'drive "three"\nwrites together\nstage\n  rails P N\n  switch A from P to X\n  switch B from X to Y\n'
        "  switch C from Y to N\nparts\n  p on 2 ps to 3 ps off 4 ps to 7 ps\npaths\n  A B C through p\n"
        f"{lines}modes A B C\n{rows}\nmoves\n{moves}\n"
    )


def warned(text: str, observer: Callable[[int], None] = silent) -> list[Finding]:
    """The warnings of a safe drive."""
    outcome = checking.check(drive_of(text), "t.dseq", frozenset(), observer)
    assert all(isinstance(one, Safe) for one in outcome.verdicts)
    return [one for one in outcome.findings if one.check is Check.HELD_BY_INTERLOCK]


def comes(drive: Drive, kept: tuple[Interlock, ...]) -> bool:
    """Whether the judge finds the one hazard of a drive that has these interlocks only."""
    ((literals, forbids),) = asked(drive)
    held = replace(drive, interlocks=kept)
    verdict = judge(held, literals, delays_of(held, literals), interlocks=True, facts_forbid=forbids)
    assert verdict.says is not Says.GAVE_UP
    return verdict.says is not Says.SAFE


def line_of(text: str, words: str) -> int:
    return text[: text.index(words)].count("\n") + 1


def test_the_interlock_of_the_leg_is_named_not_the_first_of_the_file() -> None:
    """That of A and C stands first and prevents nothing."""
    text = leg_and_more("A C", "A B dead time 5 ps")
    (found,) = warned(text)
    line = line_of(text, "interlock A B")
    assert found.place.line == line
    assert found.text == f"the firmware would bring A and B together without the interlock of A and B (line {line})"


def test_an_interlock_that_prevents_nothing_is_not_warned_of() -> None:
    assert warned(leg_and_more("A C", "A B dead time 5 ps", wait=5)) == []


LINE = "i off off off\na on on off\nb off off on\nc on on on"
MOVES = "  start i\n  i -> a when x\n  a -> b when y"


@pytest.mark.parametrize(
    ("text", "named"),
    [
        # no row has all three on; the swap of A and B for C is too soon, and either interlock makes it late enough
        (row_of_three(LINE, MOVES, "B C dead time 5 ps", "A C dead time 5 ps"), {"B C", "A C"}),
        # the first is too short to help
        (row_of_three(LINE, MOVES, "B C dead time 4 ps", "A C dead time 5 ps"), {"A C"}),
        # row c has all three on: any pair that cannot be on together is enough, whatever its dead time
        (row_of_three(LINE, "  start i\n  i -> c when x", "A B", "B C", "A C"), {"A B", "B C", "A C"}),
        # each of two swaps is prevented by an interlock of its own, and both are needed
        (
            row_of_three(
                "i off off off\na off on on\nb on off on\nc on on off",
                "  start i\n  i -> a when x\n  a -> b when y\n  i -> b when z\n  b -> c when w\n  c -> i when v\n"
                "    set A off\n    wait 9 ps\n  b -> i when u\n    set A off\n    wait 9 ps",
                "A B dead time 5 ps",
                "B C dead time 5 ps",
            ),
            {"A B", "B C"},
        ),
    ],
)
def test_what_is_named_is_what_the_judge_finds_needed(text: str, named: set[str]) -> None:
    """Each one without which the short comes; where there is no such, some of which any is enough."""
    drive = drive_of(text)
    assert not comes(drive, drive.interlocks)
    assert comes(drive, ())
    (found,) = warned(text)
    locks = {f"{one.first} {one.second}": one for one in drive.interlocks}
    assert {name for name, one in locks.items() if f"(line {one.place.line})" in found.text} == named
    needed = {name for name, one in locks.items() if comes(drive, tuple(x for x in drive.interlocks if x is not one))}
    if needed:
        assert named == needed
        assert "without the interlock of" in found.text
    else:
        others = tuple(one for name, one in locks.items() if name not in named)
        assert comes(drive, others)
        assert not any(comes(drive, (*others, locks[name])) for name in named)
        assert found.text.endswith("any one of them is enough to prevent it")


def test_a_partner_outside_the_leg_can_be_what_prevents_it() -> None:
    """C is on whenever B would come too soon, so its interlock holds B back."""
    rows = "a on off on\nb off on on\nc off on off"
    moves = "  start a\n  a -> b when go\n  b -> c when later\n    wait 5 ps"
    text = leg(rows, moves, paths="A B C through p\ninterlock B C", columns="A B C")
    text = text.replace("  leg U A B\n", "  leg U A B\n  switch C from U to Z\n")
    (found,) = warned(text)
    assert f"of B and C (line {line_of(text, 'interlock B C')})" in found.text


@pytest.mark.parametrize(
    ("gives_up", "said"),
    [
        # without any interlock
        ({0}, "whether the firmware alone would bring A and B and C together is undecided"),
        # without one of them
        ({1}, "A and C (line {ac}); which of them is needed is undecided"),
        (set(), "A and C (line {ac}); any one of them is enough to prevent it"),
    ],
)
def test_a_limit_is_said(gives_up: set[int], said: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Where a limit ends a search nothing is claimed of it."""
    text = row_of_three(LINE, MOVES, "B C dead time 5 ps", "A C dead time 5 ps")
    holds = Prover.holds

    def limited(
        prover: Prover, hazard: Hazard, observer: Callable[[int], None], locks: tuple[Interlock, ...]
    ) -> bool:
        if len(locks) in gives_up:
            raise LimitReached("made up for a test")
        return holds(prover, hazard, observer, locks)

    monkeypatch.setattr(Prover, "holds", limited)
    (found,) = warned(text)
    assert found.text.endswith(said.format(ac=line_of(text, "interlock A C")))


def test_limits_hold_for_it_too() -> None:
    """However low the limit: no fault, and nothing said that is not so."""
    text = leg_and_more("A C", "A B dead time 5 ps")
    needed = f"the interlock of A and B (line {line_of(text, 'interlock A B')})"
    for zones in range(1, 40):
        outcome = checking.check(drive_of(text), "t.dseq", frozenset(), at_most(zones))
        said = [one.text for one in outcome.findings if one.check is Check.HELD_BY_INTERLOCK]
        assert all("undecided" in one or needed in one for one in said), zones
