"""Evidence is accepted where it proves, and refused where it does not."""

import ast
import json
import re
from collections.abc import Callable, Iterator
from copy import deepcopy
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from judge.draws import draw, flowing
from proofs import at_most, leg
from reading import drive_of

import seqcheck
from seqcheck.checking import Kept, check
from seqcheck.circuit import shorting_sets
from seqcheck.cli import main
from seqcheck.drive import Drive
from seqcheck.evidence.audit import Audited, NotProven, audit
from seqcheck.evidence.certificate import Evidence, NoEvidence, read, written
from seqcheck.evidence.cover import shorts as walked
from seqcheck.evidence.cover.shorts import first_uncovered, shorts
from seqcheck.hazards import Hazard, Literal, delays
from seqcheck.proving.certify import cover
from seqcheck.proving.clocks import Manner
from seqcheck.proving.projection import Projection
from seqcheck.proving.prove import Prover
from seqcheck.proving.search import first_hazard, nodes, ticks
from seqcheck.proving.views import view
from seqcheck.verdict import Trace

SAMPLES = Path(__file__).parent.parent / "samples"
GOOD = sorted(SAMPLES.glob("*.dseq"))
TWINS = [path for path in sorted((SAMPLES / "faulty").glob("*.dseq")) if not path.stem.startswith("charger")]
SHORTING = [path for path in TWINS if re.match(r"# finding: .*(short|overlap)", path.read_text("utf-8"))]
HOUSE = Path(seqcheck.__file__).parent
SEEDS = range(60)
CAREFUL = leg(
    "a off off\nb on off\nc off on",
    "  start a\n  a -> b when e\n  b -> c when f\n    set all off\n    wait 6 ps",
)
CARRIED = leg(
    "a off off\nb k ~k\nc k off\nd off off",
    "  start a\n  a -> b when e\n  b -> c when f\n  c -> d when g\n    wait 3 ps to 9 ps\n"
    "  d -> b when h\n    wait 6 ps",
    more="carriers\n  k 20 GHz duty 20 % to 80 % dead time 6 ps updates at rise",
    trips="  t from any -> a within 7 ps",
)
"""Two safe legs, the second with a carrier that is joined and left, and a trip."""


def evidence_of(drive: Drive) -> str:
    """The evidence of a drive's verdicts, as lint writes it."""
    kept: list[Kept] = []
    check(drive, "t.dseq", frozenset(), at_most(6000), kept)
    return written(drive, kept)


def covered(drive: Drive) -> dict[str, Any]:
    """Evidence that the only hazard of a drive is safe by a cover, also where the screen would settle it."""
    (hazard,) = shorting_sets(drive.stage)
    looking = view(drive, hazard, delays(hazard, drive.paths), True)
    manner = Manner(forget=bool(looking.carriers), cut=True, measure=False)
    projection = Projection(looking, Prover(drive)._firmware(looking, False), manner)
    assert first_hazard(projection.initial(), at_most(6000)) is None
    data: dict[str, Any] = json.loads(written(drive, [(hazard, cover(projection, however_late=True))]))
    return data


def audited(drive: Drive, text: str) -> Audited:
    return audit(drive, read(text))


# What proves is accepted


