"""Quantities: units, formulas of `let`, ticks, ranges, widening, and `use`."""

from collections.abc import Callable
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as some
from reading import drive_of, mistakes_of, row_drive

from seqcheck.drive import Drive, WaitStep
from seqcheck.language import read
from seqcheck.messages import Problems
from seqcheck.quantities import Interval


def wait_of(lets: str, wait: str) -> Interval:
    """The time of one wait."""
    step = drive_of(waiting(lets, wait)).moves[0].steps[0]
    assert isinstance(step, WaitStep)
    return step.time


def waiting(lets: str, wait: str) -> str:
    """A drive with some heads, and one wait in it."""
    return row_drive("A", "m off\nn on", f"start m\nm -> n when e\nwait {wait}", lets)


@pytest.mark.parametrize(
    ("written", "picoseconds"),
    [
        ("3 ps", 3),
        ("3ns", 3_000),
        ("0.25 us", 250_000),
        ("2 µs", 2_000_000),
        ("2 μs", 2_000_000),
        ("1.5ms", 1_500_000_000),
        ("2 s", 2 * 10**12),
        ("0 s", 0),
    ],
)
def test_every_unit_of_time(written: str, picoseconds: int) -> None:
    assert wait_of("", written) == Interval(picoseconds, picoseconds)


@pytest.mark.parametrize("unit", ["Hz", "kHz", "MHz", "GHz"])
def test_every_unit_of_frequency(unit: str) -> None:
    size = {"Hz": 10**12, "kHz": 10**9, "MHz": 10**6, "GHz": 10**3}[unit]
    assert wait_of(f"let t = 1 / (1 {unit})", "t") == Interval(size, size)


@pytest.mark.parametrize(
    ("formula", "picoseconds"),
    [
        ("3 us + 2 * 500 ns", 4_000_000),
        ("(3 us + 2 us) * 2", 10_000_000),
        ("10 us - 3 us - 2 us", 5_000_000),
        ("12 us / 2 / 3", 2_000_000),
        ("12 us * 25 %", 3_000_000),
        ("25 % * 12 us", 3_000_000),
        ("3 us / 50 %", 6_000_000),
        ("1 / 20 kHz", 50_000_000),
        ("50 % / 20 kHz", 25_000_000),
        ("20 kHz * 1 ms * 1 us", 20_000_000),
        ("1 ms * (20 us / 5 us)", 4_000_000_000),
        ("1 / (1 / 3 us)", 3_000_000),
        ("1 us * (40 kHz / 10 kHz)", 4_000_000),
        ("1 us * (10 % / 20 ppm)", 5_000_000_000),
        ("1 us * (50 % * 50 %)", 250_000),
        ("1 us * (2 / 50 %)", 4_000_000),
        ("5 us - -3 us", 8_000_000),
        ("-(2 us - 5 us)", 3_000_000),
        ("1 / (2 MHz * 50 %)", 1_000_000),
        ("1 / (10 % / 1 us)", 10_000_000),
    ],
)
def test_formulas(formula: str, picoseconds: int) -> None:
    assert wait_of(f"let t = {formula}", "t") == Interval(picoseconds, picoseconds)


@pytest.mark.parametrize(
    ("formula", "column", "text"),
    [
        ("1 us + 1", 14, "a plain number cannot be added to a duration; make both sides amounts of the same thing"),
        ("5 % - 1 Hz", 13, "a frequency cannot be subtracted from a ratio; make both sides amounts of the same thing"),
        ("1 us * 1 us", 14, "a duration cannot be multiplied by a duration; multiply by a ratio or a plain number"),
        ("1 Hz * 1 Hz", 14, "a frequency cannot be multiplied by a frequency; multiply by a ratio or a plain number"),
        ("1 us / 1 Hz", 14, "a duration cannot be divided by a frequency; divide by a ratio or a plain number"),
    ],
)
def test_units_that_do_not_fit(formula: str, column: int, text: str) -> None:
    assert mistakes_of(waiting(f"let t = {formula}", "t")) == [f"t.dseq:2:{column}: error: {text} [wrong-unit]"]


