"""Whole cycles of a carrier as one event: what the replay makes of them is what it makes of their edges one by one."""

from dataclasses import replace
from random import Random

import pytest
from build import carrier, drive, interlock, move, part, span, trace, trip, writes
from test_replay_runs import refused

from seqcheck.drive import Command, Drive, How, Update
from seqcheck.evidence.interlocks import Interlocks
from seqcheck.evidence.possible import delays
from seqcheck.evidence.replay import NotPermitted, _possible, _walked
from seqcheck.quantities import INSTANT, Interval
from seqcheck.verdict import Act, Cycles, Event, Phase, Span, Trace

LOW = (Phase("k", False, 0, True),)
JOINED = "0 begins 0; 0 writes X k, Y ~k; 0 enters run; "
ON, OFF = Command.ON, Command.OFF


def modulated(dead: Interval = INSTANT, on: int = 2, off: int = 9, **more: object) -> Drive:
    """X follows a carrier that is high for 20 to 30 and low for 40 to 50 ps, Y its complement."""
    return drive(
        "X Y",
        {"idle": "off off", "run": "k ~k", "rest": "off off"},
        moves=(move("idle", "run"), move("run", "rest")),
        carriers=(carrier("k", span(20, 30), span(40, 50), dead=dead, period=70),),
        writes=writes(How.TOGETHER),
        paths=dict.fromkeys("XY", (part((on, on), (off, off)),)),
        **more,  # type: ignore[arg-type]
    )


def folded(cycles: Cycles, dead: int | None, end: int) -> Trace:
    """A run that joins at 0, rises at 40 and then goes through these cycles."""
    over = "" if dead is None else f"{dead} output k; "
    one = trace(f"{JOINED}{over}40 rises k", end, phases=(Phase("k", False, 0, dead is None),))
    after = 40 + cycles.length
    last = [Event(after + dead, Act.OUTPUT, "k")] if dead is not None else []
    return replace(one, events=(*one.events, Event(40, Act.CYCLES, "k", cycles=cycles), *last))


def unfolded(one: Trace, dead: int | None) -> Trace:
    """The same with an event for every edge."""
    events: list[Event] = []
    for event in one.events:
        if event.cycles is None:
            events.append(event)
            continue
        time = event.time
        for _ in range(event.cycles.count):
            for length, act in ((event.cycles.first, Act.FALLS), (event.cycles.second, Act.RISES)):
                if dead is not None and length >= dead:
                    events.append(Event(time + dead, Act.OUTPUT, "k"))
                time += length
                events.append(Event(time, act, "k"))
    return replace(one, events=tuple(events))


def possible(built: Drive, one: Trace) -> dict[str, tuple[Span, ...]]:
    """Where each switch can conduct."""
    walk = _walked(built, one)
    times = delays(built, one.hazard)
    return {literal.switch: _possible(walk, literal, times[literal], one) for literal in times}


def within(spans: tuple[Span, ...], start: int, end: int) -> set[int]:
    """The picoseconds of [start, end) that the spans cover."""
    return {
        time for one in spans for time in range(max(start, one.start), min(end, end if one.end is None else one.end))
    }


@pytest.mark.parametrize("number", range(120))
def test_cycles_are_their_edges(number: int) -> None:
    """In the first cycles and the last they are alike; between, nothing is said that is not so."""
    rng = Random(number)
    dead = rng.choice((None, None, 3, 20, 25))
    built = modulated(INSTANT if dead is None else span(dead, dead + 2), rng.randint(0, 60), rng.randint(1, 200))
    cycles = Cycles(rng.randint(1, 40), rng.randint(20, 30), rng.randint(40, 50))
    end = 40 + cycles.length + 26
    one = folded(cycles, dead, end)
    short, whole = possible(built, one), possible(built, unfolded(one, dead))
    for switch in "XY":
        assert within(short[switch], 0, end) <= within(whole[switch], 0, end)
        last = end - 26 - cycles.first - cycles.second
        assert within(short[switch], last, end) == within(whole[switch], last, end)
        lasting = [span for span in whole[switch] if span.start <= 40 and (span.end is None or span.end >= end)]
        assert not lasting or lasting[0] in short[switch]


def test_commands_leave_the_middle_out() -> None:
    cycles = Cycles(1_000_000_000, 25, 45)
    walk = _walked(modulated(), folded(cycles, None, 40 + cycles.length))
    assert len(walk.commands["X"]) < 40
    assert walk.commands["X"][-1] == (40 + cycles.length, ON)
    assert walk.references["k"].edge == 40 + cycles.length


def with_cycles(lines: str, time: int, cycles: Cycles | None, end: int, then: str = "") -> Trace:
    """A trace with whole cycles at a time, between two stretches of events."""
    before, after = trace(lines, end, phases=LOW), trace(then, end, phases=LOW)
    return replace(before, events=(*before.events, Event(time, Act.CYCLES, "k", cycles=cycles), *after.events))


@pytest.mark.parametrize(
    ("lines", "time", "cycles", "end", "then", "why"),
    [
        ("40 rises k", 41, Cycles(2, 25, 45), 181, "", "begin with an edge"),
        ("40 rises k", 40, None, 50, "", "does not say which"),
        ("40 rises k", 40, Cycles(0, 25, 45), 50, "", "has no such cycles"),
        ("40 rises k", 40, Cycles(2, 19, 45), 168, "", "cannot come before 20 ps"),
        ("40 rises k", 40, Cycles(2, 31, 45), 192, "", "cannot come after 30 ps"),
        ("40 rises k", 40, Cycles(2, 25, 51), 192, "", "cannot come after 50 ps"),
        ("40 rises k", 40, Cycles(2, 25, 45), 211, "", "the reference of k must fall by 210 ps"),
        ("40 rises k", 40, Cycles(2, 25, 45), 190, "65 falls k", "cannot come before 200 ps"),
        ("40 rises k", 40, Cycles(2, 25, 45), 190, "99 begins 0; 99 writes X k, Y ~k; 99 enters run", "in the middle"),
    ],
)
def test_cycles_that_are_refused(lines: str, time: int, cycles: Cycles | None, end: int, then: str, why: str) -> None:
    with pytest.raises(NotPermitted, match=why):
        _walked(modulated(), with_cycles(lines, time, cycles, end, then))


