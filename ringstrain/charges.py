"""Charges beyond A-values and gauche paths: geminal and eclipsed pairs, ring shapes, fused rings, allylic strain."""

from __future__ import annotations

from functools import partial

from ringstrain.bill import Bill, Parties, axial_sites, pair_of, shared_ring
from ringstrain.contacts import Contact, Survey
from ringstrain.geometry import Geometry
from ringstrain.provenance import Price
from ringstrain.ringgraph import atom_kind
from ringstrain.states import Shapes
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook


def charge_geminal(geometry: Geometry, facts: Survey, contact: Contact, parties: Parties, bill: Bill) -> None:
    """Correction for two groups on one ring atom; which is axial decides."""
    x, atom, y = contact.atoms
    axial = next((p.site.neighbour for p in facts.placed if p.site.ring_atom == atom and p.position == "axial"), None)
    if axial is None:  # on a twist-boat axis neither is: the names decide, so that the order of the input does not
        axial = min((x, y), key=lambda n: parties.groups[(atom, n)].key)
    first, second = (x, y) if axial == x else (y, x)
    a, e = parties.groups[(atom, first)], parties.groups[(atom, second)]
    bill.charge("geminal", (a.key, e.key), (first, second), parties.book.geminal(a, e), (contact,))


def charge_eclipsed(contact: Contact, parties: Parties, bill: Bill) -> None:
    """Eclipsed neighbours of a boat or half-chair, priced as gauche ones at least."""
    a, b, c, d = contact.atoms
    x, y = parties.groups[(b, a)], parties.groups[(c, d)]
    price = parties.book.remembered(("eclipsed", x.traits, y.traits), lambda: _eclipsed_price(parties.book, x, y))
    bill.charge("vicinal eclipsed", pair_of(x.key, y.key), (a, d), price, (contact,))


def _eclipsed_price(book: PriceBook, x: Group, y: Group) -> Price:
    base = book.vicinal(x, y)
    extra = book.rule("eclipsed-extra", "/".join(pair_of(x.key, y.key)))
    return Price(
        value_kcal=base.value_kcal,
        terms=(*base.terms, *extra.terms),
        row=base.row,
        source=base.source,
        known_by=base.known_by,
        estimated=True,
        polar=base.polar,
        bound="at least",
        note="eclipsed neighbours priced as gauche ones",
    )


def charge_transannular(contact: Contact, bill: Bill) -> None:
    """Two ring atoms facing each other across a bicyclo[3.3.1] skeleton: a contact nobody has priced."""
    price = Price(
        value_kcal=None,
        row="unknown/C3/C7 endo",
        source="",
        known_by="computed",
        estimated=True,
        note="the two endo hydrogens of a bicyclo[3.3.1] skeleton face each other; no value is tabulated",
    )
    bill.charge("C3/C7 endo", ("hydrogen", "hydrogen"), contact.atoms, price, (contact,))


def charge_shapes(state: Shapes, parties: Parties, bill: Bill) -> None:
    """What a boat or twist-boat costs above the chair."""
    for number, ring in enumerate(state.rings):
        if ring.shape not in ("twist-boat", "boat"):
            continue
        shape, name, book = ring.shape, parties.names[number].name, parties.book
        price = book.remembered(("shape", shape, name), partial(_shape_price, book, shape, name))
        bill.charge("ring shape", (shape,), state.geometry.system.rings[number].atoms, price)


def _shape_price(book: PriceBook, shape: str, name: str) -> Price:
    special = f"{shape}-{name}"
    return book.rule(special if book.tables.has_row(f"rules/{special}") else shape, name)


def charge_companions(geometry: Geometry, book: PriceBook, bill: Bill) -> None:
    """Trans-fused five-membered rings cost what closing them costs."""
    for companion in geometry.system.companions:
        shared = [a for a in companion if a in geometry.system.atom_set]
        if len(companion) == 5 and len(shared) == 2 and _is_trans_fused(geometry, companion, shared[0], shared[1]):
            flat = _flat_atoms(geometry, [a for a in companion if a not in shared]) > 1
            price = book.rule("trans-flat-five-ring" if flat else "trans-five-ring", "five-ring")
            bill.charge("trans-fused five-ring", ("five-ring",), tuple(sorted(shared)), price)


def _flat_atoms(geometry: Geometry, atoms: list[int]) -> int:
    """How many of some neighbouring atoms are planar: double bonds, and what conjugates with them."""
    structure = geometry.structure
    double = {a for a in atoms if atom_kind(structure, a) == "sp2"}
    conjugated = {
        a for a in atoms if structure.atoms[a].number in (7, 8) and double.intersection(structure.neighbours[a])
    }
    return len(double | conjugated)


