"""Chairs in the conventional projection, measured on the SVG and against RDKit's view of the same coordinates."""

from __future__ import annotations

import math
import xml.etree.ElementTree as ET
from itertools import pairwise
from random import Random

import pytest
import ringstrain as rs
from rdkit import Chem
from rdkit.Geometry import Point3D
from ringstrain.errors import RingstrainError
from ringstrain.results import Analysis, State, SystemResult
from ringstrain.structure.write import to_rdkit
from ringstrain.views.drawing.scene import Scene, Stroke, overlap
from ringstrain.views.drawing.states import BOND, Wishes, draw_state, state_view
from ringstrain.views.drawing.svg import to_svg

from zoo import FIXED, SKELETONS, with_random_marks

SVG = "{http://www.w3.org/2000/svg}"
Point = tuple[float, float]
CHAIRS = {
    "methylcyclohexane": "CC1CCCCC1",
    "menthol": "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O",
    "glucopyranose": "OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O",
    "cis-1,3": "C[C@H]1CCC[C@@H](C)C1",
    "shorthand": "1b-Me 2a-OH 4a-Cl 5b-Et",
    "trans-decalin": "C[C@@H]1CC[C@H]2CCCC[C@@H]2C1",
    "cholestanol": "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C",
}


def only(text: str) -> tuple[Analysis, SystemResult]:
    analysis = rs.analyze(text)
    return analysis, analysis.ring_systems[0]


def chairs(result: SystemResult) -> list[State]:
    return [state for state in result.states if set(state.shapes) == {"chair"}][:2]


def lines(svg: str, role: str) -> list[tuple[Point, Point]]:
    """Ends of the straight lines of a class."""
    found = []
    for element in ET.fromstring(svg).iter(f"{SVG}polyline"):
        if role in (element.get("class") or "").split():
            first, second = (tuple(float(x) for x in p.split(",")) for p in element.get("points", "").split())
            found.append(((first[0], first[1]), (second[0], second[1])))
    return found


def slope(line: tuple[Point, Point]) -> float:
    """Direction of a line without sense, 0 to 180 [degree]."""
    (x0, y0), (x1, y1) = line
    return math.degrees(math.atan2(y1 - y0, x1 - x0)) % 180.0


def apart(a: float, b: float) -> float:
    return abs((a - b + 90.0) % 180.0 - 90.0)


def corners_of_ring(result: SystemResult, state: State, ring: int) -> list[Point]:
    model, view = state_view(result, state)
    flat = [view.project(model.positions[a])[:2] for a in result.rings[ring]]
    return [(BOND * x, -BOND * y) for x, y in flat]


CASES = [pytest.param(text, place, id=f"{name}-{'AB'[place]}") for name, text in CHAIRS.items() for place in (0, 1)]


@pytest.mark.parametrize(("text", "place"), CASES)
def test_ring_bonds_are_parallel_in_pairs(text: str, place: int) -> None:
    """The conventional chair (common practice, no source): opposite bonds are parallel."""
    _, result = only(text)
    state = chairs(result)[min(place, len(chairs(result)) - 1)]
    for ring in range(len(result.rings)):
        corners = corners_of_ring(result, state, ring)
        sides = [slope((corners[i], corners[(i + 1) % 6])) for i in range(6)]
        for i in range(3):
            assert apart(sides[i], sides[i + 3]) < 0.5
        assert min(apart(sides[i], sides[j]) for i, j in ((0, 1), (1, 2), (0, 2))) > 10.0


@pytest.mark.parametrize(("text", "place"), CASES)
def test_axial_bonds_are_vertical_on_paper(text: str, place: int) -> None:
    """Axial bonds stand upright (common practice, no source); only atoms outside six-membered rings may lean."""
    _, result = only(text)
    state = chairs(result)[min(place, len(chairs(result)) - 1)]
    drawn = lines(to_svg(draw_state(result, state)), "rs-s-axial")
    expected = sum(1 for a in state.axial if a not in result.system.atom_set)
    if text != CHAIRS["cholestanol"]:
        assert len(drawn) == expected
    steep = [line for line in drawn if apart(slope(line), 90.0) < 1.0]
    # The methyl group at the junction of six- and five-membered ring of a steroid leans with the flattened ring.
    assert len(drawn) - len(steep) <= (1 if text == CHAIRS["cholestanol"] else 0)


@pytest.mark.parametrize(("text", "place"), CASES)
def test_equatorial_bonds_run_along_the_ring_bonds_once_removed(text: str, place: int) -> None:
    """Equatorial bonds are parallel to the ring bonds one further on (common practice, no source)."""
    _, result = only(text)
    state = chairs(result)[min(place, len(chairs(result)) - 1)]
    model, view = state_view(result, state)
    measured = 0
    for arm in model.arms:
        positions = {(p.site.ring_atom, p.site.neighbour): p.position for p in state.detail.facts.placed}
        if arm.neighbour < 0 or positions.get((arm.root, arm.neighbour)) != "equatorial":
            continue
        ring = next(r for r in result.rings if arm.root in r)
        at = ring.index(arm.root)
        x, y, _ = view.project(arm.direction)
        way = slope(((0.0, 0.0), (x, -y)))
        flat = [view.project(model.positions[a]) for a in ring]
        once_removed = [
            slope(((p[0], -p[1]), (q[0], -q[1])))
            for p, q in ((flat[(at + 1) % 6], flat[(at + 2) % 6]), (flat[at - 1], flat[at - 2]))
        ]
        if any(arm.root in r for r in result.rings if r != ring):
            continue
        assert all(apart(way, other) < 0.5 for other in once_removed)
        measured += 1
    assert measured == sum(1 for a in state.equatorial if a not in model.positions)


