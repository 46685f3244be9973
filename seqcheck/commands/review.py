"""`seqcheck report`: the page for a design review."""

from collections.abc import Callable

from seqcheck import __version__
from seqcheck.circuit.reading import read_back
from seqcheck.commands.draw import noted
from seqcheck.commands.graphs import graph_of
from seqcheck.evidence.digest import digest
from seqcheck.margins import budget
from seqcheck.proving.search import LimitReached
from seqcheck.reports.page.review import Review, report
from seqcheck.reports.standing import sorted_out, worst
from seqcheck.verdict import Budget, Outcome


def page(outcome: Outcome, command: str, observer: Callable[[int], None]) -> str:
    """The page of an outcome; `observer` limits the search for margins as it does a proof. Raises Problems, Fault."""
    parts, drive = sorted_out(outcome), outcome.drive
    found, unsaid = _budget(outcome, observer)
    review = Review(
        outcome, read_back(drive, outcome.file), graph_of(drive), found, unsaid, digest(drive), __version__, command
    )
    return report(review, noted(parts, worst(parts.unsafe) if parts.unsafe else None))


def _budget(outcome: Outcome, observer: Callable[[int], None]) -> tuple[Budget | None, str]:
    try:
        return budget(outcome.drive, outcome.file, observer, outcome.verdicts), ""
    except LimitReached as limit:
        return None, f"Not told: a limit was reached, {limit}."
