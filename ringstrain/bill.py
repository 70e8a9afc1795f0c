"""Who is billed and the bill itself: groups, ring names, prices, and lines piling up."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field, replace
from functools import lru_cache

from ringstrain.contacts import Contact, Placed, Survey
from ringstrain.geometry import Geometry
from ringstrain.ledger import Ledger, Line, Rule
from ringstrain.provenance import Price
from ringstrain.ringgraph import Ring
from ringstrain.ringnames import RingName, name_ring, rename
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook
from ringstrain.tables.ring_prices import RingPlace, ring_value

GroupMap = dict[tuple[int, int], Group]
#: What stands on a ring nitrogen that carries no group.
HYDROGEN = Group(key="hydrogen", code=1, mirror_code=1, kind="hydrogen", tabulated=False)


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
    has_dipoles
        True when there are two halogens, which may face each other across a ring.
    """

    groups: GroupMap
    names: tuple[RingName, ...]
    book: PriceBook
    has_dipoles: bool = False
    _places: dict[tuple[int, int], RingPlace] = field(default_factory=dict)
    _prices: dict[tuple[int, int, int], Price] = field(default_factory=dict)

    def place(self, geometry: Geometry, ring: int, atom: int) -> RingPlace:
        """A ring atom's position as the price tables see it."""
        found = self._places.get((ring, atom))
        if found is None:
            found = self._places[(ring, atom)] = _ring_place(geometry, self.names[ring], ring, atom)
        return found

    def site_price(self, geometry: Geometry, ring: int, atom: int, neighbour: int) -> Price:
        """What the group on a site costs when it is axial there."""
        key = (ring, atom, neighbour)
        price = self._prices.get(key)
        if price is None:
            group = self.groups.get((atom, neighbour), HYDROGEN)
            if group.kind == "hydrogen":  # deuterium and tritium cost what hydrogen does
                group = HYDROGEN
            price = self._prices[key] = ring_value(self.book, self.place(geometry, ring, atom), group)
        return price


def parties_of(geometry: Geometry, groups: GroupMap, book: PriceBook) -> Parties:
    """Names and prices for the states of one ring system."""
    names = tuple(
        [name_ring(geometry.structure, geometry.system, number) for number in range(len(geometry.system.rings))]
    )
    return Parties(groups, names, book, sum([group.kind == "halogen" for group in groups.values()]) > 1)


def _ring_place(geometry: Geometry, name: RingName, ring: int, atom: int) -> RingPlace:
    """Position, and the symbols around the ring seen from there."""
    record = geometry.system.rings[ring]
    place = record.place(atom)
    flat = 0
    if record.flat_bond is not None:
        ends = (record.flat_bond, (record.flat_bond + 1) % 6)
        flat = min([min((place - e) % 6, (e - place) % 6) for e in ends])
    found = _seen_from(name.symbols, place, flat)
    if found.ring == "oxane" and found.position == 3 and _has_anomeric_oxygen(geometry, record, place):
        return replace(found, ring="2-oxyoxane")
    return found


@lru_cache(maxsize=4096)
def _seen_from(symbols: tuple[str, ...], place: int, flat: int) -> RingPlace:
    """A position of a ring of these symbols, so far from its flat bond."""
    known = rename(symbols)
    if symbols[place] == "NR":  # the group on nitrogen is what is being placed, not part of the ring's name
        known = rename(tuple(["NH" if i == place else s for i, s in enumerate(symbols)]))
    bare = rename(tuple(["NH" if s == "NR" else s for s in symbols]))
    turned = symbols[place:] + symbols[:place]
    return RingPlace(known.name, known.positions[place], turned, flat, (bare.name, bare.positions[place]))


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
    """Lines being gathered; equal prices of equal groups pile up on one line.

    ``covered`` holds the identities of the contacts of one survey, which live as long as the bill is drawn up.
    """

    entries: dict[tuple[str, tuple[str, ...], str, float | None], _Entry] = field(default_factory=dict)
    covered: set[int] = field(default_factory=set)

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
        value = price.value_kcal
        key = (rule, groups, price.row, None if value is None else round(value, 9))
        entry = self.entries.get(key)
        if entry is None:
            entry = self.entries[key] = _Entry(rule, groups, price)
        entry.count += count
        for contact in covers:
            if id(contact) in self.covered:
                raise AssertionError(f"{contact} is charged twice")
            self.covered.add(id(contact))
            entry.covers.append(contact)
        if atoms not in entry.atoms:
            entry.atoms.append(atoms)

    def has_paid(self, contact: Contact) -> bool:
        """True when a line covers the contact already."""
        return id(contact) in self.covered

    def settle(self) -> Ledger:
        """The finished ledger."""
        return Ledger.of([_line(entry) for entry in self.entries.values()])


def _line(entry: _Entry) -> Line:
    return Line(
        rule=entry.rule,
        groups=entry.groups,
        atoms=tuple(entry.atoms),
        count=entry.count,
        price=entry.price,
        covers=tuple(entry.covers),
    )


def pair_of(first: str, second: str) -> tuple[str, str]:
    """Two group keys in a fixed order."""
    return (first, second) if first <= second else (second, first)


def shared_ring(geometry: Geometry, *atoms: int) -> int | None:
    """A six-membered ring that holds all these atoms."""
    rings_of = geometry.system.rings_of
    common = rings_of.get(atoms[0], ())
    for atom in atoms[1:]:
        here = rings_of.get(atom, ())
        common = common if common == here else tuple([number for number in common if number in here])
    return common[0] if common else None


def axial_sites(facts: Survey) -> tuple[Placed, ...]:
    """Sites with an atom that point axially."""
    return tuple(p for p in facts.placed if p.position == "axial" and p.occupant == "atom")
