"""Scenes as text: braille dots for lines where the terminal has them, slashes and bars in ASCII."""

from __future__ import annotations

import math
import textwrap
from collections.abc import Iterator, Sequence

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.views.drawing.panels import caption_lines
from ringstrain.views.drawing.scene import Label, Scene, Shape, Stroke
from ringstrain.views.drawing.states import Wishes, draw_state
from ringstrain.views.look import Look
from ringstrain.views.rich_tables import equilibrium_line

#: px of a scene for one text column, and how much taller than wide a text cell is.
_COLUMN, _ASPECT = 5.0, 2.0
#: Wider drawings than this are harder to read, not easier.
MAX_COLUMNS = 60
_DOTS = ((0x01, 0x08), (0x02, 0x10), (0x04, 0x20), (0x40, 0x80))


def to_text(scene: Scene, look: Look, *, columns: int = 0) -> str:
    """A scene in characters.

    Parameters
    ----------
    scene
        What to draw.
    look
        Width to keep to [columns], and whether to keep to ASCII.
    columns
        How wide to draw [columns]; what suits a ring, at most 60, when 0.

    Returns
    -------
    str
        Lines without trailing blanks, each ended by a newline.
    """
    columns = max(20, min(columns or MAX_COLUMNS, look.width, round(scene.width / _COLUMN)))
    per_column = scene.width / columns
    rows = max(1, round(scene.height / (per_column * _ASPECT)) + 1)
    canvas = _Canvas(columns, rows, per_column, look)
    for item in scene.items:
        # The saw-tooth of a clash is too small for characters; the dotted line stays.
        if isinstance(item, Stroke) and item.role not in ("paper", "rule") and (item.role != "clash" or item.dash):
            canvas.stroke(item)
        elif isinstance(item, Shape) and item.role != "paper":
            canvas.shape(item)
    for item in sorted(scene.labels, key=lambda label: label.kind == "number"):
        canvas.label(item)
    return canvas.text()


def states_text(
    analysis: Analysis, result: SystemResult, states: Sequence[State], look: Look, wishes: Wishes | None = None
) -> str:
    """Drawings of states one below the other with their figures, K, and what the marks mean.

    Parameters
    ----------
    analysis, result
        The answer.
    states
        Which states.
    look
        Width, units, ASCII.
    wishes
        What to show.
    """
    scenes = [draw_state(result, state, wishes) for state in states]
    parts = []
    for state, scene in zip(states, scenes):
        parts.append(_filled("; ".join(caption_lines(state, look)), look) + to_text(scene, look))
    if result.equilibrium is not None:
        parts.append(_filled(equilibrium_line(result, result.equilibrium, analysis.temperature_K, look), look))
    key = ", ".join(_key(scenes, look))
    return "\n".join([*parts, _filled(key, look)] if key else parts)


def _filled(text: str, look: Look) -> str:
    """A sentence in lines of the width, each ended by a newline."""
    return textwrap.fill(look.say(text), look.width, break_long_words=False, break_on_hyphens=False) + "\n"


def _key(scenes: Sequence[Scene], look: Look) -> Iterator[str]:
    """What the marks in some drawings mean."""
    strokes = [item for scene in scenes for item in scene.items if isinstance(item, Stroke)]
    roles = {stroke.role for stroke in strokes}
    if "axial" in roles:
        yield "axial: #" if look.ascii else "axial: double line"
    if "isoclinal" in roles:
        yield "isoclinal: broken line"
    if any(stroke.role == "clash" and stroke.width < 2.0 for stroke in strokes):
        yield "dotted line: group and axial H meet"
    if any(stroke.role == "clash" and stroke.width > 2.0 for stroke in strokes):
        yield "dotted line between groups: they meet"
    if "accent" in roles:
        yield "g: gauche pair"


