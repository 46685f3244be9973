"""Whether modes tolerate single faults: every short that one stuck thing can bring, asked at rest in each of them."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import replace

from seqcheck.confirming import Fault as Failed
from seqcheck.confirming import confirmed, named, place_of
from seqcheck.drive import Drive, ToleratesRule
from seqcheck.failing import as_written, left_of, with_pin_stuck
from seqcheck.faults import affected, concerned
from seqcheck.hazards import Fault, Hazard, Stuck
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.tracing import Infeasible
from seqcheck.source import Place
from seqcheck.verdict import Check, Event, Safe, Trace, Undecided, Unsafe, Verdict

Observer = Callable[[int], None]


def tolerated(
    prover: Prover, shorts: Sequence[Hazard], rules: Sequence[ToleratesRule], observer: Observer
) -> Iterator[Verdict]:
    """A verdict for each mode of the rules, each fault that can bring a short, and each short that it can bring.

    A run with a pin that is stuck is one of a drive of its own; it is replayed there, and told with what the firmware
    writes to that pin. `observer` may end one search by raising LimitReached. Raises Fault.
    """
    wanted: dict[str, Place] = {}
    for mode, place in ((mode, rule.place) for rule in rules for mode in rule.modes):
        wanted.setdefault(mode, place)
    for faults, drive, asked in _cases(prover.drive, shorts):
        own = prover if drive is prover.drive else Prover(drive)
        for hazard in asked:
            yield from _judged(own, hazard, faults, wanted, observer)


def _cases(drive: Drive, shorts: Sequence[Hazard]) -> Iterator[tuple[tuple[Fault, ...], Drive, list[Hazard]]]:
    """Faults that come to the same, the drive to look at, and what is left of each short that they can bring."""
    for switch in drive.stage.switches:
        for on in (True, False):
            own, wired = Fault(switch.name, on, pin=False), Fault(switch.name, on, pin=True)
            alone = concerned(drive, switch.name)
            left = [one for _, one in left_of(own, affected(drive, own, shorts))]
            yield (own,) if alone else (own, wired), drive, left
            if alone:
                yield (wired,), with_pin_stuck(drive, switch.name, on), affected(drive, wired, shorts)


def _judged(
    prover: Prover, hazard: Hazard, faults: tuple[Fault, ...], wanted: Mapping[str, Place], observer: Observer
) -> Iterator[Verdict]:
    try:
        answers = prover.at_rest(hazard, frozenset(wanted), observer)
    except Infeasible as fault:
        raise Failed(f"a path to {named(hazard)} has no times") from fault
    for mode, rule in wanted.items():
        asked, answer = replace(hazard, asks=Stuck(mode, faults)), answers[mode]
        if isinstance(answer, str):
            yield Undecided(asked, answer, 0)
        elif isinstance(answer, Proven):
            yield Safe(asked, answer.method, answer.zones, answer.however_late)
        else:
            yield _broken(prover.drive, asked, answer, mode, rule)


def _broken(drive: Drive, hazard: Hazard, answer: Refuted, mode: str, rule: Place) -> Unsafe:
    trace, replayed = confirmed(drive, replace(answer.trace, hazard=hazard), whole=True)
    place = place_of(drive, trace, replayed)
    overlap = None if trace.overlap_to is None else trace.overlap_to - trace.overlap_from
    return Unsafe(
        hazard,
        Check.SINGLE_FAULT,
        place if answer.held is None and hazard.literals else drive.modes[mode].place,
        _as_told(trace, drive),
        replayed,
        overlap,
        greatest=overlap is None,
        row=answer.held,
        rule=rule,
    )


def _as_told(trace: Trace, drive: Drive) -> Trace:
    """The run with what the firmware writes under the names of the file."""
    names = {as_written(name): name for name in drive.columns if as_written(name) in drive.columns}
    return replace(trace, events=tuple(_told(one, names) for one in trace.events)) if names else trace


def _told(event: Event, names: Mapping[str, str]) -> Event:
    stuck = frozenset(names.values())
    writes = tuple((names.get(name, name), cell) for name, cell in event.writes if name not in stuck)
    return replace(event, name=names.get(event.name, event.name), writes=writes)
