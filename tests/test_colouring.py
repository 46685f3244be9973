"""The TextMate grammar: every word and name of the language has its scope, by our small reader and by editors' own."""

import json
import re
import shutil
import subprocess
from pathlib import Path
from typing import Any

import pytest
from textmate import Painter, Token, compiled

from seqcheck.language.mistakes import UNITS
from seqcheck.language.words import RESERVED, SECTIONS
from seqcheck.shipped import shipped

ROOT = Path(__file__).parent.parent
GRAMMAR: dict[str, Any] = json.loads(shipped("dseq.tmLanguage.json"))
LIBRARIES = ("vscode-textmate@9.3.2", "vscode-oniguruma@2.0.1")
TEXTS = [path.read_text("utf-8") for path in sorted(ROOT.glob("samples/**/*.dseq"))]
TEXTS += re.findall(r"^```dseq[^\n]*\n(.*?)^```", (ROOT / "grammars" / "REFERENCE.md").read_text("utf-8"), re.M | re.S)
ROOTS = ("comment.", "string.", "constant.", "keyword.", "storage.", "entity.name.", "variable.", "meta.section.")
"""What scopes of themes begin with, by the naming conventions of TextMate's manual (section 12.4), and our sections."""


def painted(text: str) -> list[list[Token]]:
    painter = Painter(GRAMMAR)
    return [painter.line(line) for line in text.split("\n")]


def scope(text: str, piece: str, line: int = -1) -> str:
    """The innermost scope of a piece of one line."""
    pieces = [one for one in painted(text)[line] if one[0].strip() == piece]
    assert len(pieces) == 1, painted(text)[line]
    return pieces[0][1][-1] if pieces[0][1] else ""


def rules(node: Any) -> list[dict[str, Any]]:
    """All rules of the grammar."""
    if isinstance(node, list):
        return [one for each in node for one in rules(each)]
    if not isinstance(node, dict):
        return []
    return [node, *(one for each in node.values() for one in rules(each))]


def test_every_expression_compiles_and_takes_something() -> None:
    keys = ("match", "begin", "end")
    patterns = [one[key] for one in rules(GRAMMAR) for key in keys if isinstance(one.get(key), str)]
    assert len(patterns) > 30
    for pattern in patterns:
        compiled(pattern)
        assert not re.search(r"\\[hHGAzZK]|\(\?[<>]?[a-z]+\)|\(\?>|[*+?}]\+", pattern), "engines differ in this"
    taking = [one.get("match") or one.get("begin") for one in rules(GRAMMAR)]
    assert not any(isinstance(one, str) and compiled(one).match("") for one in taking)


def test_scopes_are_those_that_themes_know() -> None:
    names = {one["name"] for one in rules(GRAMMAR) if isinstance(one.get("name"), str)} - {GRAMMAR["name"]}
    assert all(name.startswith(ROOTS) and name.endswith(".dseq") for name in names)


def test_every_include_is_there_and_all_is_included() -> None:
    asked = {one["include"].removeprefix("#") for one in rules(GRAMMAR) if "include" in one}
    assert asked == set(GRAMMAR["repository"])


def test_every_reserved_word_of_the_language_and_no_other() -> None:
    patterns = GRAMMAR["repository"]["reserved"]["patterns"]
    words = [word for one in patterns for word in re.findall(r"\(\?:([a-z|]+)\)", one["match"])[0].split("|")]
    assert sorted(words) == sorted(RESERVED)


@pytest.mark.parametrize("word", sorted(RESERVED))
def test_a_reserved_word_is_no_name_wherever_it_stands(word: str) -> None:
    for section in SECTIONS:
        found = scope(f"{section}\n  ( {word} )", word)
        assert found.startswith(("keyword.", "constant.language.")), section
        longer = painted(f"{section}\n  ( {word}s_ {word}-x x{word} )")[-1]
        assert {one[1][-1] for one in longer} <= {f"meta.section.{section}.dseq", "keyword.operator.dseq"}


@pytest.mark.parametrize("unit", UNITS)
def test_numbers_with_units(unit: str) -> None:
    for gap in ("", " "):
        text = f"moves\n  wait 12.5{gap}{unit} to"
        assert scope(text, "12.5") == "constant.numeric.dseq"
        assert scope(text, unit) == "keyword.other.unit.dseq"
    assert "unit" not in scope("moves\n  wait 5 sx", "5")


