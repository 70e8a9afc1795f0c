"""1,6-Anhydropyranoses and acetals of vicinal diols; parts of the closure question."""

from __future__ import annotations

from ringstrain.consequences.finding import Finding, Option
from ringstrain.consequences.functional import alcohols, is_hydroxyl
from ringstrain.consequences.products import remove_branch, set_face
from ringstrain.consequences.request import read_part
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.structure.edit import Draft

CAUTION = "Hot acid and flammable solvents: usual care. Follow local rules and ask a qualified colleague."


def anhydrides(scene: Scene) -> list[Option]:
    """1,6-Anhydrides: the CH2OH on C5 must turn axial to reach the anomeric carbon across the ring oxygen."""
    structure = scene.structure
    found: list[Option] = []
    for number, ring in enumerate(scene.result.system.rings):
        oxygens = [a for a in ring.atoms if structure.atoms[a].number == 8]
        if len(oxygens) != 1:
            continue
        place = ring.atoms.index(oxygens[0])
        sides = (ring.atoms[(place + 1) % 6], ring.atoms[place - 1])
        for anomeric, far in (sides, sides[::-1]):
            leaving = [x for x in scene.outer(anomeric) if structure.atoms[x].number == 8]
            arms = [
                (x, int(y))
                for x in scene.outer(far)
                if structure.atoms[x].number == 6 and structure.atoms[x].hydrogens == 2
                for y in structure.neighbours[x]
                if y != far and is_hydroxyl(structure, int(y))
            ]
            if len(leaving) != 1 or not arms:
                continue
            arm, oxygen = arms[0]
            face = scene.face(far, arm, number)
            draft = Draft(scene.settled)
            other = next(s.neighbour for s in scene.sites(anomeric) if s.ring == number and s.neighbour != leaving[0])
            remove_branch(draft, structure, anomeric, leaving[0])
            draft.add_hydrogens(oxygen, -1)
            draft.bond(oxygen, anomeric)
            set_face(draft, scene, anomeric, number, oxygen, other, face)
            product = draft.smiles(keep=anomeric)
            for state in scene.states:
                if has_boat(state) or scene.position(state, far, arm) != "axial":
                    continue
                finding = Finding(
                    reaction="closure",
                    ring_system=scene.number,
                    state=state.id,
                    state_population=scene.shares[state.id],
                    cost_kcal=scene.cost(state),
                    cost_uncertainty_kcal=scene.cost_sigma(state),
                    verdict=scene.verdict(state),
                    leaving_atoms=(leaving[0],),
                    partner_atoms=(oxygen,),
                    product_smiles=product,
                    pathway="1,6-anhydride",
                    reason=f"State {state.id}{f' ({state.form})' if state.form else ''}: CH2OH {arm + 1} is axial "
                    "and O "
                    f"{oxygen + 1} reaches C {anomeric + 1} across the ring oxygen.",
                    confidence="direction only",
                    limits=(
                        "The share at equilibrium falls with each hydroxyl that has to turn axial; it is not "
                        "computed here.",
                    ),
                    cautions=(CAUTION,),
                    sources=("angyal-dawes-1968",),
                )
                found.append(Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state)))
    return found


def acetals(scene: Scene) -> list[Option]:
    """Isopropylidene acetals of neighbouring hydroxyls that are gauche."""
    pairs = alcohols(scene)
    found: list[Option] = []
    for c1, o1 in pairs:
        for c2, o2 in pairs:
            if not (c1 < c2 and c2 in scene.ring_neighbours(c1)):
                continue
            cis = scene.same_face(c1, o1, c2, o2)
            near = [s for s in scene.states if not has_boat(s) and abs(scene.torsion(s, o1, c1, c2, o2)) < 82.0]
            draft = Draft(scene.settled)
            bridge = draft.graft(read_part("C(C)C", "acetal"), o1)
            draft.add_hydrogens(o1, -1)
            draft.add_hydrogens(o2, -1)
            draft.add_hydrogens(bridge, -1)
            draft.bond(bridge, o2)
            product = draft.smiles(keep=c1)
            limits = () if cis else ("A trans-fused five-membered acetal is strained; cis diols win.",)
            for state in near:
                finding = Finding(
                    reaction="closure",
                    ring_system=scene.number,
                    state=state.id,
                    state_population=scene.shares[state.id],
                    cost_kcal=scene.cost(state),
                    cost_uncertainty_kcal=scene.cost_sigma(state),
                    verdict=scene.verdict(state),
                    leaving_atoms=(o1,),
                    partner_atoms=(o2,),
                    product_smiles=product,
                    pathway=f"isopropylidene acetal of a {'cis' if cis else 'trans'} diol",
                    reason=f"State {state.id}: O {numbers(o1, o2)} are gauche.",
                    confidence="direction only",
                    limits=limits,
                    cautions=(CAUTION,),
                    sources=("common-practice",),
                )
                found.append(Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state)))
            if not near:
                finding = Finding(
                    reaction="closure",
                    ring_system=scene.number,
                    verdict="locked out",
                    leaving_atoms=(o1,),
                    partner_atoms=(o2,),
                    pathway="no acetal",
                    reason=f"O {numbers(o1, o2)} are anti in every state.",
                    cautions=(CAUTION,),
                    sources=("common-practice",),
                )
                found.append(Option(finding=finding))
    return found
