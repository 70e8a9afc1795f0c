"""What a picture is made of: strokes, labels, shapes in pixels, y downwards.  Writers turn it into files."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

Role = Literal[
    "ink", "axial", "equatorial", "isoclinal", "clash", "muted", "accent", "hydrogen", "bar", "paper", "rule"
]
Anchor = Literal["start", "middle", "end"]
Script = Literal["", "sub", "sup", "number"]
Box = tuple[float, float, float, float]
Run = tuple[str, Script]

#: Advance widths of a common sans-serif face [em]; only their sum over a label matters, and it is rounded up.
_NARROW, _WIDE = frozenset("ijlI.,:;'|!()[] ftr1"), frozenset("mMWw@%")


#: Space between a label and the atom number beside it [em].
NUMBER_GAP = 0.28


@dataclass(frozen=True, slots=True)
class Stroke:
    """A polyline.

    Attributes
    ----------
    points
        Corners [px].
    role
        What it stands for; decides the colour.
    width
        [px].
    dash
        Dash pattern, empty when solid.
    casing
        True to clear what lies behind it.
    arrow
        True for a head at the last point.
    """

    points: tuple[tuple[float, float], ...]
    role: Role
    width: float = 1.8
    dash: tuple[float, ...] = ()
    casing: bool = False
    arrow: bool = False


@dataclass(frozen=True, slots=True)
class Label:
    """Text at a point of its baseline.

    Attributes
    ----------
    x, y
        Start, middle or end of the baseline [px].
    runs
        Pieces of text with their script.
    role
        Decides the colour.
    size
        [px].
    anchor
        Which part of the text stands at x.
    bold
        True for bold.
    kind
        What sort of label: a group, an atom, an atom number or a caption.
    """

    x: float
    y: float
    runs: tuple[Run, ...]
    role: Role = "ink"
    size: float = 15.0
    anchor: Anchor = "start"
    bold: bool = False
    kind: str = "caption"

    @property
    def text(self) -> str:
        """The text without its scripts."""
        return "".join(run for run, _ in self.runs)

    @property
    def box(self) -> Box:
        """The rectangle it fills [px]."""
        width = runs_width(self.runs, self.size)
        left = self.x - (0.0 if self.anchor == "start" else width if self.anchor == "end" else width / 2)
        low = 0.24 * self.size if any(script == "sub" for _, script in self.runs) else 0.05 * self.size
        return left, self.y - 0.76 * self.size, left + width, self.y + low


@dataclass(frozen=True, slots=True)
class Shape:
    """A closed outline or a disc.

    Attributes
    ----------
    points
        Corners, or the centre of a disc [px].
    role
        Decides the colour.
    radius
        Of a disc [px]; None for a polygon.
    filled
        False for an outline.
    width
        Of the outline [px].
    """

    points: tuple[tuple[float, float], ...]
    role: Role
    radius: float | None = None
    filled: bool = True
    width: float = 1.4


Item = Stroke | Label | Shape


@dataclass(frozen=True, slots=True, kw_only=True)
class Scene:
    """A picture.

    Attributes
    ----------
    width, height
        [px].
    items
        Back to front.
    title
        What it shows, for readers who do not see it.
    """

    width: float
    height: float
    items: tuple[Item, ...]
    title: str = ""

    @property
    def labels(self) -> tuple[Label, ...]:
        """All text of the picture."""
        return tuple(item for item in self.items if isinstance(item, Label))


def runs_width(runs: Iterable[Run], size: float) -> float:
    """Width of a text [px]."""
    total = 0.0
    for text, script in runs:
        em = 0.0
        for c in text:
            if c in _NARROW:
                em += 0.36 if c not in "1t" else 0.56
            elif c in _WIDE:
                em += 0.9
            elif c.isupper():
                em += 0.76
            else:
                em += 0.58
        total += em * (0.7 if script else 1.0) + (NUMBER_GAP if script == "number" else 0.0)
    return total * size


def moved(item: Item, dx: float, dy: float) -> Item:
    """An item shifted."""
    if isinstance(item, Label):
        return Label(item.x + dx, item.y + dy, item.runs, item.role, item.size, item.anchor, item.bold, item.kind)
    points = tuple((x + dx, y + dy) for x, y in item.points)
    if isinstance(item, Stroke):
        return Stroke(points, item.role, item.width, item.dash, item.casing, item.arrow)
    return Shape(points, item.role, item.radius, item.filled, item.width)


def bounds(items: Iterable[Item]) -> Box:
    """The rectangle that holds all items [px]."""
    boxes: list[Box] = []
    for item in items:
        if isinstance(item, Label):
            boxes.append(item.box)
        else:
            grow = item.radius or 0.0 if isinstance(item, Shape) else item.width / 2
            xs, ys = [p[0] for p in item.points], [p[1] for p in item.points]
            boxes.append((min(xs) - grow, min(ys) - grow, max(xs) + grow, max(ys) + grow))
    if not boxes:
        return 0.0, 0.0, 0.0, 0.0
    return min(b[0] for b in boxes), min(b[1] for b in boxes), max(b[2] for b in boxes), max(b[3] for b in boxes)


def overlap(a: Box, b: Box, gap: float = 0.0) -> float:
    """Area two rectangles share once both are ``gap`` apart [px^2]."""
    wide = min(a[2], b[2]) - max(a[0], b[0]) + gap
    if wide <= 0:
        return 0.0
    high = min(a[3], b[3]) - max(a[1], b[1]) + gap
    return wide * high if high > 0 else 0.0


def crosses(box: Box, start: tuple[float, float], end: tuple[float, float]) -> bool:
    """True when a segment passes through a rectangle."""
    x0, y0 = start
    x1, y1 = end
    left, top, right, low_edge = box
    # Most segments lie wholly on one side.
    if (x0 < left and x1 < left) or (x0 > right and x1 > right):
        return False
    if (y0 < top and y1 < top) or (y0 > low_edge and y1 > low_edge):
        return False
    dx, dy = x1 - x0, y1 - y0
    low, high = 0.0, 1.0
    for origin, step, first, last in ((x0, dx, left, right), (y0, dy, top, low_edge)):
        if abs(step) < 1e-9:
            continue
        t0, t1 = (first - origin) / step, (last - origin) / step
        if t0 > t1:
            t0, t1 = t1, t0
        low, high = max(low, t0), min(high, t1)
        if low > high:
            return False
    return True
