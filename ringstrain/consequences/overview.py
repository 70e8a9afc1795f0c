"""Everything a structure does, class by class, and the reactivity document."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from ringstrain.analysis import Analysis
from ringstrain.consequences.answer import CLASSES, check_class, find
from ringstrain.consequences.finding import Finding, Verdict
from ringstrain.consequences.reduction import REAGENTS as KETONE_REAGENTS
from ringstrain.consequences.request import Request
from ringstrain.consequences.rulebook import rule
from ringstrain.consequences.scene import has_boat, scenes
from ringstrain.structure.edit import mirror, tidy_smiles
from ringstrain.structure.read import read
from ringstrain.tables.records import Tables
from ringstrain.units import R_KCAL

_ORDER: tuple[Verdict, ...] = ("open", "needs the flip", "needs a boat", "locked out")


@dataclass(frozen=True, slots=True, kw_only=True)
class Reactivity:
    """Findings of a structure.

    Attributes
    ----------
    analysis
        States and prices behind it.
    reaction
        Class that was asked for, empty for the overview.
    findings
        Class by class, the largest share first.
    alternatives
        The same question with other reagent classes, for the classes where the reagent turns the outcome.
    notes
        What the reader should know.
    """

    analysis: Analysis
    reaction: str
    findings: tuple[Finding, ...]
    alternatives: tuple[Finding, ...] = ()
    notes: tuple[str, ...] = ()

    def as_dict(self) -> dict[str, Any]:
        """The reactivity document, ready for JSON."""
        return {
            **self.analysis.head("reactivity"),
            "reaction": self.reaction or None,
            "findings": [finding.as_dict() for finding in self.findings],
            "alternatives": [finding.as_dict() for finding in self.alternatives],
            "notes": list(self.notes),
        }


def react(
    analysis: Analysis, reaction: str = "", request: Request | None = None, tables: Tables | None = None
) -> Reactivity:
    """What a structure does, in one class of reaction or in all.

    Parameters
    ----------
    analysis
        A priced structure; never changed.
    reaction
        Class of reaction; empty for all.
    request
        Reagents; the usual ones when None.
    tables
        Price tables for epimers and products; those of the package when None.

    Returns
    -------
    Reactivity
        Findings class by class.

    Raises
    ------
    UsageError
        If the class or a reagent is unknown.

    Examples
    --------
    >>> from ringstrain import analyze
    >>> [f.verdict for f in react(analyze("C[C@H]1CCCC[C@@H]1Br"), "e2").findings]
    ['needs the flip']
    """
    asked = request or Request()
    if reaction:
        name = check_class(reaction)
        alternatives: tuple[Finding, ...] = ()
        if name == "reduction" and not asked.reagent and not asked.nucleophile:
            alternatives = tuple(
                finding
                for reagent in KETONE_REAGENTS[1:]
                for finding in find(analysis, name, Request(reagent=reagent), tables)
            )
        found = find(analysis, name, asked, tables)
        return Reactivity(
            analysis=analysis,
            reaction=name,
            findings=found,
            alternatives=alternatives,
            notes=_notes(analysis, found),
        )
    plain = Request(nucleophile=asked.nucleophile, base=asked.base, electrophile=asked.electrophile)
    everything = tuple(finding for name in CLASSES for finding in find(analysis, name, plain, tables))
    return Reactivity(analysis=analysis, reaction="", findings=everything, notes=_notes(analysis, everything))


def _notes(analysis: Analysis, findings: tuple[Finding, ...]) -> tuple[str, ...]:
    notes = list(analysis.notes)
    drawn = any(finding.product_smiles and "@" in finding.product_smiles for finding in findings)
    if drawn and any(scene.settled.configurations != scene.structure.configurations for scene in scenes(analysis)):
        notes.append("A centre without configuration becomes one in the product: relative configuration is written.")
    if findings:
        notes.extend(_doubts(analysis))
        notes.extend(_ties(analysis, findings))
    if findings and analysis.temperature_K < rule("exchange-limit").number:
        notes.append(
            "At this temperature a ring flips more slowly than it reacts: shares follow ground-state populations, and "
            "rates beside an epimer do not hold."
        )
    if analysis.medium == "protic" or analysis.conditions.medium == "protic":
        notes.append("Amines and acids may be ionised in this medium.")
    return tuple(notes)


def _doubts(analysis: Analysis) -> list[str]:
    """Reasons not to trust the rules on this molecule, whatever the class."""
    found = []
    for scene in scenes(analysis):
        where = f"Ring system {scene.number + 1}: " if len(analysis.ring_systems) > 1 else ""
        equilibrium = scene.result.equilibrium
        if has_boat(scene.states[0]):
            found.append(f"{where}the best shape is a twist-boat; rules for chairs may not hold.")
        if scene.is_rough:
            found.append(f"{where}a contact has no tabulated price; populations are rough.")
        if equilibrium is not None and equilibrium.regime == "polar":
            found.append(f"{where}polar groups meet; populations depend on the solvent (--medium).")
        if any(analysis.structure.atoms[a].number != 6 for a in scene.ring_atoms):
            found.append(f"{where}heteroatom in the ring; the numbers of the rules come from carbocycles.")
    return [note[0].upper() + note[1:] for note in found]


def _ties(analysis: Analysis, findings: tuple[Finding, ...]) -> list[str]:
    """Classes whose two main products come out about equal, mirror images counted as one."""
    found = []
    for name in dict.fromkeys(finding.reaction for finding in findings):
        totals: dict[str, float] = {}
        for finding in findings:
            if finding.reaction == name and finding.product_smiles and finding.share is not None:
                image = tidy_smiles(mirror(read(finding.product_smiles)))
                key = min(finding.product_smiles, image)
                totals[key] = totals.get(key, 0.0) + finding.share
        best = sorted(totals.values(), reverse=True)[:2]
        close = math.exp(rule("about-equal").number / (R_KCAL * analysis.temperature_K))
        if len(best) == 2 and best[0] < close * best[1]:
            found.append(f"{name}: the two main products come out about equal; the difference is within the error.")
    return found


def best_of(findings: tuple[Finding, ...]) -> tuple[Finding, ...]:
    """One finding for each class and reacting atoms: the most accessible, then the largest share."""
    kept: dict[tuple[str, int, tuple[int, ...]], Finding] = {}
    for finding in findings:
        key = (finding.reaction, finding.ring_system, finding.leaving_atoms)
        rival = kept.get(key)
        if rival is None or _rank(finding) < _rank(rival):
            kept[key] = finding
    return tuple(kept.values())


def _rank(finding: Finding) -> tuple[int, float, float]:
    return _ORDER.index(finding.verdict), finding.cost_kcal or 0.0, -(finding.share or 0.0)
