"""A small drive and verdicts about it, worked out by hand, for the tests of the reports.

The times of a path are those of `coupler`: on 1.5 to 4 us, off 3 to 12 us; so a switch can conduct from 1.5 us after
its command goes on until 12 us after it goes off, and surely does from 4 us after it goes on.
"""

from dataclasses import replace
from fractions import Fraction

from seqcheck.drive import (
    AtOnce,
    Clock,
    Command,
    Drive,
    Fixed,
    How,
    Leg,
    Level,
    Mode,
    Move,
    Order,
    Part,
    Pin,
    Rails,
    SetStep,
    Stage,
    Switch,
    Trip,
    WaitStep,
    Waiver,
    When,
    Winding,
    Writes,
)
from seqcheck.drive import Conducts as Passes
from seqcheck.hazards import Hazard, Literal
from seqcheck.quantities import Interval
from seqcheck.source import Place
from seqcheck.verdict import (
    Act,
    Check,
    Cure,
    Event,
    Finding,
    Outcome,
    Phase,
    Replayed,
    Safe,
    Span,
    Trace,
    Undecided,
    Unsafe,
)

FILE = "bench.dseq"
TEXT = """\
drive "Bench actuator, 24 V"
clock 48 MHz, late by at most 2 us
writes one at a time, 0.4 us to 1.5 us apart, turn-offs first
stage
  rails P N
  leg U  UH UL
  leg V  VH VL
  winding U V
parts
  coupler   on 1.5 us to 4 us    off 3 us to 12 us
paths
  UH UL VH VL  through coupler
pins
  UH  PA8   active high  rests low
  UL  PB13  active high  rests low
  VH  PA9   active high  rests low
  VL  PB14  active low   rests high
modes     UH     UL     VH     VL
  idle    off    off    off    off
  open    on     off    off    on
  close   off    on     on     off
  brake   on     on     off    off
moves
  start idle
  idle  -> open        when open_cmd  earliest 1 ms
  idle  -> brake
  open  -> close       when reverse_cmd
    set all off
    wait 5 us
trips
  overheat from open, close -> idle within 30 us
"""
NS, US, MS = 10**3, 10**6, 10**9
OFF, ON = Fixed.OFF, Fixed.ON
OFF_NOW = Command.OFF
COLUMNS = ("UH", "UL", "VH", "VL")
UH, UL = Literal("UH"), Literal("UL")
LEG_U = Hazard((UH, UL), ("P", "N"))
LEG_V = Hazard((Literal("VH"), Literal("VL")), ("P", "N"))


def at(words: str) -> Place:
    """The place of the first line of TEXT that begins with these words."""
    for number, row in enumerate(TEXT.splitlines(), 1):
        if row.strip().startswith(words):
            column = row.index(words) + 1
            return Place(FILE, number, column, number, len(row) + 1)
    raise ValueError(words)


COUPLER = Part(at("coupler"), "coupler", Interval(1500 * NS, 4 * US), Interval(3 * US, 12 * US), None)


def _mode(name: str, *cells: Fixed) -> Mode:
    return Mode(at(f"{name} "), name, cells, (), None)


def _switch(name: str, start: str, end: str) -> Switch:
    return Switch(at("leg U" if name[0] == "U" else "leg V"), name, ((start, end),), Passes.DIODE)


