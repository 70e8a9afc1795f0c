"""How values are written: width, units, and an ASCII stand-in for every sign of ours."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

from ringstrain.units import KJ_PER_KCAL

if TYPE_CHECKING:
    from rich.box import Box
    from rich.text import Text

Units = Literal["kcal", "kJ"]
#: Signs our own text uses beyond ASCII, and what stands in for them.
STAND_INS: dict[str, str] = {
    "\N{PLUS-MINUS SIGN}": "+/-",
    "\N{MULTIPLICATION SIGN}": "x",
    "\N{MINUS SIGN}": "-",
    "\N{EN DASH}": "-",
    "\N{HORIZONTAL ELLIPSIS}": "...",
    "\N{GREEK CAPITAL LETTER DELTA}": "d",
    "\N{GREEK SMALL LETTER ALPHA}": "a",
    "\N{GREEK SMALL LETTER BETA}": "b",
    "\N{BOX DRAWINGS LIGHT HORIZONTAL}": "-",
    "\N{NON-BREAKING HYPHEN}": "-",
}
#: A sample of them, to find out whether a stream can take them.
SAMPLE = "".join(STAND_INS)


@dataclass(frozen=True, slots=True, kw_only=True)
class Look:
    """The manner of writing.

    Attributes
    ----------
    width
        Columns to fill [characters].
    ascii
        True to keep to ASCII.
    units
        Energy unit of tables: ``"kcal"`` or ``"kJ"`` (per mole).
    """

    width: int = 80
    ascii: bool = False
    units: Units = "kcal"

    @property
    def unit(self) -> str:
        """Name of the energy unit."""
        return f"{self.units}/mol"

    def say(self, text: str) -> str:
        """Text that can be shown: control characters replaced, in ASCII mode nothing beyond ASCII."""
        shown = "".join(c if c.isprintable() or c == "\n" else " " if c.isspace() else "?" for c in text)
        if not self.ascii or shown.isascii():
            return shown
        return "".join(_ascii(c) for c in shown)

    def text(self, text: str, style: str = "") -> Text:
        """The same as rich text, in which brackets of a SMILES stay brackets."""
        from rich.text import Text

        return Text(self.say(text), style=style)

    def energy(self, value_kcal: float | None, *, signed: bool = False) -> str:
        """An energy [kcal/mol] in the asked unit, two decimals (one in kJ); a question mark when unknown."""
        if value_kcal is None:
            return "?"
        value, digits = (value_kcal * KJ_PER_KCAL, 1) if self.units == "kJ" else (value_kcal, 2)
        body = f"{value:+.{digits}f}" if signed else f"{value:.{digits}f}"
        if float(body) == 0:
            body = body.lstrip("+-")
        return body.replace("-", "\N{MINUS SIGN}")

    def box(self) -> Box:
        """Rules under the head and between sections, nothing else."""
        from rich.box import Box

        rule = "-" if self.ascii else "\N{BOX DRAWINGS LIGHT HORIZONTAL}"
        line = f" {rule}{rule} \n"
        return Box("    \n    \n" + line + "    \n" + line + line + "    \n    \n", ascii=self.ascii)


def _ascii(character: str) -> str:
    """Nearest ASCII of a character."""
    if character.isascii():
        return character
    if character in STAND_INS:
        return STAND_INS[character]
    bare = unicodedata.normalize("NFKD", character).encode("ascii", "ignore").decode("ascii")
    return bare or "?"


def percent(share: float) -> str:
    """A share in percent, with more digits the nearer it is to none or all."""
    value = 100 * share
    if share > 1 - 1e-9:
        return "100 %"
    if value > 99.9:
        return "over 99.9 %"
    if value > 99 or value < 1:
        return "under 0.1 %" if value < 0.1 else f"{value:.1f} %"
    return f"{value:.0f} %"


def percent_range(share: float, low: float, high: float) -> str:
    """Limits of a share in percent, without the unit; one decimal where the share itself is near none or all."""
    digits = 1 if share > 0.99 or share < 0.01 else 0

    def one(limit: float) -> str:
        text = f"{100 * limit:.{digits}f}"
        return {"100.0": "100", "0.0": "0"}.get(text, text)

    return f"{one(low)} to {one(high)}"


def constant(value: float) -> str:
    """An equilibrium constant with three figures."""
    if value >= 1e5:
        mantissa, _, exponent = f"{value:.1e}".partition("e")
        return f"{mantissa}e{int(exponent)}"
    return f"{float(f'{value:.3g}'):.0f}" if value >= 100 else f"{value:.3g}"


def kelvin(temperature_K: float) -> str:
    """A temperature without needless decimals."""
    return f"{temperature_K:g} K"
