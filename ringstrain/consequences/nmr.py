"""What the spectrum will show: couplings, multiplets, shifts, freezing out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

from ringstrain.consequences.averages import make_ensemble, shares_of
from ringstrain.consequences.couplings import EXCHANGES, Coupling, Unpredicted, find_couplings, find_unpredicted
from ringstrain.consequences.freezing import FreezingOut, Spectrometer, find_freezing
from ringstrain.consequences.hydrogens import Hydrogen, find_hydrogens
from ringstrain.consequences.multiplets import Multiplet, read_multiplet
from ringstrain.consequences.shifts import CarbonShift, find_shifts
from ringstrain.results import Analysis
from ringstrain.structure.records import Structure
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.spectra import SpectralTables, load_spectra

#: Source key of the coupling equation.
EQUATION_SOURCE = "haasnoot-et-al-1980"
#: What holds for every prediction.
CAVEATS = (
    "Couplings are first order; strongly coupled protons show other spacings.",
    "The equation is good to 0.5 Hz beside C, N and O; the error is doubled next to a flat carbon.",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Gap:
    """A hint where the equatorial hydrogen of a CH2 lies against the axial one.

    Attributes
    ----------
    ppm, low_ppm, high_ppm
        Equatorial less axial, averaged over states, with the usual range [ppm].
    reversed
        True next to C=O, where the order may turn round.
    """

    ppm: float
    low_ppm: float
    high_ppm: float
    reversed: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Signal:
    """One ring hydrogen and how its signal looks.

    Attributes
    ----------
    ring_system
        Number of the ring system, from 0.
    hydrogen
        Which one.
    couplings
        Its vicinal couplings, largest first.
    unpredicted
        Neighbouring hydrogens whose coupling is not predicted.
    multiplet
        How it reads on average; None when averages are missing.
    gap
        Where its equatorial partner lies, for the axial hydrogen of a CH2.
    """

    ring_system: int
    hydrogen: Hydrogen
    couplings: tuple[Coupling, ...]
    unpredicted: tuple[Unpredicted, ...]
    multiplet: Multiplet | None
    gap: Gap | None

    @property
    def label(self) -> str:
        """Its label."""
        return self.hydrogen.label

    def splittings(self) -> tuple[float, ...] | None:
        """Averages of the couplings a spectrum shows, one a partner [Hz]; None when one is missing."""
        found: list[float] = []
        for coupling in self.couplings:
            if coupling.observable:
                if coupling.average_Hz is None:
                    return None
                found.extend([coupling.average_Hz] * coupling.count)
        return tuple(found)


@dataclass(frozen=True, slots=True, kw_only=True)
class Spectrum:
    """All that is predicted for one structure.

    Attributes
    ----------
    analysis
        The answer it rests on.
    signals
        One for each hydrogen on a ring carbon.
    carbons
        13C shifts, one list for all ring systems.
    freezing
        How each ring system freezes out; None where it does not flip.
    shares
        Populations the averages rest on, one tuple for each ring system in the order of its states; None when an
        unpriced contact decides them.
    notes
        What the reader should know.
    """

    analysis: Analysis
    signals: tuple[Signal, ...]
    carbons: tuple[CarbonShift, ...]
    freezing: tuple[FreezingOut | None, ...]
    shares: tuple[tuple[float, ...] | None, ...]
    notes: tuple[str, ...]

    def signal(self, label: str) -> Signal:
        """The signal of that label.

        Raises
        ------
        KeyError
            If there is none.
        """
        for signal in self.signals:
            if signal.label == label:
                return signal
        raise KeyError(label)

    def alike(self, signal: Signal) -> tuple[Signal, ...]:
        """The signals alike to one, itself included."""
        return tuple(s for s in self.signals if s.hydrogen.alike == signal.hydrogen.alike)

    def as_dict(self) -> dict[str, Any]:
        """The nmr document, ready for JSON."""
        analysis = self.analysis
        known = [block for block in self.freezing if block is not None]
        return {
            **analysis.head("nmr"),
            "ring_systems": [
                {
                    "rings": [list(ring) for ring in result.rings],
                    "states": [
                        {"id": s.id, "shapes": list(s.shapes), "population": p}
                        for s, p in zip(result.states, shares or (None,) * len(result.states), strict=True)
                    ],
                    "locked": result.locked,
                }
                for result, shares in zip(analysis.ring_systems, self.shares, strict=True)
            ],
            "hydrogens": [self._hydrogen(signal) for signal in self.signals],
            "carbons": [_carbon(shift) for shift in self.carbons],
            "freezing_out": known[0].as_dict() if known else None,
            "freezing_out_by_system": [block.as_dict() if block else None for block in self.freezing],
            "notes": [*analysis.notes, *self.notes],
        }

    def _hydrogen(self, signal: Signal) -> dict[str, Any]:
        multiplet, gap = signal.multiplet, signal.gap
        return {
            "atom": signal.hydrogen.atom,
            "ring_system": signal.ring_system,
            "label": signal.label,
            "orientation": dict(signal.hydrogen.orientation),
            "alike": [s.label for s in self.alike(signal) if s is not signal],
            "couplings": [
                {
                    "to": c.to,
                    "label": c.label,
                    "count": c.count,
                    "per_state": dict(c.per_state),
                    "average_Hz": c.average_Hz,
                    "uncertainty_Hz": c.uncertainty_Hz,
                    "observable": c.observable,
                    "error_doubled": c.doubled,
                    "source": "common-practice" if c.count > 1 else EQUATION_SOURCE,
                    "known_by": "common practice" if c.count > 1 else "read",
                }
                for c in signal.couplings
            ],
            "not_predicted": [{"to": u.atom, "reason": u.reason} for u in signal.unpredicted],
            "multiplet": multiplet.word if multiplet else None,
            "splittings_Hz": list(multiplet.splittings_Hz) if multiplet else None,
            "width_Hz": multiplet.width_Hz if multiplet else None,
            "equatorial_less_axial_ppm": gap.ppm if gap else None,
            "equatorial_less_axial_low_ppm": gap.low_ppm if gap else None,
            "equatorial_less_axial_high_ppm": gap.high_ppm if gap else None,
            "order_may_reverse": gap.reversed if gap else None,
        }


def _carbon(shift: CarbonShift) -> dict[str, Any]:
    return {
        "atom": shift.atom,
        "per_state_ppm": dict(shift.per_state),
        "average_ppm": shift.average_ppm,
        "uncertainty_ppm": shift.uncertainty_ppm,
        "gamma_gauche_per_state_ppm": dict(shift.gamma_per_state),
        "gamma_gauche_average_ppm": shift.gamma_average_ppm,
        "gamma_gauche_uncertainty_ppm": shift.gamma_uncertainty_ppm,
        "missing_increments": list(shift.missing),
        "sources": list(shift.sources),
        "known_by": shift.known_by,
    }


def predict_nmr(
    analysis: Analysis,
    *,
    tables: Tables | None = None,
    spectra: SpectralTables | None = None,
    spectrometer: Spectrometer | None = None,
) -> Spectrum:
    """What the spectrum of an analysed structure will show.

    Parameters
    ----------
    analysis
        The answer of :func:`ringstrain.analyze`.
    tables
        Price tables; those of the package when None.
    spectra
        NMR tables; those of the package when None.
    spectrometer
        What is watched for freezing out; the usual spectrometer and the axial to equatorial gap when None.

    Returns
    -------
    Spectrum
        Couplings, multiplets, shifts and freezing out.

    Raises
    ------
    TableError
        If the NMR tables are faulty.

    Examples
    --------
    >>> from ringstrain.analysis import analyze
    >>> spectrum = predict_nmr(analyze("CC(C)(C)[C@H]1CC[C@H](O)CC1"))
    >>> spectrum.signal("H8ax").multiplet.word
    'tt'
    """
    prices = tables if tables is not None else load_tables()
    rows = spectra if spectra is not None else load_spectra()
    watched = spectrometer if spectrometer is not None else usual_spectrometer(rows)
    signals = find_signals(analysis, prices, rows)
    shares = tuple(shares_of(result, analysis.temperature_K) for result in analysis.ring_systems)
    carbons: list[CarbonShift] = []
    for result in analysis.ring_systems:
        ensemble = make_ensemble(result, analysis.temperature_K, prices.model_terms)
        carbons.extend(find_shifts(result, ensemble, rows))
    return Spectrum(
        analysis=analysis,
        signals=signals,
        carbons=tuple(carbons),
        freezing=find_freezing(analysis, prices, rows, watched),
        shares=shares,
        notes=(*CAVEATS, *_notes(analysis, signals, shares)),
    )


def find_signals(analysis: Analysis, tables: Tables, spectra: SpectralTables) -> tuple[Signal, ...]:
    """The signal of every hydrogen on a ring carbon, in atom order.

    Parameters
    ----------
    analysis
        The analysed structure.
    tables, spectra
        Price and NMR tables.
    """
    signals: list[Signal] = []
    for number, result in enumerate(analysis.ring_systems):
        first = 1 + max((s.hydrogen.alike for s in signals), default=-1)
        hydrogens = find_hydrogens(result, first)
        ensemble = make_ensemble(result, analysis.temperature_K, tables.model_terms)
        couplings = find_couplings(result, hydrogens, ensemble, spectra)
        for hydrogen in hydrogens:
            draft = Signal(
                ring_system=number,
                hydrogen=hydrogen,
                couplings=couplings[hydrogen.key],
                unpredicted=find_unpredicted(result, hydrogen),
                multiplet=None,
                gap=None,
            )
            signals.append(_finish(draft, hydrogens, analysis, number, spectra))
    return tuple(signals)


def usual_spectrometer(
    spectra: SpectralTables,
    *,
    frequency_MHz: float | None = None,
    gap_ppm: float | None = None,
    gap_Hz: float | None = None,
    coupling_Hz: float = 0.0,
) -> Spectrometer:
    """A spectrometer and the gap it watches; the usual ones where nothing is given.

    Parameters
    ----------
    spectra
        NMR tables.
    frequency_MHz
        Frequency of the nucleus [MHz].
    gap_ppm, gap_Hz
        Distance of the lines [ppm] or [Hz]; the latter wins.
    coupling_Hz
        Coupling between the exchanging nuclei [Hz].
    """
    frequency = frequency_MHz if frequency_MHz is not None else spectra.general("spectrometer").value
    ppm = gap_ppm if gap_ppm is not None else spectra.general("gap").value
    return Spectrometer(
        frequency_MHz=frequency, gap_Hz=gap_Hz if gap_Hz is not None else ppm * frequency, coupling_Hz=coupling_Hz
    )


def _finish(
    draft: Signal, hydrogens: tuple[Hydrogen, ...], analysis: Analysis, number: int, spectra: SpectralTables
) -> Signal:
    """The signal with its multiplet and shift hint."""
    splittings = draft.splittings()
    own = draft.hydrogen
    mates = [h for h in hydrogens if h.atom == own.atom and h.key != own.key]
    multiplet = None
    hidden = any(u.reason != EXCHANGES for u in draft.unpredicted)
    if splittings is not None and (splittings or not hidden):
        geminal = any(mate.alike != own.alike for mate in mates)
        multiplet = read_multiplet(splittings, geminal=geminal, tables=spectra)
    return replace(draft, multiplet=multiplet, gap=_gap(own, mates, analysis, number, spectra))


def _gap(own: Hydrogen, mates: list[Hydrogen], analysis: Analysis, number: int, spectra: SpectralTables) -> Gap | None:
    """The hint for a CH2 on its axial hydrogen; none when the two are alike or populations are unknown."""
    if not mates or mates[0].alike == own.alike or own.orientation[0][1] != "ax":
        return None
    shares = shares_of(analysis.ring_systems[number], analysis.temperature_K)
    if shares is None:
        return None
    signs = {"ax": 1.0, "eq": -1.0}
    bias = sum(share * signs.get(word, 0.0) for share, (_, word) in zip(shares, own.orientation, strict=True))
    usual, low, high = (spectra.general(name).value for name in ("gap", "gap low", "gap high"))
    structure = analysis.structure
    return Gap(
        ppm=bias * usual,
        low_ppm=min(bias * low, bias * high),
        high_ppm=max(bias * low, bias * high),
        reversed=_is_beside_carbonyl(structure, own.atom),
    )


def _is_beside_carbonyl(structure: Structure, atom: int) -> bool:
    return any(
        structure.atoms[n].number == 6
        and any(structure.bond(n, m).order == 2 and structure.atoms[m].number == 8 for m in structure.neighbours[n])
        for n in structure.neighbours[atom]
    )


def _notes(
    analysis: Analysis, signals: Sequence[Signal], shares: Sequence[tuple[float, ...] | None]
) -> tuple[str, ...]:
    """Remarks that follow from the molecule."""
    notes = []
    open_ = [result.states[0].population is None for result in analysis.ring_systems]
    if any(known is not None and doubt for known, doubt in zip(shares, open_, strict=True)):
        notes.append("States with an unpriced contact hold under 1 % whatever it costs; averages leave them out.")
    if any(known is None for known in shares):
        notes.append("A contact without a price decides the populations: couplings are given per state, not averaged.")
    missing = {s.hydrogen.atom for s in signals for c in s.couplings if any(value is None for _, value in c.per_state)}
    if missing:
        where = ", ".join(str(a + 1) for a in sorted(missing))
        notes.append(f"An element beside atom {where} has no tabulated electronegativity: its couplings are unknown.")
    weak = {
        analysis.structure.atoms[n].element for s in signals for n in analysis.structure.neighbours[s.hydrogen.atom]
    }
    weak &= {"S", "Si", "P"}
    if weak:
        notes.append(f"The electronegativity of {' and '.join(sorted(weak))} is poorly known; couplings beside it too.")
    if any(kind == "inverting" for result in analysis.ring_systems for kind in result.system.kinds.values()):
        notes.append("Both sides of an inverting nitrogen are averaged; couplings of N-H are not predicted.")
    return tuple(notes)
