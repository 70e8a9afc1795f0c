"""The itemised bill of one state: every contact charged once, every charge with its source."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

from ringstrain.contacts import Contact
from ringstrain.provenance import KnownBy, Price, Term, Variables, combined_sigma, gathered, scaled, worst_known

Rule = Literal[
    "A-value",
    "ring fusion gauche",
    "vicinal gauche",
    "vicinal eclipsed",
    "syn-axial",
    "peri",
    "geminal",
    "C3/C7 endo",
    "N-H axial",
    "A(1,3) strain",
    "1,4-diaxial dipoles",
    "trans-fused five-ring",
    "steep flat fusion",
    "ring shape",
    "pyranose set",
]
Regime = Literal["additive", "pair terms", "estimated", "polar"]
REGIMES: tuple[Regime, ...] = ("additive", "pair terms", "estimated", "polar")
_PAIR_RULES = frozenset({"vicinal gauche", "vicinal eclipsed", "syn-axial", "peri"})


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """One priced row of a ledger.

    Attributes
    ----------
    rule
        Which rule charged it.
    groups
        Keys of the groups concerned.
    atoms
        Atoms of each occurrence.
    count
        How often it is charged [-].
    price
        Value, random variables, source and remarks of one; the attributes below pass them on.
    covers
        The contacts it pays for.
    """

    rule: Rule
    groups: tuple[str, ...]
    atoms: tuple[tuple[int, ...], ...]
    count: float
    price: Price
    covers: tuple[Contact, ...] = ()

    @property
    def value_kcal(self) -> float | None:
        """Price of one [kcal/mol]; None when no table has it."""
        return self.price.value_kcal

    @property
    def terms(self) -> tuple[Term, ...]:
        """Random variables of one."""
        return self.price.terms

    @property
    def row(self) -> str:
        """Table row that decides the price."""
        return self.price.row

    @property
    def source(self) -> str:
        """Source key."""
        return self.price.source

    @property
    def known_by(self) -> KnownBy:
        """How the price is known."""
        return self.price.known_by

    @property
    def estimated(self) -> bool:
        """True when no row was measured for just this case."""
        return self.price.estimated

    @property
    def polar(self) -> bool:
        """True when two dipoles meet or the medium decides."""
        return self.price.polar

    @property
    def bound(self) -> str:
        """``"at least"`` when only a lower limit is known."""
        return self.price.bound

    @property
    def note(self) -> str:
        """What a reader should know."""
        return self.price.note

    @property
    def of_any_sign(self) -> bool:
        """True when the price, were it known, might be a gain: dipoles may attract, a group may prefer the axis."""
        return self.polar or self.rule == "A-value"

    @property
    def subtotal_kcal(self) -> float | None:
        """Count times price [kcal/mol]."""
        return None if self.value_kcal is None else self.count * self.value_kcal

    @property
    def uncertainty_kcal(self) -> float:
        """Standard uncertainty of the subtotal [kcal/mol]."""
        return combined_sigma(scaled(self.terms, self.count))

    @property
    def key(self) -> tuple[str, tuple[str, ...], str]:
        """What makes two lines of two states the same kind of line."""
        return self.rule, self.groups, self.row

    def as_dict(self) -> dict[str, object]:
        """The line as the JSON of a chairs document shows it."""
        return {
            "rule": self.rule,
            "groups": list(self.groups),
            "atoms": [list(a) for a in self.atoms],
            "count": int(self.count) if self.count == int(self.count) else self.count,
            "value_kcal": self.value_kcal,
            "subtotal_kcal": self.subtotal_kcal,
            "uncertainty_kcal": self.uncertainty_kcal,
            "known_by": self.known_by,
            "source": self.source,
            "row": self.row,
            "estimated": self.estimated,
            "polar": self.polar,
            "bound": self.bound,
            "note": self.note,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Ledger:
    """All lines of one state.

    Attributes
    ----------
    lines
        In the order they were charged.
    total_kcal
        Sum of the known subtotals [kcal/mol].
    variables
        Random variables of the total.
    """

    lines: tuple[Line, ...]
    total_kcal: float
    variables: Variables

    @classmethod
    def of(cls, lines: Iterable[Line]) -> Ledger:
        """The ledger of these lines."""
        kept = tuple(lines)
        known = [line.count * line.price.value_kcal for line in kept if line.price.value_kcal is not None]
        variables = gathered([(line.price.terms, line.count) for line in kept])
        return cls(lines=kept, total_kcal=math.fsum(known), variables=variables)

    @property
    def unknown(self) -> tuple[Line, ...]:
        """Lines without a price."""
        return tuple([line for line in self.lines if line.price.value_kcal is None])

    @property
    def known_by(self) -> KnownBy:
        """How well the total is known."""
        return worst_known(line.known_by for line in self.lines)


def regime_of(lines: Iterable[Line]) -> Regime:
    """The least certain kind of line among these."""
    worst = 0
    for line in lines:
        price = line.price
        if price.polar and not price.row.startswith("avalues/"):
            return "polar"
        if price.estimated:
            worst = 2
        elif not worst and line.rule in _PAIR_RULES:
            worst = 1
    return REGIMES[worst]
