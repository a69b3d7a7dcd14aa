"""Docstrings of the public names say what the signatures say, with units."""

from __future__ import annotations

import importlib
import inspect
from collections.abc import Callable, Iterator, Sequence
from types import ModuleType
from typing import Any

import pytest

import hystkit as hk
from tests.project.docstrings import (
    SECTIONS,
    UNITS,
    accepted,
    bracketed,
    documented,
    entries,
    sections,
    underlined,
)
from tests.project.source import modules

Target = tuple[str, Callable[..., Any]]


def public_objects() -> Iterator[tuple[str, Any]]:
    """The public names, and those of the public submodules."""
    for name in hk.__all__:
        value = getattr(hk, name)
        if isinstance(value, ModuleType):
            for inner in getattr(value, "__all__", ()):
                yield f"{name}.{inner}", getattr(value, inner)
        else:
            yield name, value


def functions() -> list[Target]:
    """Public functions, and public methods written in this package."""
    found: list[Target] = []
    for name, value in public_objects():
        if inspect.isclass(value):
            found += [(f"{name}.{method}", function) for method, function in methods(value)]
        elif inspect.isroutine(value):
            found.append((name, inspect.unwrap(value)))
    return found


def methods(owner: type) -> Iterator[Target]:
    for name, raw in vars(owner).items():
        function = raw.__func__ if isinstance(raw, classmethod | staticmethod) else raw
        if not name.startswith("_") and inspect.isfunction(function):
            yield name, function


def classes() -> list[tuple[str, type]]:
    return [(name, value) for name, value in public_objects() if inspect.isclass(value)]


def documents() -> list[tuple[str, str]]:
    """Every docstring of the package that stands at a module, a class or a function."""
    found = []
    for module in modules():
        if module.path.name == "__main__.py":
            continue
        loaded = importlib.import_module(module.name)
        found.append((module.label, inspect.getdoc(loaded) or ""))
        for name, value in vars(loaded).items():
            if getattr(value, "__module__", None) != module.name:
                continue
            if inspect.isclass(value) or inspect.isfunction(value):
                found.append((f"{module.name}.{name}", value.__doc__ or ""))
            if inspect.isclass(value):
                own = [(key, function.__doc__ or "") for key, function in methods(value)]
                found += [(f"{module.name}.{name}.{key}", doc) for key, doc in own]
    return [(label, inspect.cleandoc(doc)) for label, doc in found]


def labelled(cases: Sequence[tuple[str, Any]]) -> list[Any]:
    """Test cases that are called by their first value."""
    return [pytest.param(*case, id=case[0]) for case in cases]


@pytest.mark.parametrize(("name", "function"), labelled(functions()))
def test_parameters_match_the_signature(name: str, function: Callable[..., Any]) -> None:
    doc = inspect.getdoc(function) or ""
    assert doc, f"{name} has no docstring"
    names = accepted(function)
    if names:
        assert documented(doc) == names


@pytest.mark.parametrize(("name", "owner"), labelled(classes()))
def test_class_documents_what_it_is_made_from(name: str, owner: type) -> None:
    doc = inspect.getdoc(owner) or ""
    assert doc, f"{name} has no docstring"
    if "__init__" not in vars(owner):
        return
    found = sections(doc)
    said = documented(doc) + [
        one for entry in entries(found.get("Attributes", "")) for one in entry.names
    ]
    assert [made_from for made_from in accepted(owner) if made_from not in said] == []


@pytest.mark.parametrize(("name", "function"), labelled(functions()))
def test_documented_parameters_have_a_kind_and_a_meaning(
    name: str, function: Callable[..., Any]
) -> None:
    body = sections(inspect.getdoc(function) or "").get("Parameters", "")
    listed = list(entries(body)) if body else []
    assert [entry.names for entry in listed if not entry.kind or not entry.text] == []


@pytest.mark.parametrize(("label", "doc"), labelled(documents()))
def test_sections_and_units_are_known(label: str, doc: str) -> None:
    for title, line in underlined(doc):
        assert title in SECTIONS, f"{label}: section {title!r}"
        assert len(line) == len(title), f"{label}: underline of {title!r}"
    assert [unit for unit in bracketed(doc) if unit not in UNITS] == []


def test_the_reader_of_docstrings_sees_faults() -> None:
    def shifted(value: float, *, by: float = 0.0) -> float:
        """Shift.

        Parameters
        ----------
        value : float
            What to shift [V].
        amount : float
            By how much [Volt].
        """
        return value + by

    doc = inspect.getdoc(shifted) or ""
    assert documented(doc) == ["value", "amount"]
    assert accepted(shifted) == ["value", "by"]
    assert bracketed(doc) == ["V", "Volt"]
    assert underlined("Hints\n-----\ntext") == [("Hints", "-----")]
