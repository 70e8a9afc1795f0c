"""Which chairs close: facts of the trade, marked as such, and laws of torsion arithmetic."""

from __future__ import annotations

from itertools import product

import pytest
import ringstrain as rs
from ringstrain.analysis import State

from zoo import SKELETONS


def chairs(smiles: str) -> list[State]:
    """All-chair states of the only ring system."""
    (system,) = rs.analyze(smiles).ring_systems
    return [state for state in system.states if set(state.shapes) == {"chair"}]


def closing(template: str) -> list[int]:
    """Number of all-chair states of every assignment of the marks, the first fixed; 0 when none closes."""
    found = []
    for signs in product(("@", "@@"), repeat=template.count("{}") - 1):
        try:
            found.append(len(chairs(template.format("@", *signs))))
        except rs.OutOfScope:
            found.append(0)
    return sorted(found)


@pytest.mark.parametrize(
    ("template", "expected"),
    [
        # Common practice, no source: trans-decalin is rigid, cis-decalin flips.
        pytest.param("C1CC[C{}H]2CCCC[C{}H]2C1", [1, 2], id="decalin"),
        # Common practice, no source: trans-syn-trans-perhydroanthracene needs a boat in the middle.  The first fusion
        # is fixed, so of eight assignments two are trans,trans (one closes), four cis,trans, two cis,cis.
        pytest.param("C1CC[C{}H]2C[C{}H]3CCCC[C{}H]3C[C{}H]2C1", [0, 1, 1, 1, 1, 1, 2, 2], id="perhydroanthracene"),
    ],
)
def test_all_chair_states_of_fused_rings(template: str, expected: list[int]) -> None:
    assert closing(template) == expected


@pytest.mark.parametrize(("name", "smiles"), [(name, smiles) for name, smiles, _ in SKELETONS])
def test_a_fused_block_has_at_most_two_all_chair_states(name: str, smiles: str) -> None:
    from random import Random

    from zoo import rewritten, with_random_marks

    text = rewritten(with_random_marks(smiles, Random(2)), Random(3))[0]
    try:
        systems = rs.analyze(text).ring_systems
    except rs.OutOfScope:
        return
    for system in systems:
        closed = [state for state in system.states if set(state.shapes) == {"chair"}]
        assert len(closed) <= 2 ** len(system.system.blocks)


def test_a_linear_perhydroacene_of_thirty_rings_is_answered() -> None:
    numbers = [str(n) if n < 10 else f"%{n}" for n in range(2, 31)]
    there = "".join(f"[C@H]{n}C" for n in numbers)
    back = "".join(f"[C@@H]{n}C" for n in reversed(numbers))
    (state,) = chairs(f"C1CC{there}CCC{back}1")
    # Common practice, no source: the all-trans ladder has no gauche path and no axial ring bond.
    assert dict(state.counts)["gauche"] == 0
    assert state.axial == ()


@pytest.mark.parametrize(
    ("smiles", "expected"),
    [
        pytest.param("C1CC[C@H]2CCC[C@@H]2C1", 1, id="trans-hydrindane is rigid"),
        pytest.param("C1CC[C@H]2CCC[C@H]2C1", 2, id="cis-hydrindane flips"),
        pytest.param("C1CCC2(CC1)CCCCC2", 4, id="spiro[5.5]undecane flips twice"),
        pytest.param("C1CCC2(CC1)CCCC2", 2, id="spiro[4.5]decane"),
        pytest.param("C1CCC2(CC1)CCC1(CC2)CCCCC1", 8, id="dispiro"),
    ],
)
def test_companions_and_spiro_rings(smiles: str, expected: int) -> None:
    # Common practice, no source.
    assert len(chairs(smiles)) == expected


def test_too_many_states_are_out_of_scope() -> None:
    chain = "C1CCC2(CC1)CCC1(CC2)CCC2(CC1)CCC1(CC2)CCC2(CC1)CCC1(CC2)CCCCC1"
    with pytest.raises(rs.OutOfScope, match="64"):
        rs.analyze(chain)


@pytest.mark.parametrize(
    "smiles", ["C1CC[C@H]2CCCC[C@H]2C1", "C1CCC2(CC1)CCCCC2", "CC1CCCCC1", "C[C@H]1CC[C@@H](C)CC1"]
)
def test_torsions_of_every_ring_are_one_of_the_two_chairs(smiles: str) -> None:
    for state in chairs(smiles):
        for ring in state.detail.shapes.rings:
            assert {abs(t) for t in ring.torsions} == {60.0}
            assert all(ring.torsions[i] == -ring.torsions[i - 1] for i in range(6))


def test_two_rings_joined_by_a_bond_are_two_systems() -> None:
    first, second = rs.analyze("C1CCCCC1C1CCCCC1").ring_systems
    assert not {a for ring in first.rings for a in ring} & {a for ring in second.rings for a in ring}
    assert min(first.rings[0]) < min(second.rings[0])
