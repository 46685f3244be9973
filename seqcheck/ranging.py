"""Numbers that depend on one quantity while that ranges over an interval, exact: quotients of polynomials in it.

They stand in for Fractions while a file is read, so that one reading gives one drive for all values at once. Where a
number becomes whole picoseconds, `outer` readings take its least value for a floor and its greatest for a ceiling, just
as the reader rounds outwards; `inner` readings take them the other way round. What has no one answer for all values,
such as a comparison that only some fulfil, raises Mixed.

That a polynomial does not change its sign on an interval is read off its coefficients in Bernstein's basis (S. N.
Bernstein, 1912; G. Lorentz, Bernstein Polynomials, 1953): they bound it from both sides. It is a sufficient sign only,
so Mixed may be raised where a finer look would have an answer.
"""

from collections.abc import Sequence
from fractions import Fraction
from math import ceil, comb, floor
from typing import Any, NoReturn

Polynomial = tuple[Fraction, ...]
"""Coefficients of t, of t squared and so on behind the constant; the last is not zero. Zero is empty."""

NEVER = 1 << 200
"""A time in ps later than any that a file can say: what has no end, where a least time must be a number."""


class Mixed(Exception):  # noqa: N818
    """There is no one answer for all values of the interval."""


class Stretch:
    """An interval of values: both ends included, `last` None without end. `outer` says how is rounded.

    `asked` tells whether anything but arithmetic was ever asked of a number of it.
    """

    __slots__ = ("asked", "first", "last", "outer")

    def __init__(self, first: Fraction, last: Fraction | None, outer: bool) -> None:
        self.first = first
        self.last = last
        self.outer = outer
        self.asked = False

    def quantity(self) -> "Ranging":
        """The quantity itself: t counts from 0 to 1 over the interval, or from 0 on where it has no end."""
        slope = Fraction(1) if self.last is None else self.last - self.first
        return _made(self, _trimmed((self.first, slope)), (Fraction(1),))

    def positive(self, one: Polynomial) -> bool:
        """Whether a polynomial is surely above zero on all of the interval."""
        bounds = self._bounds(one)
        ends = bounds[:1] if self.last is None else (*bounds[:1], *bounds[-1:])
        return bool(bounds) and min(bounds) >= 0 and min(ends) > 0

    def not_negative(self, one: Polynomial) -> bool:
        """Whether a polynomial is surely nowhere below zero on the interval."""
        return min(self._bounds(one), default=Fraction(0)) >= 0

    def _bounds(self, one: Polynomial) -> Sequence[Fraction]:
        """Numbers of which the polynomial is a mean everywhere on the interval (without end: a sum of multiples)."""
        if self.last is None:
            return one
        top = len(one) - 1
        return [
            sum((one[low] * Fraction(comb(at, low), comb(top, low)) for low in range(at + 1)), Fraction(0))
            for at in range(top + 1)
        ]


