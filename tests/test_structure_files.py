"""Structures from files, molfile blocks and the ring shorthand.

Outside checks: RDKit writes the blocks and reads hand-drawn wedges; both must give the compound that was meant.
"""

from __future__ import annotations

import gzip
import math
from pathlib import Path
from typing import Any

import pytest
import ringstrain as rs
from rdkit import Chem
from rdkit.Chem import rdDepictor, rdDistGeom
from ringstrain.errors import InputError, ParseError, UnknownGroup

from zoo import FIXED, marked

COMPOUNDS = {
    **dict(FIXED[:5]),
    "cis-1,4-dimethyl": "C[C@H]1CC[C@@H](C)CC1",
    "trans-1,4-dimethyl": "C[C@H]1CC[C@H](C)CC1",
    "all-cis-1,3,5-trimethyl": "C[C@H]1C[C@@H](C)C[C@@H](C)C1",
    "trans-decalin": "C1CC[C@H]2CCCC[C@@H]2C1",
    "cis-decalin": "C1CC[C@H]2CCCC[C@H]2C1",
    "3,9-dimethylspiro[5.5]undecane": "C[C@H]1CC[C@]2(CC1)CC[C@@H](C)CC2",
}


def flat(smiles: str) -> Any:
    """Drawing with wedges."""
    mol = marked(smiles)
    rdDepictor.Compute2DCoords(mol)
    Chem.WedgeMolBonds(mol, mol.GetConformer())
    return mol


def solid(smiles: str) -> Any:
    """Three-dimensional structure with hydrogens."""
    mol = Chem.AddHs(marked(smiles))
    parameters = rdDistGeom.ETKDGv3()
    parameters.randomSeed = 5
    assert rdDistGeom.EmbedMolecule(mol, parameters) == 0
    return mol


def energies(structure: rs.Structure) -> list[tuple[int, float]]:
    """Number of axial atoms and energy of every state."""
    systems = rs.analyze(structure).ring_systems
    return [(len(s.axial), round(s.energy_kcal, 6)) for system in systems for s in system.states]


@pytest.mark.parametrize("v3000", [False, True], ids=["V2000", "V3000"])
@pytest.mark.parametrize("make", [flat, solid], ids=["wedges", "3-D"])
@pytest.mark.parametrize("smiles", COMPOUNDS.values(), ids=COMPOUNDS)
def test_a_molfile_gives_the_compound_it_shows(smiles: str, make: Any, v3000: bool) -> None:
    block = Chem.MolToMolBlock(make(smiles), forceV3000=v3000)
    structure = rs.read(block)
    assert Chem.CanonSmiles(structure.smiles) == Chem.CanonSmiles(smiles)
    assert energies(structure) == energies(rs.read(smiles))


def test_a_file_gives_its_records_in_order(tmp_path: Path) -> None:
    blocks = [Chem.MolToMolBlock(flat(smiles)) for smiles in COMPOUNDS.values()]
    plain = tmp_path / "some.sdf"
    plain.write_text("".join(block + "$$$$\n" for block in blocks), encoding="utf-8", newline="\n")
    packed = tmp_path / "some.sdf.gz"
    packed.write_bytes(gzip.compress(plain.read_bytes()))
    windows = tmp_path / "windows.SDF"
    windows.write_bytes(plain.read_bytes().replace(b"\n", b"\r\n"))
    single = tmp_path / "one.mol"
    single.write_text(blocks[2], encoding="utf-8", newline="\n")
    lines = tmp_path / "some.smi"
    lines.write_text("".join(f"{s}\t{n}\n" for n, s in COMPOUNDS.items()), encoding="utf-8", newline="\n")
    expected = [Chem.CanonSmiles(smiles) for smiles in COMPOUNDS.values()]
    for path in (plain, packed, windows, lines):
        assert [Chem.CanonSmiles(s.smiles) for s in rs.read_file(path)] == expected
    assert [Chem.CanonSmiles(s.smiles) for s in rs.read_file(single)] == expected[2:3]


@pytest.mark.parametrize("name", ["missing.smi", "odd.docx"])
def test_a_file_that_cannot_be_read_is_named(name: str, tmp_path: Path) -> None:
    with pytest.raises(InputError, match=name):
        list(rs.read_file(tmp_path / name))


