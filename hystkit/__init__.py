"""Switching stages with hysteresis: one circuit declaration, every formula and number from it.

The public names load on first use, so ``import hystkit`` itself costs next to nothing.

Examples
--------
>>> import hystkit as hk
>>> stage = hk.Stage("inverting", supply="single", reference="source", output="push-pull")
>>> design = hk.Design(
...     stage,
...     parts={"R_R": "10k", "R_F": "90k"},
...     supply=hk.Supply(5.0),
...     levels={"V_REF": 2.5},
... )
>>> print(f"{hk.trip_points(design).width:.3f} V")
0.500 V
"""

from __future__ import annotations

import sys
from importlib import import_module
from types import ModuleType
from typing import TYPE_CHECKING

__version__ = "0.1.0"

# Public name -> its home: "module" for the module itself, "module:name" for what stands in it.
_HOME = {
    # circuit
    "Stage": "circuit.stage:Stage",
    "Resistor": "circuit.elements:Resistor",
    "Wire": "circuit.elements:Wire",
    "Part": "circuit.parts:Part",
    "Supply": "circuit.parts:Supply",
    "Device": "circuit.device:Device",
    "device_classes": "circuit.classes:device_classes",
    "Design": "circuit.design:Design",
    "signals": "circuit.signals",
    "save": "circuit.record:save",
    "load": "circuit.record:load",
    # formulas and numbers
    "derive": "symbolic.law:derive",
    "SwitchingLaw": "symbolic.law:SwitchingLaw",
    "trip_points": "numeric.trips:trip_points",
    "trips_at_source": "numeric.source:trips_at_source",
    "TripPoints": "numeric.trips:TripPoints",
    "simulate_switch": "numeric.switching:simulate_switch",
    "levels": "numeric.levels:levels",
    "loop": "numeric.loop:loop",
    "response": "numeric.response:response",
    "sweep": "numeric.response:sweep",
    # what follows from them
    "size": "analyses.sizing.size:size",
    "Limits": "analyses.sizing.limits:Limits",
    "Sizing": "analyses.sizing.candidate:Sizing",
    "Candidate": "analyses.sizing.candidate:Candidate",
    "as_divider": "analyses.setpoint.equivalent:as_divider",
    "as_source": "analyses.setpoint.equivalent:as_source",
    "Trimmer": "analyses.setpoint.trimmer:Trimmer",
    "trim": "analyses.setpoint.trim:trim",
    "padding": "analyses.setpoint.padding:padding",
    "spread": "analyses.spread.spread:spread",
    "Spread": "analyses.spread.result:Spread",
    "FirstOrder": "analyses.cycle.plants:FirstOrder",
    "TwoLag": "analyses.cycle.plants:TwoLag",
    "Integrating": "analyses.cycle.plants:Integrating",
    "StateSpace": "analyses.cycle.plants:StateSpace",
    "Plant": "analyses.cycle.plants:Plant",
    "steady_cycle": "analyses.cycle.steady:steady_cycle",
    "simulate": "analyses.cycle.simulate:simulate",
    "Run": "analyses.cycle.run:Run",
    "Cycle": "analyses.cycle.result:Cycle",
    "oscillate": "analyses.oscillator.oscillate:oscillate",
    "Oscillation": "analyses.oscillator.result:Oscillation",
    "load_step": "analyses.load_step.step:load_step",
    "LoadStep": "analyses.load_step.result:LoadStep",
    "drive": "analyses.drive.drive:drive",
    "Drive": "analyses.drive.result:Drive",
    "drives": "analyses.drive.drives",
    "contact_life": "numeric.contacts:contact_life",
    "Noise": "analyses.noise.model:Noise",
    "Chatter": "analyses.noise.chatter:Chatter",
    "chatter": "analyses.noise.chatter:chatter",
    "distance_for": "analyses.noise.inverse:distance_for",
    "false_trip_rate": "analyses.noise.rates:false_trip_rate",
    "hum_width": "analyses.noise.hum:hum_width",
    "standing_cycles": "analyses.noise.rates:standing_cycles",
    "width_for": "analyses.noise.inverse:width_for",
    "width_window": "review.window.window:width_window",
    "WidthWindow": "review.window.window:WidthWindow",
    "cycling": "review.cycling:cycling",
    "Cycling": "review.cycling:Cycling",
    "noise_scene": "review.noise_scene:noise_scene",
    "NoiseScene": "review.noise_scene:NoiseScene",
    "review": "review.review:review",
    "Review": "review.finding:Review",
    "Finding": "review.finding:Finding",
    # what a person sees
    "figures": "figures",
    "panels": "panels",
    "export": "export",
    "write_page": "export.page.writer:write_page",
    "page_fragment": "export.page.writer:page_fragment",
    # errors
    "HystkitError": "base.errors:HystkitError",
    "InputError": "base.errors:InputError",
    "NoiseModelError": "base.errors:NoiseModelError",
    "QuantityError": "base.errors:QuantityError",
    "DesignError": "base.errors:DesignError",
    "UnknownNameError": "base.errors:UnknownNameError",
    "RecordError": "base.errors:RecordError",
    "SignalError": "base.errors:SignalError",
    "PlantError": "base.errors:PlantError",
    "InfeasibleError": "base.errors:InfeasibleError",
    "InfeasibleWidthError": "base.errors:InfeasibleWidthError",
    "OutputExistsError": "base.errors:OutputExistsError",
}

__all__ = [*_HOME, "__version__"]

