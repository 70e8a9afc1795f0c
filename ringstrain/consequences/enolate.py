"""Which face of an enolate, enamine or azaenolate takes the electrophile, and what equilibration makes of it (enolate).

Rule: the new bond forms perpendicular to the flat C=C-O; attack that leads straight to a chair puts it axial on the
alpha carbon, the other face goes through a twist-boat.  The half-chairs are those of the enol, priced like any ring.
"""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.analysis import State
from ringstrain.consequences.epoxides import bond_ring, diaxial_sites
from ringstrain.consequences.finding import Confidence, Finding, Option
from ringstrain.consequences.functional import is_acidifying, ketones
from ringstrain.consequences.products import alkylated
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import Rule, rule
from ringstrain.consequences.scene import LEVEL, Scene, numbers
from ringstrain.errors import UsageError
from ringstrain.structure.edit import Draft
from ringstrain.structure.records import Structure

CAUTION = (
    "Alkyl iodides, sulfates and triflates are toxic alkylators; HMPA is a carcinogen; LDA and NaH ignite. Follow "
    "local "
    "rules and ask a qualified colleague."
)
REAGENTS = ("lithium enolate", "equilibrated enolate", "enamine", "azaenolate")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Enol:
    """The enol of one side of a ketone, priced, with the atoms in its own numbering."""

    scene: Scene
    carbon: int
    oxygen: int
    alpha: int
    back: dict[int, int]


def options(scene: Scene, request: Request) -> list[Option]:
    """Attack of an electrophile at every alpha carbon of every ring ketone.

    Parameters
    ----------
    scene
        The ring system.
    request
        Electrophile (or nucleophile option) as the group that enters, methyl when none is given, ``H`` for
        protonation; reagent ``lithium enolate``, ``equilibrated enolate``, ``enamine`` or ``azaenolate``.

    Raises
    ------
    UsageError
        If the reagent is no enolate.
    """
    reagent = request.reagent or REAGENTS[0]
    if reagent not in REAGENTS:
        raise UsageError(f"Reagent {reagent!r} is no enolate.", f"Use one of {', '.join(REAGENTS)}.")
    text = request.electrophile or request.nucleophile
    protonation = text.strip("[]+-") in ("H", "HH")
    group = None if protonation else Request(electrophile=text).electrophile_or("C")
    found: list[Option] = []
    for carbon, oxygen in ketones(scene):
        sides = [
            n
            for n in scene.ring_neighbours(carbon)
            if scene.is_tetrahedral(n) and scene.structure.atoms[n].number == 6 and scene.hydrogens(n)
        ]
        if not sides:
            continue
        taken = _taken_sides(scene, sides, reagent)
        for alpha in sides:
            found.extend(
                _side(scene, reagent, group, carbon, oxygen, alpha, 1.0 / len(taken) if alpha in taken else None)
            )
    return found


def _branches(scene: Scene, alpha: int) -> int:
    return sum(scene.structure.atoms[n].number != 1 for n in scene.structure.neighbours[alpha])


def _taken_sides(scene: Scene, sides: list[int], reagent: str) -> list[int]:
    """Alpha carbons that react: an acidified one, else the less branched one (the more branched at equilibrium)."""
    acidified = [a for a in sides if any(is_acidifying(scene.structure, n) for n in scene.outer(a))]
    if acidified:
        return acidified
    counts = {a: _branches(scene, a) for a in sides}
    wanted = max(counts.values()) if reagent == "equilibrated enolate" else min(counts.values())
    return [a for a in sides if counts[a] == wanted]


def _enol(scene: Scene, carbon: int, oxygen: int, alpha: int) -> _Enol | None:
    draft = Draft(scene.settled)
    draft.add_hydrogens(alpha, -1)
    draft.bond(carbon, oxygen, 1)
    draft.add_hydrogens(oxygen, 1)
    draft.bond(carbon, alpha, 2)
    index = draft.numbering()
    priced = scene.price(draft.structure())
    if priced is None:
        return None
    for number, result in enumerate(priced.ring_systems):
        if index[carbon] in result.system.atom_set:
            return _Enol(
                scene=Scene(analysis=priced, number=number, tables=scene.tables),
                carbon=index[carbon],
                oxygen=index[oxygen],
                alpha=index[alpha],
                back={new: old for old, new in index.items()},
            )
    return None


