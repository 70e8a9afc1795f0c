"""Scenes as SVG: plain attributes for light paper, one style block for dark, text left as text."""

from __future__ import annotations

from collections.abc import Iterable
from html import escape

from ringstrain.views.drawing.palette import COLOURS
from ringstrain.views.drawing.scene import NUMBER_GAP, Label, Scene, Shape, Stroke

FONT = "Helvetica, Arial, 'Liberation Sans', 'DejaVu Sans', sans-serif"


def to_svg(scene: Scene, *, standalone: bool = True, scale: float = 1.0) -> str:
    """A scene as an SVG document.

    Parameters
    ----------
    scene
        What to write.
    standalone
        True for a file of its own: with paper, and dark on dark screens; False for use inside a page that has its own
        style (see :func:`style_sheet`).
    scale
        Size on screen against px of the scene [-].
    """
    width, height = scene.width, scene.height
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {_n(width)} {_n(height)}" '
        f'width="{_n(width * scale)}" height="{_n(height * scale)}" role="img" class="rs-picture">'
    ]
    if scene.title:
        parts.append(f"<title>{clean(scene.title)}</title>")
    if standalone:
        parts.append(f"<style>@media (prefers-color-scheme: dark) {{{_rules(1)}}}</style>")
        parts.append(f'<rect class="rs-f-paper" width="100%" height="100%" fill="{COLOURS["paper"][0]}"/>')
    parts.append(f'<g font-family="{FONT}" stroke-linecap="round" stroke-linejoin="round">')
    for item in scene.items:
        if isinstance(item, Stroke):
            parts.extend(_stroke(item))
        elif isinstance(item, Label):
            parts.append(_label(item))
        else:
            parts.append(_shape(item))
    parts.append("</g></svg>")
    return "\n".join(parts) + "\n"


def style_sheet() -> str:
    """Style for pages that hold scenes: colours that follow the screen's light or dark setting, light in print."""
    return f"{_rules(0)}\n@media screen and (prefers-color-scheme: dark) {{{_rules(1)}}}"


def _rules(tone: int) -> str:
    return "".join(
        f".rs-s-{role}{{stroke:{colours[tone]}}}.rs-f-{role}{{fill:{colours[tone]}}}"
        for role, colours in COLOURS.items()
    )


def _n(value: float) -> str:
    """A number without needless digits."""
    text = f"{value:.1f}"
    return "0" if text in ("-0.0", "0.0") else text.removesuffix(".0")


def clean(text: str) -> str:
    """Text safe inside a document: escaped, characters XML cannot hold replaced."""
    return escape("".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text), quote=True)


def _points(points: Iterable[tuple[float, float]]) -> str:
    return " ".join(f"{_n(x)},{_n(y)}" for x, y in points)


def _stroke(item: Stroke) -> Iterable[str]:
    body = f'<polyline points="{_points(item.points)}" fill="none"'
    if item.casing:
        yield (
            f'<polyline points="{_points(cleared(item))}" fill="none" class="rs-s-paper" stroke-linecap="butt" '
            f'stroke="{COLOURS["paper"][0]}" stroke-width="{_n(item.width + 5)}"/>'
        )
    dash = f' stroke-dasharray="{" ".join(_n(d) for d in item.dash)}"' if item.dash else ""
    yield (f'{body} class="rs-s-{item.role}" stroke="{COLOURS[item.role][0]}" stroke-width="{_n(item.width)}"{dash}/>')
    if item.arrow:
        yield (
            f'<polygon points="{_points(arrow_head(item))}" class="rs-f-{item.role}" fill="{COLOURS[item.role][0]}"/>'
        )


def cleared(item: Stroke) -> tuple[tuple[float, float], ...]:
    """The middle part of a stroke, whose surroundings are cleared; its ends meet other bonds and stay."""
    (x0, y0), (x1, y1) = item.points[0], item.points[-1]
    length = ((x1 - x0) ** 2 + (y1 - y0) ** 2) ** 0.5 or 1.0
    cut = min(9.0, 0.4 * length) / length
    dx, dy = cut * (x1 - x0), cut * (y1 - y0)
    return (x0 + dx, y0 + dy), (x1 - dx, y1 - dy)


def arrow_head(item: Stroke) -> tuple[tuple[float, float], ...]:
    """Corners of the head at the end of a stroke."""
    (x0, y0), (x1, y1) = item.points[-2:]
    dx, dy = x1 - x0, y1 - y0
    length = (dx * dx + dy * dy) ** 0.5 or 1.0
    dx, dy = dx / length, dy / length
    return (x1, y1), (x1 - 8 * dx - 4 * dy, y1 - 8 * dy + 4 * dx), (x1 - 8 * dx, y1 - 8 * dy)


def _label(item: Label) -> str:
    spans = []
    shift = 0.0
    for place, (text, script) in enumerate(item.runs):
        wanted = {"sub": 0.22, "sup": -0.34}.get(script, 0.0) * item.size
        step = wanted - shift
        shift = wanted
        body = clean(text)
        beside = place > 0 and "number" in (script, item.runs[place - 1][1])
        if not script and abs(step) < 1e-9 and not beside:
            spans.append(body)
            continue
        size = f' font-size="{_n(0.7 * item.size)}"' if script else ""
        look = f' class="rs-f-muted" fill="{COLOURS["muted"][0]}" font-weight="normal"' if script == "number" else ""
        move = f' dy="{_n(step)}"' if abs(step) > 1e-9 else ""
        move += f' dx="{_n(NUMBER_GAP * item.size)}"' if beside else ""
        spans.append(f"<tspan{move}{size}{look}>{body}</tspan>")
    weight = ' font-weight="bold"' if item.bold else ""
    halo = ""
    if item.kind != "caption":
        halo = f' paint-order="stroke" stroke="{COLOURS["paper"][0]}" stroke-width="3.5"'
    anchor = f' text-anchor="{item.anchor}"' if item.anchor != "start" else ""
    names = f"rs-f-{item.role}{' rs-s-paper' if halo else ''} rs-{item.kind}"
    return (
        f'<text x="{_n(item.x)}" y="{_n(item.y)}" font-size="{_n(item.size)}"{anchor}{weight}{halo} class="{names}" '
        f'fill="{COLOURS[item.role][0]}">{"".join(spans)}</text>'
    )


def _shape(item: Shape) -> str:
    if item.filled:
        look = f'class="rs-f-{item.role}" fill="{COLOURS[item.role][0]}"'
    else:
        look = (
            f'class="rs-s-{item.role} rs-f-paper" fill="{COLOURS["paper"][0]}" stroke="{COLOURS[item.role][0]}" '
            f'stroke-width="{_n(item.width)}"'
        )
    if item.radius is not None:
        (x, y), *_ = item.points
        return f'<circle cx="{_n(x)}" cy="{_n(y)}" r="{_n(item.radius)}" {look}/>'
    return f'<polygon points="{_points(item.points)}" {look}/>'
