"""Which state of the ledger a set of coordinates is, by ring torsions and by the side of each inverting nitrogen."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ringstrain.analysis import SystemResult
from ringstrain.crosscheck.molecule import Molecule, Points
from ringstrain.geometry import wrap
from ringstrain.states import BOAT, CHAIR, HALF_CHAIR, TWIST_BOAT, Torsions

#: A ring is of a shape when its torsions differ from those of the shape by no more than this, root mean square and at
#: most [degree].  Crowded chairs flatten by up to 25 degrees; a twist-boat is 90 away on some bond.
RMS_DEGREES = 28.0
WORST_DEGREES = 45.0
#: Sum of the two |torsions| of a site that parts axial (120) from equatorial (360) [degree].
AXIAL_DEGREES = 240.0
_TEMPLATES: tuple[tuple[str, Torsions, int], ...] = (
    ("chair", CHAIR, 1),
    ("twist-boat", TWIST_BOAT, 3),
    ("boat", BOAT, 3),
    ("half-chair", HALF_CHAIR, 6),
)


@dataclass(frozen=True, slots=True)
class Form:
    """What one ring system is in one conformer.

    Attributes
    ----------
    state
        Id of the ledger's state; empty when it is none of them.
    shapes
        Shape of each ring.
    signature
        What two conformers of one form have in common.
    torsions
        Ring torsions [degree].
    """

    state: str
    shapes: tuple[str, ...]
    signature: tuple[object, ...]
    torsions: tuple[tuple[float, ...], ...]


def dihedral(points: Points, a: int, b: int, c: int, d: int) -> float:
    """Torsion a-b-c-d [degree]."""
    axis = points[c] - points[b]
    axis = axis / np.linalg.norm(axis)
    first, last = points[a] - points[b], points[d] - points[c]
    first = first - np.dot(first, axis) * axis
    last = last - np.dot(last, axis) * axis
    return float(np.degrees(np.arctan2(np.dot(np.cross(first, last), axis), np.dot(first, last))))


def ring_torsions(points: Points, ring: Sequence[int]) -> tuple[float, ...]:
    """Endocyclic torsions of a six-membered ring, bond by bond [degree]."""
    return tuple(dihedral(points, *(ring[(i + shift) % 6] for shift in (-1, 0, 1, 2))) for i in range(6))


def distance(here: Sequence[float], there: Sequence[float]) -> tuple[float, float]:
    """Root mean square and largest difference of two sets of ring torsions [degree]."""
    gaps = np.array([wrap(a - b) for a, b in zip(here, there, strict=True)])
    return float(np.sqrt((gaps**2).mean())), float(np.abs(gaps).max())


def nearest_shape(torsions: Sequence[float]) -> tuple[str, int, int]:
    """Name of the nearest shape of a ring, the bond it starts at and its sign."""
    options = [
        (distance(torsions, [sign * template[(i - step) % 6] for i in range(6)])[0], name, step, sign)
        for name, template, steps in _TEMPLATES
        for step in range(steps)
        for sign in (1, -1)
    ]
    _, name, step, sign = min(options)
    return name, step, sign


def read_form(molecule: Molecule, result: SystemResult, points: Points) -> Form:
    """What a ring system is in a conformer.

    Parameters
    ----------
    molecule
        The molecule.
    result
        The ring system with its states.
    points
        Coordinates, shape (atoms, 3) [angstrom].

    Returns
    -------
    Form
        The nearest state whose rings and nitrogens all match, else a form without a state.
    """
    places = molecule.places
    rings = [tuple(places[a] for a in ring) for ring in result.rings]
    torsions = tuple(ring_torsions(points, ring) for ring in rings)
    inverting = [atom for atom, kind in result.system.kinds.items() if kind == "inverting"]
    sides = {atom: _side(molecule, result, points, atom) for atom in inverting}
    best: tuple[float, str] | None = None
    for state in result.states:
        gaps = [distance(t, s.torsions) for t, s in zip(torsions, state.detail.shapes.rings, strict=True)]
        if any(rms > RMS_DEGREES or worst > WORST_DEGREES for rms, worst in gaps):
            continue
        if any(sides[atom] != position for atom, position in state.nitrogen if sides.get(atom)):
            continue
        total = sum(rms for rms, _ in gaps)
        if best is None or total < best[0]:
            best = (total, state.id)
    named = [nearest_shape(t) for t in torsions]
    if best is not None:
        shapes = next(state.shapes for state in result.states if state.id == best[1])
        return Form(best[1], shapes, (best[1],), torsions)
    return Form("", tuple(name for name, _, _ in named), (*named, *sorted(sides.items())), torsions)


def _side(molecule: Molecule, result: SystemResult, points: Points, atom: int) -> str:
    """Where the hydrogen or group of an inverting nitrogen points in the first ring that holds it; empty when flat."""
    ring = next(ring for ring in result.rings if atom in ring)
    around = [molecule.places[int(n)] for n in molecule.structure.neighbours[atom] if n not in ring]
    outside = (around + molecule.hydrogens_of(atom))[:1]
    if not outside:
        return ""
    place = ring.index(atom)
    cycle = [molecule.places[ring[(place + shift) % 6]] for shift in range(6)]
    ahead = dihedral(points, outside[0], cycle[0], cycle[1], cycle[2])
    behind = dihedral(points, outside[0], cycle[0], cycle[5], cycle[4])
    return "axial" if abs(ahead) + abs(behind) < AXIAL_DEGREES else "equatorial"
