"""The formatter: what it makes of a file, and its laws over samples, twins, examples and drawn drives.

Laws, for any file that can be read: tidy twice is tidy once; the drive is the same but for its places; every comment is
still there, in order; and how the words were spaced makes no difference.
"""

import re
from collections.abc import Callable
from pathlib import Path
from random import Random

import pytest
from judge.draws import draw, flowing
from reading import FILE, VENT, no_file
from test_reference import EXAMPLES, whole

from seqcheck.language import columns, decode, read_any, tidy
from seqcheck.messages import Problems

ROOT = Path(__file__).parents[1]
FILES = sorted([*(ROOT / "samples").rglob("*.dseq"), *(ROOT / "grammars").rglob("*.dseq")])
GOOD = [whole(one)[0] for one in EXAMPLES if "mistake" not in one.words]
COMMENTS = ("# plain", "#tight", '# "quoted', "# two # marks", "#", "# µs, 5 °C ß", "#\ttab", "#   kept   inside", "##")
PIECE = re.compile(r'"[^"]*"|#.*|[ \t]+|->|[,()=+*/~%]|[^ \t,()=+*/~%#"]+')
LOOSE = frozenset({",", "(", ")", "=", "+", "*", "/", "~", "%"})
"""What may stand with blanks around it or without."""


def near(path: str) -> str:
    """A fetch of the files that a sample uses."""
    return Path(path).read_text("utf-8")


def done(text: str, file: str = FILE) -> str:
    return tidy.tidy(text, file, near)


def meaning(text: str, file: str = FILE) -> str:
    """All that a text says but its places."""
    return re.sub(r"Place\([^)]*\)", "", repr(read_any(text, file, near)))


def remarks(text: str) -> list[str]:
    """The comments of a text, found letter by letter."""
    found = []
    for line in re.split(r"\r\n|\r|\n", text):
        inside = False
        for at, letter in enumerate(line):
            if letter == "#" and not inside:
                found.append(line[at:].rstrip(" \t"))
                break
            inside ^= letter == '"'
    return found


def blanks(rng: Random, least: int) -> str:
    return "".join(rng.choice(" \t  ") for _ in range(rng.choice((least, least, 1, 2, 5))))


def respaced(line: str, rng: Random) -> str:
    """A line whose words stand at other distances."""
    text = ""
    for piece in PIECE.findall(line):
        if not piece.strip(" \t"):
            text += blanks(rng, 1)
        elif piece in LOOSE or piece == "->":
            text = text.rstrip(" \t") if rng.random() < 0.5 and piece != "~" else text
            text += piece + blanks(rng, 0)
        else:
            text += piece
    return re.sub(r"(?<![\w.])([0-9.]+)[ \t]+(?=[a-zA-Z]+s\b)", lambda match: match[1] + blanks(rng, 0), text)


def strewn(text: str, rng: Random) -> str:
    """A text with other margins and distances, with blank lines and comments put in."""
    lines = []
    for line in text.splitlines():
        while rng.random() < 0.15:
            lines.append(blanks(rng, 0) + rng.choice(("", rng.choice(COMMENTS))))
        new = blanks(rng, 0) + respaced(line.strip(" "), rng)
        if "#" not in new and rng.random() < 0.15:
            new += blanks(rng, 1) + rng.choice(COMMENTS)
        lines.append(new + blanks(rng, 0))
    return rng.choice(("\n", "\r\n")).join(lines) + rng.choice(("", "\n", "\n\n \n"))


def hold_laws(text: str, file: str = FILE) -> None:
    once = done(text, file)
    assert done(once, file) == once
    assert meaning(once, file) == meaning(text, file)
    assert remarks(once) == remarks(text)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_sample_twin_and_first_file_is_tidy(path: Path) -> None:
    text = decode(path.read_bytes(), str(path))
    assert done(text, str(path)) == text


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_laws_over_files_in_disorder(path: Path) -> None:
    rng = Random(path.stem)
    hold_laws(strewn(path.read_text("utf-8"), rng), str(path))


