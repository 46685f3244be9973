"""The mode graph as a picture and as Mermaid text."""

import os
import re
import subprocess
import sys
from itertools import combinations
from pathlib import Path

import pytest
from pictures import apart, boxes, inside, root_of, texts
from proofs import leg

from seqcheck.checking import check
from seqcheck.commands import draw
from seqcheck.commands.graphs import graph_of
from seqcheck.drive import When
from seqcheck.language import decode, read
from seqcheck.reports.drawing.chart import chart, labels
from seqcheck.reports.drawing.kinds import Does, said
from seqcheck.verdict import Outcome

ROOT = Path(__file__).parents[1]
FILES = sorted((ROOT / "samples").rglob("*.dseq"))
MODES = draw.Wanted(None, None, "svg")
MERMAID = draw.Wanted(None, None, "mermaid")
HEAD = "clock 1 GHz, late by at most 0 ps\nwrites together"


def text_of(path: str) -> str:
    return decode(Path(path).read_bytes(), path)


def outcome_of(text: str, file: str = "bench.dseq") -> Outcome:
    return check(read(text, file, text_of), file, frozenset(), lambda _: None)


def many(count: int) -> str:
    """A ring of so many modes, each with a move back to the first."""
    rows = "\n".join(f"m{number} off {'on' if number % 2 else 'off'}" for number in range(count))
    ring = [f"  m{number} -> m{(number + 1) % count} when on_{number} earliest 1 us" for number in range(count)]
    back = [f"  m{number} -> m0 when back_{number} earliest 1 us" for number in range(2, count - 1)]
    return leg(rows, "\n".join(["  start m0", *ring, *back]), head=HEAD)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_mode_and_event_of_a_file_is_drawn_and_no_text_covers_another(path: Path) -> None:
    outcome = outcome_of(text_of(str(path)), str(path))
    root = root_of(draw.drawn(outcome, MODES))
    seen = texts(root)
    drive = outcome.drive
    assert {mode for mode in drive.modes if mode != "reset"} <= set(seen)
    assert {move.trigger.event for move in drive.moves if isinstance(move.trigger, When)} <= set(" ".join(seen).split())
    assert {trip.name for trip in drive.trips} <= set(" ".join(seen).split())
    rooms = boxes(root)
    assert all(inside(root, box) for box, _ in rooms)
    for (one, first), (other, second) in combinations(rooms, 2):
        assert apart(one, other), (first, second)


def test_the_path_of_the_worst_run_is_numbered() -> None:
    outcome = outcome_of(text_of(str(ROOT / "samples/faulty/vent_short_pause.dseq")), "vent.dseq")
    root = root_of(draw.drawn(outcome, MODES))
    assert texts(root, "inverse") == ["1", "2", "3"]
    assert sum("taken" in (one.get("class") or "").split() for one in root.iter()) == 3 + 1  # and in the legend
    note = " ".join(texts(root, "faint"))
    assert "1 boot: reset -> idle; 2 open_cmd: idle -> open; 3 reverse_cmd: open -> close" in note
    assert "run 1 of 2: overlap at vent.dseq:52:3" in note


def test_a_proven_file_has_no_path_and_says_so() -> None:
    outcome = outcome_of(text_of(str(ROOT / "samples/vent.dseq")))
    root = root_of(draw.drawn(outcome, MODES))
    assert texts(root, "inverse") == []
    assert "No unsafe path: the file is proven." in texts(root)


def test_a_mode_that_holds_the_short_is_marked() -> None:
    drive = leg("a off off\nb on on", "  start a\n  a -> b when go\n  b -> a when back")
    root = root_of(draw.drawn(outcome_of(drive), MODES))
    assert [one.get("class") for one in root.iter() if "hit" in (one.get("class") or "").split()] == ["mode short hit"]
    assert "the hazard comes at rest in b" in " ".join(texts(root))


def test_modes_that_are_not_reached_and_moves_that_never_begin_are_marked() -> None:
    moves = "  start a\n  a -> b when go earliest 10 us\n  a -> a after 1 us\n  b -> a when back"
    root = root_of(draw.drawn(outcome_of(leg("a off off\nb on off", moves, head=HEAD)), MODES))
    assert texts(root).count("unreachable") == 1
    kinds = [one.get("class") or "" for one in root.iter()]
    assert sum("lost" in kind.split() for kind in kinds) == 1
    assert sum("never" in kind.split() for kind in kinds) == 1


