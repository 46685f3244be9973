"""Rules about lengths: each proven and refuted at its limit, replayed, and refused where a claim is not so."""

from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import pytest
from proofs import leg, outcome_of
from reading import drive_of

from seqcheck.cli import main
from seqcheck.evidence.replay import NotPermitted, replay
from seqcheck.hazards import Following
from seqcheck.verdict import Check, Safe, Unsafe

ROWS = "a on off\nb off off"
MOVES = "  start b\n  b -> a when go earliest 20 ps\n  a -> b after 30 ps to 50 ps\n"


def verdicts(rule: str, **more: str) -> list[Safe | Unsafe]:
    """What is said of the rule, the last thing asked."""
    found = outcome_of(_text(rule, **more)).verdicts
    said = [one for one in found if one.hazard.asks is not None]
    assert all(isinstance(one, Safe | Unsafe) for one in said)
    return said  # type: ignore[return-value]


def _text(rule: str, rows: str = ROWS, moves: str = MOVES, **more: str) -> str:
    return f"{leg(rows, moves, **more)}rules\n  {rule}\n"


KEPT_AND_BROKEN = (
    ("A on at most 50 ps", "A on at most 49 ps", Check.LONG_ON, 1),
    ("A on at least 30 ps", "A on at least 31 ps", Check.SHORT_PULSE, 1),
    ("A off at least 20 ps", "A off at least 25 ps", Check.SHORT_PULSE, 5),
)


@pytest.mark.parametrize(("kept", "broken", "check", "by"), KEPT_AND_BROKEN)
def test_a_rule_is_exact(kept: str, broken: str, check: Check, by: int) -> None:
    """At its limit it is kept, one step beyond it is broken by as much."""
    assert [type(one) for one in verdicts(kept)] == [Safe]
    (found,) = verdicts(broken)
    assert isinstance(found, Unsafe)
    assert (found.check, found.overlap, found.greatest) == (check, by, True)


def test_modes_apart_are_judged_both_ways() -> None:
    """From leaving a to entering b no time passes; from leaving b to entering a none does either."""
    found = verdicts("a and b at least 1 ps apart")
    assert [(type(one), one.hazard.asks) for one in found] == [
        (Unsafe, Following("a", "b", 1)),
        (Unsafe, Following("b", "a", 1)),
    ]


def test_modes_apart_count_from_the_beginning_of_the_move() -> None:
    moves = "  start b\n  b -> a when go\n    wait 9 ps\n  a -> b after 30 ps\n    wait 12 ps\n"
    assert [type(one) for one in verdicts("a and b at least 9 ps apart", moves=moves)] == [Safe, Safe]
    assert [type(one) for one in verdicts("a and b at least 10 ps apart", moves=moves)] == [Safe, Unsafe]


def test_what_began_before_time_0_is_no_pulse_but_counts_from_there_as_long() -> None:
    moves = "  start a\n  a -> b when go latest 5 ps\n  b -> a after 40 ps\n  a -> b after 100 ps\n"
    assert [type(one) for one in verdicts("A on at most 100 ps", moves=moves)] == [Safe]
    assert [type(one) for one in verdicts("A on at most 99 ps", moves=moves)] == [Unsafe]
    held = "  start a\n  a -> b after 5 ps\n"
    assert [type(one) for one in verdicts("A on at least 9 ps", moves=held)] == [Safe]


def test_a_pulse_of_no_length_is_a_pulse_and_breaks_nothing() -> None:
    rows = "a on off\nb on off"
    moves = "  start a\n  a -> b after 10 ps\n    set A off\n  b -> a after 10 ps\n"
    (short,) = verdicts("A off at least 1 ps", rows=rows, moves=moves)
    assert isinstance(short, Unsafe)
    assert short.trace.overlap_from == short.trace.overlap_to
    (long,) = verdicts("A on at most 100 ps", rows=rows, moves=moves)
    assert isinstance(long, Unsafe)
    assert long.overlap is None


def test_a_pin_that_floats_is_a_pulse() -> None:
    pins = "pins\n  A P0 active high rests unknown\n  B P1 active high rests low"
    moves = "  start b\n  b -> a when go earliest 20 ps\n  a -> b after 30 ps\n  a -> reset when r\n  reset -> b when s"
    for rule in ("A on at least 10 ps", "A off at least 10 ps"):
        (found,) = verdicts(rule, moves=moves, more=pins)
        assert isinstance(found, Unsafe)
        assert found.overlap == 10


