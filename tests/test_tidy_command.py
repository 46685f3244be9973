"""`seqcheck tidy`: what becomes of the files, what is said, and the exit codes."""

import io
import os
import re
import stat
import sys
from pathlib import Path

import pytest
from reading import VENT

from seqcheck import cli
from seqcheck.language import tidy

ROOT = Path(__file__).parents[1]
TIDY = tidy.tidy(VENT, "t.dseq", lambda _: "")
RAGGED = TIDY.replace("\n  ", "\n \t ").replace("20 ns", "20ns")
WRONG = RAGGED.replace("start reset", "start rest")


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def put(name: str, text: str) -> Path:
    """A file whose bytes are those of the text."""
    path = Path(name)
    path.write_bytes(text.encode("utf-8"))
    return path


def run(*arguments: str) -> int:
    return cli.main(["tidy", *arguments])


def test_a_file_is_put_in_order(capsys: pytest.CaptureFixture[str]) -> None:
    path = put("a.dseq", RAGGED)
    assert run("a.dseq") == 0
    assert path.read_bytes().decode() == TIDY
    assert capsys.readouterr() == ("a.dseq: tidied\n", "")
    assert run("a.dseq") == 0
    assert capsys.readouterr() == ("a.dseq: is tidy\n", "")
    assert os.listdir() == ["a.dseq"]


def test_a_tidy_file_is_not_written_again(monkeypatch: pytest.MonkeyPatch) -> None:
    path = put("a.dseq", TIDY)
    os.utime(path, ns=(5, 5))
    assert run("a.dseq") == 0
    assert path.stat().st_mtime_ns == 5


def test_check_changes_nothing(capsys: pytest.CaptureFixture[str]) -> None:
    path, _, end = put("a.dseq", RAGGED), put("b.dseq", TIDY), put("c.dseq", TIDY + "\n")
    assert run("--check", ".") == 1
    said = "a.dseq: not tidy, first in line 9\nc.dseq: not tidy, at its end or in its line ends\n"
    assert capsys.readouterr() == (said, "")
    assert path.read_bytes().decode() == RAGGED
    assert end.read_bytes().decode() == TIDY + "\n"
    assert run("--check", "b.dseq") == 0
    assert capsys.readouterr() == ("", "")


def test_a_file_with_mistakes_is_let_alone_and_hides_no_other(capsys: pytest.CaptureFixture[str]) -> None:
    wrong, ragged = put("a.dseq", WRONG), put("b.dseq", RAGGED)
    assert run("a.dseq", "b.dseq", "no.dseq") == 2
    out, err = capsys.readouterr()
    assert out == "b.dseq: tidied\n"
    assert [line.split(": ")[0] for line in err.splitlines()] == ["a.dseq:37:10", "no.dseq:1:1"]
    assert wrong.read_bytes().decode() == WRONG
    assert ragged.read_bytes().decode() == TIDY
    assert run("--check", "a.dseq") == 2


@pytest.mark.parametrize("mark", ["", "\ufeff"])
@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_line_ends_and_byte_order_mark_stay(mark: str, end: str) -> None:
    path = put("a.dseq", mark + RAGGED.replace("\n", end))
    assert run("a.dseq") == 0
    assert path.read_bytes().decode() == mark + TIDY.replace("\n", end)
    assert run("--check", "a.dseq") == 0


@pytest.mark.skipif(os.name != "posix", reason="rights as on POSIX")
@pytest.mark.parametrize("mode", [0o600, 0o640, 0o755])
def test_a_file_keeps_its_rights(mode: int) -> None:
    path = put("a.dseq", RAGGED)
    path.chmod(mode)
    assert run("a.dseq") == 0
    assert path.read_bytes().decode() == TIDY
    assert stat.S_IMODE(path.stat().st_mode) == mode


def test_a_link_stays_a_link() -> None:
    path = put("a.dseq", RAGGED)
    Path("b.dseq").symlink_to(path)
    assert run("b.dseq") == 0
    assert Path("b.dseq").is_symlink()
    assert path.read_bytes().decode() == TIDY


