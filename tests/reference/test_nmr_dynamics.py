"""Rates, coalescence and populations against simulated line shapes and worked examples."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import NDArray
from ringstrain.analysis import analyze
from ringstrain.consequences.dynamics import (
    coalescence_rate,
    eyring_barrier,
    eyring_rate,
    unequal_coalescence_rates,
)
from ringstrain.consequences.nmr import predict_nmr, usual_spectrometer
from ringstrain.consequences.spectra_inverse import Measured, estimate_population
from ringstrain.tables.spectra import load_spectra

Spectrum = Callable[[float], NDArray[np.float64]]
WIDTH = 0.05  # natural line width [1/s], small against every gap below


def peaks(intensity: NDArray[np.float64]) -> int:
    inner = intensity[1:-1]
    return int(np.sum((inner > intensity[:-2]) & (inner > intensity[2:])))


def merging_rate(spectrum: Spectrum, low: float, high: float) -> float:
    """The rate at which the last two maxima become one, by halving."""
    for _ in range(20):
        middle = math.sqrt(low * high)
        if peaks(spectrum(middle)) > 1:
            low = middle
        else:
            high = middle
    return math.sqrt(low * high)


def two_sites(gap_Hz: float, major_share: float) -> Spectrum:
    """Line shape of two uncoupled sites by the rate out of the larger one (Bloch equations with exchange)."""
    grid = np.linspace(-gap_Hz, gap_Hz, 8001)

    def intensity(rate: float) -> NDArray[np.float64]:
        back = rate * major_share / (1.0 - major_share)
        offsets = np.array([-gap_Hz / 2, gap_Hz / 2]) * 2j * math.pi
        exchange = np.array([[-rate, back], [rate, -back]])
        base = np.diag(offsets - WIDTH) + exchange
        matrices = 2j * math.pi * grid[:, None, None] * np.eye(2) - base
        start = np.array([major_share, 1.0 - major_share])
        solved = np.linalg.solve(matrices, np.broadcast_to(start, (grid.size, 2))[..., None])
        return np.asarray(solved.sum(axis=(1, 2)).real, dtype=np.float64)

    return intensity


def coupled_pair(gap_Hz: float, coupling_Hz: float) -> Spectrum:
    """Line shape of a coupled pair that changes places, from the full Liouville space of two spins."""
    up, z, one = np.array([[0, 1], [0, 0]]), np.diag([0.5, -0.5]), np.eye(2)
    first_up, second_up = np.kron(up, one), np.kron(one, up)
    dot = np.kron(z, z) + 0.5 * (first_up @ second_up.T + first_up.T @ second_up)
    energy = 2 * math.pi * (gap_Hz / 2 * (np.kron(z, one) - np.kron(one, z)) + coupling_Hz * dot)
    swap = np.eye(4)[[0, 2, 1, 3]]
    eye = np.eye(4)
    motion = -1j * (np.kron(energy, eye) - np.kron(eye, energy.T))
    exchange = np.kron(swap, swap.T) - np.eye(16)
    detect = (first_up + second_up).T.reshape(16)
    grid = np.linspace(-0.6 * gap_Hz, 0.6 * gap_Hz, 601)

    def intensity(rate: float) -> NDArray[np.float64]:
        base = motion + rate * exchange - WIDTH * np.eye(16)
        matrices = 2j * math.pi * grid[:, None, None] * np.eye(16) - base
        solved = np.linalg.solve(matrices, np.broadcast_to(detect, (grid.size, 16))[..., None])[..., 0]
        return np.asarray((solved @ detect).real, dtype=np.float64)

    return intensity


@pytest.mark.parametrize("gap_Hz", [20.0, 100.0, 192.0])
def test_equal_lines_merge_at_the_simulated_rate(gap_Hz: float) -> None:
    """Against Bloch equations with exchange, solved in this file."""
    simulated = merging_rate(two_sites(gap_Hz, 0.5), 0.5 * gap_Hz, 10 * gap_Hz)
    assert coalescence_rate(gap_Hz) == pytest.approx(simulated, rel=0.01)


@pytest.mark.parametrize("share", [0.6, 0.7, 0.8, 0.9])
def test_unequal_lines_merge_at_the_simulated_rates(share: float) -> None:
    """Against Bloch equations with exchange, solved in this file."""
    out_of_major, out_of_minor = unequal_coalescence_rates(100.0, share)
    simulated = merging_rate(two_sites(100.0, share), 1.0, 1000.0)
    assert out_of_major == pytest.approx(simulated, rel=0.01)
    assert out_of_minor / out_of_major == pytest.approx(share / (1.0 - share))


@pytest.mark.parametrize(("gap_Hz", "coupling_Hz"), [(50.0, 12.0), (20.0, 12.0)])
def test_a_coupled_pair_merges_at_the_simulated_rate(gap_Hz: float, coupling_Hz: float) -> None:
    """Against the Liouville equation of two spins that change places, solved in this file."""
    simulated = merging_rate(coupled_pair(gap_Hz, coupling_Hz), 10.0, 1000.0)
    assert coalescence_rate(gap_Hz, coupling_Hz) == pytest.approx(simulated, rel=0.01)


# Formula of Shanan-Atidi and Bar-Eli, J. Phys. Chem. 1970, 74, 961 (recalled), gap 100 Hz: larger share, rates [1/s].
@pytest.mark.parametrize(
    ("share", "out_of_major", "out_of_minor"),
    [(0.5, 222.1, 222.1), (0.6, 133.1, 199.6), (0.7, 86.6, 202.1), (0.8, 52.0, 207.9), (0.9, 23.9, 214.8)],
)
def test_unequal_coalescence_follows_the_published_formula(
    share: float, out_of_major: float, out_of_minor: float
) -> None:
    """Shanan-Atidi and Bar-Eli, J. Phys. Chem. 1970, 74, 961."""
    assert unequal_coalescence_rates(100.0, share) == pytest.approx((out_of_major, out_of_minor), abs=0.06)


@pytest.mark.parametrize(
    ("frequency_MHz", "expected_K"), [(60.0, 206.3), (100.0, 210.3), (300.0, 219.2), (400.0, 221.7), (600.0, 225.3)]
)
def test_cyclohexane_coalesces_where_its_enthalpy_and_entropy_say(frequency_MHz: float, expected_K: float) -> None:
    """Worked out by hand from dH 10.8, dS 2.8 (Anet, Bourn, J. Am. Chem. Soc. 1967, 89, 760, recalled) and 0.48 ppm."""
    watched = usual_spectrometer(load_spectra(), frequency_MHz=frequency_MHz)
    block = predict_nmr(analyze("C1CCCCC1"), spectrometer=watched).freezing[0]
    assert block is not None
    assert block.coalescence_K == pytest.approx(expected_K, abs=0.06)


def test_cyclohexane_at_60_mhz_gives_back_its_barrier() -> None:
    """Worked example: gap 28.8 Hz, rate 64.0 per s, 206 K, 10.22 kcal/mol (Anet, Bourn 1967, recalled)."""
    rate = coalescence_rate(28.8)
    assert rate == pytest.approx(64.0, abs=0.05)
    assert eyring_barrier(rate, 206.0) == pytest.approx(10.22, abs=0.02)
    assert eyring_rate(eyring_barrier(rate, 206.0), 206.0) == pytest.approx(rate)


def test_the_same_process_coalesces_far_higher_in_the_carbon_spectrum() -> None:
    """Proc. Natl. Acad. Sci. USA 1970, 67, 1588: 133 Hz for 13C, 7.5 Hz for 1H; 295 and 16.7 per s."""
    assert coalescence_rate(133.0) == pytest.approx(295.0, abs=0.6)
    assert coalescence_rate(7.5) == pytest.approx(16.7, abs=0.06)


def test_dimethylcyclohexane_barrier_follows_from_the_measured_rate_law() -> None:
    """1,4-Dimethylcyclohexane-d16, k = 1.38e13 exp(-45.2 kJ/RT): 43.2 kJ/mol at 298 K, liquid-crystal 2H NMR."""
    rate = 1.38e13 * math.exp(-45.2 / (8.314462618e-3 * 298.0))
    assert eyring_barrier(rate, 298.0) * 4.184 == pytest.approx(43.2, abs=0.06)


# Error propagation worked by hand for 11.0 and 2.8 Hz, 0.3 Hz on all three, 298 K: share, dG, its error [kcal/mol].
@pytest.mark.parametrize(("share", "dg", "error"), [(0.5, 0.0, 0.11), (0.8, 0.82, 0.18), (0.9, 1.30, 0.32)])
def test_an_averaged_coupling_gives_populations_with_their_error(share: float, dg: float, error: float) -> None:
    """s(x)^2 = (s_obs^2 + x^2 s_A^2 + (1-x)^2 s_B^2)/(J_A-J_B)^2, worked by hand."""
    values = (2.8 + share * 8.2, 11.0, 2.8)
    observed, first, second = (Measured(value=v, sigma=0.3) for v in values)
    found = estimate_population(observed, first, second, temperature_K=298.0, limit=0.95)
    assert found.share == pytest.approx(share)
    assert found.dG_kcal == pytest.approx(dg, abs=0.006)
    assert found.uncertainty_kcal == pytest.approx(error, abs=0.006)


def test_nitrocyclohexanone_average_gives_the_worked_free_energy() -> None:
    """Course data on 2-nitrocyclohexanone: 10.6 Hz between 12.6 and 4.3 is 0.759, K 3.15, 0.68 kcal/mol."""
    observed, first, second = (Measured(value=v, sigma=0.2) for v in (10.6, 12.6, 4.3))
    found = estimate_population(observed, first, second, temperature_K=298.0, limit=0.95)
    assert pytest.approx(3.15, abs=0.01) == found.K
    assert found.dG_kcal == pytest.approx(0.68, abs=0.006)
    assert found.uncertainty_kcal == pytest.approx(0.10, abs=0.006)


def test_its_second_coupling_contradicts_the_first() -> None:
    """Same data: the populations of the first average the second to 5.6 Hz, not to the 7.6 Hz printed."""
    observed, first, second = (Measured(value=v, sigma=0.2) for v in (7.6, 5.7, 5.2))
    found = estimate_population(observed, first, second, temperature_K=298.0, limit=0.95)
    assert found.verdict == "outside the model values"
    assert found.share is None
    assert found.K is None


@pytest.mark.parametrize(
    ("group", "temperature_K", "axial_percent", "allowed"),
    [("Cl", 193.0, 20.2, 3.5), ("Br", 193.0, 22.4, 4.0), ("F", 187.0, 32.2, 6.0)],
)
def test_slow_exchange_shares_of_the_halides_are_those_measured(
    group: str, temperature_K: float, axial_percent: float, allowed: float
) -> None:
    """Jensen, Bushweller, Beck, J. Am. Chem. Soc. 1969, 91, 344 (recalled); allowed: 0.09 kcal/mol of the A-value."""
    states = analyze(f"{group}C1CCCCC1", temperature_K=temperature_K).ring_systems[0].states
    share = sum(s.population or 0.0 for s in states if 0 in s.axial)
    assert 100 * share == pytest.approx(axial_percent, abs=allowed)
