"""Rings with heteroatoms and planar atoms against three-dimensional structures.

Outside check: RDKit's ETKDG embedding and MMFF94 force field.  Every conformer whose ring torsions lie near a state of
the model must show the axial, equatorial and nitrogen sides that the model gives that state, and the favoured ring
shape of each structure must turn up among the conformers.
"""

from __future__ import annotations

from dataclasses import dataclass
from random import Random
from typing import Any

import numpy as np
import pytest
import ringstrain as rs
from rdkit import Chem
from rdkit.Chem import rdDistGeom, rdForceFieldHelpers
from ringstrain.analysis import State, SystemResult

from coordinates import Vectors, distance_from, keeps_marks
from zoo import marked, with_random_marks

pytestmark = pytest.mark.slow
#: Ring torsions of a conformer may be this far from those of its state: chairs of sp3 atoms, chairs flattened by a
#: planar atom or a bridge and half-chairs, half-chairs whose flat bond is that of an ester or amide [degree].
CHAIR_MATCH, FLAT_MATCH, ACYL_MATCH = 25.0, 30.0, 40.0
#: Closest axis angles of two sites of one atom that still tell axial from equatorial [degree].
CLEAR_DEGREES = 20.0
#: Batches of 30 conformers looked through for the favoured state.
BATCHES = 8
#: Twist-boats are left out: their isoclinal sites lie between.
SHAPES = {"chair", "half-chair"}
#: Name, SMILES without marks, how many random stereoisomers.
SKELETONS = (
    ("2,5-dimethyloxane", "CC1CCC(C)OC1", 2),
    ("2-methoxy-4-methyloxane", "COC1CC(C)CCO1", 2),
    ("3-chlorothiane, methyl", "CC1CCSC(C)C1Cl", 2),
    ("2-methyl-3-ethylpiperidine", "CC1NCCCC1CC", 2),
    ("N-methyl-2-methylpiperidine", "CC1CCCCN1C", 1),
    ("N-methyl-3,5-dimethylpiperidine", "CC1CC(C)CN(C)C1", 2),
    ("N-acetyl-4-methylpiperidine", "CC1CCN(C(C)=O)CC1O", 2),
    ("N-acetyl-2,6-dimethylpiperidine", "CC1CCCC(C)N1C(C)=O", 2),
    ("4-methylpiperidinium", "CC1CC[NH2+]CC1F", 2),
    ("N-methylpiperidinium", "CC1CCCC[NH+]1C", 2),
    ("2,5-disubstituted 1,3-dioxane", "CC1COC(c2ccccc2)OC1", 2),
    ("4,6-dimethyl-1,3-dioxane", "CC1CC(C)OC(C)O1", 3),
    ("2,3-dichloro-1,4-dioxane", "ClC1OCCOC1Cl", 2),
    ("2,5-dimethyl-1,4-dioxane", "CC1COC(C)CO1", 2),
    ("1,3-dithiane", "CC1SCCC(C)S1", 2),
    ("1,3-oxathiane", "CC1OCCC(C)S1", 2),
    ("1,4-oxathiane", "CC1CSCC(C)O1", 2),
    ("2,6-dimethylmorpholine", "CC1CNCC(C)O1", 2),
    ("N-methyl-3-phenylmorpholine", "CN1CCOCC1c1ccccc1", 1),
    ("2,5-dimethylpiperazine", "CC1CNC(C)CN1", 2),
    ("N,N-dimethyl-2-methylpiperazine", "CC1CN(C)CCN1C", 1),
    ("hexahydropyrimidine", "CC1CCN(C)CN1C", 1),
    ("1-methyl-3-methylsilinane", "CC1CCC[SiH](C)C1", 2),
    ("quinolizidine", "CC1CCN2CCCCC2C1", 3),
    ("decahydroquinoline", "CC1CCC2CCCCC2N1", 3),
    ("decahydroisoquinoline", "CN1CCC2CCCCC2C1", 2),
    ("octahydrochromene", "CC1CCC2CCCCC2O1", 3),
    ("1,3,5,7-tetraoxadecalin", "C1OCC2OCOCC2O1", 2),
    ("spiroketal", "CC1CCCC2(O1)CCCC(C)O2", 3),
    ("spiroaminal", "CC1CCC2(CC1)CCCNC2", 2),
    ("menthone", "CC1CCC(C(C)C)C(=O)C1", 2),
    ("2-chloro-4-tert-butylcyclohexanone", "CC(C)(C)C1CCC(=O)C(Cl)C1", 2),
    ("decalone", "O=C1CCC2CCCCC2C1C", 3),
    ("tetrahydropyranone", "CC1CC(=O)CC(C)O1", 2),
    ("piperidone", "CC1CN(C)CCC1=O", 1),
    ("methylenecyclohexane", "C=C1CCC(C)CC1C", 2),
    ("3,6-disubstituted cyclohexene", "CC1CCC(O)C=C1", 2),
    ("4,5-dimethylcyclohexene", "CC1CC=CCC1C", 2),
    ("limonene", "CC1=CCC(C(C)=C)CC1O", 2),
    ("3,6-dihydropyran", "CC1OCC=CC1C", 2),
    ("3,4-dihydropyran", "COC1CC(C)C=CO1", 2),
    ("tetrahydropyridine", "CC1CC=CCN1C", 1),
    ("octalin", "C1CCC2CC=CCC2C1", 2),
    ("octalin, methyl", "CC12CCCCC1=CCCC2O", 2),
    ("tetralin", "CC1CCc2ccccc2C1O", 2),
    ("2-aminotetralin", "NC1CCc2ccccc2C1C", 2),
    ("chroman", "CC1CCc2ccccc2O1", 1),
    ("tetrahydroisoquinoline", "CC1NC(C)Cc2ccccc12", 2),
    ("hexahydrophenanthrene", "c1ccc2c(c1)CCC1CCCCC21", 2),
    ("valerolactone", "CC1CCC(C)C(=O)O1", 2),
    ("valerolactam", "CC1CCC(C)C(=O)N1", 2),
    ("pyranose", "OCC1OC(O)C(O)C(O)C1O", 4),
    ("methyl pyranoside", "COC1OCC(O)C(O)C1O", 2),
    ("deoxyfluoro sugar", "OCC1OC(F)CC(O)C1O", 2),
    ("2-cyclohexenone", "CC1CC(C)C(=O)C=C1", 2),
    ("dihydrocarvone, carvone", "CC1=CCC(C(C)=C)CC1=O", 1),
    ("enone, 4-substituted", "CC1C=CC(=O)CC1C", 2),
    ("octalone", "CC1CCC2=CC(=O)CCC2C1", 2),
    ("N-acyl-tetrahydroisoquinoline", "CC1N(C(C)=O)CCc2ccccc12", 1),
    ("N-acyltetrahydropyridine", "CC1CC=CCN1C(C)=O", 1),
    ("thiane S-oxide", "CC1CCCS(=O)C1", 2),
    ("phosphorinane", "CC1CCP(C)CC1", 2),
)
#: Structures with every centre given: three-rings can only be cis.
FIXED = (
    ("cyclohexene oxide", "C1CC[C@H]2O[C@H]2C1"),
    ("3-methylcyclohexene oxide", "C[C@H]1CCC[C@H]2O[C@@H]12"),
    ("4-methylcyclohexene oxide", "C[C@@H]1CC[C@H]2O[C@H]2C1"),
    ("norcarane", "C1CC[C@@H]2C[C@@H]2C1"),
    ("tropine", "CN1[C@@H]2CC[C@H]1C[C@@H](O)C2"),
)


