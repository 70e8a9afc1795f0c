"""The raw look of a table file: bytes, lines and cells, with every fault and where it stands."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass
from pathlib import Path

from ringstrain.errors import TableError


@dataclass(frozen=True, slots=True)
class Row:
    """One record of a file: its last line and its cells."""

    line: int
    cells: dict[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """One file of tables/.

    Attributes
    ----------
    file
        File name.
    header
        Column names.
    rows
        Records that have as many cells as the header.
    """

    file: str
    header: tuple[str, ...]
    rows: tuple[Row, ...]

    @property
    def name(self) -> str:
        """File name without suffix."""
        return self.file.removesuffix(".csv")


def read_sheet(path: Path) -> tuple[Sheet, list[TableError]]:
    """A file cell by cell, and what is wrong with its form.

    Parameters
    ----------
    path
        The CSV file.

    Returns
    -------
    tuple
        The sheet, and faults of encoding, line ends, blanks and cell counts.
    """
    raw = path.read_bytes()
    faults = _byte_faults(path.name, raw)
    text = raw.decode("utf-8", errors="replace").replace("\r\n", "\n").replace("\r", "\n")
    header: tuple[str, ...] = ()
    rows: list[Row] = []
    reader = csv.reader(io.StringIO(text, newline=""), strict=True)
    try:
        for cells in reader:
            line = reader.line_num
            if not header:
                header = tuple(cells)
                faults.extend(_header_faults(path.name, header))
                continue
            if not cells:
                faults.append(TableError("the line is blank", file=path.name, line=line))
                continue
            if len(cells) != len(header):
                faults.append(
                    TableError(f"{len(cells)} cells where the header has {len(header)}", file=path.name, line=line)
                )
                continue
            row = Row(line, dict(zip(header, cells, strict=True)))
            faults.extend(_blank_faults(path.name, row))
            rows.append(row)
    except csv.Error as error:
        faults.append(TableError(f"no valid CSV: {error}", file=path.name, line=reader.line_num))
    return Sheet(file=path.name, header=header, rows=tuple(rows)), faults


def _byte_faults(file: str, raw: bytes) -> list[TableError]:
    """Characters beyond ASCII, line ends that are not LF, a missing last line end."""
    faults = []
    for number, line in enumerate(raw.split(b"\n"), start=1):
        if b"\r" in line:
            faults.append(TableError("the line end is not a plain line feed", file=file, line=number))
        if not line.isascii():
            faults.append(TableError("a character is not ASCII", file=file, line=number))
    if not raw:
        faults.append(TableError("the file is empty", file=file))
    elif not raw.endswith(b"\n"):
        faults.append(TableError("the last line has no line end", file=file, line=raw.count(b"\n") + 1))
    return faults


def _header_faults(file: str, header: tuple[str, ...]) -> list[TableError]:
    faults = []
    for name in dict.fromkeys(header):
        if not name or name != name.strip():
            faults.append(TableError(f"{name!r} is no column name", file=file, line=1, column=name))
        if header.count(name) > 1:
            faults.append(TableError("the column stands twice", file=file, line=1, column=name))
    return faults


def _blank_faults(file: str, row: Row) -> list[TableError]:
    return [
        TableError("blanks or line breaks around the cell or inside it", file=file, line=row.line, column=column)
        for column, cell in row.cells.items()
        if cell != cell.strip() or "\n" in cell or "\t" in cell
    ]
