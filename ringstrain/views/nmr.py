"""NMR predictions as a chemist reads them: multiplets, couplings per form, shifts, freezing out."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from ringstrain.consequences.couplings import EXCHANGES
from ringstrain.consequences.freezing import FreezingOut
from ringstrain.consequences.nmr import EQUATION_SOURCE, Signal, Spectrum
from ringstrain.consequences.shifts import CarbonShift
from ringstrain.consequences.spectra_inverse import PopulationEstimate
from ringstrain.provenance import Source
from ringstrain.results import State, SystemResult
from ringstrain.units import Z95
from ringstrain.views.forms import form_name
from ringstrain.views.look import Look, constant, kelvin, percent
from ringstrain.views.rich_tables import Footnotes, new_table, title_text
from ringstrain.views.words import atom_numbers, listed

if TYPE_CHECKING:
    from rich.console import RenderableType
    from rich.table import Table

#: Forms shown side by side at most.
MAX_FORMS = 3
_PM = "\N{PLUS-MINUS SIGN}"


def hertz(value: float | None) -> str:
    """A coupling with one decimal; a question mark when unknown."""
    return "?" if value is None else f"{value:.1f}"


def signed(value: float, digits: int = 1) -> str:
    """A shift difference with its sign, a true minus."""
    text = f"{value:+.{digits}f}"
    return (text.lstrip("+-") if float(text) == 0 else text).replace("-", "\N{MINUS SIGN}")


def alike_sets(spectrum: Spectrum, number: int) -> tuple[tuple[Signal, ...], ...]:
    """Signals of a ring system, those alike together, in order."""
    sets: dict[int, list[Signal]] = {}
    for signal in spectrum.signals:
        if signal.ring_system == number:
            sets.setdefault(signal.hydrogen.alike, []).append(signal)
    return tuple(tuple(members) for members in sets.values())


def labels_of(members: Sequence[Signal]) -> str:
    """Labels of alike hydrogens."""
    return " = ".join(s.label for s in members)


def splitting_text(signal: Signal) -> str:
    """Couplings sorted as in a report, partners beside them, equal ones counted."""
    parts = []
    for coupling in signal.couplings:
        if coupling.observable:
            parts.append(f"{hertz(coupling.average_Hz)} ({coupling.label})")
    return ", ".join(parts) if parts else "-"


def nmr_view(spectrum: Spectrum, sources: Mapping[str, Source], look: Look) -> Iterator[RenderableType]:
    """Everything `ringstrain nmr` shows for one structure.

    Parameters
    ----------
    spectrum
        The prediction.
    sources
        Publications by key.
    look
        Width, units, signs.
    """
    analysis = spectrum.analysis
    yield look.text(title_text(analysis), "dim")
    notes = Footnotes(sources)
    for number, result in enumerate(analysis.ring_systems):
        if len(analysis.ring_systems) > 1:
            yield look.text("")
            yield look.text(f"Ring system {number + 1} (atoms {atom_numbers(result.system.atoms)})", "bold")
        yield look.text(_forms_line(spectrum, number), "bold")
        yield look.text("")
        yield multiplet_table(spectrum, number, look, notes)
        yield look.text("")
        yield from _unpredicted(spectrum, number, look)
        yield from _per_form(spectrum, number, look)
        yield from _gaps(spectrum, number, look, notes)
        yield from _carbons(spectrum, number, look, notes)
        yield look.text("")
        for line in freezing_lines(spectrum.freezing[number], result, look, notes):
            yield look.text(line)
    yield look.text("")
    yield from notes.lines(look)
    for note in (*analysis.notes, *spectrum.notes):
        yield look.text(f"Note: {note}")


def _forms_line(spectrum: Spectrum, number: int) -> str:
    """Which forms the averages run over."""
    result, shares = spectrum.analysis.ring_systems[number], spectrum.shares[number]
    shown = _shown(spectrum, number)
    if shares is None:
        return "Populations not determined: couplings per form only."
    if len(shown) == 1:
        return f"{form_name(result.states[0])} only."
    by_id = dict(zip((s.id for s in result.states), shares, strict=True))
    parts = [f"{form_name(s)} {percent(by_id[s.id])}" for s in shown]
    rest = 1.0 - sum(by_id[s.id] for s in shown)
    tail = f", others {percent(rest)}" if rest > 1e-3 else ""
    return f"Averages over {listed(parts)}{tail}."


def _shown(spectrum: Spectrum, number: int) -> tuple[State, ...]:
    """States with a column of their own: the first, and others that matter or are its flip."""
    result, shares = spectrum.analysis.ring_systems[number], spectrum.shares[number]
    first, *rest = result.states
    e = result.equilibrium
    sizes = shares or (0.0,) * len(result.states)
    worth = [s for s, p in zip(rest, sizes[1:], strict=True) if p >= 1e-2 or (e is not None and s.id == e.other)]
    return (first, *worth[: MAX_FORMS - 1])


def multiplet_table(spectrum: Spectrum, number: int, look: Look, notes: Footnotes) -> Table:
    """One row for each set of alike hydrogens."""
    table = new_table(look)
    table.add_column("hydrogen", overflow="fold", min_width=8, max_width=24)
    table.add_column("signal", no_wrap=True)
    table.add_column(f"3J / Hz (partner) {notes.mark(EQUATION_SOURCE)}", overflow="fold")
    table.add_column("W / Hz", justify="right", no_wrap=True)
    for members in alike_sets(spectrum, number):
        signal = members[0]
        multiplet = signal.multiplet
        more = "*" if any(u.reason != EXCHANGES for u in signal.unpredicted) else ""
        table.add_row(
            look.text(labels_of(members)),
            look.text((multiplet.word + more) if multiplet else "?"),
            look.text(splitting_text(signal)),
            look.text(f"{multiplet.width_Hz:.0f}" if multiplet and multiplet.splittings_Hz else "-"),
        )
    return table


def _unpredicted(spectrum: Spectrum, number: int, look: Look) -> Iterator[RenderableType]:
    """What splits a signal further."""
    atoms = sorted(
        {u.atom for s in spectrum.signals if s.ring_system == number for u in s.unpredicted if u.reason != EXCHANGES}
    )
    if atoms:
        yield look.text(f"* further split by hydrogens of atom {atom_numbers(atoms)}, not predicted.")
    yield look.text(
        "W: distance of the outer lines, 2J left out. 2J of about 12.5 Hz only chose the word. Couplings between "
        "alike hydrogens are not observable and left out."
    )


def _per_form(spectrum: Spectrum, number: int, look: Look) -> Iterator[RenderableType]:
    """Couplings in each form beside their average."""
    shown = _shown(spectrum, number)
    if len(shown) == 1:
        doubled = [s for s in spectrum.signals if s.ring_system == number and any(c.doubled for c in s.couplings)]
        text = f"Each coupling {_PM} 1.0 Hz (95 %)"
        yield look.text(f"{text}, {_PM} 2.0 Hz next to a flat carbon." if doubled else f"{text}.")
        return
    table = new_table(look)
    table.add_column("3J", no_wrap=True)
    for state in shown:
        table.add_column(f"{state.id} / Hz", justify="right", no_wrap=True)
    table.add_column(look.say(f"average {_PM} 95 %"), justify="right", no_wrap=True)
    for name, values, average, sigma in coupling_rows(spectrum, number, tuple(s.id for s in shown)):
        mean = "?" if average is None else f"{hertz(average)} {_PM} {hertz(Z95 * (sigma or 0.0))}"
        table.add_row(look.text(name), *(look.text(hertz(v)) for v in values), look.text(mean))
    yield look.text("")
    yield table


def coupling_rows(
    spectrum: Spectrum, number: int, ids: Sequence[str]
) -> list[tuple[str, tuple[float | None, ...], float | None, float | None]]:
    """Observable couplings of ring hydrogens, each kind once: name, values per state, average, uncertainty [Hz]."""
    rows = []
    found = {(s.hydrogen.key, c.partner): c for s in spectrum.signals for c in s.couplings if c.partner}
    for pair, name in _names(spectrum, number).items():
        coupling = found[pair]
        values = dict(coupling.per_state)
        rows.append((name, tuple(values[i] for i in ids), coupling.average_Hz, coupling.uncertainty_Hz))
    return rows


def _gaps(spectrum: Spectrum, number: int, look: Look, notes: Footnotes) -> Iterator[RenderableType]:
    """Where equatorial hydrogens lie against axial ones: a hint."""
    found = [s for s in spectrum.signals if s.ring_system == number and s.gap is not None]
    if not found:
        return
    gaps = [s.gap.ppm for s in found if s.gap is not None]
    reversed_ = sorted({s.hydrogen.atom for s in found if s.gap is not None and s.gap.reversed})
    yield look.text("")
    if max(map(abs, gaps)) < 0.05:
        yield look.text("1H: exchange makes axial and equatorial hydrogens of one carbon lie close together.")
        return
    usual = max((s.gap for s in found if s.gap is not None), key=lambda gap: abs(gap.ppm))
    low, high = sorted((abs(usual.low_ppm), abs(usual.high_ppm)))
    text = (
        f"1H, a hint only: equatorial hydrogens usually lie about {abs(usual.ppm):.1f} ppm ({low:.1f} to {high:.1f}) "
        f"to higher shift than the axial one of their carbon {notes.mark('cyclohexane-d11-teaching')}; ring currents "
        "and C=O move them more."
    )
    if reversed_:
        text += f" Next to C=O (atom {atom_numbers(reversed_)}) the order may turn round."
    yield look.text(text)


def _carbons(spectrum: Spectrum, number: int, look: Look, notes: Footnotes) -> Iterator[RenderableType]:
    """13C shifts where increments are known, else the gamma-gauche effect alone."""
    result = spectrum.analysis.ring_systems[number]
    own = _ring_carbons(spectrum, result)
    known = [c for c in own if any(v is not None for _, v in c.per_state)]
    shown = [s for s in _shown(spectrum, number) if s.shapes == ("chair",)] or [result.states[0]]
    yield look.text("")
    if known:
        marks = " ".join(dict.fromkeys(notes.mark(key) for c in known for key in c.sources))
        words = listed(tuple(dict.fromkeys(c.known_by for c in known)))
        yield look.text(f"13C from increments, {words} {marks}")
        table = new_table(look)
        table.add_column("carbon", no_wrap=True)
        for state in shown:
            table.add_column(f"{state.id} / ppm", justify="right", no_wrap=True)
        table.add_column(look.say(f"average {_PM} 95 %"), justify="right", no_wrap=True)
        table.add_column("gamma-gauche", justify="right", no_wrap=True)
        for atoms, shift in _merged(known):
            values = dict(shift.per_state)
            mean = shift.average_ppm
            table.add_row(
                look.text(f"C{', C'.join(str(a + 1) for a in atoms)}"),
                *(look.text(hertz(values[s.id])) for s in shown),
                look.text("?" if mean is None else f"{mean:.1f} {_PM} {Z95 * (shift.uncertainty_ppm or 0.0):.1f}"),
                look.text(signed(shift.gamma_average_ppm or 0.0)),
            )
        yield table
    ring_known = any(c.atom in result.system.atom_set for c in known)
    if ring_known:
        return
    missing = sorted({key for c in own for key in c.missing})
    why = f"no increments for {listed(missing)}" if missing else "increments hold for lone cyclohexane rings only"
    moved = []
    for shift in own:
        gamma = dict(shift.gamma_per_state)
        if any(abs(gamma[s.id]) > 0.05 for s in shown):
            parts = ", ".join(f"{signed(gamma[s.id])} in {s.id}" for s in shown)
            moved.append(f"C{shift.atom + 1} {parts}")
    text = f"13C of ring carbons not estimated: {why}."
    if moved:
        text += f" Gamma-gauche shifts by axial groups, ppm ({_PM} 2): {'; '.join(moved)}."
    yield look.text(text)


def _ring_carbons(spectrum: Spectrum, result: SystemResult) -> list[CarbonShift]:
    atoms = set(result.system.atoms) | {atom for _, atom in result.groups}
    return [c for c in spectrum.carbons if c.atom in atoms]


def _merged(shifts: Sequence[CarbonShift]) -> list[tuple[list[int], CarbonShift]]:
    """Carbons of equal shift together."""
    table: dict[tuple[object, ...], tuple[list[int], CarbonShift]] = {}
    for shift in shifts:
        values = tuple(sorted(round(v, 3) for _, v in shift.per_state if v is not None))
        key = (values, None if shift.average_ppm is None else round(shift.average_ppm, 3))
        table.setdefault(key, ([], shift))[0].append(shift.atom)
    return list(table.values())


def freezing_lines(block: FreezingOut | None, result: SystemResult, look: Look, notes: Footnotes) -> Iterator[str]:
    """Freezing out in sentences."""
    if block is None:
        yield "Freezing out: the ring does not flip; nothing to freeze."
        return
    spectrometer = block.spectrometer
    if block.barrier is None or block.barrier_kcal is None:
        yield f"Freezing out: {block.remark}"
    else:
        half = look.energy(Z95 * (block.barrier_uncertainty_kcal or 0.0))
        other = "alike" if not block.dG_kcal else f"back {look.energy(block.reverse_barrier_kcal)}"
        word = ", estimated for the substituted ring" if block.barrier.estimated else ""
        placed = f"; exchange {block.exchange} at the temperature asked" if block.exchange else ""
        rates = f"{_rate(block.rate_per_s)} per s ({_rate(block.rate_low)} to {_rate(block.rate_high)})"
        origin = f"{block.barrier.ring}, {block.barrier.known_by}{word} {notes.mark(block.barrier.source)}"
        yield (
            f"Freezing out ({block.convention}): barrier {block.favoured} to {block.other} "
            f"{look.energy(block.barrier_kcal)} {_PM} {half} {look.unit} ({other}), from {origin}; "
            f"rate {rates}{placed}."
        )
        if block.coalescence_K is not None:
            share = block.favoured_share or 0.5
            kind = "equal forms" if abs(share - 0.5) < 1e-6 else f"{percent(share)} {block.favoured}"
            yield (
                f"Coalescence at {block.coalescence_K:.0f} K ({_limit(block.coalescence_low_K)} to "
                f"{_limit(block.coalescence_high_K)}) for lines {spectrometer.gap_Hz:.0f} Hz apart at "
                f"{spectrometer.frequency_MHz:g} MHz, {kind}."
            )
        if block.remark:
            yield block.remark
    parts = []
    for form in block.frozen:
        share_text = "?" if form.share is None else percent(form.share)
        hidden = " (not seen)" if form.visible is False else ""
        parts.append(f"{form.state} {share_text}{hidden}")
    if block.dG_kcal == 0.0 and len(block.frozen) == 1:
        yield f"At {kelvin(block.cold_K)} one set of lines: both forms are alike, axial and equatorial stand apart."
    elif len(block.frozen) == 1:
        yield f"At {kelvin(block.cold_K)} one set of lines, those of {block.frozen[0].state}."
    else:
        yield f"At {kelvin(block.cold_K)} integration would show {listed(parts)}."


def _limit(value: float | None) -> str:
    return "?" if value is None else f"{value:.0f}"


def _rate(value: float | None) -> str:
    return "?" if value is None else constant(value)


def population_lines(estimates: Sequence[PopulationEstimate], look: Look) -> Iterator[str]:
    """What observed averages say."""
    for e in estimates:
        name = e.name or "observed"
        values = f"{e.first.value:.2f} ({e.forms[0]}) and {e.second.value:.2f} ({e.forms[1]}) {e.unit}"
        head = f"{name} = {e.observed.value:g} {_PM} {Z95 * e.observed.sigma:.2g} {e.unit}, between {values}"
        if e.share is None or e.share_sigma is None or e.K is None or e.uncertainty_kcal is None:
            yield f"{head}: {e.verdict}. {e.reason}"
            continue
        yield (
            f"{head}: {100 * e.share:.0f} {_PM} {100 * Z95 * e.share_sigma:.0f} % {e.forms[0]}, K {constant(e.K)} "
            f"({constant(e.K_low or 0.0)} to {constant(e.K_high or 0.0)}), dG {look.energy(e.dG_kcal)} {_PM} "
            f"{look.energy(Z95 * e.uncertainty_kcal)} {look.unit} at {kelvin(e.temperature_K)}."
        )


def moving_view(spectra: Sequence[Spectrum], look: Look) -> Iterator[RenderableType]:
    """How averages move over conditions: one column for each temperature or medium."""
    first = spectra[0].analysis
    yield look.text(title_text(first, conditions=False), "dim")
    media = len({s.analysis.medium for s in spectra}) > 1
    for number in range(len(first.ring_systems)):
        table = new_table(look)
        table.add_column("average 3J / Hz", no_wrap=True)
        for spectrum in spectra:
            name = spectrum.analysis.medium if media else kelvin(spectrum.analysis.temperature_K)
            table.add_column(name, justify="right", no_wrap=True)
        columns = [_every_average(spectrum) for spectrum in spectra]
        for key, name in _names(spectra[0], number).items():
            cells = (column.get(key) for column in columns)
            table.add_row(look.text(name), *(look.text(hertz(cell)) for cell in cells))
        yield look.text("")
        yield table


_Pair = tuple[tuple[int, int], tuple[int, int]]


def _every_average(spectrum: Spectrum) -> dict[_Pair, float | None]:
    """Average of each coupling by its two hydrogens, whose labels may change with the favoured form."""
    return {(s.hydrogen.key, c.partner): c.average_Hz for s in spectrum.signals for c in s.couplings if c.partner}


def _names(spectrum: Spectrum, number: int) -> dict[_Pair, str]:
    """Names of the observable couplings of a ring system, one of those alike."""
    by_key = {s.hydrogen.key: s for s in spectrum.signals}
    seen: set[tuple[int, int, str]] = set()
    found: dict[_Pair, str] = {}
    for signal in spectrum.signals:
        for c in signal.couplings:
            if signal.ring_system != number or c.partner is None or not c.observable:
                continue
            first, second = sorted((signal.hydrogen.alike, by_key[c.partner].hydrogen.alike))
            kind = (first, second, hertz(c.average_Hz))
            if kind not in seen:
                seen.add(kind)
                found[(signal.hydrogen.key, c.partner)] = f"{signal.label}-{c.label}"
    return found
