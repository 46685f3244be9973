"""`seqcheck serve`: the server on the streams of this process."""

import contextlib
import gc
import sys

from seqcheck.serving.proofs import Limits
from seqcheck.serving.server import Server
from seqcheck.serving.wire import Reader, Writer

_ALONE = "seqcheck serve speaks the Language Server Protocol to an editor that starts it; Ctrl-C ends it"


def serve(zones: int | None, seconds: float | None) -> int:
    """Serve the editor at the other end of standard input and output; the exit code of the protocol.

    Nothing else may reach standard output, so that whatever is printed goes to standard error.
    """
    gc.enable()  # it lives for days
    usual = Limits()
    limits = Limits(zones or usual.zones, seconds or usual.seconds)
    if sys.stdin.isatty():
        print(_ALONE, file=sys.stderr)
    server = Server(Reader(sys.stdin.buffer), Writer(sys.stdout.buffer), limits)
    with contextlib.redirect_stdout(sys.stderr):
        try:
            return server.run()
        except BrokenPipeError:
            return 1
