"""Faces and torsions of a ring system, with no coordinates.

Everything rests on one sign.  Walk a ring in its stored order; an exocyclic site of a tetrahedral ring atom then
has face +1 or -1, the same for all sites on one side of the ring.  With tau the endocyclic torsion of the bond
(v, next v), the site makes the torsion tau + 120 face with the ring path ahead and, mirrored, the torsion of the
bond behind - 120 face with the ring path behind.  A site on a planar atom stands at 180 to both.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache
from itertools import product

from ringstrain.ringgraph import RingSystem
from ringstrain.structure.records import IMPLICIT, SECOND_IMPLICIT, Structure

GAUCHE = (37.0, 82.0)
ANTI = 142.0


def mean_angle(angles: list[float]) -> float:
    """Mean of angles that lie close together on the circle [degree]."""
    first = angles[0]
    return wrap(first + sum([wrap(angle - first) for angle in angles]) / len(angles))


def wrap(angle: float) -> float:
    """An angle brought into -180 < angle <= 180 [degree]."""
    angle %= 360.0
    return angle - 360.0 if angle > 180.0 else angle


def is_gauche(torsion: float) -> bool:
    """True when a torsion [degree] falls into the gauche bin."""
    return GAUCHE[0] <= abs(torsion) < GAUCHE[1]


@dataclass(frozen=True, slots=True)
class Site:
    """One exocyclic place on a ring atom, seen from one ring.

    Attributes
    ----------
    ring_atom
        The ring atom.
    ring
        Ring number within the system.
    place
        Position of the ring atom in the ring.
    neighbour
        Atom on the site, or :data:`IMPLICIT` / :data:`SECOND_IMPLICIT` for a hydrogen or lone pair.
    face
        +1 or -1, 0 on a planar atom.
    """

    ring_atom: int
    ring: int
    place: int
    neighbour: int
    face: int

    @property
    def offset_ahead(self) -> float:
        """What to add to the torsion of the bond ahead [degree]."""
        return 120.0 * self.face if self.face else 180.0

    @property
    def offset_behind(self) -> float:
        """What to add to the torsion of the bond behind [degree]."""
        return -120.0 * self.face if self.face else 180.0


@lru_cache(maxsize=4096)
def _site(ring_atom: int, ring: int, place: int, neighbour: int, face: int) -> Site:
    """One shared record for a place that many molecules have."""
    return Site(ring_atom, ring, place, neighbour, face)


@dataclass(frozen=True, slots=True)
class Path:
    """A heavy-atom path a-b-c-d across a ring bond, with what it takes to know its torsion.

    Attributes
    ----------
    atoms
        a, b, c, d.
    views
        For each ring that holds the bond b-c: ring number, place of the bond in it, and the torsion of the path
        less that of the ring bond [degree]. Rings of different shape may differ by up to the closing tolerance;
        the mean counts, so that the order of the atoms does not.
    """

    atoms: tuple[int, int, int, int]
    views: tuple[tuple[int, int, float], ...]


@dataclass(frozen=True, kw_only=True, eq=False)
class Geometry:
    """A ring system with a configuration: the faces of all its sites.

    Attributes
    ----------
    structure, system
        What it belongs to.
    orders
        For each tetrahedral ring atom its four neighbours so that, seen from the first, the others run
        clockwise.
    """

    structure: Structure
    system: RingSystem
    orders: dict[int, tuple[int, int, int, int]]

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Geometry):
            return NotImplemented
        return (self.structure, self.system, self.orders) == (other.structure, other.system, other.orders)

    def __hash__(self) -> int:
        return hash((self.structure.text, self.system.atoms))

    @cached_property
    def sites(self) -> tuple[tuple[tuple[Site, ...], ...], ...]:
        """Sites by ring and place: two on a tetrahedral atom, one or none on a planar one."""
        return tuple(
            [tuple([self._sites_at(number, place) for place in range(6)]) for number in range(len(self.system.rings))]
        )

    def _sites_at(self, number: int, place: int) -> tuple[Site, ...]:
        atoms = self.system.rings[number].atoms
        atom, behind, ahead = atoms[place], atoms[place - 1], atoms[(place + 1) % 6]
        order = self.orders.get(atom)
        if order is None:
            outer = [n for n in self.structure.neighbours[atom] if n not in (behind, ahead)]
            sites = [_site(atom, number, place, int(n), 0) for n in outer]
            if not sites and self.structure.atoms[atom].hydrogens:
                sites = [_site(atom, number, place, IMPLICIT, 0)]
            return tuple(sites)
        first, second = [n for n in order if n != behind and n != ahead]
        sign = _sign(order, ahead, behind)
        return _site(atom, number, place, first, sign), _site(atom, number, place, second, -sign)

    def offset_ahead(self, number: int, place: int, neighbour: int) -> float:
        """Offset of the torsion from a neighbour of the atom at ``place`` along the bond ahead [degree]."""
        if neighbour == self.system.rings[number].atoms[place - 1]:
            return 0.0
        return next(s.offset_ahead for s in self.sites[number][place] if s.neighbour == neighbour)

    def offset_behind(self, number: int, place: int, neighbour: int) -> float:
        """Offset of the torsion to a neighbour of the atom at ``place`` along the bond behind [degree]."""
        if neighbour == self.system.rings[number].atoms[(place + 1) % 6]:
            return 0.0
        return next(s.offset_behind for s in self.sites[number][place] if s.neighbour == neighbour)

    @cached_property
    def ring_bonds(self) -> dict[tuple[int, int], tuple[tuple[int, int], ...]]:
        """For each ring bond (lower atom first) the rings and places it stands at."""
        table: dict[tuple[int, int], list[tuple[int, int]]] = {}
        for number, ring in enumerate(self.system.rings):
            for place in range(6):
                a, b = ring.atoms[place], ring.atoms[(place + 1) % 6]
                table.setdefault((min(a, b), max(a, b)), []).append((number, place))
        return {bond: tuple(places) for bond, places in table.items()}

    def path_offset(self, number: int, place: int, first: int, last: int) -> float:
        """Torsion first-b-c-last less that of the ring bond b-c at ``place`` [degree]."""
        return self.offset_ahead(number, place, first) + self.offset_behind(number, (place + 1) % 6, last)

    @cached_property
    def paths(self) -> tuple[Path, ...]:
        """Heavy-atom paths across ring bonds whose four atoms do not all lie in one ring."""
        found = []
        rings_at = self._rings_at
        around = self.structure.neighbours
        for (b, c), places in self.ring_bonds.items():
            if len(around[b]) == 2 and len(around[c]) == 2:  # its one path runs along the ring
                continue
            bond = self.structure.bond(b, c)
            if bond.order != 1 or bond.aromatic:
                continue
            views = [self._view(number, place, b) for number, place in places]
            fronts = [a for a in views[0][2] if a != c and self._may_end_at(a, b)]
            backs = [d for d in views[0][3] if d != b and self._may_end_at(d, c)]
            shared = rings_at[b] & rings_at[c]
            for a in fronts:
                common = shared & rings_at[a]
                for d in backs:
                    if a == d or (common and common & rings_at[d]):
                        continue
                    offsets = tuple([(n, p, wrap(front[a] + back[d])) for n, p, front, back in views])
                    found.append(Path((a, b, c, d), offsets))
        return tuple(found)

    def _may_end_at(self, outer: int, ring_atom: int) -> bool:
        """True for a heavy neighbour at a tetrahedral site: one tied back in a three-membered ring stands at none."""
        if outer < 0 or self.structure.atoms[outer].number == 1:
            return False
        around = self.structure.neighbours
        return not self._has_small_rings or not any(outer in around[n] for n in around[ring_atom] if n != outer)

    @cached_property
    def _has_small_rings(self) -> bool:
        """True when the molecule has a three-membered ring."""
        return any(len(ring) == 3 for ring in self.structure.rings)

    def _view(self, number: int, place: int, b: int) -> tuple[int, int, dict[int, float], dict[int, float]]:
        """A ring bond seen from one ring: offsets of the neighbours of b and of those of its partner."""
        ring = self.system.rings[number].atoms
        following = (place + 1) % 6
        ahead = self._ends(number, place, ahead=True)
        behind = self._ends(number, following, ahead=False)
        return (number, place, ahead, behind) if ring[place] == b else (number, place, behind, ahead)

    def _ends(self, number: int, place: int, *, ahead: bool) -> dict[int, float]:
        """Neighbours of a ring atom but the one across the bond, with their offsets along it [degree]."""
        ring = self.system.rings[number].atoms
        back = ring[place - 1] if ahead else ring[(place + 1) % 6]
        ends = {back: 0.0}
        for site in self.sites[number][place]:
            ends[site.neighbour] = site.offset_ahead if ahead else site.offset_behind
        return ends

    @cached_property
    def _rings_at(self) -> list[frozenset[int]]:
        """Numbers of all rings, of any size, that each atom belongs to."""
        table: list[set[int]] = [set() for _ in self.structure.atoms]
        cycles: list[tuple[int, ...]] = [tuple(ring) for ring in self.structure.rings]
        known = {frozenset(cycle) for cycle in cycles}
        cycles.extend(ring.atoms for ring in self.system.rings if frozenset(ring.atoms) not in known)
        for number, cycle in enumerate(cycles):
            for atom in cycle:
                table[atom].add(number)
        return [frozenset(numbers) for numbers in table]

    def share_a_ring(self, *atoms: int) -> bool:
        """True when all atoms belong to one ring of any size."""
        common = self._rings_at[atoms[0]]
        for atom in atoms[1:]:
            common &= self._rings_at[atom]
        return bool(common)


def _sign(order: tuple[int, ...], first: int, second: int) -> int:
    """+1 when moving two neighbours to the front, the others left in their order, is an even permutation."""
    i, j = order.index(first), order.index(second)
    return -1 if (i + j - (i < j)) % 2 else 1


def neighbour_orders(
    structure: Structure, system: RingSystem
) -> tuple[dict[int, tuple[int, int, int, int]], tuple[int, ...]]:
    """Clockwise neighbour orders of the tetrahedral ring atoms, and the atoms whose order is a guess.

    Parameters
    ----------
    structure
        The molecule.
    system
        The ring system.

    Returns
    -------
    orders
        By ring atom.
    open_atoms
        Ring atoms without a given configuration whose two orders are not alike (hydrogens and equal atoms
        aside, see :func:`ringstrain.stereo.open_centres`).
    """
    orders: dict[int, tuple[int, int, int, int]] = {}
    open_atoms: list[int] = []
    for atom in system.atoms:
        if system.kinds[atom] == "sp2":
            continue
        around = [int(n) for n in structure.neighbours[atom]]
        if len(around) > 4:
            continue
        spare = 4 - len(around)
        around += [int(IMPLICIT), int(SECOND_IMPLICIT)][:spare]
        configuration = structure.configurations[atom]
        if configuration is not None and spare < 2:
            order = tuple(int(n) for n in configuration.neighbours)
            if not configuration.clockwise:
                order = (order[0], order[1], order[3], order[2])
            orders[atom] = (order[0], order[1], order[2], order[3])
            continue
        orders[atom] = (around[0], around[1], around[2], around[3])
        if spare < 2 and system.kinds[atom] != "inverting":
            open_atoms.append(atom)
    return orders, tuple(open_atoms)


def flipped(order: tuple[int, int, int, int]) -> tuple[int, int, int, int]:
    """The mirror image of a neighbour order."""
    return order[0], order[1], order[3], order[2]


def with_choices(geometry: Geometry, atoms: tuple[int, ...]) -> list[tuple[Geometry, tuple[int, ...]]]:
    """The geometry with every combination of the given atoms mirrored, and which were."""
    outcomes: list[tuple[Geometry, tuple[int, ...]]] = []
    for choice in product((False, True), repeat=len(atoms)):
        changed = tuple(a for a, flip in zip(atoms, choice, strict=True) if flip)
        if not changed:
            outcomes.append((geometry, ()))
            continue
        orders = dict(geometry.orders)
        for atom in changed:
            orders[atom] = flipped(orders[atom])
        outcomes.append((Geometry(structure=geometry.structure, system=geometry.system, orders=orders), changed))
    return outcomes
