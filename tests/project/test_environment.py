"""environment.yml and pyproject.toml ask for the same libraries."""

from __future__ import annotations

import re
import sys
import tomllib

import yaml

from tests.project.source import ROOT, modules

PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
ENVIRONMENT = yaml.safe_load((ROOT / "environment.yml").read_text(encoding="utf-8"))

# pip itself is how conda reaches what it does not carry; nothing imports it.
CONDA_ONLY = {"pip"}


def asked(lines: list[str]) -> dict[str, str]:
    """Library -> version bounds, from requirement lines."""
    found = {}
    for line in lines:
        match = re.fullmatch(r"([A-Za-z0-9._-]+)\s*([<>=!~].*)?", line.strip())
        assert match, line
        name = re.sub(r"[._-]+", "-", match[1]).lower()
        assert name not in found, f"{name} is asked for twice"
        found[name] = (match[2] or "").replace(" ", "")
    return found


def from_pyproject() -> dict[str, str]:
    extras = PROJECT["optional-dependencies"]
    test = [line for line in extras["test"] if not line.startswith("hystkit[")]
    return asked([*PROJECT["dependencies"], *extras["lab"], *test])


def from_environment() -> dict[str, str]:
    lines: list[str] = []
    for entry in ENVIRONMENT["dependencies"]:
        lines += entry["pip"] if isinstance(entry, dict) else [entry]
    return asked(lines)


def test_same_dependencies() -> None:
    conda = from_environment()
    assert conda.pop("python") == PROJECT["requires-python"]
    assert {name: conda[name] for name in conda if name not in CONDA_ONLY} == from_pyproject()


def test_test_extra_brings_the_notebook_environment() -> None:
    assert "hystkit[lab]" in PROJECT["optional-dependencies"]["test"]


def test_every_dependency_has_a_lower_bound() -> None:
    assert [name for name, bounds in from_pyproject().items() if not bounds.startswith(">=")] == []


def test_run_time_dependencies_are_explained() -> None:
    needed = set(asked(PROJECT["dependencies"]))
    guide = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    explained = re.findall(r"^- `([a-z0-9-]+)`: \S", guide, flags=re.MULTILINE)
    assert needed <= set(explained)


def test_no_other_library_is_imported() -> None:
    # What ipywidgets and matplotlib cannot work without comes with them.
    brought = {"traitlets", "ipython", "pil"}
    known = {*asked(PROJECT["dependencies"]), *brought, "hystkit"}
    # What only the lab has is asked for when a function that needs it is called.
    in_the_lab = set(asked(PROJECT["optional-dependencies"]["lab"]))
    foreign = {
        f"{module.label}:{one.line}: {one.module}"
        for module in modules()
        for one in module.imports
        if (library := one.module.split(".")[0]).lower() not in known
        and not (one.deferred and library in in_the_lab)
        and library not in sys.stdlib_module_names
    }
    assert foreign == set()
