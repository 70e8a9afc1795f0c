"""Scoring of published equilibria: conversions, statistics, orientation, bookkeeping, accuracy."""

from __future__ import annotations

import csv
import math
import pickle
from collections import Counter
from dataclasses import replace
from functools import cache

import pytest
from ringstrain.analysis import analyze
from ringstrain.tables import load_tables
from ringstrain.tables.reader import tables_folder
from ringstrain.units import R_KCAL
from ringstrain.validation.orientation import matching_states, parse_orientation
from ringstrain.validation.rows import MeasuredRow, read_equilibria
from ringstrain.validation.score import Score, configuration_weight, score_row
from ringstrain.validation.summary import ALL, Validation, summarise, validate

ROOM = 298.15
#: R ln 2 [kcal/mol at 298.15 K], from the definition.
RT_LN2 = R_KCAL * ROOM * math.log(2)


@cache
def whole() -> Validation:
    return validate(read_equilibria(), load_tables())


def row(id: str) -> MeasuredRow:
    return next(r for r in read_equilibria() if r.id == id)


def scored(id: str) -> Score:
    return next(s for s in whole().scores if s.row.id == id)


def test_every_row_of_the_file_has_one_score() -> None:
    with open(tables_folder() / "equilibria.csv", encoding="utf-8", newline="") as stream:
        cells = list(csv.DictReader(stream))
    assert [s.row.id for s in whole().scores] == [c["id"] for c in cells]
    roles = Counter(c["role"] for c in cells)
    assert dict(whole().left_out) == {r: roles[r] for r in ("duplicate", "suspect", "not scored")}
    assert not [s.row.id for s in whole().scores if s.status == "unreadable"]
    counted = sum(
        g.rows + g.bounds + g.not_determined + g.not_in_scope
        for g in (*whole().independent, *whole().inputs)
        if g.group == ALL
    )
    assert counted == roles["score"] + roles["input"]


def test_ratio_becomes_free_energy_with_its_sign_and_bound() -> None:
    # Definition of the equilibrium constant: dG = -RT ln K.
    eliel_ro = row("carbo-d054")
    assert eliel_ro.energy_kcal == pytest.approx(-8.314462618 / 4184 * 362 * math.log(3.76))
    assert eliel_ro.energy_uncertainty_kcal == pytest.approx(8.314462618 / 4184 * 362 * 0.2 / 3.76)
    glucose = row("hetero-c13")
    assert (glucose.bound, glucose.energy_bound) == ("at most", "at least")


def test_kilojoules_are_converted() -> None:
    # Thermochemical calorie, exact: 1 kcal = 4.184 kJ.
    base = row("carbo-c010")
    joules = replace(base, value=4.184, uncertainty=0.4184, unit="kJ/mol")
    assert joules.energy_kcal == pytest.approx(1.0)
    assert joules.energy_uncertainty_kcal == pytest.approx(0.1)


def test_missing_uncertainty_stays_missing() -> None:
    assert row("hetero-c13").energy_uncertainty_kcal is None


@pytest.mark.parametrize(
    ("first", "second", "ratio"),
    [
        # Labelled states of the stereoisomers with every energy equal: 4:2 and 6:2, group theory (symmetry numbers and
        # racemic pairs), checked against the gas entropies below.
        ("C[C@@H]1CCCC[C@@H]1C", "C[C@@H]1CCCC[C@H]1C", 2.0),
        ("C[C@@H]1CCC[C@@H](C)C1", "C[C@@H]1CCC[C@H](C)C1", 2.0),
        ("C[C@H]1CC[C@@H](C)CC1", "C[C@H]1CC[C@H](C)CC1", 2.0),
        ("C1CC[C@H]2CCCC[C@H]2C1", "C1CC[C@H]2CCCC[C@@H]2C1", 2.0),
        ("C[C@H]1C[C@@H](C)C[C@H](C)C1", "C[C@H]1C[C@@H](C)C[C@@H](C)C1", 3.0),
    ],
)
def test_weights_of_stereoisomers_come_from_counting_labelled_states(first: str, second: str, ratio: float) -> None:
    def lowest(smiles: str) -> float:
        results = analyze(smiles).ring_systems
        weight = configuration_weight(results)
        for result in results:
            bottom = result.states[0].energy_kcal
            weight *= sum(abs(s.energy_kcal - bottom) < 1e-6 for s in result.states)
        return weight

    a, b = lowest(first), lowest(second)
    assert max(a, b) / min(a, b) == pytest.approx(ratio)


