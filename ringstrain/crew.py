"""Chunks of work done in order by an executor whose workers may die."""

from __future__ import annotations

import gc
import multiprocessing
import signal
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import BrokenExecutor, Executor, Future, ProcessPoolExecutor
from contextlib import contextmanager
from itertools import islice
from typing import Any, TypeVar

from ringstrain.errors import RingstrainError

Item = TypeVar("Item")
Outcome = TypeVar("Outcome")
#: Thresholds of the garbage collector while many records are worked on.
RARELY = (50_000, 20, 20)


def in_chunks(items: Iterable[Item], size: int) -> Iterator[tuple[Item, ...]]:
    """The items a few at a time; when their source breaks off, what came before is handed out first."""
    part: list[Item] = []
    try:
        for item in items:
            part.append(item)
            if len(part) == size:
                yield tuple(part)
                part = []
    except RingstrainError:
        if part:
            yield tuple(part)
        raise
    if part:
        yield tuple(part)


def open_pool(workers: int) -> ProcessPoolExecutor:
    """A pool of fresh processes that leave Ctrl-C to their parent."""
    return ProcessPoolExecutor(workers, mp_context=multiprocessing.get_context("spawn"), initializer=_begin)


def _begin() -> None:
    """Set up a worker."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    gc.set_threshold(*RARELY)


@contextmanager
def collecting_rarely() -> Iterator[None]:
    """Look for cyclic garbage less often: answers are short-lived records without cycles, and looking takes a sixth."""
    before = gc.get_threshold()
    gc.set_threshold(*RARELY)
    try:
        yield
    finally:
        gc.set_threshold(*before)


class _Done(Future[Any]):
    """A future that was never pending, without the locks that waiting takes."""

    def __init__(self, outcome: Any, error: Exception | None) -> None:
        self._outcome = outcome
        self._error = error

    def result(self, timeout: float | None = None) -> Any:
        """What the work gave, or the exception it raised."""
        if self._error is not None:
            raise self._error
        return self._outcome

    def exception(self, timeout: float | None = None) -> Exception | None:
        """The exception the work raised."""
        return self._error

    def done(self) -> bool:
        """True."""
        return True

    def cancelled(self) -> bool:
        """False."""
        return False

    def cancel(self) -> bool:
        """False: it is too late."""
        return False


class Inline(Executor):
    """An executor that works at once in this process."""

    def submit(self, fn, /, *args, **kwargs):  # type: ignore[no-untyped-def]
        """A future that is already done."""
        try:
            return _Done(fn(*args, **kwargs), None)
        except Exception as error:
            return _Done(None, error)


class Crew:
    """An executor that is opened anew when it breaks.

    Parameters
    ----------
    executor
        What works.
    reopen
        Makes another one; None when the executor is not ours to replace.
    """

    def __init__(self, executor: Executor, reopen: Callable[[], Executor] | None = None) -> None:
        self._executor = executor
        self._reopen = reopen
        self.generation = 0

    def submit(
        self, work: Callable[[tuple[Item, ...]], list[Outcome]], chunk: tuple[Item, ...]
    ) -> Future[list[Outcome]]:
        """A future for a chunk; one that has failed when the executor takes no more work."""
        try:
            return self._executor.submit(work, chunk)
        except (BrokenExecutor, RuntimeError) as error:
            self.renew(self.generation)
            if self._reopen is not None:
                return self._executor.submit(work, chunk)
            failed: Future[list[Outcome]] = Future()
            failed.set_exception(error)
            return failed

    def renew(self, generation: int) -> None:
        """Replace the executor unless that has happened since ``generation``."""
        if self._reopen is None or generation != self.generation:
            return
        self._executor.shutdown(wait=True, cancel_futures=True)
        self._executor = self._reopen()
        self.generation += 1

    def close(self) -> None:
        """Let no more work begin; an executor that was handed to us stays open."""
        if self._reopen is not None:
            self._executor.shutdown(wait=False, cancel_futures=True)


def run_in_order(
    items: Iterable[Item],
    work: Callable[[tuple[Item, ...]], list[Outcome]],
    lost: Callable[[Item, BaseException], Outcome],
    *,
    crew: Crew,
    chunk: int,
    window: int,
) -> Iterator[Outcome]:
    """One outcome for each item, in order.

    Parameters
    ----------
    items
        What to work on; read only as far as ``window`` chunks ahead.
    work
        Turns a chunk into a list of outcomes.
    lost
        Outcome of an item whose worker died.
    crew
        Who works.
    chunk
        Items handed over at once [-].
    window
        Chunks under way at once [-].

    Yields
    ------
    Outcome
        One for each item.

    Raises
    ------
    RingstrainError
        What ``work`` raises on purpose, because every item would fail alike; what the source raises, after the outcomes
        of all that came before.

    Notes
    -----
    When a worker dies the first unfinished chunk is done again one item at a time, so that only the culprit is lost;
    the other unfinished chunks are handed out again whole.
    """
    chunks = in_chunks(items, chunk)
    waiting: deque[tuple[tuple[Item, ...], Future[list[Outcome]], int]] = deque()
    broken_off: RingstrainError | None = None
    try:
        while True:
            try:
                for part in islice(chunks, window - len(waiting)):
                    waiting.append((part, crew.submit(work, part), crew.generation))
            except RingstrainError as error:
                broken_off, chunks = error, iter(())
            if not waiting:
                break
            part, future, generation = waiting.popleft()
            try:
                outcomes = future.result()
            except RingstrainError:  # nothing a single item could be blamed for: the tables, say
                raise
            except Exception:  # a worker died, or could not take or hand back the chunk
                crew.renew(generation)
                yield from (_alone(item, work, lost, crew) for item in part)
                waiting = deque(
                    entry if _is_fine(entry[1]) else (entry[0], crew.submit(work, entry[0]), crew.generation)
                    for entry in waiting
                )
            else:
                yield from outcomes
        if broken_off is not None:
            raise broken_off
    finally:
        for _, future, _ in waiting:
            future.cancel()
        crew.close()


def _alone(
    item: Item,
    work: Callable[[tuple[Item, ...]], list[Outcome]],
    lost: Callable[[Item, BaseException], Outcome],
    crew: Crew,
) -> Outcome:
    """The outcome of one item, done by itself."""
    generation = crew.generation
    try:
        return crew.submit(work, (item,)).result()[0]
    except RingstrainError:
        raise
    except Exception as error:
        crew.renew(generation)
        return lost(item, error)


def _is_fine(future: Future[list[Outcome]]) -> bool:
    """True for a future that is done or may still be."""
    return not future.done() or (not future.cancelled() and future.exception() is None)
