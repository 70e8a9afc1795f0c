"""What an answer says beside its numbers: what was left out, held constant or used outside its own conditions."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from ringstrain.pyranose import cyclitol_like, pyranose_order
from ringstrain.results import SystemResult
from ringstrain.structure.records import Structure
from ringstrain.substituents import branch_code
from ringstrain.tables.prices import PriceBook
from ringstrain.units import ROOM_TEMPERATURE_K

#: How far [K] a value may be carried without a word.
_CARRIED_K = 25.0


def remarks(structure: Structure, results: Sequence[SystemResult], book: PriceBook) -> tuple[str, ...]:
    """Notes that follow from what was found.

    Parameters
    ----------
    structure
        What was read.
    results
        Its ring systems, priced.
    book
        Prices and conditions.

    Returns
    -------
    tuple of str
        Sentences, in the order a reader needs them.
    """
    return (
        *_structural(structure, results),
        *_open_double_bonds(structure, results),
        *_acyl_rings(structure, results),
        *_sugars(results, book),
        *_hydroxyl_rows(results, book),
        *_ionised(structure, results, book),
        *_carried(results, book),
    )


def _structural(structure: Structure, results: Sequence[SystemResult]) -> Iterator[str]:
    """Large companions and open centres outside the six-rings."""
    if any(result.system.large for result in results):
        yield "A ring of eight or more members is fused on; its own conformers are not counted."
    side = open_side_centres(structure, {a for result in results for a in result.system.atoms})
    if side:
        numbers = ", ".join(str(i + 1) for i in side)
        yield f"Configuration at atom {numbers} (outside the six-rings) not given; it does not enter the answer."


def _open_double_bonds(structure: Structure, results: Sequence[SystemResult]) -> Iterator[str]:
    """Double bonds to a ring whose open geometry decides whether a neighbouring group is crowded."""
    for result in results:
        members = result.system.atom_set
        for atom, kind in result.system.kinds.items():
            if kind != "sp2":
                continue
            beside = [n for n in structure.neighbours[atom] if n in members]
            if not any(key[0] in beside for key in result.groups):
                continue
            for end in structure.neighbours[atom]:
                bond = structure.bond(atom, end)
                if end in members or bond.order != 2 or bond.stereo:
                    continue
                outer = [n for n in structure.neighbours[end] if n != atom and structure.atoms[n].number > 1]
                if structure.atoms[end].number in (6, 7) and len(outer) == 1:
                    yield (
                        f"Geometry of the double bond {atom + 1}={end + 1} not given; the group on it is taken to "
                        "point away from its neighbours' groups. Where it points at one, that group goes axial."
                    )


def _acyl_rings(structure: Structure, results: Sequence[SystemResult]) -> Iterator[str]:
    """Lactones and lactams, whose real shapes lie between half-chair and boat."""
    for result in results:
        for ring in result.system.rings:
            bond = ring.flat_bond
            if ring.kind != "half-chair" or bond is None:
                continue
            pair = ring.atoms[bond], ring.atoms[(bond + 1) % 6]
            heteroatom = next((a for a in pair if structure.atoms[a].number in (7, 8)), None)
            carbon = next((a for a in pair if structure.atoms[a].number == 6), None)
            if heteroatom is None or carbon is None or not _has_oxo(structure, carbon):
                continue
            name = "lactone" if structure.atoms[heteroatom].number == 8 else "lactam"
            yield (
                f"The {name} ring (atoms {carbon + 1} and {heteroatom + 1}) is taken as a half-chair: "
                "such rings also take boats of like energy, which are not counted."
            )


def _has_oxo(structure: Structure, carbon: int) -> bool:
    """True when a carbon bears a doubly bonded oxygen or sulfur."""
    return any(
        structure.atoms[n].number in (8, 16) and structure.bond(carbon, n).order == 2
        for n in structure.neighbours[carbon]
    )


def _sugars(results: Sequence[SystemResult], book: PriceBook) -> Iterator[str]:
    """When the closed set of pyranoses and cyclitols was stretched, and when it could not be used."""
    conditions = book.conditions
    if conditions.medium != "protic":
        return
    for result in results:
        if any(line.rule == "pyranose set" for state in result.states for line in state.lines):
            if conditions.solvent not in ("", "water"):
                yield f"The sugar terms were measured in water; their use in {conditions.solvent} is a guess."
            if abs(conditions.temperature_K - ROOM_TEMPERATURE_K) > _CARRIED_K:
                yield f"The sugar terms were measured near room temperature and are held constant at {_kelvin(book)}."
        elif pyranose_order(result.states[0].detail.shapes.geometry) or cyclitol_like(
            result.states[0].detail.shapes.geometry
        ):
            yield (
                "This sugar ring carries a group outside the closed set of sugar terms (OH, CH3, CH2OH, OR at C1); "
                "the general model prices it, less surely."
            )


def _hydroxyl_rows(results: Sequence[SystemResult], book: PriceBook) -> Iterator[str]:
    """Several hydrogen bonds between axial hydroxyls in one state: each is priced as if it were alone."""
    if book.conditions.accepts_hydrogen_bonds:
        return
    for result in results:
        bonded = (
            sum(
                line.count for line in state.lines if line.rule == "syn-axial" and line.groups == ("hydroxy", "hydroxy")
            )
            for state in result.states
        )
        if max(bonded, default=0.0) > 1:
            yield (
                "Hydrogen bonds between axial hydroxyls are priced one by one, as measured on single pairs; several in "
                "one state were never measured, and polyols are seldom met outside water: see --medium protic."
            )
            return


def _ionised(structure: Structure, results: Sequence[SystemResult], book: PriceBook) -> Iterator[str]:
    """Neutral acids and bases drawn in a protic medium, where they may be ions."""
    if book.conditions.medium != "protic":
        return
    ions = {
        entry.note.removeprefix("ion of "): entry.key
        for entry in book.tables.groups
        if entry.note.startswith("ion of ")
    }
    present = {group.key for result in results for group in result.groups.values() if group.tabulated}
    for neutral in sorted(present & ions.keys()):
        ion = book.a_of(ions[neutral])
        if ion.value_kcal is None:
            continue
        yield (
            f"In a protic medium {neutral} may be ionised; drawn as {ions[neutral]} its A-value is "
            f"{ion.value_kcal:.2f} kcal/mol ({ion.source})."
        )
    basic = sorted(
        atom
        for result in results
        for atom, kind in result.system.kinds.items()
        if kind == "inverting" and structure.atoms[atom].charge == 0
    )
    if basic:
        numbers = ", ".join(str(a + 1) for a in basic)
        yield f"The ring nitrogen {numbers} may be protonated in a protic medium; draw it as N+ to price the salt."


def _carried(results: Sequence[SystemResult], book: PriceBook) -> Iterator[str]:
    """A-values held constant away from the temperature they were measured at."""
    asked = book.conditions.temperature_K
    if abs(asked - ROOM_TEMPERATURE_K) <= _CARRIED_K:
        return
    rows = {
        term.row
        for result in results
        for state in result.states
        for line in state.lines
        for term in line.terms
        if term.row.startswith("avalues/")
    }
    held: dict[str, str] = {}
    for row in sorted(rows):
        claim = book.tables.row(row)
        if claim.dh_kcal is not None and claim.ds_cal is not None:
            continue
        own = claim.temperature_K
        if own is None or abs(asked - own) > _CARRIED_K:
            held[claim.groups[0]] = "temperature not stated" if own is None else f"measured at {own:g} K"
    if held:
        which = ", ".join(f"{group} ({origin})" for group, origin in sorted(held.items()))
        yield f"Held constant at {_kelvin(book)} for want of enthalpy and entropy: A of {which}."


def _kelvin(book: PriceBook) -> str:
    return f"{book.conditions.temperature_K:g} K"


def open_side_centres(structure: Structure, inside: set[int]) -> tuple[int, ...]:
    """Stereocentres outside the six-membered rings whose configuration is not given, judged by constitution."""
    return tuple(
        i
        for i in structure.fragment
        if i not in inside and structure.configurations[i] is None and _looks_stereogenic(structure, i)
    )


def _looks_stereogenic(structure: Structure, atom: int) -> bool:
    """True for a side-chain carbon with four different neighbours, judged by constitution."""
    record = structure.atoms[atom]
    around = structure.neighbours[atom]
    if record.number != 6 or record.aromatic or len(around) + record.hydrogens != 4 or record.hydrogens > 1:
        return False
    ends = [
        (structure.atoms[n].number, structure.atoms[n].hydrogens) for n in around if len(structure.neighbours[n]) == 1
    ]
    if len(set(ends)) < len(ends):
        return False
    codes = {branch_code(structure, int(n), atom, frozenset((atom,)), stereo=False)[0] for n in around}
    return len(codes) == len(around)
