"""Single faults against the judge: where each hazard happens when one thing is stuck."""

import contextlib
import json
from collections.abc import Iterator
from pathlib import Path

import pytest
from forms import outcome_schema
from judge.draws import draw, flowing
from judge.shorts import asked
from judge.stuck import places
from reading import drive_of
from test_judged import FLOWING, SEEDS

from seqcheck import failing
from seqcheck.circuit import opening_sets, shorting_sets
from seqcheck.cli import main
from seqcheck.drive import Drive
from seqcheck.failing import single_faults
from seqcheck.faults import Faulted, Where
from seqcheck.hazards import Fault

MOST_STATES = 20_000
SAMPLES = Path(__file__).parent.parent / "samples"


def said(text: str) -> Iterator[tuple[str, frozenset[Where], frozenset[Where] | None]]:
    """Each fault with each hazard in words: where the program and where the judge find it."""
    drive = drive_of(text)
    hazards = (*shorting_sets(drive.stage), *opening_sets(drive.stage))
    judged = {frozenset(literals): (literals, forbids) for literals, forbids in asked(drive)}
    for faulted in single_faults(drive, hazards, frozenset(), lambda _: None):
        brought = {frozenset(one.hazard.literals): one.spread for one in faulted.brings}
        for fault in faulted.faults:
            for names, (literals, forbids) in judged.items():
                if names not in brought and not _near(drive, fault) & {one.switch for one in literals}:
                    continue
                spread = brought.get(names)
                assert spread is None or spread.limit is None, "quick ones are chosen"
                found = frozenset() if spread is None else spread.places
                where = places(drive, literals, forbids, fault, MOST_STATES)
                yield f"{fault} {' '.join(map(str, literals))}", found, where


def _near(drive: Drive, fault: Fault) -> set[str]:
    """The switch that is stuck, and those whose interlock sees that its pin is."""
    locks = [{one.first, one.second} for one in drive.interlocks] if fault.pin else []
    return {fault.switch}.union(*(one for one in locks if fault.switch in one))


INTERLOCKED = (35, 39, 43, 184, 202, 251)
"""Drawn drives with interlocks, quick for the judge."""


@pytest.mark.parametrize("seed", [*INTERLOCKED, *SEEDS[20:40]])
def test_a_fault_brings_hazards_where_the_judge_finds_them(seed: int) -> None:
    held = list(said(draw(seed)))
    assert [one for one in held if one[1] != one[2]] == []


@pytest.mark.parametrize("seed", FLOWING)
def test_a_fault_opens_windings_where_the_judge_finds_it(seed: int) -> None:
    held = list(said(flowing(seed)))
    assert [one for one in held if one[1] != one[2]] == []


def test_faults_bring_something_and_nothing() -> None:
    """Both come up, and with an interlock a pin that is stuck is not a switch that is."""
    found = [faulted for seed in INTERLOCKED for faulted in _faulted(drive_of(draw(seed)))]
    assert 5 <= sum(bool(one.brings) for one in found) <= len(found) - 5
    alone = {(one.faults[0].switch, one.faults[0].on, bool(one.brings)) for one in found if len(one.faults) == 1}
    assert any((switch, on, not brings) in alone for switch, on, brings in alone)


def _faulted(drive: Drive) -> tuple[Faulted, ...]:
    return single_faults(drive, shorting_sets(drive.stage), frozenset(), lambda _: None)


# As a user meets it


LEG = """\
drive "leg"
writes together
loop at least 10 us
stage
  rails P N
  leg U UH UL
  {more}
parts
  p on 1 us to 2 us off 2 us to 3 us
paths
  UH UL{names} through p
  {locks}
pins
  UH PA8 active high rests low
  UL PB13 active low rests high
  {pins}
modes  UH  UL{names}
  idle off off{off}
  up   on  off{off}
  down off on{off}
moves
  start idle
  idle -> up when lift
  idle -> down when lower
  up -> idle when stop
"""


def linted(tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, *more: str) -> tuple[int, str]:
    """The exit code of a lint with faults, and its output from the table on."""
    (tmp_path / "t.dseq").write_text(text, encoding="utf-8")
    with contextlib.chdir(tmp_path):
        code = main(["lint", "t.dseq", "--with-fault", *more])
    out, err = capsys.readouterr()
    assert err == ""
    return code, out


def leg(locks: str = "", more: str = "", names: str = "", pins: str = "") -> str:
    """A leg with an interlock or more switches, if need be."""
    return LEG.format(locks=locks, more=more, names=names, pins=pins, off=" off" * len(names.split()))


