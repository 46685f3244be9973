"""`tolerates single faults in M`: against the judge on drawn drives, and as a user meets it."""

import contextlib
import json
import os
from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import NamedTuple

import pytest
from forms import outcome_schema
from judge.draws import draw
from judge.shorts import asked
from judge.stretched import stretched
from judge.stuck import places
from proofs import at_most, outcome_of
from reading import drive_of
from test_faults import INTERLOCKED, leg
from test_judged import SEEDS

from seqcheck.circuit import shorting_sets
from seqcheck.cli import main
from seqcheck.drive import Drive, ToleratesRule
from seqcheck.evidence.replay import NotPermitted, replay
from seqcheck.faults import Where
from seqcheck.hazards import Fault, Stuck
from seqcheck.messages import Problems
from seqcheck.proving import resting
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


# As a user meets it


IDLE = "    set UH off, UL off\n    wait {}\n"


def linted(tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, *more: str) -> tuple[int, str]:
    """The exit code of a lint, and its output."""
    (tmp_path / "t.dseq").write_text(text, encoding="utf-8")
    with contextlib.chdir(tmp_path):
        code = main(["lint", "t.dseq", *more])
    out, err = capsys.readouterr()
    assert err == ""
    return code, out


def ruled(rule: str, wait: str = "3 us", text: str | None = None, **more: str) -> str:
    """The leg, off within 3 us, left for idle with a wait, and a rule."""
    whole = (leg(**more) if text is None else text).replace("  up -> idle when stop", "  up, down -> idle when stop")
    return f"{whole}{IDLE.format(wait)}rules\n  {rule}\n"


