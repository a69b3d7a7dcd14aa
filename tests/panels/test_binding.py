"""The design is the truth: controls follow it, and it follows what is done to them."""

from __future__ import annotations

import pytest
import traitlets

import hystkit as hk
from hystkit.base import quantity
from hystkit.circuit import preferred
from hystkit.circuit.demo import header_tank
from tests.panels.conftest import MakePanel
from tests.panels.front import clean, design_of, send, sent, type_in


def test_setting_the_design_moves_the_controls(panel: hk.panels.TripPanel) -> None:
    row = panel.parts.rows["R_F"]
    place = row.slider.value
    panel.design = panel.design.with_parts(R_F=hk.Part("121k", tol=0.05))
    assert row.slider.value == place + 8
    assert (row.field.value, row.tolerance.value) == ("121k", "5 %")
    panel.design = design_of(hk.Stage("non-inverting", supply="split", reference="ground"))
    assert panel.form.selectors["reference"].value == "ground"
    assert list(panel.parts.rows) == ["R_I", "R_F"]
    assert panel.levels.rails["V_EE"].field.value == "-12 V"
    assert clean(panel)


def test_a_move_reaches_design_result_and_pictures(panel: hk.panels.TripPanel) -> None:
    row = panel.parts.rows["R_F"]
    before = [view.image.value for view in (panel.ruler, panel.loop, panel.schematic)]
    alt, table, numbers = panel.ruler.words.value, panel.trips.table.value, panel.law.numbers.value
    send(row.slider, value=row.slider.value + 20)
    assert panel.design.parts["R_F"] == hk.Part("162k", tol=0.01)
    assert float(panel.result.width) == pytest.approx(float(hk.trip_points(panel.design).width))
    after = [view.image.value for view in (panel.ruler, panel.loop, panel.schematic)]
    assert all(one != other for one, other in zip(before, after, strict=True))
    assert panel.ruler.words.value != alt
    assert panel.trips.table.value != table
    assert panel.law.numbers.value != numbers
    assert f"{panel.result.upper:.3f}" in panel.trips.table.value


@pytest.mark.parametrize("value", ["575k", "123456.789", "1R01", "9.87654321M"])
def test_a_value_off_the_series_is_kept_and_shown_exactly(
    value: str, panel: hk.panels.TripPanel
) -> None:
    row = panel.parts.rows["R_F"]
    type_in(row.field, value)
    typed = panel.design.parts["R_F"].value
    assert typed == hk.Part(value).value
    assert hk.Part(row.field.value).value == typed
    # A view that is displayed sends back what it shows; that is no change.
    send(row.slider, value=row.slider.value)
    send(row.field, value=row.field.value)
    assert panel.design.parts["R_F"].value == typed
    nearest = preferred.nearest(typed, "E96")
    assert row.steps.values[row.slider.value] == nearest


def test_typing_centres_the_slider_and_a_move_does_not(panel: hk.panels.TripPanel) -> None:
    row = panel.parts.rows["R_F"]
    type_in(row.field, "33k")
    assert row.slider.value == row.slider.max // 2
    steps = row.steps
    send(row.slider, value=row.slider.max)
    assert row.steps is steps
    assert panel.design.parts["R_F"].value == 332e3


@pytest.mark.parametrize(
    ("text", "says"), [("33kk", "not in Ω"), ("4,7k", "4.7k"), ("", "empty"), ("0", "positive"),
                       ("-5k", "positive"), ("10 V", "Ω"), ("nan", "finite")],
)  # fmt: skip
def test_an_invalid_entry_says_why_and_the_last_good_picture_stays(
    text: str, says: str, panel: hk.panels.TripPanel
) -> None:
    row, before = panel.parts.rows["R_F"], panel.design
    picture = panel.loop.image.value
    type_in(row.field, text)
    assert panel.design is before
    assert panel.loop.image.value is picture
    assert row.field.value == text
    assert says in row.note.text
    assert panel.error == ""
    send(panel.parts.rows["R_T"].slider, value=100)
    assert row.field.value == "100k"
    assert clean(panel)


def test_an_entry_equal_to_the_model_is_written_our_way(panel: hk.panels.TripPanel) -> None:
    row, before = panel.parts.rows["R_F"], panel.design
    type_in(row.field, "33kk")
    type_in(row.field, "100000.0")
    assert panel.design == before
    assert row.field.value == "100k"
    assert clean(panel)


@pytest.mark.parametrize(
    ("section", "name", "text", "says"),
    [
        ("levels", "V_OL", "6 V", "V_OL"),
        ("levels", "V_OH", "0", "V_OH"),
        ("rails", "V_CC", "-5", "rails"),
        ("device", "r_low", "-1", "negative"),
    ],
)
def test_a_structural_fault_is_shown_in_place(
    section: str, name: str, text: str, says: str, panel: hk.panels.TripPanel
) -> None:
    rows = {
        "levels": panel.levels.levels,
        "rails": panel.levels.rails,
        "device": panel.device.entries,
    }[section]
    before = panel.design
    type_in(rows[name].field, text)
    assert panel.design is before
    assert says in rows[name].note.text
    assert rows[name].field.value == text


