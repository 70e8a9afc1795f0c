"""One structure in several media or at several temperatures, side by side."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from rich.text import Text

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.equilibrium import Equilibrium
from ringstrain.units import Z95
from ringstrain.views.forms import describe, same_form
from ringstrain.views.look import Look, constant, kelvin, percent
from ringstrain.views.rich_tables import new_table, title_text
from ringstrain.views.sentence import headline

if TYPE_CHECKING:
    from rich.console import RenderableType


def conditions_view(answers: Sequence[Analysis], look: Look) -> Iterator[RenderableType]:
    """Media as columns, temperatures as rows.

    Parameters
    ----------
    answers
        One analysis of the same structure for each medium and temperature.
    look
        Width, units and signs.
    """
    media = list(dict.fromkeys(analysis.medium for analysis in answers))
    temperatures = list(dict.fromkeys(analysis.temperature_K for analysis in answers))
    yield look.text(title_text(answers[0], conditions=False), "dim")
    for place in range(len(answers[0].ring_systems)):
        if len(answers[0].ring_systems) > 1:
            yield look.text(f"Ring system {place + 1}", "bold")
        if len(temperatures) == 1:
            yield from _by_medium(answers, place, look)
        else:
            for medium in media:
                own = [analysis for analysis in answers if analysis.medium == medium]
                yield from _by_temperature(own, place, look)
                yield Text()
    notes = dict.fromkeys(note for analysis in answers for note in analysis.notes)
    for note in notes:
        yield look.text(f"Note: {note}")


def _shape_key(state: State) -> tuple[object, ...]:
    """What makes states of two analyses of one structure the same state."""
    return state.detail.shapes.rings, state.detail.shapes.inverted


def _by_medium(answers: Sequence[Analysis], place: int, look: Look) -> Iterator[RenderableType]:
    """Energy and population of each state in each medium."""
    results = [analysis.ring_systems[place] for analysis in answers]
    winners = [result.states[0] for result in results]
    if len({_shape_key(state) for state in winners}) == 1:
        sentence = headline(results[0], answers[0].conditions, look)
        yield look.text(f"The same form leads in all these media. {answers[0].medium}: {sentence}", "bold")
    else:
        for analysis, result in zip(answers, results, strict=True):
            yield look.text(f"{analysis.medium}: {headline(result, analysis.conditions, look)}", "bold")
    yield Text()
    table = new_table(look)
    table.add_column("state", overflow="fold")
    for analysis in answers:
        table.add_column(look.text(analysis.medium), justify="right", overflow="fold")
    shown: dict[tuple[object, ...], tuple[SystemResult, State]] = {}
    for result in results:
        for state in result.states:
            shown.setdefault(_shape_key(state), (result, state))
    for key, (owner, sample) in list(shown.items())[:6]:
        cells = []
        for result in results:
            match = next((s for s in result.states if _shape_key(s) == key), None)
            cells.append(look.text("\N{EN DASH}" if match is None else _cell(match, look)))
        words = describe(owner, sample)
        table.add_row(look.text(f"{sample.shapes[0]}: {words}" if words else sample.shapes[0]), *cells)
    table.add_section()
    equilibria = [result.equilibrium for result in results]
    gap = look.text(f"\N{GREEK CAPITAL LETTER DELTA}G, {look.unit}")
    table.add_row(gap, *(look.text(_gap(e, look)) for e in equilibria))
    table.add_row(look.text("K"), *(look.text(_k(e)) for e in equilibria))
    yield table
    yield look.text(f"Cells: energy ({look.unit}), population; \N{PLUS-MINUS SIGN} 95 %.", "dim")


def _cell(state: State, look: Look) -> str:
    """Energy and share of a state."""
    share = percent(state.population) if state.population is not None else "?"
    return f"{look.energy(state.energy_kcal)}, {share}"


def _gap(e: Equilibrium | None, look: Look) -> str:
    """Free energy difference."""
    if e is None:
        return "locked"
    if e.dG_kcal is None:
        return e.bound if e.bound == "not determined" else f"{e.bound} {look.energy(e.known_part_kcal)}"
    bound = f"{e.bound} " if e.bound else ""
    return f"{bound}{look.energy(e.dG_kcal)} \N{PLUS-MINUS SIGN} {look.energy(Z95 * (e.uncertainty_kcal or 0.0))}"


def _k(e: Equilibrium | None) -> str:
    """Equilibrium constant."""
    return "\N{EN DASH}" if e is None or e.K is None else constant(e.K)


def _by_temperature(answers: Sequence[Analysis], place: int, look: Look) -> Iterator[RenderableType]:
    """One row for each temperature."""
    first = answers[0].ring_systems[place]
    yield look.text(f"{answers[0].medium}: {headline(first, answers[0].conditions, look)}", "bold")
    yield Text()
    table = new_table(look)
    table.add_column("T", justify="right", no_wrap=True)
    table.add_column(look.text(f"\N{GREEK CAPITAL LETTER DELTA}G, {look.unit}"), justify="right", overflow="fold")
    table.add_column("K", justify="right", overflow="fold")
    table.add_column("95 %", justify="left", overflow="fold")
    table.add_column("favoured", justify="right", overflow="fold")
    table.add_column("form", overflow="fold")
    for analysis in answers:
        result = analysis.ring_systems[place]
        e = result.equilibrium
        state = result.state(e.favoured) if e else result.states[0]
        limits = ""
        if e is not None and e.K_low is not None and e.K_high is not None:
            limits = f"{constant(e.K_low)} to {constant(e.K_high)}"
        table.add_row(
            look.text(kelvin(analysis.temperature_K)),
            look.text(_gap(e, look)),
            look.text(_k(e)),
            look.text(limits),
            look.text(_form_share(result, state)),
            look.text(describe(result, state) or state.shapes[0]),
        )
    yield table


def _form_share(result: SystemResult, state: State) -> str:
    """Share of a form with its copies."""
    shares = [s.population for s in same_form(result, state) if s.population is not None]
    return percent(sum(shares)) if shares else "?"
