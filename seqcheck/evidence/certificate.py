"""The evidence of one file's verdicts as JSON: written for a run of `lint`, read again by `audit`.

The text is the same for the same verdicts. Reading trusts nothing; what is not as it should be is refused.
"""

import json
from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import TypeVar

from seqcheck.drive import Above, Cell, CurrentInto, CurrentOut, Drive, Fixed, Follow, Known, cell_text, fact_words
from seqcheck.evidence.digest import digest
from seqcheck.hazards import Clearing, Current, Following, Hazard, Lasting, Literal, Nearing, Question
from seqcheck.verdict import Act, Cycles, Event, Phase, Trace

FORMAT = "seqcheck evidence 3"
MOST_TIME = 1 << 61
"""No bound of an honest certificate is above this, in ps."""


class NoEvidence(Exception):  # noqa: N818 - it says what a text is, not that the program failed
    """The text is no evidence that this version reads; says why, in words without a full stop."""


@dataclass(frozen=True, slots=True)
class Cover:
    """That a hazard is safe, by zones that cover all that can be reached (as data)."""

    data: "Fields"


@dataclass(frozen=True, slots=True)
class Potentials:
    """That a hazard is safe, by least times between the commands of two of its switches: the number of the potentials
    in Evidence."""

    number: int


@dataclass(frozen=True, slots=True)
class Claim:
    """What is said of one hazard: a proof where it is safe, a trace where not, None where undecided.

    A rule about margins is a hazard for each short and each of its literals, which asks (see Nearing).
    """

    hazard: Hazard
    proof: Cover | Potentials | Trace | None


@dataclass(frozen=True, slots=True)
class Evidence:
    """The claims about the drive whose meaning has this digest, the potentials that they rest on, each with the number
    of the list of stands that it speaks of, and these lists."""

    digest: str
    stands: "tuple[tuple[Fields, ...], ...]"
    potentials: "tuple[tuple[Fields, int], ...]"
    claims: tuple[Claim, ...]


@dataclass(frozen=True, slots=True)
class Fields:
    """A JSON object of which every value is asked for by name and kind; `where` is for people."""

    data: dict[str, object]
    where: str

    def of(self, name: str) -> object:
        """The value of a name; NoEvidence if it is not there."""
        if name not in self.data:
            raise NoEvidence(f"{self.where} has no '{name}'")
        return self.data[name]

    def text(self, name: str) -> str:
        """A string."""
        value = self.of(name)
        if not isinstance(value, str):
            raise self.wrong(name)
        return value

    def flag(self, name: str) -> bool:
        """True or false."""
        value = self.of(name)
        if not isinstance(value, bool):
            raise self.wrong(name)
        return value

    def number(self, name: str) -> int:
        """A whole number."""
        return self.whole(self.of(name), name)

    def whole(self, value: object, name: str) -> int:
        """A value as a whole number that a time can be."""
        if type(value) is int and -MOST_TIME <= value <= MOST_TIME:  # no bool
            return value
        raise self.wrong(name)

    def place(self, name: str, count: int) -> int:
        """The number of one of so many things."""
        value = self.number(name)
        if not 0 <= value < count:
            raise self.wrong(name)
        return value

    def objects(self, name: str) -> "list[Fields]":
        """A list of objects."""
        return [self.inside(one, f"{name} {place}") for place, one in enumerate(self.rows(name))]

    def field(self, name: str) -> "Fields":
        """One object."""
        return self.inside(self.of(name), name)

    def texts(self, name: str) -> tuple[str, ...]:
        """A list of strings."""
        return self.strings(self.of(name), name)

    def strings(self, value: object, name: str) -> tuple[str, ...]:
        """A value as a list of strings."""
        if not isinstance(value, list) or not all(isinstance(one, str) for one in value):
            raise self.wrong(name)
        return tuple(value)

    def rows(self, name: str) -> list[object]:
        """A list of anything."""
        return self.listed(self.of(name), name)

    def listed(self, value: object, name: str, length: int | None = None) -> list[object]:
        """A value as a list, of that length."""
        if not isinstance(value, list) or length not in (None, len(value)):
            raise self.wrong(name)
        return value

    def inside(self, value: object, name: str) -> "Fields":
        """A value as an object."""
        if not isinstance(value, dict):
            raise self.wrong(name)
        return Fields(value, f"{name} of {self.where}")

    def wrong(self, name: str) -> NoEvidence:
        """That a value is not of its kind."""
        return NoEvidence(f"'{name}' of {self.where} is not what it should be")


