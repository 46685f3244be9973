"""The form for code hosts: OASIS SARIF 2.1.0, a counterexample as one code flow whose steps have states.

Undecided hazards, files that could not be read and faults of the program are results of level `error` like any finding:
a host shows and gates on nothing else, and what was not proven must not look so. What a waiver lets pass is a `note`
with the waiver as its suppression. Sections named here are those of the standard.
"""

import json
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from hashlib import sha256

from seqcheck import __version__
from seqcheck.drive import Drive, Library
from seqcheck.hazards import Hazard
from seqcheck.messages import Problem
from seqcheck.reports.acts import entered
from seqcheck.reports.checks import ABOUT
from seqcheck.reports.instants import Instant
from seqcheck.reports.pieces import Tone, visible
from seqcheck.reports.remarks import NO_DRIVE, Remark, remarks
from seqcheck.reports.repository import Repository, plain
from seqcheck.reports.run import Run, run_of
from seqcheck.reports.standing import sorted_out
from seqcheck.reports.steps import steps, told_at
from seqcheck.reports.wording import subject
from seqcheck.source import Place
from seqcheck.verdict import WARNINGS, Answer, Failed, Finding, Outcome, Undecided, Unread, Unsafe

SCHEMA = "https://docs.oasis-open.org/sarif/sarif/v2.1.0/errata01/os/schemas/sarif-schema-2.1.0.json"
_WARNINGS = frozenset(check.value for check in WARNINGS)
_TOP = "%SRCROOT%"
_IMPORTANCE = {Tone.STRONG: "essential", Tone.BAD: "essential", Tone.FAINT: "unimportant"}
Fields = dict[str, object]


def report(answers: Sequence[Answer], repository: Repository) -> str:
    """The whole log, of one run; pure ASCII, with a line end."""
    return json.dumps(_Log(repository).log(answers), indent=2) + "\n"


class _Log:
    """Puts one log together; knows how files are called and which rules were named."""

    def __init__(self, repository: Repository) -> None:
        self._repository = repository

    def log(self, answers: Sequence[Answer]) -> Fields:
        """The log of all answers."""
        found = [(one, [] if isinstance(one, Library) else remarks(one)) for one in answers]
        named = {one.check for _, own in found for one in own}
        rules = [name for name in ABOUT if name in named]
        run = {
            "tool": {"driver": _driver(rules)},
            "columnKind": "unicodeCodePoints",
            "originalUriBaseIds": {_TOP: {"description": {"text": "The top of the repository."}}},
            "invocations": [{"executionSuccessful": all(isinstance(one, Outcome | Library) for one in answers)}],
            "artifacts": [self._artifact(one) for one in answers],
            "results": [one for answer, own in found for one in self._results(answer, own, rules)],
        }
        return {"$schema": SCHEMA, "version": "2.1.0", "runs": [run]}

    def _artifact(self, answer: Answer) -> Fields:
        return {
            "location": self._artifact_location(answer.place.file if isinstance(answer, Library) else answer.file),
            "roles": ["analysisTarget"],
            "properties": {"standing": _standing(answer)},
        }

    def _artifact_location(self, file: str) -> Fields:
        uri = self._repository.uri(file)
        return {"uri": uri} if uri.startswith("file:") else {"uri": uri, "uriBaseId": _TOP}

    def _results(self, answer: Answer, own: Sequence[Remark], rules: Sequence[str]) -> Iterator[Fields]:
        seen: Counter[str] = Counter()
        for remark in own:
            print_of = _fingerprint(remark)
            seen[print_of] += 1
            result: Fields = {
                "ruleId": remark.check,
                "ruleIndex": rules.index(remark.check),
                "kind": "fail",
                "level": remark.severity.value,
                "message": _message(f"{remark.text}."),
                "locations": [self._location(remark.place)],
                "partialFingerprints": {"seqcheck/v1": f"{print_of}:{seen[print_of]}"},
            }
            if remark.waived is not None:
                result["suppressions"] = [{"kind": "inSource", "justification": plain(remark.waived)}]
            if isinstance(answer, Outcome) and isinstance(remark.about, Unsafe):
                result["codeFlows"] = [self._code_flow(remark.about, answer.drive, remark.text)]
            yield result

    def _location(self, place: Place) -> Fields:
        return {"physicalLocation": self._physical(place)}

    def _physical(self, place: Place) -> Fields:
        return {"artifactLocation": self._artifact_location(place.file), "region": _region(place)}

    def _code_flow(self, verdict: Unsafe, drive: Drive, text: str) -> Fields:
        """The run (3.36): one thread, for there is one firmware."""
        run = run_of(verdict, drive)
        told = [{"executionOrder": number, **step} for number, step in enumerate(self._steps(run, verdict, drive), 1)]
        return {"message": _message(f"{text}."), "threadFlows": [{"locations": told}]}

    def _steps(self, run: Run, verdict: Unsafe, drive: Drive) -> Iterator[Fields]:
        modes = entered(drive, verdict.trace)
        for instant, note, place in steps(run, verdict, drive):
            yield {
                "location": {**self._location(place), "message": _message(told_at(run, instant, note))},
                "state": _state(run, instant, _mode_at(modes, instant.time)),
                "importance": _IMPORTANCE.get(note.tone, "important"),
            }


