"""Questions about reactivity answered over an analysis: findings of one class, rates beside the epimer."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace
from importlib import import_module
from typing import get_args

from ringstrain.analysis import Analysis, analyze
from ringstrain.consequences.finding import Finding, Option, ReactionClass, rate_index, settle
from ringstrain.consequences.request import Request
from ringstrain.consequences.scene import Scene, scenes
from ringstrain.errors import RingstrainError, UsageError
from ringstrain.structure.edit import inverted, mirror, tidy_smiles
from ringstrain.tables.records import Tables
from ringstrain.units import Z95

CLASSES: tuple[ReactionClass, ...] = get_args(ReactionClass)
#: Module of each class within this package.
_HOMES: dict[ReactionClass, str] = {
    "e2": "elimination",
    "syn-elimination": "syn_elimination",
    "substitution": "substitution",
    "solvolysis": "solvolysis",
    "epoxide": "epoxides",
    "addition": "addition",
    "reduction": "reduction",
    "enolate": "enolate",
    "acylation": "acylation",
    "oxidation": "oxidation",
    "glycol": "glycol",
    "closure": "closure",
    "semipinacol": "semipinacol",
    "fragmentation": "fragmentation",
}


def check_class(name: str) -> ReactionClass:
    """A class of reaction by its name.

    Raises
    ------
    UsageError
        If there is none.
    """
    for known in CLASSES:
        if name == known:
            return known
    raise UsageError(f"No reaction class is called {name!r}.", f"Use one of {', '.join(CLASSES)}.")


def weigh(analysis: Analysis, reaction: ReactionClass, request: Request, tables: Tables | None = None) -> list[Option]:
    """Options of one class over all ring systems, shares not yet settled.

    Parameters
    ----------
    analysis
        A priced structure; never changed.
    reaction
        Class of reaction.
    request
        Reagents.
    tables
        Price tables for products; those of the package when None.
    """
    module = import_module(f"ringstrain.consequences.{_HOMES[reaction]}")
    options: Callable[[Scene, Request], Sequence[Option]] = module.options
    return [option for scene in scenes(analysis, tables) for option in options(scene, request)]


def find(
    analysis: Analysis, reaction: ReactionClass, request: Request | None = None, tables: Tables | None = None
) -> tuple[Finding, ...]:
    """What a structure does in one class of reaction, the largest share first.

    Parameters
    ----------
    analysis
        A priced structure; never changed.
    reaction
        Class of reaction.
    request
        Reagents; the usual ones when None.
    tables
        Price tables for epimers and products; those of the package when None.

    Returns
    -------
    tuple of Finding
        Empty when the structure has nothing that reacts so.

    Raises
    ------
    UsageError
        If a reagent cannot be read.
    """
    asked = request or Request()
    options = weigh(analysis, reaction, asked, tables)
    beside: dict[tuple[int, ...], tuple[float, float, float, str] | None] = {}
    for option in options:
        if option.centres and option.centres not in beside:
            beside[option.centres] = _beside_epimer(analysis, reaction, asked, options, option.centres, tables)
    compared = []
    for option in options:
        ratio = beside.get(option.centres) if option.centres else None
        if ratio is not None:
            value, low, high, smiles = ratio
            known = value > 0.0 and math.isfinite(value)
            option = replace(
                option,
                finding=replace(
                    option.finding,
                    relative=value if known else None,
                    relative_low=low if known else None,
                    relative_high=high if known else None,
                    relative_to=smiles,
                ),
            )
        compared.append(_modest(option))
    return settle(compared)


def _modest(option: Option) -> Option:
    """A finding that touches a limit of its rule is a direction, not a number to rely on."""
    if any(limit.startswith("(limit)") for limit in option.finding.limits):
        return replace(option, finding=replace(option.finding, confidence="direction only"))
    return option


def relative_rate(
    first: Analysis, second: Analysis, reaction: ReactionClass, request: Request | None = None
) -> tuple[float, float, float] | None:
    """Rate of one compound relative to another in the same class, with 95 % limits [-].

    Parameters
    ----------
    first, second
        Two compounds that react through the same kind of transition state, analysed alike.
    reaction
        Class of reaction.
    request
        Reagents; the usual ones when None.

    Returns
    -------
    tuple or None
        Value, low, high; None when one of them does not react so.
    """
    asked = request or Request()
    a, spread_a = rate_index(weigh(first, reaction, asked))
    b, spread_b = rate_index(weigh(second, reaction, asked))
    if a <= 0.0 or b <= 0.0:
        return None
    factor = math.exp(Z95 * math.hypot(spread_a, spread_b))
    return a / b, a / b / factor, a / b * factor


def _beside_epimer(
    analysis: Analysis,
    reaction: ReactionClass,
    request: Request,
    options: Sequence[Option],
    centres: tuple[int, ...],
    tables: Tables | None,
) -> tuple[float, float, float, str] | None:
    """Rate relative to the epimer with limits and its SMILES; 0 or infinite when one of the two does not react."""
    structure = analysis.structure
    if any(structure.configurations[centre] is None for centre in centres):
        return None
    other = inverted(structure, centres)
    smiles = tidy_smiles(other)
    if smiles in (tidy_smiles(structure), tidy_smiles(mirror(structure))):
        return None
    try:
        epimer = analyze(other, temperature_K=analysis.temperature_K, medium=analysis.medium, tables=tables)
        rivals = weigh(epimer, reaction, request, tables)
    except RingstrainError:
        return None
    own, spread = rate_index(options, centres)
    rival, rival_spread = rate_index(rivals, centres)
    if own <= 0.0 and rival <= 0.0:
        return None
    if own <= 0.0 or rival <= 0.0:
        return (0.0 if own <= 0.0 else math.inf), 0.0, math.inf, smiles
    factor = math.exp(Z95 * math.hypot(spread, rival_spread))
    return own / rival, own / rival / factor, own / rival * factor, smiles
