"""Building the grammar; parsing one line."""

from collections.abc import Iterator
from functools import lru_cache
from typing import Any

from lark import Lark, Token, UnexpectedInput
from lark import __version__ as lark_version
from lark.grammar import Rule
from lark.lark import _LOAD_ALLOWED_OPTIONS, PostLex
from lark.lexer import TerminalDef

from seqcheck.language import cache
from seqcheck.language.building import Builder
from seqcheck.language.mistakes import explained, reserved
from seqcheck.language.syntax import Node
from seqcheck.language.words import SECTIONS
from seqcheck.messages import Problem
from seqcheck.shipped import shipped

STATEMENT = "statement"
STARTS = (STATEMENT, *(f"{section}_line" for section in SECTIONS))


def grammar_text() -> str:
    """The grammar, as it is shipped."""
    return shipped("drive.lark")


class _WholeWords(PostLex):
    """Lets the contextual lexer try NAME everywhere, or `legs` would be read as `leg` and `s`."""

    always_accept = ("NAME",)

    def process(self, stream: Iterator[Token]) -> Iterator[Token]:
        """The tokens as they are."""
        return stream


def built(text: str, builder: Builder | None, strict: bool = False) -> Lark:
    """A parser from the grammar's text."""
    return Lark(text, parser="lalr", start=list(STARTS), transformer=builder, strict=strict, postlex=_WholeWords())


@lru_cache(maxsize=1)
def _ready() -> tuple[Lark, Builder]:
    builder = Builder()
    text = grammar_text()
    key = cache.key_of(text, lark_version)
    parser = _revived(cache.recalled(key), builder)
    if parser is None:
        parser = built(text, builder)
        cache.kept(key, _laid_down(parser))
    return parser, builder


def ready() -> Lark:
    """The parser of single lines, built once."""
    return _ready()[0]


def _laid_down(parser: Lark) -> tuple[Any, Any]:
    """A parser as data, without the options that are given anew; as Lark itself does for its own cache."""
    data, memo = parser.memo_serialize([TerminalDef, Rule])
    data["options"] = {name: one for name, one in data["options"].items() if name not in _LOAD_ALLOWED_OPTIONS}
    return data, memo


def _revived(laid_down: Any, builder: Builder) -> Lark | None:
    """The parser from its data; None if there is none or it does not fit."""
    try:
        data, memo = laid_down
        parser = Lark.__new__(Lark)
        return parser._load({"data": data, "memo": memo}, transformer=builder, postlex=_WholeWords())
    except Exception:
        return None


def parsed(text: str, start: str, file: str, line: int) -> Node | Problem:
    """What one line says, or the mistake at which it cannot be read on."""
    parser, builder = _ready()
    builder.file, builder.line = file, line
    builder.reserved.clear()
    try:
        node: Any = parser.parse(text, start)
    except UnexpectedInput as error:
        return explained(error, text, file, line, {one.name: one.pattern.value for one in parser.terminals})
    if builder.reserved:
        return reserved(*builder.reserved[0])
    return node  # type: ignore[no-any-return] # the builder made it
