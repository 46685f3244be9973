"""Everything that is amiss in a file, one sentence each with its place and severity: what forms for programs say."""

from collections.abc import Iterator
from enum import Enum

from seqcheck.drive import Drive, Library
from seqcheck.faults import Faulted
from seqcheck.messages import Problem
from seqcheck.records import dataclass
from seqcheck.reports.waived import reason
from seqcheck.reports.wording import NOTHING, SERVES, cure, stated, subject, where
from seqcheck.source import Place
from seqcheck.verdict import WARNINGS, Answer, Failed, Finding, Outcome, Undecided, Unread, Unsafe

UNDECIDED, WRONG_INPUT, FAULT, NO_DRIVE = "undecided", "wrong-input", "internal-error", "nothing-to-prove"
"""What stands in place of the name of a check where none is at fault."""


class Severity(Enum):
    """ERROR is what keeps a file from being proven, NOTE what a waiver lets pass."""

    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"


@dataclass(frozen=True, slots=True)
class Remark:
    """One thing that is amiss: `check` is the name of its check or UNDECIDED, WRONG_INPUT, FAULT, NO_DRIVE.

    `text` is one sentence without full stop, `waived` the reason of the waiver that lets it pass.
    """

    place: Place
    severity: Severity
    check: str
    text: str
    about: Unsafe | Undecided | Finding | Problem | Failed | Library | Faulted
    waived: str | None = None


def remarks(answer: Answer) -> list[Remark]:
    """All remarks on one file in the order of their places; none where everything is proven."""
    if isinstance(answer, Unread):
        return [_problem(one) for one in answer.problems]
    if isinstance(answer, Failed):
        text = f"internal error, please report it with the file: {answer.fault}"
        return [Remark(Place(answer.file, 1, 1, 1, 1), Severity.ERROR, FAULT, text, answer)]
    if isinstance(answer, Library):
        return [Remark(answer.place, Severity.NOTE, NO_DRIVE, f"{NOTHING}: {SERVES}", answer)]
    return sorted(_found(answer), key=lambda one: one.place)


def _found(outcome: Outcome) -> Iterator[Remark]:
    drive = outcome.drive
    for verdict in outcome.verdicts:
        if isinstance(verdict, Unsafe):
            yield _unsafe(verdict, drive)
        elif isinstance(verdict, Undecided):
            yield _undecided(verdict, drive)
    for finding in outcome.findings:
        yield _finding(finding, drive)
    yield from _faults(outcome)


def _faults(outcome: Outcome) -> Iterator[Remark]:
    """What single faults bring, at the line of the switch; nothing is amiss in the file itself."""
    if not outcome.faults:
        return
    from seqcheck.reports.faults import CHECK, brings, called

    places = {switch.name: switch.place for switch in outcome.drive.stage.switches}
    for one in outcome.faults:
        if one.brings:
            text = f"stuck {called(outcome.drive, one)}: {_sentence(*brings(outcome.drive, one))}"
            yield Remark(places[one.faults[0].switch], Severity.NOTE, CHECK, text, one)


def _unsafe(verdict: Unsafe, drive: Drive) -> Remark:
    said = [stated(verdict), where(verdict, drive)]
    why = reason(drive, verdict)
    said.append(f"to cure it: {cure(verdict, drive)}" if why is None else f"waived because: {why}")
    severity = Severity.ERROR if why is None else Severity.NOTE
    return Remark(verdict.place, severity, verdict.check.value, _sentence(*said), verdict, why)


def _undecided(verdict: Undecided, drive: Drive) -> Remark:
    """An undecided hazard has no place of its own; it stands at the first line of the drive."""
    said = [f"undecided, not proven: {subject(verdict.hazard)}", f"the limit was reached: {verdict.limit}"]
    return Remark(drive.place, Severity.ERROR, UNDECIDED, _sentence(*said), verdict)


def _finding(finding: Finding, drive: Drive) -> Remark:
    name = finding.check.value
    if (why := reason(drive, finding)) is not None:
        text = _sentence(finding.text, f"waived because: {why}")
        return Remark(finding.place, Severity.NOTE, name, text, finding, why)
    severity = Severity.WARNING if finding.check in WARNINGS else Severity.ERROR
    return Remark(finding.place, severity, name, _sentence(finding.text, finding.way_out), finding)


def _problem(problem: Problem) -> Remark:
    text = f"{_sentence(problem.text, problem.way_out)} ({problem.kind})"
    return Remark(problem.place, Severity.ERROR, WRONG_INPUT, text, problem)


def _sentence(*said: str) -> str:
    return "; ".join(text for text in said if text)
