"""What a drive says, in the words of its file: as it was written, whatever the clock made of it."""

from fractions import Fraction

import pytest
from reading import VENT, drive_of, vent

from seqcheck.changes import How, differences
from seqcheck.contents import contents

TOLERANCES = ("", " within 1 %", " within 2.5 %", " within 300 ppm", " within 0.01 %")


def said(text: str, kind: str, name: str = "") -> dict[str, str]:
    """What a file says of one thing."""
    return next(one.fields for one in contents(drive_of(text)) if (one.kind, one.name) == (kind, name))


@pytest.mark.parametrize("within", TOLERANCES)
@pytest.mark.parametrize("time", ["1 ps", "7 ps", "999 ps", "16 us", "1.25 ms", "2.000001 s", "333.333333 us"])
def test_a_time_that_a_clock_widened_is_told_as_it_was_written(time: str, within: str) -> None:
    text = vent((" within 1 %", within), ("let settle = 16 us", f"let settle = {time}"), ("after 2 s", f"after {time}"))
    moves = {one.name: one for one in contents(drive_of(text)) if one.kind == "move"}
    assert moves["open -> close when reverse_cmd"].steps[1] == f"wait {time}"
    assert moves["hold -> idle after a time"].fields["after"] == time


@pytest.mark.parametrize("within", TOLERANCES)
def test_a_range_of_times_is_told_as_it_was_written(within: str) -> None:
    text = vent((" within 1 %", within), ("0.4 us to 1.5 us", "400 ps to 1.5 us"))
    assert said(text, "writes")["apart"] == "400 ps to 1.5 us"


def test_two_times_are_never_told_alike() -> None:
    """Under every tolerance times that follow each other picosecond by picosecond have texts of their own."""
    for within in TOLERANCES:
        times = range(99_998, 100_003)
        texts = [vent((" within 1 %", within), ("settle = 16 us", f"settle = {time} ps")) for time in times]
        steps = [next(one.steps for one in contents(drive_of(text)) if one.steps) for text in texts]
        assert len(set(steps)) == len(steps)


def test_what_the_settings_and_signals_say() -> None:
    text = vent(
        ("20 kHz  duty 5 % to 95 %", "20 kHz within 2 %  duty 5 % to 95 %  dead time 500 ns  updates at rise"),
        ("parts\n", "parts\n  driver  on up to 1 us  off 1 us to 2 us  difference at most 700 ns\n"),
        ("through coupler, fet", "through coupler, fet\n  interlock UL UH  dead time 100 ns to 300 ns"),
    )
    assert said(text, "clock") == {"frequency": "48 MHz", "within": "1 %", "late by at most": "2 us"}
    assert said(text, "carrier", "main") == {
        "frequency": "20 kHz",
        "within": "2 %",
        "duty": "5 % to 95 %",
        "dead time": "500 ns",
        "updates": "at rise",
    }
    assert said(text, "part", "driver") == {"on": "up to 1 us", "off": "1 us to 2 us", "difference at most": "700 ns"}
    assert said(text, "interlock", "UH UL") == {"dead time": "100 ns to 300 ns"}
    assert said(text, "pin", "VH") == {"pin": "PA9", "active": "high", "rests": "low", "after": "5 us to 40 us"}
    assert said(VENT, "carrier", "main")["updates"] == "at once"
    assert "within" not in said(VENT, "carrier", "main")


def test_every_name_of_a_kind_is_its_own() -> None:
    """Two moves on one event between the same modes are told apart, in their order."""
    text = vent(("  idle  -> close", "  idle  -> open        when open_cmd  earliest 1 s\n  idle  -> close"))
    names = [one.name for one in contents(drive_of(text)) if one.kind == "move"]
    assert names.count("idle -> open when open_cmd") == 1
    assert names.count("idle -> open when open_cmd (2)") == 1


CHANGES = [
    ("48 MHz within 1 %", "48 MHz within 2 %", "clock", "", "within", "1 %", "2 %"),
    ("late by at most 2 us", "late by at most 3 us", "clock", "", "late by at most", "2 us", "3 us"),
    ("turn-offs first", "in any order", "writes", "", "order", "turn-offs first", "in any order"),
    ("loop at least 50 us", "loop at least 60 us", "loop", "", "at least", "50 us", "60 us"),
    ("on 1.5 us to 4 us", "on 1.6 us to 4 us", "part", "coupler", "on", "1.5 us to 4 us", "1.6 us to 4 us"),
    ("PA8   active high  rests low", "PA8 active low rests low", "pin", "UH", "active", "high", "low"),
    ("20 kHz", "25 kHz", "carrier", "main", "frequency", "20 kHz", "25 kHz"),
    ("duty 5 %", "duty 10 %", "carrier", "main", "duty", "5 % to 95 %", "10 % to 95 %"),
    ("off    on     off    on", "off on off off", "row", "hold", "VL", "on", "off"),
    ("earliest 2 ms", "earliest 3 ms", "move", "idle -> hold when windy", "earliest", "2 ms", "3 ms"),
    ("after 2 s", "after 2 s unbroken", "move", "hold -> idle after a time", "unbroken", None, "yes"),
    ("within 30 us", "within 40 us", "trip", "overheat", "within", "30 us", "40 us"),
    ("= 16 us", "= 20 us", "move", "open -> close when reverse_cmd", "step 2", "wait 16 us", "wait 20 us"),
    ("at least 200 ns", "at least 100 ns", "rule", "margin", "at least", "200 ns", "100 ns"),
]


@pytest.mark.parametrize(("old", "new", "kind", "name", "field", "was", "now"), CHANGES)
def test_one_change_is_told_as_one(
    old: str, new: str, kind: str, name: str, field: str, was: str | None, now: str
) -> None:
    found = differences(drive_of(VENT), drive_of(vent((old, new))))
    assert [(one.kind, one.name, one.how) for one in found] == [(kind, name, How.CHANGED)]
    assert [(one.name, one.old, one.new) for one in found[0].fields] == [(field, was, now)]


def test_lines_that_only_move_change_nothing() -> None:
    assert differences(drive_of(VENT), drive_of(VENT.replace("\n\n", "\n# a word\n"))) == ()


def test_what_is_added_and_removed() -> None:
    """A renamed mode is one that goes and one that comes, with its moves."""
    found = differences(drive_of(VENT), drive_of(VENT.replace("hold", "stay")))
    rows = [(one.name, one.how) for one in found if one.kind == "row"]
    assert rows == [("stay", How.ADDED), ("hold", How.REMOVED)]
    moves = {(one.name, one.how) for one in found if one.kind == "move"}
    assert ("idle -> stay when windy", How.ADDED) in moves
    assert ("hold -> idle after a time", How.REMOVED) in moves
    removed = next(one for one in found if one.how is How.REMOVED and one.kind == "row")
    assert removed.place.line == 34


def test_more_steps_are_told_whole() -> None:
    found = differences(drive_of(VENT), drive_of(vent(("    wait settle", "    wait settle\n    wait 1 us"))))
    assert [(one.name, one.old, one.new) for one in found[0].fields] == [
        ("steps", "set all off, then wait 16 us", "set all off, then wait 16 us, then wait 1 us")
    ]


def test_a_duty_without_end_is_a_fraction() -> None:
    """A third is told as one."""
    drive = drive_of(vent(("let settle", "let third = 100 % / 3\nlet settle"), ("duty 5 %", "duty third")))
    assert drive.carriers["main"].duty[0] == Fraction(1, 3)
    text = next(one.fields["duty"] for one in contents(drive) if one.kind == "carrier")
    assert text == "100/3 % to 95 %"
