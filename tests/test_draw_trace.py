"""Counterexamples as timing diagrams, and the command that draws."""

from dataclasses import replace
from itertools import combinations
from pathlib import Path

import pytest
import report_cases as cases
from pictures import SPACE, apart, boxes, inside, root_of, texts
from proofs import leg

from seqcheck import cli
from seqcheck.checking import check
from seqcheck.language import decode, read
from seqcheck.quantities import shown
from seqcheck.reports.drawing import waves
from seqcheck.reports.drawing.elements import alone
from seqcheck.reports.drawing.timing import LEAD, Band, bands, dimensions, hazard_end, references, stays
from seqcheck.reports.rows import scaled
from seqcheck.reports.run import run_of
from seqcheck.reports.standing import sorted_out
from seqcheck.verdict import Act as Acts
from seqcheck.verdict import Cycles, Event, Trace, Unsafe

ROOT = Path(__file__).parents[1]
TWINS = sorted((ROOT / "samples/faulty").glob("*.dseq"))
T = cases.MS
R = T + 100 * cases.US


def text_of(path: str) -> str:
    return decode(Path(path).read_bytes(), path)


@pytest.mark.parametrize("path", TWINS, ids=lambda path: path.stem)
def test_every_run_of_a_twin_is_drawn_whole(path: Path) -> None:
    drive = read(text_of(str(path)), str(path), text_of)
    for verdict in sorted_out(check(drive, str(path), frozenset(), lambda _: None)).unsafe:
        root = root_of(alone(waves.picture(verdict, drive)))
        run, seen = run_of(verdict, drive), texts(root)
        assert set(run.titles) <= set(seen)
        for one in run.instants[run.first : run.last + 1]:
            if one.time in (verdict.trace.overlap_from, verdict.trace.overlap_to):
                assert scaled(one.time - run.origin, run.size) in seen
        end = hazard_end(verdict)
        said = "without end" if end is None else shown(end - verdict.trace.overlap_from)
        assert f"{run.stretch} {said}" in seen
        rooms = boxes(root)
        assert all(inside(root, box) for box, _ in rooms), path
        for (one_box, first), (other, second) in combinations(rooms, 2):
            assert apart(one_box, other), (first, second)


def test_what_is_dimensioned_is_the_overlap_and_what_makes_it() -> None:
    """UH is off at 1.1 ms and can conduct 12 us more; UL is on 5.4 us later and can conduct after 1.5 us."""
    run = run_of(cases.OVERLAP, cases.DRIVE)
    said = {one.text: (one.start, one.end) for one in dimensions(run, cases.OVERLAP)}
    assert said == {
        "can conduct for 12 us more": (R, R + 12_000_000),
        "can conduct after 1.5 us": (R + 5_400_000, R + 6_900_000),
        "commands of UH and UL lie 5.4 us apart": (R, R + 5_400_000),
        "overlap 5.1 us": (R + 6_900_000, R + 12_000_000),
    }


def test_an_overlap_without_end_has_no_end() -> None:
    run = run_of(cases.SHORT, cases.DRIVE)
    last = dimensions(run, cases.SHORT)[-1]
    assert (last.text, last.end) == ("overlap without end", None)
    trace = replace(cases.SHORTED, overlap_to=cases.SHORTED.end)
    assert hazard_end(replace(cases.SHORT, trace=trace)) is None


def test_commands_that_lie_over_each_other_are_told_as_such() -> None:
    commands = {"UH": ((None, cases.OFF_NOW), (T, cases.Command.ON), (R + 6 * cases.US, cases.OFF_NOW))}
    commands["UL"] = cases.REVERSAL_REPLAYED.commands["UL"]
    replayed = replace(cases.REVERSAL_REPLAYED, commands=commands)
    verdict = replace(cases.OVERLAP, replayed=replayed)
    run = run_of(verdict, cases.DRIVE)
    assert "UH and UL commanded so together for 600 ns" in [one.text for one in dimensions(run, verdict)]


def test_the_mode_bar_has_modes_and_what_leads_between_them() -> None:
    found = [(one.start, one.end, one.text, one.moving) for one in stays(cases.DRIVE, cases.REVERSAL)]
    assert found == [
        (None, T, "idle", False),
        (T, T + 400_000, "to open", True),
        (T + 400_000, R, "open", False),
        (R, R + 6_900_000, "to close", True),
        (R + 6_900_000, None, "close", False),
    ]


