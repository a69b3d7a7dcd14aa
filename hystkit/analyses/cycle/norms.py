"""Plants without modes: their exponentials, and norms in which their rates never grow."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

# Share of the norm of A [1]: modes that fade more slowly count as lasting, and get a margin.
_LASTING = 1e-9
_MARGIN = 1e-2


# Terms of a power series, and the size up to which they give full precision [1].
_TERMS = 14
_SMALL = 0.5


def mean_power(z: Array) -> Array:
    """Return the mean of exp(z s) over 0 < s < 1, for matrices of any kind.

    Parameters
    ----------
    z : ndarray
        Shape (..., n, n).

    Notes
    -----
    A power series of z halved often enough, which is then doubled step by step. With z between
    the two factors each product is bounded where motions die out, and errors do not build up.
    """
    size = np.abs(z).sum(axis=-1).max(axis=-1, initial=0.0)
    halvings = np.ceil(np.log2(np.maximum(np.nan_to_num(size), _SMALL) / _SMALL))
    part = z / 2.0 ** halvings[..., None, None]
    unit = np.eye(z.shape[-1])
    found = np.broadcast_to(unit, z.shape)
    for term in range(_TERMS, 1, -1):
        found = unit + part @ found / term
    for step in range(int(halvings.max(initial=0.0))):
        doubles = (step < halvings)[..., None, None]
        found = np.where(doubles, found + found @ part @ found / 2, found)
        part = np.where(doubles, 2 * part, part)
    return found


def largest_growth(a: Array) -> Array:
    """Return how fast the largest state may grow: the logarithmic norm, shape (m,) [1/s].

    Parameters
    ----------
    a : ndarray
        Matrices A, shape (m, n, n).

    Returns
    -------
    ndarray
        Zero where it cannot, such as for lags in series, each of which feeds the next one with a
        gain of one.
    """
    own = np.diagonal(a, axis1=-2, axis2=-1)
    growth = (np.abs(a).sum(axis=-1) - np.abs(own) + own).max(axis=-1)
    return np.asarray(np.where(growth > 1e-12 * np.abs(own).max(axis=-1), growth, 0.0))


def fading_norm(a: Array) -> tuple[Array, Array, Array]:
    r"""Return a quadratic norm of each plant, with the rate at which it grows at most.

    .. math:: \|e^{A s} v\|_P \le e^{\alpha s} \|v\|_P , \quad
              (A - \alpha)^T P + P (A - \alpha) = -Q

    Parameters
    ----------
    a : ndarray
        Matrices A, shape (m, n, n).

    Returns
    -------
    norm, inverse : ndarray
        P and its inverse, shape (m, n, n).
    growth : ndarray
        The rate, zero where every motion dies out, shape (m,) [1/s].

    References
    ----------
    A. M. Lyapunov's equation, as in any text on the stability of linear systems.
    """
    n = a.shape[-1]
    size = np.abs(a).max(axis=(-2, -1))
    fastest = np.linalg.eigvals(a).real.max(axis=-1)
    growth = np.where(fastest < -_LASTING * size, 0.0, np.maximum(fastest, 0.0) + _MARGIN * size)
    # A plant that stands still altogether has nothing to bound.
    growth = np.where(size > 0, growth, 1.0)
    shifted = a - growth[:, None, None] * np.eye(n)
    turned = np.swapaxes(shifted, -1, -2)
    unit = np.eye(n)
    # With rows stacked, A' P + P A is the sum of both Kronecker products times P.
    system = np.einsum("mij,kl->mikjl", turned, unit) + np.einsum("ij,mkl->mikjl", unit, turned)
    right = -_weights(a).reshape(len(a), n * n, 1)
    norm: Array = np.linalg.solve(system.reshape(len(a), n * n, n * n), right).reshape(a.shape)
    norm = (norm + np.swapaxes(norm, -1, -2)) / 2
    return norm, np.asarray(np.linalg.inv(norm)), growth


def _weights(a: Array) -> Array:
    """Weigh states so that all have a say, whatever units they are given in."""
    from scipy.linalg import matrix_balance

    scales = [matrix_balance(one, permute=False, separate=True)[1][0] for one in a]
    return np.asarray([np.diag(1 / scale**2) for scale in scales])
