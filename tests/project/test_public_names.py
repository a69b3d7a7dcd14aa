"""The public names are a promise: adding or losing one shows here."""

from __future__ import annotations

import ast
import importlib

import pytest

import hystkit as hk
from tests.project.source import PACKAGE

PUBLIC = [
    "Candidate",
    "DesignError",
    "Design",
    "Device",
    "Finding",
    "HystkitError",
    "InfeasibleError",
    "InfeasibleWidthError",
    "InputError",
    "Limits",
    "OutputExistsError",
    "Part",
    "QuantityError",
    "RecordError",
    "Resistor",
    "Review",
    "SignalError",
    "Sizing",
    "Spread",
    "Stage",
    "Supply",
    "SwitchingLaw",
    "Trimmer",
    "TripPoints",
    "UnknownNameError",
    "Wire",
    "__version__",
    "as_divider",
    "as_source",
    "derive",
    "export",
    "figures",
    "levels",
    "load",
    "loop",
    "padding",
    "page_fragment",
    "panels",
    "response",
    "review",
    "save",
    "signals",
    "size",
    "spread",
    "sweep",
    "trim",
    "trip_points",
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
        hk.trip_point  # noqa: B018
    assert caught.value.name == "trip_point"


def test_errors_are_caught_as_the_builtin_a_caller_expects() -> None:
    assert issubclass(hk.InputError, ValueError)
    assert issubclass(hk.UnknownNameError, KeyError)
    assert issubclass(hk.InfeasibleError, ValueError)
    assert issubclass(hk.InfeasibleWidthError, hk.InfeasibleError)
    assert issubclass(hk.OutputExistsError, FileExistsError)
    own = [getattr(hk, name) for name in PUBLIC if name.endswith("Error")]
    assert all(issubclass(error, hk.HystkitError) for error in own)
