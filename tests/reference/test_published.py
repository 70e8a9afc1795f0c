"""Published energies of carbocycles; the source stands beside each value, the tolerance is the stated uncertainty.

Where a source states no uncertainty the tolerance is 0.15 kcal/mol.
"""

from __future__ import annotations

import csv
import re
from pathlib import Path

import pytest
import ringstrain as rs
from ringstrain.analysis import State, SystemResult

DATA = Path(__file__).parent / "data"
DEFAULT_TOLERANCE_KCAL = 0.15


def system_of(smiles: str, **conditions: object) -> SystemResult:
    """The only ring system of a structure."""
    (system,) = rs.analyze(smiles, **conditions).ring_systems  # type: ignore[arg-type]
    return system


def chairs(system: SystemResult) -> list[State]:
    """States of chairs only, lowest first."""
    return [state for state in system.states if set(state.shapes) == {"chair"}]


def gap(smiles: str) -> float:
    """Upper chair less lower chair [kcal/mol]."""
    low, high = chairs(system_of(smiles))
    return high.energy_kcal - low.energy_kcal


def count(state: State, name: str) -> int:
    """Number of contacts of one kind."""
    return dict(state.counts)[name]


def test_methylcyclohexane_prefers_equatorial_by_its_A_value() -> None:
    # H. Booth, J. R. Everett, J. Chem. Soc., Perkin Trans. 2 1980, 255: 1.74 +- 0.06 kcal/mol.
    system = system_of("CC1CCCCC1")
    assert system.equilibrium is not None
    assert system.equilibrium.dG_kcal == pytest.approx(1.74, abs=0.06)


def test_methylcyclohexane_is_95_to_5_at_room_temperature() -> None:
    # Common textbook statement, no source: 95 % equatorial at 298 K.
    system = system_of("CC1CCCCC1", temperature_K=298.15)
    shares = {state.axial: state.population for state in chairs(system)}
    assert shares[()] == pytest.approx(0.95, abs=0.005)
    assert shares[(0,)] == pytest.approx(0.05, abs=0.005)


def test_cis_1_3_dimethylcyclohexane_diaxial_costs_5_44() -> None:
    # N. L. Allinger, M. A. Miller, J. Am. Chem. Soc. 1961, 83, 2145: methyl//methyl 3.7; two A-values of 1.74, each
    # less one methyl//hydrogen of 0.87 (recalled).
    assert gap("C[C@H]1CCC[C@@H](C)C1") == pytest.approx(2 * 1.74 + 3.7 - 2 * 0.87, abs=0.15)


@pytest.mark.parametrize(
    ("smiles", "expected"),
    [
        pytest.param("C[C@H]1CC[C@H](C)CC1", 3.48, id="trans-1,4: two A-values"),
        pytest.param("C[C@H]1CC[C@@H](C)CC1", 0.0, id="cis-1,4: two like chairs"),
        pytest.param("C[C@H]1CCC[C@H](C)C1", 0.0, id="trans-1,3: two like chairs"),
        pytest.param("C[C@H]1CCCC[C@H]1C", 0.0, id="cis-1,2: two like chairs"),
        pytest.param("C[C@H]1CCCC[C@@H]1C", 3.48 - 0.9, id="trans-1,2: four gauche paths against one"),
    ],
)
def test_chairs_of_the_dimethylcyclohexanes(smiles: str, expected: float) -> None:
    # E. L. Eliel, S. H. Wilen, Stereochemistry of Organic Compounds, 1994, chapter 11 (recalled): sums of gauche terms.
    assert gap(smiles) == pytest.approx(expected, abs=DEFAULT_TOLERANCE_KCAL)


def test_cis_decalin_lies_2_7_above_trans_decalin() -> None:
    # N. L. Allinger, J. L. Coke, J. Am. Chem. Soc. 1959, 81, 4080: 2.72 +- 0.2 kcal/mol in the liquid (recalled).
    cis, trans = system_of("C1CC[C@H]2CCCC[C@H]2C1"), system_of("C1CC[C@H]2CCCC[C@@H]2C1")
    assert cis.states[0].energy_kcal - trans.states[0].energy_kcal == pytest.approx(2.72, abs=0.2)
    # Common practice, no source: three gauche-butanes of 0.9 against none.
    assert [count(state, "gauche") for state in chairs(cis)] == [3, 3]
    assert [count(state, "gauche") for state in chairs(trans)] == [0]
    assert trans.locked
    assert cis.equilibrium is not None
    assert pytest.approx(1.0) == cis.equilibrium.K


def test_gauche_butane_costs_0_9() -> None:
    # Common practice, no source.
    (line,) = system_of("C1CC[C@H]2CCCC[C@H]2C1").states[0].lines
    assert (line.rule, line.count) == ("ring fusion gauche", 3)
    assert line.value_kcal == pytest.approx(0.9, abs=0.05)


