"""Which hydrogens a group with its own base can reach, and which alkene they give (class syn-elimination).

Rule: leaving group and hydrogen on neighbouring carbons, on one face.  Amine oxides, sulfoxides and selenoxides (five
atoms in the transition state) insist on that; esters and xanthates (six) let a trans pair leak in.
"""

from __future__ import annotations

from dataclasses import replace

from ringstrain.analysis import State
from ringstrain.consequences.elimination import ASSUMPTION
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import SynKind, syn_leaving
from ringstrain.consequences.products import alkene
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import Scene, has_boat
from ringstrain.structure.edit import cut_branch

CAUTION = (
    "Amine oxides can decompose violently when heated dry; selenium compounds and CS2 are toxic. Follow local "
    "rules and "
    "ask a qualified colleague."
)
_STRICT = ("amine oxide", "sulfoxide", "selenoxide")
#: Widest torsion from which a pair on one face closes to zero [degree].
_NEAR = 90.0


def options(scene: Scene, request: Request) -> list[Option]:
    """Syn eliminations of one ring system, one option for each state, group and neighbour.

    Parameters
    ----------
    scene
        The ring system.
    request
        Not used; every such group brings its own base.
    """
    found: list[Option] = []
    structure = scene.structure
    for atom in scene.ring_atoms:
        if not scene.is_tetrahedral(atom):
            continue
        for x in scene.outer(atom):
            kind = syn_leaving(structure, atom, x)
            if kind and atom not in cut_branch(structure, atom, x):
                found.extend(_of_group(scene, atom, x, kind))
            elif structure.atoms[x].number == 6 and structure.atoms[x].hydrogens == 2:
                for y in structure.neighbours[x]:
                    far = syn_leaving(structure, x, int(y)) if y != atom else None
                    if far and scene.hydrogens(atom):
                        found.extend(_outside(scene, atom, x, int(y), far))
    return found


def _of_group(scene: Scene, atom: int, x: int, kind: SynKind) -> list[Option]:
    structure = scene.structure
    pairs: list[tuple[State, int, int, float]] = []
    for n in scene.ring_neighbours(atom):
        if not scene.is_tetrahedral(n) or structure.atoms[n].number != 6:
            continue
        for h in scene.hydrogens(n):
            if not scene.same_face(atom, x, n, h):
                continue
            for state in scene.states:
                torsion = abs(scene.torsion(state, x, atom, n, h))
                if torsion < _NEAR:
                    pairs.append((state, n, h, torsion))
    chairs = [p for p in pairs if not has_boat(p[0])] or pairs
    limits = _limits(scene, kind)
    if not chairs:
        finding = Finding(
            reaction="syn-elimination",
            ring_system=scene.number,
            verdict="locked out",
            leaving_atoms=(x,),
            pathway="no hydrogen on the face of the leaving group",
            reason=f"{kind} {x + 1} on C {atom + 1} has no cis hydrogen on either neighbour.",
            limits=limits,
            cautions=(CAUTION,),
            sources=("cope-acton-1958",),
        )
        return [Option(finding=finding, centres=(atom,))]
    hofmann = rule("syn-cope")
    branched = {n: _branching(scene, n) for _, n, _, _ in chairs}
    found = []
    for state, n, h, torsion in chairs:
        weight = scene.shares[state.id] / hofmann.number ** branched[n]
        where, partner = scene.describe(state, atom, x), scene.describe(state, n, h)
        finding = Finding(
            reaction="syn-elimination",
            ring_system=scene.number,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=scene.cost(state),
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict=scene.verdict(state),
            leaving_atoms=(x,),
            partner_atoms=(n,),
            product_smiles=alkene(scene, ((atom, x), (n, h)), (atom, n)),
            pathway="syn elimination",
            reason=f"In state {state.id} {where} ({kind}) and {partner} stand on one face (torsion {torsion:.0f} "
            "degrees, "
            "closing to 0).",
            confidence="order of magnitude" if kind == "amine oxide" else "direction only",
            limits=limits,
            cautions=(CAUTION,),
            sources=hofmann.sources,
        )
        found.append(
            Option(
                finding=finding,
                weight=weight,
                sigma_ln=scene.sigma_ln(state, hofmann.sigma_ln * branched[n]),
                centres=(atom,),
            )
        )
    return found


def _branching(scene: Scene, carbon: int) -> int:
    structure = scene.structure
    ring = scene.result.system.rings[scene.result.system.rings_of[carbon][0]].atoms
    return sum(structure.atoms[n].number == 6 for n in structure.neighbours[carbon] if n not in ring)


def _limits(scene: Scene, kind: SynKind) -> tuple[str, ...]:
    limits: tuple[str, ...] = (ASSUMPTION.split(" and carry")[0] + ".",)
    if kind not in _STRICT:
        limits += (
            f"(limit) A {kind} eliminates through six atoms: a trans hydrogen can leak in, and mixtures without "
            "stereospecificity are on record.",
        )
    if kind in ("sulfoxide", "selenoxide"):
        limits += ("The configuration at S or Se also decides which hydrogen is reached.",)
    return limits


def _outside(scene: Scene, atom: int, x: int, y: int, kind: SynKind) -> list[Option]:
    """A group on CH2 beside the ring: it reaches the ring hydrogen in every state."""
    factor = rule("syn-exocyclic")
    hydrogen = scene.hydrogens(atom)[0]
    base = Finding(
        reaction="syn-elimination",
        ring_system=scene.number,
        verdict="open",
        leaving_atoms=(y,),
        partner_atoms=(atom,),
        product_smiles=alkene(scene, ((x, y), (atom, hydrogen)), (x, atom)),
        pathway="syn elimination to an exocyclic alkene",
        reason="",
        confidence="order of magnitude",
        limits=_limits(scene, kind),
        cautions=(CAUTION,),
        sources=factor.sources,
    )
    found = []
    for state in scene.states:
        if has_boat(state) and state is not scene.states[0]:
            continue
        axial = scene.position(state, atom, x) == "axial"
        finding = replace(
            base,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=scene.cost(state),
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict=scene.verdict(state),
            reason=f"{kind} {y + 1} sits outside the ring on {scene.describe(state, atom, x)}: no demand on the ring.",
        )
        weight = scene.shares[state.id] * (factor.number if axial else 1.0)
        sigma = scene.sigma_ln(state, factor.sigma_ln if axial else 0.0)
        found.append(Option(finding=finding, weight=weight, sigma_ln=sigma, centres=(atom,)))
    return found
