"""What every chemist knows of particular rings; facts without a value, each with where it is known from."""

from __future__ import annotations

import pytest
import ringstrain as rs
from ringstrain.analysis import SystemResult
from ringstrain.errors import OutOfScope

TESTOSTERONE = "C[C@]12CC[C@H]3[C@@H](CCC4=CC(=O)CC[C@]34C)[C@@H]1CC[C@@H]2O"
CORTISONE = "C[C@]12CC(=O)[C@H]3[C@@H](CCC4=CC(=O)CC[C@]34C)[C@@H]1CC[C@]2(O)C(=O)CO"


def only(smiles: str, **conditions: object) -> SystemResult:
    """The only ring system of a structure."""
    (system,) = rs.analyze(smiles, **conditions).ring_systems  # type: ignore[arg-type]
    return system


def test_lindane_is_a_chair_with_three_axial_chlorines() -> None:
    # X-ray structure of gamma-hexachlorocyclohexane, aaaeee (recalled).
    favoured = only("Cl[C@H]1[C@H](Cl)[C@@H](Cl)[C@@H](Cl)[C@H](Cl)[C@H]1Cl").states[0]
    assert favoured.shapes == ("chair",)
    assert len(favoured.axial) == 3


def test_perfluorocyclohexane_is_a_chair() -> None:
    # Gas-phase electron diffraction (recalled).
    favoured = only("FC1(F)C(F)(F)C(F)(F)C(F)(F)C(F)(F)C1(F)F").states[0]
    assert favoured.shapes == ("chair",)


def test_cyclohexane_1_4_dione_is_a_twist_boat() -> None:
    # X-ray structure and dipole moment (recalled).
    assert only("O=C1CCC(=O)CC1").states[0].shapes == ("twist-boat",)


@pytest.mark.parametrize(
    "smiles",
    [
        # Common practice, no source: none of these can exist or is a closed shell.
        pytest.param("C[C]1CCCCC1", id="radical"),
        pytest.param("C1CCC#CC1", id="triple bond"),
        pytest.param("C1CC/C=C/C1", id="trans double bond"),
        pytest.param("C1CC[C@@H]2O[C@H]2C1", id="trans-fused epoxide"),
    ],
)
def test_a_ring_that_cannot_be_is_refused(smiles: str) -> None:
    with pytest.raises(OutOfScope):
        rs.analyze(smiles)


@pytest.mark.parametrize(
    "smiles",
    [
        pytest.param("C1CCC2OC2C1", id="cyclohexene oxide"),
        pytest.param("C1CCC2CC2C1", id="norcarane"),
        pytest.param("C1CCC2NC2C1", id="aziridine"),
    ],
)
def test_a_three_ring_needs_no_marks(smiles: str) -> None:
    # Common practice, no source: only cis fusion exists; two mirror-image half-chairs.
    system = only(smiles)
    assert {state.shapes for state in system.states} == {("half-chair",)}
    assert system.equilibrium is not None
    assert pytest.approx(1.0) == system.equilibrium.K


@pytest.mark.parametrize(
    "smiles",
    [
        pytest.param("C1CN2CCC1CC2", id="quinuclidine"),
        pytest.param("C1CN2CCN1CC2", id="DABCO"),
        pytest.param("C1N2CN3CN1CN(C2)C3", id="urotropine"),
        pytest.param("C1C2CC3CC1CC(C2)C3", id="adamantane"),
    ],
)
def test_a_cage_is_locked(smiles: str) -> None:
    # Common practice, no source: its bridgehead nitrogens cannot invert.
    system = only(smiles)
    assert system.locked
    assert len(system.states) == 1


def test_tropane_carries_its_methyl_equatorial_and_tropine_its_hydroxyl_axial() -> None:
    # Common practice, no source: equatorial with respect to the piperidine ring; tropine is the 3alpha alcohol.
    assert only("CN1[C@@H]2CC[C@H]1CCC2").states[0].nitrogen == ((1, "equatorial"),)
    epimers = [only(f"CN1[C@@H]2CC[C@H]1C[C@{mark}H](O)C2").states[0] for mark in ("", "@")]
    axial = [8 in state.axial for state in epimers]
    assert sorted(axial) == [False, True]
    # Pseudotropine, equatorial, is the more stable one (equilibration with alkoxide, recalled).
    assert epimers[axial.index(False)].energy_kcal < epimers[axial.index(True)].energy_kcal


def test_estradiol_is_locked_with_the_angular_methyl_axial() -> None:
    # Common practice, no source.
    system = only("C[C@]12CC[C@H]3[C@@H](CCc4cc(O)ccc34)[C@@H]1CC[C@@H]2O")
    assert system.locked
    assert 0 in system.states[0].axial


@pytest.mark.parametrize(("smiles", "methyl"), [(TESTOSTERONE, 15), (CORTISONE, 16)], ids=["testosterone", "cortisone"])
def test_a_4_en_3_one_keeps_c19_axial_to_both_rings(smiles: str, methyl: int) -> None:
    # Crystal structures: normal 1alpha,2beta half-chair, C19 axial to rings A and B (recalled); MMFF94 puts it lower by
    # about 3 kcal/mol.
    favoured = only(smiles).states[0]
    assert methyl in favoured.axial
    assert methyl not in favoured.equatorial


def test_pseudoaxial_is_preferred_beside_a_planar_nitrogen() -> None:
    # F. Johnson, Chem. Rev. 1968 (recalled): A(1,3) strain turns a 2-substituent of an N-acylpiperidine axial.
    for smiles, atom in (("C[C@H]1CCCCN1C(C)=O", 0), ("c1ccc(cc1)[C@H]1CCCCN1C(C)=O", 3)):
        assert atom in only(smiles).states[0].axial


def test_cyclophosphamide_has_no_allylic_strain() -> None:
    # Common practice, no source: the ring nitrogen carries hydrogen, and phosphorus is no amide.
    lines = [line for state in only("ClCCN(CCCl)P1(=O)NCCCO1").states for line in state.lines]
    assert all(line.value_kcal is None or line.value_kcal > -1.0 for line in lines)


@pytest.mark.parametrize(
    ("smiles", "axial"),
    [
        # Common practice, no source.
        pytest.param("OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O", (), id="beta-glucose: all equatorial"),
        pytest.param("C[C@@H]1CC[C@H]([C@@H](C1)O)C(C)C", (), id="menthol"),
        pytest.param("C[C@H]1COC[C@@H](C)N1", (), id="cis-3,5-dimethylmorpholine"),
        pytest.param("CO[C@H]1O[C@@H]2CO[C@H](O[C@H]2[C@H](O)[C@H]1O)c1ccccc1", (1,), id="benzylidene glucoside"),
    ],
)
def test_favoured_chair(smiles: str, axial: tuple[int, ...]) -> None:
    assert only(smiles).states[0].axial == axial