def test_the_axis_gives_each_instant_the_same_room() -> None:
    band = Band((1, 2, 3), (0, 10, 1000), (False, True), 50.0)
    assert [band.x(time) - LEAD for time in (-5, 0, 5, 10, 505, 1000)] == [-LEAD, 0, 25, 50, 75, 100]
    assert band.x(1001) > LEAD + 100
    assert band.tears == [(10, 1000)]


def test_a_long_quiet_stretch_is_torn_and_its_time_told() -> None:
    path = ROOT / "samples/faulty/charger_wrong_word.dseq"
    drive = read(text_of(str(path)), str(path), text_of)
    verdict = sorted_out(check(drive, str(path), frozenset(), lambda _: None)).unsafe[0]
    root = root_of(alone(waves.picture(verdict, drive)))
    torn = [tear for band in bands(run_of(verdict, drive), verdict.trace, 100) for tear in band.tears]
    assert torn
    titles = [one.text for one in root.iter(f"{SPACE}title")]
    for start, end in torn:
        assert f"a long stretch shortened: {shown(end - start)}" in titles
        assert shown(end - start) in texts(root)


def test_a_long_run_is_drawn_in_bands() -> None:
    verdict = cases.modulated(12)
    run = run_of(verdict, cases.DRIVE)
    found = bands(run, verdict.trace, 100)
    assert len(found) > 1
    drawn = [index for band in found for index in band.drawn]
    assert drawn == sorted(set(drawn))
    assert all(band.width <= 1024 for band in found)
    root = root_of(alone(waves.picture(verdict, cases.DRIVE)))
    assert len([text for text in texts(root) if text == "row"]) == len(found)


def test_a_carrier_is_drawn_where_it_has_an_edge() -> None:
    verdict = cases.modulated(2)
    run = run_of(verdict, cases.DRIVE)
    (found,) = references(verdict.trace, run, [])
    assert found.carrier == "main"
    assert found.levels[:3] == ((None, False), (0, True), (5 * cases.US, False))
    told = Event(0, Acts.CYCLES, "main", cycles=Cycles(3, 5 * cases.US, 5 * cases.US))
    trace: Trace = replace(verdict.trace, events=(verdict.trace.events[0], told))
    (found,) = references(trace, run, [])
    assert found.levels == ((None, False), (0, True), (0, None), (30 * cases.US, True))


def test_many_edges_in_a_torn_stretch_are_not_drawn() -> None:
    verdict = cases.modulated(6)
    run = run_of(verdict, cases.DRIVE)
    torn = Band((1, 2), (4 * cases.US, 44 * cases.US), (True,), 80.0)
    (found,) = references(verdict.trace, run, [torn])
    inside_it = [(time, level) for time, level in found.levels if time is not None and 4 <= time / cases.US <= 44]
    assert inside_it == [(4 * cases.US, None), (44 * cases.US, True)]


def test_long_names_become_letters_that_are_explained() -> None:
    names = {"UH": "upper_switch_of_leg_u", "UL": "lower_switch_of_leg_u"}
    verdict: Unsafe = cases.modulated(2, *names.values())
    root = root_of(alone(waves.picture(verdict, cases.renamed(**names))))
    assert "(a) is upper_switch_of_leg_u." in texts(root)


# The command

UNSAFE = leg(
    "a on off\nb off on",
    "  start a\n  a -> b when go\n    set A off\n    wait 4 ps\n  b -> a when back\n    set B off\n    wait 9 ps",
    head="clock 1 GHz, late by at most 0 ps\nwrites together",
)


@pytest.fixture
def file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> str:
    monkeypatch.chdir(tmp_path)
    Path("bench.dseq").write_text(UNSAFE, encoding="utf-8")
    Path("safe.dseq").write_text(UNSAFE.replace("wait 4 ps", "wait 9 ps"), encoding="utf-8")
    Path("library.dseq").write_text('drive "parts"\nlet settle = 3 us\n', encoding="utf-8")
    return "bench.dseq"


def drawn(capsys: pytest.CaptureFixture[str], *arguments: str) -> tuple[int, str, str]:
    code = cli.main(["draw", *arguments])
    out, err = capsys.readouterr()
    return code, out, err


