"""`ringstrain batch`: one row for each record of a file, in order, whatever happens."""

from __future__ import annotations

import os
import sys
import time
from collections import deque
from collections.abc import Callable, Iterator
from concurrent.futures import Executor
from contextlib import closing, contextmanager
from functools import partial
from itertools import chain, islice
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from ringstrain.cli import common
from ringstrain.cli.border import remark
from ringstrain.cli.intake import PARENT, check_ring
from ringstrain.errors import InputError, RingstrainError, UsageError

if TYPE_CHECKING:
    from ringstrain.batch_read import RecordReader
    from ringstrain.batch_rows import BatchRecord, Row, Settings
    from ringstrain.batch_write import Kept
    from ringstrain.crew import Crew

HELP = """One row for each record of a file: status, axial groups, gap, K, population.

\b
  ringstrain batch library.smi -o answers.csv
  ringstrain batch library.sdf.gz -o answers.jsonl --isomers --workers 4
  ringstrain batch library.smi -o answers.csv --resume

Input .smi .csv .tsv .sdf (also .gz); output .csv .tsv .jsonl .sdf (also .gz) .parquet. Rows come in input order.
"""
#: Fewer records than this are done in one process, since starting others takes longer.
FEW = 2000
_CHUNK = 100
_INTERVAL_s = 0.5


def register(app: typer.Typer) -> None:
    """Add the command to the application."""
    app.command("batch", help=HELP)(batch)


def batch(
    file: Annotated[str, typer.Argument(metavar="FILE", help="Structures: .smi .csv .tsv .sdf, also .gz.")],
    output: Annotated[
        str, typer.Option("-o", "--output", metavar="FILE", help="Where the rows go; the suffix decides the format.")
    ],
    workers: Annotated[
        int | None,
        typer.Option(
            "--workers", metavar="N", help=f"Processes; one below {FEW} records, else all cores.", show_default=False
        ),
    ] = None,
    resume: Annotated[
        bool, typer.Option("--resume", help="Go on where an earlier run of the same command was cut off.")
    ] = False,
    isomers: Annotated[
        bool, typer.Option("--isomers", help="Add the rank among the stereoisomers, and the best one.")
    ] = False,
    nmr: Annotated[bool, typer.Option("--nmr", help="Add the averaged couplings of the ring hydrogens.")] = False,
    smiles_column: Annotated[
        str | None,
        typer.Option(
            "--smiles-column", metavar="NAME", help="Column of the structures in a .csv or .tsv.", show_default=False
        ),
    ] = None,
    id_column: Annotated[
        str | None, typer.Option("--id-column", metavar="NAME", help="Column of their names.", show_default=False)
    ] = None,
    scheduler: Annotated[
        str | None,
        typer.Option(
            "--scheduler",
            metavar="ADDRESS",
            help="Work on a Dask cluster, e.g. tcp://host:8786 (extra 'dask').",
            show_default=False,
        ),
    ] = None,
    temperature: common.TemperatureOption = "298.15",
    medium: common.MediumOption = "nonpolar",
    ring: common.RingOption = "cyclohexane",
    strict: common.StrictOption = False,
    table_file: common.TableFileOption = None,
    quiet: common.QuietOption = False,
    debug: common.DebugOption = False,
) -> int:
    """Run the command; the exit code."""
    settings = _settings(
        temperature=temperature,
        medium=medium,
        ring=ring,
        strict=strict,
        table_file=table_file,
        isomers=isomers,
        nmr=nmr,
        output=output,
    )
    if workers is not None and workers < 1:
        raise UsageError(f"{workers} workers cannot work.", "Give --workers a number from 1.")
    if workers is not None and scheduler is not None:
        raise UsageError("--workers and --scheduler contradict each other.", "The cluster has its own workers.")
    if Path(file).exists() and Path(output).exists() and os.path.samefile(file, output):
        raise UsageError("Input and output are the same file.", "Write to another one.")
    from ringstrain.batch_read import RecordReader
    from ringstrain.batch_rows import EXIT_CODES, answer_chunk, lost_row
    from ringstrain.batch_write import Kept, find_rows, is_resumable, open_writer
    from ringstrain.crew import run_in_order

    with RecordReader(file, smiles_column=smiles_column, id_column=id_column) as reader:
        source = _Source(reader)
        seen, records = _peek(iter(source))
        kept = find_rows(output, settings.columns) if resume else Kept()
        records = _skip(records, kept, output, settings)
        number = workers or (1 if seen < FEW else os.cpu_count() or 1)
        with (
            _engage(number, scheduler) as (crew, chunk, window),
            closing(open_writer(output, settings.columns, kept)) as writer,
        ):
            rows = run_in_order(
                records,
                partial(answer_chunk, settings=settings),
                lambda record, error: lost_row(record, settings),
                crew=crew,
                chunk=chunk,
                window=window,
            )
            try:
                statuses = _write_all(rows, writer.write, source, done=kept.rows, quiet=quiet) | kept.statuses
            except KeyboardInterrupt:
                if is_resumable(output):
                    remark("The same command with --resume goes on from here.")
                raise
        if not seen:
            remark(f"The file {file!r} holds no record, and {output!r} no row. Check that it is the right file.")
        elif ring != PARENT and not source.has_shorthand:
            remark(f"--ring {ring} was not used: none of the records is a shorthand.")
    return max((EXIT_CODES.get(status, 0) for status in statuses), default=0) if strict else 0


