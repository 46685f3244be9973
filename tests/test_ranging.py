"""Numbers that range: their arithmetic, their rounding and their answers, against single values of the same formula."""

from collections.abc import Callable
from fractions import Fraction
from itertools import product
from math import ceil, floor
from typing import Any

import pytest

from seqcheck.ranging import NEVER, Mixed, Ranging, Stretch

FORMULAS: tuple[Callable[[Any], Any], ...] = (
    lambda v: v,
    lambda v: 3 - 2 * v,
    lambda v: (v + 1) * v,
    lambda v: 7 / v,
    lambda v: 5 / (v + 1) - v / 3,
    lambda v: v * v - 5 * v,
    lambda v: (v - 4) * (v - 6),
    lambda v: v / v,
    lambda v: Fraction(10**12) / (48 * v) / (1 + Fraction(1, 100)),
    lambda v: (1 - v / 100) / (1 + v / 100),
)
SPANS = ((1, 2), (2, 9), (3, 5), (5, 5), (Fraction(1, 3), Fraction(22, 7)))


def ranging(first: Any, last: Any, outer: bool = True) -> Ranging:
    return Stretch(Fraction(first), None if last is None else Fraction(last), outer).quantity()


def values(first: Any, last: Any) -> list[Fraction]:
    """Many values of an interval, its ends among them."""
    return [Fraction(first) + (Fraction(last) - Fraction(first)) * at / 60 for at in range(61)]


@pytest.mark.parametrize(("number", "span"), list(product(range(len(FORMULAS)), SPANS)))
def test_rounding_takes_the_least_or_the_greatest(number: int, span: tuple[Any, Any]) -> None:
    formula = FORMULAS[number]
    true = [formula(value) for value in values(*span)]
    try:
        wide, narrow = formula(ranging(*span)), formula(ranging(*span, outer=False))
        rounded = floor(wide), ceil(wide), floor(narrow), ceil(narrow)
    except Mixed:
        assert min(true[1:-1]) < min(true[0], true[-1]) or max(true[1:-1]) > max(true[0], true[-1])
        return
    assert rounded == (floor(min(true)), ceil(max(true)), floor(max(true)), ceil(min(true)))


@pytest.mark.parametrize(("number", "span"), list(product(range(len(FORMULAS)), SPANS)))
@pytest.mark.parametrize("other", [0, 1, 2, Fraction(7, 2), 5])
def test_an_answer_is_that_of_every_value(number: int, span: tuple[Any, Any], other: Any) -> None:
    formula = FORMULAS[number]
    asked: tuple[Callable[[Any], bool], ...] = (
        lambda v: v < other,
        lambda v: v <= other,
        lambda v: v > other,
        lambda v: v >= other,
        lambda v: v == other,
        lambda v: other < v,
        lambda v: bool(v - other),
    )
    for question in asked:
        true = {question(formula(value)) for value in values(*span)}
        try:
            said = question(formula(ranging(*span)))
        except Mixed:
            continue
        assert true == {said}


def test_comparisons_that_all_values_answer_alike_have_an_answer() -> None:
    wide = ranging(2, 9)
    assert wide < 10
    assert wide >= 2
    assert 2 * wide > wide
    assert wide != 1
    assert wide / wide == 1
    assert not wide < 2


def test_an_interval_without_end() -> None:
    wide, narrow = ranging(5, None), ranging(5, None, outer=False)
    assert floor(wide) == 5
    assert wide.endless
    assert not (100 / wide).endless
    assert (floor(100 / wide), ceil(100 / wide)) == (0, 20)
    assert (floor(narrow), ceil(narrow)) == (NEVER, 5)
    assert wide + wide > wide
    with pytest.raises(Mixed):
        ceil(wide)


def test_what_has_no_one_answer_is_refused() -> None:
    wide = ranging(2, 9)
    for question in (lambda: wide < 5, lambda: 1 / (wide - 5), lambda: wide == 3, lambda: bool(wide - 2)):
        with pytest.raises(Mixed):
            question()


@pytest.mark.parametrize("question", [float, int, round, abs, str.format, Fraction, hash, divmod, pow])
def test_nothing_falls_back_on_one_value(question: Callable[..., object]) -> None:
    """A Fraction's own methods would take it for whatever value its slots hold."""
    wide = ranging(2, 9)
    calls: dict[Any, Callable[[], object]] = {
        str.format: lambda: f"{wide:.2f}",
        divmod: lambda: divmod(wide, 2),
        pow: lambda: wide**2,
        hash: lambda: wide.numerator,
    }
    with pytest.raises(TypeError):
        calls.get(question, lambda: question(wide))()


def test_every_method_of_a_fraction_is_its_own() -> None:
    """Those that are left work on no value, or by others that are its own."""
    left = {name for name in vars(Fraction) if name not in vars(Ranging)}
    harmless = {"__new__", "__slots__", "__doc__", "__module__", "__abstractmethods__", "_abc_impl", "from_float"}
    helpers = {name for name in left if name.startswith("_") and not name.startswith("__")}
    assert left - harmless - helpers <= {"from_decimal", "__hash__"}
