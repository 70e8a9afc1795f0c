"""What stands in when no row covers a pair: combining rules, wide guesses, and the price of unknown value."""

from __future__ import annotations

import math

from ringstrain.provenance import Price, Term
from ringstrain.tables.groups import Group
from ringstrain.tables.kinship import energy_of
from ringstrain.tables.records import Tables, pair_key


def product_rule(tables: Tables, which: str, x: Group, y: Group) -> Price | None:
    """Product rule: each group against methyl, scaled to methyl against methyl; never for two polar groups."""
    if x.polar and y.polar:
        return None
    sizes = tables.sizes
    first = next((sizes[n] for n in (x.key, x.kind) if n in sizes), None)
    second = next((sizes[n] for n in (y.key, y.kind) if n in sizes), None)
    if first is None or second is None:
        return None
    methyl = sizes["methyl"]
    a, b, unit = (getattr(s, which) for s in (first, second, methyl))
    da, db = (getattr(s, f"{which}_uncertainty") for s in (first, second))
    value = a * b / unit
    sigma = math.hypot(da * b / unit, db * a / unit) if first.key != second.key else (da + db) * a / unit
    row = "sizes/" + "+".join(sorted((first.key, second.key)))
    return Price(
        value_kcal=value,
        terms=(Term(row, pair_key(x.key, y.key), 1.0, sigma),),
        row=row,
        source="combining rule",
        known_by="computed",
        estimated=True,
        note="estimated by the combining rule",
    )


def unpriced(what: str, x: Group, y: Group) -> Price:
    """A contact nobody can price."""
    return Price(
        value_kcal=None,
        row=f"unknown/{what}/{pair_key(x.key, y.key)}",
        source="",
        known_by="computed",
        estimated=True,
        polar=x.polar and y.polar,
        note=f"no {what} is tabulated for this pair",
    )


def geminal_guess(tables: Tables, axial: Group, equatorial: Group) -> Price:
    """Correction for two groups on one ring atom without a row: zero, and wide."""
    pair = {axial.kind, equatorial.kind}
    kind = (
        "geminal-aryl"
        if "aryl" in pair and any(k.endswith("alkyl") or k == "methyl" for k in pair)
        else "geminal-round"
        if axial.round and equatorial.round
        else "geminal-rotor"
    )
    rule = tables.row(f"rules/{kind}")
    return Price(
        value_kcal=energy_of(rule),
        terms=(Term(rule.row, pair_key(axial.key, equatorial.key), 1.0, rule.uncertainty or 0.0),),
        row=rule.row,
        source=rule.source or "estimate",
        known_by=rule.known_by,
        estimated=True,
        note="no row for this pair on one carbon: taken as zero, wide",
    )