def test_9_methyldecalins_cost_3_48_and_4_44() -> None:
    # Sums of the trade: four methyl paths of 0.87 in the trans isomer, two and three gauche-butanes of 0.9 in the cis.
    trans, cis = system_of("C[C@@]12CCCC[C@H]1CCCC2"), system_of("C[C@]12CCCC[C@H]1CCCC2")
    if len(chairs(trans)) == 2:
        trans, cis = cis, trans
    assert [count(s, "gauche") for s in chairs(trans)] == [4]
    assert [count(s, "gauche") for s in chairs(cis)] == [5, 5]
    assert chairs(trans)[0].energy_kcal == pytest.approx(3.48, abs=0.06)
    assert chairs(cis)[0].energy_kcal == pytest.approx(4.44, abs=0.06)


def test_triaxial_trimethylcyclohexane_costs_11_1() -> None:
    # Three methyl//methyl contacts of 3.7 (Allinger and Miller 1961, recalled); every methyl//hydrogen share is gone.
    system = system_of("C[C@H]1C[C@@H](C)C[C@@H](C)C1")
    low, high = chairs(system)
    assert (low.axial, count(high, "syn_axial_XY"), count(high, "syn_axial_XH")) == ((), 3, 0)
    assert high.energy_kcal - low.energy_kcal == pytest.approx(11.1, abs=0.15)


def test_spiro_undecane_has_four_gauche_paths_in_every_state() -> None:
    # Common practice, no source: the spiro atom makes each ring an axial and an equatorial substituent of the other.
    states = chairs(system_of("C1CCC2(CC1)CCCCC2"))
    assert len(states) == 4
    assert {count(state, "gauche") for state in states} == {4}


def test_trans_anti_trans_perhydrophenanthrene_has_one_gauche_path() -> None:
    # Common practice, no source: it is the most stable isomer, with one gauche-butane across the bay.
    lowest = []
    for a in ("@", "@@"):
        for b in ("@", "@@"):
            for c in ("@", "@@"):
                text = f"C1CC[C@H]2[C{a}H](C1)CC[C{b}H]1CCCC[C{c}H]21"
                try:
                    states = chairs(system_of(text))
                except rs.OutOfScope:
                    continue
                if states:
                    lowest.append((count(states[0], "gauche"), len(states), states[0].energy_kcal))
    assert min(lowest)[:2] == (1, 1)
    assert min(lowest)[2] == pytest.approx(0.9, abs=0.05)
    assert sorted(energy for _, _, energy in lowest)[0] == min(lowest)[2]


def test_trans_anti_trans_perhydroanthracene_has_no_gauche_path() -> None:
    # Common practice, no source.
    found: list[tuple[int, int]] = []
    for a in ("@", "@@"):
        for b in ("@", "@@"):
            for c in ("@", "@@"):
                text = f"C1CC[C@H]2C[C{a}H]3CCCC[C{b}H]3C[C{c}H]2C1"
                try:
                    states = chairs(system_of(text))
                except rs.OutOfScope:
                    continue
                found.extend((count(state, "gauche"), len(states)) for state in states)
    assert min(found) == (0, 1)


def checks(*questions: str) -> list[object]:
    """Rows of the check values on carbocycles without polar groups."""
    with (DATA / "checks.csv").open(encoding="utf-8", newline="") as handle:
        rows = [row for row in csv.DictReader(handle) if re.fullmatch(r"[CH@\[\]()0-9]+", row["smiles"])]
    return [pytest.param(row, id=row["id"]) for row in rows if re.match("|".join(questions), row["question"])]


def tolerance(row: dict[str, str]) -> float:
    """Stated uncertainty of a row [kcal/mol], or the default."""
    return float(row["uncertainty"]) if row["uncertainty"] else DEFAULT_TOLERANCE_KCAL


@pytest.mark.parametrize("row", checks("energy of"))
def test_check_values_of_single_chairs(row: dict[str, str]) -> None:
    assert chairs(system_of(row["smiles"]))[0].energy_kcal == pytest.approx(float(row["expected"]), abs=tolerance(row))


@pytest.mark.parametrize("row", checks(r"E\("))
def test_check_values_of_chair_pairs(row: dict[str, str]) -> None:
    low, high = chairs(system_of(row["smiles"]))[0], chairs(system_of(row["smiles"]))[-1]
    assert high.energy_kcal - low.energy_kcal == pytest.approx(float(row["expected"]), abs=tolerance(row))


PARTNERS = {
    "w32": "C1CC[C@H]2CCCC[C@@H]2C1",
    "w34": "C[C@H]1CC[C@H](C)CC1",
    "w35": "C[C@H]1CCC[C@@H](C)C1",
    "w36": "C[C@H]1CCCC[C@@H]1C",
}


@pytest.mark.parametrize("row", checks(r"H\("))
def test_check_values_of_diastereomers(row: dict[str, str]) -> None:
    less, more = chairs(system_of(row["smiles"]))[0], chairs(system_of(PARTNERS[row["id"]]))[0]
    assert less.energy_kcal - more.energy_kcal == pytest.approx(float(row["expected"]), abs=tolerance(row))


def test_every_hydrocarbon_row_of_the_check_values_is_used() -> None:
    used = len(checks("energy of")) + len(checks(r"E\(")) + len(checks(r"H\("))
    assert used == len(checks("")) - 2  # w18 is about a twist-boat, w33 is the reference of w32
