"""Labels set at the ends of bonds so that none lies on another."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from ringstrain.views.drawing.labels import runs_of
from ringstrain.views.drawing.scene import Anchor, Box, Label, Role, Run, crosses, overlap, runs_width

Point = tuple[float, float]

#: How far a bond may be drawn out to find its label a free place [-].
STRETCHES = (1.0, 1.2, 1.45, 1.75, 2.1, 2.5, 3.0, 3.6)
#: Clear space around a label [px].
CLEARANCE = 2.5
#: Clear space between a label and a bond that does not lead to it [px].
LINE_CLEARANCE = 2.0
#: What writing on another label costs, against at most a few hundred for anything else [-].
LABEL_COST = 1000.0
_Form = tuple[bool, tuple[Run, ...], float]


@dataclass(frozen=True, slots=True)
class Written:
    """A label in its place and the end of the bond that leads to it."""

    label: Label
    tip: Point
    middle: Point


@dataclass(slots=True)
class Board:
    """The labels and segments placed so far.

    Attributes
    ----------
    boxes
        Rectangles of labels.
    segments
        Bonds.
    """

    boxes: list[Box] = field(default_factory=list)
    segments: list[tuple[Point, Point]] = field(default_factory=list)

    def cost(self, box: Box, root: Point | None = None, tip: Point | None = None) -> float:
        """How badly a label here would collide: with labels, its bond with labels, bonds with it."""
        total = 0.0
        left, top, right, low = box
        for other in self.boxes:
            # Written out, since most pairs are far apart and this is where drawing spends its time.
            if (
                other[0] < right + CLEARANCE
                and other[2] > left - CLEARANCE
                and other[1] < low + CLEARANCE
                and other[3] > top - CLEARANCE
            ):
                total += LABEL_COST + overlap(box, other, CLEARANCE)
        left, top, right, low = (
            left - LINE_CLEARANCE,
            top - LINE_CLEARANCE,
            right + LINE_CLEARANCE,
            low + LINE_CLEARANCE,
        )
        for segment in self.segments:
            (x0, y0), (x1, y1) = segment
            if (x0 < left and x1 < left) or (x0 > right and x1 > right):
                continue
            if (y0 < top and y1 < top) or (y0 > low and y1 > low):
                continue
            own = root is not None and root in segment
            if crosses(box if own else (left, top, right, low), *segment):
                total += 40.0 if own else 60.0
        if root is not None and tip is not None:
            for other in self.boxes:
                if crosses(other, root, tip):
                    total += 300.0
        return total


def write_group(
    board: Board,
    root: Point,
    way: Point,
    pieces: tuple[str, ...],
    *,
    size: float,
    role: Role,
    bold: bool,
    number: str = "",
    kind: str = "group",
) -> Written:
    """Set a group's label at the end of its bond.

    Parameters
    ----------
    board
        What is placed already; the label and its bond are added.
    root
        Where the bond starts [px].
    way
        Bond vector of usual length [px].
    pieces
        The label.
    size
        [px].
    role, bold
        Look.
    number
        Atom number to add, empty for none.
    kind
        Sort of label.
    """
    turns = (False, True) if way[0] >= -1.0 else (True, False)
    forms = [_form(pieces, turned, number, size) for turned in turns]
    if len(pieces) == 1 and not number:
        forms = [form for form in forms if not form[0]]
    best = _best_place(board, root, way, forms, (size, role, bold, kind))
    if best[0] >= LABEL_COST:
        # Nothing free along the bond: leave its direction a little rather than write on another label.
        turned_ways = [_rotated(way, sign * angle) for angle in (0.25, 0.5, 0.75, 1.0, 1.4, 1.9) for sign in (1, -1)]
        best = min(
            [best, *(_best_place(board, root, w, forms, (size, role, bold, kind)) for w in turned_ways)], key=_cost
        )
    written = best[1]
    board.boxes.append(written.label.box)
    board.segments.append((root, written.tip))
    return written


def _cost(found: tuple[float, Written]) -> float:
    return found[0]


def _rotated(way: Point, angle: float) -> Point:
    c, s = math.cos(angle), math.sin(angle)
    return c * way[0] - s * way[1], s * way[0] + c * way[1]


def _best_place(
    board: Board, root: Point, way: Point, forms: list[_Form], look: tuple[float, Role, bool, str]
) -> tuple[float, Written]:
    """The cheapest place along a direction, near ones first, with its cost."""
    size, role, bold, kind = look
    best: tuple[float, Written] | None = None
    for rank, stretch in enumerate(STRETCHES):
        tip = root[0] + stretch * way[0], root[1] + stretch * way[1]
        for order, (turned, runs, atom_width) in enumerate(forms):
            # The end that the bond points at is held fast, so that another face shifts only the far end.
            x = tip[0] + atom_width / 2 if turned else tip[0] - atom_width / 2
            anchor: Anchor = "end" if turned else "start"
            if len(runs) == 1 and len(runs[0][0]) == 1:
                x, anchor = tip[0], "middle"
            label = Label(x, tip[1] + 0.36 * size, runs, role, size, anchor, bold, kind)
            end = _trimmed(root, tip, atom_width, size)
            cost = board.cost(label.box, root, end) + 9.0 * rank + 5.0 * order
            if best is None or cost < best[0]:
                best = (cost, Written(label, end, tip))
        if best is not None and best[0] < 9.0 * (rank + 1):
            break
    assert best is not None
    return best


def _form(pieces: tuple[str, ...], turned: bool, number: str, size: float) -> _Form:
    """Whether a label reads towards its bond, its runs, and the width of the glyph that the bond points at."""
    runs = runs_of(pieces, turned=turned)
    atom_width = runs_width(runs_of(pieces[:1]), size)
    if turned and pieces[-1] in ("+", "\N{MINUS SIGN}"):
        atom_width += 2 * runs_width(((pieces[-1], "sup"),), size)
    if number:
        runs = ((number, "number"), *runs) if turned else (*runs, (number, "number"))
    return turned, runs, atom_width


def _trimmed(root: Point, tip: Point, wide: float, size: float) -> Point:
    """End of the bond short of the glyph it points at, which is ``wide`` px wide."""
    dx, dy = root[0] - tip[0], root[1] - tip[1]
    length = math.hypot(dx, dy) or 1.0
    across, up = abs(dx) / length, abs(dy) / length
    back = min((0.5 * wide + 3.2) / max(across, 1e-6), 0.64 * size / max(up, 1e-6), 0.7 * length)
    return tip[0] + back * dx / length, tip[1] + back * dy / length


def write_number(board: Board, at: Point, ways: tuple[Point, ...], text: str, size: float) -> Label:
    """Set an atom number near an atom, in the first free one of some directions."""
    best: tuple[float, Label] | None = None
    for rank, (way, reach) in enumerate((way, reach) for reach in (1.0, 1.35, 1.8, 2.4) for way in ways):
        x, y = at[0] + reach * way[0], at[1] + reach * way[1]
        label = Label(x, y + 0.36 * size, ((text, ""),), "muted", size, "middle", False, "number")
        cost = board.cost(label.box) + rank
        if best is None or cost < best[0]:
            best = (cost, label)
        if cost < rank + 1:
            break
    assert best is not None
    board.boxes.append(best[1].box)
    return best[1]
