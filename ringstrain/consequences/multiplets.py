"""Multiplets as they are read: splittings sorted, a word such as td, and the width between the outer lines."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ringstrain.tables.spectra import SpectralTables

_LETTERS = {1: "d", 2: "t", 3: "q", 4: "quint", 5: "sext", 6: "sept", 7: "oct"}
#: More kinds of splitting than this are not told apart, nor more splittings of different kinds.
_MAX_KINDS, _MAX_SPLITTINGS = 3, 6


@dataclass(frozen=True, slots=True, kw_only=True)
class Multiplet:
    """A first-order multiplet.

    Attributes
    ----------
    word
        ``td``, ``br s``, ``m`` and the like.
    splittings_Hz
        Vicinal couplings, one a partner, largest first [Hz].
    width_Hz
        Their sum: distance of the outer lines, the geminal coupling left out [Hz].
    """

    word: str
    splittings_Hz: tuple[float, ...]
    width_Hz: float


def read_multiplet(splittings_Hz: Sequence[float], *, geminal: bool, tables: SpectralTables) -> Multiplet:
    """The multiplet that splittings give.

    Parameters
    ----------
    splittings_Hz
        Vicinal couplings, one a partner [Hz].
    geminal
        True when a geminal partner that is not alike splits as well; its size serves to choose the word only.
    tables
        NMR tables.

    Returns
    -------
    Multiplet
        Splittings sorted.

    Examples
    --------
    >>> from ringstrain.tables.spectra import load_spectra
    >>> read_multiplet([4.4, 11.0, 10.8], geminal=False, tables=load_spectra()).word
    'td'
    """
    ordered = sorted(splittings_Hz, reverse=True)
    every = sorted([*ordered, *([tables.reading["geminal"].value] if geminal else [])], reverse=True)
    return Multiplet(word=_word(every, tables), splittings_Hz=tuple(ordered), width_Hz=sum(ordered))


def _word(splittings: list[float], tables: SpectralTables) -> str:
    resolved = [j for j in splittings if j >= tables.reading["resolved"].value]
    broad = len(resolved) < len([j for j in splittings if j > 0.5])
    if not resolved:
        return "br s" if broad else "s"
    if len(resolved) >= 3 and resolved[0] < tables.reading["narrow"].value:
        return "br s"
    clusters: list[list[float]] = []
    for j in resolved:
        if clusters and clusters[-1][0] - j <= tables.reading["merge"].value:
            clusters[-1].append(j)
        else:
            clusters.append([j])
    crowded = len(resolved) > _MAX_SPLITTINGS and len(clusters) > 1
    if crowded or len(clusters) > _MAX_KINDS or any(len(cluster) not in _LETTERS for cluster in clusters):
        return "m"
    word = "".join(_LETTERS[len(cluster)] for cluster in clusters)
    return f"br {word}" if broad else word
