"""A counterexample as a timing diagram, drawn as data sheets draw them."""

from collections.abc import Sequence
from xml.etree.ElementTree import Element

from seqcheck.drive import Command, Drive
from seqcheck.quantities import shown
from seqcheck.reports.drawing.elements import Paper, Point, folded, room
from seqcheck.reports.drawing.timing import (
    LEAD,
    Band,
    Dimension,
    Reference,
    Stay,
    bands,
    dimensions,
    hazard_end,
    references,
    stays,
)
from seqcheck.reports.instants import State
from seqcheck.reports.lanes import Conduct, Lane
from seqcheck.reports.pieces import listed, visible, wrapped
from seqcheck.reports.rows import scaled
from seqcheck.reports.run import run_of
from seqcheck.reports.wording import shown_for, stated, subject, where
from seqcheck.verdict import Unsafe

_EDGE = 20.0
_MODE, _REFERENCE, _COMMAND, _CONDUCT, _MEASURE, _ROW = 30.0, 26.0, 34.0, 24.0, 28.0, 16.0
_SLOPE = 3.0  # half the width of an edge
_LETTERS = 112  # in a row of words below the diagram


def picture(verdict: Unsafe, drive: Drive, name: str = "run", told: bool = True) -> Element:
    """The diagram of a counterexample; `told` adds what happens at each instant in words."""
    return _Sheet(verdict, drive, name, told).draw()


