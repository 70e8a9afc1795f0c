"""Where a number comes from, and how a price remembers it.

A :class:`Price` is a linear form over independent random variables.  Each variable is one row of a table
applied to one kind of group; two identical groups share a variable, two different groups priced by one
estimate do not.  Sums and differences of prices therefore carry their uncertainty by themselves: what is
common to both sides cancels.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

KnownBy = Literal["read", "recalled", "computed", "common practice", "yours"]
#: From best to worst known; a sum is as well known as its worst part.
KNOWN_BY_ORDER: tuple[KnownBy, ...] = ("yours", "read", "recalled", "common practice", "computed")
#: Coefficient and standard uncertainty of each random variable [-, kcal/mol], by table row and group.
Variables = dict[tuple[str, str], tuple[float, float]]
Medium = Literal["gas", "nonpolar", "polar", "protic"]
MEDIA: tuple[Medium, ...] = ("gas", "nonpolar", "polar", "protic")


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """One publication.

    Attributes
    ----------
    key
        Short name used by the tables.
    authors, title, container, year, volume, pages, doi
        The citation; empty where it is not known.
    """

    key: str
    authors: str
    title: str
    container: str
    year: str
    volume: str
    pages: str
    doi: str

    @property
    def citation(self) -> str:
        """The citation in one line."""
        where = " ".join(part for part in (self.container, self.year) if part)
        place = ", ".join(part for part in (where, self.volume, self.pages) if part)
        text = ". ".join(part for part in (self.authors, self.title, place) if part)
        return text + (f", doi {self.doi}" if self.doi else "")


@dataclass(frozen=True, slots=True)
class Term:
    """One random variable of a price: how often it counts and how uncertain it is.

    Attributes
    ----------
    row
        Table row the number comes from.
    group
        The kind of group the row is applied to.
    coefficient
        How often it counts [-].
    sigma
        Standard uncertainty [kcal/mol].
    """

    row: str
    group: str
    coefficient: float
    sigma: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Price:
    """A quoted free energy with everything that tells how far to trust it.

    Attributes
    ----------
    value_kcal
        The price [kcal/mol]; None when the tables have none.
    terms
        The random variables behind it.
    row
        Key of the table row that decides it.
    source
        Source key.
    known_by
        How the number is known.
    estimated
        True when no row was measured for just this case.
    polar
        True when the number depends on the medium.
    bound
        ``"at least"`` when only a lower limit is known, else empty.
    note
        What a reader should know, in a few words.
    """

    value_kcal: float | None
    terms: tuple[Term, ...] = ()
    row: str
    source: str
    known_by: KnownBy
    estimated: bool = False
    polar: bool = False
    bound: str = ""
    note: str = ""

    @property
    def sigma_kcal(self) -> float:
        """Standard uncertainty [kcal/mol]."""
        return combined_sigma(self.terms)


def combined_sigma(terms: Iterable[Term]) -> float:
    """Standard uncertainty of a sum of terms [kcal/mol]: like variables add before they are squared."""
    return sigma_of(gathered([(terms, 1.0)]))


def gathered(parts: Iterable[tuple[Iterable[Term], float]]) -> Variables:
    """Variables of terms, each part counted so many times [-]."""
    table: Variables = {}
    for terms, factor in parts:
        for term in terms:
            key = term.row, term.group
            before = table.get(key)
            if before is None:
                table[key] = (term.coefficient * factor, term.sigma)
            else:
                table[key] = (before[0] + term.coefficient * factor, before[1])
    return table


def sigma_of(variables: Variables) -> float:
    """Standard uncertainty of a sum of variables [kcal/mol]."""
    return math.sqrt(sum([(count * sigma) ** 2 for count, sigma in variables.values()]))


def scaled(terms: Iterable[Term], factor: float) -> tuple[Term, ...]:
    """The same variables counted ``factor`` times [-]."""
    return tuple([Term(t.row, t.group, t.coefficient * factor, t.sigma) for t in terms])


def worst_known(kinds: Iterable[KnownBy]) -> KnownBy:
    """How a sum is known: as its worst part."""
    return max(kinds, key=KNOWN_BY_ORDER.index, default="read")
