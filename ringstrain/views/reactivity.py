"""What a structure does, as tables on a terminal, TSV and JSON."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import TYPE_CHECKING

from rich.text import Text

from ringstrain.consequences.finding import Finding
from ringstrain.consequences.overview import Reactivity, best_of
from ringstrain.provenance import Source
from ringstrain.units import KJ_PER_KCAL
from ringstrain.views.as_json import to_line
from ringstrain.views.look import Look, Units, constant, kelvin, percent
from ringstrain.views.rich_tables import new_table

if TYPE_CHECKING:
    from rich.console import RenderableType

#: At most this many rows of one class in a table; TSV and JSON have all.
_MOST = 12


def reactivity_json(answer: Reactivity) -> str:
    """The document in one line."""
    document = answer.as_dict()
    if answer.analysis.structure.name:
        document["name"] = answer.analysis.structure.name
    document["tables_revision"] = answer.analysis.tables_revision
    return to_line(document)


def plain_header(units: Units) -> str:
    """Column names of the TSV."""
    return "\t".join(
        (
            "input",
            "temperature_K",
            "medium",
            "class",
            "reagent",
            "ring_system",
            "state",
            "state_population",
            f"cost_{units}",
            "verdict",
            "leaving_atoms",
            "partner_atoms",
            "product_smiles",
            "share",
            "share_low",
            "share_high",
            "equilibrium_share",
            "relative",
            "relative_low",
            "relative_high",
            "confidence",
            "pathway",
            "reason",
            "limits",
            "sources",
        )
    )


def plain_rows(answer: Reactivity, units: Units) -> Iterator[str]:
    """One TSV row for each finding; atoms count from 1."""
    analysis = answer.analysis
    for f in answer.findings:
        cost = None if f.cost_kcal is None else f.cost_kcal * (KJ_PER_KCAL if units == "kJ" else 1.0)
        cells = (
            analysis.input,
            f"{analysis.temperature_K:g}",
            analysis.medium,
            f.reaction,
            f.reagent,
            str(f.ring_system + 1),
            f.state or "",
            _number(f.state_population),
            _number(cost),
            f.verdict,
            _atoms(f.leaving_atoms),
            _atoms(f.partner_atoms),
            f.product_smiles or "",
            _number(f.share),
            _number(f.share_low),
            _number(f.share_high),
            _number(f.equilibrium_share),
            _number(f.relative),
            _number(f.relative_low),
            _number(f.relative_high),
            f.confidence,
            f.pathway,
            f.reason,
            " | ".join(f.limits),
            ",".join(f.sources),
        )
        yield "\t".join(" ".join(cell.split()) for cell in cells)


def _number(value: float | None) -> str:
    return "" if value is None else f"{value:.4g}"


def _atoms(atoms: Iterable[int]) -> str:
    return ",".join(str(a + 1) for a in atoms)


def reactivity_view(answer: Reactivity, sources: Mapping[str, Source], look: Look) -> Iterator[RenderableType]:
    """Tables, reasons, limits, cautions and sources of an answer.

    Parameters
    ----------
    answer
        The findings.
    sources
        Citations by key.
    look
        Width, units and signs.
    """
    analysis = answer.analysis
    title = f"{analysis.input}   {kelvin(analysis.temperature_K)}, {analysis.medium}   atoms count from 1"
    yield look.text(title, "dim")
    yield Text()
    if not answer.findings:
        what = f"class {answer.reaction}" if answer.reaction else "any class"
        yield look.text(f"Nothing in this structure reacts in {what}.")
    elif answer.reaction:
        yield from _one_class(answer, look)
    else:
        yield from _overview(answer, look)
    yield from _fine_print(answer, sources, look)


def _overview(answer: Reactivity, look: Look) -> Iterator[RenderableType]:
    """One line for each group and class."""
    table = new_table(look)
    for name in ("class", "atoms", "verdict", "state", "pop.", f"cost, {look.unit}", "outcome"):
        table.add_column(look.text(name), overflow="fold")
    for f in best_of(answer.findings):
        table.add_row(
            look.text(f.reaction),
            look.text(_atoms(f.leaving_atoms)),
            look.text(f.verdict),
            look.text(f.state or "-"),
            look.text(_share(f.state_population)),
            look.text("-" if f.cost_kcal is None else look.energy(f.cost_kcal)),
            look.text(f.pathway + (f": {f.product_smiles}" if f.product_smiles else "")),
        )
    yield table
    yield look.text("One line for each reactive group; ask for one class with --reaction CLASS.", "dim")


def _share(value: float | None) -> str:
    return "-" if value is None else percent(value)


def _one_class(answer: Reactivity, look: Look) -> Iterator[RenderableType]:
    findings = answer.findings
    reagents = dict.fromkeys(f.reagent for f in findings if f.reagent)
    yield look.text(answer.reaction + (f" ({', '.join(reagents)})" if reagents else ""), "bold")
    balanced = any(f.equilibrium_share is not None for f in findings)
    table = new_table(look)
    names = [
        "",
        "product",
        "share",
        *(["at equil."] if balanced else []),
        "state",
        "pop.",
        f"cost, {look.unit}",
        "verdict",
    ]
    for name in names:
        table.add_column(look.text(name), overflow="fold")
    for place, f in enumerate(findings[:_MOST], start=1):
        cells = [
            str(place),
            f.product_smiles or "none",
            _with_limits(f),
            *([_share(f.equilibrium_share)] if balanced else []),
            f.state or "-",
            _share(f.state_population),
            "-" if f.cost_kcal is None else look.energy(f.cost_kcal),
            f.verdict,
        ]
        table.add_row(*(look.text(cell) for cell in cells))
    yield table
    if len(findings) > _MOST:
        yield look.text(f"... and {len(findings) - _MOST} more (--format plain lists all).", "dim")
    yield from _by_product(findings, look)
    yield Text()
    for place, f in enumerate(findings[:_MOST], start=1):
        yield look.text(f"{place}. {f.pathway}. {f.reason} ({f.confidence})")
    yield from _relative(findings, look)
    if answer.alternatives:
        yield Text()
        yield from _alternatives(answer.alternatives, look)


def _by_product(findings: tuple[Finding, ...], look: Look) -> Iterator[RenderableType]:
    """Products with their summed shares, where one stands in several rows."""
    for reagent, shares in _totals(findings).items():
        if len(shares) == sum(f.reagent == reagent and bool(f.product_smiles) for f in findings):
            continue
        ranked = sorted(shares.items(), key=lambda item: -(item[1] or 0.0))
        sums = ", ".join(f"{product} {percent(share)}" for product, share in ranked if share is not None)
        if sums:
            yield look.text(f"Over all states: {sums}.")


def _totals(findings: tuple[Finding, ...]) -> dict[str, dict[str, float | None]]:
    """Summed share of each product of each reagent; None when one part is unknown."""
    totals: dict[str, dict[str, float | None]] = {}
    for f in findings:
        if f.product_smiles:
            own = totals.setdefault(f.reagent, {})
            before = own.get(f.product_smiles, 0.0)
            own[f.product_smiles] = None if before is None or f.share is None else before + f.share
    return totals


def _with_limits(f: Finding) -> str:
    if f.share is None:
        return "-"
    if f.share_low is None or f.share_high is None or f.confidence == "direction only":
        return percent(f.share)
    return f"{percent(f.share)} ({100 * f.share_low:.0f} to {100 * f.share_high:.0f})"


def _relative(findings: tuple[Finding, ...], look: Look) -> Iterator[RenderableType]:
    """Rates beside the epimers, each once."""
    seen: set[str] = set()
    for f in findings:
        if not f.relative_to or f.relative_to in seen:
            continue
        seen.add(f.relative_to)
        if f.relative is None:
            other = "does not react" if f.product_smiles else "reacts"
            yield look.text(f"The epimer {f.relative_to} {other} in this class.")
            continue
        low, high = f.relative_low, f.relative_high
        limits = f" ({constant(low)} to {constant(high)})" if low and high else ""
        rate = f"{constant(f.relative)}{limits}, {f.confidence}"
        yield look.text(f"Rate relative to the epimer {f.relative_to}: {rate}.")


def _alternatives(findings: tuple[Finding, ...], look: Look) -> Iterator[RenderableType]:
    """Other reagent classes: product and summed share each."""
    yield look.text("Other reagents (--reagent NAME)", "bold")
    table = new_table(look)
    for name in ("reagent", "main product", "share"):
        table.add_column(look.text(name), overflow="fold")
    for reagent, shares in _totals(findings).items():
        product = max(shares, key=lambda smiles: shares[smiles] or 0.0)
        share = shares[product]
        table.add_row(
            look.text(reagent), look.text(product), look.text("direction only" if share is None else percent(share))
        )
    yield table


def _fine_print(answer: Reactivity, sources: Mapping[str, Source], look: Look) -> Iterator[RenderableType]:
    shown = answer.findings if answer.reaction else ()
    limits = dict.fromkeys(limit for f in shown for limit in f.limits)
    cautions = dict.fromkeys(caution for f in answer.findings for caution in f.cautions)
    keys = dict.fromkeys(key for f in shown for key in f.sources)
    if limits or cautions or answer.notes:
        yield Text()
    for limit in limits:
        yield look.text(f"Limit: {limit.removeprefix('(limit) ')}", "bold" if limit.startswith("(limit)") else "")
    for caution in cautions:
        yield look.text(f"Caution: {caution}")
    for note in answer.notes:
        yield look.text(f"Note: {note}")
    for key in keys:
        source = sources.get(key)
        yield look.text(f"[{key}] {source.citation if source else ''}", "dim")
