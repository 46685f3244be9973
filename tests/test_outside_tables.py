"""Switching tables of public sources, against the whole program: which words short, and which changes need a pause."""

from collections import Counter
from itertools import permutations

import pytest
from outside import around, at_rest, lines, meet, overlaps, sets_of, shorts, unsafe, words
from reading import drive_of

from seqcheck.drive import Fixed
from seqcheck.verdict import Act, Check

NS = 1_000

# Bridges of n legs


def bridge_word(legs: int, word: str) -> str:
    """A bridge at rest; the bits are H and L of the first leg, then of the next."""
    names = [(f"H{number}", f"L{number}") for number in range(legs)]
    stage = ["rails P N", *(f"leg X{number} {high} {low}" for number, (high, low) in enumerate(names))]
    return at_rest(stage, [name for pair in names for name in pair], word)


@pytest.mark.parametrize(("legs", "count", "short"), [(1, 4, 1), (2, 16, 7), (3, 64, 37)])
def test_words_of_bridges_that_short(legs: int, count: int, short: int) -> None:
    """1 of 4, 7 of 16, 37 of 64 [derived; the table of one bridge is common practice]."""
    found = [shorts(bridge_word(legs, word)) for word in words(2 * legs)]
    assert len(found) == count
    assert sum(map(bool, found)) == short
    assert short == 4**legs - 3**legs


@pytest.mark.parametrize("legs", [1, 2, 3])
def test_every_leg_of_a_bridge_shorts_on_its_own(legs: int) -> None:
    """Each leg with both switches on is a finding of its own [derived]: 4ⁿ⁻¹ words for each of n legs."""
    found = [shorts(bridge_word(legs, word)) for word in words(2 * legs)]
    by_leg = Counter(switches for one in found for switches in one)
    assert by_leg == {(f"H{number}", f"L{number}"): 4 ** (legs - 1) for number in range(legs)}


def test_every_finding_of_a_bridge_at_rest_is_without_end() -> None:
    """A row that is never left holds its short for ever [derived]."""
    for word in words(4):
        for verdict in unsafe(bridge_word(2, word)).values():
            assert verdict.check is Check.SHORT
            assert verdict.overlap is None
            assert verdict.trace.overlap_from == 0


H_BRIDGE = {
    "all off": {"0000"},
    "single": {"1000", "0100", "0010", "0001"},
    "drive": {"1001", "0110"},
    "brake": {"1010", "0101"},
    "short": {"1100", "1101", "1110", "1111", "0011", "0111", "1011"},
}
"""The table of one bridge, H L of one leg, then of the other; common practice."""


def test_the_table_of_an_h_bridge() -> None:
    assert {kind: len(of) for kind, of in H_BRIDGE.items()} == {
        "all off": 1,
        "single": 4,
        "drive": 2,
        "brake": 2,
        "short": 7,
    }
    assert {word for word in words(4) if shorts(bridge_word(2, word))} == H_BRIDGE["short"]


# Modulation of an H-bridge: which of its edges need a dead time


def modulated(cells: str, slow: str, dead: str) -> str:
    """An H-bridge in one modulated row; the switch `slow` turns off 500 ns later than any other turns on."""
    others = " ".join(name for name in ("UH", "UL", "VH", "VL") if name != slow)
    return f"""\
drive "modulated bridge"
writes together
stage
  rails P N
  leg U UH UL
  leg V VH VL
  winding U V
parts
  fast on 10 ns off 10 ns
  slow on 10 ns off 510 ns
paths
  {others} through fast
  {slow} through slow
carriers
  pwm 20 kHz duty 10 % to 90 % dead time {dead}
modes   UH   UL   VH   VL
  idle  off  off  off  off
  run   {cells}
moves
  start idle
  idle -> run when go
"""


ANTI_PHASE = "pwm ~pwm ~pwm pwm"
SIGN_MAGNITUDE = "pwm ~pwm off on"


def edges_that_need_dead_time(cells: str) -> set[tuple[str, str, str]]:
    """Every (switch off, switch on, edge of the carrier) that overlaps for 1 ps if the dead time is 1 ps short."""
    found = set()
    for slow in ("UH", "UL", "VH", "VL"):
        assert overlaps(modulated(cells, slow, "500 ns")) == {}
        for pair, verdict in unsafe(modulated(cells, slow, "499.999 ns")).items():
            assert verdict.overlap == 1
            (joining,) = set(pair) - {slow}
            edges = [event.act for event in verdict.trace.events if event.act in (Act.RISES, Act.FALLS)]
            found.add((slow, joining, edges[-1].value))
    return found


def test_locked_anti_phase_has_four_dead_times_a_period() -> None:
    """[derived]"""
    edges = edges_that_need_dead_time(ANTI_PHASE)
    assert edges == {
        ("UL", "UH", "rises"),
        ("UH", "UL", "falls"),
        ("VH", "VL", "rises"),
        ("VL", "VH", "falls"),
    }
    assert len(edges) == 4


def test_sign_magnitude_has_two_dead_times_a_period() -> None:
    """[derived]"""
    assert edges_that_need_dead_time(SIGN_MAGNITUDE) == {("UL", "UH", "rises"), ("UH", "UL", "falls")}


