"""Which states a published chair equilibrium calls A and which B.

The orientation cell names groups and where they point, e.g. ``A: OH eq, OMe eq; B: OH ax, OMe ax``.  A name is a
group key or alias, with a ring number where it is needed (``OAc-1``, ``6-Me``, ``O4`` for the group on position
4), with its ring atom (``N-Me``, ``S=O``, ``N-H``), or a ring atom seen from a fused ring (``N ax on the
carbocycle``).  A name no table knows may stand for any group.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from ringstrain.analysis import State, SystemResult
from ringstrain.structure.records import Structure
from ringstrain.tables import Tables

_SIDES = re.compile(r"A: (?P<a>.*?); B: (?P<b>.*)$", re.DOTALL)
_PLACE = re.compile(
    r"(?P<both>both )?(?P<name>[A-Za-z0-9()=+#-]+) (?P<where>ax|eq)\b(?: on the (?P<ring>carbocycle|N ring))?"
)
_SHARED = re.compile(r"\((?P<shared>same ring chair[^)]*)\)")
_POSITIONS = {"ax": "axial", "eq": "equatorial"}


@dataclass(frozen=True, slots=True)
class Wanted:
    """One group of an orientation and where it points.

    Attributes
    ----------
    name
        As written.
    position
        ``"axial"`` or ``"equatorial"``.
    ring
        ``"carbocycle"`` or ``"N ring"`` when it matters in which ring, else empty.
    """

    name: str
    position: str
    ring: str = ""


@dataclass(frozen=True, slots=True)
class Form:
    """What one side of an orientation asks for: groups, and the shape of the ring."""

    groups: tuple[Wanted, ...]
    twist_boat: bool = False


@dataclass(frozen=True, slots=True)
class _Place:
    """An occupied site of a state, as the names see it."""

    atom: int
    ring_atom: int
    ring: int
    position: str
    key: str


@dataclass(frozen=True, slots=True)
class _Numbers:
    """Position numbers of ring atoms: systematic ones (heteroatom 1) and those of sugars (anomeric carbon 1)."""

    systematic: dict[int, frozenset[int]]
    sugar: dict[int, frozenset[int]]

    def allow(self, place: _Place, number: int, *, sugar: bool) -> bool:
        """True when a ring atom bears this number, or when the ring has no numbers."""
        table = (self.sugar or self.systematic) if sugar else self.systematic
        return not table or number in table.get(place.ring_atom, frozenset())


def parse_orientation(text: str) -> tuple[Form, Form]:
    """Both sides of an orientation cell.

    Parameters
    ----------
    text
        The cell.

    Returns
    -------
    tuple of Form
        A and B.

    Raises
    ------
    ValueError
        If it does not name both sides.

    Examples
    --------
    >>> parse_orientation("A: Me eq; B: Me ax")[1].groups
    (Wanted(name='Me', position='axial', ring=''),)
    """
    found = _SIDES.search(text)
    if found is None:
        raise ValueError(f"{text!r} does not name A and B")
    shared = _SHARED.search(text)
    extra = _wanted(shared["shared"]) if shared else ()
    sides = []
    for part in (found["a"], found["b"]):
        own = _wanted(_SHARED.sub("", part))
        twist = part.startswith("twist-boat")
        if not own and not twist:
            raise ValueError(f"{part!r} names no group with ax or eq")
        sides.append(Form((*own, *extra), twist))
    return sides[0], sides[1]


def _wanted(text: str) -> tuple[Wanted, ...]:
    wanted: list[Wanted] = []
    for found in _PLACE.finditer(text):
        item = Wanted(found["name"], _POSITIONS[found["where"]], found["ring"] or "")
        wanted.extend([item] * (2 if found["both"] else 1))
    return tuple(wanted)


def matching_states(structure: Structure, result: SystemResult, form: Form, tables: Tables) -> tuple[State, ...]:
    """States of a ring system that one side of an orientation describes.

    Parameters
    ----------
    structure
        The molecule.
    result
        Its states.
    form
        What is asked for.
    tables
        Group names.

    Returns
    -------
    tuple of State
        Symmetry copies and N-invertomers included; chairs and half-chairs unless a twist-boat is asked for.
    """
    numbers = _ring_numbers(structure, result)
    found = []
    for state in result.states:
        twisted = "twist-boat" in state.shapes or "boat" in state.shapes
        if twisted == form.twist_boat and _fits(structure, result, state, form, tables, numbers):
            found.append(state)
    return tuple(found)


def _fits(
    structure: Structure,
    result: SystemResult,
    state: State,
    form: Form,
    tables: Tables,
    numbers: _Numbers,
) -> bool:
    """True when every wanted group finds a site of its own that points the right way."""
    places = [
        _Place(atom, ring_atom, ring, position, result.groups[(ring_atom, atom)].key)
        for atom, ring_atom, ring, position in state.sites
        if atom >= 0 and (ring_atom, atom) in result.groups
    ]
    options: list[list[int]] = []
    for wanted in form.groups:
        if wanted.name == "N-H":
            if wanted.position not in dict(state.nitrogen).values():
                return False
            continue
        options.append(
            [
                i
                for i, place in enumerate(places)
                if place.position == wanted.position and _is_called(structure, result, place, wanted, tables, numbers)
            ]
        )
    return _assign(options, frozenset())


def _assign(options: Sequence[Sequence[int]], used: frozenset[int]) -> bool:
    """True when each list can give up one entry of its own."""
    if not options:
        return True
    return any(_assign(options[1:], used | {i}) for i in options[0] if i not in used)


def _is_called(
    structure: Structure, result: SystemResult, place: _Place, wanted: Wanted, tables: Tables, numbers: _Numbers
) -> bool:
    """True when a wanted name can mean the group on this site."""
    members = result.system.atom_set
    element = structure.atoms[place.atom].element
    name = wanted.name
    if wanted.ring or name == "N" or (place.atom in members and re.fullmatch(r"C\d", name)):
        return place.atom in members and _is_fused_neighbour(structure, result, place, wanted)
    if place.atom in members:
        return False
    numbered = re.fullmatch(r"([OC])(\d)", name)
    if numbered:
        # O4 is the oxygen on position 4, C6 the carbon on position 5.
        number = int(numbered[2]) - (1 if numbered[1] == "C" else 0)
        return element == numbered[1] and numbers.allow(place, number, sugar=True)
    if name == "S=O":
        return element == "O" and structure.atoms[place.ring_atom].element == "S"
    on_atom = re.fullmatch(r"([NP])-(.+)", name)
    if on_atom:
        if structure.atoms[place.ring_atom].element != on_atom[1]:
            return False
        name = on_atom[2]
    before, after = re.fullmatch(r"(\d)-(.+)", name), re.fullmatch(r"(.+)-(\d)", name)
    if before:
        if not numbers.allow(place, int(before[1]), sugar=False):
            return False
        name = before[2]
    elif after:
        if not numbers.allow(place, int(after[2]), sugar=True):
            return False
        name = after[1]
    entry = tables.find_group(name)
    return entry is None or entry.key == place.key


def _is_fused_neighbour(structure: Structure, result: SystemResult, place: _Place, wanted: Wanted) -> bool:
    """True for the named atom of the other ring of decahydroquinoline, whose numbers the names use."""
    ring = result.system.rings[place.ring].atoms
    with_nitrogen = any(structure.atoms[a].element == "N" for a in ring)
    if wanted.ring and with_nitrogen != (wanted.ring == "N ring"):
        return False
    element = structure.atoms[place.atom].element
    if wanted.name == "N":
        return element == "N"
    beside_nitrogen = any(structure.atoms[n].element == "N" for n in structure.neighbours[place.ring_atom])
    return element == "C" and beside_nitrogen == (wanted.name == "C8")


def _ring_numbers(structure: Structure, result: SystemResult) -> _Numbers:
    """Position numbers of the atoms of a lone ring with one heteroatom; none for other rings."""
    nothing = _Numbers({}, {})
    if len(result.system.rings) != 1:
        return nothing
    ring = result.system.rings[0].atoms
    hetero = [a for a in ring if structure.atoms[a].element != "C"]
    if len(hetero) != 1:
        return nothing
    start = ring.index(hetero[0])
    walks = [[ring[(start + step * i) % 6] for i in range(6)] for step in (1, -1)]
    locants = [
        sorted(i + 1 for i, atom in enumerate(walk) for n in structure.neighbours[atom] if n not in ring)
        for walk in walks
    ]
    best = [walk for walk, places in zip(walks, locants, strict=True) if places == min(locants)]
    systematic = {atom: frozenset(walk.index(atom) + 1 for walk in best) for atom in ring}
    anomeric = [walk for walk in walks if _outer_hetero(structure, walk[1], ring)]
    sugar = {atom: frozenset({i}) for i, atom in enumerate(anomeric[0]) if i} if len(anomeric) == 1 else {}
    return _Numbers(systematic, sugar)


def _outer_hetero(structure: Structure, atom: int, ring: tuple[int, ...]) -> bool:
    """True when a ring carbon bears oxygen, nitrogen, sulfur or halogen."""
    return any(
        n not in ring and structure.atoms[n].element in ("N", "O", "S", "F", "Cl", "Br", "I")
        for n in structure.neighbours[atom]
    )
