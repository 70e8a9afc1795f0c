"""What a few structures look like on a terminal of 100 columns.

The files under tests/golden/ change only in a commit that says why.  To write them again::

    python tests/test_views_golden.py
"""

from __future__ import annotations

import io
import os
from pathlib import Path

import pytest

FOLDER = Path(__file__).parent / "golden"
CASES: dict[str, list[str]] = {
    "methylcyclohexane": ["chairs", "CC1CCCCC1"],
    "menthol": ["chairs", "C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1"],
    "menthol-ascii-60": ["chairs", "C[C@@H]1CC[C@@H](C(C)C)[C@H](O)C1", "--ascii"],
    "cis-1,4-dimethylcyclohexane": ["chairs", "1b-Me 4b-Me"],
    "trans-1,2-dichlorocyclohexane-media": ["chairs", "Cl[C@@H]1CCCC[C@H]1Cl", "--medium", "all"],
    "methylcyclohexane-temperatures": ["chairs", "CC1CCCCC1", "-T", "200:500:50", "--units", "kJ"],
    "cis-decalin": ["chairs", "C1CC[C@H]2CCCC[C@H]2C1"],
    "trans-9-methyldecalin": ["chairs", "C[C@]12CCCC[C@@H]1CCCC2"],
    "cholestanol": [
        "chairs",
        "C[C@H](CCCC(C)C)[C@H]1CC[C@@H]2[C@@]1(CC[C@H]3[C@H]2CC[C@@H]4[C@@]3(CC[C@@H](C4)O)C)C",
    ],
    "3-methylspiroundecane": ["chairs", "CC1CCC2(CC1)CCCCC2"],
    "tert-butyl-and-methyl": ["chairs", "1b-tBu 4b-Me"],
    "unpriced-pair": ["chairs", "1b-OH 2a-NO2 4a-CN"],
    "tables-isopropyl": ["tables", "iPr"],
}


def render(name: str) -> str:
    """Output of a case, blanks at line ends taken off."""
    from contextlib import redirect_stdout

    from ringstrain.cli.border import run

    os.environ["COLUMNS"] = "60" if name.endswith("-60") else "100"
    stream = io.TextIOWrapper(io.BytesIO(), encoding="utf-8", newline="\n")
    with redirect_stdout(stream):
        assert run([*CASES[name], "--format", "table"]) == 0
    stream.flush()
    stream.seek(0)
    return "".join(line.rstrip() + "\n" for line in stream.read().splitlines())


@pytest.mark.parametrize("name", CASES)
def test_the_view_is_as_recorded(name: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", "100")
    with open(FOLDER / f"{name}.txt", encoding="utf-8", newline="") as stream:
        assert render(name) == stream.read()


def test_no_recorded_view_is_left_over() -> None:
    assert {path.stem for path in FOLDER.glob("*.txt")} == set(CASES)


def _write_all() -> None:
    FOLDER.mkdir(exist_ok=True)
    for path in FOLDER.glob("*.txt"):
        path.unlink()
    for name in CASES:
        with open(FOLDER / f"{name}.txt", "w", encoding="utf-8", newline="\n") as stream:
            stream.write(render(name))


if __name__ == "__main__":
    _write_all()
