"""What single faults bring about, as a table and as one sentence each."""

from collections.abc import Iterator

from seqcheck.drive import Drive, Trip
from seqcheck.faults import Brought, Faulted, Where
from seqcheck.hazards import Hazard
from seqcheck.reports.pieces import WIDTH, Line, Piece, Tone, counted, line, listed, wrapped
from seqcheck.reports.wording import flowing
from seqcheck.verdict import Check, Outcome

CHECK = Check.SINGLE_FAULT.value
"""What is said of a fault is no finding by itself, but has the name of the check that a rule makes of it."""
_WIDEST = 24
_NOTHING = "nothing"


def table(outcome: Outcome) -> list[Line]:
    """The table of all faults, those of which nothing comes together at its end; empty where none were asked for."""
    if outcome.faults is None:
        return []
    drive = outcome.drive
    rows = [(called(drive, one), list(brings(drive, one))) for one in outcome.faults if one.brings]
    calm = [called(drive, one) for one in outcome.faults if not one.brings]
    width = min(_WIDEST, max([len(_NOTHING), *(len(name) for name, _ in rows)]))
    found = [line(Piece("single faults", Tone.STRONG), f"  {_counts(outcome.faults)}")]
    found += _row("stuck", ["what it brings alone, with the firmware as it is"], width, Tone.FAINT)
    for name, said in rows:
        found += _row(name, said, width, Tone.PLAIN)
    if calm:
        found += _row(_NOTHING, [f"comes of {'; '.join(calm)}"], width, Tone.FAINT)
    return found


def _counts(faults: tuple[Faulted, ...]) -> str:
    sure = sum(len(one.faults) for one in faults if any(brought.spread.places for brought in one.brings))
    doubt = sum(len(one.faults) for one in faults if one.brings) - sure
    text = f"{sure} of {counted(sum(len(one.faults) for one in faults), 'fault')} {'brings' if sure == 1 else 'bring'}"
    return f"{text} a hazard{f', {doubt} undecided' if doubt else ''}"


def _row(name: str, said: list[str], width: int, tone: Tone) -> Iterator[Line]:
    left = wrapped(name, width)
    right = [part for text in said for part in wrapped(text, WIDTH - width - 4)]
    for place in range(max(len(left), len(right))):
        start = left[place] if place < len(left) else ""
        text = right[place] if place < len(right) else ""
        yield line(f"  {start.ljust(width)}  " if text else f"  {start}", Piece(text, tone))


def called(drive: Drive, faulted: Faulted) -> str:
    """The faults of one row: `UH on, PA8 high` for a switch that always conducts and its pin that is always high."""
    names = []
    for one in faulted.faults:
        pin, level = drive.pins.get(one.switch), "on" if one.on else "off"
        if not one.pin:
            names.append(f"{one.switch} {level}")
        elif pin is None:
            names.append(f"{'its command' if names else f'command of {one.switch}'} {level}")
        else:
            of = "" if names else f" of {one.switch}"
            names.append(f"{pin.name}{of} {'high' if one.on == pin.active_high else 'low'}")
    return ", ".join(names)


def brings(drive: Drive, faulted: Faulted) -> Iterator[str]:
    """What comes of a fault, a sentence without full stop for each hazard."""
    for one in faulted.brings:
        spread = one.spread
        if not spread.places:
            yield f"undecided whether {_hazard(one)} (limit reached: {spread.limit})"
            continue
        also = ", as without this fault" if one.anyway else ""
        rest = f"; elsewhere undecided (limit reached: {spread.limit})" if spread.limit else ""
        yield f"{_hazard(one)}{also}: {'; '.join(_where(drive, one))}{rest}"


def _hazard(brought: Brought) -> str:
    hazard, others = brought.hazard, [one.switch for one in brought.left.literals]
    if hazard.currents:
        once = f" while {listed(others)} can be off" if others else " at all"
        return f"{flowing(hazard.currents)} has no way{once}"
    once = f" while {listed(others)} can conduct" if others else " by itself"
    return f"{_joined(hazard)}{once}"


def _joined(hazard: Hazard) -> str:
    if not hazard.joins:
        return f"{listed([str(one) for one in hazard.literals])} at once"
    return f"{' to '.join(hazard.joins)}" if len(hazard.joins) > 1 else f"{hazard.joins[0]} shorted"


def _where(drive: Drive, brought: Brought) -> Iterator[str]:
    """In which rows by what they command, and in which other modes, moves and trips in passing."""
    spread = brought.spread
    if spread.held:
        yield f"in {_rows(drive, spread.held)}"
    passing = [name for name in drive.modes if Where(name, None) in spread.places and name not in spread.held]
    runs = list(dict.fromkeys(run for one in sorted(spread.places, key=_order) if (run := one.run_of(drive))))
    moves = [f"{listed(run.sources, 'or')} -> {run.target}" for run in runs if not isinstance(run, Trip)]
    lines = [str(run.place.line) for run in runs if not isinstance(run, Trip)]
    trips = [run.name for run in runs if isinstance(run, Trip)]
    said = [f"in {listed(passing)}"] if passing else []
    if moves:
        said.append(f"during {moves[0]} (line {lines[0]})" if len(moves) == 1 else f"during moves {listed(lines)}")
    said += [f"during {'trip' if len(trips) == 1 else 'trips'} {listed(trips)}"] if trips else []
    if said:
        yield f"in passing {', '.join(said)}"


def _order(where: Where) -> int:
    return -1 if where.run is None else where.run


def _rows(drive: Drive, held: frozenset[str]) -> str:
    names = [name for name in drive.modes if name in held]
    return f"{'row' if len(names) == 1 else 'rows'} {listed(names)}"
