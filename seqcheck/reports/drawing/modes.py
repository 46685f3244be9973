"""The mode graph as a picture: what each mode does to the winding, and every move and trip between them."""

from collections.abc import Sequence
from itertools import pairwise
from xml.etree.ElementTree import Element

from seqcheck.drive import Move, SetStep, Trip
from seqcheck.reports.acts import written
from seqcheck.reports.does import does
from seqcheck.reports.drawing.chart import Arrow, Chart, Graph, called, chart, labels, path
from seqcheck.reports.drawing.elements import Paper, Point, folded, number, room
from seqcheck.reports.drawing.kinds import Does, Said, said
from seqcheck.reports.drawing.layers import Extent, Layout, Link, layout
from seqcheck.reports.pieces import counted, listed, visible, wrapped
from seqcheck.verdict import Unsafe

_EDGE = 24.0  # around the picture
_CUT = 11.0  # of the corners of a box
_LINE = 15.0  # from one line of a label to the next
_WIDE = 1150.0  # a picture that would be wider is laid out downwards if that makes it narrower
_FORMS = {
    Does.DRIVE: "drive", Does.BRAKE: "brake", Does.HELD: "held", Does.FREE: "free", Does.TURNS: "turns",
    Does.SHORT: "short", None: "bare",
}  # fmt: skip


def picture(graph: Graph, verdict: Unsafe | None, note: str, name: str = "modes") -> Element:
    """The mode graph, with the path of a run marked; `note` says what the marking rests on, for the foot."""
    drawn = chart(graph, verdict)
    sheet = _Sheet(graph, drawn)
    title = f"Mode graph of {graph.drive.title}"
    paper = Paper(name, title, described(graph, drawn, verdict))
    return sheet.draw(paper, [note, *_path_rows(graph, verdict)])


def described(graph: Graph, drawn: Chart, verdict: Unsafe | None) -> str:
    """The graph in words, for whoever does not see it."""
    ways = [f"{_from(one)} to {one.target} on {listed([labels(run)[0] for run in one.runs])}" for one in drawn.arrows]
    modes = [f"{name}: {said(graph.rows[name]).words or 'no winding'}" for name in drawn.modes]
    found = [f"Starts in {graph.drive.start}.", f"Modes: {'; '.join(modes)}.", f"Ways: {'; '.join(ways)}."]
    lost = [name for name in drawn.modes if name not in graph.reached]
    return " ".join([*found, f"Unreachable: {listed(lost)}." if lost else "", *_path_rows(graph, verdict)]).strip()


def _from(arrow: Arrow) -> str:
    return f"{'trip' if arrow.trip else 'move'} from {called(arrow.source)}"


def _path_rows(graph: Graph, verdict: Unsafe | None) -> list[str]:
    if verdict is None:
        return []
    steps, hit = path(verdict, graph.drive)
    taken = [f"{index} {labels(one.run)[0]}: {one.source} -> {one.run.target}" for index, one in enumerate(steps, 1)]
    where = f"at rest in {hit}" if hit else "while the last of these is under way"
    return [f"Unsafe path: {'; '.join(taken) or 'none needed'}; the hazard comes {where}."]


