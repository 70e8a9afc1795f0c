"""Numbers behind NMR predictions: the tables karplus.csv and shifts.csv."""

from __future__ import annotations

import csv
from dataclasses import dataclass, field
from functools import lru_cache
from pathlib import Path

from ringstrain.errors import TableError
from ringstrain.tables.reader import tables_folder

#: Parameter sets of the coupling equation by the number of substituents that are not hydrogen.
SET_BY_SUBSTITUENTS = {2: "C", 3: "D", 4: "E"}


@dataclass(frozen=True, slots=True, kw_only=True)
class SpectralValue:
    """One number of the NMR tables.

    Attributes
    ----------
    row
        Name of its row across all tables.
    value
        The number [in ``unit``].
    unit
        Its unit; ``"1"`` when there is none.
    uncertainty
        Standard uncertainty [in ``unit``]; None when not given.
    source, known_by, note
        Where it comes from and how it is known.
    """

    row: str
    value: float
    unit: str
    uncertainty: float | None
    source: str
    known_by: str
    note: str


@dataclass(frozen=True, slots=True)
class KarplusSet:
    """Parameters P1 to P7 of the generalised coupling equation (P1 to P5 [Hz], P6 [degree], P7 [-])."""

    name: str
    p1: float
    p2: float
    p3: float
    p4: float
    p5: float
    p6: float
    p7: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SpectralTables:
    """Everything karplus.csv and shifts.csv hold for use.

    Attributes
    ----------
    sets
        Parameter sets by letter.
    electronegativities
        By element symbol [-].
    model, reading
        How the equation is applied to rings, and how spectra are read.
    shifts
        Shift rows by (group, place); group is empty for those of no group.
    """

    sets: dict[str, KarplusSet]
    electronegativities: dict[str, SpectralValue]
    model: dict[str, SpectralValue]
    reading: dict[str, SpectralValue]
    shifts: dict[tuple[str, str], SpectralValue] = field(repr=False)

    def increment(self, group: str, place: str) -> SpectralValue | None:
        """The 13C increment of a group for a place such as ``gamma ax`` [ppm], or None."""
        return self.shifts.get((group, place))

    def general(self, place: str) -> SpectralValue:
        """A row of shifts.csv that belongs to no group.

        Raises
        ------
        TableError
            If there is none.
        """
        found = self.shifts.get(("", place))
        if found is None:
            raise TableError(f"no row is for {place!r}", file="shifts.csv", column="place")
        return found

    def sigma(self, value: SpectralValue) -> float:
        """Standard uncertainty of a value [its unit].

        Raises
        ------
        TableError
            If the row has none.
        """
        if value.uncertainty is None:
            raise TableError(f"row {value.row!r} needs an uncertainty", file=value.row.split("/")[0] + ".csv")
        return value.uncertainty


def load_spectra(path: str | Path | None = None) -> SpectralTables:
    """The NMR tables.

    Parameters
    ----------
    path
        Folder to read; the one that ships with ringstrain when None.

    Returns
    -------
    SpectralTables
        Read once per folder and shared.

    Raises
    ------
    TableError
        If a file is missing or a row is faulty.

    Examples
    --------
    >>> load_spectra().sets["E"].p6
    15.5
    """
    return _load(Path(path) if path is not None else tables_folder())


@lru_cache(maxsize=4)
def _load(folder: Path) -> SpectralTables:
    letters: dict[str, dict[str, float]] = {}
    named: dict[str, dict[str, SpectralValue]] = {"electronegativity": {}, "model": {}, "reading": {}}
    for row, value in _values(folder, "karplus"):
        if row["use"] == "rival":
            continue
        if row["set"] in named:
            named[row["set"]][row["parameter"]] = value
        elif len(row["set"]) == 1:
            letters.setdefault(row["set"], {})[row["parameter"].lower()] = value.value
    shifts = {(row["group"], row["place"]): value for row, value in _values(folder, "shifts") if row["use"] == "used"}
    return SpectralTables(
        sets={letter: _parameter_set(letter, numbers) for letter, numbers in letters.items()},
        electronegativities=named["electronegativity"],
        model=named["model"],
        reading=named["reading"],
        shifts=shifts,
    )


def _parameter_set(letter: str, numbers: dict[str, float]) -> KarplusSet:
    try:
        return KarplusSet(letter, *(numbers[f"p{i}"] for i in range(1, 8)))
    except KeyError as missing:
        raise TableError(f"set {letter} lacks {str(missing).upper()}", file="karplus.csv", column="parameter") from None


def _values(folder: Path, name: str) -> list[tuple[dict[str, str], SpectralValue]]:
    """Rows of a file with their numbers."""
    file = f"{name}.csv"
    found = []
    try:
        with open(folder / file, encoding="utf-8", newline="") as stream:
            reader = csv.DictReader(stream, restkey="", strict=True)
            for row in reader:
                found.append((row, _value(file, reader.line_num, row)))
    except FileNotFoundError:
        raise TableError("the file is missing", file=file) from None
    except (csv.Error, UnicodeDecodeError) as error:
        raise TableError(str(error), file=file) from None
    return found


def _value(file: str, line: int, row: dict[str, str]) -> SpectralValue:
    if "" in row or None in row.values():
        raise TableError("the row has more or fewer cells than the header", file=file, line=line)
    return SpectralValue(
        row=f"{file.removesuffix('.csv')}/{row['id']}",
        value=_number(file, line, row, "value"),
        unit=row["unit"],
        uncertainty=_number(file, line, row, "uncertainty") if row["uncertainty"] else None,
        source=row["source"],
        known_by=row["known_by"],
        note=row["note"],
    )


def _number(file: str, line: int, row: dict[str, str], column: str) -> float:
    try:
        return float(row[column])
    except ValueError:
        raise TableError(f"{row[column]!r} is no number", file=file, line=line, column=column) from None
