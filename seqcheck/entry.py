"""Where a call begins: help and version are answered before anything that they do not need is loaded."""

import gc
import os
import sys

from seqcheck.arguments import complain, parser
from seqcheck.exits import FOUND, WRONG
from seqcheck.streams import let_go, ready_streams

_AT_ONCE = frozenset({"-h", "--help", "--version"})


def main() -> int:
    """Run the command line of this process; the exit code."""
    gc.disable()  # a short-lived process: collecting would cost more than it frees, while loading too
    if _AT_ONCE.intersection(sys.argv[1:]):
        ready_streams()
        try:
            parser().parse_args()
        except SystemExit as stop:
            return _flushed(int(stop.code or 0))
    from seqcheck.cli import main

    return main()


def _flushed(code: int) -> int:
    try:
        sys.stdout.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return FOUND
    except OSError as refusal:
        complain(f"error: {refusal.strerror or refusal}")
        let_go()
        return WRONG
    return code
