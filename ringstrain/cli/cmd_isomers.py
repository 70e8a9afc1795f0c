"""`ringstrain isomers`: diastereomers ranked, and what epimerisation would give."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse
from ringstrain.cli.intake import nothing_given, only_record
from ringstrain.errors import RingstrainError

if TYPE_CHECKING:
    from ringstrain.ranking import Ranking

HELP = """Stereoisomers of one skeleton ranked: which is most stable, and what the mixture would be.

\b
  ringstrain isomers 'CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O'
  ringstrain isomers 'CC1CCC(=O)C(C(C)C)C1' --epimerizable

Quote the SMILES: shells interpret ( ) [ ] # \\ $ !. Atom numbers in text count from 1.
"""
#: Progress shows once the job has taken this long [s].
PATIENCE_S = 1.0


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("isomers", help=HELP)(isomers)


def isomers(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    at: Annotated[
        str | None, typer.Option("--at", metavar="ATOMS", help="Vary only these centres, e.g. 2,5 (from 1).")
    ] = None,
    epimerizable: Annotated[
        bool, typer.Option("--epimerizable", help="Vary only centres that acid or base can invert.")
    ] = False,
    enantiomers: Annotated[
        bool, typer.Option("--enantiomers", help="List enantiomers as entries of their own.")
    ] = False,
    most: Annotated[int, typer.Option("--most", metavar="N", help="Rows of the table at most; 0 for all.")] = 16,
    temperature: common.TemperatureOption = "298.15",
    medium: common.MediumOption = "nonpolar",
    ring: common.RingOption = "cyclohexane",
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
    if nothing_given(structures):
        typer.echo(context.get_help(), err=True)
        return 2
    output = common.make_output(format, json, units=units, ascii=ascii, no_color=no_color)
    record = only_record(structures or [], ring)
    temperatures = common.parse_temperatures(temperature)
    media = common.media_of(medium)
    wanted = common.atoms_of(at)
    tables = common.tables_for(table_file)
    from ringstrain.isomers import rank_isomers

    try:
        structure = record.read(ring)
        rankings = tuple(
            rank_isomers(
                structure,
                at=wanted,
                temperature_K=kelvin,
                medium=name,
                tables=tables,
                epimerizable=epimerizable,
                enantiomers=enantiomers,
                progress=_progress(quiet),
            )
            for name in media
            for kelvin in temperatures
        )
    except RingstrainError as error:
        return refuse(error, "isomers", record.label, output)
    _write(rankings, output, most)
    return 0


def _progress(quiet: bool) -> Callable[[int, int], None] | None:
    """A progress line on standard error once the job has taken a second; None where nobody would see it."""
    if quiet or not sys.stderr.isatty():
        return None
    start = time.monotonic()
    shown = [start]

    def show(done: int, total: int) -> None:
        now = time.monotonic()
        if now - start > PATIENCE_S and (now - shown[0] > 0.1 or done == total):
            shown[0] = now
            end = "\r\033[K" if done == total else ""
            sys.stderr.write(f"\r{done} of {total} configurations{end}")
            sys.stderr.flush()

    return show


def _write(rankings: tuple[Ranking, ...], output: common.Output, most: int) -> None:
    """The rankings in the chosen format."""
    if output.format == "json":
        from ringstrain.views.as_json import to_line

        for ranking in rankings:
            output.line(to_line(ranking.as_dict()))
        return
    from ringstrain.views import isomers as view

    if output.format == "plain":
        output.line(view.plain_header(output.look.units))
        for ranking in rankings:
            for line in view.plain_rows(ranking, output.look.units):
                output.line(line)
        return
    parts = (
        view.ranking_view(rankings[0], output.look, most)
        if len(rankings) == 1
        else view.shares_view(rankings, output.look)
    )
    for part in parts:
        output.console.print(part)
