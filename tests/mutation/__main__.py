"""Puts faults into the rooms that a proof rests on, and tells which of them no test notices.

    PYTHONPATH=.:tests nice python -m mutation [--only FILE ...] [--jobs N] [--budget SECONDS] [--afresh] [--stale]

Judgements are kept in `.mutation/` and not made again while the function and, for survivors, the tests stay the same.
The exit code is 1 where a survivor is not in `explained.txt`, or where that holds an entry that fits no survivor.
"""

import argparse
import gc
import hashlib
import json
import marshal
import os
import sys
import tempfile
from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

import hypothesis
import pytest

from mutation import trials
from mutation.explained import Explained, read
from mutation.faults import Module, Mutant

ROOT = Path(__file__).resolve().parents[2]
HOUSE = ROOT / "seqcheck"
KEPT = ROOT / ".mutation"

PATTERNS = (
    *("zones.py", "hazards.py", "circuit/[!_]*.py"),
    *(f"proving/{name}.py" for name in ("conduction", "schedule", "circles", "search", "screen")),
    *("evidence/[!_]*.py", "evidence/cover/[!_]*.py"),
)
ROOMS = tuple(str(path.relative_to(HOUSE)) for pattern in PATTERNS for path in sorted(HOUSE.glob(pattern)))
"""The files of zones, hazards, circuit, screen, exploration, replay and audit."""

LEFT_OUT = (
    *("test_cli*.py", "test_shipped.py", "test_cache.py", "test_readme.py", "test_forms.py", "test_reports_*.py"),
    *("test_rooms.py", "test_grammar.py", "test_language*.py", "test_malformed.py", "test_campaign_reader.py"),
    "test_mutation.py",
)
"""Tests that start other processes, in which no fault is, that look at sources only, or that are about reading a file
or writing a report: they are slow, or tell nothing of a proof that others do not."""


@dataclass(frozen=True, slots=True)
class Called:
    """A test's time and the functions that it calls."""

    seconds: float
    functions: frozenset[str]


@dataclass(frozen=True, slots=True)
class Judged:
    """A judgement that was kept."""

    outcome: str
    by: str
    seconds: float
    tests: str  # hash of all tests at that time


class Kept:
    """Judgements on disk, a line each; the last one of a mutant counts."""

    def __init__(self, afresh: bool) -> None:
        KEPT.mkdir(exist_ok=True)
        self._file = KEPT / "judged.jsonl"
        if afresh:
            self._file.unlink(missing_ok=True)
        lines = self._file.read_text(encoding="utf-8").splitlines() if self._file.exists() else []
        self._judged = {key: Judged(*rest) for key, *rest in map(json.loads, lines)}

    def find(self, key: str) -> Judged | None:
        return self._judged.get(key)

    def keep(self, key: str, judged: Judged) -> None:
        self._judged[key] = judged
        with self._file.open("a", encoding="utf-8") as file:
            print(json.dumps([key, judged.outcome, judged.by, judged.seconds, judged.tests]), file=file)


@dataclass(frozen=True, slots=True)
class Case:
    """A mutant of a file and the name under which its judgement is kept."""

    file: str
    module: Module
    mutant: Mutant
    key: str

    @property
    def function(self) -> str:
        return f"{self.file}:{self.mutant.function}"


def cases(files: Sequence[str]) -> Iterator[Case]:
    """All mutants of some files."""
    for file in files:
        source = (HOUSE / file).read_text(encoding="utf-8")
        module = Module(source)
        hashed = {name: _hash(text) for name, text in module.functions.items()}
        for mutant in module.mutants:
            yield Case(file, module, mutant, _hash(file, hashed[mutant.function], *mutant.name))


def _hash(*texts: str) -> str:
    return hashlib.sha256("\0".join(texts).encode()).hexdigest()[:24]


