"""Structures changed: bonds broken and made, groups grafted and cut, configurations carried along."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from typing import Any

from rdkit import Chem, rdBase

from ringstrain.errors import RingstrainError
from ringstrain.structure.from_rdkit import structure_from_rdkit
from ringstrain.structure.records import IMPLICIT, Atom, AtomIndex, Bond, Configuration, Structure
from ringstrain.structure.write import to_rdkit


def cut_branch(structure: Structure, root: int, first: int) -> frozenset[int]:
    """Atoms that fall off when the bond root-first is cut.

    Parameters
    ----------
    structure
        The molecule.
    root, first
        The atom that stays and the first atom of the branch.

    Returns
    -------
    frozenset
        The branch; it contains ``root`` when the bond is part of a ring.
    """
    seen = {first}
    stack = [first]
    while stack:
        atom = stack.pop()
        for n in structure.neighbours[atom]:
            if (atom, n) == (first, root) or n in seen:
                continue
            seen.add(int(n))
            stack.append(int(n))
    return frozenset(seen)


def inverted(structure: Structure, atoms: Iterable[int]) -> Structure:
    """The structure with the configuration of some atoms turned round; numbering stays.

    Parameters
    ----------
    structure
        The molecule.
    atoms
        Atoms with a given configuration.
    """
    configurations = list(structure.configurations)
    for atom in atoms:
        own = configurations[atom]
        if own is not None:
            configurations[atom] = Configuration(own.neighbours, not own.clockwise)
    return replace(structure, configurations=tuple(configurations))


def constitution_ranks(structure: Structure) -> tuple[int, ...]:
    """A rank for each atom that does not depend on numbering; like atoms share one, configurations do not enter."""
    with rdBase.BlockLogs():
        return tuple(Chem.CanonicalRankAtoms(to_rdkit(structure), breakTies=False, includeChirality=False))


def mirror(structure: Structure) -> Structure:
    """The mirror image; numbering stays."""
    return inverted(structure, (i for i, c in enumerate(structure.configurations) if c is not None))


class Draft:
    """A structure being changed; atoms keep their numbers until :meth:`smiles` is asked for.

    Parameters
    ----------
    structure
        What to start from; it stays as it is.
    """

    def __init__(self, structure: Structure) -> None:
        self._start = structure
        self._atoms = list(structure.atoms)
        self._bonds: dict[tuple[int, int], Bond] = {_key(b.begin, b.end): b for b in structure.bonds}
        self._around: list[list[int]] = [[int(n) for n in around] for around in structure.neighbours]
        self._configurations = list(structure.configurations)
        fragment = frozenset(structure.fragment)
        self._gone: set[int] = {i for i in range(len(self._atoms)) if i not in fragment}

    def add_atom(self, atom: Atom) -> int:
        """A new atom; its number."""
        self._atoms.append(atom)
        self._around.append([])
        self._configurations.append(None)
        return len(self._atoms) - 1

    def bond(self, a: int, b: int, order: int = 1) -> None:
        """Make a bond, or change the order of one that is there."""
        key = _key(a, b)
        if key not in self._bonds:
            self._around[a].append(b)
            self._around[b].append(a)
        self._bonds[key] = Bond(AtomIndex(key[0]), AtomIndex(key[1]), order)
        if order > 1:
            self._configurations[a] = self._configurations[b] = None

    def unbond(self, a: int, b: int) -> None:
        """Break a bond; both ends lose their configuration."""
        del self._bonds[_key(a, b)]
        self._around[a].remove(b)
        self._around[b].remove(a)
        self._configurations[a] = self._configurations[b] = None

    def order(self, a: int, b: int) -> int:
        """Order of a bond."""
        return self._bonds[_key(a, b)].order

    def set_double(self, a: int, b: int, end_a: int, end_b: int, *, cis: bool) -> None:
        """Make a double bond with the two named ends cis or trans."""
        self.bond(a, b, 2)
        key = _key(a, b)
        ends = (AtomIndex(end_a), AtomIndex(end_b)) if key[0] == a else (AtomIndex(end_b), AtomIndex(end_a))
        self._bonds[key] = replace(self._bonds[key], stereo="cis" if cis else "trans", stereo_atoms=ends)

    def add_hydrogens(self, atom: int, count: int) -> None:
        """Give an atom more hydrogens, or fewer; an isotopic hydrogen goes when no plain one is left."""
        record = self._atoms[atom]
        left = record.hydrogens + count
        while left < 0:
            label = next(n for n in self._around[atom] if self._atoms[n].number == 1)
            self.drop([label])
            left += 1
        self._atoms[atom] = replace(self._atoms[atom], hydrogens=left)

    def set_charge(self, atom: int, charge: int) -> None:
        """Set a formal charge."""
        self._atoms[atom] = replace(self._atoms[atom], charge=charge)

    def drop(self, atoms: Iterable[int]) -> None:
        """Take atoms and their bonds away."""
        for atom in atoms:
            for n in list(self._around[atom]):
                self.unbond(atom, n)
            self._gone.add(atom)

    def graft(self, structure: Structure, at: int) -> int:
        """Bond another structure to an atom through its first atom, which gives up a charge or a hydrogen.

        Returns
        -------
        int
            Number of the first grafted atom.
        """
        shift = len(self._atoms)
        for record, around, own in zip(structure.atoms, structure.neighbours, structure.configurations, strict=True):
            self._atoms.append(record)
            self._around.append([int(n) + shift for n in around])
            moved = None
            if own is not None:
                moved = Configuration(
                    tuple(n if n < 0 else AtomIndex(n + shift) for n in own.neighbours), own.clockwise
                )
            self._configurations.append(moved)
        for bond in structure.bonds:
            ends = None
            if bond.stereo_atoms:
                ends = (AtomIndex(bond.stereo_atoms[0] + shift), AtomIndex(bond.stereo_atoms[1] + shift))
            self._bonds[_key(bond.begin + shift, bond.end + shift)] = replace(
                bond, begin=AtomIndex(bond.begin + shift), end=AtomIndex(bond.end + shift), stereo_atoms=ends
            )
        head = self._atoms[shift]
        if head.charge < 0:
            head = replace(head, charge=head.charge + 1)
        elif head.radicals:
            head = replace(head, radicals=head.radicals - 1)
        elif head.hydrogens:
            head = replace(head, hydrogens=head.hydrogens - 1)
        else:
            head = replace(head, charge=head.charge + 1)
        self._atoms[shift] = head
        self.bond(at, shift)
        return shift

    def configure(self, atom: int, order: tuple[int, int, int, int], *, clockwise: bool) -> None:
        """Set a configuration: seen from the first neighbour the others run clockwise or not.

        More than one hydrogen in the order leaves the atom without configuration.
        """
        bare = [n for n in order if n < 0 or self._atoms[n].number == 1]
        if len(bare) > 1:
            self._configurations[atom] = None
            return
        self._configurations[atom] = Configuration(tuple(IMPLICIT if n < 0 else AtomIndex(n) for n in order), clockwise)

    def configuration(self, atom: int) -> Configuration | None:
        """The configuration an atom has now."""
        return self._configurations[atom]

    def replace_neighbour(self, own: Configuration | None, atom: int, old: int, new: int) -> None:
        """Give an atom a former configuration with one neighbour exchanged on the same side."""
        if own is None:
            return
        order = [new if n == old else int(n) for n in own.neighbours]
        self.configure(atom, (order[0], order[1], order[2], order[3]), clockwise=own.clockwise)

    def numbering(self) -> dict[int, int]:
        """New number of each atom that is left, as :meth:`structure` without ``keep`` gives it."""
        alive = [i for i in range(len(self._atoms)) if i not in self._gone]
        return {old: new for new, old in enumerate(alive)}

    def structure(self, keep: int | None = None) -> Structure:
        """The changed structure, renumbered, with idle centres cleared.

        Parameters
        ----------
        keep
            An atom of the part to keep when the molecule has come apart; all parts when None.
        """
        return _settled(self._raw(keep))

    def smiles(self, keep: int | None = None) -> str:
        """Canonical SMILES of the changed structure (see :meth:`structure`)."""
        return tidy_smiles(self.structure(keep))

    def _raw(self, keep: int | None) -> Structure:
        alive = [i for i in range(len(self._atoms)) if i not in self._gone]
        if keep is not None:
            part = {keep}
            stack = [keep]
            while stack:
                for n in self._around[stack.pop()]:
                    if n not in part:
                        part.add(n)
                        stack.append(n)
            alive = [i for i in alive if i in part]
        index = {old: new for new, old in enumerate(alive)}
        bonds = []
        for (a, b), bond in self._bonds.items():
            if a not in index or b not in index:
                continue
            ends, word = None, bond.stereo
            if bond.stereo_atoms and all(n in index for n in bond.stereo_atoms):
                first, second = bond.stereo_atoms
                if first not in self._around[bond.begin]:
                    first, second = second, first
                if first in self._around[bond.begin] and second in self._around[bond.end]:
                    ends = (AtomIndex(index[first]), AtomIndex(index[second]))
            if ends is None:
                word = ""
            begin, end = AtomIndex(index[a]), AtomIndex(index[b])
            if ends is not None and bond.begin != a:
                ends = (ends[1], ends[0])
            bonds.append(Bond(begin, end, bond.order, bond.aromatic, word, ends))
        configurations: list[Configuration | None] = []
        for old in alive:
            own = self._configurations[old]
            named = {int(n) for n in own.neighbours if n >= 0} if own is not None else set()
            if own is not None and named == {n for n in self._around[old] if n in index}:
                moved = tuple(IMPLICIT if n < 0 else AtomIndex(index[n]) for n in own.neighbours)
                configurations.append(Configuration(moved, own.clockwise))
            else:
                configurations.append(None)
        return Structure(
            text="",
            atoms=tuple(self._atoms[i] for i in alive),
            bonds=tuple(bonds),
            neighbours=tuple(tuple(sorted(AtomIndex(index[n]) for n in self._around[i] if n in index)) for i in alive),
            configurations=tuple(configurations),
            rings=(),
            fragment=tuple(AtomIndex(i) for i in range(len(alive))),
            _orders={_key(b.begin, b.end): b for b in bonds},
        )


def _key(a: int, b: int) -> tuple[int, int]:
    return (a, b) if a < b else (b, a)


def _settled(raw: Structure) -> Structure:
    """A raw structure with its rings found, valences checked and idle centres cleared."""
    with rdBase.BlockLogs():
        mol = to_rdkit(raw)
        mol.ClearProp("_StereochemDone")
        real = _real_centres(mol)
        for atom in mol.GetAtoms():
            if atom.GetIdx() not in real:
                atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
        mol.SetIntProp("_StereochemDone", 1)
        text: str = Chem.MolToSmiles(mol)
    return structure_from_rdkit(mol, text=text)


def _real_centres(mol: Any) -> frozenset[int]:
    """Atoms whose configuration distinguishes stereoisomers, dependent ring centres included."""
    found = Chem.FindPotentialStereo(Chem.Mol(mol), cleanIt=False, flagPossible=False)
    real = {
        info.centeredOn
        for info in found
        if info.type == Chem.StereoType.Atom_Tetrahedral and info.specified == Chem.StereoSpecified.Specified
    }
    for pair in _bridgeheads(mol):
        if pair <= real and _is_idle_pair(mol, pair, real):
            real -= pair
    return frozenset(real)


def _bridgeheads(mol: Any) -> list[frozenset[int]]:
    """Pairs of atoms from which a bridge spans a ring."""
    rings = [frozenset(ring) for ring in mol.GetRingInfo().AtomRings()]
    found = []
    for i, first in enumerate(rings):
        for second in rings[:i]:
            shared = first & second
            ends = [a for a in shared if sum(n.GetIdx() in shared for n in mol.GetAtomWithIdx(a).GetNeighbors()) == 1]
            if len(shared) > 2 and len(ends) == 2:
                found.append(frozenset(ends))
    return found


def _is_idle_pair(mol: Any, pair: frozenset[int], real: set[int]) -> bool:
    """True when turning both bridgeheads round (one alone cannot exist) gives the same molecule."""
    texts: list[str] = []
    for turned in (False, True):
        copy = Chem.Mol(mol)
        for atom in copy.GetAtoms():
            if atom.GetIdx() not in real:
                atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
            elif turned and atom.GetIdx() in pair:
                atom.InvertChirality()
        copy.SetIntProp("_StereochemDone", 1)
        texts.append(Chem.MolToSmiles(Chem.MolFromSmiles(Chem.MolToSmiles(copy))))
    return texts[0] == texts[1]


def tidy_smiles(structure: Structure) -> str:
    """Canonical SMILES without configurations that distinguish nothing.

    Parameters
    ----------
    structure
        The molecule.

    Returns
    -------
    str
        The SMILES every reader gives that keeps all its centres; where a reader would lose one, our own.
    """
    with rdBase.BlockLogs():
        mol = to_rdkit(structure)
        mol.ClearProp("_StereochemDone")
        real = _real_centres(mol)
        for atom in mol.GetAtoms():
            if atom.GetIdx() not in real:
                atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
        mol.SetIntProp("_StereochemDone", 1)
        own: str = Chem.MolToSmiles(mol)
        again = Chem.MolFromSmiles(own)
        if again is None:
            raise RingstrainError("The product is no valid molecule.", "Send us the input: this is our bug.")
        usual: str = Chem.MolToSmiles(again)
        kept = sum(a.GetChiralTag() != Chem.ChiralType.CHI_UNSPECIFIED for a in again.GetAtoms())
    return usual if kept == len(real) else own
