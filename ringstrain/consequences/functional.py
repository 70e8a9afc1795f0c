"""Functional groups a reaction looks for: leaving groups, alcohols, ketones, alkenes, epoxides, esters."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from ringstrain.consequences.scene import Scene
from ringstrain.structure.edit import cut_branch
from ringstrain.structure.records import Structure

LeavingKind = Literal["halide", "sulfonate", "ammonium", "sulfonium", "diazonium"]
SynKind = Literal["amine oxide", "sulfoxide", "selenoxide", "xanthate", "ester"]
_HALIDES = {17: "chloride", 35: "bromide", 53: "iodide"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Leaving:
    """A leaving group.

    Attributes
    ----------
    carbon
        Atom it leaves.
    atom
        Its first atom.
    ring_atom
        Ring atom: the carbon itself, or the one that bears the CH2 when the group is outside the ring.
    kind, name
        What it is.
    """

    carbon: int
    atom: int
    ring_atom: int
    kind: LeavingKind
    name: str

    @property
    def is_outside(self) -> bool:
        """True when it leaves from a CH2 on the ring."""
        return self.carbon != self.ring_atom


def leaving_name(structure: Structure, carbon: int, atom: int) -> tuple[LeavingKind, str] | None:
    """What kind of leaving group an atom starts, if any; fluoride does not count."""
    record = structure.atoms[atom]
    if structure.atoms[carbon].number != 6 or structure.bond(carbon, atom).order != 1:
        return None
    others = [int(n) for n in structure.neighbours[atom] if n != carbon]
    if record.number in _HALIDES and not others and record.charge == 0:
        return "halide", _HALIDES[record.number]
    if record.number == 8:
        for n in others:
            oxo = sum(
                structure.atoms[m].number == 8 and len(structure.neighbours[m]) == 1 for m in structure.neighbours[n]
            )
            if structure.atoms[n].number == 16 and oxo >= 2:
                return "sulfonate", "sulfonate"
    if record.number == 7 and record.charge == 1:
        triple = any(structure.bond(atom, n).order == 3 for n in others)
        if triple:
            return "diazonium", "dinitrogen"
        if not any(structure.atoms[n].charge < 0 for n in others) and all(
            structure.bond(atom, n).order == 1 for n in others
        ):
            return "ammonium", "ammonium group"
    if record.number == 16 and record.charge == 1 and not any(structure.atoms[n].charge < 0 for n in others):
        return "sulfonium", "sulfonium group"
    return None


def leaving_groups(scene: Scene, *, outside: bool = True) -> tuple[Leaving, ...]:
    """Leaving groups on ring carbons, and on CH2 groups beside them when ``outside``."""
    structure = scene.structure
    found = []
    for ring_atom in scene.ring_atoms:
        if not scene.is_tetrahedral(ring_atom):
            continue
        for n in scene.outer(ring_atom):
            name = leaving_name(structure, ring_atom, n)
            if name and ring_atom not in cut_branch(structure, ring_atom, n):
                found.append(Leaving(carbon=ring_atom, atom=n, ring_atom=ring_atom, kind=name[0], name=name[1]))
            elif outside and structure.atoms[n].number == 6 and structure.atoms[n].hydrogens == 2:
                for m in structure.neighbours[n]:
                    far = leaving_name(structure, n, m) if m != ring_atom else None
                    if far:
                        found.append(Leaving(carbon=n, atom=int(m), ring_atom=ring_atom, kind=far[0], name=far[1]))
    return tuple(found)


def syn_leaving(structure: Structure, carbon: int, atom: int) -> SynKind | None:
    """What kind of internal-base leaving group an atom starts, if any."""
    record = structure.atoms[atom]
    if structure.atoms[carbon].number != 6 or structure.bond(carbon, atom).order != 1:
        return None
    others = [int(n) for n in structure.neighbours[atom] if n != carbon]
    oxides = [n for n in others if structure.atoms[n].number == 8 and len(structure.neighbours[n]) == 1]
    if record.number == 7 and record.charge == 1 and any(structure.atoms[n].charge == -1 for n in oxides):
        return "amine oxide" if all(structure.bond(atom, n).order == 1 for n in others) else None
    if record.number in (16, 34) and len(oxides) == 1 and len(others) == 2:
        return "sulfoxide" if record.number == 16 else "selenoxide"
    if record.number == 8:
        for n in others:
            if structure.atoms[n].number != 6:
                continue
            doubles = [int(m) for m in structure.neighbours[n] if structure.bond(n, m).order == 2]
            if any(structure.atoms[m].number == 16 for m in doubles):
                return "xanthate"
            if any(structure.atoms[m].number == 8 for m in doubles):
                return "ester"
    return None


def is_hydroxyl(structure: Structure, atom: int) -> bool:
    """True for the oxygen of OH or an alkoxide."""
    record = structure.atoms[atom]
    return (
        record.number == 8 and len(structure.neighbours[atom]) == 1 and (record.hydrogens == 1 or record.charge == -1)
    )


def alcohols(scene: Scene) -> tuple[tuple[int, int], ...]:
    """(ring carbon, oxygen) of every hydroxyl on a tetrahedral ring carbon, anomeric ones included."""
    structure = scene.structure
    return tuple(
        (atom, n)
        for atom in scene.ring_atoms
        if scene.is_tetrahedral(atom) and structure.atoms[atom].number == 6
        for n in scene.outer(atom)
        if is_hydroxyl(structure, n)
    )


def is_acetal_carbon(structure: Structure, atom: int) -> bool:
    """True when a carbon bears two or more singly bound oxygens."""
    return (
        sum(structure.atoms[n].number == 8 and structure.bond(atom, n).order == 1 for n in structure.neighbours[atom])
        > 1
    )


def ketones(scene: Scene) -> tuple[tuple[int, int], ...]:
    """(ring carbon, oxygen) of every ring ketone."""
    structure = scene.structure
    found = []
    for atom in scene.ring_atoms:
        if structure.atoms[atom].number != 6:
            continue
        oxygen = [n for n in scene.outer(atom) if structure.atoms[n].number == 8 and structure.bond(atom, n).order == 2]
        beside = [n for n in structure.neighbours[atom] if n not in oxygen]
        if oxygen and len(beside) == 2 and all(structure.atoms[n].number == 6 for n in beside):
            found.append((atom, oxygen[0]))
    return tuple(found)


def ring_alkenes(scene: Scene) -> tuple[tuple[int, int], ...]:
    """Ring C=C bonds, aromatic ones left out."""
    structure = scene.structure
    return tuple(
        (a, b)
        for a, b in sorted(scene.geometry.ring_bonds)
        if structure.bond(a, b).order == 2
        and not structure.bond(a, b).aromatic
        and structure.atoms[a].number == structure.atoms[b].number == 6
    )


def epoxides(scene: Scene) -> tuple[tuple[int, int, int], ...]:
    """(carbon, carbon, oxygen) of every epoxide fused on a ring."""
    structure = scene.structure
    found = []
    for a, b in sorted(scene.geometry.ring_bonds):
        for n in structure.neighbours[a]:
            if n in structure.neighbours[b] and structure.atoms[n].number == 8:
                found.append((a, b, int(n)))
    return tuple(found)


def is_conjugating(structure: Structure, atom: int) -> bool:
    """True for an aryl, vinyl, acyl or nitrile carbon."""
    record = structure.atoms[atom]
    if record.number != 6:
        return False
    return record.aromatic or any(structure.bond(atom, n).order > 1 for n in structure.neighbours[atom])


def is_acidifying(structure: Structure, atom: int) -> bool:
    """True for a group that makes the hydrogen beside it acidic: C=O, CN, NO2, SO2."""
    record = structure.atoms[atom]
    around = structure.neighbours[atom]
    if record.number == 6 and not record.aromatic:
        return any(structure.bond(atom, n).order > 1 and structure.atoms[n].number in (7, 8) for n in around)
    oxides = sum(structure.atoms[n].number == 8 for n in around)
    return (record.number == 7 and oxides >= 2) or (record.number == 16 and oxides >= 2)
