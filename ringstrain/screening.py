"""Many patterns weighed at once: energies of all states, populations, gap, and where every group stands.

A parent ring goes through the numpy kernel.  What its matrices do not cover (a marked scaffold, a sugar in water, a
group that flattens a ring nitrogen) goes through :func:`ringstrain.analyze` one by one.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from ringstrain._kernels import boltzmann, image_codes, sum_prices, two_lowest_sets
from ringstrain.analysis import Analysis, SystemResult, analyze
from ringstrain.equilibrium import mixture_energy
from ringstrain.errors import OutOfScope
from ringstrain.matrices import Matrices
from ringstrain.palette import PaletteGroup, set_groups
from ringstrain.placing import Scaffold
from ringstrain.relations import CHAIRS, SHAPES, Relations, find_relations
from ringstrain.screen import Screen, Weighed
from ringstrain.shaping import STRAINED
from ringstrain.structure.records import Structure
from ringstrain.tables.conditions import Conditions
from ringstrain.tables.prices import price_book
from ringstrain.tables.records import Tables
from ringstrain.units import R_KCAL

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Flags = NDArray[np.bool_]

_CYCLITOL_OXYGENS = 3


@dataclass(kw_only=True)
class Screener:
    """Weighs patterns of one scaffold and palette.

    Attributes
    ----------
    scaffold
        The ring.
    palette
        Groups; their numbers start at 1.
    tables, conditions
        Prices, medium and temperature.
    enantiomers
        True when both of a pair of enantiomers are listed.
    """

    scaffold: Scaffold
    palette: tuple[PaletteGroup, ...]
    tables: Tables
    conditions: Conditions
    enantiomers: bool = False
    relations: Relations = field(init=False)
    matrices: Matrices = field(init=False)

    def __post_init__(self) -> None:
        self.relations = find_relations(self.tables)
        self.matrices = Matrices(
            scaffold=self.scaffold,
            palette=self.palette,
            book=price_book(self.tables, self.conditions),
            relations=self.relations,
        )
        self._swinging = tuple(i for i, slot in enumerate(self.scaffold.slots) if slot.face == 0)
        self._uncounted = np.array([True, *(member.group.kind == "hydrogen" for member in self.palette)])
        self._flattened = self.matrices.planar_on_nitrogen() if self.scaffold.is_parent else np.zeros(0, dtype=bool)
        self._shape_images = _shape_images(self.scaffold, self.relations)

    @property
    def mirrors(self) -> NDArray[np.intp]:
        """Number of the mirror image of each group, -1 when it is not in the palette."""
        codes = [member.group.code for member in self.palette]
        table = [codes.index(m.group.mirror_code) + 1 if m.group.mirror_code in codes else -1 for m in self.palette]
        return np.array([0, *table], dtype=np.intp)

    def structure(self, row: NDArray[np.int16]) -> tuple[Structure, dict[int, int]]:
        """The molecule of a pattern, and the first atom of each group by slot."""
        return set_groups(self.scaffold, [self.palette[n - 1].branch if n else None for n in row])

    def analysis(self, structure: Structure) -> Analysis:
        """The full answer for one pattern."""
        return analyze(
            structure,
            temperature_K=self.conditions.temperature_K,
            medium=self.conditions.solvent or self.conditions.medium,
            tables=self.tables,
        )

    def system_of(self, analysis: Analysis) -> SystemResult:
        """The ring system the groups were put on (a group may bring another)."""
        return next(r for r in analysis.ring_systems if self.scaffold.slots[0].atom in r.system.atom_set)

    def screen(self, rows: NDArray[np.int16]) -> Screen:
        """Weigh a block of patterns; those whose ring cannot close are left out."""
        mates = self._mates(rows)
        count, slots = rows.shape
        screen = Screen(
            rows=rows,
            energy_kcal=np.full(count, np.nan),
            dg_kcal=np.full(count, np.nan),
            form_share=np.full(count, np.nan),
            axial_share=np.full((count, slots), np.nan),
            equatorial_share=np.full((count, slots), np.nan),
            favoured_axial=np.zeros((count, slots), dtype=bool),
            favoured_equatorial=np.zeros((count, slots), dtype=bool),
            placements=self._placements(mates),
        )
        alone = np.ones(count, dtype=bool)
        if self.scaffold.is_parent:
            alone = self.needs_analysis(rows)
            covered = np.flatnonzero(~alone)
            if len(covered):
                energies, unknown, edge = self.energies(rows[covered])
                part = screen.take(covered)
                self._weigh(part, energies, unknown, mates[covered])
                screen.put(covered, part)
                alone[covered[edge]] = True
        impossible = [number for number in np.flatnonzero(alone) if not self._weigh_one(screen, int(number))]
        return screen.take(np.setdiff1d(np.arange(count), impossible)) if impossible else screen

    # ---- the kernel ------------------------------------------------------------------------------------------

    def energies(self, rows: NDArray[np.int16]) -> tuple[Floats, NDArray[np.uint64] | None, Flags]:
        """Energy of every state of every pattern by the kernel; for patterns that :meth:`needs_analysis` lets through.

        Parameters
        ----------
        rows
            Group numbers by slot, ``(patterns, slots)``.

        Returns
        -------
        energies
            ``(patterns, states)`` [kcal/mol]: eight shapes, each with every side of the ring nitrogens; twist-boats
            that are not offered are infinite.
        unknown
            Fingerprint of the unpriced contacts of each state, None when all have a price.
        edge
            Patterns whose strain lies too near the limit to decide by rounding.
        """
        sides = 1 << len(self._swinging)
        energies = np.full((len(rows), SHAPES, sides), np.inf)
        unknown: NDArray[np.uint64] | None = None
        edge = np.zeros(len(rows), dtype=bool)
        for chosen in self._by_name(rows):
            block = rows[chosen]
            contents, numbers = self.contents(block)
            priced = self.matrices.tables(block[0], contents, twisting=False)
            strain = np.zeros((len(block), CHAIRS))
            marks = np.zeros((len(block), SHAPES, sides), dtype=np.uint64)
            for side in range(sides):
                sums = sum_prices(numbers[side], priced.pairs, priced.energies)
                energies[chosen, :CHAIRS, side] = sums[:, :CHAIRS]
                strain = np.maximum(strain, sums[:, CHAIRS:])
                if priced.unknown is not None:
                    marks[:, :CHAIRS, side] = sum_prices(numbers[side], priced.pairs, priced.unknown)  # type: ignore[arg-type]
            worst = strain.max(axis=1)
            edge[chosen] = np.abs(worst - STRAINED) < 1e-9
            twisting = worst > STRAINED
            if twisting.any():
                priced = self.matrices.tables(block[0], contents, twisting=True)
                for side in range(sides):
                    few = numbers[side][:, twisting]
                    energies[chosen[twisting], :, side] = sum_prices(few, priced.pairs, priced.energies)
                    if priced.unknown is not None:
                        marks[twisting, :, side] = sum_prices(few, priced.pairs, priced.unknown)  # type: ignore[arg-type]
            if priced.unknown is not None:
                if unknown is None:
                    unknown = np.zeros((len(rows), SHAPES, sides), dtype=np.uint64)
                unknown[chosen] = marks
        flat = (len(rows), SHAPES * sides)
        return energies.reshape(flat), None if unknown is None else unknown.reshape(flat), edge

    def _by_name(self, rows: NDArray[np.int16]) -> list[NDArray[np.intp]]:
        """Patterns that have the same ring and position names in the price tables."""
        slots = self.scaffold.slots
        fluoro = np.array([False, *(m.group.key == "fluoro" for m in self.palette)])
        oxygen = np.array([False, *(_first_element(m) == 8 for m in self.palette)])
        code = np.zeros(len(rows), dtype=np.int64)
        by_atom: dict[int, list[int]] = {}
        for number, slot in enumerate(slots):
            by_atom.setdefault(slot.atom, []).append(number)
        for members in by_atom.values():
            own = rows[:, members]
            code = code * 4
            if slots[members[0]].face == 0:
                code += own[:, 0] > 0
                continue
            code += fluoro[own].all(axis=1)
            if self.scaffold.name == "oxane":
                code += 2 * oxygen[own].any(axis=1)
        _, inverse = np.unique(code, return_inverse=True)
        order = np.argsort(inverse, kind="stable")
        return np.split(order, np.flatnonzero(np.diff(inverse[order])) + 1)

    def contents(self, rows: NDArray[np.int16]) -> tuple[list[tuple[int, int]], list[NDArray[np.intp]]]:
        """Pairs of upper and lower group that occur, and the number of the pair on each place for each side of the
        nitrogens, ``(6, patterns)``.
        """
        base = len(self.palette) + 2
        sides = []
        for side in range(1 << len(self._swinging)):
            stood = np.zeros((12, len(rows)), dtype=np.int64)
            for number, slot in enumerate(self.scaffold.slots):
                stood[self._column(number, side)] = rows[:, number]
                if slot.face == 0:
                    bare = rows[:, number] == 0
                    stood[self._column(number, side), bare] = self.matrices.nitrogen_hydrogen
            sides.append(stood[0::2] * base + stood[1::2])
        present = np.flatnonzero(np.bincount(np.concatenate(sides).ravel(), minlength=base * base))
        lookup = np.zeros(base * base, dtype=np.intp)
        lookup[present] = np.arange(len(present))
        return [divmod(int(code), base) for code in present], [lookup[side] for side in sides]

    def _column(self, number: int, side: int) -> int:
        """Site a slot stands on when the nitrogens point to a given side."""
        slot = self.scaffold.slots[number]
        return slot.column + (side >> self._swinging.index(number) & 1 if slot.face == 0 else 0)

    # ---- symmetry --------------------------------------------------------------------------------------------

    def _mates(self, rows: NDArray[np.int16]) -> Flags:
        """Which operations leave each pattern as it is, ``(patterns, operations)``."""
        codes, exists = image_codes(rows, self.scaffold.permutations, self.scaffold.signs, self.mirrors)
        mates: Flags = (codes == codes[:, :1]) & exists
        return mates

    def _placements(self, mates: Flags) -> NDArray[np.int64]:
        """Labelled placements each pattern stands for."""
        if self.enantiomers:
            mates = mates[:, self.scaffold.signs > 0]
        orbits: NDArray[np.int64] = mates.shape[1] // mates.sum(axis=1)
        return orbits

    def _labels(self, mates: Flags) -> NDArray[np.intp]:
        """Ring form of each shape: the lowest shape that symmetry makes it equal to, ``(patterns, shapes)``."""
        labels = np.broadcast_to(np.arange(SHAPES), (len(mates), SHAPES)).copy()
        for operation, images in enumerate(self._shape_images):
            np.minimum(labels, images, out=labels, where=mates[:, operation, None])
        return labels

    # ---- weighing --------------------------------------------------------------------------------------------

    def _weigh(self, screen: Screen, energies: Floats, unknown: NDArray[np.uint64] | None, mates: Flags) -> None:
        """Fill a screen from the energies of all states; patterns without twist-boats have few states to look at."""
        sides = 1 << len(self._swinging)
        twisted = np.isfinite(energies[:, CHAIRS * sides])
        for chosen, shapes in ((np.flatnonzero(~twisted), CHAIRS), (np.flatnonzero(twisted), SHAPES)):
            if len(chosen):
                part = screen.take(chosen)
                states = slice(shapes * sides)
                marks = None if unknown is None else unknown[chosen, states]
                self._weigh_states(part, energies[chosen, states], marks, mates[chosen], shapes)
                screen.put(chosen, part)

    def _weigh_states(
        self, screen: Screen, energies: Floats, unknown: NDArray[np.uint64] | None, mates: Flags, shapes: int
    ) -> None:
        """Fill a screen of patterns that all have the same states."""
        sides = energies.shape[1] // shapes
        rt = R_KCAL * self.conditions.temperature_K
        shares, mixture = boltzmann(energies, rt)
        labels = np.repeat(self._labels(mates)[:, :shapes], sides, axis=1)
        favoured, other, gap = two_lowest_sets(energies, labels, rt)
        single = ~other.any(axis=1)
        gap[single] = 0.0
        screen.dg_kcal[:] = gap
        screen.energy_kcal[:] = mixture
        screen.form_share[:] = shares.reshape(len(energies), shapes, sides).sum(axis=2).max(axis=1)
        lowest = np.where(favoured, energies, np.inf).argmin(axis=1)
        states = slice(shapes * sides)
        axial = self._standing(self.relations.axial)[states]
        equatorial = self._standing(self.relations.factors == 0.0)[states]
        screen.axial_share[:] = shares @ axial
        screen.equatorial_share[:] = shares @ equatorial
        screen.favoured_axial[:] = axial[lowest] > 0
        screen.favoured_equatorial[:] = equatorial[lowest] > 0
        if unknown is not None:
            first = np.take_along_axis(unknown, lowest[:, None], axis=1)
            undetermined = (unknown != first).any(axis=1)
            for array in (screen.energy_kcal, screen.form_share, screen.axial_share, screen.equatorial_share):
                array[undetermined] = np.nan
            rival = np.where(other, energies, np.inf).argmin(axis=1)
            differs = np.take_along_axis(unknown, rival[:, None], axis=1)[:, 0] != first[:, 0]
            screen.dg_kcal[differs & ~single] = np.nan
        bare = self._uncounted[screen.rows]
        for array in (screen.axial_share, screen.equatorial_share):
            array[bare] = np.nan
        screen.favoured_axial[bare] = screen.favoured_equatorial[bare] = False

    def _standing(self, table: Flags) -> Floats:
        """Whether the group of each slot stands in a kind of place in each state, ``(states, slots)``."""
        sides = 1 << len(self._swinging)
        out = np.zeros((SHAPES, sides, len(self.scaffold.slots)))
        for number in range(len(self.scaffold.slots)):
            for side in range(sides):
                out[:, side, number] = table[:, self._column(number, side)]
        return out.reshape(SHAPES * sides, -1)

    def needs_analysis(self, rows: NDArray[np.int16]) -> Flags:
        """Patterns of a parent ring that the matrices do not cover: sugars in water, flattened nitrogens."""
        flags = np.zeros(len(rows), dtype=bool)
        for number in self._swinging:
            flags |= self._flattened[rows[:, number]]
        if self.conditions.medium == "protic" and self.scaffold.name in ("cyclohexane", "oxane"):
            oxygen = np.array([0, *(m.group.key == "hydroxy" or m.group.kind == "oxy" for m in self.palette)])
            plain = np.array([1, *(bool(o) or m.group.key in ("methyl", "hydroxymethyl") or m.group.kind == "hydrogen"
                                   for o, m in zip(oxygen[1:], self.palette, strict=True))])  # fmt: skip
            enough = _CYCLITOL_OXYGENS if self.scaffold.name == "cyclohexane" else 1
            flags |= (plain[rows] > 0).all(axis=1) & (oxygen[rows].sum(axis=1) >= enough)
        return flags

    def weigh(self, result: SystemResult, heads: dict[int, int]) -> Weighed:
        """The same numbers from a full analysis.

        Parameters
        ----------
        result
            The ring system of the pattern.
        heads
            First atom of each group by slot.
        """
        states = result.states
        lowest = states[0]
        known = lowest.population is not None
        forms: dict[object, float] = {}
        for state in states:
            rings = state.detail.shapes.rings
            forms[rings] = forms.get(rings, 0.0) + (state.population or 0.0)
        shares: dict[str, dict[int, float]] = {"axial": {}, "equatorial": {}}
        for which, table in shares.items():
            for slot, head in heads.items():
                if known and any(head in s.axial or head in s.equatorial for s in states):
                    table[slot] = math.fsum(s.population or 0.0 for s in states if head in getattr(s, which))
        temperature = self.conditions.temperature_K
        return Weighed(
            energy_kcal=mixture_energy([s.energy_kcal for s in states], temperature) if known else None,
            form_share=max(forms.values()) if known else None,
            axial_share=shares["axial"],
            equatorial_share=shares["equatorial"],
            axial=frozenset(slot for slot, head in heads.items() if head in lowest.axial),
            equatorial=frozenset(slot for slot, head in heads.items() if head in lowest.equatorial),
        )

    def _weigh_one(self, screen: Screen, number: int) -> bool:
        """Fill one row from a full analysis; False when the ring cannot close."""
        structure, heads = self.structure(screen.rows[number])
        try:
            result = self.system_of(self.analysis(structure))
        except OutOfScope:
            return False
        weighed = self.weigh(result, heads)
        gap = result.equilibrium.dG_kcal if result.equilibrium else None
        screen.dg_kcal[number] = np.nan if gap is None else gap
        screen.energy_kcal[number] = np.nan if weighed.energy_kcal is None else weighed.energy_kcal
        screen.form_share[number] = np.nan if weighed.form_share is None else weighed.form_share
        slots = range(len(self.scaffold.slots))
        screen.axial_share[number] = [weighed.axial_share.get(slot, np.nan) for slot in slots]
        screen.equatorial_share[number] = [weighed.equatorial_share.get(slot, np.nan) for slot in slots]
        screen.favoured_axial[number] = [slot in weighed.axial for slot in slots]
        screen.favoured_equatorial[number] = [slot in weighed.equatorial for slot in slots]
        return True


def _first_element(member: PaletteGroup) -> int:
    return member.branch.structure.atoms[member.branch.first].number


def _shape_images(scaffold: Scaffold, relations: Relations) -> NDArray[np.intp]:
    """Shape each operation carries each shape onto, ``(operations, shapes)``."""
    images = np.zeros((len(scaffold.signs), SHAPES), dtype=np.intp)
    for number, (places, sign) in enumerate(zip(scaffold.turns, scaffold.signs, strict=True)):
        forward = (places[1] - places[0]) % 6 == 1
        targets = places if forward else np.roll(places, -1)
        for shape in range(SHAPES):
            wanted = np.empty(6)
            wanted[targets] = sign * relations.torsions[shape]
            images[number, shape] = int(np.abs(relations.torsions - wanted).sum(axis=1).argmin())
    return images
