"""A lint by several processes says what one says, to the byte, and a process that dies never makes a file proven."""

import io
import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from proofs import leg
from test_stopped import SAFE, UNSAFE, WORLD, files, slow, wait_for

from seqcheck.cli import main
from seqcheck.confirming import Fault
from seqcheck.work import pieces
from seqcheck.work.pieces import Hand, Piece, Result
from seqcheck.work.processes import Crew, multiprocessing

BRIDGE = leg(
    "a on off on off\nb off on off on\nc off on on off",
    "  start a\n  a -> b when go\n    set A off, C off\n    wait 5 ps\n"
    "  b -> c when next\n    set D off\n    wait 4 ps",
    paths="A B C D through p",
    columns="A B C D",
).replace("  leg U A B\n", "  leg U A B\n  leg V C D\n")
"""Several hazards, one of them possible."""
LOCKED = leg(
    "a on off\nb off on",
    "  start a\n  a -> b when go\n  b -> a when back",
    paths="A B through p\ninterlock A B dead time 9 ps to 9 ps",
) + "rules\n  A on at most 5 ps\n  margin at least 3 ps\n"
LIBRARY = 'drive "parts"\nlet settle = 3 us\n'
WRONG = SAFE.replace("wait 5 ps", "wait 5 pints")
linux = pytest.mark.skipif(sys.platform != "linux", reason="what is put into this process reaches only forked ones")


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path.parent / f"{tmp_path.name} cache"))
    named = {"a": SAFE, "b": BRIDGE, "c": LOCKED, "d": LIBRARY, "e": WRONG, "u": UNSAFE}
    for name, text in named.items():
        Path(f"{name}.dseq").write_text(text)


def said(call: list[str], capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> tuple[object, ...]:
    """Exit code, output, complaints and evidence of a lint."""
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(BRIDGE.encode())))
    code = main(["lint", *call])
    out, err = capsys.readouterr()
    shelf = {path.name: path.read_bytes() for path in sorted(Path("shelf").glob("*"))}
    for path in Path("shelf").glob("*"):
        path.unlink()
    return code, out, err, shelf


