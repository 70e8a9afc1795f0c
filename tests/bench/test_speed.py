"""Speed as ratios measured in one run; every text is a fresh random writing, so that no cache on the text helps.

Run with ``pytest -m bench tests/bench``.  Limits are those the project set itself; lower is better.
"""

from __future__ import annotations

import gc
import statistics
import subprocess
import sys
import time
import tracemalloc
from collections.abc import Callable, Sequence
from random import Random
from typing import Any

import pytest
import ringstrain as rs
from rdkit import Chem

from zoo import FIXED, marked, rewritten

pytestmark = pytest.mark.bench
NAMED = dict(FIXED)


def writings(smiles: str, count: int, seed: int = 1) -> list[str]:
    """Different random writings of one compound."""
    rng, mol = Random(seed), marked(smiles)
    return [rewritten(mol, rng)[0] for _ in range(count)]


def seconds_each(work: Callable[[str], object], texts: Sequence[str]) -> float:
    """Median time of one call [s]."""
    times = []
    for text in texts:
        start = time.perf_counter()
        work(text)
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def outside(text: str) -> str:
    """RDKit's reading and canonical writing, the yardstick."""
    return str(Chem.MolToSmiles(Chem.MolFromSmiles(text)))


def ours(text: str) -> object:
    """Reading and the whole analysis."""
    return rs.analyze(rs.read(text))


@pytest.mark.parametrize(("name", "limit"), [("menthol", 12.0), ("cholestanol", 15.0)])
def test_read_and_analyze_against_reading_and_writing_with_RDKit(name: str, limit: float, benchmark: Any) -> None:
    texts = iter(writings(NAMED[name], 400, seed=9))
    ours(next(texts))  # tables are loaded once
    benchmark.pedantic(ours, setup=lambda: ((next(texts),), {}), rounds=100, iterations=1)
    ratios = []
    for seed in range(5):
        batch = writings(NAMED[name], 40, seed=seed)
        ratios.append(seconds_each(ours, batch) / seconds_each(outside, batch))
    ratio = statistics.median(ratios)
    benchmark.extra_info["ratio"] = ratio
    print(f"{name}: {ratio:.1f} times RDKit")
    assert ratio <= limit


def acene(rings: int) -> str:
    """All-trans linear perhydroacene: hydrogens up along one edge, down along the other, so that all chairs close."""
    numbers = [str(n) if n < 10 else f"%{n}" for n in range(2, rings + 1)]
    there = "".join(f"[C@H]{number}C" for number in numbers)
    back = "".join(f"[C@@H]{number}C" for number in reversed(numbers))
    return f"C1CC{there}CCC{back}1"


def test_time_per_ring_is_the_same_from_2_to_30_rings(benchmark: Any) -> None:
    (system,) = rs.analyze(acene(5)).ring_systems
    assert system.locked
    assert dict(system.states[0].counts)["gauche"] == 0
    per_ring = {}
    for rings in (2, 5, 10, 20, 30):
        texts = writings(acene(rings), 15)
        per_ring[rings] = seconds_each(ours, texts) / rings
    for rings, value in per_ring.items():
        print(f"{rings} rings: {1e3 * value:.2f} ms a ring")
    benchmark.extra_info["ms_per_ring"] = {rings: 1e3 * value for rings, value in per_ring.items()}
    benchmark.pedantic(ours, args=(acene(30),), rounds=5)
    assert per_ring[30] <= 1.5 * per_ring[2]


def test_memory_stays_flat_over_many_analyses(benchmark: Any) -> None:
    rng = Random(3)
    mols = [marked(smiles) for smiles in NAMED.values()]

    def some(count: int) -> None:
        for number in range(count):
            ours(rewritten(mols[number % 3 + 2], rng)[0])

    some(1500)  # until RDKit and the interpreter have filled their own caches
    tracemalloc.start()
    some(9000)  # until the blocks they keep have been replaced by counted ones
    sizes = []
    for _ in range(5):
        some(600)
        gc.collect()
        sizes.append(tracemalloc.get_traced_memory()[0])
    tracemalloc.stop()
    growth = (sizes[-1] - sizes[1]) / (3 * 600)
    print(f"{growth:.1f} bytes kept per analysis")
    benchmark.extra_info["bytes_per_analysis"] = growth
    benchmark.pedantic(some, args=(10,), rounds=1)
    # 100,000 analyses may keep one megabyte between them.
    assert growth <= 10.0


def run(*arguments: str) -> float:
    """Time of a Python process [s]."""
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, capture_output=True)
    return time.perf_counter() - start


def test_a_chairs_process_against_a_bare_one_with_the_same_imports(benchmark: Any) -> None:
    bare = ("-c", "import numpy, networkx, rdkit.Chem, rich, typer")
    code = "from ringstrain.cli import main; import sys; sys.argv = ['ringstrain', 'chairs', 'CC1CCCCC1']; main()"
    full = ("-c", code)
    run(*bare)
    run(*full)
    ratio = statistics.median(run(*full) / run(*bare) for _ in range(9))
    benchmark.extra_info["ratio"] = ratio
    print(f"chairs process: {ratio:.2f} times bare imports")
    benchmark.pedantic(run, args=full, rounds=3)
    assert ratio <= 1.5
