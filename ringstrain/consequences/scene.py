"""A priced ring system seen by a reaction: what stands where, at which torsion, in which state and at what cost."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Literal

from ringstrain.analysis import Analysis, State, SystemResult, analyze
from ringstrain.consequences.finding import Verdict
from ringstrain.contacts import occupant_of
from ringstrain.equilibrium import difference_sigma, mixture_energy, weights
from ringstrain.errors import RingstrainError
from ringstrain.geometry import ANTI, Geometry, Site, wrap
from ringstrain.structure.read import read
from ringstrain.structure.records import IMPLICIT, AtomIndex, Configuration, Structure
from ringstrain.tables.records import Tables
from ringstrain.units import R_KCAL

#: States within this of the lowest are as good as it [kcal/mol].
LEVEL = 0.05
Place = Literal["axial", "equatorial", "isoclinal"]


@dataclass(frozen=True, kw_only=True)
class Scene:
    """One ring system of an analysis.

    Attributes
    ----------
    analysis
        The analysis; never changed.
    number
        Number of the ring system.
    tables
        Price tables for products; those of the package when None.
    """

    analysis: Analysis
    number: int
    tables: Tables | None = None

    def price(self, structure: Structure) -> Analysis | None:
        """Another structure priced under the same conditions; None when the model does not cover it."""
        try:
            return analyze(
                structure,
                temperature_K=self.analysis.temperature_K,
                medium=self.analysis.medium,
                tables=self.tables,
            )
        except RingstrainError:
            return None

    def energy(self, smiles: str) -> float | None:
        """Free energy of a product over its states [kcal/mol]; None when the model does not cover it."""
        priced = self.price(read(smiles))
        if priced is None or any(result.states[0].lower_bound for result in priced.ring_systems):
            return None
        return math.fsum(
            mixture_energy([state.energy_kcal for state in result.states], priced.temperature_K)
            for result in priced.ring_systems
        )

    def equilibrium_shares(self, products: Sequence[str]) -> tuple[float, ...] | None:
        """Shares of isomeric products after equilibration [-]; None when one of them has no price."""
        energies = [self.energy(smiles) for smiles in products]
        known = [e for e in energies if e is not None]
        if not products or len(known) < len(products):
            return None
        return tuple(weights(known, self.analysis.temperature_K))

    @property
    def structure(self) -> Structure:
        """The molecule."""
        return self.analysis.structure

    @cached_property
    def settled(self) -> Structure:
        """The molecule with the relative configuration the states were made with.

        A centre that was left open because it distinguishes nothing (C4 of a 4-substituted cyclohexanone) does so
        once a product forms.
        """
        configurations = list(self.structure.configurations)
        for atom, order in self.geometry.orders.items():
            plain = sum(n < 0 or self.structure.atoms[n].number == 1 for n in order)
            if configurations[atom] is None and plain < 2 and self.result.system.kinds[atom] != "inverting":
                configurations[atom] = Configuration(tuple(IMPLICIT if n < 0 else AtomIndex(n) for n in order), True)
        return replace(self.structure, configurations=tuple(configurations))

    @property
    def result(self) -> SystemResult:
        """States of the ring system."""
        return self.analysis.ring_systems[self.number]

    @property
    def states(self) -> tuple[State, ...]:
        """All states, lowest first."""
        return self.result.states

    @property
    def geometry(self) -> Geometry:
        """Faces of all sites."""
        return self.states[0].detail.shapes.geometry

    @cached_property
    def shares(self) -> dict[str, float]:
        """Population of each state by id; known parts decide where a contact has no price."""
        if all(state.population is not None for state in self.states):
            return {state.id: state.population or 0.0 for state in self.states}
        found = weights([state.energy_kcal for state in self.states], self.analysis.temperature_K)
        return {state.id: share for state, share in zip(self.states, found, strict=True)}

    @property
    def is_rough(self) -> bool:
        """True when a contact without price enters the populations."""
        return any(state.lower_bound for state in self.states)

    def cost(self, state: State) -> float:
        """Energy above the lowest state [kcal/mol]."""
        return state.energy_kcal - self.states[0].energy_kcal

    def cost_sigma(self, state: State) -> float:
        """Standard uncertainty of the cost [kcal/mol]."""
        own, lowest = (s.detail.ledger.variables for s in (state, self.states[0]))
        return difference_sigma(own, lowest)

    def sigma_ln(self, state: State, *more: float) -> float:
        """Standard uncertainty of ln of the state's population, and of further factors [-]."""
        rt = R_KCAL * self.analysis.temperature_K
        own = (1.0 - self.shares[state.id]) * self.cost_sigma(state) / rt
        return math.sqrt(own * own + sum(s * s for s in more))

    def verdict(self, state: State) -> Verdict:
        """What it takes to reach a state."""
        if has_boat(state) and self.cost(state) >= LEVEL:
            return "needs a boat"
        return "open" if self.cost(state) < LEVEL or state.equivalent_to == self.states[0].id else "needs the flip"

    @property
    def ring_atoms(self) -> tuple[int, ...]:
        """All ring atoms, sorted."""
        return self.result.system.atoms

    def ring_neighbours(self, atom: int) -> tuple[int, ...]:
        """Neighbours of a ring atom along six-membered rings of the system."""
        return tuple(
            int(n) for n in self.structure.neighbours[atom] if (min(atom, n), max(atom, n)) in self.geometry.ring_bonds
        )

    def outer(self, atom: int) -> tuple[int, ...]:
        """Atoms on a ring atom that belong to no ring of the system, isotopic hydrogen left out."""
        members = self.result.system.atom_set
        return tuple(
            int(n) for n in self.structure.neighbours[atom] if n not in members and self.structure.atoms[n].number != 1
        )

    def sites(self, atom: int) -> Iterator[Site]:
        """Sites of a ring atom, ring by ring."""
        for ring in self.result.system.rings_of[atom]:
            yield from self.geometry.sites[ring][self.result.system.rings[ring].place(atom)]

    def hydrogens(self, atom: int) -> tuple[int, ...]:
        """Neighbour codes of the hydrogens of a tetrahedral ring atom (negative for plain ones)."""
        return tuple(
            dict.fromkeys(
                site.neighbour
                for site in self.sites(atom)
                if site.face and occupant_of(self.structure, site) == "hydrogen"
            )
        )

    def is_tetrahedral(self, atom: int) -> bool:
        """True for a ring atom with two faces."""
        return atom in self.geometry.orders

    def face(self, atom: int, neighbour: int, ring: int | None = None) -> int:
        """Face of a neighbour of a ring atom in one of its rings; 0 when it is planar or in that ring."""
        for site in self.sites(atom):
            if site.neighbour == neighbour and (ring is None or site.ring == ring):
                return site.face
        return 0

    def same_face(self, a: int, x: int, b: int, y: int) -> bool:
        """True when x on a and y on b stand on one face of a ring that holds both ring atoms."""
        for ring in self.result.system.rings_of[a]:
            if ring in self.result.system.rings_of[b]:
                first, second = self.face(a, x, ring), self.face(b, y, ring)
                if first and second:
                    return first == second
        return False

    def position(self, state: State, atom: int, neighbour: int) -> Place:
        """Where a neighbour points; axial to any of its rings counts as axial."""
        found = [
            p.position for p in state.detail.facts.placed if p.site.neighbour == neighbour and p.site.ring_atom == atom
        ]
        if "axial" in found:
            return "axial"
        return "isoclinal" if "isoclinal" in found else "equatorial"

    def torsion(self, state: State, x: int, a: int, b: int, y: int) -> float:
        """Torsion x-a-b-y across a ring bond [degree]; negative codes stand for hydrogens."""
        geometry = state.detail.shapes.geometry
        ring, place = geometry.ring_bonds[(min(a, b), max(a, b))][0]
        start = geometry.system.rings[ring].atoms[place]
        first, last = (x, y) if start == a else (y, x)
        return wrap(state.detail.shapes.rings[ring].torsions[place] + geometry.path_offset(ring, place, first, last))

    def is_anti(self, state: State, x: int, a: int, b: int, y: int) -> bool:
        """True when the torsion x-a-b-y is at least 142 degrees."""
        return abs(self.torsion(state, x, a, b, y)) >= ANTI

    def syn_axial(self, state: State, atom: int, face: int, ring: int) -> tuple[int, ...]:
        """Non-hydrogen axial neighbours on one face at the two ring atoms next but one."""
        atoms = self.result.system.rings[ring].atoms
        place = self.result.system.rings[ring].place(atom)
        watched = (atoms[(place + 2) % 6], atoms[place - 2])
        return tuple(
            n
            for n, ring_atom, number, where in state.sites
            if number == ring
            and ring_atom in watched
            and where == "axial"
            and n >= 0
            and self.structure.atoms[n].number != 1
            and self.face(ring_atom, n, ring) == face
        )

    def relief(self, state: State, leaving: int, hydrogen: tuple[int, int] | None = None) -> float:
        """Strain that goes with a leaving group, and with the hydrogen (ring atom, code) opposite to it [kcal/mol].

        Lines that name the leaving group go whole; a group syn-axial to a departing atom loses that half of its
        axial price.
        """
        total = 0.0
        freed: list[int] = []
        for contact in state.detail.facts.contacts:
            if contact.kind == "syn-axial X//Y" and leaving in (contact.atoms[0], contact.atoms[4]):
                freed.append(contact.atoms[4] if contact.atoms[0] == leaving else contact.atoms[0])
            if contact.kind == "syn-axial X//H" and hydrogen is not None:
                x, near, _, far, y = contact.atoms
                group, other = (x, far) if x >= 0 else (y, near)
                if other == hydrogen[0] and self.same_face(near if group == x else far, group, *hydrogen):
                    freed.append(group)
        for line in state.lines:
            if line.value_kcal is None:
                continue
            each = line.value_kcal * line.count / max(len(line.atoms), 1)
            total += each * sum(leaving in atoms for atoms in line.atoms)
            if line.rule == "A-value":
                total += 0.5 * each * sum(atoms == (atom,) for atoms in line.atoms for atom in freed if atom != leaving)
        return total

    def axial_face(self, state: State, atom: int, ring: int) -> int:
        """Face of the axial direction at any ring atom, planar ones included."""
        return axial_face(state.detail.shapes.rings[ring].torsions, self.result.system.rings[ring].place(atom))

    def describe(self, state: State, atom: int, neighbour: int) -> str:
        """A group and where it stands, such as ``axial Cl 9``."""
        name = "H" if neighbour < 0 else f"{self.structure.atoms[neighbour].element} {neighbour + 1}"
        suffix = f" on C {atom + 1}" if neighbour < 0 else ""
        return f"{self.position(state, atom, neighbour)} {name}{suffix}"


def has_boat(state: State) -> bool:
    """True when a ring of the state is a boat or twist-boat."""
    return any("boat" in shape for shape in state.shapes)


def axial_face(torsions: tuple[float, ...], place: int) -> int:
    """Face on which the axial site of a ring atom lies: the one gauche to both ring paths."""
    ahead, behind = torsions[place], torsions[place - 1]
    up = abs(wrap(ahead + 120.0)) + abs(wrap(behind - 120.0))
    down = abs(wrap(ahead - 120.0)) + abs(wrap(behind + 120.0))
    return 1 if up < down else -1


def scenes(analysis: Analysis, tables: Tables | None = None) -> tuple[Scene, ...]:
    """All ring systems of an analysis."""
    return tuple(Scene(analysis=analysis, number=i, tables=tables) for i in range(len(analysis.ring_systems)))


def numbers(*atoms: int) -> str:
    """Atom numbers from 1, in a sentence."""
    return ", ".join(str(a + 1) for a in atoms)
