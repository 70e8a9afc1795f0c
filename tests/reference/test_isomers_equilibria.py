"""Diastereomer equilibria of the ranking against published free energies; sources beside each value."""

from __future__ import annotations

import math

import pytest
import ringstrain as rs
from rdkit import Chem
from ringstrain.ranking import Isomer, Ranking

R_KCAL = 1.987204e-3  # gas constant [kcal/mol/K]


def key(smiles: str) -> str:
    """Canonical SMILES, the same for mirror images."""
    mirror = smiles.replace("@@", "\0").replace("@", "@@").replace("\0", "@")
    return str(min(Chem.CanonSmiles(smiles), Chem.CanonSmiles(mirror)))


def entry(ranking: Ranking, smiles: str) -> Isomer:
    """The entry of a diastereomer or its mirror image."""
    (found,) = [isomer for isomer in ranking.isomers if key(isomer.smiles) == key(smiles)]
    return found


def above(less: str, more: str, temperature_K: float, medium: str = "gas") -> tuple[float, float]:
    """Free energy of one diastereomer above another [kcal/mol], statistics included, with its uncertainty."""
    ranking = rs.rank_isomers(less, temperature_K=temperature_K, medium=medium)
    first, second = entry(ranking, less), entry(ranking, more)
    return first.dG_kcal - second.dG_kcal, max(first.uncertainty_kcal, second.uncertainty_kcal)


CIS_12, TRANS_12 = "C[C@@H]1CCCC[C@@H]1C", "C[C@@H]1CCCC[C@H]1C"
CIS_13, TRANS_13 = "C[C@@H]1CCC[C@H](C)C1", "C[C@@H]1CCC[C@@H](C)C1"
CIS_14, TRANS_14 = "C[C@H]1CC[C@@H](C)CC1", "C[C@H]1CC[C@H](C)CC1"
CIS_DECALIN, TRANS_DECALIN = "C1CC[C@H]2CCCC[C@H]2C1", "C1CC[C@H]2CCCC[C@@H]2C1"


@pytest.mark.parametrize(
    ("less", "more", "temperature_K", "measured", "tolerance"),
    [
        # Frenkel, Marsh, Wilhoit, Kabo, Roganov, Thermodynamics of Organic Compounds in the Gas State, 1994: gas
        # entropies with enthalpies of formation (computed from them; racemates as racemates).
        pytest.param(CIS_12, TRANS_12, 298.15, 1.65, 0.6, id="1,2-dimethyl, 298 K"),
        pytest.param(CIS_12, TRANS_12, 500.0, 1.57, 0.6, id="1,2-dimethyl, 500 K"),
        pytest.param(TRANS_13, CIS_13, 298.15, 1.63, 0.6, id="1,3-dimethyl, 298 K"),
        pytest.param(TRANS_13, CIS_13, 500.0, 1.42, 0.6, id="1,3-dimethyl, 500 K"),
        pytest.param(CIS_14, TRANS_14, 298.15, 1.56, 0.6, id="1,4-dimethyl, 298 K"),
        pytest.param(CIS_14, TRANS_14, 500.0, 1.36, 0.6, id="1,4-dimethyl, 500 K"),
        pytest.param(CIS_DECALIN, TRANS_DECALIN, 298.15, 2.72, 0.8, id="decalin, 298 K"),
        pytest.param(CIS_DECALIN, TRANS_DECALIN, 600.0, 2.36, 0.8, id="decalin, 600 K"),
    ],
)
def test_free_energy_from_gas_entropies(
    less: str, more: str, temperature_K: float, measured: float, tolerance: float
) -> None:
    assert above(less, more, temperature_K)[0] == pytest.approx(measured, abs=tolerance)


def test_liquid_decalin() -> None:
    # CRC Handbook 2014: enthalpies and entropies of the liquids; cis above trans by 2.67 +- 0.4 at 298 K.
    assert above(CIS_DECALIN, TRANS_DECALIN, 298.15, "nonpolar")[0] == pytest.approx(2.67, abs=0.4)


@pytest.mark.parametrize(
    ("less", "more", "statistics_R_ln"),
    [
        # Symmetry numbers and mixing of the trade: the pure energy difference less RT ln of this.
        # cis-1,2: two chairs, a pair of conformational enantiomers; trans-1,2 racemic, sigma 2: equal but for ee/aa.
        pytest.param(TRANS_13, CIS_13, 2.0, id="1,3: racemic trans with sigma 1 against meso cis with sigma 1"),
        pytest.param(CIS_14, TRANS_14, 2.0, id="1,4: cis with two chairs against trans with sigma 2"),
        pytest.param(CIS_DECALIN, TRANS_DECALIN, 2.0, id="decalin: cis a racemising pair, sigma 2, trans sigma 2"),
    ],
)
def test_statistics_are_those_of_symmetry_numbers(less: str, more: str, statistics_R_ln: float) -> None:
    # E. L. Eliel, S. H. Wilen, Stereochemistry of Organic Compounds, 1994, chapter 11 (recalled): entropies of the
    # dimethylcyclohexanes from symmetry numbers and mixing; R ln 2 between the isomers of each of these pairs.
    energies = {smiles: rs.analyze(smiles).ring_systems[0].states[0].energy_kcal for smiles in (less, more)}
    for temperature_K in (200.0, 298.15):
        rt = R_KCAL * temperature_K
        difference, _ = above(less, more, temperature_K, "nonpolar")
        plain = energies[less] - energies[more]
        # The upper chairs of the stable isomer weigh less than this.
        assert difference == pytest.approx(plain - rt * math.log(statistics_R_ln), abs=0.05)


