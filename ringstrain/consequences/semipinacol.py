"""Which bond is anti to a group that leaves next to a hydroxyl: contraction, hydride shift or epoxide (semipinacol).

Rule: what stands anti to the leaving group moves.  An equatorial group has a ring bond there (contraction), an axial
one the axial oxygen (epoxide) or the axial hydrogen or alkyl (ketone).  Nitrogen leaves before the ring flips, so that
diazonium ions follow ground-state populations.
"""

from __future__ import annotations

from ringstrain.analysis import State
from ringstrain.consequences.epoxides import closed_epoxide
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import alcohols, leaving_groups, leaving_name
from ringstrain.consequences.products import remove_branch, turn
from ringstrain.consequences.request import Request
from ringstrain.consequences.scene import Scene, has_boat
from ringstrain.structure.edit import Draft
from ringstrain.structure.records import IMPLICIT

CAUTION = (
    "Nitrous acid, diazonium salts and diazo compounds: keep cold, nitrosamines and explosions are on record. Follow "
    "local rules and ask a qualified colleague."
)


def options(scene: Scene, request: Request) -> list[Option]:
    """What moves for every leaving group (a primary amine counts as diazonium) beside an alcohol.

    Parameters
    ----------
    scene
        The ring system.
    request
        Not used.
    """
    structure = scene.structure
    found: list[Option] = []
    leavers: list[tuple[int, int, str]] = [(g.carbon, g.atom, g.name) for g in leaving_groups(scene, outside=False)]
    for atom in scene.ring_atoms:
        for x in scene.outer(atom) if scene.is_tetrahedral(atom) else ():
            record = structure.atoms[x]
            if record.number == 7 and len(structure.neighbours[x]) == 1 and record.hydrogens in (2, 3):
                leavers.append((atom, x, "amino group (as N2+)"))
    for carbon, oxygen in alcohols(scene):
        for i, leaving, name in leavers:
            if i in scene.ring_neighbours(carbon):
                states = [s for s in scene.states if not has_boat(s)] or list(scene.states)
                for state in states:
                    found.extend(_moves(scene, state, i, leaving, name, carbon, oxygen))
        found.extend(_expansions(scene, carbon, oxygen))
    return found


def _expansions(scene: Scene, carbon: int, oxygen: int) -> list[Option]:
    """Ring expansion from a CH2 with a leaving group (or NH2) on the carbinol carbon; either ring bond can be anti."""
    structure, state = scene.structure, scene.states[0]
    found: list[Option] = []
    for x in scene.outer(carbon):
        if structure.atoms[x].number != 6 or structure.atoms[x].hydrogens != 2:
            continue
        for leaving in (int(n) for n in structure.neighbours[x] if n != carbon):
            record = structure.atoms[leaving]
            amine = record.number == 7 and len(structure.neighbours[leaving]) == 1 and record.hydrogens in (2, 3)
            if not amine and leaving_name(structure, x, leaving) is None:
                continue
            for y in scene.ring_neighbours(carbon):
                finding = Finding(
                    reaction="semipinacol",
                    ring_system=scene.number,
                    state=state.id,
                    state_population=scene.shares[state.id],
                    cost_kcal=scene.cost(state),
                    cost_uncertainty_kcal=scene.cost_sigma(state),
                    verdict="open",
                    leaving_atoms=(leaving,),
                    partner_atoms=(carbon, y),
                    product_smiles=_migrated(scene, x, leaving, carbon, oxygen, y),
                    pathway="ring expansion",
                    reason=f"The CH2 {x + 1} turns so that ring bond {carbon + 1}-{y + 1} is anti to what leaves; "
                    "the ring makes no demand of its own.",
                    limits=("Which ring bond moves follows the better migrating carbon; no number is given.",),
                    cautions=(CAUTION,),
                    sources=("common-practice",),
                )
                found.append(Option(finding=finding, weight=1.0))
    return found


