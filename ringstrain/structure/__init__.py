"""Structures: records, reading, writing."""

from __future__ import annotations

from ringstrain.structure.records import Atom, Bond, Configuration, Structure

__all__ = ["Atom", "Bond", "Configuration", "Structure"]
