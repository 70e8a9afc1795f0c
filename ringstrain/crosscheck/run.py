"""The cross-check itself: find the states again by a force field, set the energies beside the ledger's."""

from __future__ import annotations

import math
from collections.abc import Sequence

from ringstrain.analysis import State, SystemResult, analyze
from ringstrain.crosscheck.fields import Mmff
from ringstrain.crosscheck.molecule import make_molecule, settled
from ringstrain.crosscheck.peers import Peer, read_peers
from ringstrain.crosscheck.records import CrossCheck, MethodName, StateCheck, Stranger, SystemCheck
from ringstrain.crosscheck.remarks import method_notes, warnings_of
from ringstrain.crosscheck.search import SAME_KCAL, Going, Method, Minimum, Search, original, search
from ringstrain.crosscheck.shapes import Form
from ringstrain.crosscheck.xtb import Xtb
from ringstrain.equilibrium import difference_sigma, differing_lines, unknown_difference
from ringstrain.errors import OutOfScope
from ringstrain.ledger import regime_of
from ringstrain.structure.records import Structure
from ringstrain.tables import Tables, load_tables
from ringstrain.units import ROOM_TEMPERATURE_K


def crosscheck(
    structure: Structure | str,
    *,
    method: MethodName = "mmff",
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
    conformers: int | None = None,
    seed: int = 1,
    keep_going: Going | None = None,
) -> CrossCheck:
    """A force field's view of every state, beside the ledger's.

    Parameters
    ----------
    structure
        A Structure, or text for :func:`ringstrain.read`.
    method
        ``"mmff"`` for MMFF94s, ``"xtb"`` for GFN2-xTB (needs the package tblite).
    temperature_K, medium
        Conditions of the ledger [K]; the method itself knows neither.
    tables
        Price tables; those of the package when None.
    conformers
        Conformers to embed [-]; by default a number that grows with rings and bonds that turn.
    seed
        Seed of the embedding.
    keep_going
        Called with what is done and the total [-]; False stops the search.

    Returns
    -------
    CrossCheck
        Energies of all states, forms beyond them, warnings.

    Raises
    ------
    InputError
        If the text is no usable structure, or the package of the method is missing.
    OutOfScope
        If the ledger or the method does not cover the structure, or it cannot be embedded.
    """
    prices = tables if tables is not None else load_tables()
    analysis = analyze(structure, temperature_K=temperature_K, medium=medium, tables=prices)
    molecule = make_molecule(settled(analysis))
    slow: Method | None = Xtb(molecule) if method == "xtb" else None
    found = search(analysis, molecule, slow=slow, conformers=conformers, seed=seed, keep_going=keep_going)
    if not found.minima:
        raise OutOfScope("No conformer of this structure can be embedded.", "Check the configuration of fused rings.")
    peers = [peer for peer in read_peers() if peer.method == method]
    systems = tuple(
        _system(number, result, found, prices, peers) for number, result in enumerate(analysis.ring_systems)
    )
    return CrossCheck(
        analysis=analysis,
        method=method,
        method_name=slow.name if slow else Mmff.name,
        conformers=found.tried,
        rejected=found.rejected,
        complete=found.complete,
        systems=systems,
        notes=method_notes(analysis, method, peers, polar=any(s.polar for s in systems)),
    )


def _system(number: int, result: SystemResult, found: Search, tables: Tables, peers: Sequence[Peer]) -> SystemCheck:
    """One ring system: states, strangers, warnings."""
    lowest: dict[str, Minimum] = {}
    counts: dict[str, int] = {}
    strangers: dict[tuple[object, ...], list[Minimum]] = {}
    for minimum in found.minima:
        form = minimum.forms[number]
        if not form.state:
            strangers.setdefault(form.signature, []).append(minimum)
            continue
        id = original(result, form.state)
        lowest.setdefault(id, minimum)
        counts[id] = counts.get(id, 0) + 1
    favoured = result.states[0]
    base = lowest.get(favoured.id)
    states = []
    for state in result.states:
        id = state.equivalent_to or state.id
        ledger, sigma, polar = ledger_gap(favoured, state, tables)
        own = lowest.get(id)
        fate = found.fates.get((number, id))
        same = id == favoured.id
        states.append(
            StateCheck(
                id=state.id,
                shapes=state.shapes,
                equivalent_to=state.equivalent_to,
                minima=counts.get(id, 0),
                ledger_kcal=ledger,
                ledger_uncertainty_kcal=sigma,
                method_kcal=None if own is None or base is None else own.energy_kcal - base.energy_kcal,
                method_uncertainty_kcal=0.0 if same else _method_sigma(peers, _part(state, polar=polar)),
                fate="" if own is not None or fate is None else _fate(fate),
            )
        )
    beyond = tuple(
        sorted(
            (
                Stranger(
                    shapes=own[0].forms[number].shapes,
                    torsions=tuple(tuple(round(t, 1) for t in ring) for ring in own[0].forms[number].torsions),
                    minima=len(own),
                    method_kcal=None if base is None else own[0].energy_kcal - base.energy_kcal,
                )
                for own in _merged(strangers)
            ),
            key=lambda s: (math.inf if s.method_kcal is None else s.method_kcal, s.torsions),
        )
    )
    polar = any(ledger_gap(favoured, state, tables)[2] for state in result.states)
    return SystemCheck(
        states=tuple(states), strangers=beyond, polar=polar, warnings=warnings_of(result, states, beyond)
    )


def _merged(strangers: dict[tuple[object, ...], list[Minimum]]) -> list[list[Minimum]]:
    """Forms of one energy and shape are symmetry copies or mirror images: they count once."""
    merged: list[list[Minimum]] = []
    for own in strangers.values():
        names = _names(own[0])
        twin = next(
            (
                other
                for other in merged
                if abs(other[0].energy_kcal - own[0].energy_kcal) < SAME_KCAL and _names(other[0]) == names
            ),
            None,
        )
        if twin is None:
            merged.append(list(own))
    return merged


def _names(minimum: Minimum) -> list[list[str]]:
    """Shapes of the rings of each system, in no order."""
    return [sorted(form.shapes) for form in minimum.forms]


def _fate(form: Form) -> str:
    """Where a state went, in a few characters: an id or shapes."""
    return form.state or ", ".join(form.shapes)


def _part(state: State, *, polar: bool) -> str:
    """Which part of the published equilibria a state is like."""
    return "sugars" if state.form else "polar" if polar else "other"


def _method_sigma(peers: Sequence[Peer], part: str) -> float | None:
    """How far the method is off on published equilibria of this kind, root mean square [kcal/mol]."""
    return next((peer.rms_kcal for peer in peers if peer.part == part), None)


def ledger_gap(favoured: State, state: State, tables: Tables) -> tuple[float | None, float | None, bool]:
    """Ledger's free energy of a state above another one, its standard uncertainty, and whether polar lines decide.

    Parameters
    ----------
    favoured, state
        Two states of one ring system.
    tables
        Tables with the model terms.

    Returns
    -------
    tuple
        Both [kcal/mol], None when a contact without a price decides; True when a differing line is polar.
    """
    first, second = favoured.detail.ledger, state.detail.ledger
    lines = differing_lines(first, second)
    regime = regime_of(lines)
    polar = regime == "polar"
    if unknown_difference(first, second):
        return None, None, polar
    prices = difference_sigma(first.variables, second.variables)
    model = tables.model_terms.get(regime, 0.0) if lines else 0.0
    return second.total_kcal - first.total_kcal, math.hypot(prices, model), polar
