"""The form for programs: one JSON document with everything that was found, as `outcome.schema.json` describes it.

All times are whole picoseconds. The text is pure ASCII, so that it is JSON whatever the encoding of the output, and on
one line, since the run of a carrier can have tens of thousands of events.
"""

import json
from collections.abc import Iterable, Iterator, Sequence

from seqcheck import __version__
from seqcheck.drive import Drive, Library, cell_text, fact_words
from seqcheck.hazards import Hazard
from seqcheck.messages import Problem
from seqcheck.reports.acts import Note, told
from seqcheck.reports.lanes import Lane, lanes
from seqcheck.reports.remarks import NO_DRIVE
from seqcheck.reports.repository import plain
from seqcheck.reports.standing import sorted_out
from seqcheck.reports.waived import reason
from seqcheck.reports.wording import CAUTION, condition, cure, stated, subject, where
from seqcheck.source import Place
from seqcheck.verdict import (
    WARNINGS,
    Answer,
    Event,
    Failed,
    Finding,
    Outcome,
    Phase,
    Safe,
    Span,
    Trace,
    Undecided,
    Unread,
    Unsafe,
)

FORMAT = "seqcheck outcome 1"
"""Under this name fields and acts may be added, but none is changed or taken away."""
SCHEMA = "outcome.schema.json"
Fields = dict[str, object]


def report(answers: Sequence[Answer]) -> str:
    """The whole document, with a line end."""
    data = {
        "format": FORMAT,
        "program": f"seqcheck {__version__}",
        "caution": CAUTION,
        "files": [_file(one) for one in answers],
    }
    return json.dumps(data, separators=(",", ":")) + "\n"


def _file(answer: Answer) -> Fields:
    if isinstance(answer, Unread):
        problems = [_problem(one) for one in answer.problems]
        return {"file": plain(answer.file), "standing": "wrong-input", "problems": problems}
    if isinstance(answer, Failed):
        return {"file": plain(answer.file), "standing": "internal-error", "fault": plain(answer.fault)}
    if isinstance(answer, Library):
        return {"file": plain(answer.place.file), "title": answer.title, "standing": NO_DRIVE}
    return {
        "file": plain(answer.file),
        "title": answer.drive.title,
        "standing": sorted_out(answer).standing.name.lower(),
        "verdicts": list(_verdicts(answer)),
        "findings": [_finding(one, answer.drive) for one in answer.findings],
    }


def _problem(problem: Problem) -> Fields:
    return {
        "kind": problem.kind,
        "place": _place(problem.place),
        "text": plain(problem.text),
        "way_out": plain(problem.way_out),
    }


def _place(place: Place) -> Fields:
    return {
        "file": plain(place.file),
        "line": place.line,
        "column": place.column,
        "end_line": place.end_line,
        "end_column": place.end_column,
    }


def _placed(place: Place | None) -> Fields | None:
    return None if place is None else _place(place)


def _finding(finding: Finding, drive: Drive) -> Fields:
    return {
        "check": finding.check.value,
        "severity": "warning" if finding.check in WARNINGS else "error",
        "waived": reason(drive, finding),
        "place": _place(finding.place),
        "text": finding.text,
        "way_out": finding.way_out,
        "names": list(finding.names),
    }


# Verdicts


def _verdicts(outcome: Outcome) -> Iterator[Fields]:
    shown = sorted_out(outcome).unsafe
    for verdict in outcome.verdicts:
        if isinstance(verdict, Safe):
            yield _safe(verdict)
        elif isinstance(verdict, Undecided):
            yield _undecided(verdict)
        else:
            run = shown.index(verdict) + 1 if verdict in shown else None
            yield _unsafe(verdict, outcome.drive, run)


def _hazard(hazard: Hazard) -> Fields:
    return {
        "literals": [{"switch": one.switch, "on": one.on} for one in hazard.literals],
        "joins": list(hazard.joins),
        "needs": [[list(fact_words(one)) for one in sorted(way, key=str)] for way in hazard.needs],
        "text": subject(hazard),
        "condition": condition(hazard),
    }


def _safe(verdict: Safe) -> Fields:
    return {
        "verdict": "safe",
        "hazard": _hazard(verdict.hazard),
        "method": verdict.method,
        "zones": verdict.zones,
        "however_late": verdict.however_late,
    }


def _undecided(verdict: Undecided) -> Fields:
    return {
        "verdict": "undecided",
        "hazard": _hazard(verdict.hazard),
        "limit": verdict.limit,
        "zones": verdict.zones,
    }


def _unsafe(verdict: Unsafe, drive: Drive, run: int | None) -> Fields:
    proven = verdict.cure
    return {
        "verdict": "unsafe",
        "hazard": _hazard(verdict.hazard),
        "check": verdict.check.value,
        "waived": reason(drive, verdict),
        "run": run,
        "place": _place(verdict.place),
        "text": "; ".join(one for one in (stated(verdict), where(verdict, drive)) if one),
        "overlap": verdict.overlap,
        "greatest": verdict.greatest,
        "cure": {
            "text": plain(cure(verdict, drive)),
            "shortage": proven.shortage if proven else None,
            "place": _placed(proven.place if proven else None),
        },
        "trace": _trace(verdict.trace, drive),
        "replayed": {
            "switches": [_switch(one) for one in lanes(verdict, drive)],
            "overlap": _span(verdict.replayed.overlap),
        },
    }


# Runs


def _trace(trace: Trace, drive: Drive) -> Fields:
    return {
        "start": drive.start,
        "phases": [_phase(one) for one in trace.phases],
        "events": [_event(event, notes) for event, notes in told(drive, trace)],
        "end": trace.end,
        "overlap": {"start": trace.overlap_from, "end": trace.overlap_to},
        "interlocked": trace.interlocked,
    }


def _phase(phase: Phase) -> Fields:
    return {"carrier": phase.carrier, "high": phase.high, "age": phase.age, "output": phase.output}


def _event(event: Event, notes: Iterable[Note]) -> Fields:
    """An event; a field that says nothing of this act is left out."""
    found: Fields = {"time": event.time, "act": event.act.value}
    if event.name:
        found["name"] = event.name
    if event.index >= 0:
        found["trip" if event.trip else "move"] = event.index
    if event.writes:
        found["writes"] = [{"switch": switch, "cell": cell_text(cell)} for switch, cell in event.writes]
    if event.place is not None:
        found["place"] = _place(event.place)
    if event.cycles is not None:
        found["cycles"] = {"count": event.cycles.count, "first": event.cycles.first, "second": event.cycles.second}
    return {**found, "text": [note.text for note in notes]}


def _switch(lane: Lane) -> Fields:
    return {
        "switch": lane.literal.switch,
        "on": lane.literal.on,
        "commands": [{"time": time, "command": command.value} for time, command in lane.changes],
        "possible": [_span(one) for one in lane.possible],
        "sure": [{"start": start, "end": end} for start, end in lane.sure],
    }


def _span(span: Span) -> Fields:
    return {"start": span.start, "end": span.end}
