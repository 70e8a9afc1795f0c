"""What is known of many patterns at once, and of one."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Flags = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Screen:
    """What is known of a block of patterns; all arrays have one row for each.

    Attributes
    ----------
    rows
        Group numbers by slot.
    energy_kcal
        Free energy of all states together [kcal/mol]; NaN when an unpriced contact decides.
    dg_kcal
        Favoured ring form against the next [kcal/mol]; NaN when undetermined or when there is one form only.
    form_share
        Population of the commonest ring shape [-].
    axial_share, equatorial_share
        Population in which the group of each slot is axial or equatorial, ``(patterns, slots)`` [-].
    favoured_axial, favoured_equatorial
        The same for the lowest state alone.
    placements
        Labelled placements the pattern stands for [-].
    """

    rows: NDArray[np.int16]
    energy_kcal: Floats
    dg_kcal: Floats
    form_share: Floats
    axial_share: Floats
    equatorial_share: Floats
    favoured_axial: Flags
    favoured_equatorial: Flags
    placements: NDArray[np.int64]

    def take(self, chosen: NDArray[np.intp] | Flags) -> Screen:
        """Some of the patterns."""
        return Screen(**{name: getattr(self, name)[chosen] for name in self.__slots__})

    def put(self, chosen: NDArray[np.intp], part: Screen) -> None:
        """Write some of the patterns back."""
        for name in self.__slots__:
            getattr(self, name)[chosen] = getattr(part, name)

    @classmethod
    def join(cls, parts: list[Screen]) -> Screen:
        """Blocks one after the other."""
        return cls(**{name: np.concatenate([getattr(part, name) for part in parts]) for name in cls.__slots__})


@dataclass(frozen=True, slots=True, kw_only=True)
class Weighed:
    """One pattern weighed by a full analysis.

    Attributes
    ----------
    energy_kcal
        Free energy of all states [kcal/mol]; None when an unpriced contact decides.
    form_share
        Population of the commonest ring shape [-].
    axial_share, equatorial_share
        By slot [-].
    axial, equatorial
        Slots of the lowest state.
    """

    energy_kcal: float | None
    form_share: float | None
    axial_share: dict[int, float]
    equatorial_share: dict[int, float]
    axial: frozenset[int]
    equatorial: frozenset[int]
