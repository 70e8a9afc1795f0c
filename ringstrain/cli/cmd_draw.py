"""`ringstrain draw`: chairs, Newman views, ladders and reports as files or in the terminal."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Literal

import typer

from ringstrain.cli import common
from ringstrain.cli.border import refuse
from ringstrain.cli.intake import nothing_given, only_record
from ringstrain.errors import InputError, RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.analysis import Analysis, State, SystemResult
    from ringstrain.consequences.finding import Finding
    from ringstrain.tables.records import Tables
    from ringstrain.views.drawing.scene import Scene
    from ringstrain.views.drawing.states import Wishes
    from ringstrain.views.look import Look

HELP = """Drawings of the states: .svg .png .txt, a report as .html, or in the terminal without -o.

\b
  ringstrain draw 'CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O' -o menthol.svg
  ringstrain draw '1b-tBu 4a-Me' -o report.html --nmr

Quote the SMILES: shells interpret ( ) [ ] # \\ $ !. Atom numbers in drawings count from 1.
"""
Suffix = Literal[".svg", ".png", ".txt", ".html"]
SUFFIXES: tuple[Suffix, ...] = (".svg", ".png", ".txt", ".html")


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("draw", help=HELP)(draw)


def draw(
    context: typer.Context,
    structures: common.StructuresArgument = None,
    output: Annotated[
        str | None,
        typer.Option("-o", "--output", metavar="FILE", help="File to write; the suffix decides.", show_default=False),
    ] = None,
    state: Annotated[
        str | None,
        typer.Option(
            "--state", metavar="IDS", help="States to draw, e.g. A or A,C; else the important ones.", show_default=False
        ),
    ] = None,
    newman: Annotated[
        str | None,
        typer.Option(
            "--newman", metavar="FRONT,BACK", help="Look down a ring bond, e.g. 1,2 (from 1).", show_default=False
        ),
    ] = None,
    ladder: Annotated[
        bool, typer.Option("--ladder", help="Energies and shares; with a range of -T shares against temperature.")
    ] = False,
    isomers: Annotated[bool, typer.Option("--isomers", help="A ladder of all stereoisomers.")] = False,
    numbers: Annotated[bool, typer.Option("--numbers", help="Atom numbers, as in the tables.")] = False,
    gauche: Annotated[bool, typer.Option("--gauche", help="Mark gauche pairs of groups.")] = False,
    hydrogens: Annotated[bool, typer.Option("--hydrogens", help="All hydrogens on the rings.")] = False,
    no_clashes: Annotated[bool, typer.Option("--no-clashes", help="Leave syn-axial and peri marks out.")] = False,
    nmr: Annotated[bool, typer.Option("--nmr", help="Couplings in the report.")] = False,
    reactivity: Annotated[bool, typer.Option("--reactivity", help="What reacts, in the report.")] = False,
    temperature: common.TemperatureOption = "298.15",
    medium: common.MediumOption = "nonpolar",
    ring: common.RingOption = "cyclohexane",
    units: common.UnitsOption = "kcal",
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
    out = common.make_output(None, False, units=units, ascii=ascii, no_color=no_color)
    suffix = _suffix(output)
    views = [name for name, wanted in (("--newman", newman), ("--ladder", ladder), ("--isomers", isomers)) if wanted]
    _check(views, suffix, nmr=nmr, reactivity=reactivity, state=state)
    media = common.media_of(medium)
    if len(media) > 1:
        raise UsageError("A drawing is for one medium.", "Name one, such as --medium polar.")
    job = _Job(
        temperatures=common.parse_temperatures(temperature),
        medium=media[0],
        strict=strict,
        tables=common.tables_for(table_file),
        look=out.look,
        ids=_ids(state),
        bond=None if newman is None else _bond(newman),
        views=tuple(views),
        shown=(numbers, gauche, not no_clashes, hydrogens),
        extras=(nmr, reactivity),
    )
    record = only_record(structures or [], ring)
    try:
        structure = record.read(ring)
        content = job.content(structure, suffix)
        if output is None:
            assert isinstance(content, str)
            for line in content.splitlines():
                out.line(line)
        else:
            _save(output, content)
    except RingstrainError as error:
        return refuse(error, "draw", record.label, out)
    return 0


def _suffix(path: str | None) -> Suffix | None:
    """Kind of file a name asks for; None for the terminal."""
    if path is None:
        return None
    for suffix in SUFFIXES:
        if path.lower().endswith(suffix):
            return suffix
    raise UsageError(f"{path!r} does not say what to write.", f"End the file name in {' '.join(SUFFIXES)}.")


def _check(views: Sequence[str], suffix: Suffix | None, *, nmr: bool, reactivity: bool, state: str | None) -> None:
    """Refuse options that contradict each other."""
    if len(views) > 1:
        raise UsageError(f"{' and '.join(views)} are different pictures.", "Ask for one at a time.")
    if suffix == ".html" and views:
        raise UsageError(f"A report does not take {views[0]}.", "Write the picture to a .svg file.")
    if suffix != ".html" and (nmr or reactivity):
        raise UsageError("--nmr and --reactivity belong into a report.", "Write a .html file.")
    if "--isomers" in views and state:
        raise UsageError("--isomers draws no single states.", "Leave --state out.")


def _ids(text: str | None) -> tuple[str, ...]:
    """State ids of ``A,C``."""
    if text is None:
        return ()
    ids = tuple(part.strip().upper() for part in text.split(",") if part.strip())
    if not ids:
        raise UsageError(f"{text!r} names no state.", "Give ids such as A or A,B.")
    return ids


def _bond(text: str) -> tuple[int, int]:
    """Two zero-based atoms of ``1,2``."""
    parts = [part.strip() for part in text.split(",")]
    if len(parts) != 2 or not all(part.isdecimal() and int(part) > 0 for part in parts):
        raise UsageError(f"{text!r} is no bond.", "Give two atom numbers from 1, such as --newman 1,2.")
    return int(parts[0]) - 1, int(parts[1]) - 1


def _save(path: str, content: str | bytes) -> None:
    """Write a file.

    Raises
    ------
    InputError
        If it cannot be written.
    """
    try:
        if isinstance(content, bytes):
            Path(path).write_bytes(content)
        else:
            with open(path, "w", encoding="utf-8", newline="\n") as stream:
                stream.write(content)
    except OSError as error:
        reason = error.strerror or "unknown reason"
        raise InputError(f"Cannot write {path!r}: {reason}.", "Check the folder and its permissions.") from None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Job:
    """What is to be drawn.

    Attributes
    ----------
    temperatures
        [K].
    medium, strict, tables, look
        As everywhere.
    ids
        States asked for; empty for the important ones.
    bond
        Bond to look down, None for no Newman view.
    views
        The option that chooses a picture, if any.
    shown
        Numbers, gauche pairs, clashes, hydrogens.
    extras
        Couplings and reactivity in a report.
    """

    temperatures: tuple[float, ...]
    medium: str
    strict: bool
    tables: Tables
    look: Look
    ids: tuple[str, ...]
    bond: tuple[int, int] | None
    views: tuple[str, ...]
    shown: tuple[bool, bool, bool, bool]
    extras: tuple[bool, bool]

    @property
    def wishes(self) -> Wishes:
        """What drawings show."""
        from ringstrain.views.drawing.states import Wishes

        numbers, gauche, clashes, hydrogens = self.shown
        return Wishes(numbers=numbers, gauche=gauche, clashes=clashes, hydrogens=hydrogens)

    def content(self, structure: object, suffix: Suffix | None) -> str | bytes:
        """The file, or the text for the terminal."""
        from ringstrain.structure.records import Structure

        assert isinstance(structure, Structure)
        if "--isomers" in self.views:
            from ringstrain.isomers import rank_isomers
            from ringstrain.views.notebook import ranking_scene

            ranking = rank_isomers(
                structure, temperature_K=self.temperatures[0], medium=self.medium, tables=self.tables
            )
            return self._written(ranking_scene(ranking, self.look), suffix)
        from ringstrain.analysis import analyze

        answers = tuple(
            analyze(structure, temperature_K=kelvin, medium=self.medium, tables=self.tables, strict=self.strict)
            for kelvin in self.temperatures
        )
        if suffix == ".html":
            return self._report(answers)
        if not self.views and suffix in (None, ".txt") and len(answers) == 1:
            return self._text(answers[0])
        return self._written(self._scene(answers), suffix)

    def _written(self, scene: Scene, suffix: Suffix | None) -> str | bytes:
        """A scene in the asked form."""
        if suffix == ".svg":
            from ringstrain.views.drawing.svg import to_svg

            return to_svg(scene)
        if suffix == ".png":
            from ringstrain.views.drawing.png import to_png

            return to_png(scene)
        from ringstrain.views.drawing.terminal import to_text

        return to_text(scene, self.look, columns=self.look.width)

    def _text(self, analysis: Analysis) -> str:
        from ringstrain.views.drawing.terminal import states_text

        return "\n".join(
            states_text(analysis, result, states, self.look, self.wishes) for result, states in self._chosen(analysis)
        )

    def _chosen(self, analysis: Analysis) -> list[tuple[SystemResult, tuple[State, ...]]]:
        """The states of each ring system that are drawn.

        Raises
        ------
        UsageError
            If an id asked for is in no ring system.
        """
        from ringstrain.views.rich_tables import shown_states

        if not self.ids:
            return [(result, shown_states(result)) for result in analysis.ring_systems]
        known = {state.id for result in analysis.ring_systems for state in result.states}
        for id in self.ids:
            if id not in known:
                raise UsageError(
                    f"There is no state {id}.", f"The states are {', '.join(sorted(known, key=_by_length))}."
                )
        picked = [
            (result, tuple(state for state in result.states if state.id in self.ids))
            for result in analysis.ring_systems
        ]
        return [(result, states) for result, states in picked if states]

    def _scene(self, answers: tuple[Analysis, ...]) -> Scene:
        """The picture of all ring systems, one below the other."""
        from ringstrain.views.drawing.ladders import draw_equilibrium, draw_temperatures
        from ringstrain.views.drawing.newman import draw_newman
        from ringstrain.views.drawing.panels import draw_system, side_by_side, stacked

        analysis = answers[0]
        if self.bond is not None:
            home = next(
                (r for r in analysis.ring_systems if set(self.bond) <= r.system.atom_set), analysis.ring_systems[0]
            )
            states = next((s for r, s in self._chosen(analysis) if r is home), home.states[:1])
            scenes = [draw_newman(analysis, home, s, *self.bond, numbers=self.shown[0]) for s in states]
            return side_by_side(scenes, scenes[0].title)
        if len(answers) > 1:
            scenes = [draw_temperatures(answers, place, self.look) for place in range(len(analysis.ring_systems))]
        elif self.views:
            scenes = [draw_equilibrium(analysis, r, states, self.look) for r, states in self._chosen(analysis)]
        else:
            scenes = [draw_system(analysis, r, states, self.look, self.wishes) for r, states in self._chosen(analysis)]
        return scenes[0] if len(scenes) == 1 else stacked(scenes, f"Ring systems of {analysis.input}")

    def _report(self, answers: tuple[Analysis, ...]) -> str:
        from dataclasses import replace

        from ringstrain.views.report import report

        nmr, reactivity = self.extras
        spectrum = None
        if nmr:
            from ringstrain.consequences.nmr import predict_nmr

            spectrum = predict_nmr(answers[0], tables=self.tables)
        return report(
            answers[0],
            self.tables.sources,
            self.look,
            wishes=replace(self.wishes, numbers=True),
            spectrum=spectrum,
            findings=_findings(answers[0], self.tables) if reactivity else None,
            range_of=answers if len(answers) > 1 else (),
        )


def _by_length(id: str) -> tuple[int, str]:
    return len(id), id


def _findings(analysis: Analysis, tables: Tables) -> tuple[Finding, ...]:
    """What the structure does in every class of reaction."""
    from ringstrain.consequences.overview import react

    return react(analysis, tables=tables).findings
