"""Exact quantities: rational numbers go in, whole picoseconds come out, rounded so that no behaviour is lost."""

from fractions import Fraction
from math import ceil, floor

from seqcheck.records import dataclass

PICOSECONDS: dict[str, Fraction] = {
    "ps": Fraction(1),
    "ns": Fraction(10**3),
    "us": Fraction(10**6),
    "\u00b5s": Fraction(10**6),  # micro sign
    "\u03bcs": Fraction(10**6),  # Greek small letter mu, which many keyboards give instead
    "ms": Fraction(10**9),
    "s": Fraction(10**12),
}
HERTZ: dict[str, Fraction] = {
    "Hz": Fraction(1),
    "kHz": Fraction(10**3),
    "MHz": Fraction(10**6),
    "GHz": Fraction(10**9),
}
RATIOS: dict[str, Fraction] = {"%": Fraction(1, 100), "ppm": Fraction(1, 10**6)}

_SHOWN = ((10**12, "s"), (10**9, "ms"), (10**6, "us"), (10**3, "ns"), (1, "ps"))


@dataclass(frozen=True, slots=True)
class Interval:
    """A span of whole picoseconds with both ends included; `hi` is None where there is no upper bound."""

    lo: int
    hi: int | None

    def __add__(self, other: "Interval") -> "Interval":
        hi = None if self.hi is None or other.hi is None else self.hi + other.hi
        return Interval(self.lo + other.lo, hi)


INSTANT = Interval(0, 0)


def outwards(lo: Fraction, hi: Fraction | None) -> Interval:
    """The smallest interval of whole picoseconds around [lo, hi], given in picoseconds."""
    return Interval(floor(lo), None if hi is None else ceil(hi))


def widened(lo: Fraction, hi: Fraction | None, tolerance: Fraction) -> Interval:
    """A duration kept by a clock whose frequency is right within `tolerance` (below 1), rounded outwards.

    A clock that runs fast by R makes D/(1+R) of D, one that runs slow D/(1-R).
    """
    return outwards(lo / (1 + tolerance), None if hi is None else hi / (1 - tolerance))


def bits(value: Fraction) -> int:
    """The length of the longest whole number in an exact one; of a number that ranges, in all that it is made of."""
    own: int | None = getattr(value, "bits", None)
    return max(value.numerator.bit_length(), value.denominator.bit_length()) if own is None else own


def endless(value: Fraction) -> bool:
    """Whether a number is one that ranges and has no greatest value (see ranging)."""
    return bool(getattr(value, "endless", False))


def shown(time: int) -> str:
    """A time in picoseconds for people, exact, in the largest unit that keeps it at or above one: `12.5 us`."""
    if time == 0:
        return "0 s"
    size, unit = next((size, unit) for size, unit in _SHOWN if abs(time) >= size)
    whole, rest = divmod(abs(time), size)
    digits = str(rest + size)[1:].rstrip("0") if rest else ""
    return f"{'-' if time < 0 else ''}{whole}{'.' if digits else ''}{digits} {unit}"


def spanned(span: Interval) -> str:
    """A span of time for people: `4 us`, `1 us to 2 us`, `at least 1 us`, or `up to 2 us`."""
    if span.hi is None:
        return f"at least {shown(span.lo)}"
    if span.lo == span.hi:
        return shown(span.lo)
    return f"up to {shown(span.hi)}" if span.lo == 0 else f"{shown(span.lo)} to {shown(span.hi)}"


def decimal(number: Fraction, digits: int = 12) -> str | None:
    """A number with all its digits; None where more than so many stand behind the point."""
    for count in range(digits + 1):
        scaled = number * 10**count
        if scaled.denominator == 1:
            return _pointed(int(scaled), count)
    return None


def exactly(number: Fraction) -> str:
    """A number with all its digits, or as a fraction where they do not end soon."""
    return decimal(number) or str(number)


def nearly(number: Fraction, digits: int, up: bool | None = None) -> str:
    """A number with all its digits, or `about` one with so many: rounded as told (None: to the nearest)."""
    scaled = number * 10**digits
    rounded = ceil(scaled) if up else floor(scaled) if up is False else round(scaled)
    return decimal(number, digits) or f"about {_pointed(rounded, digits)}"


def _pointed(scaled: int, digits: int) -> str:
    whole, rest = divmod(abs(scaled), 10**digits)
    tail = f".{rest:0{digits}d}" if digits else ""
    return f"{'-' if scaled < 0 else ''}{whole}{tail}"


def in_hertz(frequency: Fraction) -> tuple[Fraction, str]:
    """A frequency in hertz, in the largest unit that keeps it at or above one: how many of them, and the unit."""
    unit = next((unit for unit, size in reversed(HERTZ.items()) if abs(frequency) >= size), "Hz")
    return frequency / HERTZ[unit], unit


def in_parts(ratio: Fraction) -> tuple[Fraction, str]:
    """A ratio in per cent, a small one in parts per million: how many of them, and the unit."""
    unit = "%" if ratio == 0 or abs(ratio) >= Fraction(1, 1000) else "ppm"
    return ratio / RATIOS[unit], unit
