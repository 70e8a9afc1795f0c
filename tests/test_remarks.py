"""What an answer says beside its numbers."""

from __future__ import annotations

import pytest
import ringstrain as rs

CASES = [
    ("O=C1OCCC[C@H]1C", "nonpolar", 298.15, "lactone ring"),
    ("CC1CCC(=O)NC1", "nonpolar", 298.15, "lactam ring"),
    ("ON=C1CCCCC1C", "nonpolar", 298.15, "Geometry of the double bond"),
    ("OC(=O)C1CCCCC1", "protic", 298.15, "carboxylato"),
    ("CC1CCCCN1", "protic", 298.15, "may be protonated"),
    ("CO[C@H]1OC[C@@H](O)[C@H](O)[C@H]1O", "methanol", 298.15, "measured in water"),
    ("OC[C@H]1O[C@@H](O)[C@H](N)[C@@H](O)[C@@H]1O", "protic", 298.15, "outside the closed set"),
    ("OC1CCCCC1", "nonpolar", 400.0, "Held constant at 400 K"),
    ("O[C@H]1[C@H](O)[C@@H](O)[C@H](O)[C@H](O)[C@@H]1O", "nonpolar", 298.15, "priced one by one"),
]


@pytest.mark.parametrize(("smiles", "medium", "kelvin", "words"), CASES, ids=[case[3] for case in CASES])
def test_the_reader_is_told(smiles: str, medium: str, kelvin: float, words: str) -> None:
    notes = rs.analyze(smiles, medium=medium, temperature_K=kelvin).notes
    assert sum(words in note for note in notes) == 1


@pytest.mark.parametrize(
    ("smiles", "medium"),
    [
        ("CC1CCCCC1", "protic"),
        (r"C[C@H]1CCCC/C1=N\O", "nonpolar"),
        ("ON=C1CCCCC1", "nonpolar"),
        ("OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O", "protic"),
        ("C[NH+]1CCCCC1", "protic"),
    ],
)
def test_nothing_is_said_without_need(smiles: str, medium: str) -> None:
    assert rs.analyze(smiles, medium=medium).notes == ()


def test_the_limits_of_two_shares_are_those_of_K() -> None:
    system = rs.analyze("1b-OMe 2a-OMe").ring_systems[0]
    equilibrium = system.equilibrium
    first, second = system.states
    assert equilibrium is not None
    assert first.population_low is not None
    assert second.population_high is not None
    low, high = first.population_low, second.population_high
    assert low + high == pytest.approx(1.0)
    assert low / high == pytest.approx(equilibrium.K_low, rel=0.05)


def test_a_group_without_an_A_value_gives_no_winner() -> None:
    equilibrium = rs.analyze("O=S1OCCCO1").ring_systems[0].equilibrium
    assert equilibrium is not None
    assert equilibrium.bound == "not determined"
    assert equilibrium.K is None


def test_an_oxime_that_points_at_a_methyl_makes_it_axial() -> None:
    """A(1,3) strain, common practice, no source: the syn oxime of a 2-alkylcyclohexanone has its alkyl axial."""
    syn = rs.analyze(r"C[C@H]1CCCC/C1=N/O").ring_systems[0].states[0]
    anti = rs.analyze(r"C[C@H]1CCCC/C1=N\O").ring_systems[0].states[0]
    assert syn.axial == (0,)
    assert anti.axial == ()
