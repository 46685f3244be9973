"""Quantities for people: exact where their digits end, and said to be rounded where they do not."""

from fractions import Fraction

import pytest

from seqcheck.quantities import Interval, decimal, exactly, in_hertz, in_parts, nearly, spanned


@pytest.mark.parametrize(
    ("number", "text"), [("1/2", "0.5"), ("-3/8", "-0.375"), ("0", "0"), ("12", "12"), ("-1/100", "-0.01")]
)
def test_a_number_has_all_its_digits(number: str, text: str) -> None:
    value = Fraction(number)
    assert decimal(value) == exactly(value) == nearly(value, 6) == text
    assert Fraction(text) == value


def test_digits_that_do_not_end() -> None:
    third = Fraction(1, 3)
    assert decimal(third) is None
    assert exactly(third) == "1/3"
    assert [nearly(third, 3, up) for up in (None, False, True)] == ["about 0.333", "about 0.333", "about 0.334"]
    assert [nearly(-third, 3, up) for up in (None, False, True)] == ["about -0.333", "about -0.334", "about -0.333"]


def test_more_digits_than_asked_for() -> None:
    number = Fraction(1, 2**7)
    assert (decimal(number, 7), decimal(number, 6)) == ("0.0078125", None)
    assert nearly(number, 6) == "about 0.007812"


def test_units_that_keep_a_number_short() -> None:
    assert in_hertz(Fraction(48_000_000)) == (48, "MHz")
    assert in_hertz(Fraction(999)) == (999, "Hz")
    assert in_parts(Fraction(1, 1000)) == (Fraction(1, 10), "%")
    assert in_parts(Fraction(25, 10**6)) == (25, "ppm")
    assert in_parts(Fraction(0)) == (0, "%")


def test_spans() -> None:
    spans = (Interval(4, 4), Interval(1, 2), Interval(1, None), Interval(0, 2), Interval(0, 0))
    assert [spanned(one) for one in spans] == ["4 ps", "1 ps to 2 ps", "at least 1 ps", "up to 2 ps", "0 s"]
