"""Open windings through the whole program: what a file is told, and that evidence of them is held to account."""

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from outside import openings, unsafe
from proofs import at_most
from reading import drive_of

from seqcheck.checking import Kept, check
from seqcheck.cli import main
from seqcheck.evidence.audit import NotProven, audit
from seqcheck.evidence.certificate import NoEvidence, read, written
from seqcheck.verdict import Check, Safe

SAMPLES = Path(__file__).parent.parent / "samples"
SOURCE = """\
drive "two switches hold a choke's current"
writes together
stage
  rails P N
  switch A from K to N one way
  switch B from K to N one way
  winding P K must flow
parts
  fet on 2 ns to 9 ns off 3 ns to 8 ns
paths
  A B through fet
modes A   B
  a   on  off
  b   off on
moves
  start a
  a -> b when go
    set B on
    wait 6 ns
  b -> a when back
    set A on
    wait 6 ns
"""


def test_make_before_break_takes_the_longest_on_less_the_shortest_off() -> None:
    """9 − 3 ns must lie between, and 1 ps less opens for 1 ps [derived]."""
    assert openings(SOURCE) == {}
    assert openings(SOURCE.replace("wait 6 ns", "wait 5.999 ns")) == {("A", "B"): 1}


def test_break_before_make() -> None:
    """Off from 3 ns on, on after 9 ns at last, 6 ns between the commands [derived]."""
    text = SOURCE.replace("set B on", "set A off").replace("set A on", "set B off")
    text = text.replace("when go", "when go earliest 1 us").replace("when back", "when back earliest 1 us")
    assert openings(text) == {("A", "B"): 12_000}


def test_a_row_that_opens_is_named() -> None:
    text = SOURCE.replace("  a   on  off", "  a   off off")
    (verdict,) = unsafe(text, opened=True).values()
    assert (verdict.check, verdict.overlap, verdict.row, verdict.place.line) == (Check.OPEN_WINDING, None, "a", 13)


@pytest.mark.parametrize("known", ["current out of K", "current into P"])
def test_a_known_direction_rules_the_other_out(known: str) -> None:
    """Both ask for a current from K to P, which these switches never let flow: it is not asked for [derived]."""
    text = SOURCE.replace("  a   on  off", f"  a   off off with {known}").replace("  b   off on", "  b   on on")
    text = text.replace("when go", f"when go with {known}").replace("wait 6 ns", "wait 9 ns").split("  b -> a")[0]
    assert openings(text.replace("9 ns\n", "8.999 ns\n")) == {("A", "B"): 9_000 - 8_999}
    assert openings(text) == {}


def test_a_floating_pin_is_open_too() -> None:
    text = SOURCE.replace("modes A", "pins\n  A GA active high rests unknown\n  B GB active high rests low\nmodes A")
    assert openings(text.replace("  a   on  off", "  a   free off")) == {("A", "B"): None}


def test_an_interlock_that_holds_off_opens() -> None:
    """Neither passes while both are commanded: what saves a leg from a short opens this winding [derived]."""
    text = SOURCE.replace("modes A", "  interlock A B\nmodes A")
    found = unsafe(text, opened=True)
    assert set(found) == {("A", "B")}
    outcome = check(drive_of(text), "t.dseq", frozenset(), lambda _: None)
    assert not [one for one in outcome.findings if one.check is Check.HELD_BY_INTERLOCK]


def test_the_lines_of_a_counterexample(capsys: pytest.CaptureFixture[str]) -> None:
    twin = SAMPLES / "faulty" / "borehole_trip_cuts_in.dseq"
    assert main(["lint", str(twin)]) == 1
    said = capsys.readouterr().out
    assert "OPEN-WINDING" in said
    text = "current from P to K has no way while S1, S3 and S5 are all off, for up to 400 ns."
    assert text in " ".join(said.split())
    assert "opening begins" in said
    assert "opening ends" in said
    assert "overlap" not in said
    assert "S3 can be off" in said
    picture = [line for line in said.splitlines() if line.startswith("  opening")]
    assert len(picture) == 2
    assert all("#" in line for line in picture)


