"""Which hydroxyl acylates first, and which ester hydrolyses first (class acylation; silylation and sulfonation alike).

Rule: equatorial before axial, since the tetrahedral intermediate is crowded; rates of mixed chairs by Winstein-Holness.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from ringstrain.analysis import State
from ringstrain.consequences.finding import Confidence, Finding, Option
from ringstrain.consequences.functional import alcohols, syn_leaving
from ringstrain.consequences.products import acylated
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import Rule, rule
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.errors import UsageError
from ringstrain.structure.edit import Draft, cut_branch

CAUTION = "Acid chlorides and anhydrides burn and react with water. Follow local rules and ask a qualified colleague."
REAGENTS = ("acyl transfer", "hydrolysis")


@dataclass(frozen=True, slots=True)
class _Ester:
    """An ester on the ring: ring carbon, first atom, and the atom pair that is cut."""

    carbon: int
    first: int
    acyl: int
    oxygen: int


def options(scene: Scene, request: Request) -> list[Option]:
    """Acylation of every alcohol on the ring; hydrolysis of every ester when there is no alcohol or it is asked for.

    Parameters
    ----------
    scene
        The ring system.
    request
        Acyl or silyl group as electrophile (acetyl when none is given); reagent ``acyl transfer`` or ``hydrolysis``.

    Raises
    ------
    UsageError
        If the reagent belongs to another question.
    """
    if request.reagent and request.reagent not in REAGENTS:
        raise UsageError(f"Reagent {request.reagent!r} does not acylate.", f"Use one of {', '.join(REAGENTS)}.")
    pairs = alcohols(scene)
    if pairs and request.reagent != "hydrolysis":
        return _acylations(scene, request, pairs)
    return (
        [o for ester in _esters(scene) for o in _hydrolyses(scene, ester)] if request.reagent != "acyl transfer" else []
    )


def _states(scene: Scene) -> list[State]:
    return [s for s in scene.states if not has_boat(s)] or list(scene.states)


def _is_beside_branched(scene: Scene, state: State, carbon: int) -> bool:
    """True when a neighbouring ring atom carries an equatorial branched alkyl group."""
    structure = scene.structure
    return any(
        structure.atoms[x].number == 6
        and not structure.atoms[x].aromatic
        and sum(structure.atoms[m].number == 6 for m in structure.neighbours[x]) > 2
        and scene.position(state, n, x) == "equatorial"
        for n in scene.ring_neighbours(carbon)
        for x in scene.outer(n)
    )


def _axial_ethers(scene: Scene, state: State, carbon: int) -> list[int]:
    """Axial alkoxy oxygens next to a ring carbon."""
    structure = scene.structure
    return [
        x
        for n in scene.ring_neighbours(carbon)
        for x in scene.outer(n)
        if structure.atoms[x].number == 8
        and structure.atoms[x].hydrogens == 0
        and len(structure.neighbours[x]) == 2
        and scene.position(state, n, x) == "axial"
    ]


def _hindrance(scene: Scene, state: State, carbon: int, first: int) -> tuple[int, ...]:
    """Carbons syn-axial to an axial group."""
    if scene.position(state, carbon, first) != "axial":
        return ()
    found: list[int] = []
    for ring in scene.result.system.rings_of[carbon]:
        face = scene.face(carbon, first, ring)
        found += [n for n in scene.syn_axial(state, carbon, face, ring) if scene.structure.atoms[n].number == 6]
    return tuple(dict.fromkeys(found))


def _acylations(scene: Scene, request: Request, pairs: tuple[tuple[int, int], ...]) -> list[Option]:
    acyl = Request(electrophile=request.electrophile or request.nucleophile).electrophile_or("C(C)=O")
    best = scene.states[0]
    activated = [
        (c, o) for c, o in pairs if scene.position(best, c, o) == "equatorial" and _axial_ethers(scene, best, c)
    ]
    found: list[Option] = []
    for carbon, oxygen in pairs:
        product = acylated(scene, carbon, oxygen, acyl)
        tertiary = scene.structure.atoms[carbon].hydrogens == 0
        for state in _states(scene):
            equatorial = scene.position(state, carbon, oxygen) == "equatorial"
            beside = _is_beside_branched(scene, state, carbon)
            factor = rule("acylation-beside-alkyl" if beside else "acylation-equatorial")
            crowd = _hindrance(scene, state, carbon, oxygen)
            limits = ["Intramolecular hydrogen bonds and tin or boron acetals (cis diols) can invert the order."]
            where = scene.describe(state, carbon, oxygen)
            why = f"{where} is the {'open' if equatorial else 'crowded'} position"
            weight: float | None = scene.shares[state.id] * (factor.number if equatorial else 1.0)
            confidence: Confidence = "order of magnitude"
            if crowd:
                limits.append(f"(limit) Syn-axial carbon {numbers(*crowd)}: slower still, by no tabulated factor.")
            if tertiary:
                limits.append("(limit) Tertiary alcohol: far slower than any secondary one.")
                weight = None if len(pairs) > 1 else weight
            if (carbon, oxygen) in activated:
                why += f", next to axial O {numbers(*_axial_ethers(scene, best, carbon))}: the most reactive kind"
                confidence = "direction only"
            elif activated:
                weight, confidence = None, "direction only"
                limits.append(
                    "Another equatorial hydroxyl beside an axial alkoxy group reacts first; no factor is tabulated."
                )
            finding = _finding(scene, state, oxygen, carbon, limits, factor, CAUTION).with_product(product)
            found.append(
                Option(
                    finding=_worded(finding, "acylation", f"State {state.id}: {why}.", confidence),
                    weight=weight,
                    sigma_ln=scene.sigma_ln(state, factor.sigma_ln if equatorial else 0.0),
                    centres=(carbon,),
                )
            )
    return found


def _worded(finding: Finding, pathway: str, reason: str, confidence: Confidence) -> Finding:
    return replace(finding, pathway=pathway, reason=reason, confidence=confidence)


def _finding(
    scene: Scene, state: State, first: int, carbon: int, limits: list[str], used: Rule, caution: str
) -> Finding:
    return Finding(
        reaction="acylation",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(first,),
        partner_atoms=(carbon,),
        pathway="",
        reason="",
        limits=tuple(limits),
        cautions=(caution,),
        sources=used.sources,
    )


def _esters(scene: Scene) -> list[_Ester]:
    structure = scene.structure
    found = []
    for carbon in scene.ring_atoms:
        if not scene.is_tetrahedral(carbon):
            continue
        for x in scene.outer(carbon):
            if syn_leaving(structure, carbon, x) == "ester":
                acyl = next(int(n) for n in structure.neighbours[x] if n != carbon)
                if carbon not in cut_branch(structure, carbon, x):
                    found.append(_Ester(carbon, x, acyl, x))
            elif structure.atoms[x].number == 6 and any(
                structure.bond(x, n).order == 2 and structure.atoms[n].number == 8 for n in structure.neighbours[x]
            ):
                for n in structure.neighbours[x]:
                    if (
                        structure.atoms[n].number == 8
                        and structure.bond(x, n).order == 1
                        and len(structure.neighbours[n]) == 2
                    ):
                        found.append(_Ester(carbon, x, x, int(n)))
    return found


def _hydrolyses(scene: Scene, ester: _Ester) -> list[Option]:
    carboxylate = ester.acyl == ester.first
    used = rule("hydrolysis-carboxylate" if carboxylate else "hydrolysis-acetate")
    draft = Draft(scene.settled)
    if carboxylate:
        gone = next(int(n) for n in scene.structure.neighbours[ester.oxygen] if n != ester.acyl)
        draft.drop(sorted(cut_branch(scene.structure, ester.oxygen, gone) - {ester.oxygen}))
    else:
        draft.drop(sorted(cut_branch(scene.structure, ester.oxygen, ester.acyl) - {ester.oxygen}))
    draft.add_hydrogens(ester.oxygen, 1)
    product = draft.smiles(keep=ester.carbon)
    found = []
    for state in _states(scene):
        equatorial = scene.position(state, ester.carbon, ester.first) == "equatorial"
        crowd = _hindrance(scene, state, ester.carbon, ester.first)
        limits = [f"(limit) Syn-axial carbon {numbers(*crowd)}: slower still."] if crowd else []
        finding = _finding(scene, state, ester.first, ester.carbon, limits, used, CAUTION).with_product(product)
        reason = (
            f"State {state.id}: {scene.describe(state, ester.carbon, ester.first)}; equatorial esters hydrolyse faster."
        )
        found.append(
            Option(
                finding=_worded(finding, "ester hydrolysis", reason, "order of magnitude"),
                weight=scene.shares[state.id] * (used.number if equatorial else 1.0),
                sigma_ln=scene.sigma_ln(state, used.sigma_ln if equatorial else 0.0),
                centres=(ester.carbon,),
            )
        )
    return found
