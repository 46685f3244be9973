"""Trying mutants: a process forked for each, with the tests collected once.

The parent imports everything and collects the tests. A child puts the faulty code of one function in the place of the
right one, where all who imported it have it too, and runs the tests that call this function until one fails. A fault
outside of functions takes effect only at import: it costs a new process and a collection of its own.
"""

import gc
import json
import os
import resource
import select
import signal
import subprocess
import sys
import time
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from types import CodeType, FrameType, FunctionType
from typing import Any

import pytest

KILLED, TIMED_OUT, DIED, SURVIVED = "killed", "timed out", "died", "survived"

SLOWEST = 10.0
"""A test that takes longer than this many times its usual time, and PATIENCE more, counts as failed."""
PATIENCE = 3.0
_MEMORY = 3 << 30  # bytes
_FAILED, _LATE, _NOWHERE = 1, 2, 3


@dataclass(frozen=True, slots=True)
class Verdict:
    """What became of a mutant: `by` is the test that failed, or that did not come to an end."""

    outcome: str
    by: str
    seconds: float


@dataclass(slots=True)
class Trial:
    """A child that is at work on one mutant."""

    child: int
    pipe: int
    began: float
    latest: float
    said: bytes = field(default=b"")


def functions_of(house: Path) -> dict[tuple[str, str, int], list[FunctionType]]:
    """All functions that are alive, by file, qualified name and first line."""
    found: dict[tuple[str, str, int], list[FunctionType]] = {}
    for one in gc.get_objects():
        if isinstance(one, FunctionType) and one.__code__.co_filename.startswith(str(house)):
            code = one.__code__
            found.setdefault((code.co_filename, code.co_qualname, code.co_firstlineno), []).append(one)
    return found


def codes_in(code: CodeType) -> Iterator[CodeType]:
    """The code of all functions of a module or class, not of those within functions."""
    for const in code.co_consts:
        if isinstance(const, CodeType):
            if not const.co_flags & 0x2:  # a class body has no fast locals
                yield from codes_in(const)
            yield const


def put(code: CodeType, name: str, functions: dict[tuple[str, str, int], list[FunctionType]]) -> int:
    """Puts the faulty code of the function so named in the place of the right one; returns how often that was."""
    found = 0
    for one in codes_in(code):
        if one.co_qualname == name:
            for function in functions.get((one.co_filename, name, one.co_firstlineno), []):
                function.__code__ = one
                found += 1
    return found


def calls_and_times(items: Sequence[pytest.Item], marks: Mapping[str, str], house: Path, into: Path) -> None:
    """Runs tests in a child; a line for each has its mark, its time and the functions of the house that it calls."""
    child = os.fork()
    if not child:
        _quiet()
        with into.open("a", encoding="utf-8") as file:
            for at, item in enumerate(items):
                began = time.process_time()
                seen = _calls(item, items[at + 1] if at + 1 < len(items) else None)
                inside = {code for code in seen if code.co_filename.startswith(str(house))}
                names = sorted({f"{_module(code, house)}:{_outermost(code)}" for code in inside})
                print(json.dumps([marks[item.nodeid], time.process_time() - began, names]), file=file, flush=True)
        os._exit(0)
    os.waitpid(child, 0)


def _calls(item: pytest.Item, following: pytest.Item | None) -> list[CodeType]:
    seen: dict[int, CodeType] = {}

    def traced(frame: FrameType, event: str, arg: Any) -> None:
        seen[id(frame.f_code)] = frame.f_code

    sys.settrace(traced)
    try:
        item.config.hook.pytest_runtest_protocol(item=item, nextitem=following)
    finally:
        sys.settrace(None)
    return list(seen.values())


def _module(code: CodeType, house: Path) -> str:
    return str(Path(code.co_filename).relative_to(house))


def _outermost(code: CodeType) -> str:
    return code.co_qualname.split(".<locals>")[0].split(".<")[0]


def start(items: Sequence[tuple[pytest.Item, float]], session: pytest.Session, begin: "Putting", base: Path) -> Trial:
    """Forks a child that puts a fault in place and runs the tests, each with its usual time."""
    reading, writing = os.pipe()
    child = os.fork()
    if not child:
        os.close(reading)
        _run(items, session, begin, base, writing)
    os.close(writing)
    allowed = sum(usual * SLOWEST + PATIENCE for _, usual in items)
    now = time.monotonic()
    return Trial(child, reading, now, now + min(allowed, 600.0))