def test_a_rule_is_exact(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A wait as long as the turn-off keeps it, one 1 ps shorter breaks it by 1 ps."""
    rule = "tolerates single faults in idle"
    code, out = linted(tmp_path, capsys, ruled(rule))
    assert code == 0
    assert "proven  1 shorting set and 2 shorts by a single fault: possible in no run\n" in out
    code, out = linted(tmp_path, capsys, ruled(rule, "2999999 ps"), "--as", "lines")
    assert code == 1
    assert out.splitlines() == [
        f"t.dseq:25:3: error: with {one}, or its pin, stuck on, P can be joined to N through {one} and {other} at rest "
        f"in idle, for at least 1 ps, against line 29; to cure it: what leads to idle must end with the turn-off of "
        f"{other}, and a wait of at least 3 us after it, which belongs to the move [single-fault]"
        for one, other in (("UH", "UL"), ("UL", "UH"))
    ]


def test_a_row_that_conducts_is_at_fault_itself(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, out = linted(tmp_path, capsys, ruled("tolerates single faults in any but idle, up"))
    assert code == 1
    assert out.startswith(
        """\
t.dseq  "leg"
UNSAFE: 1 counterexample, 2 hazards proven

SINGLE-FAULT  t.dseq:20:3
  with UH, or its pin, stuck on, P can be joined to N through UH and UL at rest
  in down, without end, against line 29.
  Row 'down' of the table (line 20) commands UL.
  To cure it: no wait cures this; row 'down' must leave UL off, or put another
  switch in series.

  The run. t = 0 is where line 24 begins (on lower: idle -> down), 10 us after
  the start.
"""
    )
    assert "proven  1 shorting set and 1 short by a single fault: possible in no run\n" in out


def test_a_switch_that_shorts_alone_is_tolerated_nowhere(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    more = {"more": "switch X from P to N", "names": " X", "pins": "X PC1 active high rests low"}
    code, out = linted(tmp_path, capsys, ruled("tolerates single faults in idle", **more), "--as", "lines")
    assert code == 1
    (line,) = out.splitlines()
    assert "with X, or its pin, stuck on, P can be joined to N through X at rest in idle, without end, against" in line
    assert line.endswith("to cure it: no mode tolerates this; put another switch in series [single-fault]")
    for form in ("json", "sarif", "vcd", "annotations", "screen"):
        assert linted(tmp_path, capsys, ruled("tolerates single faults in idle", **more), "--as", form)[0] == 1
    for command in (["report"], ["draw", "--trace", "single-fault"]):
        assert main([*command, str(tmp_path / "t.dseq")]) == 1


PASSING = """\
drive "a pin that an interlock sees"
writes together
stage
  rails P N
  switch A from P to X
  switch B from X to Z
  switch C from X to N
parts
  p on 1 us off 1 us
paths
  A B C through p
  interlock B C
modes  A    B    C
  idle off  off  off
  run  on   on   on
moves
  start idle
  idle -> run when go
  run -> idle when stop
rules
  tolerates single faults in run
"""


def test_a_pin_that_an_interlock_sees_is_a_fault_of_its_own(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """B and C on are both off by the interlock; with the pin of B stuck off it lets C through."""
    code, out = linted(tmp_path, capsys, PASSING, "--as", "json")
    assert code == 1
    (entry,) = json.loads(out)["files"]
    outcome_schema().validate(json.loads(out))
    unsafe = [one for one in entry["verdicts"] if one["verdict"] == "unsafe"]
    faults = [one["hazard"]["stuck"]["faults"] for one in unsafe]
    assert faults == [
        [{"switch": "B", "on": False, "pin": True}],
        [{"switch": "C", "on": True, "pin": False}],
        [{"switch": "C", "on": True, "pin": True}],  # C passes while B is off, and takes 1 us to be off with B on again
    ]
    found = unsafe[0]
    assert "with the pin of B stuck off, P can be joined to N through A and C at rest in run" in found["text"]
    writes = [write["switch"] for event in found["trace"]["events"] for write in event.get("writes", [])]
    assert set(writes) == {"A", "B", "C"}


def test_a_waiver_names_the_mode_the_leg_or_a_switch(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for name, left in (("down", 0), ("U", 0), ("UH", 0), ("UL", 0), ("up", 1)):
        rule = f'tolerates single faults in down\n  waive single-fault for {name} because "fused"'
        code, out = linted(tmp_path, capsys, ruled(rule), "--as", "lines")
        assert code == left
        assert ("; waived because: fused [single-fault]" in out) is not left


def test_what_a_limit_leaves_open_is_undecided(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Neither the rule nor its waiver is said to be in order."""
    rule = 'tolerates single faults in idle\n  waive single-fault for up because "fused"'
    code, out = linted(tmp_path, capsys, ruled(rule), "--as", "lines", "--most-zones", "1")
    assert code == 3
    assert "undecided, not proven: P to N through UH and UL at rest in idle with UH, or its pin, stuck on; the" in out
    assert "idle-waiver" not in out


def test_punctual_is_said_of_a_rule_too(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """UL takes 1 us to conduct, and row down lasts 400 ns: only a firmware that is late lets it come so far there."""
    text = leg().replace("up -> idle when stop", "up -> idle when stop\n  down -> idle after 200 ns to 400 ns")
    code, out = linted(tmp_path, capsys, f"{text}rules\n  tolerates single faults in down\n", "--as", "lines")
    assert code == 0
    assert "that P to N are not joined in down with UH stuck rests on firmware that is never late" in out


def test_what_a_rule_cannot_say(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for rule, said in (
        ("in up, up", "mode 'up' is named twice"),
        ("in reset", "nothing here uses the mode 'reset'"),
        ("in any but idle, up, down", "no mode is left to be asked for; name the modes [empty-origin]"),
        ("in ip", "unknown mode 'ip'; known are"),
        ("of up", "[syntax]"),
    ):
        (tmp_path / "t.dseq").write_text(ruled(f"tolerates single faults {rule}"), encoding="utf-8")
        assert main(["lint", str(tmp_path / "t.dseq")]) == 2
        assert said in capsys.readouterr().err


def test_a_rule_that_came_to_be_broken_is_worse(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for name, wait in (("old", "3 us"), ("new", "2 us")):
        (tmp_path / f"{name}.dseq").write_text(ruled("tolerates single faults in idle", wait), encoding="utf-8")
    with contextlib.chdir(tmp_path):
        assert main(["compare", "old.dseq", "new.dseq"]) == 1
        assert "2 findings against the rules came up" in " ".join(capsys.readouterr().out.split())
        assert main(["compare", "new.dseq", "old.dseq"]) == 0


def test_the_runs_can_be_drawn(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "t.dseq").write_text(ruled("tolerates single faults in down"), encoding="utf-8")
    with contextlib.chdir(tmp_path):
        assert main(["draw", "t.dseq", "--trace", "single-fault"]) == 1
        assert "UL" in capsys.readouterr().out
        assert main(["report", "t.dseq"]) == 1
        assert "stuck on" in capsys.readouterr().out


def unsafe_of(text: str) -> list[Unsafe]:
    found = outcome_of(text).verdicts
    return [one for one in found if isinstance(one, Unsafe)]


def test_the_replay_refuses_what_is_not_at_rest_in_the_mode() -> None:
    """Another mode, a beginning before the mode was entered, and an end after the switch is off."""
    text = ruled("tolerates single faults in idle", "2 us")
    drive, (found, _) = drive_of(text), unsafe_of(text)
    trace = found.trace
    assert trace.overlap_to == trace.overlap_from + 1_000_000
    assert replay(drive, trace).overlap == found.replayed.overlap
    other = replace(trace.hazard, asks=Stuck("up", found.hazard.asks.faults))  # type: ignore[union-attr]
    for wrong in (
        replace(trace, hazard=other),
        replace(trace, hazard=replace(trace.hazard, asks=None)),
        replace(trace, overlap_from=trace.overlap_from - 1),
        replace(trace, overlap_to=trace.overlap_to + 1, end=trace.end + 1),
        replace(trace, overlap_to=None),
    ):
        with pytest.raises(NotPermitted):
            replay(drive, wrong)


LATER = """\
drive "a row that acts later"
writes together
stage
  rails P N
  leg U UH UL
parts
  p on 1 us off 1 us
paths
  UH UL through p
carriers
  main 20 kHz duty 50 % updates within a period
modes  UH   UL
  idle off  off
  chop off  main
  hold off  on
moves
  start idle
  idle -> chop when go
  chop -> hold when seated
  hold -> idle when stop
rules
  tolerates single faults in hold
"""


def test_a_row_at_fault_is_looked_for_no_longer_than_it_is_worth(monkeypatch: pytest.MonkeyPatch) -> None:
    """In `hold` UL conducts first by its carrier, until the write of the row acts."""
    (found,) = unsafe_of(LATER)
    assert found.row == "hold"
    monkeypatch.setattr(resting, "MOST_MORE", 0)
    (found,) = unsafe_of(LATER)
    assert found.row is None
    assert found.hazard.asks == Stuck("hold", (Fault("UH", True, False), Fault("UH", True, True)))