def test_a_division_by_zero() -> None:
    found = mistakes_of(waiting("let t = 1 us / (3 - 3)", "t"))
    assert found == ["t.dseq:2:14: error: a division by zero; divide by something else [division-by-zero]"]


def test_ticks_are_of_the_clock() -> None:
    assert wait_of("clock 144 MHz", "60 ticks") == Interval(416_666, 416_667)
    assert wait_of("clock 144 MHz", "288 ticks") == Interval(2_000_000, 2_000_000)


def test_ticks_may_come_before_the_clock_line() -> None:
    assert wait_of("let f = 1 MHz\nlet t = 5 ticks\nclock f", "t") == Interval(5_000_000, 5_000_000)


def test_ticks_without_a_clock() -> None:
    found = mistakes_of(waiting("", "5 ticks"))
    assert found == ["t.dseq:13:6: error: 'ticks' need a clock; add a line 'clock F' [missing-clock]"]


def test_a_mistaken_clock_is_the_only_mistake() -> None:
    found = mistakes_of(waiting("clock 5 us", "5 ticks"))
    text = "a frequency is needed here, but '5 us' is a duration; write it in Hz, kHz, MHz or GHz"
    assert found == [f"t.dseq:2:7: error: {text} [wrong-unit]"]


def test_a_clock_in_its_own_ticks_is_a_mistake_and_no_endless_loop() -> None:
    found = mistakes_of(waiting("let f = 1 / (1 ticks)\nclock f", "1 us"))
    text = "'f' is not known yet where the clock is first needed; put 'clock' and what it needs above the first use of"
    assert found == [f"t.dseq:3:7: error: {text} 'ticks' [defined-later]"]


def test_a_clock_whose_frequency_is_in_ticks() -> None:
    found = mistakes_of(waiting("clock 5 ticks", "1 us"))
    assert found == [
        "t.dseq:2:7: error: the clock cannot be given in its own ticks; write it in Hz, kHz, MHz or GHz [wrong-unit]"
    ]


@pytest.mark.parametrize(
    ("wait", "lo", "hi"),
    [
        ("10 us", 8_000_000, 13_333_334),
        ("10 us to 20 us", 8_000_000, 26_666_667),
        ("at least 10 us", 8_000_000, None),
        ("up to 10 us", 0, 13_333_334),
    ],
)
def test_firmware_durations_are_widened(wait: str, lo: int, hi: int | None) -> None:
    assert wait_of("clock 1 MHz within 25 %", wait) == Interval(lo, hi)


def test_sums_are_exact_until_they_are_rounded() -> None:
    lets = "let third = 1 ps / 3\nlet t = third + third + third"
    assert wait_of(lets, "t") == Interval(1, 1)
    assert wait_of(lets, "third") == Interval(0, 1)


DIGITS = some.decimals(min_value=0, max_value=10**6, places=4, allow_nan=False)


@given(lo=DIGITS, more=DIGITS, tolerance=some.integers(0, 99))
@settings(max_examples=60, deadline=None)
def test_law_whole_picoseconds_contain_the_exact_range(lo: object, more: object, tolerance: int) -> None:
    first, last = Fraction(str(lo)), Fraction(str(lo)) + Fraction(str(more))
    found = wait_of(f"clock 1 MHz within {tolerance} %", f"{_decimal(first)} us to {_decimal(last)} us")
    share = Fraction(tolerance, 100)
    exact_lo, exact_hi = first * 10**6 / (1 + share), last * 10**6 / (1 - share)
    assert found.hi is not None
    assert found.lo <= exact_lo < found.lo + 1
    assert found.hi - 1 < exact_hi <= found.hi


def _decimal(value: Fraction) -> str:
    """A fraction with at most four decimals, written out."""
    whole = value * 10**4
    assert whole.denominator == 1
    return f"{whole.numerator // 10**4}.{whole.numerator % 10**4:04}"


# `use`

PARTS = """drive "parts"
let settle = 5 us
parts
  fet on 1 ns to 2 ns off 3 ns to 4 ns
carriers
  pwm 10 kHz duty 50 %
"""


