"""Six-membered rings, how they hang together, and what stands on them.

A ring system is a set of fused or bridged blocks of six-membered rings joined by spiro atoms.  Rings joined
by a bond are separate systems.  Rings of other sizes that share atoms with a system are its companions: they
restrict its states and their atoms count as substituents.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

from ringstrain.errors import OutOfScope
from ringstrain.structure.records import Structure

AtomKind = Literal["sp3", "sp2", "inverting"]
RingKind = Literal["chair", "half-chair"]
#: Elements that may stand in a ring; anything else is a metal or too heavy to price.
RING_ELEMENTS = frozenset({5, 6, 7, 8, 14, 15, 16, 34})
_MACROCYCLE = 8


@dataclass(frozen=True, slots=True, kw_only=True)
class Ring:
    """One six-membered ring.

    Attributes
    ----------
    atoms
        Its atoms in ring order.
    kind
        ``"chair"`` when all but isolated atoms are tetrahedral, ``"half-chair"`` when one bond is flat.
    flat_bond
        Place i of the flat bond (atoms[i], atoms[i+1]) of a half-chair, else None.
    """

    atoms: tuple[int, ...]
    kind: RingKind = "chair"
    flat_bond: int | None = None

    def place(self, atom: int) -> int:
        """Position of an atom in the ring order."""
        return self.atoms.index(atom)


@dataclass(frozen=True, kw_only=True)
class RingSystem:
    """Blocks of six-membered rings joined by spiro atoms.

    Attributes
    ----------
    rings
        The six-membered rings, ordered by their atoms.
    blocks
        Ring numbers of each fused or bridged block.
    atoms
        All ring atoms, sorted.
    kinds
        ``"sp3"``, ``"sp2"`` or ``"inverting"`` (three-coordinate nitrogen) of each ring atom.
    companions
        Rings of five or seven members that share atoms with the system.
    pinned
        Three-membered rings that share a bond with it.
    large
        True when a ring of eight or more members is fused on.
    """

    rings: tuple[Ring, ...]
    blocks: tuple[tuple[int, ...], ...]
    atoms: tuple[int, ...]
    kinds: dict[int, AtomKind]
    companions: tuple[tuple[int, ...], ...] = ()
    pinned: tuple[tuple[int, ...], ...] = ()
    large: bool = False

    @cached_property
    def atom_set(self) -> frozenset[int]:
        """The ring atoms as a set."""
        return frozenset(self.atoms)

    @cached_property
    def rings_of(self) -> dict[int, tuple[int, ...]]:
        """Ring numbers each ring atom belongs to."""
        table: dict[int, list[int]] = {}
        for number, ring in enumerate(self.rings):
            for atom in ring.atoms:
                table.setdefault(atom, []).append(number)
        return {atom: tuple(numbers) for atom, numbers in table.items()}


@dataclass(frozen=True, slots=True)
class Unfit:
    """A six-membered ring the model does not cover, and why."""

    atoms: tuple[int, ...]
    reason: str


def find_ring_systems(structure: Structure) -> tuple[tuple[RingSystem, ...], tuple[str, ...]]:
    """Every ring system of a structure that the model covers, ordered by lowest atom, and remarks.

    Parameters
    ----------
    structure
        The molecule.

    Returns
    -------
    tuple
        Ring systems, and one sentence for each six-membered ring left out.

    Raises
    ------
    OutOfScope
        If no six-membered ring can be analysed.
    """
    fragment = frozenset(structure.fragment)
    sixes = _six_rings(structure, fragment)
    plain = [ring for ring in sixes if not all(structure.atoms[a].aromatic for a in ring)]
    if not plain:
        raise OutOfScope(*_why_nothing(structure, sixes, fragment))
    typed: list[Ring] = []
    unfit: list[Unfit] = []
    kinds: dict[int, AtomKind] = {}
    for atoms in plain:
        outcome = _fit_ring(structure, atoms, kinds)
        if isinstance(outcome, Unfit):
            unfit.append(outcome)
        else:
            typed.append(outcome)
    systems: list[RingSystem] = []
    for rings in _connected(typed):
        system = _build_system(structure, rings, kinds)
        if isinstance(system, Unfit):
            unfit.append(system)
        else:
            systems.append(system)
    if not systems:
        worst = min(unfit, key=lambda u: u.atoms)
        raise OutOfScope(worst.reason, "Ask about a part the model covers.", atoms=worst.atoms)
    systems.sort(key=lambda system: system.atoms[0])
    notes = tuple(f"Ring of atoms {_numbers(u.atoms)} left out: {u.reason}" for u in unfit)
    return tuple(systems), notes


def _numbers(atoms: tuple[int, ...]) -> str:
    """Atom numbers from 1."""
    return ", ".join(str(a + 1) for a in sorted(atoms))


def _why_nothing(structure: Structure, sixes: list[tuple[int, ...]], fragment: frozenset[int]) -> tuple[str, str]:
    """Problem and next step when there is no ring to analyse."""
    rings = [ring for ring in structure.rings if ring[0] in fragment]
    if not rings:
        return "The molecule has no ring.", "Give a molecule with a saturated six-membered ring."
    if sixes:
        return (
            "The six-membered rings are all aromatic and flat.",
            "Give a molecule with a saturated six-membered ring.",
        )
    if _cycles_of_six(structure, {int(a) for ring in rings if len(ring) == 5 for a in ring}):
        return (
            "There is no six-membered ring but the boat around a one-atom bridge, where exo and endo have no price.",
            "Give a molecule with a saturated six-membered ring of its own.",
        )
    sizes = ", ".join(str(size) for size in sorted({len(ring) for ring in rings}))
    word = "a macrocycle" if min(len(ring) for ring in rings) > _MACROCYCLE else f"rings of {sizes} members"
    return (
        f"The molecule has {word} but no six-membered ring.",
        "Give a molecule with a saturated six-membered ring.",
    )


def _six_rings(structure: Structure, fragment: frozenset[int]) -> list[tuple[int, ...]]:
    """All six-membered rings, those that a smallest set of rings leaves out included."""
    found: dict[frozenset[int], tuple[int, ...]] = {frozenset(r): r for r in structure.rings if len(r) == 6}
    found = {key: ring for key, ring in found.items() if key <= fragment}
    keys = list(found)
    bridged: set[int] = set()
    for i, first in enumerate(keys):
        for second in keys[:i]:
            if len(first & second) > 2:
                bridged |= first | second
    if bridged:
        for ring in _cycles_of_six(structure, bridged):
            found.setdefault(frozenset(ring), ring)
    return [found[key] for key in sorted(found, key=sorted)]


def _cycles_of_six(structure: Structure, atoms: set[int]) -> list[tuple[int, ...]]:
    """Chordless six-membered cycles within a set of atoms."""
    cycles = []
    for start in sorted(atoms):
        stack: list[tuple[int, ...]] = [(start,)]
        while stack:
            path = stack.pop()
            for n in structure.neighbours[path[-1]]:
                if n not in atoms or n < start or n in path:
                    continue
                longer = (*path, int(n))
                if len(longer) < 6:
                    stack.append(longer)
                elif start in structure.neighbours[n] and longer[1] < longer[-1] and _is_chordless(structure, longer):
                    cycles.append(longer)
    return cycles


def _is_chordless(structure: Structure, ring: tuple[int, ...]) -> bool:
    """True when no bond crosses the ring."""
    members = set(ring)
    return all(len(members.intersection(structure.neighbours[a])) == 2 for a in ring)


def _connected(rings: list[Ring]) -> list[list[Ring]]:
    """Rings that share atoms, put together; each group ordered by lowest atom."""
    groups = [sorted((rings[i] for i in part), key=lambda r: min(r.atoms)) for part in _touching(rings, least=1)]
    return sorted(groups, key=lambda group: min(group[0].atoms))


def _touching(rings: list[Ring], *, least: int) -> list[set[int]]:
    """Numbers of rings that hang together, each sharing at least so many atoms with another of its group."""
    if len(rings) < 2:
        return [{0}] if rings else []
    import networkx as nx  # half of the time a short command takes to start, and most rings stand alone

    graph: nx.Graph[int] = nx.Graph()
    graph.add_nodes_from(range(len(rings)))
    sets = [frozenset(ring.atoms) for ring in rings]
    for i, first in enumerate(sets):
        graph.add_edges_from((i, j) for j in range(i) if len(first & sets[j]) >= least)
    return list(nx.connected_components(graph))


def _fit_ring(structure: Structure, atoms: tuple[int, ...], kinds: dict[int, AtomKind]) -> Ring | Unfit:
    """A ring with its template, or why the model has none for it."""
    for atom in atoms:
        if structure.atoms[atom].number not in RING_ELEMENTS:
            symbol = structure.atoms[atom].element
            return Unfit(atoms, f"{symbol} in the ring is outside the price tables.")
        kinds.setdefault(atom, atom_kind(structure, atom))
    fault = _impossible(structure, atoms)
    if fault:
        return Unfit(atoms, fault)
    return _typed_ring(structure, atoms, kinds)


def _impossible(structure: Structure, atoms: tuple[int, ...]) -> str:
    """Why no price fits a ring as it is written: open shells, ions of carbon, triple and trans double bonds."""
    for atom in atoms:
        record = structure.atoms[atom]
        if record.radicals:
            return "A ring atom has an unpaired electron; the tables hold closed shells only."
        if record.number == 6 and record.charge:
            return "A ring carbon is charged; the tables hold neutral carbon only."
    for i in range(6):
        a, b = atoms[i], atoms[(i + 1) % 6]
        bond = structure.bond(a, b)
        if bond.order == 3:
            return "A six-membered ring cannot hold a triple bond."
        if bond.stereo and bond.stereo_atoms is not None:
            inside = sum(end in atoms for end in bond.stereo_atoms)
            if (bond.stereo == "trans") == (inside != 1):
                return "A six-membered ring cannot hold a trans double bond."
    return ""


def _build_system(structure: Structure, rings: list[Ring], kinds: dict[int, AtomKind]) -> RingSystem | Unfit:
    """One ring system from its rings, or why it does not fit the model."""
    everything = tuple(sorted({atom for ring in rings for atom in ring.atoms}))
    members = frozenset(everything)
    companions = []
    pinned = []
    large = False
    for other in structure.rings:
        size, shared = len(other), members.intersection(other)
        if size == 6 or len(shared) < 2:
            continue
        if size == 4:
            return Unfit(everything, "A four-membered ring is fused on; its strain is outside the price tables.")
        if size == 3:
            pinned.append(tuple(int(a) for a in other))
        if size in (5, 7):
            companions.append(tuple(int(a) for a in other))
        large |= size >= _MACROCYCLE
    own_kinds: dict[int, AtomKind] = {
        atom: "sp3"
        if kinds[atom] == "inverting" and _is_bridgehead(structure, atom, rings, companions)
        else kinds[atom]
        for atom in everything
    }
    return RingSystem(
        rings=tuple(rings),
        blocks=_blocks(rings),
        atoms=everything,
        kinds=own_kinds,
        companions=tuple(sorted(companions)),
        pinned=tuple(sorted(pinned)),
        large=large,
    )


def _is_bridgehead(structure: Structure, atom: int, rings: list[Ring], companions: list[tuple[int, ...]]) -> bool:
    """True for a nitrogen that a cage keeps from inverting: all its bonds lie in rings that share more than a bond."""
    sets = [set(ring.atoms) for ring in rings if atom in ring.atoms] + [set(c) for c in companions if atom in c]
    if len(sets) < 2 or not set(structure.neighbours[atom]) <= set().union(*sets):
        return False
    return len(structure.neighbours[atom]) == 3 and any(
        len(first & second) > 2 for i, first in enumerate(sets) for second in sets[:i]
    )


def _blocks(rings: list[Ring]) -> tuple[tuple[int, ...], ...]:
    """Ring numbers of each fused or bridged block; single shared atoms are spiro and do not fuse."""
    return tuple(sorted(tuple(sorted(part)) for part in _touching(rings, least=2)))


def atom_kind(structure: Structure, atom: int) -> AtomKind:
    """Whether a ring atom is tetrahedral, planar or an inverting nitrogen."""
    record = structure.atoms[atom]
    neighbours = structure.neighbours[atom]
    if record.aromatic:
        return "sp2"
    if record.number != 16 and record.number != 15:
        orders = [structure.bond(atom, n).order for n in neighbours]
        if 2 in orders:
            return "sp2"
    if record.number == 5:
        return "sp2"
    if record.number == 7 and record.charge == 0:
        return "sp2" if _is_planar_nitrogen(structure, atom) else "inverting"
    return "sp3"


def _is_planar_nitrogen(structure: Structure, atom: int) -> bool:
    """True for amide, urethane, sulfonamide, nitroso and enamine nitrogen; aryl amines stay pyramidal."""
    for n in structure.neighbours[atom]:
        record = structure.atoms[n]
        if record.aromatic:
            continue
        doubles = [m for m in structure.neighbours[n] if m != atom and structure.bond(n, m).order == 2]
        if not doubles:
            continue
        if record.number in (6, 7) or (record.number in (15, 16) and structure.atoms[doubles[0]].number == 8):
            return True
    return False


def _typed_ring(structure: Structure, atoms: tuple[int, ...], kinds: dict[int, AtomKind]) -> Ring | Unfit:
    """The ring with its template: how many flat bonds it has decides.

    A double, aromatic, ester or amide bond or a fused three-membered ring makes a half-chair; one further planar atom,
    as in an enone, is taken along. Two planar neighbours without such a bond count as one flat bond.
    """
    planar = [i for i in range(6) if kinds[atoms[i]] == "sp2"]
    pinned = any(len(ring) == 3 for ring in structure.rings)
    firm: list[int] = []
    loose: list[int] = []
    for i in range(6):
        a, b = atoms[i], atoms[(i + 1) % 6]
        bond = structure.bond(a, b)
        if (
            bond.aromatic
            or bond.order == 2
            or (pinned and _in_small_ring(structure, a, b))
            or (planar and _is_acyl_bond(structure, a, b, kinds))
        ):
            firm.append(i)
        elif kinds[a] == "sp2" and kinds[b] == "sp2":
            loose.append(i)
    flat = firm or loose
    if not flat:
        if len(planar) > 2:
            return Unfit(atoms, "Three or more ring atoms are flat.")
        return Ring(atoms=atoms)
    spare = [i for i in planar if i not in (flat[0], (flat[0] + 1) % 6)]
    if len(flat) > 1 or len(spare) > 1:
        return Unfit(
            atoms, "The ring has two or more flat bonds (diene, anhydride, imide, quinone or two fused flat rings)."
        )
    return Ring(atoms=atoms, kind="half-chair", flat_bond=flat[0])


def _in_small_ring(structure: Structure, a: int, b: int) -> bool:
    """True when the bond belongs to a three-membered ring."""
    return bool(set(structure.neighbours[a]) & set(structure.neighbours[b]))


def _is_acyl_bond(structure: Structure, a: int, b: int, kinds: dict[int, AtomKind]) -> bool:
    """True for an ester C(=O)-O or amide C(=O)-N bond."""
    for first, second in ((a, b), (b, a)):
        if kinds[first] != "sp2" or structure.atoms[first].number != 6:
            continue
        number = structure.atoms[second].number
        carbonyl = any(
            structure.bond(first, n).order == 2 and structure.atoms[n].number in (7, 8, 16)
            for n in structure.neighbours[first]
        )
        if carbonyl and (number == 8 or (number == 7 and kinds[second] == "sp2")):
            return True
    return False