def without_nitrogen_marks(mol: Any) -> str:
    """SMILES of a marked molecule whose neutral nitrogens are free to invert."""
    for atom in mol.GetAtoms():
        if atom.GetAtomicNum() == 7 and atom.GetFormalCharge() == 0:
            atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
    return str(Chem.MolToSmiles(mol, canonical=False))


def conformers(mol: Any, *, count: int, seed: int) -> list[Vectors]:
    """Coordinates of seeded ETKDG conformers with the marks of the molecule, after MMFF minimisation."""
    parameters = rdDistGeom.ETKDGv3()
    parameters.randomSeed = seed
    parameters.numThreads = 1
    numbers = list(rdDistGeom.EmbedMultipleConfs(mol, count, parameters))
    if numbers and rdForceFieldHelpers.MMFFHasAllMoleculeParams(mol):
        rdForceFieldHelpers.MMFFOptimizeMoleculeConfs(mol, numThreads=1, maxIters=2000)
    found = [np.array(mol.GetConformer(number).GetPositions()) for number in numbers]
    return [points for points in found if keeps_marks(mol, points)]


def cases() -> list[tuple[str, str]]:
    """Name and SMILES of every structure."""
    rng = Random(31)
    found = []
    for name, smiles, times in SKELETONS:
        seen: set[str] = set()
        for _ in range(6 * times):
            if len(seen) == times:
                break
            text = without_nitrogen_marks(with_random_marks(smiles, rng))
            if text not in seen:
                seen.add(text)
                found.append((f"{name} {len(seen)}", text))
    return found + list(FIXED)


