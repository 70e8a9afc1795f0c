"""Axial attack on the half-chairs of a six-membered oxocarbenium ion; part of the solvolysis question.

Rule: the nucleophile enters along the axis of the flat C=O bond and lands axially in the chair that the half-chair
turns into directly; an alkoxy group at C3 or C4 of the ion (counted from the cationic carbon as C1) prefers the
pseudoaxial place, alkyl the pseudoequatorial one.
"""

from __future__ import annotations

from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.products import remove_branch, set_face
from ringstrain.consequences.request import Request
from ringstrain.consequences.scene import Scene, numbers
from ringstrain.structure.edit import Draft

CAUTION = (
    "Lewis acids fume and burn; allylsilanes and stannanes are flammable or toxic. Follow local rules and ask a "
    "qualified colleague."
)


def attack(scene: Scene, request: Request, carbon: int, oxygen: int, leaving: int) -> list[Option]:
    """Nucleophile added to the ion that forms when a group leaves beside a ring oxygen.

    Parameters
    ----------
    scene
        The ring system.
    request
        Nucleophile; OH is written when none is given.
    carbon, oxygen, leaving
        Cationic carbon, ring oxygen and first atom of what leaves.
    """
    ring = next(r for r in scene.result.system.rings_of[carbon] if r in scene.result.system.rings_of[oxygen])
    atoms = scene.result.system.rings[ring].atoms
    start = atoms.index(carbon)
    step = -1 if atoms[(start + 1) % 6] == oxygen else 1
    order = [atoms[(start + step * i) % 6] for i in range(6)]
    structure = scene.structure
    # Each group votes for the face on which a pseudoaxial group of its kind would stand.
    votes = 0
    voters: list[int] = []
    for place in (2, 3, 4):
        atom = order[place]
        for n in scene.outer(atom) if scene.is_tetrahedral(atom) else ():
            face = scene.face(atom, n, ring)
            alkoxy = structure.atoms[n].number == 8
            if not face or (alkoxy and place == 4):
                continue
            # Axial faces alternate around the ring: the axial face at C1 is that of C3 and C5, opposite to C2 and C4.
            parity = face if place in (2, 4) else -face
            votes += parity if alkoxy else -parity
            voters.append(n)
    entering = request.part_or("O")
    out: list[Option] = []
    for face in (1, -1):
        if votes and (face > 0) != (votes > 0):
            continue
        draft = Draft(scene.settled)
        others = [s.neighbour for s in scene.sites(carbon) if s.ring == ring and s.neighbour != leaving]
        remove_branch(draft, structure, carbon, leaving)
        new = draft.graft(entering, carbon)
        set_face(draft, scene, carbon, ring, new, others[0], face)
        state = scene.states[0]
        reason = (
            f"The half-chair ion that has group {numbers(*voters)} where its kind prefers is attacked axially at C "
            f"{carbon + 1}."
            if votes
            else f"No group at C3 or C4 of the ion decides between its half-chairs; C {carbon + 1} is attacked "
            "axially in both."
        )
        finding = Finding(
            reaction="solvolysis",
            ring_system=scene.number,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=0.0,
            cost_uncertainty_kcal=0.0,
            verdict="open",
            leaving_atoms=(leaving,),
            partner_atoms=(carbon,),
            product_smiles=draft.smiles(keep=carbon),
            pathway="axial attack on the oxocarbenium half-chair",
            reason=reason,
            confidence="direction only",
            limits=(
                "(limit) With fast nucleophiles the selectivity is lost at the diffusion limit; the configuration "
                "of the "
                "starting acetal does not matter.",
            ),
            cautions=(CAUTION,),
            sources=("woerpel-2000",),
        )
        out.append(Option(finding=finding, weight=1.0 if votes else 0.5))
    return out
