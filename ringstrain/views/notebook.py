"""How answers show themselves in a notebook."""

from __future__ import annotations

from typing import TYPE_CHECKING

from ringstrain.analysis import Analysis, analyze
from ringstrain.tables import load_tables
from ringstrain.units import Z95
from ringstrain.views.drawing.ladders import Rung, draw_ladder
from ringstrain.views.drawing.panels import draw_system, side_by_side, stacked
from ringstrain.views.drawing.scene import Scene
from ringstrain.views.drawing.states import draw_state
from ringstrain.views.drawing.svg import to_svg
from ringstrain.views.look import Look, constant, kelvin
from ringstrain.views.markup import bullets, figure, fragment, heading, paragraph
from ringstrain.views.report import report_body
from ringstrain.views.rich_tables import shown_states

if TYPE_CHECKING:
    from ringstrain.patterns import Pattern
    from ringstrain.ranking import Ranking

#: Isomers on a ladder; the rest is only counted.
MAX_RUNGS = 12


def analysis_html(analysis: Analysis) -> str:
    """The report of an analysis, as a part of a page."""
    return fragment(report_body(analysis, load_tables().sources, Look()))


def analysis_scene(analysis: Analysis, look: Look) -> Scene:
    """The drawings of an analysis: the states worth showing of every ring system."""
    scenes = [draw_system(analysis, result, shown_states(result), look) for result in analysis.ring_systems]
    return scenes[0] if len(scenes) == 1 else stacked(scenes, f"States of {analysis.input}")


def analysis_svg(analysis: Analysis) -> str:
    """The drawings of an analysis as SVG."""
    return to_svg(analysis_scene(analysis, Look()))


def ranking_scene(ranking: Ranking, look: Look) -> Scene:
    """The isomers of a ranking as a ladder."""
    rungs = [
        Rung(
            name=str(place),
            words=f"{isomer.smiles} ({isomer.symmetry})" + (", the input" if place == ranking.input_rank else ""),
            energy_kcal=isomer.dG_kcal,
            spread_kcal=Z95 * isomer.uncertainty_kcal,
            share=isomer.share,
            share_low=isomer.share_low,
            share_high=isomer.share_high,
            bound="at least" if isomer.lower_bound else "",
        )
        for place, isomer in enumerate(ranking.isomers[:MAX_RUNGS], 1)
    ]
    more = len(ranking.isomers) - len(rungs)
    foot = f"{kelvin(ranking.temperature_K)}, {ranking.medium}; 95 % limits; energies include the statistics"
    return draw_ladder(rungs, look, title=f"Isomers of {ranking.input}", foot=foot + (f"; {more} more" if more else ""))


def ranking_svg(ranking: Ranking) -> str:
    """The isomers of a ranking as SVG."""
    return to_svg(ranking_scene(ranking, Look()))


def ranking_html(ranking: Ranking) -> str:
    """The isomers of a ranking, as a part of a page."""
    from ringstrain.views.isomers import headline

    parts = [
        heading(1, f"Isomers of {ranking.input}"),
        paragraph(headline(ranking), "lead"),
        figure(to_svg(ranking_scene(ranking, Look()), standalone=False), wide=True),
    ]
    if ranking.impossible:
        parts += [heading(3, "Cannot exist"), bullets(f"{i.smiles}: {i.reason}" for i in ranking.impossible)]
    if ranking.notes:
        parts.append(bullets(ranking.notes))
    return fragment("\n".join(parts))


def pattern_scene(pattern: Pattern) -> Scene:
    """The chairs of a pattern, without figures: those belong to the conditions it was ranked at."""
    result = analyze(pattern.smiles).ring_systems[0]
    chairs = [state for state in result.states if set(state.shapes) == {"chair"}] or list(result.states[:1])
    return side_by_side([draw_state(result, state) for state in chairs[:2]], f"Chairs of {pattern.pattern}")


def pattern_svg(pattern: Pattern) -> str:
    """The chairs of a pattern as SVG."""
    return to_svg(pattern_scene(pattern))


def pattern_html(pattern: Pattern) -> str:
    """A pattern with its chairs and figures, as a part of a page."""
    lines = [f"{pattern.rank}. {pattern.pattern}", pattern.smiles]
    if pattern.K is not None and pattern.dG_kcal is not None:
        spread = Z95 * (pattern.uncertainty_kcal or 0.0)
        gap = f"{Look().energy(pattern.dG_kcal)} \N{PLUS-MINUS SIGN} {Look().energy(spread)} kcal/mol"
        lines.append(
            f"K {pattern.bound} {constant(pattern.K)}; \N{GREEK CAPITAL LETTER DELTA}G {gap}".replace("  ", " ")
        )
    elif pattern.bound:
        lines.append(f"K {pattern.bound}")
    return fragment(figure(to_svg(pattern_scene(pattern), standalone=False), lines))
