"""Compounds of a molecule over its free centres: configurations of all ring systems put together."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import product

from ringstrain.configurations import Centres, Compound, Signs, all_signs, sort_compounds, with_configuration
from ringstrain.ledger import Ledger
from ringstrain.ranking import SymmetryWord
from ringstrain.ringgraph import RingSystem
from ringstrain.structure.cip import cip_labels
from ringstrain.structure.records import Structure
from ringstrain.symmetry import Groups


@dataclass(frozen=True, slots=True)
class Skeleton:
    """A ring system with its centres and the priced states of each configuration."""

    system: RingSystem
    groups: Groups
    centres: Centres
    free: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Priced:
    """All states of one configuration of one ring system."""

    energies: tuple[float, ...]
    ledgers: tuple[Ledger, ...]
    axial: tuple[int, ...]
    shapes: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Entry:
    """A compound across all ring systems, before ranking."""

    structure: Structure
    inverted: tuple[int, ...]
    symmetry: SymmetryWord
    count: int
    parts: tuple[Priced, ...]
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


def gather_entries(
    molecule: Structure,
    skeletons: Sequence[Skeleton],
    priced: Sequence[dict[Signs, Priced | str]],
    enantiomers: bool,
) -> Iterator[Entry]:
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
        yield Entry(
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


def _key(molecule: Structure, skeletons: Sequence[Skeleton], sides: Sequence[_Side]) -> object:
    """What tells one compound from another; with several ring systems the molecule itself, since they may swap."""
    if len(sides) == 1:
        return min(sides[0].members)
    return _written(molecule, skeletons, sides).smiles


def _written(molecule: Structure, skeletons: Sequence[Skeleton], sides: Sequence[_Side]) -> Structure:
    """The molecule in the configuration nearest to the input."""
    for skeleton, side in zip(skeletons, sides, strict=True):
        molecule = with_configuration(molecule, skeleton.centres, side.nearest, _shown(skeleton))
    return molecule


def _shown(skeleton: Skeleton) -> tuple[int, ...]:
    """Centres whose configuration belongs into the SMILES."""
    centres = skeleton.centres
    given = {a for a, known in zip(centres.atoms, centres.given, strict=True) if known}
    return tuple(a for a in centres.atoms if a in given or a in skeleton.free)


def _symmetry_word(structure: Structure, pile: _Pile) -> SymmetryWord:
    """What the entry is as a whole."""
    if pile.chiral:
        return "racemic" if pile.paired else "single enantiomer"
    return "meso" if any(label in "RS" for label in cip_labels(structure).values()) else "achiral"
