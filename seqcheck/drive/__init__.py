"""The checked model of one drive: what a file says after every name, unit and rule of the language has been checked.

All times are whole picoseconds. Durations that firmware times are already widened by the clock's tolerance and rounded
outwards; `late by at most` is not yet added to them (it is `Clock.late`). `any`, `set all off` and lists of modes are
already expanded. Every object keeps its place in the source.
"""

from seqcheck.drive.cells import (
    Carrier,
    Cell,
    Fixed,
    Follow,
    Update,
    cell_text,
)
from seqcheck.drive.motion import (
    After,
    AtOnce,
    Clock,
    How,
    Move,
    Order,
    SetStep,
    Step,
    Trigger,
    Trip,
    WaitStep,
    When,
    Writes,
)
from seqcheck.drive.rules import (
    ApartRule,
    ClearsRule,
    Lasts,
    LastsRule,
    MarginRule,
    NeverRule,
    Rule,
    ToleratesRule,
    Waiver,
)
from seqcheck.drive.signals import (
    Command,
    Interlock,
    Level,
    Part,
    Pin,
)
from seqcheck.drive.stage import (
    Capacitor,
    Conducts,
    Diode,
    Leg,
    Rails,
    Sources,
    Stage,
    Switch,
    Winding,
)
from seqcheck.drive.table import (
    Above,
    CurrentInto,
    CurrentOut,
    Known,
    Means,
    Mode,
    Purpose,
    fact_words,
)
from seqcheck.quantities import Interval
from seqcheck.records import dataclass
from seqcheck.source import Place

RESET = "reset"

__all__ = [
    "RESET",
    "Above",
    "After",
    "ApartRule",
    "AtOnce",
    "Capacitor",
    "Carrier",
    "Cell",
    "ClearsRule",
    "Clock",
    "Command",
    "Conducts",
    "CurrentInto",
    "CurrentOut",
    "Diode",
    "Drive",
    "Fixed",
    "Follow",
    "How",
    "Interlock",
    "Known",
    "Lasts",
    "LastsRule",
    "Leg",
    "Level",
    "Library",
    "MarginRule",
    "Means",
    "Mode",
    "Move",
    "NeverRule",
    "Order",
    "Part",
    "Pin",
    "Purpose",
    "Rails",
    "Rule",
    "SetStep",
    "Sources",
    "Stage",
    "Step",
    "Switch",
    "ToleratesRule",
    "Trigger",
    "Trip",
    "Update",
    "WaitStep",
    "Waiver",
    "When",
    "Winding",
    "Writes",
    "cell_text",
    "fact_words",
]


@dataclass(frozen=True, slots=True)
class Drive:
    """All that one file says.

    `columns` are the switches in table order; `modes` are the rows in file order, then `reset` if it counts as a mode.
    `paths` has an entry for every switch (empty: no path). `pins` has one for each switch that has its line.
    """

    place: Place
    title: str
    clock: Clock | None
    writes: Writes | None
    loop: Interval | None
    stage: Stage
    parts: dict[str, Part]
    paths: dict[str, tuple[Part, ...]]
    interlocks: tuple[Interlock, ...]
    pins: dict[str, Pin]
    carriers: dict[str, Carrier]
    columns: tuple[str, ...]
    modes: dict[str, Mode]
    start: str
    moves: tuple[Move, ...]
    trips: tuple[Trip, ...]
    rules: tuple[Rule, ...]
    waivers: tuple[Waiver, ...]


@dataclass(frozen=True, slots=True)
class Library:
    """All that a file says which only serves `use`: names for other files, and nothing that could be proven.

    The names are those of its quantities, parts and carriers, with those of the files that it uses itself.
    """

    place: Place
    title: str
    quantities: tuple[str, ...]
    parts: tuple[str, ...]
    carriers: tuple[str, ...]
