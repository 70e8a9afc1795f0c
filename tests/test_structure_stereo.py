"""Every ring stereo pattern survives reading and writing.

Outside checks: counts of stereoisomers known to the trade, and RDKit's CIP labels for ordinary centres.
"""

from __future__ import annotations

import csv
import pickle
from dataclasses import replace
from itertools import product
from pathlib import Path
from random import Random

import pytest
import ringstrain as rs
from rdkit import Chem
from ringstrain.analysis import SystemResult
from ringstrain.structure.write import write_smiles

from zoo import FIXED, marked, mirrored, rewritten

INOSITOLS = Path(__file__).parent / "reference" / "data" / "inositol_strain.csv"


def hexa(element: str) -> list[str]:
    """SMILES of all 64 face patterns of a cyclohexane with six like groups."""
    texts = []
    for signs in product(("@", "@@"), repeat=6):
        text = f"{element}[C{signs[0]}H]1"
        text += "".join(f"[C{sign}H]({element})" for sign in signs[1:5])
        texts.append(text + f"[C{signs[5]}H]1{element}")
    return texts


def system_of(smiles: str) -> SystemResult:
    (system,) = rs.analyze(smiles).ring_systems
    return system


def necklace(word: str) -> str:
    """The least of all turns and both walks round a ring."""
    turns = [word[turn:] + word[:turn] for turn in range(6)]
    return min(turns + [turned[::-1] for turned in turns])


def chair_patterns(smiles: str) -> tuple[str, ...]:
    """Axial (a) and equatorial (e) round the ring, for each chair."""
    system = system_of(smiles)
    (ring,) = system.rings
    found = []
    for state in system.states:
        if set(state.shapes) == {"chair"}:
            position = {ring_atom: kind[0] for _, ring_atom, _, kind in state.sites}
            found.append(necklace("".join(position[a] for a in ring)))
    return tuple(sorted(found))


@pytest.mark.parametrize("element", ["O", "Cl", "C"])
def test_six_like_groups_give_nine_isomers_and_eight_axial_patterns(element: str) -> None:
    # Common practice, no source: nine inositols and nine hexachlorocyclohexanes, of which one is a pair of mirror
    # images, so that there are eight diastereomers.
    texts = hexa(element)
    distinct = {rs.read(text).smiles for text in texts}
    assert len(distinct) == 9
    patterns = {rs.read(text).smiles: chair_patterns(text) for text in texts}
    assert len(set(patterns.values())) == 8
    chiral = {text for text in distinct if rs.read(mirrored(text)).smiles != text}
    assert len(chiral) == 2
    assert len({patterns[text] for text in chiral}) == 1


@pytest.mark.parametrize("element", ["O", "Cl"])
def test_the_isomers_survive_a_round_trip_in_any_writing(element: str) -> None:
    rng = Random(6)
    for text in sorted({rs.read(text).smiles for text in hexa(element)}):
        assert rs.read(text).smiles == text
        for _ in range(10):
            again, _ = rewritten(marked(text), rng)
            assert rs.read(again).smiles == text


def test_the_inositols_stand_as_named() -> None:
    # tests/reference/data/inositol_strain.csv: axial patterns written down by hand from the faces (computed).
    with INOSITOLS.open(encoding="utf-8", newline="") as handle:
        rows = list(csv.DictReader(handle))
    assert len(rows) == 8
    for row in rows:
        expected = tuple(sorted(necklace(row[chair]) for chair in ("chair_1", "chair_2")))
        assert chair_patterns(row["smiles"]) == expected, row["name"]


@pytest.mark.parametrize(
    ("smiles", "isomers"),
    [
        # Common practice, no source: numbers of stereoisomers, mirror images counted apart.
        pytest.param("C[C{}H]1CC[C{}H](C)CC1", 2, id="1,4-dimethyl"),
        pytest.param("C[C{}H]1C[C{}H](C)C[C{}H](C)C1", 2, id="1,3,5-trimethyl"),
        pytest.param("C[C{}H]1CCC[C{}H](C)C1", 3, id="1,3-dimethyl"),
        pytest.param("C[C{}H]1CCCC[C{}H]1C", 3, id="1,2-dimethyl"),
        pytest.param("C1CC[C{}H]2CCCC[C{}H]2C1", 2, id="decalin"),
        pytest.param("C[C{}]12CCCC[C{}H]1CCCC2", 2, id="9-methyldecalin"),
        pytest.param("C[C{}H]1CCC[C{}H]2CCCC[C{}H]12", 8, id="1-methyldecalin"),
        pytest.param("C[C{}H]1CC[C{}]2(CC1)CC[C{}H](C)CC2", 2, id="3,9-dimethylspiro[5.5]undecane"),
        pytest.param("C[C{}H]1CC[C{}](C)(O)CC1", 2, id="1,4-dimethylcyclohexanol"),
    ],
)
def test_dependent_centres_give_the_known_number_of_isomers(smiles: str, isomers: int) -> None:
    texts = [smiles.format(*signs) for signs in product(("@", "@@"), repeat=smiles.count("{}"))]
    assert len({rs.read(text).smiles for text in texts}) == isomers
    for text in texts:
        assert rs.read(rs.read(text).smiles).smiles == rs.read(text).smiles


