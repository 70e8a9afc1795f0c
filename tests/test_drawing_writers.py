"""SVG, PNG and text: valid, complete, safe, and as recorded.

The files under tests/golden/svg change only in a commit that says why, each looked at first.  To write them again::

    python tests/test_drawing_writers.py
"""

from __future__ import annotations

import re
import struct
import xml.etree.ElementTree as ET
import zlib
from pathlib import Path

import pytest
import ringstrain as rs
from rdkit import Chem
from rdkit.Chem import AllChem, rdMolTransforms
from ringstrain.errors import InputError
from ringstrain.results import SystemResult
from ringstrain.views.drawing.ladders import draw_equilibrium, draw_temperatures
from ringstrain.views.drawing.newman import draw_newman, spokes
from ringstrain.views.drawing.palette import COLOURS
from ringstrain.views.drawing.panels import draw_system
from ringstrain.views.drawing.png import to_png
from ringstrain.views.drawing.scene import Label, Scene, Stroke
from ringstrain.views.drawing.states import Wishes, draw_state
from ringstrain.views.drawing.svg import to_svg
from ringstrain.views.drawing.terminal import states_text, to_text
from ringstrain.views.look import Look

FOLDER = Path(__file__).parent / "golden" / "svg"
MENTHOL = "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O"
STEROID = "C[C@]12CC[C@H]3[C@H]([C@@H]1CC[C@@H]2O)CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C"
#: Structure, how many states lie above the one drawn, and what is shown.
GOLDEN: dict[str, tuple[str, int, Wishes]] = {
    "methylcyclohexane-axial": ("CC1CCCCC1", 1, Wishes()),
    "cis-1-3-dimethyl-diaxial": ("C[C@H]1CCC[C@@H](C)C1", 1, Wishes(numbers=True)),
    "menthol": (MENTHOL, 0, Wishes(gauche=True)),
    "glucopyranose": ("OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O", 0, Wishes(numbers=True)),
    "trans-decalin": ("C1CC[C@@H]2CCCC[C@H]2C1", 0, Wishes()),
    "cis-decalin": ("C1CC[C@@H]2CCCC[C@@H]2C1", 0, Wishes()),
    "steroid": (STEROID, 0, Wishes()),
    "methylcyclohexene": ("CC1CC=CCC1", 0, Wishes()),
    "twist-boat": ("1b-tBu 4b-tBu", 0, Wishes()),
    "adamantane": ("C1C2CC3CC1CC(C2)C3", 0, Wishes()),
    "perhydrophenanthrene": ("C1CC[C@H]2[C@H](C1)CC[C@H]1CCCC[C@@H]12", 0, Wishes()),
}


def system(text: str) -> SystemResult:
    return rs.analyze(text).ring_systems[0]


def golden(name: str) -> str:
    text, place, wishes = GOLDEN[name]
    result = system(text)
    return to_svg(draw_state(result, result.states[place], wishes))


_NUMBER = re.compile(r"-?\d+\.?\d*")


@pytest.mark.parametrize("name", GOLDEN)
def test_the_drawing_is_as_recorded(name: str) -> None:
    with open(FOLDER / f"{name}.svg", encoding="utf-8", newline="") as stream:
        recorded = stream.read()
    drawn = golden(name)
    assert _NUMBER.sub("#", drawn) == _NUMBER.sub("#", recorded)
    for here, there in zip(_NUMBER.findall(drawn), _NUMBER.findall(recorded), strict=True):
        assert abs(float(here) - float(there)) <= 0.2


def test_no_recorded_drawing_is_left_over() -> None:
    assert {path.stem for path in FOLDER.glob("*.svg")} == set(GOLDEN)


# ---- SVG -------------------------------------------------------------------------------------------------------


def scenes() -> dict[str, Scene]:
    analysis = rs.analyze(MENTHOL)
    result = analysis.ring_systems[0]
    warm = [rs.analyze(MENTHOL, temperature_K=t) for t in (200.0, 300.0, 400.0)]
    return {
        "states": draw_system(analysis, result, result.states[:2], Look(), Wishes(numbers=True, gauche=True)),
        "newman": draw_newman(analysis, result, result.states[0], 3, 9, numbers=True),
        "ladder": draw_equilibrium(analysis, result, result.states[:4], Look(units="kJ")),
        "temperatures": draw_temperatures(warm, 0, Look()),
    }


