"""The accuracy table as rich renderables, tab-separated text and JSON; computes nothing but units."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING, Any

from ringstrain.analysis import SCHEMA
from ringstrain.units import KJ_PER_KCAL, Z95
from ringstrain.validation.explanations import Explanation
from ringstrain.validation.score import Score, medium_of
from ringstrain.validation.summary import ALL, GroupAccuracy, Validation
from ringstrain.views.as_json import to_line
from ringstrain.views.look import Look, Units

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

    from ringstrain.tables import Tables

#: Narrower than this there is no room for the worst row beside the group [characters].
_WIDE = 76
_ROW_COLUMNS = (
    "id", "group", "set", "status", "name_a", "name_b", "medium", "temperature_K", "quantity", "bound",
    "measured_{u}", "measured_uncertainty_{u}", "predicted_{u}", "predicted_uncertainty_{u}", "difference_{u}",
    "covered", "right_winner", "regime", "ledger_difference", "reason", "why_missed",
)  # fmt: skip
_GROUP_COLUMNS = (
    "set", "group", "rows", "mean_absolute_{u}", "rms_{u}", "worst", "worst_{u}", "winners_right", "winners", "covered",
    "bounds_right", "bounds", "not_determined", "not_in_scope", "unreadable",
)  # fmt: skip


def _factor(units: Units) -> float:
    return KJ_PER_KCAL if units == "kJ" else 1.0


def _set_of(score: Score) -> str:
    """Which set a row counts in."""
    if score.status == "left out":
        return score.row.role
    return "test" if score.is_independent else "input"


def _or_dash(value: float | None, look: Look, *, signed: bool = False) -> str:
    """An energy in the asked unit; a dash when there is none."""
    return "-" if value is None else look.energy(value, signed=signed)


def accuracy_view(validation: Validation, look: Look) -> RenderableType:
    """The accuracy table by group, with what was left out and why.

    Parameters
    ----------
    validation
        Scores and their summary.
    look
        How values are written.

    Returns
    -------
    RenderableType
        Tables and sentences for a rich console.
    """
    from rich.console import Group

    parts: list[RenderableType] = []
    for title, groups in (
        ("Published equilibria that test the prices", validation.independent),
        ("Published equilibria whose numbers feed the prices", validation.inputs),
    ):
        if groups:
            parts.extend((look.text(title, "bold"), _accuracy_table(groups, look), look.text("")))
    parts.extend(look.text(sentence) for sentence in _sentences(validation, look))
    return Group(*parts)


def _accuracy_table(groups: Sequence[GroupAccuracy], look: Look) -> Table:
    from rich.table import Table

    table = Table(box=look.box(), pad_edge=False, padding=(0, 1, 0, 0))
    table.add_column("group", overflow="fold", min_width=12)
    for name in ("rows", "mean", "rms"):
        table.add_column(name, justify="right", no_wrap=True)
    if look.width >= _WIDE:
        table.add_column("worst row", no_wrap=True)
    for name in ("winner", "95 %", "bound"):
        table.add_column(name, justify="right", no_wrap=True)
    for group in groups:
        if not group.rows and not group.bounds:
            continue
        if group.group == ALL:
            table.add_section()
        worst = f"{group.worst} {_or_dash(group.worst_kcal, look, signed=True)}" if group.worst else "-"
        table.add_row(
            look.text(group.group),
            str(group.rows),
            _or_dash(group.mean_absolute_kcal, look),
            _or_dash(group.rms_kcal, look),
            *((look.text(worst),) if look.width >= _WIDE else ()),
            f"{group.winners_right}/{group.winners}" if group.winners else "-",
            f"{group.covered}/{group.rows}" if group.rows else "-",
            f"{group.bounds_right}/{group.bounds}" if group.bounds else "-",
        )
    return table


def _sentences(validation: Validation, look: Look) -> Iterator[str]:
    """What the tables do not show."""
    yield (
        f"Energies in {look.unit}. mean: of the absolute difference, predicted less measured; winner: right ones of "
        "the rows that measured more than 0.3 kcal/mol; 95 %: rows that agree within the joint interval; "
        "bound: measured limits whose direction is right."
    )
    both = (*validation.independent, *validation.inputs)
    for name, words in (
        ("not_determined", "Not determined (a contact has no price)"),
        ("not_in_scope", "Not yet in scope"),
        ("unreadable", "Unreadable"),
    ):
        counts: dict[str, int] = {}
        for group in both:
            if group.group != ALL and getattr(group, name):
                counts[group.group] = counts.get(group.group, 0) + getattr(group, name)
        if counts:
            yield f"{words}: " + ", ".join(f"{group} {count}" for group, count in counts.items()) + "."
    if validation.left_out:
        yield "Left out: " + ", ".join(f"{role} {count}" for role, count in validation.left_out) + "."
    for spread in validation.spreads:
        yield (
            f"Regime {spread.regime}: {spread.rows} rows, rms {look.energy(spread.rms_kcal)}, of which "
            f"{look.energy(spread.excess_kcal)} is not explained by the uncertainty of prices and measurements."
        )


def rows_view(
    validation: Validation, tables: Tables, look: Look, explanations: Mapping[str, Explanation]
) -> RenderableType:
    """Every equilibrium with measured value, prediction, difference and the lines behind it.

    Parameters
    ----------
    validation
        Scores.
    tables
        Names of the solvents.
    look
        How values are written.
    explanations
        Why rows are missed, by row.

    Returns
    -------
    RenderableType
        A paragraph a row for a rich console; left-out rows and rows without a score say why.
    """
    from rich.console import Group
    from rich.padding import Padding

    parts: list[RenderableType] = []
    for score in validation.scores:
        parts.append(look.text(_headline(score, look), "bold"))
        parts.extend(Padding(look.text(line), (0, 0, 0, 4)) for line in _details(score, tables, explanations))
    return Group(*parts)


def _headline(score: Score, look: Look) -> str:
    """One line: row, set, measured, predicted, difference."""
    row, prediction = score.row, score.prediction
    limit = {"at least": "at least ", "at most": "at most "}.get(row.energy_bound, "")
    parts = [f"{row.id}  {_set_of(score)}  measured {limit}{look.energy(row.energy_kcal)}"]
    if score.status == "scored" and prediction is not None:
        reach = look.energy(Z95 * prediction.sigma_kcal)
        parts.append(f"predicted {look.energy(prediction.energy_kcal)} \N{PLUS-MINUS SIGN} {reach}")
        if score.difference_kcal is not None:
            parts.append(f"d {look.energy(score.difference_kcal, signed=True)}")
        if score.is_covered is not None:
            parts.append("agrees" if score.is_covered else "OUTSIDE 95 %")
        if score.is_within_bound is not None:
            parts.append("right side" if score.is_within_bound else "WRONG SIDE")
        if score.is_right_winner is False:
            parts.append("WRONG WINNER")
    elif prediction is not None:
        parts.append(f"{prediction.bound}, known part {look.energy(prediction.energy_kcal)}")
    else:
        parts.append(score.status)
    return "  ".join(parts)


def _details(score: Score, tables: Tables, explanations: Mapping[str, Explanation]) -> Iterator[str]:
    """What the row is about, and the lines that differ or why there is no score."""
    row = score.row
    what = row.name_a if row.name_a == row.name_b or not row.name_b else f"{row.name_a} / {row.name_b}"
    yield f"{what} ({row.quantity}, {medium_of(row, tables)}, {row.asked_temperature_K:g} K)"
    if row.orientation:
        yield row.orientation
    if score.reason:
        yield score.reason
    if score.prediction is not None:
        yield "; ".join(line.text for line in score.prediction.lines) or "no line differs"
    if row.id in explanations:
        yield explanations[row.id].text


def accuracy_plain(validation: Validation, units: Units = "kcal") -> str:
    """The accuracy table as tab-separated lines with a header."""
    lines = ["\t".join(name.format(u=units) for name in _GROUP_COLUMNS)]
    for which, groups in (("test", validation.independent), ("input", validation.inputs)):
        for g in groups:
            cells = [
                which, g.group, g.rows, _cell(g.mean_absolute_kcal, units), _cell(g.rms_kcal, units), g.worst,
                _cell(g.worst_kcal, units), g.winners_right, g.winners, g.covered, g.bounds_right, g.bounds,
                g.not_determined, g.not_in_scope, g.unreadable,
            ]  # fmt: skip
            lines.append("\t".join(str(cell) for cell in cells))
    return "\n".join(lines)


def rows_plain(
    validation: Validation, tables: Tables, explanations: Mapping[str, Explanation], units: Units = "kcal"
) -> str:
    """Every equilibrium as one tab-separated line, with a header."""
    lines = ["\t".join(name.format(u=units) for name in _ROW_COLUMNS)]
    for score in validation.scores:
        row, p = score.row, score.prediction
        cells = [
            row.id, row.group, _set_of(score), score.status, row.name_a, row.name_b, medium_of(row, tables),
            f"{row.asked_temperature_K:g}", row.quantity, row.energy_bound, _cell(row.energy_kcal, units),
            _cell(row.energy_uncertainty_kcal, units), _cell(p.energy_kcal if p else None, units),
            _cell(p.sigma_kcal if p else None, units), _cell(score.difference_kcal, units), _yes(score.is_covered),
            _yes(score.is_right_winner), p.regime if p else "",
            "; ".join(line.text for line in p.lines) if p else "", score.reason,
            explanations[row.id].text if row.id in explanations else "",
        ]  # fmt: skip
        lines.append("\t".join(cells))
    return "\n".join(lines)


def _cell(value: float | None, units: Units) -> str:
    return "" if value is None else f"{value * _factor(units):.4f}"


def _yes(answer: bool | None) -> str:
    return "" if answer is None else "yes" if answer else "no"


def validation_json(
    validation: Validation, tables: Tables, explanations: Mapping[str, Explanation], *, version: str, rows: bool
) -> str:
    """The validate document as one compact line of ASCII; energies in kcal/mol.

    Parameters
    ----------
    validation
        Scores and summary.
    tables
        Their revision and solvents.
    explanations
        Why rows are missed, by row.
    version
        Version of ringstrain.
    rows
        True to list every row.

    Returns
    -------
    str
        JSON.
    """
    document: dict[str, Any] = {
        "schema": SCHEMA,
        "kind": "validate",
        "version": version,
        "tables_revision": tables.revision,
        "groups": [group.as_dict() for group in validation.independent],
        "input_groups": [group.as_dict() for group in validation.inputs],
        "regimes": [spread.as_dict() for spread in validation.spreads],
        "left_out": dict(validation.left_out),
    }
    if rows:
        document["rows"] = [_row_document(score, tables, explanations) for score in validation.scores]
    return to_line(document)


def _row_document(score: Score, tables: Tables, explanations: Mapping[str, Explanation]) -> dict[str, Any]:
    row, p = score.row, score.prediction
    why = explanations.get(row.id)
    return {
        "id": row.id,
        "group": row.group,
        "kind": row.kind,
        "set": _set_of(score),
        "status": score.status,
        "reason": score.reason,
        "why_missed": {"cause": why.cause, "reason": why.reason} if why else None,
        "smiles_a": row.smiles_a,
        "smiles_b": row.smiles_b,
        "orientation": row.orientation,
        "medium": medium_of(row, tables),
        "temperature_K": row.asked_temperature_K,
        "quantity": row.quantity,
        "measured_kcal": row.energy_kcal,
        "measured_uncertainty_kcal": row.energy_uncertainty_kcal,
        "measured_bound": row.energy_bound,
        "source": row.source,
        "known_by": row.known_by,
        "predicted_kcal": p.energy_kcal if p else None,
        "predicted_uncertainty_kcal": p.sigma_kcal if p else None,
        "predicted_bound": p.bound if p else "",
        "statistics_kcal": p.statistics_kcal if p else None,
        "regime": p.regime if p else None,
        "difference_kcal": score.difference_kcal,
        "covered": score.is_covered,
        "right_winner": score.is_right_winner,
        "lines": [
            {
                "rule": line.rule,
                "groups": list(line.groups),
                "row": line.row,
                "count": line.count,
                "value_kcal": line.value_kcal,
            }
            for line in (p.lines if p else ())
        ],
    }
