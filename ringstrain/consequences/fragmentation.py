"""Whether a donor three atoms from a leaving group can break the bond between (class fragmentation).

Rule: X-C-C-C-LG; the bond that breaks must stand anti to the leaving group.  On a ring that asks for an equatorial
leaving group; an axial one has no ring bond anti to it.  The alkene keeps the geometry of the bond it comes from.
"""

from __future__ import annotations

from ringstrain.analysis import State
from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import Leaving, leaving_groups
from ringstrain.consequences.products import remove_branch
from ringstrain.consequences.request import Request
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.structure.edit import Draft

CAUTION = "Strong bases and sulfonate esters: usual care. Follow local rules and ask a qualified colleague."


def options(scene: Scene, request: Request) -> list[Option]:
    """Fragmentations from every leaving group with a donor in the 1,3-position.

    Parameters
    ----------
    scene
        The ring system.
    request
        Not used.
    """
    found: list[Option] = []
    for leaving in leaving_groups(scene, outside=False):
        chains = _chains(scene, leaving)
        if not chains:
            continue
        states = [s for s in scene.states if not has_boat(s)] or list(scene.states)
        own = [
            _finding(scene, state, leaving, b, c, x)
            for state in states
            for b, c, x in chains
            if scene.is_anti(state, leaving.atom, leaving.carbon, b, c)
        ]
        found.extend(own or [_locked(scene, leaving, chains)])
    return found


def _chains(scene: Scene, leaving: Leaving) -> list[tuple[int, int, int]]:
    """(middle carbon, far carbon, donor) of every chain from a leaving group."""
    structure = scene.structure
    found = []
    for b in scene.ring_neighbours(leaving.carbon):
        if structure.atoms[b].number != 6 or structure.bond(leaving.carbon, b).order != 1:
            continue
        for c in structure.neighbours[b]:
            if c == leaving.carbon or structure.atoms[c].number != 6 or structure.bond(b, c).order != 1:
                continue
            for x in structure.neighbours[c]:
                record = structure.atoms[x]
                hydroxyl = record.number == 8 and len(structure.neighbours[x]) == 1 and structure.bond(c, x).order == 1
                amine = (
                    record.number == 7
                    and record.charge == 0
                    and all(
                        structure.bond(x, n).order == 1 and not structure.bond(x, n).aromatic
                        for n in structure.neighbours[x]
                    )
                )
                if x != b and (hydroxyl or amine) and not _is_acyl(scene, c, int(x)):
                    found.append((int(b), int(c), int(x)))
    return found


def _is_acyl(scene: Scene, c: int, x: int) -> bool:
    structure = scene.structure
    return any(structure.bond(c, n).order == 2 for n in structure.neighbours[c]) or any(
        structure.bond(n, m).order == 2 and structure.atoms[m].number in (8, 16)
        for n in structure.neighbours[x]
        if n != c
        for m in structure.neighbours[n]
    )


def _product(scene: Scene, state: State, leaving: Leaving, b: int, c: int, x: int) -> str:
    structure, a = scene.structure, leaving.carbon
    draft = Draft(scene.settled)
    remove_branch(draft, structure, a, leaving.atom)
    draft.unbond(b, c)
    near = [int(n) for n in structure.neighbours[a] if n not in (b, leaving.atom) and structure.atoms[n].number != 1]
    far = [int(n) for n in structure.neighbours[b] if n not in (a, c) and structure.atoms[n].number != 1]
    if len(near) >= 1 and len(far) == 1:
        torsion = abs(scene.torsion(state, near[0], a, b, far[0]))
        draft.set_double(a, b, near[0], far[0], cis=torsion < 90.0)
    else:
        draft.bond(a, b, 2)
    if structure.atoms[x].number == 8:
        if structure.atoms[x].hydrogens:
            draft.add_hydrogens(x, -1)
        else:
            draft.set_charge(x, 0)
    else:
        draft.set_charge(x, 1)
    draft.bond(c, x, 2)
    return draft.smiles(keep=a)


def _finding(scene: Scene, state: State, leaving: Leaving, b: int, c: int, x: int) -> Option:
    nitrogen = scene.structure.atoms[x].number == 7
    limits = ["Elimination and substitution compete; the conditions decide."]
    if nitrogen:
        limits.append("The lone pair of nitrogen must stand anti to the same bond; check the side of the nitrogen.")
    finding = Finding(
        reaction="fragmentation",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(leaving.atom,),
        partner_atoms=(x, c, b),
        product_smiles=_product(scene, state, leaving, b, c, x),
        pathway=f"fragmentation of bond {b + 1}-{c + 1}",
        reason=f"State {state.id}: {scene.describe(state, leaving.carbon, leaving.atom)} ({leaving.name}) is anti "
        "to bond "
        f"{b + 1}-{c + 1}, and donor {x + 1} stands on C {c + 1}.",
        confidence="direction only",
        limits=tuple(limits),
        cautions=(CAUTION,),
        sources=("grob-1969",) if nitrogen else ("wharton-hiegel-1965",),
    )
    return Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state))


def _locked(scene: Scene, leaving: Leaving, chains: list[tuple[int, int, int]]) -> Option:
    finding = Finding(
        reaction="fragmentation",
        ring_system=scene.number,
        verdict="locked out",
        leaving_atoms=(leaving.atom,),
        partner_atoms=tuple(dict.fromkeys(x for _, _, x in chains)),
        pathway="no bond to the donor carbon is anti to the leaving group",
        reason=f"{leaving.name} {leaving.atom + 1} is anti to no bond that carries donor "
        f"{numbers(*dict.fromkeys(x for _, _, x in chains))}: elimination or substitution instead.",
        cautions=(CAUTION,),
        sources=("grob-1969",),
    )
    return Option(finding=finding)
