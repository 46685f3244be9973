"""Every name that stands in a file: of what kind of thing it is, and whether it is given its meaning there."""

from collections.abc import Iterable, Iterator
from enum import Enum
from typing import NamedTuple

from seqcheck.language import syntax as s
from seqcheck.language.lines import Book


class Kind(Enum):
    """What a name can be of. WAIVED is a leg, switch, mode, event or trip: whichever has the name."""

    QUANTITY = "quantity"
    PART = "part"
    CARRIER = "carrier"
    SWITCH = "switch"
    NODE = "node"
    MODE = "mode"
    EVENT = "event"
    TRIP = "trip"
    PIN = "pin"
    PORT = "port"
    FILE = "file"
    WAIVED = "waived"


class Named(NamedTuple):
    """A name where it stands; `defines` where it gets its meaning."""

    word: s.Word
    kind: Kind
    defines: bool = False


def names_of(book: Book) -> list[Named]:
    """All names of a file in the order of their places."""
    lines = [*book.heads.values(), *book.singles, *(one for own in book.sections.values() for one in own)]
    return sorted((one for line in lines for one in names_in(line.node)), key=lambda one: one.word.place)


def names_in(node: s.Node) -> Iterator[Named]:
    """The names of one line."""
    match node:
        case s.RailsLine() | s.SourcesLine() | s.CapacitorLine() | s.LegLine():
            yield from _of_supplies(node)
        case s.SwitchLine() | s.DiodeLine() | s.WindingLine():
            yield from _of_elements(node)
        case s.PartLine() | s.PathLine() | s.InterlockLine() | s.PinLine() | s.CarrierLine():
            yield from _of_signals(node)
        case s.ColumnsLine(switches):
            yield from _all(switches, Kind.SWITCH)
        case s.RowLine(name, cells, facts, means):
            yield Named(name, Kind.MODE, True)
            yield from _cells(cells)
            yield from _facts(facts)
            yield from _all((node for one in means for node in one.nodes), Kind.NODE)
        case s.StartLine() | s.MoveLine() | s.TripLine() | s.SetLine() | s.WaitLine():
            yield from _of_motion(node)
        case s.MarginLine() | s.NeverLine() | s.ClearsLine() | s.LastsLine() | s.ApartLine():
            yield from _of_rules(node)
        case s.ToleratesLine() | s.WaiveLine():
            yield from _of_rules(node)
        case _:
            yield from _of_singles(node)


def _all(words: Iterable[s.Word], kind: Kind, defines: bool = False) -> Iterator[Named]:
    return (Named(word, kind, defines) for word in words)


def _amounts(*said: s.Operand | s.Range | s.Sign | None) -> Iterator[Named]:
    """The quantities that stand where an amount or a range can stand."""
    for one in said:
        if isinstance(one, s.Word):
            yield Named(one, Kind.QUANTITY)
        elif isinstance(one, s.Range):
            yield from _amounts(one.lo, one.hi if one.hi is not one.lo else None)


def _cells(cells: Iterable[s.CellWord]) -> Iterator[Named]:
    return _all((cell.carrier for cell in cells if cell.carrier is not None), Kind.CARRIER)


def _facts(facts: Iterable[s.FactWord]) -> Iterator[Named]:
    return _all((node for fact in facts for node in fact.nodes), Kind.NODE)


def _of_singles(node: s.Node) -> Iterator[Named]:
    match node:
        case s.ClockLine(frequency, within, late):
            yield from _amounts(frequency, within, late)
        case s.LetLine(name, formula):
            yield Named(name, Kind.QUANTITY, True)
            yield from _amounts(*formula.items)
        case s.UseLine(path):
            yield Named(path, Kind.FILE)
        case s.WritesLine(_, gap, _):
            yield from _amounts(gap)
        case s.LoopLine(least):
            yield from _amounts(least)


