"""Structures written back as SMILES, without losing dependent ring stereo."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from typing import Any

from rdkit import Chem, rdBase

from ringstrain.structure.records import Atom, Structure

_CLOCKWISE = Chem.ChiralType.CHI_TETRAHEDRAL_CW
_COUNTER = Chem.ChiralType.CHI_TETRAHEDRAL_CCW
_UNMARKED = Chem.ChiralType.CHI_UNSPECIFIED
_ORDERS = {0: Chem.BondType.DATIVE, 1: Chem.BondType.SINGLE, 2: Chem.BondType.DOUBLE, 3: Chem.BondType.TRIPLE}


def to_rdkit(structure: Structure) -> Any:
    """An RDKit molecule with the same atoms in the same order and every configuration set.

    The molecule is marked as stereo-perceived, so that writing it does not clean ring stereo away.
    """
    mol = _assembled(structure)
    for atom in mol.GetAtoms():
        if atom.GetIsAromatic() or atom.GetFormalCharge() or atom.GetIsotope() or atom.GetNumRadicalElectrons():
            continue
        atom.SetNoImplicit(False)
        atom.SetNumExplicitHs(0)
    mol.UpdatePropertyCache(strict=False)
    for atom, record in zip(mol.GetAtoms(), structure.atoms, strict=True):
        if atom.GetTotalNumHs() != record.hydrogens:
            atom.SetNoImplicit(True)
            atom.SetNumExplicitHs(record.hydrogens)
    mol.UpdatePropertyCache(strict=False)
    mol.SetIntProp("_StereochemDone", 1)
    return mol.GetMol()


def _assembled(structure: Structure) -> Any:
    """An RDKit molecule with every hydrogen count explicit; a SMILES does not show the difference, a molfile does."""
    mol = Chem.RWMol()
    for record in structure.atoms:
        mol.AddAtom(_mould(record))
    for bond in structure.bonds:
        mol.AddBond(bond.begin, bond.end, _ORDERS[bond.order])
    for index, configuration in enumerate(structure.configurations):
        if configuration is None:
            continue
        atom = mol.GetAtomWithIdx(index)
        order = [b.GetOtherAtomIdx(index) for b in atom.GetBonds()]
        if len(order) == 3:
            order.append(-1)
        atom.SetChiralTag(_CLOCKWISE if configuration.handedness(tuple(order)) > 0 else _COUNTER)
    Chem.SanitizeMol(mol)
    for bond in structure.bonds:
        if bond.stereo and bond.stereo_atoms:
            target = mol.GetBondBetweenAtoms(bond.begin, bond.end)
            first, second = bond.stereo_atoms
            if first not in structure.neighbours[target.GetBeginAtomIdx()]:
                first, second = second, first
            target.SetStereoAtoms(first, second)
            cis = bond.stereo == "cis"
            target.SetStereo(Chem.BondStereo.STEREOCIS if cis else Chem.BondStereo.STEREOTRANS)
    return mol


@lru_cache(maxsize=4096)
def _mould(record: Atom) -> Any:
    """The RDKit atom of a record; a molecule copies it, so that all atoms that are alike share one mould."""
    atom = Chem.Atom(record.number)
    atom.SetFormalCharge(record.charge)
    atom.SetIsotope(record.isotope)
    atom.SetNumExplicitHs(record.hydrogens)
    atom.SetNoImplicit(True)
    atom.SetNumRadicalElectrons(record.radicals)
    return atom


def write_smiles(structure: Structure, *, canonical: bool = True) -> str:
    """SMILES of a structure with every configuration that was read.

    Parameters
    ----------
    structure
        What to write.
    canonical
        True for a canonical atom order, False for input order as far as SMILES allows.

    Returns
    -------
    str
        The SMILES.
    """
    with rdBase.BlockLogs():
        reading = structure.reading
        mol = Chem.Mol(reading.molecule) if reading is not None and reading.fits(structure) else _assembled(structure)
        _drop_idle_marks(mol, structure)
        text: str = Chem.MolToSmiles(mol, canonical=canonical)
    return text


def _drop_idle_marks(mol: Any, structure: Structure) -> None:
    """Clear marks at atoms that cannot be stereocentres; dependent ring centres keep theirs."""
    marked = [i for i, given in enumerate(structure.configurations) if given is not None]
    ranks = Chem.CanonicalRankAtoms(mol, breakTies=False, includeChirality=False) if marked else ()
    if not all(_is_plain_centre(structure, i, ranks) for i in marked):
        copy = Chem.Mol(mol)  # the search leaves ranks behind that would change the canonical order
        possible = {found.centeredOn for found in Chem.FindPotentialStereo(copy, cleanIt=False, flagPossible=True)}
        for index in marked:
            if index not in possible:
                mol.GetAtomWithIdx(index).SetChiralTag(_UNMARKED)
    mol.SetIntProp("_StereochemDone", 1)


def _is_plain_centre(structure: Structure, atom: int, ranks: Sequence[int]) -> bool:
    """True for a carbon with four different ligands, which is a stereocentre whatever the rest looks like."""
    record, around = structure.atoms[atom], structure.neighbours[atom]
    if record.number != 6 or record.hydrogens > 1 or len(around) + record.hydrogens != 4:
        return False
    return len({ranks[n] for n in around}) == len(around)
