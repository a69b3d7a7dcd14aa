"""The cycle panel: plant, request and design in one step, waveform, extremes, refusals."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.base.errors import InputError, PlantError, UnknownNameError
from hystkit.circuit.demo import header_tank
from hystkit.panels.cycle_rows import Ladder
from tests.panels.front import design_of, own_circuit, registered, send, type_in

Make = Callable[..., hk.panels.CyclePanel]
LAGGED = hk.TwoLag(600, 60, on_level=4, off_level=-1.5, dead_time=20)
OWN = hk.StateSpace(
    a=[[-0.02, 0.01], [0.002, -0.003]], b=[0.05, 0.0], c=[0, 1], name="tank and coil"
)


@pytest.fixture
def make() -> Iterator[Make]:
    """Make panels that are closed after the test."""
    made: list[hk.panels.CyclePanel] = []

    def one(design: hk.Design, **asked: Any) -> hk.panels.CyclePanel:
        made.append(hk.panels.CyclePanel(design, **asked))
        return made[-1]

    yield one
    for panel in made:
        panel.close()


@pytest.fixture
def panel(make: Make) -> hk.panels.CyclePanel:
    return make(header_tank(), plant=LAGGED)


def rows(panel: hk.panels.CyclePanel) -> dict[str, tuple[str, ...]]:
    return {row[0]: row for row in panel.trips.rows[1:]}


def number(text: str) -> float:
    return float(text.split()[0])


def test_it_shows_what_the_analysis_gives(panel: hk.panels.CyclePanel) -> None:
    trips = hk.trip_points(header_tank()).measurand.switching("high")
    found = hk.steady_cycle(LAGGED, *trips)
    shown = rows(panel)
    times = {"on time": found.on_time, "off time": found.off_time, "period": found.period}
    for name, value in {**times, "starts per hour": found.starts_per_hour}.items():
        assert number(shown[name][1]) == pytest.approx(float(value), rel=5e-3)
    assert number(shown["duty"][1]) == pytest.approx(100 * float(found.duty), rel=5e-3)
    assert number(shown["highest"][-1]) == pytest.approx(float(found.high), rel=1e-3)
    assert number(shown["lowest"][-1]) == pytest.approx(float(found.low), rel=1e-3)
    assert panel.plant == hk.TwoLag(600, 60, 4, -1.5, dead_time=20, unit="m")
    assert panel.error == ""


def test_all_rows_of_the_table_are_as_long_as_its_heading(make: Make) -> None:
    for design in (header_tank(), header_tank().with_signal(None), own_circuit()):
        panel = make(design, operations=1e5)
        assert {len(row) for row in panel.trips.rows} == {len(panel.trips.rows[0])}
        assert panel.error == ""


def test_without_a_signal_extremes_are_in_volts(make: Make) -> None:
    panel = make(header_tank().with_signal(None), plant=LAGGED)
    assert rows(panel)["highest"][1].endswith(" V")
    assert panel.plant.unit == "V"
    assert "V" in panel.plant_section.rows["on_level"].field.value


@pytest.mark.parametrize("name", ["R_F", "tau", "sensor_tau", "on_level", "off_level", "dead_time"])
def test_a_move_of_a_slider_moves_the_waveform(panel: hk.panels.CyclePanel, name: str) -> None:
    known = {**panel.parts.rows, **panel.plant_section.rows}
    before, period = panel.figure.image.value, float(panel.cycle.period)
    slider = known[name].slider
    send(slider, value=slider.value + 6)
    assert panel.figure.image.value != before
    assert float(panel.cycle.period) != period
    assert panel.error == ""


@pytest.mark.parametrize(
    ("plant", "names"),
    [
        (hk.FirstOrder(600, 4, -1.5), ["tau", "on_level", "off_level", "dead_time"]),
        (hk.Integrating(0.002, -0.001), ["rate_on", "rate_off", "dead_time"]),
    ],
)
def test_rows_are_those_of_the_plant(make: Make, plant: hk.Plant, names: list[str]) -> None:
    panel = make(header_tank(), plant=plant)
    section = panel.plant_section
    assert list(section._list.children) == [section.rows[name].widget for name in names]
    for name in names:
        slider = section.rows[name].slider
        before = getattr(panel.request, name)
        send(slider, value=slider.value + 3)
        assert getattr(panel.request, name) > before


def test_another_kind_keeps_the_numbers_of_the_first(panel: hk.panels.CyclePanel) -> None:
    choice = panel.plant_section.kind.field
    send(choice, index=list(choice.options).index("integrating"))
    assert isinstance(panel.plant, hk.Integrating)
    assert panel.cycling.cycles
    send(choice, index=list(choice.options).index("two lags"))
    assert panel.plant == hk.TwoLag(600, 60, 4, -1.5, dead_time=20, unit="m")


def test_a_typed_number_is_read_with_its_unit_and_kept_exactly(panel: hk.panels.CyclePanel) -> None:
    rows = panel.plant_section.rows
    type_in(rows["tau"].field, "0.7 ks")
    type_in(rows["on_level"].field, "3.141 m")
    type_in(rows["dead_time"].field, "30 / 10")
    assert (panel.request.tau, panel.request.on_level) == (700.0, 3.141)
    assert panel.request.dead_time == (30.0, 10.0)
    assert rows["dead_time"].field.value == "30 s / 10 s"
    assert rows["dead_time"].slider.disabled
    assert panel.plant.dead_time == (30.0, 10.0)
    # What a front end reports back when it shows the slider is no move of a hand.
    assert panel.request.tau == 700.0


def test_a_plant_of_ones_own_is_shown_and_not_edited(make: Make) -> None:
    panel = make(header_tank(), plant=OWN)
    assert panel.plant is OWN
    assert list(panel.plant_section._list.children) == [panel.plant_section.remark]
    assert "2 states" in panel.plant_section.remark.value
    assert panel.cycling.cycles
    panel.set(plant=LAGGED)
    assert isinstance(panel.plant, hk.TwoLag)
    panel.set(kind="own")
    assert panel.plant is OWN


def test_a_plant_of_ones_own_has_to_be_given(panel: hk.panels.CyclePanel) -> None:
    choice = panel.plant_section.kind
    send(choice.field, index=3)
    assert "No plant of your own" in choice.note.text
    assert panel.request.kind == "two lags"


@pytest.mark.parametrize(
    ("plant", "says", "on"),
    [
        (hk.FirstOrder(600, 1.3, -1.5), "stays on", True),
        (hk.FirstOrder(600, 4, 1.2), "stays off", False),
        (hk.FirstOrder(600, -1.5, 4), "wrong way", True),
    ],
)
def test_where_it_does_not_cycle_it_shows_where_it_sticks(
    panel: hk.panels.CyclePanel, plant: hk.Plant, says: str, on: bool
) -> None:
    panel.set(plant=plant)
    assert says in panel.figure.words.value
    assert says in rows(panel)["cycle"][1]
    assert panel.reviewed["cycling"].severity == "fault"
    assert panel.cycling.phases[-1].on == on
    assert panel.error == ""
    panel.set(plant=LAGGED)
    assert "on time" in rows(panel)


def test_a_load_on_at_the_other_output_state_cools(panel: hk.panels.CyclePanel) -> None:
    send(panel.asked.rows["load"].field, index=1)
    assert panel.request.load == "low"
    assert "wrong way" in panel.cycling.message
    panel.set(on_level=-1.5, off_level=4)
    assert panel.cycling.cycles
    assert not panel.cycle.heating


def test_declared_limits_reach_the_findings(panel: hk.panels.CyclePanel) -> None:
    starts = float(panel.cycle.starts_per_hour)
    type_in(panel.asked.rows["starts_per_hour"].field, f"{starts - 1:.2f}")
    assert panel.reviewed["cycling"].severity == "warning"
    type_in(panel.asked.rows["starts_per_hour"].field, f"{starts + 1:.2f}")
    assert panel.reviewed["cycling"].severity == "pass"
    type_in(panel.asked.rows["min_on"].field, "1 ks")
    assert panel.reviewed["on time"].severity == "warning"
    assert float(panel.cycle.on_time) == pytest.approx(1000.0)


def test_contact_life_follows_from_its_rating(panel: hk.panels.CyclePanel) -> None:
    assert "contact life" not in rows(panel)
    type_in(panel.asked.rows["operations"].field, "100000")
    years = 1e5 / (8760 * float(panel.cycle.starts_per_hour))
    assert number(rows(panel)["contact life"][1]) == pytest.approx(years, rel=5e-3)


def test_a_start_shows_the_run_from_there(panel: hk.panels.CyclePanel) -> None:
    type_in(panel.asked.rows["start"].field, "0 m")
    type_in(panel.asked.rows["until"].field, "3600")
    found = panel.cycling
    assert (found.steady, found.shown) == (False, (0.0, 3600.0))
    assert found.waveform.process[0] == pytest.approx(0.0)
    type_in(panel.asked.rows["start"].field, "")
    assert panel.cycling.steady


@pytest.mark.parametrize(
    ("name", "text", "said"),
    [
        ("tau", "0", "outside its range"),
        ("tau", "soon", "not a number"),
        ("sensor_tau", "-1", "outside its range"),
        ("dead_time", "-5", "outside its range"),
        ("dead_time", "1 / 2 / 3", "more than two parts"),
        ("on_level", "3 V", "is not in m"),
        ("min_on", "-1", "out of range"),
        ("starts_per_hour", "0", "not above 0"),
        ("operations", "-5", "not positive"),
        ("until", "0", "out of range"),
    ],
)
def test_a_refusal_stands_at_its_field_and_all_else_stays(
    panel: hk.panels.CyclePanel, name: str, text: str, said: str
) -> None:
    before, picture = panel.request, panel.figure.image.value
    row = {**panel.plant_section.rows, **panel.asked.rows}[name]
    type_in(row.field, text)
    assert said in row.note.text
    assert (panel.request, panel.figure.image.value) == (before, picture)
    assert row.field.value == text
    assert panel.error == ""
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 1)
    assert row.note.text == ""


def test_what_is_typed_is_escaped(panel: hk.panels.CyclePanel) -> None:
    row = panel.plant_section.rows["tau"]
    type_in(row.field, "<img src=x onerror=alert(1)>")
    assert "<img" not in row.note.text


def test_refusals_of_a_call_change_nothing(panel: hk.panels.CyclePanel) -> None:
    design, request = panel.design, panel.request
    several = hk.FirstOrder([600, 700], 4, -1.5)
    for changes, error in (
        ({"R_F": "120k", "tau": -1}, PlantError),
        ({"taw": 5}, UnknownNameError),
        ({"plant": several}, InputError),
        ({"plant": "boiler"}, InputError),
        ({"kind": "three lags"}, PlantError),
    ):
        with pytest.raises(error):
            panel.set(**changes)
    with pytest.raises(UnknownNameError, match="output state"):
        hk.panels.CyclePanel(design, load="middle")
    assert (panel.design, panel.request) == (design, request)


def test_a_plant_in_another_unit_is_refused() -> None:
    with pytest.raises(InputError, match="different units"):
        hk.cycling(header_tank(), hk.FirstOrder(600, 40, 10, unit="°C"))


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=lambda stage: stage.title)
@pytest.mark.parametrize("load", ["high", "low"])
def test_the_plant_to_begin_with_cycles_on_every_form(
    make: Make, stage: hk.Stage, load: str
) -> None:
    panel = make(design_of(stage), load=load)
    assert panel.cycling.cycles
    assert panel.error == ""


def test_a_design_without_trips_in_reach_says_so_and_recovers(make: Make) -> None:
    measured = hk.signals.MeasuredTable([0, 1, 2], [0.6, 1.8, 3.0], unit="m", name="level")
    panel = make(header_tank().with_signal(measured))
    assert panel.cycling.cycles
    # The output lifts the trips beyond the last voltage that was measured.
    panel.set(V_OH=12, R_F="10k")
    assert panel.cycle is None
    assert panel.cycling.message in panel.figure.words.value
    assert panel.error == ""
    panel.set(V_OH=None, R_F="100k")
    assert panel.cycling.cycles


def test_design_and_request_change_in_one_step(panel: hk.panels.CyclePanel) -> None:
    drawn = panel.figure.picture
    seen: list[object] = []
    panel.observe(lambda change: seen.append(panel.request.tau), names="design")
    panel.set(R_F="120k", plant=hk.FirstOrder(700, 4, -1.5))
    assert seen == [700.0]
    assert panel.figure.picture is drawn


def test_pictures_follow_the_room_of_the_page(panel: hk.panels.CyclePanel) -> None:
    _, room, _ = panel.children
    for width in (1400, 700, 340):
        send(room, value=str(width))
        assert panel.figure.picture.width_px <= max(width, 340)
    assert panel.error == ""


def test_the_snapshot_holds_pictures_and_table(panel: hk.panels.CyclePanel) -> None:
    still = panel.snapshot()
    assert len(still.stills) == 3
    assert any("steady cycle" in one.alt for one in still.stills)
    assert "starts per hour" in str(still)
    assert "tabular" in panel._tabulated(panel.cycling.levels, panel.result, hk.derive(
        panel.design.stage).for_design(panel.design))[1]  # fmt: skip


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.CyclePanel(header_tank(), plant=LAGGED)
    panel.set(plant=hk.Integrating(0.002, -0.001))
    type_in(panel.asked.rows["start"].field, "0")
    panel.close()
    assert registered() == before


@pytest.mark.parametrize(
    "ladder",
    [
        Ladder.of_times(700.0),
        Ladder.of_dead_times(0.0),
        Ladder.of_dead_times(45.0),
        Ladder.of_rates(-0.003),
        Ladder.of_rates(0.002),
        Ladder.of_levels(-14.0, 0.2),
    ],
)
def test_steps_ascend_and_find_themselves(ladder: Ladder) -> None:
    assert np.all(np.diff(ladder.values) > 0)
    assert [ladder.place(value) for value in ladder.values] == list(range(len(ladder.values)))
