"""Records of a pattern and the groups on it."""

from __future__ import annotations

from dataclasses import dataclass
from importlib import import_module
from typing import Any

from ringstrain.results import SCHEMA


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedGroup:
    """One group of a pattern.

    Attributes
    ----------
    locant
        Position on the ring, from 1.
    face
        ``"up"``, ``"down"``, or empty on a ring nitrogen.
    group
        The group as it was named.
    atom
        Its first atom in the SMILES-independent numbering of the pattern's structure.
    axial_share
        Population in which it is axial [-]; None when undetermined.
    axial
        True when it is axial in the lowest state.
    """

    locant: int
    face: str
    group: str
    atom: int
    axial_share: float | None
    axial: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Pattern:
    """One way to place the groups.

    Attributes
    ----------
    rank
        Place in the list, from 1.
    ring, temperature_K, medium
        What was asked about.
    pattern
        Positions, faces and groups: ``"1b-tBu 4a-Me"``.
    smiles
        Canonical SMILES; one of the two enantiomers when they are merged.
    groups
        Where each group stands.
    placements
        Labelled placements the pattern stands for [-].
    energy_kcal
        Ledger free energy of all its states and placements [kcal/mol]; differences count between stereoisomers.  None
        when an unpriced contact decides.
    dG_kcal, uncertainty_kcal, K, K_low, K_high, bound
        As in the equilibrium of an analysis; None when undetermined or when there is one ring form only.
    population
        Share of the commonest ring shape [-].
    """

    rank: int
    ring: str
    temperature_K: float
    medium: str
    pattern: str
    smiles: str
    groups: tuple[PlacedGroup, ...]
    placements: int
    energy_kcal: float | None
    dG_kcal: float | None
    uncertainty_kcal: float | None
    K: float | None
    K_low: float | None
    K_high: float | None
    bound: str
    population: float | None

    @property
    def positions(self) -> tuple[int, ...]:
        """Locants in order, a locant twice for a geminal pair."""
        return tuple(sorted(group.locant for group in self.groups))

    def as_dict(self) -> dict[str, Any]:
        """The pattern as its JSON line shows it."""
        from ringstrain import __version__

        own = {name: getattr(self, name) for name in self.__slots__ if name != "groups"}
        groups = [
            {name: getattr(g, name) for name in ("locant", "face", "group", "axial", "axial_share")}
            for g in self.groups
        ]
        return {"schema": SCHEMA, "kind": "pattern", "version": __version__, **own, "groups": groups}

    def _repr_html_(self) -> str:
        return str(import_module("ringstrain.views.notebook").pattern_html(self))

    def _repr_svg_(self) -> str:
        return str(import_module("ringstrain.views.notebook").pattern_svg(self))
