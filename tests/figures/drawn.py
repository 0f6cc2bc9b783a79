"""A drawn SVG read back: its words, the boxes they fill, and the arrows' shafts."""

from __future__ import annotations

import re
from dataclasses import dataclass
from xml.etree import ElementTree as ET

from calcbook.figures.sketch import text_width

SVG = "{http://www.w3.org/2000/svg}"
POINT = 25.4 / 72.0
CLEAR = 0.05


@dataclass(frozen=True)
class Box:
    """The room a line of words takes, mm, y downward as in the SVG."""

    words: str
    left: float
    right: float
    top: float
    bottom: float

    def meets(self, other: Box) -> bool:
        """Tell whether two lines of words lie on each other."""
        across = min(self.right, other.right) - max(self.left, other.left)
        down = min(self.bottom, other.bottom) - max(self.top, other.top)
        return across > CLEAR and down > CLEAR


@dataclass(frozen=True)
class Shaft:
    """An arrow's shaft from tail to head, mm, y downward."""

    tail: tuple[float, float]
    head: tuple[float, float]

    @property
    def along(self) -> tuple[float, float]:
        """The way it points."""
        return self.head[0] - self.tail[0], self.head[1] - self.tail[1]


def tree(svg: bytes) -> ET.Element:
    """Return the drawing as a tree; it is our own file, so there is nothing to distrust."""
    return ET.fromstring(svg)  # noqa: S314


def words(svg: bytes) -> list[str]:
    """Return every line of words."""
    return [node.text or "" for node in tree(svg).iter(f"{SVG}text")]


def boxes(svg: bytes) -> list[Box]:
    """Return the room every line of words takes."""
    return [_box(node) for node in tree(svg).iter(f"{SVG}text")]


def size(svg: bytes) -> tuple[float, float]:
    """Return width and height of the sheet, mm."""
    _, _, width, height = tree(svg).attrib["viewBox"].split()
    return float(width) * POINT, float(height) * POINT


def named(svg: bytes) -> list[str]:
    """Return the names given to parts of the drawing."""
    return [node.attrib["id"] for node in tree(svg).iter(f"{SVG}g") if "id" in node.attrib]


def shafts(svg: bytes) -> dict[str, Shaft]:
    """Return every arrow's shaft under its name."""
    found = {}
    for node in tree(svg).iter(f"{SVG}g"):
        name, path = node.attrib.get("id", ""), node.find(f"{SVG}path")
        if path is not None and re.search("-(toward|away)$", name) and "side" not in name:
            found[name] = Shaft(*_points(path))
    return found


def outline(svg: bytes, name: str) -> list[tuple[float, float]]:
    """Return the points of a named line, mm, y downward."""
    group = next(node for node in tree(svg).iter(f"{SVG}g") if node.attrib.get("id") == name)
    return _points(group[0])


def overlaps(svg: bytes) -> list[tuple[str, str]]:
    """Return the pairs of lines of words that lie on each other."""
    found = boxes(svg)
    return [
        (one.words, other.words)
        for place, one in enumerate(found)
        for other in found[place + 1 :]
        if one.meets(other)
    ]


def outside(svg: bytes) -> list[str]:
    """Return the lines of words that leave the sheet."""
    width, height = size(svg)
    return [
        box.words
        for box in boxes(svg)
        if box.left < 0.0 or box.right > width or box.top < 0.0 or box.bottom > height
    ]


def _box(node: ET.Element) -> Box:
    x, y = float(node.attrib["x"]) * POINT, float(node.attrib["y"]) * POINT
    style = node.attrib["style"]
    wide = text_width(node.text or "", bold="bold" in style)
    anchor = re.search(r"text-anchor: (\w+)", style)
    share = {"start": 0.0, "middle": 0.5, "end": 1.0}[anchor.group(1) if anchor else "start"]
    tall = 8.0 * POINT
    left = x - share * wide
    return Box(node.text or "", left, left + wide, y - 0.73 * tall, y + 0.2 * tall)


def _points(path: ET.Element) -> list[tuple[float, float]]:
    numbers = [float(part) * POINT for part in re.findall(r"-?[\d.]+", path.attrib["d"])]
    return list(zip(numbers[::2], numbers[1::2], strict=True))
