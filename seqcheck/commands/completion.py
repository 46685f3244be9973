"""`seqcheck completion`: the script with which a shell completes calls, made from the parser of the command line."""

import argparse

from seqcheck.commands import draw
from seqcheck.commands.margins import FORMS as MARGINS_FORMS
from seqcheck.commands.size import FORMS as SIZE_FORMS
from seqcheck.commands.start import KINDS
from seqcheck.completing import bash, fish, zsh
from seqcheck.completing.calls import call_of
from seqcheck.verdict import Check

WRITERS = {"bash": bash.script, "zsh": zsh.script, "fish": fish.script}
"""What writes the script for each shell."""


def script(shell: str, parser: argparse.ArgumentParser, forms: tuple[str, ...], compared: tuple[str, ...]) -> str:
    """The script for a shell that is in WRITERS; `forms` are those of `lint`, `compared` those of `compare`."""
    known = {
        "WHEN": ("auto", "always", "never"),
        "CHECK": tuple(check.value for check in Check),
        "KIND": tuple(KINDS),
        "SHELL": tuple(WRITERS),
        "lint FORM": forms,
        "compare FORM": compared,
        "margins FORM": MARGINS_FORMS,
        "size FORM": SIZE_FORMS,
        "draw FORM": draw.FORMS,
        "draw CHECK": draw.TRACED,
    }
    return WRITERS[shell](call_of(parser, known))
