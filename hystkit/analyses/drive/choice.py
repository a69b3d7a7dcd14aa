"""The resistor between the output and its load: the largest real value that is small enough."""

from __future__ import annotations

from hystkit.analyses.drive.port import Loaded
from hystkit.base.errors import DesignError, InfeasibleError
from hystkit.base.quantity import show
from hystkit.circuit.preferred import values as preferred_values

#: Range in which a resistor is looked for [Ohm].
RANGE = (10.0, 1e7)
#: Power that resistors are made for [W]; common practice is to use half of it.
RATINGS = (0.063, 0.1, 0.125, 0.25, 0.5, 1.0, 2.0, 3.0, 5.0)
DERATING = 2.0
#: A current that falls short by no more than this share is enough.
ROUNDING = 1e-9


def largest_resistor(loaded: Loaded, needed: float, series: str) -> Loaded:
    """Choose the largest real resistor with which a load gets its current over all tolerances.

    Parameters
    ----------
    loaded : Loaded
        The resistor's tolerance stands at its port; its value does not count.
    needed : float
        Least current [A].
    series : str
        Preferred series.

    Returns
    -------
    Loaded
        With that resistor.

    Raises
    ------
    InfeasibleError
        If no value in `RANGE` is small enough.

    Notes
    -----
    The stage is solved with the load in place, so that the level that the load pulls down is the
    one that drives it. The current falls as the resistor grows, hence bisection.
    """
    ladder = preferred_values(series, *RANGE)
    if not _enough(loaded, ladder[0], needed):
        raise _too_little(loaded, ladder, needed)
    small, large = 0, len(ladder)
    while large - small > 1:
        middle = (small + large) // 2
        if _enough(loaded, ladder[middle], needed):
            small = middle
        else:
            large = middle
    return loaded.with_resistance(ladder[small])


def rating_for(power: float) -> float | None:
    """Smallest standard rating of a resistor for a power.

    Parameters
    ----------
    power : float
        Turned into heat [W].

    Returns
    -------
    float or None
        [W]; twice the power at least, None above the largest of `RATINGS`.

    Examples
    --------
    >>> rating_for(0.11)
    0.25
    """
    return next((rating for rating in RATINGS if rating >= DERATING * power), None)


def _enough(loaded: Loaded, ohms: float, needed: float) -> bool:
    return loaded.with_resistance(ohms).current_range[0] >= needed * (1 - ROUNDING)


def _too_little(loaded: Loaded, ladder: tuple[float, ...], needed: float) -> InfeasibleError:
    least = loaded.with_resistance(ladder[0]).current_range[0]
    return InfeasibleError(
        "the output does not deliver the current that the load needs.",
        asked=f"{show(needed, 'A')} at least, over all tolerances",
        have=f"{show(max(least, 0.0), 'A')} at least with {show(ladder[0], 'Ω')}",
        rule="what the output delivers flows through its pull-up and its own resistance too",
        remedy=_smaller_pull_up(loaded, ladder, needed)
        or "a switch that needs less: more gain, or a MOSFET; or a stronger output",
    )


def _smaller_pull_up(loaded: Loaded, ladder: tuple[float, ...], needed: float) -> str:
    """Name the largest pull-up with which it can be done, if there is one."""
    given = loaded.given
    if loaded.state == "low" or "R_PU" not in given.parts:
        return ""
    for ohms in reversed([v for v in ladder if v < given.parts["R_PU"].value]):
        try:
            other = Loaded(given.with_parts(R_PU=ohms), loaded.port)
            if _enough(other, ladder[0], needed):
                return f"R_PU = {show(ohms, 'Ω')} or less, if the output can sink its current"
        except DesignError:
            continue
    return ""