class Ranging(Fraction):
    """A number that depends on the quantity of a stretch. Arithmetic is exact; all else may raise Mixed."""

    __slots__ = ("lower", "stretch", "upper")
    stretch: Stretch
    upper: Polynomial
    lower: Polynomial

    # What the reader asks for

    @property
    def endless(self) -> bool:
        """Whether it has no greatest value and is rounded to it."""
        return self.stretch.outer and self._ends()[1] is None

    @property
    def bits(self) -> int:
        """The length of the longest number that it takes to write it down."""
        parts = (*self.upper, *self.lower)
        return max(max(one.numerator.bit_length(), one.denominator.bit_length()) for one in parts)

    def __floor__(self) -> int:
        least, greatest = self._ends()
        if self.stretch.outer:
            return floor(_known(least))
        return NEVER if greatest is None else floor(greatest)

    def __ceil__(self) -> int:
        least, greatest = self._ends()
        return ceil(_known(greatest if self.stretch.outer else least))

    def _ends(self) -> tuple[Fraction | None, Fraction | None]:
        """The least and the greatest value (None: there is none), where the number grows or falls all the way."""
        stretch, up, low = self.stretch, self.upper, self.lower
        stretch.asked = True
        slope = _less(_product(_slope(up), low), _product(up, _slope(low)))
        first = _at(up, Fraction(0)) / _at(low, Fraction(0))
        if stretch.not_negative(slope):
            return first, self._last(True)
        if stretch.not_negative(_negative(slope)):
            return self._last(False), first
        raise Mixed("a number that neither grows nor falls all the way")

    def _last(self, grows: bool) -> Fraction | None:
        up, low = self.upper, self.lower
        if self.stretch.last is not None:
            return _at(up, Fraction(1)) / _at(low, Fraction(1))
        if len(up) > len(low):
            return None
        return up[-1] / low[-1] if len(up) == len(low) else Fraction(0)

    # Arithmetic

    def _of(self, other: object) -> tuple[Polynomial, Polynomial]:
        if isinstance(other, Ranging):
            return other.upper, other.lower
        if isinstance(other, int | Fraction):
            return _trimmed((Fraction(other),)), (Fraction(1),)
        raise TypeError(f"a ranging number and {type(other).__name__} do not go together")

    def __add__(self, other: Any) -> Any:
        up, low = self._of(other)
        return _made(
            self.stretch, _sum(_product(self.upper, low), _product(up, self.lower)), _product(self.lower, low)
        )

    def __mul__(self, other: Any) -> Any:
        up, low = self._of(other)
        return _made(self.stretch, _product(self.upper, up), _product(self.lower, low))

    def __neg__(self) -> Any:
        return _made(self.stretch, _negative(self.upper), self.lower)

    def __sub__(self, other: Any) -> Any:
        return self + -other

    def __rsub__(self, other: Any) -> Any:
        return -self + other

    def __truediv__(self, other: Any) -> Any:
        up, low = self._of(other)
        return _made(self.stretch, _product(self.upper, low), _product(self.lower, up))

    def __rtruediv__(self, other: Any) -> Any:
        up, low = self._of(other)
        return _made(self.stretch, _product(up, self.lower), _product(low, self.upper))

    __radd__ = __add__
    __rmul__ = __mul__

    # Comparisons: one answer for all values, or none

    def __lt__(self, other: Any) -> bool:
        return _above(other - self, True)

    def __le__(self, other: Any) -> bool:
        return _above(other - self, False)

    def __gt__(self, other: Any) -> bool:
        return _above(self - other, True)

    def __ge__(self, other: Any) -> bool:
        return _above(self - other, False)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, int | Fraction):
            return NotImplemented
        self.stretch.asked = True
        apart = (self - other).upper
        if not apart:
            return True
        if self.stretch.positive(apart) or self.stretch.positive(_negative(apart)):
            return False
        raise Mixed("only some of the values are equal")

    def __hash__(self) -> int:  # type: ignore[override]
        return hash((self.upper, self.lower))

    def __bool__(self) -> bool:
        return self != 0

    def __repr__(self) -> str:
        return f"Ranging({self.upper}, {self.lower})"

    __str__ = __repr__

    def _refused(self, *_: object) -> NoReturn:
        raise TypeError("a number that ranges has no one value")

    __abs__ = __pos__ = __round__ = __trunc__ = __int__ = __float__ = __complex__ = _refused  # type: ignore[assignment]
    __floordiv__ = __rfloordiv__ = __mod__ = __rmod__ = __divmod__ = __rdivmod__ = _refused  # type: ignore[assignment]
    __pow__ = __rpow__ = __format__ = __copy__ = __deepcopy__ = __reduce__ = _refused  # type: ignore[assignment]
    numerator = denominator = property(_refused)
    as_integer_ratio = limit_denominator = is_integer = conjugate = _refused  # type: ignore[assignment]


def _above(one: Ranging, strictly: bool) -> bool:
    """Whether a number is above zero, or not below it; its divisor is above zero everywhere."""
    one.stretch.asked = True
    holds, fails = one.stretch.positive, one.stretch.not_negative
    if not strictly:
        holds, fails = fails, holds
    if holds(one.upper):
        return True
    if fails(_negative(one.upper)):
        return False
    raise Mixed("only some of the values are greater")


def _made(stretch: Stretch, upper: Polynomial, lower: Polynomial) -> Ranging:
    """A quotient, its divisor above zero. Raises Mixed where the divisor may be zero."""
    if not stretch.positive(lower):
        upper, lower = _negative(upper), _negative(lower)
        if not stretch.positive(lower):
            raise Mixed("a divisor that is zero for some of the values")
    made = Fraction.__new__(Ranging)
    made.stretch, made.upper, made.lower = stretch, upper, lower
    return made


def _known(value: Fraction | None) -> Fraction:
    if value is None:
        raise Mixed("a bound that has no end")
    return value


# Polynomials


def _trimmed(one: Sequence[Fraction]) -> Polynomial:
    length = len(one)
    while length and not one[length - 1]:
        length -= 1
    return tuple(one[:length])


def _sum(one: Polynomial, other: Polynomial) -> Polynomial:
    longer, shorter = (one, other) if len(one) >= len(other) else (other, one)
    return _trimmed([*(a + b for a, b in zip(longer, shorter, strict=False)), *longer[len(shorter) :]])


def _negative(one: Polynomial) -> Polynomial:
    return tuple(-part for part in one)


def _less(one: Polynomial, other: Polynomial) -> Polynomial:
    return _sum(one, _negative(other))


def _product(one: Polynomial, other: Polynomial) -> Polynomial:
    found = [Fraction(0)] * (len(one) + len(other))
    for at, part in enumerate(one):
        for place, factor in enumerate(other):
            found[at + place] += part * factor
    return _trimmed(found)


def _slope(one: Polynomial) -> Polynomial:
    return _trimmed([part * at for at, part in enumerate(one)][1:])


def _at(one: Polynomial, t: Fraction) -> Fraction:
    value = Fraction(0)
    for part in reversed(one):
        value = value * t + part
    return value
