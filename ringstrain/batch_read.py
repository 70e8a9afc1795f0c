"""Records of a file, one after the other in flat memory: .smi, .csv, .tsv and .sdf, plain or gzipped."""

from __future__ import annotations

import csv
import gzip
import io
import zlib
from collections import deque
from collections.abc import Iterator, Sequence
from itertools import islice
from pathlib import Path
from types import TracebackType
from typing import IO, TextIO

from ringstrain.batch_rows import BatchRecord
from ringstrain.errors import InputError
from ringstrain.structure.shorthand import is_remark, is_shorthand

SUFFIXES = (".smi", ".csv", ".tsv", ".sdf")
_SMILES_NAMES = ("smiles", "structure", "input", "canonical_smiles", "mol")
_ID_NAMES = ("id", "name", "compound", "title", "identifier", "key")
_OPEN_QUOTE = "A quotation mark is opened in this line and never closed."
#: A molfile block longer than this is a torn file [lines].
_MAX_BLOCK_LINES = 20_000


def suffix_of(path: str | Path, known: Sequence[str]) -> str:
    """The suffix of a path among those known, ``.gz`` peeled off; empty when there is none."""
    name = str(path).lower().removesuffix(".gz")
    return next((suffix for suffix in known if name.endswith(suffix)), "")


class RecordReader:
    """Reads the records of a file and knows how far it is.

    Parameters
    ----------
    path
        The file.
    smiles_column, id_column
        Columns of a .csv or .tsv; found by name when None.

    Raises
    ------
    InputError
        If the suffix is unknown or the file cannot be opened.
    """

    def __init__(self, path: str | Path, *, smiles_column: str | None = None, id_column: str | None = None) -> None:
        self._path = Path(path)
        self._kind = suffix_of(path, SUFFIXES)
        self._wanted = (smiles_column, id_column)
        if not self._kind:
            raise InputError(
                f"{str(path)!r} is no file of structures.", f"Use one of {', '.join(SUFFIXES)} (also .gz)."
            )
        try:
            self._size = self._path.stat().st_size
            self._raw: IO[bytes] = open(self._path, "rb")  # noqa: SIM115 - closed in __exit__
        except OSError as error:
            raise InputError(f"The file {str(path)!r} cannot be read: {error.strerror}.", "Check the path.") from None

    def __enter__(self) -> RecordReader:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._raw.close()

    @property
    def fraction(self) -> float:
        """How much of the file has been read [-]."""
        try:
            return min(1.0, self._raw.tell() / self._size) if self._size else 1.0
        except ValueError:  # the file has been closed
            return 1.0

    def __iter__(self) -> Iterator[BatchRecord]:
        """The records in order.

        Raises
        ------
        InputError
            If the file breaks off or a table has no column of structures.
        """
        try:
            with self._text() as stream:
                if self._kind == ".smi":
                    yield from _lines(stream)
                elif self._kind == ".sdf":
                    yield from _blocks(stream)
                else:
                    yield from self._cells(stream)
        except (OSError, EOFError, zlib.error):
            raise InputError(
                f"The file {str(self._path)!r} breaks off or is damaged.", "The rows so far are written; mend the file."
            ) from None

    def _text(self) -> TextIO:
        binary: IO[bytes] = gzip.GzipFile(fileobj=self._raw) if self._path.name.lower().endswith(".gz") else self._raw  # type: ignore[assignment]
        return io.TextIOWrapper(binary, encoding="utf-8-sig", errors="backslashreplace", newline="")

    def _cells(self, stream: TextIO) -> Iterator[BatchRecord]:
        """Records of a table with a header."""
        lines = _Lines(stream)
        rows = csv.reader(lines, delimiter=self._delimiter(lines))
        try:
            header = next(rows, None)
        except csv.Error:
            header = [""]
        if header is None:  # an empty file holds no record, whatever its kind
            return
        place, name_place = self._columns(header)
        while True:
            start = lines.begin_row()
            try:
                row = next(rows)
            except StopIteration:
                return
            except csv.Error as error:
                row, fault = [], f"The line is no row of a table ({error})."
            else:
                fault = _OPEN_QUOTE if lines.is_at_end else ""
            if fault:
                if lines.step_back():  # the lines it swallowed are rows of their own
                    fault = _OPEN_QUOTE
                rows = csv.reader(lines, rows.dialect)
                yield BatchRecord(line=start, id="", text="", fault=fault)
                continue
            text = row[place].strip() if place < len(row) else ""
            name = row[name_place].strip() if name_place is not None and name_place < len(row) else ""
            yield BatchRecord(line=start, id=name, text=text)

    def _delimiter(self, lines: _Lines) -> str:
        """What parts the cells: a tab, a comma, or what a spreadsheet wrote instead."""
        first = lines.peek()
        return "\t" if self._kind == ".tsv" else next((sign for sign in ",;\t" if sign in first), ",")

    def _columns(self, header: Sequence[str]) -> tuple[int, int | None]:
        """Where the structures and their names stand."""
        names = [cell.strip().lower() for cell in header]
        wanted, wanted_id = self._wanted

        def place(given: str | None, usual: Sequence[str]) -> int | None:
            if given is not None:
                if given.strip().lower() not in names:
                    raise InputError(
                        f"{str(self._path)!r} has no column {given!r}.",
                        f"Its columns are {', '.join(header) or 'missing'}.",
                    )
                return names.index(given.strip().lower())
            return next((names.index(name) for name in usual if name in names), None)

        found = place(wanted, _SMILES_NAMES)
        if found is None:
            raise InputError(
                f"{str(self._path)!r} has no column of structures in its first line.",
                "Call it smiles, or name it with --smiles-column.",
            )
        return found, place(wanted_id, _ID_NAMES)


