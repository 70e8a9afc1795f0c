"""Counts of contacts that the trade knows by heart (common practice, no source, unless said otherwise)."""

from __future__ import annotations

import pytest
import ringstrain as rs
from ringstrain.analysis import State


def chairs(smiles: str) -> list[State]:
    """All-chair states, lowest first."""
    (system,) = rs.analyze(smiles).ring_systems
    return [state for state in system.states if set(state.shapes) == {"chair"}]


CHOLESTANE = "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C"


@pytest.mark.parametrize(
    ("smiles", "expected"),
    [
        pytest.param("CC1CCCCC1", [(0, 0, 0), (2, 2, 0)], id="methyl"),
        pytest.param("CC1(C)CCCCC1", [(2, 2, 0), (2, 2, 0)], id="1,1-dimethyl"),
        pytest.param("C[C@H]1CCCC[C@@H]1C", [(1, 0, 0), (4, 4, 0)], id="trans-1,2"),
        pytest.param("C[C@H]1CCCC[C@H]1C", [(3, 2, 0), (3, 2, 0)], id="cis-1,2"),
        pytest.param("C[C@H]1CCC[C@@H](C)C1", [(0, 0, 0), (4, 2, 1)], id="cis-1,3"),
        pytest.param("C[C@H]1CCC[C@H](C)C1", [(2, 2, 0), (2, 2, 0)], id="trans-1,3"),
        pytest.param("C[C@H]1CC[C@H](C)CC1", [(0, 0, 0), (4, 4, 0)], id="trans-1,4"),
        pytest.param("C[C@H]1CC[C@@H](C)CC1", [(2, 2, 0), (2, 2, 0)], id="cis-1,4"),
    ],
)
def test_gauche_and_syn_axial_counts(smiles: str, expected: list[tuple[int, int, int]]) -> None:
    found = [dict(state.counts) for state in chairs(smiles)]
    assert [(c["gauche"], c["syn_axial_XH"], c["syn_axial_XY"]) for c in found] == expected


def test_one_and_eight_methyls_of_trans_decalin_meet_peri_when_both_equatorial() -> None:
    counts = []
    for first in ("@", "@@"):
        for second in ("@", "@@"):
            for state in chairs(f"C[C{first}H]1CCC[C@@H]2CCC[C{second}H](C)[C@@H]12"):
                if {0, 9} <= set(state.equatorial) and not state.axial:  # no ring bond axial: trans-fused
                    counts.append(dict(state.counts)["peri"])
            for state in chairs(f"C[C{first}H]1CCC[C@H]2CCC[C{second}H](C)[C@@H]12"):
                if {0, 9} <= set(state.equatorial) and not state.axial:
                    counts.append(dict(state.counts)["peri"])
    assert counts
    assert set(counts) == {1}


def test_a_steroid_is_locked_with_its_angular_methyls_axial() -> None:
    (system,) = rs.analyze(CHOLESTANE).ring_systems
    (state,) = chairs(CHOLESTANE)
    assert system.locked
    structure = rs.read(CHOLESTANE)
    members = {a for ring in system.rings for a in ring}
    angular = [
        i
        for i, atom in enumerate(structure.atoms)
        if atom.hydrogens == 3 and structure.neighbours[i][0] in members and atom.element == "C"
    ]
    assert len(angular) == 2
    assert set(angular) <= set(state.axial)
    oxygen = next(i for i, atom in enumerate(structure.atoms) if atom.element == "O")
    assert oxygen in state.equatorial
    assert oxygen not in state.axial


def test_an_eleven_beta_hydroxy_meets_both_angular_methyls_and_an_eleven_alpha_one_neither() -> None:
    met = []
    for mark in ("@", "@@"):
        text = f"C[C@]12CCCC[C@@H]1CC[C@@H]1[C@@H]2[C{mark}H](O)C[C@]2(C)CCC[C@@H]12"
        oxygen, methyls = 12, {0, 15}
        (state,) = chairs(text)
        ends = [(c.atoms[0], c.atoms[-1]) for c in state.detail.facts.contacts if c.kind in ("syn-axial X//Y", "peri")]
        met.append(sum(oxygen in pair and bool(methyls & set(pair)) for pair in ends))
    assert sorted(met) == [0, 2]
