"""What the load's current does to the supply, the ground and the signal of a stage."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from hystkit.circuit.design import Design
from hystkit.circuit.signals import Attenuator, Linear

#: What the sensor's voltage is referred to.
SENSOR_GROUNDS = ("stage", "load")


@dataclass(frozen=True)
class Effect:
    """What changes while the load is on, as the stage sees it from its own ground.

    The signal that the stage sees is ``gain * signal + step + relaxation * y``, where `y` creeps
    from 0 to 1 with the load on and back with the load off; without load the first two terms are
    the signal alone.

    Attributes
    ----------
    rails : dict of str to float or ndarray
        V_CC, and V_EE of a split supply, with the load on [V].
    gain : float or ndarray
        Share of its voltage that a ratiometric sensor keeps [1]; 1 for any other.
    step, relaxation : float or ndarray
        What is added to the signal at once, and in the long run on top [V].
    """

    rails: dict[str, Any]
    gain: Any
    step: Any
    relaxation: Any

    def seen(self, signal: Any, creep: Any, load: bool = True) -> Any:
        """Give the signal that the stage sees.

        Parameters
        ----------
        signal : float or ndarray
            What it would see without load, at rest [V].
        creep : float or ndarray
            Share of the relaxation that has taken place, 0 to 1.
        load : bool, default True
            Whether the load is on.

        Returns
        -------
        float or ndarray
            [V].
        """
        at_once = self.gain * signal + self.step if load else signal
        return at_once + self.relaxation * creep

    def unloaded(self, seen: Any, creep: Any) -> Any:
        """Give the signal without load, at rest, from what the stage sees with the load on.

        Parameters
        ----------
        seen : float or ndarray
            [V].
        creep : float or ndarray
            Share of the relaxation that has taken place, 0 to 1.

        Returns
        -------
        float or ndarray
            [V], NaN where the supply of a ratiometric sensor breaks down.
        """
        gain = np.where(np.greater(self.gain, 0), self.gain, np.nan)[()]
        return (seen - self.step - self.relaxation * creep) / gain


def effect_of(
    design: Design,
    current: Any,
    resistances: dict[str, Any],
    relaxation: Any,
    sensor_ground: str,
) -> Effect:
    """Evaluate what a load current does.

    Parameters
    ----------
    design : Design
        The stage that switches it.
    current : float or ndarray
        Of the load [A].
    resistances : dict of str to float or ndarray
        "supply", "ground" and "source" [Ohm].
    relaxation : float or ndarray
        By which the signal's source gives way in the long run [V].
    sensor_ground : {"stage", "load"}
        What the sensor's voltage is referred to.

    Returns
    -------
    Effect
        As the stage sees it.
    """
    sag, lift = current * resistances["supply"], current * resistances["ground"]
    rails = {"V_CC": design.supply.v_cc - sag - lift}
    if design.supply.split:
        rails["V_EE"] = design.supply.low_rail - lift
    at_stage = sensor_ground == "stage"
    gain = 1.0
    if design.signal is not None and design.signal.ratiometric:
        # A sensor on the load's ground does not feel the stage's ground rise.
        gain = (design.supply.v_cc - sag - (lift if at_stage else 0.0)) / design.supply.v_cc
    share = _share_of_source(design)
    step = -share * current * resistances["source"] - (0.0 if at_stage else lift)
    return Effect(rails, gain, step, -share * relaxation)


def _share_of_source(design: Design) -> float:
    """Volts of the signal per volt of its source: of a battery, what its attenuator passes."""
    signal = design.signal
    if isinstance(signal, Attenuator | Linear) and signal.unit == "V":
        return float(signal.volts(1.0) - signal.volts(0.0))
    return 1.0