if TYPE_CHECKING:
    # The same names for type checkers and editors; a test compares the two lists.
    from hystkit import export as export
    from hystkit import figures as figures
    from hystkit import panels as panels
    from hystkit.analyses.cycle.plants import FirstOrder as FirstOrder
    from hystkit.analyses.cycle.plants import Integrating as Integrating
    from hystkit.analyses.cycle.plants import Plant as Plant
    from hystkit.analyses.cycle.plants import StateSpace as StateSpace
    from hystkit.analyses.cycle.plants import TwoLag as TwoLag
    from hystkit.analyses.cycle.result import Cycle as Cycle
    from hystkit.analyses.cycle.run import Run as Run
    from hystkit.analyses.cycle.simulate import simulate as simulate
    from hystkit.analyses.cycle.steady import steady_cycle as steady_cycle
    from hystkit.analyses.drive import drives as drives
    from hystkit.analyses.drive.drive import drive as drive
    from hystkit.analyses.drive.result import Drive as Drive
    from hystkit.analyses.load_step.result import LoadStep as LoadStep
    from hystkit.analyses.load_step.step import load_step as load_step
    from hystkit.analyses.noise.chatter import Chatter as Chatter
    from hystkit.analyses.noise.chatter import chatter as chatter
    from hystkit.analyses.noise.hum import hum_width as hum_width
    from hystkit.analyses.noise.inverse import distance_for as distance_for
    from hystkit.analyses.noise.inverse import width_for as width_for
    from hystkit.analyses.noise.model import Noise as Noise
    from hystkit.analyses.noise.rates import false_trip_rate as false_trip_rate
    from hystkit.analyses.noise.rates import standing_cycles as standing_cycles
    from hystkit.analyses.oscillator.oscillate import oscillate as oscillate
    from hystkit.analyses.oscillator.result import Oscillation as Oscillation
    from hystkit.analyses.setpoint.equivalent import as_divider as as_divider
    from hystkit.analyses.setpoint.equivalent import as_source as as_source
    from hystkit.analyses.setpoint.padding import padding as padding
    from hystkit.analyses.setpoint.trim import trim as trim
    from hystkit.analyses.setpoint.trimmer import Trimmer as Trimmer
    from hystkit.analyses.sizing.candidate import Candidate as Candidate
    from hystkit.analyses.sizing.candidate import Sizing as Sizing
    from hystkit.analyses.sizing.limits import Limits as Limits
    from hystkit.analyses.sizing.size import size as size
    from hystkit.analyses.spread.result import Spread as Spread
    from hystkit.analyses.spread.spread import spread as spread
    from hystkit.base.errors import DesignError as DesignError
    from hystkit.base.errors import HystkitError as HystkitError
    from hystkit.base.errors import InfeasibleError as InfeasibleError
    from hystkit.base.errors import InfeasibleWidthError as InfeasibleWidthError
    from hystkit.base.errors import InputError as InputError
    from hystkit.base.errors import NoiseModelError as NoiseModelError
    from hystkit.base.errors import OutputExistsError as OutputExistsError
    from hystkit.base.errors import PlantError as PlantError
    from hystkit.base.errors import QuantityError as QuantityError
    from hystkit.base.errors import RecordError as RecordError
    from hystkit.base.errors import SignalError as SignalError
    from hystkit.base.errors import UnknownNameError as UnknownNameError
    from hystkit.circuit import signals as signals
    from hystkit.circuit.classes import device_classes as device_classes
    from hystkit.circuit.design import Design as Design
    from hystkit.circuit.device import Device as Device
    from hystkit.circuit.elements import Resistor as Resistor
    from hystkit.circuit.elements import Wire as Wire
    from hystkit.circuit.parts import Part as Part
    from hystkit.circuit.parts import Supply as Supply
    from hystkit.circuit.record import load as load
    from hystkit.circuit.record import save as save
    from hystkit.circuit.stage import Stage as Stage
    from hystkit.export.page.writer import page_fragment as page_fragment
    from hystkit.export.page.writer import write_page as write_page
    from hystkit.numeric.contacts import contact_life as contact_life
    from hystkit.numeric.levels import levels as levels
    from hystkit.numeric.loop import loop as loop
    from hystkit.numeric.response import response as response
    from hystkit.numeric.response import sweep as sweep
    from hystkit.numeric.source import trips_at_source as trips_at_source
    from hystkit.numeric.switching import simulate_switch as simulate_switch
    from hystkit.numeric.trips import TripPoints as TripPoints
    from hystkit.numeric.trips import trip_points as trip_points
    from hystkit.review.cycling import Cycling as Cycling
    from hystkit.review.cycling import cycling as cycling
    from hystkit.review.finding import Finding as Finding
    from hystkit.review.finding import Review as Review
    from hystkit.review.noise_scene import NoiseScene as NoiseScene
    from hystkit.review.noise_scene import noise_scene as noise_scene
    from hystkit.review.review import review as review
    from hystkit.review.window.window import WidthWindow as WidthWindow
    from hystkit.review.window.window import width_window as width_window
    from hystkit.symbolic.law import SwitchingLaw as SwitchingLaw
    from hystkit.symbolic.law import derive as derive

else:

    class _Package(ModuleType):
        """Keeps a function's name, such as `review`, when the layer of that name is imported."""

        def __setattr__(self, name: str, value: object) -> None:
            if not (isinstance(value, ModuleType) and ":" in _HOME.get(name, "")):
                super().__setattr__(name, value)

    sys.modules[__name__].__class__ = _Package

    def __getattr__(name: str) -> object:
        """Load a public name when it is first asked for."""
        if name not in _HOME:
            raise AttributeError(f"module {__name__!r} has no attribute {name!r}", name=name)
        module_name, _, attribute = _HOME[name].partition(":")
        module = import_module(f"{__name__}.{module_name}")
        value = getattr(module, attribute) if attribute else module
        globals()[name] = value  # the next access does not come here
        return value


def __dir__() -> list[str]:
    return sorted({*__all__, *(name for name in globals() if name.startswith("__"))})
