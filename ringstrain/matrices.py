"""Price matrices of a single saturated ring: every relation of the ledger as an array the kernel can gather from.

What a meeting costs is asked of the same price book as the ledger does.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from hashlib import blake2b
from typing import TYPE_CHECKING

import numpy as np

from ringstrain.billing import parties_of
from ringstrain.palette import PaletteGroup, geometry_of, set_groups
from ringstrain.placing import Scaffold
from ringstrain.provenance import Price
from ringstrain.relations import CHAIRS, SHAPES, Meeting, Relations
from ringstrain.ringgraph import atom_kind, find_ring_systems
from ringstrain.structure.graft import graft
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook
from ringstrain.tables.ring_prices import RingPlace, ring_value

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

_HYDROGEN = Group(key="hydrogen", code=1, mirror_code=1, kind="hydrogen", tabulated=False)
#: The group whose axial chair costs more where twist-boats are states of their own, and the row that says so.
_REPRICED, _REPRICED_ROW = "tert-butyl", "avalues/tert-butyl"


@dataclass(frozen=True, slots=True)
class Priced:
    """Tables of one ring and context, for :func:`ringstrain._kernels.sum_prices`.

    Attributes
    ----------
    pairs
        Places each table couples, ``(tables, 2)``.
    energies
        ``(tables, contents squared, states)`` [kcal/mol]: the two chairs, then the strain of each chair.
    unknown
        The same for contacts without a price, as numbers that are equal when the same contacts are unpriced; None
        when everything has a price.
    """

    pairs: NDArray[np.intp]
    energies: Floats
    unknown: NDArray[np.uint64] | None


@dataclass(kw_only=True)
class Matrices:
    """Price matrices of a parent ring for a set of groups.

    Attributes
    ----------
    scaffold
        A parent ring.
    palette
        The groups; their numbers start at 1 (0 is hydrogen, the last number the hydrogen of a ring nitrogen).
    book
        Prices under the asked conditions.
    relations
        Which sites meet.
    """

    scaffold: Scaffold
    palette: tuple[PaletteGroup, ...]
    book: PriceBook
    relations: Relations
    _memory: dict[tuple[object, ...], Priced] = field(default_factory=dict)

    @property
    def nitrogen_hydrogen(self) -> int:
        """Number that stands for the hydrogen of a ring nitrogen."""
        return len(self.palette) + 1

    def planar_on_nitrogen(self) -> NDArray[np.bool_]:
        """For each group number whether it flattens a ring nitrogen it is bound to."""
        flags = np.zeros(len(self.palette) + 2, dtype=bool)
        swinging = next((s for s in self.scaffold.slots if s.face == 0), None)
        if swinging is None:
            return flags
        for number, member in enumerate(self.palette, 1):
            structure, _ = graft(self.scaffold.structure, [(swinging.atom, member.branch)])
            flags[number] = atom_kind(structure, swinging.atom) != "inverting"
        return flags

    def tables(self, example: NDArray[np.int16], contents: Sequence[tuple[int, int]], *, twisting: bool) -> Priced:
        """Tables for patterns whose ring is named as that of an example.

        Parameters
        ----------
        example
            Group numbers of one such pattern by slot.
        contents
            Upper and lower group of each content number.
        twisting
            True for all eight shapes with twist-boats as states of their own, False for the two chairs and their
            strain.
        """
        places, name, shape_price = self._naming(example)
        key = (tuple(places), name, tuple(contents), twisting)
        known = self._memory.get(key)
        if known is None:
            known = self._memory[key] = self._fill(places, name, shape_price, contents, twisting=twisting)
        return known

    def _naming(self, example: NDArray[np.int16]) -> tuple[list[RingPlace], str, float]:
        """What the price tables call each place of the ring, the ring itself, and what a twist-boat costs."""
        branches = [self.palette[n - 1].branch if n else None for n in example]
        structure, _ = set_groups(self.scaffold, branches)
        system = next(s for s in find_ring_systems(structure)[0] if 0 in s.atom_set)
        geometry = geometry_of(structure, system)
        parties = parties_of(geometry, {}, self.book)
        places: list[RingPlace] = [parties.place(geometry, 0, atom) for atom in system.rings[0].atoms]
        name = parties.names[0].name
        special = f"twist-boat-{name}"
        known = any(claim.row == f"rules/{special}" for claim in self.book.tables.rivals("rules", ""))
        price = self.book.rule(special if known else "twist-boat", name)
        return places, name, price.value_kcal or 0.0

    def _fill(
        self,
        places: list[RingPlace],
        name: str,
        shape_price: float,
        contents: Sequence[tuple[int, int]],
        *,
        twisting: bool,
    ) -> Priced:
        shapes = range(SHAPES if twisting else CHAIRS)
        plain = self._site_prices(places, twisting=False)
        chair = self._site_prices(places, twisting=True) if twisting else plain
        filler = _Filler(np.array(contents, dtype=np.intp), len(shapes), self._heavy())
        for shape in shapes:
            site = chair if shape < CHAIRS else plain
            for column in range(12):
                factor = float(self.relations.factors[shape, column])
                if factor:
                    values, unknown = site.values[column // 2], site.unknown[column // 2]
                    filler.add_single(shape, column, values * factor, unknown, round(3 * factor), strain=factor == 1.0)
            if shape >= CHAIRS:
                filler.add_constant(shape, shape_price)
        across = name == "cyclohexane"
        for meeting in self.relations.meetings:
            if meeting.shape not in shapes or (meeting.kind == "across" and not across):
                continue
            values, unknown, polar = self._pair_prices(meeting.kind)
            strain = None
            if meeting.kind == "syn-axial X//Y":
                a, b = plain.shares[meeting.first // 2], plain.shares[meeting.second // 2]
                heavy = self._heavy()
                values = np.where(heavy[:, None] & heavy[None, :], values - a[:, None] - b[None, :], 0.0)
                values = np.where(unknown > 0, 0.0, values)
                strain = np.where(polar, 0.0, values)  # dipoles call for no twist-boat
            filler.add_pair(meeting, values, unknown, strain)
        return filler.finish(strain=not twisting)

    def _heavy(self) -> NDArray[np.bool_]:
        """Group numbers that are more than hydrogen."""
        flags = np.zeros(len(self.palette) + 2, dtype=bool)
        flags[1:-1] = [member.group.kind != "hydrogen" for member in self.palette]
        return flags

    def _site_prices(self, places: list[RingPlace], *, twisting: bool) -> _SitePrices:
        """Price of each group axial at each place, and the share of it that a syn-axial partner takes over."""
        count = len(self.palette) + 2
        values, shares = np.zeros((6, count)), np.zeros((6, count))
        unknown = np.zeros((6, count), dtype=np.uint64)
        for number, place in enumerate(places):
            values[number, -1] = ring_value(self.book, place, _HYDROGEN).value_kcal or 0.0
            for index, member in enumerate(self.palette, 1):
                if member.group.kind == "hydrogen":
                    values[number, index] = values[number, -1] if self._swings(number) else 0.0
                    continue
                price = ring_value(self.book, place, member.group)
                if (
                    twisting
                    and place.is_plain
                    and member.group.key == _REPRICED
                    and price.row.startswith(_REPRICED_ROW)
                ):
                    price = self.book.rule("tert-butyl-axial-chair", _REPRICED)
                if price.value_kcal is None:
                    unknown[number, index] = _fingerprint("A-value", (member.group.key,), price.row)
                values[number, index] = price.value_kcal or 0.0
                half = (self.book.a_value(member.group).value_kcal or 0.0) / 2
                paid = None if price.value_kcal is None else price.value_kcal / 2
                shares[number, index] = half if paid is None or paid >= half - 1e-9 else max(paid, 0.0)
        return _SitePrices(values, shares, unknown)

    def _swings(self, place: int) -> bool:
        atom = self.scaffold.system.rings[0].atoms[place]
        return self.scaffold.system.kinds[atom] == "inverting"

    def _pair_prices(self, kind: str) -> tuple[Floats, NDArray[np.uint64], NDArray[np.bool_]]:
        """Prices of pairs of groups in one kind of meeting, fingerprint of those without one, and which are polar."""
        ask = _QUESTIONS[kind]
        count = len(self.palette) + 2
        values = np.zeros((count, count))
        unknown = np.zeros((count, count), dtype=np.uint64)
        polar = np.zeros((count, count), dtype=bool)
        for i, first in enumerate(self.palette, 1):
            for j, second in enumerate(self.palette, 1):
                if "hydrogen" in (first.group.kind, second.group.kind):
                    continue
                price = ask(self.book, first.group, second.group)
                if price is None:
                    continue
                polar[i, j] = price.polar
                if price.value_kcal is None:
                    keys = (first.group.key, second.group.key)
                    rule = {"gauche, both equatorial": "gauche", "geminal, isoclinal": "geminal"}.get(kind, kind)
                    ordered = keys if rule == "geminal" else tuple(sorted(keys))
                    unknown[i, j] = _fingerprint(rule, ordered, price.row)
                else:
                    values[i, j] = price.value_kcal
        return values, unknown, polar


def _isoclinal(book: PriceBook, x: Group, y: Group) -> Price:
    """Two groups on a twist-boat axis: neither is axial, so their names decide the order."""
    first, second = (x, y) if x.key <= y.key else (y, x)
    return book.geminal(first, second)


_QUESTIONS: dict[str, Callable[[PriceBook, Group, Group], Price | None]] = {
    "gauche": lambda book, x, y: book.vicinal(x, y, both_equatorial=False),
    "gauche, both equatorial": lambda book, x, y: book.vicinal(x, y),
    "eclipsed": lambda book, x, y: book.vicinal(x, y),
    "syn-axial X//Y": lambda book, x, y: book.syn_axial(x, y),
    "geminal": lambda book, x, y: book.geminal(x, y),
    "geminal, isoclinal": _isoclinal,
    "across": lambda book, x, y: book.across(x, y),
}


@dataclass(frozen=True, slots=True)
class _SitePrices:
    """By place and group: price axial, share a syn-axial partner takes over, fingerprint where unpriced."""

    values: Floats
    shares: Floats
    unknown: NDArray[np.uint64]


def _fingerprint(rule: str, groups: tuple[str, ...], row: str) -> int:
    """A number of 64 bits that stands for a kind of unpriced line."""
    text = "\n".join((rule, *groups, row))
    return int.from_bytes(blake2b(text.encode(), digest_size=8).digest(), "little") | 1


class _Filler:
    """Tables being filled: contents of two places against states."""

    def __init__(self, contents: NDArray[np.intp], shapes: int, heavy: NDArray[np.bool_]) -> None:
        self.upper_lower = contents.T
        self.size = len(contents)
        self.heavy = heavy  # the hydrogen of a nitrogen is no strain of the ring
        steps = [(place, (place + 1) % 6) for place in range(6)] + [(place, (place + 2) % 6) for place in range(6)]
        steps += [(place, place + 3) for place in range(3)]
        self.numbers = {pair: number for number, pair in enumerate(steps)}
        self.pairs = steps
        shape = (len(steps), self.size, self.size, shapes)
        self.energies = np.zeros(shape)
        self.strain = np.zeros(shape)
        self.unknown = np.zeros(shape, dtype=np.uint64)
        self.used = {number: number < 6 for number in range(len(steps))}

    def add_constant(self, shape: int, value: float) -> None:
        """A price every pattern pays in a shape."""
        self.energies[0, :, :, shape] += value

    def add_single(
        self, shape: int, column: int, values: Floats, unknown: NDArray[np.uint64], thirds: int, *, strain: bool
    ) -> None:
        """A price of one site, in the table of its place and the next."""
        place, face = divmod(column, 2)
        groups = self.upper_lower[face]
        self.energies[place, :, :, shape] += values[groups][:, None]
        if strain:
            self.strain[place, :, :, shape] += np.where(self.heavy, values, 0.0)[groups][:, None]
        self.unknown[place, :, :, shape] += (unknown[groups] * np.uint64(thirds))[:, None]

    def add_pair(self, meeting: Meeting, values: Floats, unknown: NDArray[np.uint64], strain: Floats | None) -> None:
        """A price of two sites, and what of it counts as strain."""
        shape = meeting.shape
        (a, face_a), (b, face_b) = divmod(meeting.first, 2), divmod(meeting.second, 2)
        groups_a, groups_b = self.upper_lower[face_a], self.upper_lower[face_b]
        if a == b:
            self.energies[a, :, :, shape] += values[groups_a, groups_b][:, None]
            self.unknown[a, :, :, shape] += (unknown[groups_a, groups_b] * np.uint64(3))[:, None]
            return
        turned = (a, b) not in self.numbers
        number = self.numbers[(b, a) if turned else (a, b)]
        grid = np.ix_(groups_a, groups_b)
        for target, block in (
            (self.energies, values[grid]),
            (self.unknown, unknown[grid] * np.uint64(3)),
            (self.strain, None if strain is None else strain[grid]),
        ):
            if block is not None:
                target[number, :, :, shape] += block.T if turned else block
        self.used[number] = True

    def finish(self, *, strain: bool) -> Priced:
        """The tables, those without an entry left out."""
        kept = [number for number, used in self.used.items() if used and (number < 6 or self._has_entries(number))]
        energies = np.concatenate((self.energies, self.strain), axis=3) if strain else self.energies
        flat = (len(kept), self.size * self.size, -1)
        return Priced(
            np.array([self.pairs[number] for number in kept], dtype=np.intp),
            np.ascontiguousarray(energies[kept].reshape(flat)),
            np.ascontiguousarray(self.unknown[kept].reshape(flat)) if self.unknown.any() else None,
        )

    def _has_entries(self, number: int) -> bool:
        return bool(self.energies[number].any() or self.unknown[number].any())
