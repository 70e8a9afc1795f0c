"""Pictures put together: the states of an equilibrium side by side, with their figures and what the marks mean."""

from __future__ import annotations

from collections.abc import Sequence

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.units import Z95
from ringstrain.views.drawing.marks import CLASH_DASH, ISOCLINAL_DASH
from ringstrain.views.drawing.scene import Item, Label, Role, Scene, Stroke, bounds, moved, runs_width
from ringstrain.views.drawing.states import Wishes, draw_state
from ringstrain.views.forms import form_name
from ringstrain.views.look import Look, constant, kelvin, percent, percent_range

_GAP, _LINE, _MARGIN = 26.0, 16.0, 14.0
_CAPTION = 12.5


def caption_lines(state: State, look: Look) -> tuple[str, ...]:
    """Name, energy and share of a state."""
    lines = [form_name(state, bare=True)]
    if state.form:
        lines[0] += f", {state.form}"
    spread = Z95 * state.uncertainty_kcal
    energy = look.energy(state.energy_kcal)
    if spread > 5e-3:
        energy += f" \N{PLUS-MINUS SIGN} {look.energy(spread)}"
    lines.append(f"{'at least ' if state.lower_bound else ''}{energy} {look.unit}")
    if state.population is None:
        lines.append("share not determined")
    else:
        share = percent(state.population)
        low, high = state.population_low, state.population_high
        if low is not None and high is not None and 1e-3 <= state.population <= 0.999 and high - low > 5e-4:
            share += f" ({percent_range(state.population, low, high)})"
        lines.append(share)
    if state.equivalent_to:
        lines.append(f"equivalent to {state.equivalent_to}")
    return tuple(lines)


def draw_system(
    analysis: Analysis, result: SystemResult, states: Sequence[State], look: Look, wishes: Wishes | None = None
) -> Scene:
    """States of a ring system in a row, K between favoured and other, a key below.

    Parameters
    ----------
    analysis, result
        The answer.
    states
        Which states, in order.
    look
        Units.
    wishes
        What to show.
    """
    wishes = wishes or Wishes()
    scenes = [draw_state(result, state, wishes) for state in states]
    baseline = max(scene.height for scene in scenes)
    items: list[Item] = []
    x = _MARGIN
    e = result.equilibrium
    pair = {e.favoured, e.other} if e is not None else set()
    for place, (state, scene) in enumerate(zip(states, scenes)):
        if place:
            arrow = pair == {states[place - 1].id, state.id}
            x += _GAP if not arrow else 12.0
            if arrow:
                x = _arrows(items, x, _MARGIN + baseline / 2, result, analysis)
        lines = caption_lines(state, look)
        wide = max(scene.width, *(runs_width(((line, ""),), _CAPTION) for line in lines))
        items += [moved(item, x + (wide - scene.width) / 2, _MARGIN + baseline - scene.height) for item in scene.items]
        for number, line in enumerate(lines):
            at = _MARGIN + baseline + 18.0 + _LINE * number
            items.append(
                Label(
                    x + wide / 2, at, ((line, ""),), "ink" if number < 3 else "muted", _CAPTION, "middle", number == 0
                )
            )
        x += wide
    bottom = bounds(items)[3] + 12.0
    key = key_items(items, wishes)
    items += _laid(key, _MARGIN, bottom, x - _MARGIN)
    right, low = bounds(items)[2], bounds(items)[3]
    names = ", ".join(state.id for state in states)
    return Scene(
        width=right + _MARGIN, height=low + _MARGIN, items=tuple(items), title=f"States {names} of {analysis.input}"
    )


