"""What stands where in a state, and which atoms come close: facts of geometry, not yet priced."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import Literal

from ringstrain.geometry import GAUCHE, Geometry, Path, Site, mean_angle, wrap
from ringstrain.states import RingShape, Shapes, Torsions
from ringstrain.structure.records import Structure

Position = Literal["axial", "equatorial", "isoclinal"]
ContactKind = Literal[
    "gauche",
    "syn-axial X//H",
    "syn-axial X//Y",
    "syn-axial X//lone pair",
    "peri",
    "geminal",
    "eclipsed",
    "transannular",
]
Occupant = Literal["atom", "hydrogen", "lone pair"]


@dataclass(frozen=True, slots=True)
class Contact:
    """One close approach.

    Attributes
    ----------
    kind
        What it is.
    atoms
        The path a-b-c-d of a gauche contact, the chain of a syn-axial or peri one (ends first and last; a
        hydrogen or lone pair is -1), the two groups of a geminal pair around their ring atom, or the two atoms
        of a bicyclo[3.3.1] skeleton that face each other (transannular).
    torsion
        Torsion of a gauche or eclipsed path [degree], else 0.
    """

    kind: ContactKind
    atoms: tuple[int, ...]
    torsion: float = 0.0


@dataclass(frozen=True, slots=True)
class Placed:
    """A site and where it points in a state."""

    site: Site
    position: Position
    occupant: Occupant


@dataclass(frozen=True, slots=True)
class Survey:
    """All that geometry says about one state.

    Attributes
    ----------
    placed
        Every exocyclic site of a tetrahedral atom, in ring order.
    contacts
        All contacts, each once.
    """

    placed: tuple[Placed, ...]
    contacts: tuple[Contact, ...]

    def of_kind(self, kind: ContactKind) -> tuple[Contact, ...]:
        """Contacts of one kind."""
        return tuple([c for c in self.contacts if c.kind == kind])


def occupant_of(structure: Structure, site: Site) -> Occupant:
    """What stands on a site; isotopic hydrogen counts as hydrogen."""
    if site.neighbour >= 0:
        return "hydrogen" if structure.atoms[site.neighbour].number == 1 else "atom"
    return "hydrogen" if structure.atoms[site.ring_atom].hydrogens > -1 - site.neighbour else "lone pair"


@lru_cache(maxsize=256)
def _positions(torsions: Torsions) -> tuple[tuple[Position, Position, Position], ...]:
    """Position of the site of face 0, +1 and -1 (in this order, so that a face is an index) on each atom of a shape."""
    table: list[tuple[Position, Position, Position]] = []
    for place in range(6):
        ahead, behind = torsions[place], torsions[place - 1]
        up = abs(wrap(ahead + 120.0)) + abs(wrap(behind - 120.0))
        down = abs(wrap(ahead - 120.0)) + abs(wrap(behind + 120.0))
        if abs(up - down) < 1.0:
            table.append(("equatorial", "isoclinal", "isoclinal"))
        elif up < down:
            table.append(("equatorial", "axial", "equatorial"))
        else:
            table.append(("equatorial", "equatorial", "axial"))
    return tuple(table)


def position_of(state: Shapes, site: Site) -> Position:
    """Axial is the site with the smaller sum of its two ring torsions; equal sums are isoclinal."""
    return _positions(state.rings[site.ring].torsions)[site.place][site.face]


def survey(state: Shapes) -> Survey:
    """Positions and contacts of a state.

    Parameters
    ----------
    state
        Shape of every ring.

    Returns
    -------
    Survey
        Each contact once, in a fixed order.
    """
    geometry = state.geometry
    placed = _placed(state)
    gauche, eclipsed = _close_paths(state)
    contacts = [Contact("gauche", path.atoms, torsion) for path, torsion in gauche]
    contacts.extend(eclipsed)
    contacts.extend(_syn_axial(state, placed))
    if len(geometry.system.rings) > 1:
        contacts.extend(_peri(geometry, gauche))
    contacts.extend(_geminal(geometry))
    return Survey(placed, tuple(contacts))


def _placed(state: Shapes) -> tuple[Placed, ...]:
    """Where every site points."""
    found = []
    for number, cards in enumerate(_cards(state.geometry)):
        table = _positions(state.rings[number].torsions)
        for place, face, made in cards:
            found.append(made[table[place][face]])
    return tuple(found)


_Card = tuple[int, int, dict[Position, Placed]]


@lru_cache(maxsize=4)
def _cards(geometry: Geometry) -> list[list[_Card]]:
    """For each ring the place and face of its sites, and their records by position."""
    return [
        [
            (site.place, site.face, _pointing(site, occupant_of(geometry.structure, site)))
            for sites in ring
            for site in sites
            if not _is_set_aside(geometry, site)
        ]
        for ring in geometry.sites
    ]


@lru_cache(maxsize=4096)
def _pointing(site: Site, occupant: Occupant) -> dict[Position, Placed]:
    """The records of a site that many states and molecules share."""
    positions: tuple[Position, ...] = ("axial", "equatorial", "isoclinal")
    return {position: Placed(site, position, occupant) for position in positions}


def _is_set_aside(geometry: Geometry, site: Site) -> bool:
    """True for sites that are neither axial nor equatorial: on a flat ring bond, or doubly bound to a planar atom."""
    ring = geometry.system.rings[site.ring]
    if ring.flat_bond is not None and site.place in (ring.flat_bond, (ring.flat_bond + 1) % 6):
        return True
    if site.face:
        return False
    return site.neighbour < 0 or geometry.structure.bond(site.ring_atom, site.neighbour).order == 2


def _close_paths(state: Shapes) -> tuple[list[tuple[Path, float]], list[Contact]]:
    """Gauche paths with their torsions, and outside groups that eclipse each other in boats and half-chairs."""
    gauche: list[tuple[Path, float]] = []
    eclipsed: list[Contact] = []
    rings = state.rings
    all_chairs = all(ring.shape == "chair" for ring in rings)  # a group faces no other there, but an sp2 plane
    members = state.geometry.system.atom_set
    low, high = GAUCHE
    for path in state.geometry.paths:
        torsion = _torsion_of(rings, path)
        if low <= torsion < high or -high < torsion <= -low:
            gauche.append((path, torsion))
        elif not all_chairs and -low < torsion < low and path.atoms[0] not in members and path.atoms[3] not in members:
            eclipsed.append(Contact("eclipsed", path.atoms, torsion))
    return gauche, eclipsed


def _torsion_of(rings: tuple[RingShape, ...], path: Path) -> float:
    """Torsion of a path in a state [degree]: the mean over the rings that share its bond."""
    number, bond, offset = path.views[0]
    torsion = rings[number].torsions[bond] + offset
    if len(path.views) > 1:
        return mean_angle([torsion, *[rings[n].torsions[p] + o for n, p, o in path.views[1:]]])
    return torsion - 360.0 if torsion > 180.0 else torsion + 360.0 if torsion <= -180.0 else torsion


def _syn_axial(state: Shapes, placed: tuple[Placed, ...]) -> list[Contact]:
    """Pairs of axial sites on ring atoms i and i+2 of one ring, on one face."""
    pointing = [item for item in placed if item.position == "axial"]
    if all(item.occupant != "atom" for item in pointing):
        return []
    axial = {(item.site.ring, item.site.place): item for item in pointing}
    found = []
    for (ring, place), first in axial.items():
        second = axial.get((ring, (place + 2) % 6))
        if second is None or (first.occupant != "atom" and second.occupant != "atom"):
            continue
        if first.site.face != second.site.face:
            continue
        kinds = {first.occupant, second.occupant}
        middle = state.geometry.system.rings[ring].atoms[(place + 1) % 6]
        ends = [first.site.neighbour, second.site.neighbour]
        atoms = (
            ends[0] if first.occupant == "atom" else -1,
            first.site.ring_atom,
            middle,
            second.site.ring_atom,
            ends[1] if second.occupant == "atom" else -1,
        )
        kind: ContactKind = (
            "syn-axial X//H"
            if "hydrogen" in kinds
            else "syn-axial X//lone pair"
            if "lone pair" in kinds
            else "syn-axial X//Y"
        )
        if kind == "syn-axial X//Y" and state.geometry.share_a_ring(*atoms):
            continue
        found.append(Contact(kind, atoms))
    return found


def _peri(geometry: Geometry, gauche: list[tuple[Path, float]]) -> list[Contact]:
    """Chains X-a-b-c-Y over bonds of two rings, folded so that X and Y face each other."""
    starts: dict[tuple[int, int, int], list[tuple[int, float]]] = {}
    for path, torsion in gauche:
        a, b, c, d = path.atoms
        starts.setdefault((b, c, d), []).append((a, torsion))
        starts.setdefault((c, b, a), []).append((d, torsion))
    found = []
    members = geometry.system.atom_set
    for (a, b, c), ends in starts.items():
        if a > c or a not in members or b not in members or c not in members or geometry.share_a_ring(a, b, c):
            continue
        if (min(b, c), max(b, c)) not in geometry.ring_bonds:
            continue
        for x, first in ends:
            for y, second in starts.get((c, b, a), ()):
                if x != y and first * second < 0 and not geometry.share_a_ring(x, a, b, c, y):
                    found.append(Contact("peri", (x, a, b, c, y)))
    return _merge_transannular(found, members)


def _merge_transannular(found: list[Contact], members: frozenset[int]) -> list[Contact]:
    """Two ring atoms that face each other along two chains are one transannular contact (bicyclo[3.3.1])."""
    if len(found) < 2:
        return found
    chains: dict[tuple[int, int], int] = {}
    for contact in found:
        ends = contact.atoms[0], contact.atoms[-1]
        chains[min(ends), max(ends)] = chains.get((min(ends), max(ends)), 0) + 1
    double = {ends for ends, count in chains.items() if count > 1 and set(ends) <= members}
    kept = [c for c in found if (min(c.atoms[0], c.atoms[-1]), max(c.atoms[0], c.atoms[-1])) not in double]
    return kept + [Contact("transannular", ends) for ends in sorted(double)]


@lru_cache(maxsize=4)
def _geminal(geometry: Geometry) -> list[Contact]:
    """Two outside groups on one ring atom; the same in every state."""
    found = []
    structure, members = geometry.structure, geometry.system.atom_set
    for atom in geometry.system.atoms:
        if atom not in geometry.orders:
            continue
        outer = [int(n) for n in structure.neighbours[atom] if n not in members and structure.atoms[n].number != 1]
        if (
            len(outer) == 2
            and len(structure.neighbours[atom]) == 4
            and not geometry.share_a_ring(outer[0], atom, outer[1])
        ):
            found.append(Contact("geminal", (outer[0], atom, outer[1])))
    return found
