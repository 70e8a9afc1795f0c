"""Records of an answer: states, ring systems, the analysis of a structure."""

from __future__ import annotations

from dataclasses import dataclass, field
from importlib import import_module
from typing import Any

from ringstrain.billing import GroupMap
from ringstrain.contacts import Survey
from ringstrain.equilibrium import Equilibrium
from ringstrain.ledger import Ledger, Line, Regime
from ringstrain.ringgraph import RingSystem
from ringstrain.states import Shapes
from ringstrain.structure.records import Structure
from ringstrain.tables.conditions import Conditions

SCHEMA = "ringstrain/1"


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """One shape of a ring system, priced.

    Attributes
    ----------
    id
        Letter; A is the lowest.
    shapes
        Shape of each ring.
    axial, equatorial
        Exocyclic atoms that are axial or equatorial to one of their rings.
    axial_H
        Ring nitrogens whose hydrogen is axial.
    nitrogen
        Ring nitrogen and where its hydrogen or group points.
    equivalent_to
        Id of the state it is a symmetry copy or mirror image of, or None.
    counts
        Number of contacts of each kind.
    energy_kcal, uncertainty_kcal
        Ledger total and its standard uncertainty [kcal/mol].
    lower_bound
        True when a contact has no price, so that the energy is the known part.
    regime
        Least certain kind of line.
    population, population_low, population_high
        Share within the ring system with its 95 % limits; None when an unpriced contact decides.
    lines
        The ledger.
    sites
        Where each exocyclic atom points, ring by ring.
    form
        Chair name of a pyranose, else empty.
    detail
        Shapes and contacts behind it, for what builds on the state.
    """

    id: str
    shapes: tuple[str, ...]
    axial: tuple[int, ...]
    equatorial: tuple[int, ...]
    axial_H: tuple[int, ...]
    nitrogen: tuple[tuple[int, str], ...]
    equivalent_to: str | None
    counts: tuple[tuple[str, int], ...]
    energy_kcal: float
    uncertainty_kcal: float
    lower_bound: bool
    regime: Regime
    population: float | None
    population_low: float | None
    population_high: float | None
    lines: tuple[Line, ...]
    sites: tuple[tuple[int, int, int, str], ...]
    form: str = ""
    detail: Detail = field(repr=False)

    def as_dict(self) -> dict[str, Any]:
        """The state as the JSON of a chairs document shows it."""
        document: dict[str, Any] = {
            "id": self.id,
            "shapes": list(self.shapes),
            "axial": list(self.axial),
            "equatorial": list(self.equatorial),
            "axial_H": list(self.axial_H),
            "equivalent_to": self.equivalent_to,
            "counts": dict(self.counts),
            "energy_kcal": self.energy_kcal,
            "uncertainty_kcal": self.uncertainty_kcal,
            "lower_bound": self.lower_bound,
            "regime": self.regime,
            "population": self.population,
            "population_low": self.population_low,
            "population_high": self.population_high,
            "lines": [line.as_dict() for line in self.lines],
            "sites": [
                {"atom": atom, "ring_atom": ring_atom, "ring": ring, "position": position}
                for atom, ring_atom, ring, position in self.sites
            ],
            "nitrogen": {str(atom): position for atom, position in self.nitrogen},
        }
        if self.form:
            document["form"] = self.form
        return document


@dataclass(frozen=True, slots=True)
class Detail:
    """What a state was priced from.

    Attributes
    ----------
    shapes
        Torsions of every ring and the geometry they belong to.
    facts
        Positions and contacts.
    ledger
        The priced contacts.
    """

    shapes: Shapes
    facts: Survey
    ledger: Ledger


@dataclass(frozen=True, slots=True, kw_only=True)
class SystemResult:
    """All states of one ring system and the equilibrium between them.

    Attributes
    ----------
    rings
        Atoms of each six-membered ring.
    states
        Lowest first.
    equilibrium
        None when the system is locked.
    locked
        True when only one ring form exists.
    system
        The ring system itself.
    groups
        Group on each exocyclic site, by (ring atom, neighbour).
    """

    rings: tuple[tuple[int, ...], ...]
    states: tuple[State, ...]
    equilibrium: Equilibrium | None
    locked: bool
    system: RingSystem = field(repr=False)
    groups: GroupMap = field(repr=False)

    def state(self, id: str) -> State:
        """The state of that id.

        Raises
        ------
        KeyError
            If there is none.
        """
        for state in self.states:
            if state.id == id:
                return state
        raise KeyError(id)

    def as_dict(self) -> dict[str, Any]:
        """The ring system as the JSON of a chairs document shows it."""
        return {
            "rings": [list(ring) for ring in self.rings],
            "states": [state.as_dict() for state in self.states],
            "equilibrium": self.equilibrium.as_dict() if self.equilibrium else None,
            "locked": self.locked,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Answered:
    """What every answer about one structure carries: the question.

    Attributes
    ----------
    structure
        As read.
    conditions
        Medium and temperature.
    """

    structure: Structure
    conditions: Conditions

    @property
    def input(self) -> str:
        """The input as given."""
        return self.structure.text

    @property
    def smiles(self) -> str:
        """Canonical SMILES of the input."""
        return self.structure.smiles

    @property
    def temperature_K(self) -> float:
        """Temperature [K]."""
        return self.conditions.temperature_K

    @property
    def medium(self) -> str:
        """Medium class, or the solvent when one was named."""
        return self.conditions.solvent or self.conditions.medium

    def head(self, kind: str) -> dict[str, Any]:
        """First members of a JSON document about it."""
        from ringstrain import __version__

        return {
            "schema": SCHEMA,
            "kind": kind,
            "version": __version__,
            "input": self.input,
            "smiles": self.smiles,
            "temperature_K": self.temperature_K,
            "medium": self.medium,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Analysis(Answered):
    """The answer for one structure.

    Attributes
    ----------
    structure
        As read.
    conditions
        Medium and temperature.
    ring_systems
        One result each, ordered by lowest atom; energies of separate systems add.
    notes
        What the reader should know.
    tables_revision
        Which tables priced it.
    """

    ring_systems: tuple[SystemResult, ...]
    notes: tuple[str, ...]
    tables_revision: str

    def as_dict(self) -> dict[str, Any]:
        """The chairs document, ready for JSON."""
        return {
            **self.head("chairs"),
            "ring_systems": [result.as_dict() for result in self.ring_systems],
            "notes": list(self.notes),
        }

    def _repr_html_(self) -> str:
        """The report, for notebooks; views are looked up by name because they build on this record."""
        return str(import_module("ringstrain.views.notebook").analysis_html(self))

    def _repr_svg_(self) -> str:
        return str(import_module("ringstrain.views.notebook").analysis_svg(self))
