"""Rows written as .csv, .tsv, .jsonl, .sdf or .parquet, and picked up again where a run was cut off."""

from __future__ import annotations

import csv
import gzip
import json
import math
from collections import deque
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import IO, Any, Protocol

from ringstrain.batch_read import suffix_of
from ringstrain.batch_rows import BatchRecord, Row, Settings, answer
from ringstrain.errors import InputError, UsageError
from ringstrain.results import SCHEMA

SUFFIXES = (".csv", ".tsv", ".jsonl", ".sdf", ".parquet")
_END_OF_BLOCK = b"$$$$\n"
_PARQUET_ROWS = 10_000
#: Rows at the end of an earlier run that are answered again before we go on after them.
CHECKED = 20
_WHOLE = ("input_line", "isomers", "input_rank")
_SINGLE_FLOATS = ("input_dG_kcal", "best_share")


class Writer(Protocol):
    """Takes rows one by one."""

    def write(self, row: Row) -> None:
        """One row."""

    def close(self) -> None:
        """The end of the file."""


@dataclass(frozen=True, slots=True)
class Kept:
    """What is left of an earlier run.

    Attributes
    ----------
    rows
        Whole rows [-].
    end
        Where they end [bytes].
    last
        The last of them as they stand in the file, at most :data:`CHECKED`.
    statuses
        Every status among them.
    """

    rows: int = 0
    end: int = 0
    last: tuple[bytes, ...] = ()
    statuses: frozenset[str] = frozenset()


def open_writer(path: str | Path, columns: Sequence[str], kept: Kept | None = None) -> Writer:
    """A writer for a path.

    Parameters
    ----------
    path
        Output; its suffix decides the format.
    columns
        Columns of a row.
    kept
        Rows of an earlier run to go on after; None to begin.

    Raises
    ------
    UsageError
        If the suffix is unknown or a package is missing.
    InputError
        If the file cannot be written.
    """
    kind = _kind(path)
    try:
        if kind == ".parquet":
            return _ParquetWriter(Path(path), columns)
        stream = _open(Path(path), kept or Kept())
    except OSError as error:
        raise InputError(f"The file {str(path)!r} cannot be written: {error.strerror}.", "Check the path.") from None
    if kept is None or not kept.rows:
        stream.write(_header(kind, columns))  # into the buffer: a full disk shows with the rows
    return _TextWriter(stream, kind, path)


def _kind(path: str | Path) -> str:
    """Format of an output.

    Raises
    ------
    UsageError
        If the suffix is unknown.
    """
    kind = suffix_of(path, SUFFIXES)
    if not kind or (_is_packed(path) and kind == ".parquet"):
        raise UsageError(f"{str(path)!r} is no output we can write.", f"Use one of {', '.join(SUFFIXES)}.")
    return kind


def is_resumable(path: str | Path) -> bool:
    """True for an output that a later run can go on with."""
    return not _is_packed(path) and _kind(path) != ".parquet"


def _is_packed(path: str | Path) -> bool:
    return str(path).lower().endswith(".gz")


def _open(path: Path, kept: Kept) -> IO[bytes]:
    if _is_packed(path):  # no name and no time inside, so that equal rows give equal bytes
        return gzip.GzipFile(filename="", mode="wb", fileobj=open(path, "wb"), mtime=0)  # type: ignore[return-value]
    if not kept.rows:
        return open(path, "wb")
    stream = open(path, "r+b")  # noqa: SIM115 - closed by the writer
    stream.seek(kept.end)
    stream.truncate()
    return stream


def _header(kind: str, columns: Sequence[str]) -> bytes:
    if kind not in (".csv", ".tsv"):
        return b""
    return _separated(columns, "\t" if kind == ".tsv" else ",").encode()


