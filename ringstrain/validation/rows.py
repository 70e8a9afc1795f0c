"""Published equilibria: the rows of equilibria.csv."""

from __future__ import annotations

import csv
import math
from dataclasses import dataclass
from pathlib import Path
from typing import Literal, get_args

from ringstrain.errors import TableError
from ringstrain.tables.reader import tables_folder
from ringstrain.units import R_KCAL, ROOM_TEMPERATURE_K, to_kcal

FILE = "equilibria.csv"
Kind = Literal["chair", "diastereomer", "anomer", "pair-term", "other"]
Role = Literal["score", "input", "suspect", "duplicate", "not scored"]
Quantity = Literal["dG", "dH", "dE", "ratio"]


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuredRow:
    """One published equilibrium between A and B, as printed.

    Attributes
    ----------
    id, line
        Name, and line of the file (header being 1).
    group
        Row of the accuracy table it counts in.
    kind
        What A and B are: chairs of one compound, two compounds, or something the model does not predict.
    name_a, name_b, smiles_a, smiles_b
        Names and structures.
    orientation
        What is axial in A and in B; empty for two compounds.
    quantity
        ``dG``, ``dH``, ``dE`` of B minus A, or the ``ratio`` B to A.
    value, uncertainty
        As printed [in ``unit``]; None when not given.
    unit
        Unit of both.
    temperature_K
        Temperature [K]; None when not stated.
    medium, solvent
        Medium class and the solvent as stated.
    source, known_by
        Where the value stands and how it is known.
    bound
        ``"at least"`` or ``"at most"`` of the printed value, or empty.
    role, role_note
        Whether the row tests the prices, feeds them, or is left out and why.
    note
        Remark.
    """

    id: str
    line: int
    group: str
    kind: Kind
    name_a: str
    name_b: str
    smiles_a: str
    smiles_b: str
    orientation: str
    quantity: Quantity
    value: float
    uncertainty: float | None
    unit: str
    temperature_K: float | None
    medium: str
    solvent: str
    source: str
    known_by: str
    bound: str
    role: Role
    role_note: str
    note: str

    @property
    def asked_temperature_K(self) -> float:
        """The stated temperature, 298.15 when none is stated [K]."""
        return self.temperature_K if self.temperature_K is not None else ROOM_TEMPERATURE_K

    @property
    def with_statistics(self) -> bool:
        """True for free energies and ratios, which count states; False for enthalpies and energies."""
        return self.quantity in ("dG", "ratio")

    @property
    def energy_kcal(self) -> float:
        """B minus A [kcal/mol]; a ratio B to A becomes -RT ln ratio."""
        if self.quantity == "ratio":
            return -R_KCAL * self.asked_temperature_K * math.log(self.value)
        return to_kcal(self.value, self.unit)

    @property
    def energy_uncertainty_kcal(self) -> float | None:
        """Uncertainty of :attr:`energy_kcal`, taken as one standard uncertainty [kcal/mol]; None when not given."""
        if self.uncertainty is None:
            return None
        if self.quantity == "ratio":
            return R_KCAL * self.asked_temperature_K * self.uncertainty / self.value
        return to_kcal(self.uncertainty, self.unit)

    @property
    def energy_bound(self) -> str:
        """Side of :attr:`energy_kcal` the true energy lies on: a ratio at most x is an energy at least -RT ln x."""
        if self.quantity != "ratio" or not self.bound:
            return self.bound
        return "at least" if self.bound == "at most" else "at most"


def read_equilibria(folder: str | Path | None = None) -> tuple[MeasuredRow, ...]:
    """Every published equilibrium, in file order.

    Parameters
    ----------
    folder
        Folder of tables; that of the package when None.

    Returns
    -------
    tuple of MeasuredRow
        All rows, those that are not scored included.

    Raises
    ------
    TableError
        If the file is missing or a cell is faulty.
    """
    path = (Path(folder) if folder is not None else tables_folder()) / FILE
    rows: list[MeasuredRow] = []
    try:
        with open(path, encoding="utf-8", newline="") as stream:
            reader = csv.DictReader(stream, restkey="", strict=True)
            for cells in reader:
                if "" in cells or None in cells.values():
                    raise TableError("the row has more or fewer cells than the header", file=FILE, line=reader.line_num)
                rows.append(_row(cells, reader.line_num))
    except FileNotFoundError:
        raise TableError("the file is missing", file=FILE) from None
    except (csv.Error, UnicodeDecodeError) as error:
        raise TableError(str(error), file=FILE) from None
    return tuple(rows)


def _row(cells: dict[str, str], line: int) -> MeasuredRow:
    value = _number(cells, "value", line)
    if value is None:
        raise TableError("the cell is empty", file=FILE, line=line, column="value")
    if cells["quantity"] == "ratio" and value <= 0:
        raise TableError("a ratio is above zero", file=FILE, line=line, column="value")
    return MeasuredRow(
        id=cells["id"],
        line=line,
        group=cells["group"],
        kind=_choice(cells, "kind", get_args(Kind), line),  # type: ignore[arg-type]
        name_a=cells["name_a"],
        name_b=cells["name_b"],
        smiles_a=cells["smiles_a"],
        smiles_b=cells["smiles_b"],
        orientation=cells["orientation"],
        quantity=_choice(cells, "quantity", get_args(Quantity), line),  # type: ignore[arg-type]
        value=value,
        uncertainty=_number(cells, "uncertainty", line),
        unit=cells["unit"],
        temperature_K=_number(cells, "temperature_K", line),
        medium=cells["medium"],
        solvent=cells["solvent"],
        source=cells["source"],
        known_by=cells["known_by"],
        bound=_choice(cells, "bound", ("", "at least", "at most"), line),
        role=_choice(cells, "role", get_args(Role), line),  # type: ignore[arg-type]
        role_note=cells["role_note"],
        note=cells["note"],
    )


def _number(cells: dict[str, str], column: str, line: int) -> float | None:
    cell = cells.get(column, "")
    if not cell:
        return None
    try:
        return float(cell)
    except ValueError:
        raise TableError(f"{cell!r} is no number", file=FILE, line=line, column=column) from None


def _choice(cells: dict[str, str], column: str, allowed: tuple[str, ...], line: int) -> str:
    cell = cells.get(column, "")
    if cell not in allowed:
        words = ", ".join(filter(None, allowed))
        raise TableError(f"{cell!r} is none of {words}", file=FILE, line=line, column=column)
    return cell
