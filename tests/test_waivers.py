"""`waive`: what it lets pass is shown with its reason and counts no more; what matches nothing is a finding itself."""

from pathlib import Path

import pytest
from proofs import leg, outcome_of

from seqcheck.cli import main
from seqcheck.verdict import Check

LATCH = leg(
    "a on off\nb off on",
    "  start a\n  a -> b when go\n    set A off\n    wait {} ps",
    head="clock 1 GHz, late by at most 0 ps\nwrites together",
)


def lint(tmp_path: Path, text: str, *more: str, code: int, capsys: pytest.CaptureFixture[str]) -> str:
    """What lint says of a text."""
    file = tmp_path / "x.dseq"
    file.write_text(text, encoding="utf-8")
    assert main(["lint", str(file), *more]) == code
    said = capsys.readouterr()
    assert said.err == ""
    return said.out.replace(str(file), "x.dseq")


WAIVED = "rules\n  waive no-way-back for b because \"a person frees it\"\n"


def test_what_is_waived_counts_no_more_but_is_shown(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert "not in order" in lint(tmp_path, LATCH.format(5), code=1, capsys=capsys)
    said = lint(tmp_path, LATCH.format(5) + WAIVED, code=0, capsys=capsys)
    assert "waived no-way-back  x.dseq:13:3" in said
    assert "Waived because: a person frees it." in said
    assert "proven but for what is waived: x.dseq: 1 hazard proven, 1 finding waived" in said
    assert lint(tmp_path, LATCH.format(5) + WAIVED, "--as", "lines", code=0, capsys=capsys) == (
        "x.dseq:13:3: note: mode 'b' has no way back to the start 'a': nothing can follow it; waived because: a person "
        "frees it [no-way-back]\n"
    )


@pytest.mark.parametrize(("name", "passes"), [("U", True), ("A", True), ("B", True), ("go", True), ("a", False)])
def test_a_waived_overlap(name: str, passes: bool, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """By the leg of its two switches, by either switch, or by the event of its move; a waiver that misses is idle."""
    text = f'{LATCH.format(4)}{WAIVED}  waive overlap for {name} because "a bench fuse opens first"\n'
    said = lint(tmp_path, text, "--as", "lines", code=0 if passes else 1, capsys=capsys)
    assert ("; waived because: a bench fuse opens first [overlap]" in said) is passes
    assert ("[idle-waiver]" in said) is not passes


def test_only_does_not_make_a_waiver_idle(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = LATCH.format(5) + WAIVED
    assert lint(tmp_path, text, "--only", "idle-waiver", "--as", "lines", code=0, capsys=capsys) == ""
    assert lint(tmp_path, LATCH.format(5), "--only", "ambiguous", "--as", "lines", code=0, capsys=capsys) == ""
    said = lint(tmp_path, LATCH.format(5), "--only", "no-way-back", "--as", "lines", code=1, capsys=capsys)
    assert said.endswith("[no-way-back]\n")
    idle = WAIVED.replace("for b", "for a")
    said = lint(tmp_path, LATCH.format(5) + idle, "--only", "idle-waiver", "--as", "lines", code=1, capsys=capsys)
    assert said == (
        "x.dseq:20:3: error: this waiver matches nothing: there is no 'no-way-back' that names 'a'; take it out, or "
        "name what the finding names [idle-waiver]\n"
    )


def test_no_waiver_lets_an_idle_waiver_pass(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = LATCH.format(5) + WAIVED
    text += '  waive short for U because "x"\n  waive idle-waiver for U because "x"\n'
    said = lint(tmp_path, text, "--as", "lines", code=1, capsys=capsys)
    assert [line.split(":")[1] for line in said.splitlines() if "[idle-waiver]" in line] == ["21", "22"]


def test_a_hazard_that_is_undecided_may_yet_need_its_waiver(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = f'{LATCH.format(4)}{WAIVED}  waive overlap for U because "x"\n  waive stalled for a because "x"\n'
    said = lint(tmp_path, text, "--as", "lines", "--most-zones", "1", code=1, capsys=capsys)
    assert "undecided, not proven" in said
    assert [line.split(":")[1] for line in said.splitlines() if "[idle-waiver]" in line] == ["22"]


def test_warnings_can_be_waived_by_switch_and_by_leg() -> None:
    text = LATCH.format(5).replace(", late by at most 0 ps", "").replace("paths\n  A B through p\n", "")
    found = {one.check: one for one in outcome_of(text).findings}
    assert {Check.NO_PATH, Check.NO_WAY_BACK} <= set(found)
    waivers = 'rules\n  waive no-path for A because "x"\n  waive no-path for B because "x"\n' + WAIVED[6:]
    findings = outcome_of(text + waivers).findings
    assert Check.IDLE_WAIVER not in {one.check for one in findings}
