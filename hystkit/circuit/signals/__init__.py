"""Signals: the measured quantity as a voltage, both ways, with its limits and its faults."""

from hystkit.circuit.signals.base import Limits, Signal
from hystkit.circuit.signals.measured import Function, MeasuredTable
from hystkit.circuit.signals.platinum import Rtd
from hystkit.circuit.signals.simple import Attenuator, CurrentLoop, Linear, Potentiometer
from hystkit.circuit.signals.thermistor import Ntc, NtcCoefficients, ResistanceTable
from hystkit.circuit.signals.wired import DrivenSensor, SensorDivider

__all__ = [
    "Attenuator",
    "CurrentLoop",
    "DrivenSensor",
    "Function",
    "Limits",
    "Linear",
    "MeasuredTable",
    "Ntc",
    "NtcCoefficients",
    "Potentiometer",
    "ResistanceTable",
    "Rtd",
    "SensorDivider",
    "Signal",
]
