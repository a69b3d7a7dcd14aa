"""The window panel: request, plant and design in one step, what opens it, refusals."""

from __future__ import annotations

import html
import sys
from collections.abc import Callable, Iterator
from typing import Any

import pytest

import hystkit as hk
from hystkit.base.errors import InputError, UnknownNameError
from hystkit.circuit.demo import header_tank
from tests.panels.front import own_circuit, registered, send, type_in

Make = Callable[..., hk.panels.WindowPanel]

#: Fills and empties the header tank at a constant rate, so that bounds have formulas.
TANK = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, dead_time=20)
NOISE = hk.Noise.two_pole(rms="5m", f1=10, f2="1k")
#: No width is wide enough for three starts an hour and narrow enough for a swing of 0.3 m.
EMPTY: dict[str, Any] = {"plant": TANK, "starts_per_hour": 3, "swing": 0.3}


@pytest.fixture
def make() -> Iterator[Make]:
    """Make panels that are closed after the test."""
    built: list[hk.panels.WindowPanel] = []

    def one(design: hk.Design | None = None, **asked: object) -> hk.panels.WindowPanel:
        built.append(hk.panels.WindowPanel(design or header_tank(), **asked))
        return built[-1]

    yield one
    for panel in built:
        panel.close()


def widths(panel: hk.panels.WindowPanel) -> dict[str, float]:
    assert panel.window is not None
    return {bound.name: bound.width for bound in panel.window.bounds}


def test_it_shows_what_the_analysis_gives(make: Make) -> None:
    asked: dict[str, Any] = {"plant": TANK, "noise": NOISE, "starts_per_hour": 3, "accuracy": 0.5}
    panel = make(**asked)
    found = hk.width_window(header_tank(), **asked)
    assert panel.window is not None
    assert panel.window.bounds == found.bounds
    rows = {row[0]: row for row in panel.trips.rows[1:]}
    for bound in found.bounds:
        assert f"{bound.width:.4g} m" in rows[f"{bound.kind}: {bound.name}"][-1]
        assert html.escape(bound.text) in panel.card.table.value
    assert panel.figure.words.value == html.escape(panel.figure.picture.alt)
    assert panel.error == ""


@pytest.mark.parametrize(
    ("name", "text", "value"),
    [
        ("starts_per_hour", "2.5", 2.5),
        ("min_on", "300 s", 300.0),
        ("min_off", "90", 90.0),
        ("swing", "0.9 m", 0.9),
        ("accuracy", "400 mm", 0.4),
        ("uncertainty", "0.02", 0.02),
        ("error_share", "20 %", 0.2),
        ("temperature", "-20 to 60", (-20.0, 60.0)),
    ],
)
def test_requirements_are_typed(make: Make, name: str, text: str, value: Any) -> None:
    panel = make(plant=TANK)
    field = panel.asked.rows[name].field
    type_in(field, text)
    assert getattr(panel.request, name) == pytest.approx(value)
    assert panel.window is not None
    expected = hk.width_window(header_tank(), plant=TANK, **{name: value})
    assert panel.window.bounds == expected.bounds
    type_in(field, "")
    assert getattr(panel.request, name) is None
    assert panel.error == ""


@pytest.mark.parametrize(
    ("name", "text", "value"),
    [
        ("probability", "1e-4", 1e-4),
        ("slope", "0.1 V/s", 0.1),
        ("hum", "30 mV, 50 Hz", (0.03, 50.0)),
        ("load_step", "0.1 V", 0.1),
    ],
)
def test_disturbances_are_typed(make: Make, name: str, text: str, value: Any) -> None:
    panel = make(plant=TANK, noise=NOISE)
    row = panel.disturbances.rows[name]
    type_in(row.field, text)
    assert getattr(panel.request, name) == pytest.approx(value)
    # What is written reads back exactly.
    type_in(row.field, row.field.value)
    assert getattr(panel.request, name) == pytest.approx(value)
    assert panel.window is not None
    expected = hk.width_window(header_tank(), plant=TANK, noise=NOISE, **{name: value})
    assert panel.window.bounds == expected.bounds


