"""When ring inversion freezes out: barrier, rate, coalescence, and what the cold spectrum integrates to.

Tabulated barriers of unsymmetrical rings are means of both directions; the favoured form sees half the free energy
difference more, the other form half of it less.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

from ringstrain.analysis import analyze
from ringstrain.consequences.averages import ring_forms, shares_of
from ringstrain.consequences.barriers import Barrier, find_barrier
from ringstrain.consequences.dynamics import coalescence_rate, eyring_rate, solve, unequal_coalescence_rates
from ringstrain.results import Analysis, State, SystemResult
from ringstrain.tables import Tables
from ringstrain.tables.spectra import SpectralTables
from ringstrain.units import R_KCAL, Z95

CONVENTION = "rate and barrier are chair to chair; leaving the chair for the twist-boat is twice as fast"
#: Favoured share from which exchange shows nothing [-].
MOST_BIASED = 0.999
_COLDEST_K, _HOTTEST_K = 20.0, 1000.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Spectrometer:
    """What is watched: two lines and how far they stand apart when frozen.

    Attributes
    ----------
    frequency_MHz
        Frequency of the nucleus [MHz].
    gap_Hz
        Distance of the lines [Hz].
    coupling_Hz
        Coupling between the two exchanging nuclei [Hz].
    """

    frequency_MHz: float
    gap_Hz: float
    coupling_Hz: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class FrozenForm:
    """One ring form in the cold spectrum: its lowest state, share with 95 % limits, and whether it is seen."""

    state: str
    shapes: tuple[str, ...]
    share: float | None
    share_low: float | None
    share_high: float | None
    visible: bool | None


@dataclass(frozen=True, slots=True, kw_only=True)
class FreezingOut:
    """How a ring system freezes out.

    Attributes
    ----------
    ring_system
        Number of the ring system, from 0.
    favoured, other
        The two forms that exchange, by their lowest state.
    dG_kcal
        Free energy of the other form above the favoured one [kcal/mol]; 0 for equal forms, None when unknown.
    barrier
        Tabulated barrier, or None when the tables have none for this ring.
    barrier_kcal, reverse_barrier_kcal, barrier_uncertainty_kcal
        From the favoured form, from the other one, standard uncertainty [kcal/mol].
    rate_per_s, rate_low, rate_high
        Favoured to other at the temperature of the question [1/s], with 95 % limits.
    spectrometer
        What is watched.
    coalescence_K, coalescence_low_K, coalescence_high_K
        Coalescence temperature with 95 % limits [K].
    coalescence_rate_per_s
        Rate out of the favoured form there [1/s].
    favoured_share
        Share of the favoured form there [-].
    exchange
        ``fast``, ``intermediate`` or ``slow`` at the temperature of the question, else empty.
    cold_K, frozen
        Temperature [K] and forms of the slow-exchange spectrum.
    convention
        What rate and barrier mean.
    remark
        What the reader should know.
    """

    ring_system: int
    favoured: str
    other: str
    dG_kcal: float | None
    barrier: Barrier | None
    barrier_kcal: float | None = None
    reverse_barrier_kcal: float | None = None
    barrier_uncertainty_kcal: float | None = None
    rate_per_s: float | None = None
    rate_low: float | None = None
    rate_high: float | None = None
    spectrometer: Spectrometer
    coalescence_K: float | None = None
    coalescence_low_K: float | None = None
    coalescence_high_K: float | None = None
    coalescence_rate_per_s: float | None = None
    favoured_share: float | None = None
    exchange: str = ""
    cold_K: float
    frozen: tuple[FrozenForm, ...]
    convention: str = CONVENTION
    remark: str = ""

    def as_dict(self) -> dict[str, object]:
        """The block as the JSON of an nmr document shows it."""
        barrier = self.barrier
        return {
            "ring_system": self.ring_system,
            "favoured": self.favoured,
            "other": self.other,
            "dG_kcal": self.dG_kcal,
            "ring": barrier.ring if barrier else None,
            "barrier_kcal": self.barrier_kcal,
            "reverse_barrier_kcal": self.reverse_barrier_kcal,
            "barrier_uncertainty_kcal": self.barrier_uncertainty_kcal,
            "barrier_estimated": barrier.estimated if barrier else None,
            "source": barrier.source if barrier else None,
            "known_by": barrier.known_by if barrier else None,
            "rate_per_s": self.rate_per_s,
            "rate_low": self.rate_low,
            "rate_high": self.rate_high,
            "frequency_MHz": self.spectrometer.frequency_MHz,
            "gap_Hz": self.spectrometer.gap_Hz,
            "coupling_Hz": self.spectrometer.coupling_Hz,
            "coalescence_K": self.coalescence_K,
            "coalescence_low_K": self.coalescence_low_K,
            "coalescence_high_K": self.coalescence_high_K,
            "coalescence_rate_per_s": self.coalescence_rate_per_s,
            "favoured_share": self.favoured_share,
            "exchange": self.exchange or None,
            "cold_K": self.cold_K,
            "frozen": [
                {
                    "state": form.state,
                    "shapes": list(form.shapes),
                    "share": form.share,
                    "share_low": form.share_low,
                    "share_high": form.share_high,
                    "visible": form.visible,
                }
                for form in self.frozen
            ],
            "convention": self.convention,
            "remark": self.remark,
        }


def find_freezing(
    analysis: Analysis, tables: Tables, spectra: SpectralTables, spectrometer: Spectrometer
) -> tuple[FreezingOut | None, ...]:
    """How each ring system freezes out; None where no flip exists.

    Parameters
    ----------
    analysis
        The answer at the temperature of the question.
    tables, spectra
        Price and NMR tables.
    spectrometer
        What is watched.
    """
    cold_K = spectra.general("cold spectrum").value
    found: list[FreezingOut | None] = []
    cold: Analysis | None = None
    for number, result in enumerate(analysis.ring_systems):
        partner = flip_partner(result)
        if partner is None or result.locked:
            found.append(None)
            continue
        if cold is None:
            cold = analyze(analysis.structure, temperature_K=cold_K, medium=analysis.medium, tables=tables)
        frozen = _frozen_forms(cold.ring_systems[number], cold_K, spectra)
        found.append(_freeze(number, result, partner, analysis, frozen, tables, spectra, spectrometer))
    return tuple(found)


def flip_partner(result: SystemResult) -> State | None:
    """The state in which every ring of the favoured state is turned over, or None when there is none."""
    own = result.states[0].detail.shapes.rings
    for state in result.states:
        rings = state.detail.shapes.rings
        if all(
            a.shape == b.shape and all(abs(x + y) < 1.0 for x, y in zip(a.torsions, b.torsions, strict=True))
            for a, b in zip(own, rings, strict=True)
        ):
            return state
    return None


def _frozen_forms(result: SystemResult, cold_K: float, spectra: SpectralTables) -> tuple[FrozenForm, ...]:
    """Forms of the cold spectrum, largest first."""
    threshold = spectra.general("visible share").value
    members: dict[int, list[int]] = {}
    for number, form in enumerate(ring_forms(result)):
        members.setdefault(form, []).append(number)
    known = shares_of(result, cold_K)
    found = []
    for numbers in members.values():
        first = result.states[numbers[0]]
        share = None if known is None else min(1.0, math.fsum(known[i] for i in numbers))
        limits = [(result.states[i].population_low, result.states[i].population_high) for i in numbers]
        low, high = (_total(column) for column in zip(*limits, strict=True))
        found.append(
            FrozenForm(
                state=first.id,
                shapes=first.shapes,
                share=share,
                share_low=low,
                share_high=high,
                visible=None if share is None else share >= threshold,
            )
        )
    return tuple(form for form in found if form.share is None or form.share >= 1e-4 or form is found[0])


def _total(limits: tuple[float | None, ...]) -> float | None:
    """Sum of limits, at most 1; None when one is unknown."""
    known = [limit for limit in limits if limit is not None]
    return min(1.0, math.fsum(known)) if len(known) == len(limits) else None


def _difference(result: SystemResult, partner: State, temperature_K: float) -> tuple[float | None, bool]:
    """Free energy of the flipped form above the favoured one [kcal/mol], and whether the two are alike."""
    forms = ring_forms(result)
    other = forms[result.states.index(partner)]
    if other == forms[0]:
        return 0.0, True
    known = shares_of(result, temperature_K)
    if known is None:
        return None, False
    shares: dict[int, float] = {}
    for share, form in zip(known, forms, strict=True):
        shares[form] = shares.get(form, 0.0) + share
    if shares[other] <= 0.0:
        return None, False
    return R_KCAL * temperature_K * math.log(shares[forms[0]] / shares[other]), False


def _freeze(
    number: int,
    result: SystemResult,
    partner: State,
    analysis: Analysis,
    frozen: tuple[FrozenForm, ...],
    tables: Tables,
    spectra: SpectralTables,
    spectrometer: Spectrometer,
) -> FreezingOut:
    temperature = analysis.temperature_K
    dg, alike = _difference(result, partner, temperature)
    barrier = find_barrier(result, tables, spectra)
    block = FreezingOut(
        ring_system=number,
        favoured=result.states[0].id,
        other=partner.id,
        dG_kcal=dg,
        barrier=barrier,
        spectrometer=spectrometer,
        cold_K=spectra.general("cold spectrum").value,
        frozen=frozen,
    )
    if barrier is None:
        return replace(block, remark="No barrier is tabulated for this ring.")
    bias = dg or 0.0
    sigma = math.hypot(barrier.sigma_kcal, bias / 4.0)
    forward = barrier.at(temperature) + bias / 2.0
    rates = [eyring_rate(forward + shift * Z95 * sigma, temperature) for shift in (0.0, 1.0, -1.0)]
    block = replace(
        block,
        barrier_kcal=forward,
        reverse_barrier_kcal=barrier.at(temperature) - bias / 2.0,
        barrier_uncertainty_kcal=sigma,
        rate_per_s=rates[0],
        rate_low=rates[1],
        rate_high=rates[2],
    )
    if _share(bias, temperature) > MOST_BIASED:
        return replace(block, remark="The other form holds under 0.1 %: no exchange is to be seen.")
    limits = [_coalescence(barrier, bias, shift * Z95 * sigma, spectrometer) for shift in (0.0, -1.0, 1.0)]
    warm = limits[0]
    critical = _critical_rate(bias, warm, spectrometer) if warm is not None else None
    return replace(
        block,
        coalescence_K=warm,
        coalescence_low_K=limits[1],
        coalescence_high_K=limits[2],
        coalescence_rate_per_s=critical,
        favoured_share=_share(bias, warm) if warm is not None else None,
        exchange=_exchange(rates[0], critical),
        remark=_remark(dg, alike, warm, frozen),
    )


def _share(bias_kcal: float, temperature_K: float) -> float:
    return 1.0 / (1.0 + math.exp(-bias_kcal / (R_KCAL * temperature_K)))


def _critical_rate(bias_kcal: float, temperature_K: float, spectrometer: Spectrometer) -> float:
    """Rate out of the favoured form at coalescence [1/s]."""
    if abs(bias_kcal) < 1e-9:
        return coalescence_rate(spectrometer.gap_Hz, spectrometer.coupling_Hz)
    share = min(max(_share(bias_kcal, temperature_K), 1e-9), 1.0 - 1e-9)
    out_of_major, out_of_minor = unequal_coalescence_rates(spectrometer.gap_Hz, max(share, 1.0 - share))
    return out_of_major if share >= 0.5 else out_of_minor


def _coalescence(barrier: Barrier, bias: float, shift: float, spectrometer: Spectrometer) -> float | None:
    """Coalescence temperature [K], or None outside any temperature an instrument reaches."""

    def surplus(temperature: float) -> float:
        rate = eyring_rate(barrier.at(temperature) + bias / 2.0 + shift, temperature)
        return math.log(max(rate, 1e-300)) - math.log(_critical_rate(bias, temperature, spectrometer))

    if surplus(_COLDEST_K) > 0 or surplus(_HOTTEST_K) < 0:
        return None
    return solve(surplus, _COLDEST_K, _HOTTEST_K)


def _exchange(rate: float, critical: float | None) -> str:
    if critical is None:
        return ""
    return "fast" if rate > 10 * critical else "slow" if rate < critical / 10 else "intermediate"


def _remark(dg: float | None, alike: bool, warm: float | None, frozen: tuple[FrozenForm, ...]) -> str:
    if dg is None:
        return "The free energy difference is not known; coalescence is worked out for equal forms."
    if warm is None:
        return "No coalescence within reach."
    if not alike and len([form for form in frozen if form.visible]) < 2:
        return "The other form stays below 1 %: lines broaden and sharpen again without a second set to be seen."
    return ""
