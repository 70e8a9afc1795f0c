"""`ringstrain chairs`: states, ledger and equilibrium of one or several structures."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse, remark
from ringstrain.cli.intake import PARENT, Record, check_ring, nothing_given, records
from ringstrain.errors import RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.analysis import Analysis
    from ringstrain.tables.records import Tables

HELP = """Chairs of each six-membered ring system: who wins, by how much, how surely and why.

\b
  ringstrain chairs 'C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1'
  ringstrain chairs '1b-tBu 4a-Me' --medium all

Quote the SMILES: shells interpret ( ) [ ] # \\ $ !. Atom numbers in text count from 1.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("chairs", help=HELP)(chairs)


def chairs(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    ledger: Annotated[
        bool, typer.Option("--ledger", help="Plain format: one row per ledger line instead of per state.")
    ] = False,
    draw: Annotated[bool, typer.Option("--draw", help="Drawings of the states below the table.")] = False,
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
    wanted = "table" if draw and format is None and not json else format
    output = common.make_output(wanted, json, units=units, ascii=ascii, no_color=no_color)
    if draw and output.format != "table":
        raise UsageError("--draw goes with the table format.", "Use `ringstrain draw` for pictures alone.")
    tables = common.tables_for(table_file)
    question = Question(
        temperatures=common.parse_temperatures(temperature),
        media=common.media_of(medium),
        strict=strict,
        ring=ring,
        tables=tables,
    )
    question.check()
    check_ring(ring, structures or ())
    writer = _Writer(output=output, tables=tables, ledger=ledger, draw=draw)
    worst, is_idle = 0, ring != PARENT
    for record in records(structures or []):
        is_idle = is_idle and not record.takes_ring
        try:
            writer.write(question.answers(record))
        except RingstrainError as error:
            worst = max(worst, refuse(error, "chairs", record.label, output))
    if is_idle:
        remark(f"--ring {ring} was not used: none of the structures is a shorthand.")
    return worst


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """What is asked about every structure.

    Attributes
    ----------
    temperatures
        [K].
    media
        Medium classes or one solvent.
    strict
        True to fail where a price is missing.
    ring
        Parent ring of shorthands.
    tables
        Price tables.
    """

    temperatures: tuple[float, ...]
    media: tuple[str, ...]
    strict: bool
    ring: str
    tables: Tables

    def check(self) -> None:
        """Refuse a medium or temperature that cannot be, before any structure is read.

        Raises
        ------
        UsageError
            If one is.
        """
        from ringstrain.tables.conditions import make_conditions

        for medium in self.media:
            make_conditions(self.tables, temperature_K=self.temperatures[0], medium=medium)

    def answers(self, record: Record) -> tuple[Analysis, ...]:
        """One analysis for each medium and temperature, media first.

        Raises
        ------
        RingstrainError
            If the structure cannot be read or analysed.
        """
        from ringstrain.analysis import analyze

        structure = record.read(self.ring)
        return tuple(
            analyze(structure, temperature_K=temperature, medium=medium, tables=self.tables, strict=self.strict)
            for medium in self.media
            for temperature in self.temperatures
        )


@dataclass(slots=True, kw_only=True)
class _Writer:
    """Writes answers one after the other in the chosen format."""

    output: common.Output
    tables: Tables
    ledger: bool
    draw: bool = False
    count: int = 0

    def write(self, answers: tuple[Analysis, ...]) -> None:
        """The answers for one structure."""
        if self.output.format == "json":
            self._write_json(answers)
        elif self.output.format == "plain":
            for line in self._plain_lines(answers):
                self.output.line(line)
        else:
            self._write_tables(answers)
        self.count += 1

    def _write_json(self, answers: tuple[Analysis, ...]) -> None:
        from ringstrain.views.as_json import chairs_document, to_line

        for analysis in answers:
            self.output.line(to_line(chairs_document(analysis)))

    def _plain_lines(self, answers: tuple[Analysis, ...]) -> Iterator[str]:
        from ringstrain.views import plain

        units = self.output.look.units
        header, rows = (
            (plain.ledger_header, plain.ledger_rows) if self.ledger else (plain.states_header, plain.state_rows)
        )
        if not self.count:
            yield header(units)
        for analysis in answers:
            yield from rows(analysis, units)

    def _write_tables(self, answers: tuple[Analysis, ...]) -> None:
        from ringstrain.views.conditions import conditions_view
        from ringstrain.views.rich_tables import chairs_view

        console, look = self.output.console, self.output.look
        if self.count:
            console.print()
            console.print(look.text("\N{BOX DRAWINGS LIGHT HORIZONTAL}" * min(look.width, 100), "dim"))
        single = len(answers) == 1
        view = chairs_view(answers[0], self.tables.sources, look) if single else conditions_view(answers, look)
        for part in view:
            console.print(part)
        if self.draw:
            from ringstrain.views.drawing.terminal import states_text
            from ringstrain.views.rich_tables import shown_states

            for result in answers[0].ring_systems:
                console.print()
                for line in states_text(answers[0], result, shown_states(result), look).splitlines():
                    console.print(look.text(line), soft_wrap=True)