def test_arguments_may_be_texts_and_stand_as_numbers(make: Make) -> None:
    panel = make(plant=TANK, swing="900 mm", hum=("30m", "50 Hz"), min_on="300 s")
    request = panel.request
    assert (request.swing, request.hum, request.min_on) == (0.9, (0.03, 50.0), 300.0)
    assert panel.asked.rows["swing"].field.value == "0.9 m"


def test_a_load_step_that_was_found_is_taken_as_what_it_takes(make: Make) -> None:
    rail = hk.signals.Linear(1.0, span=(0, 5), unit="V", name="rail")
    design = header_tank().with_signal(rail)
    step = hk.load_step(design, current=2, source_resistance=0.1, load="low")
    panel = make(design, load="low", load_step=step)
    assert panel.request.load_step == pytest.approx(0.2)
    assert widths(panel)["load step"] == pytest.approx(0.2)


def test_the_strength_of_the_noise_is_typed(make: Make) -> None:
    panel = make(plant=TANK, noise=NOISE)
    before = widths(panel)["noise"]
    row = panel.disturbances.rows["noise_rms"]
    assert row.field.value == "5 mV"
    type_in(row.field, "10 mV")
    assert panel.request.noise == NOISE.scaled(2)
    assert widths(panel)["noise"] > before
    type_in(row.field, "")
    assert panel.request.noise is None
    assert "noise" not in widths(panel)
    type_in(row.field, "5 mV")
    assert panel.request.noise is not None
    assert panel.request.noise.rms == pytest.approx(5e-3)


@pytest.mark.parametrize("text", ["7 mV", "9 mV", "13 mV", "14 mV"])
def test_the_strength_of_the_noise_stands_as_typed(make: Make, text: str) -> None:
    """Scaling 5 mV by the quotient would end beside each of these by a last digit."""
    row = make(plant=TANK, noise=NOISE).disturbances.rows["noise_rms"]
    type_in(row.field, text)
    assert row.field.value == text


def test_noise_has_to_be_given_before_its_strength(make: Make) -> None:
    panel = make(plant=TANK)
    row = panel.disturbances.rows["noise_rms"]
    type_in(row.field, "10 mV")
    assert "Nothing tells the spectrum" in row.note.text
    assert panel.request.noise is None


def test_numbers_of_the_plant_are_moved_and_typed(make: Make) -> None:
    panel = make(plant=TANK, swing=0.9, uncertainty=0)
    rows = panel.plant_section.plant.rows
    assert rows["dead_time"].field.value == "20 s"
    type_in(rows["dead_time"].field, "40")
    # Extremes lie L r1 above and L r2 below the trips.
    assert widths(panel)["swing"] == pytest.approx(0.9 - 40 * 3e-3, rel=1e-3)
    slider = rows["rate_on"].slider
    picture = panel.figure.image.value
    send(slider, value=slider.value + 3)
    assert panel.request.plant is not None
    assert panel.request.plant.rate_on > 2e-3
    assert panel.figure.image.value != picture
    panel.set(rate_on=2e-3, dead_time=(40, 20))
    assert widths(panel)["swing"] == pytest.approx(0.9 - 40e-3 - 40e-3, rel=0.2)
    panel.set(kind="lag", tau=900, on_level=4, off_level=-1.5)
    assert panel.request.plant == hk.FirstOrder(900, 4, -1.5, dead_time=(40, 20), unit="m")
    assert panel.error == ""


def test_numbers_of_another_kind_are_there_again(make: Make) -> None:
    panel = make(plant=TANK, starts_per_hour=3)
    bounds = widths(panel)
    choice = panel.plant_section.plant.kind.field
    for kind in ("one lag", "two lags", "integrating"):
        send(choice, index=list(choice.options).index(kind))
    assert panel.request.plant == hk.Integrating(2e-3, -1e-3, dead_time=20, unit="m")
    assert widths(panel) == bounds


