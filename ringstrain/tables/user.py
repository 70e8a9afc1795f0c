"""The user's own values: one CSV file, checked line by line, whose rows win over ours and are marked as theirs."""

from __future__ import annotations

import csv
from collections.abc import Iterator
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path

from ringstrain.errors import InputError, RingstrainError
from ringstrain.provenance import MEDIA, Source
from ringstrain.tables.cells import number
from ringstrain.tables.records import Claim, GroupEntry, Tables
from ringstrain.units import to_kcal

#: Source key of the user's rows.
YOUR_SOURCE = "your table"
#: Tables a user may add to, with the columns each needs besides ``table`` and ``value``.
NEEDED: dict[str, tuple[str, ...]] = {
    "avalues": ("group",),
    "gauche": ("group_x", "group_y"),
    "syndiaxial": ("group_x", "group_y"),
    "geminal": ("group_x", "group_y"),
    "heteroring": ("group", "ring", "position"),
}
COLUMNS = (
    "table", "group", "group_x", "group_y", "value", "unit", "uncertainty", "medium", "position", "ring", "note",
)  # fmt: skip
_UNITS = ("kcal/mol", "kJ/mol")
_GROUP_COLUMNS = ("group", "group_x", "group_y")
_MOST_FAULTS = 10


@dataclass(frozen=True, slots=True)
class _Fault:
    """One thing wrong with the file."""

    line: int
    column: str
    words: str

    @property
    def text(self) -> str:
        place = f"line {self.line}" + (f", column {self.column}" if self.column else "")
        return f"{place}: {self.words}"


@dataclass(slots=True)
class _Groups:
    """Groups by name, those that the file adds by SMILES included."""

    tables: Tables
    added: dict[str, GroupEntry]
    by_smiles: dict[str, str]

    def key_of(self, name: str) -> str:
        """Table key for a key, an alias or a SMILES with its star.

        Raises
        ------
        ValueError
            If it is none of them, with what is wrong.
        """
        if "*" in name:
            return self._key_of_smiles(name)
        entry = self.tables.find_group(name)
        if entry is not None:
            return entry.key
        close = get_close_matches(name, self.tables.group_names(), n=2, cutoff=0.6)
        hint = f"; did you mean {' or '.join(close)}" if close else "; give a key, an alias or a SMILES such as *C(C)C"
        raise ValueError(f"no group is called {name!r}{hint}")

    def _key_of_smiles(self, smiles: str) -> str:
        from ringstrain.structure.read import read_group

        try:
            canonical = read_group(smiles)[0].smiles
        except RingstrainError as error:
            raise ValueError(f"{smiles!r} is no group: {error.problem.rstrip('.')}") from None
        if not self.by_smiles:
            for entry in self.tables.groups:
                self.by_smiles.setdefault(read_group(entry.smiles)[0].smiles, entry.key)
        key = self.by_smiles.setdefault(canonical, smiles)
        if key == smiles:
            self.added[smiles] = GroupEntry(key=smiles, smiles=smiles, aliases=(), note=YOUR_SOURCE)
        return key