class _Source:
    """Records of a reader; remembers how many, and whether a parent ring could be of use to any."""

    def __init__(self, reader: RecordReader) -> None:
        self._reader = reader
        self._given = 0
        self.has_shorthand = False

    @property
    def expected(self) -> float:
        """Records of the whole file, judged from those so far; they are read ahead of the work."""
        return self._given / self._reader.fraction if self._reader.fraction else 0.0

    def __iter__(self) -> Iterator[BatchRecord]:
        from ringstrain.structure.shorthand import is_shorthand

        for record in self._reader:
            self._given += 1
            self.has_shorthand = self.has_shorthand or (not record.is_block and is_shorthand(record.text))
            yield record


def _peek(records: Iterator[BatchRecord]) -> tuple[int, Iterator[BatchRecord]]:
    """How many records there are, up to :data:`FEW`, and all of them; a source that breaks off does so in its place.

    Raises
    ------
    RingstrainError
        If it breaks off before the first record: then nothing is to be written over what the output holds.
    """
    first: list[BatchRecord] = []
    try:
        first.extend(islice(records, FEW))
    except RingstrainError as error:
        if not first:
            raise
        return len(first), chain(first, _raising(error))
    return len(first), chain(first, records)


def _raising(error: RingstrainError) -> Iterator[BatchRecord]:
    """A source that breaks off at once."""
    yield from ()
    raise error


def _settings(
    *,
    temperature: str,
    medium: str,
    ring: str,
    strict: bool,
    table_file: str | None,
    isomers: bool,
    nmr: bool,
    output: str,
) -> Settings:
    """What is asked about every record, checked before the first one is read."""
    from ringstrain.batch_rows import Settings
    from ringstrain.tables.conditions import make_conditions

    temperatures, media = common.parse_temperatures(temperature), common.media_of(medium)
    if len(temperatures) > 1 or len(media) > 1:
        raise UsageError("A batch has one temperature and one medium.", "Give one value to -T and --medium.")
    check_ring(ring)
    make_conditions(common.tables_for(table_file), temperature_K=temperatures[0], medium=media[0])
    return Settings(
        temperature_K=temperatures[0],
        medium=media[0],
        ring=ring,
        strict=strict,
        table_file=None if table_file is None else str(Path(table_file).resolve()),
        isomers=isomers,
        nmr=nmr,
        blocks=output.lower().removesuffix(".gz").endswith(".sdf"),
    )


def _skip(records: Iterator[BatchRecord], kept: Kept, output: str, settings: Settings) -> Iterator[BatchRecord]:
    """The records that have no row yet; the last ones that have are checked against theirs."""
    if not kept.rows:
        return records
    from ringstrain.batch_write import check_kept_rows

    done = 0
    last: deque[BatchRecord] = deque(maxlen=len(kept.last))
    for record in islice(records, kept.rows):
        last.append(record)
        done += 1
    if done < kept.rows:
        raise InputError(
            f"{output!r} holds more rows than the input has records.", "Resume with the input of the first run."
        )
    check_kept_rows(output, kept, last, settings)
    return records


