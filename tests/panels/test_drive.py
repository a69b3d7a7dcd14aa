"""Every selector, slider and field is moved in every form, and nothing goes wrong."""

from __future__ import annotations

import pytest

import hystkit as hk
from hystkit.circuit import preferred
from hystkit.circuit.forms import CHOICES
from tests.panels.conftest import MakePanel
from tests.panels.front import clean, design_of, own_circuit, send, type_in


def drive_sliders(panel: hk.panels.TripPanel) -> None:
    for name, row in panel.parts.rows.items():
        ends = (0, row.slider.max) if name in ("R_F", "R_4") else ()
        for place in (*ends, row.slider.max // 3):
            expected = row.steps.values[place]
            send(row.slider, value=place)
            assert panel.design.parts[name].value == expected
            assert clean(panel)


@pytest.mark.parametrize("stage", hk.Stage.all(), ids=lambda stage: stage.title)
def test_every_form_with_every_optional_part(stage: hk.Stage, make: MakePanel) -> None:
    panel = make(design_of(stage))
    for toggle in panel.parts.toggles.values():
        send(toggle, value=True)
        assert clean(panel)
    assert set(panel.design.parts) == {*stage.required, *stage.optional}
    pictures = panel.loop.image.value
    drive_sliders(panel)
    assert panel.loop.image.value != pictures
    assert panel.result.ok
    for toggle in panel.parts.toggles.values():
        send(toggle, value=False)
        assert clean(panel)
    assert set(panel.design.parts) == set(stage.required)


def test_selectors_reach_all_forms(panel: hk.panels.TripPanel) -> None:
    reached = set()
    for supply in CHOICES["supply"]:
        send(panel.form.selectors["supply"], index=CHOICES["supply"].index(supply))
        references = panel.form.selectors["reference"].options
        assert ("ground" in references) == (supply == "split")
        for choice in ("sense", "output"):
            for option in range(2):
                send(panel.form.selectors[choice], index=option)
                for n in range(len(references)):
                    send(panel.form.selectors["reference"], index=n)
                    assert clean(panel)
                    stage = panel.design.stage
                    assert stage.reference == references[n]
                    reached.add((stage.sense, stage.supply, stage.reference, stage.output))
    send(panel.form.selectors["sense"], index=0)
    for n in range(len(references)):
        send(panel.form.selectors["reference"], index=n)
        send(panel.form.selectors["output"], index=0)
        stage = panel.design.stage
        reached.add((stage.sense, stage.supply, stage.reference, stage.output))
    every = {(s.sense, s.supply, s.reference, s.output) for s in hk.Stage.all()}
    assert every - reached <= {s for s in every if s[0] == "inverting" and s[1] == "single"}


def test_own_circuit(make: MakePanel) -> None:
    panel = make(own_circuit())
    assert "Tee input" in panel.form.widget.children[0].value
    assert panel.form.selectors["sense"] not in panel.form.widget.children
    assert panel.parts.toggles == {}
    drive_sliders(panel)
    assert "R_{\\mathrm{6}}" in panel.law.latex or "R_{6}" in panel.law.latex


@pytest.mark.parametrize("output", ["push-pull", "open-collector"])
def test_every_field_of_levels_and_device(output: str, make: MakePanel) -> None:
    stage = hk.Stage("inverting", supply="split", reference="source", output=output)
    panel = make(design_of(stage).with_parts(R_L="47k"))
    rails, levels = panel.levels.rails, panel.levels.levels
    typed = {"V_REF": "1.25", "V_PU": "11 V", "V_L": "700m", "V_OH": "10.5", "V_OL": "-11.5"}
    type_in(rails["V_CC"].field, "11.9 V")
    type_in(rails["V_EE"].field, "-11.8")
    type_in(rails["V_CC"].tolerance, "2")
    assert panel.design.supply == hk.Supply(11.9, -11.8, tol=0.02)
    for name in panel.design.stage.levels:
        type_in(levels[name].field, typed[name])
        type_in(levels[name].tolerance, "1 %")
        assert panel.design.levels[name].tol == 0.01
        assert clean(panel)
    assert panel.design.levels["V_OL"].value == -11.5
    for name, entry in panel.device.entries.items():
        type_in(entry.field, "1m")
        assert getattr(panel.design.device, name) == 1e-3
        assert clean(panel)
        type_in(entry.field, "")
    type_in(panel.device.name.field, "quad comparator class")
    assert panel.design.device == hk.Device(name="quad comparator class")
    for name in panel.design.stage.levels[1:]:
        type_in(levels[name].field, "")
        assert name not in panel.design.levels
    assert clean(panel)


def test_folds_open_and_close(panel: hk.panels.TripPanel) -> None:
    for fold in (panel.levels.fold, panel.device.fold):
        content = fold.widget.children[1]
        assert content.layout.display == "none"
        send(fold.button, value=True)
        assert content.layout.display != "none"
        send(fold.button, value=False)
        assert content.layout.display == "none"


@pytest.mark.parametrize("series", ["E12", "E24", "E48", "E96", "E192"])
def test_series_changes_steps_and_not_values(series: str, panel: hk.panels.TripPanel) -> None:
    before = panel.design
    send(panel.parts.series, index=list(panel.parts.series.options).index(series))
    assert panel.design is before
    row = panel.parts.rows["R_F"]
    assert row.slider.max == 2 * len(preferred.series(series))
    send(row.slider, value=row.slider.value + 1)
    assert panel.design.parts["R_F"].value == preferred.step(100e3, series, 1)
    assert clean(panel)