def _of_supplies(node: s.RailsLine | s.SourcesLine | s.CapacitorLine | s.LegLine) -> Iterator[Named]:
    match node:
        case s.RailsLine(nodes) | s.SourcesLine(nodes):
            yield from _all(nodes, Kind.NODE, True)
        case s.CapacitorLine(positive, negative):
            yield from _all((positive, negative), Kind.NODE)
        case s.LegLine(output, high, low, between):
            yield Named(output, Kind.NODE, True)
            yield from _all((high, low), Kind.SWITCH, True)
            yield from _all(between or (), Kind.NODE)


def _of_elements(node: s.SwitchLine | s.DiodeLine | s.WindingLine) -> Iterator[Named]:
    match node:
        case s.SwitchLine(name, poles, _):
            yield Named(name, Kind.SWITCH, True)
            yield from _all((end for pole in poles for end in pole), Kind.NODE)
        case s.DiodeLine(start, end):
            yield from _all((start, end), Kind.NODE)
        case s.WindingLine(ends, _):
            yield from _all(ends, Kind.NODE)


def _of_signals(node: s.SignalLine) -> Iterator[Named]:
    match node:
        case s.PartLine(name, on, off, difference):
            yield Named(name, Kind.PART, True)
            yield from _amounts(on, off, difference)
        case s.PathLine(switches, parts):
            yield from _all(switches, Kind.SWITCH)
            yield from _all(parts, Kind.PART)
        case s.InterlockLine(first, second, dead):
            yield from _all((first, second), Kind.SWITCH)
            yield from _amounts(dead)
        case s.PinLine(switch, pin, _, _, after, port):
            yield Named(switch, Kind.SWITCH)
            yield Named(pin, Kind.PIN, True)
            yield from _amounts(after)
            yield from _all((port,) if port else (), Kind.PORT)
        case s.CarrierLine(name, frequency, within, duty, upper, dead, _):
            yield Named(name, Kind.CARRIER, True)
            yield from _amounts(frequency, within, duty, upper, dead)


def _of_motion(node: s.StartLine | s.MoveLine | s.TripLine | s.SetLine | s.WaitLine) -> Iterator[Named]:
    match node:
        case s.StartLine(mode):
            yield Named(mode, Kind.MODE)
        case s.MoveLine(origin, target, trigger, _, facts):
            yield from _all((*origin.modes, target), Kind.MODE)
            if isinstance(trigger, s.WhenWord):
                yield Named(trigger.event, Kind.EVENT)
                yield from _amounts(trigger.earliest, trigger.latest)
            else:
                yield from _amounts(trigger)
            yield from _facts(facts)
        case s.TripLine(name, origin, target, within, _, facts):
            yield Named(name, Kind.TRIP, True)
            yield from _all((*origin.modes, target), Kind.MODE)
            yield from _amounts(within)
            yield from _facts(facts)
        case s.SetLine(settings):
            yield from _all((switch for switch, _ in settings), Kind.SWITCH)
            yield from _cells(cell for _, cell in settings)
        case s.WaitLine(time):
            yield from _amounts(time)


def _of_rules(node: s.RuleLine) -> Iterator[Named]:
    match node:
        case s.MarginLine(least):
            yield from _amounts(least)
        case s.NeverLine(literals):
            yield from _all((switch for switch, _ in literals), Kind.SWITCH)
        case s.ClearsLine(trip, switches, within):
            yield Named(trip, Kind.TRIP)
            yield from _all(switches, Kind.SWITCH)
            yield from _amounts(within)
        case s.LastsLine(switch, _, limit):
            yield Named(switch, Kind.SWITCH)
            yield from _amounts(limit)
        case s.ApartLine(first, second, least):
            yield from _all((first, second), Kind.MODE)
            yield from _amounts(least)
        case s.ToleratesLine(modes):
            yield from _all(modes.modes, Kind.MODE)
        case s.WaiveLine(_, name, _):
            yield Named(name, Kind.WAIVED)