class _Sheet:
    def __init__(self, verdict: Unsafe, drive: Drive, name: str, told: bool) -> None:
        self._verdict, self._told = verdict, told
        self._run = run = run_of(verdict, drive)
        self._stays = stays(drive, verdict.trace)
        self._dimensions = dimensions(run, verdict)
        carriers = [one.carrier for one in verdict.trace.phases]
        names = [*(f"{title} conducts" for title in run.titles), *carriers, f"t / {run.unit}"]
        self._left = folded(names) + _EDGE + 14
        self._width = 0.0  # of the sheet, known once it is begun
        self._bands = bands(run, verdict.trace, self._left)
        self._references = references(verdict.trace, run, self._bands)
        said = [stated(verdict), where(verdict, drive)]
        title = f"{verdict.check.value.capitalize()}: {subject(verdict.hazard)}, {drive.title}"
        self._paper = Paper(name, title, ". ".join([*(one for one in said if one), *self._words()]))

    # The whole

    def draw(self) -> Element:
        """All bands below each other, then what the marks mean and what happens when."""
        paper = self._paper
        head = [paper.root[0].text or "", *self._intro()]
        words = self._table() if self._told else []
        width = max(self._left + max(band.width for band in self._bands) + _EDGE, 760.0, folded(head, 14.5) + 2 * _EDGE)
        self._width = width
        heights = [self._height(band) for band in self._bands]
        top = _EDGE + 20 + _ROW * len(head[1:])
        legend = 82.0
        height = top + sum(heights) + legend + _ROW * len(words) + _EDGE
        paper.box("paper", 0, 0, width, height)
        paper.hatch("doubt", 7, 45)
        paper.hatch("either", 6, -45)
        paper.hatch("meet", 8, 45)
        paper.text(_EDGE, _EDGE + 10, head[0], "large")
        for index, text in enumerate(head[1:]):
            paper.text(_EDGE, _EDGE + 28 + _ROW * index, text, "faint")
        for band, tall in zip(self._bands, heights, strict=True):
            self._band(band, top)
            top += tall
        self._legend(top)
        for index, (mark, time, text) in enumerate(words):
            y = top + legend + _ROW * index
            paper.text(_EDGE + 24, y, mark, "small faint end")
            paper.text(_EDGE + 36, y, time, "small")
            paper.text(_EDGE + 52 + folded([one for _, one, _ in words], 11), y, text, "small")
        return paper.sized(width, height)

    def _intro(self) -> list[str]:
        run, verdict = self._run, self._verdict
        note = run.origin_note
        begins = f"where line {note.line} begins ({note.text})" if note.text else "the start of the run"
        texts = [stated(verdict), f"t = 0 is {begins}"]
        letters = [f"{title} is {lane.literal.switch}" for title, lane in self._lanes() if title != lane.literal.switch]
        return [row for text in [*texts, *letters] for row in wrapped(visible(text) + ".", _LETTERS)]

    def _lanes(self) -> list[tuple[str, Lane]]:
        return list(zip(self._run.titles, self._run.lanes, strict=True))

    def _words(self) -> list[str]:
        """What happens at each instant that is drawn, in sentences without full stop."""
        return [f"{mark}, at {time}: {text}" for mark, time, text in self._happening()]

    def _table(self) -> list[tuple[str, str, str]]:
        """The same as rows: number, time, what happens, the first two only in the first row of each instant."""
        found = []
        for mark, time, text in self._happening():
            for index, row in enumerate(wrapped(text, _LETTERS - 24) or [""]):
                found.append(("" if index else mark, "" if index else time, row))
        return found

    def _happening(self) -> list[tuple[str, str, str]]:
        run, found = self._run, []
        for band in self._bands:
            for index in band.drawn:
                one = run.instants[index]
                notes = [f"{note.text} (line {note.line})" if note.line else note.text for note in one.notes]
                time = f"{scaled((one.time or 0) - run.origin, run.size)} {run.unit}"
                found.append((str(one.number), time, visible("; ".join(notes))))
        return found

    # One band

    def _rows_of(self, number: int) -> float:
        """The height of one lane: its command, what it does, and room for a dimension if it has any."""
        own = any(one.lane == number for one in self._dimensions)
        return _COMMAND + _CONDUCT + 6 + (_MEASURE if own else 4)

    def _height(self, band: Band) -> float:
        lanes = sum(self._rows_of(number) for number in range(len(self._run.lanes)))
        below = sum(one.lane is None and self._seen(band, one) for one in self._dimensions)
        return _MODE + 12 + _REFERENCE * len(self._references) + lanes + _MEASURE * below + 58

    def _band(self, band: Band, top: float) -> None:
        y = top
        self._name("mode", y + 17)
        begin = y + _MODE + 8
        bottom = top + self._height(band) - 52
        self._shade(band, begin, bottom)
        self._guides(band, begin, bottom)
        for stay in self._stays:
            self._stay(band, stay, y)
        y = begin
        for reference in self._references:
            self._name(reference.carrier, y + 15)
            self._reference(band, reference, y)
            y += _REFERENCE
        edges: list[float] = []
        measured: list[tuple[Dimension, float, bool]] = []
        for number in range(len(self._run.lanes)):
            edges.append(y + _COMMAND)
            self._lane(band, number, y)
            own = (one for one in self._dimensions if one.lane == number and self._seen(band, one))
            measured += [(one, y + _COMMAND + _CONDUCT + 16, False) for one in own]
            y += self._rows_of(number)
        for one in self._dimensions:
            if one.lane is None and self._seen(band, one):
                measured.append((one, y + 14, True))
                y += _MEASURE
        self._tears(band, begin - 4, bottom)
        for one, at, below in measured:
            self._dimension(band, one, at, edges if below else [])
        self._axis(band, bottom)

    def _name(self, text: str, y: float) -> None:
        self._paper.text(self._left - 12, y, text, "end faint")

    def _x(self, band: Band, time: int | None) -> float:
        """Where a time stands; None is for ever before."""
        return self._left + (0.0 if time is None else band.x(time))

    def _until(self, band: Band, time: int | None) -> float:
        return self._left + (band.width if time is None else band.x(time))

    def _shade(self, band: Band, top: float, bottom: float) -> None:
        """The stretch of the hazard, through all lanes."""
        begin = shown_for(self._verdict).start
        start, end = self._x(band, begin), self._until(band, hazard_end(self._verdict))
        if begin > band.times[-1] or end <= start:
            return
        self._hatched("meet", start, end, top, bottom)
        for x in (start, end):
            self._paper.line("limit", [(x, top), (x, bottom)])

    def _guides(self, band: Band, top: float, bottom: float) -> None:
        for time in band.times:
            x = self._x(band, time)
            self._paper.line("guide origin" if time == self._run.origin else "guide", [(x, top), (x, bottom)])

    def _stay(self, band: Band, one: Stay, y: float) -> None:
        """A mode as a flat six-sided box; a move or trip under way is hatched and dashed."""
        if (one.end is not None and one.end <= band.times[0] and self._bands[0] is not band) or (
            one.start is not None and one.start > band.times[-1]
        ):
            return
        start, end = self._x(band, one.start), self._until(band, one.end)
        if end - start < 1:
            return
        nose, middle, high = min(6.0, (end - start) / 2), y + 13, y + 24
        corners = [(start, middle), (start + nose, y + 2), (end - nose, y + 2)]
        corners += [(end, middle), (end - nose, high), (start + nose, high)]
        group = self._paper.group(f"{'under way ' if one.moving else 'mode '}{one.text}")
        self._paper.area("moving" if one.moving else "stay", corners, group)
        if one.moving:
            group[-1].set("fill", f"url(#{self._paper.name}-either)")
        fits = _shortened(one.text, end - start - 2 * nose)
        self._paper.text((start + end) / 2, y + 17, fits, "mid over" if one.moving else "mid strong", group)

    def _reference(self, band: Band, one: Reference, y: float) -> None:
        high, low = y + 4, y + 19
        ends = [*(time for time, _ in one.levels[1:]), None]
        points: list[Point] = []
        for (time, level), until in zip(one.levels, ends, strict=True):
            start, end = self._x(band, time), self._until(band, until)
            if end <= start:
                continue
            if level is None:
                self._hatched("doubt", start, end, high, low)
                level = True
            at = high if level else low
            points += [(start, at), (end, at)]
        self._paper.line("thin", points)

    # One lane

    def _lane(self, band: Band, number: int, y: float) -> None:
        title = self._run.titles[number]
        self._paper.text(self._left - 12 - room("conducts") - room(" "), y + 22, title, "end strong")
        self._name("command", y + 22)
        self._name("conducts", y + _COMMAND + 17)
        states = [self._run.instants[index].states[number] for index in band.drawn]
        before = self._run.instants[band.drawn[0] - 1].states[number]
        xs = [self._left, *(self._x(band, time) for time in band.times), self._left + band.width]
        self._command(before, states, xs, y + 8, y + _COMMAND - 6)
        self._conduct(before, states, xs, y + _COMMAND + 3, y + _COMMAND + _CONDUCT - 3)

    def _command(self, before: State, states: Sequence[State], xs: Sequence[float], high: float, low: float) -> None:
        """A line between two levels; where the pin floats, a hatched box between both."""
        level = {Command.ON: high, Command.OFF: low, Command.UNKNOWN: low}
        points: list[Point] = []
        floating: list[tuple[float, float]] = []
        old = before.command
        for index, state in enumerate([before, *states]):
            x, end = xs[index], xs[index + 1]
            if index and old is not Command.UNKNOWN:
                points += _edges(x, level[old], [level[one] for one in state.commands if one is not Command.UNKNOWN])
            old = state.command
            if state.command is not Command.UNKNOWN:
                points += [(x, level[old])] * (not points) + [(end, level[old])]
                continue
            self._paper.line("edge", points)
            points = []
            if floating and floating[-1][1] == x:
                x = floating.pop()[0]
            floating.append((x, end))
        self._paper.line("edge", points)
        for x, end in floating:
            self._hatched("either", x, end, high, low)

    def _conduct(self, before: State, states: Sequence[State], xs: Sequence[float], high: float, low: float) -> None:
        """A full bar where a switch surely conducts, a hatched one where it may, a line where it surely does not."""
        self._paper.line("base", [(xs[0], low), (xs[-1], low)])
        spans: list[tuple[float, float, Conduct]] = []
        for index, state in enumerate([before, *states]):
            if spans and spans[-1][2] is state.conduct:
                spans[-1] = (spans[-1][0], xs[index + 1], state.conduct)
            else:
                spans.append((xs[index], xs[index + 1], state.conduct))
        for start, end, conduct in spans:
            if conduct is Conduct.YES:
                self._paper.put("rect", "sure", x=start, y=high, width=end - start, height=low - high)
            elif conduct is Conduct.MAY:
                self._hatched("doubt", start, end, high, low)

    def _hatched(self, kind: str, start: float, end: float, high: float, low: float) -> None:
        fill = f"url(#{self._paper.name}-{kind})"
        self._paper.put("rect", kind, x=start, y=high, width=end - start, height=low - high, fill=fill)

    # Dimensions, tears and the axis

    def _seen(self, band: Band, one: Dimension) -> bool:
        return one.start <= band.times[-1] and (one.end is None or one.end > band.times[0])

    def _dimension(self, band: Band, one: Dimension, y: float, edges: Sequence[float]) -> None:
        """Two arrows to the ends of a length and its number; an end outside the band has no arrow."""
        group, kind = self._paper.group(one.text), "span-bad" if one.bad else "span"
        head = "head-bad" if one.bad else "head"
        start, end = self._x(band, one.start), self._until(band, one.end)
        for x, time, lane in ((start, one.start, one.ends[0]), (end, one.end, one.ends[1])):
            inside = time is not None and band.times[0] <= time <= band.times[-1]
            if inside and not one.bad:
                top = edges[lane] - 4 if edges and lane is not None else y - 20
                self._paper.line("thin", [(x, top), (x, y + 5)], group)
        narrow = end - start < 22
        reach = 16.0 if narrow else 0.0
        wide = room(one.text, 11) + 10
        if wide + 24 <= end - start:
            middle = (start + end) / 2
            self._paper.line(kind, [(start, y), (middle - wide / 2, y)], group)
            self._paper.line(kind, [(middle + wide / 2, y), (end, y)], group)
        else:
            self._paper.line(kind, [(start - reach, y), (end + reach, y)], group)
        for x, time, way in ((start, one.start, -1.0), (end, one.end, 1.0)):
            if time is not None and band.times[0] <= time <= band.times[-1]:
                self._paper.arrow(head, (x, y), (-way if narrow else way, 0.0), group, 7)
        self._measure(band, one, (start - reach, end + reach), y, group)

    def _measure(self, band: Band, one: Dimension, ends: Point, y: float, group: Element) -> None:
        """The words of a length: in its line where they fit, else beside it where there is room."""
        wide, kind = room(one.text, 11), "over small alarm" if one.bad else "over small"
        start, end = ends
        right = self._left + band.width
        if wide + 34 <= end - start:
            self._paper.text((start + end) / 2, y + 4, one.text, f"{kind} mid", group)
        elif end + 6 + wide <= self._width - 6:
            self._paper.text(end + 6, y + 4, one.text, kind, group)
        elif start - 6 - wide >= self._left:
            self._paper.text(start - 6, y + 4, one.text, f"{kind} end", group)
        else:
            self._paper.text(right, y - 6, one.text, f"{kind} end", group)

    def _tears(self, band: Band, top: float, bottom: float) -> None:
        for index, torn in enumerate(band.torn):
            if not torn:
                continue
            x = self._left + LEAD + (index + 0.5) * band.step
            span = shown(band.times[index + 1] - band.times[index])
            group = self._paper.group(f"a long stretch shortened: {span}")
            rows = [top + 6 * step for step in range(int((bottom - top) // 6) + 1)]
            sides = [[(x + side + (2.5 if step % 2 else -2.5), y) for step, y in enumerate(rows)] for side in (-5, 5)]
            self._paper.area("gap", [*sides[0], *reversed(sides[1])], group)
            for side in sides:
                self._paper.line("tear", side, group)

    def _axis(self, band: Band, y: float) -> None:
        paper = self._paper
        paper.line("thin", [(self._left, y), (self._left + band.width, y)])
        self._name("row", y + 15)
        self._name(f"t / {self._run.unit}", y + 30)
        for index, time in zip(band.drawn, band.times, strict=True):
            x = self._x(band, time)
            paper.line("thin", [(x, y - 4), (x, y + 4)])
            paper.text(x, y + 15, str(self._run.instants[index].number), "mid faint small")
            paper.text(x, y + 30, scaled(time - self._run.origin, self._run.size), "mid small")
        for index, (start, end) in enumerate(zip(band.times, band.times[1:], strict=False)):
            x = self._left + LEAD + (index + 0.5) * band.step
            paper.text(x, y + 44, shown(end - start), "mid faint small")

    def _legend(self, top: float) -> None:
        paper, y = self._paper, top + 8
        paper.line("guide", [(_EDGE, y - 8), (740, y - 8)])
        x = _EDGE
        kinds = (("sure", "surely conducts"), ("doubt", "may conduct"), ("base", "surely does not"))
        for kind, text in kinds if self._run.lanes else ():
            if kind == "base":
                paper.line("base", [(x, y + 13), (x + 26, y + 13)])
            elif kind == "sure":
                paper.box(kind, x, y + 1, 26, 12)
            else:
                self._hatched(kind, x, x + 26, y + 1, y + 13)
            paper.text(x + 34, y + 12, text, "small")
            x += 58 + room(text, 11)
        self._hatched("meet", x, x + 26, y + 1, y + 13)
        both = listed([title if lane.literal.on else f"{title} off" for title, lane in self._lanes()])
        paper.text(x + 34, y + 12, f"{self._run.stretch}: {both}" if both else self._run.stretch, "small")
        texts = ["From one instant to the next takes equal room; the time that it lasts stands between their times."]
        if any(band.tears for band in self._bands):
            texts.append("A zigzag marks a stretch much longer than the others.")
        floats = any(Command.UNKNOWN in state.commands for one in self._run.instants for state in one.states)
        texts.append("Command: high is on, low is off" + (", hatched is a floating pin." if floats else "."))
        for index, text in enumerate(wrapped(" ".join(texts), _LETTERS)):
            paper.text(_EDGE, y + 32 + _ROW * index, text, "small faint")


def _edges(x: float, old: float, levels: Sequence[float]) -> list[Point]:
    """The changes of one instant, one after the other within the width of an edge; nothing where none is a change."""
    if all(level == old for level in levels):
        return []  # also where there is none: a pin begins to float
    step = 2 * _SLOPE / len(levels)
    return [(x - _SLOPE, old), *((x - _SLOPE + step * (index + 1), level) for index, level in enumerate(levels))]


def _shortened(text: str, width: float) -> str:
    """A text cut to what fits; its whole is in the title of its box."""
    if room(text) <= width:
        return text
    fitting = int(width // room("m"))
    return f"{text[: fitting - 1]}\u2026" if fitting > 2 else ""