class _Sheet:
    """One mode graph laid out, ready to be drawn; `down` where the ranks follow each other downwards."""

    def __init__(self, graph: Graph, drawn: Chart) -> None:
        self._graph, self._chart = graph, drawn
        self._names = (*drawn.modes, *drawn.groups)
        self._said = {name: said(graph.rows[name]) for name in drawn.modes}
        self._links = [one for one in drawn.arrows if one.source != one.target]
        self._loops = [one for one in drawn.arrows if one.source == one.target]
        flat, tall = self._laid(False), self._laid(True)
        self._down = flat.along > _WIDE and tall.across < flat.along
        self._layout = tall if self._down else flat
        self._sizes = dict(zip(self._names, map(self._stretched, self._names, self._layout.extents), strict=True))

    def _laid(self, down: bool) -> Layout:
        nodes = [self._extent(name, down) for name in self._names]
        place = {name: index for index, name in enumerate(self._names)}
        links = [Link(place[one.source], place[one.target], self._label_extent(one, down)) for one in self._links]
        return layout(nodes, links, [place[name] for name in self._chart.groups])

    def _size(self, name: str) -> Point:
        """Width and height of a box, with the loops that stand above it."""
        if name in self._chart.groups:
            return room(called(name)) + 24, 24.0
        texts = [name, self._said[name].words, *self._badges(name)]
        return max(96.0, folded(texts) + 40), 44.0 + _LINE * len(self._badges(name))

    def _stretched(self, name: str, extent: Extent) -> Point:
        """The size of a box with room for all the ways at its sides."""
        width, height = self._size(name)
        ports = extent.ports
        return (max(width, ports), height) if self._down else (width, max(height, ports))

    def _badges(self, name: str) -> list[str]:
        return ["unreachable"] if name not in self._graph.reached else []

    def _loops_of(self, name: str) -> list[str]:
        return [_one_line(run) for one in self._loops if one.source == name for run in one.runs]

    def _extent(self, name: str, down: bool) -> Extent:
        width, height = self._size(name)
        loops = self._loops_of(name)
        above = _LINE * len(loops) + 14 if loops else 0.0
        wide = max(width, folded(loops) + 24)
        if down:
            return Extent(height + 2 * above, wide / 2, wide / 2)
        return Extent(wide, height / 2 + above, height / 2)

    def _label_extent(self, arrow: Arrow, down: bool) -> Extent:
        rows = _rows(arrow)
        width, height = folded(rows) + (22 if arrow.counts else 0), _LINE * len(rows)
        return Extent(height, 4.0, width + 10) if down else Extent(width, height + 6, 5.0)

    def _at(self, place: Point) -> Point:
        along, across = place[0] + _EDGE + 44, place[1] + _EDGE + 34
        return (across - 20, along + 34) if self._down else (along, across)

    # Drawing

    def draw(self, paper: Paper, notes: Sequence[str]) -> Element:
        """Everything onto the paper, and the legend below it."""
        wide, high = self._layout.along + 2 * _EDGE + 48, self._layout.across + 2 * _EDGE + 34
        if self._down:
            wide, high = self._layout.across + 2 * _EDGE + 20, self._layout.along + 2 * _EDGE + 74
        kinds = list(dict.fromkeys(one.does for one in self._said.values()))
        legend = _Legend(self._chart, kinds, notes, self._chart.left_out, any(map(self._badges, self._chart.modes)))
        wide = max(wide, room(paper.root[0].text or "", 14) + 2 * _EDGE, legend.width + 2 * _EDGE, 420.0)
        paper.box("paper", 0, 0, wide, high + legend.height)
        paper.text(_EDGE, _EDGE + 8, paper.root[0].text or "", "large")
        stripes = paper.hatch("short", 7, 45)
        for arrow, route in zip(self._links, self._layout.routes, strict=True):
            places = [(self._at(one), self._at(other)) for one, other in route.places]
            places[0] = (self._touching(arrow.source, places[0][0]),) * 2
            places[-1] = (self._touching(arrow.target, places[-1][0]),) * 2
            self._way(paper, arrow, places)
        for index, name in enumerate(self._names):
            self._box(paper, name, self._at(self._layout.centres[index]), stripes)
        for arrow, route in zip(self._links, self._layout.routes, strict=True):
            self._label(paper, arrow, self._at(route.label))
        legend.draw(paper, high)
        return paper.sized(wide, high + legend.height)

    def _touching(self, name: str, at: Point) -> Point:
        """Where a way meets the outline of a box: the point of a driving one lies back beside its tip."""
        centre = self._at(self._layout.centres[self._names.index(name)])
        own = self._said.get(name)
        if self._down or own is None or own.does is not Does.DRIVE or at[0] < centre[0]:
            return at
        return at[0] - _CUT * abs(at[1] - centre[1]) / (self._sizes[name][1] / 2), at[1]

    def _way(self, paper: Paper, arrow: Arrow, places: list[tuple[Point, Point]]) -> None:
        group = paper.group(_told(arrow))
        (tip_from, tip), back = (places[-2][1], places[-1][0]), 7.0
        onwards = tip[1] > tip_from[1] if self._down else tip[0] > tip_from[0]
        dx, dy = (0.0, 1.0) if self._down else (1.0, 0.0)
        dx, dy = (dx, dy) if onwards else (-dx, -dy)
        ends = [*places[:-1], ((tip[0] - dx * back, tip[1] - dy * back), tip)]
        start = ends[0][1]
        drawn = [f"M{number(start[0])},{number(start[1])}"]
        for (_, before), (begin, end) in pairwise(ends):
            drawn.append(self._curve(before, begin))
            if begin != end and (begin, end) != ends[-1]:
                drawn.append(f"L{number(end[0])},{number(end[1])}")
        kind = f"way{' trip' if arrow.trip else ''}{' taken' if arrow.counts else '' if arrow.possible else ' never'}"
        paper.put("path", kind, group, d=" ".join(drawn))
        head = "head-bad" if arrow.counts else "head" if arrow.possible else "head-never"
        paper.arrow(head, tip, (dx, dy), group, 12 if arrow.counts else 9)

    def _curve(self, one: Point, other: Point) -> str:
        (x, y), (u, v) = one, other
        if self._down:
            middle = (y + v) / 2
            points = ((x, middle), (u, middle), (u, v))
        else:
            middle = (x + u) / 2
            points = ((middle, y), (middle, v), (u, v))
        return "C" + " ".join(f"{number(a)},{number(b)}" for a, b in points)

    def _label(self, paper: Paper, arrow: Arrow, at: Point) -> None:
        """Downwards the label stands to the right of its line, else above it."""
        rows, (x, y) = _rows(arrow), at
        top = y + 11 if self._down else y - 6 - _LINE * (len(rows) - 1)
        left = x + 8 if self._down else x
        if arrow.counts:
            counts = ",".join(map(str, arrow.counts))
            radius = max(9.0, room(counts, 11) / 2 + 4)
            middle = (x, y + _LINE * len(rows) / 2) if self._down else (left + 9, y)
            group = paper.group(f"step {counts} of the unsafe path")
            paper.put("rect", "count", group, x=middle[0] - radius, y=middle[1] - 9, width=2 * radius, height=18, rx=9)
            paper.text(middle[0], middle[1] + 4, counts, "inverse mid", group)
            left = max(left, middle[0] + radius + 3) if self._down else left + 22
        for index, row in enumerate(rows):
            kind = "over" if _strong(arrow, index) else "over faint small"
            paper.text(left, top + _LINE * index, row, kind)

    def _box(self, paper: Paper, name: str, at: Point, stripes: str) -> None:
        width, height = self._sizes[name]
        x, y = at[0] - width / 2, at[1] - height / 2
        if loops := self._loops_of(name):
            _loops(paper, loops, at[0], y)
        if name in self._chart.groups:
            paper.put("rect", "pill", x=x, y=y, width=width, height=height, rx=12)
            paper.text(at[0], at[1] + 4, called(name), "mid faint")
            return
        own = self._said[name]
        group = paper.group(self._tip(name))
        kind = f"mode {_FORMS[own.does]}{'' if name in self._graph.reached else ' lost'}"
        _shape(paper, group, own, kind + (" hit" if name == self._chart.hit else ""), (x, y, width, height), stripes)
        badges = [(text, "small faint mid") for text in self._badges(name)]
        rows = [(name, "strong mid"), (own.words, "small mid"), *badges]
        rows = [row for row in rows if row[0]]
        for index, (text, style) in enumerate(rows):
            paper.text(at[0], at[1] + 4 + _LINE * (index - (len(rows) - 1) / 2), text, style, group)
        if name == self._graph.drive.start:
            self._start(paper, (x, y, width, height))

    def _tip(self, name: str) -> str:
        mode = self._graph.drive.modes[name]
        return f"{name} (line {mode.place.line}): {does(self._graph.rows[name])}"

    def _start(self, paper: Paper, box: tuple[float, float, float, float]) -> None:
        """The mark of the mode in which the drive starts: a dot with an arrow."""
        x, y, width, height = box
        group = paper.group("the drive starts here")
        if self._down:
            tip, dot, towards = (x + width / 2, y), (x + width / 2, y - 26), (0.0, 1.0)
        else:
            tip, dot, towards = (x, y + height / 2), (x - 26, y + height / 2), (1.0, 0.0)
        paper.line("way", [dot, (tip[0] - towards[0] * 7, tip[1] - towards[1] * 7)], group)
        paper.put("circle", "head", group, cx=dot[0], cy=dot[1], r=5)
        paper.arrow("head", tip, towards, group)
        if self._down:
            paper.text(dot[0] + 9, dot[1] + 4, "start", "faint small", group)
        else:
            paper.text(dot[0] - 14, dot[1] - 10, "start", "faint small", group)