@dataclass(frozen=True, slots=True)
class Putting:
    """What a child does before its tests: one function's faulty code."""

    code: CodeType
    name: str
    functions: dict[tuple[str, str, int], list[FunctionType]]

    def __call__(self) -> None:
        if not put(self.code, self.name, self.functions):
            os._exit(_NOWHERE)


def _run(
    items: Sequence[tuple[pytest.Item, float]], session: pytest.Session, begin: Putting, base: Path, pipe: int
) -> None:
    try:
        _quiet()
        resource.setrlimit(resource.RLIMIT_AS, (_MEMORY, _MEMORY))
        session.config._tmp_path_factory._given_basetemp = base / str(os.getpid())  # type: ignore[attr-defined]
        begin()
        for at, (item, usual) in enumerate(items):
            signal.signal(signal.SIGPROF, lambda *_: _end(pipe, item, _LATE))  # noqa: B023 - run at once
            signal.setitimer(signal.ITIMER_PROF, usual * SLOWEST + PATIENCE)
            following = items[at + 1][0] if at + 1 < len(items) else None
            item.config.hook.pytest_runtest_protocol(item=item, nextitem=following)
            if session.testsfailed:
                _end(pipe, item, _FAILED)
        os._exit(0)
    except BaseException:
        os._exit(_FAILED)


def _end(pipe: int, item: pytest.Item, how: int) -> None:
    os.write(pipe, item.nodeid.encode())
    os._exit(how)


def _quiet() -> None:
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, 1)
    os.dup2(nowhere, 2)


def ended(running: Sequence[Trial]) -> Iterator[tuple[Trial, Verdict]]:
    """Waits until some children have ended; kills those that take too long."""
    ready, _, _ = select.select([one.pipe for one in running], [], [], 1.0)
    for trial in running:
        if trial.pipe in ready:
            trial.said += os.read(trial.pipe, 1 << 16)
        elif time.monotonic() > trial.latest:
            os.kill(trial.child, signal.SIGKILL)
        else:
            continue
        _, status = os.waitpid(trial.child, 0)
        os.close(trial.pipe)
        yield trial, _verdict(trial, os.waitstatus_to_exitcode(status))


def _verdict(trial: Trial, code: int) -> Verdict:
    seconds, late = time.monotonic() - trial.began, time.monotonic() > trial.latest
    if code == _NOWHERE:
        raise LookupError("a function with a fault is not found among those that are alive")
    outcomes = {0: SURVIVED, _FAILED: KILLED, _LATE: TIMED_OUT}
    return Verdict(TIMED_OUT if late else outcomes.get(code, DIED), trial.said.decode(), seconds)


_FRESH = """
import importlib.machinery, marshal, sys
import pytest

module, code, *tests = sys.argv[1:]

class Loader(importlib.machinery.SourceFileLoader):
    def get_code(self, name):
        with open(code, "rb") as file:
            return marshal.load(file)

class Finder(importlib.machinery.PathFinder):
    @classmethod
    def find_spec(cls, name, path=None, target=None):
        spec = super().find_spec(name, path, target) if name == module else None
        if spec is not None:
            spec.loader = Loader(name, spec.origin)
        return spec

sys.meta_path.insert(0, Finder)
sys.exit(pytest.main([*tests, "-x", "-p", "no:cacheprovider", "-p", "no:xdist", "-o", "addopts=-q"]))
"""


def tried_anew(module: str, code: Path, tests: Sequence[str], root: Path, allowed: float) -> Verdict:
    """Runs tests in a new process that imports the module with the code in a file (marshalled)."""
    began = time.monotonic()
    command = [sys.executable, "-c", _FRESH, module, str(code), *tests]
    try:
        done = subprocess.run(command, cwd=root, capture_output=True, text=True, timeout=allowed + 30, check=False)
    except subprocess.TimeoutExpired:
        return Verdict(TIMED_OUT, "", time.monotonic() - began)
    failed = [line.split(" - ")[0].split(" ", 1)[1] for line in done.stdout.splitlines() if line.startswith("FAILED ")]
    outcome = SURVIVED if done.returncode == 0 else KILLED
    return Verdict(outcome, failed[0] if failed else "", time.monotonic() - began)