class _Lines:
    """Lines of a stream, counted as they go; those of the present row can be taken again.

    A reader of tables asks for a further line within a row only while a quotation mark is open.  When the stream
    ends then, it hands out what it has: a single stray mark would cost every record behind it.
    """

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._ahead: deque[str] = deque()
        self._row: list[str] = []
        self._number = 0
        self.is_at_end = False

    def __iter__(self) -> _Lines:
        return self

    def __next__(self) -> str:
        line = self._ahead.popleft() if self._ahead else next(self._stream, None)
        if line is None:
            self.is_at_end = True
            raise StopIteration
        self._number += 1
        self._row.append(line)
        return line

    def peek(self) -> str:
        """The next line, which stays; empty at the end."""
        if not self._ahead:
            self._ahead.extend(islice(self._stream, 1))
        return self._ahead[0] if self._ahead else ""

    def begin_row(self) -> int:
        """A new row; the line it starts at, from 1."""
        self._row.clear()
        return self._number + 1

    def step_back(self) -> bool:
        """Take back every line of the present row but the first; True when there are any."""
        self._ahead.extendleft(reversed(self._row[1:]))
        self._number -= len(self._row) - 1
        self.is_at_end = False
        return len(self._row) > 1


def _lines(stream: TextIO) -> Iterator[BatchRecord]:
    """One structure a line, with a name after a tab or, behind a SMILES, a blank; a comment is no record."""
    for number, line in enumerate(stream, 1):
        if is_remark(line):
            continue
        text, _, name = line.rstrip("\r\n").partition("\t")
        text, name = text.strip(), name.strip()
        if not name and not is_shorthand(text):
            core, _, rest = text.partition(" ")
            if not rest.lstrip().startswith("|"):
                text, name = core, rest.strip()
        yield BatchRecord(line=number, id=name, text=text)


def _blocks(stream: TextIO) -> Iterator[BatchRecord]:
    """Molfile blocks up to four dollar signs; their data fields are left behind."""
    block: list[str] = []
    start, number = 1, 0
    for number, line in enumerate(stream, 1):
        if not line.startswith("$$$$"):
            if len(block) < _MAX_BLOCK_LINES:
                block.append(line.rstrip("\r\n") + "\n")
            continue
        yield _block(block, start)
        block, start = [], number + 1
    if any(line.strip() for line in block):
        yield _block(block, start)


def _block(lines: list[str], start: int) -> BatchRecord:
    end = next((i for i, line in enumerate(lines) if line.startswith("M  END")), len(lines) - 1)
    text = "".join(lines[: end + 1])
    return BatchRecord(
        line=start, id=lines[0].strip() if lines else "", text=text if text.strip() else "", is_block=True
    )
