"""`ringstrain validate`: the accuracy table against published equilibria."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.errors import UsageError

if TYPE_CHECKING:
    from ringstrain.tables import Tables
    from ringstrain.validation.summary import Validation

HELP = """How well the model reproduces published equilibria, group by group.

\b
  ringstrain validate
  ringstrain validate --rows --json
  ringstrain validate --calibrate

Rows that feed the prices count apart; rows that are out of scope or left out are named, never dropped.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("validate", help=HELP)(validate)


def validate(
    rows: Annotated[
        bool, typer.Option("--rows", help="List every equilibrium with prediction, difference and the lines behind it.")
    ] = False,
    calibrate: Annotated[
        bool, typer.Option("--calibrate", help="Fit the uncertainty of the model by regime instead (see the docs).")
    ] = False,
    output_file: Annotated[
        str | None,
        typer.Option(
            "-o", "--output", metavar="FILE", help="With --calibrate: write the fitted table there.", show_default=False
        ),
    ] = None,
    units: common.UnitsOption = "kcal",
    format: common.FormatOption = None,
    json: common.JsonOption = False,
    table_file: common.TableFileOption = None,
    no_color: common.NoColorOption = False,
    ascii: common.AsciiOption = False,
    quiet: common.QuietOption = False,
    debug: common.DebugOption = False,
) -> int:
    """Run the command; the exit code."""
    from ringstrain import __version__
    from ringstrain.validation.explanations import read_explanations
    from ringstrain.validation.rows import read_equilibria
    from ringstrain.validation.summary import validate as score_all
    from ringstrain.views import validation as views

    if output_file is not None and not calibrate:
        raise UsageError("--output belongs to --calibrate.", "Redirect the output, or add --calibrate.")
    output = common.make_output(format, json, units=units, ascii=ascii, no_color=no_color)
    tables = common.tables_for(table_file)
    outcome = score_all(read_equilibria(), tables)
    if calibrate:
        return _calibrate(outcome, tables, output, output_file)
    explanations = read_explanations()
    if output.format == "json":
        output.line(views.validation_json(outcome, tables, explanations, version=__version__, rows=rows))
    elif output.format == "plain":
        chosen = output.look.units
        lines = views.rows_plain(outcome, tables, explanations, chosen) if rows else None
        output.line(lines or views.accuracy_plain(outcome, chosen))
    else:
        if rows:
            output.console.print(views.rows_view(outcome, tables, output.look, explanations))
            output.console.print()
        output.console.print(views.accuracy_view(outcome, output.look))
    return 0


def _calibrate(outcome: Validation, tables: Tables, output: common.Output, path: str | None) -> int:
    """Fit the model terms, show them, and write their table when asked."""
    from ringstrain import __version__
    from ringstrain.validation.calibrate import calibrate, misses_of, terms_table
    from ringstrain.views import calibration as views

    fitted = calibrate(misses_of(outcome.scores, tables))
    if path is not None:
        try:
            with open(path, "w", encoding="utf-8", newline="") as stream:
                stream.write(terms_table(fitted))
        except OSError as error:
            raise UsageError(f"{path!r} cannot be written: {error.strerror}.", "Name another file.") from None
    if output.format == "json":
        output.line(views.calibration_json(fitted, version=__version__))
    elif output.format == "plain":
        output.line(views.calibration_plain(fitted, output.look.units))
    else:
        for part in views.calibration_view(fitted, output.look):
            output.console.print(part)
    return 0
