"""Ledgers and a temperature turned into populations, K and free energy differences with their uncertainty.

All states of a labelled structure are counted, one each; symmetry numbers, meso forms and mirror-image chairs
come out of that count.  Uncertainties follow the random variables of the prices, so that what two states have in
common cancels.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from ringstrain.ledger import Ledger, Line, Regime, regime_of
from ringstrain.provenance import Variables
from ringstrain.units import R_KCAL, Z95


@dataclass(frozen=True, slots=True, kw_only=True)
class Equilibrium:
    """The equilibrium between the favoured form and the other ring form.

    Attributes
    ----------
    favoured, other
        Ids of the lowest state of each set.
    dG_kcal
        RT ln K, positive [kcal/mol]; None when an unpriced contact decides.
    uncertainty_kcal
        One standard uncertainty of dG [kcal/mol].
    K, K_low, K_high
        [favoured]/[other] with its 95 % limits; None when an unpriced contact decides.
    bound
        ``"at least"``, ``"at most"`` or ``"not determined"`` when a contact has no price, else empty.
    known_part_kcal
        Difference of the known lines [kcal/mol].
    regime
        Least certain kind of line that does not cancel.
    """

    favoured: str
    other: str
    dG_kcal: float | None
    uncertainty_kcal: float | None
    K: float | None
    K_low: float | None
    K_high: float | None
    bound: str = ""
    known_part_kcal: float = 0.0
    regime: Regime = "additive"

    def as_dict(self) -> dict[str, object]:
        """The equilibrium as the JSON of a chairs document shows it."""
        return {
            "favoured": self.favoured,
            "other": self.other,
            "dG_kcal": self.dG_kcal,
            "uncertainty_kcal": self.uncertainty_kcal,
            "K": self.K,
            "K_low": self.K_low,
            "K_high": self.K_high,
            "bound": self.bound,
            "known_part_kcal": self.known_part_kcal,
            "regime": self.regime,
        }


@dataclass(frozen=True, slots=True)
class Population:
    """Share of a state with its 95 % limits."""

    value: float
    low: float
    high: float


def weights(energies_kcal: Sequence[float], temperature_K: float) -> list[float]:
    """Boltzmann shares of energies [kcal/mol] at a temperature [K]; they sum to 1."""
    lowest = min(energies_kcal)
    factors = [math.exp(-(e - lowest) / (R_KCAL * temperature_K)) for e in energies_kcal]
    total = math.fsum(factors)
    return [f / total for f in factors]


def mixture_energy(energies_kcal: Sequence[float], temperature_K: float) -> float:
    """Free energy of a set of states, -RT ln of the sum of their Boltzmann factors [kcal/mol]."""
    lowest = min(energies_kcal)
    if len(energies_kcal) == 1:
        return lowest
    rt = R_KCAL * temperature_K
    return lowest - rt * math.log(math.fsum(math.exp(-(e - lowest) / rt) for e in energies_kcal))


def blended(variables: Sequence[Variables], shares: Sequence[float]) -> Variables:
    """Variables of a set of states: the share-weighted mean of their coefficients."""
    if len(variables) == 1:
        return variables[0]
    table: Variables = {}
    for own, share in zip(variables, shares, strict=True):
        for key, (count, sigma) in own.items():
            before, _ = table.get(key, (0.0, 0.0))
            table[key] = (before + share * count, sigma)
    return table


def difference_sigma(first: Variables, second: Variables) -> float:
    """Standard uncertainty of the difference of two sets [kcal/mol]; common terms cancel."""
    total = 0.0
    for key in first | second:  # not a set, whose order and so the last digit would differ from run to run
        a, sigma_a = first.get(key, (0.0, 0.0))
        b, sigma_b = second.get(key, (0.0, 0.0))
        total += ((a - b) * max(sigma_a, sigma_b)) ** 2
    return math.sqrt(total)


def differing_lines(first: Ledger, second: Ledger) -> list[Line]:
    """Lines whose counts differ between two ledgers."""
    counts: dict[tuple[str, tuple[str, ...], str], float] = {}
    samples: dict[tuple[str, tuple[str, ...], str], Line] = {}
    for sign, ledger in ((1, first), (-1, second)):
        for line in ledger.lines:
            key = line.key
            counts[key] = counts.get(key, 0.0) + sign * line.count
            samples[key] = line
    return [samples[key] for key, count in counts.items() if abs(count) > 1e-9]


def unknown_difference(favoured: Ledger, other: Ledger) -> str:
    """What unpriced contacts leave of a difference: empty when they cancel, else which way it is bounded."""
    lines = [line for line in differing_lines(favoured, other) if line.value_kcal is None]
    if not lines:
        return ""
    if any(line.of_any_sign for line in lines):
        return "not determined"
    counts = {line.key: line.count for line in favoured.lines}
    more_favoured = [line for line in lines if counts.get(line.key, 0.0) > _count_of(other, line)]
    if not more_favoured:
        return "at least"
    return "at most" if len(more_favoured) == len(lines) else "not determined"


def _count_of(ledger: Ledger, line: Line) -> float:
    return next((own.count for own in ledger.lines if own.key == line.key), 0.0)


def populations(
    ledgers: Sequence[Ledger],
    sets: Sequence[int],
    temperature_K: float,
    model_terms: dict[str, float],
    energies_kcal: Sequence[float] | None = None,
) -> list[Population]:
    """Share of each state with its 95 % limits.

    Parameters
    ----------
    ledgers
        One per state.
    sets
        Number of the set of equivalent ring forms each state belongs to; states of one set share the
        uncertainty of the model.
    temperature_K
        Temperature [K].
    model_terms
        Standard uncertainty of the model by regime [kcal/mol].
    energies_kcal
        Energies [kcal/mol] when they are not the ledger totals.

    Returns
    -------
    list of Population
        In the order of the states.

    Notes
    -----
    Delta method on the log odds, ln p/(1 - p): their change is -(dE_i - <dE of the others>)/RT.  Between two states
    these are the limits of K; on ln p the favoured share would look surer than K allows.
    """
    energies = list(energies_kcal) if energies_kcal is not None else [ledger.total_kcal for ledger in ledgers]
    shares = weights(energies, temperature_K)
    count = len(ledgers)
    sigmas: dict[tuple[str, str], float] = {}
    counts: dict[tuple[str, str], list[float]] = {}
    for number, ledger in enumerate(ledgers):
        for key, (coefficient, sigma) in ledger.variables.items():
            row = counts.get(key)
            if row is None:
                row = counts[key] = [0.0] * count
                sigmas[key] = sigma
            row[number] = coefficient
    for form in dict.fromkeys(sets):
        if form != sets[0]:
            members = [number for number in range(count) if sets[number] == form]
            regime = regime_of(differing_lines(ledgers[0], ledgers[members[0]]))
            key = ("model", str(form))
            counts[key] = [1.0 if number in members else 0.0 for number in range(count)]
            sigmas[key] = model_terms.get(regime, 0.0)
    others = [math.fsum(shares[:number] + shares[number + 1 :]) for number in range(count)]
    variances = [0.0] * count
    for key, row in counts.items():
        sigma = sigmas[key]
        if not sigma:
            continue
        mean = sum([share * own for share, own in zip(shares, row)])
        variances = [before + ((own - mean) * sigma) ** 2 for before, own in zip(variances, row)]
    outcome = []
    for share, rest, variance in zip(shares, others, variances, strict=True):
        if not rest:
            outcome.append(Population(share, share, share))
            continue
        width = min(Z95 * math.sqrt(variance) / (rest * R_KCAL * temperature_K), 50.0)
        factor = math.exp(width)
        outcome.append(Population(share, share / (share + rest * factor), share / (share + rest / factor)))
    return outcome


def compare(
    favoured: Sequence[tuple[str, Ledger]],
    other: Sequence[tuple[str, Ledger]],
    temperature_K: float,
    model_terms: dict[str, float],
) -> Equilibrium:
    """The equilibrium between two sets of states.

    Parameters
    ----------
    favoured, other
        Id and ledger of each state, lowest first.
    temperature_K
        Temperature [K].
    model_terms
        Standard uncertainty of the model by regime [kcal/mol].

    Returns
    -------
    Equilibrium
        K of the summed populations.
    """
    rt = R_KCAL * temperature_K
    sides = []
    for group in (favoured, other):
        energies = [ledger.total_kcal for _, ledger in group]
        shares = weights(energies, temperature_K)
        blend = blended([ledger.variables for _, ledger in group], shares)
        sides.append((mixture_energy(energies, temperature_K), blend))
    dg = sides[1][0] - sides[0][0]
    lines = differing_lines(favoured[0][1], other[0][1])
    regime = regime_of(lines)
    sigma = math.hypot(difference_sigma(sides[0][1], sides[1][1]), model_terms.get(regime, 0.0))
    bound = unknown_difference(favoured[0][1], other[0][1])
    if bound:
        return Equilibrium(
            favoured=favoured[0][0],
            other=other[0][0],
            dG_kcal=None,
            uncertainty_kcal=None,
            K=None,
            K_low=None,
            K_high=None,
            bound=bound,
            known_part_kcal=dg,
            regime=regime,
        )
    limit = [math.exp(min(max(x / rt, -700.0), 700.0)) for x in (dg, dg - Z95 * sigma, dg + Z95 * sigma)]
    signs = {line.bound for line in lines if line.bound}
    return Equilibrium(
        favoured=favoured[0][0],
        other=other[0][0],
        dG_kcal=dg,
        uncertainty_kcal=sigma,
        K=limit[0],
        K_low=limit[1],
        K_high=limit[2],
        bound="at least" if signs and _bounds_other(lines, other[0][1], favoured[0][1]) else "",
        known_part_kcal=dg,
        regime=regime,
    )


def _bounds_other(lines: Sequence[Line], other: Ledger, favoured: Ledger) -> bool:
    """True when every lower-bound line weighs on the other side only, so that dG is a lower bound too."""
    bounded = [line for line in lines if line.bound]
    return all(_count_of(other, line) > _count_of(favoured, line) for line in bounded)
