"""The full lint of the tables: every fault of every file, with line and column."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

from ringstrain.errors import RingstrainError, TableError
from ringstrain.provenance import MEDIA
from ringstrain.tables.cells import Known, cell_faults, class_names, enum_words, is_type, number
from ringstrain.tables.records import pair_key
from ringstrain.tables.select import USABLE_FORMS
from ringstrain.tables.sheets import Row, Sheet, read_sheet

Sheets = dict[str, Sheet]
Dictionary = dict[tuple[str, str], str]
#: Units by kind of quantity; kinds that are not named may have any unit.
_UNITS = {
    "dG": ("kcal/mol", "kJ/mol", "ratio"),
    "dH": ("kcal/mol", "kJ/mol"),
    "dE": ("kcal/mol", "kJ/mol"),
    "ratio": ("ratio",),
    "fraction": ("fraction", "percent"),
    "dS": ("cal/(mol K)", "J/(mol K)"),
    "dS_act": ("cal/(mol K)", "J/(mol K)"),
}
_UNSOURCED = ("computed", "common practice")


def check_tables(folder: Path) -> tuple[TableError, ...]:
    """Every fault of a folder of tables.

    Parameters
    ----------
    folder
        Folder with the CSV files.

    Returns
    -------
    tuple of TableError
        Sorted by file and line; empty when all is well.

    Examples
    --------
    >>> from ringstrain.tables.reader import tables_folder
    >>> check_tables(tables_folder())
    ()
    """
    sheets: Sheets = {}
    faults: list[TableError] = []
    for path in sorted(folder.glob("*.csv")):
        sheet, own = read_sheet(path)
        sheets[sheet.name] = sheet
        faults.extend(own)
    needed = ("columns", "sources", "groups", "preference")
    missing = [name for name in needed if name not in sheets]
    faults.extend(TableError("the file is missing", file=f"{name}.csv") for name in missing)
    if not missing:
        dictionary = {(row.cells["file"], row.cells["name"]): row.cells["type"] for row in _rows(sheets, "columns")}
        faults.extend(_dictionary_faults(sheets, dictionary))
        faults.extend(_type_faults(sheets, dictionary))
        faults.extend(_claim_faults(sheets))
        faults.extend(_name_faults(sheets))
        faults.extend(_preference_faults(sheets))
        faults.extend(_regime_faults(sheets, dictionary))
        faults.extend(_class_faults(sheets))
        faults.extend(_equilibrium_faults(sheets))
    return tuple(sorted(faults, key=lambda fault: (fault.file, fault.line, fault.column, fault.fault)))


def _rows(sheets: Sheets, name: str, *columns: str) -> tuple[Row, ...]:
    """Rows of a file that has these columns."""
    sheet = sheets.get(name)
    if sheet is None or any(column not in sheet.header for column in columns):
        return ()
    return sheet.rows


def _dictionary_faults(sheets: Sheets, dictionary: Dictionary) -> Iterator[TableError]:
    """columns.csv describes every column of every file once and nothing else."""
    seen: set[tuple[str, str]] = set()
    for row in _rows(sheets, "columns"):
        file, name, type_ = row.cells["file"], row.cells["name"], row.cells["type"]
        sheet = sheets.get(file.removesuffix(".csv"))
        if sheet is None:
            yield TableError(f"there is no file {file!r}", file="columns.csv", line=row.line, column="file")
        elif name not in sheet.header:
            yield TableError(f"{file} has no column {name!r}", file="columns.csv", line=row.line, column="name")
        if (file, name) in seen:
            yield TableError("the column is described twice", file="columns.csv", line=row.line, column="name")
        seen.add((file, name))
        if not is_type(type_):
            yield TableError(f"{type_!r} is no type", file="columns.csv", line=row.line, column="type")
        if not row.cells["meaning"]:
            yield TableError("the cell is empty", file="columns.csv", line=row.line, column="meaning")
    for sheet in sheets.values():
        for name in sheet.header:
            if (sheet.file, name) not in dictionary:
                yield TableError("columns.csv does not describe the column", file=sheet.file, line=1, column=name)


def _type_faults(sheets: Sheets, dictionary: Dictionary) -> Iterator[TableError]:
    """Every cell is of its column's type; the first column names a row once."""
    known = Known(
        frozenset(row.cells["key"] for row in _rows(sheets, "groups", "key")),
        frozenset(row.cells["key"] for row in _rows(sheets, "sources", "key")),
    )
    for sheet in sheets.values():
        types = {name: dictionary.get((sheet.file, name), "text") for name in sheet.header}
        first = sheet.header[0] if sheet.header else ""
        seen: dict[str, int] = {}
        for row in sheet.rows:
            for column, cell in row.cells.items():
                for fault in cell_faults(cell, types[column], column, known):
                    yield TableError(fault, file=sheet.file, line=row.line, column=column)
            if types.get(first) in ("key", "group") or first in ("id", "key", "regime"):
                name = row.cells[first]
                if name in seen:
                    yield TableError(
                        f"{name!r} stands in line {seen[name]} too", file=sheet.file, line=row.line, column=first
                    )
                seen.setdefault(name, row.line)


