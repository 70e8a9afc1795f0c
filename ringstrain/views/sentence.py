"""The headline: one sentence that a chemist can repeat aloud."""

from __future__ import annotations

import math

from ringstrain.analysis import Analysis, State, SystemResult
from ringstrain.equilibrium import Equilibrium, differing_lines
from ringstrain.ledger import Line
from ringstrain.provenance import combined_sigma, scaled
from ringstrain.tables.conditions import Conditions
from ringstrain.units import Z95
from ringstrain.views.forms import describe, form_name, is_flip, same_form, shape_words
from ringstrain.views.look import Look, kelvin, percent, percent_range
from ringstrain.views.words import atom_numbers, listed, number, spoken

#: An estimated line is named in the headline when it makes at least this part of the variance.
_NAMED_PART = 0.2
#: An uncertain difference below this is called too close, above it likely [kcal/mol].
_CLOSE_KCAL = 0.5


def headlines(analysis: Analysis, look: Look) -> tuple[str, ...]:
    """One sentence for each ring system.

    Parameters
    ----------
    analysis
        The answer.
    look
        Units of the sentence.
    """
    several = len(analysis.ring_systems) > 1
    sentences = []
    for place, result in enumerate(analysis.ring_systems, 1):
        sentence = headline(result, analysis.conditions, look)
        if several:
            sentence = f"Ring system {place} (atoms {atom_numbers(result.system.atoms)}): {sentence}"
        sentences.append(sentence)
    return tuple(sentences)


def headline(result: SystemResult, conditions: Conditions, look: Look) -> str:
    """Who wins, by how much and how surely, in one sentence."""
    equilibrium = result.equilibrium
    if equilibrium is None:
        return _locked(result, conditions)
    favoured, other = result.state(equilibrium.favoured), result.state(equilibrium.other)
    lines = differing_lines(favoured.detail.ledger, other.detail.ledger)
    at = f"at {_short_kelvin(conditions.temperature_K)}"
    if equilibrium.regime == "polar" or any(line.polar for line in lines):
        at += f" {conditions.label}"
    if other.equivalent_to is not None and other.equivalent_to == (favoured.equivalent_to or favoured.id):
        return _degenerate(result, favoured, at)
    who = _who(result, favoured)
    if equilibrium.dG_kcal is None:
        return _bounded(result, equilibrium, who, at, lines, look)
    return f"{who}: {_share(result, favoured)} {at}; {_cost(result, equilibrium, lines, look)}."


def _short_kelvin(temperature_K: float) -> str:
    """298.15 K is 298 K in a sentence."""
    return kelvin(math.floor(temperature_K + 0.5) if temperature_K >= 100 else temperature_K)


def _who(result: SystemResult, state: State) -> str:
    """Name of the favoured form and where its groups stand."""
    words = describe(result, state)
    copies = [s for s in same_form(result, state) if s.equivalent_to is not None]
    name = form_name(state)
    if copies:
        name += f" and its equivalent{'s' if len(copies) > 1 else ''} {listed([s.id for s in copies])}"
    return f"{name}, {words}" if words else name


def _share(result: SystemResult, favoured: State) -> str:
    """Population of the favoured form with its limits."""
    members = same_form(result, favoured)
    shares = [s.population for s in members if s.population is not None]
    if not shares:
        return "favoured"
    total = math.fsum(shares)
    low, high = favoured.population_low, favoured.population_high
    if len(members) > 1:
        low, high = _limits_of_two(result, members)
    text = percent(total)
    if low is not None and high is not None and total <= 0.999 and high - low > 5e-4:
        text += f" ({percent_range(total, low, high)})"
    return text


def _limits_of_two(result: SystemResult, members: tuple[State, ...]) -> tuple[float | None, float | None]:
    """Limits of the share of a form of several states, from K, when there are only two forms."""
    e = result.equilibrium
    if e is None or e.K_low is None or e.K_high is None:
        return None, None
    rest = same_form(result, result.state(e.other))
    if len(members) + len(rest) != len(result.states):
        return None, None
    return e.K_low / (1 + e.K_low), e.K_high / (1 + e.K_high)


def _cost(result: SystemResult, equilibrium: Equilibrium, lines: list[Line], look: Look) -> str:
    """What the other form costs, with limits and the weakest part of the sum."""
    assert equilibrium.dG_kcal is not None
    favoured, other = result.state(equilibrium.favoured), result.state(equilibrium.other)
    at_least = "at least " if equilibrium.bound == "at least" else ""
    amount = f"{at_least}{short_energy(equilibrium.dG_kcal, look)} {look.unit}"
    remarks = []
    low = high = equilibrium.dG_kcal
    if equilibrium.uncertainty_kcal:
        half = Z95 * equilibrium.uncertainty_kcal
        low, high = equilibrium.dG_kcal - half, equilibrium.dG_kcal + half
        ends = (low, high) if equilibrium.dG_kcal >= 0 else (-high, -low)
        remarks.append(f"{short_energy(ends[0], look)} to {short_energy(ends[1], look)}")
    weak = _weakest(result, equilibrium, lines)
    if weak:
        remarks.append(weak)
    if any(line.known_by == "yours" for line in lines):
        remarks.append("with your own values")
    tail = f" ({'; '.join(remarks)})" if remarks else ""
    if is_flip(result, favoured, other):
        clause = f"the flip costs {amount}{tail}"
    else:
        words = describe(result, other) if set(other.shapes) == {"chair"} else ""
        where = f", {words}," if words else ""
        name = _lower(form_name(other, bare=bool(words)))
        if equilibrium.dG_kcal < 0:
            lead = short_energy(-equilibrium.dG_kcal, look)
            clause = (
                f"{name} and its equivalents{where or ','} lie higher each but together outweigh it by "
                f"{lead} {look.unit}{tail}"
            )
        else:
            clause = f"next comes {name}{where or ','} {amount} higher{tail}"
    if low >= 0:
        return clause
    return clause + (", too close to call" if equilibrium.dG_kcal < _CLOSE_KCAL else ", likely but not certain")


