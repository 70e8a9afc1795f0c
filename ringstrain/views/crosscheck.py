"""The second opinion as text, TSV and JSON; computes nothing but units."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from ringstrain.analysis import SystemResult
from ringstrain.crosscheck.records import CrossCheck, StateCheck, SystemCheck
from ringstrain.units import KJ_PER_KCAL, Z95
from ringstrain.views.forms import describe, form_name
from ringstrain.views.look import Look, Units, kelvin
from ringstrain.views.plain import number, row

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

_PLAIN = (
    "input", "method", "ring_system", "kind", "state", "shapes", "equivalent_to", "ledger_{u}",
    "ledger_uncertainty_{u}", "method_{u}", "method_uncertainty_{u}", "difference_{u}", "agrees", "minima", "fate",
)  # fmt: skip
#: Narrower than this there is no room to say where the groups stand [characters].
_WIDE = 90
#: Forms beyond the ledger that the table lists at most.
_SHOWN = 5


def crosscheck_view(check: CrossCheck, look: Look) -> Iterator[RenderableType]:
    """Table of states, forms beyond the ledger, warnings and notes.

    Parameters
    ----------
    check
        The answer.
    look
        Width, units, signs.
    """
    analysis = check.analysis
    yield look.text(f"{analysis.input}   {check.method_name} beside the ledger ({_conditions(check)})", "bold")
    yield look.text(_effort(check))
    many = len(check.systems) > 1
    for place, (result, system) in enumerate(zip(analysis.ring_systems, check.systems, strict=True), start=1):
        yield look.text("")
        if many:
            yield look.text(f"Ring system {place}", "bold")
        yield _states_table(check, result, system, look)
        yield from (look.text(line) for line in _stranger_lines(system, look))
        for warning in system.warnings:
            yield look.text(f"Warning: {warning}", "bold")
        if not system.warnings and any(state.agrees for state in system.states[1:]):
            yield look.text("Nothing contradicts the ledger.")
    yield look.text("")
    yield look.text(f"Energies in {look.unit} above the state the ledger favours, \N{PLUS-MINUS SIGN} 95 %.")
    for note in (*analysis.notes, *check.notes):
        yield look.text(f"Note: {note}")


def _conditions(check: CrossCheck) -> str:
    return f"{kelvin(check.analysis.temperature_K)}, {check.analysis.medium}"


def _effort(check: CrossCheck) -> str:
    """How much was tried."""
    text = f"{check.conformers} conformers minimised"
    if check.rejected:
        text += f", {check.rejected} not built"
    return text + ("." if check.complete else "; stopped before all were tried.")


def _states_table(check: CrossCheck, result: SystemResult, system: SystemCheck, look: Look) -> Table:
    from rich.table import Table

    wide = look.width >= _WIDE
    table = Table(box=look.box(), show_edge=False, pad_edge=False, header_style="")
    for title, justify in (
        ("state", "left"),
        *((("groups", "left"),) if wide else ()),
        ("ledger", "right"),
        (check.method_name, "right"),
        ("differ by", "right"),
        ("", "left"),
    ):
        table.add_column(look.text(title), justify=justify, overflow="fold")
    for state, own in zip(system.states, result.states, strict=True):
        if state.equivalent_to is None:
            groups = (describe(result, own),) if wide else ()
            cells = (form_name(own), *groups, *_energies(state, look), _verdict(state))
            table.add_row(*(look.text(cell) for cell in cells))
    return table


def _energies(state: StateCheck, look: Look) -> tuple[str, str, str]:
    """Ledger, method, difference."""
    return (
        _with_reach(state.ledger_kcal, state.ledger_uncertainty_kcal, look),
        "-" if state.method_kcal is None else _with_reach(state.method_kcal, state.method_uncertainty_kcal, look),
        "-" if state.difference_kcal is None else look.energy(state.difference_kcal, signed=True),
    )


def _with_reach(value_kcal: float | None, sigma_kcal: float | None, look: Look) -> str:
    """A value and its 95 % reach."""
    if value_kcal is None or not sigma_kcal:
        return look.energy(value_kcal)
    return f"{look.energy(value_kcal)} \N{PLUS-MINUS SIGN} {look.energy(Z95 * sigma_kcal)}"


def _verdict(state: StateCheck) -> str:
    if state.fate:
        return f"becomes {state.fate}"
    if not state.minima:
        return "not found"
    if state.agrees is None:
        return "not judged"
    return "agrees" if state.agrees else "DISAGREES"


def _stranger_lines(system: SystemCheck, look: Look) -> Iterator[str]:
    """Forms beyond the ledger, the lowest first."""
    if not system.strangers:
        return
    shown = [
        f"{' + '.join(s.shapes)} {'?' if s.method_kcal is None else look.energy(s.method_kcal, signed=True)}"
        for s in system.strangers[:_SHOWN]
    ]
    rest = len(system.strangers) - len(shown)
    yield f"Forms beyond the ledger: {', '.join(shown)}" + (f" and {rest} higher." if rest else ".")


def plain_header(units: Units) -> str:
    """Column names of :func:`plain_rows`."""
    return row(tuple(name.format(u=units) for name in _PLAIN))


def plain_rows(check: CrossCheck, units: Units) -> Iterator[str]:
    """One row for each state, then one for each form beyond the ledger."""
    factor = KJ_PER_KCAL if units == "kJ" else 1.0

    def energy(value_kcal: float | None) -> str | None:
        return number(None if value_kcal is None else value_kcal * factor)

    for place, system in enumerate(check.systems, start=1):
        lead = (check.analysis.input, check.method, place)
        for s in system.states:
            agrees = "" if s.agrees is None else "yes" if s.agrees else "no"
            yield row(
                (
                    *lead, "state", s.id, ",".join(s.shapes), s.equivalent_to or "", energy(s.ledger_kcal),
                    energy(s.ledger_uncertainty_kcal), energy(s.method_kcal), energy(s.method_uncertainty_kcal),
                    energy(s.difference_kcal), agrees, s.minima, s.fate,
                )
            )  # fmt: skip
        for x in system.strangers:
            yield row(
                (*lead, "beyond", "", ",".join(x.shapes), "", "", "", energy(x.method_kcal), "", "", "", x.minima, "")
            )
