"""Structures written back as SMILES, without losing dependent ring stereo."""

from __future__ import annotations

from typing import Any

from rdkit import Chem, rdBase

from ringstrain.structure.records import Structure

_ORDERS = {0: Chem.BondType.DATIVE, 1: Chem.BondType.SINGLE, 2: Chem.BondType.DOUBLE, 3: Chem.BondType.TRIPLE}


def to_rdkit(structure: Structure) -> Any:
    """An RDKit molecule with the same atoms in the same order and every configuration set.

    The molecule is marked as stereo-perceived, so that writing it does not clean ring stereo away.
    """
    mol = Chem.RWMol()
    for record in structure.atoms:
        atom = Chem.Atom(record.number)
        atom.SetFormalCharge(record.charge)
        atom.SetIsotope(record.isotope)
        atom.SetNumExplicitHs(record.hydrogens)
        atom.SetNoImplicit(True)
        atom.SetNumRadicalElectrons(record.radicals)
        mol.AddAtom(atom)
    for bond in structure.bonds:
        mol.AddBond(bond.begin, bond.end, _ORDERS[bond.order])
    for index, configuration in enumerate(structure.configurations):
        if configuration is None:
            continue
        atom = mol.GetAtomWithIdx(index)
        order = [b.GetOtherAtomIdx(index) for b in atom.GetBonds()]
        if len(order) == 3:
            order.append(-1)
        sign = configuration.handedness(tuple(order))
        kind = Chem.ChiralType.CHI_TETRAHEDRAL_CW if sign > 0 else Chem.ChiralType.CHI_TETRAHEDRAL_CCW
        atom.SetChiralTag(kind)
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
    for atom in mol.GetAtoms():
        if atom.GetIsAromatic() or atom.GetFormalCharge() or atom.GetIsotope() or atom.GetNumRadicalElectrons():
            continue
        atom.SetNoImplicit(False)
        atom.SetNumExplicitHs(0)
    mol.UpdatePropertyCache(strict=False)
    wanted = [record.hydrogens for record in structure.atoms]
    for atom, hydrogens in zip(mol.GetAtoms(), wanted, strict=True):
        if atom.GetTotalNumHs() != hydrogens:
            atom.SetNoImplicit(True)
            atom.SetNumExplicitHs(hydrogens)
    mol.UpdatePropertyCache(strict=False)
    mol.SetIntProp("_StereochemDone", 1)
    return mol.GetMol()


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
        mol = to_rdkit(structure)
        _drop_idle_marks(mol)
        text: str = Chem.MolToSmiles(mol, canonical=canonical)
    return text


def _drop_idle_marks(mol: Any) -> None:
    """Clear marks at atoms that cannot be stereocentres; dependent ring centres keep theirs."""
    tagged = [a for a in mol.GetAtoms() if a.GetChiralTag() != Chem.ChiralType.CHI_UNSPECIFIED]
    if not tagged:
        return
    possible = {found.centeredOn for found in Chem.FindPotentialStereo(Chem.Mol(mol), cleanIt=False, flagPossible=True)}
    for atom in tagged:
        if atom.GetIdx() not in possible:
            atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
    mol.SetIntProp("_StereochemDone", 1)
