"""What a state looks like in words: which groups stand where, which states are one ring form."""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.analysis import State, SystemResult
from ringstrain.views.words import listed, number, plural, spoken

AXIAL, EQUATORIAL, ISOCLINAL = "axial", "equatorial", "isoclinal"
MIXED = "axial to one ring and equatorial to the other"
_ORDER = (EQUATORIAL, AXIAL, ISOCLINAL, MIXED)


@dataclass(frozen=True, slots=True)
class Standing:
    """One substituent of a ring system in a state: its atom, table key, spoken name and position."""

    atom: int
    key: str
    word: str
    position: str


def standings(result: SystemResult, state: State) -> tuple[Standing, ...]:
    """Where each substituent stands, in atom order; neighbouring rings are not substituents."""
    positions: dict[int, set[str]] = {}
    homes: dict[int, int] = {}
    for atom, ring_atom, _, position in state.sites:
        positions.setdefault(atom, set()).add(position)
        homes[atom] = ring_atom
    rings = result.system.atom_set.union(*result.system.companions)
    found = []
    for atom in sorted(positions):
        if atom in rings:
            continue
        group = result.groups[(homes[atom], atom)]
        word = spoken(group.key, group.kind)
        if state.detail.shapes.geometry.structure.atoms[homes[atom]].element == "N":
            word = f"N-{word}"
        where = next(iter(positions[atom])) if len(positions[atom]) == 1 else MIXED
        found.append(Standing(atom, group.key, word, where))
    return tuple(found)


def describe(result: SystemResult, state: State, *, anonymous: bool = False) -> str:
    """Which groups are axial and which equatorial, as a clause.

    Parameters
    ----------
    result, state
        What to describe.
    anonymous
        True to leave atom numbers out where several groups have one name (equivalent forms).
    """
    groups = standings(result, state)
    cases = [(place, [g for g in groups if g.position == place]) for place in _ORDER]
    cases = [(place, members) for place, members in cases if members]
    atoms_of = state.detail.shapes.geometry.structure.atoms
    hydrogens = [f"N-H {position}" for atom, position in state.nitrogen if atoms_of[atom].hydrogens]
    if len(cases) == 1:
        place, members = cases[0]
        return ", ".join([_uniform(members, place), *hydrogens])
    shared = {g.word for g in groups if len({h.position for h in groups if h.word == g.word}) > 1}
    clauses = []
    for place, members in cases:
        rest = len(groups) - len(members)
        if len(members) > 3 and 0 < rest <= 3:
            clauses.append((len(members), f"the other {number(len(members))} groups {place}"))
        else:
            clauses.append((0, f"{_named(members, shared, anonymous)} {place}"))
    clauses.sort(key=lambda clause: clause[0] > 0)
    return ", ".join([listed([text for _, text in clauses]), *hydrogens]) if clauses else listed(hydrogens)


def _uniform(members: list[Standing], place: str) -> str:
    """All groups in one kind of place."""
    words = [m.word for m in members]
    count = len(words)
    if count == 1:
        return f"{words[0]} {place}"
    if len(set(words)) == 1:
        lead = "both" if count == 2 else f"all {number(count)}"
        return f"{lead} {plural(words[0])} {place}"
    return f"{_named(members, set(), False)} {'both' if count == 2 else 'all'} {place}"


def _named(members: list[Standing], shared: set[str], anonymous: bool) -> str:
    """Names of groups, equal ones counted; atoms added where the same name stands elsewhere too."""
    table: dict[str, list[int]] = {}
    for member in members:
        table.setdefault(member.word, []).append(member.atom)
    parts = []
    for word, atoms in table.items():
        if word in shared and not anonymous:
            noun = word if len(atoms) == 1 else f"{number(len(atoms))} {plural(word)}"
            where = ", ".join(str(a + 1) for a in atoms)
            parts.append(f"{noun} (atom{'s' if len(atoms) > 1 else ''} {where})")
        elif len(atoms) == 1:
            parts.append(f"one {word}" if word in shared else word)
        else:
            parts.append(f"{number(len(atoms))} {plural(word)}")
    return listed(parts)


def form_name(state: State, *, bare: bool = False) -> str:
    """What to call a state: Chair A, Half-chair B, Form A (both rings chairs).

    Parameters
    ----------
    state
        The state.
    bare
        True to leave the shapes of several rings out.
    """
    if len(state.shapes) == 1:
        return f"{state.shapes[0].capitalize()} {state.id}"
    return f"Form {state.id}" if bare else f"Form {state.id} ({shape_words(state)})"


def shape_words(state: State) -> str:
    """Shapes of all rings in a few words."""
    shapes = state.shapes
    if len(shapes) == 1:
        return shapes[0]
    if len(set(shapes)) == 1:
        return f"{'both' if len(shapes) == 2 else f'all {number(len(shapes))}'} rings {shapes[0]}s"
    return listed([shapes_of_kind(shapes.count(kind), kind) for kind in dict.fromkeys(shapes)])


def shapes_of_kind(count: int, kind: str) -> str:
    """Some rings of one shape."""
    return f"one {kind}" if count == 1 else f"{number(count)} {kind}s"


def same_form(result: SystemResult, state: State) -> tuple[State, ...]:
    """States that are the same ring form: symmetry copies and N-invertomers of a state, itself included."""
    carrying = {ring for atom, _, ring, _ in state.sites if atom not in result.system.atom_set}
    carrying.update(number for block in result.system.blocks if len(block) > 1 for number in block)
    watched = sorted(carrying) or range(len(result.rings))

    def shape(other: State) -> tuple[object, ...]:
        return tuple(other.detail.shapes.rings[number] for number in watched)

    own = shape(state)
    members = {s.id for s in result.states if shape(s) == own}
    members.update(s.id for s in result.states if s.equivalent_to in members)
    return tuple(s for s in result.states if s.id in members)


def is_flip(result: SystemResult, first: State, second: State) -> bool:
    """True when every chair and half-chair ring of one state is turned over in the other."""
    pairs = zip(first.detail.shapes.rings, second.detail.shapes.rings, strict=True)
    return all(
        a.shape == b.shape and all(x == -y for x, y in zip(a.torsions, b.torsions, strict=True)) for a, b in pairs
    )