def files(**texts: str) -> Callable[[str], str]:
    """A fetch over some texts; `__` in a name stands for `/`, and the suffix is added."""
    known = {name.replace("__", "/") + ".dseq": text for name, text in texts.items()}

    def fetch(path: str) -> str:
        if path not in known:
            raise FileNotFoundError(2, "No such file or directory", path)
        return known[path]

    return fetch


def main(uses: str, more: str = "") -> str:
    """A drive that uses other files."""
    return row_drive(
        "A", "m off\nn pwm", "start m\nm -> n when e\nwait settle", uses, f"paths\n  A through fet\n{more}"
    )


def used(text: str, fetch: Callable[[str], str], file: str = "t.dseq") -> Drive:
    return read(text, file, fetch)


def mistakes(text: str, fetch: Callable[[str], str], file: str = "t.dseq") -> list[str]:
    with pytest.raises(Problems) as caught:
        read(text, file, fetch)
    return [one.line() for one in caught.value.found]


def test_use_brings_lets_parts_and_carriers() -> None:
    drive = used(main('use "parts.dseq"'), files(parts=PARTS))
    assert drive.moves[0].steps[0].time == Interval(5_000_000, 5_000_000)  # type: ignore[union-attr]
    assert drive.paths["A"] == (drive.parts["fet"],)
    assert drive.parts["fet"].place.file == "parts.dseq"
    assert list(drive.carriers) == ["pwm"]


def test_use_is_relative_to_the_file_that_says_it() -> None:
    fetch = files(boards__lib__inner=PARTS, boards__outer='drive "o"\nuse "lib/inner.dseq"\n')
    drive = used(main('use "../boards/outer.dseq"'), fetch, "drives/t.dseq")
    assert drive.parts["fet"].place.file == "boards/lib/inner.dseq"


def test_the_same_file_may_come_by_two_ways() -> None:
    fetch = files(base=PARTS, one='drive "1"\nuse "base.dseq"\n', two='drive "2"\nuse "./base.dseq"\n')
    assert list(used(main('use "one.dseq"\nuse "two.dseq"\nuse "base.dseq"'), fetch).parts) == ["fet"]


def test_a_used_file_takes_ticks_of_its_own_clock_or_of_the_drives() -> None:
    lib = PARTS.replace("5 us", "5 ticks")
    drive = used(main('clock 1 MHz\nuse "parts.dseq"'), files(parts=lib))
    assert drive.moves[0].steps[0].time == Interval(5_000_000, 5_000_000)  # type: ignore[union-attr]
    own = lib.replace("let", "clock 2 MHz\nlet")
    drive = used(main('clock 1 MHz\nuse "parts.dseq"'), files(parts=own))
    assert drive.moves[0].steps[0].time == Interval(2_500_000, 2_500_000)  # type: ignore[union-attr]


@pytest.mark.parametrize("uses", ['use "lib.dseq"\nuse "fast.dseq"', 'use "fast.dseq"\nuse "lib.dseq"'])
def test_ticks_that_come_by_files_of_two_clocks(uses: str) -> None:
    """The order of the lines must not choose between a pause of 2.5 us and one of 5 us."""
    fetch = files(lib=PARTS.replace("5 us", "5 ticks"), fast='drive "f"\nclock 2 MHz\nuse "lib.dseq"\n')
    said = "quantity 'settle' comes by two files whose clocks differ, and is given in ticks"
    way_out = "give the file that defines it a line 'clock' of its own"
    assert mistakes(main(f"clock 1 MHz\n{uses}"), fetch) == [f"t.dseq:4:5: error: {said}; {way_out} [two-clocks]"]


def test_ticks_that_come_by_files_of_one_rate() -> None:
    fetch = files(lib=PARTS.replace("5 us", "5 ticks"), same='drive "s"\nclock 1 MHz\nuse "lib.dseq"\n')
    drive = used(main('clock 1 MHz\nuse "lib.dseq"\nuse "same.dseq"'), fetch)
    assert drive.moves[0].steps[0].time == Interval(5_000_000, 5_000_000)  # type: ignore[union-attr]


