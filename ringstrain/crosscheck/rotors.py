"""Side chains turned about their single bonds."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from rdkit.Chem import BondType, CanonicalRankAtoms, GetDistanceMatrix, HybridizationType

from ringstrain.crosscheck.molecule import Molecule, Points

#: Bonds this far from a six-membered ring are turned, and so many at most [-].
_NEAR = 2
_MOST = 16


@dataclass(frozen=True, slots=True)
class Rotor:
    """A bond about which one side turns: its atoms, the atoms that move, and the turns worth trying [degree]."""

    fixed: int
    moving: int
    side: tuple[int, ...]
    turns: tuple[float, ...]

    def turned(self, points: Points, degrees: float) -> Points:
        """Coordinates with the side turned by an angle [degree]."""
        axis = points[self.moving] - points[self.fixed]
        axis = axis / np.linalg.norm(axis)
        angle = np.radians(degrees)
        arms = points[list(self.side)] - points[self.moving]
        along = np.outer(arms @ axis, axis)
        moved = np.array(points)
        moved[list(self.side)] = (
            points[self.moving] + along + np.cos(angle) * (arms - along) + np.sin(angle) * np.cross(axis, arms)
        )
        return moved


def find_rotors(molecule: Molecule) -> tuple[Rotor, ...]:
    """Acyclic single bonds near the rings whose turning makes another rotamer; methyl and its like are left out.

    Parameters
    ----------
    molecule
        The molecule with hydrogens.
    """
    mol = molecule.mol
    ranks = list(CanonicalRankAtoms(mol, breakTies=False, includeChirality=False))
    distances = GetDistanceMatrix(mol)
    ring_atoms = [atom.GetIdx() for atom in mol.GetAtoms() if atom.IsInRingSize(6)]
    found: list[tuple[float, Rotor]] = []
    for bond in mol.GetBonds():
        if bond.GetBondType() != BondType.SINGLE or bond.IsInRing():
            continue
        a, b = bond.GetBeginAtomIdx(), bond.GetEndAtomIdx()
        if any(_is_plain(mol, end, other, ranks) for end, other in ((a, b), (b, a))):
            continue
        sides = _beyond(mol, a, b), _beyond(mol, b, a)
        fixed, moving, side = (a, b, sides[0]) if len(sides[0]) <= len(sides[1]) else (b, a, sides[1])
        away = min(distances[end][atom] for end in (a, b) for atom in ring_atoms)
        if away <= _NEAR:
            planar = any(mol.GetAtomWithIdx(end).GetHybridization() == HybridizationType.SP2 for end in (a, b))
            turns = (180.0, 90.0, -90.0) if planar else (120.0, -120.0)
            found.append((away, Rotor(fixed, moving, tuple(sorted(side)), turns)))
    return tuple(rotor for _, rotor in sorted(found, key=lambda item: item[0])[:_MOST])


def _is_plain(mol: Any, end: int, other: int, ranks: list[int]) -> bool:
    """True when turning this end changes nothing: no neighbours, one in line, or three alike."""
    around = [n.GetIdx() for n in mol.GetAtomWithIdx(end).GetNeighbors() if n.GetIdx() != other]
    linear = (
        len(around) == 1
        and mol.GetAtomWithIdx(end).GetTotalDegree() == 2
        and any(bond.GetBondType() == BondType.TRIPLE for bond in mol.GetAtomWithIdx(end).GetBonds())
    )
    return not around or linear or (len(around) == 3 and len({ranks[n] for n in around}) == 1)


def _beyond(mol: Any, start: int, first: int) -> set[int]:
    """Atoms on the far side of a bond, its far end left out."""
    seen = {start, first}
    queue = [first]
    while queue:
        for n in mol.GetAtomWithIdx(queue.pop()).GetNeighbors():
            if n.GetIdx() not in seen:
                seen.add(n.GetIdx())
                queue.append(n.GetIdx())
    return seen - {start, first}
