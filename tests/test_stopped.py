"""A program that is stopped, or cannot write, leaves whole files or none."""

import json
import os
import resource
import signal
import subprocess
import sys
import threading
import time
from pathlib import Path

import pytest
from proofs import leg

from seqcheck.cli import main

ROOT = Path(__file__).parent.parent
WORLD = {**os.environ, "PYTHONPATH": str(ROOT), "PYTHONDONTWRITEBYTECODE": "1"}
SAFE = leg("a on off\nb off on", "  start a\n  a -> b when go\n    set A off\n    wait 5 ps")
UNSAFE = SAFE.replace("wait 5", "wait 4")
OTHERS = [f"S{place}" for place in range(9)]
WRITTEN_SLOWLY = "writes one at a time, 1 ps to 3 ps apart"


def slow() -> str:
    """Eleven switches, written in any order and held for one carrier: a proof that takes minutes."""
    every = len(OTHERS)
    text = leg(
        f"i off off{' off' * every}\nm c off{' c' * every}\nn off on{' off' * every}",
        "  start i\n  i -> m when go\n  m -> n when swap\n  n -> i when back",
        head=WRITTEN_SLOWLY,
        paths=f"A B {' '.join(OTHERS)} through p",
        columns=f"A B {' '.join(OTHERS)}",
        more="carriers\n  c 1 GHz duty 20 % to 80 % updates within a period",
    )
    switches = "".join(f"  switch {one} from U to Z\n" for one in OTHERS)
    return text.replace("  leg U A B\n", f"  leg U A B\n{switches}")


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def files() -> list[str]:
    """All files below the folder."""
    return sorted(str(path) for path in Path().rglob("*") if path.is_file())


def wait_for(path: str, process: "subprocess.Popen[bytes]") -> None:
    """Until the program has made a file or folder; it must not end before."""
    end = time.monotonic() + 60
    while not Path(path).exists():
        assert process.poll() is None
        assert time.monotonic() < end
        time.sleep(0.01)


@pytest.mark.parametrize("form", ["screen", "lines"])
def test_interrupted_while_proving(form: str) -> None:
    """What was finished before stays, whole; of the rest there is nothing, and an older answer is left alone."""
    Path("a.dseq").write_text(SAFE)
    Path("z.dseq").write_text(slow())
    Path("answer.txt").write_text("older")
    call = [sys.executable, "-m", "seqcheck", "lint", "a.dseq", "z.dseq", "--as", form]
    call += ["--out", "answer.txt", "--evidence", "shelf"]
    process = subprocess.Popen(call, env=WORLD, stdout=subprocess.PIPE, stderr=subprocess.PIPE)
    wait_for("shelf/a.dseq.json", process)
    time.sleep(0.3)
    process.send_signal(signal.SIGINT)
    out, err = process.communicate(timeout=30)
    assert process.returncode == 3
    assert out == b""
    assert err == b"seqcheck: stopped by the keyboard; nothing is proven\n"
    assert files() == ["a.dseq", "answer.txt", "shelf/a.dseq.json", "z.dseq"]
    assert Path("answer.txt").read_text() == "older"
    assert json.loads(Path("shelf/a.dseq.json").read_text())["claims"]


@pytest.mark.parametrize(
    ("stop", "code"),
    [
        (KeyboardInterrupt(), 3),
        (MemoryError(), 4),
        (PermissionError(13, "Permission denied"), 2),
        (OSError(28, "No space left on device"), 2),
    ],
)
@pytest.mark.parametrize("option", [("--out", "answer.txt"), ("--evidence", "shelf")])
def test_stopped_while_writing(
    stop: BaseException,
    code: int,
    option: tuple[str, str],
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
) -> None:
    """Half of it is on the disk when it ends: that half does not stay."""
    Path("u.dseq").write_text(UNSAFE)

    def breaks(path: Path, text: str, **_: object) -> int:
        with open(path, "w", encoding="utf-8") as stream:
            stream.write(text[: len(text) // 2])
        raise stop

    monkeypatch.setattr(Path, "write_text", breaks)
    assert main(["lint", "u.dseq", *option]) == code
    assert files() == ["u.dseq"]
    assert capsys.readouterr().err.count("\n") == 1


@pytest.mark.parametrize("option", [("--out", "answer.txt"), ("--evidence", "shelf")])
def test_a_disk_that_is_full(option: tuple[str, str]) -> None:
    """The system itself takes no more than 200 bytes of any file."""
    Path("u.dseq").write_text(UNSAFE)
    Path("answer.txt").write_text("older")

    def little_room() -> None:
        resource.setrlimit(resource.RLIMIT_FSIZE, (200, 200))

    call = [sys.executable, "-m", "seqcheck", "lint", "u.dseq", *option]
    done = subprocess.run(call, env=WORLD, capture_output=True, check=False, timeout=60, preexec_fn=little_room)
    assert done.returncode == 2
    assert b"error: cannot write" in done.stderr
    assert done.stderr.count(b"\n") == 1
    assert files() == ["answer.txt", "u.dseq"]
    assert Path("answer.txt").read_text() == "older"


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
def test_an_answer_that_finds_no_room() -> None:
    """No fault of the program."""
    Path("u.dseq").write_text(UNSAFE)
    call = [sys.executable, "-m", "seqcheck", "lint", "u.dseq"]
    with open("/dev/full", "wb") as full:
        done = subprocess.run(call, env=WORLD, stdout=full, stderr=subprocess.PIPE, check=False, timeout=60)
    assert done.returncode == 2
    assert b"No space left on device" in done.stderr
    assert done.stderr.count(b"\n") == 1


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write everywhere")
@pytest.mark.parametrize("option", [("--out", "locked/answer.txt"), ("--evidence", "locked")])
def test_a_folder_without_permission(option: tuple[str, str]) -> None:
    Path("u.dseq").write_text(UNSAFE)
    Path("locked").mkdir(mode=0o500)
    assert main(["lint", "u.dseq", *option]) == 2
    assert files() == ["u.dseq"]


@pytest.mark.parametrize("shelf", ["u.dseq", "u.dseq/shelf", "nul\0"])
def test_no_folder_for_evidence(shelf: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Told before anything is proven."""
    Path("u.dseq").write_text(UNSAFE)
    assert main(["lint", "u.dseq", "--out", "answer.txt", "--evidence", shelf]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("seqcheck: error: --evidence: there can be no folder")
    assert files() == ["u.dseq"]


def test_a_pipe_is_written_to_and_not_replaced() -> None:
    """As is any target that is no file, such as a device."""
    Path("u.dseq").write_text(UNSAFE)
    os.mkfifo("pipe")
    read: list[str] = []
    reader = threading.Thread(target=lambda: read.append(Path("pipe").read_text(encoding="utf-8")), daemon=True)
    reader.start()
    assert main(["lint", "u.dseq", "--as", "lines", "--out", "pipe"]) == 1
    reader.join(timeout=10)
    assert "[overlap]" in read[0]
    assert Path("pipe").is_fifo()


def test_a_link_stays_a_link() -> None:
    """The file that it leads to is the one to be written."""
    Path("u.dseq").write_text(UNSAFE)
    Path("real.txt").write_text("older")
    Path("link.txt").symlink_to("real.txt")
    assert main(["lint", "u.dseq", "--as", "lines", "--out", "link.txt"]) == 1
    assert Path("link.txt").is_symlink()
    assert "[overlap]" in Path("real.txt").read_text(encoding="utf-8")
