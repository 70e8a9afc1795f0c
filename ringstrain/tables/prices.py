"""Prices under given conditions: A-values and the terms between two groups.

Every method returns a :class:`~ringstrain.provenance.Price` and falls back in a fixed order: the exact row, the
nearest medium, a stand-in from kin.csv, a row for the class, a combining rule, and at last a price of unknown
value.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import lru_cache

from ringstrain.provenance import Price, Term, scaled
from ringstrain.tables.combining import geminal_guess, product_rule, unpriced
from ringstrain.tables.conditions import Conditions
from ringstrain.tables.groups import Group
from ringstrain.tables.kinship import StandIn, energy_of, kin_of
from ringstrain.tables.records import Claim, Tables, pair_key
from ringstrain.tables.select import Selection, select

#: Prices kept before the memory starts afresh.
_MOST_REMEMBERED = 20_000


class PriceBook:
    """Prices of one set of tables under one set of conditions.

    Parameters
    ----------
    tables
        Claims and preferences.
    conditions
        Medium and temperature.
    """

    def __init__(self, tables: Tables, conditions: Conditions) -> None:
        self.tables = tables
        self.conditions = conditions
        self._memory: dict[tuple[str, ...], Price] = {}

    def remembered(self, key: tuple[str, ...], make: Callable[[], Price]) -> Price:
        """A price that was asked for before, else one that is made now and kept for the next molecule.

        The key must tell apart all that the price depends on: two groups by their ``traits``, not by their names.
        """
        price = self._memory.get(key)
        if price is None:
            price = make()
            if len(self._memory) >= _MOST_REMEMBERED:  # a library of exotic groups must not fill the memory
                self._memory.clear()
            self._memory[key] = price
        return price

    # ---- A-values ------------------------------------------------------------------------------------------

    def a_value(self, group: Group) -> Price:
        """Cyclohexane A-value of a group.

        References
        ----------
        ``avalues.csv`` through ``preference.csv``; ``estimates.csv`` and ``classes.csv`` for groups without a row.
        """
        return self.remembered(("A", group.traits), lambda: self._a_value(group))

    def _a_value(self, group: Group) -> Price:
        if group.kind == "hydrogen" and not group.tabulated:
            return Price(value_kcal=0.0, row="", source="", known_by="common practice")
        if group.tabulated:
            chosen = select(self.tables, "avalues", group.key, self.conditions)
            if chosen is not None:
                return self._priced_a(chosen, group.key)
            chosen = select(self.tables, "estimates", group.key, self.conditions)
            if chosen is not None:
                return self._priced_a(chosen, group.key, estimated=True)
        estimate = self.tables.classes.get(group.kind)
        if estimate is None:
            return Price(value_kcal=None, row="avalues", source="", known_by="computed", note="no A-value")
        return Price(
            value_kcal=estimate.value,
            terms=(Term(f"classes/{estimate.key}", group.key, 1.0, estimate.uncertainty),),
            row=f"classes/{estimate.key}",
            source=f"class mean of {estimate.key} groups",
            known_by="computed",
            estimated=True,
            bound=estimate.bound,
            note=f"estimated: mean of the {estimate.key} class",
        )

    def _priced_a(self, chosen: Selection, key: str, *, estimated: bool = False) -> Price:
        claim = chosen.claim
        value = self.at_temperature(claim)
        notes = []
        if estimated:
            notes.append("estimated by analogy")
        if chosen.borrowed:
            notes.append(f"taken from the {chosen.borrowed} row")
        split = self.tables.preference("avalues", key, "any") is None and not estimated
        return Price(
            value_kcal=value,
            terms=(Term(claim.row, key, 1.0, chosen.sigma),),
            row=claim.row,
            source=claim.source or "estimate",
            known_by=claim.known_by,
            estimated=estimated,
            polar=split,
            bound=claim.bound,
            note="; ".join(notes),
        )

    def at_temperature(self, claim: Claim) -> float:
        """The claim in kcal/mol at the asked temperature when its dH and dS are known, else as printed."""
        if claim.dh_kcal is not None and claim.ds_cal is not None:
            return -claim.dh_kcal + self.conditions.temperature_K * claim.ds_cal / 1000.0
        return energy_of(claim)

    def a_of(self, key: str) -> Price:
        """A-value of a tabulated group by its key."""
        return self.a_value(Group(key=key, code=0, mirror_code=0, kind="other", tabulated=True))

    # ---- pairs ---------------------------------------------------------------------------------------------

    def fusion(self, a: Group, d: Group) -> Price:
        """Ring-fusion gauche-butane between two ring atoms; with a heteroatom the mean of the two half-A's."""
        return self.remembered(("fusion", a.traits, d.traits), lambda: self._fusion(a, d))

    def _fusion(self, a: Group, d: Group) -> Price:
        if a.kind.endswith("alkyl") and d.kind.endswith("alkyl"):
            claim = self.tables.row("gauche/gauche-butane-ring-fusion")
            sigma = claim.uncertainty or 0.0
            return Price(
                value_kcal=claim.value,
                terms=(Term(claim.row, "ring carbon", 1.0, sigma),),
                row=claim.row,
                source=claim.source,
                known_by=claim.known_by,
            )
        first, second = self.a_value(a), self.a_value(d)
        if first.value_kcal is None or second.value_kcal is None:
            return unpriced("ring fusion", a, d)
        return Price(
            value_kcal=(first.value_kcal + second.value_kcal) / 4,
            terms=(*scaled(first.terms, 0.25), *scaled(second.terms, 0.25)),
            row="rules/hetero-fusion",
            source="half-A estimate",
            known_by="computed",
            estimated=True,
            note="estimated: mean of the two half-A's",
        )

    def vicinal(self, x: Group, y: Group, *, both_equatorial: bool = True) -> Price:
        """Term of two gauche groups on neighbouring ring atoms.

        Parameters
        ----------
        x, y
            The groups.
        both_equatorial
            False when one of them is axial; matters for the few pairs measured apart.
        """
        key = ("vicinal", x.traits, y.traits, "ee" if both_equatorial else "ae")
        return self.remembered(key, lambda: self._vicinal(x, y, both_equatorial))

    def _vicinal(self, x: Group, y: Group, both_equatorial: bool) -> Price:
        if {x.kind, y.kind} & {"oxo", "ylidene"}:
            return self.rule("double-bond-vicinal", pair_key(x.key, y.key))
        mixed = self._like_pairs("gauche", x, y)
        if mixed is not None:
            return mixed
        found = self._find("gauche", x, y)
        if found is not None and found[0].claim.form == "ee-ae":
            chosen = found[0]
            base = product_rule(self.tables, "vicinal", x, y) or unpriced("vicinal term", x, y)
            if base.value_kcal is None:
                return base
            claim = chosen.claim
            shift = energy_of(claim) if both_equatorial else 0.0
            own = (Term(claim.row, pair_key(x.key, y.key), 1.0, chosen.sigma),) if both_equatorial else ()
            return Price(
                value_kcal=base.value_kcal + shift,
                terms=(*base.terms, *own),
                row=claim.row,
                source=claim.source,
                known_by=claim.known_by,
                polar=False,
                note="difference ee - ae measured; level estimated",
            )
        if found is not None:
            return self._pair_price(x, y, *found)
        return product_rule(self.tables, "vicinal", x, y) or unpriced("vicinal term", x, y)

    def syn_axial(self, x: Group, y: Group) -> Price:
        """Whole contact of two groups that stand syn-axial (or peri)."""
        return self.remembered(("syn-axial", x.traits, y.traits), lambda: self._syn_axial(x, y))

    def _syn_axial(self, x: Group, y: Group) -> Price:
        found = self._find("syndiaxial", x, y)
        if found is not None:
            return self._pair_price(x, y, *found)
        return (
            self._like_pairs("syndiaxial", x, y)
            or product_rule(self.tables, "syn_axial", x, y)
            or unpriced("syn-axial term", x, y)
        )

    def geminal(self, axial: Group, equatorial: Group) -> Price:
        """Correction for two groups on one ring atom, the first axial."""
        key = ("geminal", axial.traits, equatorial.traits, "alike" if axial.code == equatorial.code else "")
        return self.remembered(key, lambda: self._geminal(axial, equatorial))

    def _geminal(self, axial: Group, equatorial: Group) -> Price:
        if axial.code == equatorial.code:
            return Price(value_kcal=0.0, row="rules/geminal-alike", source="symmetry", known_by="common practice")
        found = self._find("geminal", axial, equatorial)
        if found is not None:
            chosen, extra, note = found
            claim = chosen.claim
            names = [stand.name for stand in self.stand_ins(axial)]
            first, second = (names.index(g) if g in names else len(names) for g in claim.groups)
            if first < second or (claim.form == "term" and claim.groups[0] == claim.groups[1]):
                return self._pair_price(axial, equatorial, chosen, extra, note)
            return Price(
                value_kcal=0.0,
                row=claim.row,
                source=claim.source,
                known_by=claim.known_by,
                note="reference chair of the pair",
            )
        return geminal_guess(self.tables, axial, equatorial)

    def across(self, x: Group, y: Group) -> Price | None:
        """Dipole term of two axial halogens on opposite ring atoms, or None when no row covers the pair.

        References
        ----------
        ``transannular.csv``.
        """
        found = self._find("transannular", x, y) if x.kind == y.kind == "halogen" else None
        if found is None:
            return None
        chosen, extra, note = found
        if chosen.borrowed:
            extra = math.hypot(extra, self.tables.row("rules/combining-transannular").uncertainty or 0.0)
        return self._pair_price(x, y, chosen, extra, note)

    def rule(self, name: str, group: str) -> Price:
        """A value of rules.csv, applied to one kind of place.

        Raises
        ------
        KeyError
            If rules.csv has no such row.
        """
        return self.remembered(("rule", name, group), lambda: self._rule(name, group))

    def _rule(self, name: str, group: str) -> Price:
        claim = self.tables.row(f"rules/{name}")
        return Price(
            value_kcal=None if claim.value is None else energy_of(claim),
            terms=(Term(claim.row, group, 1.0, claim.uncertainty or 0.0),),
            row=claim.row,
            source=claim.source or "estimate",
            known_by=claim.known_by,
            estimated=claim.known_by == "computed",
            note=claim.note,
        )

    # ---- fallbacks -----------------------------------------------------------------------------------------

    def stand_ins(self, group: Group) -> list[StandIn]:
        """Names a row may call the group, from exact to vague, with the uncertainty each step adds."""
        names = [StandIn(group.key, 0.0)] if group.tabulated else []
        names.extend(kin_of(self.tables, group))
        vague = self.tables.row("rules/class-row").uncertainty or 0.0
        names.extend(StandIn(name, vague) for name in group.names if name.startswith("class:"))
        return names

    def _find(self, table: str, x: Group, y: Group) -> tuple[Selection, float, str] | None:
        """The best row for a pair, the uncertainty its vagueness adds, and a note."""
        medium = self._pair_medium(x, y)
        candidates = sorted(
            (a.extra + b.extra, i + j, a.name, b.name)
            for i, a in enumerate(self.stand_ins(x))
            for j, b in enumerate(self.stand_ins(y))
        )
        for extra, _, first, second in candidates:
            chosen = select(self.tables, table, pair_key(first, second), self.conditions, medium)
            if chosen is None:
                continue
            notes = []
            if (first, second) != (x.key, y.key):
                notes.append(f"estimated from {first.removeprefix('class:')} and {second.removeprefix('class:')}")
            if chosen.borrowed:
                notes.append(f"taken from the {chosen.borrowed} row")
            return chosen, extra, "; ".join(notes)
        return None

    def _pair_medium(self, x: Group, y: Group) -> str | None:
        """Medium to look in for a pair that can bind by hydrogen: it depends on what the solvent accepts."""
        if self.conditions.medium != "protic" and any(a.donor and b.kind == "halogen" for a, b in ((x, y), (y, x))):
            return "polar"  # a hydrogen bond to halogen does for the pair what a polar medium does
        if not ((x.donor and y.acceptor) or (y.donor and x.acceptor)):
            return None
        if not self.conditions.accepts_hydrogen_bonds:
            return "nonpolar"
        return "protic" if self.conditions.medium == "protic" else "polar"

    def _pair_price(self, x: Group, y: Group, chosen: Selection, extra: float, note: str) -> Price:
        """Price of a pair from a claim: a term as it stands, a raw equilibrium less the ledger's own A-values."""
        claim = chosen.claim
        sigma = math.hypot(chosen.sigma, extra)
        own = Term(claim.row, pair_key(x.key, y.key), 1.0, sigma)
        value = energy_of(claim)
        terms: tuple[Term, ...] = (own,)
        share = {
            "trans-1,2": (1.0, 1.0),
            "cis-1,3": (-0.5, -0.5),
            "trans-1,4": (-1.0, -1.0),
            "geminal": (-1.0, 1.0),
        }.get(claim.form)
        if share is not None:
            first, second = claim.groups[0], claim.groups[-1]
            if claim.own_a is not None:
                value += share[0] * claim.own_a[0] + share[1] * claim.own_a[1]
            else:
                a, b = self.a_of(first), self.a_of(second)
                if a.value_kcal is None or b.value_kcal is None:
                    return unpriced("A-value", x, y)
                value += share[0] * a.value_kcal + share[1] * b.value_kcal
                terms = (own, *scaled(a.terms, share[0]), *scaled(b.terms, share[1]))
        return Price(
            value_kcal=value,
            terms=terms,
            row=claim.row,
            source=claim.source or "estimate",
            known_by=claim.known_by,
            estimated=extra > 0 or "class:" in "".join(claim.groups),
            polar=x.polar and y.polar,
            bound=claim.bound,
            note=note,
        )

    def _like_pairs(self, table: str, x: Group, y: Group) -> Price | None:
        """Two different halogens: the mean of the two like pairs."""
        if x.kind != "halogen" or y.kind != "halogen" or x.key == y.key:
            return None
        parts = [self._find(table, g, g) for g in (x, y)]
        if None in parts:
            return None
        prices = [self._pair_price(g, g, *part) for g, part in zip((x, y), parts, strict=True) if part is not None]
        if any(p.value_kcal is None for p in prices):
            return None
        spread = self.tables.row("rules/combining-halogens")
        return Price(
            value_kcal=sum(p.value_kcal or 0.0 for p in prices) / 2,
            terms=(
                *(t for p in prices for t in scaled(p.terms, 0.5)),
                Term(spread.row, pair_key(x.key, y.key), 1.0, spread.uncertainty or 0.0),
            ),
            row=spread.row,
            source=prices[0].source,
            known_by="computed",
            estimated=True,
            polar=True,
            note="estimated: mean of the two like pairs",
        )


@lru_cache(maxsize=64)
def price_book(tables: Tables, conditions: Conditions) -> PriceBook:
    """The price book of a set of tables under given conditions, made once."""
    return PriceBook(tables, conditions)
