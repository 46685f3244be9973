"""Published methods and standards: difference constraints, temporal networks, zones, delays, messages."""

import re
from pathlib import Path

import pytest
from outside import at_rest, leg, meet, overlaps

from seqcheck.cli import main
from seqcheck.proving.schedule import Difference, potentials
from seqcheck.zones import INFINITE, closed, delayed, extrapolated, limited

NS = 1_000

# Difference constraints: Cormen, Leiserson, Rivest, Stein, Introduction to Algorithms, 3rd ed., 24.4

CLRS = [(1, 2, 0), (1, 5, -1), (2, 5, 1), (3, 1, 5), (4, 1, 4), (4, 3, -1), (5, 3, -3), (5, 4, -3)]
"""(i, j, b): x_i − x_j ≤ b."""

SOLUTION = [-5, -3, 0, -1, -4]  # [seen]


def from_source(constraints: list[tuple[int, int, int]], count: int) -> list[int] | None:
    """The shortest-path form: all variables are at most 0, that of the source."""
    source = [Difference(variable, 0, 0) for variable in range(1, count + 1)]
    return potentials(count + 1, [*source, *(Difference(*one) for one in constraints)], 0)


def test_solution_of_difference_constraints() -> None:
    assert from_source(CLRS, 5) == [0, *SOLUTION]


def test_solution_of_difference_constraints_as_a_zone() -> None:
    """The greatest values of the closed matrix are the same solution [derived]."""
    zone = matrix(5, [*CLRS, *((variable, 0, 0) for variable in range(1, 6))])
    result = closed(zone, 6)
    assert result is not None
    assert [result[variable * 6] for variable in range(1, 6)] == SOLUTION


def test_difference_constraints_without_a_solution() -> None:
    """x1 − x2 ≤ −1 with x2 − x1 ≤ −1 [derived]."""
    contradiction = [(1, 2, -1), (2, 1, -1)]
    assert from_source(contradiction, 2) is None
    assert closed(matrix(2, contradiction), 3) is None


def matrix(count: int, constraints: list[tuple[int, int, int]]) -> list[int]:
    """A matrix of bounds x_i − x_j ≤ b, not yet closed; x_0 is 0, and variables may be negative."""
    size = count + 1
    zone = [0 if row == column else INFINITE for row in range(size) for column in range(size)]
    for row, column, bound in constraints:
        zone[row * size + column] = min(zone[row * size + column], bound)
    return zone


def ranges(zone: list[int], count: int) -> list[tuple[int, int]]:
    """The least and greatest value of every variable."""
    return [(-zone[variable], zone[variable * (count + 1)]) for variable in range(1, count + 1)]


# Simple temporal network: Dechter, Meiri, Pearl, Artificial Intelligence 49, 1991, 61-95, commuting example [memory]

COMMUTING = [(0, 1, 10, 20), (1, 2, 30, 40), (3, 2, 10, 20), (3, 4, 40, 50), (0, 4, 60, 70)]
"""(i, j, least, most): minutes from event i to event j; 0 is seven o'clock."""

MINIMAL = [(10, 20), (40, 50), (20, 30), (60, 70)]


def test_minimal_ranges_of_a_temporal_network() -> None:
    bounds = [(later, earlier, most) for earlier, later, _, most in COMMUTING]
    bounds += [(earlier, later, -least) for earlier, later, least, _ in COMMUTING]
    zone = closed(matrix(4, bounds), 5)
    assert zone is not None
    assert ranges(zone, 4) == MINIMAL


def test_earliest_and_latest_schedule_of_a_temporal_network() -> None:
    """Potentials from seven o'clock are the latest times, those of the turned graph the earliest [derived]."""
    most = [Difference(later, earlier, bound) for earlier, later, _, bound in COMMUTING]
    least = [Difference(earlier, later, -bound) for earlier, later, bound, _ in COMMUTING]
    latest = potentials(5, [*most, *least], 0)
    turned = potentials(5, [Difference(one.earlier, one.later, one.most) for one in [*most, *least]], 0)
    assert latest is not None
    assert turned is not None
    assert [(-early, late) for early, late in zip(turned[1:], latest[1:], strict=True)] == MINIMAL


def test_temporal_network_one_step_at_a_time() -> None:
    """Bounds added singly to a closed zone keep it closed [derived]."""
    zone: list[int] | None = closed(matrix(4, []), 5)
    for earlier, later, least, most in COMMUTING:
        assert zone is not None
        zone = limited(zone, 5, later, earlier, most)
        assert zone is not None
        zone = limited(zone, 5, earlier, later, -least)
    assert zone is not None
    assert ranges(zone, 4) == MINIMAL


# Difference-bound matrix: Bengtsson and Yi 2004 [memory]

X, Y = 1, 2
TIGHT = [(X, 0, 19), (Y, 0, 20), (Y, X, 10), (X, Y, -10), (0, X, 0), (0, Y, 0)]
"""x < 20 (whole numbers: x ≤ 19), y ≤ 20, y − x ≤ 10, x − y ≤ −10; clocks are not negative."""


def test_tightening_of_a_zone() -> None:
    zone = closed(matrix(2, TIGHT), 3)
    assert zone is not None
    assert ranges(zone, 2) == [(0, 10), (10, 20)]
    assert (zone[X * 3 + Y], zone[Y * 3 + X]) == (-10, 10)


