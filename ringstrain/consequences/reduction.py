"""Which face of a ring ketone a hydride or carbon nucleophile takes, by reagent class (class reduction).

Axial attack gives the equatorial alcohol.  Shares come from measured rings; modifiers are applied in order: an axial
group at C3 or C5 on the attack face, an axial group at C2 or C6, an equatorial one there, a polar group at C4; all
chairs count with their populations.  Why hydrides attack as they do is disputed, and nothing here depends on it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from ringstrain.analysis import State
from ringstrain.consequences.finding import Confidence, Finding, Option
from ringstrain.consequences.functional import ketones
from ringstrain.consequences.products import carbonyl_to_alcohol, spiro_epoxide
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import Rule, rule
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.errors import UsageError
from ringstrain.structure.records import Structure

CAUTION_HYDRIDE = (
    "Hydrides evolve hydrogen and can ignite on quenching. Follow local rules and ask a qualified colleague."
)
CAUTION_CARBON = "Organolithiums are pyrophoric, HCN is lethal. Follow local rules and ask a qualified colleague."
#: Reagent classes of this question, the usual one first.
REAGENTS = (
    "small hydride",
    "bulky hydride",
    "organometal",
    "thin carbon",
    "cyanide",
    "sulfoxonium ylide",
    "sulfonium ylide",
    "dissolving metal",
    "equilibrating",
    "bulky alkoxide",
    "iridium",
    "electrode",
)
_PRODUCT_STABILITY = ("dissolving metal", "equilibrating", "bulky alkoxide")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Chance:
    """Part of axial attack in one state, and why."""

    rule: Rule
    axial: float | None
    why: str
    is_modified: bool
    limits: tuple[str, ...] = ()


def reagent_of(request: Request) -> str:
    """Reagent class asked for, or told by the nucleophile and the size of the base.

    Raises
    ------
    UsageError
        If the reagent belongs to another question.
    """
    if request.reagent:
        if request.reagent not in REAGENTS:
            raise UsageError(
                f"Reagent {request.reagent!r} does not reduce or add to a ketone.", f"Use one of {', '.join(REAGENTS)}."
            )
        return request.reagent
    part = request.nucleophile_part
    if part is None:
        return "bulky hydride" if request.base == "bulky" else "small hydride"
    if part.atoms[0].number != 6:
        return "equilibrating"
    triple = [n for n in part.neighbours[0] if part.bond(0, n).order == 3]
    if triple:
        return "cyanide" if part.atoms[triple[0]].number == 7 else "thin carbon"
    return "organometal"


def options(scene: Scene, request: Request) -> list[Option]:
    """Attack on both faces of every ring ketone in every state.

    Parameters
    ----------
    scene
        The ring system.
    request
        Reagent class, or a nucleophile that tells it.
    """
    reagent = reagent_of(request)
    found: list[Option] = []
    for carbon, oxygen in ketones(scene):
        found.extend(_faces(scene, request, reagent, carbon, oxygen))
    return found


def _entering(request: Request, reagent: str) -> Structure | None:
    usual = {"organometal": "C", "thin carbon": "C#C", "cyanide": "C#N"}
    if reagent in usual:
        return request.part_or(usual[reagent])
    return None


def _faces(scene: Scene, request: Request, reagent: str, carbon: int, oxygen: int) -> list[Option]:
    ring = scene.result.system.rings_of[carbon][0]
    entering = _entering(request, reagent)
    products = {}
    for face in (1, -1):
        if reagent in ("sulfoxonium ylide", "sulfonium ylide"):
            products[face] = spiro_epoxide(scene, carbon, oxygen, ring, face)
        else:
            products[face] = carbonyl_to_alcohol(scene, carbon, oxygen, ring, face, entering)
    balance = None
    if products[1] != products[-1]:
        found = scene.equilibrium_shares((products[1], products[-1]))
        balance = dict(zip((1, -1), found, strict=True)) if found else None
    out: list[Option] = []
    chairs = [s for s in scene.states if "chair" in s.detail.shapes.rings[ring].shape]
    chairs = chairs or list(scene.states)
    for state in chairs:
        chance = _chance(scene, state, reagent, entering, carbon, ring)
        axial_face = scene.axial_face(state, carbon, ring)
        for axial in (True, False):
            face = axial_face if axial else -axial_face
            weight, confidence = _weight(scene, state, reagent, chance, axial=axial, balance=balance, face=face)
            if weight is None and (state is not chairs[0] or not _is_favoured(reagent, axial=axial)):
                continue
            out.append(
                Option(
                    finding=replace(
                        _finding(scene, state, reagent, chance, carbon, oxygen, axial=axial),
                        product_smiles=products[face],
                        equilibrium_share=balance[face] if balance else None,
                        confidence=confidence,
                    ),
                    weight=weight,
                    sigma_ln=scene.sigma_ln(state, chance.rule.sigma_ln if _is_minor(chance, axial) else 0.0),
                )
            )
    if has_boat(scene.states[0]):
        out = [
            _warned(o, "(limit) The chairs of this ketone are too strained: it reacts from a twist-boat.") for o in out
        ]
    return out


def _warned(option: Option, limit: str) -> Option:
    return replace(option, finding=replace(option.finding, limits=(*option.finding.limits, limit)))


def _is_minor(chance: _Chance, axial: bool) -> bool:
    """True for the attack whose share carries the relative uncertainty of the rule."""
    return chance.axial is not None and ((chance.axial < 0.5) == axial)


def _is_favoured(reagent: str, *, axial: bool) -> bool:
    """The attack named by a rule that knows a direction only."""
    return axial == (reagent not in ("sulfoxonium ylide", "cyanide"))


def _weight(
    scene: Scene,
    state: State,
    reagent: str,
    chance: _Chance,
    *,
    axial: bool,
    balance: dict[int, float] | None,
    face: int,
) -> tuple[float | None, Confidence]:
    """Weight of one attack and how far to trust it."""
    share = scene.shares[state.id]
    if reagent in _PRODUCT_STABILITY:
        if balance is None:
            return None, "direction only"
        if reagent == "bulky alkoxide":
            high = rule("reduction-bulky-alkoxide").number
            return share * (high if balance[face] > 0.5 else 1.0 - high), "order of magnitude"
        return share * balance[face], "direction only" if reagent == "dissolving metal" else "order of magnitude"
    if chance.axial is None:
        return None, "direction only"
    weight = share * (chance.axial if axial else 1.0 - chance.axial)
    vague = reagent == "thin carbon" or (chance.is_modified and reagent == "organometal")
    return weight, "direction only" if vague else "quantitative" if not chance.is_modified else "order of magnitude"


def _base_rule(reagent: str, entering: Structure | None) -> Rule:
    """The number for an unhindered ring."""
    names = {
        "small hydride": "reduction-small-hydride",
        "bulky hydride": "reduction-bulky-hydride",
        "thin carbon": "reduction-thin-carbon",
        "sulfoxonium ylide": "reduction-ylide",
        "sulfonium ylide": "reduction-sulfonium",
        "cyanide": "reduction-cyanide",
        "iridium": "reduction-iridium",
        "electrode": "reduction-electrode",
    }
    if reagent == "organometal" and entering is not None:
        carbons = sum(entering.atoms[n].number == 6 for n in entering.neighbours[0])
        flat = any(entering.bond(0, n).order > 1 for n in entering.neighbours[0])
        return rule(
            "reduction-primary"
            if flat
            else ("reduction-methyl", "reduction-primary", "reduction-secondary", "reduction-tertiary")[min(carbons, 3)]
        )
    return rule(names.get(reagent, "reduction-small-hydride"))


def _chance(scene: Scene, state: State, reagent: str, entering: Structure | None, carbon: int, ring: int) -> _Chance:
    """Part of axial attack after the modifiers, the first that applies deciding."""
    base = _base_rule(reagent, entering)
    limits = _limits(scene, carbon, ring, reagent)
    hydride = reagent in ("small hydride", "bulky hydride")
    face = scene.axial_face(state, carbon, ring)
    blockers = scene.syn_axial(state, carbon, face, ring)
    beside = _beside(scene, state, carbon, ring)
    axial_beside = [n for n, where in beside if where == "axial"]
    level_beside = [n for n, where in beside if where == "equatorial"]
    modified = True
    if blockers and reagent not in (*_PRODUCT_STABILITY, "cyanide", "iridium", "electrode"):
        why = f"axial group {numbers(*blockers)} stands on the face of axial attack"
        name = "small" if reagent == "small hydride" else "bulky" if reagent == "bulky hydride" else "carbon"
        used = rule(f"reduction-{name}-blocked")
    elif axial_beside and base.value is not None and reagent not in _PRODUCT_STABILITY:
        why = f"axial group {numbers(*axial_beside)} next to C=O hinders equatorial attack"
        used = rule("reduction-axial-neighbour")
        if reagent == "bulky hydride":
            limits += ("The number was measured with small reagents; bulky hydrides follow in direction.",)
    elif level_beside and hydride:
        why = f"equatorial group {numbers(*level_beside)} next to C=O turns part of the attack to the equatorial side"
        bulky = reagent == "bulky hydride"
        used = rule("reduction-equatorial-neighbour" + ("-bulky" if bulky else ""))
    else:
        why = "no group in the way"
        used, modified = base, False
    polar = _polar_four(scene, carbon, ring)
    if polar and hydride and not modified:
        used = rule("reduction-polar-four")
        why = f"polar group {numbers(polar[1])} at C4 may sit axial: cis alcohols appear"
        # The cis alcohol has OH on the face of the group, so hydride comes from the other one.
        value = used.number if face != scene.face(*polar, ring) else 1.0 - used.number
        limits += ("(limit) A chelating Lewis acid turns this round to the trans alcohol.",)
        return _Chance(rule=used, axial=value, why=why, is_modified=True, limits=limits)
    return _Chance(rule=used, axial=used.value, why=why, is_modified=modified, limits=limits)


def _beside(scene: Scene, state: State, carbon: int, ring: int) -> list[tuple[int, str]]:
    """Groups on the two carbons next to C=O and where they point."""
    atoms = scene.result.system.rings[ring].atoms
    place = atoms.index(carbon)
    near = (atoms[(place + 1) % 6], atoms[place - 1])
    return [
        (p.site.neighbour, p.position)
        for p in state.detail.facts.placed
        if p.site.ring == ring and p.site.ring_atom in near and p.occupant == "atom"
    ]


def _polar_four(scene: Scene, carbon: int, ring: int) -> tuple[int, int] | None:
    """(ring atom, group) of a lone O or N substituent opposite to C=O on an otherwise bare ring."""
    system = scene.result.system
    if len(system.rings) > 1:
        return None
    atoms = system.rings[ring].atoms
    opposite = atoms[(atoms.index(carbon) + 3) % 6]
    groups = [(a, n) for a in atoms if a != carbon for n in scene.outer(a)]
    if len(groups) == 1 and groups[0][0] == opposite and scene.structure.atoms[groups[0][1]].number in (7, 8):
        return groups[0]
    return None


def _limits(scene: Scene, carbon: int, ring: int, reagent: str) -> tuple[str, ...]:
    structure = scene.structure
    atoms = scene.result.system.rings[ring].atoms
    place = atoms.index(carbon)
    near = (atoms[(place + 1) % 6], atoms[place - 1])
    found: list[str] = []
    groups = {a: scene.outer(a) for a in near}
    if all(groups.values()):
        found.append(
            "(limit) Both alpha carbons carry groups: in alcohols the usual side can reverse, and the ketone "
            "epimerises."
        )
    elif any(groups[a] and structure.atoms[a].hydrogens for a in near):
        found.append("The alpha centre can epimerise under basic conditions.")
    hetero = [n for a in atoms if a != carbon for n in scene.outer(a) if structure.atoms[n].number in (7, 8)]
    if hetero:
        found.append(f"(limit) Group {numbers(*hetero)} can chelate a Lewis-acidic metal and turn the attack round.")
    if any(structure.atoms[a].number != 6 for a in atoms):
        found.append("(limit) Heteroatom in the ring: measured selectivities are for cyclohexanones.")
    if reagent == "cyanide":
        found.append("Reversible: the published direction is given; additive energies of OH and CN can say otherwise.")
    if reagent in _PRODUCT_STABILITY:
        found.append("Product stability decides; larger groups on oxygen raise the ceiling.")
    return tuple(found)


def _finding(
    scene: Scene, state: State, reagent: str, chance: _Chance, carbon: int, oxygen: int, *, axial: bool
) -> Finding:
    side = "axial" if axial else "equatorial"
    where = "equatorial" if axial else "axial"
    stable = reagent in _PRODUCT_STABILITY
    how = "under equilibrium control" if stable else f"by {side} attack"
    reason = f"State {state.id}, C=O {carbon + 1}: {chance.why}; {side} attack leaves O {oxygen + 1} {where}."
    if stable:
        reason = f"State {state.id}, C=O {carbon + 1}: O {oxygen + 1} ends {where}; the more stable product wins."
    return Finding(
        reaction="reduction",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(oxygen,),
        partner_atoms=(carbon,),
        pathway=f"{where} oxygen {how}",
        reason=reason,
        limits=chance.limits,
        cautions=(CAUTION_HYDRIDE,) if "hydride" in reagent else (CAUTION_CARBON,),
        reagent=reagent,
        sources=("eliel-rerick-1960",) if reagent == "bulky alkoxide" else () if stable else chance.rule.sources,
    )
