"""A branch of the graph turned into a group the price tables know.

A branch starts at the neighbour of a ring atom and stops at the ring atoms of the system.  Its code is a
number that depends on constitution and side-chain configuration only, so that equal groups have equal codes
however the molecule was written.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

from ringstrain.structure.records import Structure
from ringstrain.tables.groups import Group, is_polar_kind, is_round_kind
from ringstrain.tables.records import Tables

_HALOGENS = frozenset({9, 17, 35, 53, 85})
_MAYBE_THREEFOLD = frozenset({"tertiary alkyl", "silyl", "germyl", "stannyl"})
_ALKYL = frozenset({"primary alkyl", "secondary alkyl", "tertiary alkyl"})


def describe_group(structure: Structure, first: int, ring_atom: int, system: frozenset[int], tables: Tables) -> Group:
    """The group that hangs at ``ring_atom`` through ``first``.

    Parameters
    ----------
    structure
        The molecule.
    first
        First atom of the branch.
    ring_atom
        Ring atom it hangs on.
    system
        Ring atoms of the system; the branch stops there.
    tables
        Price tables.

    Returns
    -------
    Group
        With its table key when the tables know the group.
    """
    inside = first in system
    if inside:
        kind = classify(structure, first, ring_atom)
        code = hash((7, structure.atoms[first].number, structure.atoms[first].hydrogens))
        symbol = structure.atoms[first].element
        hydrogens = structure.atoms[first].hydrogens
        label = f"ring {symbol}" + ("" if not hydrogens else "H" if hydrogens == 1 else f"H{hydrogens}")
        return _group(structure, first, label, code, code, kind, tabulated=False, ring_atom=True)
    if is_oxo(structure, first, ring_atom):
        code = hash((8, 2))
        return _group(structure, first, "oxo", code, code, "oxo", tabulated=True)
    code, mirror, members = branch_code(structure, first, ring_atom, system)
    index, known = _group_index(tables)
    key = index.get(code) or index.get(mirror)
    if key is not None and (code, mirror) in known:
        return known[code, mirror]
    kind = classify(structure, first, ring_atom)
    if key is not None:
        known[code, mirror] = group = _group(structure, first, key, code, mirror, kind, tabulated=True)
        return group
    plain, _, _ = branch_code(structure, first, ring_atom, system, stereo=False, isotopes=False)
    key = index.get(plain)
    size = next((len(r) for r in structure.rings if first in r and ring_atom in r), 0)
    label = key or (f"{kind} in a {size}-ring" if size else f"{kind} {_formula(structure, members)}")
    return _group(structure, first, label, code, mirror, kind, tabulated=key is not None)


def is_oxo(structure: Structure, first: int, root: int) -> bool:
    """True for a terminal oxygen doubly bound, or singly with a charge to a positive sulfur or phosphorus."""
    atom = structure.atoms[first]
    if atom.number != 8 or len(structure.neighbours[first]) > 1:
        return False
    ylide = atom.charge < 0 and structure.atoms[root].charge > 0 and structure.atoms[root].number in (15, 16)
    return structure.bond(first, root).order == 2 or ylide


def _group(
    structure: Structure,
    first: int,
    label: str,
    code: int,
    mirror: int,
    kind: str,
    *,
    tabulated: bool,
    ring_atom: bool = False,
) -> Group:
    """The record, with the properties its first atom decides."""
    atom = structure.atoms[first]
    threefold = kind in _MAYBE_THREEFOLD and _is_threefold(structure, first)
    halogenated = kind in _ALKYL and _halogens_on(structure, first) >= 2
    return _shared(
        label, code, mirror, kind, atom.number, atom.hydrogens > 0, threefold, halogenated, tabulated, ring_atom
    )


@lru_cache(maxsize=4096)
def _shared(
    label: str,
    code: int,
    mirror: int,
    kind: str,
    number: int,
    bears_hydrogen: bool,
    threefold: bool,
    halogenated: bool,
    tabulated: bool,
    ring_atom: bool,
) -> Group:
    """One shared record for all groups that are alike."""
    return Group(
        key=label,
        code=code,
        mirror_code=mirror,
        kind=kind,
        tabulated=tabulated,
        round=is_round_kind(kind) or threefold,
        polar=is_polar_kind(kind) or halogenated,
        donor=number in (7, 8) and bears_hydrogen and kind in ("oxy", "amino", "amido"),
        acceptor=number in (7, 8) and kind in ("oxy", "amino", "acyloxy", "silyloxy"),
        ring_atom=ring_atom,
    )


def _halogens_on(structure: Structure, atom: int) -> int:
    return sum(structure.atoms[n].number in _HALOGENS for n in structure.neighbours[atom])


def _is_threefold(structure: Structure, atom: int) -> bool:
    """True when the three outer neighbours are alike (tert-butyl, trifluoromethyl, trimethylsilyl)."""
    ends = [
        (structure.atoms[n].number, structure.atoms[n].hydrogens, len(structure.neighbours[n]))
        for n in structure.neighbours[atom]
    ]
    return len(ends) == 4 and max(ends.count(end) for end in ends) >= 3


def classify(structure: Structure, first: int, root: int) -> str:
    """Class of a group by its first atom and what that atom carries.

    Returns
    -------
    str
        A key of :data:`ringstrain.tables.groups.FAMILIES`.
    """
    atom = structure.atoms[first]
    outer = [n for n in structure.neighbours[first] if n != root and not structure.atoms[n].is_hydrogen]
    doubles = [n for n in outer if structure.bond(first, n).order == 2]
    number = atom.number
    if number == 1:
        return "hydrogen"
    if structure.bond(first, root).order == 2 and not structure.bond(first, root).aromatic:
        return "ylidene"
    if number == 6:
        return _classify_carbon(structure, first, outer, doubles)
    if number in _HALOGENS:
        return "halogen"
    if number == 7:
        return _classify_nitrogen(structure, first, outer, doubles)
    if number == 8:
        return _classify_oxygen(structure, outer)
    if number in (16, 34, 52):
        oxo = sum(structure.atoms[n].number in (7, 8) and len(structure.neighbours[n]) == 1 for n in outer)
        return "sulfanyl" if not oxo and len(outer) <= 1 else "sulfinyl" if oxo == 1 else "sulfonyl" if oxo else "other"
    if number == 15:
        if doubles:
            return "phosphoryl"
        return "phosphonio" if atom.charge > 0 else "phosphanyl"
    return {14: "silyl", 32: "germyl", 50: "stannyl", 5: "boryl"}.get(number, "other")


def _classify_carbon(structure: Structure, first: int, outer: Sequence[int], doubles: Sequence[int]) -> str:
    """Class of a carbon group."""
    if structure.atoms[first].aromatic:
        return "aryl"
    orders = [structure.bond(first, n).order for n in outer]
    if 3 in orders or orders.count(2) > 1:
        return "linear carbon"
    if doubles:
        return "acyl" if structure.atoms[doubles[0]].number in (7, 8, 16) else "alkenyl"
    return ("methyl", "primary alkyl", "secondary alkyl", "tertiary alkyl")[min(len(outer), 3)]


def _classify_nitrogen(structure: Structure, first: int, outer: Sequence[int], doubles: Sequence[int]) -> str:
    """Class of a nitrogen group."""
    oxygens = [n for n in outer if structure.atoms[n].number == 8 and len(structure.neighbours[n]) == 1]
    if len(oxygens) == 2:
        return "nitro"
    if doubles or any(structure.bond(first, n).order == 3 for n in outer):
        return "linear carbon" if any(structure.bond(first, n).order == 3 for n in outer) else "imino"
    if structure.atoms[first].charge > 0:
        return "ammonio"
    for n in outer:
        far = [m for m in structure.neighbours[n] if m != first and structure.bond(n, m).order == 2]
        if far and structure.atoms[n].number in (6, 15, 16) and structure.atoms[far[0]].number in (7, 8, 16):
            return "amido"
    return "amino"


def _classify_oxygen(structure: Structure, outer: Sequence[int]) -> str:
    """Class of an oxygen group."""
    if not outer:
        return "oxy"
    n = outer[0]
    if structure.atoms[n].number == 14:
        return "silyloxy"
    orders = [structure.bond(n, m).order for m in structure.neighbours[n]]
    if structure.atoms[n].number in (6, 7, 15, 16) and 2 in orders and not structure.atoms[n].aromatic:
        ends = [m for m in structure.neighbours[n] if structure.bond(n, m).order == 2]
        if any(structure.atoms[m].number in (7, 8, 16) for m in ends):
            return "acyloxy"
    return "oxy"


def _formula(structure: Structure, members: list[int]) -> str:
    """Hill formula of a branch."""
    counts: dict[str, int] = {}
    for member in members:
        atom = structure.atoms[member]
        counts[atom.element] = counts.get(atom.element, 0) + 1
        if atom.hydrogens:
            counts["H"] = counts.get("H", 0) + atom.hydrogens
    order = sorted(counts, key=lambda e: (e != "C", e != "H", e))
    return "".join(element + (str(counts[element]) if counts[element] > 1 else "") for element in order)


def branch_members(structure: Structure, first: int, system: frozenset[int], *, isotopes: bool = True) -> list[int]:
    """Atoms of a branch, first atom first; without isotopic hydrogens when these do not count."""
    seen = {first}
    members = [first]
    for atom in members:
        for n in structure.neighbours[atom]:
            if n not in seen and n not in system and (isotopes or not structure.atoms[n].is_hydrogen):
                seen.add(n)
                members.append(int(n))
    return members


def branch_code(
    structure: Structure,
    first: int,
    ring_atom: int,
    system: frozenset[int],
    *,
    stereo: bool = True,
    isotopes: bool = True,
) -> tuple[int, int, list[int]]:
    """Code of a branch, code of its mirror image, and its atoms.

    Equal branches have equal codes: colours are refined over the branch until no more classes appear, then
    the configurations are mixed in. With ``isotopes`` false labels are ignored, D and T counted as hydrogens.
    """
    members = branch_members(structure, first, system, isotopes=isotopes)
    if len(members) == 1:
        code = hash((_own_colour(structure, first, isotopes), 1))
        return code, code, members
    inside = set(members)
    colours = {a: hash((_own_colour(structure, a, isotopes), a == first)) for a in members}
    links = {
        a: [
            (structure.bond(a, n).order if not structure.bond(a, n).aromatic else 4, int(n))
            for n in structure.neighbours[a]
        ]
        for a in members
    }
    colours = _refine(colours, links, inside, ring_atom)
    plain = hash((colours[first], tuple(sorted(colours.values()))))
    tagged = [a for a in members if structure.configurations[a] is not None] if stereo else []
    if not tagged:
        return plain, plain, members
    codes = []
    for mirror in (1, -1):
        marked = dict(colours)
        for a in tagged:
            sign = _local_sign(structure, a, colours, ring_atom)
            marked[a] = hash((colours[a], sign * mirror))
        marked = _refine(marked, links, inside, ring_atom)
        codes.append(hash((marked[first], tuple(sorted(marked.values())))))
    return codes[0], codes[1], members


def _own_colour(structure: Structure, atom: int, isotopes: bool = True) -> int:
    """What an atom is by itself."""
    a = structure.atoms[atom]
    degree = len(structure.neighbours[atom])
    if isotopes:
        return hash((a.number, a.charge, a.isotope, a.hydrogens, a.aromatic, degree))
    heavy = sum(not structure.atoms[n].is_hydrogen for n in structure.neighbours[atom])
    return hash((a.number, a.charge, 0, a.hydrogens + degree - heavy, a.aromatic, heavy))


def _refine(
    colours: dict[int, int], links: dict[int, list[tuple[int, int]]], inside: set[int], ring_atom: int
) -> dict[int, int]:
    """Colours refined by those of the neighbours until the number of classes stops growing."""
    classes = 0
    for _ in range(len(colours) + 1):
        fresh = {}
        for atom, own in colours.items():
            around = sorted(
                hash((order, colours[n] if n in inside else 1 if n == ring_atom else 2)) for order, n in links[atom]
            )
            fresh[atom] = hash((own, tuple(around)))
        count = len(set(fresh.values()))
        colours = fresh
        if count == classes:
            break
        classes = count
    return colours


def _local_sign(structure: Structure, atom: int, colours: dict[int, int], ring_atom: int) -> int:
    """Handedness of a configuration with its neighbours ordered by colour; 0 when two are alike."""
    configuration = structure.configurations[atom]
    if configuration is None:
        return 0
    ranked = sorted(
        configuration.neighbours,
        key=lambda n: (3, 0) if n < 0 else (0, 0) if n == ring_atom else (1, colours.get(n, 0)),
    )
    values = [None if n < 0 else colours.get(n, -1) for n in configuration.neighbours]
    if len(set(values)) < len(values):
        return 0
    return configuration.handedness(tuple(ranked))


@dataclass(frozen=True, slots=True)
class _Probe:
    """A tabulated group grafted on nothing: its structure, first atom and dummy."""

    structure: Structure
    first: int
    dummy: int


@lru_cache(maxsize=8)
def _group_index(tables: Tables) -> tuple[dict[int, str], dict[tuple[int, int], Group]]:
    """Table key of every tabulated group by its code, and the records of those met so far."""
    index: dict[int, str] = {}
    for entry in tables.groups:
        probe = _probe(entry.smiles)
        code, mirror, _ = branch_code(probe.structure, probe.first, probe.dummy, frozenset((probe.dummy,)))
        index.setdefault(code, entry.key)
        index.setdefault(mirror, entry.key)
    return index, {}


def _probe(smiles: str) -> _Probe:
    """A group SMILES such as ``*C(C)C`` read with its dummy."""
    from ringstrain.structure.read import read_group

    structure, dummy = read_group(smiles)
    return _Probe(structure, int(structure.neighbours[dummy][0]), dummy)
