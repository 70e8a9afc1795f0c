"""Which carbon of an epoxide is attacked, and which halohydrin or diol closes to one (class epoxide).

Rule: nucleophile and oxygen end trans-diaxial in the chair that the half-chair turns into directly.  The far bond of
the half-chair keeps its sign, so the opened bond gets a torsion of the opposite sign; the carbon whose axial face
carries the oxygen keeps it and the other one is attacked.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

from ringstrain.analysis import State
from ringstrain.consequences.finding import Confidence, Finding, Option
from ringstrain.consequences.functional import alcohols, epoxides, is_acetal_carbon, leaving_groups
from ringstrain.consequences.products import opened_epoxide, remove_branch, turn
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import LEVEL, Scene, has_boat, numbers
from ringstrain.equilibrium import weights
from ringstrain.structure.edit import Draft
from ringstrain.units import R_KCAL

CAUTION = (
    "Peracids and hydroperoxides can explode: never distil them. HBr burns, LiAlH4 ignites on quenching, azides form "
    "explosive salts. Follow local rules and ask a qualified colleague."
)


def options(scene: Scene, request: Request) -> list[Option]:
    """Openings of every epoxide on a ring; without one, closures of trans halohydrins and diols to an epoxide.

    Parameters
    ----------
    scene
        The ring system.
    request
        Nucleophile (``H`` for hydride); reagent ``acid`` for acid or Lewis-acid conditions.
    """
    found: list[Option] = []
    for a, b, oxygen in epoxides(scene):
        found.extend(_openings(scene, request, a, b, oxygen))
    return found or closures(scene)


def diaxial_sites(scene: Scene, state: State, a: int, b: int, ring: int) -> tuple[int, int]:
    """Axial faces of the two carbons of a flat bond in the chair that a half-chair turns into."""
    record = scene.result.system.rings[ring]
    place = next(p for p in range(6) if {record.atoms[p], record.atoms[(p + 1) % 6]} == {a, b})
    torsions = state.detail.shapes.rings[ring].torsions
    sign = 1 if torsions[(place + 3) % 6] > 0 else -1
    # The opened bond has torsion -60 sign; the axial face of its first atom is the sign of the far bond.
    return (sign, -sign) if record.atoms[place] == a else (-sign, sign)


def bond_ring(scene: Scene, a: int, b: int) -> int:
    """Number of the ring in which a flat bond lies."""
    return scene.geometry.ring_bonds[(min(a, b), max(a, b))][0][0]


def _is_full(scene: Scene, carbon: int) -> bool:
    return scene.structure.atoms[carbon].hydrogens == 0 and len(scene.structure.neighbours[carbon]) == 4


def _openings(scene: Scene, request: Request, a: int, b: int, oxygen: int) -> list[Option]:
    ring = bond_ring(scene, a, b)
    acid = request.reagent == "acid"
    entering = None if request.is_hydride else request.part_or("O")
    full = {carbon: _is_full(scene, carbon) for carbon in (a, b)}
    uneven = full[a] != full[b]
    face = scene.face(a, oxygen, ring)
    found: list[Option] = []
    reached: dict[int, State] = {}
    ready = [s for s in scene.states if s.detail.shapes.rings[ring].shape == "half-chair"]
    cost, share = _half_chairs(scene, ready, {a, b})
    ready.sort(key=lambda s: cost[s.id])
    for state in ready:
        at_a, _ = diaxial_sites(scene, state, a, b, ring)
        kept = a if at_a == face else b
        reached.setdefault(b if kept == a else a, state)
    for state in ready:
        at_a, _ = diaxial_sites(scene, state, a, b, ring)
        kept = a if at_a == face else b
        attacked = b if kept == a else a
        blocked = uneven and not acid and full[attacked] and len(reached) > 1
        ready_full = next((s for at, s in reached.items() if full[at]), None)
        if uneven and acid and ready_full is not None and cost[ready_full.id] < LEVEL:
            # The diaxial rule and the more substituted carbon agree on the best half-chair: clean.
            blocked = not full[attacked]
        clash = uneven and acid and not full[attacked] and not blocked
        limits = _limits(scene, a, b)
        if uneven and not acid and full[attacked]:
            limits += (
                f"(limit) C {attacked + 1} is fully substituted: an uncharged or basic nucleophile hardly attacks it; "
                "expect this isomer to be left behind.",
            )
        if clash:
            limits += (
                "(limit) Acid prefers the more substituted carbon, the diaxial rule the other: expect mixtures.",
            )
        limits += () if request.nucleophile else ("No nucleophile given: products are written with OH.",)
        confidence: Confidence = "direction only" if uneven else "order of magnitude"
        finding = Finding(
            reaction="epoxide",
            ring_system=scene.number,
            state=state.id,
            state_population=share[state.id],
            cost_kcal=cost[state.id],
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict="open" if cost[state.id] < LEVEL else "needs the flip",
            leaving_atoms=(oxygen,),
            partner_atoms=(attacked, kept),
            product_smiles=opened_epoxide(scene, attacked, kept, oxygen, entering),
            pathway=f"trans-diaxial opening, attack at C {attacked + 1}",
            reason=f"Half-chair {state.id} turns directly into the chair in which O {oxygen + 1} on C {kept + 1} "
            "and the "
            f"nucleophile on C {attacked + 1} are both axial.",
            confidence=confidence,
            limits=limits,
            cautions=(CAUTION,),
            reagent="acid" if acid else "hydride" if request.is_hydride else "nucleophile",
            sources=("fuerst-plattner-1949",),
        )
        weight = None if blocked else share[state.id]
        found.append(Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state), centres=(a, b)))
    if len(reached) == 1:
        found.append(_through_twist(scene, request, (a, b), oxygen, reached))
    return found


def _half_chairs(scene: Scene, ready: Sequence[State], carbons: set[int]) -> tuple[dict[str, float], dict[str, float]]:
    """Cost [kcal/mol] and share of each half-chair; groups on the flat carbons do not enter.

    What stands on the carbons of the three-ring lies between axial and equatorial in both half-chairs.
    """
    on_flat = {n for c in carbons for n in scene.structure.neighbours[c]} - carbons - set(scene.ring_atoms)
    energies = [
        sum(
            line.subtotal_kcal or 0.0
            for line in state.lines
            if not all(atom in on_flat for atoms in line.atoms for atom in atoms)
        )
        for state in ready
    ]
    lowest = min(energies, default=0.0)
    shares = weights(energies, scene.analysis.temperature_K) if energies else []
    ids = [state.id for state in ready]
    return (
        {i: e - lowest for i, e in zip(ids, energies, strict=True)},
        dict(zip(ids, shares, strict=True)),
    )


def _through_twist(
    scene: Scene, request: Request, bond: tuple[int, int], oxygen: int, reached: dict[int, State]
) -> Option:
    """The other carbon of a locked half-chair, attacked through a twist-boat."""
    (attacked_first, state), *_ = reached.items()
    kept = attacked_first
    attacked = bond[0] if bond[1] == kept else bond[1]
    extra = rule("epoxide-twist")
    entering = None if request.is_hydride else request.part_or("O")
    finding = Finding(
        reaction="epoxide",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state) + extra.number,
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict="needs a boat",
        leaving_atoms=(oxygen,),
        partner_atoms=(attacked, kept),
        product_smiles=opened_epoxide(scene, attacked, kept, oxygen, entering),
        pathway=f"diequatorial opening, attack at C {attacked + 1}",
        reason=f"The half-chair is locked; attack at C {attacked + 1} leads to a twist-boat first.",
        confidence="direction only",
        limits=_limits(scene, *bond),
        cautions=(CAUTION,),
        reagent="acid" if request.reagent == "acid" else "nucleophile",
        sources=extra.sources,
    )
    weight = scene.shares[state.id] * math.exp(-extra.number / (R_KCAL * scene.analysis.temperature_K))
    return Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state, extra.sigma_ln), centres=bond)


def _limits(scene: Scene, a: int, b: int) -> tuple[str, ...]:
    """Groups next to the epoxide that can take over."""
    structure = scene.structure
    found: list[str] = []
    near = [
        x
        for c in (a, b)
        for n in scene.ring_neighbours(c)
        if n not in (a, b)
        for x in scene.outer(n)
        if structure.atoms[x].number in (7, 8, 16)
    ]
    if near:
        found.append(
            f"(limit) Heteroatom {numbers(*near)} next to the epoxide can chelate, take part or migrate (epoxide "
            "shift)."
        )
    if any(structure.atoms[n].aromatic for c in (a, b) for n in scene.outer(c)):
        found.append("(limit) Benzylic carbon: acid opens it through a cation, from either face.")
    if len(scene.result.system.companions) and any(
        len(ring) < 6 and (a in ring or b in ring) and len(ring) > 3 for ring in scene.result.system.companions
    ):
        found.append("(limit) A small ring is fused on here: the half-chair is distorted.")
    return tuple(found)


def closures(scene: Scene) -> list[Option]:
    """Epoxides from a hydroxyl trans to a leaving group, or from a trans diol with one oxygen activated."""
    structure = scene.structure
    found: list[Option] = []
    for carbon, oxygen in alcohols(scene):
        for leaving in leaving_groups(scene, outside=False):
            if leaving.carbon in scene.ring_neighbours(carbon):
                found.extend(_closure(scene, carbon, oxygen, leaving.carbon, leaving.atom, leaving.name))
    if found:
        return found
    pairs = [(c, o) for c, o in alcohols(scene) if not is_acetal_carbon(structure, c)]
    for carbon, oxygen in pairs:
        for other, far in pairs:
            if other in scene.ring_neighbours(carbon) and structure.atoms[other].hydrogens:
                found.extend(_closure(scene, carbon, oxygen, other, far, "activated hydroxyl"))
    return found


def _closure(scene: Scene, carbon: int, oxygen: int, other: int, leaving: int, name: str) -> list[Option]:
    anti = [s for s in scene.states if scene.is_anti(s, oxygen, carbon, other, leaving)]
    anti = [s for s in anti if not has_boat(s)] or anti[:1]
    diol = name == "activated hydroxyl"
    limits = (
        ("One hydroxyl must be activated first (sulfurane, Mitsunobu or sulfonate); which one is not predicted.",)
        if diol
        else ()
    )
    sources = ("martin-et-al-1974",) if diol else ("fuerst-plattner-1949",)
    if not anti:
        finding = Finding(
            reaction="epoxide",
            ring_system=scene.number,
            verdict="locked out",
            leaving_atoms=(leaving,),
            partner_atoms=(oxygen,),
            pathway="no epoxide: oxygen and leaving group are anti in no state",
            reason=f"O {oxygen + 1} and {name} {leaving + 1} are anti in no state; expect a ketone, contraction or "
            "elimination.",
            limits=limits,
            cautions=(CAUTION,),
            sources=sources,
        )
        return [Option(finding=finding, centres=(other,))]
    product = closed_epoxide(scene, carbon, oxygen, other, leaving)
    found = []
    for state in anti:
        finding = Finding(
            reaction="epoxide",
            ring_system=scene.number,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=scene.cost(state),
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict=scene.verdict(state),
            leaving_atoms=(leaving,),
            partner_atoms=(oxygen,),
            product_smiles=product,
            pathway="closure to an epoxide with inversion",
            reason=f"In state {state.id} {scene.describe(state, carbon, oxygen)} and "
            f"{scene.describe(state, other, leaving)} "
            "are anti.",
            confidence="direction only" if diol else "order of magnitude",
            limits=limits,
            cautions=(CAUTION,),
            sources=sources,
        )
        found.append(
            Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state), centres=(other,))
        )
    return found


def closed_epoxide(scene: Scene, carbon: int, oxygen: int, other: int, leaving: int) -> str:
    """SMILES of the epoxide from backside attack of an oxygen on the neighbouring carbon."""
    draft = Draft(scene.settled)
    own = draft.configuration(other)
    kept = draft.configuration(carbon)
    remove_branch(draft, scene.structure, other, leaving)
    if scene.structure.atoms[oxygen].hydrogens:
        draft.add_hydrogens(oxygen, -1)
    else:
        draft.set_charge(oxygen, 0)
    draft.bond(oxygen, other)
    if own is not None:
        draft.replace_neighbour(own, other, leaving, oxygen)
        turn(draft, other)
    if kept is not None:
        draft.replace_neighbour(kept, carbon, oxygen, oxygen)
    return draft.smiles(keep=carbon)