@pytest.mark.parametrize("kind", ["states", "newman", "ladder", "temperatures"])
def test_svg_is_valid_xml_with_its_text_as_text(kind: str) -> None:
    scene = scenes()[kind]
    root = ET.fromstring(to_svg(scene))
    assert root.tag == "{http://www.w3.org/2000/svg}svg"
    written = ["".join(e.itertext()) for e in root.iter("{http://www.w3.org/2000/svg}text")]
    assert written == [label.text for label in scene.labels]
    left, top, width, height = (float(x) for x in root.get("viewBox", "").split())
    for label in scene.labels:
        box = label.box
        assert left <= box[0]
        assert top <= box[1]
        assert box[2] <= width
        assert box[3] <= height


def test_the_picture_of_an_equilibrium_says_who_wins_and_by_how_much() -> None:
    texts = {label.text for label in scenes()["states"].labels}
    e = system(MENTHOL).equilibrium
    assert e is not None
    assert e.K is not None
    assert {"Chair A", "Chair B", "K = [A]/[B]"} <= texts
    numbers = [float(m) for text in texts for m in re.findall(r"^(\d+) \(", text)]
    assert any(abs(n - e.K) <= 0.01 * e.K for n in numbers)


HOSTILE = 'x"><script>alert(1)</script>&amp;\x0b</svg>'


def test_text_from_outside_stays_text() -> None:
    label = Label(0, 20, ((HOSTILE, ""), ("2", "sub")), "ink")
    text = to_svg(Scene(width=200, height=40, items=(label,), title=HOSTILE))
    root = ET.fromstring(text)
    assert {e.tag.rpartition("}")[2] for e in root.iter()} == {"svg", "title", "style", "rect", "g", "text", "tspan"}
    assert "<script" not in text


