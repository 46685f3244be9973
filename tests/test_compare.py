"""`seqcheck compare` as a reviewer meets it."""

import contextlib
import io
import re
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from seqcheck import margins
from seqcheck.checking import check
from seqcheck.cli import main
from seqcheck.commands import compare
from seqcheck.drive import Drive
from seqcheck.proving.search import LimitReached
from seqcheck.verdict import Check, Outcome

SAMPLES = Path(__file__).parent.parent / "samples"
VENT = re.sub(r"(?<=\S) +", " ", (SAMPLES / "vent.dseq").read_text(encoding="utf-8"))
VENT = VENT.replace("open main off", "open on off").replace("off on main off", "off on on off")
"""The vent with one blank between words, and without modulation, which is quick to prove."""
Capture = pytest.CaptureFixture[str]


def compared(tmp_path: Path, capsys: Capture, old: str, new: str, *more: str) -> tuple[int, str]:
    """The exit code and output for two texts."""
    for name, text in (("old.dseq", old), ("new.dseq", new)):
        (tmp_path / name).write_text(text, encoding="utf-8")
    with contextlib.chdir(tmp_path):
        code = main(["compare", "old.dseq", "new.dseq", *more])
    out, err = capsys.readouterr()
    assert err == ""
    return code, out


def flat(out: str) -> str:
    """The output with what was wrapped on one line again."""
    return out.replace("\n    ", " ")


def changed(text: str, *changes: tuple[str, str]) -> str:
    """The text with others in place of some of its own."""
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new)
    return text


def test_a_hazard_that_became_possible(tmp_path: Path, capsys: Capture) -> None:
    code, out = compared(tmp_path, capsys, VENT, changed(VENT, ("wait settle", "wait 10 us")))
    assert code == 1
    assert out == """\
old.dseq => new.dseq  "Roof vent, 24 V brushed motor"
WORSE: 2 hazards became possible.
Changed: 1 move and 1 trip.

became possible
  OVERLAP  new.dseq:49:3
    P can be joined to N through UH and UL, for up to 709.01 ns. Proven before.
    The run: on boot: reset -> idle (line 46); on open_cmd: idle -> open (line
    47); on reverse_cmd: open -> close (line 49).
    To cure it: make both waits of this length at least 10.7161 us (709.01 ns
    missing at new.dseq:51:5).
  OVERLAP  new.dseq:49:3
    P can be joined to N through VH and VL, for up to 709.01 ns. Proven before.
    The run: on boot: reset -> idle (line 46); on open_cmd: idle -> open (line
    47); on reverse_cmd: open -> close (line 49).
    To cure it: make both waits of this length at least 10.7161 us (709.01 ns
    missing at new.dseq:51:5).

what the file says
  move open -> close when reverse_cmd (line 49): step 2 wait 16 us => wait
    10 us
  trip gust (line 61): step 2 wait 16 us => wait 10 us

A proof is about the file, not about the board.
"""


def test_margins_that_moved(tmp_path: Path, capsys: Capture) -> None:
    """16 us less 1 % and 12 us less 1 % differ by 3.960396 us, of 5.231584 us that were left (MEANING, 5.3)."""
    code, out = compared(tmp_path, capsys, VENT, changed(VENT, ("wait settle", "wait 12 us")))
    assert code == 0
    assert out.splitlines()[1] == "less left: no hazard became possible; 3 margins shrank by up to 3.960396 us."
    assert "after UH can conduct no more: shrank by\n    3.960396 us, 5.231584 us => 1.271188 us" in out
    code, out = compared(tmp_path, capsys, changed(VENT, ("wait settle", "wait 12 us")), VENT)
    assert code == 0
    assert out.splitlines()[1] == "not worse: no hazard became possible; 3 margins grew by up to 3.960396 us."


