"""Why a published equilibrium is missed: the rows of explanations.csv."""

from __future__ import annotations

import csv
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path

from ringstrain.errors import TableError
from ringstrain.tables.reader import tables_folder
from ringstrain.validation.score import Score

FILE = "explanations.csv"
#: A miss above this and above its own standard uncertainty needs a reason [kcal/mol].
LARGE_KCAL = 0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Explanation:
    """Why one row is missed.

    Attributes
    ----------
    row
        Its id in equilibria.csv.
    cause
        Kind of reason.
    reason
        A sentence or two.
    """

    row: str
    cause: str
    reason: str

    @property
    def text(self) -> str:
        """Both in one line."""
        return f"Why ({self.cause}): {self.reason}"


def read_explanations(folder: str | Path | None = None) -> dict[str, Explanation]:
    """Every reason by row.

    Parameters
    ----------
    folder
        Folder of tables; that of the package when None.

    Raises
    ------
    TableError
        If the file is missing or lacks a column.
    """
    path = (Path(folder) if folder is not None else tables_folder()) / FILE
    try:
        with open(path, encoding="utf-8", newline="") as stream:
            rows = list(csv.DictReader(stream))
    except FileNotFoundError:
        raise TableError("the file is missing", file=FILE) from None
    try:
        found = [Explanation(row=cells["row"], cause=cells["cause"], reason=cells["reason"]) for cells in rows]
    except KeyError as error:
        raise TableError(f"the column {error} is missing", file=FILE) from None
    return {explanation.row: explanation for explanation in found}


def needs_explanation(score: Score) -> bool:
    """True when a row is missed by more than its standard uncertainty and 0.5 kcal/mol."""
    gap, sigma = score.difference_kcal, score.sigma_kcal
    return gap is not None and sigma is not None and abs(gap) > max(LARGE_KCAL, sigma)


def unexplained(scores: Iterable[Score], explanations: dict[str, Explanation]) -> tuple[str, ...]:
    """Rows that need a reason and have none, in order.

    Parameters
    ----------
    scores
        Scored equilibria.
    explanations
        Reasons by row.
    """
    return tuple(score.row.id for score in scores if needs_explanation(score) and score.row.id not in explanations)
