"""Answers of the prover from one run of the program to the next, in the user's own cache folder.

An answer lies under a digest of all that the prover was handed for it (`key`), of the program and of Python. What the
hazard does not look at is left out of that, name by name, so that a file edited elsewhere finds its answers again; what
is not left out is in it, fields that are still to be invented too. Whatever goes wrong, from a foreign folder to a
damaged file, there is no answer, and the prover finds one.
"""

import contextlib
import hashlib
import json
import os
import sys
from dataclasses import fields
from enum import Enum
from fractions import Fraction
from functools import cache
from pathlib import Path
from typing import Any

from seqcheck.drive import Carrier, Drive
from seqcheck.evidence.certificate import Fields, run_data, run_of
from seqcheck.hazards import Hazard
from seqcheck.language.cache import private, private_folder
from seqcheck.proving.memory import Question, Remembered
from seqcheck.proving.prove import Gap, Proven, Refuted
from seqcheck.verdict import Event, Trace

MOST_ENTRIES = 1500
"""Files that may stay; when there are more, the third that was not used for longest goes."""
MOST_BYTES = 32_000
"""An answer that takes more is not kept."""
PROGRAM = (
    *("records", "quantities", "drive", "hazards", "circuit", "faults", "verdict"),
    *("writing", "firmware", "zones", "proving"),
)
"""The rooms that an answer is made by; a change in one of them, or in how answers are written, makes old ones void."""

_ELSEWHERE = frozenset(
    {"place", "title", "stage", "parts", "paths", "interlocks", "pins", "carriers", "rules", "waivers"}
)
"""Fields of Drive that the prover sees only by way of a view; see `_said_of`."""
_UNSAID = {
    "Clock": {"frequency", "tolerance"},  # times are widened by them where the file is read
    "Mode": {"means"},
    "When": {"event"},
    "Pin": {"name"},
    "Hazard": {"joins", "currents"},
}
"""Fields that no answer depends on: words for people, and what has gone into other fields."""


class Store:
    """Keeps answers as long as this process lives, and on disk beyond."""

    def __init__(self) -> None:
        self._grounds: dict[tuple[int, bool], tuple[Drive, str]] = {}

    def recalled(self, question: Question) -> Remembered | None:
        """The answer that was kept for a question that is the same in all that can matter, or None."""
        with contextlib.suppress(Exception):
            name = self.key(question)
            file = _folder() / name
            with file.open("rb") as stream:
                if not private(os.fstat(stream.fileno())):
                    return None
                seal, _, body = stream.read(2 * MOST_BYTES).partition(b"\n")
            if seal != _seal(name, body):
                return None
            found = _answer(Fields(json.loads(body), "an answer"), question)
            with contextlib.suppress(OSError):
                os.utime(file)  # it was of use
            return found
        return None

    def kept(self, question: Question, found: Remembered) -> None:
        """Keep an answer, whole or not at all."""
        with contextlib.suppress(Exception):
            name, folder = self.key(question), _folder()
            body = json.dumps(_data(found, question), separators=(",", ":")).encode()
            if len(body) > MOST_BYTES:
                return
            draft = folder / f"{name}.{os.getpid()}"
            try:
                with draft.open("xb") as stream:
                    os.fchmod(stream.fileno(), 0o600)
                    stream.write(_seal(name, body) + b"\n" + body)
                draft.replace(folder / name)
            finally:
                draft.unlink(missing_ok=True)
            _forget_unused(folder)

    def key(self, question: Question) -> str:
        """The digest of all that an answer depends on."""
        looking = question.view
        knows = bool(looking.hazard.needs)
        asked = [question.kind, question.more, looking.hazard, looking.delays, looking.locks]
        seen = [looking.switches, looking.carriers, sorted(looking.held)]
        parts = [program(), self._ground(looking.drive, knows), _rendered([*asked, *seen]), _said_of(question)]
        return hashlib.sha256(json.dumps(parts).encode()).hexdigest()

    def _ground(self, drive: Drive, knows: bool) -> str:
        """The digest of what all hazards of a drive look at; `knows` with what is known of currents and sources."""
        known = self._grounds.get((id(drive), knows))
        if known is None:
            names = [one.name for one in fields(Drive) if one.name not in _ELSEWHERE]
            unsaid = frozenset() if knows else frozenset({"known"})
            said = json.dumps([[name, _rendered(getattr(drive, name), unsaid)] for name in names])
            known = drive, hashlib.sha256(said.encode()).hexdigest()  # the drive is held, so its id stays its own
            if len(self._grounds) > 8:
                self._grounds.clear()
            self._grounds[id(drive), knows] = known
        return known[1]


# What a question is about


def _said_of(question: Question) -> list[object]:
    """The pins, since the slowest of all tells when a stay has settled; the carriers that the view looks at, and of the
    others what writes depend on."""
    looking = question.view
    carriers = [_carrier(one, name in looking.carriers) for name, one in looking.drive.carriers.items()]
    return [_rendered(looking.drive.pins), carriers]


def _carrier(carrier: Carrier, looked_at: bool) -> object:
    return _rendered(carrier) if looked_at else _rendered([carrier.name, carrier.update])


def _rendered(value: object, unsaid: frozenset[str] = frozenset()) -> object:
    """A value as JSON can say it, the same for equal values and another for others."""
    if value is None or isinstance(value, (str, int)):
        return value
    if isinstance(value, Enum):
        return [type(value).__name__, value.name]
    if isinstance(value, (tuple, list)):
        return [_rendered(part, unsaid) for part in value]
    if isinstance(value, frozenset):
        return sorted((_rendered(part, unsaid) for part in value), key=json.dumps)
    if isinstance(value, Fraction):
        return str(value)
    if isinstance(value, dict):
        return [[_rendered(key, unsaid), _rendered(part, unsaid)] for key, part in value.items()]
    kind: Any = type(value)
    return [kind.__name__, *(_rendered(getattr(value, name), unsaid) for name in _names(kind) if name not in unsaid)]


