"""The private cache of built parsers."""

import marshal
import os
from importlib.util import source_hash
from pathlib import Path

import pytest

from seqcheck.language import cache, grammar, read
from seqcheck.messages import Problems

SAMPLE = (Path(__file__).parent.parent / "samples" / "vent.dseq").read_text("utf-8")
BROKEN = SAMPLE.replace("when boot", "whenever boot").replace("wait settle", "wait settle settle")


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    return tmp_path / "seqcheck"


def kept_as(thing: object) -> bytes:
    """How the cache writes a thing."""
    data = marshal.dumps(thing)
    return source_hash(data) + data


def anew() -> None:
    """Forget the parser of this process."""
    grammar._ready.cache_clear()


def mistakes(text: str) -> str:
    with pytest.raises(Problems) as found:
        read(text, "t.dseq", lambda path: "")
    return str(found.value)


def test_a_parser_from_the_cache_reads_the_same(folder: Path) -> None:
    anew()
    built, problems = read(SAMPLE, "t.dseq", lambda path: ""), mistakes(BROKEN)
    assert len(list(folder.iterdir())) == 1
    anew()
    assert grammar._revived(cache.recalled(next(folder.iterdir()).name), grammar.Builder()) is not None
    assert read(SAMPLE, "t.dseq", lambda path: "") == built
    assert mistakes(BROKEN) == problems


def test_the_folder_is_private(folder: Path) -> None:
    cache.kept("a", [1])
    assert folder.stat().st_mode & 0o777 == 0o700
    assert (folder / "a").stat().st_mode & 0o777 == 0o600
    assert cache.recalled("a") == [1]


def test_a_folder_that_others_can_write_to_is_not_used(folder: Path) -> None:
    cache.kept("a", [1])
    folder.chmod(0o777)
    assert cache.recalled("a") is None
    cache.kept("b", [2])
    assert [file.name for file in folder.iterdir()] == ["a"]


def test_a_file_that_others_can_write_to_is_not_used(folder: Path) -> None:
    cache.kept("a", [1])
    (folder / "a").chmod(0o666)
    assert cache.recalled("a") is None


def test_a_link_in_place_of_the_folder_is_not_used(folder: Path, tmp_path: Path) -> None:
    (tmp_path / "elsewhere").mkdir(mode=0o700)
    folder.symlink_to(tmp_path / "elsewhere")
    cache.kept("a", [1])
    assert not any((tmp_path / "elsewhere").iterdir())


@pytest.mark.parametrize("damage", [b"", b"nothing", b"x" * 100, kept_as(5), kept_as(({}, {}))])
def test_a_damaged_file_is_as_none(folder: Path, damage: bytes) -> None:
    anew()
    built = read(SAMPLE, "t.dseq", lambda path: "")
    file = next(folder.iterdir())
    file.write_bytes(damage)
    anew()
    assert read(SAMPLE, "t.dseq", lambda path: "") == built
    assert file.read_bytes() != damage


def test_no_single_bit_can_change_unnoticed(folder: Path) -> None:
    cache.kept("a", ["some", {"plain": 1}])
    whole = (folder / "a").read_bytes()
    for place in range(len(whole) * 8):
        damaged = bytearray(whole)
        damaged[place // 8] ^= 1 << place % 8
        (folder / "a").write_bytes(damaged)
        assert cache.recalled("a") is None


def test_no_home_is_no_trouble(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "file"))
    anew()
    assert read(SAMPLE, "t.dseq", lambda path: "").title
    assert cache.recalled("a") is None


def test_a_relative_cache_folder_is_not_used(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """The base directory specification: paths there must be absolute, others are to be ignored."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("XDG_CACHE_HOME", "here")
    monkeypatch.setenv("HOME", str(tmp_path / "home"))
    cache.kept("a", [1])
    assert sorted(os.listdir()) == ["home"]


def test_few_files_stay(folder: Path) -> None:
    for number in range(9):
        cache.kept(f"k{number}", number)
    assert len(list(folder.iterdir())) <= cache._KEPT
    assert cache.recalled("k8") == 8


def test_a_key_tells_its_parts_apart() -> None:
    assert cache.key_of("a", "b") != cache.key_of("ab", "") != cache.key_of("a", "c")
