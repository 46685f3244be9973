"""Names as they stand in a file, and what may stand next: laws over all lines of the samples and the reference."""

import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from seqcheck.language.expecting import expected
from seqcheck.language.grammar import STATEMENT, parsed
from seqcheck.language.lines import book_of
from seqcheck.language.names import Kind, names_in, names_of
from seqcheck.language.notes import Notes
from seqcheck.language.syntax import DriveLine, Line, WaiveLine, Word
from seqcheck.language.words import SECTIONS, STARTS
from seqcheck.messages import Problem

ROOT = Path(__file__).parent.parent
SAMPLES = sorted(ROOT.glob("samples/*.dseq"))
RULES = """\
rules
  margin at least settle
  never UH and UL off
  fault clears UH UL within 60 us
  UH on at most 225 us
  UL off at least 500 ns
  up and down at least 10 us apart
  waive long-on for UH because "x"
"""
FRAGMENT = """\
let settle = 2 * (3 us + tick)
use "other.dseq"
writes by port, 2 us to settle apart, turn-ons first
stage
  capacitor C D
  switch T from a to X, b to Y one way
  diode from O to X
  winding X must flow
  leg U UH UL between P and N
paths
  interlock UH UL dead time 1 us to 2 us
pins
  UH PA8 active high rests low after up to settle port B
modes UH UL
  push on ~pwm with current out of U, a above b means drive U to V
trips
  fault from any but up, down -> idle within settle with current into U
"""


def lines_of(text: str) -> list[tuple[str, str]]:
    """The lines of a text that say something, without comments, each with its section."""
    found, section = [], ""
    for line in text.splitlines():
        said = re.sub(r'#(?=(?:[^"]*"[^"]*")*[^"]*$).*', "", line).rstrip()
        first = said.split(maxsplit=1)[:1]
        if first and first[0] in SECTIONS:
            section = first[0]
        if first:
            found.append((said, section))
    return found


ALL = sorted({one for path in SAMPLES for one in lines_of(path.read_text("utf-8"))} | {*lines_of(RULES + FRAGMENT)})


def lines_in(section: str) -> list[str]:
    found = [line for line, own in ALL if own == section]
    assert found
    return found


def start_of(line: str, section: str) -> str:
    return STATEMENT if line.split()[0] in STARTS else f"{section}_line"


def words_in(node: Any) -> Iterator[Word]:
    """All words of a line, whatever they stand for."""
    if isinstance(node, Word):
        yield node
    elif isinstance(node, tuple):
        for one in node:
            yield from words_in(one)


@pytest.mark.parametrize("section", ["", *SECTIONS])
def test_every_name_of_a_line_is_found_with_its_kind(section: str) -> None:
    for line in lines_in(section):
        node = parsed(line, start_of(line, section), "f", 1)
        assert not isinstance(node, Problem)
        texts = set()
        if isinstance(node, WaiveLine):
            texts = {node.check, node.reason}
        elif isinstance(node, DriveLine):
            texts = {node.title}
        names = [one.word for one in names_in(node)]
        assert sorted(names) == sorted(set(words_in(node)) - texts), line


@pytest.mark.parametrize("section", ["", *SECTIONS])
def test_what_a_line_says_is_what_was_expected(section: str) -> None:
    """At every word of a right line that word was among those offered, or a name of its kind, or the line names it."""
    for line in lines_in(section):
        node = parsed(line, start_of(line, section), "f", 1)
        assert not isinstance(node, Problem)
        names = {one.word.place.column: one for one in names_in(node)}
        for match in re.finditer(r'"[^"]*"|(?<![\w.])[A-Za-z_][\w-]*', line):
            before, word = line[: match.start()], match.group()
            wanted = expected(before, section)
            named = names.get(match.start() + 1)
            if named is None:
                assert word.startswith('"') or word in wanted.words, (before, word)
            elif not named.defines and named.kind is not Kind.FILE:
                assert named.kind in wanted.kinds, (before, word)


@pytest.mark.parametrize(
    ("before", "section"),
    [("  a # ", "moves"), ('use "', ""), ('  waive short for UH because "', "rules"), ("  a b", ""), ("let let ", "")],
)
def test_nothing_is_expected_in_texts_comments_and_after_mistakes(before: str, section: str) -> None:
    assert expected(before, section) == ((), frozenset())


def test_the_beginning_of_a_rule_may_be_any_of_three_kinds() -> None:
    assert expected("  ", "rules").kinds == {Kind.SWITCH, Kind.TRIP, Kind.MODE}


def test_words_that_name_nothing_else_are_not_offered_as_names() -> None:
    """A line that names something new asks for no name that is known."""
    for before, section in (("let ", ""), ("  ", "parts"), ("  ", "carriers"), ("  leg ", "stage"), ("  ", "modes")):
        assert expected(before, section).kinds == frozenset()


def test_names_come_in_the_order_of_the_file() -> None:
    book = book_of(SAMPLES[0].read_text("utf-8"), "f", Notes())
    places = [one.word.place for one in names_of(book)]
    assert places == sorted(places)
    assert isinstance(book.heads["drive"], Line)