def _rows(arrow: Arrow) -> list[str]:
    return [text for run in arrow.runs for text in labels(run) if text]


def _strong(arrow: Arrow, index: int) -> bool:
    return [first for run in arrow.runs for first, text in zip((True, False), labels(run), strict=True) if text][index]


def _one_line(run: Move | Trip) -> str:
    return " ".join(text for text in labels(run) if text)


def _told(arrow: Arrow) -> str:
    """All there is to know of an arrow, for a pointer."""
    found = []
    for run in arrow.runs:
        steps = [f"set {written(one.writes)}" if isinstance(one, SetStep) else "wait" for one in run.steps]
        what = f"{'trip' if arrow.trip else 'move'} in line {run.place.line}: {_one_line(run)}"
        found.append("; ".join([what, *steps]))
    return "\n".join(found) if arrow.possible else "\n".join([*found, "the times of the file never let it begin"])


def _loops(paper: Paper, loops: list[str], x: float, y: float) -> None:
    """A mode that a move leads back to at once: a bow above its box."""
    group = paper.group("back to the same mode")
    paper.put("path", "way", group, d=f"M{number(x - 16)},{number(y)} c-6,-22 38,-22 33,-7")
    paper.arrow("head", (x + 16, y), (0.0, 1.0), group, 7)
    for index, text in enumerate(reversed(loops)):
        paper.text(x, y - 20 - _LINE * index, text, "small mid over", group)


