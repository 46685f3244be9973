"""The limits that the documents name are those of the program."""

from pathlib import Path

import pytest

from seqcheck import sizing
from seqcheck.circuit import graph
from seqcheck.evidence.certificate import MOST_TIME
from seqcheck.language.values import MOST_BITS, MOST_DIGITS
from seqcheck.proving.search import MOST_MEASURED

GRAMMARS = Path(__file__).parent.parent / "grammars"
DAY = 24 * 60 * 60 * 10**12


@pytest.mark.parametrize(
    ("page", "said"),
    [
        ("REFERENCE.md", f"at most {MOST_DIGITS} characters"),
        ("REFERENCE.md", f"whole numbers of at most {MOST_BITS}\nbits each"),
        ("REFERENCE.md", f"up to 2^{MOST_TIME.bit_length() - 1} ps, {MOST_TIME // DAY} days"),
        ("MEANING.md", f"stored more than {MOST_MEASURED} zones"),
        ("MEANING.md", f"proven within {sizing._MOST_ZONES} zones"),
        ("MEANING.md", f"more than {graph.MOST_SETS} shorting sets"),
    ],
)
def test_a_limit_is_told(page: str, said: str) -> None:
    assert said in (GRAMMARS / page).read_text(encoding="utf-8")
