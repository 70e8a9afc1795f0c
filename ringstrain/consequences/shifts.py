"""13C shifts of ring carbons from additive increments, per state and averaged, and the gamma-gauche effect alone.

Increments are known for substituted cyclohexanes only.  Elsewhere the effect of axial groups on the carbons gamma
to them is given by itself, as the shift that changes when the ring flips.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from ringstrain.consequences.averages import Ensemble
from ringstrain.provenance import KNOWN_BY_ORDER, worst_known
from ringstrain.results import State, SystemResult
from ringstrain.ringnames import name_ring
from ringstrain.tables.spectra import SpectralTables, SpectralValue

_SHORT = {"axial": "ax", "equatorial": "eq"}
_DISTANCES = ("alpha", "beta", "gamma", "delta")


@dataclass(frozen=True, slots=True, kw_only=True)
class CarbonShift:
    """The 13C shift of a carbon.

    Attributes
    ----------
    atom
        The carbon.
    per_state
        Estimate by state id [ppm]; None where an increment is missing.
    average_ppm, uncertainty_ppm
        Population average and its standard uncertainty [ppm]; None when something is missing.
    gamma_per_state
        Gamma-gauche shift by axial groups, by state id [ppm].
    gamma_average_ppm, gamma_uncertainty_ppm
        Its population average and standard uncertainty [ppm].
    missing
        Groups without increments.
    sources
        Source keys of the numbers used.
    known_by
        How the worst known of them is known.
    """

    atom: int
    per_state: tuple[tuple[str, float | None], ...]
    average_ppm: float | None
    uncertainty_ppm: float | None
    gamma_per_state: tuple[tuple[str, float], ...]
    gamma_average_ppm: float | None
    gamma_uncertainty_ppm: float | None
    missing: tuple[str, ...]
    sources: tuple[str, ...]
    known_by: str


@dataclass(frozen=True, slots=True)
class _Standing:
    """A group on a ring place in a state: its key, class, the atom it hangs by and its position."""

    key: str
    kind: str
    atom: int
    position: str


@dataclass(slots=True)
class _Sum:
    """A shift being added up: value, squared error, whether it is complete."""

    value: float
    variance: float
    complete: bool = True

    def add(self, row: SpectralValue | None, tables: SpectralTables, share: float = 1.0) -> None:
        if row is None:
            self.complete = False
            return
        self.value += share * row.value
        self.variance += (share * tables.sigma(row)) ** 2


def find_shifts(result: SystemResult, ensemble: Ensemble, tables: SpectralTables) -> tuple[CarbonShift, ...]:
    """Shifts of the ring carbons of a system, and of isolated methyl groups on it.

    Parameters
    ----------
    result
        The ring system.
    ensemble
        Its states and their shares.
    tables
        NMR tables.

    Returns
    -------
    tuple of CarbonShift
        In atom order; absolute shifts for lone cyclohexane rings without flat atoms only.
    """
    structure = result.states[0].detail.shapes.geometry.structure
    lone = len(result.rings) == 1 and name_ring(structure, result.system, 0).is_carbocycle
    lone = lone and not result.system.companions and not result.system.large
    found = []
    for atom in result.system.atoms:
        if structure.atoms[atom].number != 6 or result.system.kinds[atom] == "sp2":
            continue
        sums = [_ring_carbon(result, state, atom, tables) if lone else None for state in result.states]
        gammas = [_gamma(result, state, atom, tables) for state in result.states]
        found.append(_make(atom, sums, gammas, ensemble, result, tables))
    if lone:
        found.extend(_methyl_shifts(result, ensemble, tables))
    return tuple(sorted(found, key=lambda shift: shift.atom))


def _make(
    atom: int,
    sums: Sequence[_Sum | None],
    gammas: Sequence[_Sum],
    ensemble: Ensemble,
    result: SystemResult,
    tables: SpectralTables,
) -> CarbonShift:
    values = [s.value if s is not None and s.complete else None for s in sums]
    errors = [math.sqrt(s.variance) if s is not None else 0.0 for s in sums]
    mean = ensemble.average(values)
    error = ensemble.average(errors)
    gamma = ensemble.average([g.value for g in gammas])
    gamma_error = ensemble.average([math.sqrt(g.variance) for g in gammas])
    lone = any(s is not None for s in sums)
    groups = {s.key for state in result.states for _, s in _standings(result, state, 0)} if lone else set()
    rows = _rows(groups, tables)
    missing = sorted(key for key in groups if tables.increment(key, "alpha eq") is None)
    return CarbonShift(
        atom=atom,
        per_state=tuple(zip(ensemble.ids, values, strict=True)),
        average_ppm=mean.mean if mean else None,
        uncertainty_ppm=math.hypot(error.mean, mean.spread) if mean and error else None,
        gamma_per_state=tuple((id_, g.value) for id_, g in zip(ensemble.ids, gammas, strict=True)),
        gamma_average_ppm=gamma.mean if gamma else None,
        gamma_uncertainty_ppm=math.hypot(gamma_error.mean, gamma.spread) if gamma and gamma_error else None,
        missing=tuple(missing),
        sources=_sources(rows),
        known_by=_known(rows),
    )


def _rows(groups: set[str], tables: SpectralTables) -> tuple[SpectralValue, ...]:
    """The rows that stand for what was used: the parent's and one of each group."""
    own = (tables.increment(group, "alpha eq") for group in sorted(groups))
    return (tables.general("base"), *(row for row in own if row is not None))