@cache
def _names(kind: Any) -> tuple[str, ...]:
    unsaid = {"place", *_UNSAID.get(kind.__name__, ())}
    return tuple(one.name for one in fields(kind) if one.name not in unsaid)


@cache
def program() -> str:
    """The digest of the text of the program and of the Python that runs it; raises OSError where it is not at hand."""
    house = Path(__file__).parent
    files = [Path(__file__), house / "evidence" / "certificate.py"]
    for room in PROGRAM:
        files += sorted((house / room).glob("*.py")) if (house / room).is_dir() else [house / f"{room}.py"]
    whole = hashlib.sha256(sys.version.encode())
    for file in files:
        text = file.read_bytes()
        whole.update(f"{file.relative_to(house)} {len(text)}\n".encode() + text)
    return whole.hexdigest()


# Files


def _folder() -> Path:
    folder = private_folder() / "answers"
    folder.mkdir(mode=0o700, exist_ok=True)
    if not private(folder.lstat()):
        raise PermissionError(folder)
    return folder


def _seal(name: str, body: bytes) -> bytes:
    """What tells a file that is whole, and under its own name, from any other."""
    return hashlib.sha256(name.encode() + b"\n" + body).hexdigest().encode()


def _forget_unused(folder: Path) -> None:
    if len(os.listdir(folder)) <= MOST_ENTRIES:
        return
    files = sorted(folder.iterdir(), key=lambda file: file.stat().st_mtime)
    for file in files[: len(files) - 2 * MOST_ENTRIES // 3]:
        file.unlink(missing_ok=True)


# Answers as data. A trace names the places of the file by what stands there, since they move when the file is edited.

_AT_RUN, _AT_ROW = -1, -2


def _data(found: Remembered, question: Question) -> dict[str, object]:
    answer, drive = found.answer, question.view.drive
    match answer:
        case Proven(method, zones, however_late, None):
            said: dict[str, object] = {"method": method, "stored": zones, "late": however_late}
        case Refuted(trace, held, overlap, zones, greatest):
            said = {"held": held, "overlap": overlap, "stored": zones, "greatest": greatest, **_run(trace, drive)}
        case Gap(time, trace, ""):
            said = {"time": time, **({} if trace is None else _run(trace, drive))}
        case bool():
            said = {"holds": answer}
        case _:
            raise TypeError(answer)
    return {"zones": found.zones, **said}


def _answer(said: Fields, question: Question) -> Remembered:
    return Remembered(_told(said, question), said.number("zones"))


def _told(said: Fields, question: Question) -> object:
    if question.kind == "holds":
        return said.flag("holds")
    trace = _trace(said, question) if "run" in said.data else None
    if question.kind == "gap":
        return Gap(_time(said, "time"), trace)
    if trace is None:
        return Proven(said.text("method"), said.number("stored"), said.flag("late"))
    held = None if said.of("held") is None else said.text("held")
    return Refuted(trace, held, _time(said, "overlap"), said.number("stored"), said.flag("greatest"))


def _time(said: Fields, name: str) -> int | None:
    return None if said.of(name) is None else said.number(name)


def _run(trace: Trace, drive: Drive) -> dict[str, object]:
    prolonged = None
    if trace.prolonged is not None:
        prolonged = [trace.hazard.literals.index(trace.prolonged[0]), trace.prolonged[1]]
    return {
        "run": run_data(trace),
        "interlocked": trace.interlocked,
        "prolonged": prolonged,
        "places": [_spot(drive, event) for event in trace.events],
    }


def _trace(said: Fields, question: Question) -> Trace:
    hazard, drive = question.view.hazard, question.view.drive
    plain = run_of(hazard, said.field("run"))
    spots = said.listed(said.of("places"), "places", len(plain.events))
    events = tuple(_placed(drive, one, spot) for one, spot in zip(plain.events, spots, strict=True))
    return Trace(
        hazard,
        plain.phases,
        events,
        plain.end,
        plain.overlap_from,
        plain.overlap_to,
        said.flag("interlocked"),
        _prolonged(said, hazard),
    )


def _prolonged(said: Fields, hazard: Hazard) -> Any:
    if said.of("prolonged") is None:
        return None
    place, time = (said.whole(one, "prolonged") for one in said.listed(said.of("prolonged"), "prolonged", 2))
    return hazard.literals[place], time


def _spots(drive: Drive, event: Event) -> dict[int, object]:
    """The places of the file that an event can have, by names that an edit does not change."""
    if event.index < 0:
        return {}
    run = (drive.trips if event.trip else drive.moves)[event.index]
    row = {_AT_ROW: drive.modes[run.target].place} if run.target in drive.modes else {}
    return {_AT_RUN: run.place, **row, **{number: step.place for number, step in enumerate(run.steps)}}


def _spot(drive: Drive, event: Event) -> int | None:
    if event.place is None:
        return None
    (found,) = (name for name, place in _spots(drive, event).items() if place == event.place)
    return found


def _placed(drive: Drive, event: Event, spot: object) -> Event:
    place: Any = None if spot is None else _spots(drive, event)[spot]  # type: ignore[index]
    return Event(event.time, event.act, event.name, event.index, event.trip, event.writes, place, event.cycles)