def test_the_plant_goes_and_comes_back(make: Make) -> None:
    panel = make(plant=TANK, starts_per_hour=3)
    section = panel.plant_section
    send(section.toggle, value=False)
    assert "no plant to cycle" in section.note.text
    assert panel.request.plant is TANK
    assert section.toggle.value
    panel.set(starts_per_hour=None)
    send(section.toggle, value=False)
    assert panel.request.plant is None
    send(section.toggle, value=True)
    assert panel.request.plant == TANK


def test_without_a_plant_one_that_suits_is_offered(make: Make) -> None:
    panel = make()
    assert panel.plant_section.toggle.value is False
    send(panel.plant_section.toggle, value=True)
    assert isinstance(panel.request.plant, hk.FirstOrder)
    type_in(panel.asked.rows["starts_per_hour"].field, "20")
    assert "cycling" in widths(panel)


def test_an_empty_window_is_opened_by_a_button(make: Make) -> None:
    panel = make(**EMPTY)
    assert panel.window is not None
    assert panel.window.feasible is None
    assert panel.card.openings == ()
    panel.card.find.click()
    assert [o.text for o in panel.card.openings] == [o.text for o in panel.window.openings]
    assert any(line.startswith("would open it") for line in panel.snapshot().remarks)
    opening = panel.card.openings[0]
    panel.card.buttons[0].click()
    assert panel.window.feasible == opening.feasible
    assert panel.card.openings == ()
    for name, value in opening.changes.items():
        assert getattr(panel.request, name) == value
    assert panel.error == ""


def test_changes_that_were_found_do_not_outlive_the_window(make: Make) -> None:
    panel = make(**EMPTY)
    panel.card.search()
    assert panel.card.openings
    panel.set(R_F="120k")
    assert panel.card.openings == ()
    assert panel.card.buttons == []


def test_the_openings_are_not_searched_while_a_slider_moves(
    make: Make, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(*_: object) -> None:
        raise AssertionError("searched")

    monkeypatch.setattr(sys.modules["hystkit.review.window.window"], "openings", refuse)
    panel = make(**EMPTY)
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 4)
    assert panel.error == ""


@pytest.mark.parametrize("signal", [True, False])
def test_the_call_to_copy_finds_parts_for_the_target(make: Make, signal: bool) -> None:
    design = header_tank() if signal else header_tank().with_signal(None)
    panel = make(design, accuracy=0.5)
    assert panel.window is not None
    names: dict[str, Any] = {}
    exec(panel.card.copy.text.replace("print(found)", ""), names)
    trips = hk.trip_points(names["found"][0].design)
    width = float(trips.width if trips.measurand is None else trips.measurand.width)
    assert width == pytest.approx(panel.window.target, rel=0.02)


def test_design_and_request_change_in_one_step(make: Make) -> None:
    panel = make(**EMPTY)
    seen: list[object] = []
    panel.observe(lambda change: seen.append(panel.request.swing), names="design")
    panel.set(R_F="120k", swing=0.8)
    assert seen == [0.8]
    assert panel.design.parts["R_F"].value == 120e3


@pytest.mark.parametrize(
    ("section", "name", "text", "said"),
    [
        ("asked", "starts_per_hour", "many", "not a number"),
        ("asked", "starts_per_hour", "-1", "not above 0"),
        ("asked", "swing", "0.9 kg", "not in m"),
        ("asked", "error_share", "120 %", "not between 0 and 1"),
        ("asked", "temperature", "60 to -20", "wrong way round"),
        ("disturbances", "probability", "2", "not between 0 and 1"),
        ("disturbances", "hum", "30 mV", "amplitude and a frequency"),
        ("disturbances", "noise_rms", "0", "out of range"),
    ],
)
def test_a_refusal_stands_at_its_field_and_all_else_stays(
    make: Make, section: str, name: str, text: str, said: str
) -> None:
    panel = make(plant=TANK, noise=NOISE)
    before, picture = panel.request, panel.figure.image.value
    row = getattr(panel, section).rows[name]
    type_in(row.field, text)
    assert said in row.note.text
    assert (panel.request, panel.figure.image.value) == (before, picture)
    assert row.field.value == text
    assert panel.error == ""
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 1)
    assert row.note.text == ""