@pytest.mark.parametrize(("cells", "legs"), [(ANTI_PHASE, 2), (SIGN_MAGNITUDE, 1)])
def test_legs_that_a_modulation_without_dead_time_overlaps(cells: str, legs: int) -> None:
    """With all four slow every modulated leg overlaps for 500 ns [derived]."""
    text = modulated(cells, "UH", "0 ns").replace("fast on 10 ns off 10 ns", "fast on 10 ns off 510 ns")
    found = overlaps(text)
    assert len(found) == legs
    assert set(found.values()) == {500 * NS}


# Six-step commutation, two switches conducting; table seen in public course notes [seen], counts [derived]

SIX_STEP = {
    "101": ("A+", "B-"),
    "100": ("A+", "C-"),
    "110": ("B+", "C-"),
    "010": ("B+", "A-"),
    "011": ("C+", "A-"),
    "001": ("C+", "B-"),
}
CODES = list(SIX_STEP)
COLUMNS = ["A+", "A-", "B+", "B-", "C+", "C-"]
NAMED = {column: column.replace("+", "H").replace("-", "L") for column in COLUMNS}
OPPOSITE = {"+": "-", "-": "+"}


def reversed_row(on: tuple[str, ...]) -> tuple[str, ...]:
    """The row that drives the same two windings the other way round."""
    return tuple(name[0] + OPPOSITE[name[1]] for name in on)


def six_step(before: tuple[str, ...], after: tuple[str, ...]) -> str:
    """One change between two rows, in one instant; switches turn off 500 ns later than they turn on."""
    cells = [" ".join("on" if column in row else "off" for column in COLUMNS) for row in (before, after)]
    return f"""\
drive "six-step"
writes together
stage
  rails P N
  leg A AH AL
  leg B BH BL
  leg C CH CL
  winding A star
  winding B star
  winding C star
parts
  device on 100 ns to 200 ns off 300 ns to 600 ns
paths
  AH AL BH BL CH CL through device
modes {" ".join(NAMED[column] for column in COLUMNS)}
  old {cells[0]}
  new {cells[1]}
moves
  start old
  old -> new when sector
"""


def swaps(before: tuple[str, ...], after: tuple[str, ...]) -> int:
    """How many legs a change shorts for 500 ns where no dead time is left."""
    found = unsafe(six_step(before, after))
    assert all(verdict.check is Check.OVERLAP and verdict.overlap == 500 * NS for verdict in found.values())
    return len(found)


@pytest.mark.parametrize("step", [1, -1])
def test_each_step_turns_one_switch_off_and_one_on_never_in_one_leg(step: int) -> None:
    for number, code in enumerate(CODES):
        before, after = SIX_STEP[code], SIX_STEP[CODES[(number + step) % 6]]
        drive = drive_of(six_step(before, after))
        rows = [drive.modes[name].cells for name in ("old", "new")]
        changes = [(one, other) for one, other in zip(*rows, strict=True) if one != other]
        assert sorted(changes, key=str) == sorted([(Fixed.ON, Fixed.OFF), (Fixed.OFF, Fixed.ON)], key=str)
        assert swaps(before, after) == 0


@pytest.mark.parametrize(("step", "expected"), [(2, 1), (-2, 1), (3, 2)])
def test_skipped_steps_swap_within_legs(step: int, expected: int) -> None:
    """Skipping one step: one swap within a leg; skipping two: two."""
    found = [swaps(SIX_STEP[code], SIX_STEP[CODES[(number + step) % 6]]) for number, code in enumerate(CODES)]
    assert found == [expected] * 6


def test_reversing_on_the_spot_swaps_within_two_legs() -> None:
    found = [swaps(SIX_STEP[code], reversed_row(SIX_STEP[code])) for code in CODES]
    assert found == [2] * 6


def turning(loop: str) -> str:
    """A motor turned forwards and backwards by its sensor; every row lasts at least the polling loop."""
    rows = (" ".join("on" if column in on else "off" for column in COLUMNS) for on in SIX_STEP.values())
    steps = [(number, (number + step) % 6) for step in (1, -1) for number in range(6)]
    head = six_step(SIX_STEP["101"], SIX_STEP["100"]).split("modes")[0]
    return f"""\
{head}
loop at least {loop}
modes {" ".join(NAMED[column] for column in COLUMNS)}
{lines(f"s{code} {row}" for code, row in zip(CODES, rows, strict=True))}
moves
  start s101
{lines(f"s{CODES[one]} -> s{CODES[other]} when h{CODES[other]}" for one, other in steps)}
"""


def test_six_step_needs_its_dead_time_only_over_a_whole_row() -> None:
    """A leg rests for one row between its two switches, so a row must last 600 - 100 ns [derived]."""
    assert overlaps(turning("500 ns")) == {}
    assert overlaps(turning("499.999 ns")) == {("AH", "AL"): 1, ("BH", "BL"): 1, ("CH", "CL"): 1}


