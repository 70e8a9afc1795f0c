"""The accuracy table: how well the model does, group by group."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from ringstrain.ledger import REGIMES
from ringstrain.tables import Tables
from ringstrain.validation.rows import MeasuredRow
from ringstrain.validation.score import Score, score_row

ALL = "all groups"


@dataclass(frozen=True, slots=True, kw_only=True)
class GroupAccuracy:
    """Accuracy over one group of equilibria.

    Attributes
    ----------
    group
        Name of the group.
    rows
        Rows with a measured value and a prediction [-].
    mean_absolute_kcal, rms_kcal
        Mean absolute and root mean square difference [kcal/mol]; None without rows.
    worst, worst_kcal
        Row with the largest difference and that difference, predicted less measured [kcal/mol].
    winners_right, winners
        Rows that measured more than 0.3 kcal/mol (bounds included), and how many of them have the right winner.
    covered
        Rows whose measured value lies in the 95 % interval [-].
    bounds_right, bounds
        Rows that measured a bound only, and how many of them go in its direction.
    not_determined, not_in_scope, unreadable
        Rows without a score, by reason.
    """

    group: str
    rows: int
    mean_absolute_kcal: float | None
    rms_kcal: float | None
    worst: str
    worst_kcal: float | None
    winners_right: int
    winners: int
    covered: int
    bounds_right: int
    bounds: int
    not_determined: int
    not_in_scope: int
    unreadable: int

    def as_dict(self) -> dict[str, object]:
        """The group as the JSON of a validate document shows it."""
        return {name: getattr(self, name) for name in self.__slots__}


@dataclass(frozen=True, slots=True, kw_only=True)
class Spread:
    """What the differences of one regime say about its model term.

    Attributes
    ----------
    regime
        Name.
    rows
        Independent rows behind it [-].
    rms_kcal
        Root mean square difference [kcal/mol].
    excess_kcal
        What the uncertainty of prices and measurements leaves unexplained, one standard deviation [kcal/mol].
    """

    regime: str
    rows: int
    rms_kcal: float
    excess_kcal: float

    def as_dict(self) -> dict[str, object]:
        """The regime as the JSON of a validate document shows it."""
        return {name: getattr(self, name) for name in self.__slots__}


@dataclass(frozen=True, slots=True, kw_only=True)
class Validation:
    """The model against all published equilibria.

    Attributes
    ----------
    scores
        One per row of equilibria.csv, in file order.
    independent
        Accuracy by group over rows that do not feed the prices; the last one is over all groups.
    inputs
        The same over rows that do.
    spreads
        By regime, from the independent rows.
    left_out
        Rows left out by role: name and count.
    """

    scores: tuple[Score, ...]
    independent: tuple[GroupAccuracy, ...]
    inputs: tuple[GroupAccuracy, ...]
    spreads: tuple[Spread, ...]
    left_out: tuple[tuple[str, int], ...]


def validate(rows: Iterable[MeasuredRow], tables: Tables) -> Validation:
    """Score published equilibria against the model.

    Parameters
    ----------
    rows
        What was measured.
    tables
        Price tables.

    Returns
    -------
    Validation
        Every row has a score; none is dropped.
    """
    scores = tuple(score_row(row, tables) for row in rows)
    counted = [score for score in scores if score.status != "left out"]
    left_out: dict[str, int] = {}
    for score in scores:
        if score.status == "left out":
            left_out[score.row.role] = left_out.get(score.row.role, 0) + 1
    return Validation(
        scores=scores,
        independent=summarise([score for score in counted if score.is_independent]),
        inputs=summarise([score for score in counted if not score.is_independent]),
        spreads=spread_by_regime([score for score in counted if score.is_independent], tables),
        left_out=tuple(sorted(left_out.items())),
    )


def summarise(scores: Sequence[Score]) -> tuple[GroupAccuracy, ...]:
    """Accuracy by group in order of appearance, the last entry over all of them.

    Parameters
    ----------
    scores
        Rows that count.

    Returns
    -------
    tuple of GroupAccuracy
        Empty when there are no rows.
    """
    groups: dict[str, list[Score]] = {}
    for score in scores:
        groups.setdefault(score.row.group, []).append(score)
    if not groups:
        return ()
    return (*(_accuracy(group, own) for group, own in groups.items()), _accuracy(ALL, scores))


def _accuracy(group: str, scores: Sequence[Score]) -> GroupAccuracy:
    gaps = [(gap, score.row.id) for score in scores if (gap := score.difference_kcal) is not None]
    worst_gap, worst = max(gaps, key=lambda g: abs(g[0]), default=(None, ""))
    winners = [right for score in scores if (right := score.is_right_winner) is not None]
    bounds = [right for score in scores if (right := score.is_within_bound) is not None]
    return GroupAccuracy(
        group=group,
        rows=len(gaps),
        mean_absolute_kcal=math.fsum(abs(g) for g, _ in gaps) / len(gaps) if gaps else None,
        rms_kcal=math.sqrt(math.fsum(g * g for g, _ in gaps) / len(gaps)) if gaps else None,
        worst=worst,
        worst_kcal=worst_gap,
        winners_right=sum(winners),
        winners=len(winners),
        covered=sum(score.is_covered is True for score in scores),
        bounds_right=sum(bounds),
        bounds=len(bounds),
        not_determined=sum(score.status == "not determined" for score in scores),
        not_in_scope=sum(score.status == "not yet in scope" for score in scores),
        unreadable=sum(score.status == "unreadable" for score in scores),
    )


def spread_by_regime(scores: Sequence[Score], tables: Tables) -> tuple[Spread, ...]:
    """How far predictions miss by regime, and what their known uncertainties leave unexplained.

    Parameters
    ----------
    scores
        Independent rows.
    tables
        Tables whose model terms are taken off again.

    Returns
    -------
    tuple of Spread
        Regimes without rows are left out.
    """
    found = []
    for regime in REGIMES:
        gaps, known = [], []
        for score in scores:
            gap, sigma = score.difference_kcal, score.sigma_kcal
            if gap is None or sigma is None or score.prediction is None or score.prediction.regime != regime:
                continue
            gaps.append(gap * gap)
            known.append(sigma**2 - tables.model_terms.get(regime, 0.0) ** 2)
        if gaps:
            mean = math.fsum(gaps) / len(gaps)
            excess = math.sqrt(max(0.0, mean - math.fsum(known) / len(known)))
            found.append(Spread(regime=regime, rows=len(gaps), rms_kcal=math.sqrt(mean), excess_kcal=excess))
    return tuple(found)
