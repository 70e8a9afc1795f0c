"""Diastereomers ranked: which stereoisomer of a skeleton is the most stable, and what the mixture would be.

All configurations of the free centres are enumerated on labelled atoms, each with all its states, and each counts
one; compounds and enantiomer pairs are put together afterwards.  Symmetry numbers, meso forms and racemic mixing
come out of that count by themselves.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import product

from ringstrain.analysis import group_map, open_side_centres
from ringstrain.billing import axial_sites
from ringstrain.closing import close_chairs
from ringstrain.configurations import (
    Centres,
    Compound,
    Signs,
    all_signs,
    find_centres,
    sort_compounds,
    stereogenic,
    with_configuration,
)
from ringstrain.epimers import invertible_centres
from ringstrain.equilibrium import Variables, blended, difference_sigma, mixture_energy, variables_of, weights
from ringstrain.errors import OutOfScope, UsageError
from ringstrain.ledger import Ledger, regime_of
from ringstrain.ranking import Impossible, Isomer, Ranking, SymmetryWord
from ringstrain.ringgraph import RingSystem, find_ring_systems
from ringstrain.shaping import find_states
from ringstrain.stereo import Resolved
from ringstrain.structure.read import read
from ringstrain.structure.records import Structure
from ringstrain.symmetry import Groups
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.conditions import make_conditions
from ringstrain.tables.prices import PriceBook, price_book
from ringstrain.units import R_KCAL, ROOM_TEMPERATURE_K, Z95

__all__ = ["Impossible", "Isomer", "Ranking", "rank_isomers"]
#: More free centres than this are refused.
MAX_FREE = 12


@dataclass(frozen=True, slots=True)
class _Skeleton:
    """A ring system with its centres and the priced states of each configuration."""

    system: RingSystem
    groups: Groups
    centres: Centres
    free: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class _Priced:
    """All states of one configuration of one ring system."""

    energies: tuple[float, ...]
    ledgers: tuple[Ledger, ...]
    axial: tuple[int, ...]
    shapes: tuple[str, ...]


def rank_isomers(
    structure: Structure | str,
    *,
    at: Sequence[int] | None = None,
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
    epimerizable: bool = False,
    enantiomers: bool = False,
    progress: Callable[[int, int], None] | None = None,
) -> Ranking:
    """Stereoisomers over the free centres, most stable first.

    Parameters
    ----------
    structure
        A Structure, or text for :func:`ringstrain.read`.
    at
        Centres to vary (zero-based atoms); every ring stereocentre when None.
    temperature_K
        Temperature [K].
    medium
        Medium class or solvent name.
    tables
        Price tables; those of the package when None.
    epimerizable
        True to vary only centres that acid or base can invert.
    enantiomers
        True to list enantiomers as entries of their own.
    progress
        Called with configurations done and in all.

    Returns
    -------
    Ranking
        Every isomer, and those that cannot exist with the reason.

    Raises
    ------
    InputError
        If the text is no usable structure.
    UsageError
        If an atom of ``at`` is no ring stereocentre or there are over 12 free centres.
    OutOfScope
        If the model does not cover the rings or no isomer can close.

    Examples
    --------
    >>> ranking = rank_isomers("CC1CCC(C)CC1")
    >>> [isomer.symmetry for isomer in ranking.isomers]
    ['achiral', 'achiral']
    """
    molecule = read(structure) if isinstance(structure, str) else structure
    prices = tables if tables is not None else load_tables()
    conditions = make_conditions(prices, temperature_K=temperature_K, medium=medium)
    book = price_book(prices, conditions)
    systems, notes = find_ring_systems(molecule)
    skeletons = _skeletons(molecule, systems, prices, at, epimerizable)
    total = math.prod(2 ** len(s.free) for s in skeletons)
    ticker = _Ticker(sum(2 ** len(s.free) for s in skeletons), progress)
    priced = [_price_all(s, molecule, book, ticker) for s in skeletons]
    entries = list(_entries(molecule, skeletons, priced, book, enantiomers))
    possible = [entry for entry in entries if entry.reason is None]
    if not possible:
        raise OutOfScope(
            "No stereoisomer of this skeleton closes its rings in chairs, twist-boats or boats.",
            "Ask about a part of the molecule.",
        )
    free = tuple(sorted(a for s in skeletons for a in s.free))
    open_input = any(
        not given and atom in s.free for s in skeletons for atom, given in zip(s.centres.atoms, s.centres.given)
    )
    isomers = _ranked(possible, book, None if open_input else free)
    rank = None
    if not open_input:
        rank = next((i + 1 for i, isomer in enumerate(isomers) if isomer.inverted_atoms == ()), None)
    return Ranking(
        structure=molecule,
        conditions=conditions,
        isomers=tuple(isomers),
        impossible=tuple(
            Impossible(
                smiles=entry.structure.smiles,
                inverted_atoms=None if open_input else entry.inverted,
                reason=entry.reason or "",
            )
            for entry in entries
            if entry.reason is not None
        ),
        free_atoms=free,
        input_rank=rank,
        notes=(*molecule.notes, *notes, *_remarks(total, free), *_left_open(molecule, systems)),
    )


def _remarks(total: int, free: tuple[int, ...]) -> tuple[str, ...]:
    if not free:
        return ("No ring stereocentre is free: the input is the only isomer.",)
    return (f"{total} configurations of {len(free)} centres counted on labelled atoms.",)


def _left_open(molecule: Structure, systems: Sequence[RingSystem]) -> tuple[str, ...]:
    """A word on centres outside the six-membered rings: they stay as they are, open ones included."""
    side = open_side_centres(molecule, {a for system in systems for a in system.atoms})
    if not side:
        return ()
    numbers = ", ".join(str(a + 1) for a in side)
    return (
        f"Configuration at atom {numbers} (outside the six-rings) not given and left so; its isomers are not told apart.",
    )


class _Ticker:
    """Counts configurations done and tells whoever asked."""

    def __init__(self, total: int, progress: Callable[[int, int], None] | None) -> None:
        self.total = total
        self.done = 0
        self.progress = progress

    def tick(self) -> None:
        """One more is done."""
        self.done += 1
        if self.progress is not None:
            self.progress(self.done, self.total)


def _skeletons(
    molecule: Structure, systems: Sequence[RingSystem], tables: Tables, at: Sequence[int] | None, epimerizable: bool
) -> list[_Skeleton]:
    """Ring systems with the centres that may turn."""
    skeletons = []
    known: set[int] = set()
    for system in systems:
        groups = group_map(molecule, system, tables)
        centres = find_centres(molecule, system, groups)
        wanted = set(centres.atoms)
        known |= wanted
        if at is not None:
            wanted &= set(at)
        if epimerizable:
            wanted &= invertible_centres(molecule, system, centres.atoms)
        wanted |= {a for a, given in zip(centres.atoms, centres.given, strict=True) if not given}
        free = tuple(a for a in centres.atoms if a in wanted)
        if len(free) <= MAX_FREE:
            free = stereogenic(centres, free)
        skeletons.append(_Skeleton(system, groups, centres, free))
    strangers = sorted(set(at or ()) - known)
    if strangers:
        numbers = ", ".join(str(a + 1) for a in strangers)
        raise UsageError(
            f"Atom {numbers} is no ring stereocentre.",
            f"Choose among {', '.join(str(a + 1) for a in sorted(known)) or 'none'}.",
            atoms=tuple(strangers),
        )
    count = sum(len(s.free) for s in skeletons)
    if count > MAX_FREE:
        raise UsageError(
            f"{count} centres are free; {MAX_FREE} is the limit.", "Choose some with --at, or use --epimerizable."
        )
    return skeletons


def _price_all(
    skeleton: _Skeleton, molecule: Structure, book: PriceBook, ticker: _Ticker
) -> dict[Signs, _Priced | str]:
    """States of every configuration of a system, or why it has none; one price serves a whole orbit."""
    outcome: dict[Signs, _Priced | str] = {}
    for compound in sort_compounds(skeleton.centres, all_signs(skeleton.centres, skeleton.free)):
        members = (*compound.members, *compound.mirrors)
        result = _price_one(skeleton, members[0], book)
        for signs in members:
            outcome[signs] = result
            ticker.tick()
    return outcome


def _price_one(skeleton: _Skeleton, signs: Signs, book: PriceBook) -> _Priced | str:
    geometry = skeleton.centres.geometry_of(signs)
    try:
        states = find_states(Resolved(geometry, close_chairs(geometry), ()), skeleton.groups, book)
    except OutOfScope as error:
        return error.problem
    states.sort(key=lambda item: item[2].total_kcal)
    shapes, facts, _ = states[0]
    return _Priced(
        tuple(ledger.total_kcal for _, _, ledger in states),
        tuple(ledger for _, _, ledger in states),
        tuple(sorted({p.site.neighbour for p in axial_sites(facts)})),
        tuple(ring.shape for ring in shapes.rings),
    )


@dataclass(frozen=True, slots=True)
class _Entry:
    """A compound across all ring systems, before ranking."""

    structure: Structure
    inverted: tuple[int, ...]
    symmetry: SymmetryWord
    count: int
    parts: tuple[_Priced, ...]
    reason: str | None


@dataclass(frozen=True, slots=True)
class _Side:
    """A compound of one ring system, told from its enantiomer."""

    members: tuple[Signs, ...]
    mirrors: tuple[Signs, ...]
    achiral: bool

    @property
    def nearest(self) -> Signs:
        """The member with the fewest inverted centres."""
        return min(self.members, key=_turned)

    @property
    def mirrored(self) -> _Side | None:
        """The enantiomer, itself when achiral; None when the set does not hold it."""
        if self.achiral:
            return self
        return _Side(self.mirrors, self.members, False) if self.mirrors else None


def _handed(compounds: Sequence[Compound]) -> list[_Side]:
    """Each compound of a system and, as a side of its own, its enantiomer."""
    sides: list[_Side] = []
    for compound in compounds:
        side = _Side(compound.members, compound.mirrors, compound.achiral)
        sides.append(side)
        if compound.mirrors and (mirrored := side.mirrored) is not None:
            sides.append(mirrored)
    return sides


def _turned(signs: Signs) -> int:
    """How many centres are inverted."""
    return sum(sign < 0 for sign in signs)


@dataclass(slots=True)
class _Pile:
    """Combinations that are one entry, gathered."""

    sides: tuple[_Side, ...]
    chiral: bool
    paired: bool
    count: int = 0


def _entries(
    molecule: Structure,
    skeletons: Sequence[_Skeleton],
    priced: Sequence[dict[Signs, _Priced | str]],
    book: PriceBook,
    enantiomers: bool,
) -> Iterator[_Entry]:
    """Every compound: the product of the compounds of each system, enantiomer pairs as one unless asked."""
    piles: dict[object, _Pile] = {}
    sorted_systems = [_handed(sort_compounds(s.centres, all_signs(s.centres, s.free))) for s in skeletons]
    for sides in product(*sorted_systems):
        mirrored = tuple(m for side in sides if (m := side.mirrored) is not None)
        own, mirror = _key(molecule, skeletons, sides), None
        if len(mirrored) == len(sides):
            mirror = _key(molecule, skeletons, mirrored)
        chiral = mirror != own
        paired = chiral and mirror is not None and not enantiomers
        key = frozenset((own, mirror)) if paired else own
        pile = piles.get(key)
        if pile is None:
            pile = piles[key] = _Pile(sides, chiral, paired)
        elif _distance(sides) < _distance(pile.sides):
            pile.sides = sides
        pile.count += math.prod(len(side.members) for side in sides)
    for pile in piles.values():
        chosen = [side.nearest for side in pile.sides]
        structure = _written(molecule, skeletons, pile.sides)
        results = [table[signs] for table, signs in zip(priced, chosen, strict=True)]
        reasons = [result for result in results if isinstance(result, str)]
        yield _Entry(
            structure,
            tuple(
                sorted(a for s, signs in zip(skeletons, chosen) for a, sign in zip(s.centres.atoms, signs) if sign < 0)
            ),
            _symmetry_word(structure, pile),
            pile.count,
            tuple(result for result in results if not isinstance(result, str)),
            reasons[0] if reasons else None,
        )


def _distance(sides: Sequence[_Side]) -> int:
    """How many centres the nearest member of each side inverts."""
    return sum(_turned(side.nearest) for side in sides)


def _key(molecule: Structure, skeletons: Sequence[_Skeleton], sides: Sequence[_Side]) -> object:
    """What tells one compound from another; with several ring systems the molecule itself, since they may swap."""
    if len(sides) == 1:
        return min(sides[0].members)
    return _written(molecule, skeletons, sides).smiles


def _written(molecule: Structure, skeletons: Sequence[_Skeleton], sides: Sequence[_Side]) -> Structure:
    """The molecule in the configuration nearest to the input."""
    for skeleton, side in zip(skeletons, sides, strict=True):
        molecule = with_configuration(molecule, skeleton.centres, side.nearest, _shown(skeleton))
    return molecule


def _shown(skeleton: _Skeleton) -> tuple[int, ...]:
    """Centres whose configuration belongs into the SMILES."""
    centres = skeleton.centres
    given = {a for a, known in zip(centres.atoms, centres.given, strict=True) if known}
    return tuple(a for a in centres.atoms if a in given or a in skeleton.free)


def _symmetry_word(structure: Structure, pile: _Pile) -> SymmetryWord:
    """What the entry is as a whole."""
    if pile.chiral:
        return "racemic" if pile.paired else "single enantiomer"
    from ringstrain.structure.cip import cip_labels

    return "meso" if any(label in "RS" for label in cip_labels(structure).values()) else "achiral"


def _ranked(entries: Sequence[_Entry], book: PriceBook, free: tuple[int, ...] | None) -> list[Isomer]:
    """Entries turned into isomers, most stable first."""
    temperature = book.conditions.temperature_K
    rt = R_KCAL * temperature
    free_energies, lowest, blends = [], [], []
    for entry in entries:
        parts = [mixture_energy(part.energies, temperature) for part in entry.parts]
        free_energies.append(sum(parts) - rt * math.log(entry.count))
        lowest.append(sum(part.energies[0] for part in entry.parts))
        blend: Variables = {}
        for part in entry.parts:
            own = blended([variables_of(ledger.terms) for ledger in part.ledgers], weights(part.energies, temperature))
            for key, (count, sigma) in own.items():
                blend[key] = (blend.get(key, (0.0, sigma))[0] + count, sigma)
        blends.append(blend)
    order = sorted(range(len(entries)), key=lambda i: (round(free_energies[i], 9), entries[i].inverted))
    best = order[0]
    for i in order:
        if i != best:
            regime = regime_of(line for part in entries[i].parts for line in part.ledgers[0].lines)
            blends[i][("model", str(i))] = (1.0, book.tables.model_terms.get(regime, 0.0))
    shares = weights(free_energies, temperature)
    mean = blended(blends, shares)
    unpriced = [_unknown_key(entry) for entry in entries]
    known = all(key == unpriced[best] for key in unpriced)
    isomers = []
    for i in order:
        entry = entries[i]
        spread = math.exp(min(Z95 * difference_sigma(blends[i], mean) / rt, 50.0))
        isomers.append(
            Isomer(
                smiles=entry.structure.smiles,
                inverted_atoms=None if free is None else entry.inverted,
                symmetry=entry.symmetry,
                dG_kcal=free_energies[i] - free_energies[best],
                statistics_kcal=(free_energies[i] - lowest[i]) - (free_energies[best] - lowest[best]),
                uncertainty_kcal=difference_sigma(blends[i], blends[best]),
                share=shares[i] if known else None,
                share_low=shares[i] / spread if known else None,
                share_high=min(1.0, shares[i] * spread) if known else None,
                favoured_axial=tuple(sorted(a for part in entry.parts for a in part.axial)),
                shapes=tuple(shape for part in entry.parts for shape in part.shapes),
                lower_bound=bool(unpriced[i]),
                configurations=entry.count,
                structure=entry.structure,
                variables=tuple((*key, count, sigma) for key, (count, sigma) in blends[i].items()),
            )
        )
    return isomers


def _unknown_key(entry: _Entry) -> tuple[object, ...]:
    """The contacts without a price in the favoured state."""
    return tuple(sorted((*line.key, line.count) for part in entry.parts for line in part.ledgers[0].unknown))
