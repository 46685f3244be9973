"""The dead-time budget for programs: one JSON document, as `margins.schema.json` describes it.

All times are whole picoseconds. The text is pure ASCII and on one line.
"""

import json

from seqcheck import __version__
from seqcheck.reports.budget import after, ticks
from seqcheck.reports.document import (
    Fields,
    hazard_fields,
    lane_fields,
    literal_fields,
    placed_fields,
    span_fields,
    trace_fields,
)
from seqcheck.reports.lanes import lanes_of
from seqcheck.reports.repository import plain
from seqcheck.reports.wording import CAUTION, happens, subject
from seqcheck.verdict import Budget, Margin, Span

FORMAT = "seqcheck margins 1"
"""Under this name fields may be added, but none is changed or taken away."""
SCHEMA = "margins.schema.json"


def report(budget: Budget) -> str:
    """The whole document, with a line end."""
    data = {
        "format": FORMAT,
        "program": f"seqcheck {__version__}",
        "caution": CAUTION,
        "file": plain(budget.file),
        "title": budget.drive.title,
        "standing": "unsafe" if budget.unsafe else "undecided" if budget.undecided else "proven",
        "margins": [_margin(one, budget) for one in budget.margins],
        "unsafe": [
            {"hazard": hazard_fields(one), "overlap": time, "greatest": sure, "text": happens(one, time, sure)}
            for one, time, sure in budget.unsafe
        ],
        "undecided": [
            {"hazard": hazard_fields(one.hazard), "limit": one.limit, "text": subject(one.hazard)}
            for one in budget.undecided
        ],
        "alone": [hazard_fields(one) for one in budget.alone],
    }
    return json.dumps(data, separators=(",", ":")) + "\n"


def _margin(margin: Margin, budget: Budget) -> Fields:
    return {
        "hazard": hazard_fields(margin.hazard),
        "after": literal_fields([margin.literal])[0],
        "needed": margin.needed,
        "slack": margin.slack,
        "exact": margin.exact,
        "limit": margin.limit or None,
        "ticks": None if margin.slack is None else ticks(margin.slack, budget.drive),
        "held_by_interlock": margin.hazard in budget.held,
        "punctual": margin.hazard in budget.punctual,
        "place": placed_fields(margin.place),
        "text": after(margin),
        "run": _run(margin, budget),
    }


def _run(margin: Margin, budget: Budget) -> Fields | None:
    """The run that leaves no more; the gap lies from where the literal is over to where all others are possible."""
    trace, replayed = margin.trace, margin.replayed
    if trace is None or replayed is None or margin.slack is None:
        return None
    met = trace.overlap_from
    fields = {name: value for name, value in trace_fields(trace, budget.drive).items() if name != "overlap"}
    switches = [lane_fields(one) for one in lanes_of(margin.hazard.literals, replayed, budget.drive)]
    return {**fields, "gap": span_fields(Span(met - margin.slack, met)), "switches": switches}