# Writing


def written(drive: Drive, claims: Iterable[tuple[Hazard, dict[str, object] | Trace | None]]) -> str:
    """The text of the evidence: a proof as the prover hands it out, a trace, or None for an undecided hazard."""
    stands: list[object] = []
    potentials: list[dict[str, object]] = []
    claimed = [_claim(hazard, proof, potentials) for hazard, proof in claims]
    numbered = [{**one, "stands": _number(one["stands"], stands)} for one in potentials]
    data = {
        "format": FORMAT, "digest": digest(drive), "stands": stands, "potentials": numbered, "claims": claimed,
    }  # fmt: skip
    return json.dumps(data, ensure_ascii=False, separators=(",", ":")) + "\n"


def _claim(
    hazard: Hazard, proof: dict[str, object] | Trace | None, potentials: list[dict[str, object]]
) -> dict[str, object]:
    said: dict[str, object] = {
        "literals": [[one.switch, one.on] for one in hazard.literals],
        "joins": list(hazard.joins),
        "needs": [sorted(list(fact_words(one)) for one in needs) for needs in hazard.needs],
    }
    if hazard.currents:
        said["opens"] = [[one.out_of, one.into] for one in hazard.currents]
    if hazard.asks is not None:
        said["asks"] = _asks(hazard.asks)
    if proof is None:
        return {**said, "verdict": "undecided"}
    if isinstance(proof, Trace):
        return {**said, "verdict": "unsafe", "run": run_data(proof)}
    if "stands" not in proof:
        return {**said, "verdict": "safe", "cover": proof}
    return {**said, "verdict": "safe", "potentials": _number(proof, potentials)}


def _asks(asks: Question) -> list[object]:
    match asks:
        case Lasting():
            return ["longer" if asks.longer else "shorter", asks.limit]
        case Following():
            return ["follows", asks.left, asks.entered, asks.limit]
        case Clearing():
            return ["clears", asks.trip, asks.limit]
        case Nearing():
            return ["nears", asks.after, asks.limit]
    raise ValueError(f"evidence is not about {asks}")


T = TypeVar("T")


def _number(one: T, numbered: list[T]) -> int:
    """The number of what is written once for all that share it, whoever proved them."""
    known = next((number for number, other in enumerate(numbered) if other is one or other == one), None)
    if known is not None:
        return known
    numbered.append(one)
    return len(numbered) - 1


def run_data(trace: Trace) -> dict[str, object]:
    """A run as data, without the places of the file and without what it shows."""
    return {
        "phases": [
            {"carrier": one.carrier, "high": one.high, "age": one.age, "output": one.output} for one in trace.phases
        ],
        "events": [_event(one) for one in trace.events],
        "end": trace.end,
        "overlap": [trace.overlap_from, trace.overlap_to],
        **({} if trace.prolonged is None else {"later": trace.prolonged[1]}),
    }


def _event(event: Event) -> dict[str, object]:
    cycles = event.cycles
    return {
        **({} if cycles is None else {"cycles": [cycles.count, cycles.first, cycles.second]}),
        "time": event.time,
        "act": event.act.value,
        "name": event.name,
        "index": event.index,
        "trip": event.trip,
        "writes": [[switch, cell_text(cell)] for switch, cell in event.writes],
    }


# Reading


def read(text: str) -> Evidence:
    """The evidence of a text; NoEvidence if it is none."""
    try:
        data = json.loads(text)
    except (ValueError, RecursionError) as fault:
        raise NoEvidence("it is not JSON") from fault
    if not isinstance(data, dict):
        raise NoEvidence("it is no JSON object")
    whole = Fields(data, "the evidence")
    if whole.of("format") != FORMAT:
        raise NoEvidence(f"its format is not '{FORMAT}'")
    lists = tuple(
        tuple(whole.inside(stand, f"stands {number}") for stand in whole.listed(one, "stands"))
        for number, one in enumerate(whole.rows("stands"))
    )
    potentials = tuple((one, one.place("stands", len(lists))) for one in whole.objects("potentials"))
    claims = tuple(_claimed(one, len(potentials)) for one in whole.objects("claims"))
    return Evidence(whole.text("digest"), lists, potentials, claims)


