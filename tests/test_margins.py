"""Margins: against the literal judge on drawn drives, at exact boundaries, and each shown by a run that is replayed."""

import contextlib
import json
import os
from collections.abc import Iterator
from pathlib import Path

import pytest
from forms import margins_schema
from judge.delays import delays_of
from judge.draws import draw
from judge.least import NEVER, least_gap
from judge.shorts import asked
from judge.stretched import stretched
from proofs import at_most, leg, silent
from reading import drive_of

from seqcheck.circuit import shorting_sets
from seqcheck.cli import main
from seqcheck.evidence.replay import NotPermitted, replay
from seqcheck.margins import budget
from seqcheck.proving.prove import Proven, Prover
from seqcheck.proving.search import LimitReached
from seqcheck.proving.tracing import Infeasible
from seqcheck.quantities import shown
from seqcheck.shipped import shipped
from seqcheck.verdict import Margin

SEEDS = (*range(300, 350), 11, 30, 45, 92, 102, 119, 120, 137, 149, 166, 198)
STATES, ZONES = 4000, 1500
SAMPLES = Path(__file__).parent.parent / "samples"


def compared(text: str) -> Iterator[tuple[str, object, object]]:
    """What (hazard and literal), the prover's margin and the judge's, of every safe hazard that both can tell."""
    drive = drive_of(text)
    judged = {frozenset(one.switch for one in literals): (literals, forbids) for literals, forbids in asked(drive)}
    prover = Prover(drive)
    for hazard in shorting_sets(drive.stage):
        literals, forbids = judged[frozenset(one.switch for one in hazard.literals)]
        try:
            if not isinstance(prover.prove(hazard, True, at_most(ZONES)), Proven):
                continue
        except LimitReached:
            continue
        for place, literal in enumerate(hazard.literals):
            said = told(prover, hazard, place)
            if said is None:
                continue
            after = literals.index(literal)
            right = least_gap(
                drive, literals, delays_of(drive, literals), after, facts_forbid=forbids, most_states=STATES
            )
            if right is not None:
                yield f"{' '.join(map(str, hazard.literals))} after {literal}", said, right


def told(prover: Prover, hazard: object, place: int) -> object:
    """The prover's margin, replayed; None where a limit ended the search."""
    try:
        gap = prover.gap(hazard, place, at_most(ZONES))  # type: ignore[arg-type]
        if gap.limit:
            return None
        if gap.trace is not None:
            replay(prover.drive, gap.trace)
    except (NotPermitted, Infeasible) as refusal:
        return f"not shown: {refusal}"
    return NEVER if gap.time is None else gap.time


def wrong(name: str, text: str) -> list[str]:
    return [f"{name}: {what}: said {said}, right {right}" for what, said, right in compared(text) if said != right]


def test_margins_of_drawn_drives() -> None:
    found = [line for seed in SEEDS for line in wrong(f"draw({seed})", draw(seed))]
    assert found == []


def test_the_slice_tells_margins_of_every_kind() -> None:
    """Else the comparison would be empty."""
    said = [right for seed in SEEDS[:40] for _, _, right in compared(draw(seed))]
    assert sum(isinstance(one, int) and one > 0 for one in said) > 8
    assert 0 in said
    assert NEVER in said


@pytest.mark.campaign
@pytest.mark.parametrize("chunk", range(64))
def test_margins_campaign(chunk: int) -> None:
    """SEQCHECK_SEEDS=0-5000 in 64 parts; drives with long stays as well."""
    first, _, last = os.environ.get("SEQCHECK_SEEDS", "0-640").partition("-")
    seeds = range(int(first) + chunk, int(last), 64)
    found = [line for seed in seeds for line in wrong(f"draw({seed})", draw(seed))]
    texts = [(seed, stretched(seed)) for seed in seeds]
    found += [line for seed, text in texts if text is not None for line in wrong(f"stretched({seed})", text)]
    assert found == []


SWAP = "  start a\n  a -> b when go\n    set A off\n    wait {} ps\n  b -> a when back\n    set B off\n    wait {} ps"


def margins_of(text: str) -> dict[str, Margin]:
    return {one.literal.switch: one for one in budget(drive_of(text), "t.dseq", silent).margins}


