"""What a cell may hold, by the type columns.csv gives its column."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import get_args

from ringstrain.errors import RingstrainError
from ringstrain.provenance import MEDIA, KnownBy
from ringstrain.tables.groups import FAMILIES

TYPES = ("key", "group", "smiles", "number", "integer", "text", "list", "medium", "known_by", "source")
#: Words a claim may use in place of a group: a hydrogen or oxygen on a ring heteroatom.
PLACEHOLDERS = frozenset({"hydrogen", "oxo"})
#: Classes a pair row may name besides those of groups.
_EXTRA_CLASSES = frozenset({"ring-carbon"})
_KEY = re.compile(r"[A-Za-z0-9][A-Za-z0-9 .,()'+/-]*")
_ID = re.compile(r"[a-z0-9][a-z0-9.,-]*")
_ENUM = re.compile(r"enum\((?P<words>.+)\)")


@dataclass(frozen=True, slots=True)
class Known:
    """Names that cells may refer to."""

    groups: frozenset[str]
    sources: frozenset[str]


def class_names() -> frozenset[str]:
    """Every class and family of groups."""
    return frozenset(FAMILIES) | frozenset(name for families in FAMILIES.values() for name in families) | _EXTRA_CLASSES


def enum_words(type_: str) -> tuple[str, ...] | None:
    """Words of an enum type, or None when it is another type."""
    found = _ENUM.fullmatch(type_)
    return tuple(found["words"].split("|")) if found else None


def is_type(type_: str) -> bool:
    """True for a type columns.csv may use."""
    return type_ in TYPES or enum_words(type_) is not None


def cell_faults(cell: str, type_: str, column: str, known: Known) -> Iterator[str]:
    """What is wrong with a cell, in words; nothing when it is right.

    Parameters
    ----------
    cell
        Its text.
    type_
        Type of its column.
    column
        Name of its column.
    known
        Groups and sources there are.
    """
    if not cell:
        if type_ in ("key", "medium", "known_by", "smiles") and not column.startswith("smiles_"):
            yield "the cell is empty"
        return
    words = enum_words(type_)
    if words is not None:
        if cell not in words:
            yield f"{cell!r} is none of {', '.join(words)}"
        return
    check = _CHECKS.get(type_)
    if check is not None:
        yield from check(cell, column, known)


def number(cell: str) -> float | None:
    """A finite number, or None."""
    try:
        value = float(cell)
    except ValueError:
        return None
    return value if math.isfinite(value) else None


def _check_key(cell: str, column: str, known: Known) -> Iterator[str]:
    if not (_ID if column == "id" else _KEY).fullmatch(cell):
        yield f"{cell!r} is no well-formed name"


def _check_group(cell: str, column: str, known: Known) -> Iterator[str]:
    if cell in known.groups or cell in PLACEHOLDERS:
        return
    name = cell.removeprefix("class:")
    if (name != cell or column == "key") and name.removesuffix(" with H") in class_names():
        return
    yield f"no group or class is called {cell!r}"


def _check_smiles(cell: str, column: str, known: Known) -> Iterator[str]:
    from ringstrain.structure.read import read, read_group

    try:
        if "*" in cell:
            read_group(cell)
        else:
            read(cell)
    except RingstrainError as error:
        yield f"{cell!r} is no structure: {error.problem}"


def _check_number(cell: str, column: str, known: Known) -> Iterator[str]:
    value = number(cell)
    if value is None:
        yield f"{cell!r} is no number"
    elif value < 0 and ("uncertainty" in column or "sigma" in column):
        yield "an uncertainty is not negative"
    elif value <= 0 and column == "temperature_K":
        yield "a temperature is above zero"


def _check_integer(cell: str, column: str, known: Known) -> Iterator[str]:
    if not re.fullmatch(r"-?\d+", cell):
        yield f"{cell!r} is no whole number"


def _check_list(cell: str, column: str, known: Known) -> Iterator[str]:
    parts = cell.split("|")
    if any(not part or part != part.strip() for part in parts):
        yield "a part of the list is empty or has blanks around it"
    if len(set(parts)) != len(parts):
        yield "a part of the list stands twice"


def _check_medium(cell: str, column: str, known: Known) -> Iterator[str]:
    if cell not in (*MEDIA, "any"):
        yield f"{cell!r} is no medium"


def _check_known_by(cell: str, column: str, known: Known) -> Iterator[str]:
    if cell not in get_args(KnownBy) or cell == "yours":
        yield f"{cell!r} is no way of knowing"


def _check_source(cell: str, column: str, known: Known) -> Iterator[str]:
    if cell not in known.sources:
        yield f"no source is called {cell!r}"


_CHECKS: dict[str, Callable[[str, str, Known], Iterator[str]]] = {
    "key": _check_key,
    "group": _check_group,
    "smiles": _check_smiles,
    "number": _check_number,
    "integer": _check_integer,
    "list": _check_list,
    "medium": _check_medium,
    "known_by": _check_known_by,
    "source": _check_source,
}
