"""Marks between groups, and lines beside lines."""

from __future__ import annotations

import math

from ringstrain.views.drawing.scene import Item, Stroke
from ringstrain.views.drawing.writing import Point, Written

#: Dash patterns that carry a meaning [px].
ISOCLINAL_DASH = (6.0, 3.0)
CLASH_DASH = (1.5, 3.0)


def inside(start: Point, end: Point, middle: Point) -> tuple[Point, Point]:
    """The second line of a double bond, on the side of the ring and a little shorter."""
    dx, dy = end[0] - start[0], end[1] - start[1]
    length = math.hypot(dx, dy) or 1.0
    normal = -dy / length, dx / length
    side = 1.0 if (middle[0] - start[0]) * normal[0] + (middle[1] - start[1]) * normal[1] > 0 else -1.0
    shift = 4.6 * side
    return (
        (start[0] + shift * normal[0] + 0.1 * dx, start[1] + shift * normal[1] + 0.1 * dy),
        (end[0] + shift * normal[0] - 0.1 * dx, end[1] + shift * normal[1] - 0.1 * dy),
    )


def shifted(start: Point, end: Point, by: float) -> tuple[Point, Point]:
    """A line moved sideways by so many px."""
    dx, dy = end[0] - start[0], end[1] - start[1]
    length = math.hypot(dx, dy) or 1.0
    x, y = -by * dy / length, by * dx / length
    return (start[0] + x, start[1] + y), (end[0] + x, end[1] + y)


def shortened(a: Point, b: Point, by: float) -> tuple[Point, Point]:
    """A line cut back at both ends by so many px."""
    dx, dy = b[0] - a[0], b[1] - a[1]
    length = math.hypot(dx, dy) or 1.0
    by = min(by, 0.35 * length)
    return (a[0] + by * dx / length, a[1] + by * dy / length), (b[0] - by * dx / length, b[1] - by * dy / length)


def bow(a: Point, b: Point, depth: float) -> tuple[Point, ...]:
    """A flat arc between two points."""
    dx, dy = b[0] - a[0], b[1] - a[1]
    points = []
    for i in range(9):
        t = i / 8.0
        lift = 4.0 * depth * t * (1.0 - t)
        points.append((a[0] + t * dx + lift * dy, a[1] + t * dy - lift * dx))
    return tuple(points)


def clash(first: Written | Point, last: Written | Point, *, strong: bool) -> list[Item]:
    """A dotted line between two partners that meet; two heavy groups also get a saw-tooth across its middle."""
    a, b = (_middle_of(end) for end in (first, last))
    a, b = _edge(a, b, first), _edge(b, a, last)
    items: list[Item] = [Stroke((a, b), "clash", 2.2 if strong else 1.5, CLASH_DASH)]
    if strong:
        x, y = (a[0] + b[0]) / 2, (a[1] + b[1]) / 2
        items.append(Stroke(((x - 4, y + 6), (x + 2.5, y + 1), (x - 2.5, y - 1), (x + 4, y - 6)), "clash", 2.2))
    return items


def _middle_of(end: Written | Point) -> Point:
    if isinstance(end, Written):
        box = end.label.box
        return (box[0] + box[2]) / 2, (box[1] + box[3]) / 2
    return end


def _edge(a: Point, b: Point, end: Written | Point) -> Point:
    """Where the line from a to b leaves the label at a."""
    if not isinstance(end, Written):
        return shortened(a, b, 4.0)[0]
    box = end.label.box
    dx, dy = b[0] - a[0], b[1] - a[1]
    reach = 1.0
    if dx:
        reach = min(reach, ((box[2] - box[0]) / 2 + 2.0) / abs(dx))
    if dy:
        reach = min(reach, ((box[3] - box[1]) / 2 + 2.0) / abs(dy))
    reach = min(reach, 0.45)
    return a[0] + reach * dx, a[1] + reach * dy
