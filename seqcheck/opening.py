"""Files as they are opened: what is in them, or what is wrong with them."""

import sys
from pathlib import Path

from seqcheck.messages import Problem, Problems
from seqcheck.source import Place

STDIN = "-"
"""The name that stands for standard input."""


def text_of(file: str) -> str:
    """The text of a file; raises Problems where it cannot be read or is no text."""
    from seqcheck.language import decode

    return decode(data_of(file), file)


def data_of(file: str) -> bytes:
    """What is in a file; raises Problems where it cannot be read."""
    try:
        return sys.stdin.buffer.read() if file == STDIN else Path(file).read_bytes()
    except (OSError, ValueError) as refusal:
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise Problems([_unreadable(file, why)]) from refusal


def _unreadable(file: str, why: str) -> Problem:
    return Problem(Place(file, 1, 1, 1, 1), "cannot-read", f"cannot read this file: {why}", "check its name and rights")
