"""How a ledger is drawn up.

Every gauche, syn-axial, peri and geminal contact is charged once, by the first rule that fits.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

from ringstrain.contacts import Contact, Placed, Survey
from ringstrain.geometry import Geometry
from ringstrain.ledger import Ledger, Line, Rule
from ringstrain.provenance import Price, Term, scaled
from ringstrain.ringgraph import Ring
from ringstrain.ringnames import RingName, name_ring, rename
from ringstrain.states import Shapes
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook
from ringstrain.tables.ring_prices import RingPlace, ring_value

GroupMap = dict[tuple[int, int], Group]
#: How much of its A-value a group pays by where it points; on a twist-boat axis a third.
_FACTORS = {"axial": 1.0, "isoclinal": 1 / 3, "equatorial": 0.0}
_HYDROGEN = Group(key="hydrogen", code=1, mirror_code=1, kind="hydrogen", tabulated=False)


@dataclass(frozen=True, slots=True)
class Parties:
    """Who is concerned: the same for all states of a ring system.

    Attributes
    ----------
    groups
        Group on each exocyclic site, ring neighbours included, by (ring atom, neighbour).
    names
        Name of each ring.
    book
        Prices under the asked conditions.
    """

    groups: GroupMap
    names: tuple[RingName, ...]
    book: PriceBook
    _places: dict[tuple[int, int], RingPlace] = field(default_factory=dict)

    def place(self, geometry: Geometry, ring: int, atom: int) -> RingPlace:
        """A ring atom's position as the price tables see it."""
        found = self._places.get((ring, atom))
        if found is None:
            found = self._places[(ring, atom)] = _ring_place(geometry, self.names[ring], ring, atom)
        return found


def parties_of(geometry: Geometry, groups: GroupMap, book: PriceBook) -> Parties:
    """Names and prices for the states of one ring system."""
    names = tuple(
        name_ring(geometry.structure, geometry.system, number) for number in range(len(geometry.system.rings))
    )
    return Parties(groups, names, book)


def _ring_place(geometry: Geometry, name: RingName, ring: int, atom: int) -> RingPlace:
    """Position, and the symbols around the ring seen from there."""
    record = geometry.system.rings[ring]
    place = record.place(atom)
    symbols = tuple(name.symbols[(place + i) % 6] for i in range(6))
    flat = 0
    if record.flat_bond is not None:
        ends = (record.flat_bond, (record.flat_bond + 1) % 6)
        flat = min(min((place - e) % 6, (e - place) % 6) for e in ends)
    known = name
    if symbols[0] == "NR":  # the group on nitrogen is what is being placed, not part of the ring's name
        known = rename(tuple("NH" if i == place else s for i, s in enumerate(name.symbols)))
    bare = rename(tuple("NH" if s == "NR" else s for s in name.symbols))
    title = known.name
    if title == "oxane" and known.positions[place] == 3 and _has_anomeric_oxygen(geometry, record, place):
        title = "2-oxyoxane"
    return RingPlace(title, known.positions[place], symbols, flat, (bare.name, bare.positions[place]))


def _has_anomeric_oxygen(geometry: Geometry, ring: Ring, place: int) -> bool:
    """True when the ring atom between this place and the ring oxygen carries an oxygen group."""
    structure = geometry.structure
    for step in (1, -1):
        near, far = ring.atoms[(place + step) % 6], ring.atoms[(place + 2 * step) % 6]
        if structure.atoms[far].number == 8:
            return any(structure.atoms[n].number == 8 and n != far for n in structure.neighbours[near])
    return False


@dataclass(slots=True)
class _Entry:
    rule: Rule
    groups: tuple[str, ...]
    price: Price
    count: float = 0.0
    atoms: list[tuple[int, ...]] = field(default_factory=list)
    covers: list[Contact] = field(default_factory=list)


@dataclass(slots=True)
class Bill:
    """Lines being gathered; equal prices of equal groups pile up on one line."""

    entries: dict[tuple[str, tuple[str, ...], str, float | None], _Entry] = field(default_factory=dict)
    covered: set[Contact] = field(default_factory=set)

    def charge(
        self,
        rule: Rule,
        groups: tuple[str, ...],
        atoms: tuple[int, ...],
        price: Price,
        covers: Iterable[Contact] = (),
        count: float = 1.0,
    ) -> None:
        """Put a price on the bill; covering a contact twice is a mistake of ours."""
        value = None if price.value_kcal is None else round(price.value_kcal, 9)
        key = (rule, groups, price.row, value)
        entry = self.entries.get(key)
        if entry is None:
            entry = self.entries[key] = _Entry(rule, groups, price)
        entry.count += count
        for contact in covers:
            if contact in self.covered:
                raise AssertionError(f"{contact} is charged twice")
            self.covered.add(contact)
            entry.covers.append(contact)
        if atoms not in entry.atoms:
            entry.atoms.append(atoms)

    def settle(self) -> Ledger:
        """The finished ledger."""
        return Ledger.of(_line(entry) for entry in self.entries.values())


