"""Known spectra of epimers: the right isomer is found from its couplings."""

from __future__ import annotations

import pytest
from ringstrain.consequences.assign import assign
from ringstrain.consequences.observations import parse_observed
from ringstrain.structure.read import read

TBU_TRANS, TBU_CIS = "CC(C)(C)[C@H]1CC[C@H](O)CC1", "CC(C)(C)[C@H]1CC[C@@H](O)CC1"
ALPHA_GLC, BETA_GLC = "OC[C@H]1O[C@H](O)[C@H](O)[C@@H](O)[C@@H]1O", "OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O"
ALPHA_GAL, BETA_GAL = "OC[C@H]1O[C@H](O)[C@H](O)[C@@H](O)[C@H]1O", "OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@H]1O"
ALPHA_MAN, BETA_MAN = "OC[C@H]1O[C@H](O)[C@@H](O)[C@@H](O)[C@@H]1O", "OC[C@H]1O[C@@H](O)[C@@H](O)[C@@H](O)[C@@H]1O"
#: Observed couplings by isomer. tert-Butylcyclohexanols: Anet, J. Am. Chem. Soc. 1962, 84, 1053 and routine values,
#: recalled. Glucose: Dashti et al., Anal. Chem. 2017, 89, 12201. Galactose, mannose: Bock, Thogersen, Annu. Rep. NMR
#: Spectrosc. 1982, 13, 1, rounded table, recalled.
OBSERVED = {
    TBU_TRANS: "H8=10.9,10.9,4.3,4.3",
    TBU_CIS: "H8=2.8,2.8,2.8,2.8",
    ALPHA_GLC: "H5=3.9; H7=9.7,3.9; H9=9.8,9.7; H11=9.8,9.3",
    BETA_GLC: "H5=8.1; H7=9.5,8.1; H9=9.5,9.1; H11=9.9,9.1",
    ALPHA_GAL: "H5=3.8; H7=10.0,3.8; H9=10.0,3.8; H11=3.8,1.0",
    BETA_GAL: "H5=8.0; H7=10.0,8.0; H9=10.0,3.8; H11=3.8,1.0",
    ALPHA_MAN: "H5=1.8; H7=3.8,1.8; H9=10.0,3.8; H11=10.0,9.8",
    BETA_MAN: "H5=1.5; H7=3.8,1.5; H9=10.0,3.8; H11=10.0,9.8",
}
PAIRS = {
    "tert-butylcyclohexanols": (TBU_TRANS, TBU_CIS),
    "glucose anomers": (ALPHA_GLC, BETA_GLC),
    "galactose anomers": (ALPHA_GAL, BETA_GAL),
    "glucose and galactose": (BETA_GLC, BETA_GAL),
    "glucose and mannose": (BETA_GLC, BETA_MAN),
    "alpha-glucose and alpha-mannose": (ALPHA_GLC, ALPHA_MAN),
}


def medium_of(smiles: str) -> str:
    return "water" if smiles.startswith("OC") else "chloroform"


@pytest.mark.parametrize("pair", PAIRS)
def test_each_of_two_epimers_is_told_from_the_other(pair: str) -> None:
    """Sources at OBSERVED."""
    for right in PAIRS[pair]:
        rivals = tuple(read(smiles) for smiles in PAIRS[pair])
        answer = assign(read(right), parse_observed(OBSERVED[right]), candidates=rivals, medium=medium_of(right))
        assert answer.candidates[0].smiles == read(right).smiles
        assert answer.verdict == "decided"


def test_mannose_anomers_are_not_told_apart_by_couplings() -> None:
    """1.8 and 1.5 Hz (Bock, Thogersen 1982, recalled) differ by less than the equation's error."""
    rivals = (read(ALPHA_MAN), read(BETA_MAN))
    answer = assign(read(ALPHA_MAN), parse_observed(OBSERVED[ALPHA_MAN]), candidates=rivals, medium="water")
    assert answer.verdict == "not decided"
    assert answer.odds is not None
    assert answer.odds < 20
    assert answer.next_proton is None


@pytest.mark.parametrize("right", [ALPHA_GLC, BETA_GLC, ALPHA_GAL, BETA_GAL])
def test_a_sugar_is_picked_out_of_all_its_diastereomers(right: str) -> None:
    """Sources at OBSERVED; sixteen aldohexopyranoses, enantiomers as one."""
    answer = assign(read(right), parse_observed(OBSERVED[right]), medium="water")
    assert len(answer.candidates) == 16
    best = read(answer.candidates[0].smiles)
    mirrored = {read(right).smiles, read(right.replace("@@", "%").replace("@", "@@").replace("%", "@")).smiles}
    assert best.smiles in mirrored


def test_menthol_is_told_from_the_isomer_with_an_axial_hydroxyl() -> None:
    """Routine values of (-)-menthol, H-1 td 10.4, 4.3 Hz (recalled)."""
    menthol, neomenthol = "O[C@@H]1C[C@H](C)CC[C@H]1C(C)C", "O[C@H]1C[C@H](C)CC[C@H]1C(C)C"
    answer = assign(
        read(menthol),
        parse_observed("H2=td 10.4,4.3"),
        candidates=(read(menthol), read(neomenthol)),
        medium="chloroform",
    )
    assert answer.candidates[0].smiles == read(menthol).smiles
    assert answer.verdict == "decided"


def test_a_candidate_may_be_written_in_another_order() -> None:
    """Sources at OBSERVED: trans-4-tert-butylcyclohexanol."""
    rivals = (read("O[C@H]1CC[C@H](C(C)(C)C)CC1"), read("O[C@H]1CC[C@@H](C(C)(C)C)CC1"))
    answer = assign(read(TBU_TRANS), parse_observed(OBSERVED[TBU_TRANS]), candidates=rivals, medium="chloroform")
    assert answer.candidates[0].smiles == read(TBU_TRANS).smiles
