"""13C shifts against measured ones."""

from __future__ import annotations

import math

import pytest
from ringstrain.analysis import analyze
from ringstrain.consequences.nmr import predict_nmr

#: Shifts [ppm] by atom, recalled from Dalling, Grant, J. Am. Chem. Soc. 1967, 89, 6612 and 1972, 94, 5318; Stothers,
#: Carbon-13 NMR Spectroscopy, 1972. Reference scales differ by up to 0.4 ppm.
MEASURED: dict[str, tuple[str, dict[int, float]]] = {
    "cyclohexane": ("C1CCCCC1", {0: 27.1}),
    "methyl": ("CC1CCCCC1", {1: 33.3, 2: 36.0, 3: 27.1, 4: 27.0, 0: 23.1}),
    "1,1-dimethyl": ("CC1(C)CCCCC1", {1: 30.2, 3: 40.2, 4: 22.8, 5: 27.1}),
    "trans-1,2": ("C[C@@H]1CCCC[C@H]1C", {1: 40.0, 2: 36.4, 3: 27.3}),
    "cis-1,2": ("C[C@@H]1CCCC[C@@H]1C", {1: 34.9, 2: 31.9, 3: 24.2}),
    "cis-1,3": ("C[C@H]1CCC[C@@H](C)C1", {1: 33.2, 7: 45.1, 2: 35.9, 3: 26.9, 0: 23.2}),
    "trans-1,3": ("C[C@@H]1CCC[C@@H](C)C1", {1: 27.5, 7: 41.9, 2: 34.3, 3: 21.2, 0: 20.9}),
    "trans-1,4": ("C[C@H]1CC[C@H](C)CC1", {1: 33.1, 2: 36.1, 0: 23.1}),
    "cis-1,4": ("C[C@H]1CC[C@@H](C)CC1", {1: 30.5, 2: 31.3, 0: 20.5}),
}


def deviations(name: str) -> dict[int, float]:
    smiles, measured = MEASURED[name]
    shifts = {c.atom: c for c in predict_nmr(analyze(smiles)).carbons}
    found = {}
    for atom, value in measured.items():
        average = shifts[atom].average_ppm
        assert average is not None
        found[atom] = average - value
    return found


@pytest.mark.parametrize("name", MEASURED)
def test_methylcyclohexane_shifts_fall_within_their_stated_error(name: str) -> None:
    """Sources at MEASURED."""
    shifts = {c.atom: c for c in predict_nmr(analyze(MEASURED[name][0])).carbons}
    for atom, deviation in deviations(name).items():
        sigma = shifts[atom].uncertainty_ppm
        assert sigma is not None
        assert abs(deviation) <= 1.96 * sigma


def test_methylcyclohexane_shifts_deviate_little_in_all() -> None:
    """Averaging the two chairs gave rms 0.27 ppm, worst 0.74, when worked out by hand from the same increments."""
    ring = [d for name in MEASURED for atom, d in deviations(name).items() if atom or name == "cyclohexane"]
    assert len(ring) == 27
    assert math.sqrt(sum(d * d for d in ring) / len(ring)) == pytest.approx(0.27, abs=0.03)
    assert max(map(abs, ring)) == pytest.approx(0.74, abs=0.06)


@pytest.mark.parametrize(
    ("with_axial", "without"), [("cis-1,2", "trans-1,2"), ("trans-1,3", "cis-1,3"), ("cis-1,4", "trans-1,4")]
)
def test_the_isomer_with_an_axial_methyl_has_the_lower_sum_of_shifts(with_axial: str, without: str) -> None:
    """Common practice, no source: gamma-gauche methyls shield."""
    sums = []
    for name in (with_axial, without):
        spectrum = predict_nmr(analyze(MEASURED[name][0]))
        ring = set(spectrum.analysis.ring_systems[0].system.atoms)
        sums.append(sum(c.average_ppm or math.nan for c in spectrum.carbons if c.atom in ring))
    assert sums[0] < sums[1]


@pytest.mark.parametrize("group", ["F", "Cl", "Br", "O", "N"])
def test_an_axial_group_shields_the_gamma_carbons_by_4_to_7_ppm(group: str) -> None:
    """Common practice, no source: 4 to 5 ppm for O, N and halogen, here from rounded increments."""
    spectrum = predict_nmr(analyze(f"{group}C1CCCCC1"))
    states = spectrum.analysis.ring_systems[0].states
    axial = next(s.id for s in states if 0 in s.axial)
    equatorial = next(s.id for s in states if 0 in s.equatorial)
    gamma = next(c for c in spectrum.carbons if c.atom == 3)
    values = dict(gamma.per_state)
    assert -7.5 <= (values[axial] or 0.0) - (values[equatorial] or 0.0) <= -3.5
    assert dict(gamma.gamma_per_state)[axial] == pytest.approx((values[axial] or 0.0) - (values[equatorial] or 0.0))


def test_rings_without_increments_say_which_group_lacks_them() -> None:
    spectrum = predict_nmr(analyze("CC(C)C1CCCCC1"))
    shift = next(c for c in spectrum.carbons if c.atom == 3)
    assert shift.average_ppm is None
    assert shift.missing == ("isopropyl",)
