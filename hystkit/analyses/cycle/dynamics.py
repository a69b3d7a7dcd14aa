"""The common linear form of all plants, and its exact motion between two switchings."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from hystkit.analyses.cycle.norms import mean_power
from hystkit.base.errors import InputError

Array = NDArray[np.float64]

#: Above this condition number of the eigenvectors, their sum would lose digits [1].
_WELL_CONDITIONED = 1e3
#: Below this the mean of an exponential is 1 [1].
_VANISHING = 1e-100
#: Axes of one element, by field: the matrix, the vectors, the numbers.
_AXES = {"a": 2, "dead_on": 0, "dead_off": 0}


@dataclass(frozen=True, eq=False)
class Dynamics:
    """A plant as x' = A x + f, with a forcing f for each state of the load.

    The sensed value is ``sensed`` times x, the process value ``process`` times x. All arrays
    broadcast over their leading axes, one element for each plant.

    Attributes
    ----------
    a : ndarray
        Matrix A, shape (..., n, n) [1/s].
    on, off : ndarray
        Forcing with the load on and off, shape (..., n).
    sensed, process : ndarray
        Rows that give the sensed value and the process value, shape (..., n).
    disturbance : ndarray or None
        Forcing of a disturbance of 1, shape (..., n); None where the plant does not say how a
        disturbance enters.
    dead_on, dead_off : ndarray
        Time from the command until the load acts, on switching on and off, shape (...) [s].
    """

    a: Array
    on: Array
    off: Array
    sensed: Array
    process: Array
    disturbance: Array | None
    dead_on: Array
    dead_off: Array

    @property
    def order(self) -> int:
        """Number n of states."""
        return int(self.a.shape[-1])

    @cached_property
    def shape(self) -> tuple[int, ...]:
        """Shape of the array of plants; () for a single one."""
        parts = [(name, value) for name, value in self._arrays().items() if value is not None]
        return np.broadcast_shapes(
            *(value.shape[: value.ndim - _AXES.get(name, 1)] for name, value in parts)
        )

    def over(self, shape: tuple[int, ...]) -> Dynamics:
        """Give the same plants with every array broadcast to a shape.

        Parameters
        ----------
        shape : tuple of int
            Leading axes; has to fit `shape`.
        """
        arrays: dict[str, Any] = {}
        for name, value in self._arrays().items():
            inner = () if value is None else value.shape[value.ndim - _AXES.get(name, 1) :]
            arrays[name] = None if value is None else np.broadcast_to(value, shape + inner)
        return Dynamics(**arrays)

    def taken(self, index: Any) -> Dynamics:
        """Give some of the plants.

        Parameters
        ----------
        index : index of the leading axes
            As numpy takes it, such as a mask of the shape `shape`.
        """
        arrays = self.over(self.shape)._arrays()
        taken: dict[str, Any] = {
            name: None if value is None else value[index] for name, value in arrays.items()
        }
        return Dynamics(**taken)

    def shifted(self, disturbance: Any) -> Dynamics:
        """Give the same plants under a constant disturbance.

        Parameters
        ----------
        disturbance : float or ndarray
            Its size, shape (...): a shift of the levels at which a lag settles, a further rate
            of change of an integrating plant, a multiple of `disturbance` elsewhere.

        Raises
        ------
        InputError
            If the plant does not say how a disturbance enters.
        """
        if self.disturbance is None:
            raise InputError(
                "this plant does not say how a disturbance enters.",
                asked="the plant under a disturbance",
                have="several inputs, and no column for a disturbance",
                remedy="StateSpace(..., disturbance=column), the x' of a disturbance of 1",
            )
        change = np.asarray(disturbance, dtype=float)[..., None] * self.disturbance
        return replace(self, on=self.on + change, off=self.off + change)

    def forcing(self, on: Any) -> Array:
        """Return the forcing that acts.

        Parameters
        ----------
        on : bool or ndarray of bool
            Whether the load acts, shape (...).

        Returns
        -------
        ndarray
            Shape (..., n).
        """
        return np.where(np.asarray(on)[..., None], self.on, self.off)

    def rate(self, x: Array, on: Any) -> Array:
        """Return x' = A x + f.

        Parameters
        ----------
        x : ndarray
            States, shape (..., n).
        on : bool or ndarray of bool
            Whether the load acts, shape (...).

        Returns
        -------
        ndarray
            Shape (..., n) [1/s].
        """
        return apply(self.a, x) + self.forcing(on)

    def advance(self, x: Array, on: Any, dt: Any) -> Array:
        """Return the states after a time without switching, in closed form.

        Parameters
        ----------
        x : ndarray
            States at its beginning, shape (..., n).
        on : bool or ndarray of bool
            Whether the load acts, shape (...).
        dt : float or ndarray
            The time, >= 0, shape (...) [s].

        Returns
        -------
        ndarray
            Shape (..., n).
        """
        transition, response = self.flow(dt)
        return apply(transition, x) + apply(response, self.forcing(on))

    def sensed_of(self, x: Array) -> Array:
        """Return the sensed value of states of shape (..., n).

        Parameters
        ----------
        x : ndarray
            States.
        """
        return np.asarray((self.sensed * x).sum(axis=-1))

    def process_of(self, x: Array) -> Array:
        """Return the process value of states of shape (..., n).

        Parameters
        ----------
        x : ndarray
            States.
        """
        return np.asarray((self.process * x).sum(axis=-1))

    @cached_property
    def stable(self) -> NDArray[np.bool_]:
        """Whether every motion dies out, shape (...)."""
        return np.asarray((np.linalg.eigvals(self.a).real < 0).all(axis=-1))

    def settled(self, on: Any) -> Array:
        """Return the states in which the plant would come to rest.

        Parameters
        ----------
        on : bool or ndarray of bool
            Whether the load acts, shape (...).

        Returns
        -------
        ndarray
            Shape (..., n); NaN for a plant that does not come to rest.
        """
        stable = self.stable[..., None, None]
        a = np.where(stable, self.a, -np.eye(self.order))
        rest = -np.linalg.solve(a, self.forcing(on)[..., None])
        return np.asarray(np.where(stable, rest, np.nan)[..., 0])

    def flow(self, dt: Any) -> tuple[Array, Array]:
        """Return the two matrices that carry states over a time without switching.

        Parameters
        ----------
        dt : float or ndarray
            The time, >= 0, shape (...) [s].

        Returns
        -------
        transition, response : ndarray
            exp(A dt), and its integral from 0 to dt; each of shape (..., n, n).
        """
        dt = np.asarray(dt, dtype=float)
        if self.order == 1:
            return _single(self.a, dt)
        if self._cascade:
            return _cascade(self.a, dt)
        if self._drifts:
            return _drift(self.a, dt)
        if self._modes is not None:
            return _modal(*self._modes, dt)
        return _exponential(self.a, dt)

    @cached_property
    def _cascade(self) -> bool:
        """Whether this is a lag that drives a second one, which has a form without cancelling."""
        lags = np.diagonal(self.a, axis1=-2, axis2=-1)
        return bool(self.order == 2 and (self.a[..., 0, 1] == 0).all() and (lags < 0).all())

    @cached_property
    def _drifts(self) -> bool:
        """Whether no state feeds itself, as in an integrator and what adds it up."""
        return bool(((self.a @ self.a) == 0).all())

    @cached_property
    def _modes(self) -> tuple[Any, Any, Any] | None:
        """Eigenvalues, eigenvectors and their inverse; None where these would lose digits."""
        rates, vectors = np.linalg.eig(self.a)
        if not (np.linalg.cond(vectors) < _WELL_CONDITIONED).all():
            return None
        return rates, vectors, np.linalg.inv(vectors)

    def _arrays(self) -> dict[str, Any]:
        return {field.name: getattr(self, field.name) for field in fields(self)}


def apply(matrix: Array, x: Array) -> Array:
    """Return matrix times vector.

    Parameters
    ----------
    matrix : ndarray
        Shape (..., n, n).
    x : ndarray
        Shape (..., n).

    Returns
    -------
    ndarray
        Shape (..., n).
    """
    return np.asarray((matrix @ x[..., None])[..., 0])


def _mean_power(z: Any) -> Any:
    """Return the mean of exp(z s) over 0 < s < 1, without cancelling at 0."""
    # A quotient of numbers close to the smallest there is could overflow.
    zero = np.abs(z) < _VANISHING
    return np.where(zero, 1.0, np.expm1(z) / np.where(zero, 1.0, z))


def _single(a: Array, dt: Array) -> tuple[Array, Array]:
    z = a * dt[..., None, None]
    return np.exp(z), dt[..., None, None] * _mean_power(z)


def _cascade(a: Array, dt: Array) -> tuple[Array, Array]:
    """Two lags in series: holds for equal lags as it stands, and near them."""
    first, second, gain = -a[..., 0, 0], -a[..., 1, 1], a[..., 1, 0]
    faded, follower = np.exp(-first * dt), np.exp(-second * dt)
    # The divided difference of both exponentials, taken from the slower one so as not to overflow.
    slower, apart = np.minimum(first, second), np.abs(first - second)
    passed = dt * np.exp(-slower * dt) * _mean_power(-apart * dt)
    zero = np.zeros_like(passed)
    settled = (-np.expm1(-second * dt) - second * passed) / (first * second)
    transition = _square(faded, zero, gain * passed, follower)
    response = _square(
        -np.expm1(-first * dt) / first, zero, gain * settled, -np.expm1(-second * dt) / second
    )
    return transition, response


def _drift(a: Array, dt: Array) -> tuple[Array, Array]:
    """Return the exponential series, which ends after two terms where A A = 0."""
    t, unit = dt[..., None, None], np.eye(a.shape[-1])
    return unit + a * t, unit * t + a * (t * t / 2)


def _square(*entries: Any) -> Array:
    """Put four arrays of shape (...) together to (..., 2, 2)."""
    flat = np.stack(np.broadcast_arrays(*entries), axis=-1)
    return flat.reshape(*flat.shape[:-1], 2, 2)


def _modal(rates: Any, vectors: Any, inverse: Any, dt: Array) -> tuple[Array, Array]:
    z = rates * dt[..., None]
    weights = np.exp(z), dt[..., None] * _mean_power(z)
    transition, response = ((vectors * w[..., None, :]) @ inverse for w in weights)
    return transition.real, response.real


def _exponential(a: Array, dt: Array) -> tuple[Array, Array]:
    """Take the exponential of a matrix, also of one with too few eigenvectors."""
    t = dt[..., None, None]
    mean = mean_power(a * t)
    return np.eye(a.shape[-1]) + a * t @ mean, t * mean
