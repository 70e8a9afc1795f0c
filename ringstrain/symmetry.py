"""Symmetry of a ring system: which states are copies or mirror images of each other.

A symmetry operation is an automorphism of the coloured ring graph together with a sign: +1 keeps handedness, -1
reverses it.  It is accepted when it carries every face onto a face of the right side and like groups onto like.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ringstrain.geometry import Geometry, Site
from ringstrain.states import Shapes
from ringstrain.tables.groups import Group

#: More operations than this are not searched for.
MAX_OPERATIONS = 384
Groups = dict[tuple[int, int], Group]


@dataclass(frozen=True, slots=True)
class Operation:
    """One symmetry operation: images of the ring atoms, and +1 (proper) or -1 (improper)."""

    images: dict[int, int]
    sign: int


def automorphisms(geometry: Geometry, groups: Groups) -> list[dict[int, int]]:
    """Automorphisms of the ring graph that carry every atom onto one of the same kind with like groups.

    Parameters
    ----------
    geometry
        The system.
    groups
        Group on each exocyclic site, by (ring atom, neighbour).

    Returns
    -------
    list of dict
        Images of the ring atoms; the identity is among them.
    """
    system, structure = geometry.system, geometry.structure
    members = system.atom_set
    inner = {a: [int(n) for n in structure.neighbours[a] if n in members] for a in system.atoms}
    colours: dict[int, tuple[object, ...]] = {}
    for a in system.atoms:
        record = structure.atoms[a]
        outer = sorted(
            (structure.bond(a, n).order, min(groups[(a, n)].code, groups[(a, n)].mirror_code))
            for n in structure.neighbours[a]
            if n not in members
        )
        colours[a] = (
            record.number,
            record.charge,
            record.isotope,
            record.hydrogens,
            system.kinds[a],
            len(inner[a]),
            tuple(outer),
            sum(a in companion for companion in system.companions),
        )
    population: dict[object, int] = {}
    for colour in colours.values():
        population[colour] = population.get(colour, 0) + 1
    root = min(system.atoms, key=lambda a: (population[colours[a]], a))
    order = [root]
    parent: dict[int, int] = {}
    for a in order:
        for n in inner[a]:
            if n not in parent and n != root:
                parent[n] = a
                order.append(n)
    found = []
    for images in _extend(order, parent, inner, colours):
        if _keeps_companions(images, system.companions, members) and _keeps_rings(geometry, images):
            found.append(images)
            if len(found) >= MAX_OPERATIONS:
                break
    return found


def _extend(
    order: list[int], parent: dict[int, int], inner: dict[int, list[int]], colours: dict[int, tuple[object, ...]]
) -> Iterator[dict[int, int]]:
    """Depth-first search over images, neighbours onto neighbours."""
    stack: list[dict[int, int]] = [{order[0]: a} for a in inner if colours[a] == colours[order[0]]][::-1]
    while stack:
        images = stack.pop()
        if len(images) == len(order):
            yield images
            continue
        atom = order[len(images)]
        used = set(images.values())
        for target in inner[images[parent[atom]]]:
            if target in used or colours[target] != colours[atom]:
                continue
            if all(images[n] in inner[target] for n in inner[atom] if n in images):
                stack.append({**images, atom: target})


def _keeps_companions(images: dict[int, int], companions: tuple[tuple[int, ...], ...], members: frozenset[int]) -> bool:
    """True when every companion ring lands on one."""
    shared = {frozenset(a for a in ring if a in members) for ring in companions}
    return all(frozenset(images[a] for a in part) in shared for part in shared)


def _keeps_rings(geometry: Geometry, images: dict[int, int]) -> bool:
    """True when every six-membered ring lands on one."""
    known = {frozenset(ring.atoms) for ring in geometry.system.rings}
    return all(frozenset(images[a] for a in ring.atoms) in known for ring in geometry.system.rings)


@dataclass(frozen=True, slots=True)
class RingImage:
    """Where a ring lands: ring number, image of each place, and +1 or -1 as the walk keeps its direction."""

    ring: int
    places: tuple[int, ...]
    direction: int


def ring_images(geometry: Geometry, images: dict[int, int]) -> list[RingImage]:
    """Image of every ring of a system under an automorphism."""
    numbers = {frozenset(ring.atoms): number for number, ring in enumerate(geometry.system.rings)}
    outcome = []
    for ring in geometry.system.rings:
        landed = [images[a] for a in ring.atoms]
        number = numbers[frozenset(landed)]
        target = geometry.system.rings[number].atoms
        places = tuple(target.index(a) for a in landed)
        outcome.append(RingImage(number, places, 1 if (places[1] - places[0]) % 6 == 1 else -1))
    return outcome


def maps_configuration(first: Geometry, second: Geometry, groups: Groups, images: dict[int, int], sign: int) -> bool:
    """True when an automorphism of the given sign carries the first configuration onto the second."""
    for number, landed in enumerate(ring_images(first, images)):
        turn = sign * landed.direction
        for place in range(6):
            targets = second.sites[landed.ring][landed.places[place]]
            for site in first.sites[number][place]:
                if site.face and not _lands(site, turn, targets, first, second, groups, images, sign):
                    return False
    return True


def _lands(
    site: Site,
    turn: int,
    targets: tuple[Site, ...],
    first: Geometry,
    second: Geometry,
    groups: Groups,
    images: dict[int, int],
    sign: int,
) -> bool:
    """True when the site's group stands on the right face of the image atom."""
    target = next((t for t in targets if t.face == turn * site.face), None)
    if target is None:
        return False
    if site.ring_atom in first.system.kinds and first.system.kinds[site.ring_atom] == "inverting":
        return True
    if site.neighbour in images:
        return target.neighbour == images[site.neighbour]
    here = _site_code(first, site, groups, sign)
    return here == _site_code(second, target, groups, 1)


