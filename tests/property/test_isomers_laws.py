"""Laws of the ranking: it may not depend on which isomer was given, or how."""

from __future__ import annotations

import math
from random import Random
from typing import Any

import pytest
import ringstrain as rs
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from rdkit import Chem
from ringstrain.errors import OutOfScope, UsageError
from ringstrain.ranking import Isomer, Ranking

from zoo import mirrored, rewritten, with_random_marks

R_KCAL = 1.987204e-3  # gas constant [kcal/mol/K]
#: Skeletons of two to five centres that RDKit's canonical SMILES tells apart.
SKELETONS = (
    "CC1CCCCC1C",
    "CC1CCCC(O)C1",
    "CC1CCC(Cl)CC1",
    "CC1CCC(C(C)C)C(O)C1",
    "CC1CC(C)CC(F)C1",
    "C1CCC2CCCCC2C1",
    "CC1CCC2CCCCC2C1",
    "CC1CCC(C(C)C)C(=O)C1",
    "COC1CC(C)CCO1",
    "CC1COC(C)CO1",
    "CC1CCC2CCCCC2N1",
    "CC1CC=CCC1C",
    "OC1COCC(O)C1O",
    "CC1CCCC(C)N1C",
    "C1CCC2C(C1)CCC1CCCCC12",
)
seeds = st.integers(0, 10**6).map(Random)


@st.composite
def isomers(draw: st.DrawFn) -> Any:
    """One isomer of a skeleton, every centre marked."""
    mol = with_random_marks(draw(st.sampled_from(SKELETONS)), Random(draw(st.integers(0, 10**6))))
    for atom in mol.GetAtoms():
        if atom.GetAtomicNum() == 7:
            atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
    return mol


def ranked(smiles: str, **options: Any) -> Ranking:
    """The ranking; skeletons that no isomer closes are skipped."""
    try:
        return rs.rank_isomers(smiles, **options)
    except OutOfScope:
        assume(False)
        raise


def pair_key(smiles: str) -> str:
    """Canonical SMILES, the same for mirror images."""
    return str(min(Chem.CanonSmiles(smiles), Chem.CanonSmiles(mirrored(smiles))))


def picture(isomer: Isomer) -> Any:
    """What of an entry may not depend on the input."""
    share = None if isomer.share is None else round(isomer.share, 6)
    return pair_key(isomer.smiles), round(isomer.dG_kcal + 1.7e-7, 5), isomer.symmetry, share, isomer.configurations


def pictures(ranking: Ranking) -> list[Any]:
    """All entries in an order of their own."""
    return sorted(map(picture, ranking.isomers), key=repr)


@given(isomers(), isomers(), seeds)
@settings(max_examples=25)
def test_the_ranking_does_not_depend_on_the_isomer_given(one: Any, other: Any, rng: Random) -> None:
    smiles = Chem.MolToSmiles(one, isomericSmiles=False)
    twin = with_random_marks(smiles, rng)
    for atom in twin.GetAtoms():
        if atom.GetAtomicNum() == 7:
            atom.SetChiralTag(Chem.ChiralType.CHI_UNSPECIFIED)
    assert pictures(ranked(rewritten(one, rng)[0])) == pictures(ranked(rewritten(twin, rng)[0]))


@given(isomers(), seeds)
@settings(max_examples=25)
def test_an_open_input_gives_the_ranking_of_a_full_one(mol: Any, rng: Random) -> None:
    full, bare = ranked(rewritten(mol, rng)[0]), ranked(Chem.MolToSmiles(mol, isomericSmiles=False))
    assert pictures(full) == pictures(bare)
    assert bare.input_rank is None
    assert all(isomer.inverted_atoms is None for isomer in bare.isomers)


