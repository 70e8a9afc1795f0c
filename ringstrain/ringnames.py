"""Names of rings and positions, as the price tables spell them."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

from ringstrain.ringgraph import Ring, RingSystem
from ringstrain.structure.records import Structure

#: Ring names by the pattern of their atoms from position 1; symbols as :func:`atom_symbol` gives them.
PATTERNS: dict[str, tuple[str, ...]] = {
    "cyclohexane": ("C", "C", "C", "C", "C", "C"),
    "oxane": ("O", "C", "C", "C", "C", "C"),
    "thiane": ("S", "C", "C", "C", "C", "C"),
    "thiane 1-oxide": ("S=O", "C", "C", "C", "C", "C"),
    "thianium": ("S+", "C", "C", "C", "C", "C"),
    "piperidine": ("NH", "C", "C", "C", "C", "C"),
    "n-methylpiperidine": ("NR", "C", "C", "C", "C", "C"),
    "piperidinium": ("NH+", "C", "C", "C", "C", "C"),
    "n,n-dimethylpiperidinium": ("NR+", "C", "C", "C", "C", "C"),
    "n-acylpiperidine": ("N=", "C", "C", "C", "C", "C"),
    "n-nitrosopiperidine": ("N-N=O", "C", "C", "C", "C", "C"),
    "phosphinane": ("P", "C", "C", "C", "C", "C"),
    "silacyclohexane": ("Si", "C", "C", "C", "C", "C"),
    "1,3,5-trisilacyclohexane": ("Si", "C", "Si", "C", "Si", "C"),
    "1,3-dioxane": ("O", "C", "O", "C", "C", "C"),
    "1,4-dioxane": ("O", "C", "C", "O", "C", "C"),
    "1,3-dithiane": ("S", "C", "S", "C", "C", "C"),
    "1,4-dithiane": ("S", "C", "C", "S", "C", "C"),
    "1,3-oxathiane": ("O", "C", "S", "C", "C", "C"),
    "1,3-oxathiane 3-oxide": ("O", "C", "S=O", "C", "C", "C"),
    "1,4-thiazane 1-oxide": ("S=O", "C", "C", "NH", "C", "C"),
    "morpholine": ("O", "C", "C", "NH", "C", "C"),
    "n-methylmorpholine": ("O", "C", "C", "NR", "C", "C"),
    "piperazine": ("NH", "C", "C", "NH", "C", "C"),
    "cyclohexanone": ("C=O", "C", "C", "C", "C", "C"),
    "1,4-cyclohexanedione": ("C=O", "C", "C", "C=O", "C", "C"),
    "methylenecyclohexane": ("C=C", "C", "C", "C", "C", "C"),
    "1,1-difluorocyclohexane": ("CF2", "C", "C", "C", "C", "C"),
    "cyclohexene": ("flat", "flat", "C", "C", "C", "C"),
    "tetralin": ("aromatic", "aromatic", "C", "C", "C", "C"),
    "cyclohexene oxide": ("bridged", "bridged", "C", "C", "C", "C"),
}
_TURNS = tuple(tuple((start + step * i) % 6 for i in range(6)) for start in range(6) for step in (1, -1))


@dataclass(frozen=True, slots=True)
class RingName:
    """What a ring is called and how its places are numbered.

    Attributes
    ----------
    name
        Key of :data:`PATTERNS`, or the pattern itself joined by dashes when the ring has no name there.
    symbols
        Symbol of each place in ring order.
    positions
        Position number of each place; places the ring's symmetry makes alike share the lower number.
    """

    name: str
    symbols: tuple[str, ...]
    positions: tuple[int, ...]

    @property
    def is_carbocycle(self) -> bool:
        """True for plain cyclohexane."""
        return self.name == "cyclohexane"


def atom_symbol(structure: Structure, system: RingSystem, ring: Ring, place: int) -> str:
    """Short symbol of a ring atom: element with what matters to prices."""
    atom = ring.atoms[place]
    record = structure.atoms[atom]
    if ring.kind == "half-chair" and ring.flat_bond is not None and place in (ring.flat_bond, (ring.flat_bond + 1) % 6):
        return _flat_symbol(structure, system, ring, atom)
    number = record.number
    outer = [n for n in structure.neighbours[atom] if n not in ring.atoms]
    if number == 6:
        if system.kinds[atom] == "sp2":
            end = next((n for n in outer if structure.bond(atom, n).order == 2), None)
            return "C=O" if end is not None and structure.atoms[end].number in (8, 16) else "C=C"
        return "CF2" if sum(structure.atoms[n].number == 9 for n in outer) == 2 else "C"
    if number == 7:
        if record.charge > 0:
            return "NH+" if record.hydrogens else "NR+"
        if system.kinds[atom] == "sp2":
            if not outer:
                return "NH="
            return "N-N=O" if any(structure.atoms[n].number == 7 for n in outer) else "N="
        return "NH" if not outer else "NR"
    if number == 16:
        oxo = sum(structure.bond(atom, n).order == 2 or structure.atoms[n].charge < 0 for n in outer)
        return "S" if not outer else "S=O" if oxo == 1 else "SO2" if oxo else "S+"
    return record.element


def _flat_symbol(structure: Structure, system: RingSystem, ring: Ring, atom: int) -> str:
    """Symbol of an atom of the flat bond of a half-chair."""
    record = structure.atoms[atom]
    if record.aromatic:
        return "aromatic"
    if system.kinds[atom] != "sp2":
        return "bridged" if record.number == 6 else f"flat {record.element}"
    return "flat" if record.number == 6 else f"flat {record.element}"


def name_ring(structure: Structure, system: RingSystem, number: int) -> RingName:
    """Name and position numbers of a ring.

    Parameters
    ----------
    structure
        The molecule.
    system
        The ring system.
    number
        Ring number within the system.

    Returns
    -------
    RingName
        Numbered from the first heteroatom as the pattern of its name is.
    """
    ring = system.rings[number]
    return rename(tuple(atom_symbol(structure, system, ring, place) for place in range(6)))


@lru_cache(maxsize=1024)
def rename(symbols: tuple[str, ...]) -> RingName:
    """Name of a pattern of symbols in ring order."""
    for name, pattern in PATTERNS.items():
        if sorted(pattern) != sorted(symbols):
            continue
        matches = [turn for turn in _TURNS if all(symbols[turn[i]] == pattern[i] for i in range(6))]
        if matches:
            positions = [6] * 6
            for turn in matches:
                for i, place in enumerate(turn):
                    positions[place] = min(positions[place], i + 1)
            return RingName(name, symbols, tuple(positions))
    turns = sorted(_TURNS, key=lambda turn: tuple(_rank(symbols[i]) for i in turn))
    positions = [0] * 6
    for i, place in enumerate(turns[0]):
        positions[place] = i + 1
    return RingName("-".join(symbols[i] for i in turns[0]), symbols, tuple(positions))


def _rank(symbol: str) -> tuple[int, str]:
    """Heteroatoms first, oxygen before sulfur before nitrogen."""
    order = ("O", "S", "N", "Si", "P")
    first = next((i for i, start in enumerate(order) if symbol.startswith(start)), len(order))
    return (first if symbol != "C" else 9), symbol
