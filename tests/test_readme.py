"""README and the program say the same."""

import re
from pathlib import Path

import pytest

from seqcheck.cli import FORMS, main
from seqcheck.verdict import Check

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
OUTPUTS = re.findall(r"<!-- output: seqcheck (.+?) -->\n```\n(.*?)```\n", README, re.DOTALL)
COMMANDS = re.findall(r"```sh\n(python3 -m venv .+?)\n```", README)


def test_there_are_outputs_to_compare() -> None:
    assert len(OUTPUTS) >= 2
    assert len(COMMANDS) == 2


@pytest.mark.parametrize(("call", "shown"), OUTPUTS, ids=[call for call, _ in OUTPUTS])
def test_an_output_in_the_readme_is_what_the_program_prints(
    call: str, shown: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(ROOT)
    main(call.split())
    assert capsys.readouterr().out == shown


def test_the_gate_runs_the_second_command() -> None:
    assert COMMANDS[1] in (ROOT / ".ci" / "run").read_text(encoding="utf-8").splitlines()


def test_every_check_that_can_be_found_is_in_the_table() -> None:
    rows = set(re.findall(r"^\| `([a-z-]+)`", README, re.MULTILINE))
    assert rows == {check.value for check in Check}


def test_every_option_of_lint_is_named(capsys: pytest.CaptureFixture[str]) -> None:
    main(["lint", "--help"])
    options = set(re.findall(r"--[a-z-]+", capsys.readouterr().out)) - {"--help"}
    assert options == set(re.findall(r"`(--[a-z-]+)", README)) - {"--help"}


def test_every_form_has_its_row() -> None:
    rows = re.findall(r"^\| `--as ([a-z-]+)`", README, re.MULTILINE)
    assert tuple(rows) == FORMS
