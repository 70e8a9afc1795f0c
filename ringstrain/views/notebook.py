"""How answers show themselves in a notebook."""

from __future__ import annotations

from typing import TYPE_CHECKING

from ringstrain.analysis import Analysis, analyze
from ringstrain.tables import load_tables
from ringstrain.units import Z95
from ringstrain.views.drawing.ladders import Rung, draw_ladder
from ringstrain.views.drawing.panels import draw_system, stacked
from ringstrain.views.drawing.scene import Scene
from ringstrain.views.drawing.svg import to_svg
from ringstrain.views.look import Look, kelvin
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


def pattern_html(pattern: Pattern) -> str:
    """A pattern with the drawing of its chairs, as a part of a page."""
    analysis = analyze(pattern.smiles)
    scene = analysis_scene(analysis, Look())
    return fragment(
        heading(3, f"{pattern.rank}. {pattern.pattern}")
        + figure(to_svg(scene, standalone=False), (pattern.smiles,), wide=True)
    )


def pattern_svg(pattern: Pattern) -> str:
    """The chairs of a pattern as SVG."""
    return analysis_svg(analyze(pattern.smiles))
