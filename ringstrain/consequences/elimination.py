"""Which hydrogens are anti to a leaving group, which alkene they give, and how fast beside the epimer (class e2).

Rule: the leaving group and a hydrogen (or a second leaving group) on the next ring atom at a torsion of at least
142 degrees.  Weights are populations of the reacting states (Winstein-Holness, Curtin-Hammett), with the strain of
the reacting state carried into the transition state unchanged.
"""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.analysis import State
from ringstrain.consequences.finding import Confidence, Finding, Option
from ringstrain.consequences.functional import (
    Leaving,
    is_acidifying,
    is_conjugating,
    leaving_groups,
    leaving_name,
)
from ringstrain.consequences.products import alkene
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.structure.edit import Draft, constitution_ranks, cut_branch
from ringstrain.units import R_KCAL

CAUTION = (
    "Alkoxide bases and NaH: moisture, fire. Alkyl halides and sulfonates alkylate skin. Polyhalides are toxic and "
    "persistent. Follow local rules and ask a qualified colleague."
)
ASSUMPTION = (
    "Rates assume fast exchange of states (Curtin-Hammett) and carry the strain of the reacting state into the "
    "transition state, less most of what the departing atoms take with them."
)
#: A state with a boat is listed beside a chair when it carries more than this of a pair's weight.
_WORTH_LISTING = 0.01


@dataclass(frozen=True, slots=True)
class _Pair:
    """A leaving group with a hydrogen or second leaving group anti to it in a state."""

    state: State
    leaving: Leaving
    carbon: int
    partner: int
    torsion: float


def options(scene: Scene, request: Request) -> list[Option]:
    """Anti eliminations of one ring system.

    Parameters
    ----------
    scene
        The ring system.
    request
        Base; reagent ``metal`` for the loss of two leaving groups.

    Returns
    -------
    list of Option
        One for each state, leaving group and neighbour; a locked-out finding for a group without any.
    """
    found: list[Option] = []
    with_metal = request.reagent == "metal"
    groups = leaving_groups(scene)
    for leaving in groups:
        if leaving.is_outside:
            if not with_metal:
                found.extend(_outside(scene, leaving))
            continue
        pairs = _worth_listing(scene, list(_hydrogen_pairs(scene, leaving)))
        if not with_metal:
            found.extend(_of_pair(scene, pair, request) for pair in pairs)
            if not pairs:
                found.append(_locked(scene, leaving))
        if with_metal or len(groups) <= 2:
            found.extend(_dehalogenations(scene, leaving, weigh=with_metal))
    return found


def _hydrogen_pairs(scene: Scene, leaving: Leaving) -> list[_Pair]:
    found = []
    for state in scene.states:
        for n in scene.ring_neighbours(leaving.carbon):
            if not scene.is_tetrahedral(n) or scene.structure.atoms[n].number != 6:
                continue
            for h in scene.hydrogens(n):
                torsion = scene.torsion(state, leaving.atom, leaving.carbon, n, h)
                if scene.is_anti(state, leaving.atom, leaving.carbon, n, h):
                    found.append(_Pair(state, leaving, n, h, torsion))
    return found


def _worth_listing(scene: Scene, pairs: list[_Pair]) -> list[_Pair]:
    """Pairs of chairs, and those of other shapes that matter or have no chair beside them."""
    kept = []
    for pair in pairs:
        rivals = [p for p in pairs if p.carbon == pair.carbon]
        total = sum(scene.shares[p.state.id] for p in rivals)
        chair = any(not has_boat(p.state) for p in rivals)
        if not has_boat(pair.state) or not chair or (total and scene.shares[pair.state.id] / total > _WORTH_LISTING):
            kept.append(pair)
    return kept


def _branching(scene: Scene, carbon: int) -> int:
    """Carbon substituents on a ring carbon besides its neighbours in the reacting ring."""
    structure = scene.structure
    ring = scene.result.system.rings[scene.result.system.rings_of[carbon][0]].atoms
    return sum(structure.atoms[n].number == 6 for n in structure.neighbours[carbon] if n not in ring)


