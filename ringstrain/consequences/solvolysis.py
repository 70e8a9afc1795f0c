"""How a leaving group ionises: with hydride or lone-pair help from next door, or alone (class solvolysis)."""

from __future__ import annotations

from dataclasses import replace

from ringstrain.analysis import State
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import Leaving, is_hydroxyl, leaving_groups, leaving_name, syn_leaving
from ringstrain.consequences.oxocarbenium import attack
from ringstrain.consequences.products import displaced
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import Rule, rule
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.structure.edit import Draft, cut_branch

CAUTION = "Sulfonate esters and alkyl halides alkylate skin. Follow local rules and ask a qualified colleague."
#: Costlier diaxial states do not take part [kcal/mol]; beyond this a twist-boat is nearer.
_REACH = 5.5


def options(scene: Scene, request: Request) -> list[Option]:
    """Ionisation of every leaving group on a ring carbon, state by state.

    Parameters
    ----------
    scene
        The ring system.
    request
        Nucleophile (the solvent); OH is written when none is given.
    """
    found: list[Option] = []
    groups = leaving_groups(scene, outside=False)
    if any(group.kind != "halide" for group in groups):
        # A sulfonate or nitrogen ionises long before a halide does (common practice).
        groups = tuple(group for group in groups if group.kind != "halide")
    for leaving in groups:
        states = [s for s in scene.states if not has_boat(s)] or list(scene.states)
        captured = _by_hydroxymethyl(scene, request, leaving, states)
        found.extend(captured)
        helped = [o for s in states for o in _by_lone_pair(scene, request, leaving, s)]
        own = list(helped)
        for state in states:
            for option in (*_by_hydride(scene, request, leaving, state), _alone(scene, request, leaving, state)):
                own.append(replace(option, weight=None) if captured else option)
        # A factor measured for acetate tells no rate of another donor beside its epimer.
        borrowed = any(o.weight is not None and o.finding.confidence == "direction only" for o in helped)
        found.extend(replace(o, centres=()) if borrowed else o for o in own)
    found.extend(_acetals(scene, request))
    return found


def _base(scene: Scene, leaving: Leaving, state: State, request: Request) -> Finding:
    limits: tuple[str, ...] = ("Elimination usually competes; ion pairs blur the stereochemistry.",)
    if not request.nucleophile:
        limits += ("No solvent given: products are written with OH.",)
    return Finding(
        reaction="solvolysis",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(leaving.atom,),
        pathway="",
        reason="",
        confidence="order of magnitude",
        limits=limits,
        cautions=(CAUTION,),
    )


def _alkyls(scene: Scene, state: State, carbon: int) -> list[tuple[int, int, str]]:
    """(ring atom, carbon substituent, position) beside a ring carbon."""
    return [
        (n, x, scene.position(state, n, x))
        for n in scene.ring_neighbours(carbon)
        if scene.is_tetrahedral(n)
        for x in scene.outer(n)
        if scene.structure.atoms[x].number == 6
    ]


def _ionising(scene: Scene, leaving: Leaving, state: State) -> tuple[float, float, tuple[str, ...]]:
    """Relative rate of unassisted ionisation in a state, the uncertainty of its logarithm, and sources."""
    axial = scene.position(state, leaving.carbon, leaving.atom) == "axial"
    used: list[Rule] = [rule("solvolysis-axial")] if axial else []
    for _, _, where in _alkyls(scene, state, leaving.carbon):
        if axial and where == "axial":
            used.append(rule("solvolysis-axial-alkyl"))
        elif not axial and where == "equatorial":
            used.append(rule("solvolysis-equatorial-alkyl"))
    rate, spread = 1.0, 0.0
    for item in used:
        rate, spread = rate * item.number, (spread**2 + item.sigma_ln**2) ** 0.5
    return rate, spread, tuple(dict.fromkeys(s for item in used for s in item.sources))


