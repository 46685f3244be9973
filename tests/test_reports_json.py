"""The form `json`: what it says of verdicts, findings, and files that were not judged; the schema describes it all."""

import json
from dataclasses import replace
from types import SimpleNamespace

import report_cases as cases
from forms import outcome_schema
from report_cases import outcome, waiving

from seqcheck.messages import Problem
from seqcheck.reports import document
from seqcheck.verdict import Answer, Event, Failed, Unread

PROBLEM = Problem(cases.at("rails"), "unknown-name", "unknown node 'Q'", "did you mean 'P'?")


def said(*answers: Answer) -> dict:
    """The document read back, held against the schema."""
    text = document.report(answers)
    assert text.isascii()
    data = json.loads(text)
    outcome_schema().validate(data)
    return data


def test_the_head() -> None:
    data = said(outcome())
    assert data["format"] == document.FORMAT == "seqcheck outcome 1"
    assert data["files"] == [
        {"file": "bench.dseq", "title": "Bench actuator, 24 V", "standing": "proven", "verdicts": [], "findings": []}
    ]


def test_every_kind_of_verdict() -> None:
    (entry,) = said(outcome(cases.SAFE_U, cases.OVERLAP, cases.NOT_DECIDED, cases.SHORT))["files"]
    safe, overlap, undecided, short = entry["verdicts"]
    assert (safe["verdict"], safe["method"], safe["zones"], safe["however_late"]) == ("safe", "zones", 812, False)
    assert (undecided["verdict"], undecided["limit"]) == ("undecided", "200000 zones")
    assert (overlap["check"], overlap["overlap"], overlap["run"]) == ("overlap", 5_100_000, 1)
    assert (short["check"], short["overlap"], short["run"]) == ("short", None, 2)
    assert overlap["place"]["line"] == 27
    assert overlap["cure"]["shortage"] == 5_100_000
    assert overlap["cure"]["place"]["line"] == 29
    assert short["cure"]["shortage"] is None
    assert entry["standing"] == "unsafe"


def test_the_run() -> None:
    (entry,) = said(outcome(cases.OVERLAP))["files"]
    (verdict,) = entry["verdicts"]
    events = verdict["trace"]["events"]
    assert [one["act"] for one in events[:4]] == ["begins", "writes", "writes", "enters"]
    assert events[0]["move"] == 0
    assert events[0]["text"] == ["on open_cmd: idle -> open"]
    assert events[1]["writes"] == [{"switch": "UH", "cell": "on"}]
    upper, lower = verdict["replayed"]["switches"]
    assert upper["commands"][0] == {"time": None, "command": "off"}
    assert upper["possible"] == [{"start": 1_001_500_000, "end": 1_112_000_000}]
    assert lower["possible"] == [{"start": 1_106_900_000, "end": None}]
    assert verdict["replayed"]["overlap"] == {"start": 1_106_900_000, "end": 1_112_000_000}


def test_findings_and_what_is_waived() -> None:
    drive = waiving("ambiguous", "open_cmd", "the bench only")
    (entry,) = said(outcome(cases.SAFE_V, findings=(cases.NO_PATH, cases.AMBIGUOUS), drive=drive))["files"]
    assert [(one["check"], one["severity"], one["waived"]) for one in entry["findings"]] == [
        ("no-path", "warning", None),
        ("ambiguous", "error", "the bench only"),
    ]
    assert entry["standing"] == "proven"
    drive = waiving("overlap", "UH", "a fuse")
    (entry,) = said(outcome(cases.OVERLAP, cases.SHORT, drive=drive))["files"]
    assert [(one["waived"], one["run"]) for one in entry["verdicts"]] == [("a fuse", None), (None, 1)]


def test_files_that_were_not_judged() -> None:
    wrong, failed, judged = said(Unread("w.dseq", (PROBLEM,)), Failed("f.dseq", "it broke"), outcome())["files"]
    assert (wrong["standing"], wrong["problems"][0]["kind"]) == ("wrong-input", "unknown-name")
    assert (failed["standing"], failed["fault"]) == ("internal-error", "it broke")
    assert judged["standing"] == "proven"


def test_undecided_is_never_proven() -> None:
    (entry,) = said(outcome(cases.SAFE_U, cases.NOT_DECIDED))["files"]
    assert entry["standing"] == "undecided"


def test_a_name_that_is_no_text_is_escaped() -> None:
    """JSON has no lone surrogates, which is how Python keeps bytes that are no UTF-8."""
    (entry,) = said(replace(outcome(), file="dr\udcfcck.dseq"))["files"]
    assert entry["file"] == "dr\\udcfcck.dseq"


def test_an_act_of_another_version_is_written_as_it_is() -> None:
    unknown = SimpleNamespace(value="hums")
    event = Event(5, unknown, "main")  # type: ignore[arg-type] # what a later version may bring
    trace = replace(cases.REVERSAL, events=(event, *cases.REVERSAL.events))
    (entry,) = said(outcome(replace(cases.OVERLAP, trace=trace)))["files"]
    first = entry["verdicts"][0]["trace"]["events"][0]
    assert (first["act"], first["name"], first["text"]) == ("hums", "main", ["main hums"])