def _claim_faults(sheets: Sheets) -> Iterator[TableError]:
    """Unit fits quantity, number fits unit, and a published number names its source."""
    for sheet in sheets.values():
        for row in sheet.rows:
            cells = row.cells
            quantity, unit = cells.get("quantity", ""), cells.get("unit", "")
            if "unit" in cells and cells.get("value") and not unit:
                yield TableError("the value has no unit", file=sheet.file, line=row.line, column="unit")
            if quantity in _UNITS and unit not in _UNITS[quantity]:
                yield TableError(f"{unit!r} is no unit of {quantity}", file=sheet.file, line=row.line, column="unit")
            value = number(cells.get("value", ""))
            top = {"fraction": 1.0, "percent": 100.0}.get(unit, float("inf"))
            if value is not None and unit in ("ratio", "fraction", "percent") and not 0 < value < top:
                yield TableError(f"{value:g} is no {unit}", file=sheet.file, line=row.line, column="value")
            if "source" in cells and not cells["source"] and cells.get("known_by") not in _UNSOURCED:
                yield TableError("a published number needs its source", file=sheet.file, line=row.line, column="source")


def _name_faults(sheets: Sheets) -> Iterator[TableError]:
    """Keys and aliases of groups and solvents mean one thing each; a group SMILES stands once."""
    yield from _ambiguous(sheets, "groups", "key", fold=False)
    yield from _ambiguous(sheets, "solvents", "name", fold=True)
    smiles: dict[str, str] = {}
    for row in _rows(sheets, "groups", "key", "smiles"):
        canonical = _canonical_group(row.cells["smiles"])
        if canonical is None:
            continue
        other = smiles.setdefault(canonical, row.cells["key"])
        if other != row.cells["key"]:
            yield TableError(f"the group is {other!r} already", file="groups.csv", line=row.line, column="smiles")
    for row in _rows(sheets, "solvents", "medium"):
        if row.cells["medium"] not in MEDIA:
            yield TableError("a solvent belongs to one medium", file="solvents.csv", line=row.line, column="medium")


def _ambiguous(sheets: Sheets, name: str, column: str, *, fold: bool) -> Iterator[TableError]:
    owners: dict[str, str] = {}
    rows = _rows(sheets, name, column, "aliases")
    for row in rows:
        owners.setdefault(row.cells[column].lower() if fold else row.cells[column], row.cells[column])
    for row in rows:
        for alias in filter(None, row.cells["aliases"].split("|")):
            owner = owners.setdefault(alias.lower() if fold else alias, row.cells[column])
            if owner != row.cells[column]:
                yield TableError(
                    f"{alias!r} means {owner!r} already", file=f"{name}.csv", line=row.line, column="aliases"
                )


def _canonical_group(smiles: str) -> str | None:
    from ringstrain.structure.read import read_group

    try:
        return read_group(smiles)[0].smiles
    except RingstrainError:
        return None


