"""Structures written as molfile blocks with coordinates of a drawing."""

from __future__ import annotations

from rdkit import Chem, rdBase
from rdkit.Chem import rdDepictor

from ringstrain.structure.records import Structure
from ringstrain.structure.write import to_rdkit

EMPTY_BLOCK = "\n  ringstrain\n\n  0  0  0  0  0  0  0  0  0  0999 V2000\nM  END\n"


def write_molblock(structure: Structure) -> str:
    """A V2000 block (V3000 when the molecule needs it) with wedges for every configuration that was read.

    Parameters
    ----------
    structure
        What to write.

    Returns
    -------
    str
        The block, its title line the name of the structure.
    """
    with rdBase.BlockLogs():
        mol = to_rdkit(structure)
        mol.SetProp("_Name", structure.name)
        rdDepictor.Compute2DCoords(mol)
        text: str = Chem.MolToMolBlock(mol)
    return text
