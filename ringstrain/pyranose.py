"""The closed set of instability terms for pyranoses and cyclitols in water.

It prices a whole chair by itself and is never mixed with A-values: hydrogen bonding and solvation are averaged into
its terms.  It applies in water to an oxane with an oxygen on C2 (a pyranose) and to a cyclohexane with three or more
oxygens (a cyclitol), as long as every group is OH, CH3 or CH2OH (OR allowed at the anomeric carbon).

References
----------
``angyal-1969`` through the rows ``angyal-*`` of anomeric.csv.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from ringstrain.bill import Bill, Parties
from ringstrain.contacts import Survey
from ringstrain.geometry import Geometry
from ringstrain.ledger import Ledger
from ringstrain.provenance import Price, Term
from ringstrain.states import Shapes
from ringstrain.tables.kinship import energy_of
from ringstrain.tables.prices import PriceBook

_CARBON_KEYS = frozenset({"methyl", "hydroxymethyl"})
_CYCLITOL_OXYGENS = 3


@dataclass(frozen=True, slots=True)
class Sugar:
    """A ring the closed set covers.

    Attributes
    ----------
    order
        Ring atoms from C1 (the anomeric carbon of a pyranose) to C5, then the ring oxygen; all six carbons of a
        cyclitol.
    is_pyranose
        True when the ring has an oxygen.
    """

    order: tuple[int, ...]
    is_pyranose: bool


def find_sugar(geometry: Geometry, parties: Parties) -> Sugar | None:
    """The sugar or cyclitol a system is, or None when a group or ring is outside the set.

    Parameters
    ----------
    geometry
        The ring system.
    parties
        Its groups and ring names.

    Returns
    -------
    Sugar or None
        Ring atoms in sugar numbering.
    """
    system = geometry.system
    if len(system.rings) != 1 or system.companions:
        return None
    ring = system.rings[0]
    name = parties.names[0].name
    letters = {atom: _letter(geometry, parties, atom) for atom in ring.atoms}
    if name == "cyclohexane":
        oxygens = sum(len(letter) for letter in letters.values() if letter.strip("C"))
        return (
            Sugar(ring.atoms, False)
            if "X" not in "".join(letters.values())
            and oxygens >= _CYCLITOL_OXYGENS
            and all(len(letter) < 2 for letter in letters.values())
            else None
        )
    if name != "oxane":
        return None
    oxygen = next(i for i, a in enumerate(ring.atoms) if geometry.structure.atoms[a].number == 8)
    forward = tuple(ring.atoms[(oxygen + k) % 6] for k in range(1, 6))
    for order in (forward, forward[::-1]):
        if letters[order[0]] not in ("O", "G") or letters[order[4]] in ("O", "G"):
            continue
        rest = [letters[a] for a in order[1:]]
        if all(letter in ("", "O", "C") for letter in rest) and "O" in rest:
            return Sugar((*order, ring.atoms[oxygen]), True)
    return None


def _letter(geometry: Geometry, parties: Parties, atom: int) -> str:
    """O for hydroxyl, G for another ether oxygen, C for methyl or hydroxymethyl, X for anything else."""
    members = geometry.system.atom_set
    letters = ""
    for n in geometry.structure.neighbours[atom]:
        if n in members or geometry.structure.atoms[n].is_hydrogen:
            continue
        group = parties.groups[(atom, int(n))]
        if group.key == "hydroxy":
            letters += "O"
        elif group.kind == "oxy":
            letters += "G"
        else:
            letters += "C" if group.key in _CARBON_KEYS else "X"
    return letters


def sugar_ledger(state: Shapes, facts: Survey, parties: Parties, sugar: Sugar) -> Ledger:
    """The ledger of a chair by the closed set.

    Parameters
    ----------
    state
        A chair.
    facts
        Its positions.
    parties
        Groups and prices.
    sugar
        Ring atoms in sugar numbering.

    Returns
    -------
    Ledger
        Lines of the rule ``pyranose set``.
    """
    positions = {p.site.ring_atom: (p.site.neighbour, p.position) for p in facts.placed if p.occupant == "atom"}
    letters = {atom: _letter(state.geometry, parties, atom).replace("G", "O") for atom in sugar.order}
    axial = {atom: where == "axial" for atom, (_, where) in positions.items()}
    bill = Bill()
    carbons = sugar.order[:5] if sugar.is_pyranose else sugar.order
    _charge_axial(bill, parties.book, carbons, letters, axial, positions)
    _charge_vicinal(bill, parties.book, sugar, carbons, letters, axial, positions)
    _charge_glycoside(bill, parties, sugar, axial, positions)
    return bill.settle()


_Positions = Mapping[int, tuple[int, str]]


def _charge_axial(
    bill: Bill,
    book: PriceBook,
    carbons: tuple[int, ...],
    letters: dict[int, str],
    axial: dict[int, bool],
    positions: _Positions,
) -> None:
    """Axial groups facing axial hydrogens or each other on every other carbon."""
    for start in (0, 1):
        triple = carbons[start::2]
        for i, first in enumerate(triple):
            for second in triple[i + 1 :]:
                pair = [a for a in (first, second) if axial.get(a, False)]
                if len(pair) == 2:
                    name = "".join(sorted(letters[a] for a in pair))
                    row = {"OO": "angyal-o-o-syn", "CO": "angyal-c-o-syn", "CC": "angyal-c-o-syn"}[name]
                    _put(bill, book, row, tuple(positions[a][0] for a in pair))
                elif len(pair) == 1:
                    row = "angyal-o-h-syn" if letters[pair[0]] == "O" else "angyal-c-h-syn"
                    _put(bill, book, row, (positions[pair[0]][0],))


def _charge_vicinal(
    bill: Bill,
    book: PriceBook,
    sugar: Sugar,
    carbons: tuple[int, ...],
    letters: dict[int, str],
    axial: dict[int, bool],
    positions: _Positions,
) -> None:
    """Gauche neighbours, and the anomeric term of an equatorial O-1 instead of its own gauche term."""
    count = len(carbons)
    pairs = [(i, i + 1) for i in range(count - 1)] + ([] if sugar.is_pyranose else [(count - 1, 0)])
    for i, j in pairs:
        first, second = carbons[i], carbons[j]
        if not letters[first] or not letters[second] or (axial[first] and axial[second]):
            continue
        name = "".join(sorted((letters[first], letters[second])))
        if name == "CC":
            continue
        row = "angyal-o-o-gauche" if name == "OO" else "angyal-c-o-gauche"
        _put(bill, book, row, (positions[first][0], positions[second][0]))
    if not sugar.is_pyranose or axial[carbons[0]]:
        return
    second_axial = letters[carbons[1]] == "O" and axial.get(carbons[1], False)
    third_axial = letters[carbons[2]] == "O" and axial.get(carbons[2], False)
    row = "angyal-anomeric-o2-eq"
    if second_axial:
        row = "angyal-anomeric-o2-o3-ax" if third_axial else "angyal-anomeric-o2-ax"
    _put(bill, book, row, (positions[carbons[0]][0],))


def _charge_glycoside(
    bill: Bill, parties: Parties, sugar: Sugar, axial: dict[int, bool], positions: _Positions
) -> None:
    """An equatorial O-1 that carries carbon costs more than a hydroxyl; how much depends on the solvent."""
    first = sugar.order[0]
    if not sugar.is_pyranose or axial[first] or parties.groups[(first, positions[first][0])].key == "hydroxy":
        return
    conditions = parties.book.conditions
    alcohol = conditions.solvent not in ("", "water")
    price = parties.book.rule("glycoside-alcohol" if alcohol else "glycoside-water", "glycoside")
    bill.charge("pyranose set", ("glycoside",), (positions[first][0],), price)


def _put(bill: Bill, book: PriceBook, row: str, atoms: tuple[int, ...]) -> None:
    """One term of the set."""
    claim = book.tables.row(f"anomeric/{row}")
    sigma = book.tables.row("rules/pyranose-term").uncertainty or 0.0
    price = Price(
        value_kcal=energy_of(claim),
        terms=(Term(claim.row, "pyranose set", 1.0, claim.uncertainty or sigma),),
        row=claim.row,
        source=claim.source,
        known_by=claim.known_by,
        polar=True,
        note=claim.position,
    )
    bill.charge("pyranose set", (row.removeprefix("angyal-"),), atoms, price)


def pyranose_order(geometry: Geometry) -> tuple[int, ...] | None:
    """Ring atoms from C1 to C5 and the ring oxygen of a pyranose skeleton, whatever its groups; None for other rings.

    Notes
    -----
    A pyranose skeleton is a lone oxane with an oxygen, nitrogen, sulfur or halogen on one neighbour of the ring oxygen
    only, and at least two more oxygens or nitrogens on the other carbons.
    """
    system, structure = geometry.system, geometry.structure
    if len(system.rings) != 1 or system.rings[0].kind != "chair":
        return None
    atoms = system.rings[0].atoms
    oxygens = [i for i, a in enumerate(atoms) if structure.atoms[a].number != 6]
    if len(oxygens) != 1 or structure.atoms[atoms[oxygens[0]]].number != 8:
        return None
    forward = tuple(atoms[(oxygens[0] + k) % 6] for k in range(1, 6))
    hetero = {a: _hetero_on(geometry, a) for a in forward}
    if sum(bool(hetero[a] & {7, 8}) for a in forward) < _CYCLITOL_OXYGENS:
        return None
    ends = (bool(hetero[forward[0]]), bool(hetero[forward[4]]))
    if ends == (True, False):
        return (*forward, atoms[oxygens[0]])
    return (*forward[::-1], atoms[oxygens[0]]) if ends == (False, True) else None


def cyclitol_like(geometry: Geometry) -> bool:
    """True for a lone carbocycle with an oxygen on three or more of its carbons, whatever its other groups."""
    system, structure = geometry.system, geometry.structure
    if len(system.rings) != 1 or system.rings[0].kind != "chair":
        return False
    atoms = system.rings[0].atoms
    return (
        all(structure.atoms[a].number == 6 for a in atoms)
        and sum(8 in _hetero_on(geometry, a) for a in atoms) >= _CYCLITOL_OXYGENS
    )


def _hetero_on(geometry: Geometry, atom: int) -> set[int]:
    """Atomic numbers of the heteroatoms a ring carbon carries."""
    members = geometry.system.atom_set
    numbers = {geometry.structure.atoms[n].number for n in geometry.structure.neighbours[atom] if n not in members}
    return numbers - {1, 6}


def chair_form(state: Shapes, order: tuple[int, ...]) -> str:
    """``4C1`` or ``1C4`` of a pyranose chair with its atoms in sugar order, empty for other shapes.

    Notes
    -----
    In 4C1 the fourth carbon lies above and the first below the plane of the rest when the ring, seen from above, is
    numbered clockwise; the torsion C1-C2-C3-C4 is then negative.
    """
    ring = state.rings[0]
    if ring.shape != "chair":
        return ""
    atoms = state.geometry.system.rings[0].atoms
    place = atoms.index(order[1])
    forward = atoms[(place + 1) % 6] == order[2]
    torsion = ring.torsions[place if forward else place - 1]
    return "4C1" if torsion < 0 else "1C4"
