"""The form for merge requests: workflow commands that a code host's runner shows beside the lines of a change.

A line is `::error file=…,line=…,col=…,title=…::message`, with `warning` and `notice` for the other severities. Line
ends and `%` are written as percent escapes, in the properties `:` and `,` as well. The host shows only the first ten of
a step for each severity; the rest stands in the log.
"""

from collections.abc import Sequence

from seqcheck.drive import Library
from seqcheck.reports.checks import ABOUT
from seqcheck.reports.pieces import visible
from seqcheck.reports.remarks import Remark, Severity, remarks
from seqcheck.reports.repository import Repository, plain
from seqcheck.verdict import Answer

_COMMANDS = {Severity.ERROR: "error", Severity.WARNING: "warning", Severity.NOTE: "notice"}


def report(answers: Sequence[Answer], repository: Repository) -> str:
    """A command a remark, in the order of the files and of their places in each; empty where everything is proven."""
    judged = [one for one in answers if not isinstance(one, Library)]
    return "".join(f"{_command(one, repository)}\n" for answer in judged for one in remarks(answer))


def _command(remark: Remark, repository: Repository) -> str:
    place = remark.place
    properties = {
        "file": repository.path(place.file),
        "line": str(place.line),
        "col": str(place.column),
        "title": f"{ABOUT[remark.check].name} [{remark.check}]",
    }
    said = ",".join(f"{name}={_property(value)}" for name, value in properties.items())
    return f"::{_COMMANDS[remark.severity]} {said}::{_message(visible(plain(remark.text)))}"


def _message(text: str) -> str:
    return text.replace("%", "%25").replace("\r", "%0D").replace("\n", "%0A")


def _property(text: str) -> str:
    return _message(text).replace(":", "%3A").replace(",", "%2C")
