"""Files on which the program and the literal judge once disagreed, each with what went wrong in its first line."""

from pathlib import Path

import pytest
from proofs import against_judge
from reading import drive_of

FILES = sorted((Path(__file__).parent / "regressions").glob("*.dseq"))


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_program_and_judge_agree(file: Path) -> None:
    compared = list(against_judge(drive_of(file.read_text("utf-8")), zones=30_000, states=100_000))
    assert any(one.decided for one in compared)
    assert [one.differs for one in compared if one.differs] == []
