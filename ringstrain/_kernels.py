"""Arrays in, arrays out: symmetry of placements and sums of prices, many patterns at once."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Integers = NDArray[Any]


def _any_state(flags: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Which rows have a flag set."""
    found: NDArray[np.bool_] = np.logical_or.reduce(flags, axis=1)
    return found


def _codes(rows: Integers, permutations: Integers, base: int) -> Integers:
    """Number of every image of every row, ``(rows, operations)``: slot i of a row moves to slot permutation[i]."""
    powers = np.array([base**i for i in range(rows.shape[1])], dtype=np.int64)
    columns = np.ascontiguousarray(rows.T.astype(np.int64))
    out = np.zeros((len(permutations), rows.shape[0]), dtype=np.int64)
    for number, permutation in enumerate(permutations):
        weights = powers[permutation]
        for column, weight in zip(columns, weights, strict=True):
            out[number] += column * weight
    return out.T


def image_codes(
    rows: Integers, permutations: Integers, signs: Integers, mirrors: Integers
) -> tuple[Integers, Integers]:
    """Number of each image of each row, and where the image exists.

    Parameters
    ----------
    rows
        Group numbers, ``(patterns, slots)``.
    permutations, signs
        Slot images and handedness of each operation; the first is the identity.
    mirrors
        Mirror image of each group number, -1 when there is none among the groups.

    Returns
    -------
    codes, exists
        ``(patterns, operations)``; an improper image of a group without mirror image does not exist.
    """
    base = max(len(mirrors), 2)
    if base ** rows.shape[1] >= 2**62:
        return _wide_codes(rows, permutations, signs, mirrors)
    codes = np.empty((len(rows), len(permutations)), dtype=np.int64)
    exists = np.ones(codes.shape, dtype=bool)
    improper = signs < 0
    codes[:, ~improper] = _codes(rows, permutations[~improper], base)
    if improper.any():
        flipped = mirrors[rows]
        missing = (flipped < 0).any(axis=1)
        codes[:, improper] = _codes(np.where(flipped < 0, 0, flipped), permutations[improper], base)
        exists[np.ix_(missing, improper)] = False
    return codes, exists


def _wide_codes(
    rows: Integers, permutations: Integers, signs: Integers, mirrors: Integers
) -> tuple[Integers, Integers]:
    """The same for so many slots or groups that numbers overflow: images ranked as byte strings."""
    flipped = mirrors[rows]
    missing = (flipped < 0).any(axis=1)
    images = np.zeros((len(permutations), *rows.shape), dtype=">i2")
    for number, permutation in enumerate(permutations):
        images[number][:, permutation] = np.where(flipped < 0, 0, flipped) if signs[number] < 0 else rows
    keys = np.ascontiguousarray(images).view(np.dtype((np.void, 2 * rows.shape[1]))).reshape(-1)
    _, ranks = np.unique(keys, return_inverse=True)
    exists = np.ones((len(rows), len(permutations)), dtype=bool)
    exists[np.ix_(missing, signs < 0)] = False
    return ranks.reshape(len(permutations), len(rows)).T.astype(np.int64), exists


def keep_first_images(
    rows: Integers, permutations: Integers, signs: Integers, mirrors: Integers, *, enantiomers: bool
) -> NDArray[np.bool_]:
    """Which rows have the lowest number among their images, so that each pattern is kept once."""
    if enantiomers:
        permutations, signs = permutations[signs > 0], signs[signs > 0]
    codes, exists = image_codes(rows, permutations, signs, mirrors)
    beaten = (codes < codes[:, :1]) & exists
    return ~_any_state(beaten)


