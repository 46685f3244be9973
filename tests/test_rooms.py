"""The rooms of the house: each imports only rooms below it."""

import ast
from pathlib import Path

import pytest

import seqcheck

HOUSE = Path(seqcheck.__file__).parent

LOW_TO_HIGH = (
    "records",
    "shipped",
    "exits",
    "ranging",
    "quantities",
    "source",
    "messages",
    "drive",
    "language",
    "hazards",
    "faults",
    "contents",
    "effects",
    "circuit",
    "verdict",
    "changes",
    "ranges",
    "writing",
    "firmware",
    "modegraph",
    "zones",
    "proving",
    "evidence",
    "confirming",
    "sizing",
    "margins",
    "rules",
    "failing",
    "tolerating",
    "reports",
    "limits",
    "checking",
    "store",
    "serving",
    "completing",
    "commands",
    "streams",
    "arguments",
    "opening",
    "work",
    "delivering",
    "cli",
    "entry",
    "__main__",
)

APART = {
    "evidence": {"writing", "firmware", "modegraph", "zones", "proving", "circuit"},
    "proving": {"language", "evidence"},
    "reports": {
        *("language", "circuit", "writing", "firmware", "modegraph", "zones", "proving", "evidence"),
        *("confirming", "sizing", "margins", "rules", "failing", "tolerating"),
    },
}
"""Rooms that must not know each other although one is below the other: the replay must be able to contradict the
prover, the prover knows no file, and a report reads verdicts and never reasons."""


def room_of(path: Path) -> str:
    part = path.relative_to(HOUSE).parts[0]
    return part.removesuffix(".py")


def imported_rooms(path: Path) -> set[str]:
    """The rooms of all imports in a file, those inside functions included."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        names = []
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom) and node.module:
            names = [f"{node.module}.{alias.name}" for alias in node.names]
        found |= {name.split(".")[1] for name in names if name.startswith("seqcheck.")}
    return {name for name in found if (HOUSE / name).is_dir() or (HOUSE / f"{name}.py").exists()}


FILES = sorted(path for path in HOUSE.rglob("*.py") if path != HOUSE / "__init__.py")


def test_every_room_has_its_place() -> None:
    assert {room_of(path) for path in FILES} == set(LOW_TO_HIGH)


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(HOUSE)))
def test_a_room_imports_only_rooms_below_it(path: Path) -> None:
    room = room_of(path)
    below = set(LOW_TO_HIGH[: LOW_TO_HIGH.index(room)]) | {room}
    assert imported_rooms(path) <= below - APART.get(room, set())


@pytest.mark.parametrize(("library", "rooms"), [("lark", {"language"}), ("rich", {"reports"})])
def test_a_library_lives_in_its_own_room(library: str, rooms: set[str]) -> None:
    using = set()
    for path in FILES:
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Import) and any(alias.name.split(".")[0] == library for alias in node.names):
                using.add(room_of(path))
            if isinstance(node, ast.ImportFrom) and node.module and node.module.split(".")[0] == library:
                using.add(room_of(path))
    assert using == rooms
