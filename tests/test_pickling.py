"""Whatever crosses a process boundary comes back as it went; exceptions are raised in a spawned pool."""

from __future__ import annotations

import concurrent.futures
import dataclasses
import importlib
import multiprocessing
import pickle
import pkgutil
from collections.abc import Iterator
from typing import Any

import pytest
import ringstrain
from ringstrain.errors import (
    MissingValue,
    OutOfScope,
    ParseError,
    RingstrainError,
    StereoError,
    TableError,
    UnknownGroup,
)

SAMPLES = (
    "CC1CCCCC1",
    "C[C@H]1CCC[C@@H](C)C1",
    "C1CC[C@H]2CCCC[C@H]2C1",
    "C1CCC2(CC1)CCCCC2",
    "C[C@@]12CCC[C@H]1CCCC2",
    "OC1CCCCN1",
    "CC(C)(C)C1CCCCC1",
    "COC1CCCCO1",
)


def every_error() -> list[type[RingstrainError]]:
    """All subclasses, wherever they are defined."""
    for module in pkgutil.walk_packages(ringstrain.__path__, "ringstrain."):
        if "_tables" not in module.name and not module.name.endswith("__main__"):
            importlib.import_module(module.name)
    found: list[type[RingstrainError]] = []
    queue: list[type[RingstrainError]] = [RingstrainError]
    while queue:
        kind = queue.pop()
        found.append(kind)
        queue.extend(kind.__subclasses__())
    return found


def sample_of(kind: type[RingstrainError]) -> RingstrainError:
    """One exception of a class, with data in every place."""
    if issubclass(kind, UnknownGroup):
        return kind("methil", ("methyl",), span=(3, 9), text="1b-methil")
    if issubclass(kind, MissingValue):
        return kind("A-value", ("methyl", "aryl"), atoms=(3, 4))
    if issubclass(kind, TableError):
        return kind("not a number", file="avalues.csv", line=12, column="value")
    error = kind("Something is odd.", "Mend it.", atoms=(1, 2), span=(0, 3), text="C1CC")
    if isinstance(error, StereoError):
        error.spans = ((0, 1), (2, 3))
    return error


def raise_it(error: RingstrainError) -> None:
    raise error


def analyze_it(text: str) -> dict[str, Any]:
    return ringstrain.analyze(text).as_dict()


def refuse_it(text: str) -> None:
    ringstrain.analyze(text)


@pytest.fixture(scope="module")
def pool() -> Iterator[concurrent.futures.ProcessPoolExecutor]:
    context = multiprocessing.get_context("spawn")
    with concurrent.futures.ProcessPoolExecutor(1, mp_context=context) as executor:
        yield executor


@pytest.mark.parametrize("kind", every_error(), ids=lambda kind: kind.__name__)
def test_an_exception_raised_in_a_pool_arrives_whole(
    kind: type[RingstrainError], pool: concurrent.futures.ProcessPoolExecutor
) -> None:
    error = sample_of(kind)
    with pytest.raises(kind) as caught:
        pool.submit(raise_it, error).result(timeout=60)
    assert type(caught.value) is kind
    assert str(caught.value) == str(error)
    kept = {key: value for key, value in vars(caught.value).items() if not key.startswith("__")}
    assert kept == vars(error)


@pytest.mark.parametrize(
    ("text", "kind"),
    [("CC1CCCCC1C", StereoError), ("c1ccccc1", OutOfScope), ("C1CC", ParseError), ("1b-methil", UnknownGroup)],
)
def test_refusals_of_real_input_arrive_whole(
    text: str, kind: type[RingstrainError], pool: concurrent.futures.ProcessPoolExecutor
) -> None:
    with pytest.raises(kind) as here:
        refuse_it(text)
    with pytest.raises(kind) as there:
        pool.submit(refuse_it, text).result(timeout=60)
    assert vars(there.value) == vars(here.value)


@pytest.mark.parametrize("text", SAMPLES)
def test_an_analysis_survives_pickling(text: str) -> None:
    analysis = ringstrain.analyze(text)
    again = pickle.loads(pickle.dumps(analysis))
    assert again.as_dict() == analysis.as_dict()
    assert repr(again) == repr(analysis)


def test_equality_is_by_content() -> None:
    first, second = ringstrain.analyze("CC1CCCCC1"), ringstrain.analyze("CC1CCCCC1")
    assert first == second
    assert pickle.loads(pickle.dumps(first)) == first
    assert first != ringstrain.analyze("CCC1CCCCC1")


def test_a_spawned_process_gives_the_same_answer(pool: concurrent.futures.ProcessPoolExecutor) -> None:
    assert list(pool.map(analyze_it, SAMPLES)) == [analyze_it(text) for text in SAMPLES]


def parts(record: Any) -> Iterator[Any]:
    """All dataclass records inside a record."""
    queue, seen = [record], set()
    while queue:
        item = queue.pop()
        if id(item) in seen:
            continue
        seen.add(id(item))
        if dataclasses.is_dataclass(item) and not isinstance(item, type):
            yield item
            queue.extend(getattr(item, field.name) for field in dataclasses.fields(item))
        elif isinstance(item, tuple | list | frozenset):
            queue.extend(item)
        elif isinstance(item, dict):
            queue.extend(item.values())


@pytest.mark.parametrize("text", SAMPLES)
def test_every_record_inside_is_frozen_and_survives_pickling(text: str) -> None:
    for record in parts(ringstrain.analyze(text)):
        assert type(record).__dataclass_params__.frozen, type(record)
        again = pickle.loads(pickle.dumps(record))
        assert again == record or repr(again) == repr(record), type(record)


def test_the_tables_survive_pickling() -> None:
    tables = ringstrain.load_tables()
    again = pickle.loads(pickle.dumps(tables))
    for field in dataclasses.fields(tables):
        assert getattr(again, field.name) == getattr(tables, field.name), field.name