@pytest.mark.parametrize("text", ["CC1CC=CCC1", "CC1CCc2ccccc2C1", "CC1CCC(=O)OC1"])
def test_pseudoaxial_bonds_of_half_chairs_stand_within_thirty_degrees_of_upright(text: str) -> None:
    """Half-chair: pseudoaxial bonds are nearly perpendicular to the flat part (common practice, no source)."""
    _, result = only(text)
    state = next(s for s in result.states if s.axial)
    for line in lines(to_svg(draw_state(result, state)), "rs-s-axial"):
        assert apart(slope(line), 90.0) < 30.0


def test_the_flat_bond_of_a_half_chair_gets_two_lines() -> None:
    _, result = only("C1CC=CCC1")
    drawn = lines(to_svg(draw_state(result, result.states[0])), "rs-s-ink")
    assert len(drawn) == 7
    assert sorted(apart(slope(a), slope(b)) for a in drawn for b in drawn if a != b)[0] < 1.0


# ---- handedness, by RDKit --------------------------------------------------------------------------------------


def pool() -> list[str]:
    rng = Random(20)
    texts = [text for _, text in FIXED]
    texts += [Chem.MolToSmiles(with_random_marks(text, rng)) for _, text, _ in SKELETONS]
    groups = ("Me", "Et", "iPr", "tBu", "OH", "OMe", "F", "Cl", "CN", "OAc", "Ph", "NH2", "CO2Me", "OTBS", "N3")
    for _ in range(40):
        places = rng.sample(range(1, 7), rng.randint(1, 5))
        texts.append(" ".join(f"{place}{rng.choice('ab')}-{rng.choice(groups)}" for place in places))
    return [*texts, "1b-Me 1a-OH 3b-Cl 3a-Et 5a-OMe 5b-Ph", *CHAIRS.values()]


POOL = pool()


def seen_by_rdkit(analysis: Analysis, result: SystemResult, state: State, *, mirror: bool = False) -> list[bool]:
    """Whether each stereocentre of a system, placed as the reader sees it, has the tag it was read with."""
    mol = Chem.RWMol(to_rdkit(analysis.structure))
    model, view = state_view(result, state)
    conformer = Chem.Conformer(mol.GetNumAtoms())
    conformer.Set3D(True)
    spots = dict(model.positions)
    for arm in model.arms:
        x, y, z = model.positions[arm.root]
        if arm.neighbour >= 0:
            spots[arm.neighbour] = (x + arm.direction[0], y + arm.direction[1], z + arm.direction[2])
    for atom, point in spots.items():
        right, up, near = view.project(point)
        conformer.SetAtomPosition(atom, Point3D(-right if mirror else right, up, near))
    mol.AddConformer(conformer)
    given = [atom.GetChiralTag() for atom in mol.GetAtoms()]
    Chem.AssignAtomChiralTagsFromStructure(mol, replaceExistingTags=True)
    found = [atom.GetChiralTag() for atom in mol.GetAtoms()]
    unset = Chem.ChiralType.CHI_UNSPECIFIED
    centres = [a for a in result.system.atoms if result.system.kinds[a] == "sp3"]
    return [given[a] == found[a] for a in centres if unset not in (given[a], found[a])]


@pytest.mark.parametrize("text", POOL)
def test_rdkit_reads_the_same_handedness_from_what_is_seen(text: str) -> None:
    """RDKit takes chirality from right, up and towards the eye as x, y, z; tags must come out as they went in."""
    try:
        analysis = rs.analyze(text)
    except RingstrainError:
        pytest.skip("outside the model")
    for result in analysis.ring_systems:
        for state in result.states[:3]:
            assert all(seen_by_rdkit(analysis, result, state)), state.id


def test_the_comparison_with_rdkit_notices_a_mirror_image() -> None:
    analysis, result = only(CHAIRS["menthol"])
    assert seen_by_rdkit(analysis, result, result.states[0], mirror=True) == [False] * 3
    assert seen_by_rdkit(analysis, result, result.states[0]) == [True] * 3


# ---- conventions -----------------------------------------------------------------------------------------------


def label_of(scene: Scene, text: str) -> Point:
    box = next(label for label in scene.labels if label.text == text).box
    return (box[0] + box[2]) / 2, (box[1] + box[3]) / 2


