"""Where a call begins: help and version are answered before anything that they do not need is loaded."""

import gc
import os
import sys

from seqcheck.arguments import escaping, parser
from seqcheck.exits import FOUND

_AT_ONCE = frozenset({"-h", "--help", "--version"})


def main() -> int:
    """Run the command line of this process; the exit code."""
    gc.disable()  # a short-lived process: collecting would cost more than it frees, while loading too
    if _AT_ONCE.intersection(sys.argv[1:]):
        escaping()
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
    return code
