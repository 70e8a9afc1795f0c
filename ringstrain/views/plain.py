"""TSV: a header and one record a line, so that grep, cut and spreadsheets work."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.ledger import Line
from ringstrain.units import KJ_PER_KCAL
from ringstrain.views.forms import standings
from ringstrain.views.look import Units

_COUNTS = (
    "gauche",
    "syn_axial_XH",
    "syn_axial_XY",
    "syn_axial_X_lp",
    "peri",
    "geminal",
    "eclipsed",
    "transannular",
)
_COMMON = ("input", "name", "smiles", "temperature_K", "medium", "ring_system", "state")


def row(cells: Sequence[object]) -> str:
    """One line; blanks stand for tabs and line ends inside a cell, nothing for a missing value."""
    return "\t".join("" if cell is None else " ".join(str(cell).split()) for cell in cells)


def number(value: float | None, digits: int = 4) -> str | None:
    """A float for a cell; small ones keep their figures."""
    if value is None:
        return None
    text = f"{value:.{digits}f}" if abs(value) >= 10**-digits or value == 0 else f"{value:.{digits}g}"
    return text.lstrip("-") if float(text) == 0 else text


def states_header(units: Units) -> str:
    """Column names of :func:`state_rows`."""
    names = (
        *_COMMON,
        "shapes",
        "axial",
        "equatorial",
        "axial_groups",
        "equatorial_groups",
        "equivalent_to",
        *_COUNTS,
        f"energy_{units}",
        f"uncertainty_{units}",
        "lower_bound",
        "regime",
        "population",
        "population_low",
        "population_high",
        f"dG_{units}",
        f"dG_uncertainty_{units}",
        "K",
        "bound",
        "locked",
        "notes",
    )
    return row(names)


def state_rows(analysis: Analysis, units: Units) -> Iterator[str]:
    """One line for each state; atoms count from 1; dG and K stand on the favoured and the other state."""
    notes = "; ".join(analysis.notes)
    for place, result in enumerate(analysis.ring_systems, 1):
        equilibrium = result.equilibrium
        for state in result.states:
            axial, equatorial = _groups(result, state)
            shown = equilibrium if equilibrium and state.id in (equilibrium.favoured, equilibrium.other) else None
            yield row(
                (
                    *_head(analysis, place, state),
                    ",".join(state.shapes),
                    ",".join(str(a + 1) for a in state.axial),
                    ",".join(str(a + 1) for a in state.equatorial),
                    axial,
                    equatorial,
                    state.equivalent_to,
                    *(dict(state.counts).get(name, 0) for name in _COUNTS),
                    _energy(state.energy_kcal, units),
                    _energy(state.uncertainty_kcal, units),
                    _yes(state.lower_bound),
                    state.regime,
                    number(state.population, 6),
                    number(state.population_low, 6),
                    number(state.population_high, 6),
                    _energy(shown.dG_kcal, units) if shown else None,
                    _energy(shown.uncertainty_kcal, units) if shown else None,
                    number(shown.K) if shown else None,
                    shown.bound if shown else None,
                    _yes(result.locked),
                    notes,
                )
            )


def ledger_header(units: Units) -> str:
    """Column names of :func:`ledger_rows`."""
    names = (
        *_COMMON,
        "rule",
        "groups",
        "atoms",
        "count",
        f"value_{units}",
        f"subtotal_{units}",
        f"uncertainty_{units}",
        "known_by",
        "estimated",
        "bound",
        "source",
        "row",
        "note",
    )
    return row(names)


def ledger_rows(analysis: Analysis, units: Units) -> Iterator[str]:
    """One line for each ledger line of each state; atoms count from 1."""
    for place, result in enumerate(analysis.ring_systems, 1):
        for state in result.states:
            for line in state.lines:
                yield row((*_head(analysis, place, state), *_line_cells(line, units)))


def _line_cells(line: Line, units: Units) -> tuple[object, ...]:
    return (
        line.rule,
        "/".join(line.groups),
        ";".join(",".join(str(a + 1) for a in atoms) for atoms in line.atoms),
        f"{line.count:g}",
        _energy(line.value_kcal, units),
        _energy(line.subtotal_kcal, units),
        _energy(line.uncertainty_kcal, units),
        line.known_by,
        _yes(line.estimated),
        line.bound,
        line.source,
        line.row,
        line.note,
    )


def _head(analysis: Analysis, place: int, state: State) -> tuple[object, ...]:
    return (
        analysis.input,
        analysis.structure.name,
        analysis.smiles,
        f"{analysis.temperature_K:g}",
        analysis.medium,
        place,
        state.id,
    )


def _groups(result: SystemResult, state: State) -> tuple[str, str]:
    """Keys of the axial and of the equatorial groups."""
    found = standings(result, state)
    return tuple(  # type: ignore[return-value]
        ",".join(f"{s.key}@{s.atom + 1}" for s in found if place in s.position) for place in ("axial", "equatorial")
    )


def _energy(value_kcal: float | None, units: Units) -> str | None:
    if value_kcal is None:
        return None
    return number(value_kcal * (KJ_PER_KCAL if units == "kJ" else 1.0))


def _yes(flag: bool) -> str:
    return "yes" if flag else "no"
