"""A structure turned into a molecule with hydrogens and coordinates, and a test that it kept its configuration."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from rdkit.Chem import AddHs, RWMol, SanitizeMol, rdDistGeom

from ringstrain.analysis import Analysis
from ringstrain.structure.records import SECOND_IMPLICIT, AtomIndex, Configuration, Structure
from ringstrain.structure.write import to_rdkit

Points = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Molecule:
    """The analysed fragment of a structure, hydrogens added.

    Attributes
    ----------
    mol
        RDKit molecule; its conformers are scratch space.
    places
        Atom of the molecule by atom of the structure.
    structure
        What it was made from.
    """

    mol: Any
    places: dict[int, int]
    structure: Structure

    @property
    def charge(self) -> int:
        """Total charge [e]."""
        return sum(self.structure.atoms[atom].charge for atom in self.places)

    @property
    def unpaired(self) -> int:
        """Unpaired electrons [-]."""
        return sum(self.structure.atoms[atom].radicals for atom in self.places)

    def hydrogens_of(self, atom: int) -> list[int]:
        """Plain hydrogens on an atom of the structure, as atoms of the molecule."""
        known = set(self.places.values())
        around = self.mol.GetAtomWithIdx(self.places[atom]).GetNeighbors()
        return [n.GetIdx() for n in around if n.GetIdx() not in known]


def settled(analysis: Analysis) -> Structure:
    """The structure with the configuration the ledger chose wherever the input left a ring atom open.

    Methylcyclohexane has no configuration, yet its two chairs are told apart by the face of the methyl.
    """
    structure = analysis.structure
    configurations = list(structure.configurations)
    for result in analysis.ring_systems:
        for atom, order in result.states[0].detail.shapes.geometry.orders.items():
            swings = result.system.kinds[atom] == "inverting" or SECOND_IMPLICIT in order
            if configurations[atom] is None and not swings:
                configurations[atom] = Configuration(tuple(AtomIndex(n) for n in order), clockwise=True)
    return replace(structure, configurations=tuple(configurations))


def make_molecule(structure: Structure) -> Molecule:
    """The analysed fragment with hydrogens and every configuration, dependent ones too."""
    mol = RWMol(to_rdkit(structure))
    kept = sorted(structure.fragment)
    for atom in sorted(set(range(len(structure.atoms))) - set(kept), reverse=True):
        mol.RemoveAtom(atom)
    plain = mol.GetMol()
    SanitizeMol(plain)
    plain.SetIntProp("_StereochemDone", 1)
    return Molecule(AddHs(plain), {atom: place for place, atom in enumerate(kept)}, structure)


def embed(molecule: Molecule, *, seed: int, count: int) -> Iterator[Points]:
    """Seeded distance-geometry conformers that kept the configuration.

    Parameters
    ----------
    molecule
        What to embed.
    seed
        Seed; the same one gives the same conformers.
    count
        Conformers to try [-].
    """
    parameters = rdDistGeom.ETKDGv3()
    parameters.randomSeed = seed
    parameters.useRandomCoords = True
    parameters.numThreads = 1
    parameters.maxIterations = 20
    numbers = list(rdDistGeom.EmbedMultipleConfs(molecule.mol, count, parameters))
    found = [np.array(molecule.mol.GetConformer(number).GetPositions()) for number in numbers]
    yield from (points for points in found if keeps_configuration(molecule, points))


def keeps_configuration(molecule: Molecule, points: Points) -> bool:
    """True when coordinates show every configuration the structure was read with.

    Parameters
    ----------
    molecule
        The molecule.
    points
        Coordinates, shape (atoms, 3) [angstrom].
    """
    for atom, configuration in enumerate(molecule.structure.configurations):
        if configuration is None or atom not in molecule.places:
            continue
        centre = points[molecule.places[atom]]
        around = [n for n in configuration.neighbours if n >= 0]
        arms = {int(n): points[molecule.places[int(n)]] - centre for n in around}
        if len(around) == 3:
            bare = molecule.hydrogens_of(atom)
            arms[-1] = (
                points[bare[0]] - centre
                if bare
                else -np.sum([arm / np.linalg.norm(arm) for arm in arms.values()], axis=0)
            )
        order = [arms[int(n)] for n in configuration.neighbours]
        # From the first neighbour the others run clockwise when their triple product is positive; all four views
        # are looked at, so that a hydrogen pushed through its atom is noticed.
        for left_out in range(4):
            first, second, third = (arm for place, arm in enumerate(order) if place != left_out)
            positive = float(np.dot(first, np.cross(second, third))) > 0
            if positive != (configuration.clockwise == (left_out % 2 == 0)):
                return False
    return True
