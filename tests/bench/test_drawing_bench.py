"""Drawing a state against RDKit's own SVG of the same molecule, medians of one run (run by hand with -m bench)."""

from __future__ import annotations

import time
from collections.abc import Callable

import pytest
import ringstrain as rs
from rdkit import Chem
from rdkit.Chem.Draw import rdMolDraw2D
from ringstrain.views.drawing.states import Wishes, draw_state
from ringstrain.views.drawing.svg import to_svg

pytestmark = pytest.mark.bench
STRUCTURES = {
    "methylcyclohexane": "CC1CCCCC1",
    "menthol": "CC(C)[C@@H]1CC[C@@H](C)C[C@H]1O",
    "glucopyranose": "OC[C@H]1O[C@@H](O)[C@H](O)[C@@H](O)[C@@H]1O",
    "adamantane": "C1C2CC3CC1CC(C2)C3",
    "cholestanol": "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C",
}


def median_s(task: Callable[[], object], rounds: int = 31) -> float:
    """Median time of a task, its first run left out [s]."""
    task()
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        task()
        times.append(time.perf_counter() - start)
    return sorted(times)[rounds // 2]


@pytest.mark.parametrize("name", STRUCTURES)
def test_a_state_takes_at_most_ten_times_what_rdkit_takes(name: str) -> None:
    text = STRUCTURES[name]
    result = rs.analyze(text).ring_systems[0]

    def theirs() -> str:
        canvas = rdMolDraw2D.MolDraw2DSVG(400, 300)
        rdMolDraw2D.PrepareAndDrawMolecule(canvas, Chem.MolFromSmiles(text))
        canvas.FinishDrawing()
        return str(canvas.GetDrawingText())

    base = median_s(theirs)
    for state in result.states[:2]:
        for wishes in (Wishes(), Wishes(numbers=True, gauche=True)):
            assert median_s(lambda s=state, w=wishes: to_svg(draw_state(result, s, w))) <= 10 * base  # type: ignore[misc]  # bound names