@pytest.mark.parametrize(
    ("id", "sign"),
    [
        # TRC gas functions (frenkel-et-al-1994): trans-1,3 and cis-1,4 have the larger entropy, dS 1.05, -1.09,
        # -1.21 cal/(mol K) of B less A; R ln 2 is 1.38.
        ("carbo-d007", -1),
        ("carbo-d011", 1),
        ("carbo-d030", 1),
    ],
)
def test_statistics_follow_measured_entropies(id: str, sign: int) -> None:
    prediction = scored(id).prediction
    assert prediction is not None
    assert prediction.statistics_kcal == pytest.approx(sign * RT_LN2, abs=0.03)


def test_enthalpies_carry_no_statistics() -> None:
    prediction = scored("carbo-d005").prediction
    assert prediction is not None
    assert prediction.statistics_kcal == 0.0
    # Enthalpy of an axial methyl, booth-everett-1980: 1.75 kcal/mol; the free energy at 300 K is 1.74.
    assert prediction.energy_kcal == pytest.approx(1.75, abs=0.02)


def test_racemic_epimers_need_no_mixing_term_between_chiral_compounds() -> None:
    menthol, neomenthol = (analyze(s).ring_systems for s in (row("carbo-d061").smiles_a, row("carbo-d061").smiles_b))
    assert configuration_weight(menthol) == configuration_weight(neomenthol) == 1.0


@pytest.mark.parametrize(
    ("id", "axial_in_b"),
    [
        # What stands axial in B, read off the usual chair drawings: common practice, no source.
        ("carbo-c004", ("ethyl",)),
        ("carbo-c020", ("methoxy",)),
        ("carbo-c051", ("acetoxy", "fluoro")),
        ("hetero-c13", ("hydroxy", "hydroxy", "hydroxy", "hydroxy", "hydroxymethyl")),
        ("hetero-c14", ("hydroxy", "hydroxy", "hydroxy", "hydroxymethyl")),
        ("hetero-t13", ("methoxy", "methylsulfanyl")),
    ],
)
def test_orientation_picks_the_state_it_describes(id: str, axial_in_b: tuple[str, ...]) -> None:
    equilibrium = row(id)
    analysis = analyze(equilibrium.smiles_a)
    result = analysis.ring_systems[0]
    forms = parse_orientation(equilibrium.orientation)
    a, b = (matching_states(analysis.structure, result, form, load_tables()) for form in forms)
    assert {s.id for s in a}.isdisjoint(s.id for s in b)
    for state in b:
        groups = sorted(
            result.groups[(ring_atom, atom)].key
            for atom, ring_atom, _, position in state.sites
            if position == "axial" and atom >= 0
        )
        assert tuple(groups) == axial_in_b


def test_sugar_numbers_tell_two_patterns_of_like_groups_apart() -> None:
    # alpha-D-ribopyranose tetraacetate, 4C1: O-1 and O-3 axial; 1C4: O-2 and O-4 axial.
    equilibrium = row("hetero-c01")
    analysis = analyze(equilibrium.smiles_a)
    forms = parse_orientation(equilibrium.orientation)
    found = [matching_states(analysis.structure, analysis.ring_systems[0], f, load_tables()) for f in forms]
    assert [len(states) for states in found] == [1, 1]
    assert found[0][0].id != found[1][0].id


def test_parts_of_an_orientation() -> None:
    a, b = parse_orientation("A: N-Me eq; B: N-Me ax (same ring chair, 6-Me eq, N inversion only)")
    assert [(w.name, w.position) for w in a.groups] == [("N-Me", "equatorial"), ("6-Me", "equatorial")]
    assert [(w.name, w.position) for w in b.groups] == [("N-Me", "axial"), ("6-Me", "equatorial")]
    a, b = parse_orientation("A: both Cl eq; B: both Cl ax")
    assert [w.name for w in a.groups] == ["Cl", "Cl"]
    with pytest.raises(ValueError, match="does not name A and B"):
        parse_orientation("both equatorial")


