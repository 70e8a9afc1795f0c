"""Rankings of stereoisomers as text, tables and TSV."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from ringstrain.advice import advise, labels_text, ratio_text, relation_words
from ringstrain.ranking import Isomer, Ranking
from ringstrain.units import KJ_PER_KCAL, Z95
from ringstrain.views.look import Look, Units, kelvin, percent, percent_range
from ringstrain.views.plain import number, row

if TYPE_CHECKING:
    from rich.console import RenderableType

_DETERMINED = "not determined"


def headline(ranking: Ranking) -> str:
    """The answer in a sentence or two."""
    best = ranking.isomers[0]
    count = len(ranking.isomers)
    where = f"at {kelvin(round(ranking.temperature_K))} in {_medium(ranking)}"
    if count == 1:
        return f"One isomer only: {best.smiles}."
    if best.share is None:
        return f"{count} isomers; an unpriced contact keeps the order {_DETERMINED} {where}."
    interval = percent_range(best.share, best.share_low or 0.0, best.share_high or 1.0)
    lead = f"Of {count} isomers {best.smiles} ({_name(best)}) is the most stable"
    return f"{lead}: {percent(best.share)} ({interval}) {where}; dr {ratio_text(ranking)}."


def _medium(ranking: Ranking) -> str:
    words = {"gas": "the gas", "nonpolar": "nonpolar media", "polar": "polar media", "protic": "water"}
    return ranking.conditions.solvent or words[ranking.conditions.medium]


def _name(isomer: Isomer) -> str:
    """Cis/trans words when there are any, else the symmetry word."""
    return relation_words(isomer.structure) or isomer.symmetry


def advice_line(ranking: Ranking, look: Look) -> str:
    """The best single inversion of the input, or what stands instead."""
    if ranking.input_rank is None:
        return "The input leaves centres open, so that there is nothing to invert from."
    advice = advise(ranking)
    if advice is None:
        return "No single centre is free to invert."
    rank = f"The input is number {ranking.input_rank} of {len(ranking.isomers)}. "
    half = Z95 * advice.uncertainty_kcal
    gain = f"{look.energy(advice.gain_kcal, signed=True)} \N{PLUS-MINUS SIGN} {look.energy(half)} {look.unit}"
    share = advice.ratio / (1 + advice.ratio)
    ratio = f"{100 * share:.0f}:{100 - 100 * share:.0f}"
    if advice.verdict == "does not pay":
        cost = f"{look.energy(-advice.gain_kcal)} {look.unit}"
        return f"{rank}No single inversion pays; the cheapest, at atom {advice.atom + 1}, costs {cost}."
    lead = "Best single inversion" if advice.verdict == "pays" else "Too close to call: inversion"
    ceiling = (
        ""
        if advice.ceiling is None
        else f" Full equilibration reaches {percent(advice.ceiling)} of the best isomer at most."
    )
    return f"{rank}{lead} at atom {advice.atom + 1}: gain {gain}, {ratio} at equilibrium.{ceiling}"


def ranking_view(ranking: Ranking, look: Look, most: int) -> Iterator[RenderableType]:
    """Headline, advice, table and notes.

    Parameters
    ----------
    ranking
        The answer.
    look
        Width, units, signs.
    most
        Rows at most; 0 for all.
    """
    from rich.table import Table

    yield look.text(f"{ranking.input}   {kelvin(ranking.temperature_K)}, {ranking.medium}", "bold")
    yield look.text(headline(ranking))
    yield look.text(advice_line(ranking, look))
    yield look.text("")
    shown = ranking.isomers[: most or None]
    table = Table(box=look.box(), show_edge=False, pad_edge=False, header_style="")
    for title, justify in (
        ("", "right"),
        ("isomer", "left"),
        ("invert", "left"),
        ("axial", "left"),
        (f"\N{GREEK CAPITAL LETTER DELTA}G, {look.unit}", "right"),
        ("of it counting", "right"),
        ("share", "right"),
    ):
        table.add_column(look.text(title), justify=justify, overflow="fold")  # type: ignore[arg-type]
    for place, isomer in enumerate(shown, start=1):
        table.add_row(*(look.text(cell) for cell in _cells(place, isomer, ranking, look)))
    yield table
    if len(shown) < len(ranking.isomers):
        rest = sum(isomer.share or 0.0 for isomer in ranking.isomers[len(shown) :])
        yield look.text(
            f"Not shown: {len(ranking.isomers) - len(shown)} more, together {percent(rest)}; --most 0 lists all."
        )
    yield look.text(
        "Free energies above the best, \N{PLUS-MINUS SIGN} 95 %; faces (a, b) relative to the first centre of each "
        "ring; atoms from 1."
    )
    for refused in ranking.impossible[:8]:
        yield look.text(f"Cannot exist: {refused.smiles}. {refused.reason}")
    if len(ranking.impossible) > 8:
        yield look.text(f"... and {len(ranking.impossible) - 8} more that cannot exist; --json lists all.")
    for note in ranking.notes:
        yield look.text(f"Note: {note}")


def _cells(place: int, isomer: Isomer, ranking: Ranking, look: Look) -> tuple[str, ...]:
    """One row of the table."""
    words = relation_words(isomer.structure)
    labels = labels_text(isomer.structure)
    own = " *" if place == ranking.input_rank else ""
    first = "\n".join(filter(None, (isomer.smiles, " ".join(filter(None, (words, labels, isomer.symmetry))))))
    inverted = (
        "open" if isomer.inverted_atoms is None else ",".join(str(a + 1) for a in isomer.inverted_atoms) or "as given"
    )
    axial = ",".join(str(a + 1) for a in isomer.favoured_axial) or "none"
    if any(shape not in ("chair", "half-chair") for shape in isomer.shapes):
        axial += " (" + ", ".join(dict.fromkeys(s for s in isomer.shapes if s not in ("chair", "half-chair"))) + ")"
    bound = "at least " if isomer.lower_bound else ""
    half = Z95 * isomer.uncertainty_kcal
    energy = (
        look.energy(0.0)
        if place == 1
        else f"{bound}{look.energy(isomer.dG_kcal)} \N{PLUS-MINUS SIGN} {look.energy(half)}"
    )
    if isomer.share is None:
        share = "?"
    else:
        limits = percent_range(isomer.share, isomer.share_low or 0.0, isomer.share_high or 1.0)
        share = f"{percent(isomer.share)} ({limits})"
    return f"{place}{own}", first, inverted, axial, energy, look.energy(isomer.statistics_kcal), share


def shares_view(rankings: Sequence[Ranking], look: Look) -> Iterator[RenderableType]:
    """Shares of the isomers over several temperatures or media."""
    from rich.table import Table

    first = rankings[0]
    yield look.text(first.input, "bold")
    table = Table(box=look.box(), show_edge=False, pad_edge=False, header_style="")
    table.add_column(look.text("conditions"))
    order = [isomer.smiles for isomer in first.isomers[:6]]
    for smiles in order:
        table.add_column(look.text(smiles), justify="right", overflow="fold")
    for ranking in rankings:
        shares = {isomer.smiles: isomer.share for isomer in ranking.isomers}
        cells = ["?" if (share := shares.get(smiles)) is None else percent(share) for smiles in order]
        table.add_row(look.text(f"{kelvin(ranking.temperature_K)}, {ranking.medium}"), *(look.text(c) for c in cells))
    yield table
    if len(first.isomers) > len(order):
        yield look.text(f"Not shown: {len(first.isomers) - len(order)} more isomers; --format plain lists all.")


def plain_header(units: Units) -> str:
    """Column names of :func:`plain_rows`."""
    return row(
        (
            "input",
            "temperature_K",
            "medium",
            "rank",
            "smiles",
            "inverted_atoms",
            "symmetry",
            "relation",
            "cip",
            f"dG_{units}",
            f"statistics_{units}",
            f"uncertainty_{units}",
            "share",
            "share_low",
            "share_high",
            "favoured_axial",
            "shapes",
            "is_input",
            "reason",
        )
    )


def plain_rows(ranking: Ranking, units: Units) -> Iterator[str]:
    """One row for each isomer, those that cannot exist last."""
    factor = KJ_PER_KCAL if units == "kJ" else 1.0
    lead = (ranking.input, f"{ranking.temperature_K:g}", ranking.medium)
    for place, isomer in enumerate(ranking.isomers, start=1):
        yield row(
            (
                *lead,
                place,
                isomer.smiles,
                None if isomer.inverted_atoms is None else ",".join(str(a + 1) for a in isomer.inverted_atoms),
                isomer.symmetry,
                relation_words(isomer.structure),
                labels_text(isomer.structure),
                number(isomer.dG_kcal * factor),
                number(isomer.statistics_kcal * factor),
                number(isomer.uncertainty_kcal * factor),
                number(isomer.share, 6),
                number(isomer.share_low, 6),
                number(isomer.share_high, 6),
                ",".join(str(a + 1) for a in isomer.favoured_axial),
                ",".join(isomer.shapes),
                "yes" if place == ranking.input_rank else "no",
                "",
            )
        )
    for lost in ranking.impossible:
        inverted = None if lost.inverted_atoms is None else ",".join(str(a + 1) for a in lost.inverted_atoms)
        yield row((*lead, "", lost.smiles, inverted, *[""] * 12, lost.reason))
