"""Input of every malformed kind: one clear message or a drive, never a traceback, never a long wait."""

import random
import time

import pytest
from hypothesis import given, settings
from hypothesis import strategies as some
from reading import FILE, VENT, drive_of, mistakes_of, no_file, vent

from seqcheck.language import decode, read
from seqcheck.messages import Problem, Problems
from seqcheck.quantities import Interval
from seqcheck.source import Place

SECONDS = 5.0  # for one file; all take well below one, a loaded machine included


def decoded(data: bytes) -> list[str]:
    """The mistakes of some bytes."""
    with pytest.raises(Problems) as caught:
        decode(data, FILE)
    return [one.line() for one in caught.value.found]


# Bytes


@pytest.mark.parametrize("data", [VENT.encode(), b"\xef\xbb\xbf" + VENT.encode()])
def test_utf_8_with_and_without_mark(data: bytes) -> None:
    assert decode(data, FILE) == VENT


def test_the_first_byte_that_is_no_utf_8_has_a_place() -> None:
    found = decoded('drive "Größe'.encode() + b"\r\n  ab\xffc\xfe")
    assert found == ["t.dseq:2:5: error: the byte 0xFF is no UTF-8; save the file as UTF-8 [encoding]"]


def test_the_mark_is_no_column() -> None:
    assert decoded(b"\xef\xbb\xbfab\xc3") == [
        "t.dseq:1:3: error: the byte 0xC3 is no UTF-8; save the file as UTF-8 [encoding]"
    ]


def test_utf_16_is_no_utf_8() -> None:
    assert decoded("drive".encode("utf-16"))[0].startswith("t.dseq:1:1: error: the byte 0x")


def test_nul_is_no_text() -> None:
    assert decoded(b"drive\nab\0") == [
        "t.dseq:2:3: error: a NUL byte: this is no text; save the file as UTF-8 [encoding]"
    ]


def test_nul_in_a_text_that_was_not_decoded_here() -> None:
    found = mistakes_of(vent(("= 16 us", "= 16\0 us")))
    assert found == ["t.dseq:4:16: error: the character U+0000 has no meaning here; take it out [syntax]"]


# Files


@pytest.mark.parametrize("text", ["", "\n", "  \r\n\t\n", "# only a comment", "\ufeff"])
def test_an_empty_file(text: str) -> None:
    expected = "t.dseq:1:1: error: the file says nothing; begin with a line 'drive \"TITLE\"' [missing-section]"
    assert mistakes_of(text) == [expected]


def quick(text: str) -> list[str]:
    """The mistakes of a text, found in time."""
    began = time.perf_counter()
    found = mistakes_of(text)
    assert time.perf_counter() - began < SECONDS
    return found


def test_ten_thousand_parentheses_are_read() -> None:
    text = vent(("= 16 us", "= " + "(" * 10_000 + "16 us" + ")" * 10_000))
    assert quick(text) == []
    assert drive_of(text).moves[3].steps[1].time == Interval(15_841_584, 16_161_617)  # type: ignore[union-attr]


def test_ten_thousand_parentheses_that_do_not_close() -> None:
    found = quick(vent(("= 16 us", "= " + "(" * 10_000 + "16 us")))
    assert found == ["t.dseq:4:10019: error: the line ends too soon; expected ')', '+' or '-' [syntax]"]


def test_deep_nesting_on_the_right() -> None:
    assert quick(vent(("= 16 us", "= 16 us + (0 us" + " - (0 us" * 5_000 + ")" * 5_001))) == []


@pytest.mark.parametrize("number", ["9" * 60_000, "0." + "3" * 60_000, "9" * 61])
def test_digits_without_end(number: str) -> None:
    found = quick(vent(("= 16 us", f"= {number} us")))
    text = f"a number of {len(number)} characters; at most 60 are read"
    assert found == [f"t.dseq:4:14: error: {text} [number-too-long]"]


