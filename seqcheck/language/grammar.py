"""The grammar, its parser, and the parsing of one line."""

from functools import lru_cache
from importlib.util import find_spec
from typing import Any

from seqcheck.language import cache
from seqcheck.language.building import Builder
from seqcheck.language.driver import Driver, Misread, Tables
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


@lru_cache(maxsize=1)
def _ready() -> tuple[Driver, Builder]:
    builder = Builder()
    text = grammar_text()
    key = cache.key_of(text, _source_of("lark"), _source_of("seqcheck.language.making"))
    driver = _revived(cache.recalled(key), builder)
    if driver is None:
        from seqcheck.language import making

        tables = making.tables(making.built(text, STARTS))
        cache.kept(key, tuple(tables))
        driver = Driver(tables, builder)
    return driver, builder


def _source_of(module: str) -> str:
    """The text of a module, which tells its version, without loading it; empty where it cannot be read."""
    try:
        found = find_spec(module)
        assert found is not None
        assert found.origin is not None
        with open(found.origin, "rb") as stream:
            return stream.read().decode("latin-1")
    except (OSError, ImportError, AssertionError):
        return ""


def ready() -> Driver:
    """The parser of single lines, made once."""
    return _ready()[0]


def _revived(tables: Any, builder: Builder) -> Driver | None:
    """The parser from what the cache kept; None if there is nothing or it does not fit."""
    try:
        return Driver(Tables(*tables), builder)
    except Exception:
        return None


def parsed(text: str, start: str, file: str, line: int) -> Node | Problem:
    """What one line says, or the mistake at which it cannot be read on."""
    parser, builder = _ready()
    builder.file, builder.line = file, line
    builder.reserved.clear()
    try:
        node: Any = parser.parse(text, start)
    except Misread as why:
        return explained(why.misfit, text, file, line, parser.tables.terminals)
    if builder.reserved:
        return reserved(*builder.reserved[0])
    return node  # type: ignore[no-any-return] # the builder made it
