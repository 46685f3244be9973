"""What is read from the world, and streams that are closed, full or without end."""

import subprocess
import sys
from pathlib import Path

import pytest

from seqcheck import cli, opening

ROOT = Path(__file__).resolve().parent.parent
VENT = (ROOT / "samples" / "vent.dseq").read_text("utf-8")


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("vent.dseq").write_text(VENT, "utf-8")


def shell(line: str) -> tuple[int, str, str]:
    """Exit code, standard output and standard error of a call in a shell, `seqcheck` being the program."""
    line = line.replace("seqcheck", f"'{sys.executable}' -m seqcheck")
    done = subprocess.run(
        ["/bin/sh", "-c", line], env={"PYTHONPATH": str(ROOT)}, capture_output=True, timeout=60, check=False
    )
    return done.returncode, done.stdout.decode(), done.stderr.decode()


# Streams


@pytest.mark.parametrize("call", ["lint vent.dseq", "rows vent.dseq", "margins vent.dseq", "start", "tidy vent.dseq"])
def test_closed_standard_output_is_no_fault_of_the_program(call: str) -> None:
    code, _, said = shell(f"seqcheck {call} >&-")
    assert (code, said.count("\n"), "standard output is closed" in said) == (2, 1, True)


def test_with_out_no_standard_output_is_needed() -> None:
    assert shell("seqcheck lint vent.dseq --out answer >&-") == (0, "", "")
    assert "2 hazards proven" in Path("answer").read_text("utf-8")


def test_closed_standard_input() -> None:
    code, _, said = shell("seqcheck lint - <&-")
    assert (code, said) == (
        2,
        "-:1:1: error: cannot read this file: standard input is closed; check its name and rights [cannot-read]\n",
    )


@pytest.mark.parametrize("call", ["lint vent.dseq", "rows vent.dseq", "start", "tidy --check vent.dseq gone.dseq"])
def test_full_standard_output(call: str) -> None:
    Path("vent.dseq").write_text(VENT + "\n\n", "utf-8")
    code, _, said = shell(f"seqcheck {call} >/dev/full")
    assert (code, "No space left on device" in said) == (2, True)


@pytest.mark.parametrize("closed", ["2>&-", ">&- 2>&-", "<&- >&- 2>&-", "2>/dev/full"])
def test_the_exit_code_speaks_where_no_complaint_can_be_written(closed: str) -> None:
    assert shell(f"seqcheck lint gone.dseq {closed}") == (2, "", "")
    assert shell(f"seqcheck lnt {closed}") == (2, "", "")


# Files


def test_a_used_file_that_is_not_there_is_reported_at_its_line(capsys: pytest.CaptureFixture[str]) -> None:
    Path("t.dseq").write_text('drive "t"\nuse "gone.dseq"\nuse "."\n', "utf-8")
    assert cli.main(["lint", "t.dseq"]) == 2
    assert capsys.readouterr().err.splitlines() == [
        "t.dseq:2:5: error: cannot read 'gone.dseq': No such file or directory; correct the path [unreadable-file]",
        "t.dseq:3:5: error: cannot read '.': Is a directory; correct the path [unreadable-file]",
    ]


def test_use_never_reads_standard_input() -> None:
    Path("t.dseq").write_text('drive "t"\nuse "-"\n', "utf-8")
    code, _, said = shell("seqcheck lint t.dseq < vent.dseq")
    assert (code, "cannot read '-': No such file" in said) == (2, True)


def test_a_file_without_end_is_refused(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.setattr(opening, "_LARGEST", 1 << 20)
    Path("t.dseq").write_text('drive "t"\nuse "/dev/zero"\n', "utf-8")
    assert [cli.main(["lint", one]) for one in ("/dev/zero", "t.dseq")] == [2, 2]
    assert capsys.readouterr().err.splitlines() == [
        "/dev/zero:1:1: error: cannot read this file: it is larger than 1 MB; check its name and rights [cannot-read]",
        "t.dseq:2:5: error: cannot read '/dev/zero': it is larger than 1 MB; correct the path [unreadable-file]",
    ]


# Answers that would destroy what is read


@pytest.mark.parametrize(
    "call",
    [
        "lint vent.dseq --out vent.dseq",
        "lint . --out ./vent.dseq",
        "lint link --out vent.txt",
        "rows vent.txt --out ./vent.txt",
        "margins vent.dseq --out other.dseq",
        "draw vent.txt --out link",
        "report vent.txt --out vent.txt",
        "compare vent.dseq vent.txt --out vent.txt",
    ],
)
def test_an_answer_never_takes_the_place_of_a_drive(call: str, capsys: pytest.CaptureFixture[str]) -> None:
    Path("vent.txt").write_text(VENT, "utf-8")
    Path("link").symlink_to("vent.txt")
    assert cli.main(call.split()) == 2
    out = call.rsplit(" ", 1)[1]
    said = f"seqcheck: error: --out: '{out}' is a drive-sequence file; the answer must go elsewhere\n"
    assert capsys.readouterr() == ("", said)
    assert {Path(name).read_text("utf-8") for name in ("vent.dseq", "vent.txt")} == {VENT}
    assert not Path("other.dseq").exists()


def test_an_answer_may_take_the_place_of_an_older_one() -> None:
    assert [cli.main(["lint", "vent.dseq", "--out", "answer"]) for _ in "ab"] == [0, 0]
