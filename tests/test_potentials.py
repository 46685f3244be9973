"""Evidence for what the screen settled: accepted as the prover writes it, refused once it proves no longer.

Whether a damaged certificate is still a proof is worked out here once more, over the prover's states and steps, of
which the checker knows nothing.
"""

import json
from collections.abc import Iterator
from copy import deepcopy
from itertools import combinations
from random import Random

import pytest
from damage import Data, forged_potentials, late_firmware, looked_at, whole
from judge.draws import draw
from proofs import at_most, leg
from reading import drive_of

from seqcheck.checking import Kept, check
from seqcheck.circuit import shorting_sets
from seqcheck.drive import Drive
from seqcheck.evidence.audit import Audited, NotProven, audit
from seqcheck.evidence.certificate import NoEvidence, read
from seqcheck.proving.certify import COMMANDS
from seqcheck.proving.potentials import UNKNOWN
from seqcheck.proving.prove import Proven, Prover
from seqcheck.proving.screen import Map, Pairing, Point
from seqcheck.writing import carrier_of

STEPS = leg(
    "a off off\nb on off\nc off on",
    "  start a\n  a -> b when e earliest 6 ps\n  b -> c when f\n    set all off\n    wait 6 ps\n"
    "  c -> a when g\n  a -> c when h earliest 6 ps",
    trips="  t from any -> a within 7 ps",
)
CARRIED = leg(
    "a off off\nb k off\nc off ~k\nd k ~k",
    "  start a\n  a -> b when e\n  b -> d when f\n  d -> c when g\n  c -> a when h\n  b -> a when i\n    wait 2 ps",
    more="carriers\n  k 20 GHz duty 20 % to 80 % dead time 6 ps updates at rise",
)
RELEASED = leg(
    "a off off\nb on off\nc off on",
    "  start reset\n  reset -> a after 50 ps\n  a -> b when e earliest 5 ps\n  b -> a when f\n"
    "  a -> c when g earliest 9 ps\n"
    "  c -> a when h",
    more="pins\n  A PA1 active high rests low after 3 ps to 6 ps\n  B PA2 active high rests low",
    trips="  watchdog from any -> reset",
)
SERIES = (
    'drive "series"\nwrites together\nstage\n  rails P N\n  switch A from P to x\n  switch B from x to y\n'
    "  switch C from y to N\nparts\n  p on 2 ps to 3 ps off 4 ps to 7 ps\npaths\n  A B C through p\n"
    "modes A B C\n  a on off on\n  b off on on\nmoves\n  start a\n"
    "  a -> b when go\n    set A off\n    wait 6 ps\n  b -> a when back\n    set B off\n    wait 5 ps\n"
)
GOOD = {"steps": STEPS, "carried": CARRIED, "released": RELEASED, "series": SERIES}
HASTY = {
    "short wait": STEPS.replace("wait 6 ps", "wait 4 ps"),
    "short dead time": CARRIED.replace("dead time 6 ps", "dead time 4 ps"),
    "short stay": RELEASED.replace("earliest 9 ps", "earliest 4 ps"),
    "short pulse": leg(
        "a off off\nb on off\nc off on",
        "  start a\n  a -> b when e\n  b -> c when f\n  c -> b when g",
        parts="p on 5 ps off 5 ps",
    ),
}
SEEDS = range(14)

good = pytest.mark.parametrize("text", GOOD.values(), ids=GOOD)
hasty = pytest.mark.parametrize("text", HASTY.values(), ids=HASTY)


def evidence_of(drive: Drive) -> Data:
    """The evidence for the only hazard of a drive, which the screen settles."""
    (hazard,) = shorting_sets(drive.stage)
    proof = Prover(drive, keep=True).prove(hazard, True, lambda _: None)
    assert isinstance(proof, Proven)
    assert proof.method == "screen"
    return whole(drive, [(hazard, proof.data)])


def accepts(drive: Drive, data: Data) -> bool:
    """Whether the audit accepts evidence."""
    try:
        audit(drive, read(json.dumps(data)))
    except (NotProven, NoEvidence):
        return False
    return True


def points_of(data: Data) -> list[list[object]]:
    """The points of the first claim."""
    points: list[list[object]] = data["potentials"][0]["points"]
    return points


