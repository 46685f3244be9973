"""The form for other programs' error lists: one finding a line, as the GNU coding standards set out (section 4.4).

`file:line:column: severity: message [check]`; the column counts code points from 1. A severity is `error` for what
keeps the file from being proven, `warning`, or `note` for what a waiver lets pass.
"""

from collections.abc import Sequence

from seqcheck.reports.pieces import visible
from seqcheck.reports.remarks import Remark, remarks
from seqcheck.verdict import Outcome


def report(outcomes: Sequence[Outcome]) -> str:
    """All findings, in the order of the files and of their places in each; empty where everything is proven."""
    return "".join(f"{_line(one)}\n" for outcome in outcomes for one in remarks(outcome))


def _line(remark: Remark) -> str:
    return visible(f"{remark.place}: {remark.severity.value}: {remark.text} [{remark.check}]")
