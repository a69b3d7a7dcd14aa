"""Many plants between two switchings, as closed forms that a search can evaluate quickly.

Elements stand on the last axis here, states on the first: one array operation then moves every
plant by a time of its own.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.dynamics import Dynamics
from hystkit.analyses.cycle.norms import fading_norm, largest_growth, mean_power

Array = NDArray[np.float64]

#: Above this condition number of the eigenvectors, a sum of exponentials would lose digits [1].
_WELL_CONDITIONED = 1e4
#: Stands for an eigenvalue of zero, so that an integrator is a lag of this many seconds [1/s].
_STILL = -1e-200


class Motion(ABC):
    """How the states of m plants move while their forcing stays.

    Coordinates z have shape (n, m). With v = z' at the beginning of a segment, the plant has
    moved by ``covered(v, t)`` after a time t; only differences appear, so that nothing cancels.

    Attributes
    ----------
    longest : ndarray, shape (m,)
        Time over which `bend` bounds a signal [s]; infinite unless a mode grows.
    """

    longest: Array

    @abstractmethod
    def inward(self, x: Array) -> NDArray[Any]:
        """Turn states or forcings of shape (m, n) into coordinates of shape (n, m).

        Parameters
        ----------
        x : ndarray
            One row for each plant.
        """

    @abstractmethod
    def outward(self, z: NDArray[Any]) -> Array:
        """Turn coordinates of shape (..., n, m) into states of shape (..., m, n).

        Parameters
        ----------
        z : ndarray
            As `inward` gives them.
        """

    @abstractmethod
    def row(self, row: Array) -> NDArray[Any]:
        """Turn rows of shape (m, n) that act on states into ones that act on coordinates.

        Parameters
        ----------
        row : ndarray
            One for each plant.
        """

    @abstractmethod
    def turned(self, v: NDArray[Any]) -> NDArray[Any]:
        """Return A v, the rate at which a rate v changes.

        Parameters
        ----------
        v : ndarray
            Shape (..., n, m).
        """

    @abstractmethod
    def covered(self, v: NDArray[Any], t: Array) -> NDArray[Any]:
        """Return how far the plants move in a time.

        Parameters
        ----------
        v : ndarray
            Rates at its beginning, shape (..., n, m).
        t : ndarray
            Its length, shape (..., m) [s].
        """

    @abstractmethod
    def bend(self, row: NDArray[Any], turned: NDArray[Any]) -> Array:
        """Return a bound that the second derivative of a signal never exceeds within `longest`.

        Parameters
        ----------
        row : ndarray
            Gives the signal, shape (n, m).
        turned : ndarray
            A v at the moment from which the bound holds, shape (n, m).
        """

    @abstractmethod
    def taken(self, index: NDArray[np.intp]) -> Motion:
        """Give the motion of some of the plants, repeated or not.

        Parameters
        ----------
        index : ndarray of int
            Which.
        """

    @property
    @abstractmethod
    def slowest(self) -> Array:
        """Longest time constant of each plant, shape (m,) [s]; infinite for an integrator."""

    @property
    @abstractmethod
    def fades(self) -> NDArray[np.bool_]:
        """Whether all modes but an integrator surely die out, shape (m,)."""


class Modal(Motion):
    """Independent modes: each rate fades, grows or turns as one exponential.

    Parameters
    ----------
    rates : ndarray
        Eigenvalues, shape (n, m), real or complex [1/s].
    vectors, inverse : ndarray
        Eigenvectors and their inverse, shape (m, n, n).
    """

    def __init__(self, rates: NDArray[Any], vectors: NDArray[Any], inverse: NDArray[Any]) -> None:
        self._rates = np.where(rates == 0, _STILL, rates)
        self._spans = 1 / self._rates
        self._vectors, self._inverse = vectors, inverse
        self._turns = np.iscomplexobj(rates)
        growth = self._rates.real.max(axis=0)
        self._grows = bool((growth > 0).any())
        # Over this time a growing mode grows by e.
        self.longest = np.where(growth > 0, 1 / np.where(growth > 0, growth, 1.0), np.inf)

    def inward(self, x: Array) -> NDArray[Any]:
        """Give the share of each mode."""
        return np.asarray((self._inverse @ x[..., None])[..., 0].T)

    def outward(self, z: NDArray[Any]) -> Array:
        """Put the modes together."""
        return np.asarray((self._vectors @ np.moveaxis(z, -2, -1)[..., None])[..., 0].real)

    def row(self, row: Array) -> NDArray[Any]:
        """Give the weight of each mode."""
        return np.asarray((row[..., None, :] @ self._vectors)[..., 0, :].T)

    def turned(self, v: NDArray[Any]) -> NDArray[Any]:
        """Scale each mode by its eigenvalue."""
        return np.asarray(self._rates * v)

    def covered(self, v: NDArray[Any], t: Array) -> NDArray[Any]:
        """Integrate each mode: v (exp(rate t) - 1) / rate."""
        return np.asarray(np.expm1(self._rates * t[..., None, :]) * self._spans * v)

    def bend(self, row: NDArray[Any], turned: NDArray[Any]) -> Array:
        """Add up what bends upward; it fades from here on, or turns within its magnitude."""
        upward = np.abs(row * turned) if self._turns else np.maximum(row * turned, 0.0)
        return np.asarray(upward.sum(axis=0) * (np.e if self._grows else 1.0))

    def taken(self, index: NDArray[np.intp]) -> Modal:
        """Give the modes of some of the plants."""
        return Modal(self._rates[:, index], self._vectors[index], self._inverse[index])

    @property
    def slowest(self) -> Array:
        """Longest time constant."""
        return np.asarray(np.where(self._rates == _STILL, np.inf, np.abs(self._spans)).max(axis=0))

    @property
    def fades(self) -> NDArray[np.bool_]:
        """Whether no mode turns or grows for ever; rounding is no damping."""
        return np.asarray((self._rates.real < -1e-9 * np.abs(self._rates)).all(axis=0))


class Coupled(Motion):
    """States that no modes describe well, such as those of equal lags in series.

    Parameters
    ----------
    dynamics : Dynamics
        Of shape (m,).
    """

    def __init__(self, dynamics: Dynamics) -> None:
        self._dynamics = dynamics
        # Two lags in series have a closed form.
        self._in_series = dynamics.order == 2 and not dynamics.a[:, 0, 1].any()
        self._uneven = largest_growth(dynamics.a) > 0
        self.longest = np.full(self._uneven.shape, np.inf)
        self._grows = np.ones(self._uneven.shape)
        if self._uneven.any():
            self._norm, self._inverse, growth = fading_norm(dynamics.a)
            grows = self._uneven & (growth > 0)
            # Over this time the norm grows by e at most.
            self.longest[grows] = 1 / growth[grows]
            self._grows[grows] = np.e

    def inward(self, x: Array) -> NDArray[Any]:
        """Give the states, their axes turned."""
        return x.T

    def outward(self, z: NDArray[Any]) -> Array:
        """Give the states, their axes turned back."""
        return np.moveaxis(z, -2, -1)

    def row(self, row: Array) -> NDArray[Any]:
        """Give the rows, their axes turned."""
        return row.T

    def turned(self, v: NDArray[Any]) -> NDArray[Any]:
        """Multiply by A."""
        return _through(self._dynamics.a, v)

    def covered(self, v: NDArray[Any], t: Array) -> NDArray[Any]:
        """Multiply by the integral of exp(A t)."""
        a = self._dynamics.a
        if self._in_series:
            return _through(self._dynamics.flow(t)[1], v)
        return _through(mean_power(a * t[..., None, None]), v) * t[..., None, :]

    def bend(self, row: NDArray[Any], turned: NDArray[Any]) -> Array:
        """Bound the signal by a norm that does not grow: the largest state, or a quadratic one."""
        bound = np.abs(row).sum(axis=0) * np.abs(turned).max(axis=0)
        if self._uneven.any():
            square = _form(self._inverse, row) * _form(self._norm, turned)
            bound = np.where(self._uneven, np.sqrt(square), bound)
        return np.asarray(bound * self._grows)

    def taken(self, index: NDArray[np.intp]) -> Coupled:
        """Give some of the plants."""
        return Coupled(self._dynamics.taken(index))

    @cached_property
    def _slowest(self) -> Array:
        rates = np.abs(np.linalg.eigvals(self._dynamics.a)).min(axis=-1)
        still = rates <= 1e-12 * np.abs(self._dynamics.a).max(axis=(-2, -1))
        return np.asarray(np.where(still, np.inf, 1 / np.where(still, 1.0, rates)))

    @property
    def slowest(self) -> Array:
        """Longest time constant."""
        return self._slowest

    @property
    def fades(self) -> NDArray[np.bool_]:
        """Whether an integrator is told apart from other modes; here it is not."""
        return np.isfinite(self._slowest)


def separable(dynamics: Dynamics) -> tuple[NDArray[np.bool_], Any]:
    """Tell which plants modes describe well, with the modes of all.

    Parameters
    ----------
    dynamics : Dynamics
        Of shape (m,).

    Returns
    -------
    separable : ndarray of bool, shape (m,)
        Whether `Modal` holds for each.
    modes : tuple of ndarray
        Eigenvalues and eigenvectors.
    """
    rates, vectors = np.linalg.eig(dynamics.a)
    return np.linalg.cond(vectors) < _WELL_CONDITIONED, (rates, vectors)


def motions(dynamics: Dynamics) -> list[tuple[NDArray[np.intp], Motion]]:
    """Give the motion of every plant, those of one kind together.

    Parameters
    ----------
    dynamics : Dynamics
        Of shape (m,).

    Returns
    -------
    list of tuple
        Indices of the plants, and their motion.
    """
    modal, (rates, vectors) = separable(dynamics)
    found: list[tuple[NDArray[np.intp], Motion]] = []
    if modal.any():
        index = np.flatnonzero(modal)
        own = vectors[index]
        found.append((index, Modal(rates[index].T, own, np.linalg.inv(own))))
    if not modal.all():
        index = np.flatnonzero(~modal)
        found.append((index, Coupled(dynamics.taken(index))))
    return found


def _form(matrix: Array, v: NDArray[Any]) -> Array:
    """Return v' M v, for vectors of shape (n, m) and a matrix for each element."""
    return np.asarray((v * _through(matrix, v)).sum(axis=0))


def _through(matrix: Array, v: NDArray[Any]) -> NDArray[Any]:
    """Multiply vectors of shape (..., n, m) by a matrix for each element, (..., m, n, n)."""
    product = matrix @ np.moveaxis(v, -2, -1)[..., None]
    return np.moveaxis(product[..., 0], -1, -2)