def test_products_without_end() -> None:
    lets = "\n".join(f"let a{one + 1} = a{one} * a{one}" for one in range(40))
    found = quick(vent(("let settle", f"let a0 = {'9' * 60}\n{lets}\nlet settle")))
    assert found == ["t.dseq:9:13: error: the exact result grows beyond all use; round the numbers [number-too-long]"]


@pytest.mark.parametrize("line", ["let x = " + "9" * 10**6, "x" * 10**6, "# " + "x" * 10**6, '"' * 10**6, "(" * 10**6])
def test_a_line_of_a_megabyte(line: str) -> None:
    found = quick(vent(("clock", f"{line}\nclock")))
    text = f"the line has {len(line)} characters, more than 65536; break it up"
    assert found == [f"t.dseq:3:1: error: {text} [line-too-long]"]


def test_a_long_line_of_many_words() -> None:
    assert len(quick(vent(("rails P N", "rails " + " ".join(f"N{one}" for one in range(9_000)))))) == 0


def test_very_many_lines() -> None:
    assert len(quick("x\n" * 100_000)) == 2
    assert len(quick("stage\n" * 5_000)) == 5_003


def test_a_name_of_many_characters() -> None:
    found = quick(vent(("wait settle", "wait " + "s" * 60_000)))
    assert len(found) == 1
    assert "unknown quantity" in found[0]


# Mutations

ODD = ["->", ",", "(", ")", '"', "#", "free", "any", "but", "reset", "with", "means", "~main", "keep", "\n"]
WORDS = [*VENT.split(), *ODD]


def mutated(chance: random.Random) -> str:
    """A file with some words deleted, doubled, exchanged or replaced, or single characters changed."""
    lines = [line.split(" ") for line in VENT.split("\n")]
    for _ in range(chance.randint(1, 4)):
        line = chance.choice([one for one in lines if one])
        where = chance.randrange(len(line))
        match chance.randrange(6):
            case 0:
                del line[where]
            case 1:
                line.insert(where, line[where])
            case 2:
                line[where] = chance.choice(WORDS)
            case 3:
                lines.remove(line)
            case 4:
                lines.insert(chance.randrange(len(lines)), list(line))
            case 5:
                at = chance.randrange(len(line[where]) + 1)
                line[where] = (
                    line[where][:at] + chr(chance.choice([*range(32, 127), 0, 9, 233, 0x1D11E])) + line[where][at + 1 :]
                )
    return "\n".join(" ".join(line) for line in lines)


def problems_of(text: str) -> tuple[Problem, ...]:
    """What reading refuses a text for; empty where it gives a drive."""
    try:
        read(text, FILE, no_file)
    except Problems as problems:
        return problems.found or (Problem(Place(FILE, 0, 0, 0, 0), "none", "refused without a mistake"),)
    return ()


def check(text: str) -> None:
    """Reading gives a drive, or mistakes that lie within the file."""
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    for one in problems_of(text):
        assert 1 <= one.place.line <= len(lines), one
        assert 1 <= one.place.column <= one.place.end_column <= len(lines[one.place.line - 1]) + 2, one
        assert one.text, one
        assert not one.text.endswith("."), one
        assert "\n" not in one.line()


def test_mutated_files_are_read_or_refused() -> None:
    chance = random.Random(20240817)
    began = time.perf_counter()
    for _ in range(300):
        check(mutated(chance))
    assert time.perf_counter() - began < 60


def test_mutations_are_often_refused_and_sometimes_read() -> None:
    chance = random.Random(1)
    refused = sum(bool(mistakes_of(mutated(chance))) for _ in range(60))
    assert 20 < refused < 60


@given(text=some.text(max_size=200))
@settings(max_examples=100, deadline=None)
def test_any_text_is_read_or_refused(text: str) -> None:
    check(text)


@given(data=some.binary(max_size=100))
@settings(max_examples=100, deadline=None)
def test_any_bytes_are_read_or_refused(data: bytes) -> None:
    try:
        text = decode(data, FILE)
    except Problems as problems:
        count = len(problems.found)
    else:
        check(text)
        count = 1
    assert count == 1
