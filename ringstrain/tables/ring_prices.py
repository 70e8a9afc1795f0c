"""Prices of one group at one position of a heteroring, a ketone, an alkylidene ring or a half-chair.

A ring-specific value replaces the A-value.  Where a position has none, a group bound through carbon is scaled by
what the position does to methyl, and a group bound through a heteroatom keeps its A-value with a wide uncertainty.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from ringstrain.provenance import Price, Term, scaled
from ringstrain.tables.groups import FAMILIES, Group
from ringstrain.tables.kinship import energy_of
from ringstrain.tables.prices import PriceBook
from ringstrain.tables.records import Claim
from ringstrain.tables.select import USABLE_FORMS, Selection

_TABLES = ("heteroring", "sp2ring", "anomeric")
#: Ring whose methyl values tell what one such atom does to a position.
_BASE_RING = {
    "O": "oxane",
    "S": "thiane",
    "NH": "piperidine",
    "NR": "piperidine",
    "N=": "piperidine",
    "NH=": "piperidine",
    "N-N=O": "piperidine",
    "NH+": "piperidine",
    "NR+": "n,n-dimethylpiperidinium",
    "C=O": "cyclohexanone",
    "C=C": "cyclohexanone",
}
_QUANTITIES = {"dG": 0, "": 0, "dH": 1, "dE": 2}


@dataclass(frozen=True, slots=True)
class RingPlace:
    """A position of a ring as the price tables see it.

    Attributes
    ----------
    ring
        Ring name.
    position
        Position number.
    symbols
        Atom symbols around the ring from this position, itself first.
    flat_distance
        1 next to the flat bond of a half-chair, 2 beyond, 0 when the ring is a chair.
    parent
        Ring and position with every N-substituent taken off, to look under next.
    """

    ring: str
    position: int
    symbols: tuple[str, ...]
    flat_distance: int = 0
    parent: tuple[str, int] = ("", 0)

    @property
    def is_plain(self) -> bool:
        """True when only cyclohexane's own A-value is called for."""
        return self.ring == "cyclohexane"

    def has_near(self, *symbols: str) -> bool:
        """True when a neighbouring ring atom has one of these symbols."""
        return self.symbols[1] in symbols or self.symbols[5] in symbols


def ring_value(book: PriceBook, place: RingPlace, group: Group) -> Price:
    """What an axial group costs at a ring position.

    Parameters
    ----------
    book
        Prices under given conditions.
    place
        Ring and position.
    group
        The group, or hydrogen on a ring nitrogen.

    Returns
    -------
    Price
        G(axial) - G(equatorial); the cyclohexane A-value on a plain ring.
    """
    if place.is_plain:
        return book.a_value(group)
    around = (*place.symbols, str(place.flat_distance), place.parent[0], str(place.parent[1]))
    key = ("ring", place.ring, str(place.position), group.traits, *around)
    return book.remembered(key, lambda: _value_at(book, place, group))


def _value_at(book: PriceBook, place: RingPlace, group: Group) -> Price:
    """The row of the position, else a scaled A-value."""
    exact = _lookup(book, place, group)
    if exact is not None:
        return exact
    if group.kind == "hydrogen":
        return Price(value_kcal=0.0, row="", source="", known_by="common practice")
    return _scaled_value(book, place, group)


def _lookup(book: PriceBook, place: RingPlace, group: Group) -> Price | None:
    """The row of the position for the group, a stand-in or its class."""
    names = [(group.key, 0.0)] if group.tabulated or group.kind == "hydrogen" else []
    names.extend((s.name, s.extra) for s in book.stand_ins(group) if s.name != group.key)
    for name, extra in names:
        key = f"{place.ring}/{place.position}/{name}"
        chosen = _select(book, key)
        if chosen is None and place.parent[0] not in ("", place.ring):
            key = f"{place.parent[0]}/{place.parent[1]}/{name}"
            chosen = _select(book, key)
        if chosen is None:
            continue
        claim = chosen.claim
        estimated = extra > 0 or name.startswith("class:") or claim.known_by == "computed"
        notes = [f"{place.ring}, position {place.position}"]
        if name != group.key:
            notes.append(f"estimated from {name.removeprefix('class:')}")
        if chosen.borrowed:
            notes.append(f"taken from the {chosen.borrowed} row")
        return Price(
            value_kcal=book.at_temperature(claim),
            terms=(Term(claim.row, group.key, 1.0, math.hypot(chosen.sigma, extra)),),
            row=claim.row,
            source=claim.source or "estimate",
            known_by=claim.known_by,
            estimated=estimated,
            polar=_varies(book, key),
            bound=claim.bound,
            note="; ".join(notes),
        )
    return None


def _usable(book: PriceBook, key: str) -> list[Claim]:
    """Claims of the ring tables about one key that hold a value."""
    return [
        claim
        for table in _TABLES
        for claim in book.tables.rivals(table, key)
        if claim.form in USABLE_FORMS[table] and claim.value is not None and claim.unit in ("kcal/mol", "kJ/mol")
    ]


def _varies(book: PriceBook, key: str) -> bool:
    """True when the position has values for more than one medium, so that the medium decides."""
    media = {claim.medium for claim in _usable(book, key)}
    return len(media - {"any"}) > 1


