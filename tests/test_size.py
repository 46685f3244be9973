"""`seqcheck size`: the range of a quantity, against `lint` of the edited text, and what it says of odd quantities."""

import json
import re
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

import pytest
from proofs import at_most

from seqcheck.cli import main
from seqcheck.commands.ends import Steps
from seqcheck.commands.over import Over
from seqcheck.commands.size import Asked, WrongCall, exit_of, size
from seqcheck.language.varied import Varied
from seqcheck.messages import Problems
from seqcheck.ranges import Ends, Patch, Sized
from seqcheck.verdict import Check, Finding, Outcome, Unsafe

SAMPLES = Path(__file__).parent.parent / "samples"
NS, US, MS = 1_000, 1_000_000, 1_000_000_000
Say = pytest.CaptureFixture[str]


def sized(text: str, name: str = "pause", step: str | None = "1 ns", zones: int = 10**9, **used: str) -> Sized:
    """The range of a quantity of a text; `used` are the texts of other files, by their names without suffix."""
    call = Asked("t.dseq", name, step, "screen", False)
    return size(text, call, lambda file: used[file.removesuffix(".dseq")], at_most(zones))


def range_of(found: Sized) -> tuple[Fraction | None, Fraction | None]:
    assert found.low is not None
    assert found.high is not None
    return found.low.value, found.high.value


def checks_beyond(found: Sized, low: bool) -> set[str]:
    """The checks that fail one step out, or the kinds of the mistakes."""
    end = found.low if low else found.high
    assert end is not None
    assert end.how is Ends.FAILS
    assert end.beyond is not None
    if not isinstance(end.beyond.why, Outcome):
        return {one.kind for one in end.beyond.why}
    found_there: list[Unsafe | Finding] = [one for one in end.beyond.why.verdicts if isinstance(one, Unsafe)]
    return {one.check.value for one in (*found_there, *end.beyond.why.findings)} - {Check.PUNCTUAL.value}


def leg(
    let: str, *, wait: str = "pause", part: str = "on 2 us to 10 us off 5 us to 60 us", more: str = "", head: str = ""
) -> str:
    """One leg that changes from UH to UL and back, each time with a wait: 58 us must lie between."""
    return f"""\
drive "one leg"
{head}
{let}
writes together
stage
  rails P N
  leg U UH UL
parts
  part {part}
paths
  UH UL through part
modes  UH   UL
  up   on   off
  down off  on
moves
  start up
  up -> down when turn earliest 1 s
    set all off
    wait {wait}
  down -> up when turn earliest 1 s
    set all off
    wait {wait}
{more}"""


# Against lint of the edited text


def lint_code(text: str, tmp_path: Path) -> int:
    file = tmp_path / "edited.dseq"
    file.write_text(text, encoding="utf-8")
    return main(["lint", str(file)])


def with_value(text: str, name: str, said: str) -> str:
    edited, count = re.subn(rf"(?m)^let {name} *= [^#\n]*", f"let {name} = {said} ", text)
    assert count == 1
    return edited


@pytest.mark.parametrize(
    ("sample", "megahertz", "name", "low", "high"),
    [("vent", 48, "settle", 515, None), ("pump", 16, "arc", 0, 328_000), ("mist", 32, "pause", 23, None)],
)
def test_lint_agrees_one_step_inside_and_outside(
    sample: str, megahertz: int, name: str, low: int, high: int | None, tmp_path: Path, capsys: Say
) -> None:
    """The ends in ticks, and that both `lint` of the edited file and `size` tell the same."""
    text = (SAMPLES / f"{sample}.dseq").read_text(encoding="utf-8")
    assert main(["size", str(SAMPLES / f"{sample}.dseq"), name, "--as", "json"]) == 0
    said = json.loads(capsys.readouterr().out)
    tick = Fraction(US, megahertz)
    assert Fraction(said["low"]["value"]["exact"]) == low * tick
    assert lint_code(with_value(text, name, f"{low} ticks"), tmp_path) == 0
    assert lint_code(with_value(text, name, f"{low + 1} ticks"), tmp_path) == 0
    if low:
        assert lint_code(with_value(text, name, f"{low - 1} ticks"), tmp_path) == 1
    else:
        assert lint_code(with_value(text, name, "0 us - 1 ticks"), tmp_path) == 2
    if high is None:
        assert said["high"] == {"value": None, "ends": "open", "limit": None, "beyond": None}
        assert lint_code(with_value(text, name, f"{10**6 * (low + 1)} ticks"), tmp_path) == 0
    else:
        assert Fraction(said["high"]["value"]["exact"]) == high * tick
        assert lint_code(with_value(text, name, f"{high} ticks"), tmp_path) == 0
        assert lint_code(with_value(text, name, f"{high + 1} ticks"), tmp_path) == 1


