"""Whether the back of a leaving group is open, and what inversion gives (class substitution, SN2 on the ring)."""

from __future__ import annotations

from ringstrain.analysis import State
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import Leaving, leaving_groups
from ringstrain.consequences.products import displaced
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import Scene, has_boat, numbers

CAUTION = (
    "Azides: no CH2Cl2, no acid, no metal spatula; thiols stench, cyanide kills; halides and sulfonates alkylate skin. "
    "Follow local rules and ask a qualified colleague."
)


def options(scene: Scene, request: Request) -> list[Option]:
    """Backside displacement of every leaving group in every state.

    Parameters
    ----------
    scene
        The ring system.
    request
        Nucleophile; OH is written when none is given.
    """
    found: list[Option] = []
    for leaving in leaving_groups(scene):
        states = [s for s in scene.states if not has_boat(s)] or list(scene.states)
        for state in states:
            found.append(_of_state(scene, request, leaving, state))
    return found


def _of_state(scene: Scene, request: Request, leaving: Leaving, state: State) -> Option:
    structure, carbon = scene.structure, leaving.carbon
    entering = None if request.is_hydride else request.part_or("O")
    factor = rule("sn2-axial")
    limits = list(_limits(scene, leaving))
    if not request.nucleophile:
        limits.append("No nucleophile given: products are written with OH.")
    weight: float | None = scene.shares[state.id]
    sigma = 0.0
    if leaving.is_outside:
        why = "the leaving group sits outside the ring on CH2; the ring does not block its back"
    else:
        ring = scene.result.system.rings_of[carbon][0]
        axial = scene.position(state, carbon, leaving.atom) == "axial"
        if axial:
            why = (
                f"{scene.describe(state, carbon, leaving.atom)}: the nucleophile comes in from the open equatorial side"
            )
            weight, sigma = scene.shares[state.id] * factor.number, factor.sigma_ln
            limits.append("E2 competes when a base finds the anti hydrogens beside an axial leaving group.")
        else:
            where = scene.describe(state, carbon, leaving.atom)
            why = f"{where}: the back is the axial side, with syn-axial hydrogens in the way"
            face = -scene.face(carbon, leaving.atom, ring)
            blockers = scene.syn_axial(state, carbon, face, ring)
            if blockers:
                why = (
                    f"the back of {leaving.name} {leaving.atom + 1} is blocked by syn-axial group {numbers(*blockers)}"
                )
                limits.append("(limit) A syn-axial group stands on the attack face: very slow.")
    crowded = structure.atoms[carbon].hydrogens == 0 and not any(
        structure.atoms[n].number == 1 for n in structure.neighbours[carbon]
    )
    if crowded:
        limits.append("(limit) Tertiary carbon: no SN2; expect SN1 or elimination.")
    finding = Finding(
        reaction="substitution",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(leaving.atom,),
        partner_atoms=(carbon,),
        product_smiles=displaced(scene, carbon, leaving.atom, entering, invert=True),
        pathway="backside displacement with inversion",
        reason=f"State {state.id}, {why}.",
        confidence="order of magnitude",
        limits=tuple(limits),
        cautions=(CAUTION,),
        reagent="nucleophile",
        sources=factor.sources,
    )
    # No number tells how much slower a blocked isomer is, so no rate beside its epimer is given.
    blocked = any("very slow" in limit or "no SN2" in limit for limit in limits)
    centres = () if leaving.is_outside or blocked else (carbon,)
    return Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state, sigma), centres=centres)


def _limits(scene: Scene, leaving: Leaving) -> tuple[str, ...]:
    structure = scene.structure
    found: list[str] = []
    around = [n for n in structure.neighbours[leaving.carbon] if n != leaving.atom]
    if any(structure.atoms[n].number in (7, 8, 16) for n in around):
        found.append("(limit) Leaving group next to a heteroatom: an oxocarbenium or iminium ion takes over.")
    near = [
        x
        for n in scene.ring_neighbours(leaving.ring_atom)
        for x in scene.outer(n)
        if structure.atoms[x].number in (7, 8, 16, 35, 53) and x != leaving.atom
    ]
    if near:
        found.append(f"(limit) Heteroatom {numbers(*near)} next door can take part: retention instead of inversion.")
    found.append("An equatorial leaving group may react from a shape that is no chair.")
    return tuple(found)