def test_what_is_missing_is_named_and_changes_nothing(make: Make) -> None:
    with pytest.raises(InputError, match="no plant"):
        make(starts_per_hour=3)
    with pytest.raises(InputError, match="how fast"):
        make(noise=NOISE)
    panel = make(plant=TANK)
    design, request = panel.design, panel.request
    with pytest.raises(InputError):
        panel.set(R_F="120k", accuracy=-1)
    with pytest.raises(UnknownNameError):
        panel.set(acuracy=1)
    assert (panel.design, panel.request) == (design, request)


def test_a_design_without_trips_says_so_and_recovers(make: Make) -> None:
    panel = make(plant=TANK, starts_per_hour=3)
    short = hk.signals.MeasuredTable([0.0, 1.0], [0.0, 1.0], unit="m", name="level")
    panel.set(signal=short)
    assert panel.error == ""
    assert panel.window is None
    assert "needs a design that switches" in panel.figure.words.value
    assert "needs a design that switches" in panel.card.said.value
    panel.set(swing=0.9)
    panel.set(signal=header_tank().signal)
    assert {"cycling", "swing"} <= set(widths(panel))
    assert panel.error == ""


def test_another_signal_whose_unit_is_not_that_of_the_plant_is_told(make: Make) -> None:
    metres = hk.Integrating(rate_on=2e-3, rate_off=-1e-3, unit="m")
    panel = make(plant=metres)
    panel.design = header_tank().with_signal(None)
    assert panel.error == ""
    assert "different units" in panel.figure.words.value


def test_the_review_knows_plant_and_noise(make: Make) -> None:
    asked: dict[str, Any] = {"plant": TANK, "noise": NOISE, "starts_per_hour": 3, "min_off": 60}
    panel = make(**asked)
    assert panel.reviewed == hk.review(header_tank(), **asked)
    assert "cycling" in {finding.name for finding in panel.reviewed}


def test_it_works_on_own_circuits_and_without_a_signal(make: Make) -> None:
    for design in (own_circuit(), header_tank().with_signal(None)):
        panel = make(design, load_step="50 mV")
        assert panel.error == ""
        assert widths(panel) == {"load step": pytest.approx(0.05)}
        assert "\\begin{tabular}" in panel.trips.copy.text


def test_what_is_typed_is_escaped(make: Make) -> None:
    panel = make(plant=TANK)
    row = panel.asked.rows["swing"]
    type_in(row.field, "<img src=x onerror=alert(1)>")
    assert "<img" not in row.note.text


def test_the_snapshot_holds_pictures_bounds_and_verdict(make: Make) -> None:
    still = make(**EMPTY).snapshot()
    assert len(still.stills) == 3
    assert any("Width of level" in one.alt for one in still.stills)
    assert "no width meets both cycling" in str(still)
    assert "ceiling: swing" in str(still)


def test_pictures_follow_the_room_of_the_page(make: Make) -> None:
    panel = make(**EMPTY)
    _, room, _ = panel.children
    for width in (1400, 700, 360):
        send(room, value=str(width))
        assert panel.figure.picture.width_px <= max(width, panel.figure.picture.min_width_px)
    assert panel.error == ""


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.WindowPanel(header_tank(), noise=NOISE, **EMPTY)
    panel.card.search()
    panel.set(kind="lag", tau=900, on_level=4, off_level=-1.5)
    panel.close()
    assert registered() == before
    with pytest.raises(InputError):
        hk.panels.WindowPanel(header_tank(), starts_per_hour=3)
    assert registered() == before