def test_rows_of_the_six_step_table_do_not_short() -> None:
    for on in SIX_STEP.values():
        word = "".join("1" if column in on else "0" for column in COLUMNS)
        assert shorts(bridge_word(3, word)) == set()


# Three-level diode-clamped leg (Nabae, Takahashi, Akagi, IEEE Trans. Ind. Appl. IA-17(5), 1981, 518-523 [memory];
# sets [derived])

CLAMPED = (
    "rails P O N",
    "switch S1 from P to a",
    "switch S2 from a to X",
    "switch S3 from X to b",
    "switch S4 from b to N",
    "diode from O to a",
    "diode from b to O",
    "winding X",
)
FOUR = ("S1", "S2", "S3", "S4")


def test_minimal_shorting_sets_of_a_clamped_leg() -> None:
    assert sets_of(at_rest(CLAMPED, FOUR, "0000")) == {("S1", "S2", "S3"), ("S2", "S3", "S4")}


def test_words_of_a_clamped_leg_that_short() -> None:
    found = {word: shorts(at_rest(CLAMPED, FOUR, word)) for word in words(4)}
    assert len(found) == 16
    assert {word for word, sets in found.items() if sets} == {"1110", "0111", "1111"}
    assert found["1110"] == {("S1", "S2", "S3")}
    assert found["0111"] == {("S2", "S3", "S4")}
    assert found["1111"] == {("S1", "S2", "S3"), ("S2", "S3", "S4")}


def clamped_change(before: str, after: str, steps: list[str], pause: str) -> str:
    """One change of a clamped leg, single steps with a pause between; off 600 ns at most, on 100 ns at least."""
    rows = [" ".join("on" if bit == "1" else "off" for bit in word) for word in (before, after)]
    between = "\n    wait pause\n".join(f"    set {step}" for step in steps)
    return f"""\
drive "three levels"
let pause = {pause}
writes together
stage
{lines(CLAMPED)}
parts
  device on 100 ns to 200 ns off 300 ns to 600 ns
paths
  S1 S2 S3 S4 through device
modes S1 S2 S3 S4
  old {rows[0]}
  new {rows[1]}
moves
  start old
  old -> new when change
{between}
"""


TO_NEIGHBOUR = [
    ("1100", "0110", "S1 off", "S3 on"),
    ("0110", "1100", "S3 off", "S1 on"),
    ("0110", "0011", "S2 off", "S4 on"),
    ("0011", "0110", "S4 off", "S2 on"),
]
"""Changes between the levels 1100, 0110, 0011."""


@pytest.mark.parametrize(("before", "after", "off", "on"), TO_NEIGHBOUR)
def test_change_of_level_with_the_turn_off_first(before: str, after: str, off: str, on: str) -> None:
    """Off, wait, on: the wait must be 600 − 100 ns, as in a leg of two."""
    enough, worse = around(lambda pause: clamped_change(before, after, [off, on], pause), "500 ns", 0)
    assert enough == {}
    third = {"1100": ("S1", "S2", "S3"), "0011": ("S2", "S3", "S4")}
    assert worse == {third[before if before in third else after]: 1}


@pytest.mark.parametrize(("before", "after", "off", "on"), TO_NEIGHBOUR)
def test_change_of_level_in_the_other_order_passes_a_short(before: str, after: str, off: str, on: str) -> None:
    """It rests in 1110 or 0111 for the pause: on 100 ns after the first write, off 600 ns after the second."""
    (overlap,) = overlaps(clamped_change(before, after, [on, off], "1 us")).values()
    assert overlap == 1500 * NS


@pytest.mark.parametrize(("before", "outer", "inner"), [("1100", "S1", "S2"), ("0011", "S4", "S3")])
def test_outer_switch_off_before_inner_on_shutdown(before: str, outer: str, inner: str) -> None:
    """[seen: Volke and Hornkamp, IGBT Modules]. Outer on with inner off is no short; so it is asked for by itself."""
    first = clamped_change(before, "0000", [f"{outer} off", f"{inner} off"], "300 ns")
    assert overlaps(first) == {}
    assert meet(first, outer, f"{inner} off") == 0
    hasty = clamped_change(before, "0000", [f"{outer} off", f"{inner} off"], "299.999 ns")
    assert meet(hasty, outer, f"{inner} off") == 1
    wrong = clamped_change(before, "0000", [f"{inner} off", f"{outer} off"], "300 ns")
    assert overlaps(wrong) == {}
    assert meet(wrong, outer, f"{inner} off") == 600 * NS


def test_every_direct_order_between_the_outer_levels() -> None:
    """1100 to 0011: an order is proven where no word on its way shorts, by the three words above [derived]."""
    for order in permutations(["S1 off", "S2 off", "S3 on", "S4 on"]):
        word, passed = "1100", []
        for step in order:
            place = FOUR.index(step.split()[0])
            word = word[:place] + ("1" if step.endswith("on") else "0") + word[place + 1 :]
            passed.append(word)
        clean = not {"1110", "0111", "1111"} & set(passed)
        assert (overlaps(clamped_change("1100", "0011", list(order), "1 us")) == {}) == clean, order