@pytest.mark.parametrize("number", range(len(GOOD)))
def test_laws_over_the_examples_of_the_reference(number: int) -> None:
    rng = Random(number)
    hold_laws(GOOD[number])
    hold_laws(strewn(GOOD[number], rng))


@pytest.mark.parametrize("first", range(0, 120, 40))
@pytest.mark.parametrize("drawn", [draw, flowing])
def test_laws_over_drawn_drives_in_disorder(drawn: Callable[[int], str], first: int) -> None:
    for seed in range(first, first + 40):
        hold_laws(strewn(drawn(seed), Random(seed)))


def test_how_words_are_spaced_makes_no_difference() -> None:
    for text in [*GOOD, VENT, *map(draw, range(40))]:
        rng = Random(len(text))
        bare = "\n".join(line[: line.rindex("".join(remarks(line)))] for line in text.splitlines())
        other = "\n".join(blanks(rng, 0) + respaced(line.strip(" "), rng) for line in bare.splitlines())
        assert done(other) == done(bare)


def test_disorder_is_disorder() -> None:
    """The laws are tried on what they are about: most lines are other ones, with many more comments."""
    text = strewn(VENT, Random(1))
    assert len(remarks(text)) > 5
    kept = set(text.splitlines()) & set(VENT.splitlines()) - {""}
    assert len(kept) < len(VENT.splitlines()) / 3


# What comes out

RAGGED = """\

# What it is.
drive "all # tables"   # title


clock 64MHz within 1%,late by at most 2us
let dead=20 ticks# counted
# between
let longer =(dead+ -1ns)*2-1 us / (2)
writes one at a time , 30 ns to 1us apart,turn-offs first   # one store a pin
loop at least 20 us # main loop
stage

rails P O N
leg U UH UL between P and O # upper half
switch S1 from a to X,  b to Y two way
switch Slong from O to b
diode from O to U
winding U   N
sources a b
winding U must flow
parts
   driver on up to 1 ns off 60ns to 160 ns difference at most 20 ns
   f on 20 ns off 1 us
paths
 UH UL through driver,f
     # not the last
 S1 Slong through f
 interlock UH UL dead time 1 us to 2 us
pins
  UH PA8 active high rests unknown after up to 1 us
  UL PB13 active low rests high port B
  S1 P1 active high rests low
  Slong P2 active high rests low after 1 us port B
# about carriers
carriers
  p 20 kHz within 2 % duty 5 % to 95% dead time 1 us
  main 20 kHz duty 5% updates at rise
modes UH UL S1 Slong
 off_ off off keep off with current out of U and a above b means coast # nothing
 main p ~ p off off means coast
# at the end of moves there is nothing

moves
  start reset
  reset->off_ when boot earliest 1 ms # soon
  off_->main after at least 2 s unbroken
      set all off
      #wait 1 us
      wait dead # long enough
  main, off_ -> off_ when stop latest 3 s with current into U
  any but main -> main


trips
  overcurrent from any->off_ at once
  hot from main -> off_ within 1 ms with b above a
    set UH off,UL keep
rules
  waive idle-waiver for U because "x # y"   # why
  # last
"""
TIDY = """\
# What it is.
drive "all # tables"  # title

clock 64 MHz within 1 %, late by at most 2 us
let dead   = 20 ticks                                       # counted
# between
let longer = (dead + -1 ns) * 2 - 1 us / (2)
writes one at a time, 30 ns to 1 us apart, turn-offs first  # one store a pin
loop at least 20 us                                         # main loop

stage
  rails P O N
  leg U  UH UL  between P and O  # upper half
  switch S1     from a to X, b to Y  two way
  switch Slong  from O to b
  diode from O to U
  winding U N
  sources a b
  winding U  must flow

parts
  driver  on up to 1 ns  off 60 ns to 160 ns  difference at most 20 ns
  f       on 20 ns       off 1 us

paths
  UH UL     through driver, f
  # not the last
  S1 Slong  through f
  interlock UH UL  dead time 1 us to 2 us

pins
  UH     PA8   active high  rests unknown  after up to 1 us
  UL     PB13  active low   rests high                       port B
  S1     P1    active high  rests low
  Slong  P2    active high  rests low      after 1 us        port B

# about carriers
carriers
  p     20 kHz within 2 %  duty 5 % to 95 %  dead time 1 us
  main  20 kHz             duty 5 %                          updates at rise

modes     UH      UL      S1      Slong
  off_    off     off     keep    off     with current out of U and a above b  means coast  # nothing
  main    p       ~p      off     off     means coast
# at the end of moves there is nothing

moves
  start reset
  reset -> off_       when boot           earliest 1 ms  # soon
  off_  -> main       after at least 2 s  unbroken
    set all off
    #wait 1 us
    wait dead                                            # long enough
  main, off_ -> off_  when stop           latest 3 s  with current into U
  any but main -> main

trips
  overcurrent  from any -> off_   at once
  hot          from main -> off_  within 1 ms  with b above a
    set UH off, UL keep

rules
  waive idle-waiver for U because "x # y"  # why
  # last
"""


