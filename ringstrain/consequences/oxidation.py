"""Which alcohol oxidises first, and to what (class oxidation).

Rule for chromic acid: the axial alcohol is faster because its strained chromate ester loses strain in the C-H step;
each syn-axial carbon adds to that.
"""

from __future__ import annotations

from ringstrain.analysis import State
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import alcohols
from ringstrain.consequences.products import oxidised
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.errors import UsageError

CAUTION = (
    "Cr(VI) is a carcinogen and a strong oxidiser: keep acetone and ether away, segregate waste. Hypervalent "
    "iodine can "
    "explode. Follow local rules and ask a qualified colleague."
)
REAGENTS = ("chromic acid", "hypervalent")


def options(scene: Scene, request: Request) -> list[Option]:
    """Oxidation of every secondary alcohol on the ring in every state.

    Parameters
    ----------
    scene
        The ring system.
    request
        Reagent ``chromic acid`` or ``hypervalent`` (also for activated-DMSO and oxoammonium reagents).

    Raises
    ------
    UsageError
        If the reagent is none of these.
    """
    reagent = request.reagent or "chromic acid"
    if reagent not in REAGENTS:
        raise UsageError(f"Reagent {reagent!r} does not oxidise alcohols.", f"Use one of {', '.join(REAGENTS)}.")
    found: list[Option] = []
    for carbon, oxygen in alcohols(scene):
        if not scene.hydrogens(carbon):
            continue
        product = oxidised(scene, carbon, oxygen)
        states = [s for s in scene.states if not has_boat(s)] or list(scene.states)
        found.extend(_of_state(scene, reagent, carbon, oxygen, product, state) for state in states)
    return found


def _of_state(scene: Scene, reagent: str, carbon: int, oxygen: int, product: str, state: State) -> Option:
    plain, extra = rule("oxidation-axial"), rule("oxidation-syn-axial")
    axial = scene.position(state, carbon, oxygen) == "axial"
    crowd: list[int] = []
    if axial:
        for ring in scene.result.system.rings_of[carbon]:
            near = scene.syn_axial(state, carbon, scene.face(carbon, oxygen, ring), ring)
            crowd += [n for n in near if scene.structure.atoms[n].number == 6 and n not in crowd]
    rate = plain.number * extra.number ** len(crowd) if axial else 1.0
    spread = (plain.sigma_ln**2 + len(crowd) * extra.sigma_ln**2) ** 0.5 if axial else 0.0
    limits = ["The order turns round where forming the ester is slow (hindered or very fast cases)."]
    if any(scene.structure.atoms[a].number != 6 for a in scene.ring_atoms):
        limits.append("(limit) Heteroatom in the ring: Ce(IV) and other metals can reverse the order.")
    where = scene.describe(state, carbon, oxygen)
    why = f"{where}: strain of its chromate ester is relieved" if axial else f"{where}: little strain to relieve"
    if crowd:
        why += f", with syn-axial carbon {numbers(*crowd)}"
    weight: float | None = scene.shares[state.id] * rate
    if reagent == "hypervalent":
        weight = None
        why = f"{where}; these reagents follow accessibility, often equatorial first (common practice)"
    finding = Finding(
        reaction="oxidation",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(oxygen,),
        partner_atoms=(carbon,),
        product_smiles=product,
        pathway="oxidation to the ketone",
        reason=f"State {state.id}: {why}.",
        confidence="order of magnitude" if reagent == "chromic acid" else "direction only",
        limits=tuple(limits),
        cautions=(CAUTION,),
        reagent=reagent,
        sources=plain.sources + (extra.sources if crowd else ()) if reagent == "chromic acid" else (),
    )
    return Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state, spread), centres=(carbon,))
