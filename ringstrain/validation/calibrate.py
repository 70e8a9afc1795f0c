"""The uncertainty of the model itself, fitted on published equilibria.

The uncertainty of a prediction has two parts: that of the prices, which the tables give, and that of adding prices
up at all.  The second is one term per regime, and this module finds it.

Notes
-----
A row needs the least term with which its 95 % interval (prices, measurement and term in quadrature) holds the
measured value.  The terms are the cheapest ones, counted over the rows that carry them, with which at least 95 % of
all rows are held and at least 80 % of each regime of 20 rows or more.  A smaller regime says too little about itself:
it takes the larger of its own fit and of one term fitted to all rows alike.

Out-of-sample coverage: each source in turn is left out, the terms are fitted to the rest, and the rows of that source
are judged with those terms.  Rows that feed the prices take no part.
"""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import product
from typing import TYPE_CHECKING

from ringstrain.ledger import REGIMES
from ringstrain.units import Z95

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from ringstrain.tables import Tables
    from ringstrain.validation.score import Score

#: Share of all rows the 95 % intervals shall hold [-].
TARGET = 0.95
#: Share below which no regime that is judged may fall [-].
FLOOR = 0.80
#: Rows from which a regime is judged by itself [-].
ENOUGH = 20
#: Terms are multiples of this [kcal/mol].
STEP_KCAL = 0.01
COMMAND = "ringstrain validate --calibrate"


@dataclass(frozen=True, slots=True, kw_only=True)
class Miss:
    """How far one prediction was off, and what explains it so far.

    Attributes
    ----------
    id, regime, source
        Row, kind of line that decides it, and publication.
    gap_kcal
        Predicted less measured [kcal/mol].
    sigma_kcal
        Standard uncertainty of prices and measurement, without any model term [kcal/mol].
    """

    id: str
    regime: str
    source: str
    gap_kcal: float
    sigma_kcal: float

    def needs(self) -> float:
        """Least model term that brings the row into its 95 % interval, a multiple of the step [kcal/mol]."""
        rest = (self.gap_kcal / Z95) ** 2 - self.sigma_kcal**2
        if rest <= 0:
            return 0.0
        return round(math.ceil(math.sqrt(rest) / STEP_KCAL - 1e-9) * STEP_KCAL, 6)


@dataclass(frozen=True, slots=True, kw_only=True)
class FittedTerm:
    """The model term of one regime.

    Attributes
    ----------
    regime
        Name.
    sigma_kcal
        The term, one standard uncertainty [kcal/mol].
    low_kcal, high_kcal
        Smallest and largest term found with one source left out [kcal/mol].
    rows
        Rows of the regime [-].
    covered
        Of these, rows whose interval holds the measured value when their source took no part in the fit [-].
    judged
        True when there are enough rows to judge the regime by itself.
    """

    regime: str
    sigma_kcal: float
    low_kcal: float
    high_kcal: float
    rows: int
    covered: int
    judged: bool

    def as_dict(self) -> dict[str, object]:
        """The term as the JSON of a calibrate document shows it."""
        return {name: getattr(self, name) for name in self.__slots__}


@dataclass(frozen=True, slots=True, kw_only=True)
class Calibration:
    """Model terms and what they are worth on rows that did not fit them.

    Attributes
    ----------
    terms
        One per regime, the surest first.
    rows, covered
        All rows, and how many of them the out-of-sample intervals hold [-].
    sources
        Publications left out in turn [-].
    outside
        Rows the intervals of the final terms do not hold.
    """

    terms: tuple[FittedTerm, ...]
    rows: int
    covered: int
    sources: int
    outside: tuple[str, ...]

    @property
    def coverage(self) -> float:
        """Share of rows held out of sample [-]."""
        return self.covered / self.rows if self.rows else 0.0

    @property
    def is_sound(self) -> bool:
        """True when coverage is 90 to 98 % and no judged regime falls below 80 %."""
        regimes = [term.covered / term.rows for term in self.terms if term.judged]
        return 0.90 <= self.coverage <= 0.98 and all(share >= FLOOR for share in regimes)

    def as_dict(self) -> dict[str, object]:
        """The calibration as JSON shows it."""
        return {
            "terms": [term.as_dict() for term in self.terms],
            "rows": self.rows,
            "covered": self.covered,
            "coverage": self.coverage,
            "sources": self.sources,
            "outside": list(self.outside),
            "sound": self.is_sound,
        }


def misses_of(scores: Iterable[Score], tables: Tables) -> tuple[Miss, ...]:
    """Misses of all rows that test the prices.

    Parameters
    ----------
    scores
        Scored equilibria.
    tables
        The tables they were scored with, whose model terms are taken off again.

    Returns
    -------
    tuple of Miss
        In the order of the scores.
    """
    found = []
    for score in scores:
        gap, sigma = score.difference_kcal, score.sigma_kcal
        if gap is None or sigma is None or score.prediction is None or not score.is_independent:
            continue
        regime = score.prediction.regime
        bare = math.sqrt(max(0.0, sigma**2 - tables.model_terms.get(regime, 0.0) ** 2))
        found.append(Miss(id=score.row.id, regime=regime, source=score.row.source, gap_kcal=gap, sigma_kcal=bare))
    return tuple(found)