def test_a_margin_that_a_rule_asks_for(tmp_path: Path, capsys: Capture) -> None:
    """5.231584 us are left; 6 us are asked for."""
    text = "rules\n  margin at least {} us\n"
    code, out = compared(tmp_path, capsys, VENT + text.format(5), VENT + text.format(6))
    assert code == 1
    assert out.splitlines()[1] == "WORSE: 3 findings against the rules came up; no hazard became possible."
    assert "THIN-MARGIN" in out
    assert "Kept before, or not asked for." in flat(out)
    code, out = compared(tmp_path, capsys, VENT + text.format(6), VENT + text.format(5))
    assert code == 0
    assert "P to N through UH and UL: a rule, kept now, or no longer asked for" in flat(out)
    code, out = compared(tmp_path, capsys, VENT + text.format(6), VENT + text.format(7))
    assert code == 0
    assert "768.416 ns sooner than the margin of 6 us lets it" in flat(out)
    assert "1.768416 us sooner than the margin of 7 us lets it" in flat(out)


def test_a_rule_about_a_length(tmp_path: Path, capsys: Capture) -> None:
    """A limit that changes is the same rule; in row brake UL is on for 2 s less 1 % at least."""
    text = "rules\n  UL on at most {}\n"
    code, out = compared(tmp_path, capsys, VENT, VENT + text.format("1 s"))
    assert code == 1
    assert out.splitlines()[1].startswith("WORSE: 1 finding against the rules came up; no hazard became possible")
    assert "LONG-ON" in out
    assert "Not asked for before." in flat(out)
    code, out = compared(tmp_path, capsys, VENT + text.format("1 s"), VENT + text.format("500 ms"))
    assert code == 0
    assert "rule UL on at most (line 66): time 1 s => 500 ms\n" in out
    code, out = compared(tmp_path, capsys, VENT + text.format("1 s"), VENT)
    assert code == 0
    assert "a rule, kept now, or no longer asked for" in out


def test_what_is_proven_now_and_what_is_the_same(tmp_path: Path, capsys: Capture) -> None:
    short = changed(VENT, ("wait settle", "wait 10 us"))
    code, out = compared(tmp_path, capsys, short, VENT)
    assert code == 0
    assert out.splitlines()[1:3] == [
        "not worse: 2 hazards proven now; no hazard became possible.",
        "Changed: 1 move and 1 trip.",
    ]
    code, out = compared(tmp_path, capsys, VENT, VENT.replace("\n\n", "\n"))
    assert code == 0
    assert out.splitlines()[2] == "Both files mean the same."
    assert "what the file says" not in out


def test_what_was_possible_before_is_no_change(tmp_path: Path, capsys: Capture) -> None:
    """An overlap that grew is told, and is no exit code 1; the same one is told as well."""
    short, shorter = (changed(VENT, ("wait settle", f"wait {time} us")) for time in (10, 9))
    code, out = compared(tmp_path, capsys, short, shorter)
    assert code == 0
    first = out.splitlines()[1]
    assert first.startswith("less left: 2 hazards still possible; no hazard became possible; 2 overlaps grew")
    assert "the overlap grew, 709.01 ns => 1.699109 us" in flat(out)
    code, out = compared(tmp_path, capsys, shorter, short)
    assert "2 overlaps\nshrank by up to 990.099 ns." in out
    code, out = compared(tmp_path, capsys, short, changed(short, ("earliest 2 ms", "earliest 3 ms")))
    assert code == 0
    assert "for up to 709.01 ns as before" in flat(out)


def test_an_overlap_that_became_a_short_is_worse(tmp_path: Path, capsys: Capture) -> None:
    short = changed(VENT, ("wait settle", "wait 10 us"))
    row = "  open on off off on means drive U to V"
    code, out = compared(tmp_path, capsys, short, changed(short, (row, "  open on on off on")))
    assert code == 1
    assert "SHORT" in out
    assert "'overlap' before." in out


def test_findings_come_and_go(tmp_path: Path, capsys: Capture) -> None:
    stuck = changed(VENT, ("  brake -> idle after 2 s\n", ""), ("from any -> idle ", "from open -> idle "))
    stuck = changed(stuck, ("  watchdog from any -> reset", "  watchdog from any but brake -> reset"))
    code, out = compared(tmp_path, capsys, VENT, stuck)
    assert code == 1
    assert out.splitlines()[1].startswith("WORSE: 1 finding came up; no hazard became possible")
    assert "findings that came up\n  no-way-back  new.dseq:41:3\n" in out
    assert "can no longer be entered\n  brake -> idle (after a time or trip overcurrent)\n" in out
    code, out = compared(tmp_path, capsys, stuck, VENT)
    assert code == 0
    assert "findings that went away\n  no-way-back: mode 'brake' has no way back" in out
    waived = stuck + 'rules\n  waive no-way-back for brake because "held by hand"\n'
    code, out = compared(tmp_path, capsys, VENT, waived)
    assert code == 0
    assert "  waived no-way-back  new.dseq" in out
    assert "Waived because: held by hand." in out
    code, out = compared(tmp_path, capsys, waived, stuck)
    assert code == 1
    assert "removed: waiver no-way-back for brake" in out


