"""The store of answers: it is hit where nothing that matters has changed, and never otherwise."""

import ast
import os
import re
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import fields, is_dataclass, replace
from enum import Enum
from fractions import Fraction
from pathlib import Path

import pytest
from judge.draws import draw
from proofs import at_most, leg
from reading import FILE, drive_of
from test_stopped import WORLD

from seqcheck import store as room
from seqcheck.checking import asked, check
from seqcheck.cli import main
from seqcheck.drive import CurrentOut, Drive
from seqcheck.hazards import Clearing, Delays, Following, Hazard, Lasting, Literal, delays
from seqcheck.messages import Problems
from seqcheck.proving import memory
from seqcheck.proving.memory import Question, Remembered
from seqcheck.proving.views import Lock, view
from seqcheck.quantities import Interval
from seqcheck.store import PROGRAM, Store
from seqcheck.verdict import Outcome

ROOT = Path(__file__).parent.parent
HOUSE = ROOT / "seqcheck"

FULL = """\
drive "a bench that has everything"
clock 1000 GHz within 1 %, late by at most 1 ps
writes one at a time, 1 ps to 2 ps apart, turn-offs first
loop at least 1 ps
stage
  rails P N
  leg U A B
  leg V C D
  winding U V
parts
  p on 2 ps to 3 ps off 4 ps to 7 ps difference at most 4 ps
  q on 1 ps to 3 ps off 2 ps to 5 ps
paths
  A B through p
  C D through q
  interlock C D dead time 1 ps to 2 ps
pins
  A PA1 active high rests low after 1 ps to 2 ps port A
  B PA2 active high rests low after 1 ps to 2 ps port A
  C PA3 active high rests low after 1 ps to 2 ps port B
  D PA4 active high rests low after 1 ps to 2 ps port B
carriers
  fast 10 GHz duty 20 % to 80 % dead time 9 ps updates at rise
  slow 5 GHz duty 20 % to 80 % dead time 9 ps updates at rise
modes A B C D
  i off off off off with current out of U means coast
  m fast ~fast off on
  n off off slow ~slow
moves
  start i
  i -> m when go earliest 2 ps latest 90 ps
    set A off
    wait 9 ps to 10 ps
  m -> n after 40 ps to 50 ps unbroken with current into U
  n -> i when back
trips
  stop from any -> i within 5 ps
    wait 9 ps
rules
  never A and C
  waive together for A because "it is only for this test"
"""


