"""Observed couplings: what a report says of each proton, and how well a predicted signal fits it."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import permutations

from ringstrain.consequences.couplings import EXCHANGES
from ringstrain.consequences.nmr import Signal
from ringstrain.errors import UsageError
from ringstrain.tables.spectra import SpectralTables

_NAME = re.compile(r"[Hh](?P<number>\d+)(?P<side>ax|eq|iso)?(?P<primes>'*)")
_WORD = re.compile(r"(?:br\s*)?(?P<letters>(?:quint|sext|sept|oct|d|t|q)*)$")
_LETTER = re.compile(r"quint|sext|sept|oct|d|t|q")
_COUNTS = {"d": 1, "t": 2, "q": 3, "quint": 4, "sext": 5, "sept": 6, "oct": 7}
#: A predicted signal has too few partners for an observed splitting: deviation charged for each [standard deviations].
_NO_PARTNER = 8.0
_HELP = (
    'Write couplings as "H1=10.8,4.2; H4=3.1", with a word if you like: "H1=td 10.8,4.2", "H4=br s", '
    'or the width of the outer lines: "H1=W 30".'
)
_MOST_HZ = {False: 40.0, True: 100.0}


@dataclass(frozen=True, slots=True, kw_only=True)
class Observation:
    """What was observed of one proton.

    Attributes
    ----------
    name
        As the user wrote it.
    atom
        Carbon it stands on, from 0.
    side
        ``ax``, ``eq`` or ``iso`` when the user says so, else empty.
    couplings_Hz
        Splittings, those a word such as ``td`` counts several times repeated [Hz].
    is_narrow
        True for a broad singlet: nothing resolved.
    width_Hz
        Distance of the outer lines when only that was read [Hz].
    """

    name: str
    atom: int
    side: str = ""
    couplings_Hz: tuple[float, ...] = ()
    is_narrow: bool = False
    width_Hz: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Pairing:
    """A predicted coupling and the observed splitting it was matched with; None when taken as not resolved.

    Attributes
    ----------
    partner
        Label of the partner, empty for a splitting by a hydrogen that is not predicted or by none.
    predicted_Hz, observed_Hz
        The two [Hz].
    """

    partner: str
    predicted_Hz: float | None
    observed_Hz: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Fit:
    """How a predicted signal fits an observation.

    Attributes
    ----------
    name, label
        The observation and the predicted hydrogen.
    log_likelihood
        Of the best matching.
    squares
        Sum of squared deviations in standard deviations.
    pairings
        The matching, largest predicted coupling first.
    """

    name: str
    label: str
    log_likelihood: float
    squares: float
    pairings: tuple[Pairing, ...]


def parse_observed(text: str) -> tuple[Observation, ...]:
    """Observations from text such as ``H1=10.8,4.2; H4=3.1``.

    Parameters
    ----------
    text
        One proton a part: name, an equals sign, an optional word, couplings in Hz; parts divided by semicolons.

    Returns
    -------
    tuple of Observation
        In the order given.

    Raises
    ------
    UsageError
        If a part cannot be read.

    Examples
    --------
    >>> parse_observed("H1=td 10.8,4.2")[0].couplings_Hz
    (10.8, 10.8, 4.2)
    """
    found = [_parse(part) for part in (piece.strip() for piece in text.split(";")) if part]
    if not found:
        raise UsageError("No observed coupling is given.", _HELP)
    names = [observation.name.lower() for observation in found]
    for name in names:
        if names.count(name) > 1:
            raise UsageError(
                f"{name.upper()} stands twice.", "Call the second hydrogen of a CH2 by another name, as H6'."
            )
    return tuple(found)


def _parse(part: str) -> Observation:
    name, equals, rest = (piece.strip() for piece in part.partition("="))
    match = _NAME.fullmatch(name)
    if not equals or match is None or int(match["number"]) < 1:
        raise UsageError(f"{part!r} is no observed proton.", _HELP)
    first = re.search(r"[0-9]", rest)
    word = (rest[: first.start()] if first else rest).replace("J", "").replace("=", "").strip(" ,")
    wide = word.upper() == "W"
    numbers = _numbers(rest[first.start() :] if first else "", part, _MOST_HZ[wide])
    if wide and len(numbers) == 1:
        side = match["side"] or ""
        return Observation(name=name, atom=int(match["number"]) - 1, side=side, width_Hz=numbers[0])
    shape = _WORD.fullmatch(word)
    narrow = word.replace(" ", "") in ("brs", "s")
    if shape is None and not narrow:
        raise UsageError(f"{word!r} is no multiplet word.", _HELP)
    letters = [] if narrow or shape is None else _LETTER.findall(shape["letters"])
    if not numbers and not narrow:
        raise UsageError(f"{part!r} names no coupling.", _HELP)
    if letters and len(letters) != len(numbers):
        raise UsageError(f"{word!r} has {len(letters)} kinds of splitting but {len(numbers)} couplings follow.", _HELP)
    counts = [_COUNTS[letter] for letter in letters] or [1] * len(numbers)
    return Observation(
        name=name,
        atom=int(match["number"]) - 1,
        side=match["side"] or "",
        couplings_Hz=tuple(j for j, count in zip(numbers, counts, strict=True) for _ in range(count)),
        is_narrow=narrow,
    )


def _numbers(text: str, part: str, most_Hz: float) -> list[float]:
    pieces = [piece.strip().removesuffix("Hz").strip() for piece in text.split(",")] if text else []
    try:
        numbers = [float(piece) for piece in pieces if piece]
    except ValueError:
        raise UsageError(f"{part!r} holds something that is no number.", _HELP) from None
    if any(not 0 <= j <= most_Hz for j in numbers):
        raise UsageError(f"{part!r} holds a coupling no two protons have.", f"Give Hz, 0 to {most_Hz:g}.")
    return numbers


def fit_atom(
    observations: Sequence[Observation], signals: Sequence[Signal], tables: SpectralTables
) -> tuple[Fit, ...] | None:
    """The best way to give the signals of one carbon to the protons observed on it.

    Parameters
    ----------
    observations
        What was observed of the protons of one carbon.
    signals
        Predicted signals of that carbon.
    tables
        NMR tables.

    Returns
    -------
    tuple of Fit or None
        In the order of the observations; None when the carbon has too few hydrogens or a prediction is missing.
    """
    best: tuple[Fit, ...] | None = None
    for chosen in _choices(observations, signals):
        fits = [fit_signal(o, s, tables) for o, s in zip(observations, chosen, strict=True)]
        if any(fit is None for fit in fits):
            continue
        known = tuple(fit for fit in fits if fit is not None)
        if best is None or _total(known) > _total(best):
            best = known
    return best


def _total(fits: Sequence[Fit]) -> float:
    return sum(fit.log_likelihood for fit in fits)


def _choices(observations: Sequence[Observation], signals: Sequence[Signal]) -> Iterator[tuple[Signal, ...]]:
    """Signals for the observations, one each; a side the user names must hold where the carbon has two hydrogens."""
    for chosen in permutations(signals, len(observations)):
        words = [signal.hydrogen.orientation[0][1] for signal in chosen]
        if len(signals) == 1 or all(o.side in ("", word) for o, word in zip(observations, words, strict=True)):
            yield chosen


def fit_signal(observation: Observation, signal: Signal, tables: SpectralTables) -> Fit | None:
    """How well a predicted signal fits an observed one under the best matching of couplings.

    Parameters
    ----------
    observation
        What was observed.
    signal
        The predicted signal.
    tables
        NMR tables.

    Returns
    -------
    Fit or None
        None when a coupling of the signal has no prediction.

    Notes
    -----
    Every predicted coupling is matched with an observed splitting or taken as unresolved, for which only what it
    exceeds the usual resolution counts; several may share one splitting, since reports name equal ones once.  Every
    observed splitting is used.  Errors are normal: the prediction's and that of reading.
    """
    predicted: list[tuple[str, float, float]] = []
    reading = tables.reading["reading"].value
    for coupling in signal.couplings:
        if coupling.observable:
            if coupling.average_Hz is None or coupling.uncertainty_Hz is None:
                return None
            sigma = math.hypot(coupling.uncertainty_Hz, reading)
            predicted.extend([(coupling.label, coupling.average_Hz, sigma)] * coupling.count)
    if observation.width_Hz is not None:
        return _fit_width(observation.name, signal.label, predicted, observation.width_Hz, reading)
    floor = tables.reading["narrow" if observation.is_narrow else "resolved"].value
    spare = sum(1 for u in signal.unpredicted if u.reason != EXCHANGES)
    squares, pairings = _match(observation.couplings_Hz, predicted, floor, spare)
    constant = sum(math.log(sigma) for _, _, sigma in predicted)
    return Fit(
        name=observation.name,
        label=signal.label,
        log_likelihood=-0.5 * squares - constant,
        squares=squares,
        pairings=pairings,
    )


def _fit_width(
    name: str, label: str, predicted: Sequence[tuple[str, float, float]], width_Hz: float, reading: float
) -> Fit:
    """How a predicted width fits an observed one; both outer lines carry the error of a reading."""
    total = math.fsum(value for _, value, _ in predicted)
    sigma = math.sqrt(math.fsum(s**2 for _, _, s in predicted) + 2.0 * reading**2)
    squares = ((total - width_Hz) / sigma) ** 2
    pairing = Pairing(partner="W", predicted_Hz=total, observed_Hz=width_Hz)
    return Fit(
        name=name, label=label, log_likelihood=-0.5 * squares - math.log(sigma), squares=squares, pairings=(pairing,)
    )


def _match(
    observed: Sequence[float], predicted: Sequence[tuple[str, float, float]], floor: float, spare: int
) -> tuple[float, tuple[Pairing, ...]]:
    """Least sum of squares over all matchings, by dynamic programming over the sets of splittings used."""
    table: dict[int, tuple[float, tuple[Pairing, ...]]] = {0: (0.0, ())}
    for label, value, sigma in predicted:
        following: dict[int, tuple[float, tuple[Pairing, ...]]] = {}
        for used, (cost, pairs) in table.items():
            options: list[tuple[int, float, float | None]] = [(used, max(0.0, value - floor) / sigma, None)]
            options += [(used | 1 << i, (value - j) / sigma, j) for i, j in enumerate(observed)]
            for mask, deviation, j in options:
                total = cost + deviation**2
                if mask not in following or total < following[mask][0]:
                    pair = Pairing(partner=label, predicted_Hz=value, observed_Hz=j)
                    following[mask] = (total, (*pairs, pair))
        table = following
    best: tuple[float, tuple[Pairing, ...]] | None = None
    for used, (cost, pairs) in table.items():
        left = [j for i, j in enumerate(observed) if not used & 1 << i]
        # a splitting by a hydrogen that is not predicted costs one standard deviation, one by none is a misfit
        total = cost + min(len(left), spare) + max(0, len(left) - spare) * _NO_PARTNER**2
        if best is None or total < best[0]:
            extra = tuple(Pairing(partner="", predicted_Hz=None, observed_Hz=j) for j in left)
            best = (total, (*pairs, *extra))
    assert best is not None  # the empty set of splittings always has an entry
    return best