def test_the_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """UL can conduct up to 3 us after its pin went off; from row down nothing leads on, so only there."""
    code, out = linted(tmp_path, capsys, leg())
    assert code == 1  # row down has no way back: the table changes nothing of that
    assert out[out.index("single faults") :].startswith(
        """\
single faults  4 of 8 faults bring a hazard
  stuck            what it brings alone, with the firmware as it is
  UH on, PA8 high  P to N while UL can conduct: in row down
  UL on, PB13 low  P to N while UH can conduct: in row up; in passing in idle
  nothing          comes of UH off, PA8 low; UL off, PB13 high

"""
    )


def test_an_interlock_sees_a_pin_that_is_stuck(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A pin that is stuck on keeps its partner off; a switch that is stuck does not."""
    _, out = linted(tmp_path, capsys, leg(locks="interlock UH UL"))
    assert "  UH on    P to N while UL can conduct: in row down\n" in out
    calm = "nothing comes of PA8 of UH high; UH off; PA8 of UH low; PB13 of UL low; UL off; PB13 of UL high"
    assert calm in " ".join(out.split())


def test_a_switch_that_shorts_alone(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Nothing is left to come together: it happens wherever time passes."""
    _, out = linted(tmp_path, capsys, leg(more="switch X from P to N", names=" X", pins="X PC1 active high rests low"))
    assert "P to N by itself: in rows idle, up and down\n" in out


def test_lines_have_the_place_of_the_switch(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    _, out = linted(tmp_path, capsys, leg(), "--as", "lines")
    assert out.splitlines()[:2] == [
        "t.dseq:6:3: note: stuck UH on, PA8 high: P to N while UL can conduct: in row down [single-fault]",
        "t.dseq:6:3: note: stuck UL on, PB13 low: P to N while UH can conduct: in row up; in passing in idle "
        "[single-fault]",
    ]


def test_the_exit_code_is_that_of_the_lint(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, out = linted(tmp_path, capsys, leg().replace("up -> idle", "up, down -> idle"))
    assert code == 0
    assert "4 of 8 faults bring a hazard" in out
    code, out = linted(tmp_path, capsys, leg().replace("up   on  off", "up   on  on "))
    assert code == 1
    said = "P to N while UL can conduct, as without this fault: in rows\n                   up and down; in passing"
    assert said in out


def test_what_a_limit_leaves_open_is_said(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Never `nothing`: undecided, or undecided elsewhere."""
    monkeypatch.setattr(failing, "MOST_ZONES", 4)
    _, out = linted(tmp_path, capsys, leg())
    assert "in row up; elsewhere undecided\n                   (limit reached: 4 zones)\n" in out
    monkeypatch.setattr(failing, "MOST_ZONES", 1)
    _, out = linted(tmp_path, capsys, leg())
    assert "single faults  0 of 8 faults bring a hazard, 4 undecided\n" in out
    assert "undecided whether P to N while UL can conduct (limit reached:\n                   1 zones)\n" in out


def test_json_has_the_table(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Every fault, also those of which nothing comes, each place, and the words of the screen."""
    code, out = linted(tmp_path, capsys, leg(locks="interlock UH UL"), "--as", "json")
    outcome_schema().validate(json.loads(out))
    (entry,) = json.loads(out)["files"]
    assert code == 1
    assert len(entry["faults"]) == 8
    first = entry["faults"][0]
    assert (first["name"], first["stuck"]) == ("UH on", [{"switch": "UH", "on": True, "pin": False}])
    (brought,) = first["brings"]
    assert brought["left"] == [{"switch": "UL", "on": True}]
    assert (brought["rows"], brought["places"]) == (["down"], [{"mode": "down"}])
    assert (brought["anyway"], brought["limit"]) == (False, None)
    assert brought["text"] == "P to N while UL can conduct: in row down"
    assert sum(bool(one["brings"]) for one in entry["faults"]) == 2


def test_json_names_moves_and_trips_by_number_and_place(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lint", str(SAMPLES / "pump.dseq"), "--with-fault", "--as", "json"]) == 0
    data = json.loads(capsys.readouterr().out)
    outcome_schema().validate(data)
    places = [place for one in data["files"][0]["faults"] for brought in one["brings"] for place in brought["places"]]
    (move,) = [place for place in places if "move" in place]
    assert (move["mode"], move["move"], move["place"]["line"]) == ("star", 2, 52)


def test_json_says_nothing_of_faults_unless_asked(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "t.dseq").write_text(leg(), encoding="utf-8")
    main(["lint", str(tmp_path / "t.dseq"), "--as", "json"])
    assert "faults" not in json.loads(capsys.readouterr().out)["files"][0]


@pytest.mark.parametrize("form", ["sarif", "vcd", "annotations"])
def test_forms_without_a_place_for_the_table(form: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["lint", "x.dseq", "--with-fault", "--as", form]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err == (
        "seqcheck: error: --with-fault goes with '--as screen', 'lines' or 'json'; "
        f"'{form}' has no place for what it tells\n"
    )