def _line(entry: _Entry) -> Line:
    price = entry.price
    return Line(
        rule=entry.rule,
        groups=entry.groups,
        atoms=tuple(entry.atoms),
        count=entry.count,
        value_kcal=price.value_kcal,
        terms=price.terms,
        row=price.row,
        source=price.source,
        known_by=price.known_by,
        estimated=price.estimated,
        polar=price.polar,
        bound=price.bound,
        note=price.note,
        covers=tuple(entry.covers),
    )


@dataclass(slots=True)
class _Charged:
    """What has been paid so far: per gauche path, and per outside group on a ring."""

    paths: dict[tuple[int, ...], float | None] = field(default_factory=dict)
    sites: dict[tuple[int, int, int], float] = field(default_factory=dict)


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
            _charge_geminal(state.geometry, facts, contact, parties, bill)
        elif kind == "eclipsed":
            _charge_eclipsed(contact, parties, bill)
        elif kind == "transannular":
            _charge_transannular(contact, bill)
    _charge_shapes(state, parties, bill)
    _charge_companions(state.geometry, parties.book, bill)
    _charge_allylic(state.geometry, facts, parties, bill)
    _charge_across(facts, parties, bill)
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
                price = ring_value(parties.book, parties.place(geometry, site.ring, atom), _HYDROGEN)
                bill.charge("N-H axial", ("hydrogen",), (atom,), price, count=factor)
            continue
        if neighbour in system.atom_set:
            continue
        group = parties.groups[(atom, neighbour)]
        place = parties.place(geometry, site.ring, atom)
        if (
            group.key == "tert-butyl"
            and place.is_plain
            and site.ring in twisting
            and state.rings[site.ring].shape == "chair"
        ):
            price = parties.book.rule("tert-butyl-axial-chair", "tert-butyl")
        else:
            price = ring_value(parties.book, place, group)
        covers = [c for c in _paths_of(geometry, gauche, site.ring, atom, neighbour) if c not in bill.covered]
        bill.charge("A-value", (group.key,), (neighbour,), price, covers, factor)
        charged.sites[(site.ring, atom, neighbour)] = (price.value_kcal or 0.0) * factor
        for contact in covers:
            a, b, c, d = contact.atoms
            half = None if price.value_kcal is None else price.value_kcal * factor / 2
            charged.paths[(a, b, c, d)] = charged.paths[(d, c, b, a)] = half


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
        if contact in bill.covered:
            continue
        a, b, c, d = contact.atoms
        x, y = parties.groups[(b, a)], parties.groups[(c, d)]
        if a in members and d in members:
            price = _fusion_price(geometry, contact, parties, x, y)
            bill.charge("ring fusion gauche", ("ring bond", "ring bond"), contact.atoms, price, (contact,))
        elif (a not in members and _shared_ring(geometry, b, c, d) is not None) or (
            d not in members and _shared_ring(geometry, c, b, a) is not None
        ):
            outside, atom, into = (a, b, (c, d)) if a not in members else (d, c, (b, a))
            ring = _shared_ring(geometry, atom, *into)
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


def pair_of(first: str, second: str) -> tuple[str, str]:
    """Two group keys in a fixed order."""
    return (first, second) if first <= second else (second, first)


def _shared_ring(geometry: Geometry, *atoms: int) -> int | None:
    """A six-membered ring that holds all these atoms."""
    rings_of = geometry.system.rings_of
    for number in rings_of.get(atoms[0], ()):
        if all(number in rings_of.get(atom, ()) for atom in atoms[1:]):
            return number
    return None


def _fusion_price(geometry: Geometry, contact: Contact, parties: Parties, x: Group, y: Group) -> Price:
    """Ring-fusion gauche: 0.9 between carbons of carbocycles, else the mean of the two half ring values."""
    a, b, c, d = contact.atoms
    views = []
    for ring, atom, group in ((_shared_ring(geometry, b, c, d), b, x), (_shared_ring(geometry, c, b, a), c, y)):
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


def _charge_geminal(geometry: Geometry, facts: Survey, contact: Contact, parties: Parties, bill: Bill) -> None:
    """Correction for two groups on one ring atom; which is axial decides."""
    x, atom, y = contact.atoms
    axial = next((p.site.neighbour for p in facts.placed if p.site.ring_atom == atom and p.position == "axial"), x)
    first, second = (x, y) if axial == x else (y, x)
    a, e = parties.groups[(atom, first)], parties.groups[(atom, second)]
    bill.charge("geminal", (a.key, e.key), (first, second), parties.book.geminal(a, e), (contact,))