def _alone(scene: Scene, request: Request, leaving: Leaving, state: State) -> Option:
    """Ionisation without help: substitution with inversion."""
    rate, spread, sources = _ionising(scene, leaving, state)
    entering = request.part_or("O")
    finding = replace(
        _base(scene, leaving, state, request),
        partner_atoms=(leaving.carbon,),
        product_smiles=displaced(scene, leaving.carbon, leaving.atom, entering, invert=True),
        pathway="unassisted ionisation, mostly inversion",
        reason=f"State {state.id}: {scene.describe(state, leaving.carbon, leaving.atom)} ({leaving.name}) leaves "
        "without help.",
        sources=sources or ("winstein-holness-1955",),
    )
    weight = scene.shares[state.id] * rate
    return Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state, spread), centres=(leaving.carbon,))


def _by_hydride(scene: Scene, request: Request, leaving: Leaving, state: State) -> list[Option]:
    """A tertiary axial hydrogen anti to the leaving group moves over."""
    structure, carbon = scene.structure, leaving.carbon
    help_, found = rule("solvolysis-hydride"), []
    for n in scene.ring_neighbours(carbon):
        if not scene.is_tetrahedral(n) or structure.atoms[n].hydrogens != 1 or structure.atoms[n].number != 6:
            continue
        if sum(structure.atoms[m].number == 6 for m in structure.neighbours[n]) < 3:
            continue
        for h in scene.hydrogens(n):
            if not scene.is_anti(state, leaving.atom, carbon, n, h):
                continue
            rate, spread, sources = _ionising(scene, leaving, state)
            finding = replace(
                _base(scene, leaving, state, request),
                partner_atoms=(n,),
                product_smiles=_shifted(scene, request, leaving, n, h),
                pathway="hydride participation: the cation forms next door",
                reason=f"State {state.id}: {scene.describe(state, carbon, leaving.atom)} is anti to the tertiary "
                f"{scene.describe(state, n, h)}.",
                sources=(*sources, "jcsb-1968-365", "hueckel-ethyl"),
            )
            weight = scene.shares[state.id] * rate * help_.number
            sigma = scene.sigma_ln(state, spread, help_.sigma_ln)
            found.append(Option(finding=finding, weight=weight, sigma_ln=sigma, centres=(carbon,)))
    return found


def _shifted(scene: Scene, request: Request, leaving: Leaving, n: int, h: int) -> str:
    """The rearranged substitution product; its new centre is left open."""
    draft = Draft(scene.settled)
    draft.drop(sorted(cut_branch(scene.structure, leaving.carbon, leaving.atom) - {leaving.carbon}))
    draft.add_hydrogens(leaving.carbon, 1)
    if h >= 0:
        draft.drop([h])
    else:
        draft.add_hydrogens(n, -1)
    draft.graft(request.part_or("O"), n)
    return draft.smiles(keep=n)


def _donor(scene: Scene, x: int, carbon: int) -> str:
    """What kind of neighbour can bridge with its lone pair, if any."""
    structure = scene.structure
    record = structure.atoms[x]
    if record.number in (35, 53):
        return "halogen"
    if record.number == 16 and record.charge == 0 and syn_leaving(structure, carbon, x) is None:
        return "sulfide"
    if record.number == 8 and syn_leaving(structure, carbon, x) == "ester":
        return "acyloxy group"
    if record.number == 7 and any(
        structure.bond(n, m).order == 2 and structure.atoms[m].number == 8
        for n in structure.neighbours[x]
        for m in structure.neighbours[n]
        if m != x
    ):
        return "amide"
    return ""


