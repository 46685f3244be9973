"""The table of survivors that no test can notice, each with its reason.

A block for a line of the program: its file and function, the line, one or more changes, why they make no difference.

    zones.py closed
      line: if first >= INFINITE:
      change: first >= INFINITE -> first > INFINITE
      why: No bound is above INFINITE.
"""

from collections.abc import Iterator, Set
from pathlib import Path

from mutation.faults import Mutant

TABLE = Path(__file__).with_name("explained.txt")

Name = tuple[str, str, str, str]  # file, function, line, change


class Explained:
    """Reasons by file, function, line and change."""

    def __init__(self, reasons: dict[Name, str]) -> None:
        self._reasons = reasons

    def why(self, file: str, mutant: Mutant) -> str:
        """The reason for which a mutant cannot be noticed; empty if there is none."""
        return self._reasons.get((file, *mutant.name), "")

    def names(self, files: Set[str]) -> Iterator[Name]:
        """The mutants of these files that are explained."""
        return (name for name in self._reasons if name[0] in files)


def read(text: str | None = None) -> Explained:
    """The table; ValueError where a block is not of the form above or a mutant is there twice."""
    reasons: dict[Name, str] = {}
    for block in (TABLE.read_text(encoding="utf-8") if text is None else text).split("\n\n"):
        lines = [line for line in block.splitlines() if line and not line.startswith("#")]
        for name, why in _block(lines) if lines else ():
            if name in reasons:
                raise ValueError(f"explained twice: {' | '.join(name)}")
            reasons[name] = why
    return Explained(reasons)


def _block(lines: list[str]) -> Iterator[tuple[Name, str]]:
    head, line, *changes, why = (one.strip() for one in lines) if len(lines) >= 4 else ("", "", "", "")
    file, _, function = head.partition(" ")
    keys = [line.startswith("line: "), *(one.startswith("change: ") for one in changes), why.startswith("why: ")]
    if not file.endswith(".py") or not all(keys):
        raise ValueError("not a file and function, a line, changes and a reason:\n" + "\n".join(lines))
    for change in changes:
        yield (file, function, line.removeprefix("line: "), change.removeprefix("change: ")), why.removeprefix("why: ")