def _number(scene: Scene, reagent: str, alpha: int) -> Rule:
    if reagent in ("enamine", "azaenolate"):
        return rule("enolate-enamine")
    return rule("enolate-substituted" if scene.outer(alpha) else "enolate-hydrogen")


def _side(
    scene: Scene, reagent: str, group: Structure | None, carbon: int, oxygen: int, alpha: int, part: float | None
) -> list[Option]:
    enol = _enol(scene, carbon, oxygen, alpha)
    if enol is None:
        return []
    own = enol.scene
    ring = bond_ring(own, enol.carbon, enol.alpha)
    used = _number(scene, reagent, alpha)
    states = [s for s in own.states if s.detail.shapes.rings[ring].shape == "half-chair"]
    found: list[Option] = []
    products: dict[int, str] = {}
    for face in (1, -1):
        products[face] = alkylated(own, (enol.carbon, enol.oxygen, enol.alpha), ring, face, group)
    balance = None
    if products[1] != products[-1]:
        shares = scene.equilibrium_shares((products[1], products[-1]))
        balance = dict(zip((1, -1), shares, strict=True)) if shares else None
    for state in states:
        _, straight = diaxial_sites(own, state, enol.carbon, enol.alpha, ring)
        blockers = own.syn_axial(state, enol.alpha, straight, ring)
        number = None if used.value is None else 1.0 - used.value if blockers else used.value
        for axial in (True, False):
            face = straight if axial else -straight
            if number is None and (not axial or state is not states[0]):
                continue
            weight = None
            if part is not None and number is not None:
                weight = own.shares[state.id] * part * (number if axial else 1.0 - number)
            found.append(
                Option(
                    finding=_finding(
                        scene, enol, state, reagent, used, blockers, alpha, part, axial=axial
                    ).with_product(products[face], balance[face] if balance else None),
                    weight=weight,
                    sigma_ln=own.sigma_ln(state, 0.0 if axial else used.sigma_ln),
                )
            )
    return found


def _finding(
    scene: Scene,
    enol: _Enol,
    state: State,
    reagent: str,
    used: Rule,
    blockers: tuple[int, ...],
    alpha: int,
    part: float | None,
    *,
    axial: bool,
) -> Finding:
    own = enol.scene
    cost = own.cost(state)
    limits: list[str] = []
    if blockers:
        limits.append(
            f"(limit) Syn-axial group {numbers(*(enol.back[b] for b in blockers))} stands on the face of axial "
            "attack and "
            "reverses it."
        )
    if part is None:
        other = "under equilibrating conditions" if reagent != "equilibrated enolate" else "from the kinetic enolate"
        limits.append(f"This alpha carbon reacts only {other}; it has no share here.")
    limits.append("The axial product epimerises to the more stable isomer under basic or acidic conditions.")
    if own.is_rough:
        limits.append("(limit) A contact of the enol has no tabulated price: populations are rough.")
    confidence: Confidence = "direction only" if used.value is None or blockers else "order of magnitude"
    side = "axial, straight to a chair" if axial else "equatorial, through a twist-boat"
    return Finding(
        reaction="enolate",
        ring_system=scene.number,
        state=state.id,
        state_population=own.shares[state.id],
        cost_kcal=cost,
        cost_uncertainty_kcal=own.cost_sigma(state),
        verdict="open" if cost < LEVEL else "needs the flip",
        leaving_atoms=(alpha,),
        partner_atoms=(enol.back[enol.carbon],),
        pathway=f"{'axial' if axial else 'equatorial'} bond at C {alpha + 1}",
        reason=f"Half-chair {state.id} of the enol at C {alpha + 1}: attack {side}.",
        confidence=confidence,
        limits=tuple(limits),
        cautions=(CAUTION,),
        reagent=reagent,
        sources=used.sources,
    )