class Again:
    """A certificate worked through once more, over the prover's steps."""

    def __init__(self, drive: Drive) -> None:
        (hazard,) = shorting_sets(drive.stage)
        looking = looked_at(drive, hazard)
        here = Map(late_firmware(looking), lambda count: None)
        pairs = combinations(range(len(hazard.literals)), 2)
        self.pairing = next(one for one in (Pairing(looking, here, *pair) for pair in pairs) if one.apart())
        points = self.pairing.points()
        assert points is not None
        self.points = points

    def still_proves(self, data: Data) -> bool:
        """Whether every point is spoken of, each potential follows from those before, and the least of them suffice."""
        said = {(one[0], (one[1], one[2])): one[3:] for one in points_of(data)}
        least = [10**9, 10**9]
        for point in self.points:
            for leaving in (0, 1):
                for target, cell, time, comes in self._led(point, leaving, said):
                    if time < said[self._named(target)][leaving].get(cell, 10**9):
                        return False
                    if comes:
                        least[leaving] = min(least[leaving], max(time, self._floor(cell, target, 1 - leaving)))
        first, second = self.pairing.delays
        apart = least[0] >= first.fall - second.rise and least[1] >= second.fall - first.rise
        return apart and sum(least) > max(first.fall, second.fall)

    def _led(self, point: Point, leaving: int, said: Data) -> Iterator[tuple[Point, str, int, bool]]:
        pairing = self.pairing
        went = pairing.wanted(point[1], leaving)
        for arc, target, restarts in pairing.steps(point):
            if pairing.wanted(target[1], leaving):
                continue
            comes = pairing.wanted(target[1], 1 - leaving) and not pairing.wanted(point[1], 1 - leaving)
            if went:
                yield target, self._cell(point, leaving), 0 if restarts else UNKNOWN, comes
                continue
            for cell, time in said[self._named(point)][leaving].items():
                later = time if arc is None or not restarts else 0 if time < 0 else time + arc.least
                yield target, cell, later, comes

    def _named(self, point: Point) -> tuple[int, tuple[str, ...]]:
        return point[0], tuple(COMMANDS[one] for one in point[1])

    def _cell(self, point: Point, place: int) -> str:
        cell = self.pairing.cells(point[0])[place]
        number = carrier_of(cell)
        if number < 0 or not self.pairing.dead[number]:
            return ""
        return ("~" if cell % 2 == 0 else "") + list(self.pairing.here.firmware.drive.carriers)[number]

    def _floor(self, left: str, target: Point, coming: int) -> int:
        joined = self._cell(target, coming)
        if not left or not joined or left == joined or left.strip("~") != joined.strip("~"):
            return 0
        return self.pairing.dead[carrier_of(self.pairing.cells(target[0])[coming])]


# What proves is accepted


@good
def test_the_proof_of_the_screen_is_accepted(text: str) -> None:
    drive = drive_of(text)
    data = evidence_of(drive)
    assert accepts(drive, data)
    assert Again(drive).still_proves(data)


def test_potentials_hold_however_late_the_firmware_is() -> None:
    drive = drive_of(STEPS)
    assert audit(drive, read(json.dumps(evidence_of(drive)))) == Audited(1, 1, 0, 0)


def test_what_the_screen_settles_of_drawn_drives_is_borne_out() -> None:
    screened = 0
    for seed in SEEDS:
        drive = drive_of(draw(seed))
        kept: list[Kept] = []
        check(drive, "t.dseq", frozenset(), at_most(500), kept)
        data = whole(drive, kept)
        screened += sum("potentials" in claim for claim in data["claims"])
        assert accepts(drive, data), seed
    assert screened >= 8


def test_hazards_share_the_list_of_stands() -> None:
    """Two legs without carriers look at one firmware: its states are written once."""
    text = (
        'drive "legs"\nwrites together\nstage\n  rails P N\n  leg U A B\n  leg V C D\nparts\n'
        "  p on 2 ps to 3 ps off 4 ps to 7 ps\npaths\n  A B C D through p\nmodes A B C D\n  a off off off off\n"
        "  b on off off on\n  c off on on off\nmoves\n  start a\n  a -> b when e\n  a -> c when f\n"
        "  b, c -> a when g\n    set all off\n    wait 9 ps\n"
    )
    drive = drive_of(text)
    prover = Prover(drive, keep=True)
    claims = []
    for hazard in shorting_sets(drive.stage):
        proof = prover.prove(hazard, True, lambda _: None)
        assert isinstance(proof, Proven)
        claims.append((hazard, proof.data))
    data = whole(drive, claims)
    assert len(data["claims"]) == 2
    assert len(data["stands"]) == 1
    assert accepts(drive, data)


# What does not prove is refused


@good
def test_a_raised_potential_is_refused(text: str) -> None:
    """Each is as great as can be, so none can be raised."""
    drive = drive_of(text)
    data, total = evidence_of(drive), 0
    for number, point in enumerate(points_of(data)):
        for place in (3, 4):
            for cell in point[place]:  # type: ignore[attr-defined]
                for more in (1, 1000):
                    copy = deepcopy(data)
                    points_of(copy)[number][place][cell] += more  # type: ignore[index]
                    total += 1
                    assert not accepts(drive, copy), (point, place, cell, more)
    assert total >= 8