def test_colours_have_a_dark_twin_and_enough_contrast() -> None:
    """4.5 to 1 for anything written, 3 to 1 for lines (WCAG 2.1, 1.4.3 and 1.4.11, recalled)."""

    def light(colour: str) -> float:
        parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
        r, g, b = (c / 12.92 if c <= 0.03928 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
        return 0.2126 * r + 0.7152 * g + 0.0722 * b

    for role, pair in COLOURS.items():
        if role in ("paper", "rule"):
            continue
        for tone in (0, 1):
            high, low = sorted((light(pair[tone]), light(COLOURS["paper"][tone])), reverse=True)
            assert (high + 0.05) / (low + 0.05) >= 4.5, (role, tone)


# ---- PNG -------------------------------------------------------------------------------------------------------


def pixels(data: bytes) -> tuple[int, int, list[bytes]]:
    """Size and rows of a PNG of 8-bit RGB or RGBA, its filters undone (PNG specification, W3C)."""
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    width, height, depth, kind = struct.unpack(">IIBB", data[16:26])
    assert depth == 8
    channels = {2: 3, 6: 4}[kind]
    packed, at = b"", 8
    while at < len(data):
        size = struct.unpack(">I", data[at : at + 4])[0]
        if data[at + 4 : at + 8] == b"IDAT":
            packed += data[at + 8 : at + 8 + size]
        at += 12 + size
    raw, stride = zlib.decompress(packed), width * channels
    rows: list[bytes] = []
    for y in range(height):
        line = bytearray(raw[y * (stride + 1) + 1 : (y + 1) * (stride + 1)])
        filter_kind = raw[y * (stride + 1)]
        above = rows[-1] if rows else bytes(stride)
        for i in range(stride):
            a = line[i - channels] if i >= channels else 0
            b = above[i]
            c = above[i - channels] if i >= channels else 0
            p = a + b - c
            paeth = min((abs(p - a), 0, a), (abs(p - b), 1, b), (abs(p - c), 2, c))[2]
            line[i] = (line[i] + (0, a, b, (a + b) // 2, paeth)[filter_kind]) & 255
        rows.append(bytes(line))
    return width, height, rows


def test_a_png_shows_the_drawing_in_its_colours() -> None:
    result = system("CC1CCCCC1")
    scene = draw_state(result, result.states[1])
    width, height, rows = pixels(to_png(scene, scale=2.0))
    assert (width, height) == (int(scene.width * 2 + 0.5), int(scene.height * 2 + 0.5))
    channels = len(rows[0]) // width
    axial = next(i for i in scene.items if isinstance(i, Stroke) and i.role == "axial")
    (x0, y0), (x1, y1) = axial.points
    x, y = round(x0 + x1), round(y0 + y1)
    r, g, b = rows[y][x * channels : x * channels + 3]
    assert (r, g, b) == (0xA8, 0x3C, 0x08)
    corner = rows[0][:3]
    assert corner == b"\xff\xff\xff"
    dark = sum(row[i] < 100 for row in rows for i in range(0, len(row), channels))
    assert dark > 500


@pytest.mark.parametrize("kind", ["states", "newman", "ladder", "temperatures"])
def test_every_picture_can_be_a_png(kind: str) -> None:
    data = to_png(scenes()[kind], scale=1.0)
    assert data[:8] == b"\x89PNG\r\n\x1a\n"
    assert len(data) > 2000


# ---- text ------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("ascii", [False, True], ids=["braille", "ascii"])
@pytest.mark.parametrize("text", [MENTHOL, STEROID, "1b-Me"])
def test_text_drawings_keep_to_sixty_columns(text: str, ascii: bool) -> None:
    analysis = rs.analyze(text)
    result = analysis.ring_systems[0]
    for state in result.states[:2]:
        drawn = to_text(draw_state(result, state), Look(width=60, ascii=ascii))
        assert max(map(len, drawn.splitlines())) <= 60
        assert drawn.isascii() == ascii
    whole = states_text(analysis, result, result.states[:2], Look(width=60, ascii=ascii), Wishes(gauche=True))
    assert whole.isascii() == ascii


def test_a_chair_in_braille_follows_the_lines_of_the_drawing() -> None:
    """Dots lie along all six ring bonds: every bond's middle falls on or beside a marked cell."""
    result = system("CC1CCCCC1")
    scene = draw_state(result, result.states[0])
    rows = to_text(scene, Look(width=60)).splitlines()
    columns = max(20, min(60, round(scene.width / 5.0)))
    cell = scene.width / columns
    offset = min(int(y / (2 * cell)) for item in scene.items if isinstance(item, Stroke) for _, y in item.points)
    for item in scene.items:
        if isinstance(item, Stroke):
            (x0, y0), (x1, y1) = item.points
            column, row = int((x0 + x1) / 2 / cell), int((y0 + y1) / 2 / (2 * cell)) - offset
            near = "".join(rows[r][column - 1 : column + 2] for r in (row - 1, row, row + 1) if 0 <= r < len(rows))
            assert near.strip()
    assert "CH3" in "".join(rows)


# ---- Newman views ----------------------------------------------------------------------------------------------


def test_newman_dihedrals_agree_with_an_embedded_structure() -> None:
    """RDKit's MMFF conformer of all-equatorial menthol has every dihedral of the view within 15 degrees."""
    result = system(MENTHOL)
    front, back = spokes(result, result.states[0], 3, 9)
    mine = {(a.neighbour, b.neighbour): b.angle - a.angle for a in front for b in back}
    mol = Chem.AddHs(Chem.MolFromSmiles(MENTHOL))
    numbers = list(AllChem.EmbedMultipleConfs(mol, 12, randomSeed=7))
    energies = [e for _, e in AllChem.MMFFOptimizeMoleculeConfs(mol, maxIters=2000)]
    best = min(numbers, key=lambda n: energies[n])
    for (a, d), angle in mine.items():
        if a >= 0 and d >= 0:
            found = rdMolTransforms.GetDihedralDeg(mol.GetConformer(best), a, 3, 9, d)
            assert abs((angle - found + 180) % 360 - 180) < 15, (a, d)
    assert (1, 10) in mine


def test_looking_from_the_other_end_changes_no_dihedral() -> None:
    """A torsion has the same sign from both ends (IUPAC gold book, torsion angle, recalled)."""
    for text, first, second in ((MENTHOL, 3, 9), ("CC1CC=CCC1", 4, 5), ("1b-tBu 4b-tBu", 0, 1)):
        result = system(text)
        for state in result.states[:3]:
            here, there = spokes(result, state, first, second), spokes(result, state, second, first)
            one = {(a.neighbour, b.neighbour): b.angle - a.angle for a in here[0] for b in here[1]}
            two = {(b.neighbour, a.neighbour): b.angle - a.angle for a in there[0] for b in there[1]}
            assert one.keys() == two.keys()
            for pair, angle in one.items():
                assert abs((angle - two[pair] + 180) % 360 - 180) < 1e-6


def test_three_bonds_leave_each_atom_of_a_newman_view_120_degrees_apart() -> None:
    """Tetrahedral atoms seen end on (common practice, no source)."""
    result = system(MENTHOL)
    for state in result.states[:2]:
        for side in spokes(result, state, 3, 9):
            angles = sorted(s.angle % 360 for s in side)
            gaps = [angles[1] - angles[0], angles[2] - angles[1], 360 + angles[0] - angles[2]]
            assert all(abs(gap - 120) < 1e-6 for gap in gaps)


def test_atoms_that_share_no_ring_bond_give_no_newman_view() -> None:
    result = system(MENTHOL)
    with pytest.raises(InputError, match="Atoms 1 and 4"):
        spokes(result, result.states[0], 0, 3)


if __name__ == "__main__":
    for title in GOLDEN:
        with open(FOLDER / f"{title}.svg", "w", encoding="utf-8", newline="\n") as file:
            file.write(golden(title))
