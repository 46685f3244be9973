"""The reference holds: its examples are read, its mistakes have the messages that it shows, its lists are whole."""

import ast
import re
from pathlib import Path
from typing import NamedTuple

import pytest
from reading import FILE, drive_of, mistakes_of, no_file

from seqcheck.drive import Library
from seqcheck.language import grammar, making, read_any
from seqcheck.language.words import NO_QUANTITY, RESERVED

ROOT = Path(__file__).parents[1]
TEXT = (ROOT / "grammars" / "REFERENCE.md").read_text("utf-8")
FENCE = re.compile(r"^```(dseq[^\n]*|text)\n(.*?)^```$", re.MULTILINE | re.DOTALL)


class Example(NamedTuple):
    """A fenced block: the words after `dseq`, its text, and the messages that follow it."""

    line: int
    words: tuple[str, ...]
    text: str
    messages: list[str]


def examples() -> list[Example]:
    found: list[Example] = []
    for match in FENCE.finditer(TEXT):
        info, body = match.groups()
        if info == "text":
            found[-1].messages.extend(body.splitlines())
        else:
            line = TEXT.count("\n", 0, match.start()) + 1
            found.append(Example(line, tuple(info.split()[1:]), body, []))
    return found


EXAMPLES = examples()
FRAME = next(one.text for one in EXAMPLES if one.text.startswith('drive "frame"'))


def framed(section: str, fragment: str) -> tuple[str, int]:
    """A fragment after the lines of its section in the frame, and how many lines stand before it."""
    lines = FRAME.splitlines()
    if section == "heads":
        where = 1
    else:
        head = next(number for number, line in enumerate(lines) if line.split()[:1] == [section])
        where = next((number for number in range(head, len(lines)) if not lines[number].strip()), len(lines))
    return "\n".join([*lines[:where], fragment.rstrip("\n"), *lines[where:]]) + "\n", where


def whole(example: Example) -> tuple[str, int]:
    """An example as a whole file, and how many lines stand before it."""
    if example.words[:1] == ("fragment",):
        return framed(example.words[1], example.text)
    return example.text, 0


def named(example: Example) -> str:
    return f"line-{example.line}"


@pytest.mark.parametrize("example", [one for one in EXAMPLES if "mistake" not in one.words], ids=named)
def test_examples_are_read(example: Example) -> None:
    text, _ = whole(example)
    assert not example.messages
    if "library" in example.words:
        assert isinstance(read_any(text, FILE, no_file), Library)
    else:
        assert drive_of(text).title


@pytest.mark.parametrize("example", [one for one in EXAMPLES if "mistake" in one.words], ids=named)
def test_mistakes_have_the_messages_shown(example: Example) -> None:
    text, before = whole(example)
    found = mistakes_of(text)
    if before:
        found = [re.sub(r"^t\.dseq:(\d+)", lambda match: str(int(match[1]) - before), one) for one in found]
    assert found == example.messages


def test_there_are_examples_of_both_sorts() -> None:
    wrong = [one for one in EXAMPLES if "mistake" in one.words]
    assert len(wrong) > 10
    assert len(EXAMPLES) - len(wrong) > 15


def between(start: str) -> str:
    """The text between a marker and its end."""
    return TEXT.split(f"<!-- {start} -->")[1].split("<!-- end -->")[0]


def test_every_reserved_word_is_listed() -> None:
    assert re.findall(r"`(\w+)`", between("reserved words")) == sorted(RESERVED)
    assert frozenset({"up"}) == NO_QUANTITY


def test_every_word_of_the_language_is_in_a_good_example() -> None:
    parser = making.built(grammar.grammar_text(), grammar.STARTS)
    words = {one.pattern.value for one in parser.terminals if one.pattern.value.replace("-", "").isalpha()}
    used = {word for one in EXAMPLES if "mistake" not in one.words for word in re.findall(r"turn-\w+|\w+", one.text)}
    assert words - used == {"use"}  # its file would have to be there; see tests/test_language_values.py


def kinds_in_the_code() -> set[str]:
    """The second argument of every mistake that the language's code can make."""
    kinds: set[str] = set()
    for path in (ROOT / "seqcheck" / "language").glob("*.py"):
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.Call) and ast.unparse(node.func).endswith(("notes.add", "self.add", "Problem")):
                kinds |= {one.value for one in node.args[1:2] if isinstance(one, ast.Constant)}
    return kinds


def test_every_kind_of_mistake_is_listed() -> None:
    listed = re.findall(r"^\| `([a-z-]+)` \|", between("kinds"), re.MULTILINE)
    assert listed == sorted(kinds_in_the_code())


def test_every_kind_of_mistake_is_tested_by_its_message() -> None:
    tests = "".join(path.read_text("utf-8") for path in sorted((ROOT / "tests").glob("test_*.py"))) + TEXT
    untested = [kind for kind in kinds_in_the_code() if f"[{kind}]" not in tests]
    assert not untested
