"""Laws of hetero and planar rings: nothing may depend on how the structure was written."""

from __future__ import annotations

import json
import math
from collections import Counter
from random import Random
from typing import Any

import pytest
import ringstrain as rs
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from rdkit import Chem
from rdkit.rdBase import BlockLogs
from ringstrain.analysis import State, SystemResult
from ringstrain.errors import OutOfScope

from zoo import mirrored, rewritten, with_random_marks

R_KCAL = 1.987204e-3  # gas constant [kcal/mol/K]
#: Skeletons with heteroatoms, planar atoms and mixed rings; centres are filled in at random.
RINGS = (
    "CC1CCC(Cl)OC1",
    "COC1CC(C)CCO1",
    "CC1CCSC(C)C1Cl",
    "CC1NCCCC1O",
    "CC1CCCCN1C",
    "CC1CC(C)CN(C)C1",
    "CC1CCN(C(C)=O)CC1O",
    "CC1CC[NH2+]CC1F",
    "CC1COC(c2ccccc2)OC1",
    "CC1CC(C)OC(C)O1",
    "ClC1OCCOC1Cl",
    "CC1SCCC(C)S1",
    "CC1OCCC(C(C)C)S1",
    "CC1CNCC(C)O1",
    "CC1CNC(C)CN1",
    "CN1CN(C)CC(C)C1",
    "CC1CCC[SiH](C)C1",
    "CC1CCN2CCCCC2C1",
    "CC1CCC2CCCCC2N1",
    "CC1CCC2CCCCC2O1",
    "C1OCC2OCOCC2O1",
    "CC1CCCC2(O1)CCCC(C)O2",
    "CC1CCC(C(C)C)C(=O)C1",
    "O=C1CCC(C(C)(C)C)CC1Cl",
    "O=C1CCC2CCCCC2C1C",
    "C=C1CCC(C)CC1C",
    "CC1CCC(O)C=C1",
    "CC1CC=CCC1Br",
    "COC1CC(C)C=CO1",
    "CC1CC=CCN1C",
    "CC12CCCCC1=CCCC2O",
    "CC1CCc2ccccc2C1O",
    "CC1NCCc2ccccc12",
    "CC1CCC(C)C(=O)O1",
    "OCC1OC(O)C(O)C(O)C1O",
    "COC1OCC(O)C(N)C1O",
    "CC1CCCS(=O)C1",
    "CN1C2CCC1CC(O)C2",
)
MEDIA = ("gas", "nonpolar", "polar", "protic", "chloroform")


@st.composite
def molecules(draw: st.DrawFn) -> Any:
    """A ring with its configuration at random; neutral nitrogens are free to invert."""
    mol = with_random_marks(draw(st.sampled_from(RINGS)), Random(draw(st.integers(0, 10**6))))
    for atom in mol.GetAtoms():
        if atom.GetAtomicNum() == 7 and atom.GetFormalCharge() == 0:
            atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
    return mol


seeds = st.integers(0, 10**6).map(Random)


def systems(smiles: str, medium: str = "nonpolar") -> tuple[SystemResult, ...]:
    """Ring systems of a structure; structures without a state are skipped."""
    try:
        return rs.analyze(smiles, medium=medium).ring_systems
    except OutOfScope:
        assume(False)
        raise


def in_one_ring(state: State, atom: int) -> bool:
    """True for an atom of one ring only: what stands on a ring fusion is axial to one ring, equatorial to another."""
    return len(state.detail.shapes.geometry.system.rings_of[atom]) == 1


def picture(state: State, origins: tuple[int, ...]) -> Any:
    """Everything of a state that must not depend on the writing, with atoms named as in the original."""
    return (
        tuple(sorted(state.shapes)),
        frozenset(origins[a] for a in state.axial),
        frozenset(origins[a] for a in state.equatorial),
        frozenset((origins[a], position) for a, position in state.nitrogen if in_one_ring(state, a)),
        state.counts,
        round(state.energy_kcal + 1.7e-7, 6),
        round(state.uncertainty_kcal + 1.7e-7, 6),
        state.lower_bound,
        state.regime,
        state.form,
    )


def pictures(smiles: str, origins: tuple[int, ...], medium: str) -> Counter[Any]:
    """Pictures of all states."""
    return Counter(picture(state, origins) for system in systems(smiles, medium) for state in system.states)


def balance(smiles: str, medium: str) -> list[Any]:
    """Populations, K and dG of every system."""
    rows: list[Any] = []
    for system in systems(smiles, medium):
        e = system.equilibrium
        shares = sorted(-1.0 if s.population is None else round(s.population, 8) for s in system.states)
        rows.append((shares, None if e is None else (e.bound, None if e.dG_kcal is None else round(e.dG_kcal, 6))))
    return sorted(rows, key=repr)


@given(molecules(), seeds, st.sampled_from(MEDIA))
def test_rewriting_the_SMILES_changes_nothing(mol: Any, rng: Random, medium: str) -> None:
    first, origins = rewritten(mol, rng)
    second, others = rewritten(mol, rng)
    assert pictures(first, origins, medium) == pictures(second, others, medium)
    assert balance(first, medium) == balance(second, medium)


def form_turned(counted: Counter[Any]) -> Counter[Any]:
    """The same pictures with D and L exchanged in the form of a pyranose chair."""
    other = {"4C1": "1C4", "1C4": "4C1"}
    turned: Counter[Any] = Counter()
    for key, number in counted.items():
        turned[(*key[:-1], other.get(key[-1], key[-1]))] += number
    return turned


