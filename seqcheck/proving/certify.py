"""What the prover hands out of a proof, as plain data in the drive's own words: here the zones that a search stored."""

from seqcheck.drive import Command, cell_text
from seqcheck.firmware import Firmware, State
from seqcheck.proving.keys import (
    C_BOTH,
    C_OFF,
    C_ON,
    CARRIER,
    CODES,
    DRIVEN,
    FALL,
    GAP,
    HOLD,
    LATELY,
    LOCK,
    PIN,
    RISE,
    SINCE,
    SPAN,
    Key,
    X,
    Y,
)
from seqcheck.proving.location import Location
from seqcheck.proving.projection import Projection
from seqcheck.writing import Writing
from seqcheck.zones import INFINITE

Data = dict[str, object]

_CARRIERS = ("high dead", "high", "low dead", "low", "anywhere")
_LOCKS = ("blocked", "waiting", "clear")
_LITERALS = (
    *("out", "entering", "in", "leaving", "blip"),
    *("idle", "young", "long", "struck", "arrived", "late"),
)
_NAMES = {X: "x", Y: "y", GAP: "gap", SINCE: "since"}
COMMANDS = {CODES[one]: one.value for one in Command}
_CLOCKS = {CARRIER: "carrier", HOLD: "held", PIN: "pin", LOCK: "guard", RISE: "in", FALL: "out"}

assert tuple(CODES[one] for one in (Command.OFF, Command.ON, Command.UNKNOWN)) == (C_OFF, C_ON, C_BOTH)


def cover(projection: Projection, however_late: bool) -> Data:
    """The cover of a search that ran to its end and found no hazard, for `evidence.certificate`."""
    view = projection.view
    stored = sorted(
        (place for place in projection.locations() if place.passed),
        key=lambda place: repr(place.key),
    )
    return {
        "however late": however_late,
        "switches": list(view.switches),
        "carriers": list(view.carriers),
        "entries": [_entry(projection, location) for location in stored],
    }


def _entry(projection: Projection, location: Location) -> Data:
    key = location.key
    assert isinstance(key, Key)
    size = location.size
    return {
        "state": _state(projection, key),
        "clocks": [_clock(projection.clock_name(key, place)) for place in range(1, size)],
        "zones": [_bounds(zone, size) for zone in sorted(zone for zone, _ in location.passed)],
    }


def _clock(name: int) -> str:
    if name in _NAMES:
        return _NAMES[name]
    return f"{_CLOCKS[name - name % SPAN]} {name % SPAN}"


def _bounds(zone: list[int], size: int) -> list[list[int]]:
    """The bounds that say something: clocks are never negative, and none is above itself."""
    return [
        [upper, lower, zone[upper * size + lower]]
        for upper in range(size)
        for lower in range(size)
        if upper != lower and zone[upper * size + lower] < INFINITE and (upper or zone[lower] < 0)
    ]


def _state(projection: Projection, key: Key) -> Data:
    return {
        **stand(projection.firmware, key.state),
        "carriers": [_CARRIERS[one] for one in key.carriers],
        "pins": [_pin(one) for one in key.pins],
        "guards": [_LOCKS[one] for one in key.locks],
        "literals": [*(_LITERALS[one] for one in key.literals), *_ended(projection, key)],
    }


def _ended(projection: Projection, key: Key) -> list[str]:
    """Whether the literal after which a gap is looked for was possible less than that ago."""
    if projection.manner.gap is None:
        return []
    return ["ended" if key.ended == LATELY else "never"]


def stand(firmware: Firmware, state: State) -> Data:
    """Where the firmware stands, what is written, in effect and held."""
    columns, writing = firmware.drive.columns, firmware.writing
    written, effective, holds = state.put
    return {
        "mode": state.mode,
        "run": state.run,
        "item": state.item,
        "left": [[[columns[switch], word(writing, cell)] for switch, cell in group] for group in state.left],
        "next": [state.soonest, state.latest],
        "hand": state.hand,
        "written": [word(writing, cell) for cell in written],
        "effective": [word(writing, cell) for cell in effective],
        "held": [
            [writing.carriers[carrier], [name for place, name in enumerate(columns) if bits >> place & 1]]
            for carrier, bits in holds
        ],
    }


def word(writing: Writing, cell: int) -> str:
    """A cell as the file writes it."""
    return cell_text(writing.cell(cell))


def _pin(state: int) -> str:
    if state == DRIVEN:
        return "driven"
    return COMMANDS[state >> 1] + (" going" if state & 1 else "")
