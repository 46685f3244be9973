"""Print what the program is meant to reach beside what it reaches here and now.

    PYTHONPATH=.:tests .venv/bin/python -m bench [ROW ...] [--rounds N] [--without ROW ...] [--give-up-after SECONDS]

All times are processor times: other work on the machine lengthens them less than those of the clock on the wall.
Every row is measured in a process of its own, a median of the rounds after one that does not count; where a time has
a target, it is also given in times of importing the three libraries, measured just before.
"""

import argparse
import json
import os
import platform
import subprocess
import sys
import tempfile
from collections.abc import Callable
from importlib.metadata import version
from typing import NamedTuple

from bench import measures
from bench.measures import Measured, Unmeasured, child

_LEAST_ROUNDS = 5
_SCALES = {"ms": 1e-3, "s": 1.0}


class Row(NamedTuple):
    """A row of the table: what is measured, the target, and whether less is better."""

    case: str
    measure: Callable[[int], Measured]
    target: float
    unit: str
    less: bool = True

    def met(self, value: float) -> bool:
        return value <= self.target if self.less else value >= self.target


ROWS = {
    "lint": Row("whole lint of the sample H-bridge, to importing lark, networkx, rich", measures.lint, 1.15, "x"),
    "mistake": Row("whole lint of a syntax error, to an interpreter with argparse", measures.mistake, 3, "x"),
    "help": Row("--help, to an interpreter with argparse", measures.start_help, 3, "x"),
    "version": Row("--version, to an interpreter with argparse", measures.version, 3, "x"),
    "screen": Row("proving a typical file, settled by the screen", measures.screened, 5, "ms"),
    "zones": Row("exact zones forced, one at a time, carrier, 12 moves, 2 trips; a leg", measures.zones, 60, "ms"),
    "run": Row("counterexample with its concrete run", measures.counterexample, 50, "ms"),
    "modes": Row("10,000 modes, 6 switches, all legs, screened", measures.modes_screened, 1, "s"),
    "modes-zones": Row("10,000 modes, 6 switches, all legs, exact zones forced", measures.modes_zones, 5, "s"),
    "growth": Row("growth from 1,000 to 10,000 modes, screened (log-log)", measures.growth, 1.1, ""),
    "growth-zones": Row("growth from 1,000 to 10,000 modes, zones forced (log-log)", measures.growth_zones, 1.1, ""),
    "reading": Row("reading a file of 10,000 lines", measures.reading, 8000, "lines/s", False),
    "z3": Row("bounded model checking in z3 of the same unsafe H-bridge, to here", measures.baseline, 1000, "x", False),
    "memory": Row("memory of linting 10,000 modes", measures.memory, 200, "MB"),
}


def main() -> None:
    """Measure and print the rows that are asked for."""
    asked = _arguments()
    if asked.alone:
        print(json.dumps(_measured(ROWS[asked.alone], asked.rounds)))
        return
    print(_circumstances(asked.rounds))
    with tempfile.TemporaryDirectory() as folder:
        surroundings = _surroundings(folder)
        os.environ.update(surroundings)
        os.environ.pop("PYTHONDONTWRITEBYTECODE", None)
        for name in asked.rows or ROWS:
            if name not in asked.without:
                unit = _unit() if ROWS[name].unit in _SCALES else 1.0
                print(_line(name, _alone(name, asked), unit), flush=True)


def _arguments() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m bench", description="rows: " + ", ".join(ROWS))
    parser.add_argument("rows", nargs="*", metavar="ROW", help="the rows to measure; none: all")
    parser.add_argument("--without", nargs="+", default=[], metavar="ROW", choices=ROWS)
    parser.add_argument("--rounds", type=int, default=_LEAST_ROUNDS, help="at least 5 for a number that counts")
    parser.add_argument("--give-up-after", type=float, default=900, metavar="SECONDS", help="for one row (900)")
    parser.add_argument("--alone", choices=ROWS, help=argparse.SUPPRESS)
    asked = parser.parse_args()
    unknown = [name for name in asked.rows if name not in ROWS]
    if unknown:
        parser.error(f"unknown row {', '.join(unknown)}; known are {', '.join(ROWS)}")
    if asked.rounds < 1:
        parser.error("--rounds must be at least 1")
    return asked


def _circumstances(rounds: int) -> str:
    libraries = ", ".join(f"{name} {_version(name)}" for name in ("lark", "networkx", "rich", "z3-solver"))
    command = " ".join(["python -m bench", *sys.argv[1:]])
    few = "" if rounds >= _LEAST_ROUNDS else f" (fewer than {_LEAST_ROUNDS}: a glance)"
    return (
        f"{command}: medians of {rounds}{few}\n"
        f"{_processor()}, {os.cpu_count()} of them; {platform.system()} {platform.release()}\n"
        f"{platform.python_implementation()} {platform.python_version()}, {libraries}; load {os.getloadavg()[0]:.1f}"
    )


def _version(name: str) -> str:
    try:
        return version(name)
    except ImportError:
        return "missing"


def _processor() -> str:
    try:
        with open("/proc/cpuinfo", encoding="utf-8") as lines:
            return next(line.split(":", 1)[1].strip() for line in lines if line.startswith("model name"))
    except (OSError, StopIteration):
        return platform.processor() or platform.machine()


def _surroundings(folder: str) -> dict[str, str]:
    """Byte code and the parser's cache lie in a folder of ours, so that starts are those of an ordinary install."""
    return {"PYTHONPYCACHEPREFIX": os.path.join(folder, "code"), "XDG_CACHE_HOME": os.path.join(folder, "cache")}


def _unit() -> float:
    """What importing the three libraries takes at this moment (s): what times are given in besides."""
    child(measures.LIBRARIES)
    return sorted(child(measures.LIBRARIES).seconds for _ in range(3))[1]


def _measured(row: Row, rounds: int) -> Measured | str:
    try:
        return row.measure(rounds)
    except Unmeasured as why:
        return str(why)


def _alone(name: str, asked: argparse.Namespace) -> Measured | str:
    """A row measured in a process of its own, or why it was not."""
    call = [sys.executable, "-m", "bench", "--alone", name, "--rounds", str(asked.rounds)]
    try:
        ended = subprocess.run(call, capture_output=True, text=True, check=False, timeout=asked.give_up_after)
    except subprocess.TimeoutExpired:
        return f"it had not finished after {asked.give_up_after:g} s"
    if ended.returncode:
        return (ended.stderr.strip().splitlines() or ["it ended without a word"])[-1]
    answer = json.loads(ended.stdout)
    return answer if isinstance(answer, str) else Measured(*answer)


def _line(name: str, found: Measured | str, unit: float) -> str:
    row = ROWS[name]
    sign = "<=" if row.less else ">="
    target = f"{sign} {row.target:g} {row.unit}".rstrip()
    if isinstance(found, str):
        return f"{name:<13} {target:<16} not measured: {found}\n{'':13} {row.case}"
    scale = _SCALES.get(row.unit)
    also = "" if scale is None else f"{found.value * scale / unit:.2f} imports"
    beside = "; ".join(filter(None, (also, found.beside)))
    today = f"{found.value:.4g} {row.unit}".rstrip()
    verdict = "met" if row.met(found.value) else "NOT MET"
    return f"{name:<13} {target:<16} {today:<16} {verdict:<8} {beside}\n{'':13} {row.case}"


if __name__ == "__main__":
    main()
