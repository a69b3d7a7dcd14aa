"""A complete design to begin with: the pump of a header tank on a hill farm."""

from __future__ import annotations

from hystkit.circuit.design import Design
from hystkit.circuit.device import Device
from hystkit.circuit.parts import Part, Supply
from hystkit.circuit.signals import Linear
from hystkit.circuit.stage import Stage


def header_tank() -> Design:
    """Give the pump control of a header tank: on at 0.80 m, off at 1.41 m of water.

    A 4-20 mA transmitter over 2 m of water drives 150 Ohm; the pump runs while the output is
    high. The device values are typical of a comparator with a push-pull output, not taken from
    any datasheet.

    Returns
    -------
    Design
        With tolerances, the input range of the device and the water level as signal.

    Examples
    --------
    >>> tank = header_tank()
    >>> tank.stage.sense, tank.parts["R_F"].value
    ('inverting', 100000.0)
    """
    return Design(
        Stage("inverting", supply="single", reference="divider", output="push-pull"),
        {name: Part(value, tol="1 %") for name, value in _PARTS.items()},
        supply=Supply(5.0),
        device=Device(common_mode_low=0.0, common_mode_high=1.5),
        signal=Linear(per_unit=1.2, at_zero=0.6, span=(0, 2), unit="m", name="level"),
        name="Header tank",
    )


_PARTS = {"R_T": "46k4", "R_B": "26k7", "R_F": "100k"}
