"""Populations from averaged couplings or shifts: x = (observed - B) / (A - B), K = x / (1 - x)."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import Literal

from ringstrain.consequences.averages import ring_forms
from ringstrain.consequences.freezing import flip_partner
from ringstrain.consequences.nmr import Signal, Spectrum
from ringstrain.errors import UsageError
from ringstrain.tables.spectra import SpectralTables
from ringstrain.units import R_KCAL, Z95

Verdict = Literal["determined", "outside the model values", "beyond 95:5", "model values too near"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """A value and its standard uncertainty [Hz or ppm]."""

    value: float
    sigma: float


@dataclass(frozen=True, slots=True, kw_only=True)
class PopulationEstimate:
    """What an averaged value says about two forms.

    Attributes
    ----------
    name
        Which coupling or shift.
    unit
        ``Hz`` or ``ppm``.
    observed, first, second
        The average and the values of the two pure forms [unit].
    forms
        Names of the two forms.
    verdict
        ``determined``, or why there is no number.
    share, share_sigma
        Share of the first form and its standard uncertainty [-]; None when not determined.
    K, K_low, K_high
        [first]/[second] with 95 % limits [-].
    dG_kcal, uncertainty_kcal
        RT ln K and its standard uncertainty [kcal/mol].
    temperature_K
        Temperature [K].
    reason
        Why there is no number, else empty.
    """

    name: str
    unit: str
    observed: Measured
    first: Measured
    second: Measured
    forms: tuple[str, str]
    verdict: Verdict
    share: float | None = None
    share_sigma: float | None = None
    K: float | None = None
    K_low: float | None = None
    K_high: float | None = None
    dG_kcal: float | None = None
    uncertainty_kcal: float | None = None
    temperature_K: float
    reason: str = ""

    def as_dict(self) -> dict[str, object]:
        """The estimate as JSON shows it."""
        return {
            "name": self.name,
            "unit": self.unit,
            "observed": self.observed.value,
            "observed_uncertainty": self.observed.sigma,
            "model_values": [self.first.value, self.second.value],
            "model_uncertainties": [self.first.sigma, self.second.sigma],
            "forms": list(self.forms),
            "verdict": self.verdict,
            "share": self.share,
            "share_uncertainty": self.share_sigma,
            "K": self.K,
            "K_low": self.K_low,
            "K_high": self.K_high,
            "dG_kcal": self.dG_kcal,
            "uncertainty_kcal": self.uncertainty_kcal,
            "temperature_K": self.temperature_K,
            "reason": self.reason,
        }


def estimate_population(
    observed: Measured,
    first: Measured,
    second: Measured,
    *,
    temperature_K: float,
    limit: float,
    name: str = "",
    unit: str = "Hz",
    forms: tuple[str, str] = ("first", "second"),
) -> PopulationEstimate:
    """The populations that an average of two known values means.

    Parameters
    ----------
    observed
        The average [Hz or ppm].
    first, second
        Values of the pure forms [the same unit].
    temperature_K
        Temperature [K].
    limit
        Largest share that still gives a free energy [-].
    name, unit, forms
        What the estimate is about.

    Returns
    -------
    PopulationEstimate
        Numbers only inside the model values and up to the limit.

    Notes
    -----
    s(x)^2 = (s_obs^2 + x^2 s_A^2 + (1-x)^2 s_B^2) / (A - B)^2 and s(dG) = RT s(x) / (x (1 - x)).

    Examples
    --------
    >>> j = [Measured(value=v, sigma=0.3) for v in (6.9, 11.0, 2.8)]
    >>> estimate = estimate_population(*j, temperature_K=298.0, limit=0.95)
    >>> round(estimate.share, 2), round(estimate.uncertainty_kcal, 2)
    (0.5, 0.11)
    """
    gap = first.value - second.value
    blank = PopulationEstimate(
        name=name,
        unit=unit,
        observed=observed,
        first=first,
        second=second,
        forms=forms,
        verdict="determined",
        temperature_K=temperature_K,
    )
    values = f"{first.value:.2f} and {second.value:.2f} {unit}"
    if abs(gap) <= math.hypot(first.sigma, second.sigma, observed.sigma):
        reason = f"The two forms give {values}, too near to tell apart; use another coupling or a shift."
        return replace(blank, verdict="model values too near", reason=reason)
    share = (observed.value - second.value) / gap
    if not 0.0 <= share <= 1.0:
        reason = (
            f"{observed.value:g} {unit} is not between {values}: another conformer takes part or a model value is off. "
            "Check the values against a locked compound."
        )
        return replace(blank, verdict="outside the model values", reason=reason)
    if share > limit or share < 1.0 - limit:
        major = forms[0] if share > 0.5 else forms[1]
        reason = (
            f"Over {100 * limit:.0f} % {major}: there the error of the average exceeds what is left of the other form. "
            "Integrate a slow-exchange spectrum instead."
        )
        return replace(blank, verdict="beyond 95:5", reason=reason)
    sigma = math.sqrt(observed.sigma**2 + (share * first.sigma) ** 2 + ((1.0 - share) * second.sigma) ** 2) / abs(gap)
    rt = R_KCAL * temperature_K
    constant = share / (1.0 - share)
    error = rt * sigma / (share * (1.0 - share))
    factor = math.exp(min(Z95 * error / rt, 50.0))
    return replace(
        blank,
        share=share,
        share_sigma=sigma,
        K=constant,
        K_low=constant / factor,
        K_high=constant * factor,
        dG_kcal=rt * math.log(constant),
        uncertainty_kcal=error,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Request:
    """One observed average as asked for.

    Attributes
    ----------
    first, second
        Names of the hydrogens of a coupling; second is empty for a shift or width, both for a value without a name.
    value
        Observed [Hz or ppm].
    is_width
        True for the width between the outer lines of a signal.
    """

    first: str
    second: str
    value: float
    is_width: bool = False


def parse_averages(text: str) -> tuple[Request, ...]:
    """Observed averages from text such as ``H1-H2=7.1; W(H1)=22; H1=3.70``.

    Parameters
    ----------
    text
        Couplings as two labels with a hyphen, widths as W and a label in brackets, shifts as one label, or a bare
        number.

    Returns
    -------
    tuple of Request
        In the order given.

    Raises
    ------
    UsageError
        If a part is none of these.
    """
    found = []
    for part in filter(None, (piece.strip() for piece in text.split(";"))):
        name, _, number = part.rpartition("=")
        name = name.strip()
        is_width = name[:2].upper() == "W(" and name.endswith(")")
        name = name[2:-1] if is_width else name
        first, _, second = (piece.strip() for piece in name.partition("-"))
        try:
            value = float(number)
        except ValueError:
            value = math.nan
        if not math.isfinite(value) or (is_width and (second or not first)):
            raise UsageError(
                f"{part!r} is no observed average.", 'Write it as "H1-H2=7.1", "W(H1)=22" (Hz) or "H1=3.70" (ppm).'
            )
        found.append(Request(first=first, second=second, value=value, is_width=is_width))
    if not found:
        raise UsageError("No observed average is given.", 'Write it as "H1-H2=7.1".')
    return tuple(found)


def populations_from_average(
    spectrum: Spectrum,
    request: Request,
    *,
    spectra: SpectralTables,
    models: tuple[float, float] | None = None,
    observed_sigma: float | None = None,
    model_sigma: float | None = None,
) -> PopulationEstimate:
    """Populations of the favoured chair and its flip from one observed average.

    Parameters
    ----------
    spectrum
        Prediction for the structure.
    request
        What was observed.
    spectra
        NMR tables.
    models
        Values of the two pure forms, favoured first [Hz or ppm]; those predicted when None (couplings only).
    observed_sigma, model_sigma
        Standard uncertainties [Hz or ppm]; the usual reading and equation errors when None.

    Raises
    ------
    UsageError
        If a label is unknown or not clear, a shift comes without model values, or the ring does not flip.
    """
    is_shift = bool(request.first) and not request.second and not request.is_width
    reading = spectra.reading["shift reading" if is_shift else "reading"].value
    if models is not None:
        # values read off model compounds carry the error of a reading, predicted ones that of the equation
        own = spectra.reading["shift model"].value if is_shift else reading
        first, second = models
        forms = _form_names(spectrum, request)
    elif is_shift or not request.first:
        what = "A shift needs the shifts" if is_shift else "A value without a name needs the values"
        raise UsageError(f"{what} of the two pure forms.", "Give them with --models FAVOURED,OTHER.")
    else:
        model = _width(spectrum, request) if request.is_width else _coupling(spectrum, request)
        first, second, forms = model.first, model.second, model.forms
        doubled = spectra.model["flat neighbour factor"].value
        own = spectra.model["equation error"].value * math.sqrt(model.plain + doubled**2 * model.doubled)
    name = f"W({request.first})" if request.is_width else "-".join(filter(None, (request.first, request.second)))
    own = model_sigma if model_sigma is not None else own
    return estimate_population(
        Measured(value=request.value, sigma=observed_sigma if observed_sigma is not None else reading),
        Measured(value=first, sigma=own),
        Measured(value=second, sigma=own),
        temperature_K=spectrum.analysis.temperature_K,
        limit=spectra.general("last share").value,
        name=name,
        unit="ppm" if is_shift else "Hz",
        forms=forms,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Model:
    """Predicted values of the two forms [Hz], and how many couplings of plain and of doubled error they sum."""

    first: float
    second: float
    forms: tuple[str, str]
    plain: int
    doubled: int


def _form_names(spectrum: Spectrum, request: Request) -> tuple[str, str]:
    """Ids of the favoured state and its flip, of the ring system the hydrogen belongs to."""
    number = named_signals(spectrum, request.first)[0].ring_system if request.first else 0
    return _flip_ids(spectrum, number)


def _flip_ids(spectrum: Spectrum, number: int) -> tuple[str, str]:
    result = spectrum.analysis.ring_systems[number]
    partner = flip_partner(result)
    if partner is None or result.locked:
        raise UsageError(
            "This ring does not flip: there are no two forms to average.", "Use `ringstrain chairs` to see its shape."
        )
    forms = ring_forms(result)
    if forms[result.states.index(partner)] == forms[0]:
        raise UsageError("Both chairs are alike: they are equally populated by symmetry.", "Nothing is to be measured.")
    return result.states[0].id, partner.id


def _coupling(spectrum: Spectrum, request: Request) -> _Model:
    """Predicted coupling in the favoured state and in its flip [Hz]."""
    ends = {s.hydrogen.key for s in named_signals(spectrum, request.second)}
    pairs = [
        (signal, coupling)
        for signal in named_signals(spectrum, request.first)
        for coupling in signal.couplings
        if coupling.partner in ends
    ]
    name = f"{request.first}-{request.second}"
    if not pairs:
        raise UsageError(f"{name} is no vicinal coupling of two ring hydrogens.", "`ringstrain nmr` lists them.")
    if not any(c.observable for _, c in pairs):
        raise UsageError(
            f"{name} couples two hydrogens that are alike; no spectrum shows it.",
            "Take the coupling to another neighbour or a width, or give --models without a name.",
        )
    forms = _flip_ids(spectrum, pairs[0][0].ring_system)
    kinds = {}
    for signal, coupling in pairs:
        first, second = (dict(coupling.per_state)[form] for form in forms)
        if coupling.observable and first is not None and second is not None:
            kinds[(round(first, 3), round(second, 3))] = (signal, coupling, first, second)
    if len(kinds) > 1:
        labels = ", ".join(sorted({f"{s.label}-{c.label}" for s, c in pairs}))
        raise UsageError(
            f"{name} may mean several couplings: {labels}.", "Name the hydrogens as `ringstrain nmr` does."
        )
    if not kinds:
        raise UsageError(f"{name} cannot be predicted.", "Give the values of the pure forms with --models.")
    _, coupling, first, second = next(iter(kinds.values()))
    return _Model(first=first, second=second, forms=forms, plain=not coupling.doubled, doubled=coupling.doubled)


def _width(spectrum: Spectrum, request: Request) -> _Model:
    """Predicted width of a signal in the favoured state and in its flip [Hz]."""
    signals = named_signals(spectrum, request.first)
    if len({s.hydrogen.alike for s in signals}) > 1:
        labels = ", ".join(s.label for s in signals)
        raise UsageError(f"{request.first} may mean {labels}.", "Name the hydrogen as `ringstrain nmr` does.")
    signal = signals[0]
    forms = _flip_ids(spectrum, signal.ring_system)
    shown = [c for c in signal.couplings if c.observable]
    widths = []
    for form in forms:
        values = [dict(c.per_state)[form] for c in shown]
        known = [v * c.count for v, c in zip(values, shown, strict=True) if v is not None]
        if len(known) < len(shown) or not known:
            raise UsageError(
                f"W({request.first}) cannot be predicted.", "Give the values of the pure forms with --models."
            )
        widths.append(math.fsum(known))
    ring = [c for c in shown if c.partner is not None]
    doubled = sum(c.doubled for c in ring)
    return _Model(first=widths[0], second=widths[1], forms=forms, plain=len(ring) - doubled, doubled=doubled)


def named_signals(spectrum: Spectrum, name: str) -> tuple[Signal, ...]:
    """Signals a name stands for: a label exactly, or H and the atom number.

    Raises
    ------
    UsageError
        If there is none.
    """
    exact = [s for s in spectrum.signals if s.label.lower() == name.lower()]
    if exact:
        return tuple(exact)
    loose = tuple(s for s in spectrum.signals if f"h{s.hydrogen.atom + 1}" == name.lower())
    if not loose:
        labels = ", ".join(s.label for s in spectrum.signals)
        raise UsageError(f"No ring hydrogen is called {name!r}.", f"There are {labels}.")
    return loose