def test_a_refused_form_springs_back(make: MakePanel) -> None:
    # With drops of 8 V in sum, 6 V of a single supply leave no two output states.
    stage = hk.Stage("inverting", supply="split")
    panel = make(
        design_of(stage, supply=hk.Supply(6, -6), device=hk.Device(drop_high=4, drop_low=4))
    )
    before = panel.design
    send(panel.form.selectors["supply"], index=0)
    assert panel.design is before
    assert panel.form.selectors["supply"].value == "split"
    assert "V_OH is not above V_OL" in panel.form.note.text


def test_a_change_is_one_recompute_and_sends_only_what_changed(
    panel: hk.panels.TripPanel, monkeypatch: pytest.MonkeyPatch
) -> None:
    follow, times = panel._follow, []
    monkeypatch.setattr(panel, "_follow", lambda design: (times.append(design), follow(design)))
    with sent() as messages:
        send(panel.parts.rows["R_F"].slider, value=panel.parts.rows["R_F"].slider.value + 3)
    assert len(times) == 1
    widgets = [widget for widget, _ in messages]
    for still in (panel.law.formula, panel.parts.rows["R_T"].field, panel.device.name.field):
        assert still not in widgets
    assert len(messages) == len({(id(w), t) for w, t in messages})
    panel.set(R_F="47k", R_T=hk.Part("10k", tol=0.02), V_CC=6, drop_low="0.2 V", name="all")
    assert len(times) == 2
    with sent() as messages:
        panel.design = panel.design
        panel.set(R_F=47e3)
    assert messages == []
    assert len(times) == 2


def test_set_names_every_fault_and_changes_nothing(panel: hk.panels.TripPanel) -> None:
    before = panel.design
    with pytest.raises(hk.UnknownNameError, match="R_FF"):
        panel.set(R_FF="10k", R_T="1k")
    with pytest.raises(hk.DesignError) as caught:
        panel.set(R_T="-1k", drop_low="x", R_B="0")
    assert len(caught.value.faults) == 3
    assert panel.design is before
    assert clean(panel)


def test_the_last_value_of_a_flood_wins(panel: hk.panels.TripPanel) -> None:
    row = panel.parts.rows["R_F"]
    for place in range(10, 40):
        send(row.slider, value=place)
    assert panel.design.parts["R_F"].value == row.steps.values[39]
    assert float(panel.result.upper) == float(hk.trip_points(panel.design).upper)
    assert row.field.value == quantity.code(row.steps.values[39])


def test_two_linked_panels_do_not_play_ping_pong(make: MakePanel) -> None:
    one, other = make(header_tank()), make(header_tank().with_parts(R_F="47k"))
    link = traitlets.link((one, "design"), (other, "design"))
    assert other.design == one.design
    changes: list[str] = []
    one.observe(lambda _: changes.append("one"), names="design")
    other.observe(lambda _: changes.append("other"), names="design")
    send(other.parts.rows["R_F"].slider, value=30)
    assert one.design == other.design
    assert sorted(changes) == ["one", "other"]
    assert one.parts.rows["R_F"].field.value == other.parts.rows["R_F"].field.value
    one.set(R_F="57k6")
    assert other.design.parts["R_F"].value == 57600
    assert clean(one)
    assert clean(other)
    link.unlink()


def test_the_design_is_checked(panel: hk.panels.TripPanel) -> None:
    with pytest.raises(traitlets.TraitError):
        panel.design = "R_F"
    with pytest.raises(hk.DesignError, match="shows a design"):
        hk.panels.TripPanel(hk.Stage("inverting"))  # type: ignore[arg-type]
    with pytest.raises(traitlets.TraitError):
        panel.result = None


@pytest.mark.parametrize(
    "change",
    [
        {"R_F": 123456.789012345, "R_T": 1 / 3},
        {"name": 'it\'s a "name"\\n with <b>tags</b> ${}', "device_name": "'''"},
        {
            "R_F": hk.Part("10k", tol=0.013, tempco=-50e-6),
            "R_L": "1k",
            "V_L": 0.7,
            "supply_tol": 0.03,
        },
        {"supply": "split", "V_EE": -3.3, "reference": "ground", "output": "open-collector"},
        {"common_mode_low": -0.3, "common_mode_high": 1.5, "offset": -1e-3, "leakage": 1e-12},
        {"signal": hk.signals.Linear(per_unit=-0.01, at_zero=3.3, span=(-20, 50), unit="°C")},
    ],
)
def test_the_code_rebuilds_the_design(
    change: dict[str, object], panel: hk.panels.TripPanel
) -> None:
    panel.set(**change)
    assert eval(panel.as_code(), {"hk": hk}) == panel.design
    scope: dict[str, object] = {}
    exec(panel.export.python.text, scope)
    assert scope["design"] == panel.design
