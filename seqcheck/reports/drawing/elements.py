"""The paper that pictures are drawn on: SVG as a tree, so that every text is escaped by construction.

A picture asks nothing of anyone: no script, no font, no file from elsewhere. Its style follows the reader's light or
dark setting, and every colour has a second cue beside it.
"""

from collections.abc import Iterable, Sequence
from unicodedata import east_asian_width
from xml.etree.ElementTree import Element, SubElement, tostring

from seqcheck.reports.drawing.style import STYLE
from seqcheck.reports.pieces import visible

LETTER = 7.3  # the width of one letter of a label at its 12 px, on the safe side of common monospaced fonts
Point = tuple[float, float]


def room(text: str, size: float = 12) -> float:
    """The width that a text takes in the labels' font, in px; wide letters count twice."""
    return sum(2 if east_asian_width(one) in "WF" else 1 for one in visible(text)) * LETTER * size / 12


def number(value: float) -> str:
    """A coordinate, to a tenth of a pixel."""
    return f"{value:.1f}".removesuffix(".0")


class Paper:
    """One picture under way. `name` begins every id in it, so that several can stand on one page."""

    def __init__(self, name: str, title: str, description: str) -> None:
        self.name = name
        self.root = Element("svg", {"class": "sq", "role": "img", "aria-labelledby": f"{name}-t {name}-d"})
        self._text(self.root, "title", title, {"id": f"{name}-t"})
        self._text(self.root, "desc", description, {"id": f"{name}-d"})
        self.body = SubElement(self.root, "g")

    def _text(self, parent: Element, tag: str, text: str, attributes: dict[str, str]) -> Element:
        found = SubElement(parent, tag, attributes)
        found.text = visible(text)
        return found

    def group(self, title: str = "", within: Element | None = None) -> Element:
        """A group of shapes, with a text that a pointer or a screen reader finds."""
        found = SubElement(self.body if within is None else within, "g")
        if title:
            self._text(found, "title", title, {})
        return found

    def put(self, tag: str, kind: str, within: Element | None = None, **attributes: float | str) -> Element:
        """A shape of a class; numbers become coordinates, `_` in a name stands for `-`."""
        said = {
            key.replace("_", "-"): value if isinstance(value, str) else number(value)
            for key, value in attributes.items()
        }
        return SubElement(self.body if within is None else within, tag, {"class": kind, **said})

    def text(self, x: float, y: float, text: str, kind: str = "", within: Element | None = None) -> None:
        """A text on its base line; `kind` has the class words, such as `mid` or `end` for its anchor."""
        parent = self.body if within is None else within
        self._text(parent, "text", text, {"class": kind, "x": number(x), "y": number(y)})

    def line(self, kind: str, points: Iterable[Point], within: Element | None = None) -> None:
        """A line through points; nothing without any."""
        listed = _listed(points)
        if listed:
            self.put("polyline", kind, within, points=listed)

    def area(self, kind: str, points: Iterable[Point], within: Element | None = None) -> None:
        """A closed area."""
        self.put("polygon", kind, within, points=_listed(points))

    def box(self, kind: str, x: float, y: float, width: float, height: float, within: Element | None = None) -> None:
        """A rectangle; one without extent is left out."""
        if width > 0 and height > 0:
            self.put("rect", kind, within, x=x, y=y, width=width, height=height)

    def arrow(self, kind: str, tip: Point, towards: Point, within: Element | None = None, size: float = 8) -> None:
        """An arrow head whose tip points along the direction `towards`, one of the four main ones."""
        (x, y), (dx, dy) = tip, towards
        back, side = (x - dx * size, y - dy * size), size * 0.42
        wings = (back[0] - dy * side, back[1] + dx * side), (back[0] + dy * side, back[1] - dx * side)
        self.area(kind, [tip, *wings], within)

    def hatch(self, kind: str, step: float, lean: int) -> str:
        """A pattern of stripes leaning by so many degrees; what `fill` must say to use it."""
        name = f"{self.name}-{kind}"
        pattern = self.put(
            "pattern", "", id=name, width=step, height=step, patternUnits="userSpaceOnUse",
            patternTransform=f"rotate({lean})",
        )  # fmt: skip
        self.put("rect", f"ground-{kind}", pattern, width=step, height=step)
        self.put("line", f"stripe-{kind}", pattern, x1=0, y1=0, x2=0, y2=step)
        return f"url(#{name})"

    def sized(self, width: float, height: float) -> Element:
        """The finished picture, as a tree that can stand in a page."""
        self.root.set("xmlns", "http://www.w3.org/2000/svg")
        self.root.set("viewBox", f"0 0 {number(width)} {number(height)}")
        self.root.set("width", number(width))
        self.root.set("height", number(height))
        return self.root


def alone(root: Element) -> str:
    """A finished picture as a file of its own, with its style."""
    style = Element("style")
    style.text = STYLE
    root.insert(2, style)
    return tostring(root, encoding="unicode") + "\n"


def _listed(points: Iterable[Point]) -> str:
    return " ".join(f"{number(x)},{number(y)}" for x, y in points)


def folded(texts: Sequence[str], size: float = 12) -> float:
    """The width of the widest of some texts."""
    return max((room(text, size) for text in texts), default=0.0)
