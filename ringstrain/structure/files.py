"""Files of structures: .smi, .mol and .sdf, plain or gzipped."""

from __future__ import annotations

import gzip
import zlib
from collections.abc import Iterator
from pathlib import Path
from typing import TextIO

from ringstrain.errors import InputError
from ringstrain.structure.read import read, read_molblock
from ringstrain.structure.records import Structure
from ringstrain.structure.shorthand import is_remark

SUFFIXES = (".mol", ".sdf", ".smi")


def file_kind(path: str | Path) -> str:
    """The structure suffix of a path (``.gz`` peeled off), or an empty string when it has none."""
    name = str(path).lower()
    name = name.removesuffix(".gz")
    return next((suffix for suffix in SUFFIXES if name.endswith(suffix)), "")


def read_file(path: str | Path) -> Iterator[Structure]:
    """Structures of a file, one after the other.

    Parameters
    ----------
    path
        ``.smi`` (SMILES, then a blank or tab and a name), ``.mol`` or ``.sdf``; ``.gz`` is unpacked.

    Yields
    ------
    Structure
        In file order.

    Raises
    ------
    InputError
        If the file cannot be read or a record is faulty; see :func:`ringstrain.read`.
    """
    for text, name, is_block in read_records(path):
        yield read_molblock(text, name=name) if is_block else read(text)


def read_records(path: str | Path) -> Iterator[tuple[str, str, bool]]:
    """Raw records of a file: text, name, and whether the text is a molfile block.

    Raises
    ------
    InputError
        If the file has no known suffix or cannot be opened.
    """
    kind = file_kind(path)
    if not kind:
        raise InputError(f"{str(path)!r} is no structure file.", f"Use one of {', '.join(SUFFIXES)} (also .gz).")
    try:
        with _open(path) as stream:
            yield from _smiles_records(stream) if kind == ".smi" else _block_records(stream, kind)
    except (OSError, EOFError, zlib.error) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else "not a readable text file"
        raise InputError(f"The file {str(path)!r} cannot be read: {reason}.", "Check the path.") from None


def _open(path: str | Path) -> TextIO:
    """The file as text; a byte that is no UTF-8, in somebody's name say, costs nothing but itself."""
    if str(path).lower().endswith(".gz"):
        return gzip.open(path, "rt", encoding="utf-8-sig", errors="backslashreplace", newline=None)
    return open(path, encoding="utf-8-sig", errors="backslashreplace", newline=None)


def _smiles_records(stream: TextIO) -> Iterator[tuple[str, str, bool]]:
    """One record a line; a name may follow after a tab or blank, and a comment is none."""
    for line in stream:
        text = line.rstrip("\r\n")
        if text.strip() and not is_remark(text):
            yield text, "", False


def _block_records(stream: TextIO, kind: str) -> Iterator[tuple[str, str, bool]]:
    """Molfile blocks; in an .sdf they end with four dollar signs."""
    lines: list[str] = []
    for line in stream:
        if kind == ".sdf" and line.startswith("$$$$"):
            if any(part.strip() for part in lines):
                yield "".join(lines), lines[0].strip(), True
            lines = []
        else:
            lines.append(line)
    if any(part.strip() for part in lines):
        yield "".join(lines), lines[0].strip(), True
