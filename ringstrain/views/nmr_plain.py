"""NMR predictions as TSV: one coupling or one observed average a line."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ringstrain.consequences.nmr import Spectrum
from ringstrain.consequences.spectra_inverse import PopulationEstimate
from ringstrain.units import KJ_PER_KCAL
from ringstrain.views.look import Units
from ringstrain.views.plain import number, row

_COLUMNS = (
    "input", "name", "smiles", "temperature_K", "medium", "ring_system", "hydrogen", "atom", "orientation", "alike",
    "multiplet", "width_Hz", "partner", "partner_atom", "partners", "average_Hz", "uncertainty_Hz", "per_state_Hz",
    "observable", "not_predicted",
)  # fmt: skip
_POPULATION_COLUMNS = (
    "input", "name", "smiles", "temperature_K", "medium", "observed", "value", "error", "unit", "first", "second",
    "first_value", "second_value", "model_error", "verdict", "share", "share_error", "K", "K_low", "K_high", "dG_{u}",
    "dG_uncertainty_{u}", "reason",
)  # fmt: skip


def nmr_header() -> str:
    """Column names of :func:`nmr_rows`."""
    return row(_COLUMNS)


def nmr_rows(spectrum: Spectrum) -> Iterator[str]:
    """One line for each coupling of each hydrogen, one for a hydrogen without any; atoms count from 1."""
    analysis = spectrum.analysis
    for signal in spectrum.signals:
        hydrogen, multiplet = signal.hydrogen, signal.multiplet
        head = (
            analysis.input,
            analysis.structure.name,
            analysis.smiles,
            f"{analysis.temperature_K:g}",
            analysis.medium,
            signal.ring_system + 1,
            signal.label,
            hydrogen.atom + 1,
            ";".join(f"{state}={word}" for state, word in hydrogen.orientation),
            ",".join(s.label for s in spectrum.alike(signal) if s is not signal),
            multiplet.word if multiplet else None,
            number(multiplet.width_Hz if multiplet else None, 2),
        )
        rest = ",".join(str(u.atom + 1) for u in signal.unpredicted)
        if not signal.couplings:
            yield row((*head, *(None,) * 7, rest))
        for c in signal.couplings:
            states = ";".join(f"{state}={number(value, 2) or ''}" for state, value in c.per_state)
            yield row(
                (
                    *head,
                    c.label,
                    c.to + 1,
                    c.count,
                    number(c.average_Hz, 2),
                    number(c.uncertainty_Hz, 2),
                    states,
                    "yes" if c.observable else "no",
                    rest,
                )
            )


def population_header(units: Units) -> str:
    """Column names of :func:`population_rows`."""
    return row([name.format(u=units) for name in _POPULATION_COLUMNS])


def population_rows(spectrum: Spectrum, estimates: Sequence[PopulationEstimate], units: Units) -> Iterator[str]:
    """One line for each observed average."""
    analysis = spectrum.analysis
    factor = KJ_PER_KCAL if units == "kJ" else 1.0
    for e in estimates:
        yield row(
            (
                analysis.input,
                analysis.structure.name,
                analysis.smiles,
                f"{e.temperature_K:g}",
                analysis.medium,
                e.name,
                number(e.observed.value),
                number(e.observed.sigma),
                e.unit,
                *e.forms,
                number(e.first.value),
                number(e.second.value),
                number(e.first.sigma),
                e.verdict,
                number(e.share),
                number(e.share_sigma),
                number(e.K),
                number(e.K_low),
                number(e.K_high),
                number(None if e.dG_kcal is None else e.dG_kcal * factor),
                number(None if e.uncertainty_kcal is None else e.uncertainty_kcal * factor),
                e.reason,
            )
        )