def test_a_waiver_decides_whether_a_hazard_counts(tmp_path: Path, capsys: Capture) -> None:
    short = changed(VENT, ("wait settle", "wait 10 us"))
    waived = f'{short}rules\n  waive overlap for U because "a fuse"\n  waive overlap for V because "a fuse"\n'
    code, out = compared(tmp_path, capsys, VENT, waived)
    assert code == 0
    assert "  waived OVERLAP" in out
    assert "no hazard became possible" in out.splitlines()[1]
    code, out = compared(tmp_path, capsys, waived, short)
    assert code == 1
    assert "Waived before." in out


def test_undecided_is_never_as_before(tmp_path: Path, capsys: Capture) -> None:
    fan = (SAMPLES / "fan.dseq").read_text(encoding="utf-8")
    code, out = compared(tmp_path, capsys, fan, changed(fan, ("Circulation fan", "Fan")), "--most-zones", "40")
    assert code == 3
    assert out.splitlines()[1] == "UNDECIDED: 3 hazards undecided now; no hazard became possible."
    assert "undecided before. Limit reached: 40 zones (--most-zones)." in flat(out)


def test_a_hazard_that_was_undecided_counts_as_new(
    tmp_path: Path, capsys: Capture, monkeypatch: pytest.MonkeyPatch
) -> None:
    """What was not shown to be possible became possible, as far as anyone knows."""

    def stop(_: int) -> None:
        raise LimitReached("the old file is not looked at")

    def half(drive: Drive, file: str, only: frozenset[Check], observer: Callable[[int], None]) -> Outcome:
        return check(drive, file, only, stop if file == "old.dseq" else observer)

    monkeypatch.setattr(compare, "check", half)
    code, out = compared(tmp_path, capsys, VENT, changed(VENT, ("wait settle", "wait 10 us")))
    assert code == 1
    assert out.splitlines()[1] == "WORSE: 2 hazards became possible."
    assert flat(out).count("Undecided before.") == 2


