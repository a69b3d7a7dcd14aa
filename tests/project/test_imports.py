"""What gets loaded when, seen from a fresh interpreter."""

from __future__ import annotations

import pytest

from tests.project.source import run_python

HEAVY = ("IPython", "ipywidgets", "matplotlib", "numpy", "schemdraw", "scipy", "sympy")

# An importer that refuses the named libraries, as if they were not installed.
BLOCK = """
import sys
class Absent:
    def find_spec(self, name, path=None, target=None):
        if name.partition(".")[0] in {names!r}:
            raise ModuleNotFoundError(f"No module named {{name!r}}", name=name)
sys.meta_path.insert(0, Absent())
"""

DESIGN = """
import hystkit as hk
stage = hk.Stage("inverting", supply="single", reference="divider", output="open-collector")
design = hk.Design(
    stage,
    parts={"R_T": "22k1", "R_B": "21k0", "R_F": "220k", "R_PU": "4k7"},
    supply=hk.Supply(5.0),
    device=hk.Device(drop_low=0.2),
)
"""


def loaded_after(code: str) -> set[str]:
    """Which of the heavy libraries a fresh interpreter holds after `code`."""
    tail = f"\nimport sys; print(*[name for name in {HEAVY!r} if name in sys.modules])"
    return set(run_python(code + tail).split())


def test_import_loads_no_library() -> None:
    assert loaded_after("import hystkit") == set()


def test_looking_at_the_names_loads_no_library() -> None:
    assert loaded_after("import hystkit; dir(hystkit); hystkit.__version__") == set()


def test_a_design_needs_numpy_at_most() -> None:
    assert loaded_after(DESIGN + "\ndesign.with_parts(R_F='330k')") <= {"numpy"}


def test_formulas_add_sympy_only() -> None:
    assert loaded_after(DESIGN + "\nhk.derive(stage).upper") <= {"numpy", "sympy"}


def test_numbers_load_neither_figures_nor_widgets() -> None:
    drawn = {"IPython", "ipywidgets", "matplotlib", "schemdraw"}
    assert not loaded_after(DESIGN + "\nhk.trip_points(design); hk.levels(design)") & drawn


def test_figures_load_no_widgets() -> None:
    code = DESIGN + "\nhk.figures.ruler(hk.levels(design)).png()"
    assert not loaded_after(code) & {"IPython", "ipywidgets"}


def test_core_works_where_widgets_and_plots_are_not_installed() -> None:
    names = ("ipywidgets", "IPython", "matplotlib", "schemdraw")
    code = """
law, trips, levels = hk.derive(design), hk.trip_points(design), hk.levels(design)
assert law.latex()
assert levels.ok
print(f"{float(trips.upper):.3f} {float(trips.lower):.3f} {levels.width:.3f}")
"""
    # Greenhouse vent, worked by hand: G = 1/22k1 + 1/21k, output behind R_F + R_PU or R_F.
    upper = (5 / 22.1 + 5 / 224.7) / (1 / 22.1 + 1 / 21.0 + 1 / 224.7)
    lower = (5 / 22.1 + 0.2 / 220) / (1 / 22.1 + 1 / 21.0 + 1 / 220)
    printed = run_python(BLOCK.format(names=names) + DESIGN + code).split()
    assert printed == [f"{value:.3f}" for value in (upper, lower, upper - lower)]


def test_record_works_where_only_numpy_is_installed(
    tmp_path_factory: pytest.TempPathFactory,
) -> None:
    path = tmp_path_factory.mktemp("record") / "vent.json"
    code = f"""
hk.save(design, {str(path)!r})
assert hk.load({str(path)!r}) == design
print("same")
"""
    absent = tuple(name for name in HEAVY if name != "numpy")
    assert run_python(BLOCK.format(names=absent) + DESIGN + code).split() == ["same"]


def test_a_missing_library_is_named() -> None:
    code = """
import hystkit as hk
try:
    hk.panels
except ImportError as error:
    print(error.name)
"""
    assert run_python(BLOCK.format(names=("ipywidgets",)) + code).split() == ["ipywidgets"]
