"""The form `sarif` (OASIS SARIF 2.1.0; what code hosts ask of it is from memory of their pages)."""

import json
from dataclasses import replace
from pathlib import Path
from types import SimpleNamespace

import pytest
import report_cases as cases
from forms import sarif_schema
from report_cases import LEG_U, outcome, waiving

from seqcheck.messages import Problem
from seqcheck.reports import sarif
from seqcheck.reports.checks import ABOUT
from seqcheck.reports.remarks import FAULT, UNDECIDED, WRONG_INPUT
from seqcheck.reports.repository import Repository
from seqcheck.source import Place
from seqcheck.verdict import Answer, Check, Event, Failed, Unread, Unsafe

TOP = Path.cwd().anchor + "repo"
PROBLEM = Problem(cases.at("rails"), "unknown-name", "unknown node 'Q'", "did you mean 'P'?")


def run_of(*answers: Answer, here: str = TOP) -> dict:
    """The one run of the log, held against the schema."""
    text = sarif.report(answers, Repository(here, TOP))
    assert text.isascii()
    data = json.loads(text)
    sarif_schema().validate(data)
    assert data["version"] == "2.1.0"
    return data["runs"][0]


def steps_of(verdict: Unsafe) -> list[dict]:
    """The steps of the code flow of the one result."""
    (result,) = run_of(outcome(verdict))["results"]
    (flow,) = result["codeFlows"]
    (thread,) = flow["threadFlows"]
    return thread["locations"]


def test_every_check_and_what_stands_for_one_is_described() -> None:
    assert set(ABOUT) == {one.value for one in Check} | {UNDECIDED, WRONG_INPUT, FAULT}
    assert len({one.name for one in ABOUT.values()}) == len(ABOUT)
    for about in ABOUT.values():
        assert about.name
        assert not about.name.endswith(".")
        assert about.says.endswith(".")
        assert about.help.endswith(".")


def test_what_code_hosts_need() -> None:
    run = run_of(outcome(cases.OVERLAP, cases.NOT_DECIDED, findings=(cases.NO_PATH, cases.AMBIGUOUS)))
    driver = run["tool"]["driver"]
    assert driver["name"] == "seqcheck"
    assert run["columnKind"] == "unicodeCodePoints"
    assert {one["id"] for one in driver["rules"]} == {"overlap", "no-path", "ambiguous", "undecided"}
    for rule in driver["rules"]:
        assert rule["shortDescription"]["text"]
        assert rule["fullDescription"]["text"]
        assert rule["help"]["text"]
    for result in run["results"]:
        assert driver["rules"][result["ruleIndex"]]["id"] == result["ruleId"]
        assert driver["rules"][result["ruleIndex"]]["defaultConfiguration"] == {"level": result["level"]}
        assert result["message"]["text"]
        assert result["partialFingerprints"]
        region = result["locations"][0]["physicalLocation"]["region"]
        assert set(region) == {"startLine", "startColumn", "endLine", "endColumn"}
        assert result["kind"] == "fail" or result["level"] == "none"


def test_levels_and_places() -> None:
    run = run_of(outcome(cases.OVERLAP, cases.NOT_DECIDED, findings=(cases.NO_PATH,)))
    assert [(one["ruleId"], one["level"]) for one in run["results"]] == [
        ("undecided", "error"),
        ("no-path", "warning"),
        ("overlap", "error"),
    ]
    region = run["results"][2]["locations"][0]["physicalLocation"]["region"]
    place = cases.REVERSE.place
    assert (region["startLine"], region["startColumn"]) == (place.line, place.column)
    assert (region["endLine"], region["endColumn"]) == (place.end_line, place.end_column)
    assert run["invocations"] == [{"executionSuccessful": True}]
    assert run["artifacts"][0]["properties"] == {"standing": "unsafe"}


def test_the_steps_are_the_run_with_states() -> None:
    steps = steps_of(cases.OVERLAP)
    assert [one["executionOrder"] for one in steps] == list(range(1, len(steps) + 1))
    texts = [one["location"]["message"]["text"] for one in steps]
    assert texts[0] == "start: settled in idle"
    assert "t = 0 s: on reverse_cmd: open -> close" in texts
    begins = steps[texts.index("t = 6.9 us: overlap begins")]
    assert {name: one["text"] for name, one in begins["state"].items()} == {
        "mode": "close",
        "UH command": "off",
        "UH conducts": "may",
        "UL command": "on",
        "UL conducts": "may",
        "overlap": "yes",
    }
    opened = steps[texts.index("t = -100 us: on open_cmd: idle -> open")]
    assert opened["location"]["physicalLocation"]["region"]["startLine"] == cases.OPEN.place.line
    assert opened["state"]["mode"]["text"] == "idle"
    assert all("physicalLocation" in one["location"] for one in steps)


