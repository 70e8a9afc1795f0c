"""Ideal positions for a whole ring system in one state, for projection only: nothing is measured on them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field

from ringstrain.geometry import Geometry
from ringstrain.states import Shapes
from ringstrain.views.drawing.space import (
    Vector,
    add,
    axis_of,
    carried,
    dot,
    fit,
    minus,
    outward,
    ring_points,
    site_direction,
    times,
    unit,
)

#: Rings joined by more than this many atoms beyond the system are not followed.
_MAX_SIDE_RINGS = 8


@dataclass(frozen=True, slots=True)
class Arm:
    """An exocyclic site in space.

    Attributes
    ----------
    root
        Ring atom.
    neighbour
        Atom on the site, negative for a hydrogen or lone pair.
    direction
        Unit vector.
    """

    root: int
    neighbour: int
    direction: Vector


@dataclass(frozen=True, slots=True)
class Model:
    """A ring system in space.

    Attributes
    ----------
    positions
        Position of each drawn ring atom [bond lengths].
    side_rings
        Rings of other kinds that share atoms with the system and are drawn with it.
    arms
        What stands on the ring atoms, drawn rings left out.
    reference
        Number of the six-membered ring the view is chosen for.
    """

    positions: dict[int, Vector]
    side_rings: tuple[tuple[int, ...], ...]
    arms: tuple[Arm, ...]
    reference: int


def place(shapes: Shapes, reference: int | None = None) -> Model:
    """Positions of a state.

    Parameters
    ----------
    shapes
        Torsions of every ring.
    reference
        Ring whose mean plane lies level; the one whose axis most rings share when None.
    """
    builder = _Builder(shapes)
    if reference is None:
        builder.build(0)
        if len(shapes.rings) > 1:
            reference = builder.commonest_axis()
            if reference:
                builder = _Builder(shapes)
                builder.build(reference)
    else:
        builder.build(reference)
    side = builder.add_side_rings()
    return Model(builder.positions, side, builder.arms(), reference or 0)


@dataclass(slots=True)
class _Builder:
    shapes: Shapes
    positions: dict[int, Vector] = field(default_factory=dict)
    expected: dict[int, Vector] = field(default_factory=dict)
    near: dict[int, list[int]] = field(default_factory=dict)

    @property
    def geometry(self) -> Geometry:
        return self.shapes.geometry

    def build(self, first: int) -> None:
        """Place every six-membered ring, the best known one next."""
        rings = self.geometry.system.rings
        for ring in rings:
            self._join(ring.atoms)
        self._take(first, ring_points(self.shapes.rings[first].torsions))
        left = [number for number in range(len(rings)) if number != first]
        while left:
            number = max(
                left, key=lambda n: (sum(2 * (a in self.positions) + (a in self.expected) for a in rings[n].atoms), -n)
            )
            left.remove(number)
            template = ring_points(self.shapes.rings[number].torsions)
            atoms = rings[number].atoms
            known = [i for i, atom in enumerate(atoms) if atom in self.positions or atom in self.expected]
            goal = [self.positions.get(atoms[i]) or self.expected[atoms[i]] for i in known]
            weights = [5.0 if atoms[i] in self.positions else 1.0 for i in known]
            self._take(number, carried(template, fit([template[i] for i in known], goal, weights)))

    def _join(self, ring: Sequence[int]) -> None:
        for i, atom in enumerate(ring):
            around = self.near.setdefault(atom, [])
            around.extend(n for n in (ring[i - 1], ring[(i + 1) % len(ring)]) if n not in around)

    def _take(self, number: int, points: Sequence[Vector]) -> None:
        """Accept the points of a ring and note where they put its outside neighbours."""
        atoms = self.geometry.system.rings[number].atoms
        for atom, point in zip(atoms, points):
            self.positions.setdefault(atom, point)
        for place in range(6):
            here = self.positions[atoms[place]]
            for site in self.geometry.sites[number][place]:
                if site.neighbour >= 0 and site.neighbour not in self.positions:
                    way = site_direction(
                        here, self.positions[atoms[place - 1]], self.positions[atoms[(place + 1) % 6]], site.face
                    )
                    self.expected.setdefault(site.neighbour, add(here, way))

    def commonest_axis(self) -> int:
        """The ring whose axis most rings share; chairs before other shapes."""
        rings = self.geometry.system.rings
        axes = [axis_of([self.positions[a] for a in ring.atoms]) for ring in rings]
        votes = [
            (sum(abs(dot(axis, other)) > 0.9 for other in axes), self.shapes.rings[i].shape == "chair", -i)
            for i, axis in enumerate(axes)
        ]
        return -max(votes)[2]

    # ---- rings of other sizes, and aromatic ones ----

    def add_side_rings(self) -> tuple[tuple[int, ...], ...]:
        """Place rings of the molecule that share atoms with what is drawn."""
        system = self.geometry.system
        sixes = {frozenset(ring.atoms) for ring in system.rings}
        waiting = [tuple(int(a) for a in ring) for ring in self.geometry.structure.rings]
        waiting = [ring for ring in waiting if frozenset(ring) not in sixes]
        drawn: list[tuple[int, ...]] = []
        while len(drawn) < _MAX_SIDE_RINGS:
            ring = max(waiting, key=lambda r: sum(a in self.positions for a in r), default=None)
            if ring is None or not any(a in self.positions for a in ring):
                break
            waiting.remove(ring)
            self._join(ring)
            self._place_side_ring(ring)
            drawn.append(ring)
        return tuple(drawn)

    def _place_side_ring(self, ring: tuple[int, ...]) -> None:
        """A flat polygon through the known atoms, then eased until its bonds are even."""
        size = len(ring)
        known = [i for i, atom in enumerate(ring) if atom in self.positions]
        if len(known) == size:
            return
        for i in range(size):
            # Shared atoms that only a neighbour on the far side leads to have no expected place yet.
            atom = ring[i]
            if atom not in self.positions and atom not in self.expected:
                for n in (ring[i - 1], ring[(i + 1) % size]):
                    if n in self.positions:
                        around = [self.positions[m] for m in self.near[n] if m in self.positions]
                        if len(around) >= 2:
                            self.expected[atom] = add(self.positions[n], outward(self.positions[n], around))
        goal_places = [i for i, atom in enumerate(ring) if atom in self.positions or atom in self.expected]
        radius = 0.5 / math.sin(math.pi / size)
        polygon: list[Vector] = [
            (radius * math.cos(2 * math.pi * i / size), radius * math.sin(2 * math.pi * i / size), 0.0)
            for i in range(size)
        ]
        goal = [self.positions.get(ring[i]) or self.expected[ring[i]] for i in goal_places]
        weights = [5.0 if ring[i] in self.positions else 1.0 for i in goal_places]
        points = list(carried(polygon, fit([polygon[i] for i in goal_places], goal, weights)))
        free = [i for i in range(size) if ring[i] not in self.positions]
        flat = all(self.geometry.structure.atoms[a].aromatic for a in ring)
        for i in range(size):
            if i not in free:
                points[i] = self.positions[ring[i]]
            elif not flat and ring[i] in self.expected:
                points[i] = self.expected[ring[i]]
        span = 2 * radius * math.sin(2 * math.pi / size)
        _ease(points, free, span, rounds=60 if size > 3 else 30)
        for i in free:
            self.positions[ring[i]] = points[i]

    def arms(self) -> tuple[Arm, ...]:
        """Sites that are not part of a drawn ring."""
        found = []
        system, structure = self.geometry.system, self.geometry.structure
        seen: set[int] = set()
        for number, ring in enumerate(system.rings):
            for place, atom in enumerate(ring.atoms):
                if atom in seen:
                    continue
                seen.add(atom)
                sites = [s for s in self.geometry.sites[number][place] if s.neighbour not in self.near[atom]]
                around = [self.positions[n] for n in self.near[atom]]
                for site in sites:
                    if len(around) > 2:
                        way = outward(self.positions[atom], around)
                    elif not site.face:
                        way = self._level(number, place, outward(self.positions[atom], around))
                    else:
                        way = site_direction(
                            self.positions[atom],
                            self.positions[ring.atoms[place - 1]],
                            self.positions[ring.atoms[(place + 1) % 6]],
                            site.face,
                        )
                    found.append(Arm(atom, int(site.neighbour), way))
        for atom in sorted(self.positions):
            if atom not in seen:
                outer = [int(n) for n in structure.neighbours[atom] if n not in self.positions]
                found.extend(self._side_arms(atom, outer))
        return tuple(found)

    def _level(self, number: int, place: int, way: Vector) -> Vector:
        """Direction of a group on a planar atom of a chair, brought nearer to the mean plane as it is drawn."""
        ring = self.geometry.system.rings[number]
        if ring.flat_bond is not None:
            return way
        axis = axis_of([self.positions[a] for a in ring.atoms])
        return unit(minus(way, times(0.8 * dot(way, axis), axis)))

    def _side_arms(self, atom: int, outer: list[int]) -> list[Arm]:
        """Groups on an atom of a side ring; the face follows its configuration where one is given."""
        here = self.positions[atom]
        around = [self.positions[n] for n in self.near[atom]]
        if not outer:
            return []
        if len(around) != 2:
            return [Arm(atom, outer[0], outward(here, around))]
        behind, ahead = self.near[atom][:2]
        flat = self.geometry.structure.atoms[atom].aromatic or any(
            self.geometry.structure.bond(atom, n).order == 2 for n in self.geometry.structure.neighbours[atom]
        )
        if flat:
            return [Arm(atom, n, outward(here, around)) for n in outer]
        configuration = self.geometry.structure.configurations[atom]
        arms = []
        for place, n in enumerate(outer[:2]):
            face = 1 if place == 0 else -1
            if configuration is not None:
                other = outer[1 - place] if len(outer) > 1 else -1
                # Seen from the first the others run clockwise on the face that site_direction calls +1.
                face = configuration.handedness((ahead, behind, n, other))
            arms.append(Arm(atom, n, site_direction(here, self.positions[behind], self.positions[ahead], face)))
        return arms


def _ease(points: list[Vector], free: list[int], span: float, rounds: int) -> None:
    """Move the free points of a polygon until neighbours are 1 apart and next neighbours ``span``."""
    size = len(points)
    loose = set(free)
    pairs = [(i, (i + 1) % size, 1.0) for i in range(size)]
    if size > 4:
        pairs += [(i, (i + 2) % size, span) for i in range(size)]
    for _ in range(rounds):
        for i, j, wanted in pairs:
            if i not in loose and j not in loose:
                continue
            gap = minus(points[j], points[i])
            length = math.sqrt(dot(gap, gap)) or 1e-6
            shift = times(0.5 * (length - wanted) / length, gap)
            if i in loose and j in loose:
                points[i], points[j] = add(points[i], shift), minus(points[j], shift)
            elif i in loose:
                points[i] = add(points[i], times(2.0, shift))
            else:
                points[j] = minus(points[j], times(2.0, shift))
