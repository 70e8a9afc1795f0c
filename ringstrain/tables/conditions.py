"""Medium and temperature of a question."""

from __future__ import annotations

from dataclasses import dataclass
from difflib import get_close_matches

from ringstrain.errors import UsageError
from ringstrain.provenance import MEDIA, Medium
from ringstrain.tables.records import Tables

#: Which other media stand in, nearest first, when a medium has no row of its own.
NEAREST: dict[str, tuple[str, ...]] = {
    "gas": ("nonpolar", "polar", "protic"),
    "nonpolar": ("gas", "polar", "protic"),
    "polar": ("nonpolar", "protic", "gas"),
    "protic": ("polar", "nonpolar", "gas"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Conditions:
    """Where and how hot.

    Attributes
    ----------
    temperature_K
        Temperature [K].
    medium
        Medium class.
    solvent
        Named solvent, empty when only the class is given.
    accepts_hydrogen_bonds
        True when the medium breaks internal hydrogen bonds.
    """

    temperature_K: float
    medium: Medium
    solvent: str = ""
    accepts_hydrogen_bonds: bool = False

    @property
    def label(self) -> str:
        """What to call the medium in a sentence."""
        words = {"gas": "in the gas", "nonpolar": "in nonpolar media", "polar": "in polar media", "protic": "in water"}
        return f"in {self.solvent}" if self.solvent else words[self.medium]


def make_conditions(tables: Tables, *, temperature_K: float, medium: str) -> Conditions:
    """Conditions from what a user asks for.

    Parameters
    ----------
    tables
        Tables with the named solvents.
    temperature_K
        Temperature [K], above 0 and at most 2000.
    medium
        Medium class or solvent name.

    Returns
    -------
    Conditions
        Checked.

    Raises
    ------
    UsageError
        If the temperature is impossible or the medium unknown.
    """
    if not 0 < temperature_K <= 2000:
        raise UsageError(
            f"{temperature_K:g} K is no temperature for a solution.", "Use kelvin, above 0 and at most 2000."
        )
    for known in MEDIA:
        if medium.lower() == known:
            return Conditions(
                temperature_K=temperature_K, medium=known, accepts_hydrogen_bonds=known in ("polar", "protic")
            )
    solvent = tables.find_solvent(medium)
    if solvent is None:
        names = [*MEDIA, *(name for s in tables.solvents for name in (s.name, *s.aliases))]
        close = get_close_matches(medium.lower(), names, n=2, cutoff=0.6)
        hint = f"Did you mean {' or '.join(close)}?" if close else f"Use {', '.join(MEDIA)} or a common solvent name."
        raise UsageError(f"No medium is called {medium!r}.", hint)
    return Conditions(
        temperature_K=temperature_K,
        medium=next(m for m in MEDIA if m == solvent.medium),
        solvent=solvent.name,
        accepts_hydrogen_bonds=solvent.accepts_hydrogen_bonds,
    )
