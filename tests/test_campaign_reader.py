"""Fuzzing of the reader: files made by the grammar, then damaged; a drive or mistakes comes out, in time and space.

    SEQCHECK_FUZZ=200000 pytest -m campaign tests/test_campaign_reader.py -n auto -rP

Whole files are drawn or are samples; damage is done to bytes, words, clauses and lines, within a file and between two.
"""

import os
import re
import resource
from collections import Counter
from functools import cache
from pathlib import Path
from random import Random
from time import process_time

import pytest
from judge.draws import draw
from reading import FILE, VENT

from seqcheck.language import decode, read
from seqcheck.messages import Problems

SAMPLES = sorted((Path(__file__).parent.parent / "samples").rglob("*.dseq"))
CHUNK = 2_000
SECONDS = 2.0
"""The most that one file may take of the processor: other programs of a busy machine do not count."""

MEGABYTES = 64
"""The most by which the process may grow while it reads a chunk; a leak of 40 kB a file would show."""

ODD = (
    b"->", b",", b"(", b")", b'"', b"#", b"~", b"%", b"\n", b"\r", b"\t", b"\0", b"\xff", b"\xef\xbb\xbf", b"\xc2\xb5s",
    b"99999999999999999999", b"-1", b"0", b"1e9", b"0.000000000001", b"1/0", b"any but", b"reset", b"keep", b"free",
    b"use \"t.dseq\"", b"use \"../samples\"", b"let a = a", b"with", b"means brake", b"rules", b"trips", b"stage",
    b"capacitor P N", b"sources a a", b"leg U U U", b"drive \"x\"", b"waive short for U because \"x\"",
    b"never A and A off", b"margin at least 0 ps", b"wait", b"set all off", b"at once", b"within", b"latest 0 ps",
    b"= 2 * 3 us / 0 us", b"((((((((", b"1 GHz - 1 GHz", b"100 %", b"ticks", b"one way", b"port A", b"\xf0\x9f\x92\xa1",
)  # fmt: skip
"""Words and characters that other places of a file, or none, want."""


@cache
def wholes() -> tuple[bytes, ...]:
    """Files that can be read."""
    texts = [VENT, *(path.read_text(encoding="utf-8") for path in SAMPLES), *map(draw, range(200))]
    return tuple(text.encode() for text in texts)


@cache
def parts() -> tuple[bytes, ...]:
    """All lines and words that any of them has."""
    lines = {line for text in wholes() for line in text.split(b"\n")}
    words = {word for line in lines for word in line.split()}
    return tuple(sorted(lines | words))


def damaged(seed: int) -> bytes:
    """A file with one to six places damaged; now and then a whole one, or one that is nothing but damage."""
    rng = Random(seed)
    data = rng.choice(wholes())
    if rng.random() < 0.02:
        data = b" ".join(rng.choice((*ODD, *parts())) for _ in range(rng.randint(0, 200)))
    for _ in range(rng.choice((0, 1, 1, 1, 2, 3, 6))):
        data = rng.choice(DAMAGE)(rng, data)
    return data


def _bytes(rng: Random, data: bytes) -> bytes:
    """Some bytes replaced by any others, or taken out."""
    at = rng.randrange(len(data) + 1)
    return data[:at] + rng.randbytes(rng.randint(0, 3)) + data[at + rng.randint(0, 3) :]


def _bit(rng: Random, data: bytes) -> bytes:
    """One bit the other way."""
    if not data:
        return data
    at = rng.randrange(len(data))
    return data[:at] + bytes([data[at] ^ 1 << rng.randrange(8)]) + data[at + 1 :]


def _word(rng: Random, data: bytes) -> bytes:
    """A word taken out, doubled, or replaced by one from anywhere."""
    words = re.split(rb"(\s+)", data)
    at = rng.randrange(0, len(words), 2)
    words[at] = rng.choice((b"", words[at] + b" " + words[at], rng.choice(ODD), rng.choice(parts())))
    return b"".join(words)


def _line(rng: Random, data: bytes) -> bytes:
    """A line taken out, doubled, moved, or put in from anywhere."""
    lines = data.split(b"\n")
    at = rng.randrange(len(lines))
    line = lines.pop(at)
    if rng.random() < 0.7:
        put = rng.choice((line, rng.choice(parts()), rng.choice(ODD)))
        lines.insert(rng.randrange(len(lines) + 1), put)
    if rng.random() < 0.3:
        lines.insert(at, line)
    return b"\n".join(lines)


