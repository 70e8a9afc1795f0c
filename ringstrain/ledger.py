"""The itemised bill of one state: every contact charged once, every charge with its source."""

from __future__ import annotations

import math

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from ringstrain.contacts import Contact, Placed, Survey
from ringstrain.geometry import Geometry
from ringstrain.provenance import KnownBy, Price, Term, combined_sigma, scaled, worst_known
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import PriceBook

Rule = Literal[
    "A-value",
    "ring fusion gauche",
    "vicinal gauche",
    "syn-axial",
    "peri",
    "geminal",
    "trans-fused five-ring",
    "fused ring",
    "ring term",
]
Regime = Literal["additive", "pair terms", "estimated", "polar"]
REGIMES: tuple[Regime, ...] = ("additive", "pair terms", "estimated", "polar")


@dataclass(frozen=True, slots=True, kw_only=True)
class Line:
    """One priced row of a ledger.

    Attributes
    ----------
    rule
        Which rule charged it.
    groups
        Keys of the groups concerned.
    atoms
        Atoms of each occurrence.
    count
        How often it is charged [-].
    value_kcal
        Price of one [kcal/mol]; None when no table has it.
    terms
        Random variables of one.
    row, source, known_by
        Where the price stands and how it is known.
    estimated
        True when no row was measured for just this case.
    polar
        True when two dipoles meet or the medium decides.
    bound
        ``"at least"`` when only a lower limit is known.
    note
        What a reader should know.
    covers
        The contacts it pays for.
    """

    rule: Rule
    groups: tuple[str, ...]
    atoms: tuple[tuple[int, ...], ...]
    count: float
    value_kcal: float | None
    terms: tuple[Term, ...]
    row: str
    source: str
    known_by: KnownBy
    estimated: bool
    polar: bool
    bound: str
    note: str
    covers: tuple[Contact, ...]

    @property
    def subtotal_kcal(self) -> float | None:
        """Count times price [kcal/mol]."""
        return None if self.value_kcal is None else self.count * self.value_kcal

    @property
    def uncertainty_kcal(self) -> float:
        """Standard uncertainty of the subtotal [kcal/mol]."""
        return combined_sigma(scaled(self.terms, self.count))

    @property
    def key(self) -> tuple[str, tuple[str, ...], str]:
        """What makes two lines of two states the same kind of line."""
        return self.rule, self.groups, self.row

    def as_dict(self) -> dict[str, object]:
        """The line as the JSON of a chairs document shows it."""
        return {
            "rule": self.rule,
            "groups": list(self.groups),
            "atoms": [list(a) for a in self.atoms],
            "count": int(self.count) if self.count == int(self.count) else self.count,
            "value_kcal": self.value_kcal,
            "subtotal_kcal": self.subtotal_kcal,
            "uncertainty_kcal": self.uncertainty_kcal,
            "known_by": self.known_by,
            "source": self.source,
            "row": self.row,
            "estimated": self.estimated,
            "bound": self.bound,
            "note": self.note,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Ledger:
    """All lines of one state.

    Attributes
    ----------
    lines
        In the order of the rules.
    """

    lines: tuple[Line, ...]

    @property
    def total_kcal(self) -> float:
        """Sum of the known subtotals [kcal/mol]."""
        return math.fsum(line.subtotal_kcal or 0.0 for line in self.lines)

    @property
    def terms(self) -> tuple[Term, ...]:
        """Random variables of the total."""
        return tuple(term for line in self.lines for term in scaled(line.terms, line.count))

    @property
    def unknown(self) -> tuple[Line, ...]:
        """Lines without a price."""
        return tuple(line for line in self.lines if line.value_kcal is None)

    @property
    def known_by(self) -> KnownBy:
        """How well the total is known."""
        return worst_known(line.known_by for line in self.lines)


def regime_of(lines: Iterable[Line]) -> Regime:
    """The least certain kind of line among these."""
    worst = 0
    for line in lines:
        if line.polar and line.rule in ("vicinal gauche", "syn-axial", "peri", "geminal"):
            return "polar"
        if line.estimated:
            worst = max(worst, 2)
        elif line.rule in ("vicinal gauche", "syn-axial", "peri"):
            worst = max(worst, 1)
    return REGIMES[worst]


@dataclass(slots=True)
class _Bill:
    """Lines being gathered; equal prices of equal groups pile up on one line."""

    lines: dict[tuple[str, tuple[str, ...], str, float | None], _Entry] = field(default_factory=dict)
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
        paid = tuple(covers)
        for contact in paid:
            if contact in self.covered:
                raise AssertionError(f"{contact} is charged twice")
            self.covered.add(contact)
        key = (rule, groups, price.row, None if price.value_kcal is None else round(price.value_kcal, 9))
        entry = self.lines.get(key)
        if entry is None:
            entry = self.lines[key] = _Entry(rule, groups, price)
        entry.count += count
        entry.covers.extend(paid)
        if atoms not in entry.atoms:
            entry.atoms.append(atoms)


@dataclass(slots=True)
class _Entry:
    rule: Rule
    groups: tuple[str, ...]
    price: Price
    count: float = 0.0
    atoms: list[tuple[int, ...]] = field(default_factory=list)
    covers: list[Contact] = field(default_factory=list)


GroupMap = dict[tuple[int, int], Group]


def make_ledger(geometry: Geometry, facts: Survey, groups: GroupMap, book: PriceBook) -> Ledger:
    """The ledger of a state.

    Parameters
    ----------
    geometry
        The system and its configuration.
    facts
        Positions and contacts of the state.
    groups
        Group on each exocyclic site, ring neighbours included, by (ring atom, neighbour).
    book
        Prices under the asked conditions.

    Returns
    -------
    Ledger
        Every gauche, syn-axial X//Y, peri and geminal contact paid for exactly once.
    """
    bill = _Bill()
    where = {(p.site.ring_atom, p.site.neighbour, p.site.ring): p for p in facts.placed}
    charges = _charge_gauche(geometry, facts, groups, book, bill, where)
    for contact in facts.contacts:
        if contact.kind in ("syn-axial X//Y", "peri"):
            _charge_facing(contact, groups, book, bill, charges)
        elif contact.kind == "geminal":
            _charge_geminal(geometry, contact, groups, book, bill, where)
    _charge_companions(geometry, book, bill)
    return Ledger(lines=tuple(_line(entry) for entry in bill.lines.values()))


Charges = dict[tuple[int, int, int, int], float | None]
Where = dict[tuple[int, int, int], Placed]


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


def _charge_gauche(
    geometry: Geometry, facts: Survey, groups: GroupMap, book: PriceBook, bill: _Bill, where: Where
) -> Charges:
    """Charge each gauche path by the first rule that fits; what each path cost."""
    members = geometry.system.atom_set
    rings_of = geometry.system.rings_of
    charges: Charges = {}
    for contact in facts.contacts:
        if contact.kind != "gauche":
            continue
        a, b, c, d = contact.atoms
        inside_a, inside_d = a in members, d in members
        if inside_a and inside_d:
            price = book.fusion(groups[(b, a)], groups[(c, d)])
            bill.charge("ring fusion gauche", _pair("ring bond", "ring bond"), contact.atoms, price, (contact,))
            paid = price.value_kcal
        elif not inside_a and _common(rings_of, b, c, d):
            paid = _charge_axial(contact, groups[(b, a)], a, book, bill)
        elif not inside_d and _common(rings_of, c, b, a):
            paid = _charge_axial(contact, groups[(c, d)], d, book, bill)
        else:
            x, y = groups[(b, a)], groups[(c, d)]
            price = book.vicinal(x, y, both_equatorial=_both_equatorial(geometry, contact, where))
            bill.charge("vicinal gauche", _pair(x.key, y.key), (a, d), price, (contact,))
            paid = price.value_kcal
        charges[(a, b, c, d)] = charges[(d, c, b, a)] = paid
    return charges


def _pair(first: str, second: str) -> tuple[str, ...]:
    """Two group keys in a fixed order."""
    return tuple(sorted((first, second)))


def _common(rings_of: dict[int, tuple[int, ...]], *atoms: int) -> bool:
    """True when one six-membered ring holds all these atoms."""
    shared = set(rings_of.get(atoms[0], ()))
    for atom in atoms[1:]:
        shared.intersection_update(rings_of.get(atom, ()))
    return bool(shared)


def _charge_axial(contact: Contact, group: Group, atom: int, book: PriceBook, bill: _Bill) -> float | None:
    """Half an A-value: one of the two ring paths of an axial group."""
    price = book.a_value(group)
    bill.charge("A-value", (group.key,), (atom,), price, (contact,), 0.5)
    return None if price.value_kcal is None else price.value_kcal / 2


def _both_equatorial(geometry: Geometry, contact: Contact, where: Where) -> bool:
    """True when neither end of a vicinal pair is axial to a ring that holds its bond."""
    a, b, c, d = contact.atoms
    for number in geometry.system.rings_of[b]:
        if number not in geometry.system.rings_of[c]:
            continue
        first, second = where.get((b, a, number)), where.get((c, d, number))
        return not any(p is not None and p.position == "axial" for p in (first, second))
    return True


def _share(charges: Charges, path: tuple[int, int, int, int], group: Group, book: PriceBook) -> tuple[float, tuple[Term, ...]]:
    """The X//H share a group no longer pays once something stands opposite: the smaller of what its path cost and half its A-value."""
    price = book.a_value(group)
    half = (price.value_kcal or 0.0) / 2
    paid = charges.get(path)
    if paid is None or paid >= half - 1e-9:
        return half, scaled(price.terms, -0.5)
    return paid, ()


def _charge_facing(
    contact: Contact, groups: GroupMap, book: PriceBook, bill: _Bill, charges: Charges
) -> None:
    """Syn-axial or peri pair: the whole contact less the two shares that are gone."""
    x, a, b, c, y = contact.atoms
    first, second = groups[(a, x)], groups[(c, y)]
    whole = book.syn_axial(first, second)
    share_x, terms_x = _share(charges, (x, a, b, c), first, book)
    share_y, terms_y = _share(charges, (y, c, b, a), second, book)
    peri = contact.kind == "peri"
    terms = (*whole.terms, *terms_x, *terms_y)
    notes = [whole.note] if whole.note else []
    if whole.value_kcal is not None:
        notes.append(f"contact {whole.value_kcal:.2f} less {share_x + share_y:.2f} already charged")
    if peri:
        extra = book.rule("peri-extra", "/".join(_pair(first.key, second.key)))
        terms = (*terms, *extra.terms)
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
    bill.charge("peri" if peri else "syn-axial", _pair(first.key, second.key), (x, y), price, (contact,))


def _charge_geminal(
    geometry: Geometry, contact: Contact, groups: GroupMap, book: PriceBook, bill: _Bill, where: Where
) -> None:
    """Correction for two groups on one carbon; which is axial decides."""
    x, atom, y = contact.atoms
    number = geometry.system.rings_of[atom][0]
    first = where.get((atom, x, number))
    axial, equatorial = (x, y) if first is not None and first.position == "axial" else (y, x)
    a, e = groups[(atom, axial)], groups[(atom, equatorial)]
    price = book.geminal(a, e)
    bill.charge("geminal", (a.key, e.key), (axial, equatorial), price, (contact,))


def _charge_companions(geometry: Geometry, book: PriceBook, bill: _Bill) -> None:
    """Trans-fused five-membered rings cost what closing them costs; larger ones are only as sure as their own shape."""
    for companion in geometry.system.companions:
        shared = [a for a in companion if a in geometry.system.atom_set]
        if len(shared) != 2:
            continue
        if len(companion) == 5 and _is_trans_fused(geometry, companion, shared[0], shared[1]):
            bill.charge("trans-fused five-ring", ("five-ring",), tuple(sorted(shared)), book.rule("trans-five-ring", "five-ring"))


def _is_trans_fused(geometry: Geometry, companion: tuple[int, ...], first: int, second: int) -> bool:
    """True when a companion ring leaves two neighbouring ring atoms on opposite faces."""
    for number in geometry.system.rings_of[first]:
        if number not in geometry.system.rings_of[second]:
            continue
        faces = []
        for atom in (first, second):
            place = geometry.system.rings[number].place(atom)
            faces.append(next((s.face for s in geometry.sites[number][place] if s.neighbour in companion), 0))
        if faces[0] and faces[1]:
            return faces[0] != faces[1]
    return False
