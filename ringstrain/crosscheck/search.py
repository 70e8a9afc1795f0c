"""Minima of a molecule, and which state of the ledger each of them is."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import Protocol

from rdkit.Chem import rdMolDescriptors

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.crosscheck.fields import Mmff
from ringstrain.crosscheck.molecule import Molecule, Points, embed, keeps_configuration
from ringstrain.crosscheck.rotors import find_rotors
from ringstrain.crosscheck.shapes import Form, read_form

#: Conformers embedded at one go between two looks at the clock [-].
_BATCH = 4
#: Conformers by default: some for each ring form, more for each bond that turns [-].
_FEWEST, _MOST = 16, 80
#: Times a state that no conformer shows is built by force [-].
_BUILDS = 3
#: Two minima of one form closer than this are one [kcal/mol].
SAME_KCAL = 0.02
#: Minima of each form that a slow method gets [-], and how high those of other shapes and of chairs may lie [kcal/mol].
_BEST = 2
_LOW_KCAL = 6.0
_HIGH_KCAL = 40.0
#: Rounds over all side chains at most [-].
_PASSES = 3

Going = Callable[[int, int], bool]


class Method(Protocol):
    """What minimises coordinates."""

    name: str

    def minimise(self, points: Points) -> tuple[float, Points]:
        """Energy [kcal/mol] and coordinates [angstrom] of a minimum."""


@dataclass(frozen=True, slots=True)
class Minimum:
    """One minimum: energy [kcal/mol], coordinates [angstrom], form of each ring system."""

    energy_kcal: float
    points: Points
    forms: tuple[Form, ...]

    @property
    def is_of_chairs(self) -> bool:
        """True when the ledger knows it and every ring is a chair or half-chair."""
        return all(form.state and set(form.shapes) <= {"chair", "half-chair"} for form in self.forms)


@dataclass(frozen=True, slots=True)
class Search:
    """All minima found, lowest first.

    Attributes
    ----------
    minima
        Distinct ones.
    fates
        By ring system and state id: signature of where the state went when it was let go.
    tried, rejected
        Conformers minimised, and embedded ones that lost their configuration [-].
    complete
        False when it was stopped.
    """

    minima: tuple[Minimum, ...]
    fates: dict[tuple[int, str], Form]
    tried: int
    rejected: int
    complete: bool


def default_count(analysis: Analysis, molecule: Molecule) -> int:
    """Conformers worth embedding [-]."""
    forms = sum(sum(state.equivalent_to is None for state in result.states) for result in analysis.ring_systems)
    turning = int(rdMolDescriptors.CalcNumRotatableBonds(molecule.mol))
    return max(_FEWEST, min(_MOST, 4 * forms + 4 * turning))


def search(
    analysis: Analysis,
    molecule: Molecule,
    *,
    slow: Method | None = None,
    conformers: int | None = None,
    seed: int = 1,
    keep_going: Going | None = None,
) -> Search:
    """Minima of a molecule: free conformers, then every state that none of them shows, built by force and let go.

    Parameters
    ----------
    analysis
        The states to look for.
    molecule
        The same structure with hydrogens.
    slow
        A method that minimises the best minima of each form again; MMFF94s alone when None.
    conformers, seed, keep_going
        As in :func:`crosscheck`.
    """
    field = Mmff(molecule)
    total = default_count(analysis, molecule) if conformers is None else max(1, conformers)
    go = keep_going if keep_going is not None else _always
    pool: list[Minimum] = []
    tried = rejected = 0
    complete = True
    for batch in range(-(-total // _BATCH)):
        if not go(batch * _BATCH, total):
            complete = False
            break
        count = min(_BATCH, total - batch * _BATCH)
        rejected += count
        for points in embed(molecule, seed=seed + 7919 * batch, count=count):
            tried, rejected = tried + 1, rejected - 1
            pool.extend(_minimum(analysis, molecule, field, points))
    fates: dict[tuple[int, str], Form] = {}
    for system, state, fresh in _wanted(analysis, pool):
        for minimum in _built(analysis, molecule, field, pool, system, state, fresh=fresh):
            if not go(total, total):
                complete = False
                break
            tried += 1
            fates[(system, state.id)] = minimum.forms[system]
            pool.append(minimum)
    tried += _settle(analysis, molecule, field, pool, lambda: go(total, total))
    minima = _distinct(pool)
    if slow is not None:
        minima = _refined(analysis, molecule, slow, minima, lambda: go(total, total))
    return Search(minima, fates, tried, rejected, complete)


def _always(done: int, total: int) -> bool:
    return True


def _minimum(analysis: Analysis, molecule: Molecule, method: Method, points: Points) -> Iterator[Minimum]:
    """The minimum downhill of some coordinates, unless a configuration got lost on the way."""
    energy, relaxed = method.minimise(points)
    if math.isfinite(energy) and keeps_configuration(molecule, relaxed):
        forms = tuple(read_form(molecule, result, relaxed) for result in analysis.ring_systems)
        yield Minimum(energy, relaxed, forms)


def _wanted(analysis: Analysis, pool: Sequence[Minimum]) -> Iterator[tuple[int, State, bool]]:
    """Every state but symmetry copies, so that the best side chains of one are tried in all.

    True stands beside those that no minimum shows while the other ring systems are at their best.
    """
    best = min(pool, key=lambda m: m.energy_kcal, default=None)
    others = list(_key(analysis, best)) if best is not None else [""] * len(analysis.ring_systems)
    shown = {_key(analysis, minimum) for minimum in pool}
    for number, result in enumerate(analysis.ring_systems):
        for state in result.states:
            wanted = (*others[:number], state.id, *others[number + 1 :])
            if state.equivalent_to is None:
                yield number, state, wanted not in shown


def original(result: SystemResult, id: str) -> str:
    """Id of the state a state is a copy of; its own when it is none."""
    return (result.state(id).equivalent_to or id) if id else ""


def _built(
    analysis: Analysis,
    molecule: Molecule,
    field: Mmff,
    pool: Sequence[Minimum],
    system: int,
    state: State,
    *,
    fresh: bool,
) -> Iterator[Minimum]:
    """Minima downhill of a state that was built by holding its rings, from the best minimum and fresh conformers."""
    best = min(pool, key=lambda m: m.energy_kcal, default=None)
    if not fresh and best is not None and original(analysis.ring_systems[system], best.forms[system].state) == state.id:
        return
    starts = [best.points] if best is not None else []
    if fresh:
        starts.extend(embed(molecule, seed=104729 + 31 * system, count=2 * _BUILDS))
    result = analysis.ring_systems[system]
    rings = [[molecule.places[a] for a in ring] for ring in result.rings]
    wanted = [ring.torsions for ring in state.detail.shapes.rings]
    done = 0
    for start in starts:
        points = field.hold(start, rings, wanted)
        if read_form(molecule, result, points).state != state.id or not keeps_configuration(molecule, points):
            continue
        done += 1
        yield from _minimum(analysis, molecule, field, points)
        if done == _BUILDS:
            return


def _settle(analysis: Analysis, molecule: Molecule, field: Mmff, pool: list[Minimum], going: Callable[[], bool]) -> int:
    """Turn the side chains of the best minimum of each form, one at a time, as long as that leads down.

    What is found joins the pool; the number of minimisations comes back.
    """
    rotors = find_rotors(molecule)
    best: dict[tuple[object, ...], Minimum] = {}
    lowest = min((minimum.energy_kcal for minimum in pool), default=0.0)
    for minimum in sorted(pool, key=lambda m: m.energy_kcal):
        strange = any(not form.state for form in minimum.forms)
        if not strange or minimum.energy_kcal < lowest + _LOW_KCAL:
            best.setdefault(_key(analysis, minimum), minimum)
    tried = 0
    for key, start in best.items():
        current = start
        for _ in range(_PASSES):
            before = current.energy_kcal
            for rotor in rotors:
                for degrees in rotor.turns:
                    if not going():
                        return tried
                    tried += 1
                    for found in _minimum(analysis, molecule, field, rotor.turned(current.points, degrees)):
                        pool.append(found)
                        if found.energy_kcal < current.energy_kcal and _key(analysis, found) == key:
                            current = found
            if current.energy_kcal > before - SAME_KCAL:
                break
    return tried


def _key(analysis: Analysis, minimum: Minimum) -> tuple[object, ...]:
    """What two minima of one form have in common, symmetry copies taken as one."""
    return tuple(
        original(result, form.state) or form.signature
        for result, form in zip(analysis.ring_systems, minimum.forms, strict=True)
    )


def _distinct(pool: Sequence[Minimum]) -> tuple[Minimum, ...]:
    """Minima lowest first, those of one form and energy once."""
    kept: list[Minimum] = []
    for minimum in sorted(pool, key=lambda m: m.energy_kcal):
        signature = [form.signature for form in minimum.forms]
        if not any(
            abs(other.energy_kcal - minimum.energy_kcal) < SAME_KCAL
            and [form.signature for form in other.forms] == signature
            for other in kept
        ):
            kept.append(minimum)
    return tuple(kept)


def _refined(
    analysis: Analysis, molecule: Molecule, slow: Method, minima: Sequence[Minimum], going: Callable[[], bool]
) -> tuple[Minimum, ...]:
    """The best minima of each form, minimised again by a slower method."""
    counts: dict[tuple[object, ...], int] = {}
    found: list[Minimum] = []
    for minimum in minima:
        if minimum.energy_kcal > minima[0].energy_kcal + (_HIGH_KCAL if minimum.is_of_chairs else _LOW_KCAL):
            continue
        key = _key(analysis, minimum)
        counts[key] = counts.get(key, 0) + 1
        if counts[key] <= _BEST and (going() or not found):
            found.extend(_minimum(analysis, molecule, slow, minimum.points))
    return _distinct(found)