@given(isomers(), st.floats(150.0, 600.0), st.sampled_from(("gas", "nonpolar", "polar", "protic")))
@settings(max_examples=25)
def test_shares_sum_to_one_and_follow_from_the_free_energies(mol: Any, temperature_K: float, medium: str) -> None:
    ranking = ranked(Chem.MolToSmiles(mol, canonical=False), temperature_K=temperature_K, medium=medium)
    shares = [isomer.share for isomer in ranking.isomers]
    if any(share is None for share in shares):
        assert all(share is None for share in shares)
        return
    weights = [math.exp(-isomer.dG_kcal / R_KCAL / temperature_K) for isomer in ranking.isomers]
    assert sum(share or 0.0 for share in shares) == pytest.approx(1.0, abs=1e-6)
    for isomer, weight in zip(ranking.isomers, weights, strict=True):
        assert isomer.share == pytest.approx(weight / sum(weights), abs=1e-4)
    assert ranking.isomers[0].dG_kcal == 0.0
    energies = [isomer.dG_kcal for isomer in ranking.isomers]
    assert energies == sorted(energies)


@given(isomers())
@settings(max_examples=25)
def test_an_enantiomer_has_the_same_energy(mol: Any) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    assert pictures(ranked(text)) == pictures(ranked(mirrored(text)))
    apart = ranked(text, enantiomers=True)
    by_smiles = {Chem.CanonSmiles(isomer.smiles): isomer for isomer in apart.isomers}
    assert len(by_smiles) == len(apart.isomers)
    for smiles, isomer in by_smiles.items():
        image = by_smiles[Chem.CanonSmiles(mirrored(smiles))]
        assert image.dG_kcal == pytest.approx(isomer.dG_kcal, abs=1e-6)
        if isomer.symmetry == "single enantiomer":
            assert image is not isomer
        else:
            assert isomer.symmetry in ("meso", "achiral")
            assert image is isomer


@given(isomers())
@settings(max_examples=25)
def test_freezing_every_centre_returns_the_input_alone(mol: Any) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    try:
        ranking = ranked(text, at=())
    except OutOfScope:
        return
    (alone,) = ranking.isomers
    assert ranking.free_atoms == ()
    assert ranking.input_rank == 1
    assert alone.inverted_atoms == ()
    assert alone.dG_kcal == 0.0
    assert alone.share is None or alone.share == pytest.approx(1.0)
    assert pair_key(alone.smiles) == pair_key(text)


@given(isomers(), seeds)
@settings(max_examples=25)
def test_only_the_chosen_centre_turns(mol: Any, rng: Random) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    free = ranked(text).free_atoms
    assume(free)
    chosen = rng.choice(free)
    try:
        ranking = ranked(text, at=(chosen,))
    except OutOfScope:
        return
    assert set(ranking.free_atoms) <= {chosen}
    assert len(ranking.isomers) + len(ranking.impossible) <= 2
    for isomer in ranking.isomers:
        assert set(isomer.inverted_atoms or ()) <= {chosen}


@given(isomers())
@settings(max_examples=15)
def test_inverting_the_listed_atoms_of_the_input_gives_the_entry(mol: Any) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    ranking = ranked(text)
    assert ranking.input_rank is not None
    assert pair_key(ranking.isomers[ranking.input_rank - 1].smiles) == pair_key(text)
    reread = Chem.MolFromSmiles(text, sanitize=False)
    Chem.SanitizeMol(reread)
    for isomer in ranking.isomers:
        turned = Chem.Mol(reread)
        for atom in isomer.inverted_atoms or ():
            turned.GetAtomWithIdx(atom).InvertChirality()
        assert pair_key(Chem.MolToSmiles(turned)) == pair_key(isomer.smiles)


@given(isomers())
@settings(max_examples=10)
def test_an_atom_that_is_no_centre_is_refused(mol: Any) -> None:
    text = Chem.MolToSmiles(mol, canonical=False)
    reread = rs.read(text)
    ends = [i for i, atom in enumerate(reread.atoms) if len(reread.neighbours[i]) == 1]
    assume(ends)
    with pytest.raises(UsageError, match="no ring stereocentre"):
        rs.rank_isomers(text, at=(ends[0],))
