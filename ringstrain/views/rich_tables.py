"""Tables for a terminal: states, the ledger that explains K, and the sources behind it."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from rich.console import Group
from rich.padding import Padding
from rich.table import Table
from rich.text import Text

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.equilibrium import Equilibrium
from ringstrain.ledger import Line
from ringstrain.provenance import Source
from ringstrain.units import Z95
from ringstrain.views.forms import same_form, shape_words, shapes_of_kind, standings
from ringstrain.views.grid import Row, lay_out
from ringstrain.views.look import Look, constant, kelvin, percent, percent_range
from ringstrain.views.sentence import headlines
from ringstrain.views.words import atom_numbers, listed

if TYPE_CHECKING:
    from rich.console import RenderableType

#: States shown in the states table; the ledger shows as many as the width takes.
MAX_STATES = 4
#: More neighbouring ring atoms than this are only counted.
MAX_RING_ATOMS = 4
#: States of a smaller share are left out of the table unless K is about them [-].
WORTH_SHOWING = 1e-3
_COUNT_WORDS = (
    ("gauche", "gauche"),
    ("syn_axial_XH", "X//H"),
    ("syn_axial_XY", "X//Y"),
    ("peri", "peri"),
    ("geminal", "geminal"),
    ("eclipsed", "eclipsed"),
    ("transannular", "transannular"),
    ("syn_axial_X_lp", "X//lone pair"),
)


class Footnotes:
    """Numbers for sources in the order in which they are cited."""

    def __init__(self, sources: Mapping[str, Source]) -> None:
        self._sources = sources
        self._numbers: dict[str, int] = {}

    def mark(self, source: str) -> str:
        """The number of a source key in brackets; empty when there is none."""
        if not source:
            return ""
        return f"[{self._numbers.setdefault(source, len(self._numbers) + 1)}]"

    def lines(self, look: Look) -> Iterator[RenderableType]:
        """The full citations."""
        if not self._numbers:
            return
        table = Table.grid(padding=(0, 1))
        table.add_column(no_wrap=True, justify="right")
        table.add_column(overflow="fold")
        for key, number in self._numbers.items():
            known = self._sources.get(key)
            text = f"{key}: {known.citation}" if known is not None and known.citation else key
            table.add_row(look.text(f"[{number}]", "dim"), look.text(text, "dim"))
        yield look.text("Sources")
        yield table


def chairs_view(analysis: Analysis, sources: Mapping[str, Source], look: Look) -> Iterator[RenderableType]:
    """Everything `ringstrain chairs` shows for one structure.

    Parameters
    ----------
    analysis
        The answer.
    sources
        Publications by key.
    look
        Width, units and signs.
    """
    yield look.text(title_text(analysis), "dim")
    notes = Footnotes(sources)
    for number, (result, sentence) in enumerate(zip(analysis.ring_systems, headlines(analysis, look), strict=True)):
        if number:
            yield Text()
        yield look.text(sentence, "bold")
        yield Text()
        yield states_table(result, look)
        yield from _more(result, look)
        yield Text()
        yield from _verdict(result, analysis, look)
        yield from _ledger(result, notes, look)
    yield from closing(analysis, notes, look)


def title_text(analysis: Analysis, *, conditions: bool = True) -> str:
    """What was asked: name, input, temperature and medium."""
    name = f"{analysis.structure.name}: " if analysis.structure.name else ""
    where = f"   {kelvin(analysis.temperature_K)}, {analysis.medium}" if conditions else ""
    return f"{name}{analysis.input}{where}"


def closing(analysis: Analysis, notes: Footnotes, look: Look) -> Iterator[RenderableType]:
    """Sources and notes."""
    cited = list(notes.lines(look))
    if cited:
        yield Text()
        yield from cited
    if analysis.notes:
        yield Text()
        for note in analysis.notes:
            yield look.text(f"Note: {note}")


# ---- states --------------------------------------------------------------------------------------------------


def states_table(result: SystemResult, look: Look) -> Table:
    """One row for each state worth showing; stacked when the terminal is narrow."""
    shown = shown_states(result)
    return _stacked(result, shown, look) if look.width < 76 else _wide(result, shown, look)


def shown_states(result: SystemResult) -> tuple[State, ...]:
    """The favoured form and the other one, every chair and whatever is populated; at most four, lowest first."""
    e = result.equilibrium
    needed = [s for s in result.states if e is not None and s.id in (e.favoured, e.other)] or [result.states[0]]
    worth = [
        s
        for s in result.states
        if s not in needed and (s.population is None or s.population >= WORTH_SHOWING or set(s.shapes) == {"chair"})
    ]
    chosen = (*needed, *worth[: MAX_STATES - len(needed)])
    return tuple(s for s in result.states if s in chosen)


def _wide(result: SystemResult, shown: Sequence[State], look: Look) -> Table:
    table = new_table(look)
    several = len(result.rings) > 1
    places = [place for place in ("axial", "equatorial", "isoclinal") if _is_used(result, shown, place)]
    table.add_column("state", no_wrap=True)
    for place in places:
        table.add_column(place, overflow="fold", min_width=len(place))
    table.add_column(look.text(f"energy, {look.unit}"), justify="right", min_width=8, max_width=14)
    table.add_column("population", min_width=11, max_width=21, no_wrap=look.width >= 90)
    table.add_column("contacts", overflow="fold", min_width=8)
    for state in shown:
        table.add_row(
            look.text(state.id if several else f"{state.id} {state.shapes[0]}"),
            *(look.text(groups_at(result, state, place)) for place in places),
            look.text(_state_energy(state, look)),
            look.text(_population(state)),
            look.text(_contacts(state)),
        )
    return table


def new_table(look: Look, *, header: bool = True) -> Table:
    """A table with rules under its head and its sections only."""
    return Table(
        box=look.box(), show_edge=False, show_header=header, pad_edge=False, padding=(0, 1, 0, 0), header_style=""
    )


def _is_used(result: SystemResult, shown: Sequence[State], place: str) -> bool:
    """Isoclinal gets a column only where something stands so."""
    return place != "isoclinal" or any(groups_at(result, state, place) != "none" for state in shown)


def _stacked(result: SystemResult, shown: Sequence[State], look: Look) -> Table:
    table = new_table(look, header=False)
    table.add_column(no_wrap=True)
    table.add_column(overflow="fold")
    for number, state in enumerate(shown):
        if number:
            table.add_section()
        share = _population(state).replace("\n", ", ")
        rows = [(state.id, f"{shape_words(state)}; population {share}")]
        rows.extend(
            (place, groups_at(result, state, place))
            for place in ("axial", "equatorial", "isoclinal")
            if _is_used(result, (state,), place)
        )
        rows.append(("energy", f"{_state_energy(state, look)} {look.unit}"))
        rows.append(("contacts", _contacts(state)))
        for name, value in rows:
            table.add_row(look.text(name, "bold" if name == state.id else ""), look.text(value))
    return table


def groups_at(result: SystemResult, state: State, place: str) -> str:
    """Keys of the groups that stand axial or equatorial, with their atoms; ring atoms of fused rings by number."""
    found = standings(result, state)
    parts = [f"{s.key} ({s.atom + 1})" for s in found if place in s.position]
    own = {s.atom for s in found}
    ring = sorted({atom for atom, _, _, position in state.sites if position == place and atom not in own})
    if len(ring) > MAX_RING_ATOMS:
        parts.append(f"{len(ring)} ring atoms")
    elif ring:
        parts.append(f"ring {atom_numbers(ring)}")
    if place == "axial":
        parts.extend(f"N-H ({atom + 1})" for atom in state.axial_H)
    return ", ".join(parts) if parts else "none"


def _state_energy(state: State, look: Look) -> str:
    """Ledger total with its 95 % half-width."""
    spread = Z95 * state.uncertainty_kcal
    text = look.energy(state.energy_kcal)
    if spread > 5e-3:
        text += f" \N{PLUS-MINUS SIGN} {look.energy(spread)}"
    return f"at least {text}" if state.lower_bound else text


def _population(state: State) -> str:
    """Share with its limits, and of which state it is a copy."""
    if state.population is None:
        text = "not determined"
    else:
        text = percent(state.population)
        low, high = state.population_low, state.population_high
        if low is not None and high is not None and 1e-3 <= state.population <= 0.999 and high - low > 5e-4:
            text += f" ({percent_range(state.population, low, high)})"
    return text + (f"\nlike {state.equivalent_to}" if state.equivalent_to else "")


def _contacts(state: State) -> str:
    """Counts that are not zero."""
    counts = dict(state.counts)
    return ", ".join(f"{counts[name]} {word}" for name, word in _COUNT_WORDS if counts.get(name)) or "none"


def _more(result: SystemResult, look: Look) -> Iterator[RenderableType]:
    """What the table leaves out."""
    shown = shown_states(result)
    hidden = [s for s in result.states if s not in shown]
    if not hidden:
        return
    kinds = listed([shapes_of_kind(n, kind) for kind, n in _tally(hidden).items()])
    text = f"Not shown: {kinds}, from {look.energy(hidden[0].energy_kcal)} {look.unit}"
    shares = [s.population for s in hidden if s.population is not None]
    if shares:
        text += f", together {percent(math.fsum(shares))}"
    yield look.text(f"{text}; --format plain lists all.", "dim")


def _tally(states: Sequence[State]) -> dict[str, int]:
    """Number of states of each shape; of several rings the form counts."""
    kinds = [s.shapes[0] if len(s.shapes) == 1 else "form" for s in states]
    return {kind: kinds.count(kind) for kind in dict.fromkeys(kinds)}


def _verdict(result: SystemResult, analysis: Analysis, look: Look) -> Iterator[RenderableType]:
    """The equilibrium in figures."""
    e = result.equilibrium
    shapes = {s.id: shape_words(s) for s in shown_states(result)}
    if len(result.rings) > 1 and len(set(shapes.values())) > 1:
        yield look.text(f"Shapes: {'; '.join(f'{id} {words}' for id, words in shapes.items())}")
    if e is None:
        yield look.text("One ring form only: no flip, no K.")
    else:
        yield look.text(equilibrium_line(result, e, analysis.temperature_K, look))
    yield look.text("Energies: ledger totals, \N{PLUS-MINUS SIGN} 95 %; atoms counted from 1.", "dim")


def equilibrium_line(result: SystemResult, e: Equilibrium, temperature_K: float, look: Look) -> str:
    """K and the free energy difference with 95 % limits, and how far the model is stretched."""
    ratio = f"[{_members(result, e.favoured)}]/[{_members(result, e.other)}]"
    if e.dG_kcal is None or e.K is None:
        known = look.energy(e.known_part_kcal)
        return f"K = {ratio}: {e.bound}; the known lines differ by {known} {look.unit}; regime {e.regime}"
    limits, spread = "", ""
    if e.K_low is not None and e.K_high is not None and e.uncertainty_kcal:
        limits = f" ({constant(e.K_low)} to {constant(e.K_high)})"
        spread = f" \N{PLUS-MINUS SIGN} {look.energy(Z95 * e.uncertainty_kcal)}"
    bound = f"{e.bound} " if e.bound else ""
    return (
        f"K = {ratio} = {bound}{constant(e.K)}{limits} at {kelvin(temperature_K)}; \N{GREEK CAPITAL LETTER DELTA}G "
        f"{bound}{look.energy(e.dG_kcal)}{spread} {look.unit}; regime {e.regime}"
    )


def _members(result: SystemResult, id: str) -> str:
    """Ids of the states of one ring form; a copy that K compares with its original stands alone."""
    e = result.equilibrium
    members = [s.id for s in same_form(result, result.state(id))]
    if e is None or {e.favoured, e.other} <= set(members):
        return id
    return "+".join(members)


# ---- ledger --------------------------------------------------------------------------------------------------


def _ledger(result: SystemResult, notes: Footnotes, look: Look) -> Iterator[RenderableType]:
    """The ledger of the lowest states side by side, with the difference that makes K."""
    columns, compared = _columns(result, look)
    rows = lay_out(columns, compared)
    if not rows:
        yield look.text("Ledger: nothing to pay in any state." if len(result.states) > 1 else "Ledger: nothing to pay.")
        return
    yield Text()
    yield ledger_table(columns, compared, rows, notes, look)
    yield from _counting(result, columns, compared, look)


def _counting(
    result: SystemResult, columns: Sequence[State], compared: tuple[int, int] | None, look: Look
) -> Iterator[RenderableType]:
    """What lies between the difference of two ledgers and the free energy: more than one state on a side."""
    e = result.equilibrium
    if compared is None or e is None or e.dG_kcal is None:
        return
    net = columns[compared[1]].energy_kcal - columns[compared[0]].energy_kcal
    if abs(e.dG_kcal - net) < 5e-3:
        return
    extra, total = look.energy(e.dG_kcal - net, signed=True), look.energy(e.dG_kcal)
    yield look.text(
        f"Counting every state of {_members(result, e.favoured)} against {_members(result, e.other)} adds {extra}: "
        f"\N{GREEK CAPITAL LETTER DELTA}G {total} {look.unit}."
    )


def _columns(result: SystemResult, look: Look) -> tuple[tuple[State, ...], tuple[int, int] | None]:
    """Favoured and other, and in order of energy the populated ones the width has room for."""
    e = result.equilibrium
    if e is None:
        return result.states[:1], None
    room = max(0, min(MAX_STATES - 2, (look.width - 80) // 10))
    pair = [result.state(e.favoured), result.state(e.other)]
    rest = [s for s in result.states if s not in pair and s.equivalent_to is None and (s.population or 0) >= 0.01]
    chosen = sorted((*pair, *rest[:room]), key=result.states.index)
    return tuple(chosen), (chosen.index(pair[0]), chosen.index(pair[1]))


def ledger_table(
    columns: Sequence[State], compared: tuple[int, int] | None, rows: Sequence[Row], notes: Footnotes, look: Look
) -> Table:
    """One row for each kind of line, one column for each state (count times price), and the difference."""
    times = "\N{MULTIPLICATION SIGN}"
    narrow = look.width < 76
    table = new_table(look)
    table.add_column(look.text(f"ledger, {look.unit}"), overflow="fold")
    for state in columns:
        table.add_column(look.text(state.id), justify="right", no_wrap=True)
    if compared:
        head = f"{columns[compared[1]].id} \N{MINUS SIGN} {columns[compared[0]].id}"
        table.add_column(look.text(head), justify="right", no_wrap=True)
    if not narrow:
        table.add_column(look.text("\N{PLUS-MINUS SIGN}"), justify="right", no_wrap=True)
    table.add_column("how known", overflow="fold", min_width=8, max_width=12 if look.width < 90 else 24)
    for row in rows:
        cells: list[RenderableType] = [_label(row, look)]
        for count in row.counts:
            price = look.energy(row.line.value_kcal)
            cells.append(look.text(f"{count:.3g} {times} {price}" if count else "\N{EN DASH}"))
        if compared:
            cells.append(look.text(look.energy(row.difference_kcal, signed=True)))
        if not narrow:
            cells.append(look.text("" if row.line.value_kcal is None else look.energy(row.spread_kcal)))
        cells.append(look.text(known_words(row.line, notes)))
        table.add_row(*cells)
    table.add_section()
    totals = [look.text("total", "bold")]
    totals.extend(look.text(look.energy(state.energy_kcal), "bold") for state in columns)
    if compared:
        difference = columns[compared[1]].energy_kcal - columns[compared[0]].energy_kcal
        totals.append(look.text(look.energy(difference, signed=True), "bold"))
    if not narrow:
        totals.append(Text())
    totals.append(look.text("known part" if any(state.lower_bound for state in columns) else ""))
    table.add_row(*totals)
    return table


def _label(row: Row, look: Look) -> RenderableType:
    """Rule and groups, with remarks below and set in."""
    title = look.text(f"{row.line.rule} {'/'.join(row.line.groups)}")
    if not row.remarks:
        return title
    return Group(title, *(Padding(look.text(remark, "dim"), (0, 0, 0, 2)) for remark in row.remarks))


def known_words(line: Line, notes: Footnotes) -> str:
    """How a price is known, and the number of its source."""
    if line.value_kcal is None:
        return "no price"
    words: str = "estimated" if line.estimated and line.known_by != "yours" else line.known_by
    if line.bound:
        words = f"{line.bound}, {words}"
    return f"{words} {notes.mark(line.source)}".strip()