@good
def test_a_lowered_potential_is_accepted_only_if_it_still_proves(text: str) -> None:
    """Both come up; which it is, the prover's steps tell."""
    drive = drive_of(text)
    data, again, found = evidence_of(drive), Again(drive), []
    for number, point in enumerate(points_of(data)):
        for place in (3, 4):
            for cell, time in point[place].items():  # type: ignore[attr-defined]
                for other in {time - 1, UNKNOWN - 1, UNKNOWN} - {time}:
                    copy = deepcopy(data)
                    points_of(copy)[number][place][cell] = other  # type: ignore[index]
                    found.append(accepts(drive, copy))
                    assert found[-1] == again.still_proves(copy), (point, place, cell, other)
    assert set(found) == {True, False}


@good
def test_a_point_or_potential_left_out_is_missed(text: str) -> None:
    drive = drive_of(text)
    data = evidence_of(drive)
    for number, point in enumerate(points_of(data)):
        copy = deepcopy(data)
        del points_of(copy)[number]
        assert not accepts(drive, copy), point
        for place in (3, 4):
            for cell in point[place]:  # type: ignore[attr-defined]
                copy = deepcopy(data)
                del points_of(copy)[number][place][cell]  # type: ignore[attr-defined]
                assert not accepts(drive, copy), (point, place, cell)


@good
def test_no_command_of_a_point_can_be_changed(text: str) -> None:
    drive = drive_of(text)
    data = evidence_of(drive)
    for number, point in enumerate(points_of(data)):
        for place in (1, 2):
            for command in {"off", "on", "unknown", ""} - {str(point[place])}:
                copy = deepcopy(data)
                points_of(copy)[number][place] = command
                assert not accepts(drive, copy), (point, place, command)


@good
def test_no_word_of_a_stand_can_be_changed(text: str) -> None:
    drive = drive_of(text)
    data = evidence_of(drive)
    for number, stand in enumerate(data["stands"][0]):
        for name, value in stand.items():
            copy = deepcopy(data)
            copy["stands"][0][number][name] = _other(value)
            assert not accepts(drive, copy), (number, name)
        copy = deepcopy(data)
        del copy["stands"][0][number]
        assert not accepts(drive, copy), number


def _other(value: object) -> object:
    if isinstance(value, str):
        return f"{value}x"
    if isinstance(value, int):
        return value + 1
    assert isinstance(value, list)
    return value[1:] if value else [["A", "B"]]


def test_the_pair_cannot_be_another() -> None:
    drive = drive_of(SERIES)
    data = evidence_of(drive)
    assert data["potentials"][0]["pair"] == [0, 1]
    for pair in ([1, 0], [0, 2], [1, 2], [0, 0], [0, 3], [-1, 0], [0], [0, 1, 2], "01", None, [0, True]):
        copy = deepcopy(data)
        copy["potentials"][0]["pair"] = pair
        assert not accepts(drive, copy), pair


@pytest.mark.parametrize(
    ("name", "value"),
    [("stands", 1), ("stands", -1), ("stands", None), ("points", None), ("points", []), ("points", [[]]),
     ("points", [[0, "off", "off", [], {}]]), ("points", [[0, "off", "off", {"": None}, {}]]),
     ("points", [[0, "off", "off", {"": True}, {}]]), ("points", [[0, "off", "off", {"": 1 << 70}, {}]])],
)  # fmt: skip
def test_what_is_malformed_is_refused(name: str, value: object) -> None:
    drive = drive_of(STEPS)
    data = evidence_of(drive)
    data["potentials"][0][name] = value
    assert not accepts(drive, data)


@pytest.mark.parametrize("stands", [None, {}, [None], [[None]], [[{}]], [], [[]]])
def test_malformed_stands_are_refused(stands: object) -> None:
    drive = drive_of(STEPS)
    data = evidence_of(drive)
    data["stands"] = stands
    assert not accepts(drive, data)


@hasty
@pytest.mark.parametrize("more", [0, 1, 3, 1000])
def test_no_potentials_prove_an_unsafe_drive(text: str, more: int) -> None:
    """The least times as they are, and all of them raised; also with single ones raised or left out."""
    drive = drive_of(text)
    (hazard,) = shorting_sets(drive.stage)
    assert not isinstance(Prover(drive).prove(hazard, True, lambda _: None), Proven)
    forged = forged_potentials(drive, hazard, (0, 1), more)
    assert forged is not None
    data, rng = whole(drive, [(hazard, forged)]), Random(1)
    assert not accepts(drive, data)
    for _ in range(60):
        copy = deepcopy(data)
        for point in rng.sample(points_of(copy), 2):
            for times in point[3:]:
                for cell in times:  # type: ignore[attr-defined]
                    times[cell] += rng.choice((-1, 1, 6))  # type: ignore[index]
        assert not accepts(drive, copy)
