"""What a proof ends with: safe, unsafe with the run that shows it, or undecided. All that a report may read."""

from dataclasses import dataclass
from enum import Enum

from seqcheck.drive import Cell, Command, Drive, Library
from seqcheck.faults import Faulted
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problem
from seqcheck.source import Place


class Act(Enum):
    """What happens at one event of a trace."""

    BEGINS = "begins"  # a move or a trip's run begins; index into Drive.moves or Drive.trips, see `trip`
    WRITES = "writes"  # firmware (or a break input) writes the cells in `writes` in this instant
    ENTERS = "enters"  # mode `name` is entered
    ARRIVES = "arrives"  # trip `name` arrives and is in hand
    RISES = "rises"  # the reference of carrier `name` rises; held writes that wait for it act (`updates at rise`)
    FALLS = "falls"  # the reference of carrier `name` falls
    OUTPUT = "output"  # the dead time of carrier `name` since its last edge is over
    UPDATES = "updates"  # the writes held for carrier `name` act (`updates within a period`)
    RESTS = "rests"  # the released pin of switch `name` reaches its resting level
    CYCLES = "cycles"  # from this edge on carrier `name` runs the whole cycles in `cycles`, with no other event of it
    CLEARS = "clears"  # interlock: the partner of switch `name` has been off for the dead time


@dataclass(frozen=True, slots=True)
class Cycles:
    """Equal cycles of a carrier, one after another: how many, and how long (ps) the present level and the other last.

    The dead time after each edge is the shortest that the carrier may have.
    """

    count: int
    first: int
    second: int

    @property
    def length(self) -> int:
        """How long they take together, in ps."""
        return self.count * (self.first + self.second)


@dataclass(frozen=True, slots=True)
class Event:
    """One event of a run, at a whole picosecond.

    Events of one instant stand in the order in which they happen. A move is BEGINS, WRITES…, ENTERS; its first write
    (if no wait precedes it) has the time of BEGINS, and ENTERS the time of its last write unless a wait follows it. A
    trip is ARRIVES, later BEGINS with `trip` set (at the same time where it has no `within`; a trip that is `at once`
    has no ARRIVES), WRITES…, ENTERS. A move or trip to `reset` is BEGINS, ENTERS with `writes` that free every pin.
    CYCLES comes in the instant of an edge; the last of its cycles ends with an edge of the same kind, and until then
    nothing but carriers moves.
    """

    time: int
    act: Act
    name: str = ""
    index: int = -1
    trip: bool = False
    writes: tuple[tuple[str, Cell], ...] = ()
    place: Place | None = None
    cycles: Cycles | None = None


@dataclass(frozen=True, slots=True)
class Phase:
    """Where a carrier stands at time 0: its reference's level, for how long already (ps), dead time over or not."""

    carrier: str
    high: bool
    age: int
    output: bool


@dataclass(frozen=True, slots=True)
class Trace:
    """A run that shows a hazard: from time 0, in the drive's start mode, to `end`.

    Only carriers with a phase are followed; writes of other carriers' switches act at once. From `overlap_from` to
    `overlap_to` all literals of `hazard` are possible; `overlap_to` is None where that lasts without end if the run
    stays where it is. A run that must go round in a circle for that stops with `end`, after one round.
    `interlocked` tells whether the run is one of the drive with its interlocks. `prolonged`: a literal, and by how much
    (ps) each end of its possibility counts as later, as where a margin is not kept.
    """

    hazard: Hazard
    phases: tuple[Phase, ...]
    events: tuple[Event, ...]
    end: int
    overlap_from: int
    overlap_to: int | None
    interlocked: bool = True
    prolonged: tuple[Literal, int] | None = None


@dataclass(frozen=True, slots=True)
class Span:
    """A stretch of time in ps; `end` None: to the end of the trace and beyond."""

    start: int
    end: int | None


@dataclass(frozen=True, slots=True)
class Replayed:
    """What the independent replay of a trace found, for the reports.

    `commands` gives for each switch of the hazard the times at which its passed command changes, from (None, first)
    on, where None is "for ever before"; `possible` the stretches at which each literal can be so; `overlap` the one
    stretch claimed by the trace, confirmed.
    """

    commands: dict[str, tuple[tuple[int | None, Command], ...]]
    possible: dict[Literal, tuple[Span, ...]]
    overlap: Span


