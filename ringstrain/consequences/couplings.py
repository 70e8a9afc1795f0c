"""Vicinal couplings of ring hydrogens in every state, and their averages."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ringstrain.consequences.averages import Ensemble
from ringstrain.consequences.hydrogens import Hydrogen, sites_of
from ringstrain.consequences.karplus import Substituent, choose_set, electronegativities, vicinal_coupling
from ringstrain.contacts import position_of
from ringstrain.geometry import ANTI, Geometry, Site, wrap
from ringstrain.results import State, SystemResult
from ringstrain.ringgraph import atom_kind
from ringstrain.structure.records import Structure
from ringstrain.tables.spectra import SpectralTables

#: Why couplings of N-H and O-H are not predicted; such hydrogens usually do not split a signal.
EXCHANGES = "hydrogen on N, O or S exchanges"


@dataclass(frozen=True, slots=True, kw_only=True)
class Coupling:
    """A vicinal coupling of one hydrogen.

    Attributes
    ----------
    to
        Carbon of the partner.
    label
        Label of the partner; CH3 and the atom number for a methyl group.
    count
        How many alike partners it stands for: 1, or 3 for a methyl group.
    per_state
        3J by state id [Hz]; None where the equation has no number.
    average_Hz, uncertainty_Hz
        Population average and its standard uncertainty [Hz]; None when populations or numbers are missing.
    observable
        False between hydrogens that are alike, whose coupling no spectrum shows.
    doubled
        True when a flat neighbour doubles the error of the equation.
    partner
        Carbon and place of the partner; None for a methyl group.
    """

    to: int
    label: str
    count: int = 1
    per_state: tuple[tuple[str, float | None], ...]
    average_Hz: float | None
    uncertainty_Hz: float | None
    observable: bool = True
    doubled: bool = False
    partner: tuple[int, int] | None = None


@dataclass(frozen=True, slots=True)
class Unpredicted:
    """Hydrogens beside a ring hydrogen whose coupling is not predicted: their atom and why."""

    atom: int
    reason: str


def find_couplings(
    result: SystemResult, hydrogens: tuple[Hydrogen, ...], ensemble: Ensemble, tables: SpectralTables
) -> dict[tuple[int, int], tuple[Coupling, ...]]:
    """The vicinal couplings of every hydrogen of a ring system.

    Parameters
    ----------
    result
        The ring system.
    hydrogens
        Its hydrogens.
    ensemble
        Its states and their shares.
    tables
        NMR tables.

    Returns
    -------
    dict
        Couplings by hydrogen key, largest average first.
    """
    structure = result.states[0].detail.shapes.geometry.structure
    found: dict[tuple[int, int], list[Coupling]] = {h.key: [] for h in hydrogens}
    on: dict[int, list[Hydrogen]] = {}
    for hydrogen in hydrogens:
        on.setdefault(hydrogen.atom, []).append(hydrogen)
    for b in on:
        for c in structure.neighbours[b]:
            if c <= b or c not in on or not _is_plain(result, structure, b, int(c)):
                continue
            doubled = has_flat_neighbour(structure, b, int(c))
            for first in on[b]:
                for second in on[int(c)]:
                    coupling = _between(result, first, second, ensemble, tables, doubled)
                    if coupling is None:
                        continue
                    found[first.key].append(coupling(second))
                    found[second.key].append(coupling(first))
    for hydrogen in hydrogens:
        found[hydrogen.key].extend(_methyls(structure, result, hydrogen, tables))
    return {key: tuple(sorted(items, key=_largest_first)) for key, items in found.items()}


def find_unpredicted(result: SystemResult, hydrogen: Hydrogen) -> tuple[Unpredicted, ...]:
    """Neighbouring hydrogens whose coupling to a ring hydrogen is not predicted."""
    structure = result.states[0].detail.shapes.geometry.structure
    kinds = result.system.kinds
    found = []
    for n in structure.neighbours[hydrogen.atom]:
        record = structure.atoms[n]
        if not record.hydrogens or _is_methyl(structure, int(n)):
            continue
        if record.number != 6:
            found.append(Unpredicted(int(n), EXCHANGES))
        elif n not in result.system.atom_set:
            found.append(Unpredicted(int(n), "side chain may turn"))
        elif kinds[hydrogen.atom] == "sp2" or kinds[n] == "sp2":
            found.append(Unpredicted(int(n), "the equation does not hold at a flat carbon"))
    return tuple(found)


def has_flat_neighbour(structure: Structure, b: int, c: int) -> bool:
    """True when a flat carbon, nitro group or three-membered ring stands beside the fragment H-b-c-H."""
    for carbon, other in ((b, c), (c, b)):
        for n in structure.neighbours[carbon]:
            if n == other:
                continue
            record = structure.atoms[n]
            double = any(structure.bond(n, m).order == 2 for m in structure.neighbours[n])
            if record.number in (6, 7) and (record.aromatic or double or _is_flat_in_ring(structure, carbon, int(n))):
                return True
            if n in structure.neighbours[other]:
                return True
            if any(m != carbon and m in structure.neighbours[carbon] for m in structure.neighbours[n]):
                return True
    return False


def _is_flat_in_ring(structure: Structure, carbon: int, atom: int) -> bool:
    """True for an amide nitrogen and the like that shares a ring with the carbon; one in a side chain does no harm."""
    shared = any(carbon in ring and atom in ring for ring in structure.rings)
    return shared and atom_kind(structure, atom) == "sp2"


def _largest_first(coupling: Coupling) -> tuple[float, str]:
    known = [value for _, value in coupling.per_state if value is not None]
    size = coupling.average_Hz if coupling.average_Hz is not None else max(known, default=0.0)
    return -size, coupling.label


def _is_plain(result: SystemResult, structure: Structure, b: int, c: int) -> bool:
    """True for a single ring bond between two tetrahedral carbons."""
    return (
        result.system.kinds[b] == "sp3"
        and result.system.kinds[c] == "sp3"
        and structure.bond(b, c).order == 1
        and (b, c) in result.states[0].detail.shapes.geometry.ring_bonds
    )


def _is_methyl(structure: Structure, atom: int) -> bool:
    record = structure.atoms[atom]
    return record.number == 6 and record.hydrogens == 3


class _Maker:
    """Makes the two views of one coupling, one for each partner."""

    __slots__ = ("average", "doubled", "observable", "per_state", "uncertainty")

    def __init__(
        self,
        per_state: tuple[tuple[str, float | None], ...],
        average: float | None,
        uncertainty: float | None,
        observable: bool,
        doubled: bool,
    ) -> None:
        self.per_state, self.average, self.uncertainty = per_state, average, uncertainty
        self.observable, self.doubled = observable, doubled

    def __call__(self, partner: Hydrogen) -> Coupling:
        return Coupling(
            to=partner.atom,
            label=partner.label,
            per_state=self.per_state,
            average_Hz=self.average,
            uncertainty_Hz=self.uncertainty,
            observable=self.observable,
            doubled=self.doubled,
            partner=partner.key,
        )


def _between(
    result: SystemResult,
    first: Hydrogen,
    second: Hydrogen,
    ensemble: Ensemble,
    tables: SpectralTables,
    doubled: bool,
) -> _Maker | None:
    values = [state_coupling(state, first.key, second.key, tables) for state in result.states]
    mean = ensemble.average(values)
    error = tables.model["equation error"].value * (tables.model["flat neighbour factor"].value if doubled else 1.0)
    return _Maker(
        tuple(zip(ensemble.ids, values, strict=True)),
        mean.mean if mean else None,
        math.hypot(error, mean.spread) if mean else None,
        first.alike != second.alike,
        doubled,
    )


def state_coupling(
    state: State, first: tuple[int, int], second: tuple[int, int], tables: SpectralTables
) -> float | None:
    """The 3J of two hydrogens on neighbouring ring carbons in one state [Hz].

    Parameters
    ----------
    state
        The state.
    first, second
        Carbon and place of each hydrogen.
    tables
        NMR tables.

    Returns
    -------
    float or None
        None when an element beside them has no tabulated electronegativity.
    """
    shapes = state.detail.shapes
    geometry = shapes.geometry
    places = geometry.ring_bonds[(min(first[0], second[0]), max(first[0], second[0]))]
    ring, bond = min(places, key=lambda place: (shapes.rings[place[0]].shape != "chair", place))
    atoms = geometry.system.rings[ring].atoms
    if atoms[bond] != first[0]:
        first, second = second, first
    here = next(s for s in sites_of(geometry, first) if s.ring == ring)
    there = next(s for s in sites_of(geometry, second) if s.ring == ring)
    nominal = wrap(shapes.torsion(ring, bond) + here.offset_ahead + there.offset_behind)
    is_chair = shapes.rings[ring].shape == "chair"
    phi = nominal
    if is_chair:
        pair = sorted("ax" if position_of(shapes, s) == "axial" else "eq" for s in (here, there))
        phi = math.copysign(tables.model[f"angle {'-'.join(pair)}"].value, nominal)
    around = _around(geometry, here, atoms[(bond + 1) % 6], True) + _around(geometry, there, atoms[bond], False)
    substituents = []
    for atom, carbon, sign in around:
        weights = electronegativities(geometry.structure, carbon, atom, tables)
        if weights is None:
            return None
        turned = abs(phi) if is_chair and abs(phi) > ANTI else sign * phi
        substituents.append(Substituent(*weights, turned))
    return vicinal_coupling(phi, substituents, choose_set(len(substituents), tables))


def _around(geometry: Geometry, site: Site, other: int, ahead: bool) -> list[tuple[int, int, int]]:
    """Substituents of a hydrogen's carbon: atom, carbon, and +1 when clockwise of the hydrogen seen from its carbon."""
    find = geometry.offset_ahead if ahead else geometry.offset_behind
    own = site.offset_ahead if ahead else site.offset_behind
    found = []
    for n in geometry.structure.neighbours[site.ring_atom]:
        if n == other or geometry.structure.atoms[n].number == 1:
            continue
        turn = wrap(own - find(site.ring, site.place, int(n)))
        found.append((int(n), site.ring_atom, 1 if turn > 0 else -1))
    return found


def _methyls(structure: Structure, result: SystemResult, hydrogen: Hydrogen, tables: SpectralTables) -> list[Coupling]:
    """Couplings to methyl groups on the hydrogen's carbon."""
    row = tables.reading["methyl"]
    return [
        Coupling(
            to=int(n),
            label=f"CH3 {n + 1}",
            count=3,
            per_state=tuple((state.id, row.value) for state in result.states),
            average_Hz=row.value,
            uncertainty_Hz=tables.sigma(row),
        )
        for n in structure.neighbours[hydrogen.atom]
        if n not in result.system.atom_set
        and _is_methyl(structure, int(n))
        and result.system.kinds[hydrogen.atom] != "sp2"
    ]