def test_an_act_of_another_version_is_a_step_as_well() -> None:
    event = Event(5, SimpleNamespace(value="hums"), "main")  # type: ignore[arg-type] # what a later version may bring
    trace = replace(cases.REVERSAL, events=(event, *cases.REVERSAL.events))
    texts = [one["location"]["message"]["text"] for one in steps_of(replace(cases.OVERLAP, trace=trace))]
    assert texts[1].endswith(": main hums")


def test_what_is_waived_is_suppressed_with_its_reason() -> None:
    (result,) = run_of(outcome(cases.OVERLAP, drive=waiving("overlap", "UH", "a fuse")))["results"]
    assert result["level"] == "note"
    assert result["suppressions"] == [{"kind": "inSource", "justification": "a fuse"}]


def test_files_that_were_not_judged_are_errors() -> None:
    """A host that sees no result would close what it knew of the file."""
    run = run_of(Unread("bench.dseq", (PROBLEM,)), Failed("f.dseq", "it broke"))
    assert [(one["ruleId"], one["level"]) for one in run["results"]] == [
        ("wrong-input", "error"),
        ("internal-error", "error"),
    ]
    assert run["results"][0]["locations"][0]["physicalLocation"]["region"]["startLine"] == PROBLEM.place.line
    assert run["invocations"] == [{"executionSuccessful": False}]
    assert [one["properties"]["standing"] for one in run["artifacts"]] == ["wrong-input", "internal-error"]


def test_a_proven_file_has_no_result_but_is_named() -> None:
    run = run_of(outcome(cases.SAFE_U))
    assert run["results"] == []
    assert run["artifacts"][0]["location"]["uri"] == "bench.dseq"
    assert run["artifacts"][0]["properties"] == {"standing": "proven"}


def _prints(*verdicts: Unsafe) -> list[str]:
    return [one["partialFingerprints"]["seqcheck/v1"] for one in run_of(outcome(*verdicts))["results"]]


def test_a_fingerprint_outlives_a_moved_line_and_a_changed_time() -> None:
    moved = Place(cases.FILE, 40, 5, 40, 9)
    changed = replace(cases.OVERLAP, place=moved, overlap=4_000_000, cure=None)
    assert _prints(changed) == _prints(cases.OVERLAP)


def test_fingerprints_of_one_file_differ() -> None:
    """Of what has other switches, other names or another check, and of what is the same twice."""
    verdicts = (cases.SHORT, cases.OVERLAP, cases.OVERLAP, cases.NOT_DECIDED, replace(cases.NOT_DECIDED, hazard=LEG_U))
    findings = (cases.NO_PATH, cases.AMBIGUOUS, cases.AMBIGUOUS, replace(cases.AMBIGUOUS, names=("idle", "x")))
    found = run_of(outcome(*verdicts, findings=findings))["results"]
    prints = [one["partialFingerprints"]["seqcheck/v1"] for one in found]
    assert len(set(prints)) == len(prints) == 9


@pytest.mark.parametrize(
    ("file", "here", "uri"),
    [
        ("x.dseq", "", "x.dseq"),
        ("./a/../x.dseq", "", "x.dseq"),
        ("x.dseq", "sub", "sub/x.dseq"),
        ("../x.dseq", "sub", "x.dseq"),
        ("a b%,ü.dseq", "", "a%20b%25%2C%C3%BC.dseq"),
        ("C:x.dseq", "", "C%3Ax.dseq"),
        ("-", "sub", "sub/standard-input"),
    ],
)
def test_a_uri_is_relative_to_the_top(file: str, here: str, uri: str) -> None:
    """RFC 3986: reserved and other characters as percent escapes of UTF-8."""
    repository = Repository(str(Path(TOP, here)), TOP)
    assert repository.uri(file) == uri


def test_a_file_outside_has_a_whole_uri() -> None:
    run = run_of(replace(outcome(cases.SAFE_U), file="../other/x y.dseq"))
    location = run["artifacts"][0]["location"]
    assert location == {"uri": Path(Path.cwd().anchor, "other", "x y.dseq").as_uri()}
    assert location["uri"].startswith("file:///")