CASES = cases()


@dataclass(frozen=True, slots=True)
class Sides:
    """Which side each exocyclic atom is on: (atom or -1 for hydrogen, ring atom, ring) to position."""

    clear: dict[tuple[int, int, int], str]
    unclear: frozenset[tuple[int, int, int]]


def sides(mol: Any, points: Vectors, rings: tuple[tuple[int, ...], ...]) -> Sides:
    """Sides of all sites on tetrahedral ring atoms, by the angle between each bond and the ring axis."""
    clear: dict[tuple[int, int, int], str] = {}
    unclear = set()
    for number, ring in enumerate(rings):
        centred = points[list(ring)] - points[list(ring)].mean(axis=0)
        normal = np.linalg.svd(centred)[2][2]
        for atom in ring:
            record = mol.GetAtomWithIdx(int(atom))
            if record.GetHybridization() == Chem.HybridizationType.SP2:
                continue
            bonded = [n.GetIdx() for n in record.GetNeighbors()]
            arms = {n: points[n] - points[atom] for n in bonded}
            outside = {n: v for n, v in arms.items() if n not in ring}
            if len(bonded) == 3:
                outside[-2] = -np.sum([v / np.linalg.norm(v) for v in arms.values()], axis=0)
            if len(outside) != 2 or any(
                mol.GetRingInfo().AreAtomsInSameRing(int(atom), n) and small(mol, int(atom), n)
                for n in outside
                if n >= 0
            ):
                continue
            tilt = {
                n: float(np.degrees(np.arccos(abs(np.dot(v, normal)) / float(np.linalg.norm(v)))))
                for n, v in outside.items()
            }
            first, second = sorted(tilt, key=lambda n: tilt[n])
            for site, position in ((first, "axial"), (second, "equatorial")):
                if site < 0:
                    continue
                bare = mol.GetAtomWithIdx(site).GetAtomicNum() == 1
                if bare and (record.GetAtomicNum() != 7 or record.GetFormalCharge() != 0):
                    continue
                key = (site if mol.GetAtomWithIdx(site).GetAtomicNum() > 1 else -1, int(atom), number)
                if tilt[second] - tilt[first] < CLEAR_DEGREES:
                    unclear.add(key)
                else:
                    clear[key] = position
    return Sides(clear, frozenset(unclear))


