"""Run a stage as a relaxation oscillator."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from hystkit.analyses.oscillator.result import Oscillation
from hystkit.analyses.oscillator.swing import (
    Oscillates,
    oscillates,
    swing,
    with_timing_resistor,
)
from hystkit.base.errors import Fault, InputError
from hystkit.circuit.arrays import read_array, together
from hystkit.circuit.design import Design
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import is_kind, wrong_kind
from hystkit.numeric.status import Status
from hystkit.numeric.trips import overridden, trip_points

_EXAMPLES = {"r": "1M", "c": "470n"}


def oscillate(
    design: Design,
    r: Part | ArrayLike | str,
    c: Part | ArrayLike | str,
    **overrides: ArrayLike | str,
) -> Oscillation:
    r"""Run a stage as a relaxation oscillator.

    A timing resistor leads from the output to the signal node, a capacitor from there to ground:
    the capacitor's voltage takes the place of the signal.

    .. math::
        T = R_X C \left( \ln \frac{E_H - V_{lower}}{E_H - V_{upper}}
            + \ln \frac{V_{upper} - E_L}{V_{lower} - E_L} \right)

    Parameters
    ----------
    design : Design
        The stage. Its signal description plays no part.
    r : Part, float, str or array_like
        Timing resistor [Ohm], called R_X.
    c : Part, float, str or array_like
        Capacitor [F]: a text such as "470n", or ``hk.Part("470n", tol="10 %")``.
    **overrides : float, str or array_like
        Values of single symbols, as for `hystkit.trip_points`.

    Returns
    -------
    Oscillation
        Arrays broadcast; an element that does not oscillate is NaN with its status.

    Raises
    ------
    InputError
        If a part is not positive or of the wrong kind, or an override cannot be used.

    Notes
    -----
    Nothing is neglected that the design states: the timing resistor loads the output, so that with
    a pull-up the high level, the trips and the charging current move with the capacitor's voltage;
    the formula above is what remains with a stiff output. The capacitor sits where the signal
    source was: R_S, where it is fitted, lies between the capacitor and the minus input and
    carries its bias current only. The device's delay lengthens each half period and carries the
    capacitor past the trip. Slew rate, input capacitance and the capacitor's leakage are left out.

    Only an output that drives the capacitor towards the trip which turns it back oscillates, so
    that non-inverting forms never do.

    References
    ----------
    A. S. Sedra, K. C. Smith, Microelectronic Circuits, the chapter on signal generators, for the
    formula.

    Examples
    --------
    >>> from hystkit.circuit.stage import Stage
    >>> parts = {"R_T": "100k", "R_B": "100k", "R_F": "100k"}
    >>> found = oscillate(Design(Stage("inverting"), parts, supply=5.0), r="1M", c="470n")
    >>> print(f"{found.period:.4f} s, {found.duty:.0%}")
    0.6516 s, 50%
    """
    resistor, capacitor, ohms, farads = _checked(design, r, c)
    timed, name = with_timing_resistor(design, resistor)
    given = {name: ohms, **overrides} if np.ndim(ohms) else dict(overrides)
    trips = trip_points(timed, **given)
    _check_shapes(trips.status, farads)
    values, delay = overridden(timed, given), timed.device.delay
    found = swing(timed.stage, values, (trips.upper, trips.lower), farads, delay)
    status = oscillates(timed.stage, found, trips.status == Status.OK)
    possible = np.greater(farads, 0) & np.isfinite(farads)
    status = np.where(possible, status, np.int8(Oscillates.NOT_POSITIVE))
    peak, valley, up, down = (
        np.where(status == Oscillates.OK, one, np.nan)[()]
        for one in (found.peak, found.valley, found.up_time, found.down_time)
    )
    # The output is high on the way up where the upper trip is left with it high.
    rises = timed.stage.sense == "inverting"
    settles = (found.up.settles_at, found.down.settles_at)
    return Oscillation(
        design=timed,
        capacitor=capacitor,
        upper=trips.upper,
        lower=trips.lower,
        peak=peak,
        valley=valley,
        high_time=up if rises else down,
        low_time=down if rises else up,
        status=status[()],
        settles_high=settles[0 if rises else 1],
        settles_low=settles[1 if rises else 0],
        stated=not overrides and np.ndim(ohms) == np.ndim(farads) == 0,
    )


def _checked(design: Any, r: Any, c: Any) -> tuple[Part, Part, Any, Any]:
    """Read both parts; of arrays, one element that can be built stands for the part."""
    faults: list[Fault] = []
    if not is_kind(design, Design):
        remedy = "hk.oscillate(hk.Design(stage, parts, supply=5.0), r, c)"
        faults.append(wrong_kind("design", design, "a Design", remedy))
    ohms, farads = _values(faults, "r", r, "Ω"), _values(faults, "c", c, "F")
    if faults:
        raise InputError.of("this oscillator", faults)
    resistor, capacitor = (
        given if isinstance(given, Part) else Part(_largest(numbers))
        for given, numbers in ((r, ohms), (c, farads))
    )
    return resistor, capacitor, ohms, farads


def _largest(numbers: Any) -> float:
    return float(np.max(numbers, initial=0.0, where=np.isfinite(numbers)))


def _values(faults: list[Fault], name: str, given: Any, unit: str) -> Any:
    """Read a part or an array of its values; NaN where that is a fault."""
    value = given.value if isinstance(given, Part) else given
    remedy = f'{name}="{_EXAMPLES[name]}"'
    if isinstance(given, Part) and given.unit not in ("", unit):
        faults.append(wrong_kind(name, given, f"a part in {unit}", remedy))
        return np.nan
    number: Any = read_array(faults, name, value, unit)[()]
    # A single one that could not be read is NaN here, and a fault already.
    unread = np.ndim(number) == 0 and np.isnan(number)
    if not unread and not np.any((number > 0) & np.isfinite(number)):
        faults.append(
            Fault(
                f"{name} is not positive.",
                asked=f"{name} = {value!r}",
                rule=f"{name} > 0 [{unit}], finite; of an array, one at least",
                remedy=remedy,
            )
        )
    return number


def _check_shapes(status: Any, farads: Any) -> None:
    faults: list[Fault] = []
    together(faults, {"r or an override": status, "c": farads})
    if faults:
        raise InputError.of("this oscillator", faults)
