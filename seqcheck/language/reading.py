"""From the text of a file to the checked drive or library: every mistake at once, or one of them."""

from collections.abc import Callable

from seqcheck.drive import RESET, Drive, Fixed, How, Library, Mode, Writes
from seqcheck.language.flow import check_flow
from seqcheck.language.judging import Rules
from seqcheck.language.lines import Book, book_of
from seqcheck.language.motion import Motion
from seqcheck.language.notes import Notes
from seqcheck.language.scope import Scope
from seqcheck.language.signals import read_interlocks, read_paths, read_pins
from seqcheck.language.stages import StageReader
from seqcheck.language.syntax import DriveLine, LoopLine, WritesLine
from seqcheck.language.tables import Table
from seqcheck.language.uses import Uses
from seqcheck.language.values import Unit
from seqcheck.language.words import REQUIRED, SERVING, STARTS
from seqcheck.messages import Problem, Problems
from seqcheck.quantities import INSTANT, Interval, widened
from seqcheck.source import Place


def read(text: str, file: str, fetch: Callable[[str], str]) -> Drive:
    """As `read_any`, where a drive is needed: a file that only serves `use` raises Problems."""
    found = read_any(text, file, fetch)
    if isinstance(found, Library):
        way_out = "name a file that uses it, or add the sections 'stage', 'modes' and 'moves'"
        problem = Problem(found.place, "no-drive", "this file only serves 'use', it describes no drive", way_out)
        raise Problems([problem])
    return found


def read_any(text: str, file: str, fetch: Callable[[str], str]) -> Drive | Library:
    """The checked drive that a text describes, or the library if it only serves `use`.

    `fetch` gives the text of a file that `use` names, its path joined to the folder of the file that says it; it
    raises OSError, or Problems. Raises Problems with all mistakes of all files read.
    """
    notes = Notes()
    book = book_of(text, file, notes)
    if _only_serves(book, notes):
        return _library(book, notes, fetch)
    return _drive(book, notes, fetch)


def _only_serves(book: Book, notes: Notes) -> bool:
    """Whether a file names something for others and has nothing that only a drive has."""
    said = {*book.heads, *notes.broken} & STARTS
    names = bool(book.singles) or bool(said & {"let", "use", "parts", "carriers"})
    return names and said <= SERVING


def _library(book: Book, notes: Notes, fetch: Callable[[str], str]) -> Library:
    """The library of a book. Where it has no clock, its ticks are those of a file that is not at hand."""
    if "clock" not in book.heads:
        notes.broken.add("clock")
    scope = Scope(book, notes)
    names = Uses(fetch, notes.found).names(scope)
    scope.clock()
    if notes.found:
        raise Problems(notes.found)
    title = book.heads["drive"]
    assert isinstance(title.node, DriveLine)
    return Library(
        title.place,
        title.node.title.text,
        tuple(scope.lets),
        tuple(names.seen["part"]),
        tuple(names.seen["carrier"]),
    )


def _drive(book: Book, notes: Notes, fetch: Callable[[str], str]) -> Drive:
    _check_sections(book, notes)
    scope = Scope(book, notes)
    names = Uses(fetch, notes.found).names(scope)
    stage = StageReader(notes)
    head = book.heads.get("stage")
    circuit = stage.stage(head.place if head else book.top, book.sections["stage"])
    switches = tuple(stage.names)
    paths = read_paths(scope, switches, names.parts, names.seen["part"])
    interlocks = read_interlocks(scope, switches)
    pins = read_pins(scope, switches)
    table = Table(book, notes, stage, names.seen["carrier"])
    motion = Motion(scope, table)
    rules = Rules(scope, table, motion)
    writes, loop = _writes(scope), _loop(scope)
    clock = scope.clock()
    _check_pins(scope, table, motion, switches)
    if notes.found:
        raise Problems(notes.found)
    title = book.heads["drive"]
    assert isinstance(title.node, DriveLine)
    modes = table.modes if motion.resets is None else {**table.modes, RESET: _reset(motion.resets, len(table.columns))}
    drive = Drive(
        title.place,
        title.node.title.text,
        clock,
        writes,
        loop,
        circuit,
        names.parts,
        paths,
        interlocks,
        pins,
        names.carriers,
        table.columns,
        modes,
        motion.start,
        tuple(motion.moves),
        tuple(motion.trips),
        tuple(rules.rules),
        tuple(rules.waivers),
    )
    check_flow(drive, notes)
    if notes.found:
        raise Problems(notes.found)
    return drive


def _check_sections(book: Book, notes: Notes) -> None:
    """Every drive has a stage, a table and moves."""
    for section in REQUIRED:
        if section not in book.heads:
            if section not in notes.broken:
                text = f"the section '{section}' is missing"
                notes.add(book.top, "missing-section", text, f"add a section '{section}'")
            notes.broken.add(section)


def _writes(scope: Scope) -> Writes | None:
    line = scope.book.heads.get("writes")
    if line is None or not isinstance(line.node, WritesLine):
        return None
    said = line.node
    gap = INSTANT if said.gap is None or said.how is How.TOGETHER else scope.firmware(said.gap)
    return None if gap is None else Writes(line.place, said.how, gap, said.order)


def _loop(scope: Scope) -> Interval | None:
    line = scope.book.heads.get("loop")
    if line is None or not isinstance(line.node, LoopLine):
        return None
    least = scope.at_least_zero(line.node.least, Unit.DURATION)
    return None if least is None else widened(least, None, scope.tolerance)


def _check_pins(scope: Scope, table: Table, motion: Motion, switches: tuple[str, ...]) -> None:
    """Where `free` or `reset` is used every switch has its line in `pins`."""
    uses = [(place, word) for place, word in ((table.frees, "free"), (motion.resets, RESET)) if place is not None]
    if not uses or {"pins", "stage"} & scope.notes.broken:
        return
    place, word = min(uses)
    given = {line.node.switch.text for line in scope.book.sections["pins"]}  # type: ignore[union-attr]
    lacking = [f"'{one}'" for one in switches if one not in given]
    if lacking:
        text = f"'{word}' releases every pin, but 'pins' has no line for {', '.join(lacking)}"
        way_out = "add a line 'SWITCH PIN active LEVEL rests LEVEL' for each"
        scope.notes.add(place, "missing-pins", text, way_out)


def _reset(place: Place, width: int) -> Mode:
    """The built-in mode: every pin released."""
    return Mode(place, RESET, (Fixed.FREE,) * width, (), None)
