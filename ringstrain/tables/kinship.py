"""Names a table row may call a group, and claims turned into energies."""

from __future__ import annotations

import math

from ringstrain.tables.groups import Group
from ringstrain.tables.records import Claim, Tables
from ringstrain.units import R_KCAL, to_kcal

_REFERENCE_T = 298.15


class StandIn:
    """A name to look under and the standard uncertainty that using it adds [kcal/mol]."""

    __slots__ = ("extra", "name")

    def __init__(self, name: str, extra: float) -> None:
        self.name = name
        self.extra = extra


def kin_of(tables: Tables, group: Group) -> list[StandIn]:
    """Stand-ins of kin.csv for a group, by key or by class."""
    wanted = [group.key] if group.tabulated else []
    wanted.append(f"class:{group.kind}" + (" with H" if group.donor else ""))
    names: list[StandIn] = []
    for who in wanted:
        names.extend(
            StandIn(claim.groups[1], claim.uncertainty or 0.0)
            for claim in tables.kin(who)
            if claim.groups[1] != group.key
        )
    return names


def energy_of(claim: Claim) -> float:
    """A claim's value in kcal/mol; ratios and fractions of the axial form become free energies.

    Raises
    ------
    ValueError
        If the claim has no value or is no energy.
    """
    if claim.value is None:
        raise ValueError(f"{claim.row} has no value")
    temperature = claim.temperature_K or _REFERENCE_T
    if claim.unit == "ratio":
        return -R_KCAL * temperature * math.log(claim.value)
    if claim.unit in ("fraction", "percent"):
        x = claim.value / (100.0 if claim.unit == "percent" else 1.0)
        return -R_KCAL * temperature * math.log((1 - x) / x)
    return to_kcal(claim.value, claim.unit)
