"""Chairs, diastereomers and their free energies for six-membered rings.

Give a structure; get which chair wins, by how much, how surely and why.

Examples
--------
>>> import ringstrain as rs
>>> system = rs.analyze("CC1CCCCC1").ring_systems[0]
>>> round(system.equilibrium.dG_kcal, 2)
1.74
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from ringstrain.analysis import Analysis, analyze
    from ringstrain.batch import Failure, analyze_many
    from ringstrain.errors import InputError, MissingValue, OutOfScope, RingstrainError, TableError
    from ringstrain.isomers import rank_isomers
    from ringstrain.pattern_records import Pattern
    from ringstrain.patterns import enumerate_patterns
    from ringstrain.ranking import Isomer, Ranking
    from ringstrain.sieve import Wish
    from ringstrain.structure import Structure
    from ringstrain.structure.files import read_file
    from ringstrain.structure.read import read
    from ringstrain.tables import Tables, load_tables

_HOMES = {
    "Analysis": "ringstrain.analysis",
    "analyze": "ringstrain.analysis",
    "Failure": "ringstrain.batch",
    "analyze_many": "ringstrain.batch",
    "InputError": "ringstrain.errors",
    "MissingValue": "ringstrain.errors",
    "OutOfScope": "ringstrain.errors",
    "RingstrainError": "ringstrain.errors",
    "TableError": "ringstrain.errors",
    "Pattern": "ringstrain.pattern_records",
    "enumerate_patterns": "ringstrain.patterns",
    "Wish": "ringstrain.sieve",
    "Isomer": "ringstrain.ranking",
    "Ranking": "ringstrain.ranking",
    "rank_isomers": "ringstrain.isomers",
    "Structure": "ringstrain.structure",
    "read": "ringstrain.structure.read",
    "read_file": "ringstrain.structure.files",
    "Tables": "ringstrain.tables",
    "load_tables": "ringstrain.tables",
}
__all__ = [
    "Analysis",
    "Failure",
    "InputError",
    "Isomer",
    "MissingValue",
    "OutOfScope",
    "Pattern",
    "Ranking",
    "RingstrainError",
    "Structure",
    "TableError",
    "Tables",
    "Wish",
    "__version__",
    "analyze",
    "analyze_many",
    "enumerate_patterns",
    "load_tables",
    "rank_isomers",
    "read",
    "read_file",
]


def __getattr__(name: str) -> Any:
    """Load a public name when it is first used, so that importing the package stays cheap."""
    home = _HOMES.get(name)
    if home is None:
        raise AttributeError(f"module 'ringstrain' has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(home), name)


def __dir__() -> list[str]:
    return sorted(__all__)
