"""A lint by many hands: who does what, and its answers put together as one process would give them."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Protocol

from seqcheck.messages import Problems
from seqcheck.opening import STDIN, text_of, used_text
from seqcheck.verdict import Outcome, Unread
from seqcheck.work.pieces import (
    Call,
    FaultsFound,
    Hands,
    Instead,
    Judged,
    Parts,
    Piece,
    Result,
    Share,
    SwitchFaults,
    Told,
    Trouble,
    Whole,
    judged_anyway,
    trouble_of,
)

if TYPE_CHECKING:
    from seqcheck.checking import Settled
    from seqcheck.drive import Drive
    from seqcheck.faults import Faulted

Teller = Callable[[Told], None]
_BREATH = 0.1
"""Seconds after which a wait for the crew is interrupted for a word about how far it is."""


class Crew(Protocol):
    """Whoever does pieces. Without `machine` they are other machines, with their own clocks and files."""

    machine: bool

    def give(self, piece: Piece, first: bool = False) -> None:
        """Have a piece done; `first` before all that waits."""

    def heard(self, seconds: float | None) -> Iterator[tuple[Piece, Told | Instead | Result]]:
        """What is said within that time; a piece is followed by one Result."""


def crew_of(hands: Hands) -> "Closing":
    """Those who are to do it; raises NoHands."""
    if hands.scheduler is not None:
        from seqcheck.work.cluster import Cluster

        return Cluster(hands.scheduler)
    from seqcheck.work.processes import Crew as Processes

    return Processes(hands.jobs)


class Closing(Crew, Protocol):
    """A crew that is sent home in the end."""

    def close(self) -> None:
        """End all work at once."""


@dataclass(slots=True)
class _File:
    """What is known of one file; `hazards` is how many there are to settle, once others have some of them."""

    name: str
    judged: Judged | None = None
    drive: bytes = b""
    hazards: int = 0
    settled: "dict[int, Settled | Trouble]" = field(default_factory=dict)
    switches: tuple[str, ...] = ()
    faults: "dict[str, tuple[Faulted, ...] | Trouble]" = field(default_factory=dict)
    trouble: Trouble | None = None


def by_many(files: Sequence[str], call: Call, crew: Crew, tell: Teller | None) -> Iterator[Judged]:
    """What there is to say of each file, in their order, the same whoever does what."""
    return _Plan(files, call, crew, tell).judged()


class _Plan:
    def __init__(self, files: Sequence[str], call: Call, crew: Crew, tell: Teller | None) -> None:
        self._call = call
        self._crew = crew
        self._tell = tell
        self._files = [_File(name) for name in files]

    def judged(self) -> Iterator[Judged]:
        for number, file in enumerate(self._files):
            self._begin(number, file)
        for file in self._files:
            while not self._ready(file):
                for piece, said in self._crew.heard(_BREATH if self._tell else None):
                    self._heard(piece, said)
                self._counted(Told(0, 0, 0))
            yield self._all(file)

    def _begin_elsewhere(self, number: int, file: _File) -> None:
        """Read a file here, and give each of its hazards away."""
        from pickle import HIGHEST_PROTOCOL, dumps

        from seqcheck.checking import asked
        from seqcheck.drive import Library
        from seqcheck.language import read_any

        try:
            drive = read_any(text_of(file.name), file.name, used_text)
            if isinstance(drive, Library):
                file.judged = Judged(drive)
                return
            hazards = asked(drive)
        except Exception as fault:
            file.trouble = trouble_of(fault)
            return
        file.drive, file.hazards = dumps(drive, HIGHEST_PROTOCOL), len(hazards)
        self._counted(Told(len(hazards), 0, 0))
        for place, one in enumerate(hazards):
            self._crew.give(Share(number, file.drive, ((place, one),), self._call))
        if not hazards:
            self._put_together(number, file)

    def _counted(self, told: Told) -> None:
        if self._tell:
            self._tell(told)

    def _begin(self, number: int, file: _File) -> None:
        if not self._crew.machine:
            self._begin_elsewhere(number, file)
            return
        text = None
        if file.name == STDIN:
            try:
                text = text_of(STDIN)
            except Problems as problems:
                file.judged = Judged(Unread(file.name, problems.found))
                return
        self._crew.give(Whole(number, file.name, self._call, text))

    def _heard(self, piece: Piece, said: Told | Instead | Result) -> None:
        file = self._files[piece.number]
        match said:
            case Told():
                self._counted(said)
            case Instead():
                file.drive, file.hazards = said.mine.drive, said.hazards
                for one in reversed(said.rest):
                    self._crew.give(one, first=True)
            case Judged():
                self._outcome(piece.number, file, said)
            case Parts():
                self._counted(Told(0, 0 if self._crew.machine else len(said.settled), 0))
                file.settled.update(said.settled)
                self._put_together(piece.number, file)
            case FaultsFound():
                assert isinstance(piece, SwitchFaults)
                file.faults[piece.switch] = said.faults
            case Trouble():
                self._troubled(piece, file, said)

    def _troubled(self, piece: Piece, file: _File, trouble: Trouble) -> None:
        match piece:
            case Whole():
                file.trouble = trouble
            case Share():
                file.settled.update({number: trouble for number, _ in piece.hazards})
                self._put_together(piece.number, file)
            case SwitchFaults():
                file.faults[piece.switch] = trouble

    def _put_together(self, number: int, file: _File) -> None:
        """The outcome of a file once all its hazards are settled, or the first is that brings trouble."""
        from seqcheck.checking import evidence_of, gathered

        every = []
        for place in range(file.hazards):
            if place not in file.settled:
                return
            one = file.settled[place]
            if isinstance(one, Trouble):
                file.trouble = one
                return
            every.append(one)
        try:
            outcome = gathered(self._drive(file), file.name, self._call.only, every)
        except Exception as fault:
            file.trouble = trouble_of(fault)
            return
        self._outcome(number, file, Judged(outcome, tuple(evidence_of(every)) if self._call.keep else ()))

    def _outcome(self, number: int, file: _File, judged: Judged) -> None:
        file.judged = judged
        if not self._call.faults or not isinstance(judged.answer, Outcome):
            return
        from pickle import HIGHEST_PROTOCOL, dumps

        from seqcheck.failing import asked_anew

        drive, asked = judged.answer.drive, asked_anew(judged.answer)
        file.drive = file.drive or dumps(drive, HIGHEST_PROTOCOL)
        file.switches = tuple(switch.name for switch in drive.stage.switches)
        end = self._call.limits.end() if self._crew.machine else None  # other machines have other clocks
        for switch in reversed(file.switches):
            self._crew.give(SwitchFaults(number, file.drive, switch, asked, self._call, end), first=True)

    def _ready(self, file: _File) -> bool:
        if file.trouble is not None:
            return True
        return file.judged is not None and all(switch in file.faults for switch in file.switches)

    def _all(self, file: _File) -> Judged:
        """All that is known of a file that is ready, which is then forgotten here."""
        judged, trouble = file.judged, file.trouble
        faults: list[Faulted] = []
        for switch in file.switches:
            found = file.faults[switch]
            if isinstance(found, Trouble):
                trouble = trouble or found
            else:
                faults += found
        file.drive, file.settled, file.judged = b"", {}, None
        if trouble is not None:
            return judged_anyway(file.name, trouble)
        assert judged is not None, "it is ready"
        if isinstance(judged.answer, Outcome) and self._call.faults:
            return replace(judged, answer=replace(judged.answer, faults=tuple(faults)))
        return judged

    def _drive(self, file: _File) -> "Drive":
        from pickle import loads

        drive: Drive = loads(file.drive)
        return drive
