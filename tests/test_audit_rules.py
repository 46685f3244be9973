"""Evidence of rules about lengths and margins: accepted where it proves, and refused where it does not."""

import json
from copy import deepcopy
from typing import Any

import pytest
from damage import forged_cover, whole
from judge.draws import draw, flowing
from judge.ruled import ruled
from proofs import at_most, leg
from reading import drive_of

from seqcheck.checking import Kept, check
from seqcheck.circuit import shorting_sets
from seqcheck.drive import Drive
from seqcheck.evidence.audit import Audited, NotProven, audit
from seqcheck.evidence.certificate import NoEvidence, read
from seqcheck.hazards import Nearing
from seqcheck.verdict import Safe, Trace, Undecided, Unsafe

Data = dict[str, Any]

ROWS = "a off off\nb on off\nc off on"
ROUND = (
    "  start a\n  a -> b after 20 ps to 22 ps\n    wait 3 ps\n    set A on\n  b -> c after 10 ps to 12 ps\n"
    "    set A off\n    wait 9 ps\n  c -> a after 15 ps\n    set B off\n    wait 8 ps"
)
"""A is on for 10 to 12 ps and off for 55 at least, B on for 15; from A off to B on 9 ps pass, 8 the other way."""
TRIP = "  t from b -> a within 4 ps\n    set A off"


def of(*rules: str) -> Drive:
    """The drive with these rules, and with the trip if one is about it."""
    said = "".join(f"  {rule}\n" for rule in rules)
    trips = TRIP if any(rule.startswith("t ") for rule in rules) else ""
    return drive_of(f"{leg(ROWS, ROUND, trips=trips)}rules\n{said}")


KEPT = (
    "A on at most 12 ps", "B on at least 15 ps", "B off at least 30 ps", "a and c at least 8 ps apart",
    "t clears A within 11 ps", "margin at least 3 ps",
)  # fmt: skip
BROKEN = (
    "A on at most 11 ps", "B on at least 16 ps", "A off at least 60 ps", "b and a at least 100 ps apart",
    "t clears A within 10 ps", "margin at least 5 ps",
)  # fmt: skip


def proven(drive: Drive) -> tuple[list[Kept], Data]:
    """What lint keeps, and the evidence."""
    kept: list[Kept] = []
    check(drive, "t.dseq", frozenset(), at_most(6000), kept)
    return kept, whole(drive, kept)


def audited(drive: Drive, data: Data) -> Audited:
    return audit(drive, read(json.dumps(data)))


def refuses(drive: Drive, data: Data) -> bool:
    """Whether evidence is refused."""
    try:
        audited(drive, data)
    except (NotProven, NoEvidence):
        return True
    return False


def claim_of(data: Data, asks: str) -> Data:
    """The first claim that asks so."""
    found: Data = next(one for one in data["claims"] if one.get("asks", [""])[0] == asks)
    return found


# What proves is accepted


@pytest.mark.parametrize("rule", KEPT)
def test_a_rule_that_is_kept_is_borne_out(rule: str) -> None:
    """With the short that it comes beside."""
    kept, data = proven(of(rule))
    assert audited(of(rule), data) == Audited(len(kept), sum(map(_late, kept)), 0, 0)


def _late(kept: Kept) -> bool:
    """Whether a proof says that it holds however late the firmware is."""
    data = kept[1]
    return isinstance(data, dict) and bool(data.get("however late", True))


@pytest.mark.parametrize("rule", BROKEN)
def test_the_run_that_breaks_a_rule_is_replayed(rule: str) -> None:
    drive = of(rule)
    kept, data = proven(drive)
    found = audited(drive, data)
    assert found.unsafe == sum(isinstance(proof, Trace) for _, proof in kept) >= 1
    run = next(claim["run"] for claim in data["claims"] if "run" in claim)
    run["events"][-1]["time"] += 1
    with pytest.raises(NotProven, match="does not replay"):
        audited(drive, data)