def _preference_faults(sheets: Sheets) -> Iterator[TableError]:
    """A preference points to a usable claim about its own key, and is stated once."""
    seen: set[tuple[str, str, str]] = set()
    file = "preference.csv"
    for row in _rows(sheets, "preference", "table", "key", "medium", "row"):
        table, key, medium = (row.cells[name] for name in ("table", "key", "medium"))
        if (table, key, medium) in seen:
            yield TableError("the choice is made twice", file=file, line=row.line, column="key")
        seen.add((table, key, medium))
        claim = next((r for r in _rows(sheets, table, "id") if r.cells["id"] == row.cells["row"]), None)
        if claim is None:
            yield TableError(f"{table}.csv has no row {row.cells['row']!r}", file=file, line=row.line, column="row")
            continue
        own = _key_of(claim)
        if own != key:
            yield TableError(f"the row is about {own!r}", file=file, line=row.line, column="key")
        if not _is_usable(table, claim):
            form = claim.cells.get("form", "")
            yield TableError(
                f"the ledger cannot use a {form or 'valueless'} row", file=file, line=row.line, column="row"
            )
        if not row.cells["why"]:
            yield TableError("the cell is empty", file=file, line=row.line, column="why")


def _key_of(claim: Row) -> str:
    if "group" in claim.cells:
        return claim.cells["group"]
    return pair_key(claim.cells.get("group_x", ""), claim.cells.get("group_y", ""))


def _is_usable(table: str, claim: Row) -> bool:
    return bool(claim.cells.get("value")) and claim.cells.get("form", "") in USABLE_FORMS.get(table, frozenset())


def _regime_faults(sheets: Sheets, dictionary: Dictionary) -> Iterator[TableError]:
    """Every regime has its model term."""
    words = enum_words(dictionary.get(("model_terms.csv", "regime"), "")) or ()
    there = {row.cells["regime"] for row in _rows(sheets, "model_terms", "regime")}
    for word in words:
        if word not in there:
            yield TableError(f"regime {word!r} has no row", file="model_terms.csv", column="regime")


def _class_faults(sheets: Sheets) -> Iterator[TableError]:
    """Class estimates are of classes there are; analogues of estimates are groups or classes."""
    for row in _rows(sheets, "classes", "key"):
        if row.cells["key"] not in class_names():
            yield TableError(
                f"no class is called {row.cells['key']!r}", file="classes.csv", line=row.line, column="key"
            )
    groups = {row.cells["key"] for row in _rows(sheets, "groups", "key")}
    for row in _rows(sheets, "estimates", "analogues"):
        for name in filter(None, row.cells["analogues"].split("|")):
            if name not in groups and name.removeprefix("class:") not in class_names():
                yield TableError(
                    f"no group or class is called {name!r}", file="estimates.csv", line=row.line, column="analogues"
                )


def _equilibrium_faults(sheets: Sheets) -> Iterator[TableError]:
    """Both sides of an equilibrium are the same constitution; duplicates name their first row."""
    file = "equilibria.csv"
    rows = _rows(sheets, "equilibria", "id", "kind", "role", "role_note", "smiles_a", "smiles_b", "orientation")
    ids = {row.cells["id"] for row in rows}
    for row in rows:
        cells = row.cells
        if cells["role"] == "duplicate" and cells["role_note"] not in ids:
            yield TableError(
                f"{cells['role_note']!r} is no row the duplicate repeats", file=file, line=row.line, column="role_note"
            )
        if cells["kind"] not in ("chair", "diastereomer", "anomer"):
            continue
        for column in ("smiles_a", "smiles_b"):
            if not cells[column]:
                yield TableError("the cell is empty", file=file, line=row.line, column=column)
        if cells["kind"] == "chair" and not ("A: " in cells["orientation"] and "; B: " in cells["orientation"]):
            yield TableError("A and B are not described", file=file, line=row.line, column="orientation")
        first, second = _plain(cells["smiles_a"], cells["kind"]), _plain(cells["smiles_b"], cells["kind"])
        if first is not None and second is not None and first != second:
            what = "compounds" if cells["kind"] == "chair" else "constitutions"
            yield TableError(f"A and B are different {what}", file=file, line=row.line, column="smiles_b")


def _plain(smiles: str, kind: str) -> str | None:
    """Canonical SMILES, without configurations when two compounds are compared; None when it cannot be read."""
    from ringstrain.structure.read import read

    if not smiles:
        return None
    try:
        structure = read(smiles)
    except RingstrainError:
        return None
    if kind == "chair":
        return structure.smiles
    bonds = tuple(replace(bond, stereo="", stereo_atoms=None) for bond in structure.bonds)
    return replace(structure, configurations=(None,) * len(structure.atoms), bonds=bonds).smiles
