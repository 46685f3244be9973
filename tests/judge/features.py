"""Which constructs of the language a drive uses, and a table of how often a campaign met each, safe and unsafe."""

import json
from collections import Counter
from collections.abc import Iterable, Iterator, Mapping
from itertools import pairwise
from typing import Any

from seqcheck.drive import (
    RESET,
    After,
    AtOnce,
    Conducts,
    Drive,
    Fixed,
    Follow,
    How,
    Known,
    Level,
    Move,
    Order,
    SetStep,
    Step,
    Update,
    WaitStep,
    When,
    cell_text,
)

DRAWN = (
    "clock", "clock within", "late by at most", "loop at least",
    "writes together", "writes one at a time", "writes by port", "turn-offs first", "turn-ons first", "in table order",
    "in any order", "gap of one length", "gap without an upper bound",
    "rails", "sources", "leg", "switch from to", "one way", "winding of two ends", "winding of one end",
    "part", "difference at most", "path of two parts", "no path", "interlock", "interlock dead time",
    "active high", "active low", "rests low", "rests high", "rests unknown", "rests after", "rests commanded on",
    "port",
    "carrier", "carrier within", "duty of one value", "duty of a range", "duty from 0 %", "duty to 100 %",
    "dead time", "no dead time", "updates at once", "updates at rise", "updates within a period",
    "two carriers",
    "rails of three", "capacitor", "diode", "two way", "must flow", "row with current", "move with current",
    "trip with current", "row means",
    "row on", "row off", "row keep", "row free", "row carrier", "row ~carrier", "row with above",
    "start reset", "start mode", "when", "earliest", "latest", "after", "at once", "move of several modes",
    "move into its own mode", "move to reset", "move out of reset", "unbroken", "move with above",
    "set", "set several", "set all off", "set carrier", "set ~carrier", "set on", "set free", "pulse of no length",
    "wait", "wait of a range", "wait at least", "wait first", "wait last",
    "trip", "trip from any", "trip within", "trip without within", "trip at once", "trip to reset", "trip with above",
    "trip with steps", "two trips",
)  # fmt: skip
"""What draws contain."""

UNDRAWN = ("several poles", "rule", "waiver")
"""What draws do not contain: rules are added to them where they are judged (`ruled`); several poles change only which
sets there are."""


def features(drive: Drive) -> Counter[str]:
    """How often each construct stands in a drive."""
    found: Counter[str] = Counter()
    for part in (_head, _stage, _paths, _pins, _carriers, _rows, _moves, _trips, _rest):
        found.update(part(drive))
    return found


def table(drives: Mapping[str, int], answers: Mapping[str, Mapping[str, int]]) -> str:
    """A line a construct: in how many drives, and how many of their hazards ended how.

    `answers` gives for a construct how often each of "safe", "unsafe" and "undecided" came up.
    """
    ends = ("safe", "unsafe", "undecided")
    lines = [f"{'construct':<26}{'drives':>9}" + "".join(f"{end:>11}" for end in ends)]
    for name in (*DRAWN, *UNDRAWN):
        counts = answers.get(name, {})
        lines.append(f"{name:<26}{drives.get(name, 0):>9}" + "".join(f"{counts.get(end, 0):>11}" for end in ends))
    return "\n".join(lines)


def _if(names: Mapping[str, bool]) -> Iterator[str]:
    return (name for name, there in names.items() if there)


def _head(drive: Drive) -> Iterator[str]:
    clock, writes = drive.clock, drive.writes
    if clock:
        yield "clock"
        yield from _if({"clock within": clock.tolerance > 0, "late by at most": clock.late is not None})
    if drive.loop:
        yield "loop at least"
    if writes is None:
        return
    yield f"writes {writes.how.value}"
    if writes.how is not How.TOGETHER:
        gap = writes.gap
        yield {Order.ANY: "in any order"}.get(writes.order, writes.order.value)
        yield from _if({"gap of one length": gap.lo == gap.hi, "gap without an upper bound": gap.hi is None})


def _stage(drive: Drive) -> Iterator[str]:
    stage = drive.stage
    yield from ("rails of three" if len(one.nodes) > 2 else "rails" for one in stage.rails)
    yield from ("sources" for _ in stage.sources)
    yield from ("capacitor" for _ in stage.capacitors)
    yield from ("diode" for _ in stage.diodes)
    yield from ("leg" for _ in stage.legs)
    in_legs = {name for leg in stage.legs for name in (leg.high, leg.low)}
    for switch in stage.switches:
        names = {
            "switch from to": switch.name not in in_legs,
            "several poles": len(switch.poles) > 1,
            "one way": switch.conducts is Conducts.ONE_WAY,
            "two way": switch.conducts is Conducts.TWO_WAY,
        }
        yield from _if(names)
    for winding in stage.windings:
        yield "winding of two ends" if len(winding.ends) == 2 else "winding of one end"
        yield from _if({"must flow": winding.must_flow})


def _paths(drive: Drive) -> Iterator[str]:
    for part in drive.parts.values():
        yield "part"
        yield from _if({"difference at most": part.difference is not None})
    for path in drive.paths.values():
        yield from _if({"path of two parts": len(path) > 1, "no path": not path})
    for interlock in drive.interlocks:
        yield "interlock"
        yield from _if({"interlock dead time": interlock.dead.lo > 0})


