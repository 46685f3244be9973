"""What of a lint can be done apart, and how one process does it: a whole file, some hazards of it, one switch's faults.

Every piece says all that it needs, so that it comes to the same wherever it is done.
"""

import time
from collections.abc import Callable
from typing import TYPE_CHECKING

from seqcheck.limits import NO_LIMITS, Limits, Observer, observer
from seqcheck.messages import Problem, Problems
from seqcheck.opening import text_of, used_text
from seqcheck.records import dataclass
from seqcheck.verdict import Answer, Check, Failed, Outcome, Unread

if TYPE_CHECKING:
    from seqcheck.checking import Asked, Kept, Settled
    from seqcheck.faults import Faulted
    from seqcheck.hazards import Hazard
    from seqcheck.proving.memory import Memory, Question, Remembered
    from seqcheck.proving.prove import Prover
    from seqcheck.store import Store

SHARED_AFTER = 0.2
"""Seconds after which a process lets others have hazards of its file: before, that would cost more than it saves."""
_TOLD_EVERY = 0.1
"""Seconds between two words about how far it is."""
_ASK_FOR_HELP = "internal error, please report it with the file: "


@dataclass(frozen=True, slots=True)
class Call:
    """What is asked of every file: `keep` its proofs as evidence, what single `faults` bring, all proven `fresh`."""

    only: frozenset[Check] = frozenset()
    limits: Limits = NO_LIMITS
    keep: bool = False
    faults: bool = False
    fresh: bool = False


@dataclass(frozen=True, slots=True)
class Hands:
    """Who is to do it: so many processes of this machine, or the machines of the scheduler at an address."""

    jobs: int = 1
    scheduler: str | None = None


@dataclass(frozen=True, slots=True)
class Whole:
    """The file with this number, to be read and proven; `text` where it cannot be read everywhere."""

    number: int
    file: str
    call: Call
    text: str | None = None


@dataclass(frozen=True, slots=True)
class Share:
    """Some hazards of a file, by their numbers, of a drive that was read before (pickled); `end` of the file's time."""

    number: int
    drive: bytes
    hazards: "tuple[tuple[int, Asked], ...]"
    call: Call
    end: float | None = None


@dataclass(frozen=True, slots=True)
class SwitchFaults:
    """What one switch that is stuck brings about, with the hazards to ask anew (see failing.asked_anew)."""

    number: int
    drive: bytes
    switch: str
    asked: "tuple[tuple[Hazard, ...], frozenset[Hazard]]"
    call: Call
    end: float | None = None


Piece = Whole | Share | SwitchFaults


class NoHands(Exception):  # noqa: N818 - it says what the system or the call is to blame for
    """Nobody is there to do it: why, with a way out, and the exit code."""

    def __init__(self, text: str, code: int) -> None:
        super().__init__(text)
        self.code = code


# Answers


@dataclass(frozen=True, slots=True)
class Judged:
    """All about one file: the answer, what evidence says, and a complaint where the answer is Failed."""

    answer: Answer
    kept: "tuple[Kept, ...]" = ()
    complaint: str = ""


@dataclass(frozen=True, slots=True)
class Trouble:
    """Why there is no answer: what is wrong with the file, a complaint, or an exception by its name and text."""

    problems: tuple[Problem, ...] = ()
    complaint: str = ""
    exception: tuple[str, str] = ("", "")


@dataclass(frozen=True, slots=True)
class Parts:
    """Hazards of one file that are settled, or why not, by their numbers; after one in trouble the others are left."""

    settled: "dict[int, Settled | Trouble]"


@dataclass(frozen=True, slots=True)
class FaultsFound:
    """What one switch brings about."""

    faults: "tuple[Faulted, ...]"


Result = Judged | Parts | FaultsFound | Trouble


# What is said before an answer


@dataclass(frozen=True, slots=True)
class Told:
    """How far it is: hazards found to prove, hazards settled and zones stored since the last word."""

    hazards: int
    settled: int
    zones: int