class Campaign:
    """As a plugin of pytest: takes the collected tests and runs them against mutants."""

    def __init__(self, wanted: Sequence[Case], kept: Kept, options: argparse.Namespace, out: int) -> None:
        self._wanted, self._kept, self._options, self._out = wanted, kept, options, out
        self._tests = _hash(*(path.read_text(encoding="utf-8") for path in sorted((ROOT / "tests").rglob("test_*.py"))))
        self._called: dict[str, Called] = {}
        self._kills: Counter[tuple[str, str]] = Counter()
        self.outcomes: dict[str, Judged] = {}

    def pytest_runtestloop(self, session: pytest.Session) -> bool:
        """In place of one run of the tests."""
        items = {item.nodeid: item for item in session.items}
        self._called = self._mapped(session.items)
        functions = trials.functions_of(HOUSE)
        gc.collect()
        gc.freeze()  # else the children copy memory only to count references
        waiting = [case for case in self._wanted if not self._is_judged(case)]
        running: dict[int, tuple[trials.Trial, Case]] = {}
        with tempfile.TemporaryDirectory() as base:
            while waiting or running:
                while waiting and len(running) < self._options.jobs:
                    case = waiting.pop(0)
                    chosen = self._chosen(case)
                    if not chosen:
                        self._end(case, trials.Verdict(trials.SURVIVED, "", 0.0), len(waiting))
                    elif not case.mutant.function:
                        self._end(case, self._anew(case, chosen, Path(base)), len(waiting))
                    else:
                        code = case.module.compiled(case.mutant, str(HOUSE / case.file))
                        putting = trials.Putting(code, case.mutant.function, functions)
                        pairs = [(items[name], self._called[name].seconds) for name in chosen]
                        trial = trials.start(pairs, session, putting, Path(base))
                        running[trial.child] = trial, case
                for trial, verdict in list(trials.ended([one for one, _ in running.values()])):
                    _, case = running.pop(trial.child)
                    self._end(case, verdict, len(waiting))
        return True

    def _is_judged(self, case: Case) -> bool:
        old = self._kept.find(case.key)
        if old is None or (old.outcome == trials.SURVIVED and old.tests != self._tests and not self._options.stale):
            return False
        if old.by:
            self._note(case, old.by)
        self.outcomes[case.key] = old
        return True

    def _note(self, case: Case, by: str) -> None:
        self._kills[case.function, by] += 3
        self._kills[case.file, by] += 1

    def _end(self, case: Case, verdict: trials.Verdict, left: int) -> None:
        judged = Judged(verdict.outcome, verdict.by, round(verdict.seconds, 2), self._tests)
        self._kept.keep(case.key, judged)
        self.outcomes[case.key] = judged
        if judged.by:
            self._note(case, judged.by)
        where = f"{case.file}:{case.mutant.line} {case.mutant.function}"
        self._say(f"{left:5} {judged.outcome:9} {judged.seconds:6.2f} s  {where}: {case.mutant.change}  {judged.by}")

    def _say(self, text: str) -> None:
        os.write(self._out, f"{text}\n".encode())

    def _mapped(self, items: Sequence[pytest.Item]) -> dict[str, Called]:
        """What each test calls, from disk where the test's file is the same."""
        file = KEPT / "calls.jsonl"
        sources = {path: _hash(path.read_text(encoding="utf-8")) for path in {item.path for item in items}}
        marks = {item.nodeid: f"{sources[item.path]} {item.nodeid}" for item in items}
        known = _calls(file, marks)
        fresh = [item for item in items if item.nodeid not in known]
        if fresh:
            self._say(f"{len(fresh)} tests are run once, to see what they call")
            trials.calls_and_times(fresh, marks, HOUSE, file)
            known = _calls(file, marks)
        return known

    def _chosen(self, case: Case) -> list[str]:
        """The tests to run, most telling first, as many as the budget allows."""
        wanted = case.function if case.mutant.function else f"{case.file}:"
        able = [
            name
            for name, called in self._called.items()
            if wanted in called.functions
            or (not case.mutant.function and any(one.startswith(wanted) for one in called.functions))
        ]
        able.sort(key=lambda name: (-self._promise(case, name), self._called[name].seconds))
        budget, chosen = self._options.budget, []
        for name in able:
            budget -= self._called[name].seconds
            if budget < 0 and chosen:
                break
            chosen.append(name)
        return chosen

    def _promise(self, case: Case, name: str) -> float:
        kills = self._kills[case.function, name] + self._kills[case.file, name]
        return kills / (self._called[name].seconds + 0.02)

    def _anew(self, case: Case, chosen: Sequence[str], base: Path) -> trials.Verdict:
        code = base / "faulty"
        code.write_bytes(marshal.dumps(case.module.compiled(case.mutant, str(HOUSE / case.file))))
        name = "seqcheck." + case.file.removesuffix(".py").replace("/", ".")
        allowed = sum(self._called[one].seconds for one in chosen) * trials.SLOWEST
        return trials.tried_anew(name, code, chosen[:400], ROOT, min(allowed, 300.0))


