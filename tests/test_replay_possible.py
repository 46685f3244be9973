"""Possible by interval arithmetic, the delays of literals, and when a hazard is asked for."""

from dataclasses import replace

import pytest
from build import drive, hazard, part

from seqcheck import hazards
from seqcheck.drive import Above, Command, CurrentOut, Drive
from seqcheck.evidence import possible as replayed
from seqcheck.evidence.facts import asked_for
from seqcheck.evidence.possible import Stretch, possible, stretches, together, wanted, within_trace
from seqcheck.evidence.refusal import NotPermitted
from seqcheck.hazards import Delays, Hazard, Literal
from seqcheck.quantities import Interval
from seqcheck.verdict import Span

ON, OFF, UNKNOWN = Command.ON, Command.OFF, Command.UNKNOWN


def spans(pieces: list[tuple[int | None, int | None]], rise: int, fall: int) -> list[tuple[int | None, int | None]]:
    found = possible([Stretch(*piece) for piece in pieces], Delays(rise, fall))
    return [(one.start, one.end) for one in found]


@pytest.mark.parametrize(
    ("pieces", "rise", "fall", "expected"),
    [
        ([(0, 25)], 50, 20, []),  # the command is over before it can show
        ([(0, 25)], 20, 50, [(20, 75)]),  # 55 long: inertial at its start, transport at its end
        ([(10, 10)], 2, 5, [(12, 15)]),  # a pulse of no length
        ([(10, 10)], 5, 5, []),  # possible for no time at all
        ([(10, 10)], 4, 5, [(14, 15)]),
        ([(0, 10), (15, 20)], 3, 5, [(3, 25)]),  # touching stretches are joined before the start is cut
        ([(0, 10), (16, 20)], 3, 5, [(3, 15), (19, 25)]),
        ([(0, 10), (30, 60), (45, 50)], 3, 5, [(3, 15), (33, 65)]),
        ([(0, 10), (30, 40), (45, 50)], 3, 5, [(3, 15), (33, 55)]),  # joined with the last, not with the first
        ([(0, 4), (6, 8), (11, 13)], 8, 3, [(8, 16)]),  # Blip: none alone is long enough, joined they are
        ([(0, 4), (8, 10)], 8, 3, []),
        ([(0, 10), (10, 20)], 15, 0, [(15, 20)]),  # unwanted for no time
        ([(0, 30), (1, 2)], 0, 5, [(0, 35)]),
        ([(None, 7)], 100, 5, [(None, 12)]),  # settled for ever before
        ([(None, None)], 100, 5, [(None, None)]),
        ([(3, None)], 4, 5, [(7, None)]),
        ([(0, 2), (4, None)], 9, 2, [(9, None)]),
        ([(0, None), (3, 5)], 1, 1, [(1, None)]),
        ([(None, 3), (None, 5)], 1, 1, [(None, 6)]),
    ],
)
def test_possible(
    pieces: list[tuple[int | None, int | None]], rise: int, fall: int, expected: list[tuple[int | None, int | None]]
) -> None:
    assert spans(pieces, rise, fall) == expected


def test_possible_with_later_ends() -> None:
    """A stretch of no length has no end that comes later, and what is over before it begins does not come back."""
    for piece, rise, fall, later, right in (
        (Stretch(10, 10), 5, 5, 3, []),
        (Stretch(10, 11), 5, 5, 3, [Stretch(15, 19)]),
        (Stretch(0, 10), 2, 5, 3, [Stretch(2, 18)]),
        (Stretch(0, 0), 9, 5, 9, []),
    ):
        assert possible([piece], Delays(rise, fall), later) == right