def _by_lone_pair(scene: Scene, request: Request, leaving: Leaving, state: State) -> list[Option]:
    """A donor trans-diaxial to the leaving group bridges: net retention."""
    structure, carbon = scene.structure, leaving.carbon
    found: list[Option] = []
    factor = rule("solvolysis-acetoxy")
    for n in scene.ring_neighbours(carbon):
        for x in scene.outer(n) if scene.is_tetrahedral(n) else ():
            kind = _donor(scene, x, n)
            if not kind or x == leaving.atom or not scene.is_anti(state, x, n, carbon, leaving.atom):
                continue
            if scene.cost(state) > _REACH:
                continue
            limits = ("The factor was measured for acetate on a free ring and contains the cost of the diaxial state.",)
            finding = replace(
                _base(scene, leaving, state, request),
                partner_atoms=(x,),
                product_smiles=displaced(scene, carbon, leaving.atom, request.part_or("O"), invert=False),
                pathway=f"participation of the {kind}: bridged ion, net retention",
                reason=f"State {state.id}: {scene.describe(state, n, x)} and "
                f"{scene.describe(state, carbon, leaving.atom)} are "
                "trans-diaxial.",
                limits=limits + _base(scene, leaving, state, request).limits,
                confidence="order of magnitude" if kind == "acyloxy group" else "direction only",
                sources=factor.sources,
            )
            found.append(
                Option(
                    finding=finding,
                    weight=factor.number * rule("solvolysis-axial").number,
                    sigma_ln=factor.sigma_ln,
                    centres=(carbon,),
                )
            )
            break
        methoxy = [
            x
            for x in (scene.outer(n) if scene.is_tetrahedral(n) else ())
            if structure.atoms[x].number == 8
            and not is_hydroxyl(structure, x)
            and not _donor(scene, x, n)
            and x != leaving.atom
            and leaving_name(structure, n, x) is None
            and syn_leaving(structure, n, x) is None
        ]
        if methoxy and scene.is_anti(state, methoxy[0], n, carbon, leaving.atom):
            finding = replace(
                _base(scene, leaving, state, request),
                verdict="locked out",
                partner_atoms=(methoxy[0],),
                pathway="no clear participation of an ether oxygen",
                reason=f"O {numbers(methoxy[0])} can stand anti to the leaving group but an alkoxy group hardly "
                "helps; it retards.",
                confidence="direction only",
                sources=("roberts-1997",),
            )
            found.append(Option(finding=finding))
    return found


def _by_hydroxymethyl(scene: Scene, request: Request, leaving: Leaving, states: list[State]) -> list[Option]:
    """A CH2OH trans to the leaving group: complete retention was found; no number tells how much faster."""
    structure, carbon = scene.structure, leaving.carbon
    found: list[Option] = []
    for n in scene.ring_neighbours(carbon):
        for x in scene.outer(n) if scene.is_tetrahedral(n) else ():
            arms = [int(y) for y in structure.neighbours[x] if is_hydroxyl(structure, int(y))]
            if structure.atoms[x].hydrogens != 2 or not arms or scene.same_face(n, x, carbon, leaving.atom):
                continue
            for state in states:
                finding = replace(
                    _base(scene, leaving, state, request),
                    partner_atoms=(arms[0],),
                    product_smiles=displaced(scene, carbon, leaving.atom, request.part_or("O"), invert=False),
                    pathway="participation of the hydroxymethyl oxygen: net retention",
                    reason=f"O {arms[0] + 1} of the trans CH2OH on C {n + 1} captures C {carbon + 1} from behind, "
                    "or holds the "
                    "ion pair.",
                    confidence="direction only",
                    sources=("dolby-et-al-1968",),
                )
                found.append(Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state)))
    return found


def _acetals(scene: Scene, request: Request) -> list[Option]:
    """A leaving oxygen on a carbon beside a ring oxygen: the nucleophile enters an oxocarbenium half-chair axially."""
    structure = scene.structure
    found: list[Option] = []
    for carbon in scene.ring_atoms:
        ring_oxygen = [n for n in scene.ring_neighbours(carbon) if structure.atoms[n].number == 8]
        if len(ring_oxygen) != 1 or not scene.is_tetrahedral(carbon):
            continue
        for x in scene.outer(carbon):
            if syn_leaving(structure, carbon, x) == "ester" or structure.atoms[x].number in (9, 17, 35, 53):
                found.extend(_oxocarbenium(scene, request, carbon, ring_oxygen[0], x))
    return found


def _oxocarbenium(scene: Scene, request: Request, carbon: int, oxygen: int, leaving: int) -> list[Option]:
    """Axial attack on both half-chairs of the ion, alkoxy groups at C3 and C4 of the ion pseudoaxial."""
    return attack(scene, request, carbon, oxygen, leaving)
