"""The open places of a ring, its symmetry, and every way to put groups on them once.

A scaffold has slots, one for each hydrogen that a group may replace: two on a carbon, one on a nitrogen.  Its
symmetry operations permute the slots; a pattern is kept when none of its images has a lower number.
"""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import combinations, combinations_with_replacement
from math import comb, factorial
from typing import TYPE_CHECKING

import numpy as np

from ringstrain._kernels import keep_first_images
from ringstrain.analysis import group_map
from ringstrain.errors import InputError, UsageError
from ringstrain.geometry import Geometry, Site
from ringstrain.ringgraph import RingSystem, find_ring_systems
from ringstrain.stereo import resolve
from ringstrain.structure.read import read
from ringstrain.structure.records import Configuration, Structure
from ringstrain.structure.shorthand import PARENT_RINGS
from ringstrain.symmetry import operations

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from ringstrain.tables import Tables

#: More labelled placements than this in one call are refused.
MAX_PLACEMENTS = 5_000_000
_CHUNK = 100_000
_MARK = re.compile(r":(\d+)\]$")
_RING_SMILES = {"C": "C", "N": "N", "O": "O", "S": "S", "Si": "[SiH2]"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Slot:
    """One place for a group.

    Attributes
    ----------
    atom
        Ring atom, zero-based.
    locant
        Number a chemist gives the ring atom: its position in a parent ring, its mark in a scaffold.
    face
        +1 up, -1 down, 0 where the group swings (ring nitrogen) or lies in the plane.
    hidden
        Stand-in for the hydrogen in the neighbour order of the atom.
    column
        Place of the slot among the twelve of a single ring: twice the place of the atom, one more on the lower face.
    """

    atom: int
    locant: int
    face: int
    hidden: int
    column: int


@dataclass(frozen=True, kw_only=True)
class Scaffold:
    """A ring system that groups are put on.

    Attributes
    ----------
    name
        Parent ring, or the SMILES it came from.
    structure, system, geometry
        The bare ring system.
    slots
        Places for groups, in order of their ring atoms, the upper face first.
    permutations
        Image of every slot under each symmetry operation, ``(operations, slots)``.
    signs
        +1 for a proper operation, -1 for one that reverses handedness.
    turns
        Image of each place of the first ring under each operation, ``(operations, 6)``.
    direction
        +1 when upper faces are the geometry's positive ones, else -1.
    is_parent
        True for a bare saturated ring of :data:`PARENT_RINGS`.
    """

    name: str
    structure: Structure
    system: RingSystem
    geometry: Geometry
    slots: tuple[Slot, ...]
    permutations: NDArray[np.intp]
    signs: NDArray[np.int8]
    turns: NDArray[np.intp]
    direction: int
    is_parent: bool

    @cached_property
    def partners(self) -> tuple[int, ...]:
        """For each slot the other one on its atom, or -1."""
        at: dict[int, list[int]] = {}
        for number, slot in enumerate(self.slots):
            at.setdefault(slot.atom, []).append(number)
        return tuple(
            next((other for other in at[slot.atom] if other != number), -1) for number, slot in enumerate(self.slots)
        )

    def configuration(self, atom: int, heads: dict[int, int]) -> Configuration | None:
        """Configuration of a ring atom with groups (first atom by slot number) in place of its hydrogens."""
        order = self.geometry.orders.get(atom)
        if order is None or self.system.kinds[atom] == "inverting":
            return None
        taken = {self.slots[number].hidden: head for number, head in heads.items() if self.slots[number].atom == atom}
        around = [taken.get(n, n) for n in order]
        hidden = [n for n in around if n < 0]
        if len(hidden) > 1:
            return None
        return Configuration(tuple(-1 if n < 0 else n for n in around), True)  # type: ignore[misc]


def make_scaffold(ring: str, tables: Tables) -> Scaffold:
    """The scaffold of a parent ring or of a SMILES with marked positions.

    Parameters
    ----------
    ring
        Key of :data:`PARENT_RINGS`, or a SMILES whose open positions carry atom maps: ``[CH2:1]1[CH2:2]CCCC1=O``.
    tables
        Price tables, which name the groups it already has.

    Returns
    -------
    Scaffold
        With its slots and symmetry.

    Raises
    ------
    UsageError
        If the name is unknown or no position is marked.
    InputError
        If the SMILES cannot be used or a marked atom has no hydrogen or is no ring atom.
    OutOfScope
        If the model does not cover the ring.
    """
    elements = PARENT_RINGS.get(ring)
    if elements is None and ring.replace("-", "").isalnum() and "1" not in ring:
        raise UsageError(
            f"No ring is called {ring!r}.",
            f"Choose one of {', '.join(PARENT_RINGS)}, or give a SMILES with marked positions: [CH2:1]1CCCCC1=O.",
        )
    structure = read(_parent_smiles(elements) if elements else ring)
    systems, _ = find_ring_systems(structure)
    marks = {i: i + 1 for i in range(6)} if elements else _marks(structure)
    system = next((s for s in systems if s.atom_set.issuperset(marks)), None)
    if system is None or not marks:
        raise UsageError(
            "The marked positions are not all in one ring system."
            if marks
            else "No position of the scaffold is marked.",
            "Mark ring atoms that may take a group with a number: [CH2:1]1[CH2:2]CCCC1=O.",
        )
    groups = group_map(structure, system, tables)
    geometry = resolve(structure, system, groups).geometry
    direction = _direction(system)
    slots = _slots(structure, system, geometry, marks, direction, strict=elements is None)
    images, signs, turns = _slot_images(geometry, slots, groups, {s.atom for s in slots})
    return Scaffold(
        name=ring,
        structure=structure,
        system=system,
        geometry=geometry,
        slots=slots,
        permutations=images,
        signs=signs,
        turns=turns,
        direction=direction,
        is_parent=elements is not None,
    )


def _parent_smiles(elements: Sequence[str]) -> str:
    symbols = [_RING_SMILES[element] for element in elements]
    return symbols[0] + "1" + "".join(symbols[1:]) + "1"


def _marks(structure: Structure) -> dict[int, int]:
    """Atom maps of a SMILES by atom.

    Raises
    ------
    UsageError
        If two atoms carry the same number: a pattern would not tell them apart.
    """
    found: dict[int, int] = {}
    for atom, (start, end) in enumerate(structure.spans):
        mark = _MARK.search(structure.text[start:end])
        if mark:
            if int(mark.group(1)) in found.values():
                raise UsageError(
                    f"Two atoms of the scaffold are marked with {mark.group(1)}.",
                    "Give each its own number: [CH2:1]1[CH2:2]CCCC1=O.",
                )
            found[atom] = int(mark.group(1))
    return found


def _direction(system: RingSystem) -> int:
    """+1 when the positive faces of the first ring are the upper ones, lowest atoms running clockwise from above."""
    ring = system.rings[0].atoms
    place = ring.index(min(ring))
    forward = ring[(place + 1) % 6] < ring[place - 1]
    return 1 if forward else -1


def _slots(
    structure: Structure, system: RingSystem, geometry: Geometry, marks: dict[int, int], direction: int, *, strict: bool
) -> tuple[Slot, ...]:
    """Slots on the marked atoms."""
    found: list[Slot] = []
    for atom in sorted(marks):
        number = system.rings_of[atom][0]
        place = system.rings[number].place(atom)
        open_sites = [s for s in geometry.sites[number][place] if _is_hydrogen(structure, s)]
        if not open_sites and strict:
            raise InputError(
                f"Position {marks[atom]} of the scaffold has no hydrogen to replace.",
                "Mark another one.",
                atoms=(atom,),
            )
        if system.kinds[atom] == "inverting":
            open_sites = open_sites[:1]
        open_sites.sort(key=lambda s: -direction * s.face)
        for site in open_sites:
            swings = system.kinds[atom] == "inverting" or not site.face
            face = 0 if swings else direction * site.face
            column = 2 * place + (0 if site.face > 0 or swings else 1)
            found.append(Slot(atom=atom, locant=marks[atom], face=face, hidden=site.neighbour, column=column))
    return tuple(found)


def _is_hydrogen(structure: Structure, site: Site) -> bool:
    """True when a plain hydrogen stands on a site."""
    return site.neighbour < 0 and structure.atoms[site.ring_atom].hydrogens > -1 - site.neighbour


def _slot_images(
    geometry: Geometry, slots: tuple[Slot, ...], groups: object, marked: set[int]
) -> tuple[NDArray[np.intp], NDArray[np.int8], NDArray[np.intp]]:
    """Slot permutations of the operations that keep the set of marked atoms, and where the first ring lands."""
    system = geometry.system
    rows: dict[tuple[tuple[int, ...], int], tuple[int, ...]] = {}
    for operation in operations(geometry, groups):  # type: ignore[arg-type]
        carried = operation.mapping.images
        if {carried[a] for a in marked} != marked:
            continue
        row = []
        for slot in slots:
            number = system.rings_of[slot.atom][0]
            image = operation.mapping.rings[number]
            place = system.rings[number].place(slot.atom)
            face = next(s.face for s in geometry.sites[number][place] if s.neighbour == slot.hidden)
            target_place = image.places[place]
            target_atom = carried[slot.atom]
            wanted = operation.sign * image.direction * face
            targets = geometry.sites[image.ring][target_place]
            row.append(_slot_of(slots, target_atom, wanted, targets))
        rows.setdefault((tuple(row), operation.sign), operation.mapping.rings[0].places)
    ordered = sorted(rows, key=lambda item: (item[1] < 0, item[0]))
    images = np.array([row for row, _ in ordered], dtype=np.intp)
    signs = np.array([sign for _, sign in ordered], dtype=np.int8)
    return images, signs, np.array([rows[key] for key in ordered], dtype=np.intp)


def _slot_of(slots: tuple[Slot, ...], atom: int, face: int, targets: tuple[Site, ...]) -> int:
    """Number of the slot an operation lands on; the only slot of a nitrogen whatever the face."""
    mine = [number for number, slot in enumerate(slots) if slot.atom == atom]
    if len(mine) == 1:
        return mine[0]
    hidden = next(s.neighbour for s in targets if s.face == face)
    return next(number for number in mine if slots[number].hidden == hidden)


# ---- enumeration ---------------------------------------------------------------------------------------------


def count_placements(scaffold: Scaffold, multisets: Sequence[tuple[int, ...]]) -> int:
    """How many labelled placements there are before symmetry and filters [-]."""
    total = 0
    for chosen in multisets:
        ways = factorial(len(chosen))
        for group in set(chosen):
            ways //= factorial(chosen.count(group))
        total += comb(len(scaffold.slots), len(chosen)) * ways
    return total


def choose_multisets(groups: Sequence[int], sizes: range) -> list[tuple[int, ...]]:
    """Every multiset of the groups with a size in the range."""
    return [chosen for size in sizes for chosen in combinations_with_replacement(sorted(set(groups)), size)]


def place_groups(
    scaffold: Scaffold,
    multisets: Sequence[tuple[int, ...]],
    mirrors: Sequence[int],
    *,
    geminal: bool = True,
    enantiomers: bool = False,
) -> Iterator[NDArray[np.int16]]:
    """Every pattern once, in blocks of rows ``(patterns, slots)`` that hold group numbers, 0 for none.

    Parameters
    ----------
    scaffold
        Where to put them.
    multisets
        Group numbers from 1 of each composition.
    mirrors
        Number of the mirror image of each group, -1 when it is not among them; entry 0 is 0.
    geminal
        False to leave out patterns with two groups on one atom.
    enantiomers
        True to keep both of a pair of enantiomers.

    Raises
    ------
    UsageError
        If there are more than :data:`MAX_PLACEMENTS` placements or more groups than places.
    """
    total = count_placements(scaffold, multisets)
    if not total:
        raise UsageError(
            f"{scaffold.name} has {len(scaffold.slots)} places, fewer than the groups given.", "Give fewer groups."
        )
    if total > MAX_PLACEMENTS:
        raise UsageError(
            f"These groups can be placed in {total} ways; {MAX_PLACEMENTS} is the limit.",
            "Give fewer groups or a smaller --count.",
        )
    for chosen in multisets:
        orders = _distinct_orders(chosen)
        for rows in _blocks(scaffold, orders, geminal=geminal):
            kept = keep_first_images(
                rows, scaffold.permutations, scaffold.signs, np.asarray(mirrors), enantiomers=enantiomers
            )
            if kept.any():
                yield rows[kept]


def _distinct_orders(chosen: tuple[int, ...]) -> NDArray[np.int16]:
    """Distinct orders of a multiset, one a row."""
    rows: list[list[int]] = []
    counts = {group: chosen.count(group) for group in sorted(set(chosen))}

    def extend(prefix: list[int]) -> None:
        if len(prefix) == len(chosen):
            rows.append(list(prefix))
            return
        for group, left in counts.items():
            if left:
                counts[group] -= 1
                prefix.append(group)
                extend(prefix)
                prefix.pop()
                counts[group] += 1

    extend([])
    return np.array(rows, dtype=np.int16).reshape(len(rows), len(chosen))


def _blocks(scaffold: Scaffold, orders: NDArray[np.int16], *, geminal: bool) -> Iterator[NDArray[np.int16]]:
    """Labelled placements, some hundred thousand at a time."""
    count, size = len(scaffold.slots), orders.shape[1]
    partners = scaffold.partners
    step = max(1, _CHUNK // len(orders))
    batch: list[tuple[int, ...]] = []

    def fill() -> NDArray[np.int16]:
        rows = np.zeros((len(batch), len(orders), count), dtype=np.int16)
        places = np.array(batch, dtype=np.intp).reshape(len(batch), 1, size)
        np.put_along_axis(rows, np.broadcast_to(places, (len(batch), len(orders), size)), orders[None], axis=2)
        return rows.reshape(-1, count)

    for places in combinations(range(count), size):
        if not geminal and any(partners[p] in places for p in places):
            continue
        batch.append(places)
        if len(batch) == step:
            yield fill()
            batch.clear()
    if batch:
        yield fill()