@given(molecules(), seeds, st.sampled_from(MEDIA))
def test_the_mirror_image_has_the_same_states_and_energies(mol: Any, rng: Random, medium: str) -> None:
    text, origins = rewritten(mol, rng)
    assert form_turned(pictures(text, origins, medium)) == pictures(mirrored(text), origins, medium)
    assert balance(text, medium) == balance(mirrored(text), medium)


@given(molecules(), st.sampled_from(MEDIA), st.floats(150.0, 500.0))
def test_populations_sum_to_one_and_follow_the_energies(mol: Any, medium: str, temperature_K: float) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    try:
        found = rs.analyze(text, medium=medium, temperature_K=temperature_K).ring_systems
    except OutOfScope:
        assume(False)
        raise
    for system in found:
        shares = [state.population for state in system.states]
        if any(share is None for share in shares):
            assert all(share is None for share in shares)
            assert any(state.lower_bound for state in system.states)
            continue
        lowest = system.states[0].energy_kcal
        weights = [math.exp((lowest - s.energy_kcal) / R_KCAL / temperature_K) for s in system.states]
        assert sum(share or 0.0 for share in shares) == pytest.approx(1.0, abs=1e-9)
        for share, weight in zip(shares, weights, strict=True):
            assert share == pytest.approx(weight / sum(weights), rel=1e-4, abs=1e-9)


@given(molecules(), st.sampled_from(MEDIA))
def test_the_energy_is_the_sum_of_the_known_lines(mol: Any, medium: str) -> None:
    for system in systems(Chem.MolToSmiles(mol, canonical=False), medium):
        for state in system.states:
            known = [line.count * line.value_kcal for line in state.lines if line.value_kcal is not None]
            assert state.energy_kcal == pytest.approx(sum(known), abs=1e-6)
            assert state.lower_bound == any(line.value_kcal is None for line in state.lines)


@given(molecules())
def test_every_inverting_nitrogen_shows_both_sides_unless_the_rings_forbid_it(mol: Any) -> None:
    for system in systems(Chem.MolToSmiles(mol, canonical=False)):
        if len(system.rings) > 1:
            continue
        sides = {(atom, position) for state in system.states for atom, position in state.nitrogen}
        atoms = {atom for atom, _ in sides}
        assert all((atom, "axial") in sides and (atom, "equatorial") in sides for atom in atoms)


@given(molecules(), seeds)
def test_a_carbon_13_changes_no_side_and_no_energy(mol: Any, rng: Random) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    carbons = [a.GetIdx() for a in mol.GetAtoms() if a.GetAtomicNum() == 6 and a.GetTotalNumHs() == 3]
    assume(carbons)
    heavy = Chem.Mol(mol)
    heavy.GetAtomWithIdx(rng.choice(carbons)).SetIsotope(13)
    labelled = Chem.MolToSmiles(heavy, canonical=False)
    plain = [(s.axial, round(s.energy_kcal, 6)) for x in systems(text) for s in x.states]
    assert Counter(plain) == Counter((s.axial, round(s.energy_kcal, 6)) for x in systems(labelled) for s in x.states)


GROUPS = (
    *("", "C", "C(C)(C)C", "O", "OC", "OC(C)=O", "F", "Cl", "N", "N(C)C", "[NH3+]", "C#N", "C(=O)[O-]", "[N+](=O)[O-]"),
    *("SC", "S(C)(=O)=O", "[Si](C)(C)C", "c8ccccc8", "C(F)(F)F", "NC(C)=O", "P(C)C", "[Hg]Cl", "C8CC8", "OC8CCCCO8"),
)
MEMBERS = (
    *("C", "C", "C", "C", "C", "C", "C", "C", "C=", "O", "N", "S", "P", "[NH2+]", "[SiH2]"),
    *("N(C)", "N(C(C)=O)", "S(=O)", "S(=O)(=O)", "[N+](C)(C)", "[S+](C)", "[Se]", "C(=O)", "C(=C)"),
)


@st.composite
def odd_rings(draw: st.DrawFn) -> str:
    """SMILES of a six-membered ring of any members and groups, sensible or not."""
    text = ""
    for place in range(6):
        member = draw(st.sampled_from(MEMBERS if place < 5 else MEMBERS[:8]))
        bond = "=" if member == "C=" else ""
        member = member.removesuffix("=")
        cut = member.index("]") + 1 if "[" in member else 1
        head, tail = member[:cut], member[cut:]
        closure = "1" if place in (0, 5) else ""
        group = draw(st.sampled_from(GROUPS)) if member == "C" and not bond else ""
        text += head + closure + tail + (f"({group})" if group else "") + bond
    return text


@given(odd_rings(), seeds, st.sampled_from(MEDIA))
@settings(max_examples=150)
def test_nothing_but_errors_of_the_package_comes_out(smiles: str, rng: Random, medium: str) -> None:
    with BlockLogs():
        assume(Chem.MolFromSmiles(smiles) is not None)
    text, _ = rewritten(with_random_marks(smiles, rng), rng)
    problem, answer = "", None
    try:
        answer = rs.analyze(text, medium=medium).as_dict()
    except rs.RingstrainError as error:
        problem = str(error)
    json.dumps(answer, allow_nan=False)
    assert answer is not None or problem.endswith(".")
