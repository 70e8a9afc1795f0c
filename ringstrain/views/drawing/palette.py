"""Colours by meaning, light and dark.  Every meaning also has a line, weight or sign of its own."""

from __future__ import annotations

from types import MappingProxyType

#: Role -> (on light paper, on dark paper).
COLOURS = MappingProxyType(
    {
        "ink": ("#1d2730", "#e7ebee"),
        "axial": ("#a83c08", "#ff9c66"),
        "equatorial": ("#0c4a85", "#8cc0f5"),
        "isoclinal": ("#5a5470", "#bdb4d6"),
        "clash": ("#8a1260", "#f391cf"),
        "muted": ("#5b6772", "#9fabb6"),
        "accent": ("#14696a", "#6fd0c8"),
        "hydrogen": ("#5b6772", "#9fabb6"),
        "bar": ("#2f6f9f", "#6aa9d8"),
        "rule": ("#c9d0d6", "#3a4650"),
        "paper": ("#ffffff", "#12181d"),
    }
)