def _pins(drive: Drive) -> Iterator[str]:
    for pin in drive.pins.values():
        yield "active high" if pin.active_high else "active low"
        yield f"rests {pin.rests.value}"
        on = pin.rests is not Level.UNKNOWN and (pin.rests is Level.HIGH) == pin.active_high
        yield from _if({"rests after": pin.after.hi != 0, "port": pin.port is not None, "rests commanded on": on})


def _carriers(drive: Drive) -> Iterator[str]:
    yield from _if({"two carriers": len(drive.carriers) > 1})
    for carrier in drive.carriers.values():
        first, last = carrier.duty
        yield "carrier"
        yield "duty of one value" if first == last else "duty of a range"
        yield "no dead time" if carrier.dead.hi == 0 else "dead time"
        yield {
            Update.AT_ONCE: "updates at once",
            Update.AT_RISE: "updates at rise",
            Update.WITHIN_PERIOD: "updates within a period",
        }[carrier.update]
        names = {
            "duty from 0 %": first == 0,
            "duty to 100 %": last == 1,
            "carrier within": carrier.period.hi is not None and carrier.period.hi - carrier.period.lo > 1,
        }
        yield from _if(names)


def _rows(drive: Drive) -> Iterator[str]:
    for mode in drive.modes.values():
        if mode.name == RESET:
            continue
        yield from (f"row {_kind(cell)}" for cell in mode.cells)
        yield from _facts("row", mode.known)
        yield from _if({"row means": mode.means is not None})


def _kind(cell: Fixed | Follow) -> str:
    if isinstance(cell, Follow):
        return "~carrier" if cell.inverted else "carrier"
    return cell_text(cell)


def _facts(what: str, known: tuple[Known, ...]) -> Iterator[str]:
    for fact in known:
        yield f"{what} with {'above' if type(fact).__name__ == 'Above' else 'current'}"


def _moves(drive: Drive) -> Iterator[str]:
    yield "start reset" if drive.start == RESET else "start mode"
    for move in drive.moves:
        yield from _trigger(move)
        yield from _facts("move", move.known)
        names = {
            "move of several modes": len(move.sources) > 1,
            "move into its own mode": move.target in move.sources,
            "move to reset": move.target == RESET,
            "move out of reset": RESET in move.sources,
            "unbroken": move.unbroken,
        }
        yield from _if(names)
        yield from _steps(drive, move.steps)


def _trigger(move: Move) -> Iterator[str]:
    match move.trigger:
        case When(earliest=earliest, latest=latest):
            yield "when"
            yield from _if({"earliest": earliest > 0, "latest": latest is not None})
        case After():
            yield "after"
        case AtOnce():
            yield "at once"


def _steps(drive: Drive, steps: tuple[Step, ...]) -> Iterator[str]:
    for step in steps:
        if isinstance(step, WaitStep):
            yield "wait"
            yield from _if({"wait at least": step.time.hi is None, "wait of a range": step.time.hi != step.time.lo})
            continue
        words = [_kind(cell) for _, cell in step.writes]
        all_off = len(words) == len(drive.columns) and set(words) == {"off"}
        yield "set all off" if all_off else "set"
        yield from _if({"set several": len(words) > 1 and not all_off})
        yield from (f"set {word}" for word in words if word not in ("off", "keep"))
    if steps:
        yield from _if({"wait first": isinstance(steps[0], WaitStep), "wait last": isinstance(steps[-1], WaitStep)})
    for before, after in pairwise(steps):
        if isinstance(before, SetStep) and isinstance(after, SetStep) and _pulses(before, after):
            yield "pulse of no length"


def _pulses(before: SetStep, after: SetStep) -> bool:
    """Whether the later step takes a switch back at once."""
    first = dict(before.writes)
    return any(name in first and first[name] != cell for name, cell in after.writes)


def _trips(drive: Drive) -> Iterator[str]:
    yield from _if({"two trips": len(drive.trips) > 1})
    for trip in drive.trips:
        yield "trip"
        yield from _facts("trip", trip.known)
        yield from _steps(drive, trip.steps)
        every = frozenset(drive.modes) - {RESET}
        names = {
            "trip from any": trip.origins == every,
            "trip within": trip.within is not None,
            "trip without within": trip.within is None and not trip.at_once,
            "trip at once": trip.at_once and trip.target != RESET,
            "trip to reset": trip.target == RESET,
            "trip with steps": bool(trip.steps),
        }
        yield from _if(names)


def _rest(drive: Drive) -> Iterator[str]:
    yield from ("rule" for _ in drive.rules)
    yield from ("waiver" for _ in drive.waivers)


def tallied(used: Iterable[str], said: Iterable[str], drives: Counter[str], answers: dict[str, Counter[str]]) -> None:
    """Add one drive to a table: the constructs it uses and how its hazards ended."""
    said = list(said)
    for name in used:
        drives[name] += 1
        answers.setdefault(name, Counter()).update(said)


def pytest_terminal_summary(terminalreporter: Any) -> None:
    """The table over all chunks of a campaign, of every worker; a hook for the tests' conftest.

    A chunk records `drives` and `answers` as JSON among its properties.
    """
    drives, answers = Counter[str](), dict[str, Counter[str]]()
    for report in (*terminalreporter.stats.get("passed", ()), *terminalreporter.stats.get("failed", ())):
        properties = dict(report.user_properties)
        if "drives" in properties:
            drives.update(json.loads(properties["drives"]))
            for name, counts in json.loads(properties["answers"]).items():
                answers.setdefault(name, Counter()).update(counts)
    if drives:
        terminalreporter.section("constructs of the language, in drives and in their hazards")
        terminalreporter.write_line(table(drives, answers))