@pytest.mark.parametrize(("waits", "slacks"), [((5, 9), (0, 4)), ((6, 5), (1, 0)), ((1000, 7), (995, 2))])
def test_margin_is_wait_less_need(waits: tuple[int, int], slacks: tuple[int, int]) -> None:
    """Off within 8, on from 3 on: each change needs 5 ps."""
    found = margins_of(leg("a on off\nb off on", SWAP.format(*waits), parts="p on 3 ps to 4 ps off 2 ps to 8 ps"))
    assert (found["A"].slack, found["B"].slack) == slacks
    assert {one.needed for one in found.values()} == {5}


def test_an_end_at_time_0_counts() -> None:
    """The start mode is left in the instant of its entry: A was on for ever, B comes 7 ps after, 2 more than needed."""
    moves = "  start a\n  a -> b\n    set A off\n    wait 7 ps\n  b -> a when back\n    set B off\n    wait 9 ps"
    text = leg("a on off\nb off on", moves)
    assert margins_of(text)["A"].slack == 2
    assert wrong("leg", text) == []


def test_what_never_follows() -> None:
    """B is never left for A."""
    found = margins_of(leg("a on off\nb off on", SWAP.format(9, 9).partition("\n  b")[0]))
    assert found["B"].slack is None
    assert found["B"].exact
    assert found["A"].slack is not None


def test_a_long_stay_counts_whole() -> None:
    """A is off for 20 us, some twenty cycles of a carrier that it follows at other times, before B comes."""
    text = leg(
        "i off off\na k off\nb off on",
        "  start i\n  i -> a when go earliest 1 us\n  a -> i when stop\n  i -> b when turn earliest 20 us\n"
        "  b -> i when back",
        more="carriers\n  k 1 MHz duty 20 % to 80 %",
    )
    found = margins_of(text)
    assert found["A"].slack is not None
    assert found["A"].exact
    assert 19 * 10**6 < found["A"].slack < 20 * 10**6


def test_a_pulse_of_no_length_ends_nothing() -> None:
    """A is told on for 1 ps, on from 9 and off within 8: it is possible at one moment only, which is no time."""
    text = leg(
        "i off off\nb off on",
        "  start i\n  i -> b when go\n    set A on\n    wait 1 ps\n    set A off\n    wait 1 ps\n"
        "  b -> i when back earliest 1 ns",
        parts="p on 9 ps off 8 ps",
    )
    assert margins_of(text)["A"].slack is None


# As a program meets it


def answered(tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, *more: str) -> tuple[int, str, str]:
    """The exit code of `margins`, its output and its complaints."""
    (tmp_path / "t.dseq").write_text(text, encoding="utf-8")
    with contextlib.chdir(tmp_path):
        code = main(["margins", "t.dseq", *more])
    out, err = capsys.readouterr()
    return code, out, err


PAIR = leg("a on off\nb off on", SWAP.format(9, 5), parts="p on 3 ps to 4 ps off 2 ps to 8 ps")


