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
class RingImage:
    """Where a ring lands: ring number, image of each place, and +1 or -1 as the walk keeps its direction."""

    ring: int
    places: tuple[int, ...]
    direction: int


@dataclass(frozen=True, slots=True)
class Automorphism:
    """Images of the ring atoms, and where each ring lands."""

    images: dict[int, int]
    rings: tuple[RingImage, ...]


@dataclass(frozen=True, slots=True)
class Operation:
    """One symmetry operation: an automorphism, and +1 (proper) or -1 (improper)."""

    mapping: Automorphism
    sign: int


def automorphisms(geometry: Geometry, groups: Groups) -> list[Automorphism]:
    """Automorphisms of the ring graph that carry every atom onto one of the same kind with like groups.

    Parameters
    ----------
    geometry
        The system.
    groups
        Group on each exocyclic site, by (ring atom, neighbour).

    Returns
    -------
    list of Automorphism
        The identity is among them.
    """
    system, structure = geometry.system, geometry.structure
    members = system.atom_set
    inner = {a: [int(n) for n in structure.neighbours[a] if n in members] for a in system.atoms}
    colours: dict[int, int] = {}
    classes: dict[tuple[object, ...], int] = {}
    for a in system.atoms:
        record = structure.atoms[a]
        outer = sorted(
            [
                (structure.bond(a, n).order, min(groups[(a, n)].code, groups[(a, n)].mirror_code))
                for n in structure.neighbours[a]
                if n not in members
            ]
        )
        colour = (
            record.number,
            record.charge,
            record.isotope,
            record.hydrogens,
            system.kinds[a],
            len(inner[a]),
            tuple(outer),
            sum([a in companion for companion in system.companions]),
        )
        colours[a] = classes.setdefault(colour, len(classes))
    every = list(colours.values())
    root = min(system.atoms, key=lambda a: (every.count(colours[a]), a))
    order = [root]
    parent: dict[int, int] = {}
    for a in order:
        for n in inner[a]:
            if n not in parent and n != root:
                parent[n] = a
                order.append(n)
    found = []
    for images in _extend(order, parent, inner, colours):
        rings = _ring_images(geometry, images)
        if rings is not None and _keeps_companions(images, system.companions, members):
            found.append(Automorphism(images, rings))
            if len(found) >= MAX_OPERATIONS:
                break
    return found


def _extend(
    order: list[int], parent: dict[int, int], inner: dict[int, list[int]], colours: dict[int, int]
) -> Iterator[dict[int, int]]:
    """Depth-first search over images, neighbours onto neighbours."""
    place = {atom: i for i, atom in enumerate(order)}
    steps = [
        (place[parent[a]], [place[n] for n in inner[a] if place[n] < place[a] and n != parent[a]], colours[a])
        for a in order
        if a in parent
    ]
    stack: list[tuple[int, ...]] = []
    stack.extend([(a,) for a in inner if colours[a] == colours[order[0]]][::-1])
    while stack:
        images = stack.pop()
        if len(images) == len(order):
            yield dict(zip(order, images, strict=True))
            continue
        came_from, earlier, colour = steps[len(images) - 1]
        for target in inner[images[came_from]]:
            if colours[target] != colour or target in images:
                continue
            if not earlier or all(images[i] in inner[target] for i in earlier):
                stack.append((*images, target))


def _keeps_companions(images: dict[int, int], companions: tuple[tuple[int, ...], ...], members: frozenset[int]) -> bool:
    """True when every companion ring lands on one."""
    shared = {frozenset(a for a in ring if a in members) for ring in companions}
    return all(frozenset(images[a] for a in part) in shared for part in shared)


def _ring_images(geometry: Geometry, images: dict[int, int]) -> tuple[RingImage, ...] | None:
    """Where every six-membered ring lands; None when one lands on no ring."""
    numbers = {frozenset(ring.atoms): number for number, ring in enumerate(geometry.system.rings)}
    outcome = []
    for ring in geometry.system.rings:
        landed = [images[a] for a in ring.atoms]
        number = numbers.get(frozenset(landed))
        if number is None:
            return None
        target = geometry.system.rings[number].atoms
        places = tuple([target.index(a) for a in landed])
        outcome.append(RingImage(number, places, 1 if (places[1] - places[0]) % 6 == 1 else -1))
    return tuple(outcome)


def maps_configuration(first: Geometry, second: Geometry, groups: Groups, mapping: Automorphism, sign: int) -> bool:
    """True when an automorphism of the given sign carries the first configuration onto the second."""
    if first is second and sign > 0 and all(a == b for a, b in mapping.images.items()):
        return True
    for number, landed in enumerate(mapping.rings):
        turn = sign * landed.direction
        for place, sites in enumerate(first.sites[number]):
            targets = second.sites[landed.ring][landed.places[place]]
            for site in sites:
                if site.face and not _lands(site, turn, targets, first, second, groups, mapping.images, sign):
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
    target = _facing(targets, turn * site.face)
    if target is None:
        return False
    if first.system.kinds[site.ring_atom] == "inverting":
        return True
    if site.neighbour in images:
        return target.neighbour == images[site.neighbour]
    here = _site_code(first, site, groups, sign)
    return here == _site_code(second, target, groups, 1)


def _facing(sites: tuple[Site, ...], face: int) -> Site | None:
    """The site on a face of a ring atom."""
    for site in sites:
        if site.face == face:
            return site
    return None


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
    for mapping in automorphisms(geometry, groups):
        found.extend(
            [Operation(mapping, s) for s in (1, -1) if maps_configuration(geometry, geometry, groups, mapping, s)]
        )
    return found


def same_configuration(first: Geometry, second: Geometry, groups: Groups, maps: list[Automorphism]) -> bool:
    """True when two configurations of one system are the same compound or mirror images."""
    return any(maps_configuration(first, second, groups, mapping, sign) for mapping in maps for sign in (1, -1))


def carries(operation: Operation, first: Shapes, second: Shapes) -> bool:
    """True when an operation carries the first state onto the second."""
    for number, landed in enumerate(operation.mapping.rings):
        here, there = first.rings[number], second.rings[landed.ring]
        if here.shape != there.shape:
            return False
        onward = landed.places if landed.direction > 0 else (*landed.places[1:], landed.places[0])
        for torsion, target in zip(here.torsions, onward, strict=True):
            if abs(there.torsions[target] - operation.sign * torsion) > 1.0:
                return False
    return not _has_inverting(first.geometry) or _same_swings(operation, first, second)


def _has_inverting(geometry: Geometry) -> bool:
    return "inverting" in geometry.system.kinds.values()


def _same_swings(operation: Operation, first: Shapes, second: Shapes) -> bool:
    """True when every inverting nitrogen points its group to the image of the same side."""
    for number, landed in enumerate(operation.mapping.rings):
        turn = operation.sign * landed.direction
        for place in range(6):
            for site in first.geometry.sites[number][place]:
                atom = site.ring_atom
                if first.geometry.system.kinds[atom] != "inverting" or site.face == 0:
                    continue
                if _is_lone_pair(first.geometry, site):
                    continue
                targets = second.geometry.sites[landed.ring][landed.places[place]]
                mate = _facing(targets, turn * site.face)
                if mate is None or _is_lone_pair(second.geometry, mate):
                    return False
                images = operation.mapping.images
                if site.neighbour in images and mate.neighbour != images[site.neighbour]:
                    return False
    return True


def _is_lone_pair(geometry: Geometry, site: Site) -> bool:
    """True when nothing but a lone pair stands on the site."""
    return site.neighbour < 0 and geometry.structure.atoms[site.ring_atom].hydrogens <= -1 - site.neighbour
