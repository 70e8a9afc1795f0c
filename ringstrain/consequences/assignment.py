"""Records of an assignment: candidates, those that could not be ranked, and what to look at next."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Literal

from ringstrain.consequences.observations import Fit, Observation
from ringstrain.results import SCHEMA
from ringstrain.structure.records import Structure

Verdict = Literal["decided", "not decided", "none fits", "one candidate"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidate:
    """One stereoisomer and how it fits.

    Attributes
    ----------
    smiles
        The isomer.
    relation
        Cis and trans in words and the face of each centre.
    inverted_atoms
        Centres to invert from the input; None for a candidate given on its own or when the input left centres open.
    likelihood
        Share of the likelihood among the candidates, no isomer being preferred beforehand [-].
    log_likelihood
        Log likelihood, to compare with the others.
    mean_square
        Mean squared deviation in standard deviations, one for a perfect model [-].
    fits
        How each proton was matched.
    atoms
        For each observed proton the carbon of the candidate it was taken to stand on.
    """

    smiles: str
    relation: str
    inverted_atoms: tuple[int, ...] | None
    likelihood: float
    log_likelihood: float
    mean_square: float
    fits: tuple[Fit, ...]
    atoms: tuple[int, ...]

    def as_dict(self) -> dict[str, Any]:
        """The candidate as the JSON of an assign document shows it."""
        return {
            "smiles": self.smiles,
            "relation": self.relation,
            "inverted_atoms": None if self.inverted_atoms is None else list(self.inverted_atoms),
            "likelihood": self.likelihood,
            "log_likelihood": self.log_likelihood,
            "mean_square": self.mean_square,
            "protons": [
                {
                    "observed": fit.name,
                    "label": fit.label,
                    "atom": atom,
                    "matches": [
                        {"partner": p.partner, "predicted_Hz": p.predicted_Hz, "observed_Hz": p.observed_Hz}
                        for p in fit.pairings
                    ],
                }
                for fit, atom in zip(self.fits, self.atoms, strict=True)
            ],
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Unranked:
    """A candidate without a prediction, and why."""

    smiles: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class NextProton:
    """The further proton that would tell the two best candidates apart.

    Attributes
    ----------
    atom
        Its carbon, from 0 in the input's numbering.
    first, second
        Signals predicted for the best and the second candidate.
    odds
        Odds it promises [-].
    """

    atom: int
    first: tuple[str, ...]
    second: tuple[str, ...]
    odds: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Assignment:
    """Candidates ranked against observed couplings.

    Attributes
    ----------
    structure
        As asked.
    temperature_K, medium
        Conditions of the predictions.
    observations
        What was observed.
    candidates
        Best first.
    unranked
        Candidates without a prediction.
    verdict
        Whether the couplings decide.
    odds
        Likelihood of the best over the second [-]; None for one candidate.
    next_proton
        What to look at next; None when no unobserved ring proton would tell.
    notes
        What the reader should know.
    """

    structure: Structure = field(repr=False)
    temperature_K: float
    medium: str
    observations: tuple[Observation, ...]
    candidates: tuple[Candidate, ...]
    unranked: tuple[Unranked, ...]
    verdict: Verdict
    odds: float | None
    next_proton: NextProton | None
    notes: tuple[str, ...]

    def as_dict(self) -> dict[str, Any]:
        """The assign document, ready for JSON."""
        from ringstrain import __version__

        ahead = self.next_proton
        return {
            "schema": SCHEMA,
            "kind": "assign",
            "version": __version__,
            "input": self.structure.text,
            "smiles": self.structure.smiles,
            "temperature_K": self.temperature_K,
            "medium": self.medium,
            "observed": [
                {
                    "name": o.name,
                    "atom": o.atom,
                    "couplings_Hz": list(o.couplings_Hz),
                    "narrow": o.is_narrow,
                    "width_Hz": o.width_Hz,
                }
                for o in self.observations
            ],
            "verdict": self.verdict,
            "odds": self.odds,
            "candidates": [candidate.as_dict() for candidate in self.candidates],
            "unranked": [{"smiles": u.smiles, "reason": u.reason} for u in self.unranked],
            "next_proton": None
            if ahead is None
            else {"atom": ahead.atom, "first": list(ahead.first), "second": list(ahead.second), "odds": ahead.odds},
            "notes": list(self.notes),
        }
