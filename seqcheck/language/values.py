"""Amounts: exact numbers with what they are amounts of, and the formulas of `let`."""

from collections.abc import Callable
from enum import Enum
from fractions import Fraction
from typing import NamedTuple

from seqcheck.language.notes import Notes
from seqcheck.language.syntax import Formula, Operand, Sign
from seqcheck.quantities import HERTZ, PICOSECONDS, RATIOS, bits

MOST_DIGITS = 60
MOST_BITS = 4096
_HERTZ_PICOSECONDS = 10**12


class Unit(Enum):
    """What an amount is an amount of; durations are in picoseconds, frequencies in hertz."""

    DURATION = "a duration"
    FREQUENCY = "a frequency"
    RATIO = "a ratio"
    NUMBER = "a plain number"


class Amount(NamedTuple):
    """An exact value and its unit."""

    value: Fraction
    unit: Unit


def in_unit(number: str, unit: str) -> Amount | None:
    """A number with a unit that needs no clock; None for `ticks`."""
    value = Fraction(number)
    if unit == "":
        return Amount(value, Unit.NUMBER)
    if unit in PICOSECONDS:
        return Amount(value * PICOSECONDS[unit], Unit.DURATION)
    if unit in HERTZ:
        return Amount(value * HERTZ[unit], Unit.FREQUENCY)
    return Amount(value * RATIOS[unit], Unit.RATIO) if unit in RATIOS else None


_D, _F, _R, _N = Unit.DURATION, Unit.FREQUENCY, Unit.RATIO, Unit.NUMBER
_PRODUCTS: dict[tuple[Unit, Unit], Unit] = {
    (_N, _N): _N,
    (_R, _N): _R,
    (_R, _R): _R,
    (_D, _N): _D,
    (_D, _R): _D,
    (_F, _N): _F,
    (_F, _R): _F,
    (_D, _F): _N,
}
_QUOTIENTS: dict[tuple[Unit, Unit], Unit] = {
    (_N, _N): _N,
    (_N, _R): _N,
    (_R, _N): _R,
    (_R, _R): _N,
    (_D, _N): _D,
    (_D, _R): _D,
    (_D, _D): _N,
    (_F, _N): _F,
    (_F, _R): _F,
    (_F, _F): _N,
    (_N, _D): _F,
    (_N, _F): _D,
    (_R, _D): _F,
    (_R, _F): _D,
}


def evaluated(formula: Formula, amount: Callable[[Operand], Amount | None], notes: Notes) -> Amount | None:
    """The value of a formula; None where a mistake was noted."""
    stack: list[Amount] = []
    for item in formula.items:
        result = _combined(stack, item, notes) if isinstance(item, Sign) else amount(item)
        if result is None:
            return None
        if bits(result.value) > MOST_BITS:
            notes.add(item.place, "number-too-long", "the exact result grows beyond all use", "round the numbers")
            return None
        stack.append(result)
    return stack.pop()


def _combined(stack: list[Amount], sign: Sign, notes: Notes) -> Amount | None:
    right = stack.pop()
    if sign.text == "neg":
        return Amount(-right.value, right.unit)
    left = stack.pop()
    if sign.text in "+-":
        return _sum(left, sign, right, notes)
    return _product(left, right, sign, notes) if sign.text == "*" else _quotient(left, right, sign, notes)


def _sum(left: Amount, sign: Sign, right: Amount, notes: Notes) -> Amount | None:
    if left.unit is not right.unit:
        verb = "added to" if sign.text == "+" else "subtracted from"
        text = f"{right.unit.value} cannot be {verb} {left.unit.value}"
        notes.add(sign.place, "wrong-unit", text, "make both sides amounts of the same thing")
        return None
    return Amount(left.value + right.value if sign.text == "+" else left.value - right.value, left.unit)


def _product(left: Amount, right: Amount, sign: Sign, notes: Notes) -> Amount | None:
    unit = _PRODUCTS.get((left.unit, right.unit)) or _PRODUCTS.get((right.unit, left.unit))
    if unit is None:
        text = f"{left.unit.value} cannot be multiplied by {right.unit.value}"
        notes.add(sign.place, "wrong-unit", text, "multiply by a ratio or a plain number")
        return None
    value = left.value * right.value
    return Amount(value / _HERTZ_PICOSECONDS if {left.unit, right.unit} == {_D, _F} else value, unit)


def _quotient(left: Amount, right: Amount, sign: Sign, notes: Notes) -> Amount | None:
    unit = _QUOTIENTS.get((left.unit, right.unit))
    if unit is None:
        text = f"{left.unit.value} cannot be divided by {right.unit.value}"
        notes.add(sign.place, "wrong-unit", text, "divide by a ratio or a plain number")
        return None
    if right.value == 0:
        notes.add(sign.place, "division-by-zero", "a division by zero", "divide by something else")
        return None
    value = left.value / right.value
    return Amount(value * _HERTZ_PICOSECONDS if left.unit in (_N, _R) and right.unit in (_D, _F) else value, unit)
