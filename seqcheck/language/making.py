"""The parser's tables, made from the grammar's text by lark. Needed only where the cache has none."""

import re
from collections.abc import Collection, Iterator, Mapping, Sequence
from typing import Any

from lark import Lark, Token
from lark.lark import PostLex
from lark.lexer import Pattern, PatternRE, PatternStr, TerminalDef
from lark.parsers.lalr_analysis import Shift

from seqcheck.language.driver import Rule, Tables

_ALWAYS = "NAME"


class _WholeWords(PostLex):
    """Lets the contextual lexer try NAME everywhere, or `legs` would be read as `leg` and `s`."""

    always_accept = (_ALWAYS,)

    def process(self, stream: Iterator[Token]) -> Iterator[Token]:
        """The tokens as they are."""
        return stream


def built(text: str, starts: Collection[str], strict: bool = False) -> Lark:
    """A parser from the grammar's text."""
    return Lark(text, parser="lalr", start=list(starts), strict=strict, postlex=_WholeWords())


def tables(parser: Lark) -> Tables:
    """What the driver needs of a parser, as plain data."""
    table: Any = parser.parser.parser._parse_table
    ignored = tuple(parser.ignore_tokens)
    terminals = {one.name: one for one in parser.terminals}
    rules: dict[Any, int] = {}
    actions: list[dict[str, int]] = []
    gotos: list[dict[str, int]] = []
    scanners: dict[tuple[Any, Any], int] = {}
    scanning: list[int] = []
    for state in range(len(table.states)):
        known: Mapping[str, tuple[Any, Any]] = table.states[state]
        actions.append({})
        gotos.append({})
        for symbol, (action, argument) in sorted(known.items(), key=lambda one: one[0]):  # lark's own order is no order
            if not symbol.isupper():
                gotos[-1][symbol] = argument
            elif action is Shift:
                actions[-1][symbol] = argument
            else:
                actions[-1][symbol] = ~rules.setdefault(argument, len(rules))
        scanned = {*known, _ALWAYS} & terminals.keys()
        scanner = _scanner([terminals[one] for one in scanned if one not in ignored])
        scanning.append(scanners.setdefault(scanner, len(scanners)))
    root = _scanner([one for one in parser.terminals if one.name not in ignored])
    return _plain(
        Tables(
            actions,
            gotos,
            dict(table.start_states),
            dict(table.end_states),
            [_rule(one) for one in rules],
            list(scanners),
            scanning,
            root,
            {one.name: one.pattern.to_regexp() for one in parser.terminals if isinstance(one.pattern, PatternRE)},
            {one.name: one.pattern.value for one in parser.terminals},
            "|".join(terminals[one].pattern.to_regexp() for one in ignored),
        )
    )


def _plain(made: Tables) -> Tables:
    """The same with texts that are nothing but texts: lark's own are tokens, which the cache cannot take."""

    def plain(one: Any) -> Any:
        if isinstance(one, str):
            return str(one)
        if isinstance(one, dict):
            return {plain(key): plain(value) for key, value in one.items()}
        return type(one)(map(plain, one)) if isinstance(one, list | tuple) else one

    return Tables(*map(plain, made))


def _rule(rule: Any) -> Rule:
    """How a rule's children are handed on; those of helper rules, whose names begin with `_`, are spliced in."""
    options = rule.options
    assert not (options and (options.keep_all_tokens or options.empty_indices)), "the grammar has no such rule"
    kept = [(place, not one.is_term and one.name.startswith("_")) for place, one in enumerate(rule.expansion)
            if not (one.is_term and one.filter_out)]  # fmt: skip
    plain = len(kept) == len(rule.expansion) and not any(spliced for _, spliced in kept)
    name = rule.origin.name
    method = rule.alias or ("" if name.startswith("_") else name)
    alone = bool(options and options.expand1 and not rule.alias)
    assert not alone or len(kept) == 1, "what stands for itself is one"
    return name, len(rule.expansion), method, None if plain else tuple(kept), alone


def _scanner(terminals: Sequence[TerminalDef]) -> tuple[Any, Any]:
    """What may come, in the order in which it is tried, and the words that a pattern's text may turn out to be."""
    order = sorted(
        terminals, key=lambda one: (-one.priority, -one.pattern.max_width, -len(one.pattern.value), one.name)
    )
    words: dict[str, dict[str, str]] = {}
    inside = set()
    for one in order:
        for word in order if isinstance(one.pattern, PatternRE) else ():
            if isinstance(word.pattern, PatternStr) and word.priority == one.priority and _covers(one.pattern, word):
                words.setdefault(one.name, {})[word.pattern.value] = word.name
                inside.add(word.name)
    tried = tuple((one.name, one.pattern.value if isinstance(one.pattern, PatternStr) else None)
                  for one in order if one.name not in inside)  # fmt: skip
    return tried, tuple((name, tuple(some.items())) for name, some in words.items())


def _covers(pattern: Pattern, word: TerminalDef) -> bool:
    return re.fullmatch(pattern.to_regexp(), word.pattern.value) is not None