WHERE = [
    ("modes UH UL\n  open pwm off", "open", "entity.name.function.mode.dseq"),
    ("modes UH UL\n  open pwm off", "off", "constant.language.dseq"),
    ("moves\n  idle, shut -> open when go", "idle", "entity.name.function.mode.dseq"),
    ("moves\n  idle, shut -> open when go", "shut", "entity.name.function.mode.dseq"),
    ("moves\n  idle, shut -> open when go", "open", "entity.name.function.mode.dseq"),
    ("moves\n  idle, shut -> open when go", "->", "keyword.operator.dseq"),
    ("moves\n  any but shut -> reset", "any", "keyword.other.dseq"),
    ("moves\n  any but shut -> reset", "reset", "constant.language.dseq"),
    ("moves\n  start shut", "shut", "entity.name.function.mode.dseq"),
    ("trips\n  fault from any but up -> down at once", "fault", "entity.name.type.trip.dseq"),
    ("trips\n  fault from any but up -> down at once", "up", "entity.name.function.mode.dseq"),
    ("trips\n  fault from any but up -> down at once", "down", "entity.name.function.mode.dseq"),
    ("trips\n  fault from any but up -> down at once", "once", "keyword.other.dseq"),
    ("let late = 5 us", "late", "variable.other.constant.dseq"),
    ("stage\n  leg U UH UL", "leg", "storage.type.dseq"),
    ("stage\n  leg U UH UL", "U", "entity.name.type.dseq"),
    ("parts\n  wire on 1 ns off 1 ns", "wire", "entity.name.type.part.dseq"),
    ('drive "a # b" # c', '"a # b"', "string.quoted.double.dseq"),
    ('drive "a # b" # c', "# c", "comment.line.number-sign.dseq"),
    ('  pins  # "x', '# "x', "comment.line.number-sign.dseq"),
    ("modes A\nwrites together", "together", "keyword.other.dseq"),
    ('rules\n  waive no-way-back for on because "x"', "no-way-back", "constant.other.check.dseq"),
]


@pytest.mark.parametrize(("text", "piece", "expected"), WHERE)
def test_names_and_words_have_their_scopes(text: str, piece: str, expected: str) -> None:
    assert scope(text, piece) == expected


def test_a_section_ends_where_another_line_of_its_own_begins() -> None:
    for word in {*SECTIONS, "drive", "clock", "let", "use", "writes", "loop"} - {"modes"}:
        (first, *_) = painted(f"modes A\n  x on\n{word} y")[-1]
        assert "meta.section.modes.dseq" not in first[1]


def test_every_sample_is_painted_whole() -> None:
    for text in TEXTS:
        for line, pieces in zip(text.split("\n"), painted(text), strict=True):
            assert "".join(piece for piece, _ in pieces) == line


@pytest.fixture(scope="module")
def modules(pytestconfig: pytest.Config) -> Path:
    """The libraries that colour texts in editors, from the registry of npm; kept beside pytest's own cache."""
    if shutil.which("node") is None or shutil.which("npm") is None:
        pytest.skip("node and npm are not installed")
    assert pytestconfig.cache is not None
    folder = pytestconfig.cache.mkdir("colouring")
    found = folder / "node_modules"
    if not all((found / name.split("@")[0]).is_dir() for name in LIBRARIES):
        call = ["npm", "install", "--prefix", str(folder), "--no-audit", "--no-fund", "--silent", *LIBRARIES]
        try:
            subprocess.run(call, check=True, capture_output=True, timeout=120)
        except (subprocess.SubprocessError, OSError):
            pytest.skip("npm could not install its libraries, perhaps for want of a network")
    return found


def test_editors_paint_the_same(modules: Path) -> None:
    texts = [*TEXTS, *(text for text, _, _ in WHERE), *(f"rules\n  ( {word} )" for word in sorted(RESERVED))]
    call = ["node", str(ROOT / "tests" / "scripts" / "paint.js"), str(modules)]
    call.append(str(ROOT / "grammars" / "dseq.tmLanguage.json"))
    ran = subprocess.run(call, input=json.dumps(texts).encode(), capture_output=True, timeout=120, check=True)
    count = 0
    for text, lines in zip(texts, json.loads(ran.stdout), strict=True):
        for line, ours, theirs in zip(text.split("\n"), painted(text), lines, strict=True):
            merged: list[Token] = []
            for piece, scopes in theirs:
                if merged and merged[-1][1] == tuple(scopes):
                    merged[-1] = merged[-1][0] + piece, tuple(scopes)
                elif piece:
                    merged.append((piece, tuple(scopes)))
            assert ours == merged, line
            count += len(merged)
    assert count > 5000
