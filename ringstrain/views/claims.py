"""The tables themselves on show: every claim with its conditions, its rivals and why one of them is used."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from ringstrain.provenance import Price, Source
from ringstrain.tables.records import Claim, claim_key
from ringstrain.units import Z95
from ringstrain.views.claims_data import Entry, Listed, Topic
from ringstrain.views.look import Look
from ringstrain.views.rich_tables import Footnotes, new_table
from ringstrain.views.words import listed

if TYPE_CHECKING:
    from rich.console import RenderableType

_TABLE_WORDS = {
    "avalues": "A-value",
    "estimates": "A-value, estimated by analogy",
    "gauche": "vicinal pair",
    "syndiaxial": "syn-axial pair",
    "geminal": "geminal pair",
    "heteroring": "hetero ring",
    "sp2ring": "ring with a flat atom",
    "anomeric": "anomeric",
    "ringstates": "ring shape",
    "rules": "rule",
    "kin": "stand-in",
}


# ---- the list ------------------------------------------------------------------------------------------------


def list_view(groups: Sequence[Listed], label: str, look: Look) -> Iterator[RenderableType]:
    """Every group with the A-value that is used.

    Parameters
    ----------
    groups
        In table order.
    label
        Conditions in words.
    look
        Width, units and signs.
    """
    yield look.text(f"A-values used {label}: {look.unit}, \N{PLUS-MINUS SIGN} 95 %.")
    yield look.text("`ringstrain tables KEY` shows every claim about one of them.", "dim")
    yield Text()
    table = new_table(look)
    table.add_column("group", overflow="fold")
    table.add_column("also", overflow="fold", max_width=max(12, look.width - 68))
    table.add_column("A", justify="right", no_wrap=True)
    table.add_column(look.text("\N{PLUS-MINUS SIGN}"), justify="right", no_wrap=True)
    table.add_column("how known", overflow="fold")
    for group in groups:
        table.add_row(
            look.text(group.key),
            look.text(", ".join(group.aliases[:3])),
            look.text(_amount(group.price, look)),
            look.text(look.energy(Z95 * group.price.sigma_kcal)),
            look.text(_how(group.price)),
        )
    yield table


def _amount(price: Price, look: Look) -> str:
    bound = "at least " if price.bound == "at least" else ""
    return bound + look.energy(price.value_kcal)


def _how(price: Price) -> str:
    if price.value_kcal is None:
        return "no price"
    return f"{'estimated' if price.estimated else price.known_by}; {price.source}"


# ---- one topic -----------------------------------------------------------------------------------------------


def topic_view(topic: Topic, label: str, sources: Mapping[str, Source], look: Look) -> Iterator[RenderableType]:
    """Everything the tables know about a key.

    Parameters
    ----------
    topic
        What was found.
    label
        Conditions of the prices in words.
    sources
        Publications by key.
    look
        Width, units and signs.
    """
    notes = Footnotes(sources)
    yield look.text(f"{topic.kind} {topic.key}", "bold")
    if topic.smiles:
        yield look.text(f"SMILES {topic.smiles}" + (f"; also {', '.join(topic.aliases)}" if topic.aliases else ""))
    if topic.kind == "source":
        known = sources.get(topic.key)
        yield look.text(known.citation if known else topic.key)
    if topic.prices:
        yield Text()
        yield look.text(f"Charged {label}, {look.unit}, \N{PLUS-MINUS SIGN} 95 %:")
        yield _prices(topic.prices, notes, look)
    table_name = ""
    yours = {(e.claim.table, claim_key(e.claim)) for e in topic.entries if e.claim.known_by == "yours"}
    for entry in _used_first(topic.entries):
        if entry.claim.table != table_name:
            table_name = entry.claim.table
            yield Text()
            yield look.text(f"{_TABLE_WORDS.get(table_name, table_name)} ({table_name}.csv), as published")
        beaten = (table_name, claim_key(entry.claim)) in yours
        yield _entry_block(entry, notes, look, beaten=beaten)
    if not topic.entries:
        yield Text()
        stand_in = "; what is charged comes from stand-ins, classes or rules" if topic.prices else ""
        yield look.text(f"No row is about exactly this{stand_in}.")
    cited = list(notes.lines(look))
    if cited:
        yield Text()
        yield from cited


def _used_first(entries: Sequence[Entry]) -> list[Entry]:
    """Table by table, the claims in use before their rivals."""
    tables = list(dict.fromkeys(entry.claim.table for entry in entries))

    def order(entry: Entry) -> tuple[int, bool, bool]:
        return tables.index(entry.claim.table), entry.claim.known_by != "yours", not entry.used

    return sorted(entries, key=order)


def _prices(prices: Sequence[tuple[str, Price]], notes: Footnotes, look: Look) -> Table:
    table = Table.grid(padding=(0, 2, 0, 0))
    table.add_column(overflow="fold")
    table.add_column(justify="right", no_wrap=True)
    table.add_column(overflow="fold")
    for name, price in prices:
        amount = _amount(price, look)
        if price.value_kcal is not None:
            amount += f" \N{PLUS-MINUS SIGN} {look.energy(Z95 * price.sigma_kcal)}"
        how = "no price" if price.value_kcal is None else "estimated" if price.estimated else price.known_by
        parts = [f"{how} {notes.mark(price.source)}".strip(), *([price.note] if price.note else [])]
        table.add_row(look.text(f"  {name}"), look.text(amount), look.text("; ".join(parts)))
    return table


def _entry_block(entry: Entry, notes: Footnotes, look: Look, *, beaten: bool) -> Table:
    """One claim: value at the left (above, when the terminal is narrow), conditions, verdict and source beside it."""
    claim = entry.claim
    table = Table.grid(padding=(0, 2, 0, 0))
    about = "/".join(claim.groups)
    lines = [look.text("; ".join(part for part in (about, *conditions_of(claim)) if part))]
    is_used = claim.known_by == "yours" or (bool(entry.used) and not beaten)
    lines.append(look.text(verdict(entry, beaten=beaten), "bold" if is_used else ""))
    mark = notes.mark(claim.source)
    where = " ".join(part for part in (claim.source, claim.locator and f"({claim.locator})", mark) if part)
    lines.append(look.text("; ".join(part for part in (where, claim.known_by, f"row {claim.row}") if part), "dim"))
    if claim.note:
        lines.append(look.text(claim.note, "dim"))
    value, body = look.text(printed(claim)), Text("\n").join(lines)
    if look.width < 76:
        table.add_column(overflow="fold")
        table.add_row(value)
        table.add_row(Padding(body, (0, 0, 0, 3)))
        return table
    table.add_column(justify="right", min_width=21, max_width=21)
    table.add_column(overflow="fold")
    table.add_row(value, body)
    return table


def verdict(entry: Entry, *, beaten: bool = False) -> str:
    """Whether a claim is used, where, with which uncertainty, and why.

    Parameters
    ----------
    entry
        The claim and its preferences.
    beaten
        True when a value of the user's own takes its place.
    """
    claim = entry.claim
    if claim.known_by == "yours":
        return "used: it is yours"
    if not entry.used:
        return "rival, kept but not used" if _has_rivals(claim) else "for reference"
    if beaten:
        return "gives way to your own value"
    reasons: dict[tuple[float | None, str], list[str]] = {}
    for preference in entry.used:
        reasons.setdefault((preference.uncertainty, preference.why), []).append(preference.medium)
    return "; ".join(_reason(media, *reason) for reason, media in reasons.items())


def _reason(media: Sequence[str], uncertainty: float | None, why: str) -> str:
    where = "any medium" if "any" in media else f"{listed(media)} media"
    if list(media) == ["gas"]:
        where = "the gas"
    spread = "" if uncertainty is None else f" with \N{PLUS-MINUS SIGN} {uncertainty:g} (one sigma)"
    return f"used in {where}{spread}: {why}"


def _has_rivals(claim: Claim) -> bool:
    """True in tables where a preference chooses."""
    return claim.table in ("avalues", "gauche", "syndiaxial", "geminal")


def printed(claim: Claim) -> str:
    """The number exactly as printed, with its unit."""
    if claim.value is None:
        return "no number"
    spread = f" \N{PLUS-MINUS SIGN} {claim.uncertainty:g}" if claim.uncertainty is not None else ""
    bound = f"{claim.bound} " if claim.bound else ""
    return f"{bound}{claim.value:g}{spread} {claim.unit}".strip().replace("-", "\N{MINUS SIGN}", int(claim.value < 0))


def conditions_of(claim: Claim) -> tuple[str, ...]:
    """What the number is and under which conditions, part by part."""
    parts = [claim.form, claim.quantity, f"{claim.ring} {claim.position}".strip()]
    if claim.dh_kcal is not None and claim.ds_cal is not None:
        parts.append(f"dH {claim.dh_kcal:g} kcal/mol, dS {claim.ds_cal:g} cal/(mol K)")
    parts.append(f"{claim.temperature_K:g} K" if claim.temperature_K is not None else "")
    parts.append("any medium" if claim.medium == "any" else claim.medium)
    parts.extend((claim.solvent, claim.method))
    return tuple(part for part in parts if part)
