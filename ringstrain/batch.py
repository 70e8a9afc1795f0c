"""Many structures: one result for each, in order, whatever happens to it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from concurrent.futures import Executor
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING, Any

from ringstrain.analysis import analyze
from ringstrain.crew import Crew, Inline, run_in_order
from ringstrain.errors import RingstrainError, TableError
from ringstrain.results import SCHEMA, Analysis
from ringstrain.units import ROOM_TEMPERATURE_K

if TYPE_CHECKING:
    from ringstrain.structure.records import Structure
    from ringstrain.tables.records import Tables

#: Structures handed to a worker at once, and chunks under way for an executor whose size we do not know.
CHUNK = 64
WINDOW = 16


@dataclass(frozen=True, slots=True, kw_only=True)
class Failure:
    """A structure that has no analysis, and why.

    Attributes
    ----------
    input
        The input as given.
    family, code
        What kind of failure, as in the JSON of an error; ``error`` when it is our bug or the worker died.
    message
        One sentence with the next step.
    atoms
        Atoms concerned, zero-based.
    """

    input: str
    family: str
    code: str
    message: str
    atoms: tuple[int, ...] = ()

    def as_dict(self) -> dict[str, Any]:
        """The document of a structure that failed."""
        error = {"family": self.family, "code": self.code, "message": self.message, "atoms": list(self.atoms)}
        return {"schema": SCHEMA, "kind": "chairs", "input": self.input, "error": error}


def analyze_many(
    structures: Iterable[Structure | str],
    *,
    executor: Executor | None = None,
    chunk: int = CHUNK,
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
    strict: bool = False,
) -> Iterator[Analysis | Failure]:
    """An analysis or a failure for each structure, in input order.

    Parameters
    ----------
    structures
        Structures or texts; read as they are needed, so that an endless stream is fine.
    executor
        Anything with the interface of :mod:`concurrent.futures`; None to work in this process.
    chunk
        Structures handed over at once [-].
    temperature_K
        Temperature [K].
    medium
        ``gas``, ``nonpolar``, ``polar``, ``protic`` or a solvent name.
    tables
        Price tables; those of the package when None.
    strict
        True to fail where a contact has no price.

    Yields
    ------
    Analysis or Failure
        One for each structure.

    Raises
    ------
    TableError
        If the tables are faulty: no structure could be answered.
    UsageError
        If the medium or temperature cannot be.
    ValueError
        If ``chunk`` is below 1.

    Examples
    --------
    >>> [type(answer).__name__ for answer in analyze_many(["CC1CCCCC1", "c1ccccc1"])]
    ['Analysis', 'Failure']
    """
    if chunk < 1:
        raise ValueError("chunk must be at least 1")
    from ringstrain.tables import load_tables
    from ringstrain.tables.conditions import make_conditions

    make_conditions(tables if tables is not None else load_tables(), temperature_K=temperature_K, medium=medium)
    work = partial(_analyze_chunk, temperature_K=temperature_K, medium=medium, tables=tables, strict=strict)
    crew = Crew(executor if executor is not None else Inline())
    return run_in_order(
        structures,
        work,
        _lost,
        crew=crew,
        chunk=1 if executor is None else chunk,
        window=1 if executor is None else WINDOW,
    )


def _analyze_chunk(
    chunk: tuple[Structure | str, ...], *, temperature_K: float, medium: str, tables: Tables | None, strict: bool
) -> list[Analysis | Failure]:
    """Answers for a chunk."""
    answers: list[Analysis | Failure] = []
    for structure in chunk:
        try:
            answers.append(analyze(structure, temperature_K=temperature_K, medium=medium, tables=tables, strict=strict))
        except Exception as error:
            answers.append(failure_of(_text_of(structure), error))
    return answers


def _lost(structure: Structure | str, error: BaseException) -> Failure:
    return lost_worker(_text_of(structure))


def lost_worker(text: str) -> Failure:
    """The failure of a structure whose worker died."""
    return Failure(
        input=text,
        family="error",
        code="worker-lost",
        message="The process that worked on this structure died. Try it alone with `ringstrain chairs`.",
    )


def failure_of(text: str, error: Exception) -> Failure:
    """The failure an exception stands for.

    Raises
    ------
    TableError
        If it is one: every other structure would fail alike.
    """
    if isinstance(error, TableError):
        raise error
    if isinstance(error, RingstrainError):
        return Failure(input=text, family=error.family, code=error.code, message=error.message, atoms=error.atoms)
    return Failure(
        input=text,
        family="error",
        code="bug",
        message=f"Something went wrong inside ringstrain ({type(error).__name__}). Report the structure.",
    )


def _text_of(structure: object) -> str:
    return structure if isinstance(structure, str) else str(getattr(structure, "text", ""))
