"""Which groups on a ring can meet: lactones, epoxides, 1,6-anhydrides, iodolactones, acetals (class closure).

Rules: a 1,3-bridge needs both groups axial on one face; a 1,4-bridge needs a boat; a fused five-membered ring needs two
neighbours that are gauche.  The cost is that of the state above the best one.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from ringstrain.analysis import State
from ringstrain.consequences.acetals import acetals, anhydrides
from ringstrain.consequences.epoxides import closures as epoxide_closures
from ringstrain.consequences.epoxides import diaxial_sites
from ringstrain.consequences.finding import Finding, Option, Verdict
from ringstrain.consequences.functional import is_hydroxyl, leaving_groups, ring_alkenes
from ringstrain.consequences.products import set_face
from ringstrain.consequences.request import Request
from ringstrain.consequences.scene import Scene, has_boat, numbers
from ringstrain.structure.edit import Draft
from ringstrain.structure.records import IMPLICIT, Atom
from ringstrain.tables.reader import load_tables
from ringstrain.units import R_KCAL

CAUTION = "Dehydrating agents and iodine burn skin. Follow local rules and ask a qualified colleague."
BOAT_ROW = "ringstates/cyclohexane-boat"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Arm:
    """A carboxyl or hydroxyl on a ring: ring atom, first atom, reacting atom, atoms between."""

    ring_atom: int
    first: int
    end: int
    between: int


def options(scene: Scene, request: Request) -> list[Option]:
    """Ring closures between groups of one ring system.

    Parameters
    ----------
    scene
        The ring system.
    request
        Not used.
    """
    found: list[Option] = []
    for acid in _acids(scene):
        for hydroxyl in _hydroxyls(scene):
            if hydroxyl.ring_atom != acid.ring_atom:
                found.extend(_lactone(scene, acid, hydroxyl))
        for a, b in ring_alkenes(scene):
            found.extend(_iodolactone(scene, acid, a, b))
    if leaving_groups(scene, outside=False):
        found.extend(
            replace(o, finding=replace(o.finding, reaction="closure"), centres=()) for o in epoxide_closures(scene)
        )
    found.extend(anhydrides(scene))
    return found or acetals(scene)


def _acids(scene: Scene) -> list[_Arm]:
    """Carboxyl groups on the ring or on a CH2 beside it; ``end`` is the carboxyl carbon."""
    structure = scene.structure

    def is_acid(x: int) -> bool:
        around = structure.neighbours[x]
        return (
            structure.atoms[x].number == 6
            and any(structure.atoms[n].number == 8 and structure.bond(x, n).order == 2 for n in around)
            and any(structure.bond(x, n).order == 1 and is_hydroxyl(structure, int(n)) for n in around)
        )

    return _arms(scene, is_acid)


def _hydroxyls(scene: Scene) -> list[_Arm]:
    """Alcohols on the ring or on a CH2 beside it; ``end`` is the oxygen."""
    structure = scene.structure

    def is_alcohol(x: int) -> bool:
        if not is_hydroxyl(structure, x):
            return False
        carbon = structure.neighbours[x][0]
        return not any(structure.bond(carbon, n).order == 2 for n in structure.neighbours[carbon])

    return _arms(scene, is_alcohol)


def _arms(scene: Scene, wanted: object) -> list[_Arm]:
    structure = scene.structure
    assert callable(wanted)
    found = []
    for atom in scene.ring_atoms:
        for x in scene.outer(atom) if scene.is_tetrahedral(atom) else ():
            if wanted(x):
                found.append(_Arm(ring_atom=atom, first=x, end=x, between=0))
            elif structure.atoms[x].number == 6 and structure.atoms[x].hydrogens == 2:
                found += [
                    _Arm(ring_atom=atom, first=x, end=int(y), between=1)
                    for y in structure.neighbours[x]
                    if y != atom and wanted(int(y))
                ]
    return found


def _apart(scene: Scene, a: int, b: int) -> tuple[int, int] | None:
    """(bonds apart, ring number) of two atoms of one ring."""
    for ring in scene.result.system.rings_of[a]:
        if ring in scene.result.system.rings_of[b]:
            atoms = scene.result.system.rings[ring].atoms
            steps = abs(atoms.index(a) - atoms.index(b))
            return min(steps, 6 - steps), ring
    return None


def _lactone_product(scene: Scene, acid: _Arm, hydroxyl: _Arm) -> str:
    structure = scene.structure
    draft = Draft(scene.settled)
    gone = next(
        int(n)
        for n in structure.neighbours[acid.end]
        if structure.bond(acid.end, n).order == 1 and is_hydroxyl(structure, int(n))
    )
    draft.drop([gone])
    if structure.atoms[hydroxyl.end].hydrogens:
        draft.add_hydrogens(hydroxyl.end, -1)
    else:
        draft.set_charge(hydroxyl.end, 0)
    draft.bond(acid.end, hydroxyl.end)
    return draft.smiles(keep=acid.end)


def _lactone(scene: Scene, acid: _Arm, hydroxyl: _Arm) -> list[Option]:
    place = _apart(scene, acid.ring_atom, hydroxyl.ring_atom)
    if place is None:
        return []
    apart, _ = place
    size = apart + 3 + acid.between + hydroxyl.between
    if size < 5:
        return []
    cis = scene.same_face(acid.ring_atom, acid.first, hydroxyl.ring_atom, hydroxyl.first)
    chairs = [s for s in scene.states if not has_boat(s)] or list(scene.states)
    pair = f"carboxyl {acid.end + 1} and O {hydroxyl.end + 1} (1,{apart + 1}, {'cis' if cis else 'trans'})"
    if apart == 1:
        near = [
            s
            for s in chairs
            if abs(scene.torsion(s, acid.first, acid.ring_atom, hydroxyl.ring_atom, hydroxyl.first)) < 82.0
        ]
        limits = () if cis else ("A trans-fused five-membered lactone closes but is strained.",)
        return [
            _closed(scene, s, acid, hydroxyl, f"State {s.id}: {pair} are gauche.", "fused lactone", limits)
            for s in near
        ] or [_no(scene, acid, hydroxyl, "locked out", f"{pair} are anti in every state.", limits)]
    if not cis:
        return [_no(scene, acid, hydroxyl, "locked out", f"{pair} stand on opposite faces and cannot meet.", ())]
    if apart == 3:
        return [_through_boat(scene, acid, hydroxyl, pair)]
    both = [
        s
        for s in chairs
        if scene.position(s, acid.ring_atom, acid.first) == "axial"
        and scene.position(s, hydroxyl.ring_atom, hydroxyl.first) == "axial"
    ]
    if both:
        return [
            _closed(
                scene, s, acid, hydroxyl, f"State {s.id}: {pair} are both axial on one face.", "1,3-bridged lactone", ()
            )
            for s in both
        ]
    return [
        _no(
            scene,
            acid,
            hydroxyl,
            "needs a boat",
            f"{pair}: no chair has both axial; it cannot close without a boat.",
            (),
        )
    ]


def _closed(
    scene: Scene, state: State, acid: _Arm, hydroxyl: _Arm, reason: str, pathway: str, limits: tuple[str, ...]
) -> Option:
    finding = Finding(
        reaction="closure",
        ring_system=scene.number,
        state=state.id,
        state_population=scene.shares[state.id],
        cost_kcal=scene.cost(state),
        cost_uncertainty_kcal=scene.cost_sigma(state),
        verdict=scene.verdict(state),
        leaving_atoms=(acid.end,),
        partner_atoms=(hydroxyl.end,),
        product_smiles=_lactone_product(scene, acid, hydroxyl),
        pathway=pathway,
        reason=reason,
        confidence="order of magnitude",
        limits=limits,
        cautions=(CAUTION,),
        sources=("common-practice",),
    )
    return Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state))


def _no(scene: Scene, acid: _Arm, hydroxyl: _Arm, verdict: Verdict, reason: str, limits: tuple[str, ...]) -> Option:
    finding = Finding(
        reaction="closure",
        ring_system=scene.number,
        verdict=verdict,
        leaving_atoms=(acid.end,),
        partner_atoms=(hydroxyl.end,),
        pathway="no unstrained lactone",
        reason=f"{reason[0].upper()}{reason[1:]}",
        limits=limits,
        cautions=(CAUTION,),
        sources=("common-practice",),
    )
    return Option(finding=finding)


def _through_boat(scene: Scene, acid: _Arm, hydroxyl: _Arm, pair: str) -> Option:
    """A cis-1,4 pair meets only across a boat."""
    claim = (scene.tables or load_tables()).row(BOAT_ROW)
    cost = claim.value or 0.0
    finding = Finding(
        reaction="closure",
        ring_system=scene.number,
        state=scene.states[0].id,
        state_population=scene.shares[scene.states[0].id],
        cost_kcal=cost,
        cost_uncertainty_kcal=claim.uncertainty,
        verdict="needs a boat",
        leaving_atoms=(acid.end,),
        partner_atoms=(hydroxyl.end,),
        product_smiles=_lactone_product(scene, acid, hydroxyl),
        pathway="1,4-bridged lactone, only through a boat",
        reason=f"{pair[0].upper()}{pair[1:]} are axial and equatorial in every chair; they meet only across a boat.",
        confidence="order of magnitude",
        limits=("The cost is that of the bare boat; eclipsing groups add to it.",),
        cautions=(CAUTION,),
        sources=(claim.source,) if claim.source else (),
    )
    weight = math.exp(-cost / (R_KCAL * scene.analysis.temperature_K))
    return Option(finding=finding, weight=weight, sigma_ln=0.0)


def _iodolactone(scene: Scene, acid: _Arm, a: int, b: int) -> list[Option]:
    """Carboxyl oxygen on the alkene carbon 1,3 to its ring carbon, iodine trans-diaxial on the other."""
    structure = scene.structure
    found: list[Option] = []
    for near, far in ((a, b), (b, a)):
        place = _apart(scene, acid.ring_atom, near)
        if place is None or place[0] != 2 or acid.between:
            continue
        ring = place[1]
        face = scene.face(acid.ring_atom, acid.first, ring)
        draft = Draft(scene.settled)
        oxygen = next(
            int(n)
            for n in structure.neighbours[acid.end]
            if structure.bond(acid.end, n).order == 1 and is_hydroxyl(structure, int(n))
        )
        if structure.atoms[oxygen].hydrogens:
            draft.add_hydrogens(oxygen, -1)
        else:
            draft.set_charge(oxygen, 0)
        draft.bond(near, far, 1)
        draft.bond(oxygen, near)
        iodine = draft.add_atom(Atom(53, "I"))
        draft.bond(iodine, far)
        for carbon, new, side in ((near, oxygen, face), (far, iodine, -face)):
            others = [s.neighbour for s in scene.sites(carbon) if s.ring == ring]
            set_face(draft, scene, carbon, ring, new, others[0] if others else int(IMPLICIT), side)
        product = draft.smiles(keep=acid.end)
        for state in scene.states:
            if has_boat(state) or scene.position(state, acid.ring_atom, acid.first) != "axial":
                continue
            at_near, _ = diaxial_sites(scene, state, near, far, ring)
            if at_near != face:
                continue
            finding = Finding(
                reaction="closure",
                ring_system=scene.number,
                state=state.id,
                state_population=scene.shares[state.id],
                cost_kcal=scene.cost(state),
                cost_uncertainty_kcal=scene.cost_sigma(state),
                verdict=scene.verdict(state),
                leaving_atoms=(acid.end,),
                partner_atoms=(near, far),
                product_smiles=product,
                pathway="iodolactonisation, iodine trans-diaxial to oxygen",
                reason=f"Half-chair {state.id}: carboxyl {acid.end + 1} is pseudoaxial and reaches C {numbers(near)}.",
                confidence="direction only",
                limits=("Kinetic and thermodynamic iodolactones can differ.",),
                cautions=(CAUTION,),
                sources=("common-practice",),
            )
            found.append(Option(finding=finding, weight=scene.shares[state.id], sigma_ln=scene.sigma_ln(state)))
    return found
