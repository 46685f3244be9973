"""Every sample and twin in every form for programs: held against the schemas, and read back."""

import json
import re
from pathlib import Path

import pytest
from forms import outcome_schema, read_dump, sarif_schema

from seqcheck.checking import check
from seqcheck.drive import Command
from seqcheck.language import decode, read
from seqcheck.reports import annotations, document, lines, sarif, vcd
from seqcheck.reports.repository import Repository
from seqcheck.reports.standing import Standing, sorted_out
from seqcheck.reports.wording import shown_for, stretch
from seqcheck.verdict import Act, Outcome, Span, Unsafe

ROOT = Path(__file__).parents[1]
FILES = sorted((ROOT / "samples").rglob("*.dseq"))
COMMANDS = {Command.ON: "1", Command.OFF: "0", Command.UNKNOWN: "x"}
COMMAND = r"::(error|notice) file=([^,:]+),line=(\d+),col=(\d+),title=[^,:]+ \[([a-z-]+)\]::(.+)"
EDGES = {Act.RISES: "1", Act.FALLS: "0"}


def text_of(path: str) -> str:
    return decode(Path(path).read_bytes(), path)


def judged(path: Path) -> Outcome:
    """The outcome of a file, named from the top of the repository."""
    name = path.relative_to(ROOT).as_posix()
    return check(read(text_of(name), name, text_of), name, frozenset(), lambda _: None)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_a_file_in_every_form(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """One test, so that each file is proven only once."""
    monkeypatch.chdir(ROOT)
    outcome = judged(path)
    unsafe = [one for one in outcome.verdicts if isinstance(one, Unsafe)]
    assert (sorted_out(outcome).standing is not Standing.PROVEN) == ("faulty" in path.parts)
    holds_as_json(outcome, unsafe)
    holds_as_sarif(outcome, unsafe)
    holds_as_annotations(outcome)
    if not unsafe:
        assert read_dump(vcd.report(outcome)).end is None
    for number, verdict in enumerate(unsafe, 1):
        holds_as_dump(vcd.report(outcome, number), verdict, outcome)


def holds_as_json(outcome: Outcome, unsafe: list[Unsafe]) -> None:
    data = json.loads(document.report([outcome]))
    outcome_schema().validate(data)
    (entry,) = data["files"]
    assert entry["standing"] == sorted_out(outcome).standing.name.lower()
    assert len(entry["verdicts"]) == len(outcome.verdicts)
    for said, verdict in zip([one for one in entry["verdicts"] if one["verdict"] == "unsafe"], unsafe, strict=True):
        assert said["overlap"] == verdict.overlap
        assert [one["time"] for one in said["trace"]["events"]] == [one.time for one in verdict.trace.events]
        assert [one["act"] for one in said["trace"]["events"]] == [one.act.value for one in verdict.trace.events]


def holds_as_sarif(outcome: Outcome, unsafe: list[Unsafe]) -> None:
    data = json.loads(sarif.report([outcome], Repository(str(ROOT), str(ROOT))))
    sarif_schema().validate(data)
    results = data["runs"][0]["results"]
    assert len([one for one in results if "codeFlows" in one]) == len(unsafe)
    for one in results:
        location = one["locations"][0]["physicalLocation"]
        assert (ROOT / location["artifactLocation"]["uri"]).is_file()
        assert location["artifactLocation"]["uri"] == outcome.file


def holds_as_annotations(outcome: Outcome) -> None:
    """Each says what the form `lines` says, at the same place."""
    said = annotations.report([outcome], Repository(str(ROOT), str(ROOT))).splitlines()
    plain = lines.report([outcome]).splitlines()
    assert len(said) == len(plain)
    for one, line in zip(said, plain, strict=True):
        match = re.fullmatch(COMMAND, one)
        assert match
        severity = {"error": "error", "notice": "note"}[match[1]]
        assert f"{match[2]}:{match[3]}:{match[4]}: {severity}: {match[6].replace('%25', '%')} [{match[5]}]" == line


def holds_as_dump(text: str, verdict: Unsafe, outcome: Outcome) -> None:
    """What is read back is the trace, in its order and to the picosecond."""
    dump, trace = read_dump(text), verdict.trace
    entered = [(one.time, one.name) for one in trace.events if one.act is Act.ENTERS]
    assert dump.states("drive.mode") == [(None, outcome.drive.start), *entered]
    for phase in trace.phases:
        right: list[tuple[int | None, str]] = [(None, "1" if phase.high else "0")]
        for one in (event for event in trace.events if event.name == phase.carrier):
            if one.cycles is not None:
                after = right[-1][1]
                right += [(one.time + one.cycles.first, "x"), (one.time + one.cycles.length, after)]
            elif one.act in EDGES:
                right.append((one.time, EDGES[one.act]))
        assert dump.states(f"drive.reference.{phase.carrier}") == right
    span = shown_for(verdict)
    ends = [] if span.end is None else [(span.end, "0")]
    assert dump.states(f"drive.{stretch(verdict)}") == [(None, "0"), (span.start, "1"), *ends]
    assert [time for time, _ in dump.changes["drive.happens"]] == sorted({one.time for one in trace.events})
    assert dump.end is not None
    assert dump.end >= trace.end
    for literal in verdict.hazard.literals:
        commands = verdict.replayed.commands[literal.switch]
        within = [(time, COMMANDS[one]) for time, one in commands if time is None or time <= dump.end]
        assert dump.states(f"drive.command.{literal.switch}") == within
        conducts = dump.states(f"drive.conducts.{literal.switch}")
        holds_as_possible(conducts, verdict.replayed.possible[literal], literal.on, dump.end)


def holds_as_possible(states: list[tuple[int | None, str]], possible: tuple[Span, ...], on: bool, end: int) -> None:
    """A wire is not at the level of "surely not so" exactly where the replay says that the literal is possible."""
    never = "0" if on else "1"
    times = {time for time, _ in states if time is not None} | {one.start for one in possible}
    times |= {one.end for one in possible if one.end is not None}
    for time in (one for one in sorted(times) if 0 <= one <= end):
        value = [level for since, level in states if since is None or since <= time][-1]
        inside = any(one.start <= time and (one.end is None or time < one.end) for one in possible)
        assert (value != never) == inside, time