@pytest.mark.parametrize("sample", GOOD, ids=lambda path: path.stem)
def test_the_evidence_of_a_sample_is_accepted(sample: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lint", str(sample), "--evidence", str(tmp_path), "--as", "lines"]) == 0
    assert [path.name for path in tmp_path.iterdir()] == [f"{sample.name}.json"]
    assert main(["audit", str(sample), str(tmp_path / f"{sample.name}.json")]) == 0
    said = capsys.readouterr()
    assert "safe" in said.out
    assert "unsafe" not in said.out
    assert said.err == ""


@pytest.mark.parametrize("twin", SHORTING[::3], ids=lambda path: path.stem)
def test_the_run_of_a_twin_is_replayed(twin: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lint", str(twin), "--evidence", str(tmp_path), "--as", "lines"]) == 1
    assert main(["audit", str(twin), str(tmp_path / f"{twin.name}.json")]) == 1
    assert "unsafe, with their runs" in capsys.readouterr().out


def test_evidence_knows_no_waivers_and_nothing_but_shorts(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """An unsafe hazard that is waived is still unsafe there; a mode that cannot be reached is no matter of evidence."""
    head = "clock 1 GHz, late by at most 0 ps\nwrites together"
    moves = "  start a\n  a -> b when e\n  b -> a when f\n  c -> a when f"
    text = leg("a on off\nb off on\nc off off", moves, head=head)
    waivers = 'rules\n  waive overlap for U because "x"\n  waive unreachable for c because "x"\n'
    for name, rows, code, proven in (("w", text + waivers, 0, 1), ("u", text.replace("b off on", "b off off"), 1, 0)):
        file = tmp_path / f"{name}.dseq"
        file.write_text(rows, encoding="utf-8")
        assert main(["lint", str(file), "--evidence", str(tmp_path)]) == code
        assert main(["audit", str(file), f"{file}.json"]) == proven


@pytest.mark.parametrize("seed", SEEDS)
def test_every_verdict_on_a_drawn_drive_is_borne_out(seed: int) -> None:
    drive = drive_of(draw(seed))
    kept: list[Kept] = []
    outcome = check(drive, "t.dseq", frozenset(), at_most(6000), kept)
    found = audited(drive, written(drive, kept))
    unsafe = sum(isinstance(proof, Trace) for _, proof in kept)
    undecided = sum(proof is None for _, proof in kept)
    assert (found.unsafe, found.undecided) == (unsafe, undecided)
    assert found.safe == len(outcome.verdicts) - unsafe - undecided
    assert found.however_late == sum(getattr(one, "however_late", False) for one in outcome.verdicts) - sum(
        proof is None and getattr(one, "however_late", False)
        for one, (_, proof) in zip(outcome.verdicts, kept, strict=True)
    )


@pytest.mark.parametrize("seed", range(40))
def test_every_verdict_on_a_winding_that_must_flow_is_borne_out(seed: int) -> None:
    drive = drive_of(flowing(seed))
    kept: list[Kept] = []
    check(drive, "t.dseq", frozenset(), at_most(1500), kept)
    found = audited(drive, written(drive, kept))
    assert found.unsafe == sum(isinstance(proof, Trace) for _, proof in kept)
    assert found.undecided == sum(proof is None for _, proof in kept)


def test_the_same_verdicts_give_the_same_evidence() -> None:
    assert evidence_of(drive_of(CARRIED)) == evidence_of(drive_of(CARRIED))


def test_places_comments_and_the_title_may_change() -> None:
    text = evidence_of(drive_of(CAREFUL))
    changed = "# more\n\n" + CAREFUL.replace('drive "leg"', 'drive "another"').replace("a -> b", "a   ->   b")
    assert audited(drive_of(changed), text).safe == 1


def test_the_meaning_may_not_change() -> None:
    text = evidence_of(drive_of(CAREFUL))
    with pytest.raises(NoEvidence, match="means something else"):
        audited(drive_of(CAREFUL.replace("wait 6 ps", "wait 7 ps")), text)


# What does not prove is refused


def _refuses(drive: Drive, data: dict[str, Any]) -> bool:
    try:
        audited(drive, json.dumps(data))
    except (NotProven, NoEvidence):
        return True
    return False


@pytest.mark.parametrize(("text", "least"), [(CAREFUL, 1.0), (CARRIED, 0.8)], ids=["careful", "carried"])
def test_a_zone_left_out_is_missed(text: str, least: float) -> None:
    """Where stays are cut short the prover also stores what the checker, which keeps to them, never comes to."""
    drive = drive_of(text)
    data = covered(drive)
    entries = data["claims"][0]["cover"]["entries"]
    refused = total = 0
    for number, entry in enumerate(entries):
        for place in range(len(entry["zones"])):
            damaged = deepcopy(data)
            del damaged["claims"][0]["cover"]["entries"][number]["zones"][place]
            total += 1
            refused += _refuses(drive, damaged)
    assert total >= 5
    assert refused >= least * total


def test_no_word_of_a_reached_state_can_be_changed() -> None:
    drive = drive_of(CAREFUL)
    data = covered(drive)
    spared = []
    for number, entry in enumerate(data["claims"][0]["cover"]["entries"]):
        for name, place, word in _other_words(entry["state"]):
            damaged = deepcopy(data)
            damaged["claims"][0]["cover"]["entries"][number]["state"][name][place] = word
            if not _refuses(drive, damaged):
                spared.append((number, name, place, word))
    assert spared == []


def _other_words(state: dict[str, Any]) -> Iterator[tuple[str, int, str]]:
    for name, words in (
        ("literals", ("out", "entering", "in", "leaving", "blip")),
        ("effective", ("on", "off", "k", "~k")),
        ("written", ("on", "off", "k", "~k")),
        ("pins", ("off", "on going")),
    ):
        for place, old in enumerate(state[name]):
            yield from ((name, place, word) for word in words if word != old)


def test_a_tightened_bound_is_refused_unless_it_is_still_a_proof() -> None:
    """Nearly every bound is met by some run here; the rest are wider than need be, since the search widens zones."""
    stays = "  start a\n  a -> b after 3 ps to 4 ps\n  b -> c after 2 ps to 5 ps\n"
    text = leg("a off off\nb on off\nc off on", stays + "    set all off\n    wait 6 ps to 8 ps")
    drive = drive_of(text)
    data = covered(drive)
    refused = total = 0
    for number, entry in enumerate(data["claims"][0]["cover"]["entries"]):
        for place, zone in enumerate(entry["zones"]):
            for bound in range(len(zone)):
                damaged = deepcopy(data)
                damaged["claims"][0]["cover"]["entries"][number]["zones"][place][bound][2] -= 1
                total += 1
                refused += _refuses(drive, damaged)
    assert total >= 20
    assert refused >= total * 2 // 3


def _reached(drive: Drive, change: Callable[[list[dict[str, Any]]], None]) -> dict[str, Any]:
    """Evidence for an unsafe drive out of all that can be reached, with its hazardous entries changed."""
    (hazard,) = shorting_sets(drive.stage)
    looking = view(drive, hazard, delays(hazard, drive.paths), True)
    projection = Projection(looking, Prover(drive)._firmware(looking, True), Manner(False, False, False))
    found = list(nodes(projection.initial(), at_most(3000)))
    hot = {repr(node.location.key) for node in found if node.location.hot and ticks(node.location, node.zone)}
    assert hot
    data = cover(projection, however_late=False)
    entries: list[dict[str, Any]] = data["entries"]  # type: ignore[assignment]
    hazardous = [one for one in entries if all(word in ("in", "leaving") for word in one["state"]["literals"])]
    change(hazardous)
    data["entries"] = [one for one in entries if one]
    whole: dict[str, Any] = json.loads(written(drive, [(hazard, data)]))
    return whole


def _nothing(_: list[dict[str, Any]]) -> None:
    pass


def _dropped(entries: list[dict[str, Any]]) -> None:
    for entry in entries:
        entry.clear()


def _renamed(entries: list[dict[str, Any]]) -> None:
    for entry in entries:
        entry["state"]["literals"] = ["in", "out"]


def _emptied(entries: list[dict[str, Any]]) -> None:
    for entry in entries:
        entry["zones"] = [[[0, 0, -1]]]


def _unbounded(entries: list[dict[str, Any]]) -> None:
    for entry in entries:
        entry["clocks"], entry["zones"] = [], [[]]


HASTY = (
    leg("a off off\nb on off\nc off on", "  start a\n  a -> b when e\n  b -> c when f\n    set all off\n    wait 4 ps"),
    leg("a off off\nb on off\nc on on", "  start a\n  a -> b when e\n  b -> c when f"),
    leg("a off off\nb k off\nc off on", "  start a\n  a -> b when e\n  b -> c when f\n    wait 6 ps\n",
        more="carriers\n  k 20 GHz duty 20 % to 80 % updates at rise"),
)  # fmt: skip


@pytest.mark.parametrize("change", [_nothing, _dropped, _renamed, _emptied, _unbounded])
@pytest.mark.parametrize("text", HASTY)
def test_no_cover_proves_an_unsafe_drive(text: str, change: Callable[[list[dict[str, Any]]], None]) -> None:
    drive = drive_of(text)
    with pytest.raises(NotProven):
        audited(drive, json.dumps(_reached(drive, change)))


def test_a_claim_of_lateness_is_a_claim() -> None:
    """Safe only as firmware is in time: the same cover does not show it however late that is."""
    moves = "  start a\n  a -> b when e\n    set A on, B on\n    wait up to 1 ps\n    set A off"
    drive = drive_of(leg("a off off\nb off on", moves, parts="p on 3 ps off 2 ps"))
    data = json.loads(evidence_of(drive))
    assert audited(drive, json.dumps(data)) == Audited(1, 0, 0, 0)
    data["claims"][0]["cover"]["however late"] = True
    assert _refuses(drive, data)


def test_every_short_must_be_spoken_of() -> None:
    drive = drive_of(CAREFUL)
    data = json.loads(evidence_of(drive))
    data["claims"] = []
    with pytest.raises(NotProven, match="Nothing is said of the short through A and B"):
        audited(drive, json.dumps(data))


def about(drive: Drive, *literals: Literal) -> Evidence:
    """The evidence of a drive with one hazard, said of other literals."""
    evidence = read(evidence_of(drive))
    (claim,) = evidence.claims
    return replace(evidence, claims=(replace(claim, hazard=Hazard(literals, ())),))


@pytest.mark.parametrize(
    "literals",
    [(), (Literal("Q"), Literal("A")), (Literal("A"), Literal("A")), (Literal("A"), Literal("B", False))],
)
def test_a_hazard_that_no_stage_has_is_no_evidence(literals: tuple[Literal, ...]) -> None:
    """Without a switch, with one that is none, with one twice, or neither of conduction nor of open switches alone."""
    drive = drive_of(CAREFUL)
    with pytest.raises(NoEvidence):
        audit(drive, about(drive, *literals))


def test_what_shorts_nothing_must_not_be_claimed() -> None:
    drive = drive_of(CAREFUL)
    with pytest.raises(NotProven, match="short nothing"):
        audit(drive, about(drive, Literal("A")))


def test_a_stage_with_too_many_ways_is_not_proven(monkeypatch: pytest.MonkeyPatch) -> None:
    drive = drive_of(CAREFUL)
    monkeypatch.setattr(walked, "MOST_STEPS", 1)
    with pytest.raises(NotProven, match="too many ways"):
        audit(drive, read(evidence_of(drive)))


def test_a_run_that_is_none_is_refused() -> None:
    drive = drive_of(HASTY[0])
    data = json.loads(evidence_of(drive))
    assert audited(drive, json.dumps(data)).unsafe == 1
    data["claims"][0]["run"]["overlap"][1] += 1
    with pytest.raises(NotProven, match="does not replay"):
        audited(drive, json.dumps(data))


@pytest.mark.parametrize("sample", GOOD, ids=lambda path: path.stem)
def test_the_shorting_sets_are_all_shorts(sample: Path) -> None:
    from seqcheck.language import read as read_drive

    drive = read_drive(sample.read_text("utf-8"), str(sample), lambda name: Path(name).read_text("utf-8"))
    hazards = shorting_sets(drive.stage)
    assert first_uncovered(drive.stage, hazards) is None
    assert all(shorts(drive.stage, hazard) for hazard in hazards)
    for place in range(len(hazards)):
        assert first_uncovered(drive.stage, hazards[:place] + hazards[place + 1 :]) is not None


# Calls and texts that are wrong


@pytest.mark.parametrize(
    "text",
    ["", "{", "[]", "3", '"x"', "{}", '{"format":"seqcheck evidence 3"}', "[" * 100_000, '{"format":1e999}',
     '{"format":"seqcheck evidence 3","digest":"0","claims":[]}',
     '{"format":"seqcheck evidence 3","digest":"0","claims":[{"literals":[[1]]}]}'],
)  # fmt: skip
def test_what_is_no_evidence_gets_one_message(
    text: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    drive, evidence = tmp_path / "t.dseq", tmp_path / "e.json"
    drive.write_text(CAREFUL)
    evidence.write_text(text)
    assert main(["audit", str(drive), str(evidence)]) == 2
    said = capsys.readouterr()
    assert said.out == ""
    assert said.err.startswith("seqcheck: error: ")
    assert len(said.err.splitlines()) == 1


def test_evidence_that_proves_nothing_is_exit_four(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    drive, evidence = tmp_path / "t.dseq", tmp_path / "e.json"
    drive.write_text(CAREFUL)
    data = json.loads(evidence_of(drive_of(CAREFUL)))
    data["potentials"][0]["points"].pop()
    evidence.write_text(json.dumps(data))
    assert main(["audit", str(drive), str(evidence)]) == 4
    assert "does not prove" in capsys.readouterr().err


def test_two_files_of_one_name_have_no_room_in_one_folder(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for name in ("one", "two"):
        (tmp_path / name).mkdir()
        (tmp_path / name / "t.dseq").write_text(CAREFUL)
    files = [str(tmp_path / name / "t.dseq") for name in ("one", "two")]
    assert main(["lint", *files, "--evidence", str(tmp_path / "e")]) == 2
    assert "two files are named" in capsys.readouterr().err


# What the checker is made of

CHECKER = [HOUSE / "evidence" / "audit.py", HOUSE / "evidence" / "certificate.py", HOUSE / "evidence" / "digest.py",
           *sorted((HOUSE / "evidence" / "cover").glob("*.py"))]  # fmt: skip
ALLOWED = ("seqcheck.drive", "seqcheck.hazards", "seqcheck.quantities", "seqcheck.verdict", "seqcheck.source",
           "seqcheck.evidence", "collections.abc", "dataclasses", "enum", "fractions", "functools", "hashlib",
           "itertools", "json", "math", "operator", "typing")  # fmt: skip


@pytest.mark.parametrize("path", CHECKER, ids=lambda path: path.stem)
def test_the_checker_imports_the_model_and_the_replay_only(path: Path) -> None:
    for node in ast.walk(ast.parse(path.read_text("utf-8"))):
        names = [alias.name for alias in node.names] if isinstance(node, ast.Import) else []
        names += [node.module or ""] if isinstance(node, ast.ImportFrom) else []
        assert all(name.startswith(ALLOWED) for name in names), names


def test_the_checker_can_be_read_in_one_sitting() -> None:
    """What decides about covers and potentials."""
    lines = sum(len(path.read_text("utf-8").splitlines()) for path in (HOUSE / "evidence" / "cover").glob("*.py"))
    assert lines <= 2200


def test_a_never_rule_is_claimed_and_no_other_is() -> None:
    """A and B are both off in passing, never both on; no claim can be missed or changed."""
    drive = drive_of(f"{CAREFUL}rules\n  never A off and B off\n  never A and B\n")
    evidence = json.loads(evidence_of(drive))
    assert audited(drive, json.dumps(evidence)) == Audited(2, 2, 1, 0)
    of_rule = [one for one in evidence["claims"] if not one["joins"]]
    assert len(of_rule) == 2
    for rule in of_rule:
        left = {**evidence, "claims": [one for one in evidence["claims"] if one is not rule]}
        with pytest.raises(NotProven, match="Nothing is said of the rule in line"):
            audited(drive, json.dumps(left))
    other = deepcopy(evidence)
    next(one for one in other["claims"] if not one["joins"])["literals"][1][1] ^= True
    with pytest.raises(NoEvidence, match="in no rule"):
        audited(drive, json.dumps(other))
