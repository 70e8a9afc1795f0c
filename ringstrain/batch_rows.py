"""One row for each record of a file: what is asked, and how an answer becomes columns."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING, Any

from ringstrain.analysis import analyze
from ringstrain.batch import Failure, failure_of, lost_worker
from ringstrain.errors import ParseError
from ringstrain.results import Analysis, State, SystemResult
from ringstrain.structure.read import read, read_molblock
from ringstrain.tables import Tables, load_tables
from ringstrain.units import ROOM_TEMPERATURE_K

if TYPE_CHECKING:
    from ringstrain.structure.records import Structure

#: Columns as the contract fixes them; several ring systems of one structure are joined with a semicolon.
COLUMNS = (
    "input_line", "id", "input", "smiles", "status", "message", "axial_groups", "dG_kcal", "uncertainty_kcal", "K",
    "population", "flags",
)  # fmt: skip
ISOMER_COLUMNS = ("isomers", "input_rank", "input_dG_kcal", "best_isomer", "best_share")
NMR_COLUMNS = ("couplings",)
STATUSES = ("ok", "input", "out-of-scope", "missing", "error")
#: Exit code of each status with --strict.
EXIT_CODES = {"ok": 0, "input": 3, "out-of-scope": 4, "missing": 5, "error": 1}


@dataclass(frozen=True, slots=True, kw_only=True)
class BatchRecord:
    """One record of an input file.

    Attributes
    ----------
    line
        Line of the file it starts at, from 1.
    id
        Name that came with it.
    text
        SMILES, shorthand or molfile block.
    is_block
        True for a molfile block.
    fault
        Why the record itself cannot be read, else empty.
    """

    line: int
    id: str
    text: str
    is_block: bool = False
    fault: str = ""

    @property
    def shown(self) -> str:
        """What stands in the input column."""
        return (self.id or "molfile") if self.is_block else self.text


@dataclass(frozen=True, slots=True, kw_only=True)
class Settings:
    """What is asked about every record; small, since it travels to every worker.

    Attributes
    ----------
    temperature_K, medium, ring, strict
        As for :func:`ringstrain.analyze` and :func:`ringstrain.read`.
    table_file
        The user's own values, by path; None for the package's.
    isomers, nmr
        True to add their columns.
    blocks
        True to add a molfile block with coordinates for the output.
    """

    temperature_K: float = ROOM_TEMPERATURE_K
    medium: str = "nonpolar"
    ring: str = "cyclohexane"
    strict: bool = False
    table_file: str | None = None
    isomers: bool = False
    nmr: bool = False
    blocks: bool = False

    @property
    def columns(self) -> tuple[str, ...]:
        """Columns of a row."""
        return (*COLUMNS, *(ISOMER_COLUMNS if self.isomers else ()), *(NMR_COLUMNS if self.nmr else ()))


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One row of the output.

    Attributes
    ----------
    cells
        Value by column; lists have one entry for each ring system.
    block
        Molfile block for a structure file, empty when not asked for.
    """

    cells: Mapping[str, Any]
    block: str = ""

    @property
    def status(self) -> str:
        """One of :data:`STATUSES`."""
        return str(self.cells["status"])


def answer_chunk(chunk: tuple[BatchRecord, ...], settings: Settings) -> list[Row]:
    """Rows for a chunk; nothing a record holds can raise."""
    return [answer(record, settings) for record in chunk]


def lost_row(record: BatchRecord, settings: Settings) -> Row:
    """The row of a record whose worker died."""
    cells = _failed(record, lost_worker(record.shown), settings)
    return Row(cells=cells, block=record.text if record.is_block and settings.blocks else "")


@lru_cache(maxsize=2)
def _tables(table_file: str | None) -> Tables:
    """The price tables, read once in each process."""
    tables = load_tables()
    if table_file is None:
        return tables
    from ringstrain.tables.user import load_user_tables

    return load_user_tables(Path(table_file), tables)


def answer(record: BatchRecord, settings: Settings) -> Row:
    """The row of one record.

    Raises
    ------
    TableError
        If the tables are faulty: every record would fail alike.
    """
    block = record.text if record.is_block else ""
    cells: dict[str, Any] = dict.fromkeys(settings.columns)
    structure: Structure | None = None
    try:
        structure = _read(record, settings)
        if settings.blocks and not block:
            from ringstrain.structure.blocks import write_molblock

            block = write_molblock(structure)
        analysis = analyze(
            structure,
            temperature_K=settings.temperature_K,
            medium=settings.medium,
            tables=_tables(settings.table_file),
            strict=settings.strict,
        )
        cells.update(_head(record), smiles=analysis.smiles, status="ok", message="", **_columns(analysis))
        if settings.nmr:
            cells.update(_couplings(analysis, _tables(settings.table_file)))
    except Exception as error:
        cells = _failed(record, failure_of(record.shown, error), settings)
    if settings.isomers and structure is not None:
        cells.update(_isomers(structure, settings))
    return Row(cells=cells, block=block if settings.blocks else "")


