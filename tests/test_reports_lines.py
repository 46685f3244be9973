"""The form `lines`: one finding a line (GNU coding standards, section 4.4, from memory)."""

import re
from dataclasses import replace

import report_cases as cases
from report_cases import outcome, waiving

from seqcheck.reports import lines


def test_everything_at_once() -> None:
    found = outcome(cases.OVERLAP, cases.SAFE_V, cases.NOT_DECIDED, findings=(cases.NO_PATH, cases.AMBIGUOUS))
    assert lines.report([found]) == (
        "bench.dseq:1:1: error: undecided, not proven: P to N through VH and VL; the limit was reached: 200000 zones"
        " [undecided]\n"
        "bench.dseq:12:3: warning: switch VL has no path; give it one in `paths` [no-path]\n"
        "bench.dseq:25:3: error: two moves out of idle hear open_cmd [ambiguous]\n"
        "bench.dseq:27:3: error: P can be joined to N through UH and UL, for up to 5.1 us; to cure it: make this wait"
        " at least 10.1 us (5.1 us missing at bench.dseq:29:5) [overlap]\n"
    )


def test_a_short_names_its_row() -> None:
    assert lines.report([outcome(cases.SHORT)]) == (
        "bench.dseq:22:3: error: P can be joined to N through UH and UL, without end; row 'brake' of the table (line"
        " 22) commands UH and UL together; to cure it: no wait cures this; row 'brake' must leave one of UH and UL off"
        " [short]\n"
    )


def test_what_is_proven_gives_no_line() -> None:
    assert lines.report([outcome(cases.SAFE_U, cases.SAFE_V), outcome()]) == ""


def test_what_is_waived_is_a_note_with_its_reason() -> None:
    drive = waiving("ambiguous", "open_cmd", "the\nbench only")
    found = lines.report([outcome(cases.OVERLAP, findings=(cases.AMBIGUOUS,), drive=drive)])
    assert found.splitlines()[0] == (
        "bench.dseq:25:3: note: two moves out of idle hear open_cmd; waived because: the\\nbench only [ambiguous]"
    )
    assert found.splitlines()[1].startswith("bench.dseq:27:3: error: ")


def test_every_line_has_the_one_shape() -> None:
    some = [outcome(cases.OVERLAP, cases.SHORT), outcome(replace(cases.OVERLAP, cure=None), findings=(cases.NO_PATH,))]
    rows = lines.report(some).splitlines()
    assert len(rows) == 4
    assert all(re.fullmatch(r"[^:]+:\d+:\d+: (error|warning|note): .+ \[[a-z-]+\]", row) for row in rows)
