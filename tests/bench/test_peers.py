"""Force fields on the published equilibria, scored as ringstrain is; accuracy and time side by side.

Run with ``pytest -m bench tests/bench/test_peers.py`` (a few rows), or over every row that tests the prices, writing
the table (GFN2-xTB needs the package tblite)::

    python tests/bench/test_peers.py tables/peers.csv mmff xtb

Times are processor seconds of one row, its molecules searched from nothing.  Energies of the force fields are those of
the gas phase, whatever medium the row was measured in.
"""

from __future__ import annotations

import math
import sys
import time
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from statistics import median

import pytest
from ringstrain.crosscheck.peers import Peer, part_of, peers_text
from ringstrain.crosscheck.records import MethodName
from ringstrain.crosscheck.scoring import Scorer
from ringstrain.errors import RingstrainError
from ringstrain.structure.read import read
from ringstrain.tables import load_tables
from ringstrain.validation.rows import MeasuredRow, read_equilibria
from ringstrain.validation.score import Score, score_row

pytestmark = pytest.mark.bench
#: Heavy atoms a molecule may have for a method; larger ones are left out of its line and counted in the note.
LARGEST: dict[str, int] = {"mmff": 200, "xtb": 24}
#: Rows measured more than this decide a winner [kcal/mol].
WINNER_KCAL = 0.3


@dataclass(frozen=True, slots=True)
class Answer:
    """What a method says of one row: B minus A [kcal/mol] and its time [s]."""

    row: MeasuredRow
    part: str
    energy_kcal: float | None
    seconds: float


def rows_that_test() -> list[Score]:
    """Rows that test the prices and have a prediction."""
    scores = [score_row(row, load_tables()) for row in read_equilibria()]
    return [score for score in scores if score.difference_kcal is not None and score.is_independent]


def own_answers(scores: Iterable[Score]) -> list[Answer]:
    """Ringstrain's."""
    found = []
    for score in scores:
        start = time.process_time()
        again = score_row(score.row, load_tables())
        seconds = time.process_time() - start
        assert again.prediction is not None
        found.append(Answer(score.row, part_of(score), again.prediction.energy_kcal, seconds))
    return found


def peer_answers(method: MethodName, scores: Iterable[Score]) -> list[Answer]:
    """Those of a force field; a molecule met before costs what it cost the first time."""
    scorer = Scorer(method, load_tables())
    cost: dict[str, float] = {}
    found = []
    for score in scores:
        row = score.row
        molecules = {row.smiles_a, row.smiles_a if row.kind == "chair" else row.smiles_b}
        if any(len(read(smiles).atoms) > LARGEST[method] for smiles in molecules):
            continue
        energy: float | None = None
        try:
            for smiles in molecules - cost.keys():
                start = time.process_time()
                scorer.find(smiles)
                cost[smiles] = time.process_time() - start
            energy = scorer.energy_kcal(row)
        except RingstrainError as error:
            print(row.id, error, file=sys.stderr)
        print(method, row.id, part_of(score), row.energy_kcal, energy, file=sys.stderr, flush=True)
        found.append(Answer(row, part_of(score), energy, sum(cost.get(smiles, 0.0) for smiles in molecules)))
    return found


def peers_of(method: str, answers: Sequence[Answer], total: int) -> list[Peer]:
    """Lines of the comparison for one method."""
    lines = []
    for part in ("all", "other", "polar", "sugars"):
        own = [a for a in answers if part in ("all", a.part)]
        gaps = [(a.energy_kcal - a.row.energy_kcal, a) for a in own if a.energy_kcal is not None]
        if not gaps:
            continue
        decided = [a for _, a in gaps if abs(a.row.energy_kcal) > WINNER_KCAL]
        missing = total - len(gaps) if part == "all" else 0
        lines.append(
            Peer(
                method=method,
                part=part,
                rows=len(gaps),
                mean_absolute_kcal=math.fsum(abs(g) for g, _ in gaps) / len(gaps),
                rms_kcal=math.sqrt(math.fsum(g * g for g, _ in gaps) / len(gaps)),
                winners_right=sum((a.energy_kcal or 0.0) * a.row.energy_kcal > 0 for a in decided),
                winners=len(decided),
                seconds=median(a.seconds for a in own),
                note=f"{missing} rows without an answer (too large, or not found)" if missing else "",
            )
        )
    return lines


@pytest.fixture(scope="module")
def scores() -> list[Score]:
    return rows_that_test()


def test_ringstrain_beats_mmff_on_accuracy_and_time(scores: list[Score]) -> None:
    few = [s for s in scores if len(read(s.row.smiles_a).atoms) <= 11][:30]
    own = peers_of("ringstrain", own_answers(few), len(few))[0]
    mmff = peers_of("mmff", peer_answers("mmff", few), len(few))[0]
    assert own.rows == mmff.rows >= 20
    assert own.mean_absolute_kcal < mmff.mean_absolute_kcal
    assert own.seconds < mmff.seconds / 10


def main(path: str, methods: Sequence[str]) -> None:
    """Compare over all rows and write the table."""
    rows = rows_that_test()
    lines = peers_of("ringstrain", own_answers(rows), len(rows))
    for method in methods:
        lines.extend(peers_of(method, peer_answers(method, rows), len(rows)))  # type: ignore[arg-type]
        with open(path, "w", encoding="utf-8", newline="") as stream:
            stream.write(peers_text(lines))


if __name__ == "__main__":
    main(sys.argv[1], sys.argv[2:])
