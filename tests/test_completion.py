"""Completion in shells: the scripts are made from the parser, and the shells themselves are asked what they offer."""

import argparse
import os
import pty
import re
import select
import shutil
import subprocess
import time
from pathlib import Path

import pytest

from seqcheck import cli
from seqcheck.arguments import COMPARE_FORMS, FORMS, SHELLS, parser
from seqcheck.commands import completion
from seqcheck.completing.calls import Call, call_of

ROOT = Path(__file__).parent.parent


def script(shell: str) -> str:
    """The script for a shell."""
    return completion.script(shell, parser(), FORMS, COMPARE_FORMS)


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with drives, other files, folders, and the scripts of all shells; we are in it."""
    monkeypatch.chdir(tmp_path)
    for name in ("pump.dseq", "pump two.dseq", "notes.txt", "vent.json"):
        Path(name).write_text("", encoding="utf-8")
    Path("parts").mkdir()
    Path("parts/fan.dseq").write_text("", encoding="utf-8")
    for shell in SHELLS:
        Path(f".script.{shell}").write_text(script(shell), encoding="utf-8")
    return tmp_path


# The scripts say what the parser says


def known_call() -> Call:
    """All that the program takes, by way of the script for bash, whose words are spied on."""
    found: list[Call] = []

    def spy(call: Call) -> str:
        found.append(call)
        return ""

    with pytest.MonkeyPatch.context() as patch:
        patch.setitem(completion.WRITERS, "bash", spy)
        script("bash")
    return found[0]


@pytest.mark.parametrize("shell", SHELLS)
def test_every_command_and_option_of_the_help_is_in_the_script(shell: str, capsys: pytest.CaptureFixture[str]) -> None:
    cli.main(["--help"])
    commands = re.findall(r"^    ([a-z]+)  ", capsys.readouterr().out, re.MULTILINE)
    assert len(commands) > 10
    said = script(shell)
    for command in commands:
        cli.main([command, "--help"])
        for option in set(re.findall(r"^  (?:-h, )?(--[a-z-]+)", capsys.readouterr().out, re.MULTILINE)):
            name = option.removeprefix("--") if shell == "fish" else option
            assert re.search(rf"\b{command}\b.*[ '*){{]{name}\b", said), (command, option)


def values() -> list[tuple[list[str], str, list[str]]]:
    """Every word that is offered: what stands before it in a call that ends with it or goes on to files not there."""
    found = []
    for command in known_call().commands:
        standing = [place for place in command.places if place.files or place.name == "NAME"]
        files = ["none.dseq" if place.files else "name" for place in standing]
        for option in command.options:
            words = option.value.words if option.value else ()
            found += [([command.name, option.flag], word, files) for word in words]
        found += [([command.name], word, []) for place in command.places for word in place.words]
    return found


@pytest.mark.usefixtures("folder")
def test_every_word_that_is_offered_is_taken(capsys: pytest.CaptureFixture[str]) -> None:
    """The program comes as far as the file that is not there, or answers; a word that is wrong it refuses before."""
    assert len(values()) > 50
    for before, word, files in values():
        assert cli.main([*before, word, *files]) == (2 if files else 0)
        assert not files or capsys.readouterr().err.startswith("none.dseq:1:1: error: cannot read")
        assert cli.main([*before, f"{word}x", *files]) == 2
        assert f"'{word}'" in capsys.readouterr().err


def test_a_value_of_which_nothing_is_known_is_no_silent_gap() -> None:
    new = argparse.ArgumentParser()
    new.add_subparsers().add_parser("melt").add_argument("--heat", metavar="CLASS")
    with pytest.raises(LookupError, match="melt: CLASS needs"):
        call_of(new, {})


def test_an_unknown_shell(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["completion", "bush"]) == 2
    assert capsys.readouterr().err == "seqcheck: error: SHELL cannot be 'bush'; did you mean 'bash'?\n"


# What every shell must offer: what was typed, then what the last word can become

OFFERS = [
    ("seqcheck ma", {"margins"}),
    ("seqcheck --v", {"--version"}),
    ("seqcheck lint --as ", set(FORMS)),
    ("seqcheck compare --as ", {"screen", "lines"}),
    ("seqcheck lint --as json --only un", {"unreachable"}),
    ("seqcheck draw --trace sh", {"short", "short-pulse"}),
    ("seqcheck lint --col", {"--color"}),
    ("seqcheck lint pump.dseq --color n", {"never"}),
    ("seqcheck lint ", {"pump.dseq", "pump two.dseq", "parts/"}),
    ("seqcheck lint pump.dseq parts/", {"parts/fan.dseq"}),
    ("seqcheck lint --evidence ", {"parts/"}),
    ("seqcheck lint --out no", {"notes.txt"}),
    ("seqcheck lint --most-zones ", set()),
    ("seqcheck audit pump.dseq ", {"vent.json", "parts/"}),
    ("seqcheck audit --help pump.dseq v", {"vent.json"}),
    ("seqcheck compare pump.dseq pa", {"parts/"}),
    ("seqcheck rows pump.dseq p", set()),
    ("seqcheck start three-l", {"three-level"}),
    ("seqcheck completion ", set(SHELLS)),
]
CALLS = pytest.mark.parametrize(("typed", "offered"), OFFERS, ids=[typed for typed, _ in OFFERS])


def run(*call: str, env: dict[str, str] | None = None) -> str:
    """What a shell prints; it must not complain."""
    done = subprocess.run(
        call, capture_output=True, text=True, check=False, timeout=60, env={**os.environ, **(env or {})}
    )
    assert done.stderr == ""
    return done.stdout


needs = {shell: pytest.mark.skipif(not shutil.which(shell), reason=f"there is no {shell}") for shell in SHELLS}
ASK_BASH = """
source .script.bash
read -ra COMP_WORDS <<< "$1"
[[ $1 == *' ' ]] && COMP_WORDS+=('')
COMP_CWORD=$((${#COMP_WORDS[@]} - 1))
_seqcheck seqcheck "${COMP_WORDS[COMP_CWORD]}"
printf '%s\\n' "${COMPREPLY[@]}"
"""


@needs["bash"]
@CALLS
def test_bash_offers(folder: Path, typed: str, offered: set[str]) -> None:
    """The function that bash calls; folders have their stroke from bash itself."""
    assert set(run("bash", "--norc", "-c", ASK_BASH, "bash", typed).split("\n")) - {""} == {
        one.rstrip("/") for one in offered
    }


@needs["bash"]
def test_bash_cuts_an_option_and_its_value_at_the_equals_sign(folder: Path) -> None:
    ask = "source .script.bash\nCOMP_WORDS=(seqcheck lint --as = {})\nCOMP_CWORD={}\n_seqcheck\necho ${{COMPREPLY[@]}}"
    assert run("bash", "--norc", "-c", ask.format("sa", 4)) == "sarif\n"
    assert run("bash", "--norc", "-c", ask.format("", 3)) == f"{' '.join(FORMS)}\n"
    assert run("bash", "--norc", "-c", ask.format("sa --on", 5)) == "--only\n"


@needs["fish"]
@CALLS
def test_fish_offers(folder: Path, typed: str, offered: set[str]) -> None:
    out = run("fish", "--no-config", "-c", f"source .script.fish; complete -C '{typed}'", env={"HOME": str(folder)})
    assert {line.split("\t")[0].replace("\\ ", " ") for line in out.splitlines()} == offered


# A person at a terminal presses TAB


def typed_in(call: list[str], setup: str, keys: str) -> list[str]:
    """The words that a line has become after its keys, in a shell on a terminal of its own."""
    child, terminal = pty.fork()
    if child == 0:
        os.environ.update(TERM="dumb", HOME=str(Path.cwd()), PS1="ready> ", LC_ALL="C.UTF-8")
        os.execvp(call[0], call)
    try:
        seen = ""

        def until(mark: str) -> None:
            nonlocal seen
            end = time.monotonic() + 30
            while mark not in seen:
                assert time.monotonic() < end, seen
                if select.select([terminal], [], [], 0.2)[0]:
                    seen += os.read(terminal, 4096).decode()

        os.write(terminal, f"{setup}; echo set''up\n".encode())
        until("setup")
        os.write(terminal, f"{keys}\t\x01printf '@%s@\\n' \x05\necho do''ne\n".encode())  # to the start, to the end
        until("done")
        return re.findall(r"^@([^%]*?)@\r$", seen, re.MULTILINE)
    finally:
        os.close(terminal)
        os.waitpid(child, 0)


SHELLS_AT_WORK = [
    pytest.param(["bash", "--norc", "--noprofile"], "source .script.bash", marks=needs["bash"], id="bash"),
    pytest.param(
        ["zsh", "-f"],
        "PS1='ready> '; autoload -U compinit; compinit -D -u; source .script.zsh",
        marks=needs["zsh"],
        id="zsh",
    ),
]


@pytest.mark.parametrize(("call", "setup"), SHELLS_AT_WORK)
@pytest.mark.parametrize(
    ("keys", "words"),
    [
        ("seqcheck marg", ["seqcheck", "margins"]),
        ("seqcheck lint --as sar", ["seqcheck", "lint", "--as", "sarif"]),
        ("seqcheck lint --as=sar", ["seqcheck", "lint", "--as=sarif"]),
        ("seqcheck lint pump\\ t", ["seqcheck", "lint", "pump two.dseq"]),
        ("seqcheck lint ./parts/", ["seqcheck", "lint", "./parts/fan.dseq"]),
        ("seqcheck audit pump.dseq ve", ["seqcheck", "audit", "pump.dseq", "vent.json"]),
    ],
)
def test_a_person_presses_tab(folder: Path, call: list[str], setup: str, keys: str, words: list[str]) -> None:
    assert typed_in(call, setup, keys) == words
