"""The form `vcd` (IEEE 1364-2005, clause 18), read back by pyvcd."""

from dataclasses import replace
from types import SimpleNamespace

import pytest
import report_cases as cases
from forms import read_dump
from report_cases import outcome, waiving

from seqcheck.drive import Command
from seqcheck.reports import vcd
from seqcheck.verdict import Event, Undecided

T = 1 * cases.MS
R = T + 100 * cases.US


def test_the_run_of_an_overlap() -> None:
    dump = read_dump(vcd.report(outcome(cases.OVERLAP)))
    assert dump.types == {
        "drive.mode": "string",
        "drive.happens": "string",
        "drive.overlap": "wire",
        "drive.command.UH": "wire",
        "drive.command.UL": "wire",
        "drive.conducts.UH": "wire",
        "drive.conducts.UL": "wire",
    }
    assert dump.states("drive.mode") == [(None, "idle"), (T + 400_000, "open"), (R + 6_900_000, "close")]
    assert dump.states("drive.command.UH") == [(None, "0"), (T, "1"), (R, "0")]
    assert dump.states("drive.overlap") == [(None, "0"), (R + 6_900_000, "1"), (R + 12_000_000, "0")]
    assert dump.end == R + 12_000_000


def test_doubt_is_x() -> None:
    """On takes 1.5 to 4 us and off 3 to 12 us, so UH is in doubt between them."""
    dump = read_dump(vcd.report(outcome(cases.OVERLAP)))
    assert dump.states("drive.conducts.UH") == [
        (None, "0"),
        (T + 1_500_000, "x"),
        (T + 4_000_000, "1"),
        (R, "x"),
        (R + 12_000_000, "0"),
    ]
    assert dump.states("drive.conducts.UL") == [(None, "0"), (R + 6_900_000, "x"), (R + 9_400_000, "1")]


def test_a_floating_pin_is_x() -> None:
    commands = {**cases.REVERSAL_REPLAYED.commands, "UL": ((None, Command.UNKNOWN), (R + 5_400_000, Command.ON))}
    floating = replace(cases.OVERLAP, replayed=replace(cases.REVERSAL_REPLAYED, commands=commands))
    dump = read_dump(vcd.report(outcome(floating)))
    assert dump.states("drive.command.UL") == [(None, "x"), (R + 5_400_000, "1")]


def test_carriers_are_shown_with_every_edge() -> None:
    dump = read_dump(vcd.report(outcome(cases.modulated(3))))
    edges = [(5_000_000 * number, "10"[number % 2]) for number in range(6)]
    assert dump.states("drive.reference.main") == [(None, "0"), *edges]


def test_changes_of_one_instant_keep_their_order() -> None:
    """A pulse of no length is in the dump, its last value standing."""
    commands = {**cases.REVERSAL_REPLAYED.commands, "UL": ((None, Command.OFF), (R, Command.ON), (R, Command.OFF))}
    pulse = replace(cases.OVERLAP, replayed=replace(cases.REVERSAL_REPLAYED, commands=commands))
    dump = read_dump(vcd.report(outcome(pulse)))
    assert dump.states("drive.command.UL") == [(None, "0"), (R, "1"), (R, "0")]


def test_an_overlap_without_end_stays() -> None:
    dump = read_dump(vcd.report(outcome(cases.SHORT)))
    assert dump.states("drive.overlap") == [(None, "0"), (3_000_000, "1")]
    assert dump.end == 3_000_000


def test_the_worst_run_is_dumped_unless_a_number_is_given() -> None:
    """A short before an overlap, then the longer, the first of equals."""
    shorter = replace(cases.OVERLAP, overlap=5_000_000)
    found = outcome(shorter, cases.SAFE_V, cases.OVERLAP, cases.SHORT)
    assert "run 3 of 3: short" in read_dump(vcd.report(found)).comments
    assert "run 2 of 3: overlap" in read_dump(vcd.report(found, 2)).comments
    assert "run 2 of 2: overlap" in read_dump(vcd.report(outcome(shorter, cases.OVERLAP))).comments
    assert "run 1 of 2: overlap" in read_dump(vcd.report(outcome(cases.OVERLAP, cases.OVERLAP))).comments
    with pytest.raises(ValueError, match="there are 3 counterexamples"):
        vcd.report(found, 4)
    with pytest.raises(ValueError, match="there are no counterexamples"):
        vcd.report(outcome(cases.SAFE_V), 1)


def test_without_a_run_the_dump_is_empty_and_says_why() -> None:
    dump = read_dump(vcd.report(outcome(cases.SAFE_V)))
    assert (dump.types, dump.end) == ({}, None)
    assert "the file is proven" in dump.comments
    undecided = Undecided(cases.LEG_V, "60 zones", 60)
    dump = read_dump(vcd.report(outcome(cases.SAFE_U, undecided)))
    assert "the file is undecided" in dump.comments
    assert "undecided, not proven: P to N through VH and VL" in dump.comments
    dump = read_dump(vcd.report(outcome(findings=(cases.AMBIGUOUS,))))
    assert "the file is not in order" in dump.comments
    dump = read_dump(vcd.report(outcome(cases.OVERLAP, drive=waiving("overlap", "UH", "a fuse"))))
    assert "waived: overlap, because: a fuse" in dump.comments


def test_texts_of_the_file_break_nothing() -> None:
    drive = replace(cases.DRIVE, title="x $end\n$var wire 1 ! y $end Lüfter")
    dump = read_dump(vcd.report(replace(outcome(cases.OVERLAP, drive=drive), file="a $end\n.dseq")))
    assert dump.comments[0] == "a _end\\n.dseq: x _end\\n_var wire 1 ! y _end L\\xfcfter"
    assert all(" " not in value for _, value in dump.changes["drive.happens"])


def test_an_act_of_another_version_breaks_nothing() -> None:
    event = Event(5, SimpleNamespace(value="hums"), "main")  # type: ignore[arg-type] # what a later version may bring
    trace = replace(cases.REVERSAL, events=(event, *cases.REVERSAL.events))
    dump = read_dump(vcd.report(outcome(replace(cases.OVERLAP, trace=trace))))
    assert dump.changes["drive.happens"][0] == (5, "main_hums")


def test_identifier_codes_are_many_and_printable() -> None:
    codes = [vcd._code(number) for number in range(20_000)]
    assert len(set(codes)) == len(codes)
    assert all(33 <= ord(one) <= 126 for code in codes for one in code)
    assert (codes[0], codes[93], codes[94]) == ("!", "~", "!!")