def fit_terms(misses: Sequence[Miss], judged: Sequence[str]) -> dict[str, float]:
    """The cheapest model terms that hold 95 % of the rows.

    Parameters
    ----------
    misses
        Rows to fit.
    judged
        Regimes fitted by themselves; the others lean on the fit to all rows.

    Returns
    -------
    dict
        Term by regime [kcal/mol], for every regime.
    """
    import numpy as np

    needs: dict[str, NDArray[np.float64]] = {
        name: np.array(sorted(m.needs() for m in misses if m.regime == name)) for name in REGIMES
    }
    everything = np.sort(np.concatenate(list(needs.values())))
    common = _holding(everything, TARGET)
    small = {name: max(common, _holding(own, TARGET)) for name, own in needs.items() if name not in judged}
    held = sum(int((needs[name] <= term).sum()) for name, term in small.items())
    wanted = TARGET * len(everything) - held
    options = [[c for c in _candidates(needs[name]) if _share(needs[name], c) >= FLOOR] for name in judged]
    best: tuple[float, tuple[float, ...]] | None = None
    for choice in product(*options):
        count = sum(int((needs[name] <= term).sum()) for name, term in zip(judged, choice, strict=True))
        if count + 1e-9 < wanted:
            continue
        price = sum(len(needs[name]) * term for name, term in zip(judged, choice, strict=True))
        if best is None or (price, choice) < best:
            best = (price, choice)
    # Small regimes may keep the target out of reach; then every judged row is held.
    chosen = best[1] if best is not None else tuple(option[-1] for option in options)
    return {**small, **dict(zip(judged, chosen, strict=True))}


def _candidates(needs: NDArray[np.float64]) -> list[float]:
    """Terms worth trying: none, and what each row needs."""
    return sorted({0.0, *(float(need) for need in needs)})


def _share(needs: NDArray[np.float64], term: float) -> float:
    """Share of rows a term holds [-]; all of none."""
    return float((needs <= term).mean()) if len(needs) else 1.0


def _holding(needs: NDArray[np.float64], share: float) -> float:
    """Least term that holds a share of sorted needs [kcal/mol]."""
    return next((term for term in _candidates(needs) if _share(needs, term) >= share), 0.0)


def calibrate(misses: Sequence[Miss]) -> Calibration:
    """Fit the model terms and measure their coverage on rows that did not fit them.

    Parameters
    ----------
    misses
        Rows that test the prices.

    Returns
    -------
    Calibration
        Terms and out-of-sample coverage.
    """
    count = {name: sum(m.regime == name for m in misses) for name in REGIMES}
    judged = tuple(name for name in REGIMES if count[name] >= ENOUGH)
    terms = fit_terms(misses, judged)
    covered: dict[str, int] = dict.fromkeys(REGIMES, 0)
    seen: dict[str, list[float]] = {name: [terms[name]] for name in REGIMES}
    sources = tuple(dict.fromkeys(m.source for m in misses))
    for source in sources:
        others = fit_terms([m for m in misses if m.source != source], judged)
        for name in REGIMES:
            seen[name].append(others[name])
        for m in misses:
            if m.source == source:
                covered[m.regime] += m.needs() <= others[m.regime]
    return Calibration(
        terms=tuple(
            FittedTerm(
                regime=name,
                sigma_kcal=terms[name],
                low_kcal=min(seen[name]),
                high_kcal=max(seen[name]),
                rows=count[name],
                covered=covered[name],
                judged=name in judged,
            )
            for name in REGIMES
        ),
        rows=len(misses),
        covered=sum(covered.values()),
        sources=len(sources),
        outside=tuple(m.id for m in misses if m.needs() > terms[m.regime]),
    )


def terms_table(calibration: Calibration) -> str:
    """The calibration as the text of model_terms.csv.

    Parameters
    ----------
    calibration
        What to write.

    Returns
    -------
    str
        CSV with its header, LF line ends.
    """
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(("regime", "sigma_kcal", "known_by", "note"))
    for term in calibration.terms:
        writer.writerow((term.regime, f"{term.sigma_kcal:g}", "computed", _note(term, calibration)))
    return stream.getvalue()


def _note(term: FittedTerm, calibration: Calibration) -> str:
    """How the term was found."""
    if not term.rows:
        found = "no row tests it alone; term fitted to all regimes together"
    elif term.judged:
        found = f"{term.covered} of {term.rows} rows held with their own source left out"
    else:
        found = f"{term.rows} rows, too few to judge; not below the term fitted to all regimes together"
    total = f"{calibration.covered} of {calibration.rows} rows over all regimes"
    return f"{COMMAND}: {found}; {total}; {term.low_kcal:g} to {term.high_kcal:g} as sources are left out"