def test_the_exit_code_is_that_of_lint(file: str, capsys: pytest.CaptureFixture[str]) -> None:
    for arguments, code in (((file,), 1), ((file, "--trace", "overlap"), 1), (("safe.dseq",), 0)):
        found, out, err = drawn(capsys, *arguments)
        assert (found, err) == (code, "")
        root_of(out)
    found, out, _ = drawn(capsys, "safe.dseq", "--trace", "overlap")
    assert found == 0
    assert "There is no counterexample of the check 'overlap' in safe.dseq." in texts(root_of(out))


def test_an_undecided_file_is_never_shown_as_proven(file: str, capsys: pytest.CaptureFixture[str]) -> None:
    code, out, _ = drawn(capsys, file, "--give-up-after", "1 ps")
    assert code in (1, 3)
    if code == 3:
        assert "proven" not in " ".join(texts(root_of(out)))


def test_a_picture_in_a_file(file: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert drawn(capsys, file, "--modes", "--out", "graph.svg") == (1, "", "")
    root_of(Path("graph.svg").read_text(encoding="utf-8"))
    assert sorted(one.name for one in Path().iterdir()) == ["bench.dseq", "graph.svg", "library.dseq", "safe.dseq"]


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--trace", "ovrlap"], "--trace cannot be 'ovrlap'; did you mean 'overlap'?"),
        (["--trace", "unreachable"], "--trace: a finding of 'unreachable' is no run; those of short, overlap,"),
        (["--trace", "short", "--run", "1"], "--run 1: this run is of 'overlap', not of 'short'"),
        (["--run", "2"], "--run 2: there is 1 counterexample of bench.dseq"),
        (["--run", "0"], "--run must be a whole number above 0, not '0'"),
        (["--modes", "--trace", "overlap"], "--trace draws a timing diagram; it does not go with --modes"),
        (["--as", "mermaid", "--trace", "overlap"], "it does not go with --as mermaid"),
        (["--as", "png"], "--as cannot be 'png'"),
        (["--out", "."], "cannot write '.': it is a folder"),
    ],
)
def test_wrong_calls(file: str, arguments: list[str], said: str, capsys: pytest.CaptureFixture[str]) -> None:
    code, out, err = drawn(capsys, file, *arguments)
    assert (code, out) == (2, "")
    assert said in err


def test_files_without_a_drive(file: str, capsys: pytest.CaptureFixture[str]) -> None:
    said = "seqcheck: error: library.dseq only serves 'use'; it has no modes\n"
    assert drawn(capsys, "library.dseq") == (2, "", said)
    Path(file).write_text("drive", encoding="utf-8")
    code, out, err = drawn(capsys, file)
    assert (code, out) == (2, "")
    assert err.startswith("bench.dseq:1:")


RULES = """
rules
  UL on at most 1 ms
  UH on at least 4 us
  open and close at least 60 us apart
  overheat clears UH within 20 us
  never UH and VL
  margin at least 8 us
"""


def test_what_breaks_a_rule_is_drawn_with_the_length_that_it_is_about() -> None:
    """The margin is 5.231584 us in the README; after overheat the writes may take 30 us and the coupler 12 us more."""
    file = str(ROOT / "samples/vent.dseq")
    text = text_of(file)
    drive = read(text + RULES, file, text_of)
    found: dict[str, list[str]] = {}
    for verdict in sorted_out(check(drive, file, frozenset(), lambda _: None)).unsafe:
        root = root_of(alone(waves.picture(verdict, drive)))
        rooms = boxes(root)
        assert all(inside(root, box) for box, _ in rooms)
        for (one_box, first), (other, second) in combinations(rooms, 2):
            assert apart(one_box, other), (first, second)
        found.setdefault(verdict.check.value, []).append(dimensions(run_of(verdict, drive), verdict)[-1].text)
    assert found["long-on"] == ["excess without end"]
    assert found["short-pulse"] == ["no pulse"]
    assert "interval 49.900989 us" in found["too-soon"]
    assert "gap 5.231584 us" in found["thin-margin"]
    assert set(found) == {"long-on", "short-pulse", "too-soon", "late-trip", "together", "thin-margin"}