@pytest.mark.parametrize(
    ("less", "more", "temperature_K", "medium", "ratio", "uncertainty"),
    [
        # E. L. Eliel, Ro, J. Am. Chem. Soc. 1957, 79, 5992 (recalled).
        pytest.param(
            "CC(C)(C)[C@H]1CC[C@@H](O)CC1",
            "CC(C)(C)[C@H]1CC[C@H](O)CC1",
            362.0,
            "2-propanol",
            3.76,
            0.2,
            id="4-tert-butylcyclohexanol",
        ),
        # Etzold, Jess, Nobis, Catal. Today 2009, 140, 30 (recalled): menthols over a catalyst.
        pytest.param(
            "CC(C)[C@@H]1CC[C@@H](C)C[C@@H]1O",
            "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O",
            450.0,
            "protic",
            1 / 0.42,
            0.34,
            id="neomenthol against menthol",
        ),
        pytest.param(
            "CC(C)[C@H]1CC[C@@H](C)C[C@@H]1O",
            "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O",
            450.0,
            "protic",
            1 / 0.19,
            0.9,
            id="isomenthol against menthol",
        ),
        # Turner, Seymour, Dombroski, Macromolecules 2000, 33, 1708 (recalled): polyester melt.
        pytest.param(
            "COC(=O)[C@H]1CC[C@@H](C(=O)OC)CC1",
            "COC(=O)[C@H]1CC[C@H](C(=O)OC)CC1",
            550.0,
            "nonpolar",
            1.86,
            0.15,
            id="cyclohexane-1,4-dicarboxylate",
        ),
        # Value of a reference work, source not traced (recalled): menthone to isomenthone 71:29.
        pytest.param(
            "CC(C)[C@@H]1CC[C@H](C)CC1=O",
            "CC(C)[C@@H]1CC[C@@H](C)CC1=O",
            298.0,
            "nonpolar",
            1 / 0.41,
            0.3,
            id="isomenthone against menthone",
        ),
    ],
)
def test_epimer_ratio_is_predicted_within_the_stated_uncertainty(
    less: str, more: str, temperature_K: float, medium: str, ratio: float, uncertainty: float
) -> None:
    ranking = rs.rank_isomers(less, temperature_K=temperature_K, medium=medium)
    first, second = entry(ranking, less), entry(ranking, more)
    rt = R_KCAL * temperature_K
    sigma = math.hypot(max(first.uncertainty_kcal, second.uncertainty_kcal), rt * uncertainty / ratio)
    assert first.dG_kcal - second.dG_kcal == pytest.approx(rt * math.log(ratio), abs=1.96 * sigma)
    assert first.dG_kcal > second.dG_kcal


@pytest.mark.parametrize(
    ("smiles", "best"),
    [
        # Common practice, no source: every group equatorial, ring fusion trans.
        pytest.param("CC1CCC(C(C)C)C(O)C1", "C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1", id="menthol"),
        pytest.param("CC1CCCC(C)C1", CIS_13, id="cis-1,3"),
        pytest.param("CC1CCCCC1C", TRANS_12, id="trans-1,2"),
        pytest.param("C1CCC2CCCCC2C1", TRANS_DECALIN, id="trans-decalin"),
    ],
)
def test_most_stable_isomer(smiles: str, best: str) -> None:
    found = rs.rank_isomers(smiles).isomers[0]
    assert key(found.smiles) == key(best)
    assert found.favoured_axial == ()


def test_most_stable_perhydroanthracene_is_locked_without_a_gauche_path() -> None:
    # Common practice, no source: trans-syn-trans, the only isomer free of gauche-butanes.
    found = rs.rank_isomers("C1CCC2CC3CCCCC3CC2C1").isomers[0]
    system = rs.analyze(found.smiles).ring_systems[0]
    assert system.locked
    assert dict(system.states[0].counts)["gauche"] == 0


def test_share_follows_from_the_free_energies() -> None:
    ranking = rs.rank_isomers("CC1CCC(C)C(C)C1", temperature_K=350.0)
    weights = [math.exp(-isomer.dG_kcal / R_KCAL / 350.0) for isomer in ranking.isomers]
    for isomer, weight in zip(ranking.isomers, weights, strict=True):
        assert isomer.share == pytest.approx(weight / sum(weights), abs=1e-6)