class _Canvas:
    """A grid of characters with finer dots behind it."""

    def __init__(self, columns: int, rows: int, per_column: float, look: Look) -> None:
        self.columns, self.rows, self.look = columns, rows, look
        self.per_column, self.per_row = per_column, per_column * _ASPECT
        self.dots: dict[tuple[int, int], int] = {}
        self.lines: dict[tuple[int, int], str] = {}
        self.letters: dict[tuple[int, int], str] = {}

    def stroke(self, item: Stroke) -> None:
        """A polyline; thick ones two dots wide, dashed and dotted ones with gaps."""
        for first, second in zip(item.points, item.points[1:]):
            if self.look.ascii:
                self._ascii_line(first, second, item)
            else:
                self._dot_line(first, second, item)

    def shape(self, item: Shape) -> None:
        """The outline of a shape."""
        corners = item.points
        if item.radius is not None:
            (x, y), *_ = item.points
            turns = [2 * math.pi * i / 24 for i in range(24)]
            corners = tuple((x + item.radius * math.cos(t), y + item.radius * math.sin(t)) for t in turns)
        self.stroke(Stroke((*corners, corners[0]), item.role))

    def _dot_line(self, first: tuple[float, float], second: tuple[float, float], item: Stroke) -> None:
        fine_x, fine_y = 2.0 / self.per_column, 4.0 / self.per_row
        x0, y0, x1, y1 = first[0] * fine_x, first[1] * fine_y, second[0] * fine_x, second[1] * fine_y
        steps = max(1, int(max(abs(x1 - x0), abs(y1 - y0)) * 1.5))
        for i in range(steps + 1):
            if item.dash and (i // 2) % 3 == 2:
                continue
            t = i / steps
            x, y = int(x0 + t * (x1 - x0)), int(y0 + t * (y1 - y0))
            self._dot(x, y)
            if item.role == "axial":
                self._dot(x + 1, y) if abs(y1 - y0) > abs(x1 - x0) else self._dot(x, y + 1)

    def _dot(self, x: int, y: int) -> None:
        cell = x // 2, y // 4
        if 0 <= cell[0] < self.columns and 0 <= cell[1] < self.rows:
            self.dots[cell] = self.dots.get(cell, 0) | _DOTS[y % 4][x % 2]

    def _ascii_line(self, first: tuple[float, float], second: tuple[float, float], item: Stroke) -> None:
        """One character for each row of a steep line, for each column of a flat one."""
        ends = sorted((p[0] / self.per_column, p[1] / self.per_row) for p in (first, second))
        (x0, y0), (x1, y1) = ends
        wide, high = x1 - x0, abs(y1 - y0)
        steps = max(1, round(max(wide, high)))
        for i in range(steps):
            if item.dash and i % 2:
                continue
            t = (i + 0.5) / steps
            x, y = x0 + t * wide, y0 + t * (y1 - y0)
            cell = int(x), int(y)
            if not (0 <= cell[0] < self.columns and 0 <= cell[1] < self.rows) or (item.dash and cell in self.lines):
                continue
            if item.dash:
                sign = "." if item.role == "clash" else ":"
            elif high > 2.0 * wide:
                sign = "#" if item.role == "axial" else "|"
            elif high > 0.55 * wide:
                sign = "\\" if y1 > y0 else "/"
            else:
                sign = "'" if y % 1.0 < 0.34 else "-" if y % 1.0 < 0.67 else "_"
            self.lines[cell] = sign

    def label(self, item: Label) -> None:
        """Text in the cells it falls on; an atom number gives way to everything else."""
        words = " ".join(
            part
            for part in ("".join(t for t, s in item.runs if (s == "number") == apart) for apart in self._order(item))
            if part
        )
        text = self.look.say(words)
        x, y = item.x / self.per_column, int((item.y - 0.3 * item.size) / self.per_row)
        start = (
            round(x - 0.3)
            if item.anchor == "start"
            else round(x - len(text))
            if item.anchor == "end"
            else round(x - len(text) / 2)
        )
        start = max(0, min(start, self.columns - len(text)))
        cells = [(start + i, y) for i in range(len(text))]
        if item.kind in ("number", "mark"):
            cells = self._free(cells)
            if not cells:
                return
        if any(cell in self.letters for cell in cells):
            y = next((y + d for d in (1, -1, 2, -2, 3) if all((c, y + d) not in self.letters for c, _ in cells)), y)
            cells = [(c, y) for c, _ in cells]
        for cell, letter in zip(cells, text):
            self.letters[cell] = letter
            self.rows = max(self.rows, cell[1] + 1)

    def _free(self, cells: list[tuple[int, int]]) -> list[tuple[int, int]]:
        """The nearest cells for a small label that touch no other; none when there are none."""
        for dx, dy in ((0, 0), (1, 0), (-1, 0), (2, 0), (-2, 0), (0, 1), (0, -1), (1, 1), (-1, -1)):
            tried = [(x + dx, y + dy) for x, y in cells]
            around = [(tried[0][0] - 1, tried[0][1]), *tried, (tried[-1][0] + 1, tried[-1][1])]
            if not any(cell in self.letters for cell in around):
                return tried
        return []

    @staticmethod
    def _order(item: Label) -> tuple[bool, bool]:
        """Whether the atom number of a label comes first."""
        return (True, False) if item.runs and item.runs[0][1] == "number" else (False, True)

    def text(self) -> str:
        """The grid as lines."""
        out = []
        for row in range(self.rows):
            line = []
            for column in range(self.columns):
                cell = column, row
                if cell in self.letters:
                    line.append(self.letters[cell])
                elif cell in self.lines:
                    line.append(self.lines[cell])
                elif cell in self.dots:
                    line.append(chr(0x2800 + self.dots[cell]))
                else:
                    line.append(" ")
            out.append("".join(line).rstrip())
        while out and not out[-1]:
            out.pop()
        while out and not out[0]:
            out.pop(0)
        return "\n".join(out) + "\n"