def _shape(
    paper: Paper, group: Element, own: Said, kind: str, box: tuple[float, float, float, float], stripes: str
) -> None:
    """A box whose outline tells what the mode does: one shape for each kind, so that no colour is needed."""
    x, y, width, height = box
    right, bottom, cut = x + width, y + height, _CUT
    if own.does is Does.DRIVE:
        middle = y + height / 2
        paper.area(kind, [(x, y), (right - cut, y), (right, middle), (right - cut, bottom), (x, bottom)], group)
    elif own.does is Does.BRAKE:
        corners = [(x + cut, y), (right - cut, y), (right, y + cut), (right, bottom - cut)]
        corners += [(right - cut, bottom), (x + cut, bottom), (x, bottom - cut), (x, y + cut)]
        paper.area(kind, corners, group)
    elif own.does is Does.HELD:
        corners = [(x + cut, y), (right, y), (right, bottom - cut), (right - cut, bottom), (x, bottom), (x, y + cut)]
        paper.area(kind, corners, group)
    elif own.does is Does.FREE:
        paper.put("rect", kind, group, x=x, y=y, width=width, height=height, rx=min(height / 2, 22.0))
    else:
        paper.put("rect", kind, group, x=x, y=y, width=width, height=height, rx=2)
    if own.does is Does.SHORT:
        paper.put("rect", "meet", group, x=x, y=y, width=width, height=height, fill=stripes)
    if own.does is Does.TURNS:
        for side in (x + 6, right - 6):
            paper.line("mark mark-turns", [(side, y), (side, bottom)], group)


class _Legend:
    """What shapes, lines and marks mean, as rows below the graph; only what is in the picture is explained."""

    def __init__(self, drawn: Chart, kinds: list[Does | None], notes: Sequence[str], left_out: int, lost: bool) -> None:
        self._kinds = [kind for kind in Does if kind in kinds]
        self._lines = [(False, "move")] if any(not one.trip for one in drawn.arrows) else []
        self._lines += [(True, "trip")] if any(one.trip for one in drawn.arrows) else []
        self._taken = any(one.counts for one in drawn.arrows)
        texts = [text for text in notes if text]
        if any(not one.possible for one in drawn.arrows):
            texts.append("A dotted line never begins: the times of the file do not let it.")
        texts += ["A dotted outline is a mode that no run enters."] if lost else []
        if left_out:
            texts.append(f"{counted(left_out, 'mode')} not drawn: only the path, or the start, and what is next to it.")
        texts.append("Times are with the clock's tolerance, rounded outwards to four digits.")
        self._notes = [row for text in texts for row in wrapped(visible(text), 100)]
        self.width = 700.0
        self.height = 34.0 * (1 + (len(self._kinds) > 3)) + 28 + 16.0 * len(self._notes) + _EDGE

    def draw(self, paper: Paper, top: float) -> None:
        """The legend, from this height on."""
        paper.line("guide", [(_EDGE, top), (_EDGE + self.width, top)])
        stripes = f"url(#{paper.name}-short)"
        for index, kind in enumerate(self._kinds):
            x, y = _EDGE + 232 * (index % 3), top + 12 + 34 * (index // 3)
            own = Said(kind, "")
            _shape(paper, paper.group(), own, f"mode {_FORMS[kind]}", (x, y, 40, 22), stripes)
            paper.text(x + 48, y + 15, kind.value, "small")
        y, x = top + 34 * (1 + (len(self._kinds) > 3)) + 16, _EDGE
        for trip, text in self._lines:
            x = self._line(paper, x, y, f"way{' trip' if trip else ''}", "head", text)
        if self._taken:
            self._line(paper, x, y, "way taken", "head-bad", "unsafe path, its steps numbered")
        for index, row in enumerate(self._notes):
            paper.text(_EDGE, y + 28 + 16 * index, row, "small faint")

    def _line(self, paper: Paper, x: float, y: float, kind: str, head: str, text: str) -> float:
        paper.line(kind, [(x, y), (x + 32, y)])
        paper.arrow(head, (x + 42, y), (1.0, 0.0), size=10)
        paper.text(x + 50, y + 4, text, "small")
        return x + 70 + room(text, 11)
