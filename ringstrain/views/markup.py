"""Pieces of HTML with everything that comes from outside escaped."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from ringstrain.views.drawing.svg import clean, style_sheet


@dataclass(frozen=True, slots=True)
class Cell:
    """A table cell.

    Attributes
    ----------
    text
        Plain text.
    numeric
        True to keep it on one line, in figures of one width.
    remarks
        Smaller lines below.
    """

    text: str
    numeric: bool = False
    remarks: tuple[str, ...] = ()


def table(head: Sequence[str], rows: Iterable[Sequence[Cell]], *, foot: Sequence[Cell] = (), caption: str = "") -> str:
    """A table that scrolls by itself where it is wider than the page."""
    parts = ['<div class="rs-scroll" tabindex="0"><table>']
    if caption:
        parts.append(f"<caption>{clean(caption)}</caption>")
    parts.append("<thead><tr>" + "".join(f'<th scope="col">{clean(h)}</th>' for h in head) + "</tr></thead><tbody>")
    parts.extend("<tr>" + "".join(_cell(cell) for cell in row) + "</tr>" for row in rows)
    parts.append("</tbody>")
    if foot:
        parts.append("<tfoot><tr>" + "".join(_cell(cell) for cell in foot) + "</tr></tfoot>")
    parts.append("</table></div>")
    return "\n".join(parts)


def _cell(cell: Cell) -> str:
    remarks = "".join(f"<small>{clean(r)}</small>" for r in cell.remarks)
    return (
        f'<td class="rs-n">{clean(cell.text)}{remarks}</td>'
        if cell.numeric
        else f"<td>{clean(cell.text)}{remarks}</td>"
    )


def paragraph(text: str, kind: str = "") -> str:
    """A paragraph."""
    look = f' class="rs-{kind}"' if kind else ""
    return f"<p{look}>{clean(text)}</p>"


def heading(level: int, text: str) -> str:
    """A heading."""
    return f"<h{level}>{clean(text)}</h{level}>"


def bullets(lines: Iterable[str]) -> str:
    """A list."""
    return "<ul>" + "".join(f"<li>{clean(line)}</li>" for line in lines) + "</ul>"


def figure(svg: str, lines: Sequence[str] = (), *, wide: bool = False) -> str:
    """A picture with its caption."""
    caption = ""
    if lines:
        first, *rest = lines
        caption = (
            f"<figcaption><b>{clean(first)}</b>" + "".join(f"<br>{clean(line)}" for line in rest) + "</figcaption>"
        )
    return f"<figure{' class=rs-wide' if wide else ''}>{svg}{caption}</figure>"


def page(title: str, body: str) -> str:
    """A document that needs nothing from outside: no script, no network; dark on dark screens, light on paper."""
    return (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">\n'
        '<meta name="viewport" content="width=device-width, initial-scale=1">\n'
        "<meta http-equiv=\"Content-Security-Policy\" content=\"default-src 'none'; style-src 'unsafe-inline'; "
        'img-src data:">\n'
        f"<title>{clean(title)}</title>\n<style>{STYLE}\n{style_sheet()}</style></head>\n"
        f'<body><main class="rs-report">\n{body}\n</main></body></html>\n'
    )


def fragment(body: str) -> str:
    """The same content for use inside another page."""
    return f'<div class="rs-report"><style>{_FRAGMENT_STYLE}\n{style_sheet()}</style>\n{body}\n</div>'


_FRAGMENT_STYLE = """.rs-report{--text:#1d2730;--faint:#5b6772;--rule:#c9d0d6;--back:#ffffff;--shade:#f3f6f8;
color:var(--text);background:var(--back);font:15px/1.45 system-ui,Helvetica,Arial,sans-serif;padding:8px}
.rs-report h1{font-size:1.35rem;line-height:1.25;margin:.2em 0 .4em;overflow-wrap:anywhere}
.rs-report h2{font-size:1.1rem;margin:1.6em 0 .4em;border-bottom:1px solid var(--rule);padding-bottom:.2em}
.rs-report h3{font-size:1rem;margin:1.2em 0 .3em}
.rs-report p{margin:.45em 0;overflow-wrap:anywhere}
.rs-report .rs-lead{font-size:1.08rem;font-weight:600}
.rs-report .rs-faint,.rs-report small,.rs-report figcaption{color:var(--faint)}
.rs-report figcaption b{color:var(--text)}
.rs-report small{display:block;font-size:.82em}
.rs-report .rs-row{display:flex;flex-wrap:wrap;gap:10px 22px;align-items:flex-end;margin:.8em 0}
.rs-report figure{margin:0;text-align:center;font-size:.88rem;max-width:100%}
.rs-report svg{max-width:100%;height:auto}
.rs-report .rs-scroll,.rs-report .rs-wide{overflow-x:auto;max-width:100%}
.rs-report .rs-wide{text-align:left}
.rs-report .rs-wide svg{max-width:none}
.rs-report table{border-collapse:collapse;font-size:.9rem;margin:.4em 0}
.rs-report caption{text-align:left;font-weight:600;padding:.2em 0}
.rs-report th,.rs-report td{text-align:left;vertical-align:top;
padding:.28em .9em .28em 0;border-bottom:1px solid var(--rule)}
.rs-report th{font-weight:600;border-bottom:2px solid var(--faint)}
.rs-report tfoot td{font-weight:600;border-top:2px solid var(--faint)}
.rs-report .rs-n{white-space:nowrap;font-variant-numeric:tabular-nums}
.rs-report ol,.rs-report ul{padding-left:1.5em;margin:.3em 0}
.rs-report li{overflow-wrap:anywhere;margin:.2em 0}
@media screen and (prefers-color-scheme:dark){.rs-report{
--text:#e7ebee;--faint:#9fabb6;--rule:#3a4650;--back:#12181d;--shade:#1a2229}}
"""
STYLE = (
    ":root{color-scheme:light dark}body{margin:0;background:#ffffff}"
    "@media screen and (prefers-color-scheme:dark){body{background:#12181d}}\n"
    + _FRAGMENT_STYLE
    + """.rs-report{max-width:62rem;margin:0 auto;padding:18px clamp(12px,4vw,32px) 40px;box-sizing:border-box}
@page{size:A4;margin:15mm 14mm}
@media print{.rs-report{padding:0;font-size:10.5pt;max-width:none}
.rs-report figure,.rs-report tr,.rs-report li{break-inside:avoid}
.rs-report h2,.rs-report h3{break-after:avoid}.rs-report .rs-scroll,.rs-report .rs-wide{overflow:visible}
.rs-report .rs-wide svg{max-width:100%}.rs-report table{font-size:9pt}}
"""
)