def _moves(scene: Scene, state: State, i: int, leaving: int, name: str, carbon: int, oxygen: int) -> list[Option]:
    """The bond anti to the leaving group in a state, and what follows."""
    structure = scene.structure
    candidates = [int(n) for n in structure.neighbours[carbon] if n != i]
    candidates += [h for h in scene.hydrogens(carbon) if h < 0]
    found: list[Option] = []
    for y in candidates:
        if not scene.is_anti(state, leaving, i, carbon, y):
            continue
        where = scene.describe(state, i, leaving)
        if y == oxygen:
            product, pathway, what = closed_epoxide(scene, carbon, oxygen, i, leaving), "epoxide", f"O {oxygen + 1}"
        elif y < 0 or structure.atoms[y].number == 1:
            product, pathway, what = (
                _shifted_hydrogen(scene, i, leaving, carbon, oxygen, y),
                "1,2-hydride shift to the ketone",
                "H",
            )
        elif y in scene.ring_neighbours(carbon):
            product, what = _migrated(scene, i, leaving, carbon, oxygen, y), f"ring bond {carbon + 1}-{y + 1}"
            pathway = "ring contraction"
        else:
            product, what = _migrated(scene, i, leaving, carbon, oxygen, y), f"bond {carbon + 1}-{y + 1}"
            pathway = "1,2-alkyl shift to the ketone"
        nitrogen = "N2" in name or name == "dinitrogen"
        limits = ["Textbook ideal: measured mixtures are less clean."]
        if nitrogen:
            limits.append(
                "Nitrogen leaves before the ring flips: shares are ground-state populations, not Curtin-Hammett."
            )
        else:
            limits.append("(limit) A slower leaving group lets the ring flip: populations alone do not set the ratio.")
        finding = Finding(
            reaction="semipinacol",
            ring_system=scene.number,
            state=state.id,
            state_population=scene.shares[state.id],
            cost_kcal=scene.cost(state),
            cost_uncertainty_kcal=scene.cost_sigma(state),
            verdict=scene.verdict(state),
            leaving_atoms=(leaving,),
            partner_atoms=(carbon,) if y < 0 else (carbon, y),
            product_smiles=product,
            pathway=pathway,
            reason=f"State {state.id}: {where} ({name}) is anti to {what} of the carbinol carbon {carbon + 1}.",
            confidence="order of magnitude" if nitrogen else "direction only",
            limits=tuple(limits),
            cautions=(CAUTION,),
            sources=("cherest-et-al-1965", "curtin-schmukler-1955"),
        )
        found.append(Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state)))
    return found


def _to_carbonyl(draft: Draft, scene: Scene, carbon: int, oxygen: int) -> None:
    if scene.structure.atoms[oxygen].hydrogens:
        draft.add_hydrogens(oxygen, -1)
    else:
        draft.set_charge(oxygen, 0)
    draft.bond(carbon, oxygen, 2)


def _shifted_hydrogen(scene: Scene, i: int, leaving: int, carbon: int, oxygen: int, h: int) -> str:
    draft = Draft(scene.settled)
    own = draft.configuration(i)
    remove_branch(draft, scene.structure, i, leaving)
    draft.add_hydrogens(i, 1)
    if h < 0:
        draft.add_hydrogens(carbon, -1)
    else:
        draft.drop([h])
    _to_carbonyl(draft, scene, carbon, oxygen)
    if own is not None and all(n >= 0 for n in own.neighbours):
        draft.replace_neighbour(own, i, leaving, int(IMPLICIT))
        turn(draft, i)
    return draft.smiles(keep=i)


def _migrated(scene: Scene, i: int, leaving: int, carbon: int, oxygen: int, y: int) -> str:
    """A carbon moves from the carbinol carbon to where the group leaves: inversion there, retention in what moves."""
    draft = Draft(scene.settled)
    own, moving = draft.configuration(i), draft.configuration(y)
    remove_branch(draft, scene.structure, i, leaving)
    draft.unbond(carbon, y)
    draft.bond(i, y)
    _to_carbonyl(draft, scene, carbon, oxygen)
    if own is not None:
        draft.replace_neighbour(own, i, leaving, y)
        turn(draft, i)
    if moving is not None:
        draft.replace_neighbour(moving, y, carbon, i)
    return draft.smiles(keep=i)
