"""Proofs beside the editor: one thread, which begins after a pause and drops what an edit has made old."""

import contextlib
import time
from collections.abc import Callable
from dataclasses import dataclass, field
from threading import Condition, Thread

from seqcheck.drive import Drive
from seqcheck.verdict import Answer, Budget, Failed, Outcome, Unread


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
    """A text to prove: what stands for it, the name of its file, its drive, and when to begin.

    With `proven`, what its proof came to, it is the margins that are still asked for.
    """

    key: str
    file: str
    drive: Drive
    due: float = field(default=0.0)
    proven: Outcome | None = None


class _Old(Exception):  # noqa: N818 - no error: nobody asks for this proof any more
    """The text was edited or closed."""


class _PutOff(Exception):  # noqa: N818 - no error: a proof goes before margins
    """Another text waits for its proof."""


class Proofs:
    """Proves texts one after another, and measures the margins of one when no other waits for a proof.

    `tell` is called in the thread with each answer that is still asked for, `measured` with the margins, or with the
    reason why there are none.
    """

    def __init__(
        self, limits: Limits, tell: Callable[[Task, Answer], None], measured: Callable[[Task, Budget | str], None]
    ) -> None:
        self._limits = limits
        self._tell = tell
        self._measured = measured
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
            with contextlib.suppress(_Old, _PutOff):
                self._done(task, self._one(task))

    def _one(self, task: Task) -> Outcome | None:
        """Prove a text or measure its margins, and tell; what is proven now, and has margins to be measured."""
        if task.proven is not None:
            self._measured(task, self._margins(task, task.proven))
            return None
        answer = self._answer(task)
        with contextlib.suppress(OSError):  # nobody listens any more, and the reading end will see that too
            self._tell(task, answer)
        return answer if isinstance(answer, Outcome) else None

    def _done(self, task: Task, proven: Outcome | None) -> None:
        """Ask no more for a task that is over, but for the margins of what is proven now."""
        with self._changed:
            if self.asked(task):
                del self._wanted[task.key]
                if proven is not None:
                    self._wanted[task.key] = Task(task.key, task.file, task.drive, task.due, proven)

    def _next(self) -> Task:
        """The task that is due first, proofs before margins, when it is due."""
        with self._changed:
            while True:
                now = time.monotonic()
                due = [one for one in self._wanted.values() if one.due <= now]
                if due:
                    return min(due, key=lambda one: (one.proven is not None, one.due))
                self._changed.wait(min((one.due - now for one in self._wanted.values()), default=None))

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

    def _margins(self, task: Task, proven: Outcome) -> Budget | str:
        """The margins of a text, or why there are none."""
        from seqcheck.margins import budget

        try:
            return budget(task.drive, task.file, self._observer(task), proven.verdicts)
        except (_Old, _PutOff):
            raise
        except Exception as fault:
            return f"{type(fault).__name__}: {fault}"

    def _observer(self, task: Task) -> Callable[[int], None]:
        from seqcheck.proving.search import LimitReached

        end = time.monotonic() + self._limits.seconds

        def observe(zones: int) -> None:
            if not self.asked(task):
                raise _Old
            if task.proven is not None and any(one.proven is None for one in list(self._wanted.values())):
                raise _PutOff
            if zones > self._limits.zones:
                raise LimitReached(f"{self._limits.zones} zones in the editor")
            if time.monotonic() > end:
                raise LimitReached(f"{self._limits.seconds:g} s in the editor")

        return observe
