"""`seqcheck rows` as a user meets it, and `means` in `lint`."""

import subprocess
import sys
from pathlib import Path

import pytest

from seqcheck.cli import main

SAMPLES = Path(__file__).parent.parent / "samples"
BRIDGE = """\
drive "bridge"
writes together
stage
  rails P N
  leg U  UH UL
  leg V  VH VL
  winding U V
{pins}modes UH UL VH VL
{rows}
moves
  start a
"""


def said(tmp_path: Path, capsys: pytest.CaptureFixture[str], rows: str, pins: str = "", *more: str) -> tuple[int, str]:
    """The exit code and output of `rows` for a bridge of these rows."""
    file = tmp_path / "t.dseq"
    file.write_text(BRIDGE.format(rows=rows, pins=pins), encoding="utf-8")
    code = main(["rows", str(file), *more])
    out, err = capsys.readouterr()
    assert err == ""
    return code, out


@pytest.mark.parametrize("sample", sorted(SAMPLES.glob("*.dseq")), ids=lambda path: path.stem)
def test_samples_are_read_back(sample: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Within 80 columns; the answer stands in the first three lines."""
    assert main(["rows", str(sample)]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    lines = out.splitlines()
    assert lines[0].startswith(f"{sample}  ")
    assert "No row shorts a supply" in lines[1]
    assert max(map(len, lines[1:])) <= 80


def test_the_first_lines_say_what_is_wrong(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    rows = "  a off off off off means brake\n  b on on off off\n  c off on off on means brake"
    code, out = said(tmp_path, capsys, rows)
    assert code == 1
    assert out.splitlines()[1:3] == [
        "3 rows, 1 winding. A supply is shorted in b.",
        "What it 'means' is not what it does in a.",
    ]
    assert "  a    off off off off  free" in out
    assert "                        means brake (line 9), but it does not short every" in out
    assert "  b    on  on  off off  shorts P to N through UH and UL" in out
    assert "  c    off on  off on   braked, both ends at N" in out


def test_kept_and_floating_cells(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A kept cell is what some row writes there, a floating pin either; what `keep` would short is left out."""
    pins = "pins\n" + "".join(f"  {name} G{name} active high rests unknown\n" for name in ("UH", "UL", "VH", "VL"))
    rows = "  a off off off off\n  b on off off off\n  c keep on off on\n  d off off off free"
    code, out = said(tmp_path, capsys, rows, pins)
    assert code == 0
    assert "braked, both ends at N" in out
    assert "shorts P" not in out
    assert "one end held, V at N; or free" in out


def test_too_many_words_are_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Seven legs of floating pins are 2¹⁴ words."""
    legs = range(7)
    names = [name for leg in legs for name in (f"H{leg}", f"L{leg}")]
    file = tmp_path / "t.dseq"
    file.write_text(
        'drive "wide"\nstage\n  rails P N\n'
        + "".join(f"  leg X{leg} H{leg} L{leg}\n" for leg in legs)
        + "pins\n"
        + "".join(f"  {name} G{name} active high rests unknown\n" for name in names)
        + f"modes {' '.join(names)}\n  a {'free ' * 14}\nmoves\n  start a\n",
        encoding="utf-8",
    )
    assert main(["rows", str(file)]) == 2
    err = capsys.readouterr().err
    assert err.startswith(f"{file}:27:3: error: row 'a' stands for more than 4096 words of switches;")
    assert err.endswith("[too-many-words]\n")


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (["rows"], "required: FILE"),
        (["rows", "no.dseq"], "no.dseq:1:1: error: cannot read this file"),
        (["rows", "a.dseq", "b.dseq"], "unrecognized arguments: b.dseq"),
        (["rows", "a.dseq", "--color", "blue"], "--color cannot be 'blue'"),
        (["rows", "a.dseq", "--as", "lines"], "unrecognized arguments: --as lines"),
    ],
)
def test_wrong_calls(call: list[str], words: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(call) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert words in err
    assert len(err.splitlines()) == 1


def test_a_broken_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = tmp_path / "t.dseq"
    file.write_text(BRIDGE.format(rows="  a off off off", pins=""), encoding="utf-8")
    assert main(["rows", str(file)]) == 2
    out, err = capsys.readouterr()
    assert out == ""
    assert "[missing-cell]" in err


def test_into_a_file_and_with_colour(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    target = tmp_path / "rows.txt"
    assert said(tmp_path, capsys, "  a off off off off", "", "--out", str(target)) == (0, "")
    plain = target.read_text(encoding="utf-8")
    _, coloured = said(tmp_path, capsys, "  a off off off off", "", "--color", "always")
    assert "\x1b[" in coloured
    assert "\x1b[" not in plain


def test_rows_knows_no_prover() -> None:
    """Reading a table back must not wait for what a proof needs."""
    code = (
        "import sys; from seqcheck.cli import main; main(sys.argv[1:]); "
        "print([name for name in sys.modules if 'proving' in name or 'evidence' in name or 'firmware' in name])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, "rows", str(SAMPLES / "vent.dseq")], capture_output=True, text=True, check=True
    )
    assert done.stdout.splitlines()[-1] == "[]"


def test_lint_says_what_a_row_does_instead(capsys: pytest.CaptureFixture[str]) -> None:
    twin = SAMPLES / "faulty" / "vent_half_brake.dseq"
    assert main(["lint", "--as", "lines", str(twin)]) == 1
    assert capsys.readouterr().out == (
        f"{twin}:44:40: error: row 'brake' means brake, but it does not short every winding; what it does: "
        "one end held, U at N; correct its cells, or what it means [row-meaning]\n"
    )
