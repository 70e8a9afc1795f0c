"""An RDKit molecule turned into a Structure; the only place where RDKit objects are taken apart."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from typing import Any, Literal

from rdkit import Chem

from ringstrain.structure.records import IMPLICIT, Atom, AtomIndex, Bond, Configuration, Reading, Structure

_NO_TAG = Chem.ChiralType.CHI_UNSPECIFIED
_SINGLE = Chem.BondType.SINGLE
_CLOCKWISE = Chem.ChiralType.CHI_TETRAHEDRAL_CW
_COUNTER = Chem.ChiralType.CHI_TETRAHEDRAL_CCW
_CIS = (Chem.BondStereo.STEREOCIS, Chem.BondStereo.STEREOZ)
_TRANS = (Chem.BondStereo.STEREOTRANS, Chem.BondStereo.STEREOE)
_ORDERS: dict[Any, int] = {Chem.BondType.SINGLE: 1, Chem.BondType.DOUBLE: 2, Chem.BondType.TRIPLE: 3}
_GROUP_WORDS = {
    Chem.StereoGroupType.STEREO_OR: "one enantiomer or the other",
    Chem.StereoGroupType.STEREO_AND: "a mixture of both (racemic)",
}


def structure_from_rdkit(
    mol: Any,
    *,
    text: str,
    name: str = "",
    spans: tuple[tuple[int, int], ...] = (),
    notes: tuple[str, ...] = (),
    keep: bool = False,
    marked: Sequence[bool] | None = None,
    only_single: bool = False,
) -> Structure:
    """The frozen record of a sanitised molecule whose chirality tags nobody has cleaned.

    Parameters
    ----------
    mol
        RDKit molecule: sanitised, rings perceived, stereochemistry neither assigned nor cleaned.
    text, name
        What it was read from.
    spans
        Characters of each RDKit atom in ``text``.
    notes
        Remarks so far.
    keep
        True to keep the molecule for writing it again: it must hold nothing but what the records hold.
    marked
        Which RDKit atoms may have a chirality tag; None for any.
    only_single
        True when all bonds are known to be single ones. Like ``marked`` it spares slow questions, no more.

    Returns
    -------
    Structure
        Atoms in input order, plain hydrogens folded in.
    """
    rdkit_atoms = [mol.GetAtomWithIdx(i) for i in range(mol.GetNumAtoms())]
    numbers = [a.GetAtomicNum() for a in rdkit_atoms]
    index, extra = _fold_hydrogens(rdkit_atoms, numbers) if 1 in numbers else (list(range(len(numbers))), {})
    atoms: list[Atom] = []
    configurations: list[Configuration | None] = []
    for i, a in enumerate(rdkit_atoms):
        if index[i] < 0:
            continue
        atoms.append(
            _atom(
                numbers[i],
                a.GetFormalCharge(),
                a.GetIsotope(),
                a.GetTotalNumHs() + extra.get(i, 0),
                a.GetIsAromatic(),
                a.GetNumRadicalElectrons(),
            )
        )
        tag = a.GetChiralTag() if marked is None or marked[i] else _NO_TAG
        configurations.append(None if tag == _NO_TAG else _configuration(a, tag, index))
    bonds, table, adjacency = _bonds(mol, index, len(atoms), only_single)
    parts = (tuple(atoms), bonds, tuple(configurations))
    return Structure(
        text=text,
        name=name,
        atoms=parts[0],
        bonds=bonds,
        neighbours=tuple([tuple(sorted(n)) for n in adjacency]),
        configurations=parts[2],
        rings=tuple([tuple([AtomIndex(index[i]) for i in ring]) for ring in mol.GetRingInfo().AtomRings()]),
        fragment=tuple(map(AtomIndex, range(len(atoms)))),
        spans=tuple([span for span, i in zip(spans, index, strict=True) if i >= 0]) if spans else (),
        notes=notes + _enhanced(mol, index),
        reading=Reading(mol, parts) if keep and len(atoms) == len(index) else None,
        _orders=table,
    )


@lru_cache(maxsize=4096)
def _atom(number: int, charge: int, isotope: int, hydrogens: int, aromatic: bool, radicals: int) -> Atom:
    """One shared record for all atoms that are alike."""
    symbol = "*" if number == 0 else Chem.GetPeriodicTable().GetElementSymbol(number)
    return Atom(number, symbol, charge, isotope, hydrogens, aromatic, radicals)


def _fold_hydrogens(rdkit_atoms: list[Any], numbers: list[int]) -> tuple[list[int], dict[int, int]]:
    """Our index of each RDKit atom (-1 for a plain hydrogen), and the plain hydrogens each atom swallows."""
    index: list[int] = []
    extra: dict[int, int] = {}
    count = 0
    for i, a in enumerate(rdkit_atoms):
        plain = numbers[i] == 1 and a.GetIsotope() == 0 and a.GetDegree() == 1 and a.GetFormalCharge() == 0
        host = a.GetNeighbors()[0].GetIdx() if plain else -1
        if plain and numbers[host] != 1:
            extra[host] = extra.get(host, 0) + 1
            index.append(-1)
        else:
            index.append(count)
            count += 1
    return index, extra


def _bonds(
    mol: Any, index: list[int], size: int, only_single: bool
) -> tuple[tuple[Bond, ...], dict[tuple[int, int], Bond], list[list[AtomIndex]]]:
    """Bonds in input order, the same by atom pair, and the neighbour lists."""
    bonds: list[Bond] = []
    table: dict[tuple[int, int], Bond] = {}
    adjacency: list[list[AtomIndex]] = [[] for _ in range(size)]
    kekulized = None
    for number in range(mol.GetNumBonds()):
        b = mol.GetBondWithIdx(number)
        i, j = index[b.GetBeginAtomIdx()], index[b.GetEndAtomIdx()]
        if i < 0 or j < 0:
            continue
        kind = _SINGLE if only_single else b.GetBondType()
        first, second = AtomIndex(i), AtomIndex(j)
        if kind == _SINGLE:
            bond = _single(first, second)
        else:
            aromatic = b.GetIsAromatic()
            if aromatic:
                if kekulized is None:
                    kekulized = Chem.Mol(mol)
                    Chem.Kekulize(kekulized)
                kind = kekulized.GetBondWithIdx(number).GetBondType()
            word, ends = _bond_stereo(b, index) if kind == Chem.BondType.DOUBLE else ("", None)
            bond = Bond(first, second, _ORDERS.get(kind, 0), aromatic, word, ends)
        bonds.append(bond)
        table[(i, j) if i < j else (j, i)] = bond
        adjacency[i].append(second)
        adjacency[j].append(first)
    return tuple(bonds), table, adjacency


@lru_cache(maxsize=4096)
def _single(first: AtomIndex, second: AtomIndex) -> Bond:
    """One shared record for the single bonds between atoms of these numbers."""
    return Bond(first, second, 1)


def _bond_stereo(bond: Any, index: list[int]) -> tuple[Literal["", "cis", "trans"], tuple[AtomIndex, AtomIndex] | None]:
    """Cis or trans of a double bond, and with respect to which neighbours."""
    stereo = bond.GetStereo()
    if stereo not in _CIS and stereo not in _TRANS:
        return "", None
    pair = [index[k] for k in bond.GetStereoAtoms()]
    if len(pair) != 2 or min(pair) < 0:
        return "", None
    return ("cis" if stereo in _CIS else "trans"), (AtomIndex(pair[0]), AtomIndex(pair[1]))


def _configuration(atom: Any, tag: Any, index: list[int]) -> Configuration | None:
    """Configuration from the chirality tag: neighbours in bond order, the implicit one last."""
    if tag != _CLOCKWISE and tag != _COUNTER:
        return None
    here = atom.GetIdx()
    order = [index[b.GetOtherAtomIdx(here)] for b in atom.GetBonds()]
    if len(order) == 3:
        order.append(-1)
    if len(order) != 4 or order.count(-1) > 1:
        return None
    return Configuration(tuple([IMPLICIT if n < 0 else AtomIndex(n) for n in order]), tag == _CLOCKWISE)


def _enhanced(mol: Any, index: list[int]) -> tuple[str, ...]:
    """One note for each relative or racemic mark."""
    groups = mol.GetStereoGroups()
    if not groups:
        return ()
    notes = []
    for group in groups:
        words = _GROUP_WORDS.get(group.GetGroupType())
        members = [str(index[a.GetIdx()] + 1) for a in group.GetAtoms() if index[a.GetIdx()] >= 0]
        if words and members:
            plural = "s" if len(members) > 1 else ""
            notes.append(f"Atom{plural} {', '.join(members)} marked as {words}; analysed as drawn.")
    return tuple(notes)
