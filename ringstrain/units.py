"""Physical constants and the conversions the boundary needs.

Energies are kcal/mol and temperatures kelvin everywhere inside the package.
"""

from __future__ import annotations

from typing import Final

#: Molar gas constant [kcal/(mol K)]: 8.314462618 J/(mol K), exact in the 2019 SI, over 4184 J/kcal.
R_KCAL: Final = 8.314462618 / 4184.0
#: Boltzmann constant [J/K], exact in the 2019 SI.
K_B: Final = 1.380649e-23
#: Planck constant [J s], exact in the 2019 SI.
PLANCK: Final = 6.62607015e-34
#: Thermochemical calorie [kJ/kcal], exact by definition.
KJ_PER_KCAL: Final = 4.184
#: Temperature when none is asked for [K].
ROOM_TEMPERATURE_K: Final = 298.15
#: Half-width of a 95 % interval in standard deviations of a normal law [-].
Z95: Final = 1.959963984540054


def to_kcal(value: float, unit: str) -> float:
    """Energy in kcal/mol.

    Parameters
    ----------
    value
        Energy [in ``unit``].
    unit
        ``kcal/mol``, ``kJ/mol``, ``J/mol`` or ``cal/mol``.

    Returns
    -------
    float
        The energy [kcal/mol].

    Raises
    ------
    ValueError
        If the unit is none of these.

    Examples
    --------
    >>> round(to_kcal(7.3, "kJ/mol"), 3)
    1.745
    """
    factors = {"kcal/mol": 1.0, "kJ/mol": 1 / KJ_PER_KCAL, "J/mol": 1e-3 / KJ_PER_KCAL, "cal/mol": 1e-3}
    try:
        return value * factors[unit]
    except KeyError:
        raise ValueError(f"{unit!r} is not an energy unit; use kcal/mol or kJ/mol") from None
