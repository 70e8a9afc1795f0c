"""Which centres can be inverted at the bench."""

from __future__ import annotations

from ringstrain.ringgraph import RingSystem
from ringstrain.structure.records import Structure


def invertible_centres(structure: Structure, system: RingSystem, centres: tuple[int, ...]) -> set[int]:
    """Centres that acid or base can invert.

    Parameters
    ----------
    structure
        The molecule.
    system
        The ring system.
    centres
        Its ring stereocentres.

    Returns
    -------
    set of int
        Carbons with a hydrogen next to C=O, C=N, nitro, cyano or sulfonyl, and anomeric or ketal carbons.
        Bridgeheads are left out: their configuration is dictated by the cage.
    """
    found = set()
    for atom in centres:
        if len(system.rings_of[atom]) > 2 or _is_bridgehead(system, atom):
            continue
        record = structure.atoms[atom]
        if record.number != 6:
            continue
        if _is_acetal(structure, atom) or (record.hydrogens and _is_acidified(structure, atom)):
            found.add(atom)
    return found


def _is_bridgehead(system: RingSystem, atom: int) -> bool:
    """True when the atom joins two rings that share more than one bond."""
    rings = [set(system.rings[number].atoms) for number in system.rings_of[atom]]
    return any(len(first & second) > 2 for i, first in enumerate(rings) for second in rings[:i])


def _is_acetal(structure: Structure, atom: int) -> bool:
    """True for a carbon with two single-bonded oxygens, nitrogens or sulfurs, one of them oxygen."""
    hetero = [structure.atoms[n].number for n in structure.neighbours[atom] if structure.atoms[n].number in (7, 8, 16)]
    return len(hetero) >= 2 and 8 in hetero


def _is_acidified(structure: Structure, atom: int) -> bool:
    """True when a neighbour pulls the hydrogen's acidity down to what a base reaches."""
    for n in structure.neighbours[atom]:
        record = structure.atoms[n]
        doubles = [m for m in structure.neighbours[n] if m != atom and structure.bond(n, m).order == 2]
        if record.number == 6 and any(structure.atoms[m].number in (7, 8, 16) for m in doubles):
            return True
        if record.number == 6 and any(
            structure.bond(n, m).order == 3 and structure.atoms[m].number == 7
            for m in structure.neighbours[n]
            if m != atom
        ):
            return True
        if record.number == 7 and record.charge > 0 and any(structure.atoms[m].number == 8 for m in doubles):
            return True
        if record.number == 16 and sum(structure.atoms[m].number == 8 for m in doubles) >= 1:
            return True
    return False
