"""Substitution patterns of a ring: every way to place given groups, weighed, filtered and ranked."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from ringstrain._kernels import image_codes
from ringstrain.errors import UsageError
from ringstrain.palette import PaletteGroup, find_group, locate
from ringstrain.pattern_records import Pattern as Pattern
from ringstrain.pattern_records import PlacedGroup
from ringstrain.placing import choose_multisets, make_scaffold, place_groups
from ringstrain.screen import Screen
from ringstrain.screening import Screener
from ringstrain.sieve import Sieve, Wish
from ringstrain.structure.graft import configure
from ringstrain.structure.records import Structure
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.conditions import make_conditions
from ringstrain.units import R_KCAL, ROOM_TEMPERATURE_K

if TYPE_CHECKING:
    from numpy.typing import NDArray

#: More different groups than this in one search are refused.
MAX_GROUPS = 24


@dataclass(slots=True)
class Tally:
    """What a search went through.

    Attributes
    ----------
    enumerated
        Patterns up to symmetry.
    kept
        Those that passed.
    undetermined
        Those whose energy an unpriced contact leaves open.
    """

    enumerated: int = 0
    kept: int = 0
    undetermined: int = 0


@dataclass(frozen=True, kw_only=True)
class Search:
    """A search made ready: the ring, the groups, the conditions and what is wished.

    Attributes
    ----------
    screener
        Ring, groups and prices.
    multisets
        Group numbers of every composition.
    sieve
        Filters and order.
    geminal
        False to leave out patterns with two groups on one atom.
    top
        Length of the list; None for all.
    tally
        Filled while the search runs.
    """

    screener: Screener
    multisets: tuple[tuple[int, ...], ...]
    sieve: Sieve
    geminal: bool
    top: int | None
    tally: Tally

    def run(self) -> Iterator[Pattern]:
        """The patterns in order."""
        rt = R_KCAL * self.screener.conditions.temperature_K
        kept: list[tuple[NDArray[np.int16], NDArray[np.int64], NDArray[np.float64]]] = []
        rank = 0
        for screen in self._screens():
            if self.sieve.is_ranked:
                kept.append((screen.rows, screen.placements, self.sieve.rank(screen, rt)))
                if self.top is not None and sum(len(part[0]) for part in kept) > max(10 * self.top, 100_000):
                    kept = [_best(kept, self.top)]
                continue
            for row, placements in zip(screen.rows, screen.placements, strict=True):
                rank += 1
                yield self._pattern(rank, row, int(placements))
                if rank == self.top:
                    return
        if kept:
            rows, counts, _ = _best(kept, self.top)
            for rank, (row, placements) in enumerate(zip(rows, counts, strict=True), 1):
                yield self._pattern(rank, row, int(placements))

    def _screens(self) -> Iterator[Screen]:
        """Blocks of patterns that passed."""
        for rows in place_groups(
            self.screener.scaffold,
            self.multisets,
            [int(m) for m in self.screener.mirrors],
            geminal=self.geminal,
            enantiomers=self.screener.enantiomers,
        ):
            screen = self.screener.screen(rows)
            passed = self.sieve.passes(screen)
            self.tally.enumerated += len(screen.rows)
            self.tally.kept += int(passed.sum())
            self.tally.undetermined += int(np.isnan(screen.energy_kcal).sum())
            if passed.any():
                yield screen.take(passed)

    def _pattern(self, rank: int, row: NDArray[np.int16], placements: int) -> Pattern:
        """The full record of one pattern."""
        screener = self.screener
        structure, heads = screener.structure(row)
        structure = self._tidied(structure, row)
        smiles = structure.smiles
        analysis = screener.analysis(replace(structure, text=smiles))
        result = screener.system_of(analysis)
        weighed = screener.weigh(result, heads)
        equilibrium = result.equilibrium
        rt = R_KCAL * screener.conditions.temperature_K
        groups = tuple(
            PlacedGroup(
                locant=screener.scaffold.slots[number].locant,
                face={1: "up", -1: "down", 0: ""}[screener.scaffold.slots[number].face],
                group=screener.palette[row[number] - 1].name,
                atom=head,
                axial_share=weighed.axial_share.get(number),
                axial=head in result.states[0].axial,
            )
            for number, head in sorted(heads.items(), key=lambda item: screener.scaffold.slots[item[0]].locant)
        )
        return Pattern(
            rank=rank,
            ring=screener.scaffold.name,
            temperature_K=analysis.temperature_K,
            medium=analysis.medium,
            pattern=" ".join(
                f"{locate(screener.scaffold.slots[n])}-{screener.palette[row[n] - 1].name}" for n in heads
            ),
            smiles=smiles,
            groups=groups,
            placements=placements,
            energy_kcal=None if weighed.energy_kcal is None else weighed.energy_kcal - rt * float(np.log(placements)),
            dG_kcal=equilibrium.dG_kcal if equilibrium else None,
            uncertainty_kcal=equilibrium.uncertainty_kcal if equilibrium else None,
            K=equilibrium.K if equilibrium else None,
            K_low=equilibrium.K_low if equilibrium else None,
            K_high=equilibrium.K_high if equilibrium else None,
            bound=equilibrium.bound if equilibrium else "",
            population=weighed.form_share,
        )

    def _tidied(self, structure: Structure, row: NDArray[np.int16]) -> Structure:
        """The structure without configurations that say nothing: two like groups on an atom, or a lone centre."""
        scaffold = self.screener.scaffold
        marks: dict[int, None] = {}
        centres: list[int] = []
        for number, slot in enumerate(scaffold.slots):
            partner = scaffold.partners[number]
            if partner < 0 or structure.configurations[slot.atom] is None or slot.atom in centres:
                continue
            if row[number] == row[partner]:
                marks[slot.atom] = None
            else:
                centres.append(slot.atom)
        if scaffold.is_parent and len(centres) == 1 and self._is_no_centre(row, centres[0]):
            marks[centres[0]] = None
        return configure(structure, marks)

    def _is_no_centre(self, row: NDArray[np.int16], atom: int) -> bool:
        """True when exchanging the two groups of the only centre gives the same pattern."""
        screener = self.screener
        if not screener.enantiomers:
            return True
        first, second = (n for n, slot in enumerate(screener.scaffold.slots) if slot.atom == atom)
        swapped = row.copy()
        swapped[[first, second]] = row[[second, first]]
        proper = screener.scaffold.signs > 0
        codes, _ = image_codes(
            np.stack((row, swapped)),
            screener.scaffold.permutations[proper],
            screener.scaffold.signs[proper],
            screener.mirrors,
        )
        return bool((codes[1] == codes[0, 0]).any())


_Kept = tuple["NDArray[np.int16]", "NDArray[np.int64]", "NDArray[np.float64]"]


def _best(parts: list[_Kept], top: int | None) -> _Kept:
    """The best of what was kept, in order; ties in order of enumeration."""
    rows, counts, keys = (np.concatenate([part[i] for part in parts]) for i in range(3))
    order = np.argsort(keys, kind="stable")[:top]
    return rows[order], counts[order], keys[order]


def plan_search(
    groups: Sequence[str],
    *,
    ring: str = "cyclohexane",
    choose_from: Sequence[str] = (),
    count: tuple[int, int] = (1, 1),
    geminal: bool = True,
    enantiomers: bool = False,
    wish: Wish | None = None,
    top: int | None = None,
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
) -> Search:
    """A search with its tally, for callers that report how much was gone through; see :func:`enumerate_patterns`.

    Raises
    ------
    UsageError, InputError, OutOfScope, TableError
        As :func:`enumerate_patterns`.
    """
    prices = tables if tables is not None else load_tables()
    if not groups and not choose_from:
        raise UsageError("No group is given.", "Name the groups to place, or use --choose-from.")
    if top is not None and top < 1:
        raise UsageError("The list cannot be shorter than one pattern.", "Give --top a number from 1.")
    scaffold = make_scaffold(ring, prices)
    palette, numbers = _palette([*groups, *choose_from], prices)
    fixed = tuple(sorted(numbers[: len(groups)]))
    multisets = [fixed]
    if choose_from:
        low, high = count
        if not 0 <= low <= high or high < 1:
            raise UsageError(f"{low}:{high} is no range of counts.", "Give how many groups to choose: 2 or 1:3.")
        room = len(scaffold.slots) - len(fixed)
        chosen = choose_multisets(numbers[len(groups) :], range(low, min(high, room) + 1))
        multisets = [tuple(sorted((*fixed, *more))) for more in chosen if fixed or more]
    screener = Screener(
        scaffold=scaffold,
        palette=palette,
        tables=prices,
        conditions=make_conditions(prices, temperature_K=temperature_K, medium=medium),
        enantiomers=enantiomers,
    )
    return Search(
        screener=screener,
        multisets=tuple(dict.fromkeys(multisets)),
        sieve=Sieve(wish or Wish(), scaffold, palette, prices),
        geminal=geminal,
        top=top,
        tally=Tally(),
    )


def _palette(names: Sequence[str], tables: Tables) -> tuple[tuple[PaletteGroup, ...], list[int]]:
    """Distinct groups in order of appearance, and the number of the group behind each name."""
    palette: list[PaletteGroup] = []
    numbers = []
    for name in names:
        member = find_group(name, tables)
        codes = [other.group.code for other in palette]
        if member.group.code not in codes:
            palette.append(member)
            codes.append(member.group.code)
        numbers.append(codes.index(member.group.code) + 1)
    if len(palette) > MAX_GROUPS:
        raise UsageError(f"{len(palette)} different groups are too many at once.", f"Give at most {MAX_GROUPS}.")
    return tuple(palette), numbers


def enumerate_patterns(
    groups: Sequence[str],
    *,
    ring: str = "cyclohexane",
    choose_from: Sequence[str] = (),
    count: tuple[int, int] = (1, 1),
    geminal: bool = True,
    enantiomers: bool = False,
    wish: Wish | None = None,
    top: int | None = None,
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
) -> Iterator[Pattern]:
    """Every pattern of the groups on a ring, once up to its symmetry, ranked.

    Parameters
    ----------
    groups
        Groups that are all placed: table keys, aliases or SMILES with a star; a name twice places the group twice.
    ring
        ``cyclohexane``, ``oxane``, ``piperidine``, ``1,3-dioxane`` and other parent rings, or a SMILES whose open
        positions carry atom maps.
    choose_from
        Groups of which ``count`` more are placed, each as often as it likes.
    count
        Fewest and most groups taken from ``choose_from`` [-].
    geminal
        False to leave out patterns with two groups on one atom.
    enantiomers
        True to list both of a pair of enantiomers.
    wish
        Filters and the order of the list.
    top
        Length of the list; None for all.
    temperature_K
        Temperature [K].
    medium
        ``gas``, ``nonpolar``, ``polar``, ``protic`` or a solvent name.
    tables
        Price tables; those of the package when None.

    Returns
    -------
    iterator of Pattern
        Best first.

    Raises
    ------
    UsageError
        If a ring, condition or count makes no sense, or there are too many placements.
    UnknownGroup
        If no table knows a group.
    InputError, OutOfScope
        If a scaffold cannot be used.
    TableError
        If the tables are faulty.

    Notes
    -----
    All patterns are weighed by a numpy kernel that adds the same prices as :func:`ringstrain.analyze`; those that are
    returned carry the numbers of the full analysis.

    Examples
    --------
    >>> best = next(enumerate_patterns(["tBu", "Me"], wish=Wish(cis=("1,4",))))
    >>> best.pattern, [group.group for group in best.groups if group.axial]
    ('1b-Me 4b-tBu', ['Me'])
    """
    return plan_search(
        groups,
        ring=ring,
        choose_from=choose_from,
        count=count,
        geminal=geminal,
        enantiomers=enantiomers,
        wish=wish,
        top=top,
        temperature_K=temperature_K,
        medium=medium,
        tables=tables,
    ).run()