def _sources(rows: Sequence[SpectralValue]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(row.source for row in rows if row.source))


def _known(rows: Sequence[SpectralValue]) -> str:
    """How the worst known row is known."""
    return worst_known(word for word in KNOWN_BY_ORDER if any(row.known_by == word for row in rows))


def _standings(result: SystemResult, state: State, ring: int) -> list[tuple[int, _Standing]]:
    """Groups of a ring with the place they stand on; neighbouring rings of the system count as groups."""
    places = result.rings[ring]
    found = []
    for atom, ring_atom, number, position in state.sites:
        if number == ring:
            group = result.groups.get((ring_atom, atom))
            if group is not None and group.kind != "hydrogen" and group.key not in ("deuterio", "tritio"):
                found.append((places.index(ring_atom), _Standing(group.key, group.kind, atom, position)))
    return found


def _ring_carbon(result: SystemResult, state: State, atom: int, tables: SpectralTables) -> _Sum | None:
    """The shift of a carbon of a lone cyclohexane ring in one state."""
    if state.shapes != ("chair",):
        return None
    place = result.rings[0].index(atom)
    base = tables.general("base")
    total = _Sum(base.value, tables.sigma(base) ** 2)
    by_place: dict[int, list[_Standing]] = {}
    for where, standing in _standings(result, state, 0):
        by_place.setdefault(where, []).append(standing)
    for where, standings in by_place.items():
        distance = _DISTANCES[min((where - place) % 6, (place - where) % 6)]
        for standing in standings:
            total.add(tables.increment(standing.key, f"{distance} {_SHORT[standing.position]}"), tables)
        if len(standings) == 2 and distance != "delta":
            _correct(total, standings, f"geminal {distance}", tables)
    for own in by_place.get(place, ()):
        for step in (1, 5):
            for other in by_place.get((place + step) % 6, ()):
                _correct(total, [own, other], f"vicinal alpha-{own.position[0]} beta-{other.position[0]}", tables)
    return total


def _correct(total: _Sum, pair: Sequence[_Standing], place: str, tables: SpectralTables) -> None:
    """The correction of a close pair; where it has none the error grows instead."""
    key = pair[0].key
    row = tables.increment(key, place) if pair[0].key == pair[1].key else None
    if row is not None:
        total.add(row, tables)
    else:
        total.variance += tables.general("missing correction").value ** 2


def _gamma(result: SystemResult, state: State, atom: int, tables: SpectralTables) -> _Sum:
    """Gamma-gauche shift of a ring carbon by groups axial two carbons away, in any ring of the carbon."""
    total = _Sum(0.0, 0.0)
    seen: set[int] = set()
    for ring in result.system.rings_of[atom]:
        place = result.rings[ring].index(atom)
        for where, standing in _standings(result, state, ring):
            if (where - place) % 6 not in (2, 4) or standing.position != "axial" or standing.atom in seen:
                continue
            seen.add(standing.atom)
            axial, equatorial = (tables.increment(standing.key, f"gamma {p}") for p in ("ax", "eq"))
            if axial is not None and equatorial is not None:
                total.add(axial, tables)
                total.add(equatorial, tables, -1.0)
                continue
            carbon = state.detail.shapes.geometry.structure.atoms[standing.atom].number == 6
            total.add(tables.general("gamma-gauche carbon" if carbon else "gamma-gauche hetero"), tables)
    return total


def _methyl_shifts(result: SystemResult, ensemble: Ensemble, tables: SpectralTables) -> list[CarbonShift]:
    """Shifts of methyl carbons that have no neighbour on their own or the next ring atoms."""
    reference = _standings(result, result.states[0], 0)
    found = []
    for place, standing in reference:
        near = [other for other, s in reference if s.atom != standing.atom and (other - place) % 6 in (0, 1, 5)]
        if standing.key != "methyl" or near:
            continue
        sums: list[_Sum | None] = []
        for state in result.states:
            position = next(s.position for _, s in _standings(result, state, 0) if s.atom == standing.atom)
            row = tables.increment("methyl", f"own {_SHORT.get(position, position)}")
            total = _Sum(0.0, 0.0)
            total.add(row, tables)
            sums.append(total)
        nothing = [_Sum(0.0, 0.0) for _ in result.states]
        shift = _make(standing.atom, sums, nothing, ensemble, result, tables)
        rows = [row for side in ("eq", "ax") if (row := tables.increment("methyl", f"own {side}")) is not None]
        found.append(replace(shift, missing=(), sources=_sources(rows), known_by=_known(rows)))
    return found
