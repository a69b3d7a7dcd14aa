"""The uncertain parameters of a signal, beside the quantities of a design."""

from __future__ import annotations

from collections.abc import Mapping

from hystkit.base.errors import DesignError, Fault
from hystkit.base.frozen import Named
from hystkit.circuit.parts import Part
from hystkit.circuit.signals import Signal
from hystkit.numeric.uncertain import Box, Quantity

#: Field of a signal that holds a part -> the parameter that is its value.
_PARTS = {
    "burden": "R_X",
    "total": "R_X",
    "other": "R_X",
    "top": "R_XT",
    "bottom": "R_XB",
    "excitation": "V_X",
}


def signal_quantities(signal: Signal, excursion: float = 0.0) -> dict[str, Quantity]:
    """Collect what is uncertain about a signal by itself.

    Parameters
    ----------
    signal : Signal
        Its parameters have limits; parts that it holds may have a temperature coefficient.
    excursion : float, default 0
        Farthest distance from the temperature that values are stated for [K].

    Returns
    -------
    dict
        Parameter to its range; V_CC, which a ratiometric signal shares, is not among them.

    Raises
    ------
    DesignError
        If drift takes a part of the signal to zero; every such part is named.
    """
    parts = _parts(signal)
    faults = [
        Fault(
            f"{field} of the signal would drift to zero.",
            asked=f"{part.tempco:g} 1/K over {excursion:g} K",
            rule="temperature coefficient times temperature difference < 1",
            remedy="the coefficient in 1/K: 100 ppm/K is 100e-6",
        )
        for field, part in parts.items()
        if abs(part.tempco) * excursion >= 1
    ]
    if faults:
        raise DesignError.of("this temperature range", faults)
    drifts = {_PARTS[field]: abs(part.tempco) * excursion for field, part in parts.items()}
    found = {}
    for name, (low, nominal, high) in signal.parameters.items():
        drift = drifts.get(name, 0.0)
        ends = sorted(value * factor for value in (low, high) for factor in (1 - drift, 1 + drift))
        if ends[0] < ends[-1]:
            found[name] = Quantity(name, nominal, ends[0], ends[-1], "")
    return found


def labels(box: Box, parameters: Mapping[str, Quantity]) -> dict[str, str]:
    """Give each parameter of a signal a name that no quantity of the design has.

    Parameters
    ----------
    box : Box
        Of the design.
    parameters : mapping of str to Quantity
        Of its signal.

    Returns
    -------
    dict
        Parameter to label: its own name, after "signal" where that is taken.
    """
    return {name: f"signal {name}" if name in box.quantities else name for name in parameters}


def joint_box(box: Box, parameters: Mapping[str, Quantity]) -> Box:
    """Put the parameters of a signal beside the quantities of a design.

    Parameters
    ----------
    box : Box
        Of the design.
    parameters : mapping of str to Quantity
        Of its signal.

    Returns
    -------
    Box
        The quantities of the design first, then the parameters by their labels.
    """
    named = labels(box, parameters)
    added = {named[name]: quantity for name, quantity in parameters.items()}
    return Box(Named({**box.quantities, **added}), box.excursion)


def _parts(signal: Signal) -> dict[str, Part]:
    held = {field: getattr(signal, field, None) for field in _PARTS}
    return {field: part for field, part in held.items() if isinstance(part, Part)}
