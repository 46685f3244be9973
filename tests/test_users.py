"""Which files a change concerns, and the hook of the merge gate in the framework that runs it."""

import json
import os
import shutil
import stat
import subprocess
import sys
from pathlib import Path

import jsonschema
import pytest
from proofs import leg

from seqcheck import cli
from seqcheck.commands.users import concerned
from seqcheck.shipped import shipped

ROOT = Path(__file__).parent.parent
HEAD = 'clock 1 GHz, late by at most 0 ps\nwrites together\nuse "../parts/house.dseq"'
STEPS = "  start a\n  a -> b when go\n    set A off\n    wait pause\n  b -> a when back\n    set B off\n    wait 9 ps"
USER = leg("a on off\nb off on", STEPS, head=HEAD)
HOUSE = 'drive "house"\nuse "more.txt"\n'
MORE = 'drive "more"\nlet pause = 5 ps\n'
ALONE = leg("a on off\nb off on", STEPS.replace("pause", "5 ps"), head=HEAD.rpartition("\n")[0])


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A user in one folder, what it uses in another, by two steps and with another suffix, and a drive by itself."""
    monkeypatch.chdir(tmp_path)
    files = {"drives/user.dseq": USER, "parts/house.dseq": HOUSE, "parts/more.txt": MORE, "alone.dseq": ALONE}
    for name, text in {**files, ".hidden/user.dseq": USER}.items():
        Path(name).parent.mkdir(exist_ok=True)
        Path(name).write_text(text, encoding="utf-8")


@pytest.mark.parametrize(
    ("changed", "found"),
    [
        ([], []),
        (["alone.dseq"], ["alone.dseq"]),
        (["README.md"], []),
        (["parts/more.txt"], ["drives/user.dseq", "parts/house.dseq"]),
        (["./parts/house.dseq"], ["parts/house.dseq", "drives/user.dseq"]),
        (["drives/user.dseq", "alone.dseq"], ["drives/user.dseq", "alone.dseq"]),
    ],
)
def test_what_a_change_concerns(changed: list[str], found: list[str]) -> None:
    assert concerned(changed) == found


def test_a_file_that_was_taken_away_concerns_its_users() -> None:
    Path("parts/more.txt").unlink()
    assert concerned([]) == ["drives/user.dseq", "parts/house.dseq"]
    assert concerned(["alone.dseq"]) == ["alone.dseq", "drives/user.dseq", "parts/house.dseq"]


def test_line_ends_of_any_system() -> None:
    """A carriage return alone ends a line for whoever reads the file, so that it does here."""
    Path("drives/user.dseq").write_bytes(USER.replace("\n", "\r").encode())
    assert concerned(["parts/house.dseq"]) == ["parts/house.dseq", "drives/user.dseq"]


def test_a_circle_of_use_ends() -> None:
    Path("parts/more.txt").write_text('use "house.dseq"')
    Path("a.dseq").write_text('use "b.dseq"')
    Path("b.dseq").write_text('use "a.dseq"')
    assert concerned(["b.dseq"]) == ["b.dseq", "a.dseq"]


@pytest.mark.parametrize("form", cli.FORMS)
def test_a_change_of_nothing_is_proven_in_every_form(form: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["lint", "--changed", "--as", form, "--"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    if form == "json":
        assert json.loads(out)["files"] == []
        jsonschema.validate(json.loads(out), json.loads(shipped("outcome.schema.json")))


def test_only_files_can_be_changed(capsys: pytest.CaptureFixture[str]) -> None:
    for path in ("parts", "-"):
        assert cli.main(["lint", "--changed", "--", path]) == 2
        assert "--changed needs the files" in capsys.readouterr().err


# The gate


@pytest.fixture
def gate(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A repository whose commits go through our hook as it is shipped, but for where the program is found.

    The framework would build an environment for it from a registry; here it is this checkout, so no network is needed.
    """
    yaml = pytest.importorskip("yaml", reason="the framework that runs hooks is not installed")
    pytest.importorskip("pre_commit", reason="the framework that runs hooks is not installed")
    if shutil.which("git") is None:
        pytest.skip("git is not installed")
    hooks = yaml.safe_load((ROOT / ".pre-commit-hooks.yaml").read_text("utf-8"))
    hook = next(one for one in hooks if one["id"] == "seqcheck")
    tools = tmp_path / ".tools"
    tools.mkdir()
    program = tools / "seqcheck"
    program.write_text(f'#!/bin/sh\nPYTHONPATH="{ROOT}" exec "{sys.executable}" -m seqcheck "$@"\n')
    program.chmod(program.stat().st_mode | stat.S_IXUSR)
    monkeypatch.setenv("PATH", f"{tools}{os.pathsep}{os.environ['PATH']}")
    monkeypatch.setenv("HOME", str(tools))
    monkeypatch.setenv("PRE_COMMIT_HOME", str(tools / "store"))
    for name in [one for one in os.environ if one.startswith("GIT_")]:
        monkeypatch.delenv(name)
    for who in ("AUTHOR", "COMMITTER"):
        monkeypatch.setenv(f"GIT_{who}_NAME", "Tester")
        monkeypatch.setenv(f"GIT_{who}_EMAIL", "tester@example.org")
    Path(".gitignore").write_text(".tools\n.hidden\n")
    config = {"repos": [{"repo": "local", "hooks": [{**hook, "language": "system"}]}]}
    Path(".pre-commit-config.yaml").write_text(json.dumps(config))
    assert run("git", "init", "--quiet").returncode == 0
    assert run(sys.executable, "-m", "pre_commit", "install").returncode == 0


def run(*call: str) -> "subprocess.CompletedProcess[str]":
    return subprocess.run(call, capture_output=True, text=True, timeout=60, check=False)


def commit() -> tuple[int, str]:
    """Commit everything; the exit code, and all that was said."""
    run("git", "add", "--all")
    ran = run("git", "commit", "--message", "a change")
    return ran.returncode, ran.stdout + ran.stderr


@pytest.mark.usefixtures("gate")
def test_a_commit_passes_the_gate_only_if_all_that_it_concerns_is_proven() -> None:
    assert commit()[0] == 0
    Path("alone.dseq").write_text(ALONE.replace("wait 5 ps", "wait 4 ps"))
    code, said = commit()
    assert code == 1
    assert "OVERLAP  alone.dseq:16:3" in said
    assert "P can be joined to N through A and B, for up to 1 ps." in said
    assert "on go: a -> b" in said, "the run is shown"
    assert "drives/user.dseq" not in said
    Path("alone.dseq").write_text(ALONE.replace("wait 5 ps", "wait 6 ps"))
    assert commit()[0] == 0
    Path("parts/more.txt").write_text(MORE.replace("5 ps", "4 ps"))
    code, said = commit()
    assert code == 1, "only a file that another uses by a third one has changed"
    assert "OVERLAP  drives/user.dseq:17:3" in said
    assert "on go: a -> b" in said
    assert "alone.dseq" not in said
    Path("parts/more.txt").write_text(MORE.replace("5 ps", "6 ps"))
    assert commit()[0] == 0
    Path("parts/more.txt").unlink()
    code, said = commit()
    assert code == 1, "a file that another uses was taken away"
    assert "cannot read" in said
    Path("parts/more.txt").write_text(MORE)
    Path("notes.md").write_text("nothing of a drive")
    assert commit()[0] == 0
