"""The CSV files of tables/ read strictly into records."""

from __future__ import annotations

import csv
import hashlib
from collections.abc import Iterator
from functools import lru_cache
from importlib import resources
from pathlib import Path
from typing import get_args

from ringstrain.errors import TableError
from ringstrain.provenance import KnownBy, Source
from ringstrain.tables.records import (
    Claim,
    ClassEstimate,
    GroupEntry,
    GroupSize,
    Preference,
    Solvent,
    Tables,
)

#: Tables of claims; every one has the columns that :func:`_claim` reads.
CLAIM_FILES = (
    "avalues",
    "estimates",
    "gauche",
    "syndiaxial",
    "geminal",
    "transannular",
    "heteroring",
    "sp2ring",
    "anomeric",
    "ringstates",
    "rules",
    "kin",
)
_KNOWN_BY = get_args(KnownBy)
_MEDIA = ("gas", "nonpolar", "polar", "protic", "any")
_UNITS = (
    "kcal/mol",
    "kJ/mol",
    "ratio",
    "percent",
    "fraction",
    "cal/(mol K)",
    "J/(mol K)",
    "angstrom",
    "degree",
    "K",
    "reeves unit",
    "",
)


@lru_cache(maxsize=1)
def tables_folder() -> Path:
    """Where the tables live: in the package when installed, else in the checkout."""
    packaged = Path(str(resources.files("ringstrain"))) / "_tables"
    return packaged if packaged.is_dir() else Path(__file__).resolve().parents[2] / "tables"


@lru_cache(maxsize=4)
def _load(folder: Path) -> Tables:
    digest = hashlib.sha256()
    for path in sorted(folder.glob("*.csv")):
        digest.update(path.name.encode())
        digest.update(path.read_bytes())
    sources = {}
    for _, row in _rows(folder, "sources"):
        sources[row["key"]] = Source(**row)
    claims = []
    for name in CLAIM_FILES:
        for line, row in _rows(folder, name):
            claim = _claim(name, line, row)
            if claim.source and claim.source not in sources:
                raise TableError(
                    f"no source is called {claim.source!r}", file=f"{name}.csv", line=line, column="source"
                )
            claims.append(claim)
    return Tables(
        revision=digest.hexdigest()[:10],
        sources=sources,
        claims=tuple(claims),
        preferences=tuple(
            Preference(
                table=row["table"],
                key=row["key"],
                medium=row["medium"],
                row=f"{row['table']}/{row['row']}",
                uncertainty=_number(row, "uncertainty", "preference", line),
                why=row["why"],
            )
            for line, row in _rows(folder, "preference")
        ),
        groups=tuple(
            GroupEntry(key=row["key"], smiles=row["smiles"], aliases=_list(row["aliases"]), note=row["note"])
            for _, row in _rows(folder, "groups")
        ),
        classes={row["key"]: _class(line, row) for line, row in _rows(folder, "classes")},
        sizes={row["key"]: _size(line, row) for line, row in _rows(folder, "sizes")},
        solvents=tuple(
            Solvent(
                name=row["name"],
                aliases=_list(row["aliases"]),
                medium=row["medium"],
                accepts_hydrogen_bonds=row["accepts_hydrogen_bonds"] == "yes",
            )
            for _, row in _rows(folder, "solvents")
        ),
        model_terms={
            row["regime"]: _needed(row, "sigma_kcal", "model_terms", line) for line, row in _rows(folder, "model_terms")
        },
    )


def load_tables(path: str | Path | None = None) -> Tables:
    """The price tables.

    Parameters
    ----------
    path
        Folder to read; the one that ships with ringstrain when None.

    Returns
    -------
    Tables
        Read once per folder and shared.

    Raises
    ------
    TableError
        If a file is missing or a row is faulty.

    Examples
    --------
    >>> load_tables().find_group("tBu").key
    'tert-butyl'
    """
    return _load(Path(path) if path is not None else tables_folder())