def _number(rng: Random, data: bytes) -> bytes:
    """A number or unit replaced."""
    found = list(re.finditer(rb"\d+(?:\.\d+)?|\b(?:ps|ns|us|ms|s|GHz|MHz|kHz|Hz|ppm|ticks)\b", data))
    if not found:
        return data
    one = rng.choice(found)
    put = rng.choice((b"0", b"1", b"7", b"1000000000000", b"0.1", b"9" * 70, b"us", b"Hz", b"%", b"ticks", b"s", b""))
    return data[: one.start()] + put + data[one.end() :]


def _names(rng: Random, data: bytes) -> bytes:
    """One word everywhere another of the file's words."""
    words = sorted(set(re.findall(rb"\w+", data)))
    if not words:
        return data
    old, new = rng.choice(words), rng.choice(words)
    return re.sub(rb"\b" + old + rb"\b", new, data)


def _crossed(rng: Random, data: bytes) -> bytes:
    """The beginning of a file with the end of another."""
    other = rng.choice(wholes())
    return data[: rng.randrange(len(data) + 1)] + other[rng.randrange(len(other)) :]


def _repeated(rng: Random, data: bytes) -> bytes:
    """A piece many times over."""
    at = rng.randrange(len(data) + 1)
    piece = data[at : at + rng.randint(1, 60)]
    return data[:at] + piece * rng.choice((2, 10, 200)) + data[at:]


DAMAGE = (_bytes, _bit, _word, _word, _line, _line, _number, _number, _names, _crossed, _repeated)


def fetched(path: str) -> str:
    """A file to use: of the samples, or not there."""
    found = {sample.name: sample for sample in SAMPLES}.get(path)
    if found is None:
        raise FileNotFoundError(2, "No such file or directory", path)
    return found.read_text(encoding="utf-8")


def ended(data: bytes) -> str:
    """How reading ends: "read", or the kind of the first mistake. Any other exception passes through."""
    try:
        read(decode(data, FILE), FILE, fetched)
    except Problems as problems:
        return kind(problems)
    return "read"


def kind(problems: Problems) -> str:
    """The kind of the first mistake; each must be one whole line with a place."""
    assert problems.found
    assert all(one.text and one.place.line >= 1 and "\n" not in one.line() for one in problems.found)
    return problems.found[0].line().rpartition("[")[2].rstrip("]")


def fuzz(seeds: range) -> Counter[str]:
    """How often reading ended how; fails at the first file that is not read or refused in time."""
    ends: Counter[str] = Counter()
    for seed in seeds:
        data = damaged(seed)
        began = process_time()
        try:
            ends[ended(data)] += 1
        except Exception as error:
            pytest.fail(f"damaged({seed}) ends with {type(error).__name__}: {error}\n{data!r}")
        seconds = process_time() - began
        assert seconds < SECONDS, f"damaged({seed}) takes {seconds:.1f} s\n{data[:2_000]!r}"
    return ends


def grown(before: int) -> float:
    """By how many megabytes the greatest size of the process is above one that was noted."""
    return (peak() - before) / 1024


def peak() -> int:
    """The greatest size of the process so far, in kB."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss


def test_damaged_files() -> None:
    """A fixed slice; damage is mostly refused, some of it is read, and mistakes are of many kinds."""
    ends = fuzz(range(150))
    assert 10 < ends["read"] < 75
    assert len(ends) > 10


def test_the_fuzz_can_fail(monkeypatch: pytest.MonkeyPatch) -> None:
    """What is neither a drive nor Problems is reported with its number."""
    monkeypatch.setattr("test_campaign_reader.read", lambda *_: 1 / 0)
    with pytest.raises(pytest.fail.Exception, match=r"damaged\(\d+\) ends with ZeroDivisionError"):
        fuzz(range(20))


def _chunks() -> list[range]:
    first, _, last = os.environ.get("SEQCHECK_FUZZ", "4000").rpartition("-")
    return [range(at, min(at + CHUNK, int(last))) for at in range(int(first or 0), int(last), CHUNK)]


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", _chunks(), ids=lambda seeds: f"{seeds.start}-{seeds.stop}")
def test_many_damaged_files(seeds: range) -> None:
    """No traceback, no hang, no growth."""
    fuzz(range(seeds.start, min(seeds.start + 100, seeds.stop)))  # what is loaded once is no growth
    before, began = peak(), process_time()
    ends = fuzz(seeds)
    print(f"\n{len(seeds)} files in {process_time() - began:.0f} s, {grown(before):.0f} MB: {dict(ends.most_common())}")
    assert grown(before) < MEGABYTES