def drawn(groups: dict[int, tuple[str, bool]]) -> Any:
    """A hexagon numbered clockwise from the top as seen by the reader, wedges up, hashes down, read by RDKit."""
    lines, bonds = [], []
    for place in range(6):
        angle = math.radians(90.0 - 60.0 * place)
        lines.append(f"{math.cos(angle):10.4f}{math.sin(angle):10.4f}{0.0:10.4f} C   0  0  0  0  0  0")
        bonds.append(f"{place + 1:3d}{(place + 1) % 6 + 1:3d}  1  0")
    for number, (place, (element, up)) in enumerate(groups.items()):
        angle = math.radians(90.0 - 60.0 * (place - 1))
        lines.append(f"{2 * math.cos(angle):10.4f}{2 * math.sin(angle):10.4f}{0.0:10.4f} {element:<3} 0  0  0  0  0  0")
        bonds.append(f"{place:3d}{7 + number:3d}  1{1 if up else 6:3d}")
    head = f"\n\n\n{len(lines):3d}{len(bonds):3d}  0  0  0  0  0  0  0  0999 V2000\n"
    return Chem.MolFromMolBlock(head + "\n".join(lines + bonds) + "\nM  END\n")


@pytest.mark.parametrize(
    ("text", "groups"),
    [
        ("1b-OH 2a-Me", {1: ("O", True), 2: ("C", False)}),
        ("1b-OH 2b-Me", {1: ("O", True), 2: ("C", True)}),
        ("1a-OH 3b-Me 4b-Cl", {1: ("O", False), 3: ("C", True), 4: ("Cl", True)}),
        ("2alpha-F 4beta-Br 5alpha-Me", {2: ("F", False), 4: ("Br", True), 5: ("C", False)}),
        ("2α-F 4β-Br", {2: ("F", False), 4: ("Br", True)}),
    ],
)
def test_the_shorthand_is_the_drawing_with_wedges_up_and_hashes_down(text: str, groups: dict[int, Any]) -> None:
    # Common practice, no source: beta is up (wedge), alpha is down (hash), numbers run clockwise.
    structure = rs.read(text)
    assert Chem.CanonSmiles(structure.smiles) == Chem.MolToSmiles(drawn(groups))
    assert [atom.number for atom in structure.atoms[:6]] == [6] * 6


@pytest.mark.parametrize(
    ("text", "axial"),
    [
        ("1b-Me 4a-Me", True),
        ("1b-Me 4b-Me", False),
        ("1b-Me 3b-Me", True),
        ("1b-Me 3a-Me", False),
        ("1b-Me 2a-Me", True),
        ("1b-Me 2b-Me", False),
    ],
)
def test_shorthand_faces_make_the_diequatorial_chair_possible_or_not(text: str, axial: bool) -> None:
    # Common practice, no source: trans-1,2, cis-1,3 and trans-1,4 have a diequatorial chair.
    assert ((6, 7) in {s.equatorial for s in rs.analyze(text).ring_systems[0].states}) is axial


@pytest.mark.parametrize(
    ("text", "error", "marked_part"),
    [
        ("1b-Me 7a-Me", ParseError, "7a-Me"),
        ("1b-Me 1b-OH", ParseError, "1b-OH"),
        ("1b-Me 4-Me", ParseError, "4-Me"),
        ("1b-Me 4aMe", ParseError, "4aMe"),
        ("1b-Me 4a-Mee", UnknownGroup, "Mee"),
    ],
)
def test_a_broken_shorthand_is_marked_where_it_is_broken(text: str, error: type[InputError], marked_part: str) -> None:
    with pytest.raises(error) as caught:
        rs.read(text)
    assert caught.value.span is not None
    assert text[slice(*caught.value.span)] == marked_part
    assert caught.value.next_step


@pytest.mark.parametrize(("ring", "text"), [("piperidine", "1{}-Me 3b-OH"), ("piperazine", "4{}-Me 2a-OH")])
def test_a_group_on_a_nitrogen_needs_no_face_and_may_have_one(ring: str, text: str) -> None:
    structures = [rs.read(text.format(face), ring=ring) for face in ("", "a", "b")]
    assert len({structure.smiles for structure in structures}) == 1
    assert {energies(structure)[0] for structure in structures} == {energies(structures[0])[0]}


@pytest.mark.parametrize("text", ["1-Me 1-Et", "1-Me 1b-Et", "3-Me", "1-", "1Me"])
def test_a_nitrogen_takes_one_group_and_a_carbon_needs_a_face(text: str) -> None:
    with pytest.raises(ParseError):
        rs.read(text, ring="piperidine")


def test_patterns_on_a_nitrogen_can_be_read_again() -> None:
    for pattern in rs.enumerate_patterns(["Me", "Et"], ring="piperidine", enantiomers=True):
        assert rs.read(pattern.pattern, ring="piperidine").smiles == rs.read(pattern.smiles).smiles


def test_a_list_may_begin_with_a_byte_order_mark_and_hold_comments_and_foreign_bytes(tmp_path: Path) -> None:
    path = tmp_path / "list.smi"
    path.write_bytes(b"\xef\xbb\xbfCC1CCCCC1\tfirst\n# a comment\nOC1CCCCC1 caf\xe9\n")
    assert [structure.smiles for structure in rs.read_file(path)] == ["CC1CCCCC1", "OC1CCCCC1"]