def test_parts_in_ticks_that_come_by_files_of_two_clocks() -> None:
    fetch = files(lib=PARTS.replace("1 ns to 2 ns", "1 ticks"), fast='drive "f"\nclock 2 MHz\nuse "lib.dseq"\n')
    (found,) = mistakes(main('clock 1 MHz\nuse "lib.dseq"\nuse "fast.dseq"'), fetch)
    assert "part 'fet' comes by two files whose clocks differ" in found


def test_carriers_of_a_used_file_keep_to_the_drives_clock() -> None:
    drive = used(main('clock 1 MHz within 25 %\nuse "parts.dseq"'), files(parts=PARTS))
    assert drive.carriers["pwm"].period == Interval(80_000_000, 133_333_334)


def test_a_circle_of_use_is_shown() -> None:
    fetch = files(a='drive "a"\nuse "b.dseq"\n', b='drive "b"\n\nuse "a.dseq"\n')
    found = mistakes(main('use "a.dseq"'), fetch)
    text = "a circle of 'use': a.dseq -> b.dseq -> a.dseq; take one of them out"
    assert found == [f"b.dseq:3:5: error: {text} [circle-of-use]"]


def test_a_file_that_uses_itself() -> None:
    found = mistakes(main('use "./t.dseq"'), files())
    text = "a circle of 'use': t.dseq -> t.dseq; take one of them out"
    assert found == [f"t.dseq:2:5: error: {text} [circle-of-use]"]


def test_a_circle_by_changing_names_ends() -> None:
    def fetch(path: str) -> str:
        return f'drive "x"\nuse "d/{path.count("/")}.dseq"\n'

    found = mistakes(main('use "d/x.dseq"'), fetch)
    assert len(found) == 1
    assert "more than 50 files use each other in a row" in found[0]


def test_a_file_that_is_not_there_is_the_only_mistake() -> None:
    found = mistakes(main('use "gone.dseq"'), files())
    text = "cannot read 'gone.dseq': No such file or directory; correct the path"
    assert found == [f"t.dseq:2:5: error: {text} [unreadable-file]"]


def test_mistakes_of_a_used_file_are_reported_there() -> None:
    found = mistakes(main('use "parts.dseq"'), files(parts=PARTS.replace("1 ns to 2 ns", "2 ns to 1 ns")))
    text = "the range runs backwards, from 2 ns to 1 ns; put the smaller one first"
    assert found == [f"parts.dseq:4:10: error: {text} [backwards-range]"]


def test_a_used_file_begins_with_its_drive_line_too() -> None:
    found = mistakes(main('use "parts.dseq"'), files(parts=PARTS.split("\n", 1)[1]))
    text = "the line 'drive' is missing; begin the file with 'drive \"TITLE\"'"
    assert found == [f"parts.dseq:1:1: error: {text} [missing-section]"]


def test_a_name_of_a_used_file_taken_twice() -> None:
    found = mistakes(main('use "parts.dseq"\nlet settle = 3 us'), files(parts=PARTS))
    text = "quantity 'settle' is named twice, first in 'parts.dseq', line 2; leave out or rename one of them"
    assert found == [f"t.dseq:3:5: error: {text} [duplicate-name]"]


def test_two_used_files_with_the_same_part() -> None:
    found = mistakes(main('use "one.dseq"\nuse "two.dseq"'), files(one=PARTS, two=PARTS))
    tails = [
        "carrier 'pwm' is named twice, first in 'one.dseq', line 6",
        "part 'fet' is named twice, first in 'one.dseq', line 4",
    ]
    tails.append("quantity 'settle' is named twice, first in 'one.dseq', line 2")
    assert found == [f"t.dseq:3:5: error: {one}; leave out or rename one of them [duplicate-name]" for one in tails]


def test_a_used_let_is_known_only_below_its_use() -> None:
    found = mistakes(main('let x = settle\nuse "parts.dseq"'), files(parts=PARTS))
    assert found == ["t.dseq:2:9: error: unknown quantity 'settle'; define it with 'let' [unknown-name]"]