def charge_flat_fusions(state: Shapes, book: PriceBook, bill: Bill) -> None:
    """A chair fused to a half-chair at an sp2 atom, bent there more steeply than an sp2 atom likes.

    Notes
    -----
    At the shared bond the ring neighbours of the sp2 atom lie opposite each other and those of the other atom 120
    degrees apart, so that the chair bends by 60 degrees less or more than the half-chair: less when the signs differ.
    """
    system = state.geometry.system
    if "sp2" not in system.kinds.values():
        return
    for number, flat in enumerate(system.rings):
        if flat.kind != "half-chair":
            continue
        for other, chair in enumerate(system.rings):
            if chair.kind != "chair" or state.rings[other].shape != "chair":
                continue
            shared = [a for a in flat.atoms if a in chair.atoms]
            if len(shared) != 2 or {system.kinds[a] for a in shared} != {"sp2", "sp3"}:
                continue
            if state.torsion_between(number, *shared) * state.torsion_between(other, *shared) > 0:
                crowded = any(
                    state.geometry.structure.atoms[a].hydrogens == 0 for a in shared if system.kinds[a] == "sp3"
                )
                price = book.rule("flat-fusion-quaternary" if crowded else "flat-fusion", "ring")
                bill.charge("steep flat fusion", ("ring",), tuple(sorted(shared)), price)


def _is_trans_fused(geometry: Geometry, companion: tuple[int, ...], first: int, second: int) -> bool:
    """True when a companion ring leaves two neighbouring ring atoms on opposite faces."""
    ring = shared_ring(geometry, first, second)
    if ring is None:
        return False
    faces = []
    for atom in (first, second):
        place = geometry.system.rings[ring].place(atom)
        faces.append(next((s.face for s in geometry.sites[ring][place] if s.neighbour in companion), 0))
    return bool(faces[0] and faces[1] and faces[0] != faces[1])


def charge_allylic(geometry: Geometry, facts: Survey, parties: Parties, bill: Bill) -> None:
    """A(1,3) strain of an equatorial group in the plane of an exocyclic double bond with a group on its side."""
    kinds = geometry.system.kinds
    if "sp2" not in kinds.values():
        return
    structure = geometry.structure
    for placed in facts.placed:
        if placed.position != "equatorial" or placed.occupant != "atom" or not placed.site.face:
            continue
        atom = placed.site.ring_atom
        ring = geometry.system.rings[placed.site.ring]
        for flat in structure.neighbours[atom]:
            if flat not in ring.atoms or kinds[flat] != "sp2":
                continue
            end = next(
                (n for n in structure.neighbours[flat] if n not in ring.atoms and structure.bond(flat, n).order == 2),
                None,
            )
            if end is None or structure.atoms[end].number not in (6, 7) or not _faces_side(geometry, flat, end, atom):
                continue
            group = parties.groups[(atom, placed.site.neighbour)]
            price = parties.book.rule("allylic-z", group.key)
            bill.charge("A(1,3) strain", (group.key,), (placed.site.neighbour, int(end)), price)


def charge_across(state: Shapes, facts: Survey, parties: Parties, bill: Bill) -> None:
    """Two axial halogens on opposite atoms and faces of a chair: their antiparallel dipoles attract."""
    if not parties.has_dipoles:
        return
    axial = {(p.site.ring, p.site.place): p.site for p in axial_sites(facts)}
    for (ring, place), first in axial.items():
        second = axial.get((ring, place + 3))
        if second is None or second.face == first.face or not parties.names[ring].is_carbocycle:
            continue
        if state.rings[ring].shape != "chair":
            continue
        x = parties.groups[(first.ring_atom, first.neighbour)]
        y = parties.groups[(second.ring_atom, second.neighbour)]
        price = parties.book.across(x, y)
        if price is not None:
            bill.charge("1,4-diaxial dipoles", pair_of(x.key, y.key), (first.neighbour, second.neighbour), price)


def _faces_side(geometry: Geometry, flat: int, end: int, side: int) -> bool:
    """True when the double bond flat=end carries a heavy group on the side of a ring neighbour."""
    structure = geometry.structure
    outer = [n for n in structure.neighbours[end] if n != flat and structure.atoms[n].number > 1]
    if len(outer) == 2:
        return True
    bond = structure.bond(flat, end)
    if not outer or not bond.stereo or bond.stereo_atoms is None:
        return False
    first, second = bond.stereo_atoms
    if first not in structure.neighbours[flat]:
        first, second = second, first
    same = bond.stereo == "cis"
    if first != side:
        same = not same
    return same if second == outer[0] else not same
