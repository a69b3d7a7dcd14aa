"""The sizing panel: requirement in, ranked candidates, one of them into the design."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import Any

import pytest
import traitlets

import hystkit as hk
from hystkit.base.errors import UnknownNameError
from hystkit.circuit.demo import header_tank
from hystkit.panels.sizing import LISTED
from tests.panels.front import own_circuit, registered, send, type_in

Make = Callable[..., hk.panels.SizingPanel]
EASY = {"on_at": (0.75, 0.85), "off_at": (1.36, 1.46), "series": "E24"}


@pytest.fixture
def make() -> Iterator[Make]:
    """Make panels that are closed after the test."""
    made: list[hk.panels.SizingPanel] = []

    def one(design: hk.Design, **asked: object) -> hk.panels.SizingPanel:
        made.append(hk.panels.SizingPanel(design, **asked))
        return made[-1]

    yield one
    for panel in made:
        panel.close()


def click(button: Any) -> None:
    """Press a button, as its view in a browser does."""
    data = {"method": "custom", "content": {"event": "click"}}
    button._handle_msg({"content": {"data": data}, "buffers": []})


def shown(panel: hk.panels.SizingPanel) -> str:
    rows = [row.children[1] for row in panel.candidates._list.children]
    cells = [cell.value for row in rows for cell in row.children]
    return " ".join([panel.candidates.said.value, *cells])


def test_the_list_is_what_sizing_gives(make: Make) -> None:
    panel = make(header_tank(), **EASY)
    click(panel.asked.button)
    tank = header_tank()
    found = hk.size(
        tank.stage, supply=tank.supply, device=tank.device, signal=tank.signal,
        free=("R_T", "R_B", "R_F"), count=LISTED, **EASY,
    )  # fmt: skip
    assert panel.found is not None
    assert [one.design.parts for one in panel.found] == [one.design.parts for one in found]
    assert len(panel.candidates.buttons) == len(found) == LISTED
    for one in found:
        assert one.values in shown(panel)
    assert found.asked in shown(panel)
    assert "both windows hold" in shown(panel)
    assert panel.error == ""


def test_adopt_puts_a_candidate_into_the_shared_design(make: Make) -> None:
    panel = make(header_tank(), **EASY)
    other = hk.panels.TripPanel(header_tank())
    traitlets.link((panel, "design"), (other, "design"))
    before = panel.ruler.image.value
    click(panel.asked.button)
    click(panel.candidates.buttons[1])
    assert panel.found is not None
    assert panel.design.parts == panel.found[1].design.parts
    assert panel.design.name == "Header tank"
    assert other.design is panel.design
    assert panel.ruler.image.value != before
    words = [button.description for button in panel.candidates.buttons]
    assert words[1] == "✓ adopted"
    assert set(words[:1] + words[2:]) == {"adopt"}
    slider = panel.parts.rows["R_F"].slider
    send(slider, value=slider.value + 3)
    assert panel.candidates.buttons[1].description == "adopt"
    other.close()


def test_typed_requirements_reach_the_request(make: Make) -> None:
    panel = make(header_tank())
    rows = panel.asked.rows
    type_in(rows["on_at"].field, "0.75 to 0.85 m")
    type_in(rows["off_at"].field, "1.4")
    assert panel.request.on_at == (0.75, 0.85)
    assert panel.request.off_at == 1.4
    assert rows["on_at"].field.value == "750 mm to 850 mm"
    assert rows["off_at"].field.value == "1.4 m"
    type_in(rows["upper"].field, "2.3 V")
    assert panel.request.upper == 2.3
    # Volts take the place of quantities, for only one of both can be asked.
    assert panel.request.on_at is panel.request.off_at is None
    assert rows["on_at"].field.value == ""
    type_in(rows["lower"].field, "1550 mV")
    type_in(rows["tol"].field, "0.1")
    type_in(rows["input_resistance"].field, "20k")
    send(rows["series"].field, index=1)
    type_in(rows["tempco"].field, "50 ppm/K")
    type_in(rows["temperature"].field, "0 to 50")
    assert panel.request.lower == 1.55
    assert (panel.request.tempco, panel.request.temperature) == (50e-6, (0.0, 50.0))
    assert rows["tempco"].field.value == "50 ppm/K"
    assert panel.request.tol == 0.001
    assert panel.request.limits == {"input_resistance": 20e3}
    panel.search()
    assert panel.found is not None
    assert panel.found.fits
    assert panel.found[0].design.parts["R_T"].tol == 0.001
    assert panel.found[0].design.parts["R_T"].tempco == 50e-6
    assert panel.found[0].excursion == 25.0


def test_parts_that_are_not_free_keep_their_value(make: Make) -> None:
    panel = make(header_tank(), **EASY)
    send(panel.asked.chips["R_B"], value=False)
    assert panel.request.free == ("R_T", "R_F")
    panel.search()
    assert panel.found is not None
    assert {one.design.parts["R_B"] for one in panel.found} == {header_tank().parts["R_B"]}
    send(panel.asked.chips["R_T"], value=False)
    send(panel.asked.chips["R_F"], value=False)
    assert "Nothing would be left" in panel.asked.note.text
    assert panel.asked.chips["R_F"].value


def test_where_nothing_fits_it_says_why_and_what_helps(make: Make) -> None:
    panel = make(header_tank(), upper=(2.28, 2.29), lower=(1.56, 1.565), series="E24")
    panel.search()
    assert panel.found is not None
    assert not panel.found.fits
    text = shown(panel)
    assert "nothing fits" in text
    assert panel.found.suggestions
    helped = len(panel.found)
    assert len(panel.candidates.buttons) == helped + len(panel.found.suggestions)
    assert panel.found.suggestions[0].text in text
    click(panel.candidates.buttons[helped])
    assert panel.design.parts == panel.found.suggestions[0].candidate.design.parts


@pytest.mark.parametrize(
    ("asked", "said"),
    [
        ({}, "No trips are wanted"),
        ({"upper": 2.0}, "incomplete"),
        ({"upper": 9.0, "lower": 1.0}, "width"),
    ],
)
def test_a_refused_search_stands_in_the_card_and_recovers(
    make: Make, asked: dict[str, Any], said: str
) -> None:
    panel = make(header_tank(), **asked)
    click(panel.asked.button)
    assert said in shown(panel)
    assert panel.candidates.buttons == []
    assert panel.error == ""
    panel.set(upper=2.3, lower=1.6, series="E12")
    panel.search()
    assert panel.candidates.buttons


@pytest.mark.parametrize(
    ("name", "text", "said"),
    [
        ("upper", "from 2", "both ends"),
        ("on_at", "2.3 V", ""),
        ("tol", "x", ""),
        ("input_resistance", "-1", ""),
    ],
)
def test_a_refusal_stands_at_its_field(make: Make, name: str, text: str, said: str) -> None:
    panel = make(header_tank())
    before = panel.request
    row = panel.asked.rows[name]
    type_in(row.field, text)
    assert row.note.text
    assert said in row.note.text
    assert panel.request == before
    assert panel.error == ""


def test_all_forms_may_be_searched(make: Make) -> None:
    panel = make(header_tank(), upper=2.7, lower=2.3, series="E12", all_forms=True)
    panel.search()
    assert panel.found is not None
    assert panel.found.searched > 30_000
    for number in range(len(panel.found)):
        panel.adopt(number)
        assert panel.error == ""
        assert panel.design.stage == panel.found[number].design.stage
        assert panel.design.stage.title in shown(panel)


def test_without_a_signal_only_volts_can_be_asked(make: Make) -> None:
    panel = make(header_tank().with_signal(None))
    assert panel.asked.rows["on_at"].field.disabled
    assert not panel.asked.rows["upper"].field.disabled


def test_own_circuits_are_sized_too(make: Make) -> None:
    design = own_circuit()
    trips = hk.trip_points(design)
    panel = make(design, upper=float(trips.upper), lower=float(trips.lower), series="E12")
    panel.set(free=("R_5", "R_6"))
    panel.search()
    assert panel.found is not None
    assert panel.found[0].error < 0.1
    assert panel.error == ""


def test_an_adopted_source_resistance_is_no_fixed_part(make: Make) -> None:
    sensor = hk.signals.SensorDivider(hk.signals.Ntc("10k", 3950), "10k", span=(-20, 60))
    panel = make(header_tank().with_signal(sensor), on_at=(27, 29), off_at=(21, 23))
    for windows in ({}, {"on_at": (17, 19), "off_at": (12, 14)}, {"all_forms": True}):
        panel.set(**windows)
        panel.search()
        assert panel.found is not None, shown(panel)
        request = panel.request
        fresh = hk.size(
            None if request.all_forms else hk.Stage("inverting"), supply=5.0, signal=sensor,
            on_at=request.on_at, off_at=request.off_at, count=LISTED,
            device=header_tank().device,
        )  # fmt: skip
        assert [c.design.parts for c in panel.found] == [c.design.parts for c in fresh]
        assert all(one.has_source for one in panel.found)
        assert "R_S" not in shown(panel)
        panel.adopt(0)
        # The stage keeps it, for it acts on the trips.
        assert panel.design.parts["R_S"] == fresh[0].design.parts["R_S"]
    panel.set(on_at=None, off_at=None, upper=2.8, lower=2.4, all_forms=False)
    panel.search()
    assert panel.found is not None
    assert panel.found[0].design.parts["R_S"] == panel.design.parts["R_S"]
    assert "R_S" not in shown(panel)


def test_a_source_resistance_of_ones_own_stays_a_part(make: Make) -> None:
    sensor = hk.signals.SensorDivider(hk.signals.Ntc("10k", 3950), "10k", span=(-20, 60))
    design = header_tank().with_signal(sensor).with_parts(R_S="47k")
    panel = make(design, on_at=(27, 29), off_at=(21, 23))
    panel.search()
    assert panel.found is not None
    assert panel.found[0].design.parts["R_S"] == hk.Part("47k")
    assert "R_S 47k" in shown(panel)


def test_an_unknown_value_changes_nothing(make: Make) -> None:
    panel = make(header_tank())
    with pytest.raises(UnknownNameError):
        panel.set(uper=2.0)
    with pytest.raises(IndexError):
        panel.adopt(0)


def test_the_snapshot_lists_the_candidates(make: Make) -> None:
    panel = make(header_tank(), **EASY)
    panel.search()
    assert panel.found is not None
    assert any(panel.found[0].values in remark for remark in panel.snapshot().remarks)


def test_closing_closes_every_widget() -> None:
    before = registered()
    panel = hk.panels.SizingPanel(header_tank(), **EASY)
    panel.search()
    panel.adopt(0)
    panel.close()
    assert registered() == before
