"""`ringstrain assign`: which stereoisomer fits observed couplings."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse
from ringstrain.cli.intake import nothing_given, only_record
from ringstrain.errors import RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.consequences.assignment import Assignment

HELP = """Which stereoisomer fits observed couplings: all of them, or candidates you give, ranked by likelihood.

\b
  ringstrain assign 'CC(C)C1CCC(C)CC1O' --observed 'H10=10.4,10.4,4.3'
  ringstrain assign 'CC(C)(C)C1CCC(O)CC1' --observed 'H8=tt 10.9,4.3'

H10 is a hydrogen on atom 10 (atoms count from 1, as `ringstrain nmr` lists them). Quote the SMILES.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("assign", help=HELP)(assign)


def assign(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    observed: Annotated[
        str | None,
        typer.Option(
            "--observed",
            metavar="TEXT",
            help="Couplings in Hz: 'H1=10.8,4.2; H4=3.1', with a word if you like: 'H1=td 10.8,4.2', 'H4=br s', or the "
            "width of the outer lines: 'H1=W 30'.",
            show_default=False,
        ),
    ] = None,
    candidate: Annotated[
        list[str] | None,
        typer.Option(
            "--candidate",
            metavar="SMILES",
            help="An isomer to compare; repeat. All isomers if none is given.",
            show_default=False,
        ),
    ] = None,
    at: Annotated[
        str | None,
        typer.Option("--at", metavar="ATOMS", help="Vary only these centres, e.g. 2,5 (from 1).", show_default=False),
    ] = None,
    most: Annotated[int, typer.Option("--most", metavar="N", help="Candidates listed at most; 0 for all.")] = 8,
    temperature: common.TemperatureOption = "298.15",
    medium: common.MediumOption = "nonpolar",
    ring: common.RingOption = "cyclohexane",
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
    output = common.make_output(format, json, units="kcal", ascii=ascii, no_color=no_color)
    if observed is None:
        raise UsageError("--observed is missing.", 'Give the couplings, such as --observed "H1=10.8,4.2; H4=3.1".')
    record = only_record(structures or [], ring, candidate or ())
    temperatures = common.parse_temperatures(temperature)
    media = common.media_of(medium)
    tables = common.tables_for(table_file)
    centres = common.atoms_of(at)
    from ringstrain.consequences.assign import assign as rank
    from ringstrain.consequences.observations import parse_observed
    from ringstrain.structure.read import read

    observations = parse_observed(observed)
    try:
        structure = record.read(ring)
        rivals = tuple(read(text, ring=ring) for text in candidate or ())
        answers = tuple(
            rank(
                structure,
                observations,
                candidates=rivals,
                at=centres,
                temperature_K=kelvin,
                medium=name,
                tables=tables,
            )
            for name in media
            for kelvin in temperatures
        )
    except RingstrainError as error:
        return refuse(error, "assign", record.label, output)
    _write(answers, output, most)
    return 0


def _write(answers: tuple[Assignment, ...], output: common.Output, most: int) -> None:
    """The answers in the chosen format."""
    from ringstrain.views import assignment as view

    if output.format == "json":
        from ringstrain.views.as_json import to_line

        for answer in answers:
            output.line(to_line(answer.as_dict()))
    elif output.format == "plain":
        output.line(view.plain_header())
        for answer in answers:
            for line in view.plain_rows(answer):
                output.line(line)
    else:
        for number, answer in enumerate(answers):
            if number:
                output.console.print()
            for part in view.assignment_view(answer, output.look, most):
                output.console.print(part)