def test_tightening_of_a_zone_as_time_passes() -> None:
    """From x = 0, y = 10 on, as long as x < 20 and y ≤ 20 [derived]."""
    start = [0, 0, -10, 0, 0, -10, 10, 10, 0]
    zone = delayed(start, 3, [(X, 19), (Y, 20)])
    assert zone is not None
    assert zone == closed(matrix(2, TIGHT), 3)


# Extrapolation [derived from the definitions]: Behrmann, Bouyer, Larsen, Pelánek 2006


def one_clock(least: int, most: int) -> list[int]:
    """The zone least ≤ x ≤ most."""
    return [0, -least, most, 0]


@pytest.mark.parametrize(
    ("least", "most", "lower", "upper", "expected"),
    [
        (3, 5, 2, 10, (3, INFINITE)),  # L = 2, U = 10: x ≥ 3
        (12, 15, 10, 10, (11, INFINITE)),  # M = 10: x > 10, over whole numbers x ≥ 11
        (3, 5, 5, 10, (3, 5)),  # within both bounds nothing is forgotten
        (10, 10, 10, 10, (10, 10)),
    ],
)
def test_extrapolation(least: int, most: int, lower: int, upper: int, expected: tuple[int, int]) -> None:
    zone = extrapolated(one_clock(least, most), 2, [0, lower], [0, upper])
    assert ranges(zone, 1) == [expected]


# Inertial and transport delay (IEEE 1076): 10 ns inertial drops a 5 ns pulse, transport passes it [seen]


def pulse(on: str, off: str, length: str, watched: str = "always", after: str = "0 ns") -> str:
    """UH is commanded on once for `length`. UL has no delay; it is on always, or for 1 ns some time after the pulse."""
    rest = "on" if watched == "always" else "off"
    watch = "" if watched == "always" else f"    wait {after}\n    set UL on\n    wait 1 ns\n    set UL off\n"
    return f"""\
drive "pulse"
writes together
stage
  rails P N
  leg U UH UL
parts
  slow on {on} off {off}
  none on 0 ns off 0 ns
paths
  UH through slow
  UL through none
modes   UH   UL
  rest  off  {rest}
  last  off  {rest}
moves
  start rest
  rest -> last when shot
    set UH on
    wait {length}
    set UH off
{watch}"""


PAIR = ("UH", "UL")


def test_a_pulse_shorter_than_the_delay_may_pass_whole() -> None:
    """As transport delay has it: 5 ns of conduction."""
    assert overlaps(pulse("10 ns", "10 ns", "5 ns")) == {PAIR: 5 * NS}


def test_a_pulse_shorter_than_the_delay_may_vanish() -> None:
    """As inertial delay has it: 10 to 15 ns after the command the switch may be on as well as off."""
    text = pulse("10 ns", "10 ns", "5 ns", "once", "6 ns")
    assert meet(text, "UH", "UL") == 1 * NS
    assert meet(text, "UH off", "UL") == 1 * NS


@pytest.mark.parametrize(("length", "after", "may_vanish"), [("10 ns", "4 ns", True), ("10.001 ns", "4 ns", False)])
def test_a_pulse_longer_than_the_delay_passes(length: str, after: str, may_vanish: bool) -> None:
    """Neither kind of delay drops a pulse longer than itself [derived]; one as long as the delay may yet vanish."""
    text = pulse("10 ns", "10 ns", length, "once", after)
    assert meet(text, "UH", "UL") == 1 * NS
    assert (meet(text, "UH off", "UL") != 0) == may_vanish


@pytest.mark.parametrize(
    ("on", "off", "length", "expected"),
    [
        ("50 ns", "20 ns", "25 ns", {}),  # a 25 ns command vanishes [derived]
        ("50 ns", "20 ns", "30 ns", {}),  # the longest that does [derived]
        ("50 ns", "20 ns", "30.001 ns", {PAIR: 1}),
        ("20 ns", "50 ns", "25 ns", {PAIR: 55 * NS}),  # it lasts 55 ns [derived]
        ("20 ns", "50 ns", "0 ns", {PAIR: 30 * NS}),  # even a pulse of no length [derived]
    ],
)
def test_length_of_a_command_after_unequal_delays(
    on: str, off: str, length: str, expected: dict[tuple[str, str], int]
) -> None:
    assert overlaps(pulse(on, off, length)) == expected


# Messages: GNU coding standards 4.4 [seen]

LINE = re.compile(r"[^\s:][^:]*:(\d+):(\d+): (error|warning): \S.*\S \[([a-z-]+)\]")


def test_messages_in_the_form_of_the_coding_standards(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """FILE:LINE:COLUMN: severity: message."""
    file = tmp_path / "leg.dseq"
    file.write_text(leg({"device": "on 10 ns off 30 ns"}, "19 ns"), encoding="utf-8")
    assert main(["lint", "--as", "lines", str(file)]) == 1
    found = [LINE.fullmatch(line) for line in capsys.readouterr().out.splitlines()]
    assert found
    assert all(found)
    assert "overlap" in {match[4] for match in found if match}


def test_messages_about_mistakes_have_the_same_form(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """On standard error, with exit code 2."""
    file = tmp_path / "wrong.dseq"
    file.write_text(at_rest(["rails P N", "leg U UH UL"], ["UH", "UX"], "00"), encoding="utf-8")
    assert main(["lint", str(file)]) == 2
    found = [LINE.fullmatch(line) for line in capsys.readouterr().err.splitlines()]
    assert found
    assert all(found)