def test_a_read_only_file_is_let_alone(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    path = put("a.dseq", RAGGED)
    monkeypatch.setattr(os, "access", lambda *_: False)
    assert run("a.dseq") == 2
    assert capsys.readouterr() == ("", "seqcheck: error: cannot write 'a.dseq': it is read-only\n")
    assert path.read_bytes().decode() == RAGGED
    assert os.listdir() == ["a.dseq"]


def test_writing_is_all_or_nothing(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    path = put("a.dseq", RAGGED)

    def breaks(path: Path, *_: object, **__: object) -> int:
        path.write_bytes(b"half")
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "write_text", breaks)
    assert run("a.dseq") == 2
    assert "No space left" in capsys.readouterr().err
    assert path.read_bytes().decode() == RAGGED
    assert os.listdir() == ["a.dseq"]


def test_a_fault_of_the_formatter_reaches_no_file(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    written = tidy._written
    monkeypatch.setattr(tidy, "_written", lambda lines: [one.replace("20 ns", "21 ns") for one in written(lines)])
    path = put("a.dseq", RAGGED)
    assert run("a.dseq") == 4
    assert "internal error" in capsys.readouterr().err
    assert path.read_bytes().decode() == RAGGED


# Standard input


class _Piped(io.TextIOWrapper):
    """A stream of the program, to or from bytes."""


def piped(data: bytes, monkeypatch: pytest.MonkeyPatch, *arguments: str) -> tuple[int, bytes]:
    """The exit code and the bytes on standard output, whose own encoding cannot write everything."""
    out = io.BytesIO()
    monkeypatch.setattr(sys, "stdin", _Piped(io.BytesIO(data)))
    stream = _Piped(out, encoding="ascii")
    monkeypatch.setattr(sys, "stdout", stream)
    code = run(*arguments)
    stream.flush()
    return code, out.getvalue()


@pytest.mark.parametrize("mark", ["", "\ufeff"])
@pytest.mark.parametrize("end", ["\n", "\r\n"])
def test_from_standard_input_to_standard_output(mark: str, end: str, monkeypatch: pytest.MonkeyPatch) -> None:
    data = mark + RAGGED.replace("modes", "# µ\nmodes").replace("\n", end)
    wanted = mark + TIDY.replace("modes", "# µ\nmodes").replace("\n", end)
    assert piped(data.encode(), monkeypatch, "-") == (0, wanted.encode())
    assert piped(wanted.encode(), monkeypatch, "-") == (0, wanted.encode())


def test_standard_input_with_mistakes_gives_nothing(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    assert piped(WRONG.encode(), monkeypatch, "-") == (2, b"")
    assert capsys.readouterr().err.startswith("-:37:10: error: unknown mode 'rest'")


def test_check_of_standard_input(monkeypatch: pytest.MonkeyPatch) -> None:
    assert piped(RAGGED.encode(), monkeypatch, "--check", "-") == (1, b"-: not tidy, first in line 9\n")
    assert piped(TIDY.encode(), monkeypatch, "--check", "-") == (0, b"")


@pytest.mark.parametrize("call", [(), ("-", "a.dseq"), ("--chek", "a.dseq"), ("empty",)])
def test_wrong_calls(call: tuple[str, ...], capsys: pytest.CaptureFixture[str]) -> None:
    put("a.dseq", RAGGED)
    Path("empty").mkdir()
    assert run(*call) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("seqcheck: error: ")
    assert err.count("\n") == 1
    assert Path("a.dseq").read_bytes().decode() == RAGGED


# The hook


def test_the_hook_says_nothing_that_a_file_name_could_change() -> None:
    text = (ROOT / ".pre-commit-hooks.yaml").read_text("utf-8")
    hooks = [one for one in re.split(r"^- ", text, flags=re.MULTILINE) if one.startswith("id: tidy\n")]
    assert len(hooks) == 1
    hook = dict(line.strip().split(": ", 1) for line in hooks[0].splitlines())
    assert hook["entry"] == "seqcheck tidy --"
    assert (hook["require_serial"], hook["types"], hook["files"]) == ("true", "[text]", r"\.dseq$")


def test_a_name_like_a_flag_behind_the_hooks_entry(capsys: pytest.CaptureFixture[str]) -> None:
    path = put("--check.dseq", RAGGED)
    assert run("--", "--check.dseq") == 0
    assert path.read_bytes().decode() == TIDY
