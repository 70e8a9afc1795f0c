"""The one composition: structure, ring systems, states, contacts, ledgers, equilibrium."""

from __future__ import annotations

from collections.abc import Sequence

from ringstrain.billing import GroupMap
from ringstrain.contacts import ContactKind
from ringstrain.equilibrium import Equilibrium, Population, compare, mixture_energy, populations
from ringstrain.errors import MissingValue
from ringstrain.ledger import regime_of
from ringstrain.provenance import sigma_of
from ringstrain.pyranose import chair_form, pyranose_order
from ringstrain.remarks import remarks
from ringstrain.results import SCHEMA, Analysis, Detail, State, SystemResult
from ringstrain.ringgraph import RingSystem, find_ring_systems
from ringstrain.shaping import find_states
from ringstrain.states import RingShape, Shapes
from ringstrain.stereo import resolve
from ringstrain.structure.read import read
from ringstrain.structure.records import Structure
from ringstrain.substituents import describe_group
from ringstrain.symmetry import Operation, carries, operations
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.conditions import make_conditions
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook, price_book
from ringstrain.units import ROOM_TEMPERATURE_K

__all__ = ["SCHEMA", "Analysis", "Detail", "State", "SystemResult", "analyze", "group_map"]


#: Names of the contact counts in the answer, and the contacts they count.
_COUNTS: dict[str, ContactKind] = {
    "gauche": "gauche",
    "syn_axial_XH": "syn-axial X//H",
    "syn_axial_XY": "syn-axial X//Y",
    "syn_axial_X_lp": "syn-axial X//lone pair",
    "peri": "peri",
    "geminal": "geminal",
    "eclipsed": "eclipsed",
    "transannular": "transannular",
}


_NO_CONTACTS = dict.fromkeys(_COUNTS.values(), 0)


def analyze(
    structure: Structure | str,
    *,
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
    strict: bool = False,
) -> Analysis:
    """States, ledgers, populations and equilibrium of every six-membered ring system.

    Parameters
    ----------
    structure
        A Structure, or text for :func:`ringstrain.read`.
    temperature_K
        Temperature [K].
    medium
        ``gas``, ``nonpolar``, ``polar``, ``protic`` or a solvent name.
    tables
        Price tables; those of the package when None.
    strict
        True to raise instead of bounding when a contact has no price.

    Returns
    -------
    Analysis
        One result per ring system.

    Raises
    ------
    InputError
        If the text is no usable structure or an open stereocentre matters.
    OutOfScope
        If the model does not cover the rings.
    MissingValue
        If ``strict`` and a contact has no price.
    TableError
        If the tables are faulty.

    Examples
    --------
    >>> result = analyze("C[C@H]1CCC[C@@H](C)C1").ring_systems[0]
    >>> [round(state.energy_kcal, 2) for state in result.states]
    [0.0, 5.44]
    """
    molecule = read(structure) if isinstance(structure, str) else structure
    prices = tables if tables is not None else load_tables()
    conditions = make_conditions(prices, temperature_K=temperature_K, medium=medium)
    book = price_book(prices, conditions)
    systems, notes = find_ring_systems(molecule)
    results = tuple(_analyze_system(molecule, system, book) for system in systems)
    if strict:
        _refuse_unknown(results)
    return Analysis(
        structure=molecule,
        conditions=conditions,
        ring_systems=results,
        notes=(*molecule.notes, *notes, *remarks(molecule, results, book)),
        tables_revision=prices.revision,
    )


def group_map(structure: Structure, system: RingSystem, tables: Tables) -> GroupMap:
    """Group on every site of a system, ring neighbours included where rings are fused or spiro."""
    groups: GroupMap = {}
    members = system.atom_set
    several = len(system.rings) > 1
    carbons: dict[int, Group] = {}  # a saturated ring carbon looks the same from each of its neighbours
    for atom in system.atoms:
        for n in structure.neighbours[atom]:
            if n in carbons:
                groups[(atom, n)] = carbons[n]
            elif n not in members:
                groups[(atom, n)] = describe_group(structure, n, atom, members, tables)
            elif several:
                groups[(atom, n)] = group = describe_group(structure, n, atom, members, tables)
                if system.kinds[n] == "sp3" and structure.atoms[n].number == 6:
                    carbons[n] = group
    return groups


