"""What a steady cycle says: which way a plant sticks, arrays, text, faults, and contact life."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import hystkit as hk
from hystkit.analyses.cycle import CycleStatus


def steady(plant: Any, trips: tuple[Any, Any], **times: Any) -> hk.Cycle:
    return hk.steady_cycle(plant, on_at=trips[0], off_at=trips[1], **times)


@pytest.mark.parametrize("sensor_tau", [None, 100])
@pytest.mark.parametrize(
    ("on_level", "off_level", "on_at", "off_at", "status"),
    [
        (40, 10, 20, 25, CycleStatus.CYCLES),
        (40, 10, 20, 40, CycleStatus.STAYS_ON),
        (40, 10, 10, 20, CycleStatus.STAYS_OFF),
        (40, 10, 5, 45, CycleStatus.STAYS),
        (40, 10, 25, 20, CycleStatus.WRONG_WAY),
        (20, 20, 19, 21, CycleStatus.STAYS),
        (-14, 25, 6, 4, CycleStatus.CYCLES),
        (-14, 25, 6, -14, CycleStatus.STAYS_ON),
        (-14, 25, 26, 4, CycleStatus.STAYS_OFF),
        (-14, 25, 4, 6, CycleStatus.WRONG_WAY),
        (40, 10, np.nan, 25, CycleStatus.NOT_FINITE),
    ],
)
def test_which_way_it_sticks(
    sensor_tau: Any, on_level: float, off_level: float, on_at: float, off_at: float, status: int
) -> None:
    levels = {"on_level": on_level, "off_level": off_level}
    plant = (
        hk.FirstOrder(600, **levels) if sensor_tau is None else hk.TwoLag(600, sensor_tau, **levels)
    )
    found = hk.steady_cycle(plant, on_at=on_at, off_at=off_at)
    assert found.status == status
    assert found.ok == (status == CycleStatus.CYCLES)
    assert np.isfinite(found.period) == found.ok
    assert found.message == CycleStatus(status).message
    assert found.message in str(found)


@pytest.mark.parametrize(
    ("rates", "status"),
    [
        ((1, -1), CycleStatus.CYCLES),
        ((0, -1), CycleStatus.STAYS_ON),
        ((-1, -2), CycleStatus.STAYS_ON),
        ((1, 0), CycleStatus.STAYS_OFF),
        ((2, 1), CycleStatus.STAYS_OFF),
        ((0, 0), CycleStatus.STAYS),
        ((-1, 1), CycleStatus.WRONG_WAY),
    ],
)
def test_which_way_a_tank_sticks(rates: tuple[float, float], status: int) -> None:
    assert steady(hk.Integrating(*rates), (1, 2)).status == status


def test_an_array_is_its_elements() -> None:
    rng = np.random.default_rng(11)
    tau, sensor = rng.uniform(500, 3000, (4, 1)), rng.uniform(1, 300, 3)
    off_at, hold = np.array([62.0, 75.0, 130.0]), rng.uniform(0, 800, (4, 1))
    found = steady(hk.TwoLag(tau, sensor, 110, 20, (30, 400)), (58, off_at), min_on=hold)
    assert found.period.shape == (4, 3)
    assert (found.status[:, 2] == CycleStatus.STAYS_ON).all()
    for i in range(4):
        for j in range(3):
            plant = hk.TwoLag(float(tau[i, 0]), float(sensor[j]), 110, 20, (30, 400))
            one = steady(plant, (58, float(off_at[j])), min_on=float(hold[i, 0]))
            assert one.status == found.status[i, j]
            for name in ("on_time", "off_time", "low", "high", "sensed_low", "sensed_high", "mean"):
                expected = getattr(found, name)[i, j]
                assert getattr(one, name) == pytest.approx(expected, rel=1e-12, nan_ok=True)


def test_text_is_read() -> None:
    plant = hk.TwoLag("1800 s", "120", "110 °C", 20, "30 s", unit="°C")
    found = steady(plant, ("58 °C", "62 °C"), min_on="10 s")
    assert found.on_time == pytest.approx(386.6, abs=0.05)
    assert "°C" in str(found)


def test_all_faults_come_together() -> None:
    with pytest.raises(hk.InputError) as caught:
        hk.steady_cycle("a kiln", on_at="hot", off_at=np.inf, min_on=-1)  # type: ignore[arg-type]
    assert len(caught.value.faults) == 4


def test_contact_life() -> None:
    """Operations over operations per year of 8760 h; common practice."""
    found = steady(hk.Integrating(1, -1), (0.0, 900.0))
    assert found.starts_per_hour == pytest.approx(2.0)
    assert found.contact_life("100k") == pytest.approx(1e5 / (8760 * 2))
    assert found.contact_life([1e5, 1e6]) == pytest.approx([1e5 / 17520, 1e6 / 17520])
    with pytest.raises(hk.InputError):
        found.contact_life(0)
