"""What each row of the table measures. Times are processor times, in seconds, of this process or of a child."""

import gc
import math
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from statistics import median
from typing import NamedTuple

from bench import drives

SAMPLES = Path(__file__).parents[2] / "samples"

LIBRARIES = ["-c", "import lark, networkx, rich.console, rich.table"]
BARE = ["-c", "import argparse; argparse.ArgumentParser().parse_args()"]
COMMAND = ["-c", "import sys; from seqcheck.entry import main; sys.exit(main())"]
"""As an installed command starts."""


class Measured(NamedTuple):
    """A number with what is said beside it."""

    value: float
    beside: str = ""


class Unmeasured(Exception):  # noqa: N818 - it is told in the table, not a failure
    """Why a row has no number."""


# Whole processes


class Used(NamedTuple):
    """What a child used: processor time (s), and memory at its peak (MB)."""

    seconds: float
    megabytes: float


def child(arguments: list[str]) -> Used:
    """Run this interpreter with arguments, its output thrown away."""
    reading = os.open(os.devnull, os.O_RDONLY)
    dropped = os.open(os.devnull, os.O_WRONLY)
    actions = [(os.POSIX_SPAWN_DUP2, reading, 0), (os.POSIX_SPAWN_DUP2, dropped, 1), (os.POSIX_SPAWN_DUP2, dropped, 2)]
    pid = os.posix_spawn(sys.executable, [sys.executable, *arguments], os.environ, file_actions=actions)
    _, status, usage = os.wait4(pid, 0)
    os.close(reading)
    os.close(dropped)
    if os.waitstatus_to_exitcode(status) not in (0, 1, 2, 3):
        raise Unmeasured(f"the process ended with {os.waitstatus_to_exitcode(status)}")
    unit = 1 << 20 if sys.platform == "darwin" else 1 << 10
    return Used(usage.ru_utime + usage.ru_stime, usage.ru_maxrss / unit)


def _warmed(arguments: list[str]) -> None:
    """The first run writes byte code and fills the cache; one that fails is not worth measuring."""
    ended = subprocess.run([sys.executable, *arguments], capture_output=True, text=True, check=False)
    if "Traceback" in ended.stderr or "internal error" in ended.stderr:
        raise Unmeasured(ended.stderr.strip().splitlines()[-1])


def _against(one: list[str], other: list[str], rounds: int) -> Measured:
    """The processor time of one process as a multiple of another's: medians, taken in turn."""
    _warmed(one)
    _warmed(other)
    pairs = [(child(one).seconds, child(other).seconds) for _ in range(rounds)]
    first, second = median(pair[0] for pair in pairs), median(pair[1] for pair in pairs)
    return Measured(first / second, f"{first * 1000:.0f} ms against {second * 1000:.0f} ms")


def lint(rounds: int) -> Measured:
    return _against([*COMMAND, "lint", str(SAMPLES / "vent.dseq")], LIBRARIES, rounds)


def start_help(rounds: int) -> Measured:
    return _against([*COMMAND, "--help"], BARE, rounds)


def version(rounds: int) -> Measured:
    return _against([*COMMAND, "--version"], BARE, rounds)


def mistake(rounds: int) -> Measured:
    with _file((SAMPLES / "vent.dseq").read_text(encoding="utf-8").replace("through", "thruogh")) as path:
        return _against([*COMMAND, "lint", path], BARE, rounds)


def memory(rounds: int) -> Measured:
    with _file(drives.table(10_000)) as path:
        _warmed([*COMMAND, "lint", path])
        used = [child([*COMMAND, "lint", path]) for _ in range(rounds)]
    seconds = median(one.seconds for one in used)
    return Measured(median(one.megabytes for one in used), f"the whole lint, in {seconds:.1f} s")


@contextmanager
def _file(text: str) -> Iterator[str]:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "drive.dseq"
        path.write_text(text, encoding="utf-8")
        yield str(path)


