"""Modes that cannot be reached or left towards the start, events that say two things, moves that never begin."""

import re
from collections import Counter, deque
from collections.abc import Iterator
from dataclasses import replace
from random import Random

import pytest
from judge.draws import draw
from judge.states import Rest, State
from judge.ways import Amiss, Ways
from judge.world import World
from reading import drive_of, row_drive, vent

from seqcheck.drive import Drive, When
from seqcheck.language import read
from seqcheck.modegraph import graph_findings
from seqcheck.verdict import Check, Finding

GRAPH = (Check.UNREACHABLE, Check.NO_WAY_BACK, Check.AMBIGUOUS, Check.STALLED)
ROWS = "  a off\n  b on\n  c on"


def found_in(
    moves: str, *, rows: str = ROWS, head: str = "clock 1 GHz", trips: str = "", pins: bool = False
) -> list[str]:
    """`check line: text` of a drive of one switch, the lines counted from `modes`."""
    more = "pins\n  S PA1 active high rests low" if pins else ""
    text = row_drive("S", rows, f"  start a\n{moves}" if "start" not in moves else moves, head, more)
    text += f"trips\n{trips}" if trips else ""
    first = text.splitlines().index("modes S")
    return [_shown(one, first) for one in graph_findings(drive_of(text))]


def _shown(finding: Finding, first: int) -> str:
    text = re.sub(r"line (\d+)", lambda match: f"line {int(match[1]) - first}", finding.text)
    return f"{finding.check.value} {finding.place.line - first}: {text}"


# What is said


def test_nothing_is_amiss() -> None:
    assert found_in("  a -> b when go\n  b -> c after 1 us to 2 us\n  c -> a") == []


def test_a_row_that_nothing_leads_to() -> None:
    said = found_in("  a -> b when go\n  b, c -> a when stop")
    assert said == ["unreachable 4: no move and no trip leads to mode 'c'"]


def test_an_island_names_each_way_and_why_it_does_not_help() -> None:
    rows = f"{ROWS}\n  d off"
    moves = "  a -> b when go\n  b -> a when stop\n  c -> d when x\n  d -> c when y\n  c, d -> a when stop"
    assert found_in(moves, rows=rows) == [
        "unreachable 4: mode 'c' cannot be reached from the start 'a': the move in line 11 leaves 'd', which cannot be "
        "reached either",
        "unreachable 5: mode 'd' cannot be reached from the start 'a': the move in line 10 leaves 'c', which cannot be "
        "reached either",
    ]


def test_a_move_that_can_never_begin_reaches_nothing() -> None:
    moves = "  a -> b when go\n  b -> a after 1 us\n  b -> c after 2 us\n  c -> a when stop"
    assert found_in(moves) == [
        "unreachable 4: mode 'c' cannot be reached from the start 'a': the move in line 9 can never begin in 'b'",
        "stalled 9: this move to 'c' can never begin in mode 'b': the soonest is 2 us after entry, but the move to 'a' "
        "in line 8 has begun 1 us after entry at the latest",
    ]


def test_a_trip_reaches_and_leads_back() -> None:
    moves = "  a -> b when go"
    assert found_in(moves, trips="  t from b -> c within 1 us\n  u from c -> a at once") == []
    assert found_in(moves, trips="  t from c -> a within 1 us") == [
        "unreachable 4: no move and no trip leads to mode 'c'",
        "no-way-back 3: mode 'b' has no way back to the start 'a': nothing can follow it",
    ]
    assert found_in("  a -> b when go\n  b -> a when stop", trips="  t from c -> c\n  u from c -> a") == [
        "unreachable 4: no move and no trip leads to mode 'c'"
    ]


def test_modes_that_only_lead_to_each_other() -> None:
    assert found_in("  a -> b when go\n  b -> c when onward\n  c -> b when off_cmd\n  c -> c when again") == [
        "no-way-back 3: mode 'b' has no way back to the start 'a': only 'c' can follow it",
        "no-way-back 4: mode 'c' has no way back to the start 'a': only 'b' can follow it",
    ]


def test_a_mode_that_only_follows_itself() -> None:
    said = found_in("  a -> b when go\n  b -> b when again", rows="  a off\n  b on")
    assert said == ["no-way-back 3: mode 'b' has no way back to the start 'a': nothing else can follow it"]


