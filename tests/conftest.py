"""Tests' common set-up: a cache of their own; the table of what was drawn, printed at the end of a campaign."""

import os
import signal
import tempfile

from judge.features import pytest_terminal_summary

__all__ = ["pytest_terminal_summary"]

CACHE = tempfile.TemporaryDirectory(prefix="seqcheck cache ")
os.environ["XDG_CACHE_HOME"] = CACHE.name  # no test may find or leave anything in the user's own

if signal.getsignal(signal.SIGINT) is signal.SIG_IGN:
    # a shell's background job ignores the keyboard, and so would every program that tests start and interrupt
    signal.signal(signal.SIGINT, signal.default_int_handler)
