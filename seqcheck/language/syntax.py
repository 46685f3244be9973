"""What one line says, before any name or unit is checked.

Named tuples, since this room is loaded at every start and they are much cheaper to define than data classes.
"""

from typing import NamedTuple

from seqcheck.drive import Conducts, Fixed, How, Lasts, Level, Order, Purpose, Update
from seqcheck.source import Place


class Word(NamedTuple):
    """A name, or the inside of a text in quotes."""

    place: Place
    text: str


# Quantities


class Term(NamedTuple):
    """A number with its unit, both as written; the unit is empty where there is none."""

    place: Place
    number: str
    unit: str


Operand = Word | Term


class Sign(NamedTuple):
    """An operation of a formula: `+ - * /`, or `neg` for a sign."""

    place: Place
    text: str


class Formula(NamedTuple):
    """The expression of a `let` in postfix order, so that no depth of parentheses needs recursion."""

    place: Place
    items: tuple[Operand | Sign, ...]


class Range(NamedTuple):
    """A duration with bounds; a missing bound is None. `D` alone has one operand as both."""

    place: Place
    lo: Operand | None
    hi: Operand | None


# Lines outside sections


class DriveLine(NamedTuple):
    title: Word


class ClockLine(NamedTuple):
    frequency: Operand
    within: Operand | None
    late: Operand | None


class LetLine(NamedTuple):
    name: Word
    formula: Formula


class UseLine(NamedTuple):
    path: Word


class WritesLine(NamedTuple):
    how: How
    gap: Range | None
    order: Order


class LoopLine(NamedTuple):
    least: Operand


class HeadLine(NamedTuple):
    """The head of a section other than `modes`."""


class ColumnsLine(NamedTuple):
    """The head of `modes`."""

    switches: tuple[Word, ...]


# Lines of the stage


class RailsLine(NamedTuple):
    nodes: tuple[Word, ...]


class SourcesLine(NamedTuple):
    nodes: tuple[Word, ...]


class CapacitorLine(NamedTuple):
    positive: Word
    negative: Word


class LegLine(NamedTuple):
    node: Word
    high: Word
    low: Word
    between: tuple[Word, Word] | None


class SwitchLine(NamedTuple):
    name: Word
    poles: tuple[tuple[Word, Word], ...]
    conducts: Conducts


class DiodeLine(NamedTuple):
    start: Word
    end: Word


class WindingLine(NamedTuple):
    ends: tuple[Word, ...]
    must_flow: bool


# Lines of the signal path


class PartLine(NamedTuple):
    name: Word
    on: Range
    off: Range
    difference: Operand | None


class PathLine(NamedTuple):
    switches: tuple[Word, ...]
    parts: tuple[Word, ...]


class InterlockLine(NamedTuple):
    first: Word
    second: Word
    dead: Range | None


class PinLine(NamedTuple):
    switch: Word
    pin: Word
    active_high: bool
    rests: Level
    after: Range | None
    port: Word | None


class CarrierLine(NamedTuple):
    name: Word
    frequency: Operand
    within: Operand | None
    duty: Operand
    upper: Operand | None
    dead: Range | None
    update: Update


# Rows, moves and trips


class CellWord(NamedTuple):
    """A cell: a fixed word, or a carrier."""

    place: Place
    fixed: Fixed | None
    carrier: Word | None
    inverted: bool


class FactWord(NamedTuple):
    """One thing that is known: `form` is `out`, `into` or `above`."""

    place: Place
    form: str
    nodes: tuple[Word, ...]


class MeansWord(NamedTuple):
    """What a row is for."""

    place: Place
    purpose: Purpose
    nodes: tuple[Word, ...]


class RowLine(NamedTuple):
    name: Word
    cells: tuple[CellWord, ...]
    facts: tuple[FactWord, ...]
    means: tuple[MeansWord, ...]


class Origin(NamedTuple):
    """Where moves and trips come from: the listed modes, or `any` but the listed ones."""

    place: Place
    any: bool
    modes: tuple[Word, ...]


class WhenWord(NamedTuple):
    event: Word
    earliest: Operand | None
    latest: Operand | None


class StartLine(NamedTuple):
    mode: Word


class MoveLine(NamedTuple):
    origin: Origin
    target: Word
    trigger: WhenWord | Range | None
    unbroken: bool
    facts: tuple[FactWord, ...]


class TripLine(NamedTuple):
    name: Word
    origin: Origin
    target: Word
    within: Operand | None
    at_once: bool
    facts: tuple[FactWord, ...]


class SetAllOffLine(NamedTuple):
    """`set all off`."""


class SetLine(NamedTuple):
    settings: tuple[tuple[Word, CellWord], ...]


class WaitLine(NamedTuple):
    time: Range


# Rules


class MarginLine(NamedTuple):
    least: Operand


class NeverLine(NamedTuple):
    literals: tuple[tuple[Word, bool], ...]


class ClearsLine(NamedTuple):
    trip: Word
    switches: tuple[Word, ...]
    within: Operand


class LastsLine(NamedTuple):
    switch: Word
    lasts: Lasts
    limit: Operand


class ApartLine(NamedTuple):
    first: Word
    second: Word
    least: Operand


class ToleratesLine(NamedTuple):
    modes: Origin


class WaiveLine(NamedTuple):
    check: Word
    name: Word
    reason: Word


Single = DriveLine | ClockLine | LetLine | UseLine | WritesLine | LoopLine | HeadLine | ColumnsLine
StageLine = RailsLine | SourcesLine | CapacitorLine | LegLine | SwitchLine | DiodeLine | WindingLine
SignalLine = PartLine | PathLine | InterlockLine | PinLine | CarrierLine
StepLine = SetAllOffLine | SetLine | WaitLine
RuleLine = MarginLine | NeverLine | ClearsLine | LastsLine | ApartLine | ToleratesLine | WaiveLine
Node = Single | StageLine | SignalLine | RowLine | StartLine | MoveLine | TripLine | StepLine | RuleLine


class Line(NamedTuple):
    """A line that could be read; its place spans what it says, without margin and comment."""

    place: Place
    node: Node