def _analyze_system(structure: Structure, system: RingSystem, book: PriceBook) -> SystemResult:
    groups = group_map(structure, system, book.tables)
    resolved = resolve(structure, system, groups)
    details = find_states(resolved, groups, book)
    priced = sorted(
        (Detail(shapes, facts, ledger) for shapes, facts, ledger in details),
        key=lambda d: (round(d.ledger.total_kcal, 9), _shape_key(d.shapes)),
    )
    priced, copies, sets = _sorted_forms(priced, groups, book)
    shares = _shares(priced, sets, book)
    ids = [_letter(i) for i in range(len(priced))]
    order = pyranose_order(resolved.geometry)
    states = tuple(
        _make_state(
            ids[i],
            detail,
            None if copies[i] is None else ids[copies[i] or 0],
            shares[i],
            chair_form(detail.shapes, order) if order else "",
        )
        for i, detail in enumerate(priced)
    )
    equilibrium = _equilibrium(priced, ids, sets, copies, book)
    return SystemResult(
        rings=tuple(ring.atoms for ring in system.rings),
        states=states,
        equilibrium=equilibrium,
        locked=equilibrium is None,
        system=system,
        groups=groups,
    )


def _sorted_forms(
    priced: list[Detail], groups: GroupMap, book: PriceBook
) -> tuple[list[Detail], list[int | None], list[int]]:
    """States lowest first, among equal energies those of the more populated ring form first; copies and form numbers.

    Without the second rule the order of the atoms would decide which of several equal forms leads.
    """
    copies = _copies(priced, groups)
    sets = _form_sets(priced, copies)
    energies: dict[int, list[float]] = {}
    for detail, number in zip(priced, sets, strict=True):
        energies.setdefault(number, []).append(detail.ledger.total_kcal)
    weight = {n: round(mixture_energy(e, book.conditions.temperature_K), 9) for n, e in energies.items()}
    order = sorted(
        range(len(priced)), key=lambda i: (round(priced[i].ledger.total_kcal, 9), weight[sets[i]], sets[i], i)
    )
    place = {old: new for new, old in enumerate(order)}
    moved = []
    for old in order:
        original = copies[old]
        target = None if original is None else place[original]
        moved.append(target)
    return [priced[i] for i in order], moved, [sets[i] for i in order]


def _shape_key(shapes: Shapes) -> tuple[object, ...]:
    """A fixed order among states of equal energy."""
    return tuple([ring.rank for ring in shapes.rings]), shapes.inverted


def _letter(number: int) -> str:
    """A, B, ... Z, AA, AB, ..."""
    text = ""
    number += 1
    while number:
        number, rest = divmod(number - 1, 26)
        text = chr(65 + rest) + text
    return text


def _copies(priced: Sequence[Detail], groups: GroupMap) -> list[int | None]:
    """For each state the earlier state it is a symmetry copy of, if any."""
    copies: list[int | None] = [None] * len(priced)
    energies = [detail.ledger.total_kcal for detail in priced]
    found: list[Operation] | None = None
    for i, detail in enumerate(priced):
        for j in range(i):
            if abs(energies[j] - energies[i]) > 1e-7 or copies[j] is not None:
                continue
            if found is None:
                found = operations(detail.shapes.geometry, groups)
            if any(carries(operation, priced[j].shapes, detail.shapes) for operation in found):
                copies[i] = j
                break
    return copies


def _form_sets(priced: Sequence[Detail], copies: Sequence[int | None]) -> list[int]:
    """Number of the ring form of each state: symmetry copies and N-invertomers share one."""
    if not priced:
        return []
    watched = _substituted_rings(priced[0].shapes)
    forms = [tuple(detail.shapes.rings[number] for number in watched) for detail in priced]
    leader = {form: form for form in forms}

    def lead(form: tuple[RingShape, ...]) -> tuple[RingShape, ...]:
        while leader[form] != form:
            form = leader[form]
        return form

    for i, original in enumerate(copies):
        if original is not None:
            leader[lead(forms[i])] = lead(forms[original])
    numbers: dict[tuple[RingShape, ...], int] = {}
    return [numbers.setdefault(lead(form), len(numbers)) for form in forms]


def _substituted_rings(shapes: Shapes) -> tuple[int, ...]:
    """Rings that bear a substituent or are fused; all of them when none does."""
    geometry = shapes.geometry
    if len(geometry.system.rings) == 1:
        return (0,)
    members = geometry.system.atom_set
    bearing = []
    fused = {number for block in geometry.system.blocks if len(block) > 1 for number in block}
    for number, ring in enumerate(geometry.system.rings):
        outside = any(
            n not in members and geometry.structure.atoms[n].number != 1
            for atom in ring.atoms
            for n in geometry.structure.neighbours[atom]
        )
        if outside or number in fused:
            bearing.append(number)
    return tuple(bearing) or tuple(range(len(geometry.system.rings)))


