"""What a panel leaves behind: nothing."""

from __future__ import annotations

import gc

import pytest
from matplotlib import pyplot
from matplotlib.figure import Figure

import hystkit as hk
from hystkit.circuit.demo import header_tank
from tests.panels.front import own_circuit, registered, send, type_in


def figures() -> int:
    gc.collect()
    return sum(isinstance(each, Figure) for each in gc.get_objects())


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.TripPanel(header_tank())
    for toggle in panel.parts.toggles.values():
        send(toggle, value=True)
    send(panel.form.selectors["sense"], index=1)
    type_in(panel.parts.rows["R_F"].field, "x")
    panel.design = own_circuit()
    assert registered() > before + 50
    panel.close()
    assert registered() == before
    panel.close()
    assert registered() == before


def test_a_closed_panel_does_nothing_any_more(monkeypatch: pytest.MonkeyPatch) -> None:
    panel = hk.panels.TripPanel(header_tank())
    slider = panel.parts.rows["R_F"].slider
    panel.close()
    monkeypatch.setattr(panel, "_follow", lambda _: pytest.fail("still follows"))
    panel.design = own_circuit()
    slider.value += 1


def test_a_thousand_moves_leave_no_figure_and_no_widget() -> None:
    panel = hk.panels.TripPanel(header_tank())
    row = panel.parts.rows["R_F"]
    send(row.slider, value=100)
    widgets, drawn, known = registered(), figures(), pyplot.get_fignums()
    redraws = [view.picture.full_redraws for view in (panel.ruler, panel.loop, panel.schematic)]
    with pytest.MonkeyPatch.context() as patch:
        # Compression is half of the time and keeps nothing.
        patch.setattr("hystkit.panels.view.SCALE", 0.25)
        for turn in range(1000):
            send(row.slider, value=100 + turn % 7)
    assert (registered(), figures(), pyplot.get_fignums()) == (widgets, drawn, known)
    after = [view.picture.full_redraws for view in (panel.ruler, panel.loop, panel.schematic)]
    assert all(new - old <= 3 for old, new in zip(redraws, after, strict=True))
    assert panel.error == ""
    panel.close()
    del panel, row
    assert figures() == drawn - 3


def test_changing_forms_back_and_forth_makes_no_more_widgets() -> None:
    panel = hk.panels.TripPanel(header_tank())

    def round_trip() -> int:
        for index in (1, 0):
            for selector in panel.form.selectors.values():
                send(selector, index=index)
        return registered()

    first = round_trip()
    assert [round_trip() for _ in range(2)] == [first] * 2
    panel.close()
