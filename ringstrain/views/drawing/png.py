"""Scenes as PNG, drawn with RDKit's cairo canvas, so that no further library is needed."""

from __future__ import annotations

from itertools import pairwise
from typing import Any

from ringstrain.errors import OutOfScope
from ringstrain.views.drawing.palette import COLOURS
from ringstrain.views.drawing.scene import Label, Scene, Shape, Stroke, runs_width
from ringstrain.views.drawing.svg import arrow_head, cleared
from ringstrain.views.look import Look

#: Bigger pictures than this are refused [px].
MAX_PIXELS = 60_000_000


def to_png(scene: Scene, *, scale: float = 2.0) -> bytes:
    """A scene as a PNG image on white.

    Parameters
    ----------
    scene
        What to draw.
    scale
        Pixels for each px of the scene [-].

    Raises
    ------
    OutOfScope
        If the picture would be too large.
    """
    from rdkit.Chem.Draw import rdMolDraw2D

    width, height = int(scene.width * scale + 0.5), int(scene.height * scale + 0.5)
    if width * height > MAX_PIXELS:
        raise OutOfScope(f"The picture would have {width} by {height} pixels.", "Draw fewer states, or write SVG.")
    canvas = rdMolDraw2D.MolDraw2DCairo(width, height)
    options = canvas.drawOptions()
    options.setBackgroundColour((1.0, 1.0, 1.0))
    options.fixedFontSize = -1
    options.minFontSize, options.maxFontSize = -1, -1
    canvas.ClearDrawing()
    painter = _Painter(canvas, scale)
    for item in scene.items:
        if isinstance(item, Stroke):
            painter.stroke(item)
        elif isinstance(item, Shape):
            painter.shape(item)
        else:
            painter.label(item)
    canvas.FinishDrawing()
    return bytes(canvas.GetDrawingText())


def _colour(role: str) -> tuple[float, float, float]:
    text = COLOURS[role][0]
    return int(text[1:3], 16) / 255, int(text[3:5], 16) / 255, int(text[5:7], 16) / 255


class _Painter:
    """RDKit's canvas with our primitives."""

    def __init__(self, canvas: Any, scale: float) -> None:
        from rdkit.Geometry import Point2D

        self.canvas, self.scale, self.Point = canvas, scale, Point2D

    def _at(self, x: float, y: float) -> Any:
        return self.Point(x * self.scale, y * self.scale)

    def _line(self, points: tuple[tuple[float, float], ...], role: str, width: float) -> None:
        self.canvas.SetColour(_colour(role))
        self.canvas.SetLineWidth(max(1, round(width * self.scale)))
        for first, second in pairwise(points):
            self.canvas.DrawLine(self._at(*first), self._at(*second), True)

    def stroke(self, item: Stroke) -> None:
        """A polyline, its surroundings cleared first."""
        if item.casing:
            self._line(cleared(item), "paper", item.width + 5)
        for piece in _dashed(item.points, item.dash) if item.dash else (item.points,):
            self._line(piece, item.role, item.width)
        if not item.dash and item.width > 2.4:
            # Round joins and ends.
            for x, y in item.points:
                self._disc(x, y, item.width / 2, item.role)
        if item.arrow:
            self._fill(arrow_head(item), item.role)

    def _disc(self, x: float, y: float, radius: float, role: str, *, filled: bool = True, width: float = 1.0) -> None:
        self.canvas.SetColour(_colour(role))
        self.canvas.SetFillPolys(filled)
        self.canvas.SetLineWidth(max(1, round(width * self.scale)) if not filled else 1)
        self.canvas.DrawArc(self._at(x, y), radius * self.scale, 0.0, 360.0, True)

    def _fill(self, points: tuple[tuple[float, float], ...], role: str, *, filled: bool = True) -> None:
        self.canvas.SetColour(_colour(role))
        self.canvas.SetFillPolys(filled)
        self.canvas.DrawPolygon([self._at(*p) for p in points], True)

    def shape(self, item: Shape) -> None:
        """A disc or polygon."""
        if item.radius is not None:
            (x, y), *_ = item.points
            if not item.filled:
                self._disc(x, y, item.radius, "paper")
            self._disc(x, y, item.radius, item.role, filled=item.filled, width=item.width)
        elif item.filled:
            self._fill(item.points, item.role)
        else:
            self._line((*item.points, item.points[0]), item.role, item.width)

    def label(self, item: Label) -> None:
        """Text, its scripts as RDKit writes them; an atom number stands apart."""
        runs = [run for run in item.runs if run[1] != "number"]
        text = "".join(_marked(text, script) for text, script in runs)
        box = item.box
        if item.kind != "caption":
            # Small numbers stand close to bonds, so that only their middle is cleared.
            dx, dy = (0.25 * (box[2] - box[0]), 0.25 * (box[3] - box[1])) if item.kind == "number" else (0.0, 0.0)
            left, top, right, low = box[0] + dx, box[1] + dy, box[2] - dx, box[3] - dy
            corners = ((left, top), (right, top), (right, low), (left, low))
            self._fill(corners, "paper")
        align, x = {"start": (1, box[0]), "end": (2, box[2])}.get(item.anchor, (0, (box[0] + box[2]) / 2))
        for place, (number, script) in enumerate(item.runs):
            if script == "number":
                wide = runs_width(((number, script),), item.size)
                at = box[0] if place == 0 else box[2] - wide
                self._text(number, at + wide / 2, item.y - 0.25 * item.size, 0.7 * item.size, "muted", 0, bold=False)
                if item.anchor == "start" and place == 0:
                    x += wide
                if item.anchor == "end" and place > 0:
                    x -= wide
        self._text(text, x, item.y - 0.36 * item.size, item.size, item.role, align, bold=item.bold)

    def _text(self, text: str, x: float, y: float, size: float, role: str, align: int, *, bold: bool) -> None:
        if not text.strip():
            return
        self.canvas.SetColour(_colour(role))
        self.canvas.SetFontSize(size * self.scale)
        for shift in (-0.25, 0.25) if bold else (0.0,):
            self.canvas.DrawString(text, self._at(x + shift, y), align, True)


def _marked(text: str, script: str) -> str:
    """Text in RDKit's notation; it knows ASCII only and takes angle brackets for tags."""
    plain = Look(ascii=True).say(text).replace("<", "(").replace(">", ")")
    return f"<{script}>{plain}</{script}>" if script else plain


def _dashed(points: tuple[tuple[float, float], ...], dash: tuple[float, ...]) -> list[tuple[tuple[float, float], ...]]:
    """A polyline cut into its dashes."""
    pieces: list[tuple[tuple[float, float], ...]] = []
    number, left, pen = 0, dash[0], True
    current: list[tuple[float, float]] = [points[0]]
    for (x0, y0), (x1, y1) in pairwise(points):
        length = ((x1 - x0) ** 2 + (y1 - y0) ** 2) ** 0.5
        done = 0.0
        while length - done > left:
            done += left
            t = done / length
            here = (x0 + t * (x1 - x0), y0 + t * (y1 - y0))
            if pen:
                pieces.append((*current, here))
            current = [here]
            pen = not pen
            number = (number + 1) % len(dash)
            left = dash[number]
        left -= length - done
        if pen:
            current.append((x1, y1))
        else:
            current = [(x1, y1)]
    if pen and len(current) > 1:
        pieces.append(tuple(current))
    return pieces
