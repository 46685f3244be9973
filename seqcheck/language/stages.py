"""Checking the circuit."""

from itertools import combinations

from seqcheck.drive import Capacitor, Conducts, Diode, Leg, Rails, Sources, Stage, Switch, Winding
from seqcheck.language.notes import Notes
from seqcheck.language.syntax import (
    CapacitorLine,
    DiodeLine,
    LegLine,
    Line,
    RailsLine,
    SourcesLine,
    SwitchLine,
    WindingLine,
    Word,
)
from seqcheck.source import Place


class StageReader:
    """Reads the lines of a stage into its parts."""

    def __init__(self, notes: Notes) -> None:
        self.notes = notes
        self.rails: list[Rails] = []
        self.sources: list[Sources] = []
        self.capacitors: list[Capacitor] = []
        self.switches: list[Switch] = []
        self.diodes: list[Diode] = []
        self.windings: list[Winding] = []
        self.legs: list[Leg] = []
        self.supplied: dict[str, Place] = {}  # nodes of rails and sources
        self.names: dict[str, Place] = {}  # switches
        self.nodes_of_legs: dict[str, Place] = {}

    def stage(self, head: Place, lines: list[Line]) -> Stage:
        """The checked stage. Supplies are read first, since legs may stand above them."""
        for line in lines:
            if isinstance(line.node, RailsLine | SourcesLine):
                self._supply(line, line.node)
            elif isinstance(line.node, CapacitorLine):
                self._capacitor(line, line.node)
        for line in lines:
            self._rest(line)
        if not self.names and "stage" not in self.notes.broken:
            self.notes.add(head, "missing-switch", "the stage has no switch", "add a line 'leg' or 'switch'")
        return Stage(
            head,
            tuple(self.rails),
            tuple(self.sources),
            tuple(self.capacitors),
            tuple(self.switches),
            tuple(self.diodes),
            tuple(self.windings),
            tuple(self.legs),
        )

    def _rest(self, line: Line) -> None:
        said = line.node
        if isinstance(said, LegLine):
            self._leg(line, said)
        elif isinstance(said, SwitchLine):
            self._switch(line, said)
        elif isinstance(said, DiodeLine):
            if self._differ(said.start, said.end, "a diode"):
                self.diodes.append(Diode(line.place, said.start.text, said.end.text))
        elif isinstance(said, WindingLine) and (
            len(said.ends) < 2 or self._differ(said.ends[0], said.ends[1], "a winding")
        ):
            self.windings.append(Winding(line.place, tuple(end.text for end in said.ends), said.must_flow))

    def _differ(self, first: Word, second: Word, what: str) -> bool:
        if first.text != second.text:
            return True
        self.notes.add(second.place, "same-name", f"both ends of {what} are '{first.text}'", "name two nodes")
        return False

    def _supply(self, line: Line, said: RailsLine | SourcesLine) -> None:
        what = "rails" if isinstance(said, RailsLine) else "sources"
        if len(said.nodes) < 2:
            text = f"a supply has at least two nodes, '{what}' names one"
            self.notes.add(line.place, "missing-node", text, f"write '{what} {said.nodes[0].text} OTHER'")
        for node in said.nodes:
            if node.text in self.supplied:
                first = self.supplied[node.text].line
                text = f"node '{node.text}' is in a supply twice, first in line {first}"
                way_out = "each line is a supply of its own; leave out one of them"
                self.notes.add(node.place, "duplicate-name", text, way_out)
            self.supplied.setdefault(node.text, node.place)
        nodes = tuple(node.text for node in said.nodes)
        if isinstance(said, RailsLine):
            self.rails.append(Rails(line.place, nodes))
        else:
            self.sources.append(Sources(line.place, nodes))

    def _capacitor(self, line: Line, said: CapacitorLine) -> None:
        if self._differ(said.positive, said.negative, "a capacitor"):
            self.capacitors.append(Capacitor(line.place, said.positive.text, said.negative.text))

    # Switches

    def _named(self, word: Word) -> bool:
        fresh = self.notes.not_reset(word, "stage") and self.notes.fresh(word, self.names, "switch")
        self.names.setdefault(word.text, word.place)
        return fresh

    def _switch(self, line: Line, said: SwitchLine) -> None:
        fine = [self._differ(start, end, "a pole") for start, end in said.poles]
        if self._named(said.name) and all(fine):
            poles = tuple((start.text, end.text) for start, end in said.poles)
            self.switches.append(Switch(line.place, said.name.text, poles, said.conducts))

    def _leg(self, line: Line, said: LegLine) -> None:
        fresh = [
            self.notes.fresh(said.node, self.nodes_of_legs, "leg"),
            self._named(said.high),
            self._named(said.low),
        ]
        self.nodes_of_legs.setdefault(said.node.text, said.node.place)
        supply = self._between(said) if said.between else self._only_rails(line)
        if supply is None or not all(fresh):
            return
        upper, lower = supply
        node = said.node.text
        if node in supply:
            text = f"leg '{node}' would tie its output to its own rail"
            self.notes.add(said.node.place, "same-name", text, "give the leg a node of its own")
            return
        self.switches.append(Switch(line.place, said.high.text, ((upper, node),), Conducts.DIODE))
        self.switches.append(Switch(line.place, said.low.text, ((node, lower),), Conducts.DIODE))
        self.legs.append(Leg(line.place, node, said.high.text, said.low.text, upper, lower))

    def _only_rails(self, line: Line) -> tuple[str, str] | None:
        """The outer rails of the one supply that there is."""
        if len(self.rails) == 1:
            return self.rails[0].nodes[0], self.rails[0].nodes[-1]
        if "stage" in self.notes.broken:
            return None
        if self.rails:
            text = f"this leg could be on any of {len(self.rails)} supplies"
            self.notes.add(line.place, "missing-rails", text, "end the line with 'between RAIL and RAIL'")
        else:
            text = "this leg has no rails to be between"
            way_out = "add a line 'rails P N', or end this one with 'between NODE and NODE'"
            self.notes.add(line.place, "missing-rails", text, way_out)
        return None

    def _between(self, said: LegLine) -> tuple[str, str] | None:
        assert said.between is not None
        upper, lower = said.between
        stiff = set(self.supplied) | {end for one in self.capacitors for end in (one.positive, one.negative)}
        known = [self.notes.known(one, sorted(stiff), "stiff node", "stage") for one in said.between]
        if not all(known) or not self._differ(upper, lower, "a leg"):
            return None
        for supply in self.rails:
            if (lower.text, upper.text) in combinations(supply.nodes, 2):
                text = f"rail '{upper.text}' lies below rail '{lower.text}'"
                way_out = f"write 'between {lower.text} and {upper.text}'"
                self.notes.add(upper.place.through(lower.place), "backwards-rails", text, way_out)
                return None
        return upper.text, lower.text

    # What other sections ask for

    def nodes(self) -> tuple[str, ...]:
        """All nodes that the stage names."""
        named = [*self.supplied]
        for capacitor in self.capacitors:
            named += [capacitor.positive, capacitor.negative]
        for switch in self.switches:
            named += [node for pole in switch.poles for node in pole]
        for diode in self.diodes:
            named += [diode.start, diode.end]
        for winding in self.windings:
            named += winding.ends
        return tuple(dict.fromkeys([*named, *self.nodes_of_legs]))

    def stiff(self) -> tuple[str, ...]:
        """The nodes of supplies and capacitors."""
        ends = [end for one in self.capacitors for end in (one.positive, one.negative)]
        return tuple(dict.fromkeys([*self.supplied, *ends]))
