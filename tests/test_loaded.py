"""What each command loads: nothing that it does not need, since loading takes longer than most proofs."""

import ast
import os
import subprocess
import sys
from pathlib import Path

import pytest

SAMPLES = Path(__file__).parent.parent / "samples"
HEAVY = {"lark", "networkx", "rich", "dataclasses", "inspect", "json", "asyncio", "logging", "interegular"}
PROGRAM = """\
import io, sys
from contextlib import redirect_stdout, redirect_stderr
from seqcheck.entry import main
with redirect_stdout(io.StringIO()), redirect_stderr(io.StringIO()):
    code = main()
print([code, sorted(sys.modules)])
"""


@pytest.fixture(scope="module")
def cache(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    """Surroundings in which the parser's tables lie in the cache."""
    surroundings = {**os.environ, "XDG_CACHE_HOME": str(tmp_path_factory.mktemp("cache")), "NO_COLOR": "1"}
    loaded(surroundings, "lint", str(SAMPLES / "vent.dseq"))
    return surroundings


def loaded(surroundings: dict[str, str], *arguments: str) -> tuple[int, set[str]]:
    """The exit code, and the modules that are loaded at the end."""
    call = [sys.executable, "-c", PROGRAM, *arguments]
    ended = subprocess.run(call, env=surroundings, capture_output=True, text=True, check=True)
    code, modules = ast.literal_eval(ended.stdout)
    return code, set(modules)


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["lint", "--help"], ["draw", "--help"]])
def test_help_and_version_load_the_arguments_only(cache: dict[str, str], arguments: list[str]) -> None:
    code, modules = loaded(cache, *arguments)
    assert code == 0
    assert not modules & HEAVY
    own = {name for name in modules if name.startswith("seqcheck.")}
    assert own <= {f"seqcheck.{name}" for name in ("arguments", "entry", "exits", "limits", "records", "streams")}


def test_a_mistake_loads_no_prover(cache: dict[str, str], tmp_path: Path) -> None:
    text = (SAMPLES / "vent.dseq").read_text("utf-8").replace("through", "thruogh")
    (tmp_path / "t.dseq").write_text(text, encoding="utf-8")
    code, modules = loaded(cache, "lint", str(tmp_path / "t.dseq"))
    assert code == 2
    assert not modules & HEAVY
    assert not modules & {f"seqcheck.{name}" for name in ("checking", "proving", "evidence", "circuit", "reports")}


@pytest.mark.parametrize("name", ["vent", "fan", "pump", "inverter"])
def test_a_proof_loads_no_library(cache: dict[str, str], name: str) -> None:
    """`fan` and `pump` take long enough for the store of answers to be asked, which loads what it needs."""
    code, modules = loaded(cache, "lint", "--fresh", str(SAMPLES / f"{name}.dseq"))
    assert code == 0
    assert not modules & HEAVY
    assert not modules & {"seqcheck.evidence.replay", "seqcheck.serving", "seqcheck.language.making"}


def test_lark_is_loaded_where_the_cache_is_empty(tmp_path: Path) -> None:
    surroundings = {**os.environ, "XDG_CACHE_HOME": str(tmp_path)}
    assert "lark" in loaded(surroundings, "lint", str(SAMPLES / "vent.dseq"))[1]
    assert "lark" not in loaded(surroundings, "lint", str(SAMPLES / "vent.dseq"))[1]