TRIPS = "  stop from a -> b within 6 ps"


@pytest.mark.parametrize(
    ("trips", "latest"),
    [(TRIPS, 13), ("  stop from a -> b at once", 7), ("  stop from a -> b", 7)],
)
def test_a_trip_clears_in_time_from_its_arrival(trips: str, latest: int) -> None:
    """Taken at the last moment, and off 7 ps later: the arrival counts, not the taking."""
    moves = "  start b\n  b -> a when go\n  a -> b when done\n"
    kept, broken = (
        verdicts(f"stop clears A B within {most} ps", moves=moves, trips=trips) for most in (latest, latest - 1)
    )
    assert [type(one) for one in kept] == [Safe, Safe]
    assert [(type(one), one.hazard.literals[0].switch) for one in broken] == [(Unsafe, "A"), (Safe, "B")]
    assert isinstance(broken[0], Unsafe)
    assert (broken[0].check, broken[0].overlap) == (Check.LATE_TRIP, 1)


def test_a_trip_that_waits_for_an_unbroken_move_has_arrived() -> None:
    """It may arrive as the move begins: 40 ps of it, 6 ps in hand, and 7 ps to turn off."""
    moves = "  start b\n  b -> a when go unbroken\n    set A on\n    wait 40 ps\n  a -> b when done\n"
    trips = "  stop from a, b -> b within 6 ps".replace("a, b", "any")
    assert [type(one) for one in verdicts("stop clears A within 53 ps", moves=moves, trips=trips)] == [Safe]
    assert [type(one) for one in verdicts("stop clears A within 52 ps", moves=moves, trips=trips)] == [Unsafe]


def test_a_bootstrap_supply() -> None:
    """t_on_max = (C·dV − Q_gate − Q_ls) / I_total, the charge balance of Fairchild AN-6076 (derived from it): 225 us
    for 100 nF, 1.0 V, 50 nC, 5 nC and 200 uA. A high side that stays on in a row breaks it; one that is turned off in
    time does not."""
    microseconds = (100 * Fraction(1) - 50 - 5) * 1000 / 200
    assert microseconds == 225
    steady = "  start b\n  b -> a when go earliest 1 us\n  a -> b when stop\n"  # a break of no length is none
    (found,) = verdicts(f"A on at most {microseconds} us", moves=steady)
    assert isinstance(found, Unsafe)
    assert (found.check, found.overlap, found.row or found.place.line > 0) == (Check.LONG_ON, None, "a")
    bounded = steady.replace("  a -> b when stop", "  a -> b after 225 us")
    assert [type(one) for one in verdicts(f"A on at most {microseconds} us", moves=bounded)] == [Safe]


CLAIMS = (
    "A on at most 49 ps",
    "A on at least 31 ps",
    "A off at least 25 ps",
    "a and b at least 1 ps apart",
    "stop clears A within 9 ps",
)


@pytest.mark.parametrize("rule", CLAIMS)
def test_a_claim_that_is_not_so_is_refused(rule: str) -> None:
    """The run replays; the same run with another stretch or with a limit that it keeps does not."""
    text = _text(rule, trips=TRIPS)
    found = next(one for one in outcome_of(text).verdicts if isinstance(one, Unsafe))
    drive, trace = drive_of(text), found.trace
    replay(drive, trace)
    with pytest.raises(NotPermitted):
        replay(drive, replace(trace, overlap_from=trace.overlap_from - 1))
    asks = trace.hazard.asks
    assert asks is not None
    kept = asks.limit - 40 if found.check in (Check.SHORT_PULSE, Check.TOO_SOON) else asks.limit + 40
    with pytest.raises(NotPermitted):
        replay(drive, replace(trace, hazard=replace(trace.hazard, asks=replace(asks, limit=kept))))


def test_evidence_says_which_rules_it_is_not_about(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """An audit claims no more than it checks: a rule about single faults is named."""
    monkeypatch.chdir(tmp_path)
    text = _text('A on at most 50 ps\n  waive single-fault for a because "a fuse"\n  tolerates single faults in a')
    Path("x.dseq").write_text(text, encoding="utf-8")
    assert main(["lint", "--as", "lines", "--evidence", "proofs", "x.dseq"]) == 0
    capsys.readouterr()
    assert main(["audit", "x.dseq", "proofs/x.dseq.json"]) == 0
    line = len(text.splitlines())
    assert capsys.readouterr().out.endswith(f"; it says nothing of the rule in line {line}\n")
