"""Counterexamples made smaller, line by line, clause by clause and number by number."""

import re
from collections.abc import Callable, Iterator

CLAUSES = (
    r" within \d+ \S+",
    r" earliest \d+ ps",
    r" latest \d+ ps",
    r" unbroken",
    r" with \w+ above \w+",
    r" after \d+ ps( to \d+ ps)?",
    r" to \d+ (ps|%)",
    r" dead time \d+ ps( to \d+ ps)?",
    r" updates [a-z ]+",
    r" difference at most \d+ ps",
    r" port \w",
    r", turn-o\w+ first",
    r", in table order",
    r", late by at most \d+ ps",
)


def smaller(text: str, still_fails: Callable[[str], bool]) -> str:
    """The smallest text found for which `still_fails` holds, as it does for `text`.

    `still_fails` is asked about texts that may not be readable at all and has to say no to those.
    """
    changed = True
    while changed:
        changed = False
        for shorter in _tries(text):
            if shorter != text and still_fails(shorter):
                text, changed = shorter, True
                break
    return text


def _tries(text: str) -> Iterator[str]:
    lines = text.splitlines()
    for size in (8, 4, 2, 1):
        for k in range(1, len(lines) - size + 1):
            yield _joined(lines[:k] + lines[k + size :])
    yield from _fewer_columns(lines)
    for k, line in enumerate(lines):
        for clause in CLAUSES:
            yield _joined([*lines[:k], re.sub(clause, "", line, count=1), *lines[k + 1 :]])
    for k, line in enumerate(lines):
        for number in re.finditer(r"\b\d+(?= (ps|%))", line):
            for less in sorted({0, int(number[0]) // 2, max(0, int(number[0]) - 1)}):
                if less < int(number[0]):
                    shorter = line[: number.start()] + str(less) + line[number.end() :]
                    yield _joined([*lines[:k], shorter, *lines[k + 1 :]])


def _joined(lines: list[str]) -> str:
    return "\n".join(lines) + "\n"


def _fewer_columns(lines: list[str]) -> Iterator[str]:
    """The text without one switch: without its column and its name, and without the lines that define it."""
    head = next((k for k, line in enumerate(lines) if line.startswith("modes ")), None)
    if head is None:
        return
    end = next((k for k in range(head + 1, len(lines)) if not lines[k].startswith(" ")), len(lines))
    for column, name in enumerate(lines[head].split()[1:]):
        kept: list[str] = []
        for k, line in enumerate(lines):
            if head <= k < end:
                words = line.split()
                del words[column + 1]
                kept.append(("" if k == head else "  ") + " ".join(words))
            elif not re.match(rf"\s+(switch )?{name}\b", line):
                kept.append(re.sub(rf"(, )?\b{name}( \S+(?=,|$))?\b" if "set" in line else rf" \b{name}\b", "", line))
        yield _joined(kept)
