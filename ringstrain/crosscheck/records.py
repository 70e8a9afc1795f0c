"""What a cross-check found."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any, Literal

from ringstrain.results import Analysis
from ringstrain.units import Z95

MethodName = Literal["mmff", "xtb"]


@dataclass(frozen=True, slots=True, kw_only=True)
class StateCheck:
    """One state of the ledger beside what the method says of it.

    Attributes
    ----------
    id, shapes, equivalent_to
        As in the ledger.
    minima
        Distinct minima found for the state or a symmetry copy of it [-].
    ledger_kcal, ledger_uncertainty_kcal
        Free energy above the favoured state and its standard uncertainty [kcal/mol]; None when an unpriced contact
        decides.
    method_kcal, method_uncertainty_kcal
        Energy of the lowest minimum above that of the favoured state [kcal/mol], None when either has no minimum, and
        how far the method is off on published equilibria, one standard uncertainty; None when nobody measured that.
    fate
        Where the state went when it was built and let go; empty when it is a minimum or could not be built.
    """

    id: str
    shapes: tuple[str, ...]
    equivalent_to: str | None
    minima: int
    ledger_kcal: float | None
    ledger_uncertainty_kcal: float | None
    method_kcal: float | None
    method_uncertainty_kcal: float | None
    fate: str = ""

    @property
    def difference_kcal(self) -> float | None:
        """Method less ledger [kcal/mol]; None when either has no value."""
        if self.ledger_kcal is None or self.method_kcal is None:
            return None
        return self.method_kcal - self.ledger_kcal

    @property
    def agrees(self) -> bool | None:
        """True when the two differ by no more than their joint 95 % uncertainty; None when that is not known."""
        if self.difference_kcal is None or self.ledger_uncertainty_kcal is None or self.method_uncertainty_kcal is None:
            return None
        joint = math.hypot(self.ledger_uncertainty_kcal, self.method_uncertainty_kcal)
        return abs(self.difference_kcal) <= Z95 * joint + 1e-9

    def as_dict(self) -> dict[str, Any]:
        """The state as the JSON of a crosscheck document shows it."""
        document: dict[str, Any] = {name: getattr(self, name) for name in self.__slots__}
        document["shapes"] = list(self.shapes)
        return {**document, "difference_kcal": self.difference_kcal, "agrees": self.agrees}


@dataclass(frozen=True, slots=True, kw_only=True)
class Stranger:
    """A form the method found and the ledger did not consider.

    Attributes
    ----------
    shapes
        Shape of each ring.
    torsions
        Ring torsions of its lowest minimum, ring by ring [degree].
    minima
        Distinct minima [-].
    method_kcal
        Energy above the favoured state [kcal/mol]; None when that has no minimum.
    """

    shapes: tuple[str, ...]
    torsions: tuple[tuple[float, ...], ...]
    minima: int
    method_kcal: float | None

    def as_dict(self) -> dict[str, Any]:
        """The form as the JSON of a crosscheck document shows it."""
        return {
            "shapes": list(self.shapes),
            "torsions": [list(ring) for ring in self.torsions],
            "minima": self.minima,
            "method_kcal": self.method_kcal,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class SystemCheck:
    """All states of one ring system, and forms beyond them, lowest first.

    Attributes
    ----------
    states
        In the order of the ledger.
    strangers
        Forms the ledger did not consider.
    polar
        True when polar contacts or bonds to heteroatoms tell the states apart.
    warnings
        What does not fit, one sentence each.
    """

    states: tuple[StateCheck, ...]
    strangers: tuple[Stranger, ...]
    polar: bool
    warnings: tuple[str, ...]

    def as_dict(self) -> dict[str, Any]:
        """The ring system as the JSON of a crosscheck document shows it."""
        return {
            "states": [state.as_dict() for state in self.states],
            "strangers": [stranger.as_dict() for stranger in self.strangers],
            "polar": self.polar,
            "warnings": list(self.warnings),
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class CrossCheck:
    """The second opinion on one structure.

    Attributes
    ----------
    analysis
        The first one.
    method, method_name
        ``"mmff"`` or ``"xtb"``, and what it is called in print.
    conformers
        Conformers minimised [-].
    rejected
        Of the conformers embedded, those that lost the configuration of the structure [-].
    complete
        False when time ran out before all were tried.
    systems
        One result per ring system, in the order of the analysis.
    notes
        What the reader should know about the method.
    """

    analysis: Analysis = field(repr=False)
    method: MethodName
    method_name: str
    conformers: int
    rejected: int
    complete: bool
    systems: tuple[SystemCheck, ...]
    notes: tuple[str, ...]

    def as_dict(self) -> dict[str, Any]:
        """The crosscheck document, ready for JSON."""
        return {
            **self.analysis.head("crosscheck"),
            "method": self.method,
            "method_name": self.method_name,
            "conformers": self.conformers,
            "rejected": self.rejected,
            "complete": self.complete,
            "ring_systems": [
                {"rings": [list(ring) for ring in result.rings], **system.as_dict()}
                for result, system in zip(self.analysis.ring_systems, self.systems, strict=True)
            ],
            "notes": [*self.analysis.notes, *self.notes],
        }