STAGE = Stage(
    at("stage"),
    (Rails(at("rails"), ("P", "N")),),
    (),
    (),
    (_switch("UH", "P", "U"), _switch("UL", "U", "N"), _switch("VH", "P", "V"), _switch("VL", "V", "N")),
    (),
    (Winding(at("winding"), ("U", "V"), False),),
    (Leg(at("leg U"), "U", "UH", "UL", "P", "N"), Leg(at("leg V"), "V", "VH", "VL", "P", "N")),
)
OPEN = Move(at("idle  -> open"), ("idle",), "open", When("open_cmd", 1 * MS, None), False, (), ())
BRAKE = Move(at("idle  -> brake"), ("idle",), "brake", AtOnce(), False, (), ())
SET_OFF = SetStep(at("set all off"), tuple((name, OFF) for name in COLUMNS))
REVERSE = Move(
    at("open  -> close"),
    ("open",),
    "close",
    When("reverse_cmd", 0, None),
    False,
    (),
    (SET_OFF, WaitStep(at("wait 5 us"), Interval(5 * US, 5 * US))),
)
OVERHEAT = Trip(
    at("overheat"), "overheat", frozenset({"open"}), frozenset({"open", "close"}), "idle", 30 * US, False, (), ()
)
DRIVE = Drive(
    at("drive"),
    "Bench actuator, 24 V",
    Clock(at("clock"), Fraction(48 * 10**6), Fraction(0), 2 * US),
    Writes(at("writes"), How.SINGLY, Interval(400 * NS, 1500 * NS), Order.OFFS_FIRST),
    None,
    STAGE,
    {"coupler": COUPLER},
    dict.fromkeys(COLUMNS, (COUPLER,)),
    (),
    {
        name: Pin(at(f"{name}  P"), name, pin, name != "VL", rests, Interval(0, 0), None)
        for name, pin, rests in (
            ("UH", "PA8", Level.LOW),
            ("UL", "PB13", Level.LOW),
            ("VH", "PA9", Level.LOW),
            ("VL", "PB14", Level.HIGH),
        )
    },
    {},
    COLUMNS,
    {
        mode.name: mode
        for mode in (
            _mode("idle", OFF, OFF, OFF, OFF),
            _mode("open", ON, OFF, OFF, ON),
            _mode("close", OFF, ON, ON, OFF),
            _mode("brake", ON, ON, OFF, OFF),
        )
    },
    "idle",
    (OPEN, BRAKE, REVERSE),
    (OVERHEAT,),
    (),
    (),
)

# The reversal with too short a wait. UH is commanded on at 1 ms and off at 1.1 ms, so it can conduct until 1.112 ms;
# UL is commanded on 5.4 us after it went off and can conduct 1.5 us later: 12 - 5.4 - 1.5 = 5.1 us of overlap.
_T = 1 * MS
_R = 1 * MS + 100 * US
REVERSAL = Trace(
    LEG_U,
    (),
    (
        Event(_T, Act.BEGINS, "", 0, place=OPEN.place),
        Event(_T, Act.WRITES, writes=(("UH", ON),), place=at("open ")),
        Event(_T + 400 * NS, Act.WRITES, writes=(("VL", ON),), place=at("open ")),
        Event(_T + 400 * NS, Act.ENTERS, "open", place=at("open ")),
        Event(_R, Act.BEGINS, "", 2, place=REVERSE.place),
        Event(_R, Act.WRITES, writes=(("UH", OFF),), place=SET_OFF.place),
        Event(_R + 400 * NS, Act.WRITES, writes=(("VL", OFF),), place=SET_OFF.place),
        Event(_R + 5400 * NS, Act.WRITES, writes=(("UL", ON),), place=at("close ")),
        Event(_R + 6900 * NS, Act.WRITES, writes=(("VH", ON),), place=at("close ")),
        Event(_R + 6900 * NS, Act.ENTERS, "close", place=at("close ")),
    ),
    _R + 12 * US,
    _R + 6900 * NS,
    _R + 12 * US,
)
REVERSAL_REPLAYED = Replayed(
    {
        "UH": ((None, Command.OFF), (_T, Command.ON), (_R, Command.OFF)),
        "UL": ((None, Command.OFF), (_R + 5400 * NS, Command.ON)),
    },
    {UH: (Span(_T + 1500 * NS, _R + 12 * US),), UL: (Span(_R + 6900 * NS, None),)},
    Span(_R + 6900 * NS, _R + 12 * US),
)
CURE = Cure(at("wait 5 us"), 5100 * NS, "make this wait at least 10.1 us")
OVERLAP = Unsafe(LEG_U, Check.OVERLAP, REVERSE.place, REVERSAL, REVERSAL_REPLAYED, 5100 * NS, CURE)

