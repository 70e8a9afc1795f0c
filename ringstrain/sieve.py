"""What a chemist asks of a pattern: who is axial, how firmly, which groups are cis; and in which order to list them."""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from ringstrain.errors import UsageError
from ringstrain.palette import PaletteGroup, find_group
from ringstrain.placing import Scaffold
from ringstrain.screen import Screen
from ringstrain.tables.records import Tables

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Flags = NDArray[np.bool_]

Place = Literal["axial", "equatorial"]
_COMPARISON = re.compile(
    r"(?P<name>.*?)\s*(?P<sign>>=|<=|>|<)\s*(?P<value>[-+]?[0-9.]+(?:[eE][-+]?\d+)?)\s*(?P<percent>%?)\s*"
)
_SIGNS: dict[str, Callable[[Floats, float], Flags]] = {
    ">=": np.greater_equal,
    "<=": np.less_equal,
    ">": np.greater,
    "<": np.less,
}


@dataclass(frozen=True, slots=True)
class Comparison:
    """A name, a sign and a number, such as ``OH>=0.9``; the name alone has no sign."""

    name: str
    sign: str
    value: float

    def holds(self, numbers: Floats) -> Flags:
        """Where the numbers pass; NaN does not."""
        with np.errstate(invalid="ignore"):
            return _SIGNS[self.sign](numbers, self.value)


def parse_comparison(text: str) -> Comparison:
    """``OH>=0.9``, ``>=2``, ``OH >= 90 %`` or a bare name.

    Raises
    ------
    UsageError
        If the number cannot be read or there is nothing.
    """
    found = _COMPARISON.fullmatch(text.strip())
    if found is None:
        if not text.strip() or re.search(r"[<>]", text):
            raise UsageError(f"{text!r} is no condition.", "Write a group, a sign and a number: OH>=0.9.")
        return Comparison(text.strip(), "", 0.0)
    try:
        value = float(found["value"])
    except ValueError:
        raise UsageError(f"{found['value']!r} is no number.", "Write a condition like OH>=0.9 or >=2.") from None
    return Comparison(found["name"].strip(), found["sign"], value / (100.0 if found["percent"] else 1.0))


@dataclass(frozen=True, slots=True, kw_only=True)
class Wish:
    """What is asked of a pattern.

    Attributes
    ----------
    axial, equatorial
        Groups, or shares such as ``OH>=0.9``.  ``axial`` holds when one such group is, ``equatorial`` when all are; a
        bare name asks about the lowest state.
    locked
        Least population of one ring shape [-].
    gap
        Condition on dG [kcal/mol], such as ``>=2``.
    cis, trans
        Pairs of positions or groups, such as ``1,2`` or ``Me,OH``.
    rank_by
        ``stability``, ``bias``, ``axial:GROUP`` or ``none``.
    """

    axial: tuple[str, ...] = ()
    equatorial: tuple[str, ...] = ()
    locked: float | None = None
    gap: str | None = None
    cis: tuple[str, ...] = ()
    trans: tuple[str, ...] = ()
    rank_by: str = "stability"


