"""What the tables know about a key: a group, a pair of groups, a source or a single row."""

from __future__ import annotations

from dataclasses import dataclass
from difflib import get_close_matches
from typing import Literal

from ringstrain.errors import UnknownGroup
from ringstrain.provenance import Price
from ringstrain.tables.conditions import Conditions
from ringstrain.tables.groups import Group
from ringstrain.tables.prices import price_book
from ringstrain.tables.records import Claim, Preference, Tables, claim_key, pair_key

Kind = Literal["group", "pair", "source", "row"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """A claim with the media in which it is preferred to its rivals."""

    claim: Claim
    used: tuple[Preference, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Topic:
    """All that is known about a key.

    Attributes
    ----------
    kind, key
        What the key turned out to be, and its name in the tables.
    smiles, aliases
        Of a group.
    prices
        What the ledger charges under the asked conditions, by rule.
    entries
        Every claim, table by table, in file order.
    """

    kind: Kind
    key: str
    smiles: str = ""
    aliases: tuple[str, ...] = ()
    prices: tuple[tuple[str, Price], ...] = ()
    entries: tuple[Entry, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Listed:
    """A group of the list with the A-value the ledger charges."""

    key: str
    smiles: str
    aliases: tuple[str, ...]
    price: Price


def list_groups(tables: Tables, conditions: Conditions) -> tuple[Listed, ...]:
    """Every tabulated group with its A-value under the asked conditions, in table order."""
    book = price_book(tables, conditions)
    return tuple(
        Listed(key=g.key, smiles=g.smiles, aliases=g.aliases, price=book.a_value(_group_of(tables, g.smiles, g.key)))
        for g in tables.groups
    )


def find_topic(tables: Tables, text: str, conditions: Conditions) -> Topic:
    """What a key stands for.

    Parameters
    ----------
    tables
        Where to look.
    text
        Group key, alias or SMILES (``*C(C)C``), a pair ``methyl/hydroxy``, a source key or a row name.
    conditions
        Medium and temperature of the prices shown.

    Raises
    ------
    UnknownGroup
        If it is none of these.
    ParseError
        If it starts with a star and is no group SMILES.
    """
    name = text.strip()
    if "*" in name:
        return _of_smiles(tables, name, conditions)
    entry = tables.find_group(name)
    if entry is not None:
        return _of_group(tables, _group_of(tables, entry.smiles, entry.key), entry.smiles, conditions)
    if name in tables.sources:
        claims = [c for c in tables.claims if c.source == name]
        return Topic(kind="source", key=name, entries=_entries(tables, claims))
    row = next((c for c in tables.claims if c.row == name), None)
    if row is not None:
        return Topic(kind="row", key=name, entries=_entries(tables, [row]))
    if name.count("/") == 1:
        first, second = (_named(tables, part.strip()) for part in name.split("/"))
        return _of_pair(tables, first, second, conditions)
    raise UnknownGroup(name, _alike(tables, name), span=(0, len(name)), text=name)


def completions(tables: Tables, start: str) -> list[str]:
    """Keys and aliases that begin like this."""
    return sorted(name for name in tables.group_names() if name.startswith(start))


def _alike(tables: Tables, name: str) -> tuple[str, ...]:
    """Known names that look like this one, letter case forgiven."""
    known = {other.lower(): other for other in (*tables.sources, *tables.group_names())}
    return tuple(known[match] for match in get_close_matches(name.lower(), known, n=2, cutoff=0.6))


def _named(tables: Tables, name: str) -> tuple[str, str]:
    """Key and SMILES of one half of a pair."""
    if name.startswith("class:"):
        return name, ""
    entry = tables.find_group(name)
    if entry is None:
        raise UnknownGroup(name, _alike(tables, name), span=(0, len(name)), text=name)
    return entry.key, entry.smiles


def _group_of(tables: Tables, smiles: str, key: str = "") -> Group:
    """A group SMILES as the price tables see it."""
    from dataclasses import replace

    from ringstrain.structure.read import read_group
    from ringstrain.substituents import describe_group

    structure, star = read_group(smiles)
    first = int(structure.neighbours[star][0])
    group = describe_group(structure, first, star, frozenset((star,)), tables)
    return replace(group, key=key, tabulated=True) if key else group


def _of_smiles(tables: Tables, smiles: str, conditions: Conditions) -> Topic:
    return _of_group(tables, _group_of(tables, smiles), smiles, conditions)


def _of_group(tables: Tables, group: Group, smiles: str, conditions: Conditions) -> Topic:
    """A group, tabulated or not: its A-value and every row it stands in."""
    book = price_book(tables, conditions)
    entry = tables.find_group(group.key) if group.tabulated else None
    claims = [c for c in tables.claims if group.key in c.groups] if group.tabulated else []
    return Topic(
        kind="group",
        key=group.key,
        smiles=entry.smiles if entry else smiles,
        aliases=entry.aliases if entry else (),
        prices=(("A-value", book.a_value(group)),),
        entries=_entries(tables, claims),
    )


def _of_pair(tables: Tables, first: tuple[str, str], second: tuple[str, str], conditions: Conditions) -> Topic:
    """A pair: its rows, and what the ledger charges when the groups meet."""
    key = pair_key(first[0], second[0])
    claims = [c for c in tables.claims if len(c.groups) == 2 and not c.ring and claim_key(c) == key]
    prices: list[tuple[str, Price]] = []
    if first[1] and second[1]:
        book = price_book(tables, conditions)
        x, y = _group_of(tables, first[1], first[0]), _group_of(tables, second[1], second[0])
        prices = [
            ("vicinal gauche, both equatorial", book.vicinal(x, y)),
            ("vicinal gauche, one axial", book.vicinal(x, y, both_equatorial=False)),
            ("syn-axial or peri, whole contact", book.syn_axial(x, y)),
            (f"geminal, {x.key} axial", book.geminal(x, y)),
        ]
        if x.key != y.key:
            prices.append((f"geminal, {y.key} axial", book.geminal(y, x)))
    return Topic(kind="pair", key=key, prices=tuple(prices), entries=_entries(tables, claims))


def _entries(tables: Tables, claims: list[Claim]) -> tuple[Entry, ...]:
    """Claims with their preferences."""
    used: dict[str, list[Preference]] = {}
    for preference in tables.preferences:
        used.setdefault(preference.row, []).append(preference)
    return tuple(Entry(claim=claim, used=tuple(used.get(claim.row, ()))) for claim in claims)