def _of_pair(scene: Scene, pair: _Pair, request: Request) -> Option:
    """The finding of one pair."""
    leaving, n, state = pair.leaving, pair.carbon, pair.state
    structure = scene.structure
    branching = _branching(scene, n)
    hofmann = request.base_size == "bulky" or leaving.kind in ("ammonium", "sulfonium")
    conjugated = any(is_conjugating(structure, m) for m in scene.outer(n))
    weight, spread = scene.shares[state.id], 0.0
    used = rule("e2-small-base")
    if branching and (not hofmann or conjugated):
        weight, spread = weight * used.number**branching, used.sigma_ln
    elif hofmann:
        used = rule("e2-bulky-base")
        if branching:
            weight, spread = weight / used.number**branching, used.sigma_ln
    torsion = abs(pair.torsion)
    hydrogen = scene.describe(state, n, pair.partner)
    reason = (
        f"In state {state.id} {scene.describe(state, leaving.carbon, leaving.atom)} ({leaving.name}) and {hydrogen} "
        f"are anti (torsion {torsion:.0f} degrees)."
    )
    confidence: Confidence = "direction only" if hofmann else "order of magnitude"
    product = alkene(scene, ((leaving.carbon, leaving.atom), (n, pair.partner)), (leaving.carbon, n))
    finding = Finding(
        reaction="e2",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(leaving.atom,),
        partner_atoms=(n,),
        product_smiles=product,
        pathway="anti elimination" + (" to the more substituted alkene" if branching else ""),
        reason=reason,
        confidence=confidence,
        limits=_limits(scene, leaving, n),
        cautions=(CAUTION,),
        reagent=f"{request.base_size} base",
        sources=tuple(dict.fromkeys((*used.sources, "cristol-1947", "winstein-holness-1955"))),
    )
    relief = _relief_ln(scene, pair)
    return Option(
        finding=finding,
        weight=weight,
        sigma_ln=scene.sigma_ln(state, spread),
        centres=(leaving.carbon,),
        relief_ln=relief,
        relief_sigma=relief * rule("e2-relief").sigma_ln,
    )


def _relief_ln(scene: Scene, pair: _Pair) -> float:
    """Strain that the leaving group and the hydrogen take with them, over RT [-]."""
    freed = scene.relief(pair.state, pair.leaving.atom, (pair.carbon, pair.partner))
    return rule("e2-relief").number * freed / (R_KCAL * scene.analysis.temperature_K)


def _limits(scene: Scene, leaving: Leaving, n: int) -> tuple[str, ...]:
    """What can spoil an anti elimination here."""
    structure = scene.structure
    found = [ASSUMPTION]
    halogens = sum(structure.atoms[a].number in (9, 17, 35, 53) for a in structure.fragment)
    near = [m for m in scene.outer(n) if is_acidifying(structure, m)]
    if near:
        found.append(
            f"Hydrogen on C {n + 1} is acidic (group {numbers(*near)}): E1cB can remove it without an anti torsion."
        )
    if halogens > 2:
        found.append("(limit) Polyhalide: counting anti pairs does not give rates, and syn loss can compete.")
    if leaving.name == "sulfonate":
        found.append("Under solvolysis or acid the configuration of the leaving group stops mattering (E1).")
    if scene.is_rough:
        found.append("(limit) A contact of this ring has no tabulated price: populations are rough.")
    return tuple(found)


def _locked(scene: Scene, leaving: Leaving) -> Option:
    """No state offers an anti hydrogen."""
    centre = leaving.carbon
    axial = [s.id for s in scene.states if scene.position(s, centre, leaving.atom) == "axial"]
    where = (
        f"it is axial in {', '.join(axial)}, but no hydrogen next to it is anti there"
        if axial
        else "it is axial in none of the states"
    )
    finding = Finding(
        reaction="e2",
        ring_system=scene.number,
        verdict="locked out",
        leaving_atoms=(leaving.atom,),
        partner_atoms=(),
        pathway="no anti hydrogen in either chair",
        reason=f"{leaving.name} {leaving.atom + 1} on C {centre + 1}: {where}.",
        confidence="direction only",
        limits=("Expect syn elimination, E1, substitution or no reaction.", *_limits(scene, leaving, centre)[1:]),
        cautions=(CAUTION,),
        sources=("cristol-1947",),
    )
    return Option(finding=finding, centres=(centre,))