def test_the_only_way_back_can_never_begin() -> None:
    moves = "  a -> b when go\n  b -> c\n  c -> b after 1 us\n  b -> a when stop"
    why = "the move in line 10 can never begin in 'b'"
    assert found_in(moves, head="loop at least 50 us") == [
        f"no-way-back 3: mode 'b' has no way back to the start 'a': only 'c' can follow it; {why}",
        f"no-way-back 4: mode 'c' has no way back to the start 'a': only 'b' can follow it; {why}",
        "stalled 10: this move to 'a' on 'stop' can never begin in mode 'b': the soonest is 50 us after entry (loop), "
        "but the move to 'c' in line 8 begins at once",
    ]


def test_reset_as_the_start_needs_a_way_back() -> None:
    moves = "  start reset\n  reset -> a when boot\n  a -> b when go\n  b -> a when stop"
    rows = "  a off\n  b on"
    assert found_in(moves, rows=rows, pins=True) == [
        "no-way-back 5: no move and no trip leads back to the start 'reset'"
    ]
    assert found_in(moves, rows=rows, pins=True, trips="  brown_out from any -> reset") == []
    assert found_in(moves, rows=rows, pins=True, trips="  brown_out from a -> reset") == []


def test_reset_counts_only_where_it_is_the_start_or_a_target() -> None:
    moves = "  a -> b when go\n  b -> a when stop\n  reset -> a when boot"
    rows = "  a off\n  b on"
    assert found_in(moves, rows=rows, pins=True) == []
    assert found_in(f"{moves}\n  reset -> reset when again", rows=rows, pins=True) == [
        "unreachable 8: no move and no trip leads to mode 'reset'"
    ]
    assert found_in(f"{moves}\n  b -> reset when out", rows=rows, pins=True) == []


# Ambiguity


def test_one_event_two_moves() -> None:
    moves = "  a -> b when go\n  a -> c when go\n  any -> a when stop\n  c -> b when stop\n  a, b -> c when go"
    assert [one.removesuffix(", and nothing says which") for one in found_in(moves)] == [
        "ambiguous 8: in mode 'a' the event 'go' may begin this move to 'c' as well as the one to 'b' in line 7",
        "ambiguous 11: in mode 'a' the event 'go' may begin this move to 'c' as well as the one to 'b' in line 7 and "
        "to 'c' in line 8",
        "ambiguous 10: in mode 'c' the event 'stop' may begin this move to 'b' as well as the one to 'a' in line 9",
    ]


@pytest.mark.parametrize(
    ("first", "second", "collide"),
    [
        ("latest 1 us", "earliest 1 us", True),
        ("latest 1 us", "earliest 1001 ns", False),
        ("earliest 1001 ns", "latest 1 us", False),
        ("", "earliest 5 us latest 6 us", True),
        ("with current out of X", "with current into X", False),
        ("with current out of X", "with current out of X", True),
        ("with current out of X", "with current into Y", True),
        ("with current out of X", "", True),
        ("with a above b", "with b above a", False),
        ("with a above b, b above c", "with c above a", False),
        ("with a above b", "with b above c", True),
    ],
)
def test_times_or_knowledge_can_tell_moves_apart(first: str, second: str, collide: bool) -> None:
    """A short press and a long one, or four-step changes by the sign of the current, share an event and no moment."""
    text = f"""drive "x"
stage
  sources a b c
  switch S from a to X two way
  switch T from b to Y two way
modes S T
  p off off
  q on off
moves
  start p
  p -> q when go {first}
  p -> q when go {second}
  q -> p when stop
"""
    assert [one.check for one in graph_findings(drive_of(text))] == [Check.AMBIGUOUS] * collide


def test_a_tolerance_can_make_times_meet() -> None:
    moves = "  a -> b when key latest 1 ms\n  a -> c when key earliest 1010 us\n  b, c -> a when stop"
    assert found_in(moves, head="clock 1 MHz within 100 ppm") == []
    assert [one.split()[0] for one in found_in(moves, head="clock 1 MHz within 1 %")] == ["ambiguous"]


# Moves that can never begin


