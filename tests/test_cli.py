"""The command line: exit codes, where answers go, and input from a world that does not keep to the rules."""

import io
import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest
from proofs import leg

from seqcheck import checking, cli
from seqcheck.evidence import replay as replaying
from seqcheck.evidence.replay import NotPermitted

ROOT = Path(__file__).parent.parent
STEPS = "  start a\n  a -> b when go\n    set A off\n    wait {} ps\n  b -> a when back\n    set B off\n    wait 9 ps"
SAFE = leg("a on off\nb off on", STEPS.format(5), head="clock 1 GHz, late by at most 0 ps\nwrites together")
UNSAFE = leg("a on off\nb off on", STEPS.format(4))
WRONG = SAFE.replace("wait", "waits")
ZONES = leg(
    "i off off\nw k off\nz keep off\nn off on",
    "  start i\n  i -> w when go earliest 200 ps\n  w -> i after 4 ps\n  z -> n after 215 ps\n"
    "  n -> i when back earliest 1 ns",
    parts="p on 3 ps off 8 ps",
    more="carriers\n  k 50 GHz duty 50 % updates at rise",
    trips="  stop from w -> z at once",
)
"""Safe, but only hundreds of zones show it, so that a limit leaves it undecided; UNSAFE takes less than FEW."""
FEW = "60"
UMLAUT = UNSAFE.replace('drive "leg"', 'drive "Lüftungsklappe µ → 漢"')
CLEAR = {key: value for key, value in os.environ.items() if key not in ("NO_COLOR", "FORCE_COLOR", "TERM")}


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Each test has a folder of its own, is in it, and has no wishes about colour."""
    monkeypatch.chdir(tmp_path)
    for name in ("NO_COLOR", "FORCE_COLOR"):
        monkeypatch.delenv(name, raising=False)


def put(**files: str) -> None:
    """Files in the folder, named without their suffix."""
    for name, text in files.items():
        Path(f"{name}.dseq").write_text(text, encoding="utf-8")


def lint(*arguments: str) -> int:
    """The exit code of `seqcheck lint`."""
    return cli.main(["lint", *arguments])


def started(*arguments: str, env: dict[str, str] | None = None) -> "subprocess.CompletedProcess[bytes]":
    """The program in a process of its own, in the folder of the test."""
    call = [sys.executable, "-m", "seqcheck", *arguments]
    world = {**CLEAR, "PYTHONPATH": str(ROOT), **(env or {})}
    return subprocess.run(call, env=world, capture_output=True, check=False, timeout=60)


# Exit codes


@pytest.mark.parametrize(("text", "code", "said"), [(SAFE, 0, "proven"), (UNSAFE, 1, "UNSAFE"), (WRONG, 2, "")])
def test_one_file(text: str, code: int, said: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Verdicts on standard output, complaints on standard error, never both."""
    put(x=text)
    assert lint("x.dseq") == code
    out, err = capsys.readouterr()
    assert said in out
    assert (out == "") == (code == 2)
    assert (err == "") == (code != 2)


def test_undecided(capsys: pytest.CaptureFixture[str]) -> None:
    """A limit that was reached is named, and nothing is called proven."""
    put(x=ZONES)
    assert lint("x.dseq") == 0
    capsys.readouterr()
    assert lint("--most-zones", FEW, "x.dseq") == 3
    out = capsys.readouterr().out
    assert "undecided" in out.lower()
    assert "--most-zones" in out
    assert not re.search(r"^proven|[0-9] hazards? proven", out, re.MULTILINE)
    assert lint("--give-up-after", "1 ps", "x.dseq") == 3
    out = capsys.readouterr().out
    assert "--give-up-after" in out
    assert lint("--most-zones", FEW, "--as", "lines", "x.dseq") == 3
    assert re.search(r"^x\.dseq:1:1: error: undecided.*\[undecided\]$", capsys.readouterr().out, re.MULTILINE)


def test_generous_limits_change_nothing(capsys: pytest.CaptureFixture[str]) -> None:
    """A limit that is not reached leaves no trace."""
    put(x=ZONES)
    assert lint("x.dseq") == 0
    plain = capsys.readouterr().out
    assert lint("--most-zones", "100000", "--give-up-after", "1000 s", "x.dseq") == 0
    assert capsys.readouterr().out == plain


