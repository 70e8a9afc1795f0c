"""What a ranking means at the bench: the best single inversion, its gain, and the ceiling of equilibration."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ringstrain.geometry import Geometry, neighbour_orders
from ringstrain.ranking import Isomer, Ranking
from ringstrain.ringgraph import find_ring_systems
from ringstrain.structure.cip import cip_labels
from ringstrain.structure.records import Structure
from ringstrain.units import R_KCAL, Z95


@dataclass(frozen=True, slots=True, kw_only=True)
class Advice:
    """The single inversion that pays best.

    Attributes
    ----------
    atom
        Centre to invert (zero-based).
    smiles
        What it gives.
    gain_kcal
        Free energy gained [kcal/mol].
    uncertainty_kcal
        Its standard uncertainty [kcal/mol].
    ratio, ratio_low, ratio_high
        Product to starting isomer at equilibrium, with 95 % limits [-].
    verdict
        ``"pays"``, ``"too close to call"`` or ``"does not pay"``.
    ceiling
        Share the best isomer of the whole set can reach [-]; None when an unpriced contact decides.
    """

    atom: int
    smiles: str
    gain_kcal: float
    uncertainty_kcal: float
    ratio: float
    ratio_low: float
    ratio_high: float
    verdict: str
    ceiling: float | None


def advise(ranking: Ranking) -> Advice | None:
    """The single inversion of the input that pays best, or None when the input is open or has no free centre.

    Parameters
    ----------
    ranking
        A ranking whose input gave every centre.

    Returns
    -------
    Advice or None
        "Too close to call" when the 95 % interval of the ratio crosses 1:1.
    """
    if ranking.input_rank is None:
        return None
    start = ranking.isomers[ranking.input_rank - 1]
    single = [i for i in ranking.isomers if i.inverted_atoms is not None and len(i.inverted_atoms) == 1]
    if not single:
        return None
    best = min(single, key=lambda isomer: isomer.dG_kcal)
    gain = start.dG_kcal - best.dG_kcal
    sigma = uncertainty_between(start, best)
    rt = R_KCAL * ranking.temperature_K
    ratio, low, high = (math.exp(max(min(x / rt, 50.0), -50.0)) for x in (gain, gain - Z95 * sigma, gain + Z95 * sigma))
    verdict = "too close to call" if low < 1 < high else "pays" if gain > 0 else "does not pay"
    assert best.inverted_atoms is not None
    return Advice(
        atom=best.inverted_atoms[0],
        smiles=best.smiles,
        gain_kcal=gain,
        uncertainty_kcal=sigma,
        ratio=ratio,
        ratio_low=low,
        ratio_high=high,
        verdict=verdict,
        ceiling=ranking.isomers[0].share,
    )


def uncertainty_between(first: Isomer, second: Isomer) -> float:
    """Standard uncertainty of the free energy difference of two isomers [kcal/mol]; what is common cancels."""
    totals: dict[tuple[str, str], list[float]] = {}
    for sign, isomer in ((1, first), (-1, second)):
        for row, group, count, sigma in isomer.variables:
            entry = totals.setdefault((row, group), [0.0, sigma])
            entry[0] += sign * count
    return math.sqrt(sum((count * sigma) ** 2 for count, sigma in totals.values()))


def relation_words(structure: Structure) -> str:
    """Cis and trans in words and the face of each centre, ring by ring.

    Parameters
    ----------
    structure
        One isomer, every centre given.

    Returns
    -------
    str
        For example ``"trans 2b 5a"``; faces count relative to the lowest-numbered centre of each ring, b being its
        own. At a ring fusion the hydrogen or outside group decides.
    """
    systems, _ = find_ring_systems(structure)
    words = []
    for system in systems:
        orders, _ = neighbour_orders(structure, system)
        geometry = Geometry(structure=structure, system=system, orders=orders)
        for number, ring in enumerate(system.rings):
            faces = {}
            for place, atom in enumerate(ring.atoms):
                if structure.configurations[atom] is not None and atom in orders:
                    face = _main_face(geometry, number, place)
                    if face:
                        faces[atom] = face
            if len(faces) < 2:
                continue
            first = faces[min(faces)]
            listed = " ".join(f"{a + 1}{'b' if faces[a] == first else 'a'}" for a in sorted(faces))
            lead = ""
            if len(faces) == 2:
                lead = "cis " if len(set(faces.values())) == 1 else "trans "
            words.append(f"{lead}{listed}")
    return "; ".join(dict.fromkeys(words))


def _main_face(geometry: Geometry, number: int, place: int) -> int:
    """Face of the outside group of a ring atom, of its hydrogen when rings take the other site."""
    members = geometry.system.atom_set
    sites = geometry.sites[number][place]
    outside = [s for s in sites if s.neighbour not in members]
    if len(outside) == 2:
        outside.sort(key=lambda s: (s.neighbour < 0, -geometry.structure.atoms[s.neighbour].number, s.neighbour))
    return outside[0].face if outside else 0


def labels_text(structure: Structure) -> str:
    """CIP labels as ``2S,5R``; centres without one are left out."""
    return ",".join(f"{atom + 1}{label}" for atom, label in sorted(cip_labels(structure).items()))


def ratio_text(ranking: Ranking, most: int = 4) -> str:
    """Diastereomer ratio in percent, most stable first, such as ``68:25:5:2``."""
    shares = [isomer.share for isomer in ranking.isomers[:most]]
    if any(share is None for share in shares):
        return "not determined"
    parts = [f"{100 * (share or 0.0):.0f}" if (share or 0.0) >= 0.01 else "<1" for share in shares]
    return ":".join(parts) + (":..." if len(ranking.isomers) > most else "")