def automaton(changes: list[tuple[int, bool]], first: bool, rise: int, fall: int, end: int) -> list[tuple[int, int]]:
    """Possible by the table of states, one command at a time, ending with `end`: another way to the same answer."""
    state, entered, left, since = ("In" if first else "Out"), 0, 0, 0
    found: list[tuple[int, int]] = []
    for time, now in [*changes, (end, None)]:
        while True:
            nexts = {"Entering": [("In", entered + rise)], "Leaving": [("Out", left + fall)]}
            nexts["Blip"] = [("Leaving", entered + rise), ("Out", left + fall)]
            to, at = min(nexts.get(state, [("", end + 1)]), key=lambda one: one[1])
            if at > time or (at == time and state == "Leaving" and now):
                break
            if state == "Blip" and to == "Out" and at == time and now:
                break
            if state == "Leaving":
                found.append((since, at))
            elif to == "In" or (state == "Blip" and to == "Leaving"):
                since = at
            state = to
        if now is True:
            entered = time if state == "Out" else entered
            state = {"Out": "Entering", "Blip": "Entering", "Leaving": "In"}[state]
        elif now is False:
            state, left = {"Entering": "Blip", "In": "Leaving"}[state], time
    if state in ("In", "Leaving"):
        found.append((since, end))
    return [one for one in found if one[0] < one[1]]


def test_arithmetic_and_automaton_agree() -> None:
    """Over every pattern of commands on a grid, for all small delays."""
    end, grid = 40, range(1, 13, 2)
    for pattern in range(2 ** len(grid)):
        for first in (False, True):
            chosen = [time for place, time in enumerate(grid) if pattern >> place & 1]
            changes = [(time, (count % 2 == 0) != first) for count, time in enumerate(chosen)]
            line = [(None, ON if first else OFF), *((time, ON if now else OFF) for time, now in changes)]
            pieces = stretches(line, lambda command: command is ON)
            for rise in range(6):
                for fall in range(6):
                    ours = within_trace(possible(pieces, Delays(rise, fall)), end)
                    assert [(one.start, one.end or end) for one in ours] == automaton(changes, first, rise, fall, end)


def test_unknown_is_wanted_by_both() -> None:
    assert [wanted(Literal("X", on), command) for on in (True, False) for command in (ON, OFF, UNKNOWN)] == [
        True,
        False,
        True,
        False,
        True,
        True,
    ]


def test_within_trace() -> None:
    pieces = [Stretch(None, 4), Stretch(6, 9), Stretch(10, 15), Stretch(12, None)]
    assert within_trace(pieces, 12) == (Span(0, 4), Span(6, 9), Span(10, None))
    assert within_trace([Stretch(None, 0)], 5) == ()
    assert within_trace([Stretch(None, 1)], 5) == (Span(0, 1),)
    assert within_trace([Stretch(-3, 1)], 5) == (Span(0, 1),)
    assert within_trace([Stretch(None, None)], 5) == (Span(0, None),)
    assert within_trace([Stretch(2, 5)], 5) == (Span(2, 5),)


def test_together() -> None:
    one = (Span(0, 5), Span(7, None))
    assert together([one, (Span(4, 8), Span(9, 10))]) == (Span(4, 5), Span(7, 8), Span(9, 10))
    assert together([one, (Span(5, 7),)]) == ()
    assert together([]) == (Span(0, None),)
    assert together([one, (Span(3, None),), (Span(8, None),)]) == (Span(8, None),)


def delays(built: Drive, asked: Hazard) -> dict[Literal, Delays]:
    """The delays of each literal, in which prover and replay agree."""
    found = replayed.delays(built, asked)
    paths = {one.switch: built.paths.get(one.switch, ()) for one in asked.literals}
    assert hazards.delays(asked, paths) == tuple(found.values())
    return found


def test_delays_of_series() -> None:
    path = (part((1, 3), (2, 7)), part((10, 30), (20, 70), name="other"))
    built = drive("X Y Z", {"idle": "off off off"}, paths={"X": path, "Y": path[:1]})
    assert delays(built, hazard("X, Y off")) == {Literal("X"): Delays(11, 77), Literal("Y", False): Delays(2, 3)}
    assert delays(built, hazard("X, Z, Y")) == {
        Literal("X"): Delays(11, 77),
        Literal("Z"): Delays(0, 0),
        Literal("Y"): Delays(1, 7),
    }


