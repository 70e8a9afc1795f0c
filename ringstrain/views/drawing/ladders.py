"""Energies as a ladder, populations as bars with intervals, populations against temperature, ranked entries."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.units import KJ_PER_KCAL, Z95
from ringstrain.views.drawing.scene import Item, Label, Role, Scene, Shape, Stroke, runs_width
from ringstrain.views.forms import describe
from ringstrain.views.look import Look, constant, kelvin, percent, percent_range

_SIZE, _SMALL, _MARGIN, _ROW = 12.5, 11.0, 14.0, 30.0
#: States that never reach this share get no line in a graph [-].
_WORTH_A_LINE = 0.01
#: Lines of a graph: width and dash tell them apart without colour.
_LINES: tuple[tuple[Role, float, tuple[float, ...]], ...] = (
    ("equatorial", 2.4, ()),
    ("axial", 2.4, (8.0, 4.0)),
    ("accent", 2.0, (2.0, 3.0)),
    ("clash", 2.0, (10.0, 3.0, 2.0, 3.0)),
    ("isoclinal", 1.4, ()),
    ("muted", 1.4, (5.0, 3.0)),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Rung:
    """One entry of a ladder.

    Attributes
    ----------
    name
        Short name at the left.
    words
        What it is.
    energy_kcal, spread_kcal
        Height above the lowest and half-width of its 95 % interval [kcal/mol]; None when unknown.
    share, share_low, share_high
        Share with its 95 % limits [-]; None when unknown.
    bound
        ``"at least"`` when only a lower limit is known.
    """

    name: str
    words: str
    energy_kcal: float | None
    spread_kcal: float | None
    share: float | None
    share_low: float | None
    share_high: float | None
    bound: str = ""


def state_rungs(result: SystemResult, states: Sequence[State]) -> tuple[Rung, ...]:
    """Rungs of states, in the order given."""
    return tuple(
        Rung(
            name=state.id,
            words=f"{state.shapes[0]}: {describe(result, state)}" if describe(result, state) else state.shapes[0],
            energy_kcal=state.energy_kcal,
            spread_kcal=Z95 * state.uncertainty_kcal,
            share=state.population,
            share_low=state.population_low,
            share_high=state.population_high,
            bound="at least" if state.lower_bound else "",
        )
        for state in states
    )


def draw_ladder(rungs: Sequence[Rung], look: Look, *, title: str, foot: str = "") -> Scene:
    """Energies and shares, one row each: a whisker for the energy, a bar for the share, both with 95 % limits.

    Parameters
    ----------
    rungs
        Entries, lowest first.
    look
        Units.
    title
        Heading.
    foot
        A line below, such as K.
    """
    known = [r.energy_kcal for r in rungs if r.energy_kcal is not None]
    spreads = [(r.energy_kcal or 0.0) + (r.spread_kcal or 0.0) for r in rungs if r.energy_kcal is not None]
    low = min([0.0, *(e - (r.spread_kcal or 0.0) for e, r in zip(known, rungs))])
    low = max(low, -0.35 * max([*known, 1.0]))
    high = max([*known, min(max([*spreads, 0.5]), 1.6 * max([*known, 0.5])), 0.5])
    left, plot, gap, bar = _MARGIN + 30.0, 220.0, 96.0, 150.0
    top = _MARGIN + 46.0
    items: list[Item] = [Label(_MARGIN, _MARGIN + 12.0, ((title, ""),), "ink", 13.5, "start", True)]
    items.append(Label(left, top - 12.0, ((f"energy, {look.unit}", ""),), "muted", _SMALL))
    bar_left = left + plot + gap
    items.append(Label(bar_left, top - 12.0, (("share", ""),), "muted", _SMALL))

    def across(value: float) -> float:
        return left + plot * (min(max(value, low), high) - low) / (high - low)

    bottom = top + _ROW * 1.35 * len(rungs)
    ticks = _ticks(low, high, look)
    for tick, text in ticks:
        items.append(Stroke(((across(tick), top - 4.0), (across(tick), bottom)), "rule", 1.0))
        items.append(Label(across(tick), bottom + 13.0, ((text, ""),), "muted", _SMALL, "middle"))
    for share in (0.0, 0.5, 1.0):
        x = bar_left + bar * share
        items.append(Stroke(((x, top - 4.0), (x, bottom)), "rule", 1.0))
        items.append(Label(x, bottom + 13.0, ((f"{100 * share:.0f} %", ""),), "muted", _SMALL, "middle"))
    for place, rung in enumerate(rungs):
        y = top + 12.0 + _ROW * 1.35 * place
        items.append(Label(_MARGIN, y + 4.5, ((rung.name, ""),), "ink", 14.0, "start", True))
        items.append(
            Label(left, y + 22.0, ((_cut(rung.words, bar_left + bar - left), ""),), "muted", _SMALL, kind="mark")
        )
        items += _energy(rung, y, across, look, left + plot)
        items += _share(rung, y, bar_left, bar)
    end = bottom + 22.0
    if foot:
        items.append(Label(_MARGIN, end + 14.0, ((foot, ""),), "ink", _SIZE))
        end += 20.0
    wide = bar_left + bar + 112.0
    wide = max(wide, *(item.box[2] for item in items if isinstance(item, Label)))
    return Scene(width=wide + _MARGIN, height=end + _MARGIN, items=tuple(items), title=title)


def _cut(text: str, room: float) -> str:
    """A text short enough for its row."""
    if runs_width(((text, ""),), _SMALL) <= room:
        return text
    while text and runs_width(((text + "...", ""),), _SMALL) > room:
        text = text[:-1]
    return text.rstrip() + "..."


def _ticks(low: float, high: float, look: Look) -> list[tuple[float, str]]:
    """Round values of the asked unit within a range [kcal/mol], and how they are written."""
    factor = KJ_PER_KCAL if look.units == "kJ" else 1.0
    span = (high - low) * factor
    step = next(s for s in (0.1, 0.2, 0.5, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0, 1000.0) if span / s <= 6)
    first = int(low * factor / step)
    digits = 0 if step >= 1 else 1
    places = range(first, int(high * factor / step + 1e-9) + 1)
    return [(i * step / factor, f"{i * step:.{digits}f}".replace("-", "\N{MINUS SIGN}")) for i in places]


def _energy(rung: Rung, y: float, across: Callable[[float], float], look: Look, right: float) -> list[Item]:
    """A dot with its interval and value; an open dot when only a lower limit is known."""
    if rung.energy_kcal is None:
        return [Label(right + 8.0, y + 4.0, (("not determined", ""),), "muted", _SMALL)]
    x = across(rung.energy_kcal)
    items: list[Item] = []
    text = look.energy(rung.energy_kcal)
    if rung.spread_kcal and rung.spread_kcal > 5e-3:
        first, last = across(rung.energy_kcal - rung.spread_kcal), across(rung.energy_kcal + rung.spread_kcal)
        items.append(Stroke(((first, y), (last, y)), "ink", 1.6))
        items += [Stroke(((at, y - 4.0), (at, y + 4.0)), "ink", 1.6) for at in (first, last)]
        text += f" \N{PLUS-MINUS SIGN} {look.energy(rung.spread_kcal)}"
    items.append(Shape(((x, y),), "bar", 5.0, not rung.bound, 2.0))
    if rung.bound:
        text = f"{rung.bound} {text}"
    items.append(Label(right + 8.0, y + 4.0, ((text, ""),), "ink", _SMALL))
    return items


def _share(rung: Rung, y: float, left: float, wide: float) -> list[Item]:
    """A bar with its interval and value."""
    if rung.share is None:
        return [Label(left, y + 4.0, (("not determined", ""),), "muted", _SMALL)]
    end = left + wide * rung.share
    items: list[Item] = [Shape(((left, y - 6.0), (end, y - 6.0), (end, y + 6.0), (left, y + 6.0)), "bar")]
    text = percent(rung.share)
    if rung.share_low is not None and rung.share_high is not None and 1e-3 <= rung.share <= 0.999:
        first, last = left + wide * rung.share_low, left + wide * rung.share_high
        if last - first > 1.0:
            items.append(Stroke(((first, y), (last, y)), "ink", 1.4))
            items += [Stroke(((at, y - 4.0), (at, y + 4.0)), "ink", 1.4) for at in (first, last)]
            text += f" ({percent_range(rung.share, rung.share_low, rung.share_high)})"
    items.append(Label(left + wide + 8.0, y + 4.0, ((text, ""),), "ink", _SMALL))
    return items


def draw_equilibrium(analysis: Analysis, result: SystemResult, states: Sequence[State], look: Look) -> Scene:
    """Energy ladder and populations of the states of a ring system, with K."""
    e = result.equilibrium
    foot = "One ring form only: no K."
    if e is not None:
        ratio = f"[{e.favoured}]/[{e.other}]"
        foot = (
            f"K = {ratio}: {e.bound}" if e.K is None else f"K = {ratio} = {e.bound} {constant(e.K)}".replace("  ", " ")
        )
        if e.K is not None and e.K_low is not None and e.K_high is not None and e.uncertainty_kcal:
            foot += f" ({constant(e.K_low)} to {constant(e.K_high)})"
        foot += f"; 95 % limits, {kelvin(analysis.temperature_K)}, {analysis.medium}"
    return draw_ladder(state_rungs(result, states), look, title="Energies and shares", foot=foot)


def draw_temperatures(answers: Sequence[Analysis], place: int, look: Look) -> Scene:
    """Shares of the states against temperature; each line has its own dash and stands named at its end.

    Parameters
    ----------
    answers
        One analysis for each temperature, rising.
    place
        Which ring system.
    look
        Manner of writing.
    """
    first = answers[0].ring_systems[place]
    tracks: dict[tuple[object, ...], tuple[str, list[tuple[float, float]]]] = {}
    names = {_key(state): state.id for state in first.states}
    for analysis in answers:
        for state in analysis.ring_systems[place].states:
            if state.population is None:
                continue
            name = names.setdefault(_key(state), state.id)
            tracks.setdefault(_key(state), (name, []))[1].append((analysis.temperature_K, state.population))
    ranked = sorted(tracks.values(), key=lambda track: -max(p for _, p in track[1]))[: len(_LINES)]
    shown = [t for n, t in enumerate(ranked) if n < 2 or max(p for _, p in t[1]) >= _WORTH_A_LINE]
    low, high = answers[0].temperature_K, answers[-1].temperature_K
    left, top, wide, high_px = _MARGIN + 46.0, _MARGIN + 34.0, 380.0, 220.0

    def at(temperature: float, share: float) -> tuple[float, float]:
        return left + wide * (temperature - low) / max(high - low, 1e-9), top + high_px * (1.0 - share)

    items: list[Item] = [
        Label(_MARGIN, _MARGIN + 12.0, (("Shares against temperature", ""),), "ink", 13.5, "start", True)
    ]
    for share in (0.0, 0.25, 0.5, 0.75, 1.0):
        items.append(Stroke((at(low, share), at(high, share)), "rule", 1.0))
        x, y = at(low, share)
        items.append(Label(x - 8.0, y + 4.0, ((f"{100 * share:.0f} %", ""),), "muted", _SMALL, "end"))
    step = next(s for s in (1.0, 2.0, 5.0, 10.0, 20.0, 25.0, 50.0, 100.0, 200.0, 500.0) if (high - low) / s <= 6)
    for i in range(math.ceil(low / step), math.floor(high / step) + 1):
        temperature = step * i
        x, y = at(temperature, 0.0)
        items.append(Stroke(((x, y), (x, y + 5.0)), "muted", 1.0))
        items.append(Label(x, y + 18.0, ((f"{temperature:.0f}", ""),), "muted", _SMALL, "middle"))
    items.append(Label(left + wide / 2, top + high_px + 36.0, (("temperature, K", ""),), "muted", _SMALL, "middle"))
    taken: list[float] = []
    for (name, track), (role, width, dash) in zip(shown, _LINES):
        points = tuple(at(*pair) for pair in track)
        items.append(Stroke(points if len(points) > 1 else (points[0], points[0]), role, width, dash))
        y = points[-1][1] + 4.0
        while any(abs(y - other) < 14.0 for other in taken):
            y -= 2.0
        taken.append(y)
        items.append(Label(left + wide + 8.0, y, ((name, ""),), role, _SIZE, "start", True))
    if not shown:
        items.append(Label(left + wide / 2, top + high_px / 2, (("not determined", ""),), "muted", _SIZE, "middle"))
    note = "An unpriced contact leaves shares open." if not shown else ""
    if note:
        items.append(Label(_MARGIN, top + high_px + 52.0, ((note, ""),), "muted", _SMALL))
    return Scene(
        width=left + wide + 44.0 + _MARGIN,
        height=top + high_px + 46.0 + _MARGIN,
        items=tuple(items),
        title=f"Shares of states of {answers[0].input} against temperature",
    )


def _key(state: State) -> tuple[object, ...]:
    """What makes states at two temperatures the same state."""
    return state.detail.shapes.rings, state.detail.shapes.inverted
