"""All configurations of a ring system over its free centres, sorted into compounds.

A configuration is a string of signs, one per centre: +1 as in the reference geometry, -1 mirrored there.  Every
symmetry of the coloured ring graph, proper or improper, permutes and flips these signs; configurations on one orbit
of the proper ones are the same compound, an improper one links enantiomers.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from itertools import product

from ringstrain.geometry import Geometry, flipped, neighbour_orders
from ringstrain.ringgraph import RingSystem
from ringstrain.stereo import open_centres
from ringstrain.structure.records import AtomIndex, Configuration, Structure, permutation_sign
from ringstrain.symmetry import Groups, automorphisms

Signs = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class SignedMap:
    """One symmetry acting on sign strings: where each centre goes, and whether its sign turns."""

    targets: tuple[int, ...]
    turns: tuple[int, ...]
    proper: bool

    def apply(self, signs: Signs) -> Signs:
        """The image of a sign string."""
        image = [0] * len(signs)
        for i, sign in enumerate(signs):
            image[self.targets[i]] = sign * self.turns[i]
        return tuple(image)


@dataclass(frozen=True, kw_only=True)
class Centres:
    """The centres of a ring system and the symmetries that act on them.

    Attributes
    ----------
    geometry
        Reference geometry; open centres stand in an arbitrary configuration.
    atoms
        Ring atoms whose two orders differ.
    given
        True for each centre whose configuration the input gives.
    maps
        Symmetries of the constitution.
    """

    geometry: Geometry
    atoms: tuple[int, ...]
    given: tuple[bool, ...]
    maps: tuple[SignedMap, ...]

    def geometry_of(self, signs: Signs) -> Geometry:
        """The geometry of a sign string."""
        turned = [a for a, sign in zip(self.atoms, signs, strict=True) if sign < 0]
        if not turned:
            return self.geometry
        orders = dict(self.geometry.orders)
        for atom in turned:
            orders[atom] = flipped(orders[atom])
        return Geometry(structure=self.geometry.structure, system=self.geometry.system, orders=orders)


def find_centres(structure: Structure, system: RingSystem, groups: Groups) -> Centres:
    """Centres of a ring system: tetrahedral ring atoms whose two exocyclic sites differ.

    Parameters
    ----------
    structure
        The molecule.
    system
        The ring system.
    groups
        Group on each exocyclic site.

    Returns
    -------
    Centres
        Inverting nitrogens are left out: their side is a state, not an isomer.
    """
    orders, missing = neighbour_orders(structure, system)
    geometry = Geometry(structure=structure, system=system, orders=orders)
    candidates = tuple(
        a for a in system.atoms if a in orders and system.kinds[a] != "inverting" and not _two_free(structure, a)
    )
    atoms = open_centres(structure, geometry, candidates, groups)
    given = tuple(a not in missing for a in atoms)
    return Centres(geometry=geometry, atoms=atoms, given=given, maps=_signed_maps(geometry, atoms, groups))


def _two_free(structure: Structure, atom: int) -> bool:
    """True when two sites carry nothing with a name of its own (CH2, ring oxygen)."""
    return len(structure.neighbours[atom]) < 3


def _signed_maps(geometry: Geometry, atoms: tuple[int, ...], groups: Groups) -> tuple[SignedMap, ...]:
    """How each symmetry of the constitution acts on the signs of the centres."""
    place = {atom: i for i, atom in enumerate(atoms)}
    found = []
    for images in (mapping.images for mapping in automorphisms(geometry, groups)):
        for sign in (1, -1):
            if not _groups_agree(geometry, groups, images, sign):
                continue
            targets, turns = [], []
            for atom in atoms:
                target = images[atom]
                order = _carried(geometry, groups, atom, target, images, sign)
                turn = sign * permutation_sign(geometry.orders[target], order)
                targets.append(place[target])
                turns.append(turn)
            found.append(SignedMap(tuple(targets), tuple(turns), sign > 0))
    return tuple(found)


def _groups_agree(geometry: Geometry, groups: Groups, images: dict[int, int], sign: int) -> bool:
    """True when every group lands on an equal one (its mirror image for an improper symmetry)."""
    members = geometry.system.atom_set
    for atom in geometry.system.atoms:
        here = [n for n in geometry.structure.neighbours[atom] if n not in members]
        if not here:
            continue
        there = [n for n in geometry.structure.neighbours[images[atom]] if n not in members]
        own = sorted(_code(groups[(atom, int(n))], sign) for n in here)
        if own != sorted(groups[(images[atom], int(n))].code for n in there):
            return False
    return True


def _code(group: object, sign: int) -> int:
    code: int = group.code if sign > 0 else group.mirror_code  # type: ignore[attr-defined]
    return code


def _carried(
    geometry: Geometry, groups: Groups, atom: int, target: int, images: dict[int, int], sign: int
) -> tuple[int, ...]:
    """The neighbour order of an atom written with the neighbours of its image."""
    members = geometry.system.atom_set
    left = [n for n in geometry.orders[target] if n not in members]
    carried = []
    for n in geometry.orders[atom]:
        if n in images:
            carried.append(images[n])
            continue
        mate = next(m for m in left if _alike(geometry, groups, atom, n, target, m, sign))
        left.remove(mate)
        carried.append(mate)
    return tuple(carried)


def _alike(geometry: Geometry, groups: Groups, atom: int, n: int, target: int, m: int, sign: int) -> bool:
    """True when what stands at n on one atom is what stands at m on its image."""
    if n < 0 or m < 0:
        return n < 0 and m < 0
    return _code(groups[(atom, n)], sign) == groups[(target, m)].code


@dataclass(frozen=True, slots=True)
class Compound:
    """One compound: all sign strings that are the same molecule, and those of its mirror image.

    Attributes
    ----------
    members
        Sign strings of the compound within the enumerated set.
    mirrors
        Sign strings of its enantiomer within the set; empty when it is achiral or the set does not hold it.
    achiral
        True when an improper symmetry maps the compound onto itself.
    """

    members: tuple[Signs, ...]
    mirrors: tuple[Signs, ...]
    achiral: bool


def sort_compounds(centres: Centres, configurations: Iterable[Signs]) -> list[Compound]:
    """Configurations sorted into compounds, each enantiomer pair once.

    Parameters
    ----------
    centres
        Centres and symmetries.
    configurations
        Sign strings to sort.

    Returns
    -------
    list of Compound
        In order of first appearance.
    """
    waiting = dict.fromkeys(configurations)
    compounds = []
    while waiting:
        first = next(iter(waiting))
        own: dict[Signs, None] = {}
        mirrored: dict[Signs, None] = {}
        for operation in centres.maps:
            image = operation.apply(first)
            if image in waiting:
                (own if operation.proper else mirrored)[image] = None
        achiral = first in mirrored or not own.keys().isdisjoint(mirrored)
        for signs in (*own, *mirrored):
            waiting.pop(signs, None)
        compounds.append(Compound(tuple(own), () if achiral else tuple(mirrored), achiral))
    return compounds


def all_signs(centres: Centres, free: Iterable[int]) -> list[Signs]:
    """Every sign string in which only the given atoms may turn; the reference comes first."""
    wanted = set(free)
    return [tuple(choice) for choice in product(*((1, -1) if a in wanted else (1,) for a in centres.atoms))]


def stereogenic(centres: Centres, free: Iterable[int]) -> tuple[int, ...]:
    """Centres whose inversion makes another compound, at least in some configuration."""
    wanted = set(free)
    found = []
    strings = all_signs(centres, wanted)
    for i, atom in enumerate(centres.atoms):
        if atom not in wanted:
            continue
        for signs in strings:
            turned = (*signs[:i], -signs[i], *signs[i + 1 :])
            if not any(m.proper and m.apply(signs) == turned for m in centres.maps):
                found.append(atom)
                break
    return tuple(found)


def with_configuration(structure: Structure, centres: Centres, signs: Signs, shown: Iterable[int]) -> Structure:
    """The structure with the configuration of a sign string written at the shown centres."""
    geometry = centres.geometry_of(signs)
    wanted = set(shown)
    configurations = list(structure.configurations)
    for atom in centres.atoms:
        if atom in wanted:
            order = geometry.orders[atom]
            configurations[atom] = Configuration(tuple(AtomIndex(n) for n in order), True)
        else:
            configurations[atom] = None
    return replace(structure, configurations=tuple(configurations))