@linux
@pytest.mark.parametrize("at_once", [True, False])
@pytest.mark.parametrize(
    "call",
    [
        ["--as", "json", "--evidence", "shelf"],
        ["--as", "screen", "--with-fault"],
        ["--as", "sarif", "--only", "no-path"],
        ["--as", "lines", "--most-zones", "20"],
    ],
    ids=lambda call: call[1],
)
def test_the_answer_is_the_same_for_any_number(
    call: list[str], at_once: bool, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whether each hazard goes to a process of its own or a file is done by one."""
    monkeypatch.setattr(pieces, "SHARED_AFTER", -1 if at_once else 1e9)
    whole = ["missing.dseq", "c.dseq", "b.dseq", "-", "a.dseq", "d.dseq", "e.dseq", "u.dseq", *call]
    alone = said([*whole, "--jobs", "1"], capsys, monkeypatch)
    assert alone[1]
    assert alone[2]
    for number in ("2", "3", "8"):
        assert said([*whole, "--jobs", number], capsys, monkeypatch) == alone


def test_one_job_is_the_default_and_imports_nothing_for_many() -> None:
    program = (
        "import sys; from seqcheck.cli import main; main(['lint', 'a.dseq'{}]);"
        "print(sorted({{name.split('.')[0] for name in sys.modules}} & {{'multiprocessing', 'pickle', 'signal'}}),"
        "'seqcheck.work.plan' in sys.modules)"
    )
    for more in ("", ", '--jobs', '1'"):
        call = [sys.executable, "-c", program.format(more)]
        done = subprocess.run(call, env=WORLD, capture_output=True, check=True, text=True, timeout=60)
        assert done.stdout.splitlines()[-1] in ("[] False", "['pickle'] False")  # the parser's cache is a pickle


@pytest.mark.parametrize("number", ["0", "-1", "two", "1.5", "257", ""])
def test_no_such_number(number: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lint", "a.dseq", "--jobs", number]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("seqcheck: error: --jobs ")
    assert err.count("\n") == 1


# Processes that die


def let_die(monkeypatch: pytest.MonkeyPatch, number: int, times: int, after: bool = False) -> None:
    """Kill the process that gets a piece of the file with this number, so many times in all.

    It is killed before it begins, or `after` it has done everything but say the answer.
    """
    done = Hand.done

    def dying(hand: Hand, piece: Piece) -> Result:
        deaths = len(list(Path().glob("death *")))
        if piece.number != number or deaths == times:
            return done(hand, piece)
        Path(f"death {deaths}").write_text("")
        if after:
            done(hand, piece)
        os.kill(os.getpid(), signal.SIGKILL)
        raise AssertionError

    monkeypatch.setattr(Hand, "done", dying)


@linux
@pytest.mark.parametrize("at_once", [True, False])
@pytest.mark.parametrize("after", [True, False])
def test_what_a_dead_process_did_is_done_again(
    after: bool, at_once: bool, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(pieces, "SHARED_AFTER", -1 if at_once else 1e9)
    call = ["a.dseq", "b.dseq", "u.dseq", "--with-fault"]
    alone = said(call, capsys, monkeypatch)
    assert alone[0] == 1
    let_die(monkeypatch, 1, 1, after)
    assert said([*call, "--jobs", "2"], capsys, monkeypatch) == alone
    assert Path("death 0").exists()


@linux
@pytest.mark.parametrize("at_once", [True, False])
def test_a_file_that_processes_die_of_is_not_proven(
    at_once: bool, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """The others are judged all the same."""
    monkeypatch.setattr(pieces, "SHARED_AFTER", -1 if at_once else 1e9)
    let_die(monkeypatch, 1, 99)
    code, out, err, shelf = said(
        ["a.dseq", "c.dseq", "u.dseq", "--as", "json", "--jobs", "2", "--evidence", "shelf"], capsys, monkeypatch
    )
    assert code == 4
    assert err == (
        "seqcheck: c.dseq: nothing of it is proven: the process that proved it was killed by signal 9, and so did a "
        "second one; where memory is short, fewer --jobs help\n"
    )
    assert isinstance(out, str)
    assert isinstance(shelf, dict)
    assert [("fault" in one, one["file"]) for one in json.loads(out)["files"]] == [
        (False, "a.dseq"),
        (True, "c.dseq"),
        (False, "u.dseq"),
    ]
    assert sorted(shelf) == ["a.dseq.json", "u.dseq.json"]


@linux
def test_a_fault_and_an_exception_are_told_as_by_one(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """The first of a file counts, whichever process comes to its end first."""
    for fault in (Fault("a run that does not replay"), ZeroDivisionError("in a shared hazard")):

        def breaks(*_: object, fault: Exception = fault) -> None:
            raise fault

        monkeypatch.setattr("seqcheck.checking._unsafe", breaks)
        for seconds in (-1, 1e9):
            monkeypatch.setattr(pieces, "SHARED_AFTER", seconds)
            call = ["a.dseq", "b.dseq", "u.dseq", "--as", "json"]
            alone = said(call, capsys, monkeypatch)
            assert alone[0] == 4
            assert "internal error" in str(alone[2])
            assert said([*call, "--jobs", "3"], capsys, monkeypatch) == alone


def test_no_process_can_be_started(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    def refuses(_: object) -> None:
        raise BlockingIOError(11, "Resource temporarily unavailable")

    monkeypatch.setattr(multiprocessing.context.ForkProcess, "start", refuses)
    monkeypatch.setattr(multiprocessing.context.SpawnProcess, "start", refuses)
    assert main(["lint", "a.dseq", "--jobs", "2"]) == 4
    out, err = capsys.readouterr()
    assert out == ""
    why = "Resource temporarily unavailable"
    assert err == f"seqcheck: error: no process can be started ({why}); without --jobs none is needed\n"


@linux
def test_fewer_processes_than_asked_for(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    """Those that can be started do it all."""
    start, begun = multiprocessing.context.ForkProcess.start, []

    def refuses(process: object) -> None:
        if begun:
            raise BlockingIOError(11, "Resource temporarily unavailable")
        begun.append(process)
        start(process)

    alone = said(["a.dseq", "b.dseq", "u.dseq"], capsys, monkeypatch)
    monkeypatch.setattr(multiprocessing.context.ForkProcess, "start", refuses)
    assert said(["a.dseq", "b.dseq", "u.dseq", "--jobs", "3"], capsys, monkeypatch) == alone


# The keyboard


def children(pid: int) -> list[int]:
    """The processes that a process has started."""
    found = []
    for path in Path("/proc").glob("[0-9]*/stat"):
        try:
            fields = path.read_text().rpartition(")")[2].split()
        except OSError:
            continue
        if int(fields[1]) == pid and fields[0] != "Z":
            found.append(int(path.parent.name))
    return found


def gone(pids: list[int]) -> bool:
    """Whether all processes have ended, after some time if need be."""
    end = time.monotonic() + 20
    while any(Path(f"/proc/{pid}").exists() for pid in pids):
        if time.monotonic() > end:
            return False
        time.sleep(0.05)
    return True


@pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="no /proc to look for processes in")
@pytest.mark.parametrize("how", [signal.SIGINT, signal.SIGTERM, signal.SIGKILL])
def test_no_process_outlives_the_one_that_leads(how: signal.Signals) -> None:
    """Stopped by the keyboard, which reaches all of them, or killed: nothing is left running or half written."""
    for name in ("y", "z"):
        Path(f"{name}.dseq").write_text(slow())
    Path("answer.txt").write_text("older")
    call = [sys.executable, "-m", "seqcheck", "lint", "a.dseq", "y.dseq", "z.dseq", "--jobs", "2"]
    call += ["--out", "answer.txt", "--evidence", "shelf"]
    process = subprocess.Popen(call, env=WORLD, stdout=subprocess.PIPE, stderr=subprocess.PIPE, start_new_session=True)
    wait_for("shelf/a.dseq.json", process)
    time.sleep(0.3)
    workers = children(process.pid)
    assert len(workers) == 2
    if how is signal.SIGINT:
        os.killpg(process.pid, how)
    else:
        process.send_signal(how)
    assert gone(workers)
    out, err = process.communicate(timeout=30)
    assert out == b""
    if how is signal.SIGINT:
        assert process.returncode == 3
        assert err == b"seqcheck: stopped by the keyboard; nothing is proven\n"
    drives = [f"{name}.dseq" for name in "abcdeuyz"]
    assert files() == sorted([*drives, "answer.txt", "shelf/a.dseq.json"])
    assert Path("answer.txt").read_text() == "older"


@linux
def test_a_crew_that_is_closed_leaves_no_process() -> None:
    crew = Crew(3)
    for number in range(3):
        crew.give(pieces.Whole(number, "a.dseq", pieces.Call()))
    list(crew.heard(None))
    workers = children(os.getpid())
    assert workers
    crew.close()
    assert not set(workers) & set(children(os.getpid()))