def _refuses(*_: object) -> None:
    raise NotPermitted("made up for a test")


def test_fault(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """A counterexample that does not replay is never shown; the program says that it is at fault."""
    put(x=UNSAFE)
    monkeypatch.setattr(replaying, "replay", _refuses)
    assert lint("x.dseq") == 4
    out, err = capsys.readouterr()
    assert out == ""
    assert "internal error" in err
    assert "made up for a test" in err
    assert err.count("\n") == 1


def test_internal_error(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """Anything unforeseen is exit 4 and one line, no traceback."""
    put(x=SAFE)
    monkeypatch.setattr(checking, "shorting_sets", _refuses)
    assert lint("x.dseq") == 4
    assert re.fullmatch(r"seqcheck: internal error.*made up.*\n", capsys.readouterr().err)


@pytest.mark.parametrize(
    ("files", "code"),
    [
        (("s", "z"), 3),
        (("s", "z", "u"), 1),
        (("u", "z"), 1),
        (("s", "w", "u", "z"), 2),
        (("w", "s"), 2),
        (("u", "missing"), 2),
        (("s", "s"), 0),
    ],
)
def test_worst_counts(files: tuple[str, ...], code: int) -> None:
    """In the order 4, 2, 1, 3, 0, whatever order the files come in."""
    put(s=SAFE, u=UNSAFE, w=WRONG, z=ZONES)
    names = [f"{name}.dseq" for name in files]
    assert lint("--most-zones", FEW, *names) == code
    assert lint("--most-zones", FEW, *reversed(names)) == code


def test_fault_is_worst(monkeypatch: pytest.MonkeyPatch) -> None:
    """A fault counts above wrong input."""
    put(u=UNSAFE, w=WRONG, s=SAFE)
    monkeypatch.setattr(replaying, "replay", _refuses)
    assert lint("w.dseq", "u.dseq", "s.dseq") == 4


def test_one_wrong_file_does_not_hide_the_others(capsys: pytest.CaptureFixture[str]) -> None:
    """What can be judged is."""
    put(u=UNSAFE, w=WRONG)
    assert lint("w.dseq", "u.dseq", "--as", "lines") == 2
    out, err = capsys.readouterr()
    assert re.search(r"^u\.dseq:\d+:\d+: error: .*\[overlap\]$", out, re.MULTILINE)
    assert err.startswith("w.dseq:")


# Where files come from


def test_standard_input(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """`-` is standard input, with a byte-order mark and CRLF as well."""
    for data, code in ((SAFE, 0), (UNSAFE, 1), (WRONG, 2), ("\ufeff" + UNSAFE.replace("\n", "\r\n"), 1), ("", 2)):
        monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(data.encode())))
        assert lint("-") == code
    capsys.readouterr()


def test_folders(capsys: pytest.CaptureFixture[str]) -> None:
    """A folder means every *.dseq in it, in order, and nothing below or besides; no PATH means here."""
    for folder in ("drives", "drives/below"):
        Path(folder).mkdir()
    for name, text in (("b", SAFE), ("a", UNSAFE), ("below/c", WRONG)):
        Path(f"drives/{name}.dseq").write_text(text)
    Path("drives/notes.txt").write_text("no drive")
    assert lint("--as", "lines", "drives") == 1
    found = capsys.readouterr().out
    assert lint("--as", "lines", os.path.join("drives", "a.dseq"), os.path.join("drives", "b.dseq")) == 1
    assert capsys.readouterr().out == found
    put(here=UNSAFE)
    assert lint("--as", "lines") == 1
    assert capsys.readouterr().out.startswith("here.dseq:")
    assert lint("--as", "lines", ".") == 1
    assert capsys.readouterr().out.startswith("here.dseq:")


def test_same_file_twice_is_judged_once(capsys: pytest.CaptureFixture[str]) -> None:
    """A file and its name again are one file."""
    put(u=UNSAFE)
    lint("--as", "lines", "u.dseq")
    once = capsys.readouterr().out
    lint("--as", "lines", "u.dseq", "u.dseq")
    assert capsys.readouterr().out == once


def test_empty_folder(capsys: pytest.CaptureFixture[str]) -> None:
    """Nothing to prove is not proven."""
    Path("empty").mkdir()
    for call in ((), ("empty",)):
        assert lint(*call) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert "no *.dseq" in err


def test_unreadable_files(capsys: pytest.CaptureFixture[str]) -> None:
    """Missing, not text, or no name at all: the place, the reason, exit 2."""
    Path("bytes.dseq").write_bytes(b"\xff\xfe\x00drive")
    for name in ("missing.dseq", "bytes.dseq", "nul\0.dseq", "bytes.dseq/x.dseq", ""):
        assert lint(name) == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert re.match(r".*: error: .+ \[[a-z-]+\]\n\Z", err, re.DOTALL), name


@pytest.mark.parametrize(
    "name",
    [
        "a b.dseq",
        "ü→.dseq",
        "line\nbreak.dseq",
        "tab\t.dseq",
        "x%s{}.dseq",
        "[red]x.dseq",
        "\x1b[31mred.dseq",
        "no suffix",
    ],
)
def test_names_with_odd_characters(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    """A name is a name; what would break the form of the answer is shown some other way."""
    Path(name).write_text(UNSAFE)
    assert lint("--as", "lines", name) == 1
    lines = capsys.readouterr().out
    assert lines.count("[overlap]") == 1
    assert all(re.search(r": (error|warning): .*\[[a-z-]+\]$", line) for line in lines.splitlines())
    assert "\x1b" not in lines
    assert lint(name) == 1
    assert "\x1b" not in capsys.readouterr().out
    Path(name).write_text(WRONG)
    assert lint(name) == 2
    err = capsys.readouterr().err
    assert "\x1b" not in err
    assert err.count("\n") == err.count(": error: ")


def test_name_that_is_not_text() -> None:
    """A name in another encoding does not stop the program."""
    name = b"dr\xfcck.dseq"
    try:
        Path(os.fsdecode(name)).write_text(UNSAFE)
    except OSError:
        name = b"plain.dseq"  # a file system that only takes text
        Path(os.fsdecode(name)).write_text(UNSAFE)
    result = started("lint", os.fsdecode(name))
    assert result.returncode == 1
    assert b"Traceback" not in result.stderr


def test_name_like_a_flag() -> None:
    """After `--` everything is a path."""
    put(**{"-x": SAFE})
    assert lint("--", "-x.dseq") == 0
    assert lint("-x.dseq") == 2


# Wrong calls


@pytest.mark.parametrize(
    "call",
    [
        [],
        ["prove"],
        ["lint", "--frobnicate"],
        ["lint", "--as", "sreen", "x.dseq"],
        ["lint", "--as"],
        ["lint", "--only", "nothing", "x.dseq"],
        ["lint", "--most-zones", "0", "x.dseq"],
        ["lint", "--most-zones", "-1", "x.dseq"],
        ["lint", "--most-zones", "many", "x.dseq"],
        ["lint", "--most-zones", "1e3", "x.dseq"],
        ["lint", "--most-zones", "9" * 40, "x.dseq"],
        ["lint", "--most-zones", "٣", "x.dseq"],
        ["lint", "--give-up-after", "5", "x.dseq"],
        ["lint", "--give-up-after", "0 s", "x.dseq"],
        ["lint", "--give-up-after", "-1 s", "x.dseq"],
        ["lint", "--give-up-after", "1 hour", "x.dseq"],
        ["lint", "--give-up-after", "nan s", "x.dseq"],
        ["lint", "--color", "sometimes", "x.dseq"],
        ["lint", "--run", "1", "x.dseq"],
        ["lint", "--as", "vcd", "--run", "1", "x.dseq", "y.dseq"],
        ["lint", "--on", "short", "x.dseq"],
    ],
)
def test_wrong_call(call: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    """One clear line, exit 2, and nothing is judged."""
    put(x=SAFE)
    assert cli.main(call) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert re.fullmatch(r"seqcheck: error: [^\n]+\n", err)


def test_near_misses_are_named(capsys: pytest.CaptureFixture[str]) -> None:
    """A misspelt word gets the right one."""
    lint("--as", "sreen")
    assert "'screen'" in capsys.readouterr().err
    lint("--only", "overlp")
    assert "'overlap'" in capsys.readouterr().err


@pytest.mark.parametrize("call", ["--help", "lint --help", "tidy --help", "start --help", "--version"])
def test_help(call: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Help and version are answers: standard output, exit 0."""
    assert cli.main(call.split()) == 0
    out, err = capsys.readouterr()
    assert out.strip()
    assert err == ""


# What is said


def test_only(capsys: pytest.CaptureFixture[str]) -> None:
    """Warnings that are not asked for are not said; a hazard always is, or a gate for one kind would pass the other."""
    put(u=UNSAFE, n=UNSAFE.replace("paths\n  A B through p\n", "").replace("wait 4", "wait 0"))
    assert lint("--as", "lines", "--only", "overlap", "u.dseq") == 1
    assert set(re.findall(r"\[([a-z-]+)\]$", capsys.readouterr().out, re.MULTILINE)) == {"overlap"}
    assert lint("--as", "lines", "--only", "short", "u.dseq") == 1
    assert "[overlap]" in capsys.readouterr().out
    lint("--as", "lines", "n.dseq")
    assert "[no-path]" in capsys.readouterr().out
    lint("--as", "lines", "--only", "no-path", "--only", "punctual", "n.dseq")
    said = set(re.findall(r"\[([a-z-]+)\]$", capsys.readouterr().out, re.MULTILINE))
    assert said <= {"no-path", "punctual", "overlap"}


def test_only_never_hides_that_nothing_was_decided() -> None:
    """An undecided hazard may be one of those asked for."""
    put(x=ZONES)
    assert lint("--only", "overlap", "--most-zones", FEW, "x.dseq") == 3


def test_lines_of_a_proven_file(capsys: pytest.CaptureFixture[str]) -> None:
    """Nothing to say is nothing."""
    put(x=SAFE)
    assert lint("--as", "lines", "x.dseq") == 0
    assert capsys.readouterr().out == ""


@pytest.mark.parametrize(
    ("added", "check"),
    [
        ("  A on at most 1 ms", "long-on"),
        ("  a and b at least 2 s apart", "too-soon"),
        ("  A on at least 2 s", "short-pulse"),
        ("  B off at least 2 s", "short-pulse"),
    ],
)
def test_rules_about_lengths_are_proven(added: str, check: str, capsys: pytest.CaptureFixture[str]) -> None:
    """What breaks them is found with its line, and what keeps them says nothing."""
    put(x=f"{SAFE}rules\n{added}\n", y=f"{SAFE}rules\n  A off at least 14 ps\n")
    assert lint("--as", "lines", "x.dseq") == 1
    out = capsys.readouterr().out
    assert f"[{check}]" in out
    assert f"against line {SAFE.count(chr(10)) + 2}" in out
    assert lint("--as", "lines", "y.dseq") == 0
    assert capsys.readouterr().out == ""


def test_means_without_a_winding_is_a_finding(capsys: pytest.CaptureFixture[str]) -> None:
    """Nothing is passed over: what cannot be told is said."""
    put(m=SAFE.replace("a on off", "a on off means coast"))
    assert lint("m.dseq", "--as", "lines") == 1
    assert "but the stage names no winding" in capsys.readouterr().out


# Where answers go


def test_out(capsys: pytest.CaptureFixture[str]) -> None:
    """The same answer in a file, nothing on standard output, and no draft left behind."""
    put(u=UNSAFE)
    assert lint("u.dseq") == 1
    shown = capsys.readouterr().out
    Path("answer.txt").write_text("older")
    assert lint("u.dseq", "--out", "answer.txt") == 1
    assert capsys.readouterr().out == ""
    assert Path("answer.txt").read_text(encoding="utf-8") == shown
    assert sorted(os.listdir()) == ["answer.txt", "u.dseq"]


@pytest.mark.parametrize("form", ["annotations", "json", "sarif"])
def test_a_form_for_programs_tells_of_every_file(form: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Also of one that could not be read: there, and on standard error as ever."""
    put(u=UNSAFE, w=WRONG, s=SAFE)
    assert lint("--as", form, "w.dseq", "u.dseq", "s.dseq") == 2
    out, err = capsys.readouterr()
    assert err.startswith("w.dseq:")
    assert "w.dseq" in out
    assert "u.dseq" in out
    assert lint("--as", form, "w.dseq", "--out", "answer") == 2
    assert "w.dseq" in Path("answer").read_text(encoding="utf-8")


def test_json_and_sarif_of_a_fault(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """What the program got wrong is said in the document too, and nothing else of the file."""
    put(u=UNSAFE)
    monkeypatch.setattr(replaying, "replay", _refuses)
    assert lint("--as", "json", "u.dseq") == 4
    (entry,) = json.loads(capsys.readouterr().out)["files"]
    assert (entry["standing"], set(entry)) == ("internal-error", {"file", "standing", "fault"})
    assert lint("--as", "sarif", "u.dseq") == 4
    (result,) = json.loads(capsys.readouterr().out)["runs"][0]["results"]
    assert (result["ruleId"], result["level"]) == ("internal-error", "error")


@pytest.mark.parametrize("form", ["annotations", "json", "sarif", "vcd"])
def test_the_form_does_not_change_the_exit_code(form: str, capsys: pytest.CaptureFixture[str]) -> None:
    """And colour changes no form for programs."""
    put(u=UNSAFE, s=SAFE, z=ZONES, w=WRONG)
    for name, code in (("u", 1), ("s", 0), ("z", 3), ("w", 2)):
        assert lint("--as", form, "--most-zones", FEW, f"{name}.dseq", "--color", "always") == code
        assert "\x1b" not in capsys.readouterr().out


def test_a_dump_is_of_one_file(capsys: pytest.CaptureFixture[str]) -> None:
    """Runs of several files have no common time; and what was not judged has no dump, nor does one that was dumped
    earlier become another's."""
    put(u=UNSAFE, w=WRONG)
    assert lint("--as", "vcd") == 2
    assert "2 files" in capsys.readouterr().err
    Path("answer").write_text("older")
    assert lint("--as", "vcd", "w.dseq", "--out", "answer") == 2
    assert Path("answer").read_text() == "older"
    assert lint("--as", "vcd", "u.dseq", "--out", "answer") == 1
    assert Path("answer").read_text().startswith("$version seqcheck")


def test_the_run_of_a_dump(capsys: pytest.CaptureFixture[str]) -> None:
    """Counted from 1 as on the screen; what is not there is a wrong call, and nothing is written."""
    put(u=UNSAFE)
    assert lint("--as", "vcd", "--run", "1", "u.dseq") == 1
    assert "run 1 of 1" in capsys.readouterr().out
    dump = ["--as", "vcd", "--run"]
    for call in ([*dump, "2"], [*dump, "0"], ["--run", "1"], dump):
        assert lint(*call, "--out", "answer", "u.dseq") == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert re.fullmatch(r"seqcheck: error: [^\n]*--run[^\n]+\n", err)
    assert not Path("answer").exists()


def test_code_hosts_get_names_from_the_top_of_the_repository(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """However the file is named and wherever we are in the repository."""
    Path(".git").mkdir()
    Path("drives").mkdir()
    Path("drives/u.dseq").write_text(UNSAFE)
    whole = str(Path("drives/u.dseq").absolute())
    below = os.path.join("..", "drives", "u.dseq")
    top = Path.cwd()
    calls = ((".", "drives/u.dseq"), (".", whole), ("drives", "u.dseq"), ("drives", whole), (".git", below))
    for folder, name in calls:
        monkeypatch.chdir(top / folder)
        lint("--as", "annotations", name)
        assert capsys.readouterr().out.startswith("::error file=drives/u.dseq,line=")
        lint("--as", "sarif", name)
        artifact = json.loads(capsys.readouterr().out)["runs"][0]["artifacts"][0]
        assert artifact["location"] == {"uri": "drives/u.dseq", "uriBaseId": "%SRCROOT%"}


def test_out_has_no_colour() -> None:
    """A file is no terminal."""
    put(u=UNSAFE)
    assert lint("u.dseq", "--color", "always", "--out", "answer.txt") == 1
    assert "\x1b" not in Path("answer.txt").read_text(encoding="utf-8")


def test_out_is_all_or_nothing(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """If writing fails half way the older answer stays as it was."""
    put(u=UNSAFE)
    Path("answer.txt").write_text("older")

    def breaks(path: Path, *_: object, **__: object) -> int:
        with open(path, "w") as stream:
            stream.write("half")
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "write_text", breaks)
    assert lint("u.dseq", "--out", "answer.txt") == 2
    assert "No space left" in capsys.readouterr().err
    assert Path("answer.txt").read_text() == "older"
    assert sorted(os.listdir()) == ["answer.txt", "u.dseq"]


@pytest.mark.parametrize("out", ["no/such/folder/x", ".", "u.dseq/x", ""])
def test_out_that_cannot_be_written(out: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit 2 even where a hazard was found: whoever reads the file would not see it."""
    put(u=UNSAFE)
    assert lint("u.dseq", "--out", out) == 2
    text, err = capsys.readouterr()
    assert text == ""
    assert re.fullmatch(r"seqcheck: error: cannot write [^\n]+\n", err)
    assert os.listdir() == ["u.dseq"]


def test_out_is_not_written_for_wrong_input() -> None:
    """Nothing was judged: an older answer is left alone."""
    put(w=WRONG)
    Path("answer.txt").write_text("older")
    assert lint("w.dseq", "--out", "answer.txt") == 2
    assert Path("answer.txt").read_text() == "older"


def test_colour(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """The flag above the environment, NO_COLOR above FORCE_COLOR, and an empty one does not count."""
    put(u=UNSAFE)

    def coloured(*flags: str, **environment: str) -> bool:
        for name in ("NO_COLOR", "FORCE_COLOR"):
            monkeypatch.delenv(name, raising=False)
        for name, value in environment.items():
            monkeypatch.setenv(name, value)
        lint("u.dseq", *flags)
        return "\x1b[" in capsys.readouterr().out

    assert not coloured()
    assert coloured("--color", "always")
    assert coloured(FORCE_COLOR="1")
    assert not coloured(FORCE_COLOR="")
    assert not coloured(FORCE_COLOR="1", NO_COLOR="1")
    assert coloured(FORCE_COLOR="1", NO_COLOR="")
    assert coloured("--color", "always", NO_COLOR="1")
    assert not coloured("--color", "never", FORCE_COLOR="1")


def test_colour_changes_no_word(capsys: pytest.CaptureFixture[str]) -> None:
    """Without its colours the answer is the plain one."""
    put(u=UNSAFE)
    lint("u.dseq")
    plain = capsys.readouterr().out
    lint("u.dseq", "--color", "always")
    assert re.sub(r"\x1b\[[0-9;]*m", "", capsys.readouterr().out) == plain


# The world outside


def test_ascii_only() -> None:
    """A locale that cannot show a character gets an escape in its place."""
    put(u=UMLAUT, w=UMLAUT.replace("wait", "wäit"))
    ascii_only = {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONIOENCODING": "ascii", "PYTHONCOERCECLOCALE": "0"}
    for form in ("screen", "lines", "annotations", "json", "sarif", "vcd"):
        result = started("lint", "--as", form, "u.dseq", env=ascii_only)
        assert (result.returncode, result.stderr) == (1, b"")
        result.stdout.decode("ascii")
    result = started("lint", "w.dseq", env=ascii_only)
    assert result.returncode == 2
    assert b"Traceback" not in result.stderr
    result.stderr.decode("ascii")


def test_closed_pipe() -> None:
    """Who stops reading gets no traceback, and has not seen a proof."""
    put(u=UNSAFE, s=SAFE)
    reader, writer = os.pipe()
    os.close(reader)
    call = [sys.executable, "-m", "seqcheck", "lint", "s.dseq", "u.dseq"]
    world = {**CLEAR, "PYTHONPATH": str(ROOT)}
    result = subprocess.run(call, env=world, stdout=writer, stderr=subprocess.PIPE, check=False, timeout=60)
    os.close(writer)
    assert result.stderr == b""
    assert result.returncode == 1


def test_hash_seeds() -> None:
    """The answer does not hang on the order of sets."""
    put(u=UNSAFE, z=ZONES)
    Path("fan.dseq").write_bytes((ROOT / "samples" / "faulty" / "vent_wrong_column.dseq").read_bytes())
    answers = {started("lint", env={"PYTHONHASHSEED": seed}).stdout for seed in ("0", "1", "77")}
    assert len(answers) == 1
    assert answers.pop().strip()


def test_module_gives_the_exit_code() -> None:
    """`python -m seqcheck` ends with what `main` returns."""
    put(s=SAFE, u=UNSAFE)
    assert [started("lint", f"{name}.dseq").returncode for name in "su"] == [0, 1]
