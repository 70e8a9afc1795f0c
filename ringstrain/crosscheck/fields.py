"""MMFF94s: minimise conformers, and build states by holding ring torsions."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations
from typing import Any

import numpy as np
from rdkit.Chem import HybridizationType, rdForceFieldHelpers
from rdkit.Geometry import Point3D

from ringstrain.crosscheck.molecule import Molecule, Points
from ringstrain.errors import OutOfScope

NAME = "MMFF94s"
_STEPS = 500
_ROUNDS = 6
#: Strength of the restraints that hold a state, weak ones first [kcal/mol/degree^2].
_STRENGTHS = (0.02, 0.2, 2.0)


class Mmff:
    """MMFF94s for one molecule.

    Parameters
    ----------
    molecule
        What to treat.

    Raises
    ------
    OutOfScope
        If the force field lacks parameters for an atom.
    """

    name = NAME

    def __init__(self, molecule: Molecule) -> None:
        if not rdForceFieldHelpers.MMFFHasAllMoleculeParams(molecule.mol):
            raise OutOfScope(f"{NAME} has no parameters for this structure.", "Try --method xtb.")
        self.molecule = molecule
        self._properties = rdForceFieldHelpers.MMFFGetMoleculeProperties(molecule.mol, mmffVariant=NAME)

    def minimise(self, points: Points) -> tuple[float, Points]:
        """Energy [kcal/mol] and coordinates [angstrom] of the minimum downhill of some coordinates."""
        number = self._put(points)
        field = rdForceFieldHelpers.MMFFGetMoleculeForceField(self.molecule.mol, self._properties, confId=number)
        field.Initialize()
        for _ in range(_ROUNDS):
            if field.Minimize(maxIts=_STEPS) == 0:
                break
        return float(field.CalcEnergy()), self._take(number)

    def hold(self, points: Points, rings: Sequence[Sequence[int]], torsions: Sequence[Sequence[float]]) -> Points:
        """Coordinates with the ring torsions drawn to given values [degree], everything else relaxed.

        Parameters
        ----------
        points
            Where to start [angstrom].
        rings
            Atoms of the molecule, ring by ring.
        torsions
            Wanted torsions of the bonds of each ring [degree].
        """
        number = self._put(points)
        angles = _ring_angles(self.molecule.mol, {a for ring in rings for a in ring})
        for strength in _STRENGTHS:
            field = rdForceFieldHelpers.MMFFGetMoleculeForceField(self.molecule.mol, self._properties, confId=number)
            field.Initialize()
            for ring, wanted in zip(rings, torsions, strict=True):
                for place, value in enumerate(wanted):
                    atoms = [int(ring[(place + shift) % 6]) for shift in (-1, 0, 1, 2)]
                    field.MMFFAddTorsionConstraint(*atoms, False, value - 3.0, value + 3.0, 100 * strength)
            for angle in angles if strength == _STRENGTHS[-1] else ():
                field.MMFFAddAngleConstraint(*angle, False, 106.0, 114.0, 100 * strength)
            field.Minimize(maxIts=_STEPS)
        return self._take(number)

    def _put(self, points: Points) -> int:
        """Coordinates into the scratch conformer."""
        from rdkit.Chem import Conformer

        conformer = Conformer(len(points))
        for place, (x, y, z) in enumerate(points):
            conformer.SetAtomPosition(place, Point3D(float(x), float(y), float(z)))
        self.molecule.mol.RemoveAllConformers()
        return int(self.molecule.mol.AddConformer(conformer, assignId=True))

    def _take(self, number: int) -> Points:
        return np.array(self.molecule.mol.GetConformer(number).GetPositions())


def _ring_angles(mol: Any, ring_atoms: set[int]) -> list[tuple[int, int, int]]:
    """Angles between heavy neighbours of the tetrahedral ring atoms, those inside small rings left out."""
    small = [set(ring) for ring in mol.GetRingInfo().AtomRings() if len(ring) < 6]
    found = []
    for number in sorted(ring_atoms):
        atom = mol.GetAtomWithIdx(number)
        if atom.GetHybridization() != HybridizationType.SP3:
            continue
        around = [n.GetIdx() for n in atom.GetNeighbors() if n.GetAtomicNum() > 1]
        for first, second in combinations(around, 2):
            if not any({first, number, second} <= ring for ring in small):
                found.append((first, number, second))
    return found
