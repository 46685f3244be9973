"""The samples are proven; each faulty twin differs in little and is found at fault, as its head says.

A twin's name is its sample's, `_` and what goes wrong. Its first line names the checks that must be found and how long
the switches can conduct together at worst, `# finding: overlap for up to 709.01 ns`; the sum stands below it. Findings
that are no hazards say no time, `# finding: unreachable`.
"""

import re
from difflib import ndiff
from pathlib import Path

import pytest

from seqcheck.cli import main

SAMPLES = Path(__file__).parent.parent / "samples"
GOOD = sorted(SAMPLES.glob("*.dseq"))
FAULTY = sorted((SAMPLES / "faulty").glob("*.dseq"))
MOST_CHANGED = 12
CHECKS = "[a-z-]+(?:, [a-z-]+)*"
CONSTRUCTS = (
    r"^use ", r"^let \w+ += .*\*", r"\bticks\b", r"\bppm\b", r"late by at most",
    r"turn-offs first", r"turn-ons first", r"in table order", r"in any order", r"^writes together", r"^writes by port",
    r"^loop ", r"^  rails \w+ \w+$", r"^  rails \w+ \w+ \w+$", r"^  sources ", r"^  capacitor ", r"^  leg .* between ",
    r"^  diode ", r"one way", r"two way", r"^  winding \w+$", r"^  winding \w+ \w+$", r"difference at most",
    r"^  interlock .* dead time ", r"^  interlock \w+ \w+ *$", r"active low", r"rests unknown", r"rests low +after",
    r"updates at once", r"updates at rise", r"updates within a period", r"~\w", r"\bkeep\b", r"\bfree\b",
    r"with current out of", r"with current into", r"with a above b", r"^  start reset", r"\bany ->", r"any but",
    r" earliest ", r" latest ", r"-> \w+ +after ", r"^  \w+ -> \w+$", r"\bunbroken\b", r"^    wait ",
    r"^    set all off", r" at once$", r"-> \w+ +within ", r"from any -> reset", r"^  waive ",
    r"must flow", r"means coast", r"means brake", r"means drive \w+ to \w+", r"means level \w",
)  # fmt: skip


def lint(path: Path, capsys: pytest.CaptureFixture[str]) -> tuple[int, str]:
    code = main(["lint", "--as", "lines", str(path)])
    said = capsys.readouterr()
    assert said.err == ""
    return code, said.out


def sample_of(twin: Path) -> Path:
    """The sample with the longest name that begins the twin's."""
    fitting = [one for one in GOOD if twin.stem.startswith(f"{one.stem}_")]
    assert fitting, f"{twin.name} begins with the name of no sample"
    return max(fitting, key=lambda one: len(one.stem))


def code_lines(path: Path) -> list[str]:
    """The lines without comments and spare blanks; what a faulty twin uses stands one folder up."""
    text = path.read_text(encoding="utf-8").replace('use "../', 'use "')
    bare = (" ".join(line.split("#")[0].split()) for line in text.splitlines())
    return [line for line in bare if line]


def head(twin: Path) -> tuple[set[str], str]:
    """The names of the checks in the first line, and how long the hazard lasts at worst; empty where none does."""
    first = twin.read_text(encoding="utf-8").splitlines()[0]
    match = re.fullmatch(rf"# finding: ({CHECKS})(?: (for up to [0-9.]+ [a-z]+|without end))?", first)
    assert match, f"{twin.name} begins with '{first}'"
    return set(match[1].split(", ")), match[2] or ""


def test_there_are_samples_and_more_twins() -> None:
    assert len(GOOD) >= 8
    assert len(FAULTY) >= 16


def test_a_folder_means_the_samples_and_not_their_twins(capsys: pytest.CaptureFixture[str]) -> None:
    """Exit 0 and no word but what is waived: each sample is proven without a warning, and no twin is read."""
    code, said = lint(SAMPLES, capsys)
    assert code == 0
    assert [line for line in said.splitlines() if ": note: " not in line or "; waived because: " not in line] == []


@pytest.mark.parametrize("sample", GOOD, ids=lambda path: path.stem)
def test_every_sample_has_a_twin_and_a_fitting_size(sample: Path) -> None:
    assert any(sample_of(twin) == sample for twin in FAULTY)
    assert len(code_lines(sample)) >= 30
    assert len(sample.read_text(encoding="utf-8").splitlines()) <= 85


@pytest.mark.parametrize("construct", CONSTRUCTS)
def test_the_samples_show_the_whole_language_that_is_proven(construct: str) -> None:
    text = "\n".join(line.split("#")[0].rstrip() for path in GOOD for line in path.read_text("utf-8").splitlines())
    assert re.search(construct, text, re.MULTILINE)


@pytest.mark.parametrize("twin", FAULTY, ids=lambda path: path.stem)
def test_a_twin_is_found_at_fault_as_its_head_says(twin: Path, capsys: pytest.CaptureFixture[str]) -> None:
    checks, lasting = head(twin)
    code, said = lint(twin, capsys)
    assert code == 1
    found = [line for line in said.splitlines() if ": note: " not in line]
    assert found
    assert {line.rpartition("[")[2].rstrip("]") for line in found} == checks
    hazards = [line for line in found if line.endswith(("[short]", "[overlap]", "[open-winding]"))]
    assert bool(hazards) is bool(lasting)
    assert all(re.search(rf", {re.escape(lasting)};", line) for line in hazards), said


@pytest.mark.parametrize("twin", FAULTY, ids=lambda path: path.stem)
def test_a_twin_is_a_small_change_of_its_sample(twin: Path) -> None:
    """How wide the columns are does not count: they are as wide as their words."""
    before, after = (
        [" ".join(line.split()) for line in path.read_text(encoding="utf-8").splitlines()]
        for path in (sample_of(twin), twin)
    )
    assert sum(line[0] in "+-" for line in ndiff(before, after)) <= MOST_CHANGED
    assert code_lines(twin) != code_lines(sample_of(twin))
