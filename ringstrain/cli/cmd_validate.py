"""`ringstrain validate`: the accuracy table against published equilibria."""

from __future__ import annotations

from typing import Annotated

import typer

from ringstrain.cli import common

HELP = """How well the model reproduces published equilibria, group by group.

\b
  ringstrain validate
  ringstrain validate --rows --json

Rows that feed the prices count apart; rows that are out of scope or left out are named, never dropped.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("validate", help=HELP)(validate)


def validate(
    rows: Annotated[
        bool, typer.Option("--rows", help="List every equilibrium with prediction, difference and the lines behind it.")
    ] = False,
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
    from ringstrain.validation.rows import read_equilibria
    from ringstrain.validation.summary import validate as score_all
    from ringstrain.views import validation as views

    output = common.make_output(format, json, units=units, ascii=ascii, no_color=no_color)
    tables = common.tables_for(table_file)
    outcome = score_all(read_equilibria(), tables)
    if output.format == "json":
        output.line(views.validation_json(outcome, tables, version=__version__, rows=rows))
    elif output.format == "plain":
        chosen = output.look.units
        output.line(views.rows_plain(outcome, tables, chosen) if rows else views.accuracy_plain(outcome, chosen))
    else:
        if rows:
            output.console.print(views.rows_view(outcome, tables, output.look))
            output.console.print()
        output.console.print(views.accuracy_view(outcome, output.look))
    return 0
