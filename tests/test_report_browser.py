"""Reports and drawings in a real browser: nothing blank, nothing fetched, nothing cut off; skipped without Chromium."""

from __future__ import annotations

import re
from collections.abc import Iterator
from pathlib import Path

import pytest
import ringstrain as rs
from ringstrain.consequences.nmr import predict_nmr
from ringstrain.tables import load_tables
from ringstrain.views.drawing.states import Wishes, draw_state
from ringstrain.views.drawing.svg import to_svg
from ringstrain.views.look import Look
from ringstrain.views.report import report

from browser import Browser, program

pytestmark = pytest.mark.skipif(program() is None, reason="no Chromium on this machine")
MENTHOL = "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O"
CHOLESTANOL = "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C"


@pytest.fixture(scope="module")
def browser(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Browser]:
    window = Browser(tmp_path_factory.mktemp("profile"))
    yield window
    window.close()


@pytest.fixture(scope="module")
def reports(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Path]:
    folder = tmp_path_factory.mktemp("reports")
    paths = {}
    for name, text in (("menthol", MENTHOL), ("cholestanol", CHOLESTANOL)):
        analysis = rs.analyze(text)
        content = report(analysis, load_tables().sources, Look(), spectrum=predict_nmr(analysis))
        paths[name] = folder / f"{name}.html"
        paths[name].write_text(content, encoding="utf-8", newline="\n")
    return paths


@pytest.mark.parametrize("name", ["menthol", "cholestanol"])
@pytest.mark.parametrize("width", [375, 1280])
def test_a_report_fits_the_window_and_complains_about_nothing(
    browser: Browser, reports: dict[str, Path], name: str, width: int
) -> None:
    browser.show(reports[name], width=width)
    assert browser.evaluate("document.documentElement.scrollWidth") <= width
    assert browser.evaluate("document.body.innerText.length") > 500
    assert browser.evaluate("document.querySelectorAll('svg').length") >= 2
    assert browser.complaints() == []
    assert browser.requests() == [reports[name].as_uri()]


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
def test_all_text_and_lines_stand_out_from_the_background(
    browser: Browser, reports: dict[str, Path], dark: bool
) -> None:
    """Contrast at least 4.5 for text and 3 for lines (WCAG 2.1, 1.4.3 and 1.4.11, recalled)."""
    browser.show(reports["menthol"], width=1280, dark=dark)
    background = _rgb(browser.evaluate("getComputedStyle(document.querySelector('.rs-report')).backgroundColor"))
    assert (sum(background) < 150) == dark
    inks = browser.evaluate(
        "[...new Set([...document.querySelectorAll('p,td,th,li,h1,h2,h3,figcaption,small')]"
        ".map(e => getComputedStyle(e).color)"
        ".concat([...document.querySelectorAll('svg text, svg tspan')].map(e => getComputedStyle(e).fill)))]"
    )
    assert len(inks) > 3
    for ink in inks:
        assert _contrast(_rgb(ink), background) >= 4.5, ink
    lines = browser.evaluate(
        "[...new Set([...document.querySelectorAll('svg polyline:not(.rs-s-paper):not(.rs-s-rule)')]"
        ".map(e => getComputedStyle(e).stroke))]"
    )
    assert len(lines) > 3
    for line in lines:
        assert _contrast(_rgb(line), background) >= 3.0, line


def _rgb(text: str) -> tuple[float, float, float]:
    r, g, b = (float(x) for x in re.findall(r"[\d.]+", text)[:3])
    return r, g, b


def _contrast(first: tuple[float, float, float], second: tuple[float, float, float]) -> float:
    """Contrast ratio of two sRGB colours (WCAG 2.1, relative luminance, recalled)."""

    def luminance(colour: tuple[float, float, float]) -> float:
        parts = [c / 255 for c in colour]
        r, g, b = (c / 12.92 if c <= 0.03928 else ((c + 0.055) / 1.055) ** 2.4 for c in parts)
        return 0.2126 * r + 0.7152 * g + 0.0722 * b

    high, low = sorted((luminance(first), luminance(second)), reverse=True)
    return (high + 0.05) / (low + 0.05)


STRUCTURES = (
    MENTHOL,
    CHOLESTANOL,
    "OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O",
    "1b-Me 1a-OH 3b-Cl 3a-Et 5a-OMe 5b-Ph",
    "1b-CO2Me 2a-OTBS 3b-N3 4a-NO2",
    "C[N+]1(C)CCCCC1C",
)


def test_labels_as_the_browser_sets_them_do_not_touch(browser: Browser, tmp_path: Path) -> None:
    """Glyph boxes come from the browser's own font, not from our estimate of widths."""
    pieces = []
    for text in STRUCTURES:
        for result in rs.analyze(text).ring_systems:
            for state in result.states[:3]:
                for wishes in (Wishes(), Wishes(numbers=True, gauche=True)):
                    pieces.append(to_svg(draw_state(result, state, wishes)))
    path = tmp_path / "labels.html"
    path.write_text("<!DOCTYPE html><meta charset=utf-8>" + "".join(pieces), encoding="utf-8", newline="\n")
    browser.show(path, width=1280)
    boxes = browser.evaluate(
        "[...document.querySelectorAll('svg')].map(s => [...s.querySelectorAll('text')].map(t => {"
        "const b = t.getBBox(); const size = parseFloat(t.getAttribute('font-size'));"
        "return [b.x, b.y + 0.25 * size, b.x + b.width, parseFloat(t.getAttribute('y')), t.textContent]; }))"
    )
    assert len(boxes) == len(pieces)
    for labels in boxes:
        for i, a in enumerate(labels):
            for b in labels[:i]:
                wide, high = min(a[2], b[2]) - max(a[0], b[0]), min(a[3], b[3]) - max(a[1], b[1])
                assert wide <= 1.0 or high <= 1.0, (a, b)
