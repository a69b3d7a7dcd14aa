"""Low-side switches between the output of a stage and its load."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from hystkit.analyses.drive.reading import PartLike, fill_positive, read_name, read_part
from hystkit.base.errors import DesignError, Fault
from hystkit.base.fields import Field, Viewed
from hystkit.circuit.parts import Part
from hystkit.circuit.reading import Quantity, set_frozen


@dataclass(frozen=True)
class Transistor(Viewed):
    """A bipolar NPN transistor with its emitter at ground, switched into saturation.

    Parameters
    ----------
    beta : float
        Least direct current gain at the load's current, as the datasheet guarantees it [1].
    v_be : Part, float or str, default 0.7
        Base-emitter voltage while on, taken as constant; typical of silicon [V].
    v_ce_sat : float or str, default 0.2
        Collector-emitter voltage in saturation; typical of a small-signal transistor [V].
    forced_beta : float, default 10
        Largest ratio of load current to base current; a tenth of the load current in the base is
        common practice for saturation [1].
    base_emitter : float or str, optional
        Resistor from base to emitter, which takes its share of the current [Ohm].
    v_ce_max, i_c_max : float or str, optional
        Rated collector-emitter voltage with the base open [V], and collector current [A]; not
        stated when left out.
    name : str, default ""
        Generic name, such as "small-signal NPN class".

    Raises
    ------
    DesignError
        Naming everything that cannot be used.
    """

    beta: float
    v_be: Part
    v_ce_sat: float
    forced_beta: float
    base_emitter: float | None
    v_ce_max: float | None
    i_c_max: float | None
    name: str

    def __init__(
        self,
        beta: float,
        v_be: PartLike = 0.7,
        v_ce_sat: Quantity = 0.2,
        forced_beta: float = 10.0,
        base_emitter: Quantity | None = None,
        v_ce_max: Quantity | None = None,
        i_c_max: Quantity | None = None,
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        set_frozen(self, "v_be", read_part(faults, "v_be", v_be, "V"))
        given = {
            "beta": (beta, ""),
            "v_ce_sat": (v_ce_sat, "V"),
            "forced_beta": (forced_beta, ""),
            "base_emitter": (base_emitter, "Ω"),
            "v_ce_max": (v_ce_max, "V"),
            "i_c_max": (i_c_max, "A"),
        }
        fill_positive(faults, self, given)
        set_frozen(self, "name", read_name(faults, name))
        # What could not be read is NaN here, and a fault already.
        if self.forced_beta > self.beta:
            faults.append(
                Fault(
                    "the transistor would not saturate.",
                    asked=f"forced_beta = {self.forced_beta:g}",
                    have=f"beta = {self.beta:g} at least",
                    rule="forced_beta < beta, with a good margin",
                    remedy="10, or a transistor with more gain",
                )
            )
        if faults:
            raise DesignError.of("this transistor", faults)

    @property
    def rated_voltage(self) -> float | None:
        """Most that it may block [V]; None where that is not stated."""
        return self.v_ce_max

    @property
    def rated_current(self) -> float | None:
        """Most that it may carry [A]; None where that is not stated."""
        return self.i_c_max

    def _fields(self) -> Sequence[Field]:
        return (
            Field("current gain, at least", f"{self.beta:g}"),
            Field("forced gain, at most", f"{self.forced_beta:g}"),
            Field("base-emitter voltage", self.v_be.value, "V"),
            Field("saturation voltage", self.v_ce_sat, "V"),
            Field("base-emitter resistor", self.base_emitter, "Ω"),
            Field("rated voltage", self.v_ce_max, "V"),
            Field("rated current", self.i_c_max, "A"),
        )


@dataclass(frozen=True)
class Mosfet(Viewed):
    """An n-channel enhancement MOSFET with its source at ground.

    Parameters
    ----------
    drive_voltage : float or str
        Gate-source voltage for which `r_on` is stated [V]: 2.5 or 4.5 V for logic-level types, 10 V
        for others. A threshold voltage is not enough.
    r_on : float or str
        Highest on-resistance at that voltage, at its highest temperature [Ohm].
    threshold : float or str, optional
        Least gate-source voltage at which it begins to conduct [V]; not stated when left out.
    gate_resistor : float or str, default 100
        In series with the gate; typical [Ohm].
    pull_down : float or str, optional
        From gate to ground, behind the gate resistor [Ohm]; none when left out.
    v_gs_max : float or str, default 20
        Most between gate and source, either way; typical [V].
    v_ds_max, i_d_max : float or str, optional
        Rated drain-source voltage [V] and drain current [A]; not stated when left out.
    name : str, default ""
        Generic name, such as "logic-level MOSFET class".

    Raises
    ------
    DesignError
        Naming everything that cannot be used.
    """

    drive_voltage: float
    r_on: float
    threshold: float | None
    gate_resistor: float
    pull_down: float | None
    v_gs_max: float
    v_ds_max: float | None
    i_d_max: float | None
    name: str

    def __init__(
        self,
        drive_voltage: Quantity,
        r_on: Quantity,
        threshold: Quantity | None = None,
        gate_resistor: Quantity = 100.0,
        pull_down: Quantity | None = None,
        v_gs_max: Quantity = 20.0,
        v_ds_max: Quantity | None = None,
        i_d_max: Quantity | None = None,
        name: str = "",
    ) -> None:
        faults: list[Fault] = []
        given = {
            "drive_voltage": (drive_voltage, "V"),
            "r_on": (r_on, "Ω"),
            "threshold": (threshold, "V"),
            "gate_resistor": (gate_resistor, "Ω"),
            "pull_down": (pull_down, "Ω"),
            "v_gs_max": (v_gs_max, "V"),
            "v_ds_max": (v_ds_max, "V"),
            "i_d_max": (i_d_max, "A"),
        }
        fill_positive(faults, self, given)
        set_frozen(self, "name", read_name(faults, name))
        if self.threshold is not None and self.threshold >= self.drive_voltage:
            faults.append(
                Fault(
                    "the threshold is not below the drive voltage.",
                    asked=f"threshold = {self.threshold:g} V",
                    have=f"drive_voltage = {self.drive_voltage:g} V",
                    rule="drive_voltage is the gate voltage for which r_on is stated",
                    remedy="the datasheet's test condition of r_on",
                )
            )
        if faults:
            raise DesignError.of("this MOSFET", faults)

    @property
    def rated_voltage(self) -> float | None:
        """Most that it may block [V]; None where that is not stated."""
        return self.v_ds_max

    @property
    def rated_current(self) -> float | None:
        """Most that it may carry [A]; None where that is not stated."""
        return self.i_d_max

    def _fields(self) -> Sequence[Field]:
        return (
            Field("drive voltage", self.drive_voltage, "V"),
            Field("on-resistance", self.r_on, "Ω"),
            Field("threshold, at least", self.threshold, "V"),
            Field("gate resistor", self.gate_resistor, "Ω"),
            Field("gate pull-down", self.pull_down, "Ω"),
            Field("gate voltage, at most", self.v_gs_max, "V"),
            Field("rated voltage", self.v_ds_max, "V"),
            Field("rated current", self.i_d_max, "A"),
        )
