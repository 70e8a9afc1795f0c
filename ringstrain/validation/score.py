"""What the model predicts for a published equilibrium.

Free energies and ratios count every labelled state of both sides; two compounds are weighted as the
enumeration of all labelled configurations weights them: each compound by the inverse of the number of its
symmetry operations, mirror ones included, so that racemates, meso forms and symmetry numbers come out right.
Enthalpies and energies are the population-weighted mean energies without statistics; where A-values alone
separate the two sides, groups with a known enthalpy enter with that, every other number is the free energy.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from ringstrain.analysis import Analysis, State, SystemResult, analyze
from ringstrain.equilibrium import (
    blended,
    difference_sigma,
    differing_lines,
    mixture_energy,
    unknown_difference,
    weights,
)
from ringstrain.errors import InputError, OutOfScope
from ringstrain.ledger import Ledger, Line, Regime, regime_of
from ringstrain.provenance import Variables
from ringstrain.symmetry import operations
from ringstrain.tables import Tables
from ringstrain.units import R_KCAL, Z95
from ringstrain.validation.difference import DifferenceLine, difference_lines
from ringstrain.validation.orientation import matching_states, parse_orientation
from ringstrain.validation.rows import MeasuredRow

Status = Literal["scored", "not determined", "not yet in scope", "left out", "unreadable"]
#: Population below which a state's missing prices do not matter [-].
_RARE = 0.02
#: A prediction this near a measured value of its own source is that value [kcal/mol].
_SAME = 0.01


@dataclass(frozen=True, slots=True, kw_only=True)
class Prediction:
    """What the model says about B minus A.

    Attributes
    ----------
    energy_kcal
        B minus A [kcal/mol]; the known part when ``bound`` is not empty.
    sigma_kcal
        One standard uncertainty, that of the model included [kcal/mol].
    bound
        ``"at least"``, ``"at most"`` or ``"not determined"`` when a contact has no price, else empty.
    statistics_kcal
        The part that counting states and configurations adds [kcal/mol].
    regime
        Least certain kind of line that differs.
    lines
        The lines that separate the lowest state of A from that of B.
    """

    energy_kcal: float
    sigma_kcal: float
    bound: str
    statistics_kcal: float
    regime: Regime
    lines: tuple[DifferenceLine, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Score:
    """One published equilibrium beside its prediction.

    Attributes
    ----------
    row
        What was measured.
    status
        Whether it is scored, and if not why.
    prediction
        None when there is none.
    reason
        One sentence when it is not scored, else empty.
    returns_itself
        True when the prediction uses a price of the same source and gives the measured number back.
    """

    row: MeasuredRow
    status: Status
    prediction: Prediction | None = None
    reason: str = ""
    returns_itself: bool = False

    @property
    def difference_kcal(self) -> float | None:
        """Predicted less measured [kcal/mol]; None when not scored or when only a bound was measured."""
        if self.status != "scored" or self.prediction is None or self.row.bound:
            return None
        return self.prediction.energy_kcal - self.row.energy_kcal

    @property
    def sigma_kcal(self) -> float | None:
        """Standard uncertainty of the difference: model and measurement in quadrature [kcal/mol].

        A measurement that came without uncertainty adds none.
        """
        if self.prediction is None:
            return None
        return math.hypot(self.prediction.sigma_kcal, self.row.energy_uncertainty_kcal or 0.0)

    @property
    def is_covered(self) -> bool | None:
        """True when predicted and measured value agree within 95 %; None when not scored or only bounded."""
        if self.difference_kcal is None or self.sigma_kcal is None:
            return None
        return abs(self.difference_kcal) <= Z95 * self.sigma_kcal

    @property
    def is_within_bound(self) -> bool | None:
        """True when the prediction lies in the direction a measured bound gives; None without a bound."""
        if self.status != "scored" or self.prediction is None or not self.row.bound:
            return None
        return self.prediction.energy_kcal * self.row.energy_kcal > 0

    @property
    def is_independent(self) -> bool:
        """False when the row feeds the prices, by its role or because its own number comes back unchanged."""
        return self.row.role != "input" and not self.returns_itself

    @property
    def is_right_winner(self) -> bool | None:
        """True when the predicted winner is the measured one; None below a measured 0.3 kcal/mol."""
        if self.status != "scored" or self.prediction is None or abs(self.row.energy_kcal) <= 0.3:
            return None
        return self.prediction.energy_kcal * self.row.energy_kcal > 0


@dataclass(frozen=True, slots=True)
class Side:
    """All states of A or of B taken together.

    Attributes
    ----------
    energy_kcal
        Free energy of the mixture, or its mean energy without statistics [kcal/mol].
    bare_kcal
        Energy of the lowest state [kcal/mol].
    variables
        Random variables, weighted by population.
    lowest
        Ledger of the lowest state.
    uneven
        True when a state that matters lacks other prices than the lowest one.
    """

    energy_kcal: float
    bare_kcal: float
    variables: Variables
    lowest: Ledger
    uneven: bool


def gather(states_by_system: Sequence[Sequence[State]], temperature_K: float, *, statistics: bool) -> Side:
    """Take states together; those of different ring systems add.

    Parameters
    ----------
    states_by_system
        States of each ring system.
    temperature_K
        Temperature [K].
    statistics
        True for a free energy, False for a mean energy.

    Returns
    -------
    Side
        Energy, variables and lowest ledger.
    """
    energy = bare = 0.0
    variables: Variables = {}
    lines: list[Line] = []
    uneven = False
    for states in states_by_system:
        ledgers = [state.detail.ledger for state in states]
        energies = [ledger.total_kcal for ledger in ledgers]
        shares = weights(energies, temperature_K)
        lowest = ledgers[energies.index(min(energies))]
        bare += min(energies)
        energy += (
            mixture_energy(energies, temperature_K)
            if statistics
            else math.fsum(share * e for share, e in zip(shares, energies, strict=True))
        )
        for key, (count, sigma) in blended([ledger.variables for ledger in ledgers], shares).items():
            before, _ = variables.get(key, (0.0, 0.0))
            variables[key] = (before + count, sigma)
        lines.extend(lowest.lines)
        missing = _missing(lowest)
        uneven |= any(share > _RARE and _missing(own) != missing for share, own in zip(shares, ledgers, strict=True))
    return Side(energy, bare, variables, Ledger.of(lines), uneven)


def _missing(ledger: Ledger) -> list[tuple[tuple[str, tuple[str, ...], str], float]]:
    return sorted((line.key, line.count) for line in ledger.unknown)


def configuration_weight(results: Sequence[SystemResult]) -> float:
    """Share of all labelled configurations that are this compound, up to a factor common to its diastereomers.

    Parameters
    ----------
    results
        Ring systems of the compound.

    Returns
    -------
    float
        One over the number of symmetry operations, mirror ones included [-].

    Notes
    -----
    The labelled configurations of a constitution fall into orbits under its automorphisms and the mirror; the
    orbit of a compound has as many members as there are operations in all, over those that leave it as it is.
    """
    weight = 1.0
    for result in results:
        weight /= len(operations(result.states[0].detail.shapes.geometry, dict(result.groups)))
    return weight


def medium_of(row: MeasuredRow, tables: Tables) -> str:
    """The medium to ask for: the solvent when the tables know it, else its class; nonpolar for ``any``."""
    if row.solvent and tables.find_solvent(row.solvent) is not None:
        return row.solvent
    return "nonpolar" if row.medium == "any" else row.medium


def score_row(row: MeasuredRow, tables: Tables) -> Score:
    """A published equilibrium beside what the model predicts for it.

    Parameters
    ----------
    row
        What was measured.
    tables
        Price tables.

    Returns
    -------
    Score
        Never dropped: a row that cannot be scored says why.
    """
    if row.role not in ("score", "input"):
        return Score(row=row, status="left out", reason=f"{row.role}: {row.role_note}")
    if row.kind not in ("chair", "diastereomer", "anomer"):
        return Score(row=row, status="left out", reason=f"{row.kind} is no equilibrium of two forms")
    try:
        sides, factor = _sides(row, tables)
    except OutOfScope as error:
        return Score(row=row, status="not yet in scope", reason=error.problem)
    except (InputError, ValueError) as error:
        return Score(row=row, status="unreadable", reason=str(error))
    prediction = _difference(row, sides[0], sides[1], factor, tables)
    status: Status = "not determined" if prediction.bound else "scored"
    reason = "a contact without a price decides" if prediction.bound else ""
    return Score(
        row=row,
        status=status,
        prediction=prediction,
        reason=reason,
        returns_itself=_returns_itself(row, prediction, tables),
    )


def _returns_itself(row: MeasuredRow, prediction: Prediction, tables: Tables) -> bool:
    """True when a price from the row's own source gives the row's own number back."""
    if abs(prediction.energy_kcal - row.energy_kcal) > _SAME:
        return False
    return any(_source(line.row, tables) == row.source for line in prediction.lines)


def _source(name: str, tables: Tables) -> str:
    """Source of a price row, empty for estimates and rules made of several."""
    try:
        return tables.row(name).source
    except KeyError:
        return ""


def _analyze(row: MeasuredRow, smiles: str, tables: Tables) -> Analysis:
    return analyze(smiles, temperature_K=row.asked_temperature_K, medium=medium_of(row, tables), tables=tables)


def _sides(row: MeasuredRow, tables: Tables) -> tuple[tuple[Side, Side], float]:
    """States of A and of B, and the configuration weight of A over that of B."""
    first = _analyze(row, row.smiles_a, tables)
    if row.kind == "chair":
        forms = parse_orientation(row.orientation)
        for result in first.ring_systems:
            found = [matching_states(first.structure, result, form, tables) for form in forms]
            if not all(found):
                continue
            if {s.id for s in found[0]} & {s.id for s in found[1]}:
                raise ValueError(f"{row.orientation!r} does not tell A from B")
            return (_side(row, [found[0]]), _side(row, [found[1]])), 1.0
        if any(form.twist_boat for form in forms):
            raise OutOfScope("The twist-boat is not among the states offered.")
        raise ValueError(f"no pair of states is {row.orientation!r}")
    second = _analyze(row, row.smiles_b, tables)
    factor = configuration_weight(first.ring_systems) / configuration_weight(second.ring_systems)
    return (
        (_side(row, [r.states for r in first.ring_systems]), _side(row, [r.states for r in second.ring_systems])),
        factor,
    )


def _side(row: MeasuredRow, states_by_system: Sequence[Sequence[State]]) -> Side:
    return gather(states_by_system, row.asked_temperature_K, statistics=row.with_statistics)


def _difference(row: MeasuredRow, a: Side, b: Side, factor: float, tables: Tables) -> Prediction:
    """B minus A with its uncertainty and the lines that make it."""
    lines = differing_lines(a.lowest, b.lowest)
    regime = regime_of(lines)
    energy = b.energy_kcal - a.energy_kcal
    if row.with_statistics:
        energy += R_KCAL * row.asked_temperature_K * math.log(factor)
    else:
        energy += _enthalpy_shift(a.lowest, b.lowest, tables)
    bound = unknown_difference(a.lowest, b.lowest)
    if not bound and (a.uneven or b.uneven):
        bound = "not determined"
    return Prediction(
        energy_kcal=energy,
        sigma_kcal=math.hypot(difference_sigma(a.variables, b.variables), tables.model_terms.get(regime, 0.0)),
        bound=bound,
        statistics_kcal=energy - (b.bare_kcal - a.bare_kcal) if row.with_statistics else 0.0,
        regime=regime,
        lines=difference_lines(a.lowest, b.lowest),
    )


def _enthalpy_shift(a: Ledger, b: Ledger, tables: Tables) -> float:
    """What enthalpies instead of A-values change in B minus A, when A-values alone separate the two [kcal/mol]."""
    lines = difference_lines(a, b)
    if any(line.rule not in ("A-value", "ring fusion gauche") for line in lines):
        return 0.0
    shift = 0.0
    for line in lines:
        if line.rule != "A-value" or not line.row.startswith("avalues/") or line.value_kcal is None:
            continue
        claim = tables.row(line.row)
        if claim.dh_kcal is not None and claim.ds_cal is not None:
            shift += line.count * (-claim.dh_kcal - line.value_kcal)
    return shift
