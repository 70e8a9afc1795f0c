"""Hydrogens on ring carbons: which there are, where they point, and which are alike by symmetry."""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.contacts import position_of
from ringstrain.geometry import Geometry, Site
from ringstrain.results import State, SystemResult
from ringstrain.symmetry import Operation, operations

_SHORT = {"axial": "ax", "equatorial": "eq", "isoclinal": "iso"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Hydrogen:
    """One hydrogen on a ring carbon.

    Attributes
    ----------
    atom
        The carbon it stands on.
    place
        The stand-in for it in the carbon's neighbour list, which tells two hydrogens of one carbon apart.
    label
        H, the atom number from 1, and how it points in the favoured state.
    orientation
        How it points in each state, by state id: ``ax``, ``eq``, ``iso``, ``flat`` (on a flat carbon), or both words
        when two rings differ.
    alike
        Number of the set of hydrogens that symmetry and exchange make alike.
    """

    atom: int
    place: int
    label: str
    orientation: tuple[tuple[str, str], ...]
    alike: int

    @property
    def key(self) -> tuple[int, int]:
        """Carbon and place."""
        return self.atom, self.place


def find_hydrogens(result: SystemResult, first_set: int = 0) -> tuple[Hydrogen, ...]:
    """Every hydrogen on a carbon of a ring system, in atom order, axial before equatorial.

    Parameters
    ----------
    result
        The ring system.
    first_set
        Number of the first set of alike hydrogens.

    Returns
    -------
    tuple of Hydrogen
        Deuterium and tritium are not among them.
    """
    geometry = result.states[0].detail.shapes.geometry
    keys = [key for atom in result.system.atoms for key in _keys_on(geometry, atom)]
    sets = _alike_sets(result, geometry, keys)
    numbers: dict[int, int] = {}
    drafts = []
    for key in keys:
        orientation = tuple((state.id, orient(state, key)) for state in result.states)
        number = numbers.setdefault(sets[key], first_set + len(numbers))
        drafts.append((key, orientation, number))
    drafts.sort(key=lambda draft: (draft[0][0], draft[1][0][1]))
    taken: set[str] = set()
    found = []
    for (atom, place), orientation, number in drafts:
        word = orientation[0][1]
        label = f"H{atom + 1}" + ("" if word == "flat" else word)
        while label in taken:
            label += "'"
        taken.add(label)
        found.append(Hydrogen(atom=atom, place=place, label=label, orientation=orientation, alike=number))
    return tuple(found)


def orient(state: State, key: tuple[int, int]) -> str:
    """How a hydrogen points in a state; both words joined when it is axial to one ring and equatorial to another."""
    shapes = state.detail.shapes
    words = []
    for site in sites_of(shapes.geometry, key):
        word = _SHORT[position_of(shapes, site)] if site.face else "flat"
        if word not in words:
            words.append(word)
    return "/".join(sorted(words))


def sites_of(geometry: Geometry, key: tuple[int, int]) -> list[Site]:
    """The sites of a hydrogen, one for each ring of its carbon."""
    atom, place = key
    found: list[Site] = []
    for ring in geometry.system.rings_of[atom]:
        index = geometry.system.rings[ring].place(atom)
        found.extend(site for site in geometry.sites[ring][index] if site.neighbour == place)
    return found


def _keys_on(geometry: Geometry, atom: int) -> list[tuple[int, int]]:
    """The hydrogens of a ring atom when it is a carbon."""
    record = geometry.structure.atoms[atom]
    if record.number != 6:
        return []
    return [(atom, -1 - i) for i in range(record.hydrogens)]


def _alike_sets(result: SystemResult, geometry: Geometry, keys: list[tuple[int, int]]) -> dict[tuple[int, int], int]:
    """Set of each hydrogen: those that an operation of the labelled molecule carries onto each other.

    Every operation of the configuration carries the whole ensemble of states onto itself, so that averages over
    states are equal.  Mirror images count, since spectra in achiral solvents do not tell them apart.
    """
    parent = {key: key for key in keys}

    def root(key: tuple[int, int]) -> tuple[int, int]:
        while parent[key] != key:
            key = parent[key]
        return key

    for operation in operations(geometry, result.groups):
        for key in keys:
            image = _image(geometry, operation, key)
            if image is not None and image in parent:
                first, second = sorted((root(key), root(image)), reverse=True)
                parent[second] = first
    order: dict[tuple[int, int], int] = {}
    return {key: order.setdefault(root(key), len(order)) for key in keys}


def _image(geometry: Geometry, operation: Operation, key: tuple[int, int]) -> tuple[int, int] | None:
    """Where an operation carries a hydrogen."""
    site = sites_of(geometry, key)[0]
    landed = operation.mapping.rings[site.ring]
    face = operation.sign * landed.direction * site.face
    for target in geometry.sites[landed.ring][landed.places[site.place]]:
        if target.face == face and target.neighbour < 0:
            return target.ring_atom, target.neighbour
    return None
