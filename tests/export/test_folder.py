"""One folder with everything about a design: complete, correct, never in place of another."""

from __future__ import annotations

import io
import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import numpy as np
import pytest
from PIL import Image

import hystkit as hk
from hystkit.circuit.demo import header_tank
from hystkit.export import folder as folder_module
from hystkit.export.folder import FILES, free_folder
from hystkit.export.summary import Summary
from tests.circuit.custom import uncertain_chain
from tests.export.designs import full, ladder, stuck


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return hk.export.write_folder(header_tank(), tmp_path_factory.mktemp("out") / "deep" / "tank")


def test_holds_what_it_lists(folder: Path) -> None:
    assert sorted(path.name for path in folder.iterdir()) == sorted(FILES)
    assert [path.name for path in folder.parent.iterdir()] == ["tank"]


def test_design_reads_back(folder: Path) -> None:
    assert hk.load(folder / "design.json") == header_tank()


def test_numbers_are_those_of_trip_points(folder: Path) -> None:
    record = json.loads((folder / "numbers.json").read_text(encoding="utf-8"))
    trips = hk.trip_points(header_tank())
    for name in ("upper", "lower", "width", "middle"):
        assert record["trips"][name]["value"] == getattr(trips, name)
        assert record["trips"][name]["unit"] == "V"
    assert trips.measurand is not None
    assert record["measurand"]["lower"] == trips.measurand.low
    assert record["measurand"]["upper"] == trips.measurand.high
    assert {n: v["value"] for n, v in record["values"].items()} == header_tank().values


def test_tolerance_limits_hold_random_designs(folder: Path) -> None:
    record = json.loads((folder / "numbers.json").read_text(encoding="utf-8"))
    random = np.random.default_rng(4)
    parts = {
        name: part.value * (1 + part.tol * random.uniform(-1, 1, 2000))
        for name, part in header_tank().parts.items()
    }
    trips = hk.trip_points(header_tank(), **parts)
    for name in ("upper", "lower"):
        limits = record["trips"][name]
        assert limits["lowest"] <= np.min(getattr(trips, name))
        assert np.max(getattr(trips, name)) <= limits["highest"]


def test_latex_is_the_fragment(folder: Path) -> None:
    assert (folder / "law.tex").read_text(encoding="utf-8") == hk.export.tex(header_tank())


def test_page_is_the_live_page(folder: Path, tmp_path: Path) -> None:
    written = hk.write_page(header_tank(), tmp_path / "page.html")
    assert (folder / "page.html").read_bytes() == written.path.read_bytes()


@pytest.mark.parametrize("name", [name for name in FILES if name.endswith(".png")])
def test_png_shows_something(folder: Path, name: str) -> None:
    with Image.open(io.BytesIO((folder / name).read_bytes())) as picture:
        picture.load()
        assert picture.width >= 600
        darkest, lightest = picture.convert("L").getextrema()
    assert (darkest, lightest) != (lightest, darkest)


@pytest.mark.parametrize("name", [name for name in FILES if name.endswith(".svg")])
def test_svg_is_well_formed(folder: Path, name: str) -> None:
    root = ElementTree.fromstring((folder / name).read_text(encoding="utf-8"))
    assert root.tag.endswith("svg")
    assert len(list(root.iter())) > 20


def test_record_of_a_design_with_everything_is_plain_json() -> None:
    record = Summary(full(hk.Stage("non-inverting", output="open-collector"))).record()
    assert json.loads(json.dumps(record, allow_nan=False)) == record
    assert record["values"]["I_LK"] == {"value": 130e-9, "unit": "A", "tol": 0.0}
    assert record["values"]["V_CC"]["tol"] == 0.02
    assert record["measurand"]["upper"] < record["measurand"]["lower"]  # a falling sensor
    assert record["measurand"]["width"] > 0


@dataclass(frozen=True)
class Limited(hk.signals.Signal):
    """A sensor whose quantity is known below 2 V only."""

    unit: str = "m"
    name: str = "depth"
    span: tuple[float, float] = (0.0, 1.0)
    decreasing: bool = False

    def _volts(self, quantity: Any, values: Any) -> Any:
        return 2 * quantity

    def _quantity(self, volts: Any, values: Any) -> Any:
        return np.where(np.asarray(volts) < 2, np.asarray(volts) / 2, np.nan)[()]


def test_quantity_that_is_not_known_is_left_open() -> None:
    summary = Summary(header_tank().with_signal(Limited()))
    record = json.loads(json.dumps(summary.record(), allow_nan=False))
    assert record["measurand"]["upper"] is None
    assert record["measurand"]["lower"] == summary.levels.lower / 2
    assert "depth not known there" in summary.to_text()
    assert "nan" not in summary.to_text()


def test_tolerances_that_reach_too_far_are_told() -> None:
    wide = {"R_PU": hk.Part("100k", 0.5), "R_L": hk.Part("100k", 0.5)}
    design = stuck().with_parts(**wide).with_levels(V_L=0.0, V_OL=2.0)
    summary = Summary(design)
    assert "does not switch everywhere within tolerances" in summary.to_text()
    limits = json.loads(json.dumps(summary.record(), allow_nan=False))["trips"]["upper"]
    assert limits["lowest"] is None
    assert limits["value"] == summary.levels.upper


def test_tolerances_that_are_too_many_are_not_passed_over() -> None:
    told = Summary(uncertain_chain(17)).to_text()
    assert told.count("tolerances not evaluated: more than 16 uncertain resistances") == 2
    assert "not evaluated" not in Summary(uncertain_chain(16)).to_text()


def test_record_without_signal_and_tolerance_says_so() -> None:
    record = Summary(ladder()).record()
    assert record["measurand"] is None
    assert set(record["trips"]["upper"]) == {"value", "unit"}


def test_what_is_there_stays(tmp_path: Path) -> None:
    (tmp_path / "mine.txt").write_text("mine", encoding="utf-8")
    with pytest.raises(hk.OutputExistsError, match="does not exist yet"):
        hk.export.write_folder(header_tank(), tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["mine.txt"]


def test_no_trip_points_no_folder(tmp_path: Path) -> None:
    with pytest.raises(hk.DesignError, match="no trip points"):
        hk.export.write_folder(stuck(), tmp_path / "new")
    assert list(tmp_path.iterdir()) == []


def test_an_interrupt_leaves_nothing(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(folder_module, "write_tex", interrupted)
    with pytest.raises(KeyboardInterrupt):
        hk.export.write_folder(header_tank(), tmp_path / "new")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("Header tank", "hystkit-header-tank"),
        ("../../etc/passwd", "hystkit-etc-passwd"),
        ("Gewächshaus / Lüftung", "hystkit-gewachshaus-luftung"),
        ("水位", "hystkit-design"),
        ("", "hystkit-design"),
        ("x" * 400, "hystkit-" + "x" * 60),
    ],
)
def test_folder_is_named_after_the_design(tmp_path: Path, name: str, expected: str) -> None:
    found = free_folder(name, tmp_path)
    assert found == tmp_path / expected
    found.mkdir()
    assert free_folder(name, tmp_path) == tmp_path / f"{expected}-2"