def find_rows(path: str | Path, columns: Sequence[str]) -> Kept:
    """The whole rows an earlier run left; a torn last row is not among them.  Nothing is changed yet.

    Raises
    ------
    UsageError
        If the format cannot be resumed.
    InputError
        If the file does not begin as ours do, or cannot be read.
    """
    kind = _kind(path)
    if not is_resumable(path):
        raise UsageError(
            "A .gz or .parquet output cannot be resumed.", "Write .csv, .tsv, .jsonl or .sdf, and pack it afterwards."
        )
    if not Path(path).exists():
        return Kept()
    head = _header(kind, columns)
    rows = 0
    try:
        with open(path, "rb") as stream:
            first = stream.read(len(head))
            if first != head:
                if head.startswith(first):
                    return Kept()
                raise InputError(
                    f"{str(path)!r} does not begin with the header of this run.",
                    "Resume with the options of the first run, or write another file.",
                )
            end = len(head)
            last: deque[bytes] = deque(maxlen=CHECKED)
            statuses = set()
            part: list[bytes] = []
            for line in stream:
                part.append(line)
                if line == _END_OF_BLOCK if kind == ".sdf" else line.endswith(b"\n"):
                    last.append(b"".join(part))
                    part = []
                    rows += 1
                    end += len(last[-1])
                    statuses.add(_facts(last[-1], kind)[2])
    except OSError as error:
        raise InputError(f"The file {str(path)!r} cannot be read: {error.strerror}.", "Check the path.") from None
    return Kept(rows, end, tuple(last), frozenset(statuses))


def check_kept_rows(path: str | Path, kept: Kept, records: Iterable[BatchRecord], settings: Settings) -> None:
    """Make sure that the last whole rows of a file are the ones this run would write.

    Parameters
    ----------
    path
        The output.
    kept
        What an earlier run left in it.
    records
        The records of the last rows kept, in order.
    settings
        What is asked now.

    Raises
    ------
    InputError
        If the rows belong to other records, or were made with other options.

    Notes
    -----
    No column tells under which options a row was made, so that the rows are answered again and compared byte by
    byte.  Several are, since a single one may be the same in every medium.  A row of status ``error`` is believed:
    its record may have cost a worker its life.
    """
    kind = _kind(path)
    for row, record in zip(kept.last, records, strict=True):
        line, shown, status = _facts(row, kind)
        if line != str(record.line) or _flat(shown) != _flat(record.shown):
            raise InputError(
                f"The rows of {str(path)!r} do not belong to this run (row of line {line}).",
                "Resume with the input and the options of the first run.",
            )
        if status != "error" and _row_bytes(answer(record, settings), kind) != row:
            raise InputError(
                f"The rows of {str(path)!r} were made with other options, tables or another version "
                f"(row of line {line}).",
                "Resume with those of the first run, or write another file.",
            )


def _facts(row: bytes, kind: str) -> tuple[str, str, str]:
    """Line, input and status of a row as written; a question mark for a row that is not ours."""
    text = row.decode("utf-8", "backslashreplace").rstrip("\n")
    try:
        if kind == ".jsonl":
            found = json.loads(text)
            return str(found["input_line"]), str(found["input"]), str(found["status"])
        if kind == ".sdf":
            return _data_item(text, "input_line"), _data_item(text, "input"), _data_item(text, "status")
        cells = next(csv.reader([text], delimiter="\t" if kind == ".tsv" else ","))
        return cells[0], cells[2], cells[4]
    except (ValueError, KeyError, TypeError, IndexError, StopIteration, csv.Error):
        return "?", "", ""


def _data_item(block: str, name: str) -> str:
    return block.partition(f"> <{name}>\n")[2].partition("\n")[0]


# ---- cells -----------------------------------------------------------------------------------------------------


def cell(value: Any) -> str:
    """A value as text: ring systems joined with semicolons, lists with commas, nothing for what is missing."""
    if value is None:
        return ""
    if isinstance(value, list):
        return ";".join(",".join(cell(v) for v in part) if isinstance(part, list) else cell(part) for part in value)
    if isinstance(value, float):
        return _number(value)
    return _flat(str(value))


def _number(value: float) -> str:
    """Six decimals at most, six figures below one."""
    if not math.isfinite(value):
        return ""
    text = f"{round(value, 6):.10g}" if abs(value) >= 1 else f"{value:.6g}"
    return "0" if float(text) == 0 else text


def _flat(text: str) -> str:
    """A text in one line."""
    return " ".join(text.split())


class _Echo:
    """A stream that hands back what is written to it."""

    def write(self, text: str) -> str:
        return text


