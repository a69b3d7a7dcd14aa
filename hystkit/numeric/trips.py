"""Trip points of a design, or of whole arrays of designs at once."""

from __future__ import annotations

from collections.abc import Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from hystkit.base.errors import Fault, InputError, QuantityError, UnknownNameError
from hystkit.base.fields import Field, Viewed
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import read
from hystkit.circuit.arrays import together
from hystkit.circuit.design import Design, law_values
from hystkit.circuit.device import LAW_FIELDS, UNITS
from hystkit.circuit.reading import collect, is_kind, wrong_kind
from hystkit.circuit.signals import Signal
from hystkit.circuit.stage import Stage
from hystkit.numeric.compile import kernel
from hystkit.numeric.measurand import Measurand, span_of
from hystkit.numeric.status import Status, status_of
from hystkit.numeric.tolerances import acts

#: Device field -> symbol of the law that it sets.
_SYMBOLS = {
    "drop_high": "V_OH",
    "drop_low": "V_OL",
    "r_high": "R_OH",
    "r_low": "R_OL",
    "leakage": "I_LK",
    "offset": "V_OS",
    "bias_plus": "I_BP",
    "bias_minus": "I_BN",
}


@dataclass(frozen=True)
class TripPoints(Viewed):
    """Both trip points, at the signal source.

    Attributes
    ----------
    upper, lower, width, middle : float or ndarray
        [V], all of one shape; NaN for impossible elements.
    status : int or ndarray of int8
        A `Status` code for each element, 0 where the stage switches.
    sense : {"inverting", "non-inverting"}
        Of the stage.
    signal : Signal or None
        Quantity <-> volts.
    v_cc : float or ndarray
        Supply that each element was evaluated at, for ratiometric signals [V].
    """

    upper: Any
    lower: Any
    width: Any
    middle: Any
    status: Any
    sense: str
    signal: Signal | None = None
    v_cc: Any = None

    @property
    def ok(self) -> Any:
        """Whether each element has trip points."""
        return self.status == Status.OK

    @property
    def measurand(self) -> Measurand | None:
        """The same in the signal's own unit, ordered, with the edges of a load.

        None without a signal.
        """
        if self.signal is None:
            return None
        supply = {"V_CC": self.v_cc} if self.signal.ratiometric and self.v_cc is not None else {}
        lower, upper = (self.signal.quantity(trip, **supply) for trip in (self.lower, self.upper))
        falling = self.signal.decreasing
        low, high = (upper, lower) if falling else (lower, upper)
        return Measurand(
            low,
            high,
            high - low,
            "upper" if falling else "lower",
            self.signal.unit,
            self.signal.name,
            self.sense,
        )

    def _fields(self) -> Sequence[Field]:
        rows = [
            Field(name, span_of(getattr(self, name)), "V", latex=rf"V_{{\mathrm{{{name}}}}}")
            for name in ("upper", "lower", "width", "middle")
        ]
        failed = int(np.count_nonzero(self.status))
        if failed:
            first = Status(int(np.ravel(self.status)[np.flatnonzero(self.status)[0]]))
            rows.append(
                Field("impossible", f"{failed} of {np.size(self.status)}", "", first.message)
            )
        if self.measurand is not None:
            rows += self.measurand._fields()
        return rows


def trip_points(design: Design, **overrides: ArrayLike | str) -> TripPoints:
    """Evaluate both trip points.

    Parameters
    ----------
    design : Design
        Gives every value that is not overridden.
    **overrides : float, str or array_like
        Values of single symbols instead of those of the design: parts [Ohm], V_CC, V_EE, levels
        [V], R_OH, R_OL [Ohm], I_LK, I_BP, I_BN [A], V_OS [V]; or of device fields that enter the
        law, such as drop_low. Arrays broadcast. Levels that follow a rail or a drop follow an
        overridden one too.

    Returns
    -------
    TripPoints
        Floats where all values are scalars, else arrays of the broadcast shape. Impossible
        elements are NaN with their status; they do not stop the others.

    Raises
    ------
    UnknownNameError
        If an override names no symbol of the design's law; every such name is reported.
    QuantityError
        If a value cannot be read as a number or an array of numbers; every such one is reported.
    InputError
        If `design` is no design, an override does not act in it, two of them set one quantity,
        or the shapes do not broadcast.

    Notes
    -----
    Static: exact for a resistive network with the stated device values. Moves of the trips by
    delay and noise are outside.

    Examples
    --------
    >>> from hystkit.circuit.stage import Stage
    >>> tank = Design(Stage("inverting"), {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}, supply=5.0)
    >>> [round(float(v), 3) for v in trip_points(tank, R_F=[100e3, 200e3]).width]
    [0.725, 0.391]
    """
    if not is_kind(design, Design):
        remedy = "hk.trip_points(hk.Design(stage, parts, supply=5.0))"
        raise InputError.of("this request", [wrong_kind("design", design, "a Design", remedy)])
    values = overridden(design, overrides)
    with np.errstate(all="ignore"):
        upper, lower = kernel(design.stage).trips(values)
        against = design.stage.is_custom and _against_sense(design.stage, values)
        status = status_of(values, design.stage.parts, upper, lower, against)
        keep = status == Status.OK
        upper, lower = (np.where(keep, trip, np.nan)[()] for trip in (upper, lower))
        width, middle = upper - lower, (upper + lower) / 2
    return TripPoints(
        upper,
        lower,
        width,
        middle,
        status[()],
        design.stage.sense,
        design.signal,
        values["V_CC"],
    )


