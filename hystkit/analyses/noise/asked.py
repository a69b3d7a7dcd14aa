"""How these analyses check what they are asked, all faults together."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from hystkit.base.errors import Fault, InputError
from hystkit.circuit.arrays import Floats, together
from hystkit.circuit.reading import is_kind, wrong_kind


def check_noise(faults: list[Fault], noise: object) -> None:
    """Report what is no description of noise.

    Parameters
    ----------
    faults : list of Fault
        Where it is added.
    noise : object
        As given.
    """
    from hystkit.analyses.noise.model import Noise  # it reads its numbers with this module

    if not is_kind(noise, Noise):
        faults.append(
            wrong_kind("noise", noise, "a Noise", 'hk.Noise.brick_wall(rms="1m", bandwidth="1k")')
        )


def broadcast(subject: str, faults: list[Fault], given: Mapping[str, Floats]) -> list[Floats]:
    """Bring arrays to one shape, or report everything that is wrong.

    Parameters
    ----------
    subject : str
        What is being read, for the error.
    faults : list of Fault
        Found so far.
    given : mapping of str to ndarray
        The arrays by name.

    Returns
    -------
    list of ndarray
        All of one shape.

    Raises
    ------
    InputError
        With all faults.
    """
    shape = together(faults, given)
    if faults:
        raise InputError.of(subject, faults)
    return [np.broadcast_to(array, shape) for array in given.values()]


def plain(array: Any) -> Any:
    """Give a number for an array without axes.

    Parameters
    ----------
    array : ndarray
        Any.

    Returns
    -------
    float, int, bool or ndarray
        As Python's own number where there is one element only.
    """
    return array.item() if np.ndim(array) == 0 else array