def test_a_file_in_disorder_becomes_this() -> None:
    assert done(RAGGED) == TIDY


def test_the_switching_table_is_evenly_spaced_while_there_is_room() -> None:
    long = "a_carrier_with_a_long_name"
    rows = [("modes", "A", "B", "C", "D"), ("up", "on", "off", f"~{long}", long)]
    assert columns.set_out("modes", rows[:1] * 2) == ["modes     A   B   C   D", "  modes   A   B   C   D"]
    assert columns.set_out("modes", rows)[1] == f"  up      on  off  ~{long}  {long}"


def test_one_long_line_does_not_push_the_others_aside() -> None:
    names = ", ".join(f"mode_{number}" for number in range(9))
    lines = columns.set_out("moves", [("a", "-> b", "when x"), ("b", "-> a", "when y"), (names, "-> b", "when z")])
    assert lines == ["a -> b  when x", "b -> a  when y", f"{names} -> b  when z"]


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_line_ends_stay(end: str) -> None:
    once = done(VENT.replace("\n", end))
    assert once == done(VENT).replace("\n", end)


def test_mixed_line_ends_become_those_of_most_lines() -> None:
    assert done(VENT.replace("\n", "\r\n").replace("\r\n", "\n", 3)).count("\n") == done(VENT).count("\n")
    assert "\n" not in done(VENT.replace("\n", "\r\n").replace("\r\n", "\n", 3)).replace("\r\n", "")


def test_comments_that_would_go_past_the_margin_stay_behind_their_lines() -> None:
    long, short = "x" * 80, "y" * 100
    waiver = 'waive overlap for U because "why it is so, in a few words"'
    text = f"{VENT}\n  {waiver}  # {long}\n  UH on at most 9 us  # {short}\n"
    assert f"\n  UH on at most 9 us  # {short}\n" in done(text)


# What it refuses


def test_a_file_with_mistakes_is_not_tidied() -> None:
    with pytest.raises(Problems, match="unknown-name"):
        tidy.tidy(VENT.replace("start reset", "start rest"), FILE, no_file)


def test_a_line_that_would_grow_too_long_is_a_mistake() -> None:
    """At 65536 characters a line is no longer read, so none may be made that long."""
    dense = "let x=" + "+".join(["1us"] * 13_000)
    text = VENT.replace("let settle", f"{dense}\nlet settle")
    assert read_any(text, FILE, no_file)
    with pytest.raises(Problems) as caught:
        tidy.tidy(text, FILE, no_file)
    assert [one.kind for one in caught.value.found] == ["line-too-long"]


@pytest.mark.parametrize("damage", [("main", "off"), ("PA8", "PA7"), ("20 ns", "21 ns"), ("# a", "# b")])
def test_what_says_something_else_is_not_let_out(damage: tuple[str, str], monkeypatch: pytest.MonkeyPatch) -> None:
    """The result is read again before it is given out, so that no fault of the formatter can reach a file."""
    text = VENT.replace("modes ", "# a\nmodes ")
    written = tidy._written
    monkeypatch.setattr(tidy, "_written", lambda lines: [one.replace(*damage) for one in written(lines)])
    with pytest.raises(tidy.Altered):
        tidy.tidy(text, FILE, no_file)