class Check(Enum):
    """The names of findings and warnings: stable words."""

    SHORT = "short"
    OVERLAP = "overlap"
    THIN_MARGIN = "thin-margin"
    OPEN_WINDING = "open-winding"
    TOGETHER = "together"
    LATE_TRIP = "late-trip"
    LONG_ON = "long-on"
    SHORT_PULSE = "short-pulse"
    TOO_SOON = "too-soon"
    SINGLE_FAULT = "single-fault"
    UNREACHABLE = "unreachable"
    NO_WAY_BACK = "no-way-back"
    AMBIGUOUS = "ambiguous"
    STALLED = "stalled"
    ROW_MEANING = "row-meaning"
    IDLE_WAIVER = "idle-waiver"
    NO_PATH = "no-path"
    HELD_BY_INTERLOCK = "held-by-interlock"
    PUNCTUAL = "punctual"


WARNINGS = frozenset({Check.NO_PATH, Check.HELD_BY_INTERLOCK, Check.PUNCTUAL})


@dataclass(frozen=True, slots=True)
class Safe:
    """In no run does the hazard happen. `method` is "screen" or "zones"; `zones` is how many were stored.

    `however_late`: it holds with every upper bound that firmware keeps removed.
    """

    hazard: Hazard
    method: str
    zones: int
    however_late: bool


@dataclass(frozen=True, slots=True)
class Unsafe:
    """In some run the hazard happens; `trace` is one, replayed.

    `check` is SHORT or OVERLAP (TOGETHER for a `never` rule, OPEN_WINDING for a winding). `place` is where it happens:
    the row that itself holds it, named in `row`, else the move or trip whose run leads to it. `overlap` is the
    greatest, in ps, None without end; with `greatest` False a limit was reached, and there may be a longer one. `rule`
    is the line that asks for it, if it is not built in.

    THIN_MARGIN is about a hazard that does not happen, but comes nearer than its rule lets it: the others follow the
    literal at place `after` sooner by `overlap` than they may.
    """

    hazard: Hazard
    check: Check
    place: Place
    trace: Trace
    replayed: Replayed
    overlap: int | None
    cure: "Cure | None" = None
    greatest: bool = True
    row: str | None = None
    rule: Place | None = None
    after: int | None = None


@dataclass(frozen=True, slots=True)
class Undecided:
    """A stated limit was reached: `limit` says which."""

    hazard: Hazard
    limit: str
    zones: int


Verdict = Safe | Unsafe | Undecided


@dataclass(frozen=True, slots=True)
class Margin:
    """How soon after one literal of a safe hazard all others can be possible, at the soonest: `slack` ps later.

    None: they never follow. With `exact` False it is a lower bound, and `limit` tells why. `needed` is what the parts
    ask for between the command of the literal going and the last of the others coming (ps; negative where they may
    overlap). `trace` is the run that leaves no more, its place that of the move, trip or row that brings it.
    """

    hazard: Hazard
    literal: Literal
    slack: int | None
    needed: int
    exact: bool
    place: Place | None = None
    trace: Trace | None = None
    replayed: Replayed | None = None
    limit: str = ""


@dataclass(frozen=True, slots=True)
class Budget:
    """The margins of one file, least first; what is unsafe, with its greatest overlap (None: without end) and whether
    that is exact; and what a limit left undecided.

    `held` are safe hazards that only interlocks prevent, `punctual` those that rest on firmware keeping upper bounds,
    `alone` those of a single switch, which have no margin.
    """

    file: str
    drive: Drive
    margins: tuple[Margin, ...]
    unsafe: tuple[tuple[Hazard, int | None, bool], ...]
    undecided: tuple[Undecided, ...]
    held: tuple[Hazard, ...] = ()
    punctual: tuple[Hazard, ...] = ()
    alone: tuple[Hazard, ...] = ()


@dataclass(frozen=True, slots=True)
class Cure:
    """What would cure an overlap, in `words`: the shortage of dead time in ps at `place`, None where it has no end."""

    place: Place
    shortage: int | None
    words: str


@dataclass(frozen=True, slots=True)
class Finding:
    """A finding or warning that needs no trace: its check, place, words and a way out."""

    check: Check
    place: Place
    text: str
    way_out: str = ""
    names: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Outcome:
    """Everything about one file: the verdict of every hazard, and the other findings and warnings.

    `faults`: what single faults bring about, None where that was not asked for.
    """

    file: str
    drive: Drive
    verdicts: tuple[Verdict, ...]
    findings: tuple[Finding, ...] = ()
    faults: tuple[Faulted, ...] | None = None


@dataclass(frozen=True, slots=True)
class Unread:
    """A file that could not be read, or asks for what cannot be proven: nothing of it was judged."""

    file: str
    problems: tuple[Problem, ...]


@dataclass(frozen=True, slots=True)
class Failed:
    """A file on which the program itself failed, and how: whatever was found of it may not be shown."""

    file: str
    fault: str


Answer = Outcome | Library | Unread | Failed
"""What there is to say of one file: a library has nothing to prove."""