@pytest.fixture(autouse=True)
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A cache of its own, asked from the first zone on."""
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "cache"))
    monkeypatch.setattr(memory, "worth", lambda _: 1)
    monkeypatch.chdir(tmp_path)
    return tmp_path / "cache" / "seqcheck" / "answers"


class Heard(Store):
    """A store that tells how often it was of use."""

    def __init__(self) -> None:
        super().__init__()
        self.asked = self.knew = 0

    def recalled(self, question: Question) -> Remembered | None:
        found = super().recalled(question)
        self.asked += 1
        self.knew += found is not None
        return found


def outcome(drive: Drive, store: Store | None) -> Outcome:
    return check(drive, FILE, frozenset(), at_most(400), memory=store)


def entries(folder: Path) -> list[Path]:
    return sorted(folder.iterdir()) if folder.exists() else []


# What a key says


def hazards(drive: Drive) -> Iterator[Hazard]:
    for hazard, _ in asked(drive):
        yield hazard


def key(drive: Drive, hazard: Hazard) -> str:
    looking = view(drive, hazard, delays(hazard, drive.paths), interlocks=True)
    return Store().key(Question("prove", looking, (True,)))


Trail = tuple[str, ...]


def varied(value: object, trail: Trail = ()) -> Iterator[tuple[Trail, object]]:
    """The values that differ from one in a single leaf, each with the fields that lead to it."""
    if is_dataclass(value) and not isinstance(value, type):
        for one in fields(value):
            if one.name != "place":
                for further, other in varied(getattr(value, one.name), (*trail, f"{type(value).__name__}.{one.name}")):
                    yield further, replace(value, **{one.name: other})
    elif isinstance(value, tuple):
        yield from ((trail, value[:at] + value[at + 1 :]) for at in range(len(value)))
        for at, part in enumerate(value):
            yield from ((further, (*value[:at], other, *value[at + 1 :])) for further, other in varied(part, trail))
    elif isinstance(value, dict):
        for name, part in value.items():
            yield from ((further, {**value, name: other}) for further, other in varied(part, (*trail, name)))
    elif isinstance(value, frozenset):
        yield from ((trail, value - {part}) for part in value)
    elif isinstance(value, Enum):
        yield from ((trail, other) for other in type(value) if other is not value)
    elif isinstance(value, bool):
        yield trail, not value
    elif isinstance(value, str):
        yield trail, f"{value}'"
    elif isinstance(value, int | Fraction):
        yield trail, value + 1
    else:
        assert value is None, type(value)


def unsaid(drive: Drive, hazard: Hazard) -> set[str]:
    """Where a drive can differ in one leaf without its key being another one."""
    found, own = set(), key(drive, hazard)
    for trail, other in varied(drive):
        assert isinstance(other, Drive)
        try:
            same = key(other, hazard) == own
        except (KeyError, ValueError, IndexError, StopIteration):
            continue  # what names what is not there cannot be asked about at all
        if same:
            found.add(" ".join(trail))
    return found


ALWAYS = {
    *("Drive.title", "Clock.frequency", "Clock.tolerance", "Mode.means", "When.event", "Pin.name"),
    *("Drive.stage", "Drive.rules", "Drive.waivers", "Drive.parts"),
}
"""What no answer of any hazard depends on: words, the circuit and rules (they are asked as hazards), and what times
have been widened by or are made of."""


KNOWN = {"Drive.modes i Mode.known", "Drive.modes i Mode.known CurrentOut.node"}
KNOWN |= {"Drive.moves Move.known", "Drive.moves Move.known CurrentInto.node"}
LOCKS = {"Drive.interlocks", "Drive.interlocks Interlock.first", "Drive.interlocks Interlock.second"}
LOCKS |= {"Drive.interlocks Interlock.dead Interval.lo", "Drive.interlocks Interlock.dead Interval.hi"}


def carrier(name: str) -> set[str]:
    """All of a carrier but its name and when it updates."""
    own = f"Drive.carriers {name} Carrier."
    ends = {f"{own}{time} Interval.{end}" for time in ("period", "high", "low", "dead") for end in ("lo", "hi")}
    return {f"{own}frequency", f"{own}duty", *ends}


def test_every_part_of_a_drive_is_in_a_key_but_for_what_is_not_looked_at() -> None:
    """Of the paths those times are in it that a delay is made of."""
    drive = drive_of(FULL)
    first, second, both = list(hazards(drive))
    said = {one: {trail for trail in unsaid(drive, one) if "Drive.paths" not in trail} for one in (first, second, both)}
    for found in said.values():
        assert {always for always in ALWAYS if not any(always in trail for trail in found)} == set()
    left = {
        one: {trail for trail in found if not any(always in trail for always in ALWAYS)} for one, found in said.items()
    }
    assert left[first] == KNOWN | LOCKS | carrier("slow")
    assert left[second] == KNOWN | carrier("fast")
    assert left[both] == KNOWN


def test_what_is_known_is_in_the_key_of_a_hazard_that_needs_it() -> None:
    drive = drive_of(FULL)
    needy = replace(next(hazards(drive)), needs=(frozenset({CurrentOut("U")}),))
    assert not KNOWN & unsaid(drive, needy)


def test_every_part_of_a_question_is_in_its_key() -> None:
    drive = drive_of(FULL)
    looking = view(drive, next(hazards(drive)), (Delays(1, 2), Delays(3, 4)), interlocks=True)
    looking = replace(looking, locks=(Lock(0, 1, Interval(1, 2)),))
    plain = Question("gap", looking, (0, None))
    others = [
        *(Question(kind, looking, (0, None)) for kind in ("prove", "holds")),
        *(Question("gap", looking, more) for more in ((1, None), (0, 5), (0,), (False, None))),
        *(Question("gap", replace(looking, delays=other), (0, None)) for _, other in varied(looking.delays)),
        *(Question("gap", replace(looking, locks=other), (0, None)) for _, other in varied(looking.locks)),
        Question("gap", replace(looking, switches=("B", "A")), (0, None)),
        Question("gap", replace(looking, carriers=()), (0, None)),
        Question("gap", replace(looking, held=frozenset("A")), (0, None)),
    ]
    for changed in (
        {"literals": (Literal("A"), Literal("B", False))},
        {"needs": (frozenset(),)},
        *({"asks": asks} for asks in (Lasting(True, 5), Lasting(False, 5), Lasting(True, 6), Following("i", "m", 5))),
        *({"asks": asks} for asks in (Following("m", "i", 5), Clearing("stop", 5), Clearing("stop", 6))),
    ):
        others.append(Question("gap", replace(looking, hazard=replace(looking.hazard, **changed)), (0, None)))  # type: ignore[arg-type]
    keys = [Store().key(one) for one in (plain, *others)]
    assert len(set(keys)) == len(keys)
    words = replace(looking.hazard, joins=("X", "Y"))
    assert Store().key(Question("gap", replace(looking, hazard=words), (0, None))) == keys[0]


def test_the_prover_sees_of_a_drive_no_more_than_a_key_says() -> None:
    """What a key leaves out it must not read, but for where a view and its delays are made."""
    free = {"proving/prove.py": {"paths", "interlocks"}, "proving/views.py": {"interlocks"}}
    hidden = {"title", "stage", "parts", "paths", "interlocks", "rules", "waivers", "means", "tolerance", "frequency"}
    searching = [HOUSE / f"{name}.py" for name in ("firmware", "writing", "zones")]
    for path in [*searching, *(HOUSE / "proving").glob("*.py")]:
        read = {node.attr for node in ast.walk(ast.parse(path.read_text("utf-8"))) if isinstance(node, ast.Attribute)}
        assert read & hidden <= free.get(str(path.relative_to(HOUSE)), set()), path


def test_an_answer_is_void_when_the_program_is_changed(monkeypatch: pytest.MonkeyPatch) -> None:
    """Everything that the prover imports is in the digest of the program."""
    waiting, seen = [HOUSE / "proving" / "prove.py"], set()
    while waiting:
        path = waiting.pop()
        if path in seen:
            continue
        seen.add(path)
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.ImportFrom) and (node.module or "").startswith("seqcheck."):
                inner = HOUSE.joinpath(*str(node.module).split(".")[1:])
                waiting += [one for one in (inner.with_suffix(".py"), inner / "__init__.py") if one.exists()]
    rooms = {path.relative_to(HOUSE).parts[0].removesuffix(".py") for path in seen}
    assert rooms - {"source", "messages"} <= set(PROGRAM)  # a place is in no answer
    drive = drive_of(FULL)
    before = key(drive, next(hazards(drive)))
    monkeypatch.setattr(room, "program", lambda: "another")
    assert key(drive, next(hazards(drive))) != before


# Answers that are found again

SPACED = "writes one at a time, 1 ps to 3 ps apart"
UNSAFE = leg(
    "a on off\nb off on",
    "  start a\n  a -> b when go earliest 9 ps\n    set A off\n    wait 4 ps\n  b -> a when back\n    wait 9 ps",
    head=SPACED,
    trips="  halt from any -> a within 3 ps",
) + "rules\n  margin at least 4 ps\n  A on at least 3 ps\n"


@pytest.mark.parametrize("text", [UNSAFE, *(draw(seed) for seed in range(8))])
def test_what_is_found_again_is_the_same(text: str) -> None:
    """To the place of every step, also where the file has moved."""
    drive, store = drive_of(text), Heard()
    alone = outcome(drive, None)
    assert outcome(drive, store) == alone
    assert outcome(drive, store) == alone
    moved = drive_of("# a comment\n\n" + text)
    assert outcome(moved, store) == outcome(moved, None)


def test_answers_are_found_again_by_name() -> None:
    """All of them, where nothing that is looked at has changed; what is edited is proven anew."""
    drive, store = drive_of(UNSAFE), Heard()
    outcome(drive, store)
    asked_first, known_first = store.asked, store.knew
    outcome(drive, store)
    assert store.asked == 2 * asked_first
    assert store.knew == known_first + asked_first
    for old, new in (("when back", "when home"), ("wait 4 ps", "wait 3 ps"), ("p on 2 ps", "p on 1 ps")):
        edited, before = drive_of(UNSAFE.replace(old, new)), (store.asked, store.knew)
        assert outcome(edited, store) == outcome(edited, None)
        assert (store.asked - before[0] == store.knew - before[1]) == (old == "when back")


NUMBER = re.compile(r"(?<![\w.])(\d+)(?= (?:ps|ns|%|GHz))")


def edits(text: str) -> Iterator[str]:
    """A text with each of its numbers changed by one, and with other words in place of its own."""
    for found in NUMBER.finditer(text):
        for number in (int(found[1]) + 1, int(found[1]) - 1):
            yield f"{text[: found.start()]}{number}{text[found.end() :]}"
    words = [("turn-offs first", "in any order"), ("at rise", "within a period"), ("unbroken ", ""), (" on", " off")]
    words += [("active high", "active low"), ("rests low", "rests high"), ("one at a time", "by port"), ("off", "keep")]
    for old, new in [*words, ("wait", "set all off\n    wait"), ("~fast", "off"), ("port B", "port A")]:
        for found in list(re.finditer(re.escape(old), text))[:4]:
            yield f"{text[: found.start()]}{new}{text[found.end() :]}"


def readable(text: str) -> Drive | None:
    try:
        return drive_of(text)
    except Problems:
        return None


@pytest.mark.parametrize("text", [UNSAFE, *(draw(seed) for seed in (4, 10, 11))])
def test_an_edited_file_is_judged_as_if_nothing_was_kept(text: str) -> None:
    """One store for all edits, so that each could find the answers of all others."""
    store, tried = Heard(), 0
    outcome(drive_of(text), store)
    for edited in edits(text):
        drive = readable(edited)
        if drive is not None:
            tried += 1
            limit = at_most(300)
            alone = check(drive, FILE, frozenset(), limit)
            assert check(drive, FILE, frozenset(), limit, memory=store) == alone, edited
    assert tried > 10
    assert store.knew or text != UNSAFE


@pytest.mark.campaign
@pytest.mark.parametrize("seed", range(*map(int, os.environ.get("SEQCHECK_SEEDS", "0-100").split("-"))))
def test_edited_drawn_files_are_judged_as_if_nothing_was_kept(seed: int) -> None:
    store = Heard()
    for edited in (text := draw(seed), *edits(text)):
        drive = readable(edited)
        if drive is not None:
            alone = check(drive, FILE, frozenset(), at_most(300))
            assert check(drive, FILE, frozenset(), at_most(300), memory=store) == alone, edited


@pytest.mark.parametrize("zones", [1, 5, 30, 100])
def test_a_limit_ends_what_is_known_as_it_ends_a_search(zones: int) -> None:
    drive, store = drive_of(UNSAFE), Heard()
    outcome(drive, store)
    alone = check(drive, FILE, frozenset(), at_most(zones))
    assert check(drive, FILE, frozenset(), at_most(zones), memory=store) == alone
    other = Heard()
    check(drive, FILE, frozenset(), at_most(zones), memory=other)
    assert outcome(drive, other) == outcome(drive, None)  # nothing that a limit has touched was kept


# Files


def damaged(data: bytes) -> Iterator[bytes]:
    yield from (b"", b"\n", data[:-1], data + b" ", data[: len(data) // 2], b"\0" * len(data), data[65:])
    yield from (data[:at] + bytes([data[at] ^ 1]) + data[at + 1 :] for at in range(0, len(data), 17))


def test_a_damaged_entry_is_no_answer(folder: Path) -> None:
    drive = drive_of(UNSAFE)
    alone = outcome(drive, Store())
    first, store = next(hazards(drive)), Store()
    question = Question("prove", view(drive, first, delays(first, drive.paths), interlocks=True), (True,))
    assert store.recalled(question) is not None
    own = folder / store.key(question)
    data = own.read_bytes()
    for damage in damaged(data):
        own.write_bytes(damage)
        assert store.recalled(question) is None
    others = [one for one in entries(folder) if one != own]
    own.write_bytes(others[0].read_bytes())  # another's answer under this name
    assert store.recalled(question) is None
    assert outcome(drive, Store()) == alone
    assert own.read_bytes() == data


def test_entries_are_private(folder: Path) -> None:
    outcome(drive_of(UNSAFE), Store())
    assert folder.stat().st_mode & 0o777 == 0o700
    assert {file.stat().st_mode & 0o777 for file in entries(folder)} == {0o600}
    store = Heard()
    for file in entries(folder):
        file.chmod(0o666)
    outcome(drive_of(UNSAFE), store)
    assert store.asked
    folder.chmod(0o777)
    store = Heard()
    outcome(drive_of(UNSAFE), store)
    assert store.knew == 0


@pytest.mark.parametrize("place", ["cache", "cache/seqcheck", "cache/seqcheck/answers"])
def test_no_folder_is_no_store(place: str, tmp_path: Path) -> None:
    """Nothing is said of it, and nothing else changes."""
    (tmp_path / place).parent.mkdir(parents=True, exist_ok=True, mode=0o700)
    (tmp_path / place).write_text("in the way")
    store = Heard()
    assert outcome(drive_of(UNSAFE), store) == outcome(drive_of(UNSAFE), None)
    assert store.knew == 0


def test_few_entries_stay(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Those that were of use last."""
    monkeypatch.setattr(room, "MOST_ENTRIES", 6)
    store = Store()
    for seed in range(12):
        outcome(drive_of(draw(seed)), store)
        assert len(entries(folder)) <= 6
    monkeypatch.setattr(room, "MOST_BYTES", 10)
    for file in entries(folder):
        file.unlink()
    outcome(drive_of(UNSAFE), store)
    assert entries(folder) == []