def model_sides(state: State) -> dict[tuple[int, int, int], str]:
    """The same from the model: heavy atoms, and the hydrogens of inverting nitrogens."""
    found = {(atom, ring_atom, ring): position for atom, ring_atom, ring, position in state.sites if atom >= 0}
    for ring_atom, position in state.nitrogen:
        for number, ring in enumerate(state.detail.shapes.geometry.system.rings):
            if ring_atom in ring.atoms and not any(a >= 0 and r == ring_atom for a, r, _, _ in state.sites):
                found[(-1, ring_atom, number)] = position
    return found


def small(mol: Any, atom: int, other: int) -> bool:
    """True for two atoms of a three-ring, on whose bonds axial and equatorial have no meaning."""
    return any(len(ring) == 3 and atom in ring and other in ring for ring in mol.GetRingInfo().AtomRings())


def tolerance(mol: Any, system: SystemResult) -> float:
    """How far a conformer may be from a state [degree]."""
    acyl = Chem.MolFromSmarts("[R]C(=O)[O,N;R]")
    atoms = {a for ring in system.rings for a in ring}
    rings = [set(ring) for ring in system.rings]
    for match in mol.GetSubstructMatches(acyl):
        if any({match[0], match[1], match[3]} <= ring for ring in rings):
            return ACYL_MATCH
    info = mol.GetRingInfo()
    bridged = any(len(set(ring) & atoms) > 2 for ring in info.AtomRings() if len(ring) != 6)
    flat = any(mol.GetAtomWithIdx(int(a)).GetHybridization() == Chem.HybridizationType.SP2 for a in atoms)
    three = any(len(ring) == 3 and set(ring) & atoms for ring in info.AtomRings())
    return FLAT_MATCH if bridged or flat or three else CHAIR_MATCH


def disagreements(mol: Any, seen: list[Vectors], system: SystemResult) -> tuple[list[str], set[str], int]:
    """What differs between conformers and states, the states found, and how many comparisons agreed."""
    wrong: list[str] = []
    matched: set[str] = set()
    agreed = 0
    limit = tolerance(mol, system)
    states = [state for state in system.states if set(state.shapes) <= SHAPES]
    torsions = {state.id: [ring.torsions for ring in state.detail.shapes.rings] for state in states}
    for number, points in enumerate(seen):
        near = [s for s in states if distance_from(points, system.rings, torsions[s.id]) <= limit]
        if not near:
            continue
        shown = sides(mol, points, system.rings)
        best: list[str] | None = None
        for state in near:
            model = model_sides(state)
            differ = [
                f"conformer {number} state {state.id} {state.shapes}: atom {key[0]} on {key[1]} ring {key[2]} is "
                f"{position}, model says {model.get(key)}"
                for key, position in shown.clear.items()
                if model.get(key) != position
            ]
            if not differ:
                matched.add(state.id)
                agreed += 1
            if best is None or len(differ) < len(best):
                best = differ
        wrong.extend(best or [])
    return wrong, matched, agreed


def test_sixty_structures_are_looked_at() -> None:
    assert len({Chem.CanonSmiles(smiles) for _, smiles in CASES}) >= 60


@pytest.mark.parametrize(("name", "smiles"), CASES, ids=[name for name, _ in CASES])
def test_sides_agree_with_three_dimensional_structures(name: str, smiles: str) -> None:
    mol = Chem.AddHs(marked(smiles))
    systems = rs.analyze(smiles).ring_systems
    found: set[int] = set()
    compared = 0
    for batch in range(BATCHES):
        seen = conformers(mol, count=30, seed=5 + 1000 * batch)
        for number, system in enumerate(systems):
            wrong, matched, agreed = disagreements(mol, seen, system)
            assert not wrong, wrong[:6]
            compared += agreed
            lowest = system.states[0].detail.shapes.rings
            if any(state.detail.shapes.rings == lowest for state in system.states if state.id in matched):
                found.add(number)
        if len(found) == len(systems):
            break
    assert compared, "no conformer near any state"
    assert len(found) == len(systems), "the favoured ring shape was never met"