def test_json_has_every_margin_with_its_run(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, out, err = answered(tmp_path, capsys, PAIR, "--as", "json")
    data = json.loads(out)
    margins_schema().validate(data)
    assert (code, err, data["format"], data["standing"]) == (0, "", "seqcheck margins 1", "proven")
    first, second = data["margins"]
    assert [first["after"], second["after"]] == [{"switch": "B", "on": True}, {"switch": "A", "on": True}]
    assert [(one["slack"], one["needed"], one["exact"], one["ticks"]) for one in (first, second)] == [
        (0, 5, True, None),
        (4, 5, True, None),
    ]
    assert first["text"] == "the margin after B until A is 0 s; the parts need 5 ps between the commands"
    for one in (first, second):
        gap, lanes = one["run"]["gap"], {lane["switch"]: lane for lane in one["run"]["switches"]}
        gone, come = (lanes[name] for name in ("AB" if one is second else "BA"))
        assert gap["end"] - gap["start"] == one["slack"]
        assert gap["start"] in [span["end"] for span in gone["possible"]]
        assert gap["end"] in [span["start"] for span in come["possible"]]


@pytest.mark.parametrize("name", ["vent", "inverter", "mist", "selector", "faulty/vent_short_pause"])
def test_json_of_samples_is_as_the_schema_says(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Ticks, carriers, interlocks, several supplies, and what is unsafe; the same numbers as on the screen."""
    path = str(SAMPLES / f"{name}.dseq")
    code = main(["margins", path, "--as", "json"])
    data = json.loads(capsys.readouterr().out)
    margins_schema().validate(data)
    assert (code, data["standing"]) == ((1, "unsafe") if "faulty" in name else (0, "proven"))
    assert main(["margins", path]) == code
    screen = capsys.readouterr().out
    for one in data["margins"]:
        assert (shown(one["slack"]) if one["slack"] is not None else "never follows") in screen
    for one in data["unsafe"]:
        assert one["overlap"] is None or shown(one["overlap"]) in screen


def test_what_is_undecided_is_not_proven(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "x.dseq").write_text((SAMPLES / "mist.dseq").read_text(encoding="utf-8"), encoding="utf-8")
    assert main(["margins", str(tmp_path / "x.dseq"), "--as", "json", "--most-zones", "1"]) == 3
    data = json.loads(capsys.readouterr().out)
    margins_schema().validate(data)
    assert (data["standing"], data["margins"]) == ("undecided", [])
    assert data["undecided"][0]["limit"] == "1 zones (--most-zones)"
    assert main(["margins", str(tmp_path / "x.dseq"), "--as", "lines", "--most-zones", "1"]) == 3
    assert "x.dseq:1:1: error: undecided, not proven: P to N through XH and XL; the limit was reached: 1 zones" in (
        capsys.readouterr().out
    )


def test_lines_have_the_place_that_sets_a_margin(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, out, err = answered(tmp_path, capsys, PAIR, "--as", "lines")
    lines = out.splitlines()
    assert (code, err, len(lines)) == (0, "", 2)
    moves = [number for number, line in enumerate(PAIR.splitlines(), 1) if "->" in line]
    assert lines[0].startswith(f"t.dseq:{moves[1]}:3: note: the margin after B until A is 0 s;")
    assert lines[1].startswith(f"t.dseq:{moves[0]}:3: note: the margin after A until B is 4 ps;")
    assert all(line.endswith(" [margin]") for line in lines)
    code, out, _ = answered(tmp_path, capsys, PAIR.replace("wait 5 ps", "wait 4 ps"), "--as", "lines")
    assert code == 1
    assert "error: P can be joined to N through A and B, for up to 1 ps: no dead time is left [no-margin]\n" in out
    once = leg("a on off\nb off on", SWAP.format(9, 9).partition("\n  b")[0])
    assert "note: A never follows B [margin]\n" in answered(tmp_path, capsys, once, "--as", "lines")[1]


def test_a_switch_that_shorts_alone_has_no_margin(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Neither in `margins`, nor for a rule, nor on the page."""
    text = leg("a off off", "  start a").replace("leg U A B", "switch A from P to N\n  switch B from P to Q")
    text = text.replace("rails P N", "rails P N") + "rules\n  margin at least 1 us\n"
    code, out, err = answered(tmp_path, capsys, text)
    assert (code, err) == (0, "")
    assert "1 hazard, each proven in no run.\n" in out
    assert "P to N through A: one switch alone, so that there is no margin to tell.\n" in out
    data = json.loads(answered(tmp_path, capsys, text, "--as", "json")[1])
    margins_schema().validate(data)
    assert (data["margins"], [one["text"] for one in data["alone"]]) == ([], ["P to N through A"])
    with contextlib.chdir(tmp_path):
        assert main(["lint", "t.dseq"]) == 0
        assert main(["report", "t.dseq"]) == 0


def test_wrong_calls_say_so(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code, out, err = answered(tmp_path, capsys, PAIR, "--as", "sarif")
    assert (code, out) == (2, "")
    assert err == "seqcheck: error: --as cannot be 'sarif'; known are 'json', 'lines', 'screen'\n"
    code, out, err = answered(tmp_path, capsys, "drive", "--as", "json")
    assert (code, out) == (2, "")
    assert err.startswith("t.dseq:1:")


def test_both_schemas_describe_what_they_share_alike() -> None:
    ours, theirs = (json.loads(shipped(name))["$defs"] for name in ("margins.schema.json", "outcome.schema.json"))
    shared = ours.keys() & theirs.keys()
    assert shared >= {"place", "hazard", "literal", "event", "span"}
    assert {name: ours[name] for name in shared} == {name: theirs[name] for name in shared}
