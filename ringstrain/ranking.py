"""Records of a ranking: isomers, and those that cannot exist."""

from __future__ import annotations

from dataclasses import dataclass, field
from importlib import import_module
from typing import Any, Literal

from ringstrain.results import Answered
from ringstrain.structure.records import Structure

SymmetryWord = Literal["meso", "racemic", "achiral", "single enantiomer"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Isomer:
    """One stereoisomer, or an enantiomer pair.

    Attributes
    ----------
    smiles
        One configuration of it, the nearest to the input.
    inverted_atoms
        Centres to invert from the input; None when the input left a chosen centre open.
    symmetry
        ``meso``, ``racemic``, ``achiral`` or ``single enantiomer``.
    dG_kcal
        Free energy above the best isomer, statistics included [kcal/mol].
    statistics_kcal
        The part of dG that counting makes [kcal/mol].
    uncertainty_kcal
        One standard uncertainty of dG [kcal/mol].
    share, share_low, share_high
        Share at equilibrium with its 95 % limits; None when an unpriced contact decides.
    favoured_axial
        Axial exocyclic atoms of its favoured state.
    shapes
        Shape of each ring in its favoured state.
    lower_bound
        True when a contact of the favoured state has no price.
    configurations
        How many labelled configurations it stands for.
    structure
        The molecule itself.
    variables
        Row, group, coefficient and standard uncertainty of each random variable behind dG.
    """

    smiles: str
    inverted_atoms: tuple[int, ...] | None
    symmetry: SymmetryWord
    dG_kcal: float
    statistics_kcal: float
    uncertainty_kcal: float
    share: float | None
    share_low: float | None
    share_high: float | None
    favoured_axial: tuple[int, ...]
    shapes: tuple[str, ...]
    lower_bound: bool
    configurations: int
    structure: Structure = field(repr=False)
    variables: tuple[tuple[str, str, float, float], ...] = field(repr=False, default=())

    def as_dict(self) -> dict[str, Any]:
        """The isomer as the JSON of an isomers document shows it."""
        return {
            "smiles": self.smiles,
            "inverted_atoms": None if self.inverted_atoms is None else list(self.inverted_atoms),
            "symmetry": self.symmetry,
            "dG_kcal": self.dG_kcal,
            "statistics_kcal": self.statistics_kcal,
            "uncertainty_kcal": self.uncertainty_kcal,
            "share": self.share,
            "share_low": self.share_low,
            "share_high": self.share_high,
            "favoured_axial": list(self.favoured_axial),
            "shapes": list(self.shapes),
            "lower_bound": self.lower_bound,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Impossible:
    """A stereoisomer whose rings do not close in any shape the model has."""

    smiles: str
    inverted_atoms: tuple[int, ...] | None
    reason: str

    def as_dict(self) -> dict[str, Any]:
        """The isomer as the JSON of an isomers document shows it."""
        inverted = None if self.inverted_atoms is None else list(self.inverted_atoms)
        return {"smiles": self.smiles, "inverted_atoms": inverted, "reason": self.reason}


@dataclass(frozen=True, slots=True, kw_only=True)
class Ranking(Answered):
    """All stereoisomers over the free centres, most stable first.

    Attributes
    ----------
    structure, conditions
        The question.
    isomers
        Most stable first.
    impossible
        Those whose rings cannot close.
    free_atoms
        Centres that were varied.
    input_rank
        Rank of the input from 1; None when the input left a chosen centre open.
    notes
        What the reader should know.
    """

    isomers: tuple[Isomer, ...]
    impossible: tuple[Impossible, ...]
    free_atoms: tuple[int, ...]
    input_rank: int | None
    notes: tuple[str, ...]

    def as_dict(self) -> dict[str, Any]:
        """The isomers document, ready for JSON."""
        return {
            **self.head("isomers"),
            "free_atoms": list(self.free_atoms),
            "isomers": [isomer.as_dict() for isomer in self.isomers],
            "impossible": [isomer.as_dict() for isomer in self.impossible],
            "input_rank": self.input_rank,
            "notes": list(self.notes),
        }

    def _repr_html_(self) -> str:
        return str(import_module("ringstrain.views.notebook").ranking_html(self))

    def _repr_svg_(self) -> str:
        return str(import_module("ringstrain.views.notebook").ranking_svg(self))
