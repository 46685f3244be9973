"""Files that only serve `use`: read, checked, and never called proven."""

from pathlib import Path

import pytest
from proofs import leg
from reading import FILE, no_file

from seqcheck.cli import main
from seqcheck.drive import Drive, Library
from seqcheck.language import read, read_any
from seqcheck.messages import Problems

LIBRARY = """\
drive "Gate drivers"
let settle = 5 us
let dead = 2 * settle
parts
  driver on 1 ns to 2 ns off 1 ns to 3 ns
carriers
  pwm 10 kHz duty 5 % to 95 %
"""
SAFE = leg(
    "a on off\nb off on",
    "  start a\n  a -> b when go\n    set A off\n    wait 5 ps\n  b -> a when back\n    set B off\n    wait 9 ps",
)
UNSAFE = SAFE.replace("wait 5", "wait 4")


@pytest.fixture(autouse=True)
def _folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def put(**files: str) -> None:
    for name, text in files.items():
        Path(f"{name}.dseq").write_text(text, encoding="utf-8")


def mistakes(text: str) -> list[str]:
    with pytest.raises(Problems) as caught:
        read_any(text, FILE, no_file)
    return [one.line() for one in caught.value.found]


# Reading


def test_a_library_knows_what_it_brings() -> None:
    found = read_any(LIBRARY, FILE, no_file)
    assert isinstance(found, Library)
    assert (found.title, found.place.line) == ("Gate drivers", 1)
    assert (found.quantities, found.parts, found.carriers) == (("settle", "dead"), ("driver",), ("pwm",))


def test_a_drive_stays_a_drive() -> None:
    assert isinstance(read_any(SAFE, FILE, no_file), Drive)


@pytest.mark.parametrize("more", ["parts", "let x = 1", "clock 1 MHz\nlet x = 3 ticks", "carriers"])
def test_one_kind_of_names_is_enough(more: str) -> None:
    assert isinstance(read_any(f'drive "x"\n{more}\n', FILE, no_file), Library)


@pytest.mark.parametrize(
    "more", ["", "clock 1 MHz", "let x = 1\nwrites together", "let x = 1\nloop at least 1 us", "parts\nrules", "paths"]
)
def test_what_names_nothing_or_is_begun_as_a_drive_is_no_library(more: str) -> None:
    """Half a drive must not pass for a file with nothing to prove."""
    found = mistakes(f'drive "x"\n{more}\n')
    missing = [f"t.dseq:1:1: error: the section '{one}' is missing" for one in ("modes", "moves", "stage")]
    assert [one.split(";")[0] for one in found] == missing


@pytest.mark.parametrize("head", ["stage", "modes A", "moves"])
def test_a_drive_section_that_cannot_be_read_makes_no_library(head: str) -> None:
    """The mistake in the head is told; that the section is there is not forgotten."""
    found = mistakes(f'drive "x"\nlet y = 1\n{head} !\n')
    assert found[-1].startswith("t.dseq:3:")
    assert any("is missing" in one for one in found)


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("2 * settle", "2 * setle", "3:16: error: unknown quantity 'setle'; did you mean 'settle'? [unknown-name]"),
        ("1 ns to 2 ns", "2 ns to 1 ns", "5:13: error: the range runs backwards, from 2 ns to 1 ns; put the smaller"),
        ("5 % to 95 %", "95 % to 5 %", "7:19: error: the duty runs backwards; put the smaller one first"),
        ("parts", "clock 3 us\nparts", "4:7: error: a frequency is needed here, but '3 us' is a duration; write it in"),
        ('drive "Gate drivers"\n', "", "1:1: error: the line 'drive' is missing; begin the file with"),
        ("let settle", 'use "gone.dseq"\nlet settle', "2:5: error: cannot read 'gone.dseq': No such file or directory"),
    ],
)
def test_a_library_is_checked(old: str, new: str, said: str) -> None:
    assert old in LIBRARY
    (found,) = mistakes(LIBRARY.replace(old, new))
    assert found.startswith(f"t.dseq:{said}")


def test_ticks_of_a_library_without_a_clock_are_those_of_its_users() -> None:
    """They mean something only there; the rest of the file is checked all the same."""
    text = LIBRARY.replace("5 us", "5 ticks").replace("1 ns to 2 ns", "1 ticks to 2 ticks")
    found = read_any(text, FILE, no_file)
    assert isinstance(found, Library)
    assert found.parts == ("driver",)
    (said,) = mistakes(text.replace("10 kHz", "10 us"))
    assert "a frequency is needed here" in said


def test_a_circle_of_use_is_the_only_mistake_of_a_library() -> None:
    """No word about sections that such a file does not have."""
    texts = {"a.dseq": 'drive "a"\nuse "t.dseq"\n'}
    with pytest.raises(Problems) as caught:
        read_any('drive "t"\nuse "a.dseq"\n', FILE, texts.__getitem__)
    said = "a circle of 'use': t.dseq -> a.dseq -> t.dseq; take one of them out"
    assert [one.line() for one in caught.value.found] == [f"a.dseq:2:5: error: {said} [circle-of-use]"]


def test_where_a_drive_is_needed_a_library_is_refused() -> None:
    with pytest.raises(Problems) as caught:
        read(LIBRARY, FILE, no_file)
    assert [one.line() for one in caught.value.found] == [
        "t.dseq:1:1: error: this file only serves 'use', it describes no drive; name a file that uses it, or add the"
        " sections 'stage', 'modes' and 'moves' [no-drive]"
    ]


# Said


def test_lint_says_that_there_is_nothing_to_prove(capsys: pytest.CaptureFixture[str]) -> None:
    put(x=LIBRARY)
    assert main(["lint", "x.dseq"]) == 0
    assert capsys.readouterr().out == (
        'x.dseq  "Gate drivers"\n\n'
        "  It brings 2 quantities, 1 part and 1 carrier to files that use it.\n\n"
        "nothing to prove: x.dseq: this file only serves 'use'\n"
    )
    assert main(["lint", "--as", "lines", "x.dseq"]) == 0
    assert capsys.readouterr().out == (
        "x.dseq:1:1: note: nothing to prove: this file only serves 'use' [nothing-to-prove]\n"
    )


def test_a_library_beside_drives_changes_no_exit_code(capsys: pytest.CaptureFixture[str]) -> None:
    """As a hook over all files calls it; the count tells it from what is proven."""
    put(a=LIBRARY, s=SAFE, u=UNSAFE)
    assert main(["lint", "a.dseq", "s.dseq"]) == 0
    said = capsys.readouterr().out
    assert "\n2 files: 1 proven, 1 with nothing to prove.\n" in said
    assert main(["lint"]) == 1
    said = capsys.readouterr().out
    assert "\n3 files: 1 UNSAFE, 1 proven, 1 with nothing to prove.\n" in said


def test_libraries_alone_are_never_called_proven(capsys: pytest.CaptureFixture[str]) -> None:
    put(a=LIBRARY, b=LIBRARY)
    assert main(["lint"]) == 0
    said = capsys.readouterr().out
    assert said.endswith("\n2 files: 2 with nothing to prove.\n")
    assert "proven" not in said
    assert "proof" not in said


def test_a_library_has_no_evidence(capsys: pytest.CaptureFixture[str]) -> None:
    put(x=LIBRARY)
    assert main(["lint", "--evidence", "shelf", "x.dseq"]) == 0
    assert list(Path("shelf").iterdir()) == []
    capsys.readouterr()
    assert main(["audit", "x.dseq", "shelf/x.dseq.json"]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert err.startswith("x.dseq:1:1: error: this file only serves 'use'")
    assert err.count("\n") == 1
