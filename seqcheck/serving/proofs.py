"""Proofs beside the editor: one thread, which begins after a pause and drops what an edit has made old."""

import contextlib
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from threading import Condition, Thread

from seqcheck.drive import Drive
from seqcheck.verdict import Answer, Failed, Unread


@dataclass(frozen=True, slots=True)
class Limits:
    """When a proof is given up, in zones stored for one hazard and seconds for one text.

    `pause`, in seconds, is how long nothing must have been edited before it begins.
    """

    zones: int = 50_000
    seconds: float = 10.0
    pause: float = 0.3


@dataclass(frozen=True, slots=True, eq=False)
class Task:
    """A text to prove: what stands for it, the name of its file, its drive, and when to begin."""

    key: str
    file: str
    drive: Drive
    due: float = field(default=0.0)


class _Old(Exception):  # noqa: N818 - no error: nobody asks for this proof any more
    """The text was edited or closed."""


class Proofs:
    """Proves texts one after another. `tell` is called in the thread with each answer that is still asked for."""

    def __init__(self, limits: Limits, tell: Callable[[Task, Answer], None]) -> None:
        self._limits = limits
        self._tell = tell
        self._wanted: dict[str, Task] = {}
        self._changed = Condition()
        self._thread: Thread | None = None

    def ask(self, key: str, file: str, drive: Drive) -> None:
        """Prove a text soon, in place of what was asked under its key before."""
        with self._changed:
            self._wanted[key] = Task(key, file, drive, time.monotonic() + self._limits.pause)
            if self._thread is None:
                self._thread = Thread(target=self._work, name="proofs", daemon=True)
                self._thread.start()
            self._changed.notify()

    def forget(self, key: str) -> None:
        """Ask no more for a text; a proof of it that runs ends without an answer."""
        with self._changed:
            self._wanted.pop(key, None)

    def asked(self, task: Task) -> bool:
        """Whether a task is still asked for."""
        return self._wanted.get(task.key) is task

    def _work(self) -> None:
        while True:
            task = self._next()
            try:
                answer = self._answer(task)
            except _Old:
                continue
            with contextlib.suppress(OSError):  # nobody listens any more, and the reading end will see that too
                self._tell(task, answer)
            with self._changed:
                if self.asked(task):
                    del self._wanted[task.key]

    def _next(self) -> Task:
        """The task that is due first, when it is due."""
        with self._changed:
            while True:
                first = min(self._wanted.values(), key=lambda one: one.due, default=None)
                left = None if first is None else first.due - time.monotonic()
                if first is not None and left is not None and left <= 0:
                    return first
                self._changed.wait(left)

    def _answer(self, task: Task) -> Answer:
        """Everything about one text; a fault of the program is an answer too."""
        from seqcheck.checking import check
        from seqcheck.confirming import Fault
        from seqcheck.messages import Problems

        try:
            return check(task.drive, task.file, frozenset(), self._observer(task))
        except Problems as problems:
            return Unread(task.file, problems.found)
        except Fault as fault:
            return Failed(task.file, str(fault))
        except _Old:
            raise
        except Exception as fault:
            return Failed(task.file, f"{type(fault).__name__}: {fault}")

    def _observer(self, task: Task) -> Callable[[int], None]:
        from seqcheck.proving.search import LimitReached

        end = time.monotonic() + self._limits.seconds

        def observe(zones: int) -> None:
            if not self.asked(task):
                raise _Old
            if zones > self._limits.zones:
                raise LimitReached(f"{self._limits.zones} zones in the editor")
            if time.monotonic() > end:
                raise LimitReached(f"{self._limits.seconds:g} s in the editor")

        return observe
