"""The price tables: reading, checking, looking up."""

from __future__ import annotations

from ringstrain.tables.reader import load_tables
from ringstrain.tables.records import Claim, Tables

__all__ = ["Claim", "Tables", "load_tables"]
