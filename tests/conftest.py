"""Tests' common set-up: the table of what was drawn, printed at the end of a campaign."""

from judge.features import pytest_terminal_summary

__all__ = ["pytest_terminal_summary"]
