"""How a ledger is drawn up.

Every gauche, syn-axial, peri and geminal contact is charged once, by the first rule that fits.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from ringstrain.bill import Bill, GroupMap, Parties, axial_sites, pair_of, parties_of, shared_ring
from ringstrain.charges import (
    charge_across,
    charge_allylic,
    charge_companions,
    charge_eclipsed,
    charge_flat_fusions,
    charge_geminal,
    charge_shapes,
    charge_transannular,
)
from ringstrain.contacts import Contact, Survey
from ringstrain.geometry import Geometry
from ringstrain.ledger import Ledger
from ringstrain.provenance import Price, Term, scaled
from ringstrain.states import Shapes
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook
from ringstrain.tables.ring_prices import ring_value

__all__ = ["GroupMap", "Parties", "axial_sites", "make_ledger", "parties_of", "ring_strain"]
#: How much of its A-value a group pays by where it points; on a twist-boat axis a third.
_FACTORS = {"axial": 1.0, "isoclinal": 1 / 3, "equatorial": 0.0}
#: What the axial oxygen of a sulfone costs: nothing, since one is axial in every chair.
_NOTHING = Price(value_kcal=0.0, row="symmetry/sulfone", source="symmetry", known_by="common practice")


@dataclass(slots=True)
class _Charged:
    """What each gauche path has been charged so far."""

    paths: dict[tuple[int, ...], float | None] = field(default_factory=dict)


def make_ledger(state: Shapes, facts: Survey, parties: Parties, twisting: frozenset[int] = frozenset()) -> Ledger:
    """The ledger of a state.

    Parameters
    ----------
    state
        Shape of every ring.
    facts
        Positions and contacts of the state.
    parties
        Groups, ring names and prices.
    twisting
        Rings whose twist-boats are offered as states of their own.

    Returns
    -------
    Ledger
        Every gauche, syn-axial X//Y, peri and geminal contact paid for exactly once.
    """
    bill = Bill()
    charged = _Charged()
    gauche = facts.of_kind("gauche")
    _charge_sites(state, facts, gauche, parties, twisting, bill, charged)
    _charge_paths(state.geometry, facts, gauche, parties, bill, charged)
    for contact in facts.contacts:
        kind = contact.kind
        if kind == "syn-axial X//Y" or kind == "peri":
            _charge_facing(contact, parties, bill, charged)
        elif kind == "geminal":
            charge_geminal(state.geometry, facts, contact, parties, bill)
        elif kind == "eclipsed":
            charge_eclipsed(contact, parties, bill)
        elif kind == "transannular":
            charge_transannular(contact, bill)
    charge_shapes(state, parties, bill)
    charge_companions(state.geometry, parties.book, bill)
    charge_flat_fusions(state, parties.book, bill)
    charge_allylic(state.geometry, facts, parties, bill)
    charge_across(state, facts, parties, bill)
    return bill.settle()


def _charge_sites(
    state: Shapes,
    facts: Survey,
    gauche: tuple[Contact, ...],
    parties: Parties,
    twisting: frozenset[int],
    bill: Bill,
    charged: _Charged,
) -> None:
    """A-value or ring value of every outside group by where it points, and the hydrogens of ring nitrogens."""
    geometry = state.geometry
    system = geometry.system
    for placed in facts.placed:
        factor = _FACTORS[placed.position]
        if not factor or placed.occupant == "lone pair":
            continue
        site = placed.site
        atom, neighbour = site.ring_atom, site.neighbour
        if placed.occupant == "hydrogen":
            if system.kinds[atom] == "inverting":
                price = parties.site_price(geometry, site.ring, atom, neighbour)
                bill.charge("N-H axial", ("hydrogen",), (atom,), price, count=factor)
            continue
        if neighbour in system.atom_set:
            continue
        group = parties.groups[(atom, neighbour)]
        if (
            site.ring in twisting
            and group.key == "tert-butyl"
            and state.rings[site.ring].shape == "chair"
            and parties.place(geometry, site.ring, atom).is_plain
        ):
            price = parties.book.rule("tert-butyl-axial-chair", "tert-butyl")
        elif group.kind == "oxo" and _has_two_oxo(parties, atom):
            price = _NOTHING
        else:
            price = parties.site_price(geometry, site.ring, atom, neighbour)
        covers = [c for c in _paths_of(geometry, gauche, site.ring, atom, neighbour) if not bill.has_paid(c)]
        bill.charge("A-value", (group.key,), (neighbour,), price, covers, factor)
        for contact in covers:
            a, b, c, d = contact.atoms
            half = None if price.value_kcal is None else price.value_kcal * factor / 2
            charged.paths[(a, b, c, d)] = charged.paths[(d, c, b, a)] = half


def _has_two_oxo(parties: Parties, atom: int) -> bool:
    """True for a sulfone: one oxygen is axial in every chair, so that nothing is charged."""
    return sum(home == atom and group.kind == "oxo" for (home, _), group in parties.groups.items()) == 2


def _paths_of(geometry: Geometry, gauche: tuple[Contact, ...], ring: int, atom: int, neighbour: int) -> list[Contact]:
    """Gauche paths from an outside group into a ring."""
    members = geometry.system.rings[ring].atoms
    found = []
    for contact in gauche:
        a, b, c, d = contact.atoms
        if (a == neighbour and b == atom and c in members and d in members) or (
            d == neighbour and c == atom and b in members and a in members
        ):
            found.append(contact)
    return found


def _charge_paths(
    geometry: Geometry, facts: Survey, gauche: tuple[Contact, ...], parties: Parties, bill: Bill, charged: _Charged
) -> None:
    """The gauche paths that no A-value paid for: ring fusions and vicinal pairs."""
    members = geometry.system.atom_set
    axial: set[tuple[int, int]] | None = None
    for contact in gauche:
        if bill.has_paid(contact):
            continue
        a, b, c, d = contact.atoms
        x, y = parties.groups[(b, a)], parties.groups[(c, d)]
        if a in members and d in members:
            price = _fusion_price(geometry, contact, parties, x, y)
            bill.charge("ring fusion gauche", ("ring bond", "ring bond"), contact.atoms, price, (contact,))
        elif (a not in members and shared_ring(geometry, b, c, d) is not None) or (
            d not in members and shared_ring(geometry, c, b, a) is not None
        ):
            outside, atom, into = (a, b, (c, d)) if a not in members else (d, c, (b, a))
            ring = shared_ring(geometry, atom, *into)
            assert ring is not None
            group = parties.groups[(atom, outside)]
            price = ring_value(parties.book, parties.place(geometry, ring, atom), group)
            bill.charge("A-value", (group.key,), (outside,), price, (contact,), 0.5)
        else:
            if axial is None:
                axial = {(p.site.ring_atom, p.site.neighbour) for p in facts.placed if p.position == "axial"}
            both_equatorial = (b, a) not in axial and (c, d) not in axial
            price = parties.book.vicinal(x, y, both_equatorial=both_equatorial)
            bill.charge("vicinal gauche", pair_of(x.key, y.key), (a, d), price, (contact,))
        charged.paths[(a, b, c, d)] = charged.paths[(d, c, b, a)] = price.value_kcal


def _fusion_price(geometry: Geometry, contact: Contact, parties: Parties, x: Group, y: Group) -> Price:
    """Ring-fusion gauche: 0.9 between carbons of carbocycles, else the mean of the two half ring values."""
    a, b, c, d = contact.atoms
    views = []
    for ring, atom, group in ((shared_ring(geometry, b, c, d), b, x), (shared_ring(geometry, c, b, a), c, y)):
        if ring is not None:
            views.append((parties.place(geometry, ring, atom), group))
    if not views or all(place.is_plain for place, _ in views):
        return parties.book.fusion(x, y)
    prices = [ring_value(parties.book, place, group) for place, group in views]
    share = 0.5 / len(prices)
    if any(price.value_kcal is None for price in prices):
        return parties.book.fusion(x, y)
    terms: tuple[Term, ...] = tuple(t for price in prices for t in scaled(price.terms, share))
    return Price(
        value_kcal=sum(price.value_kcal or 0.0 for price in prices) * share,
        terms=terms,
        row="rules/hetero-fusion/" + "+".join(price.row for price in prices),
        source=prices[0].source,
        known_by="computed",
        estimated=True,
        polar=any(price.polar for price in prices),
        note="half of what the ring atom costs as a group at that position",
    )


def _share(
    path: tuple[int, int, int, int], group: Group, book: PriceBook, charged: _Charged
) -> tuple[float, tuple[Term, ...]]:
    """The X//H share a group no longer pays once something stands opposite.

    The smaller of what its path cost and half its A-value, but never negative: an anomeric gain is not a contact.
    """
    price = book.a_value(group)
    half = (price.value_kcal or 0.0) / 2
    paid = charged.paths.get(path)
    if paid is None or paid >= half - 1e-9:
        return half, scaled(price.terms, -0.5)
    return max(paid, 0.0), ()


def _charge_facing(contact: Contact, parties: Parties, bill: Bill, charged: _Charged) -> None:
    """Syn-axial or peri pair: the whole contact less the two shares that are gone."""
    x, a, b, c, y = contact.atoms
    first, second = parties.groups[(a, x)], parties.groups[(c, y)]
    book = parties.book
    whole = book.syn_axial(first, second)
    share_x, terms_x = _share((x, a, b, c), first, book, charged)
    share_y, terms_y = _share((y, c, b, a), second, book, charged)
    peri = contact.kind == "peri"
    terms = (*whole.terms, *terms_x, *terms_y)
    notes = [whole.note] if whole.note else []
    if whole.value_kcal is not None:
        notes.append(f"contact {whole.value_kcal:.2f} less {share_x + share_y:.2f} already charged")
    keys = pair_of(first.key, second.key)
    if peri:
        terms = (*terms, *book.rule("peri-extra", "/".join(keys)).terms)
    price = Price(
        value_kcal=None if whole.value_kcal is None else whole.value_kcal - share_x - share_y,
        terms=terms,
        row=whole.row,
        source=whole.source,
        known_by=whole.known_by,
        estimated=whole.estimated or peri,
        polar=whole.polar,
        bound="at least" if peri else whole.bound,
        note="; ".join(notes),
    )
    bill.charge("peri" if peri else "syn-axial", keys, (x, y), price, (contact,))


def ring_strain(facts: Survey, ledger: Ledger, geometry: Geometry) -> dict[int, float]:
    """What each ring pays for its own axial groups and syn-axial pairs [kcal/mol].

    Pairs of dipoles are left out: nothing says that a twist-boat relieves them.
    """
    totals: dict[int, float] = {}
    for line in ledger.lines:
        value = line.value_kcal or 0.0
        if line.rule == "A-value":
            for contact in line.covers:
                a, b, c, d = contact.atoms
                ring = shared_ring(geometry, b, c, d) if a not in geometry.system.atom_set else None
                ring = ring if ring is not None else shared_ring(geometry, c, b, a)
                if ring is not None:
                    totals[ring] = totals.get(ring, 0.0) + value / 2
        elif line.rule == "syn-axial" and not line.polar:
            for contact in line.covers:
                ring = shared_ring(geometry, *contact.atoms[1:4])
                if ring is not None:
                    totals[ring] = totals.get(ring, 0.0) + value
    return totals