# What a quantity may be


def test_a_wait_has_a_least_value_and_no_greatest() -> None:
    found = sized(leg("let pause = 60 us"))
    assert range_of(found) == (58 * US, None)
    assert found.holds
    assert checks_beyond(found, low=True) == {"overlap"}
    assert found.parts == (Patch(Fraction(58 * US), None, True),)
    assert exit_of(found) == 0


def test_a_rule_gives_the_other_end() -> None:
    text = leg("let longest = 1 s", wait="60 us", more="rules\n  UH on at most 2 s\n")
    text = text.replace("  up -> down when turn earliest 1 s", "  up -> down after 60 us to longest")
    found = sized(text, "longest", "1 us")
    assert range_of(found) == (60 * US, 2000 * MS)
    assert checks_beyond(found, low=True) == {"backwards-range"}
    assert checks_beyond(found, low=False) == {"long-on"}


def test_longer_is_not_always_safer() -> None:
    """A stay as long as 2 ms breaks a rule, a short wait the leg: both ends are decided."""
    text = leg("let pause = 60 us", more="rules\n  UL off at least 1 us\n  up and down at least 58 us apart\n")
    text = text.replace("rules\n", "trips\n  stop from up, down -> rest within 1 us\n    wait pause\nrules\n")
    text = text.replace("  down off  on\n", "  down off  on\n  rest off  off\n").replace(
        "moves\n", "moves\n  rest -> up when again earliest 1 s\n"
    )
    text += "  stop clears UH UL within 2 ms\n"
    found = sized(text, step="100 ns")
    assert range_of(found) == (58 * US, 1_939 * US)  # 2 ms less 1 us to be taken and 60 us of the part
    assert checks_beyond(found, low=False) == {"late-trip"}


def test_a_time_of_a_part_has_a_greatest_value() -> None:
    found = sized(leg("let slow = 60 us", wait="70 us", part="on 2 us to 10 us off 5 us to slow"), "slow")
    assert range_of(found) == (5 * US, 72 * US)
    assert checks_beyond(found, low=True) == {"backwards-range"}
    assert checks_beyond(found, low=False) == {"overlap"}


def test_a_frequency_of_the_clock() -> None:
    """The faster the clock, the shorter 5800 ticks are: 58 us up to 100 MHz."""
    found = sized(leg("", head="let rate = 80 MHz\nclock rate", wait="5800 ticks"), "rate", "1 kHz")
    assert range_of(found) == (1_000, 100 * 10**6)
    assert checks_beyond(found, low=True) == {"out-of-range"}
    assert found.measure.value == "Hz"


def test_a_tolerance() -> None:
    """60 us less what a clock that is fast by R takes off must stay 58 us: R is at most 60/58 - 1, 3.448 %."""
    found = sized(leg("", head="let spread = 1 %\nclock 1 MHz within spread", wait="60 us"), "spread", None)
    assert range_of(found) == (0, Fraction(34_482, 10**6))
    assert found.step == Fraction(1, 10**6)


def test_a_plain_number() -> None:
    found = sized(leg("let count = 6", head="let unit = 10 us").replace("wait pause", "wait time").replace(
        "let count = 6", "let count = 6\nlet time = count * unit"), "count", None)  # fmt: skip
    assert range_of(found) == (6, None)
    assert found.step == 1


def test_a_quantity_that_another_is_derived_from() -> None:
    found = sized(leg("let half = 30 us\nlet pause = 2 * half - 1 us"), "half", "100 ns")
    assert range_of(found) == (Fraction(59 * US, 2), None)
    assert found.lines == (4,)


def test_a_derived_quantity_takes_the_value_itself() -> None:
    assert range_of(sized(leg("let half = 30 us\nlet pause = 2 * half"))) == (58 * US, None)