def test_difference_of_a_shared_part_raises_in() -> None:
    shared = part((10, 40), (5, 60), difference=20)
    own, other = part((1, 2), (3, 4), name="own"), part((2, 3), (6, 9), name="other")
    built = drive("X Y Z", {"idle": "off off off"}, paths={"X": (shared, own), "Y": (other, shared), "Z": (shared,)})
    # out of X 64, of Y 69; excess of X over Y: 4 - 2 + 20, of Y over X: 9 - 1 + 20
    assert delays(built, hazard("X, Y")) == {Literal("X"): Delays(41, 64), Literal("Y"): Delays(42, 69)}
    assert delays(built, hazard("X, Y off"))[Literal("X")] == Delays(11, 64)
    assert delays(built, hazard("X, Y, Z"))[Literal("X")] == Delays(11, 64)


def test_difference_never_makes_a_short_pulse_vanish() -> None:
    shared, slow_on = part((10, 40), (5, 60), difference=0), part((20, 20), (0, 10), name="slow on")
    built = drive("X Y", {"idle": "off off"}, paths={"X": (shared,), "Y": (shared, slow_on)})
    assert delays(built, hazard("X, Y"))[Literal("Y")] == Delays(70, 70)  # 60 + 20, but no more than its out


def test_a_part_may_stand_twice_on_a_path() -> None:
    shared, twice = part((10, 40), (5, 60), difference=20), part((4, 5), (6, 7), name="twice")
    built = drive("X Y", {"idle": "off off"}, paths={"X": (shared, twice, twice), "Y": (shared,)})
    # X follows Y's 60 with 20 less and its own 2 · 4 more; Y follows X's 60 + 2 · 7 with 20 + 2 · 7 less
    assert delays(built, hazard("X, Y")) == {Literal("X"): Delays(48, 74), Literal("Y"): Delays(40, 60)}


def test_a_wide_difference_changes_nothing() -> None:
    shared = part((10, 40), (5, 60), difference=55)
    built = drive("X Y", {"idle": "off off"}, paths={"X": (shared,), "Y": (shared,)})
    assert set(delays(built, hazard("X, Y")).values()) == {Delays(10, 60)}


def test_a_wide_difference_counts_no_more_than_the_times_themselves() -> None:
    """One raises `in`; the other, which could differ by more than its times allow, adds nothing."""
    narrow, wide = part((10, 40), (5, 60), difference=20), part((10, 40), (5, 60), name="wide", difference=55)
    built = drive("X Y", {"idle": "off off"}, paths={"X": (narrow, wide), "Y": (narrow, wide)})
    assert set(delays(built, hazard("X, Y")).values()) == {Delays(120 - 20 - (60 - 10), 120)}


def test_a_part_without_an_upper_bound_cannot_be_judged() -> None:
    endless = replace(part((1, 2), (3, 4)), off=Interval(3, None))
    built = drive("X Y", {"idle": "off off"}, paths={"X": (endless,), "Y": ()})
    with pytest.raises(NotPermitted, match="no upper bound"):
        replayed.delays(built, hazard("X, Y"))


def test_when_a_hazard_is_asked_for() -> None:
    down, up = Above("a", "c"), Above("c", "a")
    one_way = asked_for(hazard("X, Y", (frozenset({down}),)))
    assert one_way(())
    assert one_way((CurrentOut("a"), down))
    assert not one_way((up,))
    assert not one_way((Above("c", "b"), Above("b", "a")))  # by way of b
    either = asked_for(hazard("X, Y", (frozenset({down}), frozenset({up}))))
    assert either((up,))
    assert either((down,))
    assert not either((up, down))
    assert asked_for(hazard("X, Y"))((up, down))
