"""Rows written as .csv, .tsv, .jsonl, .sdf or .parquet, and picked up again where a run was cut off."""

from __future__ import annotations

import csv
import gzip
import io
import json
import math
from collections.abc import Sequence
from pathlib import Path
from typing import IO, Any, Protocol

from ringstrain.batch_read import suffix_of
from ringstrain.batch_rows import BatchRecord, Row
from ringstrain.errors import InputError, UsageError
from ringstrain.results import SCHEMA

SUFFIXES = (".csv", ".tsv", ".jsonl", ".sdf", ".parquet")
_END_OF_BLOCK = b"$$$$\n"
_PARQUET_ROWS = 10_000
_WHOLE = ("input_line", "isomers", "input_rank")
_SINGLE_FLOATS = ("input_dG_kcal", "best_share")


class Writer(Protocol):
    """Takes rows one by one."""

    def write(self, row: Row) -> None:
        """One row."""

    def close(self) -> None:
        """The end of the file."""


def open_writer(path: str | Path, columns: Sequence[str], *, resume: bool) -> tuple[Writer, int]:
    """A writer for a path, and how many rows the file already holds.

    Parameters
    ----------
    path
        Output; its suffix decides the format.
    columns
        Columns of a row.
    resume
        True to keep the whole rows of an earlier run and go on after them.

    Raises
    ------
    UsageError
        If the suffix is unknown, or a format cannot be resumed.
    InputError
        If the file cannot be written, or holds something else than such rows.
    """
    kind = suffix_of(path, SUFFIXES)
    packed = str(path).lower().endswith(".gz")
    if not kind or (packed and kind == ".parquet"):
        raise UsageError(f"{str(path)!r} is no output we can write.", f"Use one of {', '.join(SUFFIXES)}.")
    if resume and (packed or kind == ".parquet"):
        raise UsageError(
            "A .gz or .parquet output cannot be resumed.", "Write .csv, .tsv, .jsonl or .sdf, and pack it after."
        )
    try:
        if kind == ".parquet":
            return _ParquetWriter(Path(path), columns), 0
        done = keep_whole_rows(Path(path), kind, columns) if resume else 0
        stream = _open(Path(path), packed=packed, append=done > 0)
    except OSError as error:
        raise InputError(f"The file {str(path)!r} cannot be written: {error.strerror}.", "Check the path.") from None
    head = _header(kind, columns)
    if not done and head:
        stream.write(head)
    return _TextWriter(stream, kind), done


def _open(path: Path, *, packed: bool, append: bool) -> IO[bytes]:
    if packed:  # no name and no time inside, so that equal rows give equal bytes
        return gzip.GzipFile(filename="", mode="wb", fileobj=open(path, "wb"), mtime=0)  # type: ignore[return-value]
    return open(path, "ab" if append else "wb")


def _header(kind: str, columns: Sequence[str]) -> bytes:
    if kind not in (".csv", ".tsv"):
        return b""
    return _separated(columns, "\t" if kind == ".tsv" else ",").encode()


def keep_whole_rows(path: Path, kind: str, columns: Sequence[str]) -> int:
    """Cut a torn last row off a file; how many whole rows are left.

    Raises
    ------
    InputError
        If the file does not begin as ours do.
    """
    if not path.exists():
        return 0
    head = _header(kind, columns)
    mark = _END_OF_BLOCK if kind == ".sdf" else b"\n"
    rows = end = position = 0
    with open(path, "r+b") as stream:
        if head and (first := stream.read(len(head))) != head:
            if head.startswith(first):
                stream.truncate(0)
                return 0
            raise InputError(
                f"{str(path)!r} does not begin with the header of this run.",
                "Resume with the options of the first run, or write another file.",
            )
        end = position = len(head)
        for line in stream:
            position += len(line)
            if line.endswith(b"\n") and (kind != ".sdf" or line == mark):
                rows += 1
                end = position
        stream.truncate(end if rows or head else 0)
    return rows


def check_last_row(path: Path, record: BatchRecord) -> None:
    """Make sure that the last row of a resumed file belongs to a record of this input.

    Raises
    ------
    InputError
        If it does not.
    """
    kind = suffix_of(path, SUFFIXES)
    with open(path, "rb") as stream:
        stream.seek(0, io.SEEK_END)
        stream.seek(max(0, stream.tell() - 4_000_000))
        tail = stream.read().decode("utf-8", "backslashreplace")
    if kind == ".jsonl":
        found = json.loads(tail.rstrip("\n").rpartition("\n")[2])
        line, shown = str(found.get("input_line")), found.get("input")
    elif kind == ".sdf":
        block = tail.rstrip("\n").removesuffix("$$$$").rpartition("$$$$\n")[2]
        line, shown = _data_item(block, "input_line"), _data_item(block, "input")
    else:
        last = next(csv.reader([tail.rstrip("\n").rpartition("\n")[2]], delimiter="\t" if kind == ".tsv" else ","))
        line, shown = last[0], last[2]
    if line != str(record.line) or shown != _flat(record.shown):
        raise InputError(
            f"Row {line} of {str(path)!r} does not belong to this input.", "Resume with the input of the first run."
        )


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


def _separated(cells: Sequence[str], delimiter: str) -> str:
    """One line of a table."""
    if delimiter == "\t":
        return "\t".join(cells) + "\n"
    buffer = io.StringIO()
    csv.writer(buffer, lineterminator="\n").writerow(cells)
    return buffer.getvalue()


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


class _TextWriter:
    """Rows as text, each handed to the system whole."""

    def __init__(self, stream: IO[bytes], kind: str) -> None:
        self._stream = stream
        self._kind = kind

    def write(self, row: Row) -> None:
        """One row."""
        if self._kind == ".jsonl":
            text = json_line(row)
        elif self._kind == ".sdf":
            text = sdf_record(row)
        else:
            text = _separated([cell(value) for value in row.cells.values()], "\t" if self._kind == ".tsv" else ",")
        self._stream.write(text.encode("utf-8", "backslashreplace"))

    def close(self) -> None:
        """The end of the file."""
        inner = getattr(self._stream, "fileobj", None)
        self._stream.close()
        if inner is not None:
            inner.close()


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
