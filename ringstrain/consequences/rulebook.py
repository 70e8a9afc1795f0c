"""Numbers of the reaction rules, each with its source: the rows of reactions.csv."""

from __future__ import annotations

import csv
import math
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

from ringstrain.errors import MissingValue, TableError
from ringstrain.tables.reader import tables_folder
from ringstrain.units import Z95

FILE = "reactions.csv"


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """One number of a rule.

    Attributes
    ----------
    id
        Name of the row.
    value, low, high
        The number and its range [in ``unit``]; None where only a direction is known.
    unit
        ``ratio``, ``fraction`` or ``kcal/mol``.
    source
        Source key; empty for a number of our own making, which the note explains.
    known_by
        How the number is known.
    note
        What a reader should know.
    """

    id: str
    value: float | None
    low: float | None
    high: float | None
    unit: str
    source: str
    known_by: str
    note: str

    @property
    def number(self) -> float:
        """The value.

        Raises
        ------
        MissingValue
            If the row knows a direction only.
        """
        if self.value is None:
            raise MissingValue("reaction rule", (self.id,))
        return self.value

    @property
    def sigma_ln(self) -> float:
        """Standard uncertainty of ln value [-]; a factor of three (95 %) where no range is given."""
        if self.low is None or self.high is None or self.low <= 0:
            return math.log(3.0) / Z95
        return math.log(self.high / self.low) / (2.0 * Z95)

    @property
    def sources(self) -> tuple[str, ...]:
        """The source key, or nothing."""
        return (self.source,) if self.source else ()


@lru_cache(maxsize=2)
def _load(path: Path) -> dict[str, Rule]:
    rules = {}
    try:
        with open(path, encoding="utf-8", newline="") as stream:
            for line, row in enumerate(csv.DictReader(stream), start=2):
                numbers = []
                for column in ("value", "low", "high"):
                    try:
                        numbers.append(float(row[column]) if row[column] else None)
                    except ValueError:
                        raise TableError("no number", file=FILE, line=line, column=column) from None
                rules[row["id"]] = Rule(
                    id=row["id"],
                    value=numbers[0],
                    low=numbers[1],
                    high=numbers[2],
                    unit=row["unit"],
                    source=row["source"],
                    known_by=row["known_by"],
                    note=row["note"],
                )
    except FileNotFoundError:
        raise TableError("the file is missing", file=FILE) from None
    return rules


def rule(id: str) -> Rule:
    """A rule by the name of its row.

    Parameters
    ----------
    id
        Name of the row.

    Raises
    ------
    TableError
        If there is none, or the file is faulty.
    """
    found = _load(tables_folder() / FILE).get(id)
    if found is None:
        raise TableError(f"no row is called {id!r}", file=FILE)
    return found
