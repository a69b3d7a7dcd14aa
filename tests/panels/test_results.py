"""Table, steps of a slider and room for pictures."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

import hystkit as hk
from hystkit.base import quantity
from hystkit.circuit.demo import header_tank
from hystkit.circuit.preferred import nearest
from hystkit.panels import table
from hystkit.panels.parts import SERIES, Steps
from hystkit.panels.texts import amount, ohms, percent
from tests.circuit.custom import uncertain_chain
from tests.panels.front import send


@given(st.floats(1e-3, 1e9, allow_nan=False))
def test_a_resistance_reads_back_exactly(value: float) -> None:
    assert quantity.read(ohms(value), unit="Ω") == value


@given(st.floats(-1e3, 1e3, allow_nan=False).filter(lambda v: v == 0 or abs(v) > 1e-12))
def test_a_voltage_reads_back_exactly(value: float) -> None:
    assert quantity.read(amount(value, "V"), unit="V") == value


@given(st.floats(1e-6, 0.99))
def test_a_tolerance_reads_back_exactly(value: float) -> None:
    assert quantity.parse_percent(percent(value)) == value


@given(st.sampled_from(SERIES), st.floats(1e-2, 1e9))
def test_a_slider_stands_at_the_nearest_step(name: str, value: float) -> None:
    steps = Steps(name, value)
    assert list(steps.values) == sorted(set(steps.values))
    assert steps.values[steps.place(value)] == nearest(value, name)
    assert steps.reach(value)
    assert steps.place(value * 1e3) == len(steps.values) - 1
    assert steps.place(value / 1e3) == 0


def test_steps_hold_for_values_that_nobody_makes() -> None:
    for value in (5e-324, 1e300):
        steps = Steps("E96", value)
        assert steps.place(value) in (0, len(steps.values) - 1)


def test_the_table_has_the_columns_that_apply() -> None:
    tank = header_tank()
    full = table.trip_rows(hk.levels(tank), hk.trip_points(tank))
    assert full[0] == ("", "nominal", "over tolerances", "level / m")
    assert [row[0] for row in full[1:]] == ["upper", "lower", "width", "middle"]
    upper = hk.levels(tank).upper_interval
    assert upper is not None
    assert full[1][2].split(" to ") == [quantity.show(end, "V") for end in upper]
    assert float(full[1][3]) == pytest.approx(float(hk.trip_points(tank).measurand.high), rel=1e-3)
    assert float(full[3][3]) == pytest.approx(float(hk.trip_points(tank).measurand.width), rel=1e-3)
    bare = tank.with_signal(None).with_parts(**{n: hk.Part(p.value) for n, p in tank.parts.items()})
    plain = table.trip_rows(hk.levels(bare), hk.trip_points(bare))
    assert plain[0] == ("", "nominal")
    assert all(len(row) == 2 for row in plain)


def test_the_table_tells_that_tolerances_are_not_evaluated() -> None:
    design = uncertain_chain(17)
    rows = table.trip_rows(hk.levels(design), hk.trip_points(design))
    assert rows[0] == ("", "nominal", "over tolerances")
    assert all("more than 16 uncertain resistances" in row[2] for row in rows[1:3])
    assert [row[2] for row in rows[3:]] == ["", ""]


def test_pictures_follow_the_room_of_the_page(panel: hk.panels.TripPanel) -> None:
    _, room, _ = panel.children
    before = panel.design
    for width in (1200, 720, 560):
        send(room, value=str(width))
        assert panel.ruler.picture.width_px == max(width - 26, 640)
        for view in (panel.ruler, panel.loop, panel.schematic):
            assert view.image.layout.width == f"{view.picture.width_px}px"
        side_by_side = panel.loop.picture.width_px + panel.schematic.picture.width_px + 62
        assert (side_by_side <= max(width, 762)) == (width > 700)
    still = panel.ruler.image.value
    for nonsense in ("", "x", "-5", "1e9", "\uff19\uff10\uff10"):
        send(room, value=nonsense)
    assert panel.ruler.image.value is still
    assert panel.design is before
    assert panel.error == ""
