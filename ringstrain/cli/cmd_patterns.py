"""`ringstrain patterns`: every way to place groups on a ring, filtered and ranked."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import chain, islice
from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.errors import UsageError

if TYPE_CHECKING:
    from ringstrain.pattern_records import Pattern
    from ringstrain.patterns import Search

HELP = """Every way to place groups on a ring, each once, filtered and ranked.

\b
  ringstrain patterns Me Me Me OH --axial "OH>=0.95"
  ringstrain patterns tBu --choose-from Me,OH,F --count 1:2 --no-geminal --top 20
  ringstrain patterns OH --ring '[CH2:1]1[CH2:2]CCCC1=O'

Groups are table keys, aliases or SMILES with a star ('*CC=O'). Quote conditions: shells interpret > and <.
"""
#: A table longer than this is cut; the other formats are not.
_TABLE_ROWS = 50


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("patterns", help=HELP)(patterns)


def patterns(
    context: typer.Context,
    groups: Annotated[
        list[str] | None,
        typer.Argument(
            metavar="GROUP...",
            help="Groups to place, all of them; repeat a name to place it twice.",
            show_default=False,
        ),
    ] = None,
    choose_from: Annotated[
        str | None,
        typer.Option(
            "--choose-from",
            metavar="A,B,C",
            help="Place some of these besides, each as often as it likes.",
            show_default=False,
        ),
    ] = None,
    count: Annotated[
        str | None,
        typer.Option(
            "--count",
            metavar="N|M:N",
            help="How many to choose, e.g. 2 or 1:3, else one; only with --choose-from.",
            show_default=False,
        ),
    ] = None,
    ring: Annotated[
        str,
        typer.Option(
            "--ring", metavar="NAME|SMILES", help="Parent ring, e.g. oxane, or a SMILES with marked positions."
        ),
    ] = "cyclohexane",
    axial: Annotated[
        list[str] | None,
        typer.Option(
            "--axial",
            metavar="GROUP[>=SHARE]",
            help="Axial in the favoured form, or to this share (one such group at least).",
        ),
    ] = None,
    equatorial: Annotated[
        list[str] | None,
        typer.Option("--equatorial", metavar="GROUP[>=SHARE]", help="The same for equatorial (all such groups)."),
    ] = None,
    locked: Annotated[
        float | None,
        typer.Option(
            "--locked", metavar="SHARE", help="One ring shape holds at least this share, e.g. 0.99.", show_default=False
        ),
    ] = None,
    gap: Annotated[
        str | None,
        typer.Option(
            "--gap",
            metavar="CONDITION",
            help="Gap to the next ring form in the unit of --units, e.g. '>=2'.",
            show_default=False,
        ),
    ] = None,
    cis: Annotated[
        list[str] | None,
        typer.Option("--cis", metavar="PAIR", help="Two positions (1,2) or groups (Me,OH) on one face."),
    ] = None,
    trans: Annotated[
        list[str] | None, typer.Option("--trans", metavar="PAIR", help="Two positions or groups on opposite faces.")
    ] = None,
    no_geminal: Annotated[bool, typer.Option("--no-geminal", help="No two groups on one atom.")] = False,
    enantiomers: Annotated[bool, typer.Option("--enantiomers", help="List both enantiomers of a pair.")] = False,
    rank: Annotated[
        str, typer.Option("--rank", metavar="ORDER", help="stability, bias (one shape), axial:GROUP, or none.")
    ] = "stability",
    top: Annotated[int | None, typer.Option("--top", metavar="N", help="Only the first N.", show_default=False)] = None,
    smiles: Annotated[
        bool, typer.Option("--smiles", help="SMILES lines only, each with its pattern after a tab.")
    ] = False,
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
    if not groups and choose_from is None:
        typer.echo(context.get_help(), err=True)
        return 2
    output = common.make_output(format, json, units=units, ascii=ascii, no_color=no_color)
    if smiles and (json or format is not None):
        raise UsageError("--smiles and a format contradict each other.", "Give one of them.")
    temperatures = common.parse_temperatures(temperature)
    media = common.media_of(medium)
    if len(temperatures) > 1 or len(media) > 1:
        raise UsageError("Patterns are ranked at one temperature in one medium.", "Give one value to -T and --medium.")
    choices = _choices(choose_from)
    if count is not None and not choices:
        raise UsageError(
            "--count says how many to choose, and there is no --choose-from.", "Add it: --choose-from Me,OH."
        )
    from ringstrain.patterns import plan_search
    from ringstrain.sieve import Wish

    is_table = output.format == "table" and not smiles
    search = plan_search(
        groups or (),
        ring=ring,
        choose_from=choices,
        count=parse_count(count or "1"),
        geminal=not no_geminal,
        enantiomers=enantiomers,
        wish=Wish(
            axial=tuple(axial or ()),
            equatorial=tuple(equatorial or ()),
            locked=locked,
            gap=None if gap is None else _in_kcal(gap, units),
            cis=tuple(cis or ()),
            trans=tuple(trans or ()),
            rank_by=rank,
        ),
        top=_TABLE_ROWS if is_table and top is None else top,
        temperature_K=temperatures[0],
        medium=media[0],
        tables=common.tables_for(table_file),
    )
    _write(output, search, smiles=smiles, enantiomers=enantiomers)
    return 0


def _choices(text: str | None) -> list[str]:
    """Names of ``Me,OH``; none for None."""
    names = [name for name in (text or "").split(",") if name.strip()]
    if text is not None and not names:
        raise UsageError(f"{text!r} names no group.", "Give some to choose from: --choose-from Me,OH.")
    return names


def parse_count(text: str) -> tuple[int, int]:
    """Fewest and most of ``2`` or ``1:3``.

    Raises
    ------
    UsageError
        If it is neither.
    """
    parts = text.split(":")
    if len(parts) <= 2 and all(part.strip().isdecimal() for part in parts):
        return int(parts[0]), int(parts[-1])
    raise UsageError(f"{text!r} is no count.", "Give a number or a range: 2 or 1:3.")


def _in_kcal(gap: str, units: str) -> str:
    """A condition on the gap with its number in kcal/mol."""
    from ringstrain.sieve import parse_comparison
    from ringstrain.units import KJ_PER_KCAL

    condition = parse_comparison(gap)
    if units != "kJ" or condition.name or not condition.sign:
        return gap
    return f"{condition.sign}{condition.value / KJ_PER_KCAL!r}"


def _write(output: common.Output, search: Search, *, smiles: bool, enantiomers: bool) -> None:
    """Write the list in the chosen format."""
    from ringstrain.views import patterns as views

    found = search.run()
    units = output.look.units
    if smiles:
        _write_lines(output, found, (), views.smiles_line)
    elif output.format == "json":
        _write_lines(output, found, (), views.pattern_line)
    elif output.format == "plain":
        _write_lines(output, found, (views.patterns_header(units),), lambda p: views.pattern_row(p, units))
    else:
        listed = list(found)
        output.console.print(views.patterns_view(listed, search.tally, output.look, enantiomers=enantiomers))


def _write_lines(output: common.Output, found: Iterator[Pattern], head: tuple[str, ...], write: object) -> None:
    """A header and one line for each pattern, as they come.

    The first pattern is asked for before the header is written, since a search that cannot be done says so only then.
    """
    assert callable(write)
    first = list(islice(found, 1))
    for line in chain(head, (write(pattern) for pattern in chain(first, found))):
        output.line(line)
