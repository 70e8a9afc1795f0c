"""CIP labels of a structure."""

from __future__ import annotations

from rdkit.Chem import rdCIPLabeler

from ringstrain.structure.records import Structure
from ringstrain.structure.write import to_rdkit


def cip_labels(structure: Structure) -> dict[int, str]:
    """CIP label (R, S, r or s) of each centre that has one.

    Parameters
    ----------
    structure
        The molecule.

    Returns
    -------
    dict
        Label by atom.
    """
    mol = to_rdkit(structure)
    rdCIPLabeler.AssignCIPLabels(mol)
    return {a.GetIdx(): a.GetProp("_CIPCode") for a in mol.GetAtoms() if a.HasProp("_CIPCode")}
