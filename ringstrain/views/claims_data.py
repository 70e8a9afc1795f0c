"""What the tables know about a key as TSV and JSON, and what such a topic has to offer."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any, Protocol

from ringstrain.provenance import Price, Source
from ringstrain.tables.records import Claim, Preference
from ringstrain.units import KJ_PER_KCAL
from ringstrain.views.look import Units
from ringstrain.views.plain import number, row


class Entry(Protocol):
    """A claim with its preferences."""

    @property
    def claim(self) -> Claim:
        """The claim."""

    @property
    def used(self) -> tuple[Preference, ...]:
        """Where it is preferred, and why."""


class Topic(Protocol):
    """All that is known about a key."""

    @property
    def kind(self) -> str:
        """Group, pair, source or row."""

    @property
    def key(self) -> str:
        """Name in the tables."""

    @property
    def smiles(self) -> str:
        """SMILES of a group."""

    @property
    def aliases(self) -> tuple[str, ...]:
        """Other names of a group."""

    @property
    def prices(self) -> tuple[tuple[str, Price], ...]:
        """What the ledger charges."""

    @property
    def entries(self) -> Sequence[Entry]:
        """Every claim."""


class Listed(Protocol):
    """A group of the list."""

    @property
    def key(self) -> str:
        """Its key."""

    @property
    def smiles(self) -> str:
        """Its SMILES."""

    @property
    def aliases(self) -> tuple[str, ...]:
        """Other names."""

    @property
    def price(self) -> Price:
        """Its A-value."""


def list_lines(groups: Sequence[Listed], units: Units) -> Iterator[str]:
    """The list as TSV."""
    energies = (f"A_{units}", f"uncertainty_{units}")
    yield row(("group", "smiles", "aliases", *energies, "bound", "known_by", "estimated", "source", "row", "note"))
    factor = KJ_PER_KCAL if units == "kJ" else 1.0
    for group in groups:
        price = group.price
        yield row(
            (
                group.key,
                group.smiles,
                "|".join(group.aliases),
                number(None if price.value_kcal is None else price.value_kcal * factor),
                number(price.sigma_kcal * factor),
                price.bound,
                price.known_by,
                "yes" if price.estimated else "no",
                price.source,
                price.row,
                price.note,
            )
        )


def topic_lines(topic: Topic, sources: Mapping[str, Source]) -> Iterator[str]:
    """The claims of a topic as TSV; numbers as printed."""
    names = (
        "row groups form ring position value unit uncertainty bound quantity dH_kcal dS_cal temperature_K "
        "medium solvent method source locator known_by used note citation"
    )
    yield row(names.split())
    for entry in topic.entries:
        c = entry.claim
        yield row(
            (
                c.row,
                "/".join(c.groups),
                c.form,
                c.ring,
                c.position,
                _bare(c.value),
                c.unit,
                _bare(c.uncertainty),
                c.bound,
                c.quantity,
                _bare(c.dh_kcal),
                _bare(c.ds_cal),
                _bare(c.temperature_K),
                c.medium,
                c.solvent,
                c.method,
                c.source,
                c.locator,
                c.known_by,
                "; ".join(f"{p.medium}: {p.why}" for p in entry.used),
                c.note,
                sources[c.source].citation if c.source in sources else "",
            )
        )


def _bare(value: float | None) -> str | None:
    return None if value is None else f"{value:g}"


def price_document(price: Price) -> dict[str, Any]:
    """A price as JSON."""
    return {
        "value_kcal": price.value_kcal,
        "uncertainty_kcal": price.sigma_kcal,
        "bound": price.bound,
        "known_by": price.known_by,
        "estimated": price.estimated,
        "source": price.source,
        "row": price.row,
        "note": price.note,
    }


def list_document(groups: Sequence[Listed]) -> list[dict[str, Any]]:
    """The list as JSON."""
    return [
        {"key": g.key, "smiles": g.smiles, "aliases": list(g.aliases), "a_value": price_document(g.price)}
        for g in groups
    ]


def topic_document(topic: Topic, sources: Mapping[str, Source]) -> dict[str, Any]:
    """A topic as JSON, with the full citation of every source it names."""
    cited = dict.fromkeys(
        source
        for source in (*(e.claim.source for e in topic.entries), *(price.source for _, price in topic.prices))
        if source in sources
    )
    return {
        "topic": topic.kind,
        "key": topic.key,
        "smiles": topic.smiles or None,
        "aliases": list(topic.aliases),
        "prices": [{"rule": name, **price_document(price)} for name, price in topic.prices],
        "claims": [_claim_document(entry) for entry in topic.entries],
        "sources": {key: sources[key].citation for key in cited},
    }


def _claim_document(entry: Entry) -> dict[str, Any]:
    c = entry.claim
    return {
        "row": c.row,
        "table": c.table,
        "line": c.line,
        "groups": list(c.groups),
        "form": c.form,
        "value": c.value,
        "unit": c.unit,
        "uncertainty": c.uncertainty,
        "bound": c.bound,
        "quantity": c.quantity,
        "dH_kcal": c.dh_kcal,
        "dS_cal": c.ds_cal,
        "temperature_K": c.temperature_K,
        "medium": c.medium,
        "solvent": c.solvent,
        "ring": c.ring,
        "position": c.position,
        "method": c.method,
        "source": c.source,
        "locator": c.locator,
        "known_by": c.known_by,
        "note": c.note,
        "used_in": [{"medium": p.medium, "uncertainty_kcal": p.uncertainty, "why": p.why} for p in entry.used],
    }
