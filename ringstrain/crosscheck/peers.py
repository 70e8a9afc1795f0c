"""How far each method is off on the published equilibria: the rows of peers.csv."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable
from dataclasses import dataclass, fields
from pathlib import Path

from ringstrain.errors import TableError
from ringstrain.tables.reader import tables_folder
from ringstrain.validation.score import Score

FILE = "peers.csv"


@dataclass(frozen=True, slots=True, kw_only=True)
class Peer:
    """Accuracy of one method over one part of the published equilibria.

    Attributes
    ----------
    method, part
        ``"ringstrain"``, ``"mmff"`` or ``"xtb"``; ``"all"`` rows, ``"sugars"`` in water, other ``"polar"`` ones, or
        the ``"other"`` ones.
    rows
        Rows with a measured value [-].
    mean_absolute_kcal, rms_kcal
        Of predicted less measured [kcal/mol].
    winners_right, winners
        Rows that measured more than 0.3 kcal/mol, and how many have the right winner [-].
    seconds
        Processor time of one row, the median [s].
    note
        What was run.
    """

    method: str
    part: str
    rows: int
    mean_absolute_kcal: float
    rms_kcal: float
    winners_right: int
    winners: int
    seconds: float
    note: str


def part_of(score: Score) -> str:
    """Which part a row belongs to: ``"sugars"``, ``"polar"`` or ``"other"``."""
    if score.row.group == "sugars in water":
        return "sugars"
    return "polar" if score.prediction is not None and score.prediction.regime == "polar" else "other"


def peers_text(peers: Iterable[Peer]) -> str:
    """The comparison as the text of peers.csv."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow((*(field.name for field in fields(Peer)), "known_by"))
    for peer in peers:
        figures = (peer.mean_absolute_kcal, peer.rms_kcal)
        writer.writerow(
            (
                peer.method, peer.part, peer.rows, *(f"{figure:.3f}" for figure in figures), peer.winners_right,
                peer.winners, f"{peer.seconds:.2g}", peer.note, "computed",
            )
        )  # fmt: skip
    return stream.getvalue()


def read_peers(folder: str | Path | None = None) -> tuple[Peer, ...]:
    """Every line of the comparison, in file order; none when it was never made.

    Parameters
    ----------
    folder
        Folder of tables; that of the package when None.

    Raises
    ------
    TableError
        If a cell is faulty.
    """
    path = (Path(folder) if folder is not None else tables_folder()) / FILE
    if not path.is_file():
        return ()
    found = []
    with open(path, encoding="utf-8", newline="") as stream:
        for line, cells in enumerate(csv.DictReader(stream), start=2):
            try:
                found.append(
                    Peer(
                        method=cells["method"],
                        part=cells["part"],
                        rows=int(cells["rows"]),
                        mean_absolute_kcal=float(cells["mean_absolute_kcal"]),
                        rms_kcal=float(cells["rms_kcal"]),
                        winners_right=int(cells["winners_right"]),
                        winners=int(cells["winners"]),
                        seconds=float(cells["seconds"]),
                        note=cells["note"],
                    )
                )
            except (KeyError, TypeError, ValueError):
                raise TableError("a cell is no number", file=FILE, line=line) from None
    return tuple(found)
