"""Vicinal H-H couplings from the generalised Karplus equation with electronegativity and orientation terms.

J = P1 cos^2 phi + P2 cos phi + P3 + sum over substituents of D (P4 + P5 cos^2(xi phi + P6 |D|)), where
D = dchi(alpha) - P7 sum dchi(beta) and dchi is the electronegativity less that of hydrogen.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from ringstrain.structure.records import Structure
from ringstrain.tables.spectra import SET_BY_SUBSTITUENTS, KarplusSet, SpectralTables


@dataclass(frozen=True, slots=True)
class Substituent:
    """A substituent of an H-C-C-H fragment that is not hydrogen.

    Attributes
    ----------
    alpha
        Electronegativity of its first atom less that of hydrogen [-].
    beta
        Sum of the same over the atoms behind it, doubly bonded ones counted twice [-].
    turned
        Sign times torsion of the coupled hydrogens, xi phi [degree].
    """

    alpha: float
    beta: float
    turned: float


def vicinal_coupling(phi: float, substituents: Sequence[Substituent], parameters: KarplusSet) -> float:
    """The 3J coupling of an H-C-C-H fragment [Hz].

    Parameters
    ----------
    phi
        Torsion H-C-C-H [degree].
    substituents
        What else stands on the two carbons, hydrogens left out.
    parameters
        Parameter set.

    Returns
    -------
    float
        3J [Hz].

    Notes
    -----
    Fitted on saturated fragments with C, N, O and halogen substituents; not for flat carbons.

    References
    ----------
    ``haasnoot-et-al-1980``

    Examples
    --------
    >>> from ringstrain.tables.spectra import load_spectra
    >>> ring_carbons = [Substituent(0.4, 0.4, 178.0)] * 2
    >>> round(vicinal_coupling(178.0, ring_carbons, load_spectra().sets["C"]), 1)
    13.4
    """
    cosine = math.cos(math.radians(phi))
    total = parameters.p1 * cosine**2 + parameters.p2 * cosine + parameters.p3
    for substituent in substituents:
        weight = substituent.alpha - parameters.p7 * substituent.beta
        angle = math.radians(substituent.turned + parameters.p6 * abs(weight))
        total += weight * (parameters.p4 + parameters.p5 * math.cos(angle) ** 2)
    return total


def choose_set(count: int, tables: SpectralTables) -> KarplusSet:
    """The parameter set for a number of substituents other than hydrogen; the general one outside 2 to 4."""
    return tables.sets[SET_BY_SUBSTITUENTS.get(count, "B")]


def electronegativities(
    structure: Structure, carbon: int, neighbour: int, tables: SpectralTables
) -> tuple[float, float] | None:
    """What a neighbour of a coupled carbon brings: alpha and summed beta electronegativity less hydrogen [-].

    Parameters
    ----------
    structure
        The molecule.
    carbon
        The coupled carbon.
    neighbour
        Its substituent atom.
    tables
        NMR tables.

    Returns
    -------
    tuple or None
        None when an element has no tabulated electronegativity.
    """
    own = _difference(structure, neighbour, tables)
    total = 0.0
    for atom in structure.neighbours[neighbour]:
        if atom == carbon:
            continue
        behind = _difference(structure, int(atom), tables)
        if behind is None:
            return None
        total += behind * max(1, structure.bond(neighbour, atom).order)
    return None if own is None else (own, total)


def _difference(structure: Structure, atom: int, tables: SpectralTables) -> float | None:
    found = tables.electronegativities.get(structure.atoms[atom].element)
    if found is None:
        return None
    return found.value - tables.electronegativities["H"].value
