"""`seqcheck margins`: the dead-time budget of a file, in the form that is asked for."""

from collections.abc import Callable

from seqcheck.drive import Drive
from seqcheck.exits import FOUND, PROVEN, UNDECIDED
from seqcheck.margins import budget
from seqcheck.reports import budget as wording

FORMS = ("screen", "lines", "json")


def run(drive: Drive, file: str, observer: Callable[[int], None], form: str, painted: bool) -> tuple[str, int]:
    """The answer as a text and the exit code. Raises Problems for a stage that is refused, Fault."""
    found = budget(drive, file, observer)
    code = FOUND if found.unsafe else UNDECIDED if found.undecided else PROVEN
    if form == "json":
        from seqcheck.reports import budget_document

        return budget_document.report(found), code
    if form == "lines":
        return wording.lines(found), code
    from seqcheck.reports import screen

    return (screen.coloured if painted else screen.plain)(wording.report(found)), code