# A row that commands both switches of leg U: from 1.5 us after the second write on, without end.
SHORTED = Trace(
    LEG_U,
    (),
    (
        Event(0, Act.BEGINS, "", 1, place=BRAKE.place),
        Event(0, Act.WRITES, writes=(("UH", ON),), place=at("brake ")),
        Event(1500 * NS, Act.WRITES, writes=(("UL", ON),), place=at("brake ")),
        Event(1500 * NS, Act.ENTERS, "brake", place=at("brake ")),
    ),
    3 * US,
    3 * US,
    None,
)
SHORTED_REPLAYED = Replayed(
    {"UH": ((None, Command.OFF), (0, Command.ON)), "UL": ((None, Command.OFF), (1500 * NS, Command.ON))},
    {UH: (Span(1500 * NS, None),), UL: (Span(3 * US, None),)},
    Span(3 * US, None),
)
SHORT = Unsafe(LEG_U, Check.SHORT, at("brake "), SHORTED, SHORTED_REPLAYED, None)

SAFE_V = Safe(LEG_V, "screen", 0, True)
SAFE_U = Safe(LEG_U, "zones", 812, False)
NOT_DECIDED = Undecided(LEG_V, "200000 zones", 200_000)
NO_PATH = Finding(Check.NO_PATH, at("UH UL VH VL"), "switch VL has no path", "give it one in `paths`", ("VL",))
AMBIGUOUS = Finding(Check.AMBIGUOUS, OPEN.place, "two moves out of idle hear open_cmd", "", ("idle", "open_cmd"))


def outcome(*verdicts: Safe | Unsafe | Undecided, findings: tuple[Finding, ...] = (), drive: Drive = DRIVE) -> Outcome:
    """An outcome about the bench drive."""
    return Outcome(FILE, drive, verdicts, findings)


def waiving(check: str, name: str, reason: str) -> Drive:
    """The bench drive with one waiver."""
    return replace(DRIVE, waivers=(Waiver(at("trips"), check, name, reason),))


def modulated(periods: int, upper: str = "UH", lower: str = "UL") -> Unsafe:
    """A leg on a 10 us carrier without dead time: `upper` follows it, `lower` its complement.

    The reference rises at 0, 10, 20 ... us and falls 5 us later, until `upper` stays off; every command lasts 5 us,
    shorter than the slowest turn-off, so both can conduct from the first turn-on of `lower` + 1.5 us on.
    """
    events: list[Event] = []
    high: list[tuple[int | None, Command]] = [(None, OFF_NOW)]
    low: list[tuple[int | None, Command]] = [(None, OFF_NOW)]
    for period in range(periods):
        rise, fall = 10 * US * period, 10 * US * period + 5 * US
        events += [Event(rise, Act.RISES, "main"), Event(fall, Act.FALLS, "main")]
        high += [(rise, Command.ON), (fall, OFF_NOW)]
        low += [(fall, Command.ON)] if period == 0 else [(rise, OFF_NOW), (fall, Command.ON)]
    start, end = 6500 * NS, 10 * US * periods - 5 * US + 12 * US
    on = Literal(upper), Literal(lower)
    possible: dict[Literal, tuple[Span, ...]] = {on[0]: (Span(1500 * NS, end),), on[1]: (Span(start, None),)}
    hazard = Hazard(on, ("P", "N"))
    trace = Trace(hazard, (Phase("main", False, 3 * US, True),), tuple(events), end, start, end)
    replayed = Replayed({upper: tuple(high), lower: tuple(low)}, possible, Span(start, end))
    return Unsafe(hazard, Check.OVERLAP, at("open "), trace, replayed, end - start)


def renamed(**names: str) -> Drive:
    """The bench drive with a path for switches of other names."""
    return replace(DRIVE, paths=DRIVE.paths | dict.fromkeys(names.values(), (COUPLER,)))
