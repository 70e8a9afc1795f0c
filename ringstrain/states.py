"""Shapes of rings and the states of a ring system that close.

A state gives each ring bond a nominal torsion from a template.  Fused rings must agree on the torsion of the bond
they share within 35 degrees; a search ring by ring finds the few combinations that do.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from operator import neg
from typing import Literal

from ringstrain.errors import OutOfScope
from ringstrain.geometry import GAUCHE, Geometry, wrap
from ringstrain.ringgraph import Ring

Shape = Literal["chair", "half-chair", "sofa", "boat", "twist-boat"]
Torsions = tuple[float, float, float, float, float, float]
CHAIR: Torsions = (60.0, -60.0, 60.0, -60.0, 60.0, -60.0)
HALF_CHAIR: Torsions = (0.0, 15.0, -45.0, 60.0, -45.0, 15.0)
TWIST_BOAT: Torsions = (30.0, 30.0, -60.0, 30.0, 30.0, -60.0)
BOAT: Torsions = (0.0, 60.0, -60.0, 0.0, 60.0, -60.0)
#: How far two fused rings may disagree on their common torsion [degree].
TOLERANCE = 35.0
MAX_STATES = 64


@dataclass(frozen=True, slots=True)
class RingShape:
    """One ring in one shape.

    Attributes
    ----------
    shape
        Its name.
    torsions
        Endocyclic torsions by bond [degree].
    rank
        Puts shapes into a fixed order.
    """

    shape: Shape
    torsions: Torsions
    rank: tuple[object, ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "rank", (self.shape, *map(neg, self.torsions)))


@dataclass(frozen=True, slots=True)
class Shapes:
    """Shape of every ring of a system, ring by ring, and the geometry they belong to."""

    geometry: Geometry
    rings: tuple[RingShape, ...]
    inverted: tuple[int, ...] = ()

    def torsion_between(self, ring: int, first: int, second: int) -> float:
        """Endocyclic torsion [degree] of a ring about the bond between two of its atoms."""
        members = self.geometry.system.rings[ring]
        place, other = members.place(first), members.place(second)
        return self.torsion(ring, place if (place + 1) % 6 == other else other)

    def torsion(self, ring: int, bond: int) -> float:
        """Endocyclic torsion of a ring bond [degree]."""
        return self.rings[ring].torsions[bond]


def _turned(template: Torsions, steps: int, sign: int) -> Torsions:
    """A template started ``steps`` bonds later, mirrored when sign is -1."""
    t = [sign * template[(i - steps) % 6] for i in range(6)]
    return t[0], t[1], t[2], t[3], t[4], t[5]


_CHAIRS = tuple(RingShape("chair", _turned(CHAIR, 0, sign)) for sign in (1, -1))
_TWISTS = tuple(RingShape("twist-boat", _turned(TWIST_BOAT, k, sign)) for k in range(3) for sign in (1, -1))
_BOATS = tuple(RingShape("boat", _turned(BOAT, k, sign)) for k in range(3) for sign in (1, -1))
_HALF_CHAIRS = tuple(tuple(RingShape("half-chair", _turned(HALF_CHAIR, k, sign)) for sign in (1, -1)) for k in range(6))


def shapes_of(ring: Ring, extra: tuple[Shape, ...] = ()) -> tuple[RingShape, ...]:
    """Shapes a ring may take: its two chairs or half-chairs, and the extra ones asked for."""
    if ring.kind == "half-chair":
        assert ring.flat_bond is not None
        return _HALF_CHAIRS[ring.flat_bond]
    shapes = _CHAIRS
    if "twist-boat" in extra:
        shapes += _TWISTS
    if "boat" in extra:
        shapes += _BOATS
    return shapes


def close_block(
    geometry: Geometry, block: tuple[int, ...], extra: dict[int, tuple[Shape, ...]] | None = None
) -> list[dict[int, RingShape]]:
    """Every combination of shapes of a block's rings that closes.

    Parameters
    ----------
    geometry
        Faces of all sites.
    block
        Ring numbers.
    extra
        Shapes besides the chair allowed for some rings.

    Returns
    -------
    list of dict
        Shape by ring number; empty when none closes.
    """
    if len(block) == 1:
        number = block[0]
        options = shapes_of(geometry.system.rings[number], (extra or {}).get(number, ()))
        return [{number: shape} for shape in options if _suits_companions(geometry, number, shape)]
    order, links = _search_order(geometry, block)
    partial: list[dict[int, RingShape]] = [{}]
    for number in order:
        ring = geometry.system.rings[number]
        candidates = [
            shape
            for shape in shapes_of(ring, (extra or {}).get(number, ()))
            if _suits_companions(geometry, number, shape)
        ]
        partial = [
            {**chosen, number: shape}
            for chosen in partial
            for shape in candidates
            if all(_agree(geometry, number, shape, other, chosen[other], bonds) for other, bonds in links[number])
        ]
        if len(partial) > 4 * MAX_STATES:
            break
    return partial


_Links = dict[int, list[tuple[int, list[tuple[int, int]]]]]


def _search_order(geometry: Geometry, block: tuple[int, ...]) -> tuple[list[int], _Links]:
    """Rings so that each touches an earlier one, with the bonds each shares with earlier rings."""
    shared: dict[tuple[int, int], list[tuple[int, int]]] = {}
    members = set(block)
    for bond, places in geometry.ring_bonds.items():
        numbers = [n for n, _ in places if n in members]
        for first in numbers:
            for second in numbers:
                if first != second:
                    shared.setdefault((first, second), []).append(bond)
    near: dict[int, list[int]] = {}
    for first, second in shared:
        near.setdefault(first, []).append(second)
    order: list[int] = [block[0]]
    seen = {block[0]}
    for number in order:
        for other in sorted(near.get(number, ())):
            if other not in seen:
                seen.add(other)
                order.append(other)
    rank = {number: i for i, number in enumerate(order)}
    links: _Links = {
        number: [(other, shared[(number, other)]) for other in near.get(number, ()) if rank[other] < rank[number]]
        for number in order
    }
    return order, links


def _agree(
    geometry: Geometry, number: int, shape: RingShape, other: int, fixed: RingShape, bonds: list[tuple[int, int]]
) -> bool:
    """True when two rings give the bonds they share the same torsions."""
    rings = geometry.system.rings
    for bond in bonds:
        places = dict(geometry.ring_bonds[bond])
        here, there = places[number], places[other]
        ring, fellow = rings[number].atoms, rings[other].atoms
        first, last = ring[here - 1], ring[(here + 2) % 6]
        if fellow[there] != ring[here]:
            first, last = last, first
        expected = fixed.torsions[there] + geometry.path_offset(other, there, first, last)
        if abs(wrap(expected - shape.torsions[here])) > TOLERANCE:
            return False
    return True


def _suits_companions(geometry: Geometry, number: int, shape: RingShape) -> bool:
    """True when every fused five- or seven-membered ring can close: its bonds here must be gauche, never anti."""
    if not geometry.system.companions and not geometry.system.pinned:
        return True
    atoms = geometry.system.rings[number].atoms
    if not all(_pinned_on_one_face(geometry, number, small) for small in geometry.system.pinned):
        return False
    for companion in geometry.system.companions:
        size = len(companion)
        if not _same_side(geometry, number, companion):
            return False
        for i in range(size):
            b, c = companion[i], companion[(i + 1) % size]
            if b not in atoms or c not in atoms:
                continue
            place = atoms.index(b)
            first, last = companion[i - 1], companion[(i + 2) % size]
            if atoms[(place + 1) % 6] != c:
                if atoms[place - 1] != c:
                    continue
                place = (place - 1) % 6
                first, last = last, first
            torsion = wrap(shape.torsions[place] + geometry.path_offset(number, place, first, last))
            if abs(torsion) >= GAUCHE[1]:
                return False
    return True


def _pinned_on_one_face(geometry: Geometry, number: int, small: tuple[int, ...]) -> bool:
    """True unless a three-membered ring is fused trans, which it cannot be."""
    atoms = geometry.system.rings[number].atoms
    faces = {
        site.face
        for atom in small
        if atom in atoms
        for site in geometry.sites[number][atoms.index(atom)]
        if site.neighbour in small and site.neighbour not in atoms
    }
    return len(faces) < 2


def _same_side(geometry: Geometry, number: int, companion: tuple[int, ...]) -> bool:
    """True unless a companion ring spans two ring atoms that are no neighbours from opposite faces."""
    ring = geometry.system.rings[number]
    if len(set(companion).intersection(ring.atoms)) < 3:
        return True
    faces = {
        site.face
        for place in geometry.sites[number]
        for site in place
        if site.neighbour in companion and site.ring_atom in companion and site.face
    }
    return len(faces) < 2


def combine_blocks(
    geometry: Geometry, per_block: Sequence[Sequence[dict[int, RingShape]]], inverted: tuple[int, ...] = ()
) -> list[Shapes]:
    """States of the system with these nitrogens inverted: the product over its blocks.

    Raises
    ------
    OutOfScope
        If there are over 64.
    """
    total = 1
    for options in per_block:
        total *= len(options)
    if total > MAX_STATES:
        raise OutOfScope(
            f"The ring system has {total} chair states; {MAX_STATES} is the limit.",
            "Ask about a part of the molecule.",
            atoms=geometry.system.atoms,
        )
    merged: list[dict[int, RingShape]] = [{}]
    for options in per_block:
        merged = [{**left, **right} for left in merged for right in options]
    count = len(geometry.system.rings)
    return [Shapes(geometry, tuple([chosen[n] for n in range(count)]), inverted) for chosen in merged]
