"""What the benchmark measures is what its table says."""

import pytest
from bench import drives, measures
from bench.__main__ import ROWS

from seqcheck.checking import check
from seqcheck.drive import Drive
from seqcheck.language import read
from seqcheck.verdict import Safe, Unsafe


def drive_of(text: str) -> Drive:
    return read(text, "t.dseq", lambda path: "")


def verdicts(text: str) -> list[object]:
    return list(check(drive_of(text), "t.dseq", frozenset(), lambda _: None).verdicts)


def test_a_table_has_the_modes_that_are_asked_for() -> None:
    drive = drive_of(drives.table(200))
    assert (len(drive.modes), len(drive.columns), len(drive.moves), len(drive.trips)) == (200, 6, 200, 1)
    assert all(isinstance(one, Safe) and one.method == "screen" for one in verdicts(drives.table(200)))
    assert drives.table(200) == drives.table(200)


def test_a_long_file_has_the_lines_that_are_asked_for() -> None:
    assert drives.long_file(1000).count("\n") == 1000
    assert drive_of(drives.long_file(1000))


def test_the_searched_drive_is_what_its_row_says() -> None:
    drive = drive_of(drives.SEARCHED)
    assert (len(drive.moves), len(drive.trips), len(drive.carriers)) == (12, 2, 1)


@pytest.mark.parametrize("text", [drives.H_BRIDGE, drives.three_phase()])
def test_typical_drives_are_settled_by_the_screen(text: str) -> None:
    assert all(isinstance(one, Safe) and one.method == "screen" for one in verdicts(text))


def test_the_unsafe_bridge_is_unsafe() -> None:
    assert any(isinstance(one, Unsafe) for one in verdicts(drives.unsafe_h_bridge()))


def test_every_row_has_its_measure() -> None:
    assert {row.measure.__module__ for row in ROWS.values()} == {measures.__name__}
    assert not ROWS["reading"].met(7999)
    assert not ROWS["lint"].met(1.16)
