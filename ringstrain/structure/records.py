"""Frozen records of a structure: atoms, bonds, configuration, rings.

Nothing here knows RDKit.  Indices are zero-based and run over the atoms of the input in input order; plain
hydrogens are folded into their atom, isotopic ones keep their place.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Literal, NewType

AtomIndex = NewType("AtomIndex", int)
#: Stands for a hydrogen or lone pair in a neighbour list; a second one on the same atom is ``SECOND_IMPLICIT``.
IMPLICIT = AtomIndex(-1)
SECOND_IMPLICIT = AtomIndex(-2)


@dataclass(frozen=True, slots=True)
class Atom:
    """One atom.

    Attributes
    ----------
    number
        Atomic number [-].
    element
        Symbol.
    charge
        Formal charge [e].
    isotope
        Mass number, 0 when natural.
    hydrogens
        Plain hydrogens it carries, written or implied.
    aromatic
        True when it belongs to an aromatic ring.
    radicals
        Unpaired electrons.
    """

    number: int
    element: str
    charge: int = 0
    isotope: int = 0
    hydrogens: int = 0
    aromatic: bool = False
    radicals: int = 0

    @property
    def is_hydrogen(self) -> bool:
        """True for D, T and a hydrogen that could not be folded away."""
        return self.number == 1


@dataclass(frozen=True, slots=True)
class Bond:
    """One bond.

    Attributes
    ----------
    begin, end
        Atoms it joins.
    order
        1, 2 or 3; 0 for a dative or metal bond.
    aromatic
        True when it is aromatic (order then is that of one Kekule form).
    stereo
        ``"cis"`` or ``"trans"`` with respect to ``stereo_atoms``, else empty.
    stereo_atoms
        One neighbour of each end.
    """

    begin: AtomIndex
    end: AtomIndex
    order: int
    aromatic: bool = False
    stereo: Literal["", "cis", "trans"] = ""
    stereo_atoms: tuple[AtomIndex, AtomIndex] | None = None

    def other(self, atom: AtomIndex) -> AtomIndex:
        """The far end."""
        return self.end if atom == self.begin else self.begin


@dataclass(frozen=True, slots=True)
class Configuration:
    """A tetrahedral configuration.

    Looking from ``neighbours[0]`` the other three run clockwise when ``clockwise`` is true.  The hydrogen or
    lone pair that has no index stands as :data:`IMPLICIT`.
    """

    neighbours: tuple[AtomIndex, ...]
    clockwise: bool

    def handedness(self, order: tuple[int, ...]) -> int:
        """+1 when the neighbours in this order run clockwise seen from the first, else -1."""
        return permutation_sign(self.neighbours, order) * (1 if self.clockwise else -1)


def permutation_sign(first: tuple[int, ...], second: tuple[int, ...]) -> int:
    """+1 when ``second`` is an even permutation of ``first``, -1 when it is odd."""
    places = [first.index(item) for item in second]
    sign = 1
    for i in range(len(places)):
        while places[i] != i:
            j = places[i]
            places[i], places[j] = places[j], places[i]
            sign = -sign
    return sign


@dataclass(frozen=True, slots=True)
class Reading:
    """What a structure was read from, kept so that writing it need not build the molecule again.

    It serves only the structure that was read: one edited from it has other parts.  To another process it travels
    empty.

    Attributes
    ----------
    molecule
        The molecule of the library that read it.
    parts
        Atoms, bonds and configurations it stands for.
    """

    molecule: Any = field(default=None, repr=False, compare=False)
    parts: tuple[object, object, object] = field(default=(None, None, None), repr=False, compare=False)

    def fits(self, structure: Structure) -> bool:
        """True for the structure that was read, whatever its name and remarks."""
        atoms, bonds, configurations = self.parts
        return structure.atoms is atoms and structure.bonds is bonds and structure.configurations is configurations

    def __reduce__(self) -> tuple[type[Reading], tuple[()]]:
        return Reading, ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Structure:
    """A molecule as read.

    Attributes
    ----------
    text
        The input as given.
    name
        A name that came with it, else empty.
    atoms, bonds
        In input order.
    neighbours
        Neighbour indices of each atom, sorted.
    configurations
        Tetrahedral configuration of each atom that has one given, else None.
    rings
        Smallest rings of every size, as atom cycles.
    fragment
        Atoms of the part that is analysed (counter-ions left out).
    spans
        Characters of the input each atom stands at, when the input is a SMILES.
    notes
        What the reader should know about the reading.
    reading
        The molecule it was read from, while that is at hand.
    """

    text: str
    name: str = ""
    atoms: tuple[Atom, ...]
    bonds: tuple[Bond, ...]
    neighbours: tuple[tuple[AtomIndex, ...], ...]
    configurations: tuple[Configuration | None, ...]
    rings: tuple[tuple[AtomIndex, ...], ...]
    fragment: tuple[AtomIndex, ...]
    spans: tuple[tuple[int, int], ...] = ()
    notes: tuple[str, ...] = ()
    reading: Reading | None = field(default=None, repr=False, compare=False)
    _orders: dict[tuple[int, int], Bond] = field(default_factory=dict, repr=False, compare=False)

    def bond(self, a: int, b: int) -> Bond:
        """The bond between two atoms.

        Raises
        ------
        KeyError
            If they are not bonded.
        """
        return self._orders[(a, b) if a < b else (b, a)]

    @property
    def smiles(self) -> str:
        """Canonical SMILES with every configuration that was read."""
        from ringstrain.structure.write import write_smiles

        return write_smiles(self)