def test_what_modes_do_has_a_colour_a_shape_and_a_word() -> None:
    drive = read(text_of(str(ROOT / "samples/vent.dseq")), "vent.dseq", text_of)
    rows = graph_of(drive).rows
    assert {name: said(row).does for name, row in rows.items()} == {
        "idle": Does.FREE,
        "open": Does.TURNS,
        "close": Does.TURNS,
        "brake": Does.BRAKE,
        "service": Does.FREE,
        "reset": Does.FREE,
    }
    assert said(rows["open"]).words == "drive U to V / end held"


def test_times_at_arrows_are_rounded_outwards() -> None:
    drive = read(text_of(str(ROOT / "samples/pump.dseq")), "pump.dseq", text_of)
    said_of = {labels(move)[0] for move in drive.moves}
    assert "after 3.921 s to 5.103 s" in said_of  # 4 s to 5 s within 2 %: 3.92156... s to 5.10204... s
    assert ("acknowledge", "from 9.803 s") in {labels(move) for move in drive.moves}


def test_many_modes_are_drawn_in_part_and_that_is_said() -> None:
    outcome = outcome_of(many(90))
    drawn = chart(graph_of(outcome.drive), None)
    assert 0 < len(drawn.modes) <= 60
    assert len(drawn.modes) + drawn.left_out == 90
    assert drawn.modes[0] == "m0"
    root = root_of(draw.drawn(outcome, MODES))
    assert f"{drawn.left_out} modes not drawn" in " ".join(texts(root))


def hostile(drive_text: str) -> str:
    return drive_text.replace('drive "leg"', 'drive "a <b>&amp; </svg><script>x</script> \' ]]> {%%{init}%%} #"')


def test_no_text_of_a_file_is_taken_for_markup() -> None:
    outcome = outcome_of(hostile(many(4)))
    root = root_of(draw.drawn(outcome, MODES))
    assert f"Mode graph of {outcome.drive.title}" in texts(root, "large")
    title = draw.drawn(outcome, MERMAID).splitlines()[0]
    assert title.startswith("%% a <b>")
    assert not set("{}") & set(title)


# Mermaid

ID = re.compile(r"m[0-9]+")
ARROW = re.compile(r'  (m[0-9]+) (-->|-\.->|==>)\|"([^"]*)"\| (m[0-9]+)')


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_mermaid_has_every_arrow_once_and_plain_ids(path: Path) -> None:
    outcome = outcome_of(text_of(str(path)), str(path))
    rows = draw.drawn(outcome, MERMAID).splitlines()
    graph = graph_of(outcome.drive)
    unsafe = draw.sorted_out(outcome).unsafe
    drawn = chart(graph, draw.worst(unsafe) if unsafe else None)
    arrows = [match for row in rows if (match := ARROW.fullmatch(row))]
    assert len(arrows) == len(drawn.arrows)
    assert rows[2] == "flowchart LR"
    assert sum(match[2] == "==>" for match in arrows) == sum(bool(one.counts) for one in drawn.arrows)
    declared = {match[1] for row in rows if (match := re.fullmatch(r'  (m[0-9]+)\W+".*"\W+', row))}
    assert {end for match in arrows for end in (match[1], match[4])} <= declared
    assert all(ID.fullmatch(one) for one in declared)


def test_mermaid_keeps_to_what_pages_take() -> None:
    text = draw.drawn(outcome_of(many(90)), MERMAID)
    assert len(text) < 50_000
    assert re.search(r"%% [0-9]+ modes left out", text)
    from seqcheck.reports.drawing import mermaid

    rows = mermaid._kept(["flowchart LR"], [f"  m{number} --> m0" for number in range(700)])
    assert sum("-->" in row for row in rows) == 499
    assert rows[-1] == "  %% 201 arrows left out"


def test_the_same_picture_under_any_hash_seed(tmp_path: Path) -> None:
    call = [sys.executable, "-m", "seqcheck", "draw", str(ROOT / "samples/faulty/stepper_late_interrupt.dseq")]
    for more in ([], ["--as", "mermaid"], ["--trace", "overlap"]):
        found = set()
        for seed in ("0", "1", "2"):
            world = {**os.environ, "PYTHONPATH": str(ROOT), "PYTHONHASHSEED": seed}
            done = subprocess.run([*call, *more], env=world, capture_output=True, check=False, timeout=60, cwd=tmp_path)
            assert done.returncode == 1
            found.add(done.stdout)
        assert len(found) == 1


def test_a_drive_without_winding_is_drawn_bare() -> None:
    drive = outcome_of(leg("a off off\nb on off", "  start a\n  a -> b when go\n  b -> a when back")).drive
    assert not drive.stage.windings
    assert said(graph_of(drive).rows["b"]).does is None
