"""Which stereoisomer fits observed couplings, and which further proton would tell the best two apart."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import networkx as nx

from ringstrain.advice import relation_words
from ringstrain.analysis import analyze
from ringstrain.consequences.assignment import Assignment, Candidate, NextProton, Unranked, Verdict
from ringstrain.consequences.nmr import Signal, find_signals
from ringstrain.consequences.observations import Fit, Observation, fit_atom
from ringstrain.errors import InputError, OutOfScope, UsageError
from ringstrain.isomers import rank_isomers
from ringstrain.structure.records import Structure
from ringstrain.tables import Tables, load_tables
from ringstrain.tables.conditions import make_conditions
from ringstrain.tables.spectra import SpectralTables, load_spectra
from ringstrain.units import ROOM_TEMPERATURE_K

#: Odds between best and second from which the answer counts as decided [-].
DECIDED_ODDS = 20.0
#: Mean square deviation in standard deviations beyond which not even the best candidate fits.
POOR_FIT = 4.0
#: Log odds a further proton must promise to be worth naming.
WORTH_LOOKING = 2.0
MAX_ISOMERS = 256
MAX_MAPPINGS = 1000


@dataclass(frozen=True, slots=True)
class _Entry:
    """A candidate structure before it is scored."""

    structure: Structure
    inverted_atoms: tuple[int, ...] | None


@dataclass(frozen=True, slots=True)
class _Scored:
    """A scored candidate with its signals and the mapping that fits best."""

    entry: _Entry
    signals: tuple[Signal, ...]
    mapping: dict[int, int]
    fits: tuple[Fit, ...]

    @property
    def log_likelihood(self) -> float:
        return sum(fit.log_likelihood for fit in self.fits)


def assign(
    structure: Structure,
    observations: Sequence[Observation],
    *,
    candidates: Sequence[Structure] = (),
    at: Sequence[int] | None = None,
    temperature_K: float = ROOM_TEMPERATURE_K,
    medium: str = "nonpolar",
    tables: Tables | None = None,
    spectra: SpectralTables | None = None,
) -> Assignment:
    """Stereoisomers ranked by how well predicted couplings fit the observed ones.

    Parameters
    ----------
    structure
        The constitution, whose numbering the observations use; its own configuration counts for nothing more.
    observations
        What was observed.
    candidates
        Isomers to compare; all stereoisomers over the ring centres when empty.
    at
        Centres to vary when no candidates are given (zero-based atoms).
    temperature_K, medium
        Conditions of the spectrum.
    tables, spectra
        Price and NMR tables; those of the package when None.

    Returns
    -------
    Assignment
        Best first.

    Raises
    ------
    UsageError
        If an observed proton is no ring hydrogen, a candidate has another constitution, or there are too many.
    OutOfScope
        If no candidate can be predicted.
    """
    prices = tables if tables is not None else load_tables()
    rows = spectra if spectra is not None else load_spectra()
    _check_protons(structure, observations)
    entries, unranked = _entries(structure, candidates, at, temperature_K, medium, prices)
    scored: list[_Scored] = []
    for entry in entries:
        outcome = _score(structure, entry, observations, temperature_K, medium, prices, rows)
        if isinstance(outcome, Unranked):
            unranked.append(outcome)
        else:
            scored.append(outcome)
    if not scored:
        reason = unranked[0].reason if unranked else "There is no candidate."
        raise OutOfScope(f"No candidate has a predicted spectrum: {reason}", "Give candidates or another medium.")
    scored.sort(key=lambda s: (-s.log_likelihood, s.entry.structure.smiles))
    top = scored[0].log_likelihood
    total = math.fsum(math.exp(s.log_likelihood - top) for s in scored)
    ranked = tuple(_candidate(s, math.exp(s.log_likelihood - top) / total) for s in scored)
    odds = math.exp(min(top - scored[1].log_likelihood, 700.0)) if len(scored) > 1 else None
    conditions = make_conditions(prices, temperature_K=temperature_K, medium=medium)
    return Assignment(
        structure=structure,
        temperature_K=temperature_K,
        medium=conditions.solvent or conditions.medium,
        observations=tuple(observations),
        candidates=ranked,
        unranked=tuple(unranked),
        verdict=_verdict(ranked[0], odds),
        odds=odds,
        next_proton=_next_proton(scored, observations, rows) if len(scored) > 1 else None,
        notes=_notes(unranked, renumbered=not candidates and any(not _as_drawn(s, observations) for s in scored[:2])),
    )


def _verdict(best: Candidate, odds: float | None) -> Verdict:
    if best.mean_square > POOR_FIT:
        return "none fits"
    if odds is None:
        return "one candidate"
    return "decided" if odds >= DECIDED_ODDS else "not decided"


def _as_drawn(scored: _Scored, observations: Sequence[Observation]) -> bool:
    """True when the observed protons kept their numbers."""
    return all(scored.mapping[o.atom] == o.atom for o in observations)


def _notes(unranked: Sequence[Unranked], *, renumbered: bool) -> tuple[str, ...]:
    notes = ["No isomer is preferred beforehand: stability does not enter the ranking."]
    if renumbered:
        notes.append("Equal places of the skeleton carry interchangeable numbers; labels count as the isomer is drawn.")
    if unranked:
        notes.append(f"{len(unranked)} candidate{'s' if len(unranked) > 1 else ''} could not be ranked.")
    return tuple(notes)


def _check_protons(structure: Structure, observations: Sequence[Observation]) -> None:
    """Refuse names that mean no carbon with a hydrogen."""
    for observation in observations:
        atom = observation.atom
        if atom >= len(structure.atoms):
            raise UsageError(
                f"{observation.name} names atom {atom + 1}, but there are {len(structure.atoms)}.",
                "Count the atoms of the structure from 1, hydrogens left out.",
            )
        record = structure.atoms[atom]
        if record.number != 6 or not record.hydrogens:
            raise UsageError(
                f"{observation.name}: atom {atom + 1} ({record.element}) is no carbon with a hydrogen.",
                "`ringstrain nmr` lists the hydrogens and their numbers.",
            )


def _entries(
    structure: Structure,
    candidates: Sequence[Structure],
    at: Sequence[int] | None,
    temperature_K: float,
    medium: str,
    tables: Tables,
) -> tuple[list[_Entry], list[Unranked]]:
    """Candidate structures, and isomers that cannot exist."""
    if candidates:
        return [_Entry(candidate, None) for candidate in candidates], []
    ranking = rank_isomers(structure, at=at, temperature_K=temperature_K, medium=medium, tables=tables)
    if len(ranking.isomers) > MAX_ISOMERS:
        raise UsageError(
            f"There are {len(ranking.isomers)} isomers; {MAX_ISOMERS} is the limit.", "Restrict the centres with --at."
        )
    entries = [_Entry(isomer.structure, isomer.inverted_atoms) for isomer in ranking.isomers]
    return entries, [Unranked(smiles=i.smiles, reason=i.reason) for i in ranking.impossible]


def _score(
    structure: Structure,
    entry: _Entry,
    observations: Sequence[Observation],
    temperature_K: float,
    medium: str,
    tables: Tables,
    spectra: SpectralTables,
) -> _Scored | Unranked:
    """The candidate with its best mapping, or why it has none."""
    smiles = entry.structure.smiles
    mappings = tuple(_mappings(structure, entry.structure, observations))
    if not mappings:
        raise UsageError(f"{smiles} has another constitution than the structure.", "Candidates differ in stereo only.")
    try:
        analysis = analyze(entry.structure, temperature_K=temperature_K, medium=medium, tables=tables)
    except (InputError, OutOfScope) as error:
        return Unranked(smiles=smiles, reason=error.problem)
    signals = find_signals(analysis, tables, spectra)
    best: _Scored | None = None
    for mapping in mappings:
        fits = _fit_all(observations, signals, mapping, spectra)
        if fits is None:
            continue
        outcome = _Scored(entry, signals, mapping, fits)
        if best is None or outcome.log_likelihood > best.log_likelihood + 1e-9:
            best = outcome
    if best is not None:
        return best
    if any(s.splittings() is None for s in signals):
        return Unranked(smiles=smiles, reason="An unpriced contact decides its populations.")
    raise UsageError(
        "An observed proton is no hydrogen of a saturated six-membered ring, or a carbon has too few hydrogens.",
        "`ringstrain nmr` lists the hydrogens and their numbers.",
    )


def _fit_all(
    observations: Sequence[Observation], signals: Sequence[Signal], mapping: dict[int, int], spectra: SpectralTables
) -> tuple[Fit, ...] | None:
    """Fits of all observations under one mapping of atoms, in their order."""
    found: dict[str, Fit] = {}
    for atom in dict.fromkeys(o.atom for o in observations):
        own = [o for o in observations if o.atom == atom]
        fits = fit_atom(own, [s for s in signals if s.hydrogen.atom == mapping[atom]], spectra)
        if fits is None:
            return None
        found.update((fit.name, fit) for fit in fits)
    return tuple(found[o.name] for o in observations)


def _mappings(
    structure: Structure, candidate: Structure, observations: Sequence[Observation]
) -> Iterator[dict[int, int]]:
    """Ways to lay the structure on a candidate, stereo aside, that differ for the observed protons.

    Equal places of a symmetrical constitution carry interchangeable numbers: which of them a proton was called after
    is nobody's knowledge.
    """
    first, second = _graph(structure), _graph(candidate)
    matcher = nx.algorithms.isomorphism.GraphMatcher(
        first, second, node_match=lambda a, b: a["kind"] == b["kind"], edge_match=lambda a, b: a["order"] == b["order"]
    )
    seen: set[tuple[int, ...]] = set()
    if structure.atoms == candidate.atoms and structure.bonds == candidate.bonds:
        seen.add(tuple(o.atom for o in observations))
        yield {int(atom): int(atom) for atom in structure.fragment}
    for number, mapping in enumerate(matcher.isomorphisms_iter()):
        if number >= MAX_MAPPINGS:
            return
        key = tuple(mapping[o.atom] for o in observations)
        if key not in seen:
            seen.add(key)
            yield dict(mapping)


def _graph(structure: Structure) -> nx.Graph[int]:
    """The constitution as a graph; a hydrogen isotope or charge makes an atom another one."""
    graph: nx.Graph[int] = nx.Graph()
    for index in structure.fragment:
        atom = structure.atoms[index]
        graph.add_node(int(index), kind=(atom.number, atom.charge, atom.isotope, atom.hydrogens))
    for bond in structure.bonds:
        if bond.begin in graph and bond.end in graph:
            graph.add_edge(int(bond.begin), int(bond.end), order=0 if bond.aromatic else bond.order)
    return graph


def _candidate(scored: _Scored, share: float) -> Candidate:
    count = sum(max(1, len(fit.pairings)) for fit in scored.fits)
    return Candidate(
        smiles=scored.entry.structure.smiles,
        relation=relation_words(scored.entry.structure),
        inverted_atoms=scored.entry.inverted_atoms,
        likelihood=share,
        log_likelihood=scored.log_likelihood,
        mean_square=sum(fit.squares for fit in scored.fits) / count,
        fits=scored.fits,
        atoms=tuple(next(s.hydrogen.atom for s in scored.signals if s.label == fit.label) for fit in scored.fits),
    )


def _next_proton(
    scored: Sequence[_Scored], observations: Sequence[Observation], spectra: SpectralTables
) -> NextProton | None:
    """The unobserved carbon whose protons promise the best odds between the two best candidates."""
    first, second = scored[0], scored[1]
    known = {o.atom for o in observations}
    best: tuple[float, NextProton] | None = None
    for atom, image in first.mapping.items():
        here = [s for s in first.signals if s.hydrogen.atom == image]
        there = [s for s in second.signals if s.hydrogen.atom == second.mapping[atom]]
        if atom in known or not here or len(here) != len(there):
            continue
        promise = min(_promise(here, there, spectra), _promise(there, here, spectra))
        if promise >= WORTH_LOOKING and (best is None or promise > best[0] + 1e-9):
            odds = math.exp(min(promise, 700.0))
            proton = NextProton(atom=atom, first=_words(here), second=_words(there), odds=odds)
            best = (promise, proton)
    return best[1] if best else None


def _promise(true: Sequence[Signal], rival: Sequence[Signal], spectra: SpectralTables) -> float:
    """Log odds that the signals of one candidate would give against those of another."""
    observed = [Observation(name=s.label, atom=s.hydrogen.atom, couplings_Hz=s.splittings() or ()) for s in true]
    own, other = fit_atom(observed, true, spectra), fit_atom(observed, rival, spectra)
    if own is None or other is None:
        return 0.0
    return sum(f.log_likelihood for f in own) - sum(f.log_likelihood for f in other)


def _words(signals: Sequence[Signal]) -> tuple[str, ...]:
    """Multiplets in short: word and couplings."""
    found = []
    for signal in signals:
        multiplet = signal.multiplet
        if multiplet is not None:
            found.append(f"{multiplet.word}, {', '.join(f'{j:.1f}' for j in multiplet.splittings_Hz)} Hz")
    return tuple(found)
