"""From the text of a file to the checked drive or library: every mistake at once, or one of them."""

from collections.abc import Callable, Mapping
from fractions import Fraction

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
    return needed(read_any(text, file, fetch))


def needed(found: Drive | Library) -> Drive:
    """What was read, where a drive is needed; a library raises Problems."""
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
    return settled(drafted(text, file, fetch))


class Draft:
    """All that could be read of a file, mistakes or not; `notes.found` has the mistakes of all files read.

    `serves` tells a library from a drive. What a mistake left out is missing from the rest. `given` are values in place
    of what is said of a `let`.
    """

    def __init__(
        self, book: Book, notes: Notes, fetch: Callable[[str], str], given: Mapping[str, Fraction] | None = None
    ) -> None:
        self.book = book
        self.notes = notes
        self.serves = _only_serves(book, notes)
        if not self.serves:
            _check_sections(book, notes)
        elif "clock" not in book.heads:
            notes.broken.add("clock")  # its ticks are those of a file that is not at hand
        self.scope = Scope(book, notes, given=given)
        self.names = Uses(fetch, notes.found).names(self.scope)
        self.stage = StageReader(Notes() if self.serves else notes)  # a library has none and needs none
        head = book.heads.get("stage")
        self.circuit = self.stage.stage(head.place if head else book.top, book.sections["stage"])
        switches = tuple(self.stage.names)
        self.paths = read_paths(self.scope, switches, self.names.parts, self.names.seen["part"])
        self.interlocks = read_interlocks(self.scope, switches)
        self.pins = read_pins(self.scope, switches)
        self.table = Table(book, notes, self.stage, self.names.seen["carrier"])
        self.motion = Motion(self.scope, self.table)
        self.rules = Rules(self.scope, self.table, self.motion)
        self.writes, self.loop = _writes(self.scope), _loop(self.scope)
        self.clock = self.scope.clock()
        _check_pins(self.scope, self.table, self.motion, switches)


def drafted(text: str, file: str, fetch: Callable[[str], str]) -> Draft:
    """As `read_any`, whatever the text: what could be read of it, with its mistakes."""
    notes = Notes()
    return Draft(book_of(text, file, notes), notes, fetch)


def settled(draft: Draft) -> Drive | Library:
    """The checked drive or library of a draft; raises Problems with all its mistakes."""
    if draft.notes.found:
        raise Problems(draft.notes.found)
    title = draft.book.heads["drive"]
    assert isinstance(title.node, DriveLine)
    if draft.serves:
        seen = draft.names.seen
        names = tuple(draft.scope.lets), tuple(seen["part"]), tuple(seen["carrier"])
        return Library(title.place, title.node.title.text, *names)
    drive = _drive(draft, title.place, title.node.title.text)
    check_flow(drive, draft.notes)
    if draft.notes.found:
        raise Problems(draft.notes.found)
    return drive


def _only_serves(book: Book, notes: Notes) -> bool:
    """Whether a file names something for others and has nothing that only a drive has."""
    said = {*book.heads, *notes.broken} & STARTS
    names = bool(book.singles) or bool(said & {"let", "use", "parts", "carriers"})
    return names and said <= SERVING


def _drive(draft: Draft, place: Place, title: str) -> Drive:
    table, motion = draft.table, draft.motion
    modes = table.modes if motion.resets is None else {**table.modes, RESET: _reset(motion.resets, len(table.columns))}
    return Drive(
        place,
        title,
        draft.clock,
        draft.writes,
        draft.loop,
        draft.circuit,
        draft.names.parts,
        draft.paths,
        draft.interlocks,
        draft.pins,
        draft.names.carriers,
        table.columns,
        modes,
        motion.start,
        tuple(motion.moves),
        tuple(motion.trips),
        tuple(draft.rules.rules),
        tuple(draft.rules.waivers),
    )


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
