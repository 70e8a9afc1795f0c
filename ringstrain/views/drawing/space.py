"""Small vectors, and ideal coordinates of one six-membered ring from its torsions."""

from __future__ import annotations

import math
from collections.abc import Sequence
from functools import lru_cache
from itertools import pairwise
from typing import Any

Vector = tuple[float, float, float]

#: In-plane radius and half-height of a chair of unit bonds and tetrahedral angles, and the 1,3-distance of its atoms.
_RADIUS, _HALF_HEIGHT, _ONE_THREE = math.sqrt(8.0) / 3.0, 1.0 / 6.0, math.sqrt(8.0 / 3.0)
#: Share of a tetrahedral site along the outer bisector and across it.
_ALONG, _ACROSS = math.cos(math.acos(-1.0 / 3.0) / 2.0), math.sin(math.acos(-1.0 / 3.0) / 2.0)


def add(a: Vector, b: Vector) -> Vector:
    """a + b."""
    return a[0] + b[0], a[1] + b[1], a[2] + b[2]


def minus(a: Vector, b: Vector) -> Vector:
    """a - b."""
    return a[0] - b[0], a[1] - b[1], a[2] - b[2]


def times(factor: float, a: Vector) -> Vector:
    """A vector made longer."""
    return factor * a[0], factor * a[1], factor * a[2]


def dot(a: Vector, b: Vector) -> float:
    """Scalar product."""
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2]


def cross(a: Vector, b: Vector) -> Vector:
    """Vector product."""
    return a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]


def unit(a: Vector) -> Vector:
    """A vector of length 1 in the same direction; a null vector stays."""
    length = math.sqrt(dot(a, a))
    return a if length < 1e-9 else times(1.0 / length, a)


def mean(points: Sequence[Vector]) -> Vector:
    """Centre of some points."""
    n = len(points)
    return sum(p[0] for p in points) / n, sum(p[1] for p in points) / n, sum(p[2] for p in points) / n


def torsion(a: Vector, b: Vector, c: Vector, d: Vector) -> float:
    """Torsion a-b-c-d [degree]."""
    axis = unit(minus(c, b))
    first = cross(minus(a, b), axis)
    last = cross(minus(d, c), axis)
    return math.degrees(math.atan2(dot(cross(first, last), axis), dot(first, last)))


def axis_of(points: Sequence[Vector]) -> Vector:
    """Unit normal of the mean plane of a ring, on the side from which the ring runs anticlockwise."""
    centre = mean(points)
    total = (0.0, 0.0, 0.0)
    for i, point in enumerate(points):
        total = add(total, cross(minus(points[i - 1], centre), minus(point, centre)))
    return unit(total)


def outward(here: Vector, near: Sequence[Vector]) -> Vector:
    """Unit vector away from the neighbours of an atom."""
    total = (0.0, 0.0, 0.0)
    for point in near:
        total = add(total, unit(minus(point, here)))
    return unit(times(-1.0, total))


def site_direction(here: Vector, behind: Vector, ahead: Vector, face: int) -> Vector:
    """Direction of an exocyclic site of a ring atom; face 0 stands in the plane of the ring path."""
    bisector = outward(here, (behind, ahead))
    if not face:
        return bisector
    normal = unit(cross(minus(behind, here), minus(ahead, here)))
    return add(times(_ALONG, bisector), times(_ACROSS * face, normal))


@lru_cache(maxsize=256)
def ring_points(torsions: tuple[float, ...]) -> tuple[Vector, ...]:
    """A six-membered ring of unit bonds with these torsions, its mean plane in x and y, anticlockwise seen from +z.

    Parameters
    ----------
    torsions
        Endocyclic torsions by bond [degree].
    """
    alternate = all(abs(a + b) < 1.0 for a, b in pairwise(torsions)) and abs(torsions[0]) > 30.0
    if alternate:
        lift = _HALF_HEIGHT if torsions[0] > 0 else -_HALF_HEIGHT
        return tuple(
            (
                _RADIUS * math.cos(math.radians(60.0 * i)),
                _RADIUS * math.sin(math.radians(60.0 * i)),
                lift if i % 2 == 0 else -lift,
            )
            for i in range(6)
        )
    return _relaxed(torsions)


def _relaxed(torsions: tuple[float, ...]) -> tuple[Vector, ...]:
    """The ring that comes closest to unit bonds, tetrahedral angles and the torsions asked for."""
    import numpy as np

    wanted = np.array(torsions) / 60.0
    places = np.arange(6)

    def residuals(flat: Any) -> Any:
        points = flat.reshape(6, 3)
        bonds = points[(places + 1) % 6] - points
        lengths = np.linalg.norm(bonds, axis=1)
        spans = np.linalg.norm(points[(places + 2) % 6] - points, axis=1)
        before, after = bonds[places - 1], bonds[(places + 1) % 6]
        first, second = np.cross(before, bonds), np.cross(bonds, after)
        found = np.arctan2(lengths * np.einsum("ij,ij->i", before, second), np.einsum("ij,ij->i", first, second))
        return np.concatenate((4.0 * (lengths - 1.0), spans - _ONE_THREE, np.degrees(found) / 60.0 - wanted))

    angles = np.radians(60.0 * places)
    flat = np.stack((np.cos(angles), np.sin(angles), np.zeros(6)), axis=1).reshape(18)
    step = 1e-4
    for _ in range(12):
        here = residuals(flat)
        slopes = np.stack([(residuals(flat + step * row) - here) / step for row in np.eye(18)], axis=1)
        flat = flat - np.linalg.solve(slopes.T @ slopes + 1e-3 * np.eye(18), slopes.T @ here)
    points = flat.reshape(6, 3)
    points = points - points.mean(axis=0)
    rows: list[Vector] = [(float(a), float(b), float(c)) for a, b, c in points]
    z: Any = np.array(axis_of(rows))
    x = points[0] - np.dot(points[0], z) * z
    x = x / np.linalg.norm(x)
    turned = points @ np.stack((x, np.cross(z, x), z), axis=1)
    return tuple((float(a), float(b), float(c)) for a, b, c in turned)


def fit(moving: Sequence[Vector], fixed: Sequence[Vector], weights: Sequence[float]) -> tuple[Any, Any, Any]:
    """Rotation and the two centres that carry some points onto others (weighted least squares, no mirror)."""
    import numpy as np

    w = np.array(weights)[:, None]
    a, b = np.array(moving), np.array(fixed)
    centre_a, centre_b = (a * w).sum(axis=0) / w.sum(), (b * w).sum(axis=0) / w.sum()
    u, _, vt = np.linalg.svd(((a - centre_a) * w).T @ (b - centre_b))
    sign = 1.0 if np.linalg.det(u @ vt) > 0 else -1.0
    return (u * np.array((1.0, 1.0, sign))) @ vt, centre_a, centre_b


def carried(points: Sequence[Vector], transform: tuple[Any, Any, Any]) -> tuple[Vector, ...]:
    """Points moved by a :func:`fit`."""
    import numpy as np

    rotation, centre_a, centre_b = transform
    moved = (np.array(points) - centre_a) @ rotation + centre_b
    return tuple((float(a), float(b), float(c)) for a, b, c in moved)
