"""Pieces of work done by other machines, for the extra `cluster`: the client of a scheduler of dask.distributed.

The scheduler gives a piece of a machine that is lost to another one, and what that machine had found too. Every machine
must run this very program, which is asked of it with each piece.
"""

import contextlib
import importlib
import threading
from collections.abc import Iterator
from typing import Any

from seqcheck.exits import WRONG
from seqcheck.source import printable
from seqcheck.work.pieces import Hand, NoHands, Piece, Result, Trouble

_ANSWERS_WITHIN = "10s"
_own = threading.local()


class Cluster:
    """All machines of one scheduler."""

    machine = False

    def __init__(self, address: str) -> None:
        try:
            self._dask: Any = importlib.import_module("distributed")
        except ImportError as missing:
            raise NoHands("--scheduler needs the extra 'cluster': pip install 'seqcheck[cluster]'", WRONG) from missing
        from seqcheck.store import program

        try:
            self._program = program()
            self._client = self._dask.Client(address, timeout=_ANSWERS_WITHIN, set_as_default=False)
        except (OSError, ValueError) as refusal:
            text = f"--scheduler: nobody answers at '{printable(address)}'; name one as 'tcp://HOST:8786'"
            raise NoHands(text, WRONG) from refusal
        self._pieces: dict[Any, Piece] = {}

    def give(self, piece: Piece, first: bool = False) -> None:
        """Have a piece done by any machine; `first` before all that waits."""
        future = self._client.submit(done, piece, self._program, pure=False, priority=int(first))
        self._pieces[future] = piece

    def heard(self, seconds: float | None) -> Iterator[tuple[Piece, Result]]:
        """What has been done, after waiting for it as long as that."""
        with contextlib.suppress(TimeoutError), self._client.as_current():
            self._dask.wait(list(self._pieces), timeout=seconds, return_when="FIRST_COMPLETED")
        for future in [one for one in self._pieces if one.done()]:
            yield self._pieces.pop(future), self._result(future)

    def close(self) -> None:
        """Take back what nobody needs any more, and leave."""
        self._client.cancel(list(self._pieces), force=True)
        self._pieces.clear()
        self._client.close()

    def _result(self, future: Any) -> Result:
        try:
            found: Result = future.result()
        except Exception as lost:
            why = "several machines were lost over it" if type(lost).__name__ == "KilledWorker" else f"{lost}"
            return Trouble(complaint=f"nothing of it is proven: {why or type(lost).__name__}")
        return found


def done(piece: Piece, program: str) -> Result:
    """Do a piece on a machine of the cluster, which keeps a hand for each of its threads."""
    from seqcheck.store import program as own

    if own() != program:
        return Trouble(complaint="nothing of it is proven: a machine of the cluster runs another seqcheck or Python")
    if not hasattr(_own, "hand"):
        _own.hand = Hand(None)
    hand: Hand = _own.hand
    return hand.done(piece)
