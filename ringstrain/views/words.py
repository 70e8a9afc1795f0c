"""Plain English for groups, positions and shapes."""

from __future__ import annotations

from collections.abc import Sequence

#: Group keys whose name in a sentence differs from the key.
_SPOKEN = {
    "deuterio": "deuterium",
    "tritio": "tritium",
    "fluoro": "fluorine",
    "chloro": "chlorine",
    "bromo": "bromine",
    "iodo": "iodine",
    "hydroxy": "hydroxyl",
    "carboxy": "carboxyl",
    "carboxylato": "carboxylate",
    "ammonio": "ammonium",
    "trimethylammonio": "trimethylammonium",
    "trimethylphosphonio": "trimethylphosphonium",
    "sulfido": "thiolate",
    "sulfanyl": "thiol",
}
_NUMBERS = ("no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten", "eleven", "twelve")


def spoken(key: str, kind: str = "") -> str:
    """A group key as a chemist says it.

    Parameters
    ----------
    key
        Table key, or the label of a group without one (class and formula).
    kind
        Class of the group, for labels.
    """
    if key in _SPOKEN:
        return _SPOKEN[key]
    if kind and key.startswith(f"{kind} "):
        formula = key.removeprefix(f"{kind} ")
        return f"{formula} side chain" if kind.endswith("alkyl") else f"{formula} group"
    return key


def plural(word: str) -> str:
    """Several of them."""
    if word.endswith((" group", " side chain", "yl", "ine", "ium", "ate", "ol")):
        return word + "s"
    return f"{word} groups"


def number(count: int) -> str:
    """A small number in letters."""
    return _NUMBERS[count] if count < len(_NUMBERS) else str(count)


def listed(parts: Sequence[str]) -> str:
    """Items joined as in a sentence."""
    if len(parts) < 2:
        return "".join(parts)
    return f"{', '.join(parts[:-1])} and {parts[-1]}"


def atom_numbers(atoms: Sequence[int]) -> str:
    """Atoms counted from 1."""
    return ", ".join(str(atom + 1) for atom in atoms)
