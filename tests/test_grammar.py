"""The grammar: built without conflicts, and in agreement with the list of reserved words."""

import time

import pytest
from lark import GrammarError, Lark

from seqcheck.language import grammar, making
from seqcheck.language.words import NO_QUANTITY, RESERVED, SECTIONS, SINGLES


@pytest.fixture(scope="module")
def parser() -> Lark:
    return making.built(grammar.grammar_text(), grammar.STARTS)


def test_it_builds_without_any_conflict() -> None:
    assert making.built(grammar.grammar_text(), grammar.STARTS, strict=True)


def test_a_conflict_would_be_noticed() -> None:
    text = grammar.grammar_text().replace("names: NAME", "other: NAME\nnames: other\n    | NAME", 1)
    with pytest.raises(GrammarError, match="Reduce/Reduce collision"):
        making.built(text, grammar.STARTS, strict=True)


def words_of(parser: Lark) -> dict[str, str]:
    """The terminals that are words of the language."""
    return {one.name: one.pattern.value for one in parser.terminals if one.pattern.value.replace("-", "").isalpha()}


def test_every_reserved_word_is_a_word_of_the_language(parser: Lark) -> None:
    assert set(words_of(parser).values()) | {"reset"} >= RESERVED
    assert {*SECTIONS, *SINGLES} <= RESERVED


def test_words_that_are_not_reserved_never_compete_with_a_name(parser: Lark) -> None:
    words = words_of(parser)
    table = parser.parser.parser._parse_table  # type: ignore[attr-defined]
    competing = {
        words[one] for actions in table.states.values() if "NAME" in actions for one in actions if one in words
    }
    assert competing <= RESERVED | NO_QUANTITY


def test_every_section_has_its_start(parser: Lark) -> None:
    assert set(grammar.STARTS) == {"statement", *(f"{section}_line" for section in SECTIONS)}
    assert set(parser.options.start) == set(grammar.STARTS)


@pytest.mark.parametrize(
    "name", ["legs", "onward", "offset", "anything", "rest", "us", "ms", "high", "a", "b_1", "_x", "Ticks"]
)
def test_names_that_begin_like_words_are_names(parser: Lark, name: str) -> None:
    tree = parser.parse(f"{name} off", "modes_line")
    assert tree.children[0] == name


@pytest.mark.parametrize(
    ("line", "start"),
    [
        ("leg U UH UL", "stage_line"),
        ("legs U UH", "stage_line"),
        ("never A and B off", "rules_line"),
        ("wait 5 us", "moves_line"),
    ],
)
def test_words_are_read_whole(parser: Lark, line: str, start: str) -> None:
    if line.startswith("legs"):
        with pytest.raises(Exception, match="legs"):
            parser.parse(line, start)
    else:
        assert parser.parse(line, start)


def test_reading_is_quick_once_it_is_built() -> None:
    grammar.parsed("idle off", "modes_line", "t.dseq", 1)
    began = time.perf_counter()
    for number in range(200):
        grammar.parsed("  idle, open -> close   when stop  earliest 1 ms", "moves_line", "t.dseq", number)
    assert time.perf_counter() - began < 1.0  # some 0.03 s; the bound only catches a parser that is built again
