"""Products of single steps on a ring, with every configuration that is known."""

from __future__ import annotations

from collections.abc import Iterable

from ringstrain.consequences.scene import Scene
from ringstrain.structure.edit import Draft, cut_branch
from ringstrain.structure.records import IMPLICIT, Atom, Structure

HYDROXYL = Atom(8, "O", hydrogens=1)


def remove_branch(draft: Draft, structure: Structure, root: int, first: int) -> None:
    """Take a branch off, the bond to it included."""
    draft.drop(sorted(cut_branch(structure, root, first) - {root}))


def set_face(draft: Draft, scene: Scene, atom: int, ring: int, first: int, other: int, face: int) -> None:
    """Put a neighbour of a ring atom on a face and another (or a hydrogen) on the opposite one."""
    atoms = scene.result.system.rings[ring].atoms
    place = atoms.index(atom)
    draft.configure(atom, (atoms[(place + 1) % 6], atoms[place - 1], first, other), clockwise=face > 0)


def alkene(scene: Scene, gone: Iterable[tuple[int, int]], bond: tuple[int, int]) -> str:
    """SMILES after branches or hydrogens (root, first; negative for a hydrogen) leave and a double bond forms."""
    draft = Draft(scene.settled)
    for root, first in gone:
        if first < 0:
            draft.add_hydrogens(root, -1)
        elif scene.structure.atoms[first].number == 1:
            draft.drop([first])
        else:
            remove_branch(draft, scene.structure, root, first)
    draft.bond(*bond, 2)
    return draft.smiles(keep=bond[0])


def displaced(scene: Scene, carbon: int, leaving: int, entering: Structure | None, *, invert: bool) -> str:
    """SMILES after a group is displaced; ``entering`` None stands for hydride.

    Parameters
    ----------
    scene
        The ring system.
    carbon, leaving
        Atom attacked and first atom of what leaves.
    entering
        The nucleophile, bonding atom first.
    invert
        True when the nucleophile comes in from the back.
    """
    draft = Draft(scene.settled)
    own = draft.configuration(carbon)
    remove_branch(draft, scene.structure, carbon, leaving)
    if entering is None:
        draft.add_hydrogens(carbon, 1)
        return draft.smiles(keep=carbon)
    new = draft.graft(entering, carbon)
    if own is not None:
        draft.replace_neighbour(own, carbon, leaving, new)
        if invert:
            turn(draft, carbon)
    return draft.smiles(keep=carbon)


def turn(draft: Draft, atom: int) -> None:
    """Turn a configuration round."""
    own = draft.configuration(atom)
    if own is not None:
        order = own.neighbours
        draft.configure(atom, (int(order[0]), int(order[1]), int(order[2]), int(order[3])), clockwise=not own.clockwise)


def opened_epoxide(scene: Scene, attacked: int, kept: int, oxygen: int, entering: Structure | None) -> str:
    """SMILES of the trans product of an epoxide opened at one carbon; ``entering`` None stands for hydride."""
    draft = Draft(scene.settled)
    at, stays = draft.configuration(attacked), draft.configuration(kept)
    draft.unbond(attacked, oxygen)
    draft.add_hydrogens(oxygen, 1)
    if stays is not None:
        draft.replace_neighbour(stays, kept, oxygen, oxygen)
    if entering is None:
        draft.add_hydrogens(attacked, 1)
        if at is not None and all(n >= 0 for n in at.neighbours):
            draft.replace_neighbour(at, attacked, oxygen, int(IMPLICIT))
            turn(draft, attacked)
        return draft.smiles(keep=kept)
    new = draft.graft(entering, attacked)
    if at is not None:
        draft.replace_neighbour(at, attacked, oxygen, new)
        turn(draft, attacked)
    return draft.smiles(keep=kept)