@dataclass(frozen=True, slots=True)
class Instead:
    """A file is large: its process now does `mine` instead of the whole, and others may do the rest, one by one."""

    mine: Share
    rest: tuple[Share, ...]
    hazards: int


def trouble_of(fault: Exception) -> Trouble:
    """An exception as data."""
    if isinstance(fault, Problems):
        return Trouble(problems=fault.found)
    from seqcheck.confirming import Fault

    if isinstance(fault, Fault):
        return Trouble(complaint=f"{_ASK_FOR_HELP}{fault}")
    return Trouble(exception=(type(fault).__name__, str(fault)))


def judged(file: str, call: Call, tell: "Callable[[Told | Instead], None] | None") -> Judged:
    """What there is to say of a file, found out by this process alone."""
    found = Hand(tell).done(Whole(0, file, call))
    if isinstance(found, Judged):
        return found
    assert isinstance(found, Trouble), "one hand does the whole"
    return judged_anyway(file, found)


def judged_anyway(file: str, trouble: Trouble) -> Judged:
    """What there is to say of a file that has no outcome; what is wrong with the program itself is raised again."""
    if trouble.problems:
        return Judged(Unread(file, trouble.problems))
    if trouble.complaint:
        return Judged(Failed(file, trouble.complaint.removeprefix(_ASK_FOR_HELP)), (), trouble.complaint)
    name, text = trouble.exception
    raise type(name, (Exception,), {})(text)  # under its own name: the class may be known to the other process alone


