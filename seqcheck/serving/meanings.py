"""What stands at a place of a text: what it means, where it gets its meaning, and what may be written there."""

import os
import re
from collections.abc import Callable, Iterable, Iterator
from fractions import Fraction

from seqcheck.drive import RESET, Drive, Move, Trip, WaitStep
from seqcheck.effects import Row
from seqcheck.language.expecting import expected
from seqcheck.language.names import Kind, Named, names_of
from seqcheck.language.reading import Draft
from seqcheck.language.values import Amount, Unit
from seqcheck.language.words import SECTIONS
from seqcheck.messages import Problems
from seqcheck.reports import hovers, nearest
from seqcheck.serving.documents import Study
from seqcheck.serving.positions import Lines
from seqcheck.source import Place
from seqcheck.verdict import Budget

_FIRST = re.compile(r"[ \t]*([a-z]+)")
_WORD = re.compile(r"[A-Za-z0-9_-]*$")
_ONCE = frozenset({*SECTIONS, "drive", "clock", "writes", "loop"})
_OF_WAIVED = (Kind.NODE, Kind.SWITCH, Kind.MODE, Kind.EVENT, Kind.TRIP)


def named_at(study: Study, line: int, column: int) -> Named | None:
    """The name that a column lies in or just after."""
    for one in names_of(study.draft.book):
        if one.word.place.line == line and one.word.place.column <= column <= one.word.place.end_column:
            return one
    return None


# What it means


def meaning(study: Study, line: int, column: int, margins: Budget | str | None = None) -> tuple[str, Place | None]:
    """What stands at a place, in plain text, with the name's own place; empty where there is nothing to say.

    Where no name stands it is the move, trip or wait of the line. `margins` are those of the text, or why there are
    none, if they were measured.
    """
    named = named_at(study, line, column)
    if named is None:
        said = _of_line(study.draft, line)
        return "\n".join([said, *_set_by(line, margins)]) if said else "", None
    kinds: Iterable[Kind] = (named.kind,)
    if named.kind is Kind.WAIVED:
        kinds = [kind for kind in _OF_WAIVED if named.word.text in known_names(study.draft, kind)]
    texts = [text for kind in kinds if (text := _MEANINGS[kind](study, named.word.text))]
    left = _left(study, named, margins) if texts else []
    return "\n".join(["\n\n".join(texts), *left]), named.word.place


def _left(study: Study, named: Named, margins: Budget | str | None) -> list[str]:
    """The margins that a name has to do with: those of a switch, or those that the row of a mode or a trip sets."""
    name = named.word.text
    if named.kind is Kind.SWITCH and isinstance(study.found, Drive):
        if isinstance(margins, Budget):
            return nearest.of_switch(name, margins)
        return [nearest.PENDING if margins is None else f"margins: not measured, {margins}"]
    if named.kind is Kind.MODE:
        row = study.draft.table.modes.get(name)
        return _set_by(row.place.line, margins) if row is not None else []
    trips = study.draft.motion.trips if named.kind is Kind.TRIP else ()
    return [line for one in trips if one.name == name for line in _set_by(one.place.line, margins)]


def _set_by(line: int, margins: Budget | str | None) -> list[str]:
    """The margins that a row, move or trip sets."""
    return nearest.of_line(line, margins) if isinstance(margins, Budget) else []


def _keeping(draft: Draft) -> hovers.Keeping:
    clock, loop = draft.clock, draft.loop
    tolerance = clock.tolerance if clock else Fraction(0)
    return hovers.Keeping(tolerance, (clock.late or 0) if clock else 0, loop.lo if loop else 0)


def _of_line(draft: Draft, line: int) -> str:
    keeping = _keeping(draft)
    for move in draft.motion.moves:
        if move.place.line == line:
            return hovers.move(move, keeping)
    for trip in draft.motion.trips:
        if trip.place.line == line:
            return hovers.trip(trip, keeping)
    runs: list[Move | Trip] = [*draft.motion.moves, *draft.motion.trips]
    waits = (step for run in runs for step in run.steps if isinstance(step, WaitStep) and step.place.line == line)
    return next((hovers.step(step, keeping) for step in waits), "")


def _quantity(study: Study, name: str) -> str:
    let = study.draft.scope.lets.get(name)
    return "" if let is None or let.amount is None else _amount(name, let.amount, study.draft)


def _amount(name: str, amount: Amount, draft: Draft) -> str:
    if amount.unit is Unit.DURATION:
        return hovers.duration(name, amount.value, _keeping(draft) if draft.clock else None)
    if amount.unit is Unit.FREQUENCY:
        return hovers.frequency(name, amount.value)
    return (hovers.ratio if amount.unit is Unit.RATIO else hovers.number)(name, amount.value)


def _part(study: Study, name: str) -> str:
    found = study.draft.names.parts.get(name)
    return hovers.part(found) if found else ""


def _carrier(study: Study, name: str) -> str:
    found = study.draft.names.carriers.get(name)
    return hovers.carrier(found) if found else ""


def _switch(study: Study, name: str) -> str:
    draft = study.draft
    return hovers.switch(name, draft.circuit, draft.paths, draft.pins) if name in draft.stage.names else ""


def _node(study: Study, name: str) -> str:
    return hovers.node(name, study.draft.circuit) if name in study.draft.stage.nodes() else ""


