"""One structure in several media or at several temperatures, side by side."""

from __future__ import annotations

import re
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
    shown: dict[tuple[object, ...], tuple[SystemResult, State]] = {}
    for result in results:
        for state in result.states:
            shown.setdefault(_shape_key(state), (result, state))
    rows = []
    for key, (owner, sample) in list(shown.items())[:6]:
        cells = []
        for result in results:
            match = next((s for s in result.states if _shape_key(s) == key), None)
            cells.append("\N{EN DASH}" if match is None else _cell(match, look))
        words = describe(owner, sample)
        rows.append((f"{sample.shapes[0]}: {words}" if words else sample.shapes[0], *cells))
    equilibria = [result.equilibrium for result in results]
    gap = f"\N{GREEK CAPITAL LETTER DELTA}G, {look.unit}"
    summary = [(gap, *(_gap(e, look) for e in equilibria)), ("K", *(_k(e) for e in equilibria))]
    head = ("state", *(analysis.medium for analysis in answers))
    widths: list[int | None] = [None] * len(head)
    names: list[str] = []
    if narrow := _narrow_widths([head, *rows, *summary], look):
        rows = [(name, *map(_in_two, cells, narrow[1:])) for name, *cells in rows]
        widths = [*narrow]
        if narrow[0] < _longest_word([*rows, *summary], look):
            # the names go below: a number and the unit of the last rows need little room
            names = [name for name, *_ in rows]
            rows = [(str(number), *cells) for number, (_, *cells) in enumerate(rows, 1)]
            widths = [_longest_word([head, *rows, *summary], look), *[None] * len(answers)]
    table = new_table(look)
    for place, name in enumerate(head):
        table.add_column(
            look.text(name),
            justify="right" if place else "left",
            overflow="fold",
            width=widths[place],
        )
    for row in rows:
        table.add_row(*map(look.text, row))
    table.add_section()
    for row in summary:
        table.add_row(*map(look.text, row))
    yield table
    for number, name in enumerate(names, 1):
        yield look.text(f"{number}  {name}")
    yield look.text(f"Cells: energy ({look.unit}), population; \N{PLUS-MINUS SIGN} 95 %.", "dim")


def _narrow_widths(rows: Sequence[tuple[str, ...]], look: Look) -> list[int]:
    """Widths of the columns where the whole cells do not fit beside a word of the first one, else nothing.

    Left alone, a narrow table gives all columns the same room, and breaks long words of the first one.
    """
    columns = list(zip(*rows, strict=True))
    gaps = 2 * (len(columns) - 1)
    whole = [max(len(look.say(text)) for text in column) for column in columns[1:]]
    if _longest_word(rows, look) + sum(whole) + gaps <= look.width:
        return []
    narrow = [max(len(part) for text in column for part in _parts(look.say(text))) for column in columns[1:]]
    return [look.width - sum(narrow) - gaps, *narrow]


def _longest_word(rows: Sequence[tuple[str, ...]], look: Look) -> int:
    """Characters of the longest word in the first column."""
    return max(len(word) for name, *_ in rows for word in look.say(name).split())


def _in_two(cell: str, width: int) -> str:
    """A cell that is too wide, the share below the energy."""
    return cell if len(cell) <= width else cell.replace(", ", ",\n")


def _parts(text: str) -> list[str]:
    """A cell at the blanks where it may break: not within a percentage or an uncertainty."""
    return re.split(r"(?<!\N{PLUS-MINUS SIGN})(?<!\+/-) (?!%)", text)


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
