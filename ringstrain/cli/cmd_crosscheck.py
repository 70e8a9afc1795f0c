"""`ringstrain crosscheck`: a force field's second opinion on one structure."""

from __future__ import annotations

import sys
import time
from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse
from ringstrain.cli.intake import nothing_given, only_record
from ringstrain.errors import RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.crosscheck.records import CrossCheck, MethodName

HELP = """A second opinion: conformers of every state by a force field, beside the ledger.

\b
  ringstrain crosscheck 'CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O'
  ringstrain crosscheck '1b-tBu 4b-tBu' --method xtb

Quote the SMILES: shells interpret ( ) [ ] # \\ $ !. Method xtb (GFN2-xTB) needs: pip install 'ringstrain[xtb]'.
"""
#: Progress shows once the job has taken this long [s].
PATIENCE_S = 1.0
_BAR = 30
_LONGEST_S = 3600.0


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("crosscheck", help=HELP)(crosscheck)


def crosscheck(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    method: Annotated[
        str, typer.Option("--method", metavar="mmff|xtb", help="MMFF94s, or GFN2-xTB (with ringstrain[xtb]).")
    ] = "mmff",
    conformers: Annotated[
        int, typer.Option("--conformers", metavar="N", help="Conformers to embed; 0 picks a number.")
    ] = 0,
    seconds: Annotated[
        float, typer.Option("--seconds", metavar="S", help="Stop the search after this many seconds.")
    ] = 120.0,
    seed: Annotated[int, typer.Option("--seed", metavar="N", help="Seed of the embedding.")] = 1,
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
    temperatures, media = common.parse_temperatures(temperature), common.media_of(medium)
    if len(temperatures) > 1 or len(media) > 1:
        raise UsageError("A cross-check takes one temperature and one medium.", "Give one of each.")
    chosen = _method(method)
    if not 0 <= conformers <= 1000 or not 0 < seconds <= _LONGEST_S or not 0 <= seed < 2**31:
        raise UsageError(
            "--conformers goes from 0 to 1000, --seconds to 3600, --seed from 0 to 2147483647.", "Change the number."
        )
    tables = common.tables_for(table_file)
    from ringstrain.crosscheck.run import crosscheck as check

    watch = _Watch(seconds, show=not quiet and sys.stderr.isatty())
    try:
        answer = check(
            record.read(ring),
            method=chosen,
            temperature_K=temperatures[0],
            medium=media[0],
            tables=tables,
            conformers=conformers or None,
            seed=seed,
            keep_going=watch,
        )
    except RingstrainError as error:
        watch.clear()  # the complaint gets a line of its own
        return refuse(error, "crosscheck", record.label, output)
    finally:
        watch.clear()
    _write(answer, output)
    return 0


def _method(name: str) -> MethodName:
    """The method asked for, when it can run.

    Raises
    ------
    UsageError
        If it is unknown or its package is missing.
    """
    if name == "mmff":
        return "mmff"
    if name != "xtb":
        raise UsageError(f"No method is called {name!r}.", "Use mmff or xtb.")
    from ringstrain.crosscheck.xtb import require

    require()
    return "xtb"


class _Watch:
    """Stops the search when time is up; draws a bar on standard error once it has taken a second.

    Parameters
    ----------
    seconds
        Longest time [s].
    show
        True to draw the bar.
    """

    def __init__(self, seconds: float, *, show: bool) -> None:
        self._seconds, self._show = seconds, show
        self._start = self._drawn = time.monotonic()
        self._is_drawn = False

    def __call__(self, done: int, total: int) -> bool:
        """True to go on after so many conformers."""
        now = time.monotonic()
        if self._show and now - self._start > PATIENCE_S and now - self._drawn > 0.1:
            self._drawn, self._is_drawn = now, True
            filled = _BAR * done // max(total, 1)
            what = f"{done} of {total} conformers" if done < total else "building and refining states"
            sys.stderr.write(f"\r[{'#' * filled}{'.' * (_BAR - filled)}] {what}\033[K")
            sys.stderr.flush()
        return now - self._start < self._seconds

    def clear(self) -> None:
        """Wipe the bar; nothing is written where none was drawn."""
        if self._is_drawn:
            sys.stderr.write("\r\033[K")
            sys.stderr.flush()
            self._is_drawn = False


def _write(answer: CrossCheck, output: common.Output) -> None:
    """The answer in the chosen format."""
    if output.format == "json":
        from ringstrain.views.as_json import to_line

        output.line(to_line(answer.as_dict()))
        return
    from ringstrain.views import crosscheck as view

    if output.format == "plain":
        output.line(view.plain_header(output.look.units))
        for line in view.plain_rows(answer, output.look.units):
            output.line(line)
        return
    for part in view.crosscheck_view(answer, output.look):
        output.console.print(part)
