"""GFN2-xTB through the optional package tblite, with a small optimiser of our own."""

from __future__ import annotations

from importlib.util import find_spec
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ringstrain.crosscheck.molecule import Molecule, Points
from ringstrain.errors import OutOfScope, UsageError

NAME = "GFN2-xTB"
#: CODATA 2018.
BOHR_ANGSTROM = 0.529177210903
HARTREE_KCAL = 627.5094740631
_STEPS = 400
_MEMORY = 12
#: Converged when no gradient component is larger [hartree/bohr] and the last step changed little [hartree].
_GRADIENT = 6e-4
_CHANGE = 2e-6
#: Longest move of one coordinate in one step [bohr].
_LONGEST = 0.25
_HELP = "Install it with: pip install 'ringstrain[xtb]'; or use --method mmff."


def is_installed() -> bool:
    """True when tblite can be imported."""
    return find_spec("tblite") is not None


def require() -> None:
    """Refuse when tblite is missing.

    Raises
    ------
    UsageError
        With how to get it.
    """
    if not is_installed():
        raise UsageError(f"{NAME} needs the package tblite, which is not installed.", _HELP)


class Xtb:
    """GFN2-xTB for one molecule, in the gas phase.

    Parameters
    ----------
    molecule
        What to treat.

    Raises
    ------
    UsageError
        If tblite is not installed.
    """

    name = NAME

    def __init__(self, molecule: Molecule) -> None:
        require()
        self.molecule = molecule
        self._numbers = np.array([atom.GetAtomicNum() for atom in molecule.mol.GetAtoms()])
        self._calculator: Any = None
        self._result: Any = None

    def minimise(self, points: Points) -> tuple[float, Points]:
        """Energy [kcal/mol] and coordinates [angstrom] of the minimum downhill of some coordinates.

        Raises
        ------
        OutOfScope
            If the calculation fails.

        Notes
        -----
        Limited-memory BFGS with a bounded step; a step that goes uphill is halved.
        """
        place = (np.asarray(points, dtype=np.float64) / BOHR_ANGSTROM).ravel()
        energy, gradient = self._evaluate(place)
        memory: list[tuple[NDArray[np.float64], NDArray[np.float64]]] = []
        for _ in range(_STEPS):
            step = -_two_loops(gradient, memory)
            if np.dot(step, gradient) >= 0:
                memory.clear()
                step = -gradient
            step *= min(1.0, _LONGEST / max(float(np.abs(step).max()), 1e-12))
            for _ in range(8):
                next_energy, next_gradient = self._evaluate(place + step)
                if next_energy <= energy + 1e-4 * float(np.dot(step, gradient)):
                    break
                step = step / 2
            change = energy - next_energy
            if change < 0:
                break
            memory = [*memory, (step, next_gradient - gradient)][-_MEMORY:]
            place, energy, gradient = place + step, next_energy, next_gradient
            if change < _CHANGE and float(np.abs(gradient).max()) < _GRADIENT:
                break
        return energy * HARTREE_KCAL, (place * BOHR_ANGSTROM).reshape(-1, 3)

    def _evaluate(self, place: NDArray[np.float64]) -> tuple[float, NDArray[np.float64]]:
        """Energy [hartree] and gradient [hartree/bohr]."""
        from tblite.interface import Calculator

        shaped = place.reshape(-1, 3)
        try:
            if self._calculator is None:
                self._calculator = Calculator(
                    NAME, self._numbers, shaped, charge=self.molecule.charge, uhf=self.molecule.unpaired
                )
                self._calculator.set("verbosity", 0)
                self._result = self._calculator.singlepoint()
            else:
                self._calculator.update(positions=shaped)
                self._result = self._calculator.singlepoint(self._result)
        except (RuntimeError, ValueError, TypeError) as error:
            raise OutOfScope(f"{NAME} fails for this structure: {error}.", "Use --method mmff.") from None
        return float(self._result.get("energy")), np.asarray(self._result.get("gradient"), dtype=np.float64).ravel()


def _two_loops(
    gradient: NDArray[np.float64], memory: list[tuple[NDArray[np.float64], NDArray[np.float64]]]
) -> NDArray[np.float64]:
    """Gradient times the inverse Hessian that the last steps suggest."""
    direction = gradient.copy()
    kept = [(s, y, 1.0 / float(np.dot(s, y))) for s, y in memory if float(np.dot(s, y)) > 1e-12]
    factors = []
    for s, y, rho in reversed(kept):
        factor = rho * float(np.dot(s, direction))
        factors.append(factor)
        direction -= factor * y
    if kept:
        s, y, rho = kept[-1]
        direction /= rho * float(np.dot(y, y))
    for (s, y, rho), factor in zip(kept, reversed(factors), strict=True):
        direction += (factor - rho * float(np.dot(y, direction))) * s
    return direction
