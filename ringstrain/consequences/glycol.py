"""Which vicinal diols a cyclic ester can reach and cleave (class glycol)."""

from __future__ import annotations

from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import alcohols
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.errors import UsageError
from ringstrain.structure.edit import Draft, constitution_ranks

CAUTION = "Lead salts are toxic, periodates are oxidisers. Follow local rules and ask a qualified colleague."
REAGENTS = ("lead tetraacetate", "periodate")
#: Widest O-C-C-O torsion from which a five-membered ester closes [degree].
_CLOSES = 82.0


def options(scene: Scene, request: Request) -> list[Option]:
    """Cleavage of every pair of neighbouring hydroxyls.

    Parameters
    ----------
    scene
        The ring system.
    request
        Reagent ``lead tetraacetate`` (whose cis : trans factor is known) or ``periodate``.

    Raises
    ------
    UsageError
        If the reagent is none of these.
    """
    reagent = request.reagent or REAGENTS[0]
    if reagent not in REAGENTS:
        raise UsageError(f"Reagent {reagent!r} does not cleave glycols.", f"Use one of {', '.join(REAGENTS)}.")
    pairs = alcohols(scene)
    # The epimer is taken at the carbon of lower rank, so that it does not depend on the numbering.
    ranks = constitution_ranks(scene.structure)
    found: list[Option] = []
    for c1, o1 in pairs:
        for c2, o2 in pairs:
            if ranks[c1] <= ranks[c2] and c2 in scene.ring_neighbours(c1) and (ranks[c1] < ranks[c2] or c1 < c2):
                found.extend(_pair(scene, reagent, (c1, o1), (c2, o2)))
    return found


def _product(scene: Scene, first: tuple[int, int], second: tuple[int, int]) -> str:
    draft = Draft(scene.settled)
    draft.unbond(first[0], second[0])
    for carbon, oxygen in (first, second):
        draft.add_hydrogens(oxygen, -1)
        draft.bond(carbon, oxygen, 2)
    return draft.smiles(keep=first[0])


def _pair(scene: Scene, reagent: str, first: tuple[int, int], second: tuple[int, int]) -> list[Option]:
    factor = rule("glycol-cis")
    (c1, o1), (c2, o2) = first, second
    cis = scene.same_face(c1, o1, c2, o2)
    chairs = [s for s in scene.states if not has_boat(s)] or list(scene.states)
    near = [s for s in chairs if abs(scene.torsion(s, o1, c1, c2, o2)) < _CLOSES]
    lead = reagent == "lead tetraacetate"
    if not near:
        finding = Finding(
            reaction="glycol",
            ring_system=scene.number,
            verdict="locked out",
            leaving_atoms=(o1, o2),
            partner_atoms=(c1, c2),
            pathway="no cyclic ester: the diol is fixed trans-diaxial",
            reason=f"O {numbers(o1, o2)} are anti in every state.",
            limits=("Lead tetraacetate still cleaves it slowly by another way; periodate does not.",),
            cautions=(CAUTION,),
            reagent=reagent,
            sources=factor.sources,
        )
        return [Option(finding=finding, centres=(c1,))]
    product = _product(scene, first, second)
    found = []
    for state in near:
        torsion = abs(scene.torsion(state, o1, c1, c2, o2))
        finding = Finding(
            reaction="glycol",
            ring_system=scene.number,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=scene.cost(state),
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict=scene.verdict(state),
            leaving_atoms=(o1, o2),
            partner_atoms=(c1, c2),
            product_smiles=product,
            pathway=f"cleavage of a {'cis' if cis else 'trans'} diol",
            reason=f"State {state.id}: torsion O {o1 + 1} to O {o2 + 1} is {torsion:.0f} degrees, so a cyclic "
            "ester closes.",
            confidence="order of magnitude" if lead else "direction only",
            limits=("Strained or hindered diols deviate.",),
            cautions=(CAUTION,),
            reagent=reagent,
            sources=factor.sources if lead else (),
        )
        weight = scene.shares[state.id] * (factor.number if cis and lead else 1.0)
        sigma = scene.sigma_ln(state, factor.sigma_ln if cis and lead else 0.0)
        found.append(Option(finding=finding, weight=weight, sigma_ln=sigma, centres=(c1,) if lead else ()))
    return found
