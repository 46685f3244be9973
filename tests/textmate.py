"""A small reader of TextMate grammars for tests, of what ours uses: match, begin and end, captures, include."""

import re
from dataclasses import dataclass
from functools import cache
from typing import Any

Rule = dict[str, Any]
Token = tuple[str, tuple[str, ...]]
"""A piece of a line, and its scopes without that of the grammar."""


@cache
def compiled(pattern: str) -> re.Pattern[str]:
    return re.compile(pattern)


@dataclass(frozen=True)
class Level:
    """A rule that has begun, with the scopes inside it."""

    rule: Rule
    scopes: tuple[str, ...]


class Painter:
    """Takes the lines of one text, in order."""

    def __init__(self, grammar: Rule) -> None:
        self.grammar = grammar
        self.levels = [Level(grammar, ())]

    def line(self, text: str) -> list[Token]:
        """The pieces of a line; neighbours of equal scopes are one."""
        painted: list[tuple[str, ...]] = [()] * len(text)
        self._paint(text, painted, 0, len(text), self.levels)
        pieces: list[Token] = []
        for one, scopes in zip(text, painted, strict=True):
            if pieces and pieces[-1][1] == scopes:
                pieces[-1] = (pieces[-1][0] + one, scopes)
            else:
                pieces.append((one, scopes))
        return pieces

    def _paint(self, text: str, painted: list[tuple[str, ...]], at: int, stop: int, levels: list[Level]) -> None:
        while True:
            level = levels[-1]
            found = self._first(text, at, stop, level)
            end = found[0].start() if found else stop
            painted[at:end] = [level.scopes] * (end - at)
            if not found:
                return
            match, rule = found
            if rule is None:
                levels.pop()
                self._captures(text, painted, match, level.rule.get("endCaptures", {}), level.scopes)
            else:
                scopes = (*level.scopes, *([rule["name"]] if "name" in rule else []))
                key = "beginCaptures" if "begin" in rule else "captures"
                self._captures(text, painted, match, rule.get(key, {}), scopes)
                if "begin" in rule:
                    levels.append(Level(rule, scopes))
            assert match.end() > at or rule is None, "a rule that takes nothing"
            at = match.end()

    def _first(self, text: str, at: int, stop: int, level: Level) -> tuple[re.Match[str], Rule | None] | None:
        """The match that begins first, of the first rule among equals; the end of what has begun comes before all."""
        rules: list[tuple[str, Rule | None]] = [(level.rule["end"], None)] if "end" in level.rule else []
        rules += [(one.get("match") or one["begin"], one) for one in self._flat(level.rule["patterns"])]
        best: tuple[re.Match[str], Rule | None] | None = None
        for pattern, rule in rules:
            match = compiled(pattern).search(text, at, stop)
            if match and (best is None or match.start() < best[0].start()):
                best = match, rule
        return best

    def _flat(self, patterns: list[Rule]) -> list[Rule]:
        found = []
        for one in patterns:
            if "include" in one:
                found += self._flat([self.grammar["repository"][one["include"].removeprefix("#")]])
            elif "match" in one or "begin" in one:
                found.append(one)
            else:
                found += self._flat(one["patterns"])
        return found

    def _captures(
        self, text: str, painted: list[tuple[str, ...]], match: re.Match[str], captures: Rule, scopes: tuple[str, ...]
    ) -> None:
        painted[match.start() : match.end()] = [scopes] * (match.end() - match.start())
        for number, rule in captures.items():
            start, end = match.span(int(number))
            if start < 0:
                continue
            inner = (*scopes, *([rule["name"]] if "name" in rule else []))
            painted[start:end] = [inner] * (end - start)
            if "patterns" in rule:
                self._paint(text, painted, start, end, [Level({"patterns": rule["patterns"]}, inner)])
