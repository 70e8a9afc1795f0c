"""Which claim serves a key under given conditions: the user's own, the solvent's, the medium's, the nearest."""

from __future__ import annotations

from dataclasses import dataclass

from ringstrain.tables.conditions import NEAREST, Conditions
from ringstrain.tables.records import Claim, Tables

#: Forms of a claim that the ledger can use; the others are kept for reference.
USABLE_FORMS: dict[str, frozenset[str]] = {
    "avalues": frozenset({""}),
    "estimates": frozenset({""}),
    "gauche": frozenset({"term", "trans-1,2", "ee-ae", "ring-fusion"}),
    "syndiaxial": frozenset({"term", "cis-1,3"}),
    "geminal": frozenset({"term", "geminal"}),
    "transannular": frozenset({"trans-1,4"}),
    "heteroring": frozenset({"value"}),
    "sp2ring": frozenset({"", "value"}),
    "anomeric": frozenset({"value"}),
}


@dataclass(frozen=True, slots=True)
class Selection:
    """A claim chosen, its standard uncertainty [kcal/mol], and the medium it was borrowed from (or empty)."""

    claim: Claim
    sigma: float
    borrowed: str = ""


def select(tables: Tables, table: str, key: str, conditions: Conditions, medium: str | None = None) -> Selection | None:
    """The claim that serves a key, or None.

    Parameters
    ----------
    tables
        All claims and preferences.
    table, key
        Which quantity.
    conditions
        Medium, solvent and temperature.
    medium
        Medium class to look in instead of that of the conditions.
    """
    rivals = tables.rivals(table, key)
    if not rivals:
        return None
    forms = USABLE_FORMS[table]
    usable = [claim for claim in rivals if claim.form in forms and claim.value is not None]
    wanted = medium or conditions.medium
    general = tables.preference(table, key, wanted) or tables.preference(table, key, "any")
    for claim in usable:
        if claim.known_by == "yours" and claim.medium in ("any", wanted):
            return Selection(claim, claim.uncertainty or 0.0)
    if conditions.solvent:
        own = [claim for claim in usable if claim.solvent == conditions.solvent and not claim.bound]
        if own:
            best = min(own, key=lambda c: (c.known_by != "read", c.uncertainty is None, c.line))
            return Selection(best, _sigma(best, general.uncertainty if general else None))
    for name in (wanted, "any", *NEAREST[wanted]):
        preference = tables.preference(table, key, name)
        if preference is None:
            continue
        claim = tables.row(preference.row)
        if claim.value is not None and claim.form in forms:
            borrowed = name if name not in (wanted, "any") else ""
            return Selection(claim, _sigma(claim, preference.uncertainty), borrowed)
    return None


def _sigma(claim: Claim, preferred: float | None) -> float:
    """Standard uncertainty: that of the preference, else of the claim."""
    if preferred is not None:
        return preferred
    return claim.uncertainty if claim.uncertainty is not None else 0.0
