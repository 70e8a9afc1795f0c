"""The HTML report and what notebooks show, read back with Python's own HTML parser."""

from __future__ import annotations

from html.parser import HTMLParser

import pytest
import ringstrain as rs
from ringstrain.consequences.overview import react
from ringstrain.isomers import rank_isomers
from ringstrain.patterns import enumerate_patterns
from ringstrain.structure.records import Structure
from ringstrain.tables import load_tables
from ringstrain.views.look import Look
from ringstrain.views.report import report

MENTHOL = "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O"
VOID = {"meta", "br", "rect", "polyline", "polygon", "circle"}


class Reader(HTMLParser):
    """Elements, attributes, text and table rows of a page; notices tags left open."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str | None]] = []
        self.text: list[str] = []
        self.rows: list[list[str]] = []
        self._open: list[str] = []
        self.feed(text)
        self.close()
        assert self._open == []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs
        if tag == "tr":
            self.rows.append([])
        if tag in ("td", "th") and self.rows:
            self.rows[-1].append("")
        if tag not in VOID:
            self._open.append(tag)

    def handle_startendtag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs

    def handle_endtag(self, tag: str) -> None:
        assert self._open.pop() == tag

    def handle_data(self, data: str) -> None:
        if self._open and self._open[-1] not in ("style", "title"):
            self.text.append(data)
        if self._open and self._open[-1] in ("td", "th"):
            self.rows[-1][-1] += data


def written(text: str, look: Look | None = None) -> str:
    return report(rs.analyze(text), load_tables().sources, look or Look())


def test_a_report_needs_nothing_from_outside_and_runs_nothing() -> None:
    page = Reader(written(MENTHOL))
    assert not {"script", "link", "img", "iframe", "object", "embed", "form"} & set(page.tags)
    assert not [name for name, _ in page.attributes if name.startswith("on") or name in ("src", "href", "xlink:href")]
    assert "url(" not in written(MENTHOL)
    assert "@import" not in written(MENTHOL)


def number(text: str) -> float:
    return float(text.replace("\N{MINUS SIGN}", "-").replace("+", ""))


def test_the_differences_of_the_ledger_add_up_to_dG() -> None:
    analysis = rs.analyze(MENTHOL)
    e = analysis.ring_systems[0].equilibrium
    assert e is not None
    assert e.dG_kcal is not None
    rows = Reader(written(MENTHOL)).rows
    start = next(i for i, row in enumerate(rows) if row and row[0].startswith("line,"))
    column = rows[start].index("B \N{MINUS SIGN} A")
    end = next(i for i, row in enumerate(rows) if i > start and row[0] == "total")
    parts = [number(row[column]) for row in rows[start + 1 : end]]
    assert sum(parts) == pytest.approx(number(rows[end][column]), abs=0.01 * len(parts))
    assert number(rows[end][column]) == pytest.approx(e.dG_kcal, abs=0.01)


def test_every_source_of_the_ledger_stands_there_in_full() -> None:
    text = " ".join(Reader(written(MENTHOL)).text)
    sources = load_tables().sources
    analysis = rs.analyze(MENTHOL)
    e = analysis.ring_systems[0].equilibrium
    assert e is not None
    cited = {line.source for id in (e.favoured, e.other) for line in analysis.ring_systems[0].state(id).lines}
    assert len(cited) > 1
    for key in cited:
        assert sources[key].citation in text


def test_every_contact_is_listed_with_its_atoms() -> None:
    result = rs.analyze("C[C@H]1CCC[C@@H](C)C1").ring_systems[0]
    text = " ".join(Reader(written("C[C@H]1CCC[C@@H](C)C1")).text)
    chains = [c.atoms for c in result.states[1].detail.facts.contacts]
    assert len(chains) == 7  # four gauche paths, two methyl//H, one methyl//methyl (textbook fact)
    for chain in chains:
        assert "-".join("H" if a < 0 else str(a + 1) for a in chain) in text


@pytest.mark.parametrize("name", ['<script>alert("x")</script>', "a&b<c>\x07", "</title></style><b>"])
def test_names_from_outside_are_escaped(name: str) -> None:
    from dataclasses import replace

    structure = replace(rs.read(MENTHOL), name=name)
    assert isinstance(structure, Structure)
    text = report(rs.analyze(structure), load_tables().sources, Look())
    page = Reader(text)
    assert "script" not in page.tags
    assert page.tags.count("title") == 1 + page.tags.count("svg")
    assert "\x07" not in text
    assert name.replace("\x07", "\N{REPLACEMENT CHARACTER}") in "".join(page.text)


def test_kilojoules_reach_every_number_of_the_ledger() -> None:
    """1 kcal is 4.184 kJ (thermochemical calorie, IUPAC green book, recalled)."""
    rows = Reader(written("CC1CCCCC1", Look(units="kJ"))).rows
    row = next(row for row in rows if row and row[0].startswith("A-value"))
    assert number(row[3]) == pytest.approx(1.74 * 4.184, abs=0.06)


def test_an_unpriced_contact_is_never_shown_as_zero() -> None:
    text = written("1b-OH 2a-NO2 4a-CN")
    rows = Reader(text).rows
    unknown = [row for row in rows if "no price" in row[-1]]
    assert unknown
    assert all("?" in cell for row in unknown for cell in row[1:3] if cell != "\N{EN DASH}")


def test_two_ring_systems_get_a_chapter_each() -> None:
    text = " ".join(Reader(written("C1CCCCC1C1CCCCC1")).text)
    assert "Ring system 1: atoms 1, 2, 3, 4, 5, 6" in text
    assert "Ring system 2" in text


def test_a_locked_system_says_so() -> None:
    text = " ".join(Reader(written("C1CC[C@@H]2CCCC[C@H]2C1")).text)
    assert "no flip" in text


def test_notebooks_get_a_page_part_and_a_picture() -> None:
    analysis = rs.analyze(MENTHOL)
    ranking = rank_isomers("CC1CCC(O)CC1")
    pattern = next(iter(enumerate_patterns(["Me", "OH"])))
    for answer in (analysis, ranking, pattern):
        part = Reader(answer._repr_html_())
        assert "svg" in part.tags
        assert not {"html", "body", "script"} & set(part.tags)
        assert answer._repr_svg_().startswith("<svg ")


def test_reactivity_brings_its_products_sources_and_cautions() -> None:
    analysis = rs.analyze("C[C@H]1CC[C@@H](C(C)(C)C)C[C@@H]1Br")
    findings = react(analysis).findings
    assert findings
    sources = load_tables().sources
    text = " ".join(Reader(report(analysis, sources, Look(), findings=findings)).text)
    for finding in findings:
        assert finding.reason in text
        assert all(caution in text for caution in finding.cautions)
        assert finding.product_smiles is None or finding.product_smiles in text
        assert all(sources[key].citation in text for key in finding.sources)
