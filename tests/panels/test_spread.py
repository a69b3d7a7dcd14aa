"""The spread panel: request and design in one step, samples, limits, yield, refusals."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import pytest

import hystkit as hk
from hystkit.base.errors import InputError, UnknownNameError
from hystkit.circuit.demo import header_tank
from tests.panels.front import own_circuit, registered, send, type_in

Make = Callable[..., hk.panels.SpreadPanel]


@pytest.fixture
def make() -> Iterator[Make]:
    """Make panels that are closed after the test."""
    made: list[hk.panels.SpreadPanel] = []

    def one(design: hk.Design, **asked: object) -> hk.panels.SpreadPanel:
        made.append(hk.panels.SpreadPanel(design, **asked))
        return made[-1]

    yield one
    for panel in made:
        panel.close()


@pytest.fixture
def panel(make: Make) -> hk.panels.SpreadPanel:
    return make(header_tank(), samples=2000)


def rows(panel: hk.panels.SpreadPanel) -> dict[str, tuple[str, ...]]:
    return {row[0]: row for row in panel.trips.rows[1:]}


def test_it_shows_what_the_analysis_gives(panel: hk.panels.SpreadPanel) -> None:
    found = hk.spread(panel.design, samples=2000)
    for kind in ("upper", "lower", "width", "middle"):
        low, high = found.extremes[kind]
        shown = rows(panel)[kind][2].split(" to ")
        assert [float(end.split()[0]) for end in shown] == pytest.approx(
            [low, high] if kind != "width" else [low * 1e3, high * 1e3], rel=1e-3
        )
    assert "yield" not in rows(panel)
    assert panel.error == ""


def test_a_typed_window_gives_a_yield_with_its_confidence(panel: hk.panels.SpreadPanel) -> None:
    field = panel.asked.rows["upper"].field
    nominal = float(panel.result.upper)
    type_in(field, f"from {nominal:.4f} V")
    assert panel.request.upper == (round(nominal, 4), None)
    share = hk.spread(panel.design, samples=2000).yield_within(upper=panel.request.upper)
    assert 0.4 < share.value < 0.6
    assert rows(panel)["yield"][1] == f"{100 * share.value:.4g} %"
    assert f"{100 * share.low:.4g} % to {100 * share.high:.4g} %" in rows(panel)["yield"][2]
    assert "yield" in panel.figure.words.value
    type_in(field, "")
    assert panel.request.upper is None
    assert "yield" not in rows(panel)


def test_a_window_may_be_typed_in_the_measurand(panel: hk.panels.SpreadPanel) -> None:
    type_in(panel.asked.rows["lower"].field, "0.75 to 0.85 m")
    assert panel.request.lower == pytest.approx((1.5, 1.62))
    assert panel.asked.rows["lower"].field.value == "1.5 V to 1.62 V"


def test_a_move_of_a_slider_moves_samples_and_shares(panel: hk.panels.SpreadPanel) -> None:
    views = (panel.ruler, panel.figure, panel.contributions, panel.schematic)
    before = [view.image.value for view in views]
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 20)
    assert all(view.image.value != old for view, old in zip(views, before, strict=True))
    assert panel.spread.design == panel.design


def test_temperature_and_distribution_reach_the_analysis(make: Make) -> None:
    drifting = header_tank().with_parts(R_T=hk.Part("46k4", tol=0.01, tempco=1e-3))
    panel = make(drifting, samples=500)
    before = panel.spread.extremes["upper"]
    type_in(panel.asked.rows["temperature"].field, "-20 to 60")
    assert panel.request.temperature == (-20.0, 60.0)
    after = panel.spread.extremes["upper"]
    assert after[0] < before[0]
    assert after[1] > before[1]
    send(panel.asked.rows["distribution"].field, index=1)
    assert panel.spread.plan.distribution == panel.request.distribution == "uniform"
    assert panel.asked.rows["temperature"].field.value == "-20 °C to 60 °C"


def test_design_and_request_change_in_one_step(panel: hk.panels.SpreadPanel) -> None:
    drawn = panel.figure.picture
    seen: list[object] = []
    panel.observe(lambda change: seen.append(panel.request.upper), names="design")
    panel.set(R_F="120k", upper=(2.0, 2.5))
    assert seen == [(2.0, 2.5)]
    assert panel.design.parts["R_F"].value == 120e3
    assert panel.figure.picture is drawn


@pytest.mark.parametrize(
    ("name", "text", "said"),
    [
        ("upper", "2.3 to 2.2", "wrong way round"),
        ("lower", "nothing", "not a number"),
        ("temperature", "60 to -20", "wrong way round"),
        ("samples", "0", "whole number"),
        ("samples", "2.5", "whole number"),
        ("samples", "1G", "no more samples"),
    ],
)
def test_a_refusal_stands_at_its_field_and_all_else_stays(
    panel: hk.panels.SpreadPanel, name: str, text: str, said: str
) -> None:
    before, picture = panel.request, panel.figure.image.value
    row = panel.asked.rows[name]
    type_in(row.field, text)
    assert said in row.note.text
    assert (panel.request, panel.figure.image.value) == (before, picture)
    assert row.field.value == text
    assert panel.error == ""
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 1)
    assert row.note.text == ""


def test_what_is_typed_is_escaped(panel: hk.panels.SpreadPanel) -> None:
    row = panel.asked.rows["upper"]
    type_in(row.field, "<img src=x onerror=alert(1)>")
    assert "<img" not in row.note.text


def test_several_faults_of_a_call_change_nothing(panel: hk.panels.SpreadPanel) -> None:
    design, request = panel.design, panel.request
    with pytest.raises(InputError):
        panel.set(R_F="120k", upper=(3.0, 2.0))
    with pytest.raises(UnknownNameError):
        panel.set(uper=(2.0, 3.0))
    with pytest.raises(InputError, match="distribution"):
        hk.panels.SpreadPanel(design, distribution="flat")
    assert (panel.design, panel.request) == (design, request)


def test_it_works_on_own_circuits_and_without_tolerances(make: Make) -> None:
    for design in (own_circuit(), header_tank().with_signal(None)):
        panel = make(design, samples=500, upper=(0.0, None))
        assert panel.error == ""
        assert rows(panel)["yield"]


def test_where_not_all_combinations_switch_it_says_so_and_recovers(make: Make) -> None:
    levels = {"V_OH": hk.Part(0.05, tol=0.5), "V_OL": hk.Part(0.04, tol=0.5)}
    panel = make(header_tank(), samples=2000, upper=(0.0, None))
    panel.set(**levels)
    assert panel.error == ""
    assert not panel.spread.switches
    assert panel.share is not None
    assert panel.share.value < 0.9
    assert rows(panel)["upper"][2] == "—"
    assert "not everywhere within the tolerances" in panel.figure.words.value
    panel.set(V_OH=None, V_OL=None)
    assert rows(panel)["yield"][1] == "100 %"
    assert panel.spread.switches


def test_pictures_follow_the_room_of_the_page(panel: hk.panels.SpreadPanel) -> None:
    _, room, _ = panel.children
    for width in (1050, 700, 420):
        send(room, value=str(width))
        assert panel.contributions.picture.width_px == panel.figure.picture.width_px
    assert panel.error == ""


def test_the_snapshot_holds_all_pictures_and_the_table(panel: hk.panels.SpreadPanel) -> None:
    still = panel.snapshot()
    assert len(still.stills) == 4
    assert any("Shares in the variance" in one.alt for one in still.stills)
    assert "exact limits" in str(still)


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.SpreadPanel(header_tank(), samples=500)
    type_in(panel.asked.rows["upper"].field, "2 to 3")
    panel.close()
    assert registered() == before


def vent() -> hk.Design:
    """A greenhouse vent on a thermistor that shares the supply, with tolerances of its own."""
    sensor = hk.signals.Ntc("10k", 3950, r25_tol=0.01, b_tol=0.005)
    parts = {"R_T": "22k1", "R_B": "21k", "R_F": "220k"}
    return hk.Design(
        hk.Stage("inverting"),
        {name: hk.Part(value, tol=0.01) for name, value in parts.items()},
        supply=hk.Supply(5.0, tol=0.05),
        signal=hk.signals.SensorDivider(sensor, hk.Part("10k", tol=0.01), span=(-10, 45)),
    )


def test_the_tolerances_of_the_signal_are_in_limits_shares_and_yield(make: Make) -> None:
    panel = make(vent(), samples=2000)
    found = hk.spread(panel.design, samples=2000).measurand
    shown = rows(panel)
    for kind, end in found.ends.items():
        ends = [float(text) for text in shown[kind][4].split(" to ")]
        assert ends == pytest.approx(found.extremes[end], rel=1e-3)
    assert panel.contributions.picture._names == tuple(found.box.quantities)
    assert {"R_25", "B", "R_X"} <= set(panel.contributions.picture._names)
    assert "in °C" in panel.contributions.words.value
    nominal = float(panel.result.upper)
    panel.set(upper=(nominal - 0.05, nominal + 0.05))
    # The supply moves the trips, and the sensor with them: in the measurand it cancels.
    stage, all_of_it = rows(panel)["yield"], rows(panel)["yield with signal"]
    share = found.yield_at(upper=panel.request.upper)
    assert all_of_it[1] == f"{100 * share.value:.4g} %"
    assert float(stage[1].split()[0]) < 0.9 * float(all_of_it[1].split()[0])
    assert "with the signal" in panel.figure.words.value


def test_a_signal_without_tolerances_adds_no_rows(panel: hk.panels.SpreadPanel) -> None:
    panel.set(upper=(2.2, 2.4))
    assert "yield" in rows(panel)
    assert "yield with signal" not in rows(panel)
    assert "with the signal" not in panel.figure.words.value