@pytest.mark.parametrize("seed", [0, 3, 5, 8, 13, 18, 23, 29, 41, 45, 50, 74])
def test_every_verdict_on_the_rules_of_a_drawn_drive_is_borne_out(seed: int) -> None:
    for text in (draw(seed), flowing(seed)):
        drive = drive_of(f"{ruled(text, seed)}  margin at least {1 + seed % 6} ps\n")
        kept: list[Kept] = []
        outcome = check(drive, "t.dseq", frozenset(), at_most(300), kept)
        found = audited(drive, whole(drive, kept))
        assert found.unsafe == sum(isinstance(one, Unsafe) for one in outcome.verdicts)
        assert found.undecided == sum(isinstance(one, Undecided) for one in outcome.verdicts)
        plain = sum(isinstance(one, Safe) for one in outcome.verdicts)
        near = sum(isinstance(hazard.asks, Nearing) and isinstance(proof, dict) for hazard, proof in kept)
        assert found.safe == plain + near


def test_a_margin_proven_by_zones_is_borne_out_and_by_fewer_is_not() -> None:
    """Where an interlock takes part least times alone tell no margin."""
    text = leg(ROWS, ROUND, paths="A B through p\ninterlock A B dead time 1 ps")
    drive = drive_of(f"{text}rules\n  margin at least 3 ps\n")
    _, data = proven(drive)
    claims = [one for one in data["claims"] if one.get("asks", [""])[0] == "nears"]
    assert len(claims) == 2
    assert all("cover" in one for one in claims)
    assert audited(drive, data).safe == 3
    for claim in claims:
        number = data["claims"].index(claim)
        entries = claim["cover"]["entries"]
        ended = [place for place, entry in enumerate(entries) if entry["state"]["literals"][-1] == "ended"]
        assert len(ended) >= 2
        for place in ended:
            copy = deepcopy(data)
            copy["claims"][number]["cover"]["entries"][place]["state"]["literals"][-1] = "never"
            assert refuses(drive, copy), (number, place)
            del copy["claims"][number]["cover"]["entries"][place]
            assert refuses(drive, copy), (number, place)


# What does not prove is refused


@pytest.mark.parametrize("rule", KEPT)
def test_a_rule_must_be_spoken_of_as_it_stands(rule: str) -> None:
    """No claim of it can be left out, and none be of another limit."""
    drive = of(rule)
    _, data = proven(drive)
    asking = [number for number, claim in enumerate(data["claims"]) if "asks" in claim]
    assert asking
    for number in asking:
        left = deepcopy(data)
        del left["claims"][number]
        with pytest.raises(NotProven, match="Nothing is said of"):
            audited(drive, left)
        for more in (-1, 1):
            other = deepcopy(data)
            other["claims"][number]["asks"][-1] += more
            with pytest.raises((NotProven, NoEvidence)):
                audited(drive, other)


def test_a_margin_that_no_rule_asks_for_is_no_evidence() -> None:
    """Its rule is taken out of the file, and the digest is that of what is left."""
    _, data = proven(of("margin at least 3 ps"))
    plain = of("A on at most 12 ps")
    _, others = proven(plain)
    undecided = {**claim_of(others, "longer"), "verdict": "undecided"}
    data |= {"digest": others["digest"], "claims": [*data["claims"], undecided]}
    with pytest.raises(NoEvidence, match="margin that no rule asks for"):
        audited(plain, data)


@pytest.mark.parametrize("later", [0, 6, -1])
def test_a_run_must_show_a_margin_below_the_limit(later: int) -> None:
    """A literal that lasts longer than the rule asks for may well meet the other; it shows nothing."""
    drive = of("margin at least 5 ps")
    _, data = proven(drive)
    claim = next(one for one in data["claims"] if "run" in one)
    assert claim["run"]["later"] == 5
    claim["run"]["later"] = later
    with pytest.raises(NotProven, match="not of a margin that is too small"):
        audited(drive, data)