def _mode(study: Study, name: str) -> str:
    if name == RESET:
        return hovers.reset()
    mode = study.draft.table.modes.get(name)
    if mode is None:
        return ""
    row = _row(study.found, name) if isinstance(study.found, Drive) else None
    text = hovers.mode(mode, study.draft.table.columns, row)
    return text if study.found is not None else f"{text}\nwhat its row does is shown once the file has no mistakes"


def _row(drive: Drive, name: str) -> Row | None:
    """The row read back; None where it stands for more than can be read."""
    from seqcheck.circuit.reading import RowReader

    try:
        return RowReader(drive).row(drive.modes[name])
    except Problems:
        return None


def _event(study: Study, name: str) -> str:
    draft = study.draft
    return hovers.event(name, draft.motion.moves, _keeping(draft)) if name in draft.motion.events else ""


def _trip(study: Study, name: str) -> str:
    trips = study.draft.motion.trips
    return next((hovers.trip(one, _keeping(study.draft)) for one in trips if one.name == name), "")


def _pin(study: Study, name: str) -> str:
    return next((hovers.pin(one) for one in study.draft.pins.values() if one.name == name), "")


def _port(study: Study, name: str) -> str:
    pins = [one for one in study.draft.pins.values() if one.port == name]
    return "\n".join([f"port {name}", *map(hovers.pin, pins)])


def _file(study: Study, name: str) -> str:
    return ""


_MEANINGS: dict[Kind, Callable[[Study, str], str]] = {
    Kind.QUANTITY: _quantity,
    Kind.PART: _part,
    Kind.CARRIER: _carrier,
    Kind.SWITCH: _switch,
    Kind.NODE: _node,
    Kind.MODE: _mode,
    Kind.EVENT: _event,
    Kind.TRIP: _trip,
    Kind.PIN: _pin,
    Kind.PORT: _port,
    Kind.FILE: _file,
}


# Where it gets its meaning


def definitions(study: Study, named: Named) -> list[Place]:
    """The places that give a name its meaning, in this file or in one that it uses; the first use where none does."""
    kinds = _OF_WAIVED if named.kind is Kind.WAIVED else (named.kind,)
    return [place for kind in kinds for place in _definition(study, kind, named.word.text)]


def _definition(study: Study, kind: Kind, name: str) -> Iterator[Place]:
    if kind is Kind.FILE:
        file = os.path.normpath(os.path.join(os.path.dirname(study.draft.book.file), name))
        yield Place(file, 1, 1, 1, 1)
        return
    brought = _brought(study.draft, kind, name)
    if brought is not None:
        yield brought
        return
    own = [one for one in names_of(study.draft.book) if one.kind is kind and one.word.text == name]
    defining = [one for one in own if one.defines] or own
    yield from (one.word.place for one in defining[:1] if kind is not Kind.MODE or one.defines)


def _brought(draft: Draft, kind: Kind, name: str) -> Place | None:
    """Where a name of a kind that `use` brings in is given its meaning."""
    if kind is Kind.QUANTITY:
        let = draft.scope.lets.get(name)
        return let.place if let else None
    return draft.names.seen[kind.value].get(name) if kind in (Kind.PART, Kind.CARRIER) else None


# What may be written


def known_names(draft: Draft, kind: Kind) -> list[str]:
    """All names of a kind, in the order of the file."""
    match kind:
        case Kind.QUANTITY:
            return list(draft.scope.lets)
        case Kind.PART | Kind.CARRIER:
            return list(draft.names.seen[kind.value])
        case Kind.SWITCH:
            return list(draft.stage.names)
        case Kind.NODE:
            return list(draft.stage.nodes())
        case Kind.MODE:
            return [*draft.table.named, RESET]
        case Kind.EVENT:
            return list(draft.motion.events)
        case Kind.TRIP:
            return list(draft.motion.trip_names)
        case Kind.PORT:
            return list(dict.fromkeys(pin.port for pin in draft.pins.values() if pin.port))
        case Kind.WAIVED:
            return list(dict.fromkeys(one for kind in _OF_WAIVED for one in known_names(draft, kind)))
    return []


def offers(study: Study, lines: Lines, line: int, column: int) -> tuple[int, list[tuple[str, Kind | None]]]:
    """What may be written at a place: the column at which the word there begins, and the words, with their kinds.

    Names come before words of the language. Lines and sections that a file has already are left out.
    """
    before = lines.line(line)[: column - 1]
    begun = _WORD.search(before)
    start = begun.start() if begun else len(before)
    wanted = expected(before[:start], _section(lines, line))
    draft = study.draft
    names: dict[str, Kind | None] = {}
    for kind in sorted(wanted.kinds, key=lambda one: one.value):
        names |= {name: kind for name in known_names(draft, kind) if name not in names}
    taken = _ONCE & draft.book.heads.keys() if not before[:start].strip() else frozenset()
    words = dict.fromkeys(word for word in wanted.words if word not in taken)
    return start + 1, [*names.items(), *((word, None) for word in words if word not in names)]


def _section(lines: Lines, line: int) -> str:
    """The section that a line is in."""
    for number in range(line - 1, 0, -1):
        first = _FIRST.match(lines.line(number))
        if first and first[1] in SECTIONS:
            return first[1]
    return ""