# In this process


def _timed(work: Callable[[], object], rounds: int) -> tuple[float, float]:
    """The median of so many rounds, and the first round, which is not among them."""
    taken = []
    for _ in range(rounds + 1):
        gc.collect()
        gc.disable()  # as the command does
        begun = time.process_time()
        work()
        taken.append(time.process_time() - begun)
        gc.enable()
    return median(taken[1:]), taken[0]


def screened(rounds: int) -> Measured:
    from seqcheck.checking import check
    from seqcheck.verdict import Safe

    worst, beside = 0.0, []
    for name, text in (("H-bridge", drives.H_BRIDGE), ("three-phase", drives.three_phase())):
        drive = _read(text)
        outcome = check(drive, "x.dseq", frozenset(), lambda _: None)
        if not all(isinstance(one, Safe) and one.method == "screen" for one in outcome.verdicts):
            raise Unmeasured(f"the screen does not settle the {name}")
        warm, _ = _timed(lambda drive=drive: check(drive, "x.dseq", frozenset(), lambda _: None), rounds)  # type: ignore[misc]
        worst = max(worst, warm)
        beside.append(f"{name} {warm * 1000:.1f}")
    return Measured(worst * 1000, ", ".join(beside))


def zones(rounds: int) -> Measured:
    drive = _read(drives.SEARCHED)
    counts: list[int] = []

    def work() -> None:
        counts[:] = [_exact(drive, hazard) for hazard in _hazards(drive)]

    warm, _ = _timed(work, rounds)
    each = warm / len(counts)
    return Measured(each * 1000, f"{max(counts)} zones in the worst leg, {each / max(counts) * 1e6:.0f} us a zone")


def counterexample(rounds: int) -> Measured:
    from seqcheck.checking import check
    from seqcheck.confirming import confirmed
    from seqcheck.proving.clocks import Manner
    from seqcheck.proving.projection import Projection
    from seqcheck.proving.prove import Prover, Refuted
    from seqcheck.proving.search import first_hazard
    from seqcheck.proving.tracing import trace_of
    from seqcheck.verdict import Unsafe

    drive = _read(_unsafe())
    outcome = check(drive, "x.dseq", frozenset(), lambda _: None)
    unsafe = [one.hazard for one in outcome.verdicts if isinstance(one, Unsafe)]

    def first() -> None:
        looking, firmware = _looking(drive, unsafe[0])
        projection = Projection(looking, firmware, Manner(False, True, False))
        node = first_hazard(projection.initial(), lambda _: None)
        assert node is not None
        confirmed(drive, trace_of(projection, node, False, True), whole=False)

    def work() -> None:
        found = Prover(drive).prove(unsafe[0], True, lambda _: None)
        assert isinstance(found, Refuted)
        confirmed(drive, found.trace, whole=True)

    warm, _ = _timed(work, rounds)
    soonest, _ = _timed(first, rounds)
    beside = f"replayed, with the longest overlap of all runs; a first run alone {soonest * 1000:.0f} ms"
    return Measured(warm * 1000, beside)


def modes_screened(rounds: int) -> Measured:
    seconds = _table_screened(10_000, rounds)
    return Measured(seconds)


def modes_zones(rounds: int) -> Measured:
    seconds = _table_zones(10_000, rounds)
    return Measured(seconds)


def growth(rounds: int) -> Measured:
    few, many = _table_screened(1_000, rounds), _table_screened(10_000, rounds)
    return Measured(math.log10(many / few), f"screened: {few:.2f} s and {many:.2f} s")


def growth_zones(rounds: int) -> Measured:
    few, many = _table_zones(1_000, rounds), _table_zones(10_000, rounds)
    return Measured(math.log10(many / few), f"zones forced: {few:.2f} s and {many:.2f} s")


def reading(rounds: int) -> Measured:
    text = drives.long_file(10_000)
    lines = text.count("\n")
    warm, _ = _timed(lambda: _read(text), rounds)
    return Measured(lines / warm, f"{lines} lines in {warm:.2f} s")


