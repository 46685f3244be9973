"""The standard streams, made fit for whatever is said, closed ones among them."""

import errno
import io
import sys
from typing import Never


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


def let_go() -> None:
    """Have done with standard output after it refused, or what is stuck in it would spoil the exit code at the end."""
    sys.stdout = _Closed("standard output")