@pytest.mark.parametrize(
    ("head", "moves", "why"),
    [
        ("", "  b -> c after 1 us\n  b -> a after 1 us to 2 us", ""),
        ("", "  b -> a after 1001 ns to 2 us\n  b -> c after up to 1 us", "1.001 us after entry, but the move to 'c'"),
        ("clock 1 GHz, late by at most 1 ns", "  b -> a after 1001 ns to 2 us\n  b -> c after up to 1 us", ""),
        ("", "  b -> a after 1001 ns\n  b -> c after at least 1 us", ""),
        ("", "  b -> a when x earliest 3 us\n  b -> c after 2 us", "but the move to 'c' in line 9 has begun 2 us"),
        ("", "  b -> a when x\n  b -> c", ""),
        ("loop at least 1 ns", "  b -> a when x\n  b -> c", "1 ns after entry (loop), but"),
        ("", "  b -> c after 1 us\n  b -> a", "1 us after entry, but the move to 'a' in line 9 begins at once"),
        (
            "loop at least 2 us",
            "  b -> a when x latest 1 us\n  b -> c when y",
            "the soonest is 2 us after entry (loop), the latest 1 us",
        ),
    ],
)
def test_stalled(head: str, moves: str, why: str) -> None:
    every = f"  a -> b when go\n{moves}\n  c -> a when stop\n  a -> c when away"
    said = [one for one in found_in(every, head=head) if one.startswith("stalled")]
    assert len(said) == bool(why)
    assert all(why in one for one in said)


def test_a_line_is_a_move_from_each_of_its_modes() -> None:
    moves = "  a -> b when go\n  a -> c when onward\n  b, c -> a after 2 us\n  c -> b after 1 us"
    assert [(one.check, one.names, one.way_out) for one in _of(moves)] == [
        (Check.STALLED, ("c",), "change one of the two times, or leave 'c' out here")
    ]


def _of(moves: str) -> tuple[Finding, ...]:
    return graph_findings(drive_of(row_drive("S", ROWS, f"  start a\n{moves}")))


# Against the letter


def with_shared_events(text: str, seed: int) -> Drive:
    """The drive of a text, some of its events made one."""
    rng, drive = Random(seed), drive_of(text)
    moves = list(drive.moves)
    for number, move in enumerate(moves):
        if isinstance(move.trigger, When) and rng.random() < 0.5:
            moves[number] = replace(move, trigger=replace(move.trigger, event="e"))
    return replace(drive, moves=tuple(moves))


def test_drawn_drives_are_found_at_fault_as_the_letter_says() -> None:
    """Checks, lines and modes of all findings of 400 drawn drives, and how often each check came up."""
    count: Counter[str] = Counter()
    for seed in range(400):
        drive = with_shared_events(draw(seed), seed)
        said = {Amiss(one.check.value, one.place.line, one.names[0]) for one in graph_findings(drive)}
        assert said == Ways(drive).amiss(), seed
        count.update(one.check for one in said)
    assert all(count[check.value] > 20 for check in GRAPH), count


def _entered(drive: Drive, most: int) -> set[str] | None:
    """The modes at rest in all states of the literal search; None where there are too many states."""
    world = World(drive, (), interlocks=False, bounded=True)
    seen: set[State] = set(world.starts())
    waiting = deque(seen)
    while waiting:
        for after in _next(world, waiting.popleft()):
            if after not in seen:
                seen.add(after)
                waiting.append(after)
        if len(seen) > most:
            return None
    return {state.place.mode for state in seen if isinstance(state.place, Rest)}


def _next(world: World, state: State) -> Iterator[State]:
    yield from (after for _, after in world.events(state))
    later = world.tick(state)
    if later is not None:
        yield later


def test_what_is_unreachable_is_entered_in_no_run() -> None:
    """The graph against every behaviour of small drives, picosecond by picosecond: both know the same modes."""
    decided = missing = 0
    for seed in range(120):
        drive = drive_of(draw(seed))
        entered = _entered(drive, 300)
        if entered is None:
            continue
        unreachable = {one.names[0] for one in graph_findings(drive) if one.check is Check.UNREACHABLE}
        modes = set(Ways(drive).modes)
        assert modes - unreachable == entered & modes, seed
        decided, missing = decided + 1, missing + bool(unreachable)
    assert decided >= 60
    assert missing >= 15


def test_the_vent_actuator_has_no_finding() -> None:
    assert graph_findings(read(vent(), "t.dseq", str)) == ()
