"""A report to keep: one file with drawings, ledgers, contacts, sources and notes."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.provenance import Source
from ringstrain.units import Z95
from ringstrain.views.drawing.ladders import draw_equilibrium, draw_temperatures
from ringstrain.views.drawing.panels import caption_lines, key_items
from ringstrain.views.drawing.states import Wishes, draw_state
from ringstrain.views.drawing.svg import to_svg
from ringstrain.views.grid import lay_out
from ringstrain.views.look import Look, kelvin, percent
from ringstrain.views.markup import Cell, bullets, figure, heading, page, paragraph, table
from ringstrain.views.rich_tables import (
    Footnotes,
    equilibrium_line,
    groups_at,
    known_words,
    shown_states,
)
from ringstrain.views.sentence import headlines
from ringstrain.views.words import atom_numbers

if TYPE_CHECKING:
    from ringstrain.consequences.finding import Finding
    from ringstrain.consequences.nmr import Spectrum

#: Contacts are listed in this order, in these words.
_KINDS = (
    ("gauche", "gauche"),
    ("syn-axial X//H", "group and axial H"),
    ("syn-axial X//Y", "two syn-axial groups"),
    ("syn-axial X//lone pair", "group and axial lone pair"),
    ("peri", "peri"),
    ("geminal", "geminal"),
    ("eclipsed", "eclipsed"),
    ("transannular", "transannular"),
)


class References(Footnotes):
    """Numbered sources, for a list at the end of a page."""

    def entries(self) -> list[str]:
        """Full citations in order of their numbers."""
        return [self._entry(key) for key in self._numbers]

    def _entry(self, key: str) -> str:
        known = self._sources.get(key)
        return f"{key}: {known.citation}" if known is not None and known.citation else key


def report(
    analysis: Analysis,
    sources: Mapping[str, Source],
    look: Look,
    *,
    wishes: Wishes | None = None,
    spectrum: Spectrum | None = None,
    findings: Sequence[Finding] | None = None,
    range_of: Sequence[Analysis] = (),
) -> str:
    """A self-contained HTML document about one structure.

    Parameters
    ----------
    analysis
        The answer.
    sources
        Publications by key.
    look
        Units.
    wishes
        What the drawings show.
    spectrum
        NMR prediction to include; left out when None.
    findings
        Reactivity to include; left out when None.
    range_of
        The same structure at rising temperatures, for graphs of shares; none when empty.

    Returns
    -------
    str
        HTML that needs no network and no script.
    """
    body = report_body(analysis, sources, look, wishes=wishes, spectrum=spectrum, findings=findings, range_of=range_of)
    return page(analysis.structure.name or f"Chairs of {analysis.input}", body)


def report_body(
    analysis: Analysis,
    sources: Mapping[str, Source],
    look: Look,
    *,
    wishes: Wishes | None = None,
    spectrum: Spectrum | None = None,
    findings: Sequence[Finding] | None = None,
    range_of: Sequence[Analysis] = (),
) -> str:
    """The content of a :func:`report`."""
    marks = References(sources)
    several = len(analysis.ring_systems) > 1
    parts = [heading(1, analysis.structure.name or analysis.input)]
    where = f"{kelvin(analysis.temperature_K)}, {analysis.medium}"
    parts.append(paragraph(f"Input {analysis.input}; canonical {analysis.smiles}; {where}.", "faint"))
    parts.extend(paragraph(sentence, "lead") for sentence in headlines(analysis, look))
    for number, result in enumerate(analysis.ring_systems, 1):
        if several:
            parts.append(heading(2, f"Ring system {number}: atoms {atom_numbers(result.system.atoms)}"))
        parts.extend(_system(analysis, result, marks, look, wishes or Wishes(numbers=True)))
        if range_of:
            parts.append(figure(to_svg(draw_temperatures(range_of, number - 1, look), standalone=False), wide=True))
    if spectrum is not None:
        parts.extend(_nmr(spectrum))
    if findings is not None:
        parts.extend(_reactivity(findings, marks, look))
    if analysis.notes:
        parts += [heading(2, "Notes"), bullets(analysis.notes)]
    cited = marks.entries()
    if cited:
        parts.append(heading(2, "Sources"))
        parts.append(bullets(cited).replace("<ul>", "<ol>").replace("</ul>", "</ol>"))
    parts.append(
        paragraph(
            f"Energies are ledger totals, \N{PLUS-MINUS SIGN} 95 %; atoms counted from 1; price tables "
            f"{analysis.tables_revision}. Read, estimated and computed values are marked in the ledger; a contact "
            "without a price is never zero.",
            "faint",
        )
    )
    return "\n".join(parts)


def _system(analysis: Analysis, result: SystemResult, marks: References, look: Look, wishes: Wishes) -> list[str]:
    """Everything about one ring system."""
    shown = shown_states(result)
    scenes = [draw_state(result, state, wishes) for state in shown]
    parts = ['<div class="rs-row">']
    parts += [
        figure(to_svg(scene, standalone=False), caption_lines(state, look)) for state, scene in zip(shown, scenes)
    ]
    parts.append("</div>")
    key = key_items([item for scene in scenes for item in scene.items], wishes)
    if key:
        parts.append(paragraph(f"Lines: {'; '.join(words for _, words in key)}.", "faint"))
    if result.equilibrium is None:
        parts.append(paragraph("One ring form only: no flip, no K."))
    else:
        parts.append(paragraph(equilibrium_line(result, result.equilibrium, analysis.temperature_K, look)))
    parts.append(figure(to_svg(draw_equilibrium(analysis, result, shown, look), standalone=False), wide=True))
    parts.append(_states(result, look))
    parts.append(_ledger(result, marks, look))
    parts.append(_contacts(result, shown))
    return parts


def _states(result: SystemResult, look: Look) -> str:
    """One row for every state."""
    head = ("state", "shape", "axial", "equatorial", f"energy, {look.unit}", "share (95 %)")
    rows = []
    for state in result.states:
        _, energy, share, *rest = caption_lines(state, look)
        rows.append(
            (
                Cell(state.id),
                Cell(", ".join(state.shapes) if len(set(state.shapes)) > 1 else state.shapes[0]),
                Cell(groups_at(result, state, "axial")),
                Cell(groups_at(result, state, "equatorial")),
                Cell(energy.removesuffix(f" {look.unit}"), True),
                Cell(share, remarks=tuple(rest)),
            )
        )
    return heading(3, "States") + table(head, rows)


def _columns(result: SystemResult) -> tuple[tuple[State, ...], tuple[int, int] | None]:
    """The states whose ledgers stand side by side."""
    e = result.equilibrium
    if e is None:
        return result.states[:1], None
    return (result.state(e.favoured), result.state(e.other)), (0, 1)


def _ledger(result: SystemResult, marks: References, look: Look) -> str:
    """The ledger of favoured and other with the column of differences that makes K."""
    columns, compared = _columns(result)
    rows = lay_out(columns, compared)
    title = heading(3, "Ledger")
    if not rows:
        return title + paragraph("Nothing to pay in any of these states.")
    minus, times, spread = "\N{MINUS SIGN}", "\N{MULTIPLICATION SIGN}", "\N{PLUS-MINUS SIGN}"
    head = [f"line, {look.unit}", *(state.id for state in columns)]
    if compared:
        head.append(f"{columns[1].id} {minus} {columns[0].id}")
    head += [f"{spread} 95 %", "atoms", "how known"]
    body = []
    for row in rows:
        line = row.line
        cells = [Cell(f"{line.rule} {'/'.join(line.groups)}", remarks=row.remarks)]
        price = look.energy(line.value_kcal)
        cells += [Cell(f"{count:.3g} {times} {price}" if count else "\N{EN DASH}", True) for count in row.counts]
        if compared:
            cells.append(
                Cell("?" if row.difference_kcal is None else look.energy(row.difference_kcal, signed=True), True)
            )
        cells.append(Cell(look.energy(row.spread_kcal), True))
        cells.append(Cell("; ".join(_atoms(atoms) for atoms in line.atoms)))
        cells.append(Cell(known_words(line, marks)))
        body.append(cells)
    foot = [Cell("known part" if any(state.lower_bound for state in columns) else "total")]
    foot += [Cell(look.energy(state.energy_kcal), True) for state in columns]
    if compared:
        foot.append(Cell(look.energy(columns[1].energy_kcal - columns[0].energy_kcal, signed=True), True))
    foot += [Cell(""), Cell(""), Cell("")]
    return title + table(head, body, foot=foot)


def _atoms(atoms: Sequence[int]) -> str:
    """Atoms of a contact from 1; H for a hydrogen or lone pair."""
    return "-".join("H" if atom < 0 else str(atom + 1) for atom in atoms)


def _contacts(result: SystemResult, states: Sequence[State]) -> str:
    """Which atoms meet in each state."""
    rows = []
    for kind, words in _KINDS:
        found = [[c.atoms for c in state.detail.facts.contacts if c.kind == kind] for state in states]
        if any(found):
            cells = [Cell(words)]
            partner = "lone pair" if "lone pair" in kind else "H"
            for chains in found:
                texts = ("-".join(partner if a < 0 else str(a + 1) for a in chain) for chain in chains)
                cells.append(Cell("; ".join(texts) or "none"))
            rows.append(cells)
    title = heading(3, "Contacts, by atoms")
    if not rows:
        return title + paragraph("None.")
    return title + table(["contact", *(state.id for state in states)], rows)


def _nmr(spectrum: Spectrum) -> list[str]:
    """Couplings of every ring hydrogen."""
    rows = []
    for signal in spectrum.signals:
        couplings = [
            f"{c.label} {'?' if c.average_Hz is None else f'{c.average_Hz:.1f}'}"
            + (
                f" \N{PLUS-MINUS SIGN} {Z95 * c.uncertainty_Hz:.1f}"
                if c.average_Hz is not None and c.uncertainty_Hz
                else ""
            )
            for c in signal.couplings
            if c.observable
        ]
        word = signal.multiplet.word if signal.multiplet is not None else "?"
        rows.append((Cell(signal.label), Cell(word), Cell("; ".join(couplings) or "none predicted")))
    return [
        heading(2, "Couplings"),
        table(("hydrogen", "reads as", "to: average 3J, Hz, \N{PLUS-MINUS SIGN} 95 %"), rows),
        bullets(spectrum.notes) if spectrum.notes else "",
    ]


def _reactivity(findings: Sequence[Finding], marks: References, look: Look) -> list[str]:
    """What reacts from which state."""
    parts = [heading(2, "Reactivity")]
    if not findings:
        return [*parts, paragraph("Nothing that the rules cover.")]
    rows = []
    for f in findings:
        share = "" if f.share is None else percent(f.share)
        cost = "" if f.cost_kcal is None else look.energy(f.cost_kcal)
        rows.append(
            (
                Cell(f.reaction, remarks=(f.pathway,)),
                Cell(f.state or "none"),
                Cell(f.verdict),
                Cell(cost, True),
                Cell(share, True),
                Cell(f.product_smiles or "none"),
                Cell(f.reason),
                Cell(" ".join([f.confidence, *(marks.mark(key) for key in f.sources)])),
            )
        )
    head = ("reaction", "from state", "verdict", f"cost, {look.unit}", "share", "product", "why", "confidence")
    parts.append(table(head, rows))
    remarks = tuple(dict.fromkeys(remark for f in findings for remark in (*f.cautions, *f.limits)))
    return [*parts, heading(3, "Cautions and limits"), bullets(remarks)] if remarks else parts
