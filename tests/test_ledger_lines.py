"""Ledger lines: the worked sums of the trade, sources on every line, nothing unpriced in silence."""

from __future__ import annotations

import pytest
import ringstrain as rs
from ringstrain.analysis import State
from ringstrain.tables.prices import price_book

TABLES = rs.load_tables()
HYDROCARBONS = ("CC1CCCCC1", "C[C@H]1CCC[C@@H](C)C1", "C1CC[C@H]2CCCC[C@H]2C1", "C[C@@]12CCCC[C@H]1CCCC2")
ALCOHOLS = ("O[C@H]1CCCC[C@@H]1C", "O[C@H]1CCC[C@@H](O)C1", "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O")


def states(smiles: str, **conditions: object) -> tuple[State, ...]:
    (system,) = rs.analyze(smiles, **conditions).ring_systems  # type: ignore[arg-type]
    return system.states


@pytest.mark.parametrize("smiles", HYDROCARBONS + ALCOHOLS)
def test_every_priced_line_names_its_source_and_how_it_is_known(smiles: str) -> None:
    for state in states(smiles):
        for line in state.lines:
            assert line.value_kcal is not None
            assert line.source, line
            assert line.row, line
            assert line.known_by in ("read", "recalled", "computed", "common practice")
            assert line.uncertainty_kcal > 0.0 or line.value_kcal == 0.0, line


def test_cis_1_3_dimethyl_diaxial_is_two_A_values_and_one_syn_axial_term() -> None:
    # N. L. Allinger, M. A. Miller, J. Am. Chem. Soc. 1961, 83, 2145 (recalled): methyl//methyl 3.7, less one A-value.
    high = next(s for s in states("C[C@H]1CCC[C@@H](C)C1") if s.axial == (0, 6) and set(s.shapes) == {"chair"})
    terms = {line.rule: (line.count, line.value_kcal) for line in high.lines}
    assert terms["A-value"][0] == 2
    assert terms["A-value"][1] == pytest.approx(1.74, abs=0.06)
    assert terms["syn-axial"][0] == 1
    assert terms["syn-axial"][1] == pytest.approx(3.7 - 1.74, abs=0.1)
    assert len(terms) == 2


def test_a_lone_axial_group_is_one_line_of_one_A_value() -> None:
    (line,) = next(s for s in states("CC1CCCCC1") if s.axial).lines
    assert (line.rule, line.groups, line.count, line.atoms) == ("A-value", ("methyl",), 1, ((0,),))
    assert sorted(len(contact.atoms) for contact in line.covers) == [4, 4]


def test_a_contact_without_a_price_is_a_bound_and_strict_refuses_it() -> None:
    text = "C[Bi](C)C1CCCCC1"  # no table has a group like this
    found = states(text)
    unknown = [s for s in found if s.lower_bound]
    assert unknown
    assert all(any(line.value_kcal is None for line in s.lines) for s in unknown)
    assert all(s.population is None for s in found)
    with pytest.raises(rs.MissingValue):
        rs.analyze(text, strict=True)


@pytest.mark.parametrize("temperature_K", [200.0, 298.15, 400.0])
def test_populations_follow_the_Boltzmann_law(temperature_K: float) -> None:
    # R = 1.98720426e-3 kcal/(mol K), CODATA 2018.
    import math

    low, high = states("CC1CCCCC1", temperature_K=temperature_K)
    assert low.population is not None
    assert high.population is not None
    gap = high.energy_kcal - low.energy_kcal
    assert low.population / high.population == pytest.approx(math.exp(gap / (1.98720426e-3 * temperature_K)), rel=1e-6)


def test_geminal_like_groups_have_two_equal_chairs() -> None:
    first, second = states("CC1(C)CCCCC1")[:2]
    assert first.energy_kcal == pytest.approx(second.energy_kcal)
    assert second.equivalent_to == first.id


def test_what_was_asked_before_does_not_change_a_price() -> None:
    """Butylamino and methyl(propyl)amino share class and formula, but only one has a hydrogen to give."""
    pair = ("F[C@@H]1CCCC[C@H]1NCCCC", "F[C@@H]1CCCC[C@H]1N(C)CCC")

    def energies(order: tuple[str, ...]) -> dict[str, list[float]]:
        price_book.cache_clear()
        return {smiles: [state.energy_kcal for state in states(smiles)] for smiles in order}

    first, second = energies(pair), energies(pair[::-1])
    assert first == second
    assert first[pair[0]] != first[pair[1]]
