"""Typical classes of comparators and op-amps, as data to begin with.

Every value is common practice for its class, from memory, and guaranteed for no device: it carries
a mark until it is replaced from the datasheet of the device that is fitted. Values hold near 25 °C.
Offset, and bias current whose direction is not known, are 0 between limits of either sign; inputs
of PNP transistors give their current out of the pins.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from hystkit.base.errors import DesignError, Fault, UnknownNameError
from hystkit.base.fields import Field, Viewed
from hystkit.base.frozen import Named
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import show
from hystkit.circuit.device import UNITS, Device


@dataclass(frozen=True)
class DeviceClass(Viewed):
    """A class of devices, with typical values.

    Attributes
    ----------
    device : Device
        Typical values, all of them marked, with limits that are common for the class.
    output : {"push-pull", "open-collector"}
        Output of a stage that it fits; an open drain counts as an open collector.
    watch : str
        What to look for in the datasheet beside the values.
    """

    device: Device
    output: str
    watch: str = ""

    @property
    def name(self) -> str:
        """Name of the class."""
        return self.device.name

    @property
    def _title(self) -> str:
        return f"{self.device.title}, {self.output}"

    def _fields(self) -> Sequence[Field]:
        device = self.device
        rows = [
            Field(name, getattr(device, name), UNITS[name], _note(device, name))
            for name in device.typical
        ]
        return [*rows, Field("watch", self.watch)] if self.watch else rows


def fitting(output: str) -> tuple[str, ...]:
    """Name the classes that fit an output.

    Parameters
    ----------
    output : {"push-pull", "open-collector"}
        Of the stage.

    Returns
    -------
    tuple of str
        Names in `device_classes`.
    """
    return tuple(name for name, one in device_classes.items() if one.output == output)


def device_of_class(name: str, output: str) -> Device:
    """Give the typical device of a class, for a stage.

    Parameters
    ----------
    name : str
        In `device_classes`.
    output : {"push-pull", "open-collector"}
        Of the stage.

    Returns
    -------
    Device
        Every value marked as typical.

    Raises
    ------
    UnknownNameError
        If there is no such class.
    DesignError
        If the class has the other kind of output.
    """
    if name not in device_classes:
        fault = unknown_name_fault("device class", str(name), tuple(device_classes))
        raise UnknownNameError.of("this device class", [fault])
    found = device_classes[name]
    if found.output == output:
        return found.device
    fault = Fault(
        "this class of devices does not fit the output of the stage.",
        asked=name,
        have=f"a stage whose output is {output}, a class whose output is {found.output}",
        rule="output of the stage = output of the class",
        remedy=f'output="{found.output}", or one of: {", ".join(fitting(output))}',
    )
    raise DesignError.of("this device class", [fault])


def _note(device: Device, name: str) -> str:
    if name not in device.limits:
        return _REFERRED.get(name, "")
    return " to ".join(show(end, UNITS[name]) for end in device.limits[name])


#: What a voltage is counted from.
_REFERRED = {"common_mode_low": "above V_EE", "common_mode_high": "below V_CC"}


def _class(name: str, output: str, watch: str, **stated: Any) -> tuple[str, DeviceClass]:
    """Give a class of which every value that is stated is typical."""
    limits = {field: value[1:] for field, value in stated.items() if isinstance(value, tuple)}
    values = {f: value[0] if isinstance(value, tuple) else value for f, value in stated.items()}
    device = Device(**values, limits=limits, name=name, typical=values)
    return name, DeviceClass(device, output, watch)


#: Name to class. A value with limits is written (typical, lowest, highest).
device_classes: Named[DeviceClass] = Named(
    [
        _class(
            "rail-to-rail push-pull comparator class",
            "push-pull",
            "hysteresis of its own widens the band; current from rail to rail while it toggles",
            r_high=("60 Ω", "20 Ω", "200 Ω"),
            r_low=("50 Ω", "15 Ω", "150 Ω"),
            offset=(0.0, "-5 mV", "5 mV"),
            offset_drift="5 µV/K",
            bias_plus=(0.0, "-1 nA", "1 nA"),
            bias_minus=(0.0, "-1 nA", "1 nA"),
            common_mode_low="-0.1 V",
            common_mode_high="-0.1 V",
            delay="300 ns",
            gain=1e5,
            source_current="10 mA",
            sink_current="10 mA",
        ),
        _class(
            "open-collector quad comparator class",
            "open-collector",
            "both inputs out of range turn the output over; spare comparators want defined inputs",
            drop_low=("150 mV", "50 mV", "400 mV"),
            leakage=("0.1 nA", 0.0, "1 µA"),
            offset=(0.0, "-5 mV", "5 mV"),
            offset_drift="10 µV/K",
            bias_plus=("-25 nA", "-250 nA", 0.0),
            bias_minus=("-25 nA", "-250 nA", 0.0),
            common_mode_low="0 V",
            common_mode_high="1.5 V",
            delay="1.3 µs",
            gain=2e5,
            sink_current="6 mA",
        ),
        _class(
            "dual-supply open-collector comparator class",
            "open-collector",
            "the emitter of the output may be a pin of its own, at ground instead of V_EE",
            drop_low=("230 mV", "100 mV", "400 mV"),
            leakage=("0.2 nA", 0.0, "50 nA"),
            offset=(0.0, "-7.5 mV", "7.5 mV"),
            offset_drift="10 µV/K",
            bias_plus=("-100 nA", "-250 nA", 0.0),
            bias_minus=("-100 nA", "-250 nA", 0.0),
            common_mode_low="0.5 V",
            common_mode_high="1.5 V",
            delay="200 ns",
            gain=2e5,
            sink_current="8 mA",
        ),
        _class(
            "open-drain micropower comparator class",
            "open-collector",
            "the delay grows with little overdrive; the pull-up may exceed V_CC only where stated",
            r_low=("60 Ω", "20 Ω", "200 Ω"),
            leakage=("1 nA", 0.0, "100 nA"),
            offset=(0.0, "-5 mV", "5 mV"),
            offset_drift="5 µV/K",
            bias_plus=(0.0, "-1 nA", "1 nA"),
            bias_minus=(0.0, "-1 nA", "1 nA"),
            common_mode_low="-0.1 V",
            common_mode_high="-0.1 V",
            delay="5 µs",
            gain=1e5,
            sink_current="5 mA",
        ),
        _class(
            "single-supply bipolar op-amp class",
            "push-pull",
            "sinks little near V_EE: above some 50 µA the low level rises by a diode drop; slow",
            drop_high=("1.5 V", "1.2 V", "2 V"),
            drop_low=("20 mV", "5 mV", "0.8 V"),
            offset=(0.0, "-7 mV", "7 mV"),
            offset_drift="7 µV/K",
            bias_plus=("-45 nA", "-250 nA", 0.0),
            bias_minus=("-45 nA", "-250 nA", 0.0),
            common_mode_low="0 V",
            common_mode_high="1.5 V",
            delay="20 µs",
            gain=1e5,
            source_current="20 mA",
            sink_current="10 mA",
        ),
        _class(
            "rail-to-rail CMOS op-amp class",
            "push-pull",
            "clamp diodes between the inputs; slew rate and recovery from the rail set the delay",
            r_high=("100 Ω", "30 Ω", "300 Ω"),
            r_low=("100 Ω", "30 Ω", "300 Ω"),
            offset=(0.0, "-5 mV", "5 mV"),
            offset_drift="2 µV/K",
            bias_plus=(0.0, "-100 pA", "100 pA"),
            bias_minus=(0.0, "-100 pA", "100 pA"),
            common_mode_low="-0.1 V",
            common_mode_high="-0.1 V",
            delay="15 µs",
            gain=1e5,
            source_current="10 mA",
            sink_current="10 mA",
        ),
        _class(
            "dual-supply JFET op-amp class",
            "push-pull",
            "below its common-mode range the output may turn over; bias current doubles every 10 K",
            drop_high=("1.5 V", "1 V", "3 V"),
            drop_low=("1.5 V", "1 V", "3 V"),
            offset=(0.0, "-10 mV", "10 mV"),
            offset_drift="18 µV/K",
            bias_plus=(0.0, "-200 pA", "200 pA"),
            bias_minus=(0.0, "-200 pA", "200 pA"),
            common_mode_low="4 V",
            common_mode_high="4 V",
            delay="4 µs",
            gain=2e5,
            source_current="10 mA",
            sink_current="10 mA",
        ),
    ]
)