def _read(record: BatchRecord, settings: Settings) -> Structure:
    if record.fault:
        raise ParseError(record.fault, "Mend the line.")
    if record.is_block:
        if not record.text.strip():
            raise ParseError("The record is empty.", "Give a molfile block.")
        return read_molblock(record.text, name=record.id)
    structure = read(record.text, ring=settings.ring)
    return replace(structure, name=record.id) if record.id else structure


def _head(record: BatchRecord) -> dict[str, Any]:
    return {"input_line": record.line, "id": record.id, "input": record.shown}


def _failed(record: BatchRecord, failure: Failure, settings: Settings) -> dict[str, Any]:
    status = failure.family if failure.family in STATUSES else "error"
    empty = dict.fromkeys(settings.columns)
    return {**empty, **_head(record), "status": status, "message": failure.message}


def _columns(analysis: Analysis) -> dict[str, Any]:
    """The columns of an analysis, one entry for each ring system."""
    systems = analysis.ring_systems
    gaps = [result.equilibrium for result in systems]
    return {
        "axial_groups": [_axial_groups(result, result.states[0]) for result in systems],
        "dG_kcal": [gap.dG_kcal if gap else None for gap in gaps],
        "uncertainty_kcal": [gap.uncertainty_kcal if gap else None for gap in gaps],
        "K": [gap.K if gap else None for gap in gaps],
        "population": [result.states[0].population for result in systems],
        "flags": [_flags(result) for result in systems],
    }


def _axial_groups(result: SystemResult, state: State) -> list[str]:
    """Groups that stand axial in a state, with their atom from 1."""
    rings = result.system.atom_set.union(*result.system.companions)
    homes = {atom: ring_atom for atom, ring_atom, _, _ in state.sites}
    return [f"{result.groups[(homes[a], a)].key}@{a + 1}" for a in state.axial if a not in rings]


def _flags(result: SystemResult) -> list[str]:
    """What limits the answer: locked, bounded, unpriced, and the least certain kind of line."""
    gap = result.equilibrium
    flags = []
    if gap is None:
        flags.append("locked")
    else:
        if gap.bound:
            flags.append(gap.bound.replace(" ", "-"))
        if gap.regime != "additive":
            flags.append(gap.regime.replace(" ", "-"))
    if any(state.lower_bound for state in result.states):
        flags.append("unpriced")
    return flags


def _couplings(analysis: Analysis, tables: Tables) -> dict[str, Any]:
    """Averaged couplings of each ring hydrogen [Hz]: ``H1ax=11.2,4.1``."""
    from ringstrain.consequences.nmr import predict_nmr

    spectrum = predict_nmr(analysis, tables=tables)
    entries = []
    for signal in spectrum.signals:
        known = sorted(
            (c.average_Hz for c in signal.couplings if c.observable and c.average_Hz is not None), reverse=True
        )
        if known:
            entries.append(f"{signal.label}={','.join(f'{value:.1f}' for value in known)}")
    return {"couplings": entries}


def _isomers(structure: Structure, settings: Settings) -> dict[str, Any]:
    """How many stereoisomers there are, where the input ranks, and which is best; empty where that cannot be said."""
    from ringstrain.isomers import rank_isomers

    try:
        ranking = rank_isomers(
            structure,
            temperature_K=settings.temperature_K,
            medium=settings.medium,
            tables=_tables(settings.table_file),
        )
    except Exception as error:
        return {"best_isomer": f"not ranked: {failure_of(structure.text, error).message}"}
    best = ranking.isomers[0] if ranking.isomers else None
    own = (
        ranking.isomers[ranking.input_rank - 1]
        if ranking.input_rank and len(ranking.isomers) >= ranking.input_rank
        else None
    )
    return {
        "isomers": len(ranking.isomers),
        "input_rank": ranking.input_rank,
        "input_dG_kcal": own.dG_kcal if own else None,
        "best_isomer": best.smiles if best else None,
        "best_share": best.share if best else None,
    }