def _arrows(items: list[Item], x: float, y: float, result: SystemResult, analysis: Analysis) -> float:
    """The equilibrium between two neighbours with its constant; returns where the next drawing starts."""
    e = result.equilibrium
    assert e is not None
    ratio = f"[{e.favoured}]/[{e.other}]"
    below = f"{kelvin(analysis.temperature_K)}, {analysis.medium}"
    text = f"{ratio} {e.bound or 'not determined'}" if e.K is None else f"K = {ratio}"
    second = "" if e.K is None else f"{e.bound} {constant(e.K)}".strip()
    if second and e.K_low is not None and e.K_high is not None and e.uncertainty_kcal:
        second += f" ({constant(e.K_low)} to {constant(e.K_high)})"
    long = max(58.0, runs_width(((text, ""),), 12.5) + 8, runs_width(((second, ""),), 11.0) + 8)
    items.append(Label(x + long / 2, y - 11, ((text, ""),), "ink", 12.5, "middle", True))
    items.append(Stroke(((x, y - 3), (x + long, y - 3)), "ink", 1.4, (), False, True))
    items.append(Stroke(((x + long, y + 3), (x, y + 3)), "ink", 1.4, (), False, True))
    for number, line in enumerate(line for line in (second, below) if line):
        items.append(Label(x + long / 2, y + 20 + 15 * number, ((line, ""),), "muted", 11.0, "middle"))
    return x + long + 12.0


def key_items(items: Sequence[Item], wishes: Wishes) -> list[tuple[list[Item], str]]:
    """Samples of the lines a picture uses, each with its meaning."""
    used = {(item.role, item.dash == CLASH_DASH) for item in items if isinstance(item, Stroke)}
    roles = {role for role, _ in used}
    key: list[tuple[list[Item], str]] = []
    samples: tuple[tuple[Role, float, tuple[float, ...], str], ...] = (
        ("axial", 3.4, (), "axial (thick, bold)"),
        ("equatorial", 1.7, (), "equatorial (thin)"),
        ("isoclinal", 2.2, ISOCLINAL_DASH, "isoclinal (dashed)"),
    )
    for role, width, dash, words in samples:
        if role in roles:
            key.append(([Stroke(((0.0, 0.0), (24.0, 0.0)), role, width, dash)], words))
    strong = [i for i in items if isinstance(i, Stroke) and i.role == "clash" and not i.dash]
    weak = [i for i in items if isinstance(i, Stroke) and i.role == "clash" and i.width < 2.0]
    if weak:
        key.append(([Stroke(((0.0, 0.0), (24.0, 0.0)), "clash", 1.5, CLASH_DASH)], "group and axial H meet"))
    if strong:
        saw = Stroke(((8.0, 6.0), (14.5, 1.0), (9.5, -1.0), (16.0, -6.0)), "clash", 2.2)
        key.append(([Stroke(((0.0, 0.0), (24.0, 0.0)), "clash", 2.2, CLASH_DASH), saw], "two groups meet"))
    if wishes.gauche and "accent" in roles:
        key.append(([Stroke(((0.0, 0.0), (24.0, 0.0)), "accent", 1.3, (5.0, 3.0))], "gauche pair (g)"))
    return key


def _laid(key: Sequence[tuple[list[Item], str]], left: float, top: float, right: float) -> list[Item]:
    """The key in rows as wide as the picture."""
    items: list[Item] = []
    x, y = left, top + 8.0
    for sample, words in key:
        wide = 30.0 + runs_width(((words, ""),), 11.0) + 16.0
        if x > left and x + wide > right:
            x, y = left, y + _LINE
        items += [moved(item, x, y) for item in sample]
        items.append(Label(x + 30.0, y + 4.0, ((words, ""),), "muted", 11.0))
        x += wide
    return items


def stacked(scenes: Sequence[Scene], title: str) -> Scene:
    """Scenes one below the other."""
    items: list[Item] = []
    y = 0.0
    for scene in scenes:
        items += [moved(item, 0.0, y) for item in scene.items]
        y += scene.height + 8.0
    return Scene(
        width=max((s.width for s in scenes), default=10.0), height=max(y - 8.0, 10.0), items=tuple(items), title=title
    )


def side_by_side(scenes: Sequence[Scene], title: str) -> Scene:
    """Scenes in a row."""
    items: list[Item] = []
    x = 0.0
    for scene in scenes:
        items += [moved(item, x, 0.0) for item in scene.items]
        x += scene.width + 8.0
    return Scene(
        width=max(x - 8.0, 10.0), height=max((s.height for s in scenes), default=10.0), items=tuple(items), title=title
    )