def load_user_tables(path: str | Path, base: Tables) -> Tables:
    """The price tables with the user's own values on top.

    Parameters
    ----------
    path
        CSV file with a header and the columns ``table`` (avalues, gauche, syndiaxial, geminal or heteroring),
        ``group`` or ``group_x`` and ``group_y`` (key, alias or SMILES with a star), ``value``, and, as needed,
        ``unit`` (kcal/mol when empty, or kJ/mol), ``uncertainty`` (one standard deviation, in that unit), ``medium``
        (any when empty), ``ring`` and ``position``, ``note``.
    base
        The tables they go on top of; they stay as they are.

    Returns
    -------
    Tables
        The rows are known by "yours" and win in their medium. A geminal value is the correction when group_x is
        axial and group_y equatorial; pair values are the terms themselves.

    Raises
    ------
    InputError
        If the file cannot be read or a cell is wrong; names line and column of each fault.
    """
    file = Path(path)
    rows = _read(file)
    faults: list[_Fault] = []
    groups = _Groups(base, {}, {})
    claims: list[Claim] = []
    seen: dict[tuple[object, ...], int] = {}
    for line, cells in rows:
        own = list(_row_faults(cells, line, base))
        keys, wrong = _group_keys(cells, line, groups)
        own.extend(wrong)
        if not own:
            claim = _claim(cells, line, keys)
            ordered = keys if claim.table == "geminal" else tuple(sorted(keys))
            what = (claim.table, ordered, claim.ring, claim.position, claim.medium)
            if what in seen:
                own.append(_Fault(line, "", f"the same value stands in line {seen[what]} already"))
            seen.setdefault(what, line)
            claims.append(claim)
        faults.extend(own)
    if faults:
        raise _refusal(file, faults)
    source = Source(
        key=YOUR_SOURCE,
        authors="",
        title=f"Your own values, {file.name}",
        container="",
        year="",
        volume="",
        pages="",
        doi="",
    )
    return Tables(
        revision=f"{base.revision}+yours",
        sources={**base.sources, YOUR_SOURCE: source},
        claims=(*base.claims, *claims),
        preferences=base.preferences,
        groups=(*base.groups, *groups.added.values()),
        classes=base.classes,
        sizes=base.sizes,
        solvents=base.solvents,
        model_terms=base.model_terms,
    )


def _read(file: Path) -> list[tuple[int, dict[str, str]]]:
    """Rows with their line numbers, blank lines left out."""
    rows: list[tuple[int, dict[str, str]]] = []
    try:
        with open(file, encoding="utf-8-sig", newline="") as stream:
            reader = csv.reader(stream, strict=True)
            header = [name.strip() for name in next(reader, [])]
            _check_header(file, header)
            for cells in reader:
                if not any(cell.strip() for cell in cells):
                    continue
                if len(cells) != len(header):
                    fault = _Fault(reader.line_num, "", f"{len(cells)} cells where the header has {len(header)}")
                    raise _refusal(file, [fault])
                rows.append((reader.line_num, {n: c.strip() for n, c in zip(header, cells, strict=True)}))
    except OSError as error:
        reason = error.strerror or "it cannot be opened"
        raise InputError(f"Cannot read {file}: {reason}.", "Check the name given to --table-file.") from None
    except UnicodeDecodeError:
        raise InputError(f"{file.name} is not UTF-8 text.", "Save it as CSV with UTF-8 encoding.") from None
    except csv.Error as error:
        raise InputError(f"{file.name} is no valid CSV: {error}.", 'Separate cells by commas; quote with ".') from None
    if not rows:
        raise InputError(f"{file.name} holds no values.", "Add a row below the header.")
    return rows


def _check_header(file: Path, header: list[str]) -> None:
    """Known columns, each once, and the ones every row needs."""
    if len(header) == 1 and (";" in header[0] or "\t" in header[0]):
        raise _refusal(file, [_Fault(1, "", "the cells are not separated by commas")])
    faults = [
        _Fault(1, name, f"no column is called {name!r}; use {', '.join(COLUMNS)}")
        for name in header
        if name not in COLUMNS
    ]
    faults.extend(_Fault(1, name, "the column stands twice") for name in COLUMNS if header.count(name) > 1)
    faults.extend(_Fault(1, name, "the column is missing") for name in ("table", "value") if name not in header)
    if faults:
        raise _refusal(file, faults)


def _refusal(file: Path, faults: list[_Fault]) -> InputError:
    """One error for all faults."""
    shown = [fault.text for fault in faults[:_MOST_FAULTS]]
    if len(faults) > _MOST_FAULTS:
        shown.append(f"and {len(faults) - _MOST_FAULTS} more")
    return InputError(f"{file.name}, {'; '.join(shown)}.", "Mend the file given to --table-file and run again.")


