"""Processes of this machine that do pieces of work.

Each has a line to this process, on which it is sent one piece after another. A process that dies is noticed by its line
and what it was doing is done again by another one, once. None outlives this process by long: its line is closed then,
and whoever speaks into it ends.
"""

import gc
import multiprocessing
import os
import signal
import sys
from collections import deque
from collections.abc import Iterator
from dataclasses import dataclass
from multiprocessing.connection import Connection, wait
from multiprocessing.process import BaseProcess

from seqcheck.exits import FAULT
from seqcheck.work.pieces import Hand, Instead, NoHands, Piece, Result, Told, Trouble

Message = Told | Instead | Result
_DEATHS = 2
"""So many processes may die of one piece; then it is given up."""
_UNTIDY = 100_000
"""Zones after which a process looks for memory that it can give back."""


@dataclass(slots=True, eq=False)
class _Task:
    """A piece that waits or is being done, and how many processes have died of it."""

    piece: Piece
    deaths: int = 0


@dataclass(slots=True, eq=False)
class _Worker:
    """A process, the line to it and what it does."""

    process: BaseProcess
    line: Connection
    task: _Task | None = None


class Crew:
    """At most so many processes, started when there is something to do for them."""

    machine = True
    """Whether all work is done on this machine, by its clock and with its files."""

    def __init__(self, most: int) -> None:
        self._most = most
        if sys.platform == "linux":
            self._context = multiprocessing.get_context("fork")
        else:  # a fork could inherit there what must not be shared
            self._context = multiprocessing.get_context("spawn")
        self._workers: list[_Worker] = []
        self._waiting: deque[_Task] = deque()

    def give(self, piece: Piece, first: bool = False) -> None:
        """Have a piece done; `first` before all that waits."""
        (self._waiting.appendleft if first else self._waiting.append)(_Task(piece))

    def heard(self, seconds: float | None) -> Iterator[tuple[Piece, Message]]:
        """What the processes say, after waiting for it as long as that; each piece is followed by one Result."""
        self._hand_out()
        lines = {one.line: one for one in self._workers}
        for line in wait(list(lines), seconds):
            assert isinstance(line, Connection)
            yield from self._listened(lines[line])

    def close(self) -> None:
        """End all processes at once, whatever they do."""
        for worker in self._workers:
            worker.process.kill()
        for worker in self._workers:
            worker.process.join()
            worker.line.close()
        self._workers.clear()
        self._waiting.clear()

    def _hand_out(self) -> None:
        while self._waiting:
            idle = next((one for one in self._workers if one.task is None), None) or self._hired()
            if idle is None:
                return
            idle.task = self._waiting.popleft()
            try:
                idle.line.send(idle.task.piece)
            except OSError:  # it has died while it had nothing to do
                self._waiting.appendleft(idle.task)
                self._buried(idle)

    def _hired(self) -> _Worker | None:
        if len(self._workers) == self._most:
            return None
        mine, its = self._context.Pipe()
        others = (mine, *(one.line for one in self._workers)) if self._context.get_start_method() == "fork" else ()
        process = self._context.Process(target=_serve, args=(its, others), daemon=True)
        try:
            process.start()
        except OSError as refusal:
            mine.close()
            if self._workers:
                self._most = len(self._workers)
                return None
            why = refusal.strerror or str(refusal)
            raise NoHands(f"no process can be started ({why}); without --jobs none is needed", FAULT) from refusal
        finally:
            its.close()
        self._workers.append(_Worker(process, mine))
        return self._workers[-1]

    def _listened(self, worker: _Worker) -> Iterator[tuple[Piece, Message]]:
        task = worker.task
        try:
            said = worker.line.recv()
        except (EOFError, OSError):
            code = self._buried(worker)
            if task is not None:
                yield from self._mourned(task, code)
            return
        assert task is not None, "only who has something to do speaks"
        if isinstance(said, Instead):
            yield task.piece, said
            task.piece = said.mine
            return
        if not isinstance(said, Told):
            worker.task = None
        yield task.piece, said

    def _mourned(self, task: _Task, code: int | None) -> Iterator[tuple[Piece, Message]]:
        task.deaths += 1
        if task.deaths < _DEATHS:
            self._waiting.appendleft(task)
            return
        how = f"was killed by signal {-code}" if code is not None and code < 0 else f"ended with code {code}"
        yield task.piece, Trouble(complaint=f"nothing of it is proven: {_died(how)}")

    def _buried(self, worker: _Worker) -> int | None:
        self._workers.remove(worker)
        worker.line.close()
        worker.process.join()
        return worker.process.exitcode


def _died(how: str) -> str:
    return f"the process that proved it {how}, and so did a second one; where memory is short, fewer --jobs help"


def _serve(line: Connection, others: tuple[Connection, ...]) -> None:
    """Do what comes over the line until it is closed; `others` are inherited and nothing to this process."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)  # the keyboard stops the process that leads, and that one stops us
    for other in others:
        other.close()
    gc.disable()
    zones = 0

    def tell(said: Told | Instead) -> None:
        nonlocal zones
        zones += said.zones if isinstance(said, Told) else 0
        line.send(said)

    hand = Hand(tell, shares=True)
    try:
        while True:
            line.send(hand.done(line.recv()))
            if zones > _UNTIDY:
                gc.collect()
                zones = 0
    except (EOFError, OSError):
        os._exit(0)  # nobody is there any more
