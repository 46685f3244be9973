"""A lint by several machines: here processes of a local cluster, of which one is killed in the middle."""

import os
import signal
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from seqcheck.cli import main
from seqcheck.work import cluster
from seqcheck.work.pieces import Call, Whole

ROOT = Path(__file__).parent.parent
FILES = [str(ROOT / "samples" / f"{name}.dseq") for name in ("pump", "fan", "vent", "stepper", "selector")]
FILES += [str(ROOT / "samples" / "faulty" / "pump_long_star.dseq")]


@pytest.fixture
def machines(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Any]:
    distributed = pytest.importorskip("distributed", reason="the extra 'cluster' is not installed")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("PYTHONPATH", str(ROOT))
    local = distributed.LocalCluster(
        n_workers=2, threads_per_worker=1, processes=True, dashboard_address=None, host="127.0.0.1"
    )
    with local:
        yield local


def lint(more: list[str], capsys: pytest.CaptureFixture[str]) -> tuple[int, str, str]:
    code = main(["lint", *FILES, "--fresh", *more])
    return code, *capsys.readouterr()


def kill_one(machines: Any, killed: list[int]) -> None:
    """Kill a machine while it has something to do."""
    scheduler = machines.scheduler
    end = time.monotonic() + 60
    while time.monotonic() < end:
        for worker in list(scheduler.workers.values()):
            if worker.processing:
                pid = machines.workers[worker.name].pid
                os.kill(pid, signal.SIGKILL)
                killed.append(pid)
                return
        time.sleep(0.002)


def test_a_machine_that_is_lost_loses_no_result(machines: Any, capsys: pytest.CaptureFixture[str]) -> None:
    alone = lint(["--as", "json"], capsys)
    assert alone[0] == 1
    killed: list[int] = []
    killer = threading.Thread(target=kill_one, args=(machines, killed))
    killer.start()
    many = lint(["--as", "json", "--scheduler", machines.scheduler_address], capsys)
    killer.join()
    assert not many[2]
    assert many[:2] == alone[:2]
    assert killed
    assert lint(["--with-fault", "--scheduler", machines.scheduler_address], capsys)[:2] == lint(
        ["--with-fault"], capsys
    )[:2]


def test_a_machine_with_another_program_is_refused() -> None:
    found = cluster.done(Whole(0, FILES[0], Call()), "another program")
    assert isinstance(found, cluster.Trouble)
    assert "runs another seqcheck" in found.complaint


def test_nobody_answers(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    pytest.importorskip("distributed", reason="the extra 'cluster' is not installed")
    monkeypatch.setattr(cluster, "_ANSWERS_WITHIN", "1s")
    for address in ("tcp://127.0.0.1:9", "nonsense://x", "", "tcp://127.0.0.1:99999999"):
        code, out, err = lint(["--scheduler", address], capsys)
        assert (code, out) == (2, "")
        assert f"--scheduler: nobody answers at '{address}'" in err


def test_without_the_extra(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    def refuses(name: str) -> None:
        raise ImportError(name)

    monkeypatch.setattr(cluster.importlib, "import_module", refuses)
    said = "seqcheck: error: --scheduler needs the extra 'cluster': pip install 'seqcheck[cluster]'\n"
    assert lint(["--scheduler", "tcp://x:1"], capsys) == (2, "", said)


def test_processes_or_machines(capsys: pytest.CaptureFixture[str]) -> None:
    code, out, err = lint(["--scheduler", "tcp://x:1", "--jobs", "2"], capsys)
    assert (code, out) == (2, "")
    assert "choose one of them" in err
