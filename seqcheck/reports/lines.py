"""The form for other programs' error lists: one finding a line, as the GNU coding standards set out (section 4.4).

`file:line:column: severity: message [check]`; the column counts code points from 1. A severity is `error` for what
keeps the file from being proven, `warning`, or `note` for what a waiver lets pass and for a file with nothing to prove.
"""

from collections.abc import Iterator, Sequence

from seqcheck.drive import Drive, Library
from seqcheck.reports.pieces import visible
from seqcheck.reports.waived import reason
from seqcheck.reports.wording import NOTHING, SERVES, cure, happens, subject, where
from seqcheck.source import Place
from seqcheck.verdict import WARNINGS, Answer, Finding, Outcome, Undecided, Unsafe


def report(answers: Sequence[Answer]) -> str:
    """All findings, in the order of the files and of their places in each; empty where everything is proven."""
    return "".join(f"{text}\n" for one in answers for _, text in sorted(_found(one), key=lambda pair: pair[0]))


def _found(outcome: Answer) -> Iterator[tuple[Place, str]]:
    if isinstance(outcome, Library):
        yield outcome.place, _line(outcome.place, "note", [f"{NOTHING}: {SERVES}"], "nothing-to-prove")
        return
    yield from _judged(outcome)


def _judged(outcome: Outcome) -> Iterator[tuple[Place, str]]:
    drive = outcome.drive
    for verdict in outcome.verdicts:
        if isinstance(verdict, Unsafe):
            yield verdict.place, _unsafe(verdict, drive)
        elif isinstance(verdict, Undecided):
            yield drive.place, _undecided(verdict, drive)
    for finding in outcome.findings:
        yield finding.place, _finding(finding, drive)


def _unsafe(verdict: Unsafe, drive: Drive) -> str:
    said = [happens(verdict.hazard, verdict.overlap, verdict.greatest), where(verdict, drive)]
    if (why := reason(drive, verdict)) is not None:
        said.append(f"waived because: {why}")
        return _line(verdict.place, "note", said, verdict.check.value)
    return _line(verdict.place, "error", [*said, f"to cure it: {cure(verdict, drive)}"], verdict.check.value)


def _undecided(verdict: Undecided, drive: Drive) -> str:
    """An undecided hazard has no place of its own; it stands at the first line of the drive."""
    said = [f"undecided, not proven: {subject(verdict.hazard)}", f"the limit was reached: {verdict.limit}"]
    return _line(drive.place, "error", said, "undecided")


def _finding(finding: Finding, drive: Drive) -> str:
    if (why := reason(drive, finding)) is not None:
        return _line(finding.place, "note", [finding.text, f"waived because: {why}"], finding.check.value)
    severity = "warning" if finding.check in WARNINGS else "error"
    return _line(finding.place, severity, [finding.text, finding.way_out], finding.check.value)


def _line(place: Place, severity: str, said: Sequence[str], check: str) -> str:
    return visible(f"{place}: {severity}: {'; '.join(text for text in said if text)} [{check}]")
