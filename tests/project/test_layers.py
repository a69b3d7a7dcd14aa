"""Layers import downwards only, and each library has the layers it belongs to."""

from __future__ import annotations

import pytest

from tests.project.source import PACKAGE, Import, Module, imports, modules

ORDER = (
    "base",
    "circuit",
    "symbolic",
    "numeric",
    "analyses",
    "review",
    "figures",
    "panels",
    "export",
)
TOP_MODULES = {"__init__.py", "__main__.py"}

# Library -> the layers that may import it at all.
ONLY_IN = {
    "matplotlib": {"figures"},
    "schemdraw": {"figures"},
    "PIL": {"figures"},
    "ipywidgets": {"panels"},
    "traitlets": {"panels"},
    "IPython": {"panels"},
    "sympy": {"symbolic", "numeric"},
}
# Library -> the layers that must do without it.
NOT_IN = {"numpy": {"base", "symbolic"}, "scipy": {"base", "symbolic"}}
# Library -> the layers that may import it inside a function only.
DEFERRED_IN = {"scipy": {"circuit"}}


def breaches(layer: str, found: tuple[Import, ...]) -> list[str]:
    """What is wrong with these imports of a module of `layer`."""
    return [f"line {one.line}: {why}" for one in found for why in _faults(layer, one)]


def _faults(layer: str, one: Import) -> list[str]:
    library, *rest = one.module.split(".")
    if library == "hystkit":
        return _inner_faults(layer, rest)
    faults = []
    if layer not in ONLY_IN.get(library, {layer}):
        faults.append(f"{library} belongs to {', '.join(sorted(ONLY_IN[library]))}")
    if layer in NOT_IN.get(library, ()):
        faults.append(f"{layer} must do without {library}")
    if layer in DEFERRED_IN.get(library, ()) and not one.deferred:
        faults.append(f"{layer} imports {library} inside a function only")
    return faults


def _inner_faults(layer: str, rest: list[str]) -> list[str]:
    target = rest[0] if rest else ""
    if target == "__version__":
        return []
    if target not in ORDER:
        return [f"imports hystkit.{target}: name the module where it lives"]
    if ORDER.index(target) > ORDER.index(layer):
        return [f"{layer} imports {target}, a layer that stands on it"]
    return []


def layered() -> list[Module]:
    return [module for module in modules() if module.layer]


@pytest.mark.parametrize("module", layered(), ids=lambda module: module.label)
def test_module_keeps_to_its_layer(module: Module) -> None:
    assert module.layer in ORDER
    assert breaches(module.layer, module.imports) == []


def test_analyses_do_not_import_each_other() -> None:
    crossing = [
        f"{module.label}:{one.line}: {one.module}"
        for module in modules()
        if module.name.startswith("hystkit.analyses.")
        for one in module.imports
        if one.module.startswith("hystkit.analyses.")
        and one.module.split(".")[2] != module.name.split(".")[2]
    ]
    assert crossing == []


def test_package_holds_layers_and_nothing_else() -> None:
    folders = {path.name for path in PACKAGE.iterdir() if path.is_dir()} - {"__pycache__"}
    files = {path.name for path in PACKAGE.glob("*.py")}
    assert folders <= set(ORDER)
    assert files <= TOP_MODULES


def test_importing_the_package_itself_imports_no_layer() -> None:
    (top,) = [module for module in modules() if module.label == "hystkit/__init__.py"]
    eager = {one.module.split(".")[0] for one in top.imports if not one.deferred}
    assert eager == {"__future__", "importlib", "sys", "types", "typing"}


@pytest.mark.parametrize(
    ("layer", "line", "fault"),
    [
        ("base", "from hystkit.circuit.parts import Part", "base imports circuit"),
        ("numeric", "import hystkit.figures.ruler", "numeric imports figures"),
        ("circuit", "from ..panels import TripPanel", "circuit imports panels"),
        ("export", "from hystkit import Design", "name the module where it lives"),
        ("export", "import hystkit as hk", "name the module where it lives"),
        ("panels", "import matplotlib.figure", "matplotlib belongs to figures"),
        ("figures", "from ipywidgets import Image", "ipywidgets belongs to panels"),
        ("figures", "def f():\n    from sympy import latex", "sympy belongs to numeric, symbolic"),
        ("symbolic", "from numpy import array", "symbolic must do without numpy"),
        (
            "circuit",
            "from scipy import interpolate",
            "circuit imports scipy inside a function only",
        ),
    ],
)
def test_a_breach_is_seen(layer: str, line: str, fault: str) -> None:
    found = breaches(layer, tuple(imports(line, package=f"hystkit.{layer}")))
    assert len(found) == 1
    assert fault in found[0]


@pytest.mark.parametrize(
    ("layer", "line"),
    [
        ("export", "from hystkit.figures.ruler import ruler"),
        ("export", "from hystkit import __version__"),
        ("panels", "from ..figures import ruler"),
        ("circuit", "def f():\n    from scipy import interpolate"),
        ("circuit", "if TYPE_CHECKING:\n    from scipy import interpolate"),
        ("circuit", "from hystkit.circuit.parts import Part"),
    ],
)
def test_an_import_downwards_passes(layer: str, line: str) -> None:
    assert breaches(layer, tuple(imports(line, package=f"hystkit.{layer}"))) == []