def test_a_quantity_of_a_used_file() -> None:
    library = 'drive "times"\nlet pause = 60 us\n'
    found = sized(leg('use "times.dseq"'), times=library)
    assert range_of(found) == (58 * US, None)
    assert found.place.file == "times.dseq"


def test_a_quantity_that_falls_as_it_is_used() -> None:
    """The wait is 100 us less the quantity, so that this has a greatest value, and the wait must not be negative."""
    found = sized(leg("let early = 10 us\nlet pause = 100 us - early"), "early")
    assert range_of(found)[1] == 42 * US
    assert found.low is not None
    assert found.low.how is Ends.FAR  # a negative one only makes the wait longer
    assert exit_of(found) == 0


def test_a_quantity_that_nothing_depends_on() -> None:
    found = sized(leg("let pause = 60 us\nlet spare = 3 us"), "spare")
    assert found.idle
    assert (found.low, found.high) == (None, None)
    assert exit_of(found) == 0


def test_a_quantity_that_makes_no_difference_from_today_on_is_not_idle() -> None:
    """10 ps over a thousand or more is rounded alike; over one it is not."""
    text = leg("let share = 1000\nlet pause = 60 us + 10 ps / share")
    assert not sized(text, "share", None).idle


def test_a_quantity_that_only_a_lower_bound_depends_on_is_not_idle() -> None:
    text = leg("let rest = 1 s", wait="60 us").replace("earliest 1 s", "earliest rest")
    found = sized(text, "rest")
    assert not found.idle


# What the proof rests on


def test_a_quantity_on_both_sides_is_proven_value_by_value() -> None:
    """The part is as slow as the wait is long: with any one value that is safe, with two different ones it is not."""
    found = sized(leg("let pause = 5 us", part="on 0 us off pause", wait="pause"), step="1 us", zones=10**6)
    assert found.holds
    assert [part.whole for part in found.parts] == [False]
    assert found.parts[0].first == 0
    assert found.high is not None
    assert found.high.how is Ends.UNDECIDED
    assert "pieces" in found.high.limit
    assert exit_of(found) == 3


def test_a_difference_is_not_kept_from_another_value() -> None:
    """Off after `slow`, on at most 20 us sooner: the wide drive may not take the difference from the slowest."""
    part = "on 0 us to 60 us off 0 us to slow difference at most 20 us"
    text = leg("let slow = 60 us", part=part, wait="20 us")
    found = sized(text, "slow", "10 us")
    assert found.holds
    over = Over(Varied(text, "t.dseq", str), "slow", at_most(10**6))
    assert over.holds(Fraction(60 * US), Fraction(60 * US))
    assert not over.holds(Fraction(50 * US), Fraction(60 * US))


def test_the_wide_drive_has_no_less_than_the_mode_graph_of_each_value() -> None:
    """A move that some values keep from ever beginning makes a mode unreachable for them."""
    text = leg("let limit = 2 s").replace("wait pause", "wait 60 us")
    text = text.replace("start up\n", "start up\n  up -> rest after limit\n  rest -> up when again\n").replace(
        "  down off  on\n", "  down off  on\n  rest off  off\n"
    )
    found = sized(text, "limit", "1 ms")
    assert range_of(found) == (1000 * MS, None)
    assert checks_beyond(found, low=True) >= {"stalled", "unreachable"}


# Where today's value does not hold


def test_the_nearest_value_that_holds() -> None:
    found = sized(leg("let pause = 57 us"), step="100 ns")
    assert not found.holds
    assert range_of(found) == (58 * US, None)
    assert found.tried is not None
    assert found.tried.nearer == found.tried.tried > 0
    assert exit_of(found) == 1


def test_the_nearest_value_is_found_downwards_too() -> None:
    found = sized(leg("let slow = 90 us", wait="70 us", part="on 2 us to 10 us off 5 us to slow"), "slow", "1 us")
    assert not found.holds
    assert range_of(found) == (5 * US, 72 * US)


def test_no_value_holds_where_something_else_is_amiss() -> None:
    text = leg("let pause = 60 us").replace("  up   on   off", "  up   on   on")
    found = sized(text)
    assert (found.low, found.high) == (None, None)
    assert found.tried is not None
    assert exit_of(found) == 1


def test_a_value_between_two_steps_counts_as_it_is() -> None:
    found = sized(leg("let pause = 58.4 us"), step="1 us")
    assert range_of(found) == (58 * US, None)
    only = sized(leg("let slow = 72.4 us", wait="70.4 us", part="on 2 us to 10 us off 72.4 us to slow"), "slow", "1 us")
    assert range_of(only) == (72_400 * NS, 72_400 * NS)