_quote: Callable[[Sequence[str]], str] = csv.writer(_Echo(), lineterminator="\n").writerow


def _separated(cells: Sequence[str], delimiter: str) -> str:
    """One line of a table."""
    if delimiter == "\t":
        return "\t".join(cells) + "\n"
    return _quote(cells)


def json_line(row: Row) -> str:
    """A row as a JSON object on a line."""

    def plain(value: Any) -> Any:
        if isinstance(value, float):
            text = _number(value)
            return float(text) if text else None
        return [plain(item) for item in value] if isinstance(value, list) else value

    document = {"schema": SCHEMA, "kind": "batch", **{name: plain(value) for name, value in row.cells.items()}}
    return json.dumps(document, ensure_ascii=True, allow_nan=False, separators=(",", ":")) + "\n"


def sdf_record(row: Row) -> str:
    """A row as a molfile block with data items."""
    from ringstrain.structure.blocks import EMPTY_BLOCK

    items = "".join(f"> <{name}>\n{text}\n\n" for name, value in row.cells.items() if (text := cell(value)))
    block = row.block or EMPTY_BLOCK
    return f"{block if block.endswith(chr(10)) else block + chr(10)}{items}$$$$\n"


def _row_bytes(row: Row, kind: str) -> bytes:
    """A row as it stands in a file."""
    if kind == ".jsonl":
        text = json_line(row)
    elif kind == ".sdf":
        text = sdf_record(row)
    else:
        text = _separated([cell(value) for value in row.cells.values()], "\t" if kind == ".tsv" else ",")
    return text.encode("utf-8", "backslashreplace")


class _TextWriter:
    """Rows as text, each handed to the system whole."""

    def __init__(self, stream: IO[bytes], kind: str, path: str | Path) -> None:
        self._stream = stream
        self._kind = kind
        self._path = path

    def write(self, row: Row) -> None:
        """One row.

        Raises
        ------
        InputError
            If the disk is full or gone.
        """
        try:
            self._stream.write(_row_bytes(row, self._kind))
        except OSError as error:
            raise _unwritable(self._path, error) from None

    def close(self) -> None:
        """The end of the file.

        Raises
        ------
        InputError
            If the disk is full or gone.
        """
        inner = getattr(self._stream, "fileobj", None)
        try:
            self._stream.close()
            if inner is not None:
                inner.close()
        except OSError as error:
            raise _unwritable(self._path, error) from None


def _unwritable(path: str | Path, error: OSError) -> InputError:
    """A file that takes no more."""
    step = "Make room, then go on with --resume." if is_resumable(path) else "Make room and start again."
    return InputError(f"The file {str(path)!r} cannot be written on: {error.strerror}.", step)


class _ParquetWriter:
    """Rows as a Parquet file, some thousand at a time; needs the extra ``parquet``."""

    def __init__(self, path: Path, columns: Sequence[str]) -> None:
        try:
            import pyarrow
            import pyarrow.parquet
        except ImportError:
            raise UsageError(
                "Writing .parquet needs the pyarrow package.", "Install it with `pip install 'ringstrain[parquet]'`."
            ) from None
        kinds = {name: pyarrow.int64() for name in _WHOLE} | {name: pyarrow.float64() for name in _SINGLE_FLOATS}
        self._arrow = pyarrow
        self._columns = tuple(columns)
        self._schema = pyarrow.schema([(name, kinds.get(name, pyarrow.string())) for name in columns])
        self._file = pyarrow.parquet.ParquetWriter(path, self._schema)
        self._rows: list[dict[str, Any]] = []

    def write(self, row: Row) -> None:
        """One row."""
        typed = (*_WHOLE, *_SINGLE_FLOATS)
        self._rows.append({name: value if name in typed else cell(value) for name, value in row.cells.items()})
        if len(self._rows) >= _PARQUET_ROWS:
            self._flush()

    def _flush(self) -> None:
        if self._rows:
            self._file.write_table(self._arrow.Table.from_pylist(self._rows, schema=self._schema))
            self._rows.clear()

    def close(self) -> None:
        """The end of the file."""
        self._flush()
        self._file.close()
