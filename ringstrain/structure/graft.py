"""Groups set on the open places of a structure, record by record, without reading text again."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

from ringstrain.structure.records import Atom, AtomIndex, Bond, Configuration, Structure


@dataclass(frozen=True, slots=True)
class Branch:
    """A group with a dummy atom where it will be bound.

    Attributes
    ----------
    structure
        The group as read from a SMILES such as ``*C(C)C``.
    dummy
        Its dummy atom.
    """

    structure: Structure
    dummy: int

    @property
    def first(self) -> int:
        """The atom that is bound to the ring."""
        return int(self.structure.neighbours[self.dummy][0])

    @property
    def is_single(self) -> bool:
        """True when the bond to the ring is a single one."""
        return self.structure.bond(self.dummy, self.first).order == 1


def graft(base: Structure, branches: Sequence[tuple[int, Branch]]) -> tuple[Structure, tuple[int, ...]]:
    """The structure with groups in place of hydrogens, and the first atom of each group.

    Parameters
    ----------
    base
        What the groups are set on; it keeps its atom numbers.
    branches
        Atom and group; an atom may take as many groups as it has hydrogens.

    Returns
    -------
    structure
        New atoms follow the old ones, group by group, each group from its first atom on.  Configurations of the
        base are kept as they are; see :func:`configure`.
    heads
        First atom of each group.

    Raises
    ------
    ValueError
        If an atom has no hydrogen left.
    """
    atoms = list(base.atoms)
    bonds = list(base.bonds)
    configurations = list(base.configurations)
    rings = list(base.rings)
    heads = []
    for ring_atom, branch in branches:
        record = atoms[ring_atom]
        if record.hydrogens < 1:
            raise ValueError(f"atom {ring_atom} has no hydrogen to replace")
        atoms[ring_atom] = replace(record, hydrogens=record.hydrogens - 1)
        index = _numbering(branch, len(atoms), ring_atom)
        heads.append(index[branch.first])
        _append(branch, index, atoms, bonds, configurations, rings)
    return _assemble(base, atoms, bonds, configurations, rings), tuple(heads)


def _numbering(branch: Branch, start: int, ring_atom: int) -> dict[int, int]:
    """New number of every atom of a group; the dummy becomes the ring atom."""
    rest = (i for i in range(len(branch.structure.atoms)) if i not in (branch.first, branch.dummy))
    index = {old: start + place for place, old in enumerate((branch.first, *rest))}
    index[branch.dummy] = ring_atom
    return index


def _append(
    branch: Branch,
    index: dict[int, int],
    atoms: list[Atom],
    bonds: list[Bond],
    configurations: list[Configuration | None],
    rings: list[tuple[AtomIndex, ...]],
) -> None:
    """Add the records of one group under their new numbers."""
    group = branch.structure

    def moved(indices: Sequence[int]) -> tuple[AtomIndex, ...]:
        return tuple(AtomIndex(i if i < 0 else index[i]) for i in indices)

    for old in sorted((i for i in index if i != branch.dummy), key=lambda i: index[i]):
        atoms.append(group.atoms[old])
        own = group.configurations[old]
        configurations.append(None if own is None else replace(own, neighbours=moved(own.neighbours)))
    for bond in group.bonds:
        begin, end = moved((bond.begin, bond.end))
        ends = bond.stereo_atoms and (AtomIndex(index[bond.stereo_atoms[0]]), AtomIndex(index[bond.stereo_atoms[1]]))
        bonds.append(replace(bond, begin=begin, end=end, stereo_atoms=ends))
    rings.extend(moved(ring) for ring in group.rings)


def configure(structure: Structure, configurations: Mapping[int, Configuration | None]) -> Structure:
    """The structure with the configuration of some atoms set or taken away."""
    table = list(structure.configurations)
    for atom, configuration in configurations.items():
        table[atom] = configuration
    return replace(structure, configurations=tuple(table))


def _assemble(
    base: Structure,
    atoms: list[Atom],
    bonds: list[Bond],
    configurations: list[Configuration | None],
    rings: list[tuple[AtomIndex, ...]],
) -> Structure:
    """The record with the tables that follow from its bonds."""
    neighbours: list[list[AtomIndex]] = [[] for _ in atoms]
    orders: dict[tuple[int, int], Bond] = {}
    for bond in bonds:
        neighbours[bond.begin].append(bond.end)
        neighbours[bond.end].append(bond.begin)
        orders[(min(bond.begin, bond.end), max(bond.begin, bond.end))] = bond
    grown = (AtomIndex(i) for i in range(len(base.atoms), len(atoms)))
    return replace(
        base,
        atoms=tuple(atoms),
        bonds=tuple(bonds),
        neighbours=tuple(tuple(sorted(near)) for near in neighbours),
        configurations=tuple(configurations),
        rings=tuple(rings),
        fragment=(*base.fragment, *grown),
        spans=(),
        _orders=orders,
    )
