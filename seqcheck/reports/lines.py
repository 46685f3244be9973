"""The form for other programs' error lists: one finding a line, as the GNU coding standards set out (section 4.4).

`file:line:column: severity: message [check]`; the column counts code points from 1. A severity is `error` for what
keeps the file from being proven, `warning`, or `note` for what a waiver lets pass and for a file with nothing to prove.
"""

from collections.abc import Sequence

from seqcheck.reports.pieces import visible
from seqcheck.reports.remarks import Remark, remarks
from seqcheck.verdict import Answer


def report(answers: Sequence[Answer]) -> str:
    """All findings, in the order of the files and of their places in each; empty where everything is proven."""
    return "".join(f"{_line(one)}\n" for answer in answers for one in remarks(answer))


def _line(remark: Remark) -> str:
    return visible(f"{remark.place}: {remark.severity.value}: {remark.text} [{remark.check}]")
