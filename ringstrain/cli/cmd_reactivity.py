"""`ringstrain reactivity`: what each chair can and cannot do."""

from __future__ import annotations

from typing import Annotated

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse
from ringstrain.cli.intake import nothing_given, only_record
from ringstrain.errors import RingstrainError

HELP = """What each chair can and cannot do: which state reacts, what it costs, which product, how surely and why.

\b
  ringstrain reactivity 'CC(C)[C@@H]1CC[C@@H](C)C[C@H]1Cl' --reaction e2
  ringstrain reactivity 'CC(C)(C)C1CCC(=O)CC1' --reaction reduction --reagent 'bulky hydride'

Classes: e2 syn-elimination substitution solvolysis epoxide addition reduction enolate acylation oxidation glycol
closure semipinacol fragmentation. Without --reaction: an overview. Quote the SMILES. Atom numbers in text count from 1.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("reactivity", help=HELP)(reactivity)


def reactivity(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    reaction: Annotated[
        str, typer.Option("--reaction", metavar="CLASS", help="One class of reaction; all in brief when not given.")
    ] = "",
    nucleophile: Annotated[
        str,
        typer.Option("--nucleophile", metavar="SMILES", help="Bonding atom first: Br, O, N, OC, C#N; H for hydride."),
    ] = "",
    electrophile: Annotated[
        str,
        typer.Option("--electrophile", metavar="SMILES", help="Group that enters, bonding atom first: Br, C, C(C)=O."),
    ] = "",
    base: Annotated[
        str, typer.Option("--base", metavar="small|bulky", help="Size of the base; of the hydride in a reduction.")
    ] = "",
    reagent: Annotated[
        str,
        typer.Option("--reagent", metavar="NAME", help="Class of reagent, e.g. 'bulky hydride', enamine, acid, metal."),
    ] = "",
    temperature: common.TemperatureOption = "298.15",
    medium: common.MediumOption = "nonpolar",
    ring: common.RingOption = "cyclohexane",
    units: common.UnitsOption = "kcal",
    format: common.FormatOption = None,
    json: common.JsonOption = False,
    strict: common.StrictOption = False,
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
    tables = common.tables_for(table_file)
    from ringstrain.analysis import analyze
    from ringstrain.consequences.answer import check_class
    from ringstrain.consequences.overview import react
    from ringstrain.consequences.request import make_request
    from ringstrain.views import reactivity as views

    if reaction:
        check_class(reaction)
    request = make_request(nucleophile=nucleophile, base=base, reagent=reagent, electrophile=electrophile)
    temperatures, media = common.parse_temperatures(temperature), common.media_of(medium)
    record = only_record(structures or [], ring)
    try:
        structure = record.read(ring)
        answers = [
            react(
                analyze(structure, temperature_K=kelvin, medium=name, tables=tables, strict=strict),
                reaction,
                request,
                tables,
            )
            for name in media
            for kelvin in temperatures
        ]
    except RingstrainError as error:
        return refuse(error, "reactivity", record.label, output)
    if output.format == "plain":
        output.line(views.plain_header(output.look.units))
    for place, answer in enumerate(answers):
        if output.format == "json":
            output.line(views.reactivity_json(answer))
        elif output.format == "plain":
            for line in views.plain_rows(answer, output.look.units):
                output.line(line)
        else:
            if place:
                output.console.print()
            for part in views.reactivity_view(answer, tables.sources, output.look):
                output.console.print(part)
    return 0
