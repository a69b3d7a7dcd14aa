"""When a straight line and an exponential together cross zero."""

from __future__ import annotations

import math
from itertools import pairwise


def first_crossing(
    settled: float, slope: float, creeping: float, tau: float, horizon: float
) -> float | None:
    r"""Give the first instant at which a sum of line and exponential is not negative.

    .. math:: g(t) = a + b t + c \, e^{-t / \tau}

    Parameters
    ----------
    settled : float
        Constant a.
    slope : float
        Slope b [1/s].
    creeping : float
        Factor c of the exponential; 0 where there is none.
    tau : float
        Time constant [s]; 0 where the exponential is over right after the start.
    horizon : float
        Latest instant of interest [s].

    Returns
    -------
    float or None
        [s], 0 where it is not negative at once; None where it stays negative up to `horizon`.

    Notes
    -----
    On either side of its one turning point the sum is monotone, so that a change of sign there
    holds exactly one crossing, found by bisection and interpolation to rounding.

    Examples
    --------
    >>> first_crossing(-1.0, 0.5, 0.0, 0.0, 10.0)
    2.0
    >>> round(first_crossing(1.0, 0.0, -2.0, 3.0, 10.0) / 3.0, 6)  # ln 2
    0.693147
    """
    if settled + creeping >= 0:
        return 0.0
    if creeping == 0 or tau == 0:
        if settled >= 0:
            return 0.0
        reached = -settled / slope if slope > 0 else math.inf
        return reached if reached <= horizon else None

    def level(time: float) -> float:
        return settled + slope * time + creeping * math.exp(-time / tau)

    turning = slope * tau / creeping  # e^(-t / tau) where the sum turns
    inner = [-tau * math.log(turning)] if 0 < turning < 1 else []
    ends = [0.0, *(time for time in inner if time < horizon), horizon]
    for start, end in pairwise(ends):
        if level(end) >= 0:
            from scipy.optimize import brentq  # slow to load, and only a creeping signal needs it

            return float(brentq(level, start, end, xtol=1e-15 * max(end, 1e-300), rtol=1e-14))
    return None