def _charge_eclipsed(contact: Contact, parties: Parties, bill: Bill) -> None:
    """Eclipsed neighbours of a boat or half-chair, priced as gauche ones at least."""
    a, b, c, d = contact.atoms
    x, y = parties.groups[(b, a)], parties.groups[(c, d)]
    base = parties.book.vicinal(x, y)
    extra = parties.book.rule("eclipsed-extra", "/".join(pair_of(x.key, y.key)))
    price = Price(
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
    bill.charge("vicinal eclipsed", pair_of(x.key, y.key), (a, d), price, (contact,))


def _charge_transannular(contact: Contact, bill: Bill) -> None:
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


def _charge_shapes(state: Shapes, parties: Parties, bill: Bill) -> None:
    """What a boat or twist-boat costs above the chair."""
    rules = parties.book.tables
    for number, ring in enumerate(state.rings):
        if ring.shape not in ("twist-boat", "boat"):
            continue
        name = parties.names[number].name
        special = f"{ring.shape}-{name}"
        known = any(claim.row == f"rules/{special}" for claim in rules.rivals("rules", ""))
        price = parties.book.rule(special if known else ring.shape, name)
        bill.charge("ring shape", (ring.shape,), state.geometry.system.rings[number].atoms, price)


def _charge_companions(geometry: Geometry, book: PriceBook, bill: Bill) -> None:
    """Trans-fused five-membered rings cost what closing them costs."""
    for companion in geometry.system.companions:
        shared = [a for a in companion if a in geometry.system.atom_set]
        if len(companion) == 5 and len(shared) == 2 and _is_trans_fused(geometry, companion, shared[0], shared[1]):
            price = book.rule("trans-five-ring", "five-ring")
            bill.charge("trans-fused five-ring", ("five-ring",), tuple(sorted(shared)), price)


def _is_trans_fused(geometry: Geometry, companion: tuple[int, ...], first: int, second: int) -> bool:
    """True when a companion ring leaves two neighbouring ring atoms on opposite faces."""
    ring = _shared_ring(geometry, first, second)
    if ring is None:
        return False
    faces = []
    for atom in (first, second):
        place = geometry.system.rings[ring].place(atom)
        faces.append(next((s.face for s in geometry.sites[ring][place] if s.neighbour in companion), 0))
    return bool(faces[0] and faces[1] and faces[0] != faces[1])


def _charge_allylic(geometry: Geometry, facts: Survey, parties: Parties, bill: Bill) -> None:
    """A(1,3) strain of an equatorial group in the plane of an exocyclic double bond with a group on its side."""
    kinds = geometry.system.kinds
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
            if end is None or structure.atoms[end].number != 6 or not _faces_side(geometry, flat, end, atom):
                continue
            group = parties.groups[(atom, placed.site.neighbour)]
            price = parties.book.rule("allylic-z", group.key)
            bill.charge("A(1,3) strain", (group.key,), (placed.site.neighbour, int(end)), price)


def _charge_across(facts: Survey, parties: Parties, bill: Bill) -> None:
    """Two axial halogens on opposite atoms of a ring: their dipoles attract."""
    axial = {(p.site.ring, p.site.place): p.site for p in axial_sites(facts)}
    for (ring, place), first in axial.items():
        second = axial.get((ring, place + 3))
        if second is None or not parties.names[ring].is_carbocycle:
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


def ring_strain(facts: Survey, ledger: Ledger, geometry: Geometry) -> dict[int, float]:
    """What each ring pays for its own axial groups and syn-axial pairs [kcal/mol]."""
    totals: dict[int, float] = {}
    for line in ledger.lines:
        value = line.value_kcal or 0.0
        if line.rule == "A-value":
            for contact in line.covers:
                a, b, c, d = contact.atoms
                ring = _shared_ring(geometry, b, c, d) if a not in geometry.system.atom_set else None
                ring = ring if ring is not None else _shared_ring(geometry, c, b, a)
                if ring is not None:
                    totals[ring] = totals.get(ring, 0.0) + value / 2
        elif line.rule == "syn-axial":
            for contact in line.covers:
                ring = _shared_ring(geometry, *contact.atoms[1:4])
                if ring is not None:
                    totals[ring] = totals.get(ring, 0.0) + value
    return totals


def axial_sites(facts: Survey) -> tuple[Placed, ...]:
    """Sites with an atom that point axially."""
    return tuple(p for p in facts.placed if p.position == "axial" and p.occupant == "atom")
