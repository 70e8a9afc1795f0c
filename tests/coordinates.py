"""Axial atoms and contacts read off three-dimensional structures, knowing nothing of the graph model.

Only RDKit's embedding, its force field and plain vector algebra are used.  What is read follows the definitions
of the trade: the axial site of a ring atom is the one along the ring axis, a gauche path has a torsion of 37 to 82
degrees.  The reader makes no use of chairs, so that it serves rings with heteroatoms and planar atoms as well.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Any

import numpy as np
from numpy.typing import NDArray
from rdkit import Chem
from rdkit.Chem import rdDistGeom, rdForceFieldHelpers

from zoo import marked

Vectors = NDArray[np.float64]
#: Ring torsions of a conformer may be this far from those of the state it stands for [degree].
MATCH_DEGREES = 25.0
HELD_DEGREES = 12.0
#: Gauche bin of the definition, and the wider one that strain pushes a path of a chair into [degree].
STRICT = (37.0, 82.0)
WIDE = (12.0, 118.0)
#: Closest axis angles of the two sites of one atom that still tell axial from equatorial [degree].
ISOCLINAL_DEGREES = 20.0


@dataclass(frozen=True, slots=True)
class Reading:
    """What one conformer shows: chains written from their lower end, hydrogens -1, gauche paths with their sign."""

    axial: frozenset[int]
    equatorial: frozenset[int]
    gauche: tuple[tuple[tuple[int, ...], int], ...]
    syn_axial_XH: tuple[tuple[int, ...], ...]
    syn_axial_XY: tuple[tuple[int, ...], ...]
    peri: tuple[tuple[int, ...], ...]
    geminal: tuple[tuple[int, ...], ...]


def chain(atoms: Iterable[int]) -> tuple[int, ...]:
    """A chain of atoms in the direction that sorts first."""
    forward = tuple(int(a) for a in atoms)
    return min(forward, forward[::-1])


def molecule(smiles: str) -> Any:
    """RDKit molecule with hydrogens and every tetrahedral mark of the SMILES kept, dependent ones too."""
    return Chem.AddHs(marked(smiles))


def dihedral(points: Vectors, a: int, b: int, c: int, d: int) -> float:
    """Torsion a-b-c-d [degree]."""
    axis = points[c] - points[b]
    axis = axis / np.linalg.norm(axis)
    first = points[a] - points[b]
    last = points[d] - points[c]
    first = first - np.dot(first, axis) * axis
    last = last - np.dot(last, axis) * axis
    return float(np.degrees(np.arctan2(np.dot(np.cross(first, last), axis), np.dot(first, last))))


def keeps_marks(mol: Any, points: Vectors) -> bool:
    """True when the coordinates show the handedness that every marked atom of the molecule asks for."""
    for atom in mol.GetAtoms():
        tag = atom.GetChiralTag()
        if tag not in (Chem.ChiralType.CHI_TETRAHEDRAL_CW, Chem.ChiralType.CHI_TETRAHEDRAL_CCW):
            continue
        around = [bond.GetOtherAtomIdx(atom.GetIdx()) for bond in atom.GetBonds()]
        arms = [points[n] - points[atom.GetIdx()] for n in around]
        if len(arms) == 3:
            arms.append(-np.sum([arm / np.linalg.norm(arm) for arm in arms], axis=0))
        # Seen from the first neighbour (a lone pair stands last) the others run clockwise when their triple product
        # is positive; all four views are looked at, so that a hydrogen pushed through the atom is noticed.
        clockwise = tag == Chem.ChiralType.CHI_TETRAHEDRAL_CW
        for left_out in range(4):
            first, second, third = (arm for place, arm in enumerate(arms) if place != left_out)
            positive = float(np.dot(first, np.cross(second, third))) > 0
            if positive != (clockwise == (left_out % 2 == 0)):
                return False
    return True


def conformers(mol: Any, *, count: int, seed: int) -> list[Vectors]:
    """Coordinates of seeded ETKDG conformers after MMFF minimisation."""
    parameters = rdDistGeom.ETKDGv3()
    parameters.randomSeed = seed
    parameters.useRandomCoords = True
    parameters.numThreads = 1
    numbers = list(rdDistGeom.EmbedMultipleConfs(mol, count, parameters))
    if numbers and rdForceFieldHelpers.MMFFHasAllMoleculeParams(mol):
        rdForceFieldHelpers.MMFFOptimizeMoleculeConfs(mol, numThreads=1, maxIters=1000)
    return [np.array(mol.GetConformer(number).GetPositions()) for number in numbers]


def held(
    mol: Any, rings: Sequence[Sequence[int]], torsions: Sequence[Sequence[float]], *, seed: int, tries: int = 12
) -> Vectors | None:
    """Coordinates of a minimum with the ring torsions held at given values [degree]; None when they cannot be had.

    Holding the rings at their undistorted shape, and the bonds of their atoms at tetrahedral angles, keeps crowding
    from pushing torsions over the edge of a bin, and shows states that are too strained to be minima.
    """
    work = Chem.Mol(mol)
    parameters = rdDistGeom.ETKDGv3()
    parameters.randomSeed = seed
    parameters.useRandomCoords = True
    parameters.numThreads = 1
    properties = rdForceFieldHelpers.MMFFGetMoleculeProperties(work)
    angles = _tetrahedral_angles(work, {a for ring in rings for a in ring})
    for attempt in range(tries):
        parameters.randomSeed = seed + attempt
        number = rdDistGeom.EmbedMolecule(work, parameters)
        if number < 0:
            continue
        for strength in (2.0, 20.0, 200.0):
            field = rdForceFieldHelpers.MMFFGetMoleculeForceField(work, properties, confId=number)
            field.Initialize()
            for ring, wanted in zip(rings, torsions, strict=True):
                for place, value in enumerate(wanted):
                    atoms = [int(ring[(place + shift) % 6]) for shift in (-1, 0, 1, 2)]
                    field.MMFFAddTorsionConstraint(*atoms, False, value - 3.0, value + 3.0, strength)
            for angle in angles if strength > 10.0 else ():
                field.MMFFAddAngleConstraint(*angle, False, 108.0, 112.0, strength)
            field.Minimize(maxIts=1000)
        points = np.array(work.GetConformer(number).GetPositions())
        if keeps_marks(mol, points) and distance_from(points, rings, torsions) < HELD_DEGREES:
            return points
    return None


def _tetrahedral_angles(mol: Any, ring_atoms: set[int]) -> list[tuple[int, int, int]]:
    """Angles between heavy neighbours of the tetrahedral atoms, those inside small rings left out."""
    info = mol.GetRingInfo()
    small = [set(ring) for ring in info.AtomRings() if len(ring) < 6]
    found = []
    for atom in sorted(ring_atoms):
        if mol.GetAtomWithIdx(atom).GetHybridization() != Chem.HybridizationType.SP3:
            continue
        around = [n.GetIdx() for n in mol.GetAtomWithIdx(atom).GetNeighbors() if n.GetAtomicNum() > 1]
        for first, second in combinations(around, 2):
            if not any({first, atom, second} <= ring for ring in small):
                found.append((first, atom, second))
    return found


def ring_torsions(points: Vectors, ring: Sequence[int]) -> tuple[float, ...]:
    """Endocyclic torsions of a six-membered ring, bond by bond [degree]."""
    return tuple(dihedral(points, *(int(ring[(i + shift) % 6]) for shift in (-1, 0, 1, 2))) for i in range(6))


def distance_from(points: Vectors, rings: Sequence[Sequence[int]], torsions: Sequence[Sequence[float]]) -> float:
    """Largest difference between the ring torsions of a conformer and given ones [degree]."""
    worst = 0.0
    for ring, wanted in zip(rings, torsions, strict=True):
        for here, there in zip(ring_torsions(points, ring), wanted, strict=True):
            worst = max(worst, abs((here - there + 180.0) % 360.0 - 180.0))
    return worst


def read_off(
    mol: Any, points: Vectors, rings: Sequence[Sequence[int]], gauche_bin: tuple[float, float] = STRICT
) -> Reading:
    """Axial atoms and contacts of one conformer.

    Parameters
    ----------
    mol
        Molecule with explicit hydrogens.
    points
        Coordinates, shape (atoms, 3) [angstrom].
    rings
        Six-membered rings of the system looked at.
    gauche_bin
        Torsions that count as gauche [degree].
    """
    low, high = gauche_bin
    heavy = {atom.GetIdx() for atom in mol.GetAtoms() if atom.GetAtomicNum() > 1}
    near = {atom.GetIdx(): [n.GetIdx() for n in atom.GetNeighbors()] for atom in mol.GetAtoms()}
    cycles = [frozenset(ring) for ring in mol.GetRingInfo().AtomRings()] + [frozenset(ring) for ring in rings]
    members = frozenset(a for ring in rings for a in ring)
    bonds = {frozenset((ring[i - 1], ring[i])) for ring in rings for i in range(6)}
    axial: set[int] = set()
    equatorial: set[int] = set()
    pairs_XH: list[tuple[int, ...]] = []
    pairs_XY: list[tuple[int, ...]] = []
    for ring in rings:
        up: dict[int, tuple[int, float]] = {}
        normal = _axis(points, ring)
        for place, atom in enumerate(ring):
            for site, position in _positions(mol, points, ring, atom, normal).items():
                if position == "axial":
                    side = float(np.sign(np.dot(points[site] - points[atom], normal))) if site >= 0 else 0.0
                    up[place] = (site, side)
                if site in heavy:
                    (axial if position == "axial" else equatorial if position == "equatorial" else set()).add(site)
        for place, (site, side) in up.items():
            site_2, side_2 = up.get((place + 2) % 6, (-1, 0.0))
            if site < 0 or site_2 < 0 or side != side_2 or not {site, site_2} & heavy:
                continue
            middle = [ring[(place + shift) % 6] for shift in (0, 1, 2)]
            whole = chain([site if site in heavy else -1, *middle, site_2 if site_2 in heavy else -1])
            if -1 in whole:
                pairs_XH.append(whole)
            elif not _share(cycles, *whole):
                pairs_XY.append(whole)
    gauche: set[tuple[tuple[int, ...], int]] = set()
    for b, c in (tuple(bond) for bond in bonds):
        if mol.GetBondBetweenAtoms(b, c).GetBondType() != Chem.BondType.SINGLE:
            continue
        for a in near[b]:
            for d in near[c]:
                if len({a, b, c, d}) < 4 or a not in heavy or d not in heavy or _share(cycles, a, b, c, d):
                    continue
                angle = dihedral(points, a, b, c, d)
                if low <= abs(angle) < high:
                    gauche.add((chain((a, b, c, d)), 1 if angle > 0 else -1))
    return Reading(
        frozenset(axial),
        frozenset(equatorial),
        tuple(sorted(gauche)),
        tuple(sorted(pairs_XH)),
        tuple(sorted(pairs_XY)),
        _peri(points, near, heavy, members, bonds, cycles, gauche_bin),
        _geminal(near, heavy, members, cycles, mol),
    )


def _share(cycles: Iterable[frozenset[int]], *atoms: int) -> bool:
    return any(all(a in cycle for a in atoms) for cycle in cycles)


def _axis(points: Vectors, ring: Sequence[int]) -> Vectors:
    """Unit normal of the mean plane of a ring."""
    centred = points[list(ring)] - points[list(ring)].mean(axis=0)
    return np.asarray(np.linalg.svd(centred)[2][2], dtype=np.float64)


def _positions(mol: Any, points: Vectors, ring: Sequence[int], atom: int, normal: Vectors) -> dict[int, str]:
    """Axial, equatorial or isoclinal for each exocyclic neighbour of a tetrahedral ring atom.

    The missing fourth partner of a three-coordinate atom is the lone pair opposite to its bonds.
    """
    outside = [n.GetIdx() for n in mol.GetAtomWithIdx(atom).GetNeighbors() if n.GetIdx() not in ring]
    directions = {n: points[n] - points[atom] for n in outside}
    hybrid = mol.GetAtomWithIdx(atom).GetHybridization()
    if not outside or hybrid == Chem.HybridizationType.SP2 or len(outside) > 2:
        return {}
    if len(outside) == 1:
        bonded = [n.GetIdx() for n in mol.GetAtomWithIdx(atom).GetNeighbors()]
        units = [(points[n] - points[atom]) / np.linalg.norm(points[n] - points[atom]) for n in bonded]
        directions[-1] = -np.sum(units, axis=0)
    tilt = {
        n: float(np.degrees(np.arccos(min(1.0, abs(np.dot(v, normal)) / float(np.linalg.norm(v))))))
        for n, v in directions.items()
    }
    first, second = sorted(tilt, key=lambda n: tilt[n])
    if tilt[second] - tilt[first] < ISOCLINAL_DEGREES:
        return {first: "isoclinal", second: "isoclinal"}
    return {first: "axial", second: "equatorial"}


def _peri(
    points: Vectors,
    near: dict[int, list[int]],
    heavy: set[int],
    members: frozenset[int],
    bonds: set[frozenset[int]],
    cycles: list[frozenset[int]],
    gauche_bin: tuple[float, float],
) -> tuple[tuple[int, ...], ...]:
    found = []
    low, high = gauche_bin
    for b in members:
        for a, c in combinations([n for n in near[b] if frozenset((n, b)) in bonds], 2):
            if _share(cycles, a, b, c):
                continue
            for x in near[a]:
                for y in near[c]:
                    if x not in heavy or y not in heavy or len({x, a, b, c, y}) < 5 or _share(cycles, x, a, b, c, y):
                        continue
                    first, second = dihedral(points, x, a, b, c), dihedral(points, a, b, c, y)
                    if low <= abs(first) < high and low <= abs(second) < high and first * second < 0:
                        found.append(chain((x, a, b, c, y)))
    return tuple(sorted(found))


def _geminal(
    near: dict[int, list[int]], heavy: set[int], members: frozenset[int], cycles: list[frozenset[int]], mol: Any
) -> tuple[tuple[int, ...], ...]:
    found = []
    for atom in members:
        outside = [n for n in near[atom] if n in heavy and n not in members]
        if len(outside) == 2 and len(near[atom]) == 4 and not _share(cycles, outside[0], atom, outside[1]):
            found.append(chain((outside[0], atom, outside[1])))
    return tuple(sorted(found))
