"""Options and set-up that every command shares; the same flag means the same everywhere."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Literal

import typer

from ringstrain.errors import UsageError
from ringstrain.provenance import MEDIA
from ringstrain.views.look import Look, Units

if TYPE_CHECKING:
    from rich.console import Console

    from ringstrain.tables.records import Tables

Format = Literal["table", "plain", "json"]
#: More temperatures than this in one range are a slip of the finger.
MAX_TEMPERATURES = 500

StructuresArgument = Annotated[
    list[str] | None,
    typer.Argument(
        metavar="STRUCTURE...",
        help="A quoted SMILES, a file (.mol .sdf .smi, also .gz), '-' for standard input, or a ring shorthand "
        "like '1b-tBu 4a-Me'.",
        show_default=False,
    ),
]
RingOption = Annotated[str, typer.Option("--ring", metavar="NAME", help="Parent ring of a shorthand, e.g. oxane.")]
TemperatureOption = Annotated[
    str,
    typer.Option("-T", "--temperature", metavar="KELVIN", help="Temperature in kelvin, or a range like 200:500:50."),
]
MediumOption = Annotated[
    str,
    typer.Option(
        "--medium", metavar="NAME", help="gas, nonpolar, polar, protic, all, or a solvent such as chloroform."
    ),
]
UnitsOption = Annotated[
    str,
    typer.Option("--units", metavar="kcal|kJ", help="Energy unit of tables and TSV (per mole); JSON stays in kcal."),
]
FormatOption = Annotated[
    str | None,
    typer.Option(
        "--format",
        metavar="table|plain|json",
        help="Default: table on a terminal, plain (TSV) in a pipe.",
        show_default=False,
    ),
]
JsonOption = Annotated[bool, typer.Option("--json", help="Short for --format json.")]
StrictOption = Annotated[bool, typer.Option("--strict", help="Fail (exit 5) when a contact has no tabulated price.")]
TableFileOption = Annotated[
    str | None,
    typer.Option(
        "--table-file", metavar="CSV", help="Your own values; they win and are marked as yours.", show_default=False
    ),
]
NoColorOption = Annotated[bool, typer.Option("--no-color", help="No colour (also with NO_COLOR set).")]
AsciiOption = Annotated[bool, typer.Option("--ascii", help="Nothing beyond ASCII in the output.")]
QuietOption = Annotated[bool, typer.Option("-q", "--quiet", help="No progress messages; errors stay.")]
DebugOption = Annotated[bool, typer.Option("--debug", help="Show the traceback of an unexpected error.")]


@dataclass(frozen=True, slots=True, kw_only=True)
class Output:
    """Where and how the answer is written.

    Attributes
    ----------
    format
        ``table``, ``plain`` or ``json``.
    console
        Standard output.
    look
        Width, units, signs.
    """

    format: Format
    console: Console
    look: Look

    def line(self, text: str) -> None:
        """One line as it is, for TSV and JSON; flushed, so that a reader downstream sees it."""
        sys.stdout.write(text + "\n")
        sys.stdout.flush()


def make_output(format: str | None, json: bool, *, units: str, ascii: bool, no_color: bool) -> Output:
    """The output a command writes to.

    Raises
    ------
    UsageError
        If the format or unit is unknown, or the format contradicts ``--json``.
    """
    from ringstrain.cli.console import make_console, make_look

    console = make_console(no_color=no_color)
    return Output(
        format=_choose_format(format, json),
        console=console,
        look=make_look(console, ascii=ascii, units=_choose_units(units)),
    )


def _choose_format(format: str | None, json: bool) -> Format:
    """The format asked for; else a table on a terminal and TSV in a pipe."""
    if format is None:
        return "json" if json else "table" if sys.stdout.isatty() else "plain"
    for known in ("table", "plain", "json"):
        if format == known:
            if json and known != "json":
                raise UsageError(f"--json and --format {format} contradict each other.", "Give one of them.")
            return known
    raise UsageError(f"No format is called {format!r}.", "Use table, plain or json.")


def _choose_units(units: str) -> Units:
    """The energy unit asked for."""
    if units in ("kcal", "kJ"):
        return units  # type: ignore[return-value]
    raise UsageError(f"No energy unit is called {units!r}.", "Use kcal or kJ.")


def parse_temperatures(text: str) -> tuple[float, ...]:
    """Temperatures [K] of ``298.15`` or of a range ``start:stop:step``.

    Raises
    ------
    UsageError
        If it is neither.
    """
    parts = text.split(":")
    try:
        numbers = [float(part) for part in parts]
    except ValueError:
        numbers = []
    if len(numbers) == 1 and _is_temperature(numbers[0]):
        return (numbers[0],)
    if len(numbers) == 3:
        start, stop, step = numbers
        if _is_temperature(start) and _is_temperature(stop) and 0 < step < float("inf") and start <= stop:
            count = int((stop - start) / step + 1e-9) + 1
            if count <= MAX_TEMPERATURES:
                return tuple(start + i * step for i in range(count))
            raise UsageError(f"The range {text} holds {count} temperatures.", f"Use at most {MAX_TEMPERATURES}.")
    raise UsageError(
        f"{text!r} is no temperature or range.",
        "Give kelvin above 0 and at most 2000, such as 298.15, or start:stop:step such as 200:500:50.",
    )


def _is_temperature(value: float) -> bool:
    """True for a temperature a solution can have [K]."""
    return 0 < value <= 2000


def atoms_of(text: str | None) -> tuple[int, ...] | None:
    """Zero-based atoms of ``2,5``; None for None.

    Raises
    ------
    UsageError
        If it is no list of numbers from 1.
    """
    if text is None:
        return None
    parts = [part for part in text.replace(" ", "").split(",") if part]
    if not parts or not all(part.isdecimal() and int(part) > 0 for part in parts):
        raise UsageError(f"{text!r} names no atoms.", "Give atom numbers from 1, such as --at 2,5.")
    return tuple(int(part) - 1 for part in parts)


def media_of(name: str) -> tuple[str, ...]:
    """The media a name stands for: all four for ``all``."""
    return MEDIA if name.lower() == "all" else (name,)


def tables_for(table_file: str | None) -> Tables:
    """The price tables, with the user's own on top when a file is given.

    Raises
    ------
    TableError
        If our tables are faulty.
    InputError
        If the user's file is.
    """
    from ringstrain.tables import load_tables

    tables = load_tables()
    if table_file is None:
        return tables
    from pathlib import Path

    from ringstrain.tables.user import load_user_tables

    return load_user_tables(Path(table_file), tables)
