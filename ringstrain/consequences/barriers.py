"""Barriers to ring inversion by the kind of ring."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ringstrain.results import SystemResult
from ringstrain.ringnames import name_ring
from ringstrain.tables import Claim, Tables
from ringstrain.tables.spectra import SpectralTables
from ringstrain.units import to_kcal

#: Names of rings the price tables do not name but the barrier rows do.
_FURTHER_NAMES = {
    "O-C-O-C-O-C": "1,3,5-trioxane",
    "S-C-S-C-S-C": "1,3,5-trithiane",
    "S-S-C-C-C-C": "1,2-dithiane",
    "Se-C-C-C-C-C": "selenane",
    "NR-C-C-NR-C-C": "N,N'-dimethylpiperazine",
    "tetralin": "cyclohexene",
    "1,1-difluorocyclohexane": "cyclohexane",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Barrier:
    """A tabulated barrier to ring inversion, mean of both directions.

    Attributes
    ----------
    ring
        Ring or compound it was measured on.
    dg_kcal
        Free energy of activation when no enthalpy and entropy are known [kcal/mol].
    dh_kcal, ds_kcal_per_K
        Enthalpy [kcal/mol] and entropy [kcal/(mol K)] of activation, or None.
    sigma_kcal
        Standard uncertainty [kcal/mol].
    estimated
        True when the ring bears groups the measured one did not.
    row, source, known_by
        Where it comes from.
    """

    ring: str
    dg_kcal: float
    dh_kcal: float | None = None
    ds_kcal_per_K: float | None = None
    sigma_kcal: float
    estimated: bool
    row: str
    source: str
    known_by: str

    def at(self, temperature_K: float) -> float:
        """The barrier at a temperature [kcal/mol]."""
        if self.dh_kcal is None or self.ds_kcal_per_K is None:
            return self.dg_kcal
        return self.dh_kcal - temperature_K * self.ds_kcal_per_K


def find_barrier(result: SystemResult, tables: Tables, spectra: SpectralTables) -> Barrier | None:
    """The tabulated barrier for a ring system, or None."""
    structure = result.states[0].detail.shapes.geometry.structure
    names = [name_ring(structure, result.system, number) for number in range(len(result.rings))]
    if len(names) == 1:
        if result.system.companions or result.system.large:
            return None
        name = _FURTHER_NAMES.get(names[0].name, names[0].name)
    elif len(names) == 2 and len(result.system.blocks) == 1 and all(n.is_carbocycle for n in names):
        name = "cis-decalin"
    else:
        return None
    claims = [
        c for c in tables.claims if c.table == "ringstates" and c.ring.lower() == name.lower() and _is_flip_row(c)
    ]
    by_quantity = {c.quantity: c for c in reversed(claims)}
    lone = by_quantity.get("dG_act")
    estimated = _bears_more(result, name) or names[0].name == "tetralin"
    dh, ds = by_quantity.get("dH_act"), by_quantity.get("dS_act")
    chosen = dh if dh is not None and ds is not None else lone
    if chosen is None or chosen.value is None:
        return None
    wide = spectra.general("substituted barrier").value
    own = to_kcal(chosen.uncertainty, chosen.unit) if chosen.uncertainty is not None else wide
    value = to_kcal(chosen.value, chosen.unit)
    return Barrier(
        ring=name,
        dg_kcal=value,
        dh_kcal=value if chosen is dh else None,
        ds_kcal_per_K=ds.value / 1000.0 if chosen is dh and ds is not None and ds.value is not None else None,
        sigma_kcal=math.hypot(own, wide) if estimated else own,
        estimated=estimated,
        row=chosen.row,
        source=chosen.source,
        known_by=chosen.known_by,
    )


def _is_flip_row(claim: Claim) -> bool:
    """True for a barrier to inversion; rows of other processes do not carry the word in their name."""
    return "-inv" in claim.id and claim.quantity in ("dG_act", "dH_act", "dS_act") and claim.value is not None


def _bears_more(result: SystemResult, name: str) -> bool:
    """True when the ring bears groups that the measured compound did not."""
    members = result.system.atom_set
    named_methyl = name.lower() in ("n-methylpiperidine", "n,n'-dimethylpiperazine")
    for (ring_atom, atom), group in result.groups.items():
        if atom in members or group.kind in ("hydrogen", "oxo") or group.key in ("deuterio", "tritio"):
            continue
        if named_methyl and result.system.kinds[ring_atom] == "inverting" and group.key == "methyl":
            continue
        return True
    return False
