"""Fitted model terms as text, TSV and JSON; computes nothing but units."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from ringstrain.results import SCHEMA
from ringstrain.units import KJ_PER_KCAL
from ringstrain.validation.calibrate import Calibration
from ringstrain.views.as_json import to_line
from ringstrain.views.look import Look, Units
from ringstrain.views.plain import number, row

if TYPE_CHECKING:
    from rich.console import RenderableType


def calibration_view(calibration: Calibration, look: Look) -> Iterator[RenderableType]:
    """Terms, coverage and rows outside.

    Parameters
    ----------
    calibration
        What was fitted.
    look
        Width, units, signs.
    """
    from rich.table import Table

    yield look.text("Uncertainty of the model itself, fitted on published equilibria", "bold")
    table = Table(box=look.box(), show_edge=False, pad_edge=False, header_style="")
    for title, justify in (
        ("regime", "left"), ("term", "right"), ("sources left out", "right"), ("rows held", "right"), ("", "left"),
    ):  # fmt: skip
        table.add_column(look.text(title), justify=justify, overflow="fold")  # type: ignore[arg-type]
    for term in calibration.terms:
        table.add_row(
            look.text(term.regime),
            look.text(look.energy(term.sigma_kcal)),
            look.text(f"{look.energy(term.low_kcal)} to {look.energy(term.high_kcal)}"),
            look.text(f"{term.covered}/{term.rows}" if term.rows else "-"),
            look.text("" if term.judged else "too few rows to judge"),
        )
    yield table
    yield look.text(
        f"One standard uncertainty, {look.unit}. With each of {calibration.sources} sources left out of the fit in "
        f"turn, the 95 % intervals hold {calibration.covered} of {calibration.rows} rows "
        f"({100 * calibration.coverage:.0f} %)."
    )
    if calibration.outside:
        yield look.text(f"Outside with the final terms: {', '.join(calibration.outside)}.")


def calibration_plain(calibration: Calibration, units: Units) -> str:
    """One row for each regime, with a header."""
    factor = KJ_PER_KCAL if units == "kJ" else 1.0
    lines = [row(("regime", f"sigma_{units}", f"low_{units}", f"high_{units}", "rows", "covered", "judged"))]
    for term in calibration.terms:
        values = (number(value * factor) for value in (term.sigma_kcal, term.low_kcal, term.high_kcal))
        lines.append(row((term.regime, *values, term.rows, term.covered, "yes" if term.judged else "no")))
    return "\n".join(lines)


def calibration_json(calibration: Calibration, *, version: str) -> str:
    """The calibrate document as one compact line of ASCII; energies in kcal/mol."""
    return to_line({"schema": SCHEMA, "kind": "calibrate", "version": version, **calibration.as_dict()})
