"""Laws of predicted spectra: mirror images, renumbering, limits of the equation."""

from __future__ import annotations

import math
import random

import pytest
from hypothesis import given
from hypothesis import strategies as st
from ringstrain.analysis import analyze
from ringstrain.consequences.dynamics import eyring_barrier, eyring_rate, unequal_coalescence_rates
from ringstrain.consequences.karplus import Substituent, vicinal_coupling
from ringstrain.consequences.nmr import Spectrum, predict_nmr
from ringstrain.consequences.spectra_inverse import Measured, estimate_population
from ringstrain.structure.read import read
from ringstrain.tables.spectra import load_spectra

COMPOUNDS = (
    "C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1",
    "C[C@@H]1CCCC[C@@H]1O",
    "O[C@@H]1CCO[C@@H](C)C1",
    "C1CC[C@H]2CCCC[C@H]2C1",
    "OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O",
    "C[C@H]1CC=C[C@@H](C)C1",
    "O=C1CC[C@@H](C)C[C@H]1C",
    "C[C@@H]1CCN(C)C[C@H]1F",
    "C1CC[C@]2(CC1)CCO[C@@H](C)C2",
)


def patterns(found: Spectrum) -> list[tuple[float, ...]]:
    """Sorted couplings of every hydrogen, in an order that numbering does not touch."""
    rows = [tuple(sorted(round(j, 5) for j in s.splittings() or ())) for s in found.signals]
    return sorted(rows)


def mirrored(smiles: str) -> str:
    return smiles.replace("@@", "%").replace("@", "@@").replace("%", "@")


def shuffled(smiles: str, seed: int) -> str:
    """The same compound written in another order."""
    from rdkit import Chem

    molecule = Chem.MolFromSmiles(smiles)
    order = list(range(molecule.GetNumAtoms()))
    random.Random(seed).shuffle(order)
    return str(Chem.MolToSmiles(Chem.RenumberAtoms(molecule, order), canonical=False))


@pytest.mark.parametrize("smiles", COMPOUNDS)
def test_mirror_images_have_one_spectrum(smiles: str) -> None:
    assert patterns(predict_nmr(analyze(smiles))) == patterns(predict_nmr(analyze(mirrored(smiles))))


@pytest.mark.parametrize("smiles", COMPOUNDS)
@pytest.mark.parametrize("seed", [1, 2])
def test_numbering_changes_no_coupling(smiles: str, seed: int) -> None:
    other = shuffled(smiles, seed)
    assert read(other).smiles == read(smiles).smiles
    assert patterns(predict_nmr(analyze(smiles))) == patterns(predict_nmr(analyze(other)))


@pytest.mark.parametrize("smiles", COMPOUNDS)
def test_averages_lie_between_the_forms(smiles: str) -> None:
    for signal in predict_nmr(analyze(smiles)).signals:
        for coupling in signal.couplings:
            values = [v for _, v in coupling.per_state if v is not None]
            assert coupling.average_Hz is not None
            assert min(values) - 1e-9 <= coupling.average_Hz <= max(values) + 1e-9
            assert coupling.uncertainty_Hz is not None
            assert coupling.uncertainty_Hz >= 0.5 - 1e-9


@given(phi=st.floats(-180, 180), letter=st.sampled_from("ABCDE"))
def test_without_substituents_the_sign_of_the_torsion_does_not_matter(phi: float, letter: str) -> None:
    parameters = load_spectra().sets[letter]
    assert vicinal_coupling(phi, (), parameters) == pytest.approx(vicinal_coupling(-phi, (), parameters))


@given(phi=st.floats(-180, 180), letter=st.sampled_from("ABCDE"), weight=st.floats(0.1, 1.7))
def test_turning_torsion_and_orientation_round_together_changes_nothing(phi: float, letter: str, weight: float) -> None:
    """Only the product of sign and torsion enters."""
    parameters = load_spectra().sets[letter]
    first = vicinal_coupling(phi, (Substituent(weight, 0.0, phi),), parameters)
    second = vicinal_coupling(-phi, (Substituent(weight, 0.0, phi),), parameters)
    assert first == pytest.approx(second)


@given(barrier=st.floats(4, 25), temperature=st.floats(80, 500))
def test_rate_and_barrier_are_inverse(barrier: float, temperature: float) -> None:
    rate = eyring_rate(barrier, temperature)
    if rate > 1e-200:
        assert eyring_barrier(rate, temperature) == pytest.approx(barrier)


@given(share=st.floats(0.5, 0.99), gap=st.floats(5, 1000))
def test_detailed_balance_holds_at_coalescence(share: float, gap: float) -> None:
    out_of_major, out_of_minor = unequal_coalescence_rates(gap, share)
    assert share * out_of_major == pytest.approx((1 - share) * out_of_minor)


@given(share=st.floats(0.06, 0.94), high=st.floats(8, 14), low=st.floats(0, 4), temperature=st.floats(150, 400))
def test_populations_come_back_from_their_own_average(
    share: float, high: float, low: float, temperature: float
) -> None:
    observed = Measured(value=share * high + (1 - share) * low, sigma=0.3)
    models = (Measured(value=high, sigma=0.5), Measured(value=low, sigma=0.5))
    found = estimate_population(observed, *models, temperature_K=temperature, limit=0.95)
    assert found.share == pytest.approx(share)
    assert found.dG_kcal is not None
    assert math.exp(found.dG_kcal / (0.00198720425864 * temperature)) == pytest.approx(share / (1 - share))
    swapped = estimate_population(observed, *models[::-1], temperature_K=temperature, limit=0.95)
    assert swapped.dG_kcal == pytest.approx(-found.dG_kcal, abs=1e-9)