BY_ONE = ("A on at most 11 ps", "B on at least 16 ps", "b and a at least 100 ps apart", "t clears A within 10 ps")


@pytest.mark.parametrize("rule", BY_ONE)
def test_no_cover_proves_a_rule_that_is_broken(rule: str) -> None:
    """All that can be reached, but for what breaks the rule."""
    drive = of(rule)
    kept, _ = proven(drive)
    number, hazard = next((number, one) for number, (one, proof) in enumerate(kept) if isinstance(proof, Trace))
    for late in (True, False):
        forged = {**forged_cover(drive, hazard, 3000), "however late": late}
        claims = [*kept[:number], (hazard, forged), *kept[number + 1 :]]
        with pytest.raises(NotProven, match="It is not proven"):
            audited(drive, whole(drive, claims))


def test_potentials_prove_nothing_of_a_switch_that_is_to_be_off() -> None:
    """A and B are never both on, and A is on while B is off: what shows the one is no proof of the other."""
    drive = of("never A and B off")
    (short,) = shorting_sets(drive.stage)
    kept, data = proven(drive)
    number = next(number for number, (hazard, _) in enumerate(kept) if not hazard.joins)
    assert isinstance(kept[number][1], Trace)
    claim = data["claims"][number]
    del claim["run"]
    claim |= {"verdict": "safe", "potentials": 0}
    assert "potentials" in data["claims"][1 - number]
    assert {literal.switch for literal in short.literals} == {"A", "B"}
    with pytest.raises(NotProven, match="wanted on"):
        audited(drive, data)


def test_potentials_prove_no_length() -> None:
    drive = of("A on at most 11 ps")
    _, data = proven(drive)
    claim = claim_of(data, "longer")
    del claim["run"]
    claim |= {"verdict": "safe", "potentials": 0}
    with pytest.raises((NotProven, NoEvidence)):
        audited(drive, data)


@pytest.mark.parametrize(
    "asks",
    [None, [], ["longer"], ["longer", "12"], ["longer", 12.0], ["longer", True], ["follows", "a", 3], ["nears", 7, 3],
     ["nears", -1, 3], ["clears", "t", 1 << 70], ["sooner", 3], "longer"],
)  # fmt: skip
def test_a_question_that_is_none_is_refused(asks: object) -> None:
    drive = of("A on at most 12 ps")
    _, data = proven(drive)
    claim_of(data, "longer")["asks"] = asks
    assert refuses(drive, data)


def test_what_is_too_short_is_replayed_though_a_limit_ended_the_search_for_the_shortest() -> None:
    """A run that is not known to be the shortest is still claimed from where what is too short begins."""
    text = (
        'drive "d"\nwrites one at a time, 1 ps to 3 ps apart, turn-offs first\nstage\n  rails P N\n  leg U UH UL\n'
        "  leg V VH VL\nparts\n  p on 3 ps off 0 ps\npaths\n  VL VH UL UH through p\ncarriers\n"
        "  k 200 GHz duty 10 % to 50 % updates at rise\nmodes VL VH UL UH\n  ma on off off on\n  mb on off ~k k\n"
        "moves\n  start ma\n  ma, mb -> mb when e1 unbroken\n    set all off\n    wait 0 ps to 1 ps\n"
        "  mb -> ma when e2 earliest 156 ps\n    set UH off\n    wait 120 ps to 125 ps\n    set VH off\n"
        "trips\n  t0 from any -> ma at once\n    set all off\n    wait 0 ps\n"
        "rules\n  mb and ma at least 6 ps apart\n"
    )
    drive = drive_of(text)
    kept: list[Kept] = []
    outcome = check(drive, "t.dseq", frozenset(), at_most(800), kept)
    assert any(isinstance(one, Unsafe) and not one.greatest for one in outcome.verdicts)
    assert audited(drive, whole(drive, kept)).unsafe >= 1