def _site_code(geometry: Geometry, site: Site, groups: Groups, sign: int) -> int:
    """Code of what stands on a site, mirrored when sign is -1; hydrogens and lone pairs have codes of their own."""
    if site.neighbour < 0:
        return 1 if geometry.structure.atoms[site.ring_atom].hydrogens > -1 - site.neighbour else 0
    group = groups.get((site.ring_atom, site.neighbour))
    if group is None:
        return -1
    return group.code if sign > 0 else group.mirror_code


def operations(geometry: Geometry, groups: Groups) -> list[Operation]:
    """Symmetry operations that leave a configuration as it is (up to handedness)."""
    found: list[Operation] = []
    for images in automorphisms(geometry, groups):
        found.extend(
            Operation(images, sign) for sign in (1, -1) if maps_configuration(geometry, geometry, groups, images, sign)
        )
    return found


def same_configuration(first: Geometry, second: Geometry, groups: Groups, maps: list[dict[int, int]]) -> bool:
    """True when two configurations of one system are the same compound or mirror images."""
    return any(maps_configuration(first, second, groups, images, sign) for images in maps for sign in (1, -1))


def carries(operation: Operation, first: Shapes, second: Shapes) -> bool:
    """True when an operation carries the first state onto the second."""
    geometry = first.geometry
    for number, landed in enumerate(ring_images(geometry, operation.images)):
        here, there = first.rings[number], second.rings[landed.ring]
        if here.shape != there.shape:
            return False
        for bond in range(6):
            a, b = landed.places[bond], landed.places[(bond + 1) % 6]
            target = a if landed.direction > 0 else b
            if abs(there.torsions[target] - operation.sign * here.torsions[bond]) > 1.0:
                return False
    swung, other = set(first.inverted), set(second.inverted)
    return _same_swings(operation, first, second) if swung or other or _has_inverting(geometry) else True


def _has_inverting(geometry: Geometry) -> bool:
    return "inverting" in geometry.system.kinds.values()


def _same_swings(operation: Operation, first: Shapes, second: Shapes) -> bool:
    """True when every inverting nitrogen points its group to the image of the same side."""
    for number, landed in enumerate(ring_images(first.geometry, operation.images)):
        turn = operation.sign * landed.direction
        for place in range(6):
            for site in first.geometry.sites[number][place]:
                atom = site.ring_atom
                if first.geometry.system.kinds[atom] != "inverting" or site.face == 0:
                    continue
                if _is_lone_pair(first.geometry, site):
                    continue
                targets = second.geometry.sites[landed.ring][landed.places[place]]
                mate = next((t for t in targets if t.face == turn * site.face), None)
                if mate is None or _is_lone_pair(second.geometry, mate):
                    return False
                if site.neighbour in operation.images and mate.neighbour != operation.images[site.neighbour]:
                    return False
    return True


def _is_lone_pair(geometry: Geometry, site: Site) -> bool:
    """True when nothing but a lone pair stands on the site."""
    return site.neighbour < 0 and geometry.structure.atoms[site.ring_atom].hydrogens <= -1 - site.neighbour
