"""`seqcheck start`: each first file is proven without a word, tidy, complete, and proven for the reason it gives."""

import re
from itertools import pairwise
from pathlib import Path

import pytest

from seqcheck import cli
from seqcheck.commands.start import KINDS, first_file
from seqcheck.language import tidy

START = Path(__file__).parents[1] / "grammars" / "start"
ALWAYS = (
    r'^drive "', r"^clock .+ within .+, late by at most ", r"^let ", r"^writes ", r"^loop at least ", r"^stage$",
    r"^  winding ", r"^parts$", r"^paths$", r"^  .+  through ", r"^pins$", r"  active high  rests low", r"^modes  ",
    r"^moves$", r"^  start reset$", r"^  reset +-> \w+ +when boot +earliest ", r"^trips$",
    r"^  watchdog +from any -> reset$", r"^  \w+ +from .+ -> \w+ +within ", r"placeholder",
    r"margin at least \d+ (?:ns|ms)", r"data\W+sheets",
)  # fmt: skip
BRIDGE = (r"^  rails P N$", r"^  overcurrent +from any -> \w+ +at once$", r"^carriers$", r"duty \S+ % to \S+ %")
SECTORS = ("ab", "ac", "bc", "ba", "ca", "cb")
CHANGES = ("on_a  -> on_b", "on_b  -> on_a")
MUST = {
    "half-bridge": (*BRIDGE, r"^  leg X  XH XL$", r"~pwm", r"dead time dead", r"means drive X to N", r"means brake"),
    "h-bridge": (
        *BRIDGE, r"^  leg U  UH UL$", r"^  leg V  VH VL$", r"^  winding U V$", r"means coast", r"means drive U to V",
        r"means drive V to U", r"means brake", r"^  forward +-> backward ", r"^  backward +-> forward ", r"^    wait ",
    ),
    "three-phase": (
        *BRIDGE, *(rf"^  leg {leg}  {leg}H {leg}L$" for leg in "ABC"), *(rf"^  winding {leg} star$" for leg in "ABC"),
        *(rf"^  {one} +(?:pwm|off|on) " for one in SECTORS), *(rf"^  {one} +-> \w\w +when edge_" for one in SECTORS),
    ),
    "three-level": (
        r"^  rails P O N$", *(rf"^  switch S{one}  from " for one in "1234"), r"^  diode from O to a$", r"^    wait ",
        r"^  diode from b to O$", *(rf"means level {one}$" for one in "PON"), r" at once$", r"outer before inner",
    ),
    "star-delta": (
        r"^  sources L1 L2 L3$", *(rf"^  switch K{one}  .*  two way$" for one in "MYD"), r"^  star +-> delta +after ",
        r"interlock KY KD", r"bounce", r"^  overload ", r"^    wait ",
    ),
    "matrix": (
        r"^  sources a b$", *(rf"^  switch {one}  .* one way$" for one in ("Af", "Ar", "Bf", "Br")), r"^    wait ",
        *(rf"^  {one} +when choose_.  with current {way} X$" for one in CHANGES for way in ("out of", "into")),
    ),
}  # fmt: skip
"""Lines and words that whoever starts with a kind must find in its file."""

TOO_SHORT = {
    "half-bridge": ("let dead = 20 ticks", "let dead = 13 ticks"),
    "h-bridge": ("let pause = 4 us", "let pause = 1.5 us"),
    "three-phase": ("let shortest = 300 us", "let shortest = 10 us"),
    "three-level": ("let dead  = 84 ticks", "let dead  = 50 ticks"),
    "star-delta": ("let pause = 50 ms", "let pause = 16 ms"),
    "matrix": ("let gap = 2.5 us", "let gap = 1.5 us"),
}
"""The time that each file says is needed, and one that is less than that."""


def test_each_kind_has_its_file_and_nothing_else_is_there() -> None:
    assert {path.name for path in START.iterdir()} == {f"{kind}.dseq" for kind in KINDS}
    assert KINDS.keys() == MUST.keys() == TOO_SHORT.keys()


@pytest.fixture
def drive(tmp_path: Path) -> Path:
    return tmp_path / "x.dseq"


@pytest.mark.parametrize("kind", KINDS)
def test_what_is_printed_proves_as_it_stands(kind: str, drive: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["start", kind]) == 0
    printed = capsys.readouterr()
    assert printed == ((START / f"{kind}.dseq").read_text("utf-8"), "")
    drive.write_text(printed.out, "utf-8")
    assert cli.main(["lint", "--as", "lines", str(drive)]) == 0
    assert capsys.readouterr() == ("", ""), "neither a finding nor a warning"
    assert cli.main(["lint", str(drive)]) == 0
    assert re.search(r"^proven  [1-9]", capsys.readouterr().out, re.MULTILINE)
    assert cli.main(["rows", str(drive)]) == 0


@pytest.mark.parametrize("kind", KINDS)
def test_it_is_tidy_and_plain(kind: str) -> None:
    text = first_file(kind)
    assert tidy.tidy(text, kind, lambda _: "") == text
    assert text.isascii()
    assert max(map(len, text.splitlines())) <= 120


@pytest.mark.parametrize("kind", KINDS)
def test_it_has_all_that_its_kind_needs(kind: str) -> None:
    text = first_file(kind)
    missing = [one for one in (*ALWAYS, *MUST[kind]) if not re.search(one, text, re.MULTILINE)]
    assert missing == []


@pytest.mark.parametrize("kind", KINDS)
def test_every_section_and_line_outside_them_is_explained(kind: str) -> None:
    """Above each stands a comment, but for those that share one, or have it behind them."""
    lines = first_file(kind).splitlines()
    for above, line in pairwise(lines):
        if re.match(r"[a-z]", line) and not above.startswith("let"):
            assert above.startswith("#") or " # " in line, line


@pytest.mark.parametrize("kind", KINDS)
def test_the_time_that_it_says_is_needed_is_needed(
    kind: str, drive: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    text, (good, short) = first_file(kind), TOO_SHORT[kind]
    assert f"\n{good}\n" in text
    drive.write_text(text.replace(good, short), "utf-8")
    assert cli.main(["lint", "--as", "lines", str(drive)]) == 1
    assert "[overlap]" in capsys.readouterr().out


def test_without_a_kind_all_are_listed(capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["start"]) == 0
    out, err = capsys.readouterr()
    assert [line.split()[0] for line in out.splitlines()] == list(KINDS)
    assert max(map(len, out.splitlines())) < 100
    assert err == ""


NEAR = [("hbridge", "h-bridge"), ("H-Bridge", "h-bridge"), ("star_delta", "star-delta")]


@pytest.mark.parametrize(("kind", "near"), NEAR)
def test_a_misspelt_kind_gets_the_nearest(kind: str, near: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["start", kind]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert f"there is no kind '{kind}'; did you mean '{near}'?" in err
    assert all(one in err for one in KINDS)
    assert err.count("\n") == 1


@pytest.mark.parametrize("kind", ["zzz", "", "../drive", "a\nb"])
def test_an_unknown_kind_gets_the_list(kind: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert cli.main(["start", kind]) == 2
    err = capsys.readouterr().err
    assert "did you mean" not in err
    assert all(one in err for one in KINDS)
    assert err.count("\n") == 1
