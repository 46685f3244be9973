"""What is amiss in a text, as diagnostics of the protocol.

An empty list says that the text is proven, so a text of which nothing is known yet has a diagnostic that says so.
"""

import os
from collections.abc import Iterator
from typing import Any

from seqcheck.drive import Drive
from seqcheck.language.syntax import UseLine
from seqcheck.messages import Problem
from seqcheck.reports.pieces import visible
from seqcheck.reports.remarks import Remark, Severity, remarks
from seqcheck.serving.documents import Desk, Document
from seqcheck.source import Place
from seqcheck.verdict import Answer, Undecided, Unsafe

UNPROVEN = "unproven"
MOST_STEPS = 200
"""Steps of a run that are shown beside a finding; of a longer one the last."""

_ERROR, _WARNING, _INFORMATION = 1, 2, 3  # DiagnosticSeverity
_SEVERITIES = {Severity.ERROR: _ERROR, Severity.WARNING: _WARNING, Severity.NOTE: _INFORMATION}
Diagnostic = dict[str, Any]


def waiting(document: Document, drive: Drive) -> list[Diagnostic]:
    """That nothing is proven of a text yet."""
    text = "not proven yet: the proof is under way"
    return [_diagnostic(document, drive.place, _INFORMATION, UNPROVEN, text)]


class Teller:
    """Makes diagnostics; `related` tells whether the editor can show places beside one."""

    def __init__(self, desk: Desk, related: bool) -> None:
        self._desk = desk
        self._related = related

    def said(self, document: Document, answer: Answer) -> list[Diagnostic]:
        """All that is amiss."""
        return [self._said(document, one, answer) for one in remarks(answer)]

    def _said(self, document: Document, remark: Remark, answer: Answer) -> Diagnostic:
        about, text, code = remark.about, remark.text, remark.check
        severity = _SEVERITIES[remark.severity]
        if isinstance(about, Problem):
            text, code = "; ".join(one for one in (about.text, about.way_out) if one), about.kind
        elif isinstance(about, Undecided):
            severity, text = _WARNING, f"{text}; 'seqcheck lint' looks as long as it takes"
        beside: list[Diagnostic] = []
        place = remark.place
        if place.file != document.file:
            beside.append(self._beside(document, place, text))
            place, text = _use(document, place), f"in {place}: {text}"
        elif isinstance(about, Unsafe):
            beside += self._run(document, about, answer.drive)  # type: ignore[union-attr] # only an outcome has verdicts
        found = _diagnostic(document, place, severity, code, text)
        return {**found, "relatedInformation": beside} if beside and self._related else found

    def _run(self, document: Document, verdict: Unsafe, drive: Drive) -> Iterator[Diagnostic]:
        """The steps of a counterexample, and what would cure it."""
        from seqcheck.reports.run import run_of
        from seqcheck.reports.steps import steps, told_at

        run = run_of(verdict, drive)
        told = [(place, told_at(run, instant, note)) for instant, note, place in steps(run, verdict, drive)]
        for place, text in told[-MOST_STEPS:]:
            yield self._beside(document, place, text)
        if verdict.cure is not None:
            yield self._beside(document, verdict.cure.place, f"to cure it: {verdict.cure.words}")

    def _beside(self, document: Document, place: Place, text: str) -> Diagnostic:
        return {"location": self._desk.location(document, place), "message": _plain(text)}


def _diagnostic(document: Document, place: Place, severity: int, code: str, text: str) -> Diagnostic:
    return {
        "range": document.lines.range(place),
        "severity": severity,
        "code": code,
        "source": "seqcheck",
        "message": _plain(text),
    }


def _plain(text: str) -> str:
    """Fit for one line of an editor, whatever bytes a file's name has."""
    return visible(text).encode("utf-8", "backslashreplace").decode("utf-8")


def _use(document: Document, place: Place) -> Place:
    """The line that brings another file in: the one that names it, else the first that names any."""
    assert document.study is not None
    singles = document.study.draft.book.singles
    lines = [line for line in singles if isinstance(line.node, UseLine)]
    direct = (line.place for line in lines if _names(line.node, place.file))
    return next(direct, lines[0].place if lines else Place(document.file, 1, 1, 1, 1))


def _names(node: object, file: str) -> bool:
    return isinstance(node, UseLine) and os.path.normpath(node.path.text) == file