def test_a_move_after_the_last_cycle_is_permitted() -> None:
    joined = "180 begins 0; 180 writes X k, Y ~k; 180 enters run"
    _walked(modulated(), with_cycles("40 rises k", 40, Cycles(2, 25, 45), 190, joined))


@pytest.mark.parametrize("number", range(40))
def test_interlocks_clear_in_every_cycle(number: int) -> None:
    """X clears D after each rise, when Y has been off for so long, and Y D after each fall."""
    rng = Random(number)
    dead, off = rng.randint(1, 19), rng.randint(1, 200)
    built = modulated(INSTANT, rng.randint(0, 60), off, interlocks=(interlock("X", "Y", span(dead, dead + 3)),))
    cycles = Cycles(rng.randint(1, 40), rng.randint(20, 30), rng.randint(40, 50))
    end = 40 + cycles.length + 26
    first = trace(JOINED + "40 rises k", end, phases=LOW)
    whole = unfolded(replace(first, events=(*first.events, Event(40, Act.CYCLES, "k", cycles=cycles))), None)
    clears = [Event(one.time + dead, Act.CLEARS, "X" if one.act is Act.RISES else "Y") for one in whole.events[3:]]
    whole = replace(whole, events=tuple(sorted((*whole.events, *clears), key=lambda one: one.time)))
    short = replace(
        first,
        events=(*first.events, Event(40, Act.CYCLES, "k", cycles=cycles), replace(clears[-1], time=end - 26 + dead)),
    )
    found, right = possible(built, short), possible(built, whole)
    last = end - 26 - cycles.first - cycles.second
    for switch in "XY":
        assert within(found[switch], 0, end) <= within(right[switch], 0, end)
        assert within(found[switch], last, end) == within(right[switch], last, end)


def test_interlocked_switches_on_other_carriers_are_refused() -> None:
    """Then no cycle is like the one before."""
    carriers = tuple(carrier(name, span(20, 30), span(40, 50), period=70) for name in ("k", "m"))
    built = drive(
        "X Y", {"idle": "off off", "run": "k m"}, moves=(move("idle", "run"),), carriers=carriers,
        writes=writes(How.TOGETHER), interlocks=(interlock("X", "Y"),),
    )  # fmt: skip
    lines = "0 begins 0; 0 writes X k, Y m; 0 enters run; 40 rises k"
    one = with_cycles(lines, 40, Cycles(2, 25, 45), 60)
    with pytest.raises(NotPermitted, match="follow other carriers"):
        _walked(built, replace(one, phases=(*LOW, Phase("m", False, 0, True))))


def test_no_held_write_acts_within_cycles() -> None:
    """X is held for m, which rises while k goes through its cycles."""
    carriers = tuple(
        carrier(name, span(20, 30), span(40, 50), update=Update.AT_RISE, period=70) for name in ("k", "m")
    )
    built = drive(
        "X Y", {"idle": "off off", "run": "m off"}, moves=(move("idle", "run"),), carriers=carriers,
        writes=writes(How.TOGETHER), trips=(trip("t", "run", "idle"),),
    )  # fmt: skip
    phases = (*LOW, Phase("m", False, 0, True))
    events = "40 rises k; 40 begins 0; 40 writes X m; 40 enters run"
    held = replace(with_cycles(events, 40, Cycles(2, 25, 45), 190, "45 rises m"), phases=phases)
    with pytest.raises(NotPermitted, match="in the middle of whole cycles"):
        _walked(built, held)
    own = replace(with_cycles(events, 40, Cycles(2, 25, 45), 190), phases=phases)
    _walked(built, replace(own, end=50))


def test_levels_without_cycles() -> None:
    still = drive("X Y", {"idle": "off off"}, carriers=(carrier("k", None, Interval(1, None)),))
    with pytest.raises(NotPermitted, match="no such cycles"):
        _walked(still, with_cycles("", 0, Cycles(1, 2, 3), 9))
    refused(still, "0 cycles k", 9, "does not say which cycles", phases=LOW)


def test_dead_times_of_interlocks_within_a_cycle_are_over_one_by_one() -> None:
    """Each at its soonest, the earliest first, and none at the end or after it; so much later after a repetition."""
    locks = (interlock("X", "Y", span(6, 9)), interlock("Y", "Z", span(3, 3)))
    built = drive("X Y Z", {"idle": "on off on"}, interlocks=locks)
    for later in (0, 100):
        guards = Interlocks(built, frozenset("XY"), True, {"X": ON, "Y": OFF, "Z": ON})
        guards.see(5, {"X": OFF, "Y": ON, "Z": OFF})
        guards.repeat(later)
        assert guards.clear_before(later + 8) is None
        assert guards.clear_before(later + 9) == later + 8
        assert guards.clear_before(later + 11) is None
        assert guards.passed("Y", {"X": OFF, "Y": ON, "Z": OFF}) is OFF
        assert guards.clear_before(later + 12) == later + 11
        assert guards.passed("Y", {"X": OFF, "Y": ON, "Z": OFF}) is ON
        assert guards.clear_before(later + 99) is None
