"""Ledgers of several states laid side by side: one row for each kind of line, one column for each state."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ringstrain.analysis import State
from ringstrain.ledger import Line
from ringstrain.provenance import combined_sigma, scaled
from ringstrain.units import Z95


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One kind of line across states.

    Attributes
    ----------
    line
        A sample of it.
    counts
        How often each state pays it [-].
    difference_kcal
        Last compared state minus first [kcal/mol]; None when nothing is compared, or when the line has no price
        and the counts differ.
    spread_kcal
        Half-width of the 95 % interval of the difference, or of the first subtotal when nothing is compared
        [kcal/mol].
    remarks
        What each state's line says beside it.
    """

    line: Line
    counts: tuple[float, ...]
    difference_kcal: float | None
    spread_kcal: float
    remarks: tuple[str, ...]


def lay_out(states: Sequence[State], compared: tuple[int, int] | None) -> tuple[Row, ...]:
    """Rows of the grid, in the order in which the lines turn up.

    Parameters
    ----------
    states
        The columns.
    compared
        Columns whose difference explains K, favoured first; None for one column.
    """
    samples: dict[tuple[object, ...], Line] = {}
    counts: dict[tuple[object, ...], list[float]] = {}
    for place, state in enumerate(states):
        for line in state.lines:
            price = None if line.value_kcal is None else round(line.value_kcal, 9)
            key: tuple[object, ...] = (*line.key, price)
            samples.setdefault(key, line)
            counts.setdefault(key, [0.0] * len(states))[place] += line.count
    rows = []
    for place_key, line in samples.items():
        tally = tuple(counts[place_key])
        net = tally[0] if compared is None else tally[compared[1]] - tally[compared[0]]
        known = line.value_kcal
        difference: float | None = None
        if compared is not None:
            difference = 0.0 if net == 0 else None if known is None else net * known
        rows.append(
            Row(
                line=line,
                counts=tally,
                difference_kcal=difference,
                spread_kcal=Z95 * combined_sigma(scaled(line.terms, net)),
                remarks=tuple(part for part in line.note.split("; ") if part),
            )
        )
    return tuple(rows)
