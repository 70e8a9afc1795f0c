"""Electrophiles and oxidants on a ring double bond: faces, trans-diaxial products, then their equilibrium (addition).

Rule: the onium ion sits on the less hindered face and opens as an epoxide does, trans-diaxially in the chair that the
half-chair turns into directly; where that product can equilibrate, its share at equilibrium stands beside it.
"""

from __future__ import annotations

import math
from dataclasses import replace

from ringstrain.analysis import State
from ringstrain.consequences.epoxides import bond_ring, diaxial_sites
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import is_hydroxyl, ring_alkenes
from ringstrain.consequences.products import added_pair, epoxidised
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import Scene, numbers
from ringstrain.errors import UsageError
from ringstrain.structure.records import Structure
from ringstrain.units import R_KCAL

CAUTION = "Bromine burns skin and lungs; quench with thiosulfate. Follow local rules and ask a qualified colleague."
CAUTION_OXIDANT = (
    "Peracids and hydroperoxides can explode: never distil them. Follow local rules and ask a qualified colleague."
)
REAGENTS = ("bromonium", "peracid", "vanadyl")


def options(scene: Scene, request: Request) -> list[Option]:
    """Additions to every isolated double bond of the ring system.

    Parameters
    ----------
    scene
        The ring system.
    request
        Electrophile (Br when none is given) and nucleophile (the electrophile's own halide when none is given), or
        reagent ``peracid`` or ``vanadyl``.

    Raises
    ------
    UsageError
        If the reagent does not add to an alkene.
    """
    if request.reagent and request.reagent not in REAGENTS:
        raise UsageError(
            f"Reagent {request.reagent!r} does not add to an alkene.", f"Use one of {', '.join(REAGENTS)}."
        )
    found: list[Option] = []
    for a, b in ring_alkenes(scene):
        if request.reagent in ("peracid", "vanadyl"):
            found.extend(_epoxidations(scene, request, a, b))
        else:
            found.extend(_onium(scene, request, a, b))
    return found


def _crowding(scene: Scene, state: State, a: int, b: int, ring: int) -> dict[int, list[int]]:
    """Axial groups on each face near a double bond: on the allylic and homoallylic ring atoms."""
    sides: dict[int, list[int]] = {1: [], -1: []}
    for p in state.detail.facts.placed:
        if p.site.ring == ring and p.position == "axial" and p.occupant == "atom" and p.site.ring_atom not in (a, b):
            sides[p.site.face].append(p.site.neighbour)
    return sides


def _half_chairs(scene: Scene, ring: int) -> list[State]:
    return [s for s in scene.states if s.detail.shapes.rings[ring].shape == "half-chair"]


def _onium(scene: Scene, request: Request, a: int, b: int) -> list[Option]:
    ring = bond_ring(scene, a, b)
    electrophile = request.electrophile_or("Br")
    nucleophile = request.nucleophile_part or electrophile
    alike = nucleophile.smiles == electrophile.smiles
    found: list[Option] = []
    limits = _limits(scene, a, b)
    for state in _half_chairs(scene, ring):
        at_a, at_b = diaxial_sites(scene, state, a, b, ring)
        crowd = _crowding(scene, state, a, b, ring)
        faces = [f for f in (1, -1) if len(crowd[f]) <= len(crowd[-f])]
        for face in faces:
            holder, other = (a, b) if at_a == face else (b, a)
            there = at_a if holder == a else at_b
            product = added_pair(scene, (holder, there, electrophile), (other, -there, nucleophile))
            why = (
                f"axial group {numbers(*crowd[-face])} screens the other face"
                if len(crowd[-face]) > len(crowd[face])
                else "neither face is screened"
            )
            finding = Finding(
                reaction="addition",
                ring_system=scene.number,
                state=state.id,
                state_population=scene.shares[state.id],
                cost_kcal=scene.cost(state),
                cost_uncertainty_kcal=scene.cost_sigma(state),
                verdict=scene.verdict(state),
                leaving_atoms=(holder,),
                partner_atoms=(other,),
                product_smiles=product,
                pathway="trans-diaxial addition",
                reason=f"Half-chair {state.id}: {why}; the onium ion opens at C {other + 1} so that both groups on C "
                f"{holder + 1} and C {other + 1} end axial.",
                confidence="direction only" if not alike else "order of magnitude",
                limits=limits,
                cautions=(CAUTION,),
                reagent="bromonium",
                sources=("barton-alt-1954",),
            )
            weight = scene.shares[state.id] / len(faces)
            found.append(Option(finding=finding, weight=weight, sigma_ln=scene.sigma_ln(state)))
            if alike:
                break
        if len(_half_chairs(scene, ring)) == 1:
            found.append(_diequatorial(scene, state, found[-1], (a, -at_a, electrophile), (b, -at_b, nucleophile)))
    if not alike:
        found = _markovnikov(scene, found, a, b)
    return _with_equilibrium(scene, found)


def _markovnikov(scene: Scene, found: list[Option], a: int, b: int) -> list[Option]:
    """Where an open half-chair lets the nucleophile reach the more substituted carbon, only that has a share."""
    counts = {c: len(scene.structure.neighbours[c]) for c in (a, b)}
    if counts[a] == counts[b]:
        return found
    rich = max((a, b), key=lambda c: counts[c])
    if not any(o.finding.partner_atoms == (rich,) and o.finding.verdict == "open" for o in found):
        return found
    return [o if o.finding.partner_atoms == (rich,) else replace(o, weight=None) for o in found]


