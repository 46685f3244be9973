"""Tests' common set-up: a cache of their own; the table of what was drawn, printed at the end of a campaign."""

import os
import tempfile

from judge.features import pytest_terminal_summary

__all__ = ["pytest_terminal_summary"]

CACHE = tempfile.TemporaryDirectory(prefix="seqcheck cache ")
os.environ["XDG_CACHE_HOME"] = CACHE.name  # no test may find or leave anything in the user's own
