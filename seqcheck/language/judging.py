"""Checking the lines of `rules`: limits to the strict side, and names."""

from fractions import Fraction
from math import ceil, floor

from seqcheck.drive import (
    ApartRule,
    ClearsRule,
    Lasts,
    LastsRule,
    MarginRule,
    NeverRule,
    Rule,
    ToleratesRule,
    Waiver,
)
from seqcheck.language.motion import Motion
from seqcheck.language.scope import Scope
from seqcheck.language.syntax import (
    ApartLine,
    ClearsLine,
    LastsLine,
    Line,
    MarginLine,
    NeverLine,
    Operand,
    ToleratesLine,
    WaiveLine,
    Word,
)
from seqcheck.language.tables import Table
from seqcheck.language.values import Unit
from seqcheck.language.words import CHECKS
from seqcheck.messages import nearest
from seqcheck.source import Place


class Rules:
    """The checked rules and waivers of a file."""

    def __init__(self, scope: Scope, table: Table, motion: Motion) -> None:
        self.scope = scope
        self.notes = scope.notes
        self.table = table
        self.motion = motion
        self.rules: list[Rule] = []
        self.waivers: list[Waiver] = []
        self._waived: dict[tuple[str, str], Place] = {}
        for line in scope.book.sections["rules"]:
            rule = self._rule(line)
            if isinstance(rule, Waiver):
                self.waivers.append(rule)
            elif rule is not None:
                self.rules.append(rule)

    def _rule(self, line: Line) -> Rule | Waiver | None:
        said = line.node
        if isinstance(said, MarginLine):
            least = self._duration(said.least)
            return None if least is None else MarginRule(line.place, ceil(least))
        if isinstance(said, NeverLine):
            return self._never(line, said)
        if isinstance(said, ClearsLine):
            return self._clears(line, said)
        if isinstance(said, LastsLine):
            return self._lasts(line, said)
        if isinstance(said, ApartLine):
            return self._apart(line, said)
        if isinstance(said, ToleratesLine):
            return self._tolerates(line, said)
        assert isinstance(said, WaiveLine)
        return self._waive(line, said)

    def _duration(self, operand: Operand) -> Fraction | None:
        return self.scope.at_least_zero(operand, Unit.DURATION)

    def _switch(self, word: Word) -> bool:
        return self.notes.known(word, self.table.stage.names, "switch", "stage")

    def _never(self, line: Line, said: NeverLine) -> NeverRule | None:
        seen: dict[str, Place] = {}
        fine = [self._switch(word) and self._once(word, seen) for word, _ in said.literals]
        if not all(fine):
            return None
        return NeverRule(line.place, tuple((word.text, on) for word, on in said.literals))

    def _once(self, word: Word, seen: dict[str, Place], kind: str = "switch") -> bool:
        fresh = self.notes.fresh(word, seen, kind)
        seen.setdefault(word.text, word.place)
        return fresh

    def _clears(self, line: Line, said: ClearsLine) -> ClearsRule | None:
        trip = self.notes.known(said.trip, self.motion.trip_names, "trip", "trips")
        seen: dict[str, Place] = {}
        fine = [self._switch(word) and self._once(word, seen) for word in said.switches]
        within = self._duration(said.within)
        if not trip or not all(fine) or within is None:
            return None
        return ClearsRule(line.place, said.trip.text, tuple(word.text for word in said.switches), floor(within))

    def _lasts(self, line: Line, said: LastsLine) -> LastsRule | None:
        known = self._switch(said.switch)
        limit = self._duration(said.limit)
        if not known or limit is None:
            return None
        strict = floor(limit) if said.lasts is Lasts.ON_AT_MOST else ceil(limit)
        return LastsRule(line.place, said.switch.text, said.lasts, strict)

    def _apart(self, line: Line, said: ApartLine) -> ApartRule | None:
        known = [self._mode(word) for word in (said.first, said.second)]
        least = self._duration(said.least)
        if said.first.text == said.second.text:
            text = f"mode '{said.first.text}' cannot be apart from itself"
            self.notes.add(said.second.place, "same-name", text, "name two modes")
            return None
        if not all(known) or least is None:
            return None
        return ApartRule(line.place, said.first.text, said.second.text, ceil(least))

    def _tolerates(self, line: Line, said: ToleratesLine) -> ToleratesRule | None:
        seen: dict[str, Place] = {}
        known = [self._mode(word) and self._once(word, seen, "mode") for word in said.modes.modes]
        if not all(known):
            return None
        modes = tuple(mode for mode in self.table.named if mode not in seen) if said.modes.any else tuple(seen)
        if not modes and "modes" not in self.notes.broken and self.table.named:
            self.notes.add(said.modes.place, "empty-origin", "no mode is left to be asked for", "name the modes")
        return ToleratesRule(line.place, modes) if modes else None

    def _mode(self, word: Word) -> bool:
        """Whether a mode is known; `reset` only where something starts in it, leaves it or goes there."""
        if word.text == "reset" and self.motion.resets is None and not {"moves", "trips"} & self.notes.broken:
            self.notes.add(word.place, "unknown-name", "nothing here uses the mode 'reset'", "name a row of the table")
            return False
        return self.table.known_mode(word)

    def _waive(self, line: Line, said: WaiveLine) -> Waiver | None:
        check = said.check.text in CHECKS
        if not check:
            self.notes.add(
                said.check.place, "unknown-name", f"unknown check '{said.check.text}'", nearest(said.check.text, CHECKS)
            )
        if not self._waivable(said.name) or not check:
            return None
        pair = (said.check.text, said.name.text)
        if pair in self._waived:
            text = f"'{pair[0]}' for '{pair[1]}' is waived twice, first in line {self._waived[pair].line}"
            self.notes.add(said.name.place, "duplicate-name", text, "leave out one of them")
            return None
        self._waived[pair] = said.name.place
        if not said.reason.text.strip():
            self.notes.add(said.reason.place, "missing-reason", "a waiver needs a reason", "say why it may pass")
            return None
        return Waiver(line.place, *pair, said.reason.text)

    def _waivable(self, word: Word) -> bool:
        names = [*self.table.stage.nodes_of_legs, *self.table.stage.names, *self.table.named, "reset"]
        names += [*self.motion.events, *self.motion.trip_names]
        if word.text in names:
            return True
        if not self.notes.broken & {"stage", "modes", "moves", "trips"}:
            text = f"'{word.text}' is no leg, switch, mode, event or trip"
            self.notes.add(word.place, "unknown-name", text, nearest(word.text, names))
        return False