def test_what_is_proven_is_counted_as_opening_sets(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lint", str(SAMPLES / "borehole.dseq")]) == 0
    assert "proven  2 opening sets: possible in no run" in capsys.readouterr().out


def test_a_winding_that_nothing_feeds_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = tmp_path / "t.dseq"
    file.write_text(SOURCE.replace("winding P K", "winding P Q"), encoding="utf-8")
    assert main(["lint", str(file)]) == 2
    assert capsys.readouterr().err == (
        f"{file}:7:3: error: nothing but this winding stands at 'Q', so that no current can flow through it; "
        "check its name, or name the other end alone [always-open]\n"
    )


# Evidence

TWO_WAY = SOURCE.replace("rails P N", "sources a b").replace("from K to N one way", "from a to K two way")
TWO_WAY = TWO_WAY.replace("switch B from a", "switch B from b").replace("winding P K", "winding K")
TWO_WAY = TWO_WAY.replace("    wait 6 ns\n", "    wait 20 ns\n")
"""A choke on one of two inputs: both together short, none opens, so that no change between them is proven."""


def evidence(text: str) -> dict[str, Any]:
    kept: list[Kept] = []
    drive = drive_of(text)
    check(drive, "t.dseq", frozenset(), at_most(6000), kept)
    found: dict[str, Any] = json.loads(written(drive, kept))
    return found


def judged(text: str, data: dict[str, Any]) -> tuple[int, int]:
    found = audit(drive_of(text), read(json.dumps(data)))
    return found.safe, found.unsafe


def test_evidence_of_both_kinds() -> None:
    assert judged(SOURCE, evidence(SOURCE)) == (1, 0)
    assert judged(TWO_WAY, evidence(TWO_WAY)) == (1, 1)


def _drop(data: dict[str, Any]) -> None:
    data["claims"] = [one for one in data["claims"] if "opens" not in one]


def _needs(data: dict[str, Any]) -> None:
    data["claims"][-1]["needs"] = [[["current", "out of", "K"], ["current", "into", "P"]]]


def _larger(data: dict[str, Any]) -> None:
    data["claims"][-1]["literals"] = data["claims"][-1]["literals"][:1]


def _other_current(data: dict[str, Any]) -> None:
    data["claims"][-1]["opens"] = [["K", "P"]]


@pytest.mark.parametrize(
    ("damage", "why"),
    [
        (_drop, "Nothing is said of the winding that is open while none of A and B conducts"),
        (_needs, "Nothing is said of the winding that is open"),
        (_larger, "together do not open what is said"),
        (_other_current, "together do not open what is said"),
    ],
)
def test_evidence_that_leaves_an_open_winding_out(damage: Callable[[dict[str, Any]], None], why: str) -> None:
    data = evidence(SOURCE)
    damage(data)
    with pytest.raises(NotProven, match=why):
        judged(SOURCE, data)


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("literals", [["A", True], ["B", True]]),
        ("needs", [[["current", "along", "K"]]]),
        ("needs", [[["K"]]]),
        ("opens", [["K"]]),
        ("opens", [[1, None]]),
    ],
)
def test_evidence_that_is_none(name: str, value: object) -> None:
    data = evidence(SOURCE)
    data["claims"][-1][name] = value
    with pytest.raises(NoEvidence):
        judged(SOURCE, data)


def test_a_cover_of_one_direction_proves_nothing_of_the_other() -> None:
    """Proven with the direction known everywhere; the file without it means something else."""
    one_way = TWO_WAY.replace("two way", "one way")
    outcome = check(drive_of(one_way), "t.dseq", frozenset(), lambda _: None)
    assert all(isinstance(one, Safe) for one in outcome.verdicts)
    with pytest.raises(NoEvidence, match="means something else"):
        judged(TWO_WAY, evidence(one_way))