def test_beta_groups_of_a_shorthand_point_up_and_alpha_groups_down() -> None:
    """Up is beta when positions run clockwise (IUPAC rings, common practice, no source)."""
    for text, sign in (("1b-Cl", -1), ("1a-Cl", 1), ("4b-Cl", -1), ("3a-Cl", 1)):
        _, result = only(text)
        axial = next(s for s in result.states if s.axial)
        ((x0, y0), (x1, y1)) = lines(to_svg(draw_state(result, axial)), "rs-s-axial")[0]
        assert abs(x1 - x0) < 1.0
        assert (y1 - y0) * sign > 20.0


def test_glucose_looks_as_in_every_textbook() -> None:
    """Beta-D-glucopyranose in 4C1: ring O at the back right, C1 at the right tip and low, C4 at the left tip and high
    (IUPAC 1996 carbohydrate nomenclature, recalled)."""
    analysis = rs.analyze(CHAIRS["glucopyranose"], medium="protic")
    result = analysis.ring_systems[0]
    state = result.states[0]
    assert state.form == "4C1"
    model, view = state_view(result, state)
    c6, c5, o5, c1, c2, c3, c4 = 1, 2, 3, 4, 6, 8, 10
    flat = {a: view.project(p) for a, p in model.positions.items()}
    assert c6 not in flat
    assert max(flat, key=lambda a: flat[a][0]) == c1
    assert min(flat, key=lambda a: flat[a][0]) == c4
    assert flat[c4][1] > flat[c1][1]
    assert flat[o5][0] > flat[c5][0]
    assert min(flat[o5][1], flat[c5][1]) > max(flat[c2][1], flat[c3][1])


def test_steroids_stand_with_methyl_groups_up_and_ring_a_at_the_left() -> None:
    """5alpha steroids are drawn with C18 and C19 up, ring A at the left (common practice, no source)."""
    _, result = only(CHAIRS["cholestanol"])
    scene = draw_state(result, result.states[0])
    uprights = lines(to_svg(scene), "rs-s-axial")
    assert len(uprights) == 2
    assert all(end[1] < start[1] for start, end in uprights)
    assert label_of(scene, "HO")[0] < min(x for item in scene.items if isinstance(item, Stroke) for x, _ in item.points)


def test_both_chairs_of_a_flip_keep_the_same_atoms_at_their_tips() -> None:
    _, result = only("1b-Me 2b-OH 4a-Cl")
    places = []
    for state in chairs(result):
        model, view = state_view(result, state)
        places.append(sorted(result.rings[0], key=lambda a: round(view.project(model.positions[a])[0], 1)))
    assert places[0] != places[1]
    assert (places[0][0], places[0][5]) == (places[1][0], places[1][5])


# ---- labels ----------------------------------------------------------------------------------------------------

WISHES = (Wishes(), Wishes(numbers=True, gauche=True), Wishes(numbers=True, hydrogens=True))


@pytest.mark.parametrize("text", POOL)
def test_no_label_lies_on_another(text: str) -> None:
    try:
        analysis = rs.analyze(text)
    except RingstrainError:
        pytest.skip("outside the model")
    for result in analysis.ring_systems:
        for state in result.states[:4]:
            for wishes in WISHES:
                labels = draw_state(result, state, wishes).labels
                for i, first in enumerate(labels):
                    for second in labels[:i]:
                        assert overlap(first.box, second.box) < 0.5, (state.id, wishes, first.text, second.text)


def test_numbers_are_those_of_the_tables_each_once() -> None:
    _, result = only(CHAIRS["menthol"])
    scene = draw_state(result, result.states[0], Wishes(numbers=True))
    ring = sorted(int(label.text) for label in scene.labels if label.kind == "number")
    assert ring == sorted(a + 1 for a in result.system.atoms)
    beside = sorted(int(t) for label in scene.labels for t, script in label.runs if script == "number")
    assert beside == sorted(a + 1 for a in result.states[0].equatorial)


def test_marks_follow_the_contacts() -> None:
    """Axial methyl meets two axial hydrogens; diaxial cis-1,3-dimethyl also has one pair of groups (textbook fact)."""

    def dotted(text: str) -> tuple[int, int]:
        _, result = only(text)
        state = next(s for s in chairs(result) if s.axial)
        clashes = [i for i in draw_state(result, state).items if isinstance(i, Stroke) and i.role == "clash" and i.dash]
        return sum(i.width < 2 for i in clashes), sum(i.width > 2 for i in clashes)

    assert dotted("CC1CCCCC1") == (2, 0)
    assert dotted("C[C@H]1CCC[C@@H](C)C1") == (2, 1)


def test_positions_differ_in_line_and_not_only_in_colour() -> None:
    _, result = only("1b-Me 2b-OH 4a-Cl")
    looks: dict[str, tuple[float, tuple[float, ...]]] = {}
    twisted = only("1b-tBu 4b-tBu")[1]
    for state, system in [*((s, result) for s in result.states), *((s, twisted) for s in twisted.states)]:
        for item in draw_state(system, state).items:
            if isinstance(item, Stroke) and item.role in ("axial", "equatorial", "isoclinal", "hydrogen", "clash"):
                looks.setdefault(item.role, (item.width, item.dash))
    assert set(looks) == {"axial", "equatorial", "isoclinal", "hydrogen", "clash"}
    assert all(a != b for a, b in pairwise(sorted(looks.values())))