def _driver(rules: Iterable[str]) -> Fields:
    return {"name": "seqcheck", "version": __version__, "semanticVersion": __version__, "rules": [*map(_rule, rules)]}


def _rule(name: str) -> Fields:
    about = ABOUT[name]
    return {
        "id": name,
        "name": "".join(word.strip("',").capitalize() for word in about.name.replace("'s", "").split()),
        "shortDescription": {"text": f"{about.name}."},
        "fullDescription": {"text": about.says},
        "help": {"text": f"{about.says} {about.help}"},
        "defaultConfiguration": {"level": "warning" if name in _WARNINGS else "error"},
    }


def _standing(answer: Answer) -> str:
    if isinstance(answer, Outcome):
        return sorted_out(answer).standing.name.lower()
    if isinstance(answer, Library):
        return NO_DRIVE
    return "wrong-input" if isinstance(answer, Unread) else "internal-error"


def _message(text: str) -> Fields:
    return {"text": visible(plain(text))}


def _region(place: Place) -> Fields:
    """The same convention as that of a place (3.30): counted from 1, the end exclusive."""
    return {
        "startLine": place.line,
        "startColumn": place.column,
        "endLine": place.end_line,
        "endColumn": place.end_column,
    }


def _fingerprint(remark: Remark) -> str:
    """What stays the same when lines are moved or times change (3.27.17): the check and what it is about."""
    about = remark.about
    said: list[str] = [remark.check]
    if isinstance(about, Unsafe | Undecided):
        said += _words_of(about.hazard)
    elif isinstance(about, Finding):
        said += about.names or (about.text,)
    elif isinstance(about, Problem):
        said += [about.kind, about.text]
    else:
        assert isinstance(about, Failed)
    return sha256("\0".join(map(plain, said)).encode()).hexdigest()[:16]


def _words_of(hazard: Hazard) -> list[str]:
    return sorted(map(str, hazard.literals)) + list(hazard.joins) + ([subject(hazard)] if hazard.asks else [])


def _mode_at(modes: Sequence[tuple[int | None, str]], time: int | None) -> str:
    """The mode that the drive is in when the events of an instant are over."""
    return [name for since, name in modes if since is None or (time is not None and since <= time)][-1]


def _state(run: Run, instant: Instant, mode: str) -> Fields:
    """How all stands after the instant (3.38.9)."""
    said = {"mode": mode}
    for lane, state in zip(run.lanes, instant.states, strict=True):
        said[f"{lane.literal.switch} command"] = state.command.value
        said[f"{lane.literal.switch} conducts"] = state.conduct.value
    said["overlap"] = "yes" if instant.overlap else "no"
    return {name: {"text": text} for name, text in said.items()}