def _diequatorial(
    scene: Scene,
    state: State,
    main: Option,
    first: tuple[int, int, Structure],
    second: tuple[int, int, Structure],
) -> Option:
    """The other trans product of a locked ring, through a twist-boat."""
    extra = rule("epoxide-twist")
    finding = replace(
        main.finding,
        verdict="needs a boat",
        cost_kcal=scene.cost(state) + extra.number,
        product_smiles=added_pair(scene, first, second),
        pathway="trans-diequatorial product, by equilibration of the diaxial one",
        reason="The ring is locked: the diequatorial isomer does not form directly but may follow on standing or "
        "heating.",
        confidence="direction only",
        sources=(*extra.sources, "barton-alt-1954"),
    )
    weight = scene.shares[state.id] * math.exp(-extra.number / (R_KCAL * scene.analysis.temperature_K))
    return Option(finding=finding, weight=weight, sigma_ln=extra.sigma_ln)


def _with_equilibrium(scene: Scene, found: list[Option]) -> list[Option]:
    """Products of dihalide type with their shares at equilibrium."""
    products = list(dict.fromkeys(o.finding.product_smiles for o in found if o.finding.product_smiles))
    shares = scene.equilibrium_shares(products) if len(products) > 1 else None
    if shares is None:
        return found
    table = dict(zip(products, shares, strict=True))
    return [
        replace(o, finding=replace(o.finding, equilibrium_share=table.get(o.finding.product_smiles or "")))
        for o in found
    ]


def _limits(scene: Scene, a: int, b: int) -> tuple[str, ...]:
    structure = scene.structure
    found: list[str] = []
    near = {a, b}
    for _ in range(2):
        near |= {n for c in near for n in scene.ring_neighbours(c)}
    polar = sorted(
        x for c in near - {a, b} for x in scene.outer(c) if structure.atoms[x].number in (7, 8, 9, 16, 17, 35, 53)
    )
    if polar:
        found.append(
            f"(limit) Polar group {numbers(*polar)} near the double bond can turn the opening to the diequatorial "
            "side or "
            "take part."
        )
    if any(structure.atoms[x].aromatic for c in (a, b) for x in scene.outer(c)):
        found.append("(limit) Benzylic cation: cis addition can compete.")
    found.append("Not for free-radical addition.")
    return tuple(found)


def _epoxidations(scene: Scene, request: Request, a: int, b: int) -> list[Option]:
    """Peracid or vanadyl: an allylic hydroxyl directs to its own face."""
    structure = scene.structure
    ring = bond_ring(scene, a, b)
    vanadyl = request.reagent == "vanadyl"
    allylic = [
        (n, x)
        for c in (a, b)
        for n in scene.ring_neighbours(c)
        if n not in (a, b) and scene.is_tetrahedral(n)
        for x in scene.outer(n)
        if is_hydroxyl(structure, x)
    ]
    if vanadyl and not allylic:
        return []
    factor = rule("allylic-vanadyl")
    found: list[Option] = []
    for state in _half_chairs(scene, ring):
        weight, sigma = scene.shares[state.id], 0.0
        if allylic:
            carbon, oxygen = allylic[0]
            faces = [scene.face(carbon, oxygen, ring)]
            axial = scene.position(state, carbon, oxygen) == "axial"
            if vanadyl and axial:
                weight, sigma = weight * factor.number, factor.sigma_ln
            best = axial == vanadyl
            why = (
                f"{scene.describe(state, carbon, oxygen)} directs to its face; "
                f"pseudo{'axial' if vanadyl else 'equatorial'} hydroxyl is the better director here"
                + ("" if best else ", so this state reacts slowly")
            )
            centres: tuple[int, ...] = (carbon,)
        else:
            crowd = _crowding(scene, state, a, b, ring)
            faces = [f for f in (1, -1) if len(crowd[f]) <= len(crowd[-f])]
            why, centres = "oxygen comes from the less hindered face", ()
        for face in faces:
            finding = Finding(
                reaction="addition",
                ring_system=scene.number,
                state=state.id,
                state_population=scene.shares[state.id],
                cost_kcal=scene.cost(state),
                cost_uncertainty_kcal=scene.cost_sigma(state),
                verdict=scene.verdict(state),
                leaving_atoms=(a, b),
                partner_atoms=(allylic[0][1],) if allylic else (),
                product_smiles=epoxidised(scene, a, b, ring, face),
                pathway="epoxidation" + (" on the face of the hydroxyl" if allylic else ""),
                reason=f"Half-chair {state.id}: {why}.",
                confidence="order of magnitude" if vanadyl else "direction only",
                limits=("Oxidation of the alcohol to the enone competes.",) if allylic else (),
                cautions=(CAUTION_OXIDANT,),
                reagent=request.reagent,
                sources=factor.sources if vanadyl else (),
            )
            share = weight / len(faces)
            found.append(
                Option(
                    finding=finding,
                    weight=share,
                    sigma_ln=scene.sigma_ln(state, sigma),
                    centres=centres if vanadyl else (),
                )
            )
    return found