def overridden(design: Design, overrides: dict[str, Any]) -> dict[str, Any]:
    """Give every symbol's value, some of them replaced.

    Parameters
    ----------
    design : Design
        Gives the others.
    overrides : dict of str to float, str or array_like
        As for `trip_points`.

    Returns
    -------
    dict
        Symbol name to float or ndarray.
    """
    known = (*design.values, *LAW_FIELDS)
    faults = [_unknown(n, known) for n in overrides if n not in known]
    if faults:
        raise UnknownNameError.of("these overrides", faults)
    if faults := [*_idle(design, overrides), *_twofold(overrides)]:
        raise InputError.of("these overrides", faults)
    given = _numbers(overrides)
    device = {name: given.pop(name, value) for name, value in design.device.law_fields.items()}
    levels = {name: part.value for name, part in design.levels.items()}
    v_cc = given.get("V_CC", design.supply.v_cc)
    v_ee = given.get("V_EE", design.supply.low_rail)
    following = law_values(design.stage, device, levels, v_cc, v_ee)
    return {**design.values, **following, **given}


def _unknown(name: str, known: tuple[str, ...]) -> Fault:
    if name != "V_IN":
        return unknown_name_fault("symbol", name, known)
    return Fault(
        "V_IN is the signal, and has no value of its own here.",
        asked=name,
        have="the trip points are the values of V_IN at which the stage switches",
        remedy="leave it out; hk.response follows a signal in time",
    )


def _idle(design: Design, names: Collection[str]) -> Iterator[Fault]:
    """Find overrides that the law of this design does not hold."""
    for name in names:
        if name not in LAW_FIELDS or acts(design, name):
            continue
        level = _SYMBOLS[name]
        given = level in design.levels
        yield Fault(
            f"{name} does not act in this design.",
            asked=f"another {name}",
            have=f"{level} is given" if given else f"a {design.stage.output} output",
            rule=f"a level that is given replaces {name}" if given else "",
            remedy=f"{level} itself" if given else f"leave {name} out",
        )


def _twofold(names: Collection[str]) -> Iterator[Fault]:
    """Find quantities that two overrides set."""
    for field, name in _SYMBOLS.items():
        if field in names and name in names:
            yield Fault(
                f"{name} and {field} are given together.",
                asked=f"another {name} and another {field}",
                rule=f"{field} sets {name}",
                remedy=f"{name} or {field}",
            )


def _against_sense(stage: Stage, values: Mapping[str, Any]) -> Any:
    """Tell where the values of a custom circuit turn the sense that was stated for it."""
    against: Any = False
    for state in ("high", "low"):
        ends = [kernel(stage).voltages(state, values, signal) for signal in (0.0, 1.0)]
        at_zero, at_one = (end["plus"] - end["minus"] for end in ends)
        turned = at_one >= at_zero if stage.sense == "inverting" else at_one <= at_zero
        against = np.logical_or(against, turned)
    return against


def _numbers(overrides: Mapping[str, Any]) -> dict[str, Any]:
    faults: list[Fault] = []
    given = {name: _number(name, value, faults) for name, value in overrides.items()}
    if faults:
        raise QuantityError.of("these overrides", faults)
    together(faults, given)
    if faults:
        raise InputError.of("these overrides", faults)
    return given


def _number(name: str, value: Any, faults: list[Fault]) -> float | NDArray[np.float64]:
    if isinstance(value, str):
        unit = UNITS.get(name) or {"R": "Ω", "V": "V", "I": "A"}[name[0]]
        return collect(faults, lambda: read(value, unit=unit, name=name))
    try:
        # numpy would take None for NaN, and True for 1.
        plain = value is not None and np.asarray(value).dtype != bool
        return np.asarray(value if plain else "", dtype=float)[()]
    except (TypeError, ValueError):
        faults.append(
            Fault(
                f"{name} is not an array of numbers.",
                have=repr(value),
                remedy="a number, a text such as 4k7, or an array of numbers",
            )
        )
        return np.float64(np.nan)
