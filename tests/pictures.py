"""Shared by the tests of pictures: SVG read back, and what any picture must hold."""

import re
from xml.etree import ElementTree

SPACE = "{http://www.w3.org/2000/svg}"
Box = tuple[float, float, float, float]


def root_of(text: str) -> ElementTree.Element:
    """The root of a picture that keeps the house rules."""
    root = ElementTree.fromstring(text)
    assert root.tag == f"{SPACE}svg"
    assert not re.search(r"<script|<a |href|@import|<image|<foreignObject|\son[a-z]+=", text)
    outside = text.replace('xmlns="http://www.w3.org/2000/svg"', "", 1)
    assert "://" not in outside
    assert all(one.startswith("#") for one in re.findall(r"url\(([^)]*)\)", text))
    title, description = root.find(f"{SPACE}title"), root.find(f"{SPACE}desc")
    assert title is not None
    assert description is not None
    assert title.text
    assert description.text
    assert root.get("aria-labelledby") == f"{title.get('id')} {description.get('id')}"
    ids = [one.get("id") for one in root.iter() if one.get("id")]
    assert len(ids) == len(set(ids))
    return root


def texts(root: ElementTree.Element, kind: str = "") -> list[str]:
    """All texts that are seen, those of a class if one is named, in their order."""
    found = root.iter(f"{SPACE}text")
    return [one.text or "" for one in found if not kind or kind in (one.get("class") or "").split()]


def boxes(root: ElementTree.Element) -> list[tuple[Box, str]]:
    """The room of every text, with the text; letters of 12 px take at least 7 px."""
    found = []
    for one in root.iter(f"{SPACE}text"):
        kinds, text = (one.get("class") or "").split(), one.text or ""
        size = 14 if "large" in kinds else 11 if kinds and {"small", "inverse"} & set(kinds) else 12
        width = len(text) * 7 * size / 12
        x, y = float(one.get("x", "0")), float(one.get("y", "0"))
        left = x - width / 2 if "mid" in kinds else x - width if "end" in kinds else x
        found.append(((left, y - size * 0.75, left + width, y + size * 0.2), text))
    return found


def apart(one: Box, other: Box) -> bool:
    """Whether two boxes have no point in common."""
    return one[2] <= other[0] or other[2] <= one[0] or one[3] <= other[1] or other[3] <= one[1]


def inside(root: ElementTree.Element, box: Box) -> bool:
    """Whether a box lies on the sheet."""
    width, height = float(root.get("width", "0")), float(root.get("height", "0"))
    return box[0] >= 0 and box[1] >= 0 and box[2] <= width and box[3] <= height