def _outside(scene: Scene, leaving: Leaving) -> list[Option]:
    """Loss from a CH2 beside the ring: it can always turn anti, no diaxial demand."""
    anchor = leaving.ring_atom
    hydrogens = scene.hydrogens(anchor)
    if not hydrogens:
        return []
    factor = rule("e2-exocyclic")
    draft = Draft(scene.settled)
    draft.drop(sorted(cut_branch(scene.structure, leaving.carbon, leaving.atom) - {leaving.carbon}))
    draft.add_hydrogens(anchor, -1)
    draft.bond(leaving.carbon, anchor, 2)
    product = draft.smiles(keep=anchor)
    found = []
    for state in scene.states:
        axial = scene.position(state, anchor, leaving.carbon) == "axial"
        weight = scene.shares[state.id] * (factor.number if axial else 1.0)
        finding = Finding(
            reaction="e2",
            ring_system=scene.number,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=scene.cost(state),
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict=scene.verdict(state),
            leaving_atoms=(leaving.atom,),
            partner_atoms=(anchor,),
            product_smiles=product,
            pathway="elimination to an exocyclic alkene",
            reason=f"{leaving.name} {leaving.atom + 1} sits outside the ring on "
            f"{scene.describe(state, anchor, leaving.carbon)}"
            " and can turn anti in every state.",
            confidence="order of magnitude",
            limits=(ASSUMPTION,),
            cautions=(CAUTION,),
            sources=factor.sources,
        )
        found.append(
            Option(
                finding=finding,
                weight=weight,
                sigma_ln=scene.sigma_ln(state, factor.sigma_ln if axial else 0.0),
                centres=(anchor,),
            )
        )
    return found


def _dehalogenations(scene: Scene, leaving: Leaving, *, weigh: bool) -> list[Option]:
    """Loss of two vicinal leaving groups with zinc or iodide; each pair once."""
    structure, centre = scene.structure, leaving.carbon
    found: list[Option] = []
    # Each pair once, from the carbon of lower rank, so that nothing depends on the numbering.
    ranks = constitution_ranks(structure)
    for n in scene.ring_neighbours(centre):
        if (ranks[n], n) < (ranks[centre], centre):
            continue
        for x in scene.outer(n):
            name = leaving_name(structure, n, x)
            if not name:
                continue
            product = alkene(scene, ((centre, leaving.atom), (n, x)), (centre, n))
            anti = [s for s in scene.states if scene.is_anti(s, leaving.atom, centre, n, x)]
            anti = [s for s in anti if not has_boat(s)] or anti[:1]
            sulfonate = "sulfonate" in (leaving.kind, name[0])
            limits = [ASSUMPTION]
            if sulfonate:
                limits.append(
                    "(limit) With iodide a sulfonate is first displaced by SN2, which can reverse the order: the "
                    "diaxial "
                    "isomer need not be the fast one."
                )
            centres = (centre,) if weigh else ()
            shared = {
                "reaction": "e2",
                "ring_system": scene.number,
                "leaving_atoms": (leaving.atom, x),
                "partner_atoms": (centre, n),
                "cautions": (CAUTION,),
                "reagent": "metal",
                "sources": ("barton-rosenfelder-1951", *(("angyal-et-al-1979",) if sulfonate else ())),
            }
            for state in anti:
                finding = Finding(
                    state=state.id,
                    state_population=scene.shares[state.id],
                    cost_kcal=scene.cost(state),
                    cost_uncertainty_kcal=scene.cost_sigma(state),
                    verdict=scene.verdict(state),
                    product_smiles=product,
                    pathway="loss of two anti leaving groups (zinc or iodide)",
                    reason=f"In state {state.id} {scene.describe(state, centre, leaving.atom)} and "
                    f"{scene.describe(state, n, x)} are anti.",
                    confidence="direction only" if sulfonate else "order of magnitude",
                    limits=tuple(limits),
                    **shared,  # type: ignore[arg-type]
                )
                weight = scene.shares[state.id] if weigh else None
                found.append(Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state), centres=centres))
            if not anti:
                finding = Finding(
                    verdict="locked out",
                    product_smiles=product if sulfonate else None,
                    pathway="no anti pair of leaving groups in any state",
                    reason=f"Leaving groups {numbers(leaving.atom, x)} are anti in no state; loss is slow or needs "
                    "another way.",
                    limits=tuple(limits),
                    **shared,  # type: ignore[arg-type]
                )
                found.append(Option(finding=finding, centres=centres))
    return found
