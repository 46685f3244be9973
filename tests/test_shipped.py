"""What is shipped with the program is found in a checkout, where a wheel puts it, and in a zip file."""

import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

from seqcheck import shipped

ROOT = Path(__file__).parents[1]
NAMES = ("drive.lark", "outcome.schema.json", "margins.schema.json", "dseq.tmLanguage.json", "start/h-bridge.dseq")


def asked(code: str, folder: Path, path: Path) -> str:
    """What a fresh interpreter prints that finds the package under `path` only."""
    world = {"PYTHONPATH": str(path), "PYTHONIOENCODING": "utf-8"}
    ran = subprocess.run([sys.executable, "-c", code], cwd=folder, env=world, capture_output=True, check=True)
    return ran.stdout.decode("utf-8").replace("\r\n", "\n")


@pytest.mark.parametrize("name", NAMES)
def test_it_is_found_beside_the_package_in_a_checkout(name: str) -> None:
    code = f"from seqcheck.shipped import *; print(PACKAGE); print(shipped({name!r}), end='')"
    package, text = asked(code, ROOT, ROOT).split("\n", 1)
    assert Path(package) == ROOT / "seqcheck"
    assert not (ROOT / "seqcheck" / "grammars").exists()
    assert text == (ROOT / "grammars" / name).read_text("utf-8")


def test_it_is_found_in_the_package_where_a_wheel_puts_it(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "grammars").mkdir()
    (tmp_path / "grammars" / "drive.lark").write_text("from the wheel", "utf-8")
    monkeypatch.setattr(shipped, "PACKAGE", tmp_path)
    assert shipped.shipped("drive.lark") == "from the wheel"


@pytest.mark.parametrize("name", NAMES)
def test_it_is_found_in_a_zip_file(name: str, tmp_path: Path) -> None:
    archive = tmp_path / "seqcheck.zip"
    with zipfile.ZipFile(archive, "w") as packed:
        for path in sorted((ROOT / "seqcheck").rglob("*.py")):
            packed.write(path, path.relative_to(ROOT))
        packed.write(ROOT / "grammars" / name, f"seqcheck/grammars/{name}")
    text = asked(f"from seqcheck.shipped import shipped; print(shipped({name!r}), end='')", tmp_path, archive)
    assert text == (ROOT / "grammars" / name).read_text("utf-8")
