"""A second opinion: conformers, a force field, and the ledger's states found again by their coordinates."""

from __future__ import annotations
