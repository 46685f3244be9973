"""The picture for where there is nothing to draw: it says so, so that no older one is taken for the answer."""

from collections.abc import Sequence
from xml.etree.ElementTree import Element

from seqcheck.reports.drawing.elements import Paper, folded


def picture(title: str, said: Sequence[str]) -> Element:
    """A sheet with a title and some sentences."""
    paper = Paper("none", title, " ".join(said))
    width, height = folded([title, *said], 14) + 48, 56.0 + 18 * len(said)
    paper.box("paper", 0, 0, width, height)
    paper.text(24, 32, title, "large")
    for index, text in enumerate(said):
        paper.text(24, 56 + 18 * index, text)
    return paper.sized(width, height)
