"""Diastereomers ranked: which stereoisomer of a skeleton is the most stable, and what the mixture would be.

All configurations of the free centres are enumerated on labelled atoms, each with all its states, and each counts
one; compounds and enantiomer pairs are put together afterwards.  Symmetry numbers, meso forms and racemic mixing
come out of that count by themselves.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence

from ringstrain.analysis import group_map
from ringstrain.billing import axial_sites
from ringstrain.closing import close_chairs
from ringstrain.compounds import Entry, Priced, Skeleton, gather_entries
from ringstrain.configurations import (
    Signs,
    all_signs,
    find_centres,
    sort_compounds,
    stereogenic,
)
from ringstrain.epimers import invertible_centres
from ringstrain.equilibrium import blended, difference_sigma, mixture_energy, weights
from ringstrain.errors import OutOfScope, UsageError
from ringstrain.ledger import regime_of
from ringstrain.provenance import Variables
from ringstrain.ranking import Impossible, Isomer, Ranking
from ringstrain.remarks import open_side_centres
from ringstrain.ringgraph import RingSystem, find_ring_systems
from ringstrain.shaping import find_states
from ringstrain.stereo import Resolved
from ringstrain.structure.read import read
from ringstrain.structure.records import Structure
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.conditions import make_conditions
from ringstrain.tables.prices import PriceBook, price_book
from ringstrain.units import R_KCAL, ROOM_TEMPERATURE_K, Z95

__all__ = ["Impossible", "Isomer", "Ranking", "rank_isomers"]
#: More free centres than this are refused.
MAX_FREE = 12


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
    entries = list(gather_entries(molecule, skeletons, priced, enantiomers))
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
    centres = "one centre" if len(free) == 1 else f"{len(free)} centres"
    return (f"{total} configurations of {centres} counted on labelled atoms.",)


def _left_open(molecule: Structure, systems: Sequence[RingSystem]) -> tuple[str, ...]:
    """A word on centres outside the six-membered rings: they stay as they are, open ones included."""
    side = open_side_centres(molecule, {a for system in systems for a in system.atoms})
    if not side:
        return ()
    numbers = ", ".join(str(a + 1) for a in side)
    return (
        f"Configuration at atom {numbers} (outside the six-rings) not given and left so; "
        "isomers there are not told apart.",
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
) -> list[Skeleton]:
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
        skeletons.append(Skeleton(system, groups, centres, free))
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


def _price_all(skeleton: Skeleton, molecule: Structure, book: PriceBook, ticker: _Ticker) -> dict[Signs, Priced | str]:
    """States of every configuration of a system, or why it has none; one price serves a whole orbit."""
    outcome: dict[Signs, Priced | str] = {}
    for compound in sort_compounds(skeleton.centres, all_signs(skeleton.centres, skeleton.free)):
        members = (*compound.members, *compound.mirrors)
        result = _price_one(skeleton, members[0], book)
        for signs in members:
            outcome[signs] = result
            ticker.tick()
    return outcome


def _price_one(skeleton: Skeleton, signs: Signs, book: PriceBook) -> Priced | str:
    geometry = skeleton.centres.geometry_of(signs)
    try:
        states = find_states(Resolved(geometry, close_chairs(geometry), ()), skeleton.groups, book)
    except OutOfScope as error:
        return error.problem
    states.sort(key=lambda item: item[2].total_kcal)
    shapes, facts, _ = states[0]
    return Priced(
        tuple(ledger.total_kcal for _, _, ledger in states),
        tuple(ledger for _, _, ledger in states),
        tuple(sorted({p.site.neighbour for p in axial_sites(facts)})),
        tuple(ring.shape for ring in shapes.rings),
    )


def _ranked(entries: Sequence[Entry], book: PriceBook, free: tuple[int, ...] | None) -> list[Isomer]:
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
            own = blended([ledger.variables for ledger in part.ledgers], weights(part.energies, temperature))
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


def _unknown_key(entry: Entry) -> tuple[object, ...]:
    """The contacts without a price in the favoured state."""
    return tuple(sorted((*line.key, line.count) for part in entry.parts for line in part.ledgers[0].unknown))