def sum_prices(contents: Integers, pairs: Integers, tables: Floats) -> Floats:
    """Energy of every state of every pattern, a sum over pairs of ring atoms.

    Parameters
    ----------
    contents
        What stands on each ring atom, a number below the table size, ``(6, patterns)``.
    pairs
        First and second ring atom of each table, ``(tables, 2)``.
    tables
        Price of each pair of contents in each state [kcal/mol], ``(tables, contents squared, states)``.

    Returns
    -------
    ndarray
        ``(patterns, states)`` [kcal/mol].
    """
    size = round(tables.shape[1] ** 0.5)
    scaled = contents * size
    total: Floats = np.take(tables[0], scaled[pairs[0, 0]] + contents[pairs[0, 1]], axis=0)
    for (first, second), table in zip(pairs[1:], tables[1:], strict=True):
        total += np.take(table, scaled[first] + contents[second], axis=0)
    return total


def boltzmann(energies: Floats, rt_kcal: float) -> tuple[Floats, Floats]:
    """Share of each state and free energy of the mixture; states at infinity do not count.

    Parameters
    ----------
    energies
        ``(patterns, states)`` [kcal/mol].
    rt_kcal
        Gas constant times temperature [kcal/mol].

    Returns
    -------
    shares, mixture
        ``(patterns, states)`` [-] and ``(patterns,)`` [kcal/mol].
    """
    lowest = energies.min(axis=1, keepdims=True)
    with np.errstate(invalid="ignore"):
        factors = np.exp(-(energies - lowest) / rt_kcal)
    factors = np.where(np.isfinite(energies), factors, 0.0)
    total = factors.sum(axis=1, keepdims=True)
    return factors / total, (lowest - rt_kcal * np.log(total))[:, 0]


def lowest_set(energies: Floats, labels: Integers, weights: Floats) -> Integers:
    """Label of the set that holds the lowest state; among equal energies the set of the lowest free energy.

    Parameters
    ----------
    energies
        ``(patterns, states)`` [kcal/mol], infinite where a state does not count.
    labels
        Set of each state, ``(patterns, states)``.
    weights
        Free energy of each set, ``(patterns, sets)`` [kcal/mol].
    """
    exists = np.isfinite(energies)
    rounded = np.where(exists, np.round(np.where(exists, energies, 0.0), 9), np.inf)
    tied = rounded == rounded.min(axis=1, keepdims=True)
    second = np.where(tied, np.round(np.take_along_axis(weights, labels, axis=1), 9), np.inf)
    tied &= second == second.min(axis=1, keepdims=True)
    best: Integers = np.where(tied, labels, np.iinfo(np.int64).max).min(axis=1)
    return best


def two_lowest_sets(
    energies: Floats, labels: Integers, rt_kcal: float
) -> tuple[NDArray[np.bool_], NDArray[np.bool_], Floats]:
    """The set that holds the lowest state, the set that holds the lowest of the rest, and the gap between them.

    Parameters
    ----------
    energies
        ``(patterns, states)`` [kcal/mol], infinite where a state does not exist.
    labels
        Set of each state, a number below the number of states.
    rt_kcal
        Gas constant times temperature [kcal/mol].

    Returns
    -------
    favoured, other, gap
        States of either set, ``(patterns, states)``; ``other`` is all false and the gap infinite when there is one set.
    """
    exists = np.isfinite(energies)
    sets = int(labels.max()) + 1 if labels.size else 1
    weights = np.stack([set_energy(energies, (labels == label) & exists, rt_kcal) for label in range(sets)], axis=1)
    best = lowest_set(energies, labels, weights)
    favoured = (labels == best[:, None]) & exists
    rest = np.where(favoured, np.inf, energies)
    alone = ~_any_state(np.isfinite(rest))
    rest[alone] = 0.0
    second = lowest_set(rest, labels, weights)
    other = (labels == second[:, None]) & exists & ~favoured & ~alone[:, None]
    rows = np.arange(len(energies))
    gap = np.where(alone, np.inf, weights[rows, second] - weights[rows, best])
    return favoured, other, gap


def set_energy(energies: Floats, members: NDArray[np.bool_], rt_kcal: float) -> Floats:
    """Free energy of the marked states of each pattern [kcal/mol]; infinite where none is marked."""
    inside = np.where(members, energies, np.inf)
    empty = ~members.any(axis=1)
    inside[empty] = 0.0
    _, mixture = boltzmann(inside, rt_kcal)
    mixture[empty] = np.inf
    return mixture
