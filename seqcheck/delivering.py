"""What is said to the world: answers written whole or not at all, complaints on standard error, colour where wanted."""

import contextlib
import errno
import io
import os
import stat
import sys
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Never, TextIO

from seqcheck.arguments import complain, wrong
from seqcheck.drive import Library
from seqcheck.exits import PROVEN, WRONG
from seqcheck.opening import SUFFIX, reason_of
from seqcheck.source import printable
from seqcheck.verdict import Answer, Outcome

if TYPE_CHECKING:
    from seqcheck.reports.repository import Repository

_WHATEVER_COMES = ("annotations", "json", "sarif")
"""The forms that also say which files could not be judged."""


class _Closed(io.TextIOBase):
    """A standard stream that was closed before the program began: to use it is refused, where Python has None."""

    def __init__(self, name: str) -> None:
        self._name = name

    def write(self, text: str, /) -> Never:
        raise OSError(errno.EBADF, f"{self._name} is closed")

    @property
    def buffer(self) -> Never:
        self.write("")


def ready_streams() -> None:
    """Make the standard streams fit for any text; what was closed refuses, standard error swallows."""
    sys.stdin = sys.stdin or _Closed("standard input")
    sys.stdout = sys.stdout or _Closed("standard output")
    sys.stderr = sys.stderr or io.StringIO()
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


def wants_colour(asked: str, stream: TextIO) -> bool:
    """--color above the environment: NO_COLOR and FORCE_COLOR count where they are not empty."""
    if asked != "auto":
        return asked == "always"
    if os.environ.get("NO_COLOR"):
        return False
    if os.environ.get("FORCE_COLOR"):
        return True
    return stream.isatty() and os.environ.get("TERM") != "dumb"


def let_go() -> None:
    """Have done with standard output after it refused, or what is stuck in it would spoil the exit code at the end."""
    sys.stdout = _Closed("standard output")


def spare(out: str | None, inputs: Iterable[str]) -> None:
    """Refuse an answer that would take the place of a file that the call reads, or of any drive-sequence file."""
    if out is not None and (out.endswith(SUFFIX) or any(_one_file(out, one) for one in inputs)):
        wrong(f"--out: '{printable(out)}' is a drive-sequence file; the answer must go elsewhere")


def _one_file(one: str, other: str) -> bool:
    try:
        return os.path.isfile(one) and os.path.samefile(one, other)
    except (OSError, ValueError):
        return False


def deliver(text: str, out: str | None) -> int:
    try:
        if out is None:
            sys.stdout.write(text)
            sys.stdout.flush()
        else:
            _write(Path(out), text)
    except BrokenPipeError:
        raise
    except (OSError, ValueError) as refusal:
        if out is None:
            let_go()
        name = "the answer" if out is None else f"'{printable(out)}'"
        complain(f"error: cannot write {name}: {reason_of(refusal)}")
        return WRONG
    return PROVEN


def _write(out: Path, text: str) -> None:
    """Write a file whole or not at all, whatever stops it; what is no file, as a pipe or device, is written to.

    Line ends are written as they are; a file that was there keeps its rights, and is let alone if they forbid writing.
    """
    if not out.name or out.is_dir():
        raise IsADirectoryError(errno.EISDIR, "it is a folder")
    if out.exists() and not out.is_file():
        out.write_text(text, encoding="utf-8", errors="backslashreplace")
        return
    target = Path(os.path.realpath(out))
    draft = target.parent / f".{target.name}.{os.getpid()}.part"
    try:
        rights = stat.S_IMODE(target.stat().st_mode) if target.exists() else None
        if rights is not None:
            if not os.access(target, os.W_OK):
                raise PermissionError(errno.EACCES, "it is read-only")
            draft.touch(0o600)
        draft.write_text(text, encoding="utf-8", errors="backslashreplace", newline="")
        if rights is not None:
            draft.chmod(rights)
        draft.replace(target)
    finally:
        with contextlib.suppress(OSError, ValueError):
            draft.unlink()


@dataclass(frozen=True, slots=True)
class Answering:
    """How to answer: in what form, with colour where the form has any, and the number of the run that a dump shows."""

    form: str
    colour: bool
    run: int | None


def answer_text(answers: list[Answer], answering: Answering) -> str | None:
    """The answer as a text; None where nothing was judged and the form has no word for that."""
    judged = [one for one in answers if isinstance(one, Outcome | Library)]
    if not answers and answering.form in ("screen", "vcd"):
        return "nothing to prove: the change touches no *.dseq file and none that one uses\n"
    if not judged and answering.form not in _WHATEVER_COMES:
        return None
    match answering.form:
        case "lines":
            from seqcheck.reports import lines

            return lines.report(judged)
        case "annotations":
            from seqcheck.reports import annotations

            return annotations.report(answers, _repository())
        case "json":
            from seqcheck.reports import document

            return document.report(answers)
        case "sarif":
            from seqcheck.reports import sarif

            return sarif.report(answers, _repository())
        case "vcd":
            return _dump(answers[0], answering.run)
    from seqcheck.reports import screen

    report = screen.report(judged)
    return screen.coloured(report) if answering.colour else screen.plain(report)


def _dump(outcome: Answer, run: int | None) -> str:
    from seqcheck.reports import vcd

    if not isinstance(outcome, Outcome):
        wrong("--as vcd: a file that only serves 'use' has no run")
    try:
        return vcd.report(outcome, run)
    except ValueError as why:
        wrong(f"--run {run}: {why} of {printable(outcome.file)}")


def _repository() -> "Repository":
    """The repository that we are in: the nearest folder upwards with a `.git`, else the folder that we are in."""
    from seqcheck.reports.repository import Repository

    here = Path.cwd()
    top = next((one for one in (here, *here.parents) if (one / ".git").exists()), here)
    return Repository(str(here), str(top))
