"""Assignments from couplings as text, table and TSV."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

from ringstrain.consequences.assignment import Assignment, Candidate
from ringstrain.consequences.observations import Fit
from ringstrain.views.look import Look, constant, kelvin, percent
from ringstrain.views.plain import number, row
from ringstrain.views.rich_tables import new_table
from ringstrain.views.words import atom_numbers

if TYPE_CHECKING:
    from rich.console import RenderableType

#: Odds above this are not worth a figure: errors of the model are not normal that far out [-].
MOST_ODDS = 1e4
#: Odds below this are called equal [-].
EQUAL_ODDS = 1.05


def odds_text(odds: float) -> str:
    """Odds to one."""
    return "over 10000 : 1" if odds > MOST_ODDS else f"{constant(odds)} : 1"


def headline(assignment: Assignment) -> str:
    """The answer in a sentence."""
    best = assignment.candidates[0]
    if assignment.verdict == "none fits":
        return f"None of {len(assignment.candidates)} candidates fits; the nearest is {best.smiles}."
    if assignment.odds is None:
        return f"One candidate only, {best.smiles}; it fits."
    second = assignment.candidates[1].smiles
    if assignment.verdict == "decided":
        return f"{best.smiles} fits best, {odds_text(assignment.odds)} against {second}."
    if assignment.odds < EQUAL_ODDS:
        return f"Not decided: {best.smiles} and {second} fit equally well."
    return f"Not decided: {best.smiles} is ahead of {second} by {odds_text(assignment.odds)} only."


def next_line(assignment: Assignment) -> str:
    """Which further proton to look at."""
    ahead = assignment.next_proton
    if len(assignment.candidates) < 2:
        return ""
    if ahead is None:
        return "No further ring proton would tell the best two apart by its couplings; try a through-space contact."
    first, second = (" and ".join(words) for words in (ahead.first, ahead.second))
    return f"To tell the best two apart look at H{ahead.atom + 1}: {first} in the best, {second} in the second."


def pairing_text(fit: Fit) -> str:
    """Observed splittings with what they were matched with."""
    parts = []
    for pair in fit.pairings:
        if pair.predicted_Hz is None:
            parts.append(f"{pair.observed_Hz:.1f} by none predicted")
        else:
            seen = "not resolved" if pair.observed_Hz is None else f"{pair.observed_Hz:.1f}"
            parts.append(f"{seen} ({pair.partner} {pair.predicted_Hz:.1f})")
    return f"{fit.name} as {fit.label}: {', '.join(parts) if parts else 'no splitting'}"


def assignment_view(assignment: Assignment, look: Look, most: int) -> Iterator[RenderableType]:
    """Everything `ringstrain assign` shows.

    Parameters
    ----------
    assignment
        The answer.
    look
        Width and signs.
    most
        Candidates listed at most; 0 for all.
    """
    text = f"{assignment.structure.text}   {kelvin(assignment.temperature_K)}, {assignment.medium}"
    yield look.text(text, "dim")
    yield look.text(headline(assignment), "bold")
    line = next_line(assignment)
    if line:
        yield look.text(line)
    yield look.text("")
    table = new_table(look)
    table.add_column("", justify="right", no_wrap=True)
    table.add_column("isomer", overflow="fold")
    table.add_column("inverted", overflow="fold")
    table.add_column("likelihood", justify="right", no_wrap=True)
    table.add_column("misfit", justify="right", no_wrap=True)
    shown = assignment.candidates[: most or None]
    for place, candidate in enumerate(shown, 1):
        table.add_row(
            str(place),
            look.text(f"{candidate.smiles}  {candidate.relation}".rstrip()),
            look.text(_inverted(candidate)),
            look.text(percent(candidate.likelihood)),
            look.text(f"{candidate.mean_square**0.5:.1f}"),
        )
    yield table
    if len(shown) < len(assignment.candidates):
        yield look.text(f"... and {len(assignment.candidates) - len(shown)} more, less likely.")
    yield look.text(
        "misfit: rms deviation in standard deviations, 1 for a perfect model. Below: observed (partner, predicted) Hz."
    )
    for place, candidate in enumerate(shown[:2], 1):
        yield look.text("")
        for fit in candidate.fits:
            yield look.text(f"{place}  {pairing_text(fit)}")
    yield look.text("")
    for unranked in assignment.unranked[:5]:
        yield look.text(f"Not ranked: {unranked.smiles}: {unranked.reason}")
    for note in assignment.notes:
        yield look.text(f"Note: {note}")


def _inverted(candidate: Candidate) -> str:
    if candidate.inverted_atoms is None:
        return "-"
    return atom_numbers(candidate.inverted_atoms) or "as input"


_COLUMNS = (
    "input", "temperature_K", "medium", "rank", "smiles", "inverted_atoms", "likelihood", "log_likelihood", "misfit",
    "matches", "verdict", "odds",
)  # fmt: skip


def plain_header() -> str:
    """Column names of :func:`plain_rows`."""
    return row(_COLUMNS)


def plain_rows(assignment: Assignment) -> Iterator[str]:
    """One line for each candidate; atoms count from 1."""
    for place, candidate in enumerate(assignment.candidates, 1):
        inverted = candidate.inverted_atoms
        yield row(
            (
                assignment.structure.text,
                f"{assignment.temperature_K:g}",
                assignment.medium,
                place,
                candidate.smiles,
                None if inverted is None else ",".join(str(a + 1) for a in inverted),
                number(candidate.likelihood, 6),
                number(candidate.log_likelihood, 3),
                number(candidate.mean_square**0.5, 2),
                "; ".join(pairing_text(fit) for fit in candidate.fits),
                assignment.verdict,
                None if assignment.odds is None else f"{assignment.odds:.3g}",
            )
        )