def _shares(priced: Sequence[Detail], sets: Sequence[int], book: PriceBook) -> list[Population | None]:
    """Population of each state; none when an unpriced contact decides."""
    ledgers = [detail.ledger for detail in priced]
    unpriced = [sorted([(*line.key, line.count) for line in ledger.unknown]) for ledger in ledgers]
    if any(unpriced) and any(lines != unpriced[0] for lines in unpriced):
        return [None] * len(priced)
    return list(populations(ledgers, sets, book.conditions.temperature_K, book.tables.model_terms))


def _equilibrium(
    priced: Sequence[Detail], ids: Sequence[str], sets: Sequence[int], copies: Sequence[int | None], book: PriceBook
) -> Equilibrium | None:
    """Equilibrium between the favoured ring form and the next one; None when there is one form only."""
    favoured = [i for i in range(len(priced)) if sets[i] == sets[0]]
    rest = [i for i in range(len(priced)) if sets[i] != sets[0]]
    temperature, model = book.conditions.temperature_K, book.tables.model_terms
    if rest:
        other = [i for i in rest if sets[i] == sets[rest[0]]]
        return compare(
            [(ids[i], priced[i].ledger) for i in favoured],
            [(ids[i], priced[i].ledger) for i in other],
            temperature,
            model,
        )
    mirror = next((i for i in favoured if copies[i] is not None and _differs(priced[0], priced[i])), None)
    if mirror is None:
        return None
    return compare([(ids[0], priced[0].ledger)], [(ids[mirror], priced[mirror].ledger)], temperature, {})


def _differs(first: Detail, second: Detail) -> bool:
    """True when two states have different ring shapes (not only another side of a nitrogen)."""
    return first.shapes.rings != second.shapes.rings


def _make_state(id: str, detail: Detail, equivalent_to: str | None, share: Population | None, form: str) -> State:
    axial: set[int] = set()
    equatorial: set[int] = set()
    sites: list[tuple[int, int, int, str]] = []
    for p in detail.facts.placed:
        if p.occupant == "atom":
            site, position = p.site, p.position
            sites.append((site.neighbour, site.ring_atom, site.ring, position))
            if position == "axial":
                axial.add(site.neighbour)
            elif position == "equatorial":
                equatorial.add(site.neighbour)
    ledger = detail.ledger
    tally = dict(_NO_CONTACTS)
    for contact in detail.facts.contacts:
        tally[contact.kind] += 1
    nitrogen = _nitrogen(detail)
    return State(
        id=id,
        shapes=tuple([ring.shape for ring in detail.shapes.rings]),
        axial=tuple(sorted(axial)),
        equatorial=tuple(sorted(equatorial)),
        axial_H=tuple([atom for atom, position, bare in nitrogen if position == "axial" and bare]),
        nitrogen=tuple([(atom, position) for atom, position, _ in nitrogen]),
        equivalent_to=equivalent_to,
        counts=tuple([(name, tally[kind]) for name, kind in _COUNTS.items()]),
        energy_kcal=ledger.total_kcal,
        uncertainty_kcal=sigma_of(ledger.variables),
        lower_bound=bool(ledger.unknown),
        regime=regime_of(ledger.lines),
        population=share.value if share else None,
        population_low=share.low if share else None,
        population_high=share.high if share else None,
        lines=ledger.lines,
        sites=tuple(sites),
        form=form,
        detail=detail,
    )


def _nitrogen(detail: Detail) -> list[tuple[int, str, bool]]:
    """Each inverting nitrogen, where its hydrogen or group points, and whether it is a hydrogen.

    A ring-fusion nitrogen is left out: what it bears is a ring, axial to one ring and equatorial to another.
    """
    found: dict[int, tuple[int, str, bool]] = {}
    kinds = detail.shapes.geometry.system.kinds
    if "inverting" not in kinds.values():
        return []
    members = detail.shapes.geometry.system.atom_set
    for p in detail.facts.placed:
        if kinds[p.site.ring_atom] == "inverting" and p.occupant != "lone pair" and p.site.neighbour not in members:
            found.setdefault(p.site.ring_atom, (p.site.ring_atom, p.position, p.occupant == "hydrogen"))
    return [found[atom] for atom in sorted(found)]


def _refuse_unknown(results: Sequence[SystemResult]) -> None:
    """Raise for the first contact without a price."""
    for result in results:
        for state in result.states:
            for line in state.lines:
                if line.value_kcal is None:
                    raise MissingValue(f"{line.rule} price", line.groups, atoms=line.atoms[0])
