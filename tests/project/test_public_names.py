"""The public names are a promise: adding or losing one shows here."""

from __future__ import annotations

import ast
import importlib

import pytest

import hystkit as hk
from tests.project.source import PACKAGE, run_python

PUBLIC = [
    "Candidate",
    "Chatter",
    "Cycle",
    "Cycling",
    "DesignError",
    "Design",
    "Device",
    "Drive",
    "Finding",
    "FirstOrder",
    "HystkitError",
    "InfeasibleError",
    "InfeasibleWidthError",
    "InputError",
    "Integrating",
    "Limits",
    "LoadStep",
    "Noise",
    "NoiseModelError",
    "NoiseScene",
    "Oscillation",
    "OutputExistsError",
    "Part",
    "Plant",
    "PlantError",
    "QuantityError",
    "RecordError",
    "Resistor",
    "Review",
    "Run",
    "SignalError",
    "Sizing",
    "Spread",
    "Stage",
    "StateSpace",
    "Supply",
    "SwitchingLaw",
    "Trimmer",
    "TripPoints",
    "TwoLag",
    "UnknownNameError",
    "WidthWindow",
    "Wire",
    "__version__",
    "as_divider",
    "as_source",
    "chatter",
    "contact_life",
    "cycling",
    "derive",
    "distance_for",
    "drive",
    "drives",
    "device_classes",
    "export",
    "false_trip_rate",
    "figures",
    "hum_width",
    "levels",
    "load",
    "load_step",
    "loop",
    "noise_scene",
    "oscillate",
    "padding",
    "page_fragment",
    "panels",
    "response",
    "review",
    "save",
    "signals",
    "simulate",
    "simulate_switch",
    "size",
    "spread",
    "standing_cycles",
    "steady_cycle",
    "sweep",
    "trim",
    "trip_points",
    "trips_at_source",
    "width_for",
    "width_window",
    "write_page",
]


def test_public_names_are_frozen() -> None:
    assert sorted(hk.__all__) == sorted(PUBLIC)


@pytest.mark.parametrize("name", PUBLIC)
def test_name_resolves_and_stays_the_same_object(name: str) -> None:
    first = getattr(hk, name)
    assert getattr(hk, name) is first
    assert getattr(first, "__doc__", None)


def test_dir_lists_every_public_name() -> None:
    assert set(PUBLIC) <= set(dir(hk))
    assert not [name for name in dir(hk) if name.startswith("_") and not name.startswith("__")]


def test_type_checkers_see_the_same_names() -> None:
    tree = ast.parse((PACKAGE / "__init__.py").read_text(encoding="utf-8"))
    (block,) = [node for node in tree.body if isinstance(node, ast.If)]
    homes = {}
    for node in block.body:
        if isinstance(node, ast.ImportFrom):
            for alias in node.names:
                homes[alias.asname or alias.name] = f"{node.module}:{alias.name}"
    assert sorted([*homes, "__version__"]) == sorted(PUBLIC)
    for name, home in homes.items():
        module, _, attribute = home.partition(":")
        assert getattr(importlib.import_module(module), attribute) is getattr(hk, name)


def test_unknown_name_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="'hystkit' has no attribute 'trip_point'") as caught:
        hk.trip_point  # type: ignore[attr-defined]  # noqa: B018
    assert caught.value.name == "trip_point"


@pytest.mark.parametrize(
    "first",
    [
        "hk.review",
        "import hystkit.review",
        "import hystkit.review.finding",
        "from hystkit.review import Finding",
        "from hystkit import review",
        "hk.Finding; import hystkit.review.review",
        "import hystkit.review, importlib; importlib.reload(hk)",
    ],
)
def test_a_function_keeps_its_name_from_the_layer_of_that_name(first: str) -> None:
    code = f"""
import hystkit as hk
{first}
import importlib, pickle, sys
from hystkit import review
from hystkit.review import review as inner
from hystkit.review.review import review as home
assert hk.review is review is inner is home is pickle.loads(pickle.dumps(review))
layer = importlib.import_module("hystkit.review")
assert layer is sys.modules["hystkit.review"] and layer.Finding is hk.Finding
print(type(hk.review).__name__)
"""
    assert run_python(code).split() == ["function"]


def test_other_modules_of_the_package_are_reached_as_ever() -> None:
    code = """
import hystkit.circuit.parts
import hystkit.base.quantity as quantity
assert hystkit.circuit.parts.Part is hystkit.Part
assert hystkit.base.quantity is quantity
hystkit.note = quantity
del hystkit.note
print(type(hystkit.circuit).__name__)
"""
    assert run_python(code).split() == ["module"]


def test_errors_are_caught_as_the_builtin_a_caller_expects() -> None:
    assert issubclass(hk.InputError, ValueError)
    assert issubclass(hk.UnknownNameError, KeyError)
    assert issubclass(hk.InfeasibleError, ValueError)
    assert issubclass(hk.InfeasibleWidthError, hk.InfeasibleError)
    assert issubclass(hk.OutputExistsError, FileExistsError)
    own = [getattr(hk, name) for name in PUBLIC if name.endswith("Error")]
    assert all(issubclass(error, hk.HystkitError) for error in own)
