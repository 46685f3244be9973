"""The form for programs: one JSON document with everything that was found, as `outcome.schema.json` describes it.

All times are whole picoseconds. The text is pure ASCII, so that it is JSON whatever the encoding of the output, and on
one line, since the run of a carrier can have tens of thousands of events.
"""

import json
from collections.abc import Iterable, Iterator, Sequence

from seqcheck import __version__
from seqcheck.drive import Drive, Library, Trip, cell_text, fact_words
from seqcheck.faults import Brought, Faulted, Where
from seqcheck.hazards import Fault, Hazard, Literal, Stuck
from seqcheck.messages import Problem
from seqcheck.reports.acts import Note, told
from seqcheck.reports.faults import brings as sentences
from seqcheck.reports.faults import called
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
        **({} if answer.faults is None else {"faults": [_faulted(one, answer.drive) for one in answer.faults]}),
    }


def _problem(problem: Problem) -> Fields:
    return {
        "kind": problem.kind,
        "place": place_fields(problem.place),
        "text": plain(problem.text),
        "way_out": plain(problem.way_out),
    }


def place_fields(place: Place) -> Fields:
    """A place of the file."""
    return {
        "file": plain(place.file),
        "line": place.line,
        "column": place.column,
        "end_line": place.end_line,
        "end_column": place.end_column,
    }


def placed_fields(place: Place | None) -> Fields | None:
    """A place, None for none."""
    return None if place is None else place_fields(place)


def _finding(finding: Finding, drive: Drive) -> Fields:
    return {
        "check": finding.check.value,
        "severity": "warning" if finding.check in WARNINGS else "error",
        "waived": reason(drive, finding),
        "place": place_fields(finding.place),
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


def hazard_fields(hazard: Hazard) -> Fields:
    """What must never be."""
    return {
        "literals": literal_fields(hazard.literals),
        "joins": list(hazard.joins),
        "needs": [[list(fact_words(one)) for one in sorted(way, key=str)] for way in hazard.needs],
        "text": subject(hazard),
        "condition": condition(hazard),
        **_stuck(hazard),
    }


def literal_fields(literals: Iterable[Literal]) -> list[Fields]:
    """What is possible or wanted of switches."""
    return [{"switch": one.switch, "on": one.on} for one in literals]


def _stuck(hazard: Hazard) -> Fields:
    """The mode and the faults of a question about single faults; nothing for any other."""
    asks = hazard.asks
    return {"stuck": {"mode": asks.mode, "faults": _faults(asks.faults)}} if isinstance(asks, Stuck) else {}


def _faults(faults: Iterable[Fault]) -> list[Fields]:
    return [{"switch": one.switch, "on": one.on, "pin": one.pin} for one in faults]


def _safe(verdict: Safe) -> Fields:
    return {
        "verdict": "safe",
        "hazard": hazard_fields(verdict.hazard),
        "method": verdict.method,
        "zones": verdict.zones,
        "however_late": verdict.however_late,
    }


def _undecided(verdict: Undecided) -> Fields:
    return {
        "verdict": "undecided",
        "hazard": hazard_fields(verdict.hazard),
        "limit": verdict.limit,
        "zones": verdict.zones,
    }


def _unsafe(verdict: Unsafe, drive: Drive, run: int | None) -> Fields:
    proven = verdict.cure
    return {
        "verdict": "unsafe",
        "hazard": hazard_fields(verdict.hazard),
        "check": verdict.check.value,
        "waived": reason(drive, verdict),
        "run": run,
        "place": place_fields(verdict.place),
        "text": "; ".join(one for one in (stated(verdict), where(verdict, drive)) if one),
        "overlap": verdict.overlap,
        "greatest": verdict.greatest,
        "cure": {
            "text": plain(cure(verdict, drive)),
            "shortage": proven.shortage if proven else None,
            "place": placed_fields(proven.place if proven else None),
        },
        "trace": trace_fields(verdict.trace, drive),
        "replayed": {
            "switches": [lane_fields(one) for one in lanes(verdict, drive)],
            "overlap": span_fields(verdict.replayed.overlap),
        },
    }


# Single faults


def _faulted(faulted: Faulted, drive: Drive) -> Fields:
    brings = zip(faulted.brings, sentences(drive, faulted), strict=True)
    return {
        "stuck": _faults(faulted.faults),
        "name": called(drive, faulted),
        "brings": [_brought(one, text, drive) for one, text in brings],
    }


def _brought(brought: Brought, text: str, drive: Drive) -> Fields:
    spread = brought.spread
    return {
        "hazard": hazard_fields(brought.hazard),
        "left": literal_fields(brought.left.literals),
        "anyway": brought.anyway,
        "rows": [name for name in drive.modes if name in spread.held],
        "places": [_where(one, drive) for one in sorted(spread.places, key=_in_order)],
        "limit": spread.limit,
        "text": text,
    }


def _in_order(where: Where) -> tuple[str, int]:
    """By modes, at rest first."""
    return where.mode, -1 if where.run is None else where.run


def _where(where: Where, drive: Drive) -> Fields:
    """At rest in a mode, or in the run of a move or trip that left it."""
    run = where.run_of(drive)
    if run is None or where.run is None:
        return {"mode": where.mode}
    moves = len(drive.moves)
    number = {"trip": where.run - moves} if isinstance(run, Trip) else {"move": where.run}
    return {"mode": where.mode, **number, "place": place_fields(run.place)}


# Runs


def trace_fields(trace: Trace, drive: Drive) -> Fields:
    """A run, its events with what is said of them."""
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
        found["place"] = place_fields(event.place)
    if event.cycles is not None:
        found["cycles"] = {"count": event.cycles.count, "first": event.cycles.first, "second": event.cycles.second}
    return {**found, "text": [note.text for note in notes]}


def lane_fields(lane: Lane) -> Fields:
    """What one switch of a run is told, and when it can and must be so."""
    return {
        "switch": lane.literal.switch,
        "on": lane.literal.on,
        "commands": [{"time": time, "command": command.value} for time, command in lane.changes],
        "possible": [span_fields(one) for one in lane.possible],
        "sure": [{"start": start, "end": end} for start, end in lane.sure],
    }


def span_fields(span: Span) -> Fields:
    """A stretch of time."""
    return {"start": span.start, "end": span.end}
