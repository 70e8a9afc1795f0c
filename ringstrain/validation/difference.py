"""Two ledgers subtracted line by line."""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.ledger import Ledger


@dataclass(frozen=True, slots=True, kw_only=True)
class DifferenceLine:
    """One line that separates A from B.

    Attributes
    ----------
    rule, groups, row
        As in the ledger.
    count
        Occurrences in B less those in A [-].
    value_kcal
        Price of one [kcal/mol]; None when no table has it.
    """

    rule: str
    groups: tuple[str, ...]
    row: str
    count: float
    value_kcal: float | None

    @property
    def text(self) -> str:
        """The line in a few characters."""
        price = "?" if self.value_kcal is None else f"{self.value_kcal:.2f}"
        return f"{self.count:+g} {self.rule} {'/'.join(self.groups)} {price}"


def difference_lines(a: Ledger, b: Ledger) -> tuple[DifferenceLine, ...]:
    """Lines of B less those of A, the largest first.

    Parameters
    ----------
    a, b
        The two ledgers.

    Returns
    -------
    tuple of DifferenceLine
        Lines whose counts are equal are left out.
    """
    counts: dict[tuple[str, tuple[str, ...], str, float | None], float] = {}
    for sign, ledger in ((-1.0, a), (1.0, b)):
        for line in ledger.lines:
            value = None if line.value_kcal is None else round(line.value_kcal, 9)
            key = (line.rule, line.groups, line.row, value)
            counts[key] = counts.get(key, 0.0) + sign * line.count
    found = [
        DifferenceLine(rule=rule, groups=groups, row=row, count=count, value_kcal=value)
        for (rule, groups, row, value), count in counts.items()
        if abs(count) > 1e-9
    ]
    return tuple(sorted(found, key=lambda line: (-abs(line.count * (line.value_kcal or 0.0)), line.text)))
