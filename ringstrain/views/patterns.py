"""Substitution patterns as a table, tab-separated text, JSON lines and SMILES; computes nothing but units."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from ringstrain.pattern_records import Pattern
from ringstrain.patterns import Tally
from ringstrain.units import KJ_PER_KCAL, Z95
from ringstrain.views.as_json import to_line
from ringstrain.views.look import Look, Units, constant, percent
from ringstrain.views.plain import number, row

if TYPE_CHECKING:
    from rich.console import RenderableType

_HEADS = ("", "pattern", "axial in the favoured form", "G rel.", "\N{GREEK CAPITAL LETTER DELTA}G", "K", "one shape")


def patterns_header(units: Units) -> str:
    """Column names of :func:`pattern_row`."""
    return row(
        (
            "rank", "pattern", "smiles", "placements", f"energy_{units}", f"dG_{units}", f"uncertainty_{units}", "K",
            "K_low", "K_high", "bound", "population", "axial_groups", "axial_share",
        )
    )  # fmt: skip


def pattern_row(pattern: Pattern, units: Units) -> str:
    """One pattern as TSV; axial groups are those of the favoured form, axial shares come in order of position."""
    factor = KJ_PER_KCAL if units == "kJ" else 1.0

    def energy(value: float | None) -> str | None:
        return None if value is None else number(value * factor)

    return row(
        (
            pattern.rank,
            pattern.pattern,
            pattern.smiles,
            pattern.placements,
            energy(pattern.energy_kcal),
            energy(pattern.dG_kcal),
            energy(pattern.uncertainty_kcal),
            number(pattern.K),
            number(pattern.K_low),
            number(pattern.K_high),
            pattern.bound,
            number(pattern.population, 6),
            ",".join(f"{g.locant}-{g.group}" for g in pattern.groups if g.axial),
            ",".join(f"{g.locant}-{g.group}={number(g.axial_share, 6) or '?'}" for g in pattern.groups),
        )
    )


def pattern_line(pattern: Pattern) -> str:
    """One pattern as a JSON line."""
    return to_line(pattern.as_dict())


def smiles_line(pattern: Pattern) -> str:
    """SMILES and, after a tab, the pattern as its name."""
    return f"{pattern.smiles}\t{pattern.pattern}"


def patterns_view(patterns: Sequence[Pattern], tally: Tally, look: Look, *, enantiomers: bool) -> RenderableType:
    """The list with what a reader should know about it.

    Parameters
    ----------
    patterns
        In order.
    tally
        How many were gone through.
    look
        How values are written.
    enantiomers
        True when both enantiomers are listed.
    """
    from rich.console import Group
    from rich.table import Table

    known = [p.energy_kcal for p in patterns if p.energy_kcal is not None]
    lowest = min(known, default=0.0)
    rows = [
        (
            str(p.rank),
            p.pattern,
            _axial_words(p),
            "?" if p.energy_kcal is None else look.energy(p.energy_kcal - lowest),
            _gap_words(p, look),
            "-" if p.K is None else constant(p.K),
            "?" if p.population is None else percent(p.population),
        )
        for p in patterns
    ]
    sentences = [look.text(text) for text in remarks(patterns, tally, look, enantiomers=enantiomers)]
    if not _fits(rows, look):
        return Group(*(look.text(text) for cells in rows for text in _stacked(cells)), look.text(""), *sentences)
    table = Table(box=look.box(), pad_edge=False, padding=(0, 2, 0, 0))
    table.add_column("", justify="right", no_wrap=True)
    table.add_column(_HEADS[1], overflow="fold")
    table.add_column(_HEADS[2], overflow="fold")
    for name in _HEADS[3:]:
        table.add_column(look.text(name), justify="right", no_wrap=True)
    for cells in rows:
        table.add_row(*map(look.text, cells))
    return Group(table, *sentences)


def _fits(rows: Sequence[tuple[str, ...]], look: Look) -> bool:
    """True when the numbers leave room for the words; a table without it would drop its patterns."""
    columns = list(zip(_HEADS, *rows, strict=True))
    numbers = sum(max(len(look.say(text)) for text in column) for column in (columns[0], *columns[3:]))
    words = sum(max(len(word) for text in column for word in look.say(text).split()) for column in columns[1:3])
    return numbers + words + 3 * len(_HEADS) <= look.width


def _stacked(cells: tuple[str, ...]) -> tuple[str, str]:
    """One pattern in two sentences."""
    rank, pattern, axial, *numbers = cells
    return (
        f"{rank}  {pattern}; axial: {axial}",
        "   " + ", ".join(f"{name} {value}" for name, value in zip(_HEADS[3:], numbers, strict=True)),
    )


def _axial_words(pattern: Pattern) -> str:
    """Groups axial in the favoured form, with the population in which each is."""
    words = [
        f"{g.locant}-{g.group}" + ("" if g.axial_share is None else f" {percent(g.axial_share)}")
        for g in pattern.groups
        if g.axial
    ]
    return ", ".join(words) or "none"


def _gap_words(pattern: Pattern, look: Look) -> str:
    """The gap with its 95 % interval, or why there is none."""
    if pattern.dG_kcal is None or pattern.uncertainty_kcal is None:
        return pattern.bound or "one form"
    start = "at least " if pattern.bound == "at least" else ""
    return f"{start}{look.energy(pattern.dG_kcal)} \N{PLUS-MINUS SIGN} {look.energy(Z95 * pattern.uncertainty_kcal)}"


def remarks(patterns: Sequence[Pattern], tally: Tally, look: Look, *, enantiomers: bool) -> tuple[str, ...]:
    """Sentences under the list."""
    what = "enantiomers apart" if enantiomers else "a pair of enantiomers counts once"
    sentences = [
        f"{len(patterns)} shown of {tally.kept} that fit, out of {tally.enumerated} patterns ({what}). "
        f"Energies in {look.unit}, intervals 95 %; b is up, a is down."
    ]
    if tally.undetermined:
        sentences.append(
            f"{tally.undetermined} patterns hold a contact without a price and pass no numerical condition; "
            "their order is open."
        )
    if len({(p.positions, tuple(g.group for g in p.groups)) for p in patterns}) > 1:
        sentences.append(
            "G rel. is a full comparison between stereoisomers; between other patterns it counts strain only."
        )
    return tuple(sentences)
