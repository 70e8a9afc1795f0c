"""`ringstrain tables`: what the tables know about a group, a pair or a source, and the lint of the tables."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated, Any

import typer

from ringstrain.cli import common
from ringstrain.errors import RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.tables.conditions import Conditions
    from ringstrain.tables.records import Tables

HELP = """Every value the tool knows about KEY, with conditions, rivals, the reason for the choice, and citation.

\b
  ringstrain tables isopropyl
  ringstrain tables methyl/hydroxy --medium protic

Without KEY: all groups with the A-value in use. Quote a group SMILES: '*C(C)C'.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("tables", help=HELP)(tables)


def _complete(start: str) -> list[str]:
    """Keys for the shell's completion."""
    from ringstrain.cli.lookup import completions
    from ringstrain.tables import load_tables

    return completions(load_tables(), start)


def tables(
    key: Annotated[
        str | None,
        typer.Argument(
            metavar="KEY",
            help="Group key, alias or SMILES, a pair like methyl/hydroxy, a source key or a row.",
            show_default=False,
            autocompletion=_complete,
        ),
    ] = None,
    check: Annotated[bool, typer.Option("--check", help="Check every table; list all faults (exit 6).")] = False,
    temperature: common.TemperatureOption = "298.15",
    medium: common.MediumOption = "nonpolar",
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
    output = common.make_output(format, json, units=units, ascii=ascii, no_color=no_color)
    if check:
        if key:
            raise UsageError("--check takes no key.", "Run `ringstrain tables --check` alone.")
        return _check(output)
    try:
        return _show(output, key, temperature, medium, common.tables_for(table_file))
    except RingstrainError as error:
        if output.format != "json" or isinstance(error, UsageError):
            raise
        from ringstrain.views.as_json import error_document, to_line

        output.line(to_line(error_document("tables", key or "", error)))
        return error.exit_code


def _show(output: common.Output, key: str | None, temperature: str, medium: str, tables: Tables) -> int:
    """The list or one topic, in every asked medium."""
    from ringstrain.tables.conditions import make_conditions

    temperatures = common.parse_temperatures(temperature)
    asked = [
        make_conditions(tables, temperature_K=kelvin, medium=name)
        for name in common.media_of(medium)
        for kelvin in temperatures
    ]
    for number, conditions in enumerate(asked):
        if number and output.format == "table":
            output.console.print()
        _show_one(output, key, conditions, tables, first=number == 0)
    return 0


def _show_one(output: common.Output, key: str | None, conditions: Conditions, tables: Tables, *, first: bool) -> None:
    """The list or one topic under one set of conditions."""
    from ringstrain.cli.lookup import find_topic, list_groups
    from ringstrain.views import claims, claims_data

    label = f"{conditions.label} at {conditions.temperature_K:g} K"
    if key is None:
        groups = list_groups(tables, conditions)
        if output.format == "table":
            for part in claims.list_view(groups, label, output.look):
                output.console.print(part)
        elif output.format == "plain":
            for line in claims_data.list_lines(groups, output.look.units):
                output.line(line)
        else:
            _write_json(output, {"groups": claims_data.list_document(groups)}, conditions, tables)
        return
    topic = find_topic(tables, key, conditions)
    if output.format == "table":
        for part in claims.topic_view(topic, label, tables.sources, output.look):
            output.console.print(part)
    elif output.format == "plain":
        if first:
            for line in claims_data.topic_lines(topic, tables.sources):
                output.line(line)
    else:
        _write_json(output, claims_data.topic_document(topic, tables.sources), conditions, tables)


def _write_json(output: common.Output, body: dict[str, Any], conditions: Conditions, tables: Tables) -> None:
    from ringstrain import __version__
    from ringstrain.analysis import SCHEMA
    from ringstrain.views.as_json import to_line

    head = {
        "schema": SCHEMA,
        "kind": "tables",
        "version": __version__,
        "tables_revision": tables.revision,
        "temperature_K": conditions.temperature_K,
        "medium": conditions.solvent or conditions.medium,
    }
    output.line(to_line({**head, **body}))


def _check(output: common.Output) -> int:
    """Lint every table; all faults with file, line and column."""
    from ringstrain.tables.check import check_tables
    from ringstrain.tables.reader import tables_folder

    faults = check_tables(tables_folder())
    if output.format == "json":
        from ringstrain.analysis import SCHEMA
        from ringstrain.views.as_json import to_line

        listed = [{"file": f.file, "line": f.line, "column": f.column, "fault": f.fault} for f in faults]
        output.line(to_line({"schema": SCHEMA, "kind": "tables-check", "faults": listed}))
    elif output.format == "plain":
        from ringstrain.views.plain import row

        output.line(row(("file", "line", "column", "fault")))
        for f in faults:
            output.line(row((f.file, f.line or None, f.column, f.fault)))
    else:
        for f in faults:
            output.console.print(output.look.text(f.problem))
        text = f"{len(faults)} fault{'s' if len(faults) != 1 else ''} found." if faults else "All tables are in order."
        output.console.print(output.look.text(text))
    return faults[0].exit_code if faults else 0