class Hand:
    """Does pieces one after another, and `tell`s about it as it goes; keeps the last prover for the next piece.

    With `shares` it gives away hazards of a file that takes long (see Instead).
    """

    def __init__(self, tell: Callable[[Told | Instead], None] | None, shares: bool = False) -> None:
        self._tell = tell
        self._shares = shares
        self._told = Told(0, 0, 0)
        self._due = 0.0
        self._file: _Open | None = None
        self._last: tuple[object, Prover] | None = None
        self._answers = _Answers()

    def done(self, piece: Piece) -> Result:
        """The answer to a piece; what goes wrong is an answer too."""
        try:
            match piece:
                case Whole():
                    return self._whole(piece)
                case Share():
                    return Parts(self._settled(self._prover(piece), list(piece.hazards), piece.call, piece.end))
                case SwitchFaults():
                    return self._stuck(piece)
        except Exception as fault:
            return trouble_of(fault)
        finally:
            self._file = None
            self._say()

    def _whole(self, piece: Whole) -> Result:
        from seqcheck.drive import Library
        from seqcheck.language import read_any

        text = text_of(piece.file) if piece.text is None else piece.text
        drive = read_any(text, piece.file, used_text)
        if isinstance(drive, Library):
            return Judged(drive)
        from seqcheck.checking import asked, evidence_of, gathered
        from seqcheck.proving.prove import Prover

        limits, memory = piece.call.limits, self._memory(piece.call)
        prover, end = Prover(drive, piece.call.keep, limits.without, memory), limits.end()
        hazards = list(enumerate(asked(drive)))
        count = len(hazards)
        self._count(Told(count, 0, 0))
        self._file = _Open(piece, prover, hazards, end, time.monotonic()) if self._shares else None
        found = self._settled(prover, hazards, piece.call, end)
        if len(hazards) < count:
            return Parts(found)
        every = []
        for one in found.values():
            if isinstance(one, Trouble):
                return one
            every.append(one)
        outcome = gathered(drive, piece.file, piece.call.only, every)
        if piece.call.faults and not self._shares:  # others have a part in that
            outcome = self._with_faults(outcome, piece.call)
        return Judged(outcome, tuple(evidence_of(every)) if piece.call.keep else ())

    def _settled(
        self, prover: "Prover", hazards: "list[tuple[int, Asked]]", call: Call, end: float | None
    ) -> "dict[int, Settled | Trouble]":
        """Hazards one after another, up to the first in trouble. The list may become shorter meanwhile."""
        from seqcheck.checking import settle

        found: dict[int, Settled | Trouble] = {}
        watched = self._watched(observer(call.limits, end))
        for place, (number, one) in enumerate(hazards):
            if self._file is not None:
                self._file.at = place
                self._share(self._file)
            try:
                found[number] = settle(prover, one, watched)
            except Exception as fault:
                found[number] = trouble_of(fault)
                break
            self._count(Told(0, 1, 0))
        return found

    def _with_faults(self, outcome: Outcome, call: Call) -> Outcome:
        from seqcheck.failing import with_faults

        return with_faults(outcome, self._watched(observer(call.limits)))

    def _stuck(self, piece: SwitchFaults) -> FaultsFound:
        from seqcheck.failing import faults_of

        watched = self._watched(observer(piece.call.limits, piece.end))
        return FaultsFound(tuple(faults_of(self._prover(piece), piece.switch, *piece.asked, watched)))

    def _prover(self, piece: Share | SwitchFaults) -> "Prover":
        """The prover of the piece's drive, which pieces of one drive share."""
        from pickle import loads

        from seqcheck.proving.prove import Prover

        key = piece.drive, isinstance(piece, Share) and piece.call.keep
        if self._last is None or self._last[0] != key:
            drive, call = loads(piece.drive), piece.call
            self._last = key, Prover(drive, key[1], call.limits.without, self._memory(call))
        return self._last[1]

    def _memory(self, call: Call) -> "Memory | None":
        return None if call.fresh else self._answers

    # Words on the way

    def _watched(self, limit: Observer) -> Observer:
        """An observer that also counts, tells and gives away."""
        if self._tell is None:
            return limit

        def observe(zones: int) -> None:
            limit(zones)
            self._count(Told(0, 0, int(zones > 0)))
            if self._file is not None:
                self._share(self._file)

        return observe

    def _count(self, more: Told) -> None:
        old = self._told
        self._told = Told(old.hazards + more.hazards, old.settled + more.settled, old.zones + more.zones)
        if time.monotonic() >= self._due:
            self._say()

    def _say(self) -> None:
        if self._tell is not None:
            self._due = time.monotonic() + _TOLD_EVERY
            self._tell(self._told)
            self._told = Told(0, 0, 0)

    def _share(self, file: "_Open") -> None:
        """Give all hazards of a file away that come after the one at hand, if it takes long."""
        if file.at + 1 == len(file.hazards) or time.monotonic() < file.begun + SHARED_AFTER:
            return
        from pickle import HIGHEST_PROTOCOL, dumps

        assert self._tell is not None, "who shares tells"
        number, call = file.piece.number, file.piece.call
        drive = dumps(file.prover.drive, HIGHEST_PROTOCOL)
        count = len(file.hazards)
        rest = tuple(Share(number, drive, (one,), call, file.end) for one in file.hazards[file.at + 1 :])
        del file.hazards[file.at + 1 :]
        self._last = (drive, call.keep), file.prover
        self._tell(Instead(Share(number, drive, tuple(file.hazards), call, file.end), rest, count))


class _Answers:
    """The store of answers, which is opened when a proof first asks for one."""

    def __init__(self) -> None:
        self._store: Store | None = None

    def recalled(self, question: "Question") -> "Remembered | None":
        return self._opened().recalled(question)

    def kept(self, question: "Question", found: "Remembered") -> None:
        self._opened().kept(question, found)

    def _opened(self) -> "Store":
        if self._store is None:
            from seqcheck.store import Store

            self._store = Store()
        return self._store


@dataclass(slots=True)
class _Open:
    """A file that one process proves; `hazards` from place `at` on are still to be settled."""

    piece: Whole
    prover: "Prover"
    hazards: "list[tuple[int, Asked]]"
    end: float | None
    begun: float
    at: int = 0