# Limits


def test_an_undecided_value_is_never_in_the_range() -> None:
    text = (SAMPLES / "vent.dseq").read_text(encoding="utf-8")
    found = sized(text, "settle", None, zones=150)
    assert found.holds  # the screen settles today's value without zones
    assert found.low is not None
    assert found.low.value is not None
    assert found.low.how is Ends.UNDECIDED
    assert "150 zones" in found.low.limit
    assert exit_of(found) == 3


def test_a_value_of_today_that_is_undecided() -> None:
    text = (SAMPLES / "faulty" / "vent_short_pause.dseq").read_text(encoding="utf-8")
    found = sized(text, "settle", None, zones=3)
    assert not found.holds
    assert (found.low, found.tried) == (None, None)
    assert exit_of(found) == 3


# The steps


@pytest.mark.parametrize(
    ("start", "up", "values"),
    [(10, True, [10, 15, 20]), (10, False, [10, 5, 0]), (12, True, [12, 15, 20]), (12, False, [12, 10, 5])],
)
def test_steps_are_multiples_seen_from_a_value(start: int, up: bool, values: list[int]) -> None:
    steps = Steps(Fraction(start), Fraction(5), up)
    assert [steps(at) for at in range(3)] == values


@pytest.mark.parametrize("step", ["1", "1 kHz", "0 ns", "-1 ns", "fast", "1 ticks", "1 weeks", "", "1 ns 2"])
def test_a_step_that_means_nothing(step: str) -> None:
    with pytest.raises(WrongCall, match="--step"):
        sized(leg("let pause = 60 us"), step=step)


def test_a_step_in_ticks() -> None:
    found = sized(leg("let pause = 60 us", head="clock 1 MHz"), step="2 ticks")
    assert (found.step, range_of(found)[0]) == (2 * US, 58 * US)


# The command


@pytest.fixture
def file(tmp_path: Path) -> Callable[[str], str]:
    def written(text: str) -> str:
        path = tmp_path / "drive.dseq"
        path.write_text(text, encoding="utf-8")
        return str(path)

    return written


def test_the_first_three_lines_say_what_was_asked(file: Callable[[str], str], capsys: Say) -> None:
    assert main(["size", file(leg("let pause = 60 us")), "pause", "--step", "1 ns"]) == 0
    first, second, third, *rest = capsys.readouterr().out.splitlines()
    assert first.endswith("let pause = 60 us, line 3")
    assert second == "Proven with pause from 58 us on, without end."
    assert third == "Slack: 2 us below, without end above."
    assert "One step below, let pause = 57.999 us: 1 counterexample" in rest
    assert any(line.startswith("OVERLAP") for line in rest)


def test_a_range_is_rounded_inwards(file: Callable[[str], str], capsys: Say) -> None:
    """A third of a microsecond has no short decimal; what is said of it must hold."""
    text = leg("let pause = 60 us", head="clock 3 MHz", part="on 2 us to 10 us off 5 us to 60.2 us")
    assert main(["size", file(text), "pause"]) == 0
    out = capsys.readouterr().out
    assert "from 175 ticks (about 58.333334 us) on" in out


def test_no_value_is_promised_where_none_was_found(file: Callable[[str], str], capsys: Say) -> None:
    assert main(["size", file(leg("let pause = 60 us").replace("up   on   off", "up   on   on")), "pause"]) == 1
    first, second, third, *rest = capsys.readouterr().out.splitlines()
    assert first.endswith("let pause = 60 us, line 3")
    assert second == "Today's value does NOT hold, and no value that does was found."
    assert third.startswith("Values at distances that double were tried")
    assert any(line.startswith("SHORT") for line in rest)


def test_an_undecided_value_is_said_to_be_so(capsys: Say) -> None:
    path = str(SAMPLES / "faulty" / "vent_short_pause.dseq")
    assert main(["size", path, "settle", "--most-zones", "3"]) == 3
    second = capsys.readouterr().out.splitlines()[1]
    assert second.startswith("UNDECIDED, not proven: with today's value a limit was reached")


