"""Help texts: each command has one, with an example that is a call it takes."""

import argparse
import re
import shlex

import pytest

from seqcheck import cli
from seqcheck.arguments import parser

COMMANDS = [
    name for action in parser()._actions if isinstance(action, argparse._SubParsersAction) for name in action.choices
]


def shown(capsys: pytest.CaptureFixture[str], *call: str) -> str:
    """The help of a call at 80 columns."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("COLUMNS", "80")
        assert cli.main([*call, "--help"]) == 0
    return capsys.readouterr().out


def calls(text: str) -> list[list[str]]:
    """The calls of the program among the examples of a help text, without its name."""
    lines = re.search(r"^example.*:\n((?:  .+\n)+)", text, re.MULTILINE)
    assert lines, text
    found = [shlex.split(one) for one in re.findall(r"seqcheck ([^|>&)\n]+)", lines[1])]
    assert found
    return found


@pytest.mark.parametrize("command", ["", *COMMANDS])
def test_help_fits_a_terminal_and_has_an_example_that_parses(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    text = shown(capsys, *command.split())
    assert max(map(len, text.splitlines())) <= 80
    assert "positional arguments" not in text
    for call in calls(text):
        asked = parser().parse_args(call)
        assert asked.command in ((command,) if command and call[0] == command else COMMANDS)
    assert not command or any(call[0] == command for call in calls(text))


def test_the_list_of_commands_is_one_line_each(capsys: pytest.CaptureFixture[str]) -> None:
    text = shown(capsys)
    for command in COMMANDS:
        assert re.search(rf"^    {command} +[a-z]", text, re.MULTILINE), command
