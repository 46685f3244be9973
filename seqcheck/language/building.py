"""From the grammar's rules to the syntax of a line: one method a rule, called while the line is parsed."""

from typing import Any

from lark import Token, Transformer, v_args

from seqcheck.drive import Conducts, Fixed, How, Lasts, Level, Order, Purpose, Update
from seqcheck.language import syntax as s
from seqcheck.language.words import NO_QUANTITY, RESERVED
from seqcheck.source import Place


def _always(value: object) -> Any:
    """A rule that stands for a constant."""
    return lambda self, *_: value


@v_args(inline=True)
class Builder(Transformer[Token, Any]):
    """Builds the syntax of a line; `file` and `line` say where, and are set before each line."""

    def __init__(self) -> None:
        super().__init__()
        self.file = ""
        self.line = 0
        self.reserved: list[s.Word] = []  # words of this line that stand in a name's place but cannot be names

    def _place(self, first: Token, last: Token | None = None) -> Place:
        """The span from one token to another."""
        end = last or first
        return Place(self.file, self.line, first.column or 1, self.line, end.end_column or 1)

    def _word(self, token: Token) -> s.Word:
        """A name; `reset` is left to the definitions, since it may be referred to."""
        word = s.Word(self._place(token), str(token))
        if word.text in RESERVED and word.text != "reset":
            self.reserved.append(word)
        return word

    def _words(self, tokens: tuple[Token, ...]) -> tuple[s.Word, ...]:
        """Several names."""
        return tuple(self._word(token) for token in tokens)

    def _quoted(self, token: Token) -> s.Word:
        """A text, without its quotes."""
        return s.Word(self._place(token), str(token)[1:-1])

    # Small rules that only hand something on

    nothing = _always(None)
    yes, no = _always(True), _always(False)
    high, low, unknown = _always(Level.HIGH), _always(Level.LOW), _always(Level.UNKNOWN)
    offs_first, ons_first = _always(Order.OFFS_FIRST), _always(Order.ONS_FIRST)
    table_order, any_order = _always(Order.TABLE), _always(Order.ANY)
    with_diode, one_way, two_way = _always(Conducts.DIODE), _always(Conducts.ONE_WAY), _always(Conducts.TWO_WAY)
    updates_at_once, updates_at_rise = _always(Update.AT_ONCE), _always(Update.AT_RISE)
    updates_within_period = _always(Update.WITHIN_PERIOD)
    begins_at_once = _always(None)

    def given(self, value: Any) -> Any:
        return value

    def given_name(self, name: Token) -> s.Word:
        return self._word(name)

    def names(self, *tokens: Token) -> tuple[s.Word, ...]:
        return self._words(tokens)

    def pair(self, first: Token, second: Token) -> tuple[s.Word, s.Word]:
        return self._word(first), self._word(second)

    pole = pair

    def poles(self, *poles: tuple[s.Word, s.Word]) -> tuple[tuple[s.Word, s.Word], ...]:
        return poles

    # Quantities

    def plain(self, number: Token) -> s.Term:
        return s.Term(self._place(number), str(number), "")

    def term(self, number: Token, unit: Token) -> s.Term:
        return s.Term(self._place(number, unit), str(number), str(unit))

    def named(self, name: Token) -> s.Word:
        return self._word(name)

    def exactly(self, value: s.Operand) -> s.Range:
        return s.Range(value.place, value, value)

    def between(self, lo: s.Operand, hi: s.Operand) -> s.Range:
        return s.Range(lo.place.through(hi.place), lo, hi)

    def at_least(self, lo: s.Operand) -> s.Range:
        return s.Range(lo.place, lo, None)

    def up_to(self, hi: s.Operand) -> s.Range:
        return s.Range(hi.place, None, hi)

    # A formula is built as a list in postfix order that grows in place

    def leaf(self, value: s.Operand) -> list[s.Operand | s.Sign]:
        return [value]

    def negated(self, sign: Token, items: list[s.Operand | s.Sign]) -> list[s.Operand | s.Sign]:
        items.append(s.Sign(self._place(sign), "neg"))
        return items

    def binary(
        self, left: list[s.Operand | s.Sign], sign: Token, right: list[s.Operand | s.Sign]
    ) -> list[s.Operand | s.Sign]:
        left.extend(right)
        left.append(s.Sign(self._place(sign), str(sign)))
        return left

    # Lines outside sections

    def drive(self, title: Token) -> s.DriveLine:
        return s.DriveLine(self._quoted(title))

    def clock(self, frequency: s.Operand, within: s.Operand | None, late: s.Operand | None) -> s.ClockLine:
        return s.ClockLine(frequency, within, late)

    def let(self, name: Token, items: list[s.Operand | s.Sign]) -> s.LetLine:
        place = min(one.place for one in items).through(max(one.place for one in items))
        word = self._word(name)
        if word.text in NO_QUANTITY:
            self.reserved.append(word)
        return s.LetLine(word, s.Formula(place, tuple(items)))

    def use(self, path: Token) -> s.UseLine:
        return s.UseLine(self._quoted(path))

    def writes_together(self) -> s.WritesLine:
        return s.WritesLine(How.TOGETHER, None, Order.ANY)

    def writes_singly(self, gap: s.Range, order: Order) -> s.WritesLine:
        return s.WritesLine(How.SINGLY, gap, order)

    def writes_by_port(self, gap: s.Range, order: Order) -> s.WritesLine:
        return s.WritesLine(How.BY_PORT, gap, order)

    def loop(self, least: s.Operand) -> s.LoopLine:
        return s.LoopLine(least)

    def head(self) -> s.HeadLine:
        return s.HeadLine()

    def columns(self, *names: Token) -> s.ColumnsLine:
        return s.ColumnsLine(self._words(names))

    # The stage

    def rails(self, *nodes: Token) -> s.RailsLine:
        return s.RailsLine(self._words(nodes))

    def sources(self, *nodes: Token) -> s.SourcesLine:
        return s.SourcesLine(self._words(nodes))

    def capacitor(self, positive: Token, negative: Token) -> s.CapacitorLine:
        return s.CapacitorLine(self._word(positive), self._word(negative))

    def leg(self, node: Token, high: Token, low: Token, between: tuple[s.Word, s.Word] | None) -> s.LegLine:
        return s.LegLine(self._word(node), self._word(high), self._word(low), between)

    def switch(self, name: Token, poles: tuple[tuple[s.Word, s.Word], ...], conducts: Conducts) -> s.SwitchLine:
        return s.SwitchLine(self._word(name), poles, conducts)

    def diode(self, pole: tuple[s.Word, s.Word]) -> s.DiodeLine:
        return s.DiodeLine(*pole)

    def winding(self, *parts: Any) -> s.WindingLine:
        return s.WindingLine(self._words(parts[:-1]), parts[-1])

    # The signal path

    def part(self, name: Token, on: s.Range, off: s.Range, difference: s.Operand | None) -> s.PartLine:
        return s.PartLine(self._word(name), on, off, difference)

    def path(self, *parts: Any) -> s.PathLine:
        return s.PathLine(self._words(parts[:-1]), parts[-1])

    def interlock(self, first: Token, second: Token, dead: s.Range | None) -> s.InterlockLine:
        return s.InterlockLine(self._word(first), self._word(second), dead)

    def pin(
        self, switch: Token, pin: Token, active: Level, rests: Level, after: s.Range | None, port: s.Word | None
    ) -> s.PinLine:
        return s.PinLine(self._word(switch), self._word(pin), active is Level.HIGH, rests, after, port)

    def carrier(self, name: Token, *rest: Any) -> s.CarrierLine:
        return s.CarrierLine(self._word(name), *rest)

    # Rows

    def row(self, name: Token, *parts: Any) -> s.RowLine:
        cells = tuple(one for one in parts if isinstance(one, s.CellWord))
        means = tuple(one for one in parts if isinstance(one, s.MeansWord))
        return s.RowLine(self._word(name), cells, _joined(one for one in parts if type(one) is tuple), means)

    def cell_on(self, token: Token) -> s.CellWord:
        return s.CellWord(self._place(token), Fixed(str(token)), None, False)

    cell_off = cell_keep = cell_free = cell_on

    def cell_follow(self, carrier: Token) -> s.CellWord:
        return s.CellWord(self._place(carrier), None, self._word(carrier), False)

    def cell_inverted(self, sign: Token, carrier: Token) -> s.CellWord:
        return s.CellWord(self._place(sign, carrier), None, self._word(carrier), True)

    def means(self, start: Token, purpose: tuple[Purpose, Token, tuple[Token, ...]]) -> s.MeansWord:
        word, last, nodes = purpose
        return s.MeansWord(self._place(start, last), word, self._words(nodes))

    def purpose(self, word: Token, *nodes: Token) -> tuple[Purpose, Token, tuple[Token, ...]]:
        return Purpose(str(word)), nodes[-1] if nodes else word, nodes

    def facts(self, *facts: s.FactWord) -> tuple[s.FactWord, ...]:
        return facts

    def current_out(self, start: Token, node: Token) -> s.FactWord:
        return s.FactWord(self._place(start, node), "out", (self._word(node),))

    def current_into(self, start: Token, node: Token) -> s.FactWord:
        return s.FactWord(self._place(start, node), "into", (self._word(node),))

    def above(self, upper: Token, lower: Token) -> s.FactWord:
        return s.FactWord(self._place(upper, lower), "above", (self._word(upper), self._word(lower)))

    # Moves and trips

    def start(self, mode: Token) -> s.StartLine:
        return s.StartLine(self._word(mode))

    def move(
        self,
        origin: s.Origin,
        target: Token,
        trigger: s.WhenWord | s.Range | None,
        unbroken: bool,
        *facts: tuple[s.FactWord, ...],
    ) -> s.MoveLine:
        return s.MoveLine(origin, self._word(target), trigger, unbroken, _joined(facts))

    def trip(
        self,
        name: Token,
        origin: s.Origin,
        target: Token,
        within: s.Operand | None,
        at_once: bool,
        *facts: tuple[s.FactWord, ...],
    ) -> s.TripLine:
        return s.TripLine(self._word(name), origin, self._word(target), within, at_once, _joined(facts))

    def listed(self, modes: tuple[s.Word, ...]) -> s.Origin:
        return s.Origin(modes[0].place.through(modes[-1].place), False, modes)

    def any_mode(self, start: Token, modes: tuple[s.Word, ...] = ()) -> s.Origin:
        place = self._place(start)
        return s.Origin(place.through(modes[-1].place) if modes else place, True, modes)

    def when(self, event: Token, earliest: s.Operand | None, latest: s.Operand | None) -> s.WhenWord:
        return s.WhenWord(self._word(event), earliest, latest)

    def after(self, span: s.Range) -> s.Range:
        return span

    def stepped(self, step: s.StepLine) -> s.StepLine:
        return step

    def set_all_off(self) -> s.SetAllOffLine:
        return s.SetAllOffLine()

    def set_some(self, *settings: tuple[s.Word, s.CellWord]) -> s.SetLine:
        return s.SetLine(settings)

    def setting(self, switch: Token, cell: s.CellWord) -> tuple[s.Word, s.CellWord]:
        return self._word(switch), cell

    def wait(self, time: s.Range) -> s.WaitLine:
        return s.WaitLine(time)

    # Rules

    def margin(self, least: s.Operand) -> s.MarginLine:
        return s.MarginLine(least)

    def never(self, *literals: tuple[s.Word, bool]) -> s.NeverLine:
        return s.NeverLine(literals)

    def literal_on(self, switch: Token) -> tuple[s.Word, bool]:
        return self._word(switch), True

    def literal_off(self, switch: Token) -> tuple[s.Word, bool]:
        return self._word(switch), False

    def clears(self, trip: Token, *rest: Any) -> s.ClearsLine:
        return s.ClearsLine(self._word(trip), self._words(rest[:-1]), rest[-1])

    def on_at_most(self, switch: Token, limit: s.Operand) -> s.LastsLine:
        return s.LastsLine(self._word(switch), Lasts.ON_AT_MOST, limit)

    def on_at_least(self, switch: Token, limit: s.Operand) -> s.LastsLine:
        return s.LastsLine(self._word(switch), Lasts.ON_AT_LEAST, limit)

    def off_at_least(self, switch: Token, limit: s.Operand) -> s.LastsLine:
        return s.LastsLine(self._word(switch), Lasts.OFF_AT_LEAST, limit)

    def apart(self, first: Token, second: Token, least: s.Operand) -> s.ApartLine:
        return s.ApartLine(self._word(first), self._word(second), least)

    def tolerates(self, modes: s.Origin) -> s.ToleratesLine:
        return s.ToleratesLine(modes)

    def waive(self, check: Token, name: Token, reason: Token) -> s.WaiveLine:
        return s.WaiveLine(s.Word(self._place(check), str(check)), self._word(name), self._quoted(reason))


def _joined(groups: Any) -> tuple[s.FactWord, ...]:
    return tuple(fact for group in groups for fact in group)
