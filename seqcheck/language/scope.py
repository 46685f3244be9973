"""The names and quantities of one file: `let`, the clock's ticks, ranges, widening."""

from collections.abc import Mapping
from fractions import Fraction
from math import ceil, floor
from typing import NamedTuple

from seqcheck.drive import Clock
from seqcheck.language.lines import Book
from seqcheck.language.notes import Notes
from seqcheck.language.syntax import ClockLine, LetLine, Line, Operand, Range, Term, Word
from seqcheck.language.values import MOST_DIGITS, Amount, Unit, evaluated, in_unit
from seqcheck.messages import nearest
from seqcheck.quantities import Interval, endless, outwards, shown, widened
from seqcheck.source import Place

_WAYS_OUT = {
    Unit.DURATION: "write it in ps, ns, us, ms, s or ticks",
    Unit.FREQUENCY: "write it in Hz, kHz, MHz or GHz",
    Unit.RATIO: "write it in % or ppm",
    Unit.NUMBER: "leave the unit out",
}
_SECOND = 10**12


class Let(NamedTuple):
    """A named amount: where it is defined, the line of this file from which it is known, its value (None: mistaken)."""

    place: Place
    line: int
    amount: Amount | None


class Scope:
    """The quantities of one file. `outer` is the scope of the file that uses this one, for a clock of its own.

    `given` are values in place of what the file, or one that it uses, says of a `let`.
    """

    def __init__(
        self, book: Book, notes: Notes, outer: "Scope | None" = None, given: Mapping[str, Fraction] | None = None
    ) -> None:
        self.book = book
        self.notes = notes
        self.outer = outer
        self.given: Mapping[str, Fraction] = given or (outer.given if outer else {})
        self.lets: dict[str, Let] = {}
        self.later = {one.node.name.text: one.place.line for one in book.singles if isinstance(one.node, LetLine)}
        self._clock: Clock | None = None
        self._clock_read = False
        self._clock_asked = False

    # The clock

    def clock(self) -> Clock | None:
        """The file's clock, read when it is first asked for; None if there is none or it is mistaken."""
        if not self._clock_asked:
            self._clock_asked = True
            line = self.book.heads.get("clock")
            if line is not None and isinstance(line.node, ClockLine):
                self._clock = self._read_clock(line, line.node)
            self._clock_read = True
        return self._clock

    def _read_clock(self, line: Line, said: ClockLine) -> Clock | None:
        frequency = self.positive(said.frequency, Unit.FREQUENCY)
        if frequency is None:
            self.notes.broken.add("clock")
            return None
        self._clock = Clock(line.place, frequency, Fraction(0), None)  # its own ticks may say how late it is
        tolerance = self.tolerance_of(said.within) if said.within else Fraction(0)
        late = self.at_least_zero(said.late, Unit.DURATION) if said.late else None
        exact = Fraction(0) if tolerance is None else tolerance
        return Clock(line.place, frequency, exact, None if late is None else ceil(late))

    @property
    def tolerance(self) -> Fraction:
        """The clock's tolerance; zero without a clock."""
        clock = self.clock()
        return clock.tolerance if clock else Fraction(0)

    @property
    def tick(self) -> int:
        """The clock's shortest tick in whole picoseconds, rounded down, at least 1; 1 without a clock."""
        clock = self.clock()
        return max(1, floor(_SECOND / clock.frequency / (1 + clock.tolerance))) if clock else 1

    def ticking(self) -> "Scope | None":
        """The scope whose clock gives the ticks of this one: the nearest that has a line for it; None without any."""
        scope: Scope | None = self
        while scope is not None and "clock" not in scope.book.heads:
            scope = scope.outer
        return scope

    def _ticks(self, term: Term) -> Amount | None:
        scope = self.ticking()
        clock = scope.clock() if scope else None
        if clock is not None:
            return Amount(Fraction(term.number) * _SECOND / clock.frequency, Unit.DURATION)
        if scope is not None and not scope._clock_read:
            text = "the clock cannot be given in its own ticks"
            self.notes.add(term.place, "wrong-unit", text, "write it in Hz, kHz, MHz or GHz")
        elif scope is None and not self._clock_broken():
            self.notes.add(term.place, "missing-clock", "'ticks' need a clock", "add a line 'clock F'")
        return None

    def _clock_broken(self) -> bool:
        """Whether the clock line of this file or of one that uses it could not be read."""
        scope: Scope | None = self
        while scope is not None and "clock" not in scope.notes.broken:
            scope = scope.outer
        return scope is not None

    # Amounts

    def define(self, line: Line, said: LetLine) -> None:
        """Read one `let`."""
        taken = {name: let.place for name, let in self.lets.items()}
        if not self.notes.not_reset(said.name, "let") or not self.notes.fresh(said.name, taken, "quantity"):
            return
        amount = evaluated(said.formula, self.amount, self.notes)
        if amount is not None and said.name.text in self.given:
            amount = Amount(self.given[said.name.text], amount.unit)
        self.lets[said.name.text] = Let(said.name.place, line.place.line, amount)

    def amount(self, operand: Operand) -> Amount | None:
        """The value of a number or a name; None where a mistake was noted."""
        if isinstance(operand, Word):
            return self._named(operand)
        if len(operand.number) > MOST_DIGITS:
            text = f"a number of {len(operand.number)} characters"
            self.notes.add(operand.place, "number-too-long", text, f"at most {MOST_DIGITS} are read")
            return None
        return self._ticks(operand) if operand.unit == "ticks" else in_unit(operand.number, operand.unit)

    def _named(self, word: Word) -> Amount | None:
        let = self.lets.get(word.text)
        if let is not None and let.line < word.place.line:
            return let.amount
        later = let.line if let else self.later.get(word.text)
        if later is not None and later >= word.place.line:
            where = f"only defined in line {later}" if later > word.place.line else "defined by itself"
            way_out = "define it on a line above its use"
            self.notes.add(word.place, "defined-later", f"'{word.text}' is {where}", way_out)
        elif later is not None:  # only the clock, read at the first tick, can ask for a line that is still to be read
            text = f"'{word.text}' is not known yet where the clock is first needed"
            way_out = "put 'clock' and what it needs above the first use of 'ticks'"
            self.notes.add(word.place, "defined-later", text, way_out)
        elif "let" not in self.notes.broken:
            way_out = nearest(word.text, self.lets) or "define it with 'let'"
            self.notes.add(word.place, "unknown-name", f"unknown quantity '{word.text}'", way_out)
        return None

    def need(self, operand: Operand, unit: Unit) -> Fraction | None:
        """The value of an operand that must have a unit; None where a mistake was noted."""
        amount = self.amount(operand)
        if amount is None:
            return None
        if amount.unit is unit:
            return amount.value
        written = operand.text if isinstance(operand, Word) else f"{operand.number} {operand.unit}".strip()
        text = f"{unit.value} is needed here, but '{written}' is {amount.unit.value}"
        way_out = _WAYS_OUT[unit]
        if unit is Unit.RATIO and amount.unit is Unit.NUMBER and isinstance(operand, Word):
            way_out = "multiply it by 100 %"
        self.notes.add(operand.place, "wrong-unit", text, way_out)
        return None

    def positive(self, operand: Operand, unit: Unit) -> Fraction | None:
        """As `need`, above zero."""
        value = self.need(operand, unit)
        if value is not None and value <= 0:
            self.notes.add(operand.place, "out-of-range", f"{unit.value} above zero is needed here", "make it greater")
            return None
        return value

    def at_least_zero(self, operand: Operand, unit: Unit) -> Fraction | None:
        """As `need`, not below zero."""
        value = self.need(operand, unit)
        if value is not None and value < 0:
            text = f"{unit.value} below zero has no meaning here"
            self.notes.add(operand.place, "out-of-range", text, "make it greater")
            return None
        return value

    def tolerance_of(self, operand: Operand) -> Fraction | None:
        """A tolerance: a ratio from zero to below one."""
        value = self.at_least_zero(operand, Unit.RATIO)
        if value is not None and value >= 1:
            self.notes.add(operand.place, "out-of-range", "a tolerance must be below 100 %", "make it smaller")
            return None
        return value

    # Ranges

    def span(self, said: Range) -> tuple[Fraction, Fraction | None] | None:
        """The bounds of a range; None where a mistake was noted."""
        lo = Fraction(0) if said.lo is None else self.at_least_zero(said.lo, Unit.DURATION)
        if said.hi is said.lo:
            return None if lo is None else (lo, lo)
        hi = None if said.hi is None else self.at_least_zero(said.hi, Unit.DURATION)
        if lo is None or (hi is None and said.hi is not None):
            return None
        if hi is not None and hi < lo:
            text = f"the range runs backwards, from {shown(ceil(lo))} to {shown(ceil(hi))}"
            self.notes.add(said.place, "backwards-range", text, "put the smaller one first")
            return None
        return lo, hi

    def bounded(self, said: Range, what: str) -> tuple[Fraction, Fraction] | None:
        """As `span`, for what needs an upper bound."""
        span = self.span(said)
        if span is None:
            return None
        lo, hi = span
        if hi is None:
            self.notes.add(said.place, "no-upper-bound", f"{what} needs an upper bound", "write 'D to D' or 'up to D'")
            return None
        return lo, hi

    def firmware(self, said: Range) -> Interval | None:
        """A duration that firmware times, widened by the clock's tolerance."""
        span = self.span(said)
        return None if span is None else widened(span[0], self.bound(span[1]), self.tolerance)

    def bound(self, hi: Fraction | None) -> Fraction | None:
        """An upper bound that firmware keeps: none where it is one that ranges without end."""
        return None if hi is None or endless(hi) else hi

    def hardware(self, said: Range, what: str) -> Interval | None:
        """A duration of hardware: an upper bound, and no widening."""
        span = self.bounded(said, what)
        return None if span is None else outwards(*span)
