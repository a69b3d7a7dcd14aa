"""Hum: a sinusoidal disturbance on a signal that moves slowly."""

from __future__ import annotations

from typing import Any

import numpy as np

from hystkit.analyses.noise.asked import broadcast, plain
from hystkit.base.errors import Fault
from hystkit.circuit.arrays import Values, read_array, read_positives


def hum_width(amplitude: Values, frequency: Values, slope: Values) -> Any:
    r"""Width at which hum on a ramp switches once only.

    .. math:: H > 2 A \left[\sqrt{1 - s^2} - s \arccos s\right], \quad s = r / (2 \pi f A)

    Parameters
    ----------
    amplitude : float, str or array_like
        Peak value of the hum, half of its peak-to-peak value [V].
    frequency : float, str or array_like
        [Hz].
    slope : float, str or array_like
        Of the signal without hum; its sign does not matter, 0 for a standing signal [V/s].

    Returns
    -------
    float or ndarray
        The least width [V]; 0 where the signal outruns the hum and never turns back. NaN where
        amplitude or frequency is negative or not finite.

    Raises
    ------
    InputError
        Naming every single value that cannot be used.

    Notes
    -----
    Exact, whatever the phase: the largest fall-back of the sum from a crest to the next trough.
    Noise and other disturbances come on top.

    Examples
    --------
    >>> print(f"{hum_width('30m', 100, 0.8) * 1e3:.1f} mV")
    56.1 mV
    """
    faults: list[Fault] = []
    given = {
        "amplitude": read_positives(faults, "amplitude", amplitude, "V", zero=True),
        "frequency": read_positives(faults, "frequency", frequency, "Hz", zero=True),
        "slope": np.abs(read_array(faults, "slope", slope, "V/s")),
    }
    peak, hertz, ramp = broadcast("this hum", faults, given)
    with np.errstate(divide="ignore", invalid="ignore"):
        outrun = np.where(ramp == 0, 0.0, ramp / (2 * np.pi * hertz * peak))
    s = np.minimum(outrun, 1.0)
    return plain(2 * peak * (np.sqrt(1 - s**2) - s * np.arccos(s)))