def test_row_that_cannot_be_read_is_listed_with_its_reason() -> None:
    bad = replace(row("carbo-c004"), orientation="A: Br eq; B: Br ax")
    score = score_row(bad, load_tables())
    assert score.status == "unreadable"
    assert "Br" in score.reason
    assert score.difference_kcal is None


def test_out_of_scope_row_is_listed_not_dropped() -> None:
    benzene = replace(row("carbo-d001"), smiles_a="Cc1ccccc1", smiles_b="Cc1ccccc1")
    score = score_row(benzene, load_tables())
    assert score.status == "not yet in scope"
    assert summarise([score])[-1].not_in_scope == 1
    assert summarise([score])[-1].rows == 0


def test_a_bound_counts_by_direction_only() -> None:
    score = scored("hetero-c13")
    assert score.is_within_bound is True
    assert score.difference_kcal is None
    assert score.is_covered is None
    swapped = replace(score, row=replace(score.row, value=100.0, bound="at least"))
    assert swapped.is_within_bound is False


def test_a_price_that_returns_its_own_number_counts_as_input() -> None:
    # wiberg-et-al-2005 gave both the price rows and these equilibria of trans-1,2-difluorocyclohexane.
    for id in ("carbo-c041", "carbo-c042", "carbo-c043", "carbo-c044"):
        assert scored(id).row.role == "score"
        assert not scored(id).is_independent


@pytest.mark.parametrize(
    "id",
    # Raw rows of freitas-et-al-2005, freitas-2005 and wiberg-et-al-2005 must come back to the digit printed.
    ["carbo-c041", "carbo-c044", "carbo-c045", "carbo-c046", "carbo-c047", "carbo-c051", "carbo-c054", "carbo-c057"],
)
def test_trans_1_2_pairs_return_their_raw_rows(id: str) -> None:
    difference = scored(id).difference_kcal
    assert difference is not None
    assert abs(difference) < 0.01


def test_summary_of_hand_made_differences() -> None:
    base = scored("carbo-d001")
    assert base.prediction is not None
    gaps = (0.3, -0.4, 0.0)
    scores = [
        replace(
            base,
            row=replace(base.row, id=f"r{i}", value=-2.0),
            prediction=replace(base.prediction, energy_kcal=-2.0 + g),
        )
        for i, g in enumerate(gaps)
    ]
    total = summarise(scores)[-1]
    assert total.group == ALL
    assert total.mean_absolute_kcal == pytest.approx(0.7 / 3)
    assert total.rms_kcal == pytest.approx(math.sqrt(0.25 / 3))
    assert total.worst == "r1"
    assert total.worst_kcal == pytest.approx(-0.4)
    assert (total.winners_right, total.winners, total.covered) == (3, 3, 3)


def test_scores_pickle() -> None:
    assert pickle.loads(pickle.dumps(scored("carbo-d061"))) == scored("carbo-d061")


_TARGETS = {
    # Targets set for the public carbocycle rows when the yardstick was built, mean absolute error in kcal/mol.
    "additive carbocycles": 0.25,
    "pair terms carbocycles": 0.25,
    "polycyclic": 0.35,
    "polar carbocycles": 0.5,
}
_MISSED = {
    "pair terms carbocycles": "neoisomenthol at 450 K and the 500 K gas function of trans-1,2-dimethylcyclohexane",
    "polycyclic": "cholestanol and coprostanol alkoxide equilibria, from memory, outweigh the decalins",
}


@pytest.mark.parametrize(
    "group",
    [
        pytest.param(g, marks=pytest.mark.xfail(reason=_MISSED[g], strict=True) if g in _MISSED else ())
        for g in _TARGETS
    ],
)
def test_accuracy_target(group: str) -> None:
    accuracy = next(g for g in whole().independent if g.group == group)
    assert accuracy.mean_absolute_kcal is not None
    assert accuracy.mean_absolute_kcal <= _TARGETS[group]


def test_carbocycle_winners_are_right() -> None:
    for accuracy in whole().independent:
        if accuracy.group in _TARGETS:
            assert accuracy.winners_right == accuracy.winners, accuracy.group