def _calls(file: Path, marks: dict[str, str]) -> dict[str, Called]:
    if not file.exists():
        return {}
    rows = {mark: Called(seconds, frozenset(names)) for mark, seconds, names in map(json.loads, _lines(file))}
    return {name: rows[mark] for name, mark in marks.items() if mark in rows}


def _lines(file: Path) -> list[str]:
    return file.read_text(encoding="utf-8").splitlines()


def report(wanted: Sequence[Case], outcomes: dict[str, Judged], explained: Explained) -> bool:
    """Prints the survivors that are not explained, entries that fit none, and the numbers of each file."""
    unexplained = [
        case
        for case in wanted
        if outcomes[case.key].outcome == trials.SURVIVED and not explained.why(case.file, case.mutant)
    ]
    for case in unexplained:
        mutant = case.mutant
        print(f"\n# seqcheck/{case.file}:{mutant.line}\n{case.file} {mutant.function}".rstrip())
        print(f"  line: {mutant.text}\n  change: {mutant.change}")
    survived = {(case.file, *case.mutant.name) for case in wanted if outcomes[case.key].outcome == trials.SURVIVED}
    stale = [name for name in explained.names({case.file for case in wanted}) if name not in survived]
    for name in stale:
        print(f"\nexplained, but no survivor: {' | '.join(name)}")
    print(f"\n{'':32} mutants  killed  timed out  explained  left      %")
    for file in [*dict.fromkeys(case.file for case in wanted), ""]:
        _row([case for case in wanted if not file or case.file == file], file or "all", outcomes, unexplained)
    return not unexplained and not stale


def _row(some: Sequence[Case], title: str, outcomes: dict[str, Judged], unexplained: Sequence[Case]) -> None:
    count = Counter(outcomes[case.key].outcome for case in some)
    left = sum(case in unexplained for case in some)
    killed = count[trials.KILLED] + count[trials.DIED]
    share = 100 * (1 - count[trials.SURVIVED] / len(some)) if some else 100.0
    late, rest = count[trials.TIMED_OUT], count[trials.SURVIVED] - left
    print(f"{title:32} {len(some):7} {killed:7} {late:10} {rest:10} {left:5} {share:6.1f}")


def main() -> int:
    """Try all mutants that have not been judged yet."""
    parser = argparse.ArgumentParser(prog="mutation", description="Tells which small faults no test notices.")
    parser.add_argument(
        "--only", metavar="MODULE", nargs="+", help="files of seqcheck/, such as zones or evidence/cover"
    )
    parser.add_argument("--jobs", metavar="N", type=int, default=1, help="children at a time (1)")
    parser.add_argument("--budget", metavar="SECONDS", type=float, default=30.0, help="of tests for a mutant (30)")
    parser.add_argument("--afresh", action="store_true", help="forget all judgements")
    parser.add_argument("--stale", action="store_true", help="do not try survivors again because tests have changed")
    options = parser.parse_args()
    files = [file for file in ROOMS if not options.only or any(file.startswith(one) for one in options.only)]
    if not files:
        parser.error(f"--only names none of {', '.join(ROOMS)}")
    wanted = list(cases(files))
    hypothesis.settings.register_profile(
        "mutation",
        database=None,
        derandomize=True,
        deadline=None,
        phases=[hypothesis.Phase.explicit, hypothesis.Phase.generate],
    )
    hypothesis.settings.load_profile("mutation")
    campaign = Campaign(wanted, Kept(options.afresh), options, os.dup(2))
    os.chdir(ROOT)
    ignored = [f"--ignore-glob=tests/{name}" for name in LEFT_OUT]
    quiet = ["-q", "-s", "-p", "no:cacheprovider", "-p", "no:xdist"]
    pytest.main(["tests", *ignored, *quiet], plugins=[campaign])
    return 0 if report(wanted, campaign.outcomes, read()) else 1


if __name__ == "__main__":
    sys.exit(main())