def _claimed(claim: Fields, potentials: int) -> Claim:
    hazard = Hazard(
        tuple(_literal(claim, one) for one in claim.rows("literals")),
        claim.texts("joins"),
        tuple(_needs(claim, one) for one in claim.rows("needs")),
        tuple(_current(claim, one) for one in claim.rows("opens")) if "opens" in claim.data else (),
        _asked(claim) if "asks" in claim.data else None,
    )
    verdict = claim.text("verdict")
    if verdict == "undecided":
        return Claim(hazard, None)
    if verdict == "unsafe":
        return Claim(hazard, run_of(hazard, claim.field("run")))
    if verdict != "safe":
        raise claim.wrong("verdict")
    if "cover" in claim.data:
        return Claim(hazard, Cover(claim.field("cover")))
    return Claim(hazard, Potentials(claim.place("potentials", potentials)))


def _asked(claim: Fields) -> Question:
    match claim.rows("asks"):
        case ["longer" | "shorter" as word, int(limit)]:
            return Lasting(word == "longer", claim.whole(limit, "asks"))
        case ["follows", str(left), str(entered), int(limit)]:
            return Following(left, entered, claim.whole(limit, "asks"))
        case ["clears", str(trip), int(limit)]:
            return Clearing(trip, claim.whole(limit, "asks"))
        case ["nears", int(after), int(limit)]:
            return Nearing(claim.whole(after, "asks"), claim.whole(limit, "asks"))
    raise claim.wrong("asks")


def _literal(claim: Fields, value: object) -> Literal:
    switch, on = claim.listed(value, "literals", 2)
    if not isinstance(switch, str) or not isinstance(on, bool):
        raise claim.wrong("literals")
    return Literal(switch, on)


def _needs(claim: Fields, value: object) -> frozenset[Known]:
    return frozenset(_known(claim, claim.strings(one, "needs")) for one in claim.listed(value, "needs"))


def _known(claim: Fields, words: tuple[str, ...]) -> Known:
    match words:
        case (upper, "above", lower):
            return Above(upper, lower)
        case ("current", "out of", node):
            return CurrentOut(node)
        case ("current", "into", node):
            return CurrentInto(node)
    raise claim.wrong("needs")


def _current(claim: Fields, value: object) -> Current:
    out_of, into = claim.listed(value, "opens", 2)
    if not all(one is None or isinstance(one, str) for one in (out_of, into)):
        raise claim.wrong("opens")
    return Current(out_of, into)  # type: ignore[arg-type]


def run_of(hazard: Hazard, run: Fields) -> Trace:
    """The run that data speak of; NoEvidence if they are none."""
    start, end = run.listed(run.of("overlap"), "overlap", 2)
    phases = tuple(
        Phase(one.text("carrier"), one.flag("high"), one.number("age"), one.flag("output"))
        for one in run.objects("phases")
    )
    later = None
    if isinstance(hazard.asks, Nearing):
        if not 0 <= hazard.asks.after < len(hazard.literals):
            raise run.wrong("later")
        later = (hazard.literals[hazard.asks.after], run.number("later"))
        hazard = replace(hazard, asks=None)
    return Trace(
        hazard,
        phases,
        tuple(_happened(one) for one in run.objects("events")),
        run.number("end"),
        run.whole(start, "overlap"),
        None if end is None else run.whole(end, "overlap"),
        prolonged=later,
    )


def _happened(event: Fields) -> Event:
    try:
        act = Act(event.text("act"))
    except ValueError as fault:
        raise event.wrong("act") from fault
    writes = [event.strings(one, "writes") for one in event.rows("writes")]
    if not all(len(pair) == 2 for pair in writes):
        raise event.wrong("writes")
    return Event(
        event.number("time"),
        act,
        event.text("name"),
        event.number("index"),
        event.flag("trip"),
        tuple((switch, _cell(word)) for switch, word in writes),
        cycles=_cycles(event) if act is Act.CYCLES else None,
    )


def _cycles(event: Fields) -> Cycles:
    count, first, second = (event.whole(one, "cycles") for one in event.listed(event.of("cycles"), "cycles", 3))
    return Cycles(count, first, second)


def _cell(word: str) -> Cell:
    if word in {one.value for one in Fixed}:
        return Fixed(word)
    return Follow(word.removeprefix("~"), word.startswith("~"))