def added_pair(scene: Scene, first: tuple[int, int, Structure], second: tuple[int, int, Structure]) -> str:
    """SMILES after two groups add to a ring double bond: (carbon, face, group) each."""
    draft = Draft(scene.settled)
    draft.bond(first[0], second[0], 1)
    both = scene.result.system.rings_of
    ring = next(r for r in both[first[0]] if r in both[second[0]])
    for carbon, face, group in (first, second):
        others = [s.neighbour for s in scene.sites(carbon) if s.ring == ring]
        new = draft.graft(group, carbon)
        set_face(draft, scene, carbon, ring, new, others[0] if others else int(IMPLICIT), face)
    return draft.smiles(keep=first[0])


def carbonyl_to_alcohol(
    scene: Scene, carbon: int, oxygen: int, ring: int, face: int, entering: Structure | None
) -> str:
    """SMILES of the alcohol from attack on one face of a ring ketone; ``entering`` None stands for hydride."""
    draft = Draft(scene.settled)
    draft.bond(carbon, oxygen, 1)
    draft.add_hydrogens(oxygen, 1)
    new = int(IMPLICIT)
    if entering is None:
        draft.add_hydrogens(carbon, 1)
    else:
        new = draft.graft(entering, carbon)
    set_face(draft, scene, carbon, ring, new, oxygen, face)
    return draft.smiles(keep=carbon)


def spiro_epoxide(scene: Scene, carbon: int, oxygen: int, ring: int, face: int) -> str:
    """SMILES of the spiro-epoxide from a methylene that attacks one face of a ring ketone."""
    draft = Draft(scene.settled)
    draft.bond(carbon, oxygen, 1)
    new = draft.add_atom(Atom(6, "C", hydrogens=2))
    draft.bond(carbon, new)
    draft.bond(new, oxygen)
    set_face(draft, scene, carbon, ring, new, oxygen, face)
    return draft.smiles(keep=carbon)


def oxidised(scene: Scene, carbon: int, oxygen: int) -> str:
    """SMILES of the ketone from a secondary alcohol."""
    draft = Draft(scene.settled)
    draft.add_hydrogens(oxygen, -1)
    draft.add_hydrogens(carbon, -1)
    draft.bond(carbon, oxygen, 2)
    return draft.smiles(keep=carbon)


def acylated(scene: Scene, carbon: int, oxygen: int, acyl: Structure) -> str:
    """SMILES of the ester of an alcohol."""
    draft = Draft(scene.settled)
    if scene.structure.atoms[oxygen].hydrogens:
        draft.add_hydrogens(oxygen, -1)
    else:
        draft.set_charge(oxygen, 0)
    draft.graft(acyl, oxygen)
    return draft.smiles(keep=carbon)


def epoxidised(scene: Scene, a: int, b: int, ring: int, face: int) -> str:
    """SMILES of the epoxide on one face of a ring double bond."""
    draft = Draft(scene.settled)
    draft.bond(a, b, 1)
    oxygen = draft.add_atom(Atom(8, "O"))
    draft.bond(a, oxygen)
    draft.bond(b, oxygen)
    for carbon in (a, b):
        others = [s.neighbour for s in scene.sites(carbon) if s.ring == ring]
        set_face(draft, scene, carbon, ring, oxygen, others[0] if others else int(IMPLICIT), face)
    return draft.smiles(keep=a)


def alkylated(scene: Scene, enol: tuple[int, int, int], ring: int, face: int, group: Structure | None) -> str:
    """SMILES of the ketone from an enol (carbonyl carbon, oxygen, alpha carbon) attacked on one face; None for H."""
    carbon, oxygen, alpha = enol
    draft = Draft(scene.settled)
    draft.add_hydrogens(oxygen, -1)
    draft.bond(carbon, alpha, 1)
    draft.bond(carbon, oxygen, 2)
    others = [s.neighbour for s in scene.sites(alpha) if s.ring == ring]
    new = int(IMPLICIT)
    if group is None:
        draft.add_hydrogens(alpha, 1)
    else:
        new = draft.graft(group, alpha)
    set_face(draft, scene, alpha, ring, new, others[0] if others else int(IMPLICIT), face)
    return draft.smiles(keep=carbon)