def baseline(rounds: int) -> Measured:
    """Both look for a first run; `SEQCHECK_Z3` seconds are the solver's limit."""
    try:
        from bench.baseline import bounded
    except ImportError as why:
        raise Unmeasured("z3 is not installed") from why
    from seqcheck.proving.clocks import Manner
    from seqcheck.proving.projection import Projection
    from seqcheck.proving.prove import Prover, Refuted
    from seqcheck.proving.search import first_hazard

    drive = _read(drives.unsafe_h_bridge())
    hazard = next(
        one for one in _hazards(drive) if isinstance(Prover(drive).prove(one, True, lambda _: None), Refuted)
    )

    def projection() -> Projection:
        looking, firmware = _looking(drive, hazard)
        return Projection(looking, firmware, Manner(forget=False, cut=True, measure=False))

    def search() -> None:
        assert first_hazard(projection().initial(), lambda _: None) is not None

    ours, _ = _timed(search, max(rounds, 5))
    limit = float(os.environ.get("SEQCHECK_Z3", "120"))
    tried = [bounded(projection(), 60, limit) for _ in range(rounds)]
    seconds = median(one.seconds for one in tried)
    depth = max(one.depth for one in tried)
    if all(one.found is not None for one in tried):
        return Measured(seconds / ours, f"first run: z3 {seconds:.1f} s at depth {depth}, here {ours * 1000:.1f} ms")
    beside = f"at least: z3 was stopped after {seconds:.0f} s, past depth {depth}; here {ours * 1000:.1f} ms"
    return Measured(seconds / ours, beside)


def _table_screened(modes: int, rounds: int) -> float:
    from seqcheck.proving.prove import Proven, Prover

    drive = _read(drives.table(modes))

    def work() -> None:
        prover = Prover(drive)
        for hazard in _hazards(drive):
            found = prover.prove(hazard, True, lambda _: None)
            assert isinstance(found, Proven)
            assert found.method == "screen"

    return _timed(work, rounds)[0]


def _table_zones(modes: int, rounds: int) -> float:
    drive = _read(drives.table(modes))
    return _timed(lambda: [_exact(drive, hazard) for hazard in _hazards(drive)], rounds)[0]


def _unsafe() -> str:
    return (SAMPLES / "faulty" / "vent_short_pause.dseq").read_text(encoding="utf-8")


def _read(text: str):  # type: ignore[no-untyped-def] # the room is imported late, not before libraries are measured
    from seqcheck.language import read

    return read(text, "x.dseq", lambda path: "")


def _hazards(drive):  # type: ignore[no-untyped-def]
    from seqcheck.circuit import shorting_sets

    return list(shorting_sets(drive.stage))


def _looking(drive, hazard):  # type: ignore[no-untyped-def]
    from seqcheck.drive import Update
    from seqcheck.firmware import Firmware
    from seqcheck.hazards import delays
    from seqcheck.proving.views import view

    looking = view(drive, hazard, delays(hazard, drive.paths), True)
    waiting = frozenset(name for name in looking.carriers if drive.carriers[name].update is not Update.AT_ONCE)
    return looking, Firmware(drive, waiting, looking.held if waiting else frozenset(), True)


def _exact(drive, hazard) -> int:  # type: ignore[no-untyped-def]
    """Prove a hazard with exact zones alone; the number of zones."""
    from seqcheck.proving.clocks import Manner
    from seqcheck.proving.projection import Projection
    from seqcheck.proving.search import first_hazard

    looking, firmware = _looking(drive, hazard)
    zones = 0

    def counting(count: int) -> None:
        nonlocal zones
        zones = count

    found = first_hazard(Projection(looking, firmware, Manner(False, True, False)).initial(), counting)
    if found is not None:
        raise Unmeasured("the drive is not safe")
    return zones
