"""Averages over the states of a ring system, with the uncertainty that populations bring."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from ringstrain.equilibrium import differing_lines, weights
from ringstrain.ledger import regime_of
from ringstrain.provenance import Variables
from ringstrain.results import State, SystemResult
from ringstrain.units import R_KCAL

#: Share up to which states of unknown energy may be left out of averages [-].
NEGLIGIBLE = 0.01
_ANY_SIGN = "of any sign"


@dataclass(frozen=True, slots=True, kw_only=True)
class Average:
    """A mean over states and the standard uncertainty that the populations give it [unit of the values]."""

    mean: float
    spread: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Ensemble:
    """States of a ring system with what their populations depend on.

    Attributes
    ----------
    ids
        State ids.
    shares
        Populations [-]; None when an unpriced contact decides.
    temperature_K
        Temperature [K].
    forms
        Number of the ring form of each state: symmetry copies and N-invertomers share one.
    """

    ids: tuple[str, ...]
    shares: tuple[float, ...] | None
    temperature_K: float
    forms: tuple[int, ...]
    _variables: tuple[Variables, ...]

    def average(self, values: Sequence[float | None]) -> Average | None:
        """Population-weighted mean of one value a state.

        Parameters
        ----------
        values
            In the order of the states; None where the value is unknown.

        Returns
        -------
        Average or None
            None when a populated state has no value or the populations are unknown.

        Notes
        -----
        Delta method: d mean = -sum p (value - mean) dE / RT over the random variables of the prices.
        """
        if self.shares is None:
            return None
        known = [(p, v) for p, v in zip(self.shares, values, strict=True) if v is not None]
        missing = 1.0 - math.fsum(p for p, _ in known)
        if not known or missing > 1e-3:
            return None
        total = math.fsum(p for p, _ in known)
        mean = math.fsum(p * v for p, v in known) / total
        slopes: dict[tuple[str, str], float] = {}
        for share, value, own in zip(self.shares, values, self._variables, strict=True):
            if value is None:
                continue
            for key, (count, sigma) in own.items():
                slopes[key] = slopes.get(key, 0.0) + share * (value - mean) * count * sigma
        rt = R_KCAL * self.temperature_K
        range_ = max(v for _, v in known) - min(v for _, v in known)
        spread = math.sqrt(sum(slope**2 for slope in slopes.values())) / rt
        return Average(mean=mean, spread=min(spread, range_ / 2))


def make_ensemble(result: SystemResult, temperature_K: float, model_terms: dict[str, float]) -> Ensemble:
    """The states of a ring system as an ensemble.

    Parameters
    ----------
    result
        The ring system.
    temperature_K
        Temperature [K].
    model_terms
        Standard uncertainty of the model by regime [kcal/mol].
    """
    forms = ring_forms(result)
    reference = result.states[0].detail.ledger
    variables = []
    for state, form in zip(result.states, forms, strict=True):
        own = state.detail.ledger.variables
        if form != forms[0]:
            regime = regime_of(differing_lines(reference, state.detail.ledger))
            own[("model", str(form))] = (1.0, model_terms.get(regime, 0.0))
        variables.append(own)
    return Ensemble(
        ids=tuple(state.id for state in result.states),
        shares=shares_of(result, temperature_K),
        temperature_K=temperature_K,
        forms=forms,
        _variables=tuple(variables),
    )


def shares_of(result: SystemResult, temperature_K: float) -> tuple[float, ...] | None:
    """Populations of the states, or None when an unpriced contact decides them.

    Parameters
    ----------
    result
        The ring system.
    temperature_K
        Temperature [K].

    Returns
    -------
    tuple or None
        In the order of the states.  A state whose unpriced contacts can only raise it counts as empty when its known
        part alone keeps it, with all others of the kind, below :data:`NEGLIGIBLE`.
    """
    known = [state.population for state in result.states]
    if all(p is not None for p in known):
        return tuple(p for p in known if p is not None)
    tallies = [_unknown(state) for state in result.states]
    beyond = [tally != tallies[0] for tally in tallies]
    if any(tally.pop(_ANY_SIGN, 0.0) for tally, far in zip(tallies, beyond, strict=True) if far):
        return None
    if any(tally.get(key, 0.0) < count for tally in tallies for key, count in tallies[0].items()):
        return None
    shares = weights([state.energy_kcal for state in result.states], temperature_K)
    if math.fsum(p for p, far in zip(shares, beyond, strict=True) if far) > NEGLIGIBLE:
        return None
    total = math.fsum(p for p, far in zip(shares, beyond, strict=True) if not far)
    return tuple(0.0 if far else p / total for p, far in zip(shares, beyond, strict=True))


def _unknown(state: State) -> dict[object, float]:
    """How often each unpriced line counts in a state; an entry of its own when one may lower it."""
    tally: dict[object, float] = {}
    for line in state.lines:
        if line.value_kcal is None:
            tally[line.key] = tally.get(line.key, 0.0) + line.count
            if line.of_any_sign:
                tally[_ANY_SIGN] = 1.0
    return tally


def ring_forms(result: SystemResult) -> tuple[int, ...]:
    """Number of the ring form of each state, lowest first; copies by symmetry share the number of their original."""
    by_id = {state.id: state for state in result.states}
    numbers: dict[object, int] = {}
    return tuple(
        numbers.setdefault(_original(state, by_id).detail.shapes.rings, len(numbers)) for state in result.states
    )


def _original(state: State, by_id: dict[str, State]) -> State:
    while state.equivalent_to is not None:
        state = by_id[state.equivalent_to]
    return state