def test_lines(file: Callable[[str], str], capsys: Say) -> None:
    path = file(leg("let pause = 57 us"))
    assert main(["size", path, "pause", "--step", "1 us", "--as", "lines"]) == 1
    first, second = capsys.readouterr().out.splitlines()
    assert first.startswith(f"{path}:3:5: error: let pause = 57 us: Today's value does NOT hold; nearest ")
    assert "that does: 58 us" in first
    assert first.endswith("[size]")
    assert re.match(rf"{re.escape(path)}:\d+:\d+: note: with let pause = 57 us: P can be joined .* \[overlap\]", second)


def test_json_holds_what_lint_says_beyond(file: Callable[[str], str], capsys: Say) -> None:
    assert main(["size", file(leg("let pause = 60 us")), "pause", "--step", "1 ns", "--as", "json"]) == 0
    said = json.loads(capsys.readouterr().out)
    assert said["low"]["value"] == {"exact": "58000000", "text": "58 us"}
    assert said["low"]["beyond"]["value"]["exact"] == "57999000"
    assert said["low"]["beyond"]["lint"]["standing"] == "unsafe"
    assert said["parts"] == [{"first": "58000000", "last": None, "whole": True}]


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["paus"], "there is no quantity 'paus' in {}; did you mean 'pause'?"),
        (["pause", "--step", "3 Hz"], "--step must be a duration above 0, such as '100 ns' or '1 ticks', not '3 Hz'"),
        (["pause", "--as", "vcd"], "--as cannot be 'vcd'"),
        (["pause", "--most-zones", "0"], "--most-zones must be a whole number above 0"),
    ],
)
def test_wrong_calls(arguments: list[str], said: str, file: Callable[[str], str], capsys: Say) -> None:
    path = file(leg("let pause = 60 us"))
    assert main(["size", path, *arguments]) == 2
    captured = capsys.readouterr()
    assert said.format(path) in captured.err
    assert captured.out == ""


def test_a_file_without_any_quantity(file: Callable[[str], str], capsys: Say) -> None:
    assert main(["size", file(leg("", wait="60 us")), "pause"]) == 2
    assert "there is no quantity in" in capsys.readouterr().err


def test_a_broken_file_and_a_library(file: Callable[[str], str], capsys: Say) -> None:
    path = file(leg("let pause = 60 parsecs"))
    assert main(["size", path, "pause"]) == 2
    assert f"{path}:3:" in capsys.readouterr().err
    assert main(["size", file('drive "times"\nlet pause = 60 us\n'), "pause"]) == 2
    assert "only serves 'use'" in capsys.readouterr().err


def test_a_mistake_that_only_another_value_brings_is_no_mistake_of_the_file() -> None:
    with pytest.raises(Problems):
        Varied(leg("let pause = 60 us"), "t.dseq", str).with_values({"pause": Fraction(-1)})
    assert Varied(leg("let pause = 60 us"), "t.dseq", str).drive.title == "one leg"


def test_a_rule_about_single_faults_sets_an_end() -> None:
    """While UL is stuck on, UH must be through with its turn-off (60 us) when `rest` is entered."""
    text = """drive "one leg"
let pause = 100 us
writes together
stage
  rails P N
  leg U UH UL
parts
  part on 2 us to 10 us off 5 us to 60 us
paths
  UH UL through part
modes  UH   UL
  rest off  off
  up   on   off
moves
  start rest
  rest -> up when go
  up -> rest when stop
    set all off
    wait pause
rules
  tolerates single faults in rest
"""
    found = sized(text)
    assert range_of(found) == (60 * US, None)
    assert checks_beyond(found, low=True) == {"single-fault"}
    waived = sized(text + '  waive single-fault for rest because "a fuse in each leg"\n')
    assert range_of(waived) == (0, None)


def test_every_check_is_one_that_a_range_knows() -> None:
    """A new check needs a word on how it is shown for all values at once (`commands.over`), or why it does not count.

    The first are asked of runs, then come those of the mode graph and the rows, what does not count, and warnings.
    """
    runs = {"short", "overlap", "open-winding", "together", "thin-margin"}
    runs |= {"long-on", "short-pulse", "too-soon", "late-trip", "single-fault"}
    without = {"unreachable", "no-way-back", "ambiguous", "stalled", "row-meaning"}
    aside = {"idle-waiver", "no-path", "held-by-interlock", "punctual"}
    assert {check.value for check in Check} == runs | without | aside
