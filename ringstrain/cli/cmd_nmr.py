"""`ringstrain nmr`: couplings, multiplets, shifts, populations from spectra, freezing out."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse
from ringstrain.cli.intake import nothing_given, only_record
from ringstrain.errors import RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.consequences.nmr import Spectrum
    from ringstrain.consequences.spectra_inverse import PopulationEstimate
    from ringstrain.structure.records import Structure
    from ringstrain.tables.records import Tables

HELP = """What the spectrum will show: couplings of ring hydrogens per form and averaged, multiplets, 13C, freezing out.

\b
  ringstrain nmr 'CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O'
  ringstrain nmr 'O[C@@H]1CCCC[C@H]1Br' --observed-average 'H2-H7=8.9'

Quote the SMILES: shells interpret ( ) [ ] # \\ $ !. Atom numbers in text count from 1.
"""


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("nmr", help=HELP)(nmr)


def nmr(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    observed_average: Annotated[
        str | None,
        typer.Option(
            "--observed-average",
            metavar="TEXT",
            help="Populations from a spectrum: 'H1-H2=7.1' or a width 'W(H1)=22' in Hz, 'H1=3.70' in ppm with "
            "--models; several with ';'.",
            show_default=False,
        ),
    ] = None,
    models: Annotated[
        str | None,
        typer.Option(
            "--models",
            metavar="FAVOURED,OTHER",
            help="Values of the two pure forms for --observed-average, instead of predicted ones.",
            show_default=False,
        ),
    ] = None,
    observed_error: Annotated[
        float | None,
        typer.Option("--observed-error", help="Standard error of what was observed (Hz or ppm).", show_default=False),
    ] = None,
    model_error: Annotated[
        float | None,
        typer.Option("--model-error", help="Standard error of the model values (Hz or ppm).", show_default=False),
    ] = None,
    spectrometer: Annotated[
        float | None,
        typer.Option(
            "--spectrometer",
            metavar="MHZ",
            help="Frequency of the nucleus (MHz); 400 if not given.",
            show_default=False,
        ),
    ] = None,
    gap: Annotated[
        float | None,
        typer.Option(
            "--gap", metavar="PPM", help="Gap of the frozen lines (ppm); 0.48 if not given.", show_default=False
        ),
    ] = None,
    gap_hz: Annotated[
        float | None,
        typer.Option("--gap-hz", metavar="HZ", help="The same in Hz; wins over --gap.", show_default=False),
    ] = None,
    exchange_coupling: Annotated[
        float,
        typer.Option("--exchange-coupling", metavar="HZ", help="Coupling between the two exchanging nuclei (Hz)."),
    ] = 0.0,
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
    record = only_record(structures or [], ring)
    for name, value in (("--spectrometer", spectrometer), ("--gap", gap), ("--gap-hz", gap_hz)):
        _check_positive(name, value)
    _check_positive("--observed-error", observed_error)
    _check_positive("--model-error", model_error)
    question = _Question(
        temperatures=common.parse_temperatures(temperature),
        media=common.media_of(medium),
        strict=strict,
        tables=common.tables_for(table_file),
        watched=(spectrometer, gap, gap_hz, exchange_coupling),
        average=observed_average,
        models=_two_numbers(models),
        errors=(observed_error, model_error),
    )
    if models is not None and observed_average is None:
        raise UsageError("--models goes with --observed-average.", "Say what was observed, such as 'H1-H2=7.1'.")
    try:
        answers = question.answers(record.read(ring))
    except RingstrainError as error:
        return refuse(error, "nmr", record.label, output)
    _write(answers, output, question.tables)
    return 0


Answer = tuple["Spectrum", "tuple[PopulationEstimate, ...]"]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Question:
    """What is asked about the structure."""

    temperatures: tuple[float, ...]
    media: tuple[str, ...]
    strict: bool
    tables: Tables
    watched: tuple[float | None, float | None, float | None, float]
    average: str | None
    models: tuple[float, float] | None
    errors: tuple[float | None, float | None]

    def answers(self, structure: Structure) -> list[Answer]:
        """One spectrum for each medium and temperature, with what observed averages say."""
        from ringstrain.analysis import analyze
        from ringstrain.consequences.nmr import predict_nmr, usual_spectrometer
        from ringstrain.consequences.spectra_inverse import parse_averages, populations_from_average
        from ringstrain.tables.spectra import load_spectra

        spectra = load_spectra()
        frequency, ppm, hertz, coupling = self.watched
        watched = usual_spectrometer(spectra, frequency_MHz=frequency, gap_ppm=ppm, gap_Hz=hertz, coupling_Hz=coupling)
        requests = parse_averages(self.average) if self.average is not None else ()
        found: list[Answer] = []
        for medium in self.media:
            for temperature in self.temperatures:
                analysis = analyze(
                    structure, temperature_K=temperature, medium=medium, tables=self.tables, strict=self.strict
                )
                spectrum = predict_nmr(analysis, tables=self.tables, spectra=spectra, spectrometer=watched)
                estimates = tuple(
                    populations_from_average(
                        spectrum,
                        request,
                        spectra=spectra,
                        models=self.models,
                        observed_sigma=self.errors[0],
                        model_sigma=self.errors[1],
                    )
                    for request in requests
                )
                found.append((spectrum, estimates))
        return found


def _check_positive(name: str, value: float | None) -> None:
    if value is not None and not (value > 0 and math.isfinite(value)):
        raise UsageError(f"{name} {value:g} makes no sense.", "Give a number above zero.")


def _two_numbers(text: str | None) -> tuple[float, float] | None:
    """The two values of ``11.0,2.8``."""
    if text is None:
        return None
    try:
        numbers = [float(part) for part in text.split(",")]
    except ValueError:
        numbers = []
    if len(numbers) != 2 or not all(map(math.isfinite, numbers)):
        raise UsageError(f"{text!r} is no pair of values.", "Give two numbers, favoured form first: --models 11.0,2.8.")
    return numbers[0], numbers[1]


def _write(answers: list[Answer], output: common.Output, tables: Tables) -> None:
    """The answers in the chosen format."""
    if output.format == "json":
        from ringstrain.views.as_json import to_line

        for spectrum, estimates in answers:
            document = spectrum.as_dict()
            if estimates:
                document["populations_from_averages"] = [e.as_dict() for e in estimates]
            output.line(to_line(document))
        return
    from ringstrain.views import nmr as view

    if output.format == "plain":
        from ringstrain.views.nmr_plain import nmr_header, nmr_rows, population_header, population_rows

        if any(estimates for _, estimates in answers):
            output.line(population_header(output.look.units))
            for spectrum, estimates in answers:
                for line in population_rows(spectrum, estimates, output.look.units):
                    output.line(line)
            return
        output.line(nmr_header())
        for spectrum, _ in answers:
            for line in nmr_rows(spectrum):
                output.line(line)
        return
    spectra = [spectrum for spectrum, _ in answers]
    parts = (
        view.nmr_view(spectra[0], tables.sources, output.look)
        if len(spectra) == 1
        else view.moving_view(spectra, output.look)
    )
    for _, estimates in answers:
        for line in view.population_lines(estimates, output.look):
            output.console.print(output.look.text(line, "bold"))
    for part in parts:
        output.console.print(part)