def _select(book: PriceBook, key: str) -> Selection | None:
    """The claim for a ring position: a stated preference, else by medium, then free energy, then how known."""
    conditions = book.conditions
    claims = _usable(book, key)
    if not claims:
        return None
    default = book.tables.row("rules/ring-value").uncertainty or 0.0
    from ringstrain.tables.conditions import NEAREST

    nearest = NEAREST[conditions.medium]
    if "ium/" in key:  # an ion's gas-phase number says little about any solution
        nearest = (*(m for m in nearest if m != "gas"), *(m for m in nearest if m == "gas"))
    order = {conditions.medium: 0, "any": 1, **{m: i + 2 for i, m in enumerate(nearest)}}
    preferred = {
        p.row: p.uncertainty
        for medium in (conditions.medium, "any")
        for table in _TABLES
        if (p := book.tables.preference(table, key, medium)) is not None
    }
    best = min(
        claims,
        key=lambda c: (
            c.known_by != "yours",
            not (conditions.solvent and c.solvent == conditions.solvent),
            c.row not in preferred,
            order[c.medium],
            _QUANTITIES.get(c.quantity, 3),
            c.known_by == "computed",
            c.known_by == "recalled",
            c.uncertainty is None,
            c.line,
        ),
    )
    sigma = preferred.get(best.row) or best.uncertainty or default
    borrowed = best.medium if order[best.medium] > 1 and best.solvent != conditions.solvent else ""
    if borrowed:
        sigma = math.hypot(sigma, book.tables.row("rules/ring-borrowed").uncertainty or 0.0)
    return Selection(best, sigma, borrowed)


def _scaled_value(book: PriceBook, place: RingPlace, group: Group) -> Price:
    """The estimate for a position without a row."""
    own = book.a_value(group)
    if own.value_kcal is None:
        return own
    carbon = "carbon" in FAMILIES[group.kind]
    if place.symbols[0] == "C" and place.has_near("N=", "N-N=O"):
        rule = book.rule("planar-nitrogen-2", group.key)
        return _estimate(rule, f"{place.ring}: group beside a planar nitrogen goes axial")
    if place.flat_distance == 1 and place.has_near("aromatic"):
        return _estimate(book.rule("benzylic", group.key), f"{place.ring}: the peri hydrogen meets an equatorial group")
    factor = methyl_factor(book, place)
    if carbon:
        spread = book.rule("ring-carbon", group.key)
        value = own.value_kcal * factor
        terms = (*scaled(own.terms, factor), *spread.terms)
        note = f"{place.ring}, position {place.position}: A-value times {factor:.2f}, what methyl shows there"
    else:
        spread = book.rule("ring-hetero", group.key)
        anomeric = place.has_near("O", "S") and group.kind in ("oxy", "acyloxy", "silyloxy", "halogen", "sulfanyl")
        shift = book.rule("anomeric-shift", group.key) if anomeric else None
        value = own.value_kcal + ((shift.value_kcal or 0.0) if shift else 0.0)
        terms = (*own.terms, *spread.terms, *(shift.terms if shift else ()))
        for distance, name in ((2, "cation-3"), (3, "cation-4")):
            if any(place.symbols[d] in ("NH+", "NR+") for d in {distance, 6 - distance}):
                shifted_by = book.rule(name, group.key)
                value += shifted_by.value_kcal or 0.0
                terms = (*terms, *shifted_by.terms)
        if group.kind in ("sulfinyl", "sulfonyl"):
            value += (book.rule("beta-oxygen-shift", group.key).value_kcal or 0.0) * sum(
                place.symbols[d] == "O" for d in (2, 4)
            )
        shifted = " and an anomeric shift" if shift else ""
        note = f"{place.ring}, position {place.position}: cyclohexane A-value{shifted}, wide"
    return Price(
        value_kcal=value,
        terms=terms,
        row=spread.row,
        source=own.source,
        known_by="computed",
        estimated=True,
        polar=not carbon,
        bound=own.bound,
        note=note,
    )


def _estimate(rule: Price, note: str) -> Price:
    return Price(
        value_kcal=rule.value_kcal,
        terms=rule.terms,
        row=rule.row,
        source=rule.source,
        known_by=rule.known_by,
        estimated=True,
        note=note,
    )


def methyl_factor(book: PriceBook, place: RingPlace) -> float:
    """What a ring position does to methyl, relative to cyclohexane [-].

    Notes
    -----
    The position's own methyl row when there is one; else the product of what each special ring atom does at its
    distance, each read from the ring that has that atom alone.
    """
    methyl = book.a_of("methyl").value_kcal or 1.0
    own = _select(book, f"{place.ring}/{place.position}/methyl")
    if own is not None:
        return energy_of(own.claim) / methyl
    factor = 1.0
    for distance in range(1, 6):
        base = _BASE_RING.get(place.symbols[distance])
        if base is None:
            continue
        position = min(distance, 6 - distance) + 1
        chosen = _select(book, f"{base}/{position}/methyl")
        if chosen is not None:
            factor *= energy_of(chosen.claim) / methyl
    if place.flat_distance:
        position = 3 if place.flat_distance == 1 else 4
        chosen = _select(book, f"cyclohexene/{position}/methyl")
        factor *= energy_of(chosen.claim) / methyl if chosen is not None else 0.5
    return factor