class Sieve:
    """A wish made ready for the groups of one search.

    Parameters
    ----------
    wish
        What is asked.
    scaffold, palette, tables
        Of the search.

    Raises
    ------
    UsageError
        If a condition makes no sense for these groups or this ring.
    UnknownGroup
        If no table knows a group.
    """

    def __init__(self, wish: Wish, scaffold: Scaffold, palette: tuple[PaletteGroup, ...], tables: Tables) -> None:
        self._scaffold, self._palette, self._tables = scaffold, palette, tables
        if wish.locked is not None and not 0 < wish.locked <= 1:
            raise UsageError(f"A share of {wish.locked} cannot be.", "Give --locked a number up to 1, such as 0.99.")
        self._locked = wish.locked
        self._gap = parse_comparison(wish.gap) if wish.gap is not None else None
        if self._gap is not None and (self._gap.name or not self._gap.sign):
            raise UsageError(f"{wish.gap!r} is no condition on the gap.", "Write a sign and a number: >=2.")
        self._standing = [
            (place, self._checked(text)) for place in ("axial", "equatorial") for text in getattr(wish, place)
        ]
        self._pairs = [self._pair(text, same=True) for text in wish.cis] + [
            self._pair(t, same=False) for t in wish.trans
        ]
        self._rank_by = wish.rank_by
        self._ranked = self._number(wish.rank_by.removeprefix("axial:")) if wish.rank_by.startswith("axial:") else 0
        if not self._ranked and wish.rank_by not in ("stability", "bias", "none"):
            raise UsageError(
                f"Patterns cannot be ranked by {wish.rank_by!r}.", "Use stability, bias, none or axial:GROUP."
            )

    @property
    def is_ranked(self) -> bool:
        """True when the list has an order of its own."""
        return self._rank_by != "none"

    def _number(self, name: str) -> int:
        """Number of a group in the palette."""
        code = find_group(name, self._tables).group.code
        for number, member in enumerate(self._palette, 1):
            if member.group.code == code:
                return number
        known = ", ".join(member.name for member in self._palette)
        raise UsageError(f"{name} is not among the groups that are placed.", f"Name one of {known}.")

    def _checked(self, text: str) -> tuple[int, Comparison]:
        comparison = parse_comparison(text)
        if comparison.sign and not 0 <= comparison.value <= 1:
            raise UsageError(
                f"A share of {comparison.value:g} cannot be.", "Write shares from 0 to 1, or in %: OH>=90%."
            )
        if not comparison.name:
            raise UsageError(f"{text!r} names no group.", "Write a group, a sign and a number: OH>=0.9.")
        return self._number(comparison.name), comparison

    # ---- passing ---------------------------------------------------------------------------------------------

    def passes(self, screen: Screen) -> Flags:
        """Which patterns hold everything that is asked; what is undetermined does not pass a number."""
        kept = np.ones(len(screen.rows), dtype=bool)
        for place, (number, comparison) in self._standing:
            kept &= self._stands(screen, place, number, comparison)
        for pair in self._pairs:
            kept &= self._meets(screen.rows, *pair)
        if self._gap is not None:
            kept &= self._gap.holds(screen.dg_kcal)
        if self._locked is not None:
            with np.errstate(invalid="ignore"):
                kept &= screen.form_share >= self._locked
        return kept

    def _stands(self, screen: Screen, place: str, number: int, comparison: Comparison) -> Flags:
        mine = screen.rows == number
        every = place == "equatorial"
        if not comparison.sign:
            stands = screen.favoured_equatorial if every else screen.favoured_axial
            met: Flags = (~mine | stands).all(axis=1) if every else (mine & stands).any(axis=1)
            both: Flags = np.logical_and(met, mine.any(axis=1))
            return both
        if every:
            shares = np.where(mine, screen.equatorial_share, np.inf).min(axis=1)
        else:
            shares = np.where(mine, screen.axial_share, -np.inf).max(axis=1)
        kept: Flags = np.logical_and(comparison.holds(shares), mine.any(axis=1))
        return kept

    def _pair(self, text: str, *, same: bool) -> tuple[list[tuple[int, int]], int, int]:
        """Pairs of slots that count as cis or trans, and the group numbers wanted on them (0 for any)."""
        parts = [part.strip() for part in text.split(",", 1)]
        mixed = parts[0].isdecimal() is not parts[-1].isdecimal()  # no group is called by a number alone
        if len(parts) != 2 or not all(parts) or mixed:
            raise UsageError(f"{text!r} is no pair.", "Give two positions (1,2) or two groups (Me,OH).")
        slots = self._scaffold.slots
        if all(part.isdecimal() for part in parts):
            first, second = (int(part) for part in parts)
            pairs = [
                (i, j)
                for i, a in enumerate(slots)
                for j, b in enumerate(slots)
                if a.locant == first
                and b.locant == second
                and a.atom != b.atom
                and _on_same_face(a.face, b.face) is same
            ]
            if not pairs:
                raise UsageError(
                    f"Positions {first} and {second} cannot be cis or trans on {self._scaffold.name}.",
                    f"Use two of {', '.join(str(n) for n in sorted({s.locant for s in slots if s.face}))}.",
                )
            images = {(int(p[i]), int(p[j])) for i, j in pairs for p in self._scaffold.permutations}
            return sorted(images), 0, 0
        everything = [
            (i, j)
            for i, a in enumerate(slots)
            for j, b in enumerate(slots)
            if a.atom != b.atom and _on_same_face(a.face, b.face) is same
        ]
        return everything, self._number(parts[0]), self._number(parts[1])

    def _meets(self, rows: NDArray[np.int16], pairs: Sequence[tuple[int, int]], x: int, y: int) -> Flags:
        found = np.zeros(len(rows), dtype=bool)
        first = rows == x if x else rows > 0
        second = rows == y if y else rows > 0
        for i, j in pairs:
            found |= first[:, i] & second[:, j]
        return found

    # ---- ranking ---------------------------------------------------------------------------------------------

    def rank(self, screen: Screen, rt_kcal: float) -> Floats:
        """What the list is sorted by, lowest first; undetermined patterns come last.

        Parameters
        ----------
        screen
            Patterns.
        rt_kcal
            Gas constant times temperature [kcal/mol].
        """
        if self._rank_by == "bias":
            key = -screen.form_share
        elif self._ranked:
            shares = np.where(screen.rows == self._ranked, screen.axial_share, -np.inf)
            key = -shares.max(axis=1)
        else:
            key = screen.energy_kcal - rt_kcal * np.log(screen.placements)
        return np.where(np.isnan(key), np.inf, np.round(key, 9))


def _on_same_face(first: int, second: int) -> bool | None:
    """None when a slot has no face of its own."""
    return None if 0 in (first, second) else first == second