@pytest.mark.parametrize(
    "smiles",
    [
        "C[C@H]1CC[C@H](C)CC1",
        "C[C@H]1CC[C@@H](C)CC1",
        "C[C@H]1C[C@@H](C)C[C@@H](C)C1",
        "C[C@H]1C[C@@H](C)C[C@H](C)C1",
        "C1CC[C@H]2CCCC[C@@H]2C1",
        "C[C@H]1CCC[C@]2(C1)CCC[C@@H](C)C2",
        "C[C@H]1CC[C@@]2(CC1)CC[C@@H](C)CC2",
        "C[C@H]1CC[C@]2(CC1)CC[C@@]1(CC2)CC[C@H](C)CC1",
        *(smiles for _, smiles in FIXED),
    ],
)
def test_written_SMILES_keep_the_axial_atoms(smiles: str) -> None:
    structure = rs.read(smiles)
    assert [a.number for a in structure.atoms] == [a.GetAtomicNum() for a in marked(smiles).GetAtoms()], (
        "atoms run in input order"
    )
    before, after = rs.analyze(smiles), rs.analyze(structure.smiles)
    for first, second in zip(before.ring_systems, after.ring_systems, strict=False):
        assert sorted((len(s.axial), round(s.energy_kcal, 6)) for s in first.states) == sorted(
            (len(s.axial), round(s.energy_kcal, 6)) for s in second.states
        )


@pytest.mark.parametrize(
    "smiles",
    [
        *(smiles for _, smiles in FIXED),
        "C[C@H]1CC[C@@H](C)CC1",
        "OC1CC(O)CC(C1)C1=CC=C[NH]1",
        "F/C=C/C1CCCCC1",
        "[13CH3][C@@H]1CCCC[C@H]1[2H]",
        "C[N+]1(CC)CCC[C@@H](C)C1.[Cl-]",
        "[CH3:1]C1CCCCC1",
    ],
)
def test_a_structure_is_written_alike_from_its_records_and_from_what_it_was_read_from(smiles: str) -> None:
    for text, _ in (rewritten(marked(smiles), Random(seed)) for seed in range(5)):
        structure = rs.read(text)
        for canonical in (True, False):
            assert write_smiles(structure, canonical=canonical) == write_smiles(
                replace(structure, reading=None), canonical=canonical
            )
        travelled = pickle.loads(pickle.dumps(structure))
        assert travelled == structure
        assert travelled.reading is None or not travelled.reading.fits(travelled)
        assert travelled.smiles == structure.smiles


def test_an_edited_structure_is_not_written_as_what_it_was_read_from() -> None:
    structure = rs.read("C[C@H]1CCC[C@@H](C)C1")
    assert structure.reading is not None
    assert structure.reading.fits(replace(structure, name="named"))
    turned = tuple(given and replace(given, clockwise=not given.clockwise) for given in structure.configurations)
    edited = replace(structure, configurations=(*turned[:5], *structure.configurations[5:]))
    assert edited.smiles == replace(edited, reading=None).smiles != structure.smiles


@pytest.mark.parametrize(
    "smiles", [*(smiles for _, smiles in FIXED[:3]), "C[C@H]1CCCC[C@@H]1O", "F[C@@H]1CCC[C@](C)(O)C1"]
)
def test_CIP_labels_agree_with_the_outside_program(smiles: str) -> None:
    # RDKit's CIP labels of the input and of what we write.
    def labels(text: str) -> list[str]:
        return sorted(label for _, label in Chem.FindMolChiralCenters(Chem.MolFromSmiles(text)))

    assert labels(rs.read(smiles).smiles) == labels(smiles)
    assert Chem.CanonSmiles(rs.read(smiles).smiles) == Chem.CanonSmiles(smiles)


def test_handedness_follows_the_definition_of_the_mark() -> None:
    # The SMILES rule: seen from the atom written first, @ runs anticlockwise, and a written hydrogen stands right
    # after that atom.
    structure = rs.read("N[C@H](O)C1CCCCC1")
    configuration = structure.configurations[1]
    assert configuration is not None
    assert configuration.handedness((0, -1, 2, 3)) == -1
    assert rs.read("N[C@@H](O)C1CCCCC1").configurations[1].handedness((0, -1, 2, 3)) == 1  # type: ignore[union-attr]


@pytest.mark.parametrize(
    ("plain", "other"),
    [
        pytest.param("C[C@H]1CCCC[C@@H]1O", "C[C@]1([H])CCCC[C@@]1([H])O", id="written hydrogens"),
        pytest.param("C[C@H]1CCCC[C@@H]1O", "C[13C@H]1CCCC[C@@H]1O", id="carbon-13"),
    ],
)
def test_hydrogens_and_isotopes_leave_the_axial_atoms(plain: str, other: str) -> None:
    first = [(s.axial, round(s.energy_kcal, 6)) for s in system_of(plain).states]
    assert first == [(s.axial, round(s.energy_kcal, 6)) for s in system_of(other).states]


def test_a_counter_ion_is_set_aside_with_a_note() -> None:
    analysis = rs.analyze("C[C@H]1CCC[C@@H](C([O-])=O)C1.[Na+]")
    assert len(analysis.ring_systems) == 1
    assert any("counter" in note.lower() or "fragment" in note.lower() or "Na" in note for note in analysis.notes)


def test_an_ammonium_ion_keeps_its_charge() -> None:
    structure = rs.read("[NH3+][C@H]1CC[C@@H](C)CC1")
    assert structure.atoms[0].charge == 1
    assert "+" in structure.smiles