def _lower(name: str) -> str:
    """A form's name inside a sentence."""
    return name[0].lower() + name[1:]


def short_energy(value_kcal: float, look: Look) -> str:
    """An energy with one decimal, two when it is small."""
    if look.units == "kJ":
        return look.energy(value_kcal)
    text = f"{value_kcal:.1f}" if abs(value_kcal) >= 1 else f"{value_kcal:.2f}"
    return (text.lstrip("-") if float(text) == 0 else text).replace("-", "\N{MINUS SIGN}")


def _weakest(result: SystemResult, equilibrium: Equilibrium, lines: list[Line]) -> str:
    """The estimated line that weighs most on the uncertainty, when one does."""
    favoured, other = result.state(equilibrium.favoured), result.state(equilibrium.other)
    total = equilibrium.uncertainty_kcal or 0.0
    best: tuple[float, Line] | None = None
    for line in lines:
        if not line.estimated or line.value_kcal is None:
            continue
        net = sum(x.count for x in other.lines if x.key == line.key) - sum(
            x.count for x in favoured.lines if x.key == line.key
        )
        part = combined_sigma(scaled(line.terms, net))
        if part and (best is None or part > best[0]):
            best = (part, line)
    if best is None or best[0] ** 2 < _NAMED_PART * total**2:
        return ""
    return f"{line_words(result, best[1])} is estimated"


def line_words(result: SystemResult, line: Line) -> str:
    """A line named in a sentence."""
    kinds = {group.key: group.kind for group in result.groups.values()}
    groups = "/".join(spoken(key, kinds.get(key, "")) for key in line.groups)
    if line.rule == "A-value":
        return f"the A-value of {'the ' if ' ' in groups else ''}{groups}"
    if line.rule == "vicinal gauche":
        return f"the {groups} term"
    if line.rule in ("syn-axial", "peri", "geminal"):
        return f"the {line.rule} {groups} term"
    return f"the {line.rule} term"


def _degenerate(result: SystemResult, favoured: State, at: str) -> str:
    """Forms that are copies of each other."""
    count = 1 + sum(1 for s in result.states if s.equivalent_to == favoured.id)
    what = f"{favoured.shapes[0]}s" if len(favoured.shapes) == 1 else f"forms ({shape_words(favoured)})"
    words = describe(result, favoured, anonymous=True)
    where = f", {words} in each" if words else ""
    ratio = ":".join([f"{100 / count:.0f}"] * count) if count in (2, 4, 5) else "equally populated"
    if len(result.states) > count:
        shares = [s.population for s in result.states if s.id == favoured.id or s.equivalent_to == favoured.id]
        known = [share for share in shares if share is not None]
        together = f": together {percent(math.fsum(known))} {at}" if known else ""
        return f"{number(count).capitalize()} equivalent {what}{where}{together}; K = 1 between them."
    return f"{number(count).capitalize()} equivalent {what}{where}: {ratio} at any temperature, K = 1."


def _locked(result: SystemResult, conditions: Conditions) -> str:
    """One ring form only."""
    state = result.states[0]
    words = describe(result, state)
    if len(state.shapes) == 1:
        text = f"Locked: only one {state.shapes[0]} closes"
    else:
        text = f"Locked in one form ({shape_words(state)})"
    text += f"; {words}" if words else ""
    if len(result.states) > 1 and state.population is not None:
        count = len(result.states)
        text += (
            f"; {number(count)} states differ only in an inverting nitrogen or an unsubstituted ring, "
            f"{state.id} with {percent(state.population)} at {_short_kelvin(conditions.temperature_K)}"
        )
    return text + "."


def _bounded(result: SystemResult, equilibrium: Equilibrium, who: str, at: str, lines: list[Line], look: Look) -> str:
    """A contact nobody can price decides how much can be said."""
    missing = listed([line_words(result, line) for line in lines if line.value_kcal is None])
    verb = "have" if " and " in missing else "has"
    favoured, other = result.state(equilibrium.favoured), result.state(equilibrium.other)
    known = f"{short_energy(equilibrium.known_part_kcal, look)} {look.unit}"
    step = "the flip" if is_flip(result, favoured, other) else _lower(form_name(other))
    if equilibrium.bound == "at least":
        return f"{who}: favoured {at}; {step} costs at least {known} ({missing} {verb} no price)."
    if equilibrium.bound == "at most":
        return f"{who}: ahead by at most {known} {at}, and the order may turn round, because {missing} {verb} no price."
    kind = "chair" if set(favoured.shapes) == {"chair"} else "form"
    return (
        f"Which {kind} wins {at} is not determined, because {missing} {verb} no price; "
        f"the known part puts {_lower(who)}, ahead by {known}."
    )
