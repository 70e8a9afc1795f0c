"""What a question about reactivity answers: findings, and the options they are weighed from."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, Literal

from ringstrain.units import Z95

Verdict = Literal["open", "needs the flip", "locked out", "needs a boat"]
Confidence = Literal["quantitative", "order of magnitude", "direction only"]
ReactionClass = Literal[
    "e2",
    "syn-elimination",
    "substitution",
    "solvolysis",
    "epoxide",
    "addition",
    "reduction",
    "enolate",
    "acylation",
    "oxidation",
    "glycol",
    "closure",
    "semipinacol",
    "fragmentation",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One thing a ring can or cannot do from one of its states.

    Attributes
    ----------
    reaction
        Class of reaction; ``class`` in JSON.
    ring_system
        Number of the ring system, from 0.
    state
        Id of the state it starts from; None when no state offers it.
    state_population
        Share of that state; None when no state offers it.
    cost_kcal
        Energy of that state above the lowest one [kcal/mol]; None when no state offers it or nothing prices it.
    cost_uncertainty_kcal
        Standard uncertainty of the cost [kcal/mol].
    verdict
        ``open``, ``needs the flip``, ``needs a boat`` or ``locked out``.
    leaving_atoms, partner_atoms
        Atoms that decide: what leaves (or reacts) and what it needs.
    product_smiles
        The organic product; None when none forms.
    share, share_low, share_high
        Part of all product of this class with its 95 % limits [-]; None where only a direction is known.
    equilibrium_share
        Part the same product would have after equilibration [-]; None where that is not asked or not known.
    relative, relative_low, relative_high
        Rate of this centre relative to its epimer with 95 % limits [-]; None where there is none.
    relative_to
        SMILES of that epimer, else empty.
    pathway
        What happens, in a few words.
    reason
        Why: groups, atoms (counted from 1), torsions, in one sentence.
    confidence
        How far to trust the numbers.
    limits
        What can make it wrong for this molecule.
    cautions
        Usual hazards.
    reagent
        Reagent class the finding is for; empty when there is only one.
    sources
        Source keys of rule and numbers.
    """

    reaction: ReactionClass
    ring_system: int
    state: str | None = None
    state_population: float | None = None
    cost_kcal: float | None = None
    cost_uncertainty_kcal: float | None = None
    verdict: Verdict
    leaving_atoms: tuple[int, ...]
    partner_atoms: tuple[int, ...] = ()
    product_smiles: str | None = None
    share: float | None = None
    share_low: float | None = None
    share_high: float | None = None
    equilibrium_share: float | None = None
    relative: float | None = None
    relative_low: float | None = None
    relative_high: float | None = None
    relative_to: str = ""
    pathway: str
    reason: str
    confidence: Confidence = "direction only"
    limits: tuple[str, ...] = ()
    cautions: tuple[str, ...] = ()
    reagent: str = ""
    sources: tuple[str, ...] = ()

    def with_product(self, smiles: str, equilibrium_share: float | None = None) -> Finding:
        """The finding with its product and what equilibration would make of it."""
        return replace(self, product_smiles=smiles, equilibrium_share=equilibrium_share)

    def as_dict(self) -> dict[str, Any]:
        """The finding as the JSON of a reactivity document shows it."""
        return {
            "class": self.reaction,
            "ring_system": self.ring_system,
            "state": self.state,
            "state_population": self.state_population,
            "cost_kcal": self.cost_kcal,
            "cost_uncertainty_kcal": self.cost_uncertainty_kcal,
            "verdict": self.verdict,
            "leaving_atoms": list(self.leaving_atoms),
            "partner_atoms": list(self.partner_atoms),
            "product_smiles": self.product_smiles,
            "share": self.share,
            "share_low": self.share_low,
            "share_high": self.share_high,
            "equilibrium_share": self.equilibrium_share,
            "relative": self.relative,
            "relative_low": self.relative_low,
            "relative_high": self.relative_high,
            "relative_to": self.relative_to or None,
            "pathway": self.pathway,
            "reason": self.reason,
            "confidence": self.confidence,
            "limits": list(self.limits),
            "cautions": list(self.cautions),
            "reagent": self.reagent,
            "sources": list(self.sources),
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Option:
    """A finding with what it weighs against the other findings of its class.

    Attributes
    ----------
    finding
        The finding, its share not yet known.
    weight
        Population of the state times relative rate constant [-]; None for what has no share.
    sigma_ln
        Standard uncertainty of ln weight [-].
    centres
        Ring atoms whose epimer the rate is compared with; empty when no comparison makes sense.
    relief_ln
        Strain the departing atoms take with them, over RT [-]; it enters rates, not shares.
    relief_sigma
        Standard uncertainty of that [-].
    """

    finding: Finding
    weight: float | None = None
    sigma_ln: float = 0.0
    centres: tuple[int, ...] = ()
    relief_ln: float = 0.0
    relief_sigma: float = 0.0

    @property
    def rate(self) -> float:
        """Weight as it enters a rate [-]."""
        return (self.weight or 0.0) * math.exp(self.relief_ln)


def settle(options: Sequence[Option]) -> tuple[Finding, ...]:
    """Findings with their shares, the largest first.

    Parameters
    ----------
    options
        Findings of one class with their weights.

    Returns
    -------
    tuple of Finding
        Shares sum to 1 over those that have a weight.

    Notes
    -----
    Limits by the delta method on ln share, the weights taken as independent.
    """
    total = math.fsum(o.weight for o in options if o.weight)
    outcome: list[tuple[float, int, Finding]] = []
    for place, option in enumerate(options):
        if option.weight is None or total <= 0.0:
            outcome.append((2.0, place, option.finding))
            continue
        share = option.weight / total
        spread = 0.0
        for other in options:
            if other.weight is not None:
                own = 1.0 if other is option else 0.0
                spread += ((own - other.weight / total) * other.sigma_ln) ** 2
        factor = math.exp(min(Z95 * math.sqrt(spread), 50.0))
        finding = replace(option.finding, share=share, share_low=share / factor, share_high=min(1.0, share * factor))
        outcome.append((1.0 - share, place, finding))
    outcome.sort(key=lambda item: (round(item[0], 9), item[1]))
    return tuple(finding for _, _, finding in outcome)


def rate_index(options: Sequence[Option], centres: tuple[int, ...] | None = None) -> tuple[float, float]:
    """Summed rate of some centres (of all when None) and the standard uncertainty of its logarithm [-]."""
    own = [o for o in options if o.weight and (centres is None or o.centres == centres)]
    total = math.fsum(o.rate for o in own)
    if total <= 0.0:
        return 0.0, 0.0
    return total, math.sqrt(math.fsum((o.rate / total * math.hypot(o.sigma_ln, o.relief_sigma)) ** 2 for o in own))
