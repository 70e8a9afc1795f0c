"""Published equilibria answered by a force field, counted exactly as ringstrain's own predictions are."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field

from ringstrain.analysis import Analysis, analyze
from ringstrain.crosscheck.molecule import make_molecule, settled
from ringstrain.crosscheck.records import MethodName
from ringstrain.crosscheck.search import Search, default_count, original, search
from ringstrain.crosscheck.xtb import Xtb
from ringstrain.equilibrium import mixture_energy, weights
from ringstrain.tables import Tables
from ringstrain.units import R_KCAL
from ringstrain.validation.orientation import matching_states, parse_orientation
from ringstrain.validation.rows import MeasuredRow
from ringstrain.validation.score import configuration_weight

#: Conformers of one molecule at most [-].
MOST = 24


@dataclass(frozen=True, slots=True)
class Found:
    """A molecule, its states and what a method found of them."""

    analysis: Analysis
    search: Search


@dataclass
class Scorer:
    """Energies of published equilibria by one method.

    Attributes
    ----------
    method
        Which one.
    tables
        Names of groups and solvents; no price enters.
    """

    method: MethodName
    tables: Tables
    _known: dict[str, Found] = field(default_factory=dict)

    def find(self, smiles: str) -> Found:
        """Minima of a molecule; each is searched once."""
        known = self._known.get(smiles)
        if known is None:
            analysis = analyze(smiles, tables=self.tables)
            molecule = make_molecule(settled(analysis))
            count = min(MOST, default_count(analysis, molecule))
            slow = Xtb(molecule) if self.method == "xtb" else None
            known = self._known[smiles] = Found(analysis, search(analysis, molecule, slow=slow, conformers=count))
        return known

    def energy_kcal(self, row: MeasuredRow) -> float | None:
        """B minus A as the method has it [kcal/mol]; None when it lacks a minimum of either side.

        Parameters
        ----------
        row
            A row that ringstrain scores.

        Raises
        ------
        RingstrainError
            If the structure or the method fails.
        """
        first = self.find(row.smiles_a)
        if row.kind == "chair":
            sides = [self._side(first, form) for form in _chosen(first, row, self.tables)]
            factor = 1.0
        else:
            second = self.find(row.smiles_b)
            sides = [_all_forms(first), _all_forms(second)]
            factor = configuration_weight(first.analysis.ring_systems) / configuration_weight(
                second.analysis.ring_systems
            )
        if not all(sides):
            return None
        a, b = (_together(energies, row) for energies in sides)
        statistics = R_KCAL * row.asked_temperature_K * math.log(factor) if row.with_statistics else 0.0
        return b - a + statistics

    def _side(self, found: Found, wanted: tuple[int, Sequence[str]]) -> list[float]:
        """Energies of the wanted states of one ring system, symmetry copies one each [kcal/mol]."""
        number, ids = wanted
        result = found.analysis.ring_systems[number]
        lowest: dict[str, float] = {}
        for minimum in found.search.minima:
            id = original(result, minimum.forms[number].state)
            lowest.setdefault(id, minimum.energy_kcal)
        energies = [lowest.get(original(result, id)) for id in ids]
        return [energy for energy in energies if energy is not None]


def _chosen(found: Found, row: MeasuredRow, tables: Tables) -> list[tuple[int, Sequence[str]]]:
    """Ring system and states of A and of B."""
    forms = parse_orientation(row.orientation)
    for number, result in enumerate(found.analysis.ring_systems):
        sides = [matching_states(found.analysis.structure, result, form, tables) for form in forms]
        if all(sides):
            return [(number, [state.id for state in side]) for side in sides]
    return [(0, []), (0, [])]


def _all_forms(found: Found) -> list[float]:
    """Lowest energy of every form of a molecule, once for each symmetry copy of its states [kcal/mol]."""
    lowest: dict[tuple[object, ...], float] = {}
    copies: dict[tuple[object, ...], int] = {}
    for minimum in found.search.minima:
        key: list[object] = []
        count = 1
        for result, form in zip(found.analysis.ring_systems, minimum.forms, strict=True):
            id = original(result, form.state)
            key.append(id or form.signature)
            count *= sum((state.equivalent_to or state.id) == id for state in result.states) if id else 1
        lowest.setdefault(tuple(key), minimum.energy_kcal)
        copies[tuple(key)] = count
    return [energy for key, energy in lowest.items() for _ in range(copies[key])]


def _together(energies: Iterable[float], row: MeasuredRow) -> float:
    """Free energy of a mixture of forms, or their mean energy when none was measured [kcal/mol]."""
    values = list(energies)
    if row.with_statistics:
        return mixture_energy(values, row.asked_temperature_K)
    shares = weights(values, row.asked_temperature_K)
    return math.fsum(share * value for share, value in zip(shares, values, strict=True))