def _row_faults(cells: dict[str, str], line: int, base: Tables) -> Iterator[_Fault]:
    """What is wrong with a row apart from its groups."""
    table = cells["table"]
    if table not in NEEDED:
        yield _Fault(line, "table", f"{table!r} is none of {', '.join(NEEDED)}")
        return
    for column in NEEDED[table]:
        if not cells.get(column):
            yield _Fault(line, column, f"a row of {table} needs this cell")
    for column in (*_GROUP_COLUMNS, "ring", "position"):
        if cells.get(column) and column not in NEEDED[table]:
            yield _Fault(line, column, f"a row of {table} has no {column}")
    if not cells["value"]:
        yield _Fault(line, "value", "the cell is empty")
    elif number(cells["value"]) is None:
        yield _Fault(line, "value", f"{cells['value']!r} is no number")
    uncertainty = cells.get("uncertainty", "")
    if uncertainty and (number(uncertainty) is None or float(uncertainty) < 0):
        yield _Fault(line, "uncertainty", f"{uncertainty!r} is no uncertainty")
    if cells.get("unit") and cells["unit"] not in _UNITS:
        yield _Fault(line, "unit", f"{cells['unit']!r} is none of {', '.join(_UNITS)}")
    if cells.get("medium") and cells["medium"] not in (*MEDIA, "any"):
        yield _Fault(line, "medium", f"{cells['medium']!r} is none of {', '.join(MEDIA)}, any")
    if table == "heteroring":
        yield from _ring_faults(cells, line, base)


def _ring_faults(cells: dict[str, str], line: int, base: Tables) -> Iterator[_Fault]:
    rings = sorted({claim.ring for claim in base.claims if claim.table in ("heteroring", "sp2ring") and claim.ring})
    ring, position = cells.get("ring", ""), cells.get("position", "")
    if ring and ring not in rings:
        close = get_close_matches(ring, rings, n=2, cutoff=0.6)
        hint = f"did you mean {' or '.join(close)}" if close else f"known are {', '.join(rings)}"
        yield _Fault(line, "ring", f"no ring is called {ring!r}; {hint}")
    if position and position not in tuple("123456"):
        yield _Fault(line, "position", f"{position!r} is no ring position from 1 to 6")


def _group_keys(cells: dict[str, str], line: int, groups: _Groups) -> tuple[tuple[str, ...], list[_Fault]]:
    """Keys of the groups of a row, and faults of those that have none."""
    keys: list[str] = []
    faults: list[_Fault] = []
    for column in _GROUP_COLUMNS:
        if cells.get(column):
            try:
                keys.append(groups.key_of(cells[column]))
            except ValueError as error:
                faults.append(_Fault(line, column, str(error)))
    return tuple(keys), faults


def _claim(cells: dict[str, str], line: int, keys: tuple[str, ...]) -> Claim:
    """The claim of a row without faults, in kcal/mol."""
    unit = cells.get("unit") or "kcal/mol"
    table = cells["table"]
    note = cells.get("note", "")
    if unit != "kcal/mol":
        note = "; ".join(filter(None, (f"given as {cells['value']} {unit}", note)))
    uncertainty = cells.get("uncertainty", "")
    return Claim(
        table=table,
        id=f"yours-{line}",
        line=line,
        groups=keys,
        form={"avalues": "", "heteroring": "value"}.get(table, "term"),
        value=to_kcal(float(cells["value"]), unit),
        unit="kcal/mol",
        quantity="dG",
        uncertainty=to_kcal(float(uncertainty), unit) if uncertainty else None,
        bound="",
        dh_kcal=None,
        ds_cal=None,
        own_a=None,
        temperature_K=None,
        medium=cells.get("medium") or "any",
        solvent="",
        ring=cells.get("ring", ""),
        position=cells.get("position", ""),
        method="",
        source=YOUR_SOURCE,
        locator=f"line {line}",
        known_by="yours",
        note=note,
    )
