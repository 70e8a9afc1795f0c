"""The conventional view of a chair: one linear map, so that what is parallel in space is parallel on paper.

The level plane is seen from the front and a little above.  The vertical of the reference ring stays vertical; the
slant makes the long ring bonds rise and fall equally.  A ring whose right-hand tip points up is seen through the
mirror image of the map, which is how chemists draw the flipped chair.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from ringstrain.views.drawing.placing import Model
from ringstrain.views.drawing.space import Vector

if TYPE_CHECKING:
    from ringstrain.states import Shapes
    from ringstrain.structure.records import Structure

Point = tuple[float, float]

#: Turn about the vertical, height of the eye and slant of the view; matters of looks only.
TURN, EYE, SLANT = math.radians(17.0), math.radians(21.0), 0.075
#: A half-chair is flatter and is looked at from higher up.
HALF_CHAIR_EYE = math.radians(31.0)


@dataclass(frozen=True, slots=True)
class View:
    """From where a model is looked at.

    Attributes
    ----------
    steps
        Sixths of a turn about the vertical.
    over
        True to look at the other face.
    mirrored
        True for the mirror image of the map (right-hand tip up).
    eye
        Height of the eye above the level plane [rad].
    """

    steps: int
    over: bool
    mirrored: bool = False
    eye: float = EYE

    def project(self, point: Vector) -> tuple[float, float, float]:
        """Right, up and towards the eye [bond lengths]."""
        x, y, z = point
        if self.over:
            y, z = -y, -z
        angle = math.radians(60.0 * self.steps) + (TURN if self.mirrored else -TURN)
        c, s = math.cos(angle), math.sin(angle)
        right, back = c * x - s * y, s * x + c * y
        slant = -SLANT if self.mirrored else SLANT
        return (
            right,
            z * math.cos(self.eye) + back * math.sin(self.eye) - slant * right,
            -back * math.cos(self.eye) + z * math.sin(self.eye),
        )

    def place_at(self, position: int) -> int:
        """Place of the reference ring that stands at sixth ``position`` (0 right tip, 1 back right, anticlockwise)."""
        return (self.steps - position) % 6 if self.over else (position - self.steps) % 6


def settle(shapes: Shapes, model: Model, steps: int, over: bool) -> View:
    """The view of one state: its map chosen by which way the right-hand tip of the reference ring points.

    A lone boat or twist-boat is turned to where its bonds lie clearest.
    """
    ring = shapes.rings[model.reference]
    plain = View(steps, over)
    if ring.shape == "chair":
        return View(steps, over, (ring.torsions[plain.place_at(0)] > 0) != over)
    if ring.shape == "half-chair":
        flat = shapes.geometry.system.rings[model.reference].flat_bond or 0
        return View(steps, over, (ring.torsions[(flat + 3) % 6] > 0) == over, HALF_CHAIR_EYE)
    if len(shapes.rings) > 1:
        return plain
    views = [View((steps + turn) % 6, over, mirrored) for turn in (0, 1, 5, 2, 4, 3) for mirrored in (False, True)]
    return max(views, key=lambda view: round(_openness(model, view), 3))


def _openness(model: Model, view: View) -> float:
    """Smallest distance between a ring atom and any bond it is not part of, and the smallest bond."""
    ring = [view.project(p)[:2] for p in model.positions.values()]
    worst = 9.0
    for i, a in enumerate(ring):
        b = ring[(i + 1) % len(ring)]
        dx, dy = b[0] - a[0], b[1] - a[1]
        square = dx * dx + dy * dy
        worst = min(worst, math.sqrt(square))
        for j, p in enumerate(ring):
            if j in (i, (i + 1) % len(ring)):
                continue
            t = max(0.0, min(1.0, ((p[0] - a[0]) * dx + (p[1] - a[1]) * dy) / (square or 1.0)))
            worst = min(worst, math.hypot(p[0] - a[0] - t * dx, p[1] - a[1] - t * dy))
    return worst


def choose_view(shapes: Shapes, model: Model) -> tuple[int, bool]:
    """Sixths of a turn and side from which a system is drawn, the same for all its states.

    A lone ring: atoms numbered clockwise; the oxygen of an oxane at the back right with its anomeric carbon at the
    right tip; else the first substituted atom at the right tip, an exocyclic double bond before others; a flat bond at
    the front.  Several rings: as wide and clear as possible, axial groups up rather than down, the first at the left.
    """
    system = shapes.geometry.system
    if len(system.rings) == 1 and not model.side_rings:
        return _lone(shapes, shapes.geometry.structure)
    best: tuple[float, int, bool] | None = None
    for over in (False, True):
        for steps in range(6):
            view = settle(shapes, model, steps, over)
            score = _clarity(model, view, system.rings[0].atoms)
            if best is None or score > best[0] + 1e-6:
                best = (score, steps, over)
    assert best is not None
    return best[1], best[2]


def _lone(shapes: Shapes, structure: Structure) -> tuple[int, bool]:
    """View of a single ring by the conventions of its numbering."""
    ring = shapes.geometry.system.rings[0]
    atoms = ring.atoms
    start = atoms.index(min(atoms))
    forward = atoms[(start + 1) % 6] < atoms[start - 1]
    oxygens = [i for i, a in enumerate(atoms) if structure.atoms[a].number == 8]
    if ring.flat_bond is not None:
        # The flat bond runs along the front, its lower atom first in the numbering.
        place = (ring.flat_bond + 1) % 6 if forward else ring.flat_bond
        return _steps_for(place, 4, forward), forward
    if len(oxygens) == 1:
        o = oxygens[0]
        anomeric = [
            i
            for i in ((o + 1) % 6, (o - 1) % 6)
            if any(n not in atoms and structure.atoms[n].number in (7, 8, 16) for n in structure.neighbours[atoms[i]])
        ]
        if len(anomeric) == 1:
            forward = anomeric[0] == (o + 1) % 6
        return _steps_for(o, 1, forward), forward
    # An exocyclic double bond reads best at a tip: elsewhere it points at the reader or into the ring.
    doubles = [
        a for a in sorted(atoms) if any(_is_double(structure, a, n) for n in structure.neighbours[a] if n not in atoms)
    ]
    if doubles:
        return _steps_for(atoms.index(doubles[0]), 0, forward), forward
    bearing = [
        a
        for a in sorted(atoms)
        if any(n not in atoms and structure.atoms[n].number != 1 for n in structure.neighbours[a])
    ]
    return _steps_for(atoms.index(bearing[0]) if bearing else start, 0, forward), forward


def _is_double(structure: Structure, a: int, n: int) -> bool:
    return structure.bond(a, n).order == 2 and structure.atoms[a].number == 6


def _steps_for(place: int, position: int, over: bool) -> int:
    """Turn that brings a place of the ring to a sixth of the picture; clockwise numbering means the far face."""
    return (position + place) % 6 if over else (position - place) % 6


def _clarity(model: Model, view: View, first_ring: Sequence[int]) -> float:
    """How well a view of several rings reads."""
    flat = {atom: view.project(point) for atom, point in model.positions.items()}
    points = list(flat.values())
    width = max(p[0] for p in points) - min(p[0] for p in points)
    height = max(p[1] for p in points) - min(p[1] for p in points)
    crowding = 0.0
    for i, a in enumerate(points):
        for b in points[:i]:
            gap = (a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2
            if gap < 0.16:
                crowding += 0.4 - math.sqrt(gap)
    rise = 0.0
    for arm in model.arms:
        if arm.neighbour >= 0:
            root = view.project(model.positions[arm.root])
            tip = view.project(
                (
                    model.positions[arm.root][0] + arm.direction[0],
                    model.positions[arm.root][1] + arm.direction[1],
                    model.positions[arm.root][2] + arm.direction[2],
                )
            )
            rise += tip[1] - root[1]
            for p in points:
                gap = (tip[0] - p[0]) ** 2 + (tip[1] - p[1]) ** 2
                if gap < 0.12:
                    crowding += 0.35 - math.sqrt(gap)
    middle = sum(p[0] for p in points) / len(points)
    left = middle - sum(flat[a][0] for a in first_ring) / 6.0
    return width - 0.6 * height - 3.0 * crowding + 0.25 * rise + 0.1 * left
