"""Sentences that go with a cross-check."""

from __future__ import annotations

from collections.abc import Sequence

from ringstrain.analysis import Analysis, SystemResult
from ringstrain.crosscheck.peers import Peer
from ringstrain.crosscheck.records import MethodName, StateCheck, Stranger

#: A form this little above the favoured state is worth naming [kcal/mol].
NEAR_KCAL = 1.0
_HALOGENS = frozenset({9, 17, 35, 53})
_NAMES = {"mmff": "MMFF94s", "xtb": "GFN2-xTB"}


def warnings_of(result: SystemResult, states: Sequence[StateCheck], strangers: Sequence[Stranger]) -> tuple[str, ...]:
    """What does not fit, one sentence each.

    Parameters
    ----------
    result
        The ring system.
    states, strangers
        What the method found.
    """
    found = []
    for state in states:
        if state.equivalent_to is not None:
            continue
        gap = state.difference_kcal
        if gap is not None and state.agrees is False:
            way = "above" if gap > 0 else "below"
            found.append(
                f"State {state.id}: the method puts it {abs(gap):.1f} kcal/mol {way} the ledger, more than the "
                "two uncertainties together allow."
            )
        if state.minima:
            continue
        if state.fate:
            found.append(f"State {state.id} is no minimum: built and let go, it became {state.fate}.")
        elif state.id == result.states[0].id:
            found.append(f"State {state.id}, the favoured one, was not found, so that nothing can be compared.")
        else:
            found.append(f"State {state.id} was neither found nor could it be built.")
    best = min((s.method_kcal for s in states if s.method_kcal is not None), default=None)
    for stranger in strangers:
        if stranger.method_kcal is None or best is None:
            continue
        above = stranger.method_kcal - best
        what = ", ".join(stranger.shapes)
        if above < 0:
            found.append(f"Not in the ledger: a form ({what}) {-above:.1f} kcal/mol below the best state.")
        elif above < NEAR_KCAL:
            found.append(f"Not in the ledger: a form ({what}) only {above:.1f} kcal/mol above the best state.")
    return tuple(found)


def method_notes(analysis: Analysis, method: MethodName, peers: Sequence[Peer], *, polar: bool) -> tuple[str, ...]:
    """What the reader should know about the method.

    Parameters
    ----------
    analysis
        The structure and its conditions.
    method
        Which one.
    peers
        How far the method is off on published equilibria.
    polar
        True when polar lines tell states apart.
    """
    name = _NAMES[method]
    notes = [
        f"{name} energies are those of single molecules in the gas phase, without entropy; the ledger's are free "
        "energies."
    ]
    parts = {peer.part: peer for peer in peers}
    if "polar" in parts and "other" in parts:
        notes.append(
            f"On published equilibria {name} is off by {parts['other'].rms_kcal:.1f} kcal/mol "
            f"(rms, {parts['other'].rows} rows) without and by {parts['polar'].rms_kcal:.1f} "
            f"({parts['polar'].rows} rows) with polar contacts."
        )
    atoms = [analysis.structure.atoms[a] for a in analysis.structure.fragment]
    weak = []
    if polar:
        weak.append("polar contacts or ring heteroatoms tell the states apart")
    if any(atom.number in _HALOGENS for atom in atoms):
        weak.append("halogens")
    if any(atom.charge for atom in atoms):
        weak.append("charges, which no solvent screens here")
    if weak:
        lead = "Little to be trusted here" if method == "mmff" else "To be read with care here"
        notes.append(f"{lead}: {', '.join(weak)}.")
    if analysis.conditions.medium in ("polar", "protic"):
        notes.append(f"The ledger is for a {analysis.conditions.medium} medium; {name} knows no solvent.")
    return tuple(notes)