# The command


def test_fresh_neither_reads_nor_writes(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    Path("t.dseq").write_text(UNSAFE)
    said = []
    for more in (["--fresh"], ["--evidence", "shelf"], [], [], ["--jobs", "2"], ["--fresh"]):
        code = main(["lint", "t.dseq", "--as", "json", *more])
        said.append((code, capsys.readouterr()))
        assert bool(entries(folder)) == (len(said) > 2)
    assert len(set(said)) == 1
    for file in entries(folder):
        file.write_text("no answer")
    main(["lint", "t.dseq", "--as", "json", "--fresh"])
    assert {file.read_text() for file in entries(folder)} == {"no answer"}


def test_what_is_quickly_proven_does_not_ask(monkeypatch: pytest.MonkeyPatch, folder: Path) -> None:
    monkeypatch.undo()
    monkeypatch.setenv("XDG_CACHE_HOME", str(folder.parent.parent))
    program = f"import sys; from seqcheck.cli import main; main(['lint', {str(ROOT / 'samples' / 'vent.dseq')!r}]); "
    program += "sys.exit(9 if 'seqcheck.store' in sys.modules else 0)"
    done = subprocess.run([sys.executable, "-c", program], env=WORLD, capture_output=True, check=False, timeout=60)
    assert done.returncode == 0
    assert entries(folder) == []