def _rows(folder: Path, name: str) -> Iterator[tuple[int, dict[str, str]]]:
    """Rows of a file with their line numbers."""
    path = folder / f"{name}.csv"
    try:
        with open(path, encoding="utf-8", newline="") as stream:
            reader = csv.DictReader(stream, restkey="", strict=True)
            for row in reader:
                if "" in row or None in row.values():
                    raise TableError(
                        "the row has more or fewer cells than the header", file=path.name, line=reader.line_num
                    )
                yield reader.line_num, row
    except FileNotFoundError:
        raise TableError("the file is missing", file=path.name) from None
    except (csv.Error, UnicodeDecodeError) as error:
        raise TableError(str(error), file=path.name) from None


def _list(cell: str) -> tuple[str, ...]:
    return tuple(part for part in cell.split("|") if part)


def _number(row: dict[str, str], column: str, file: str, line: int) -> float | None:
    """A number, or None for an empty cell: missing is never zero."""
    cell = row.get(column, "")
    if not cell:
        return None
    try:
        return float(cell)
    except ValueError:
        raise TableError(f"{cell!r} is no number", file=f"{file}.csv", line=line, column=column) from None


def _needed(row: dict[str, str], column: str, file: str, line: int) -> float:
    value = _number(row, column, file, line)
    if value is None:
        raise TableError("the cell is empty", file=f"{file}.csv", line=line, column=column)
    return value


def _choice(row: dict[str, str], column: str, allowed: tuple[str, ...], file: str, line: int) -> str:
    cell = row.get(column, "")
    if cell not in allowed:
        raise TableError(
            f"{cell!r} is none of {', '.join(filter(None, allowed))}", file=f"{file}.csv", line=line, column=column
        )
    return cell


def _claim(table: str, line: int, row: dict[str, str]) -> Claim:
    """One claim."""
    groups = tuple(row[c] for c in ("group", "group_x", "group_y", "who", "stand_in") if row.get(c))
    own_x, own_y = _number(row, "own_a_x", table, line), _number(row, "own_a_y", table, line)
    known_by = _choice(row, "known_by", _KNOWN_BY, table, line)
    return Claim(
        table=table,
        id=row["id"],
        line=line,
        groups=groups,
        form=row.get("form", ""),
        value=_number(row, "value", table, line),
        unit=_choice(row, "unit", _UNITS, table, line),
        quantity=row.get("quantity", ""),
        uncertainty=_number(row, "uncertainty", table, line),
        bound=row.get("bound", ""),
        dh_kcal=_number(row, "dH_kcal", table, line),
        ds_cal=_number(row, "dS_cal", table, line),
        own_a=(own_x, own_y) if own_x is not None and own_y is not None else None,
        temperature_K=_number(row, "temperature_K", table, line),
        medium=_choice(row, "medium", _MEDIA, table, line) if "medium" in row else "any",
        solvent=row.get("solvent", ""),
        ring=row.get("ring", ""),
        position=row.get("position", ""),
        method=row.get("method", ""),
        source=row.get("source", ""),
        locator=row.get("locator", ""),
        known_by=known_by,  # type: ignore[arg-type]
        note=row.get("note", ""),
    )


def _class(line: int, row: dict[str, str]) -> ClassEstimate:
    return ClassEstimate(
        key=row["key"],
        value=_needed(row, "value", "classes", line),
        uncertainty=_needed(row, "uncertainty", "classes", line),
        bound=row.get("bound", ""),
        evidence=row["note"],
    )


def _size(line: int, row: dict[str, str]) -> GroupSize:
    return GroupSize(
        key=row["key"],
        vicinal=_needed(row, "vicinal_kcal", "sizes", line),
        vicinal_uncertainty=_needed(row, "vicinal_uncertainty", "sizes", line),
        syn_axial=_needed(row, "syn_axial_kcal", "sizes", line),
        syn_axial_uncertainty=_needed(row, "syn_axial_uncertainty", "sizes", line),
        evidence=row["note"],
    )
