"""The line that tells how far a lint is."""

import io
import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from test_stopped import SAFE, WORLD, slow

from seqcheck.reports import progress
from seqcheck.reports.progress import Progress

pty = pytest.importorskip("pty")


def shown(command: list[str], until: bytes, term: str = "xterm", columns: int = 80) -> tuple[str, bytes, int | None]:
    """What a terminal on standard error has got until the keyboard ends the program, when it has shown something."""
    ours, its = pty.openpty()
    world = {**WORLD, "TERM": term, "COLUMNS": str(columns)}
    call = [sys.executable, "-m", "seqcheck", "lint", *command]
    process = subprocess.Popen(call, env=world, stdout=subprocess.PIPE, stderr=its)
    os.close(its)
    end, got, stopped = time.monotonic() + 60, b"", False
    while time.monotonic() < end:
        try:
            piece = os.read(ours, 4096)
        except OSError:  # nobody has the other end any more
            break
        if not piece:
            break
        got += piece
        if not stopped and re.search(until, got):
            process.send_signal(signal.SIGINT)
            stopped = True
    out, _ = process.communicate(timeout=30)
    os.close(ours)
    return got.decode(), out, process.returncode


@pytest.mark.parametrize("more", [[], ["--jobs", "2"]])
@pytest.mark.parametrize("columns", [80, 24])
def test_a_long_proof_tells_how_far_it_is(tmp_path: Path, more: list[str], columns: int) -> None:
    """The line is gone when something else is said."""
    (tmp_path / "a.dseq").write_text(SAFE)
    (tmp_path / "z.dseq").write_text(slow())
    call = [str(tmp_path / "a.dseq"), str(tmp_path / "z.dseq"), *more]
    said, out, code = shown(call, b"1 of 2 fi.*1 of 2 fi", columns=columns)
    assert code == 3
    assert out == b""
    if columns == 80:
        assert re.search(r"1 of 2 files, \d+ of \d+ hazards settled, [\d,]+ zones explored, [\d,]+ a second", said)
    assert max(len(re.sub(r"\x1b\[[0-9;?]*[a-zA-Z]", "", line)) for line in re.split(r"[\r\n]+", said)[:-2]) <= columns
    assert said.endswith("seqcheck: stopped by the keyboard; nothing is proven\r\n")
    assert "\x1b[2K" in said
    assert said.rindex("\x1b[?25h") > said.rindex("\x1b[?25l")  # the cursor is back


def test_a_short_one_says_nothing(tmp_path: Path) -> None:
    stream = io.StringIO()
    line = Progress(stream, 1)
    for _ in range(100):
        line.count(1, 1, 1)
    line.clear()
    assert stream.getvalue() == ""


def test_it_comes_after_a_second_and_goes_away(monkeypatch: pytest.MonkeyPatch) -> None:
    now = [100.0]
    monkeypatch.setattr(progress.time, "monotonic", lambda: now[0])
    stream = io.StringIO()
    line = Progress(stream, 3)
    line.count(4, 1, 500)
    now[0] += 2
    line.count(0, 1, 1500)
    first = stream.getvalue()
    assert "0 of 3 files, 2 of 4 hazards settled, 2,000 zones explored, 1,000 a second" in first
    line.count(0, 0, 1)
    assert stream.getvalue() == first  # not renewed so soon
    line.file_done()
    assert stream.getvalue() != first
    now[0] += 1
    line.count(0, 0, 0)
    assert "1 of 3 files" in stream.getvalue()
    line.clear()
    line.clear()


def test_nothing_is_told_where_nobody_watches(tmp_path: Path) -> None:
    """Neither in a pipe nor on a terminal that can only print."""
    (tmp_path / "z.dseq").write_text(slow())
    program = (
        "import sys; from seqcheck.cli import main; main(['lint', sys.argv[1], '--give-up-after', '2 s']);"
        "sys.exit(9 * ('seqcheck.reports.progress' in sys.modules))"
    )
    call = [sys.executable, "-c", program, str(tmp_path / "z.dseq")]
    done = subprocess.run(call, env=WORLD, capture_output=True, check=False, timeout=60)
    assert (done.returncode, done.stderr) == (0, b"")
    said, _, code = shown([str(tmp_path / "z.dseq"), "--give-up-after", "2 s"], b"never", term="dumb")
    assert (said, code) == ("", 3)