@contextmanager
def _engage(workers: int, scheduler: str | None) -> Iterator[tuple[Crew, int, int]]:
    """Who works, how many records they take at once, and how many such chunks are under way."""
    from ringstrain.crew import Crew, Inline, collecting_rarely, open_pool

    if scheduler is not None:
        with closing(_open_cluster(scheduler)) as client:
            yield Crew(client.get_executor(pure=False)), _CHUNK, 4 * max(1, sum(client.nthreads().values()))
    elif workers == 1:
        with collecting_rarely():
            yield Crew(Inline()), 1, 1
    else:
        reopen: Callable[[], Executor] = partial(open_pool, workers)
        yield Crew(reopen(), reopen), _CHUNK, 3 * workers


def _open_cluster(address: str) -> Any:
    """The client of a Dask cluster."""
    try:
        from distributed import Client
    except ImportError:
        raise UsageError(
            "--scheduler needs the dask package.", "Install it with `pip install 'ringstrain[dask]'`."
        ) from None
    try:
        return Client(address, timeout="10s")
    except (OSError, ValueError) as error:
        raise UsageError(
            f"No Dask scheduler answers at {address} ({type(error).__name__}).", "Check the address."
        ) from None


def _write_all(
    rows: Iterator[Row], write: Callable[[Row], None], source: _Source, *, done: int, quiet: bool
) -> frozenset[str]:
    """Write the rows, tell how far it is, sum up; every status there was."""
    from ringstrain.batch_rows import STATUSES

    tally = dict.fromkeys(STATUSES, 0)
    progress = _Progress(source, done=done, shown=not quiet and sys.stderr.isatty())
    try:
        for row in rows:
            write(row)
            tally[row.status] += 1
            progress.step()
    finally:
        progress.clear()
        if not quiet:
            sys.stderr.write(_summary(tally, done, progress.seconds) + "\n")
    return frozenset(status for status, count in tally.items() if count)


def _summary(tally: dict[str, int], done: int, seconds: float) -> str:
    """How many records ended how, and how fast."""
    total = sum(tally.values())
    parts = ", ".join(f"{count} {status}" for status, count in tally.items() if count) or "none"
    before = f" after {done} rows of an earlier run" if done else ""
    records = "1 record" if total == 1 else f"{total} records"
    return f"{records}{before}: {parts}; {seconds:.1f} s, {total / seconds if seconds else 0:.0f} a second."


class _Progress:
    """One line on standard error that is written over, from the second second on."""

    def __init__(self, source: _Source, *, done: int, shown: bool) -> None:
        self._source = source
        self._shown = shown
        self._done = done
        self._count = 0
        self._start = self._next = time.monotonic()
        self._next += 2 * _INTERVAL_s
        self._width = 0

    @property
    def seconds(self) -> float:
        """Time since the start [s]."""
        return time.monotonic() - self._start

    def step(self) -> None:
        """One row more."""
        self._count += 1
        if not self._shown or (now := time.monotonic()) < self._next:
            return
        self._next = now + _INTERVAL_s
        rate = self._count / (now - self._start)
        still = self._source.expected - self._done - self._count
        left = f", {_duration(still / rate)} left" if still > 0 else ""
        text = f"{self._done + self._count} records, {rate:.0f} a second{left}"
        sys.stderr.write("\r" + text.ljust(self._width))
        sys.stderr.flush()
        self._width = len(text)

    def clear(self) -> None:
        """Take the line away."""
        if self._width:
            sys.stderr.write("\r" + " " * self._width + "\r")
            sys.stderr.flush()


def _duration(seconds: float) -> str:
    """Hours, minutes or seconds."""
    if seconds >= 5400:
        return f"{seconds / 3600:.1f} h"
    return f"{seconds / 60:.0f} min" if seconds >= 90 else f"{seconds:.0f} s"
