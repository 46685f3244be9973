"""The makers of small faults, which the campaign of `tests/mutation` puts into the proof's rooms."""

import pytest
from mutation.__main__ import HOUSE, ROOMS
from mutation.explained import TABLE, read
from mutation.faults import Module


def changes(source: str) -> set[str]:
    """All changes of a text."""
    return {one.change for one in Module(source).mutants}


@pytest.mark.parametrize(
    ("line", "right"),
    [
        ("return a < b", {"return a < b -> return None", "a < b -> a <= b"}),
        ("return a and not b", {"return a and (not b) -> return None", "a and (not b) -> a or not b", "not b -> b"}),
        ("x = min(a, b) * -a", {"min(a, b) * -a -> min(a, b) // -a", "min(a, b) -> max(a, b)", "-a -> a"}),
        ("a = b[1:]", {"a = b[1:] -> pass", "1: -> :", "1 -> 2", "1 -> 0"}),
        ("if a: raise ValueError(b + 1)", {"a -> not a", "raise ValueError(b + 1) -> pass"}),
        ("return True", {"True -> False"}),
        ("x = [b for b in a if b]", {"b -> True"}),
        ("assert a > 1, 'more'", set()),
        ("x: list[int | None] = a", set()),
        ("x = f'{a + b}'", set()),
        ("zip(a, b, strict=True)", {"zip(a, b, strict=True) -> pass"}),
    ],
)
def test_faults_of_a_line(line: str, right: set[str]) -> None:
    """What decides is changed; texts, types and assertions are not."""
    assert changes(f"def f(a, b):\n    {line}\n") == right


def test_a_mutant_runs_with_its_change_and_leaves_the_others_alone() -> None:
    """One tree serves all mutants: each puts its change in and takes it out again."""
    module = Module("def f(a, b):\n    return a + b < 3\n")
    answers = {}
    for mutant in module.mutants:
        scope: dict[str, object] = {}
        exec(module.compiled(mutant, "f"), scope)
        answers[mutant.change] = [scope["f"](*pair) for pair in ((1, 1), (1, 2), (1, 3))]  # type: ignore[operator]
    assert answers == {
        "return a + b < 3 -> return None": [None, None, None],
        "a + b < 3 -> a + b <= 3": [True, True, False],
        "a + b -> a - b": [True, True, True],
        "3 -> 4": [True, True, False],
        "3 -> 2": [False, False, False],
    }


def test_names_tell_mutants_apart() -> None:
    """An explanation fits one mutant, wherever its line moves."""
    module = Module("class A:\n    def f(self, a):\n        return a[0] + a[0]\n")
    names = [one.name for one in module.mutants]
    assert len(set(names)) == len(names) == 6
    assert ("A.f", "return a[0] + a[0]", "0 -> 1 (#2)") in names


def test_defaults_are_outside_of_their_function() -> None:
    """They are worked out at import, so that the code of the function does not hold them."""
    module = Module("def f(a=1):\n    def g(b=2):\n        return b\n    return g\n")
    assert {(one.function, one.change) for one in module.mutants if "->" in one.change and one.change[0].isdigit()} == {
        ("", "1 -> 2"),
        ("", "1 -> 0"),
        ("f", "2 -> 3"),
        ("f", "2 -> 1"),
    }


def test_explanations_are_of_mutants_that_there_are() -> None:
    """Where the program has changed, what was said of it no longer holds."""
    there = {(file, *one.name) for file in ROOMS for one in Module((HOUSE / file).read_text()).mutants}
    assert set(read().names(set(ROOMS))) <= there


@pytest.mark.parametrize(
    "text",
    ["zones.py f\n line: a\n why: b", "zones f\n line: a\n change: b\n why: c", "zones.py f\n line: a\n change: b\n c"],
)
def test_the_table_is_strict(text: str) -> None:
    """A block that is not of the form would silently explain nothing."""
    with pytest.raises(ValueError, match="not a file and function"):
        read(text)


def test_nothing_is_explained_twice() -> None:
    """Two reasons for one mutant would be one too many to be kept true."""
    block = "zones.py f\n  line: a\n  change: b\n  why: c"
    with pytest.raises(ValueError, match="explained twice"):
        read(f"{block}\n\n{block}")
    assert TABLE.exists()
