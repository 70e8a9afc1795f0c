"""Rates, barriers and coalescence: the formulas, on plain numbers.

The rate is that of one chair becoming the other.  Half of the molecules that reach the twist-boat fall back, so that
leaving the chair is twice as fast.
"""

from __future__ import annotations

import math
from collections.abc import Callable

from ringstrain.units import K_B, PLANCK, R_KCAL


def eyring_rate(barrier_kcal: float, temperature_K: float) -> float:
    """The rate over a free energy barrier, k = (kB T / h) exp(-dG / RT) [1/s].

    Parameters
    ----------
    barrier_kcal
        Free energy of activation [kcal/mol].
    temperature_K
        Temperature [K].

    Returns
    -------
    float
        Rate [1/s], transmission coefficient 1.

    Examples
    --------
    >>> round(eyring_rate(10.8 - 206.0 * 0.0028, 206.0))
    61
    """
    return K_B * temperature_K / PLANCK * math.exp(-barrier_kcal / (R_KCAL * temperature_K))


def eyring_barrier(rate_per_s: float, temperature_K: float) -> float:
    """The free energy barrier that a rate [1/s] at a temperature [K] stands for [kcal/mol]."""
    return R_KCAL * temperature_K * math.log(K_B * temperature_K / (PLANCK * rate_per_s))


def coalescence_rate(gap_Hz: float, coupling_Hz: float = 0.0) -> float:
    """The rate at which two lines of equal height merge [1/s].

    Parameters
    ----------
    gap_Hz
        Distance of the lines without exchange [Hz].
    coupling_Hz
        Coupling between the two exchanging nuclei [Hz].

    Returns
    -------
    float
        pi sqrt((gap^2 + 6 J^2) / 2) [1/s]; without a coupling 2.22 times the gap.
    """
    return math.pi * math.sqrt((gap_Hz**2 + 6.0 * coupling_Hz**2) / 2.0)


def unequal_coalescence_rates(gap_Hz: float, major_share: float) -> tuple[float, float]:
    """The rates at which two lines of unequal height merge.

    Parameters
    ----------
    gap_Hz
        Distance of the lines without exchange [Hz].
    major_share
        Share of the larger one, 0.5 to below 1 [-].

    Returns
    -------
    tuple
        Rate out of the larger form and out of the smaller one [1/s].

    Raises
    ------
    ValueError
        If the share is not between 0.5 and 1.

    References
    ----------
    ``shanan-atidi-bar-eli-1970``
    """
    if not 0.5 <= major_share < 1.0:
        raise ValueError(f"the larger share is {major_share:g}, not between 0.5 and 1")
    excess = 2.0 * major_share - 1.0
    low, high = math.sqrt(2.0), 1e4
    x = solve(lambda x: (max(x * x - 2.0, 0.0) / 3.0) ** 1.5 / x - excess, low, high) if excess > 0 else low
    lifetime = x / (2.0 * math.pi * gap_Hz)
    return (1.0 - excess) / (2.0 * lifetime), (1.0 + excess) / (2.0 * lifetime)


def solve(function: Callable[[float], float], low: float, high: float) -> float:
    """The zero of a rising function between two limits, by halving."""
    for _ in range(200):
        middle = (low + high) / 2.0
        if function(middle) < 0:
            low = middle
        else:
            high = middle
        if high - low <= 1e-12 * high:
            break
    return (low + high) / 2.0
