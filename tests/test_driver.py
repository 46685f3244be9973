"""The driver against lark's own parser: the same trees, the same mistakes at the same places, the same ways on."""

import os
import random
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from lark import Lark, Token, Transformer, UnexpectedCharacters, UnexpectedInput, UnexpectedToken
from lark.visitors import v_args

from seqcheck.language import driver, grammar, making
from seqcheck.language.building import Builder
from seqcheck.language.driver import Driver, Misfit, Misread

HERE = Path(__file__).parent
TEXTS = [one.read_text("utf-8") for one in sorted((HERE.parent / "samples").rglob("*.dseq"))]
TEXTS += [(HERE.parent / "grammars" / "REFERENCE.md").read_text("utf-8")]
LINES = sorted({line for text in TEXTS for line in text.splitlines()})
LARK = making.built(grammar.grammar_text(), grammar.STARTS)
TABLES = making.tables(LARK)
WORDS = [*TABLES.terminals.values(), "x", "UH", "20", "us", "%", '"t"', '"', "#", "ä", "\t", " ", "-", ">", "3.5."]


class Bare:
    """Builds what any method is called with."""

    def __getattr__(self, name: str) -> Any:
        return lambda *children: (name, *children)


@v_args(inline=True)
class BareOfLark(Transformer[Token, Any]):
    """The same, called by lark."""


def _made(name: str) -> Any:
    return lambda self, *children: (name, *children)


for _rule in TABLES.rules:
    if _rule[2]:
        setattr(BareOfLark, _rule[2], v_args(inline=True)(_made(_rule[2])))


def plain(node: Any) -> Any:
    """A tree with tokens as text and columns, whichever parser it comes from."""
    if isinstance(node, Token):
        return str(node), node.column, node.end_column
    if isinstance(node, driver.Token):
        return tuple(node)
    return tuple(plain(one) for one in node) if isinstance(node, tuple | list) else node


def of_lark(text: str, start: str) -> Any:
    try:
        return plain(BareOfLark().transform(LARK.parse(text, start)))
    except UnexpectedToken as error:
        at_end = error.token.type == driver.END
        column = 0 if at_end else error.column
        return Misfit(column, at_end, False, frozenset(error.accepts or error.expected))
    except UnexpectedCharacters as error:
        return Misfit(error.column, False, True, frozenset(error.allowed or ()))
    except UnexpectedInput:
        pytest.fail("lark knows a mistake that the driver does not")


def of_driver(ours: Driver, text: str, start: str) -> Any:
    try:
        return plain(ours.parse(text, start))
    except Misread as why:
        return why.misfit._replace(column=0) if why.misfit.at_end else why.misfit


def broken(line: str, draw: random.Random) -> str:
    """A line with one or two pieces lost, doubled, exchanged or put in."""
    pieces = re.findall(r"\w+|\s+|.", line)
    for _ in range(draw.choice((1, 1, 2))):
        place = draw.randrange(len(pieces) + 1)
        what = draw.randrange(4)
        if what == 0:
            pieces[place : place + 1] = []
        elif what == 1:
            pieces[place:place] = [draw.choice(WORDS), *draw.choice(([], [" "]))]
        elif what == 2:
            pieces[place : place + 1] = [draw.choice(WORDS)]
        else:
            pieces[place:] = []
    return "".join(pieces)


def starts_of(line: str, draw: random.Random) -> Iterator[str]:
    first = line.split(maxsplit=1)[:1]
    yield "statement"
    yield from (start for start in grammar.STARTS if first == ["set"] or draw.random() < 0.4)


@pytest.fixture(scope="module")
def ours() -> Driver:
    return Driver(TABLES, Bare())


def test_lines_are_read_as_lark_reads_them(ours: Driver) -> None:
    read = 0
    for line in LINES:
        for start in grammar.STARTS:
            there = of_lark(line, start)
            assert of_driver(ours, line, start) == there, (line, start)
            read += not isinstance(there, Misfit)
    assert read > 300


def test_broken_lines_are_refused_as_lark_refuses_them(ours: Driver) -> None:
    first, last = map(int, os.environ.get("SEQCHECK_SEEDS", "0-1500").split("-"))
    kinds = set()
    for seed in range(first, last):
        draw = random.Random(seed)
        line = broken(draw.choice(LINES), draw)
        for start in starts_of(line, draw):
            there = of_lark(line, start)
            assert of_driver(ours, line, start) == there, (seed, line, start)
            kinds.add((there.at_end, there.stray) if isinstance(there, Misfit) else None)
    assert kinds == {None, (False, False), (True, False), (False, True)}


def test_every_rule_has_its_method() -> None:
    assert Driver(TABLES, Builder())
    with pytest.raises(AttributeError):
        Driver(TABLES, object())


def test_words_inside_patterns_are_told_apart() -> None:
    """The order in which a state tries its terminals is lark's own, so that no state can try a word too early."""
    parser: Lark = LARK
    lexers: Any = parser.parser.lexer.lexer.lexers  # type: ignore[attr-defined]
    for state, number in enumerate(TABLES.scanning):
        lexer = lexers[state]
        order = [one.name for one in lexer.scanner.terminals if one.name not in lexer.ignore_types]
        assert [name for name, _ in TABLES.scanners[number][0]] == order