def test_margins_that_a_limit_leaves_out_are_named(
    tmp_path: Path, capsys: Capture, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(margins, "MOST_ZONES", 2)
    code, out = compared(tmp_path, capsys, VENT, changed(VENT, ("wait settle", "wait 12 us")))
    assert code == 0
    text = "P to N through UH and UL, after UH and UL: not measured, the limit was reached: 2 zones for a margin\n"
    assert text in flat(out)


def test_new_and_lost_hazards(tmp_path: Path, capsys: Capture) -> None:
    """A stage with one leg less."""
    one = (
        'drive "one"\nwrites together\nstage\n  rails P N\n  leg U UH UL\n{leg}parts\n'
        "  p on up to 1 ns off up to 1 ns\npaths\n  UH UL{names} through p\nmodes UH UL{names}\n"
        "  a off off{off}\n  b on off{off}\nmoves\n  start a\n  a -> b when go\n  b -> a when back\n"
    )
    less = one.format(leg="", names="", off="")
    more = one.format(leg="  leg V VH VL\n", names=" VH VL", off=" off off")
    code, out = compared(tmp_path, capsys, less, more)
    assert code == 0
    assert "P to N through VH and VL: a new hazard, proven" in out
    assert "row b (line 13): VH not said => off; VL not said => off" in out
    code, out = compared(tmp_path, capsys, more, less)
    assert code == 0
    assert "P to N through VH and VL: no hazard any more" in out
    assert "removed: leg V (line 6 of the old file)" in out


def test_moves_of_one_line_are_one_change(tmp_path: Path, capsys: Capture) -> None:
    later = changed(VENT, ("when end_stop", "when end_stop earliest 1 s"))
    _, out = compared(tmp_path, capsys, VENT, later)
    assert "  move open, close -> idle when end_stop (line 52): earliest not said => 1 s\n" in out


def test_lines(tmp_path: Path, capsys: Capture) -> None:
    """One line each, errors for what got worse, warnings for what got closer."""
    code, out = compared(tmp_path, capsys, VENT, changed(VENT, ("wait settle", "wait 12 us")), "--as", "lines")
    assert code == 0
    assert [line.split(": ")[1] for line in out.splitlines()] == ["warning"] * 3 + ["note"] * 2
    code, out = compared(tmp_path, capsys, VENT, changed(VENT, ("wait settle", "wait 10 us")), "--as", "lines")
    assert code == 1
    first = out.splitlines()[0]
    assert first.startswith("new.dseq:49:3: error: became possible: P to N through UH and UL, proven before; P can be")
    assert first.endswith("on reverse_cmd: open -> close (line 49) [overlap]")


def test_samples_against_their_twins(capsys: Capture) -> None:
    """From a sample to its twin it gets worse, and not so the other way."""
    twins = [twin for name in ("stepper", "charger") for twin in (SAMPLES / "faulty").glob(f"{name}_*.dseq")]
    assert len(twins) >= 4
    for twin in twins:
        sample = SAMPLES / f"{twin.stem.split('_')[0]}.dseq"
        assert main(["compare", str(sample), str(twin)]) == 1
        assert capsys.readouterr().out.splitlines()[1].startswith("WORSE: ")
        assert main(["compare", str(twin), str(sample)]) == 0
        assert capsys.readouterr().out.splitlines()[1].startswith(("not worse: ", "less left: "))


class Input:
    """Standard input that holds a text."""

    def __init__(self, text: str) -> None:
        self.buffer = io.BytesIO(text.encode("utf-8"))


def test_an_old_file_from_standard_input(
    tmp_path: Path, capsys: Capture, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Files that it uses are looked for from here."""
    (tmp_path / "lib").mkdir()
    (tmp_path / "lib" / "parts.dseq").write_text('drive "pause"\nlet pause = 16 us\n', encoding="utf-8")
    text = changed(VENT, ("let settle = 16 us", 'use "lib/parts.dseq"'), ("wait settle", "wait pause"))
    (tmp_path / "new.dseq").write_text(changed(text, ("after 2 s", "after 3 s")), encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(sys, "stdin", Input(text))
    assert main(["compare", "-", "new.dseq"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    assert out.startswith("standard input => new.dseq  ")
    assert "move brake -> idle after a time (line 54): after 2 s => 3 s" in out


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (["compare"], "required: OLD, NEW"),
        (["compare", "a.dseq"], "required: NEW"),
        (["compare", "-", "-"], "only one of two files can come from standard input"),
        (["compare", "a", "b", "--as", "json"], "--as cannot be 'json'"),
        (["compare", "a", "b", "--color", "blue"], "--color cannot be 'blue'"),
        (["compare", "a", "b", "--most-zones", "0"], "--most-zones must be a whole number above 0"),
    ],
)
def test_wrong_calls(call: list[str], words: str, capsys: Capture) -> None:
    assert main(call) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert len(err.splitlines()) == 1


def test_the_mistakes_of_both_files_are_told(tmp_path: Path, capsys: Capture) -> None:
    good = tmp_path / "good.dseq"
    good.write_text(VENT, encoding="utf-8")
    bad = tmp_path / "bad.dseq"
    bad.write_text(changed(VENT, ("wait settle", "wait setle")), encoding="utf-8")
    for call in ([bad, good], [good, bad]):
        assert main(["compare", *map(str, call)]) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert len(err.splitlines()) == 2
    assert main(["compare", str(bad), str(tmp_path / "none.dseq")]) == 2
    assert len(capsys.readouterr().err.splitlines()) == 3


def test_into_a_file_and_with_colour(tmp_path: Path, capsys: Capture) -> None:
    target = tmp_path / "answer.txt"
    assert compared(tmp_path, capsys, VENT, VENT, "--out", str(target), "--color", "always") == (0, "")
    assert "\x1b[" not in target.read_text(encoding="utf-8")
    _, out = compared(tmp_path, capsys, VENT, VENT, "--color", "always")
    assert "\x1b[" in out
