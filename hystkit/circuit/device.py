"""The switching device: a comparator or an op-amp, as its datasheet describes it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, fields, replace
from typing import Any

from hystkit.base.errors import DesignError, Fault
from hystkit.base.frozen import Named
from hystkit.base.nearest import unknown_name_fault
from hystkit.base.quantity import read
from hystkit.circuit.reading import Quantity, collect, is_kind, members, set_frozen, wrong_kind

#: Device fields that may be below zero; all the others are magnitudes.
_SIGNED = {"offset", "bias_plus", "bias_minus", "leakage", "common_mode_low", "common_mode_high"}
#: Device fields that enter the switching law, and may therefore have limits.
LAW_FIELDS = (
    "drop_high",
    "drop_low",
    "r_high",
    "r_low",
    "leakage",
    "offset",
    "bias_plus",
    "bias_minus",
)
#: Mark of a device with values that belong to a class, and to no device that was chosen.
TYPICAL = "typical values, to be replaced"
UNITS = {
    "drop_high": "V",
    "drop_low": "V",
    "r_high": "Ω",
    "r_low": "Ω",
    "leakage": "A",
    "offset": "V",
    "bias_plus": "A",
    "bias_minus": "A",
    "delay": "s",
    "common_mode_low": "V",
    "common_mode_high": "V",
    "offset_drift": "V/K",
    "gain": "",
    "source_current": "A",
    "sink_current": "A",
}


@dataclass(frozen=True)
class Device:
    """The comparator or op-amp, as its datasheet describes it.

    Parameters
    ----------
    drop_high, drop_low : float or str, default 0
        Distance of the output from V_CC when high, from V_EE when low [V].
    r_high, r_low : float or str, default 0
        Output resistance in each state [Ohm]; r_high has no meaning in an open collector.
    leakage : float or str, default 0
        Current into the output pin of an open collector that is off [A].
    offset : float or str, default 0
        Input offset voltage: the stage switches at v(plus) - v(minus) = offset [V].
    bias_plus, bias_minus : float or str, default 0
        Currents that flow into the plus and the minus pin [A].
    delay : float or str, default 0
        Propagation delay [s].
    common_mode_low : float or str, optional
        Where the common-mode input range begins, above V_EE [V]; may be negative.
    common_mode_high : float or str, optional
        Where it ends, below V_CC [V]; may be negative. Not stated when left out.
    offset_drift : float or str, default 0
        Magnitude of the offset's temperature drift [V/K].
    gain : float, optional
        Open-loop voltage gain; not stated when left out.
    source_current, sink_current : float or str, optional
        Most that the output may source when high and sink when low [A]; not stated when left out.
    limits : mapping of str to pair, optional
        Lowest and highest value of fields that enter the law, as the datasheet guarantees them;
        the field itself is the typical value between them.
    name : str, default ""
        Generic name, such as "open-collector quad comparator class".
    typical : collection of str, optional
        Fields whose values, with their limits, are typical of a class of devices, and wait to be
        replaced from the datasheet of the device itself; see `hystkit.device_classes`.

    Raises
    ------
    DesignError
        Naming every field that is not finite, has the wrong unit or must not be negative.
    """

    drop_high: float = 0.0
    drop_low: float = 0.0
    r_high: float = 0.0
    r_low: float = 0.0
    leakage: float = 0.0
    offset: float = 0.0
    bias_plus: float = 0.0
    bias_minus: float = 0.0
    delay: float = 0.0
    common_mode_low: float | None = None
    common_mode_high: float | None = None
    offset_drift: float = 0.0
    gain: float | None = None
    source_current: float | None = None
    sink_current: float | None = None
    limits: Named[tuple[float, float]] = Named()  # noqa: RUF009 - immutable
    name: str = ""
    typical: tuple[str, ...] = ()

    # Text such as "20m" is accepted for every number; the fields hold floats.
    def __init__(
        self,
        drop_high: Quantity = 0.0,
        drop_low: Quantity = 0.0,
        r_high: Quantity = 0.0,
        r_low: Quantity = 0.0,
        leakage: Quantity = 0.0,
        offset: Quantity = 0.0,
        bias_plus: Quantity = 0.0,
        bias_minus: Quantity = 0.0,
        delay: Quantity = 0.0,
        common_mode_low: Quantity | None = None,
        common_mode_high: Quantity | None = None,
        offset_drift: Quantity = 0.0,
        gain: Quantity | None = None,
        source_current: Quantity | None = None,
        sink_current: Quantity | None = None,
        limits: Mapping[str, tuple[Quantity, Quantity]] | None = None,
        name: str = "",
        typical: Iterable[str] = (),
    ) -> None:
        given = locals()
        faults: list[Fault] = []
        for field in fields(self):
            value = given[field.name]
            if field.name in UNITS and not (value is None and field.default is None):
                value = _device_number(faults, field.name, value)
            set_frozen(self, field.name, value)
        if not is_kind(name, str):
            faults.append(wrong_kind("name", name, "text", f"name={str(name)!r}"))
        if not is_kind(limits, Mapping | None):
            example = 'limits={"offset": (-0.002, 0.002)}'
            faults.append(wrong_kind("limits", limits, "a mapping of names", example))
            limits = None
        set_frozen(self, "limits", _read_limits(faults, limits or {}, self))
        set_frozen(self, "typical", _read_typical(faults, typical))
        if faults:
            raise DesignError.of("this device", faults)

    @property
    def law_fields(self) -> dict[str, float]:
        """What enters the switching law, by field name."""
        return {name: getattr(self, name) for name in LAW_FIELDS}

    @property
    def title(self) -> str:
        """Name, with a mark where values of the device are typical of a class only."""
        mark = TYPICAL if self.typical else ""
        return f"{self.name} ({mark})" if self.name and mark else self.name or mark

    def with_values(self, **changes: Any) -> Device:
        """Give a copy with other values.

        Parameters
        ----------
        **changes : float, str or None
            Fields of the device.

        Returns
        -------
        Device
            A value that is given is no longer typical of a class; the limits that the class gave
            it go with it, unless `limits` are given too.

        Raises
        ------
        DesignError
            As for a new device.
        """
        replaced = {name for name in self.typical if name in changes}
        kept: dict[str, Any] = {
            "typical": [name for name in self.typical if name not in replaced],
            "limits": {n: pair for n, pair in self.limits.items() if n not in replaced},
        }
        return replace(self, **(kept | changes))


def _device_number(faults: list[Fault], name: str, value: Quantity) -> float:
    number = collect(faults, lambda: read(value, unit=UNITS[name], name=name))
    if name not in _SIGNED and number < 0:
        faults.append(
            Fault(
                f"{name} is negative.",
                asked=f"{name} = {value!r}",
                rule=f"{name} >= 0 [{UNITS[name]}]",
                remedy="the magnitude that the datasheet states",
            )
        )
    return number


def _read_limits(
    faults: list[Fault], limits: Mapping[str, tuple[Quantity, Quantity]], device: Device
) -> Named[tuple[float, float]]:
    read_pairs = {}
    for name, pair in limits.items():
        if name not in LAW_FIELDS:
            faults.append(unknown_name_fault("device field with limits", name, LAW_FIELDS))
            continue
        ends = members(pair)
        if len(ends) != 2:
            faults.append(
                Fault(
                    f"the limits of {name} are not two numbers.",
                    asked=f"{name}: {pair!r}",
                    remedy="the lowest and the highest value, such as (-0.002, 0.002)",
                )
            )
            continue
        low, high = (_device_number(faults, name, end) for end in ends)
        typical = getattr(device, name)
        # What could not be read is NaN here, and a fault already.
        if low > typical or typical > high:
            faults.append(
                Fault(
                    f"the limits of {name} do not enclose its typical value.",
                    asked=f"limits {low:g} to {high:g}, {name} = {typical:g}",
                    rule="lowest <= typical <= highest",
                    remedy=f"give {name} itself a value between its limits",
                )
            )
        read_pairs[name] = (low, high)
    return Named(read_pairs)


def _read_typical(faults: list[Fault], typical: Iterable[str]) -> tuple[str, ...]:
    if isinstance(typical, str) or not is_kind(typical, Iterable):
        example = 'typical=("offset", "drop_low")'
        faults.append(wrong_kind("typical", typical, "a collection of field names", example))
        return ()
    names = tuple(typical)
    faults += [
        unknown_name_fault("device field with a value", str(name), tuple(UNITS))
        for name in names
        if name not in UNITS
    ]
    # In one order, so that devices with the same marks are equal.
    return tuple(name for name in UNITS if name in names)
